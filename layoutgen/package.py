"""Which files make a package, and how it comes into place: whole or not at all."""

from __future__ import annotations

import json
import os
import shutil
import tempfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from layoutgen import __version__
from layoutgen.design import Design
from layoutgen.errors import InputError
from layoutgen.exports import dxf, gds, layer_table, read_back, record, touchstone
from layoutgen.report import layout, response, summary
from layoutgen.report.sweep import Sweep, sweep

__all__ = ["FILES", "Package", "PackageFile", "check_target", "default_target", "deliver"]

FILES = {
    ".gds": "artwork, GDSII in steps of 1 nm",
    "-layers.csv": "table of layers of the GDS and DXF files",
    ".dxf": "artwork, DXF R2010, 1 : 1 in millimetres",
    ".s2p": "predicted S-parameters with loss, Touchstone",
    "-lossless.s2p": "the same circuit without loss, Touchstone",
    ".json": "design record: every dimension, figure and choice",
    "-layout.svg": "picture of the layout, to scale",
    "-response.svg": "picture of the response and the requirements",
    "-summary.txt": "this design in words",
    "-spec.toml": "copy of the specification",
}
"""End of the name of each file, after the part number, and what it is for."""


@dataclass(frozen=True, kw_only=True, slots=True)
class PackageFile:
    """One file of a package: its name and what it is for."""

    name: str
    purpose: str


@dataclass(frozen=True, kw_only=True, slots=True)
class Package:
    """A package in its place.

    Attributes
    ----------
    directory : Path
        Where it lies.
    files : tuple of PackageFile
        What is in it.
    """

    directory: Path
    files: tuple[PackageFile, ...]


def default_target(number: str) -> Path:
    """Where the package of a part goes by default."""
    return Path("outputs") / number


def check_target(target: Path) -> Path:
    """Resolved path of a package folder that may be made or replaced.

    Parameters
    ----------
    target : Path
        The package folder itself.

    Raises
    ------
    InputError
        If it is a file, a link, the current folder, a folder of anything but a package made here, or
        holds files that do not belong to its package; or if nothing can be written beside it.
    """

    def refuse(remedy: str) -> InputError:
        return InputError(str(target), "", None, remedy)

    try:
        if target.is_symlink():
            raise refuse("is a link; name the folder it points to, or another one")
        place = Path(os.path.realpath(target))
        if place == Path.cwd() or place in Path.cwd().parents:
            raise refuse("is the folder you are in, or contains it; name a folder of its own for the package")
        if place.exists():
            if not place.is_dir():
                raise refuse("is a file; name a folder for the package")
            _require_ours(place, refuse)
        _require_writable(place.parent, refuse)
    except OSError as error:
        raise refuse(f"cannot be used: {error.strerror or error}") from error
    return place


def _require_ours(place: Path, refuse: Callable[[str], InputError]) -> None:
    present = {entry.name for entry in place.iterdir()}
    if not present:
        return
    known = _recorded_files(place)
    if known is None:
        raise refuse(
            "is a folder that holds something other than a package made by layoutgen; it is left alone: "
            "name another folder, or an empty one"
        )
    strays = sorted(present - known)
    if strays:
        named = ", ".join(strays[:3]) + (" and more" if len(strays) > 3 else "")
        raise refuse(f"holds files that are not part of its package ({named}); move them away first")


def _recorded_files(place: Path) -> set[str] | None:
    """Names listed by the design record in a folder; None when there is no record."""
    for path in sorted(place.glob("*.json")):
        try:
            data = json.loads(path.read_bytes())
        except (OSError, ValueError, RecursionError):
            continue
        if record.is_record(data):
            files = data.get("files")
            rows = files if isinstance(files, list) else []
            return {path.name, *(str(row["name"]) for row in rows if isinstance(row, dict) and "name" in row)}
    return None


def _require_writable(parent: Path, refuse: Callable[[str], InputError]) -> None:
    while not parent.exists():
        parent = parent.parent
    if not parent.is_dir():
        raise refuse(f"cannot be made, {parent} is a file; name another folder")
    if not os.access(parent, os.W_OK | os.X_OK):
        raise refuse(f"cannot be made, {parent} is not writable; name another folder")


def deliver(design: Design, target: Path | None = None) -> Package:
    """Write, read back and put in place the package of a design.

    Everything is made in a temporary folder beside the target. An older package stays whole until the new
    one is complete, and is put back if the exchange fails.

    Parameters
    ----------
    design : Design
    target : Path, optional
        The package folder itself; ``outputs/<number>`` by default.

    Returns
    -------
    Package

    Raises
    ------
    InputError
        If the target cannot be used or written.
    ReadBackError
        If a file does not read back as what was meant; nothing is delivered.
    """
    number = design.spec.part.number
    wanted = target if target is not None else default_target(number)
    place = check_target(wanted)
    files = {number + ending: purpose for ending, purpose in FILES.items()}
    specification = _bytes_of(design.spec.path)
    try:
        with _workshop(place.parent) as workshop:
            fresh = workshop / "new"
            fresh.mkdir()
            _write_all(design, fresh, files, specification)
            _exchange(fresh, place, workshop / "old")
    except OSError as error:
        raise InputError(
            str(wanted),
            "",
            None,
            f"cannot be written: {error.strerror or error}; free the space or "
            "the folder, or name another one",
        ) from error
    return Package(directory=wanted, files=tuple(PackageFile(name=n, purpose=p) for n, p in files.items()))


@contextmanager
def _workshop(parent: Path) -> Iterator[Path]:
    """A temporary folder on the target's own file system; parents made for it go again if the work fails."""
    made = [folder for folder in (parent, *parent.parents) if not folder.exists()]
    workshop: Path | None = None
    try:
        parent.mkdir(parents=True, exist_ok=True)
        workshop = Path(tempfile.mkdtemp(prefix=".layoutgen-", dir=parent))
        yield workshop
    finally:
        if workshop is not None:
            shutil.rmtree(workshop, ignore_errors=True)
        for folder in made:
            try:
                folder.rmdir()  # succeeds only while it is empty, which means that nothing was delivered
            except OSError:
                break


def _exchange(fresh: Path, place: Path, aside: Path) -> None:
    """Put a folder in the place of another; the other is back if anything goes wrong."""
    try:
        if place.exists():
            os.rename(place, aside)
        os.rename(fresh, place)
    except BaseException:
        if aside.exists() and not place.exists():
            os.rename(aside, place)
        raise


def _bytes_of(specification: Path) -> bytes:
    try:
        return specification.read_bytes()
    except OSError as error:
        raise InputError(
            str(specification), "", None, f"cannot be read: {error.strerror or error}"
        ) from error


def _write_all(design: Design, folder: Path, files: dict[str, str], specification: bytes) -> None:
    """Every file of the package, and each of them read back."""
    responses = sweep(design)
    for name, make in zip(files, _makers(design, responses, files, specification), strict=True):
        make(folder / name)


def _makers(
    design: Design, responses: Sweep, files: dict[str, str], specification: bytes
) -> tuple[Callable[[Path], None], ...]:
    """What writes and checks each file, in the order of `FILES`."""
    artwork = design.artwork

    def gds_file(path: Path) -> None:
        gds.write(artwork, path)
        read_back.gds(artwork, path)

    def layers_file(path: Path) -> None:
        layer_table.write(artwork, path)
        read_back.csv_table(artwork, path)

    def dxf_file(path: Path) -> None:
        dxf.write(artwork, path)
        read_back.dxf(artwork, path)

    def response_file(path: Path) -> None:
        _touchstone(design, responses, path, lossless=False)

    def lossless_file(path: Path) -> None:
        _touchstone(design, responses, path, lossless=True)

    def record_file(path: Path) -> None:
        record.write(design, path, files)
        read_back.json_record(record.record(design, files), path)

    def layout_picture(path: Path) -> None:
        layout.write(design, path)
        read_back.svg(path)

    def response_picture(path: Path) -> None:
        response.write(design, responses, path)
        read_back.svg(path)

    def summary_file(path: Path) -> None:
        summary.write(design, path, files)
        read_back.text(summary.summary_text(design, files), path)

    def spec_copy(path: Path) -> None:
        _copy(specification, path)
        read_back.specification(specification, path)

    return (
        gds_file,
        layers_file,
        dxf_file,
        response_file,
        lossless_file,
        record_file,
        layout_picture,
        response_picture,
        summary_file,
        spec_copy,
    )


def _copy(content: bytes, path: Path) -> None:
    path.write_bytes(content)


def _touchstone(design: Design, responses: Sweep, path: Path, *, lossless: bool) -> None:
    values = responses.lossless if lossless else responses.predicted
    impedance = design.spec.passband.impedance
    touchstone.write(responses.frequency, values, path, impedance=impedance, comments=_head(design, lossless))
    read_back.touchstone(responses.frequency, values, path, impedance=impedance)


def _head(design: Design, lossless: bool) -> tuple[str, ...]:
    part, impedance = design.spec.part, design.spec.passband.impedance
    changed = ("Made with values changed for this run (--set): see the summary or the design record",)
    return (
        f"{part.number} revision {part.revision}: comb-line band-pass filter, predicted S-parameters",
        "WITHOUT loss: for comparison, not what will be measured"
        if lossless
        else "With loss of conductor, dielectric, capacitors and vias",
        f"Port 1: left board edge, {impedance:g} ohm; port 2: right board edge, {impedance:g} ohm",
        "Reference planes at the board edges; connectors are not included",
        *(changed if design.spec.overrides else ()),
        f"layoutgen {__version__}",
    )
