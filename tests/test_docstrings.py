"""What is written about the code is so: docstrings, and the tables of DEVELOPERS.md."""

from __future__ import annotations

import dataclasses
import importlib
import inspect
import re
from collections.abc import Callable, Iterator

import model_errors
import pytest
from test_rooms import MAY_IMPORT, ROOT

DEVELOPERS = (ROOT.parent / "DEVELOPERS.md").read_text(encoding="utf-8")
NUMERIC_ROOMS = ("lines", "synthesis", "circuit")
ELSEWHERE = "parameters are those of"


def modules() -> list[str]:
    paths = [path.relative_to(ROOT.parent).with_suffix("") for path in sorted(ROOT.rglob("*.py"))]
    return [".".join(path.parts).removesuffix(".__init__") for path in paths]


def public(module: str) -> Iterator[tuple[str, object]]:
    """Functions and classes that a module shows and that are its own."""
    loaded = importlib.import_module(module)
    names = getattr(loaded, "__all__", [name for name in vars(loaded) if not name.startswith("_")])
    for name in names:
        thing = getattr(loaded, name)
        if (inspect.isfunction(thing) or inspect.isclass(thing)) and thing.__module__ == module:
            yield f"{module}.{name}", thing


PUBLIC = dict(pair for module in modules() for pair in public(module))
FUNCTIONS = {name: thing for name, thing in PUBLIC.items() if inspect.isfunction(thing)}
CLASSES = {name: thing for name, thing in PUBLIC.items() if inspect.isclass(thing)}


def methods(kind: type) -> Iterator[tuple[str, Callable[..., object]]]:
    """Public methods and properties that a class defines itself."""
    for name, value in vars(kind).items():
        if isinstance(value, property):
            value = value.fget
        elif isinstance(value, staticmethod | classmethod):
            value = value.__func__
        if not name.startswith("_") and inspect.isfunction(value):
            yield name, value


def documented(thing: object, section: str) -> list[str] | None:
    """Names in a numpydoc section, sorted; None when there is no such section."""
    text = inspect.cleandoc(thing.__doc__ or "")
    found = re.search(rf"^{section}\n-+\n(.*?)(?=^\S[^\n]*\n-+$|\Z)", text, flags=re.M | re.S)
    if found is None:
        return None
    entries = [line.split(" : ")[0] for line in found[1].splitlines() if re.match(r"\S", line)]
    return sorted(name.strip().lstrip("*") for entry in entries for name in entry.split(","))


def parameters(function: Callable[..., object]) -> list[str]:
    return sorted(set(inspect.signature(function).parameters) - {"self", "cls"})


def stray(function: Callable[..., object]) -> bool:
    found = documented(function, "Parameters")
    return found is not None and found != parameters(function)


def test_the_parser_reads_what_a_docstring_says():
    def sample(*, first: float, second: float, third: float) -> None:
        """Sum.

        Parameters
        ----------
        first, second : float
            Two. [m]
        third : float

        Returns
        -------
        float
        """

    assert documented(sample, "Parameters") == ["first", "second", "third"]
    assert documented(sample, "Attributes") is None
    assert not stray(sample)


@pytest.mark.parametrize("name", PUBLIC)
def test_everything_public_has_a_docstring(name):
    thing = PUBLIC[name]
    inside = list(methods(thing)) if inspect.isclass(thing) else []

    bare = [own for own, function in [(name, thing), *inside] if not function.__doc__]

    assert bare == []


@pytest.mark.parametrize("name", FUNCTIONS)
def test_documented_parameters_of_a_function_are_those_of_its_signature(name):
    function = FUNCTIONS[name]

    if (found := documented(function, "Parameters")) is not None:
        assert found == parameters(function)


@pytest.mark.parametrize("name", CLASSES)
def test_documented_parameters_and_attributes_of_a_class_are_its_own(name):
    kind = CLASSES[name]
    attributes = documented(kind, "Attributes")

    if dataclasses.is_dataclass(kind) and attributes is not None:
        assert attributes == sorted(field.name for field in dataclasses.fields(kind))
    if (found := documented(kind, "Parameters")) is not None:
        assert found == parameters(kind.__init__)
    assert [own for own, function in methods(kind) if stray(function)] == []


@pytest.mark.parametrize(
    "name",
    [
        f"layoutgen.{room}.{shown}"
        for room in NUMERIC_ROOMS
        for shown in importlib.import_module(f"layoutgen.{room}").__all__
    ],
)
def test_what_a_numeric_room_shows_tells_its_parameters(name):
    room, _, shown = name.rpartition(".")
    function = getattr(importlib.import_module(room), shown)

    if inspect.isfunction(function) and len(parameters(function)) > 1:
        told = documented(function, "Parameters") is not None
        assert told or ELSEWHERE in (function.__doc__ or "").lower()


# -- tables of DEVELOPERS.md


def rows_below(heading: str) -> list[list[str]]:
    """Cells of the table that follows a heading, without its head."""
    text = DEVELOPERS.split(f"## {heading}\n", 1)[1].split("\n## ", 1)[0]
    lines = [line for line in text.splitlines() if line.startswith("|")]
    return [[cell.strip() for cell in line.strip("|").split("|")] for line in lines[2:]]


def named_rooms(text: str) -> list[str]:
    return re.findall(r"`(\w+)", text)


def test_the_rooms_of_the_page_are_those_that_the_test_guards():
    """"floor 1" and "all below" stand for rooms of lower floors; what follows "but" is taken away."""
    floor_of: dict[str, int] = {}
    may_import: dict[str, set[str]] = {}
    for floor, name, _, allowed in rows_below("Rooms"):
        (room,) = named_rooms(name)
        floor_of[room] = int(floor)
        given, _, taken = allowed.partition(" but ")
        below = {known for known, level in floor_of.items() if level < int(floor)}
        first = {known for known, level in floor_of.items() if level == 1}
        may_import[room] = set(named_rooms(given)) | (below if "all below" in given else set())
        may_import[room] |= first if "floor 1" in given else set()
        may_import[room] -= set(named_rooms(taken))

    assert may_import == MAY_IMPORT


def test_no_room_imports_upward_by_its_row():
    floors = {named_rooms(row[1])[0]: int(row[0]) for row in rows_below("Rooms")}

    for room, allowed in MAY_IMPORT.items():
        assert all(floors[other] < floors[room] or floors[room] == 1 for other in allowed), room


def test_files_and_folders_that_the_page_names_exist():
    """What looks like a path in backquotes is one, from the root of the project or of the package."""
    words = re.findall(r"`([\w./*-]+)`", DEVELOPERS)
    paths = {word for word in words if "/" in word or word.endswith((".py", ".toml", ".md"))}
    to_come = {row[1].strip("`") for row in rows_below("Rooms") if row[2].startswith("not there yet")}

    missing = {path for path in paths if not any(ROOT.parent.glob(path)) and not any(ROOT.glob(path))}

    assert len(paths) > 20
    assert missing == to_come


@pytest.mark.parametrize("row", rows_below("Models and how far they are off"), ids=lambda row: row[0])
def test_the_worst_error_of_a_model_is_the_one_measured(row):
    """Stated errors are measured ones, rounded up: no more than a fifth above what is found here."""
    measured = model_errors.MEASURED[row[0]]()
    stated = float(row[3].removesuffix(" %")) / 100

    assert stated / 1.2 <= measured <= stated


def test_every_measured_model_is_in_the_table():
    assert [row[0] for row in rows_below("Models and how far they are off")] == list(model_errors.MEASURED)
