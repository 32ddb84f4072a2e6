"""The shelf: finds library files by name, reads them, lists them."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeVar

from layoutgen.errors import InputError, InputErrors
from layoutgen.library.entries import ChipCase, Copper, Etching, Laminate, Shop, Thickness
from layoutgen.library.keys import Table, did_you_mean
from layoutgen.library.layouts import CHIP_CASE, LAMINATE, SHOP
from layoutgen.library.source import Change, Source

__all__ = ["Library", "default_library", "read_chip_case", "read_laminate", "read_shop"]

_PARTS, _SHOPS = "parts", "shops"

Entry = TypeVar("Entry", Laminate, ChipCase, Shop)


@dataclass(frozen=True, slots=True)
class Library:
    """Library folders, the first one that holds a name winning.

    A folder holds laminates, and chip cases and shops in its folders ``parts`` and ``shops``. The
    entry called ``name`` is the file ``name.toml``. Files are read when they are asked for.

    Attributes
    ----------
    directories : tuple of Path
        In the order of search.
    """

    directories: tuple[Path, ...]

    def laminate(self, name: str, changes: Sequence[Change] = ()) -> Laminate:
        """Laminate of a name; InputError lists the known names if there is none."""
        return read_laminate(self._find(name, "laminate", ""), changes)

    def chip_case(self, name: str, changes: Sequence[Change] = ()) -> ChipCase:
        """Chip case of a name; InputError lists the known names if there is none."""
        return read_chip_case(self._find(name, "chip case", _PARTS), changes)

    def shop(self, name: str, changes: Sequence[Change] = ()) -> Shop:
        """Shop of a name; InputError lists the known names if there is none."""
        return read_shop(self._find(name, "shop", _SHOPS), changes)

    def laminates(self) -> tuple[Laminate, ...]:
        """Every laminate, by name; InputErrors holds the faults of all files."""
        return _read_all(read_laminate, self._files(""))

    def chip_cases(self) -> tuple[ChipCase, ...]:
        """Every chip case, by name; InputErrors holds the faults of all files."""
        return _read_all(read_chip_case, self._files(_PARTS))

    def shops(self) -> tuple[Shop, ...]:
        """Every shop, by name; InputErrors holds the faults of all files."""
        return _read_all(read_shop, self._files(_SHOPS))

    def _files(self, folder: str) -> dict[str, Path]:
        """File of each name, sorted by name."""
        found: dict[str, Path] = {}
        for directory in self.directories:
            for path in sorted((directory / folder).glob("*.toml")):
                found.setdefault(path.stem, path)
        return dict(sorted(found.items()))

    def _find(self, name: str, what: str, folder: str) -> Path:
        files = self._files(folder)
        if name not in files:
            remedy = f"is no known {what}{did_you_mean(name, files)}; known: {', '.join(files) or 'none'}"
            raise InputError("library", what, name, remedy)
        return files[name]


def default_library(extra: Path | None = None) -> Library:
    """The shipped library, after the user's own folder if there is one.

    Parameters
    ----------
    extra : Path, optional
        Folder that is searched first.

    Raises
    ------
    InputError
        If `extra` is not a folder.
    """
    if extra is not None and not Path(extra).is_dir():
        raise InputError("--substrates", "folder", str(extra), "does not exist or is not a folder")
    return Library(((Path(extra),) if extra is not None else ()) + (_shipped(),))


def read_laminate(path: Path, changes: Sequence[Change] = ()) -> Laminate:
    """Laminate of a file, with values changed for this run; InputErrors holds every fault."""
    source, values = _read(path, LAMINATE, changes)
    rows = values["thickness"]
    for number, row in enumerate(rows, start=1):
        if {"nominal", "tolerance"} <= row.keys() and not row["tolerance"] < row["nominal"]:
            at = f"thickness.{number}"
            source.fault(f"{at}.tolerance", "must be smaller than the thickness", blame=(f"{at}.nominal",))
    _require_distinct(source, rows, "thickness", "nominal")
    _require_distinct(source, values["copper"], "copper", "base")
    source.raise_faults()
    coppers = [
        Copper(name=f"{foil['base'] * 1e6:.4g} um", **foil) for foil in _rising(values.pop("copper"), "base")
    ]
    thicknesses = [Thickness(**row) for row in _rising(values.pop("thickness"), "nominal")]
    return Laminate(**values, thicknesses=tuple(thicknesses), coppers=tuple(coppers), path=path)


def read_chip_case(path: Path, changes: Sequence[Change] = ()) -> ChipCase:
    """Chip case of a file, with values changed for this run; InputErrors holds every fault."""
    source, values = _read(path, CHIP_CASE, changes)
    if values.get("current_height", 0.0) is None and "body_height" in values:
        values["current_height"] = values["body_height"] / 2
    below = (
        ("current_height", "body_height", 1.0, "must not be above the top of the body"),
        ("land_gap", "body_length", 1.0, "must be shorter than the body, which stands on both lands"),
        ("terminal_length", "body_length", 0.5, "must be at most half the body"),
    )
    for key, limit, factor, remedy in below:
        if key in values and limit in values and not values[key] <= values[limit] * factor:
            source.fault(key, remedy, blame=(limit,))
    source.raise_faults()
    return ChipCase(**values, path=path)


def read_shop(path: Path, changes: Sequence[Change] = ()) -> Shop:
    """Shop of a file, with values changed for this run; InputErrors holds every fault."""
    source, values = _read(path, SHOP, changes)
    _require_distinct(source, values["etching"], "etching", "copper")
    source.raise_faults()
    etching = tuple(Etching(**row) for row in _rising(values.pop("etching"), "copper"))
    return Shop(**values, etching=etching, path=path)


def _read(path: Path, layout: Table, changes: Sequence[Change]) -> tuple[Source, dict[str, Any]]:
    source = Source(path, layout, changes)
    values = source.read()
    if values.get("name", path.stem) != path.stem:
        source.fault("name", f'must be the name of the file, "{path.stem}"')
    return source, values


def _require_distinct(source: Source, rows: Sequence[dict[str, Any]], table: str, key: str) -> None:
    seen: set[float] = set()
    for number, row in enumerate(rows, start=1):
        value = row.get(key)
        if value in seen:
            source.fault(f"{table}.{number}.{key}", "is listed twice")
        elif value is not None:
            seen.add(value)


def _rising(rows: Iterable[dict[str, Any]], key: str) -> list[dict[str, Any]]:
    return sorted(rows, key=lambda row: float(row[key]))


def _read_all(read: Callable[[Path], Entry], files: dict[str, Path]) -> tuple[Entry, ...]:
    entries: list[Entry] = []
    faults: list[InputError] = []
    for path in files.values():
        try:
            entries.append(read(path))
        except InputError as error:
            faults.append(error)
        except InputErrors as errors:
            faults.extend(errors.faults)
    if faults:
        raise InputErrors(faults)
    return tuple(entries)


def _shipped() -> Path:
    """Folder of the shipped library: inside an installed package, beside it in a clone."""
    package = Path(__file__).resolve().parents[1]
    installed = package / "substrates"
    return installed if installed.is_dir() else package.parent / "substrates"
