"""From a specification file to a `Spec`: every fault of file, library and overrides at once."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any, TypeVar

from layoutgen.errors import InputError, InputErrors
from layoutgen.library import SET, Change, Laminate, Library, Source, default_library, read_laminate
from layoutgen.spec import checks
from layoutgen.spec.keys import SPEC
from layoutgen.spec.overrides import sort_overrides
from layoutgen.spec.requirement import (
    Board,
    Construction,
    Load,
    Margin,
    Part,
    Passband,
    Short,
    Spec,
    Stopband,
)

__all__ = ["load_spec"]

Entry = TypeVar("Entry")


def load_spec(
    path: str | os.PathLike[str], *, overrides: Sequence[str] = (), substrates: Path | None = None
) -> Spec:
    """Specification from a TOML file.

    Parameters
    ----------
    path : path
        The file.
    overrides : sequence of str
        ``"KEY=VALUE"``: values for this run, of the specification (``passband.lower=1.7 GHz``) or of
        the library files it uses (``substrate.eps_r=3.48``, ``case.land_gap``, ``shop.min_drill``).
        A value is TOML if it reads as such, else plain text.
    substrates : Path, optional
        Library folder of the user, searched first.

    Returns
    -------
    Spec
        In SI units.

    Raises
    ------
    InputError
        If the file cannot be read as TOML, or `substrates` is not a folder.
    InputErrors
        If anything in it cannot be used; holds every fault.
    """
    path = Path(path)
    library = default_library(substrates)
    changes, strays = sort_overrides(overrides)
    source = Source(path, SPEC, changes[""])
    source.faults.extend(strays)
    values = source.read()
    _look_up(source, values, library, changes, path.parent)
    band, construction, board = values["passband"], values["construction"], values["board"]
    checks.check_part(source, values["part"], path)
    checks.check_passband(source, band, stopbands=source.count("stopband"))
    checks.check_stopbands(source, values["stopband"], band)
    checks.check_margin(source, values["margin"], band)
    checks.check_construction(source, construction)
    checks.check_load(source, values["load"])
    checks.check_short(source, values["short"])
    checks.check_board(source, board, construction)
    source.raise_faults()
    return Spec(
        path=path,
        part=Part(**values["part"]),
        passband=Passband(**band),
        stopbands=tuple(Stopband(**stop) for stop in values["stopband"]),
        margin=Margin(**values["margin"]),
        construction=Construction(**construction),
        load=Load(**values["load"]),
        short=Short(**values["short"]),
        board=Board(**board),
        overrides=tuple(overrides),
        library=library,
        defaults=_in_order(source.defaults),
        written=source.texts(),
        changes=dict(source.changed),
    )


def _in_order(defaults: Sequence[str]) -> tuple[str, ...]:
    order = {name: position for position, (name, _) in enumerate(SPEC.dotted())}
    return tuple(sorted(defaults, key=lambda line: order[line.split(" = ")[0]]))


def _look_up(
    source: Source, values: dict[str, Any], library: Library, changes: dict[str, list[Change]], folder: Path
) -> None:
    """Put laminate, chip case and shop in the place of their names; note the faults of their files."""
    construction, load, board = values["construction"], values["load"], values["board"]

    def laminate(name: str) -> Laminate:
        return _laminate(name, library, changes["substrate"], folder)

    if "substrate" in construction:
        name = construction.pop("substrate")
        _fetch(source, "construction.substrate", name, laminate, construction, "laminate")
    if load.get("case") is not None:
        name = load.pop("case")
        _fetch(source, "load.case", name, lambda case: library.chip_case(case, changes["case"]), load, "case")
    elif "case" in load:
        for change in changes["case"]:
            remedy = "no chip case is named; name one, for example --set load.case=0402"
            source.faults.append(InputError(SET, change.given, change.text, remedy))
    if "shop" in board:
        _fetch(
            source,
            "board.shop",
            board.pop("shop"),
            lambda shop: library.shop(shop, changes["shop"]),
            board,
            "shop",
        )


def _fetch(
    source: Source, key: str, name: str, read: Callable[[str], object], values: dict[str, Any], target: str
) -> None:
    """Entry of a name as ``values[target]``; an unknown name is a fault of the specification's key."""
    try:
        values[target] = read(name)
    except InputErrors as errors:
        source.faults.extend(errors.faults)
    except InputError as error:
        at = f"{error.where} " if error.got is None else ""
        source.fault(key, at + error.remedy)


def _laminate(name: str, library: Library, changes: Sequence[Change], folder: Path) -> Laminate:
    """Laminate of a name, or of a file beside the specification or in the working directory."""
    if not name.endswith(".toml"):
        return library.laminate(name, changes)
    beside = folder / name
    return read_laminate(beside if beside.exists() else Path(name), changes)
