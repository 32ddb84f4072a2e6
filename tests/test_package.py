"""A package is whole or absent, whatever goes wrong while it is made."""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest
from built import NUMBER, contents, small_design

from layoutgen import package
from layoutgen.errors import InputError, ReadBackError
from layoutgen.exports import dxf, gds, layer_table, read_back, record, touchstone
from layoutgen.report import layout, response, summary

WRITERS: dict[str, tuple[ModuleType, str]] = {
    ".gds": (gds, "write"),
    "-layers.csv": (layer_table, "write"),
    ".dxf": (dxf, "write"),
    ".s2p": (touchstone, "write"),
    "-lossless.s2p": (touchstone, "write"),
    ".json": (record, "write"),
    "-layout.svg": (layout, "write"),
    "-response.svg": (response, "write"),
    "-summary.txt": (summary, "write"),
    "-spec.toml": (package, "_copy"),
}
"""What writes each file of a package."""


@pytest.fixture(scope="module")
def delivered(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A package, and beside it nothing else."""
    target = tmp_path_factory.mktemp("shelf") / "filter"
    package.deliver(small_design(), target)
    return target


def spoil(monkeypatch: pytest.MonkeyPatch, ending: str, act: Callable[[Path], None]) -> None:
    """Let something happen to one file of the package right after it is written."""
    module, name = WRITERS[ending]
    write = getattr(module, name)

    def spoiled(*args: Any, **options: Any) -> None:
        write(*args, **options)
        path = next(arg for arg in args if isinstance(arg, Path))
        if path.name == NUMBER + ending:
            act(path)

    monkeypatch.setattr(module, name, spoiled)


def test_every_file_has_a_writer_here():
    assert WRITERS.keys() == package.FILES.keys()


def test_a_package_holds_what_it_lists(delivered):
    assert {path.name for path in delivered.iterdir()} == {NUMBER + ending for ending in package.FILES}
    assert all(path.stat().st_size > 100 for path in delivered.iterdir())
    assert [path.name for path in delivered.parent.iterdir()] == [delivered.name]


def test_the_same_design_gives_the_same_bytes(delivered, tmp_path):
    package.deliver(small_design(), tmp_path / "elsewhere" / "again")

    assert contents(tmp_path / "elsewhere" / "again") == contents(delivered)


def test_no_file_names_a_place_of_the_machine(delivered):
    places = (
        str(delivered).encode(),
        str(small_design().spec.path.parent).encode(),
        str(Path.home()).encode() + b"/",
    )

    assert not [
        (name, place) for name, text in contents(delivered).items() for place in places if place in text
    ]


@pytest.mark.parametrize(
    "fault", [OSError(28, "No space left on device"), KeyboardInterrupt()], ids=["full", "break"]
)
@pytest.mark.parametrize("ending", WRITERS)
def test_a_fault_at_any_file_leaves_the_old_package_whole(delivered, monkeypatch, ending, fault):
    before = contents(delivered.parent)

    def fail(path: Path) -> None:
        path.write_bytes(path.read_bytes()[:50])
        raise fault

    spoil(monkeypatch, ending, fail)
    expected = InputError if isinstance(fault, OSError) else KeyboardInterrupt
    with pytest.raises(expected) as caught:
        package.deliver(small_design(), delivered)

    assert expected is KeyboardInterrupt or "No space left on device" in str(caught.value)
    assert contents(delivered.parent) == before


@pytest.mark.parametrize("ending", WRITERS)
def test_a_fault_without_an_old_package_leaves_nothing(tmp_path, monkeypatch, ending):
    def fail(path: Path) -> None:
        raise OSError(28, "No space left on device")

    spoil(monkeypatch, ending, fail)
    with pytest.raises(InputError, match="No space left"):
        package.deliver(small_design(), tmp_path / "new" / "folders" / "filter")

    assert contents(tmp_path) == {}


@pytest.mark.parametrize("number", [1, 2])
@pytest.mark.parametrize(
    "fault", [OSError(1, "Operation not permitted"), KeyboardInterrupt()], ids=["refused", "break"]
)
def test_a_fault_while_packages_are_exchanged_puts_the_old_one_back(delivered, monkeypatch, number, fault):
    before, rename, calls = contents(delivered.parent), os.rename, []

    def failing(source: Path, target: Path) -> None:
        calls.append(source)
        if len(calls) == number:
            raise fault
        rename(source, target)

    monkeypatch.setattr(os, "rename", failing)
    with pytest.raises((InputError, KeyboardInterrupt)):
        package.deliver(small_design(), delivered)

    assert contents(delivered.parent) == before


def test_a_new_package_replaces_an_old_one_whole(delivered, tmp_path):
    target = tmp_path / "filter"
    package.deliver(small_design(), target)
    renamed = replace(small_design().spec, part=replace(small_design().spec.part, number="LK-4"))
    package.deliver(replace(small_design(), spec=renamed), target)

    assert {path.name for path in target.iterdir()} == {"LK-4" + ending for ending in package.FILES}
    assert [path.name for path in tmp_path.iterdir()] == ["filter"]


def without_one(kind: str) -> Any:
    """The artwork without the last object of a kind."""
    artwork = small_design().artwork
    last = artwork.of_kind(kind)[-1]
    return replace(artwork, items=tuple(item for item in artwork.items if item is not last))


def shifted(kind: str, step: float) -> Any:
    """The artwork with every object of a kind moved by a little."""
    from layoutgen.geometry import Polygon

    def move(item: Any) -> Any:
        if item.kind != kind:
            return item
        ring = tuple((x + step, y) for x, y in item.shape.exterior)
        return replace(item, shape=Polygon(ring, item.shape.holes))

    artwork = small_design().artwork
    return replace(artwork, items=tuple(move(item) for item in artwork.items))


def text_swap(old: bytes, new: bytes) -> Callable[[Path], None]:
    def act(path: Path) -> None:
        content = path.read_bytes()
        assert old in content
        path.write_bytes(content.replace(old, new, 1))

    return act


def cut(path: Path) -> None:
    path.write_bytes(path.read_bytes()[:-40])


GDS_WRITE, DXF_WRITE = gds.write, dxf.write
SPOILT: list[tuple[str, str, Callable[[Path], None]]] = [
    (".gds", "a via is missing", lambda path: GDS_WRITE(without_one("short_via"), path)),
    (".gds", "resonators are 2 um off", lambda path: GDS_WRITE(shifted("resonator", 0.002), path)),
    (".gds", "it is cut short", cut),
    (".gds", "it is empty", lambda path: path.write_bytes(b"")),
    (".dxf", "a pad is missing", lambda path: DXF_WRITE(without_one("ground_pad"), path)),
    (".dxf", "resonators are 1 um off", lambda path: DXF_WRITE(shifted("resonator", 0.001), path)),
    (".dxf", "it is in inches", text_swap(b"$INSUNITS\n 70\n4\n", b"$INSUNITS\n 70\n1\n")),
    (".dxf", "it is cut short", lambda path: path.write_bytes(path.read_bytes()[:9000])),
    ("-layers.csv", "a layer has another number", text_swap(b"TOP_COPPER,1,", b"TOP_COPPER,7,")),
    (".s2p", "a digit differs", text_swap(b"e-01 ", b"e-02 ")),
    ("-lossless.s2p", "it is cut short", cut),
    (".json", "it is cut short", cut),
    (".json", "a figure differs", text_swap(b'"order": 3', b'"order": 4')),
    ("-layout.svg", "it is cut short", cut),
    ("-response.svg", "it is cut short", cut),
    ("-summary.txt", "it is cut short", cut),
    ("-spec.toml", "it is cut short", cut),
]


@pytest.mark.parametrize(
    ("ending", "act"), [(e, a) for e, _, a in SPOILT], ids=[f"{e} {w}" for e, w, _ in SPOILT]
)
def test_a_file_that_does_not_read_back_is_not_delivered(delivered, monkeypatch, ending, act):
    before = contents(delivered.parent)
    spoil(monkeypatch, ending, act)

    with pytest.raises(ReadBackError, match=f"{NUMBER}{ending}.*nothing was delivered"):
        package.deliver(small_design(), delivered)

    assert contents(delivered.parent) == before


def test_the_seams_of_holes_do_not_hide_a_filled_hole(tmp_path):
    """The ground fill has holes; a file in which one is filled must not pass."""
    from layoutgen.geometry import Polygon

    artwork = small_design().artwork
    fill = next(item for item in artwork.of_kind("ground_fill") if item.shape.holes)
    solid = replace(fill, shape=Polygon(fill.shape.exterior, fill.shape.holes[1:]))
    gds.write(
        replace(artwork, items=tuple(solid if item is fill else item for item in artwork.items)),
        tmp_path / "a.gds",
    )

    with pytest.raises(ReadBackError, match="TOP_COPPER"):
        read_back.gds(artwork, tmp_path / "a.gds")


def refused(target: Path) -> str:
    with pytest.raises(InputError) as caught:
        package.check_target(target)
    assert caught.value.where == str(target)
    return caught.value.remedy


def test_a_folder_of_something_else_is_refused(tmp_path):
    (tmp_path / "photos").mkdir()
    (tmp_path / "photos" / "boat.json").write_text('{"format": "something else"}')

    assert "something other than a package" in refused(tmp_path / "photos")


@pytest.mark.parametrize("text", ["", "[", "[1]", '"layoutgen design record"', "[" * 100_000])
def test_json_that_is_no_record_does_not_make_a_package(tmp_path, text):
    (tmp_path / "old").mkdir()
    (tmp_path / "old" / "x.json").write_text(text)

    assert "something other than a package" in refused(tmp_path / "old")


def test_files_of_the_user_in_a_package_are_not_thrown_away(delivered):
    note = delivered / "bench-notes.txt"
    note.write_text("measured on the second of the month")
    try:
        assert "bench-notes.txt" in refused(delivered)
        with pytest.raises(InputError, match=r"bench-notes\.txt"):
            package.deliver(small_design(), delivered)
        assert note.exists()
    finally:
        note.unlink()


def test_files_links_and_the_current_folder_are_refused(tmp_path, monkeypatch):
    (tmp_path / "file").write_text("")
    (tmp_path / "folder").mkdir()
    (tmp_path / "link").symlink_to(tmp_path / "folder")
    (tmp_path / "loop").symlink_to(tmp_path / "loop")
    monkeypatch.chdir(tmp_path / "folder")

    assert "is a file" in refused(tmp_path / "file")
    assert "is a link" in refused(tmp_path / "link")
    assert "is a link" in refused(tmp_path / "loop")
    assert "is a file" in refused(tmp_path / "file" / "filter")
    assert "the folder you are in" in refused(Path("."))
    assert "the folder you are in" in refused(tmp_path)
    assert "name too long" in refused(tmp_path / ("x" * 300)).lower()


def test_an_empty_folder_is_taken(tmp_path):
    (tmp_path / "filter").mkdir()

    package.deliver(small_design(), tmp_path / "filter")

    assert len(list((tmp_path / "filter").iterdir())) == len(package.FILES)


def test_responses_cover_the_band_with_its_edges_and_the_stop_bands(delivered):
    band = small_design().spec.passband
    for ending in (".s2p", "-lossless.s2p"):
        lines = (delivered / (NUMBER + ending)).read_text().splitlines()
        f = [float(line.split()[0]) for line in lines if line[0] not in "!#"]
        inside = [x for x in f if band.lower <= x <= band.upper]

        assert (inside[0], inside[-1]) == (1.90e9, 2.02e9)
        assert len(inside) >= 201
        assert f[0] <= 0.5 * band.centre + 1  # whole hertz
        assert f[-1] >= 2.5 * band.centre - 1
