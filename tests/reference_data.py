"""Outside values for tests, each table with its source and status."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

FOLDER = Path(__file__).parent / "reference"


def table(file: str, name: str) -> dict[str, Any]:
    """One table of a file under tests/reference; every one must say where its values come from."""
    with (FOLDER / file).open("rb") as stream:
        found = tomllib.load(stream)[name]
    assert found["source"]
    assert found["status"]
    return found


def rows(file: str, name: str) -> list[Any]:
    """Rows of a table as dictionaries by column, or as lists where a column repeats."""
    found = table(file, name)
    columns = found["columns"]
    if columns[-1].endswith("..."):
        return found["rows"]
    return [dict(zip(columns, row, strict=True)) for row in found["rows"]]
