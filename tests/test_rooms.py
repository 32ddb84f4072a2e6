"""A room imports only what its row in DEVELOPERS.md names, and no room is without a row."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1] / "layoutgen"
FLOOR_1 = {"errors", "constants", "units"}
TO_COMB = FLOOR_1 | {"library", "spec", "comb"}
TO_DESIGN = TO_COMB | {"lines", "synthesis", "circuit", "geometry", "sizing", "rules", "design"}
MAY_IMPORT = {
    "errors": set(),
    "constants": {"errors"},
    "units": {"errors", "constants"},
    "lines": FLOOR_1,
    "synthesis": FLOOR_1,
    "library": FLOOR_1,
    "spec": FLOOR_1 | {"library"},
    "comb": FLOOR_1 | {"library", "spec"},
    "circuit": TO_COMB | {"lines", "synthesis"},
    "geometry": TO_COMB,
    "sizing": TO_COMB | {"lines", "synthesis", "circuit"},
    "rules": FLOOR_1 | {"library", "comb", "geometry"},
    "design": TO_DESIGN - {"design"},
    "exports": TO_DESIGN - {"lines", "sizing"},
    "report": TO_DESIGN | {"exports"},
    "package": TO_DESIGN | {"exports", "report"},
    "cli": TO_DESIGN | {"exports", "report", "package"},
}
SHOWN_LAZILY = {"__init__"}  # the package's own front: names only, loaded on first use


def rooms() -> set[str]:
    files = {path.stem for path in ROOT.glob("*.py")}
    folders = {path.name for path in ROOT.iterdir() if path.is_dir() and any(path.glob("*.py"))}
    return (files | folders) - SHOWN_LAZILY


def imported_rooms(path: Path) -> set[str]:
    """Rooms named by any import statement, one hidden in a function included."""
    names: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}:{node.lineno}: spell the import out in full"
            names |= {f"{node.module}.{alias.name}" for alias in node.names}
    found = {name.split(".")[1] for name in names if name.startswith("layoutgen.")}
    return found - {"__version__"}


def test_every_room_has_a_row():
    assert rooms() <= MAY_IMPORT.keys()


@pytest.mark.parametrize("room", MAY_IMPORT)
def test_a_room_imports_only_what_the_design_allows(room):
    files = [*ROOT.glob(f"{room}.py"), *ROOT.glob(f"{room}/**/*.py")]

    upward = {file.name: imported_rooms(file) - MAY_IMPORT[room] - {room} for file in files}

    assert not any(upward.values()), f"{room} reaches outside its floor: {upward}"


def test_the_front_of_the_package_imports_no_room_when_loaded():
    tree = ast.parse((ROOT / "__init__.py").read_text(encoding="utf-8"))

    at_load = [node for node in tree.body if isinstance(node, ast.Import | ast.ImportFrom)]

    assert not any("layoutgen" in ast.dump(node) for node in at_load)
