"""Plain text in lines of at most 80 columns."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Sequence

__all__ = ["WIDTH", "bullets", "figures", "heading", "paragraph", "table"]

WIDTH = 80


def heading(text: str) -> list[str]:
    """A title with a rule below, after an empty line."""
    return ["", text, "-" * min(len(text), WIDTH)]


def paragraph(text: str, indent: str = "", hanging: str | None = None) -> list[str]:
    """Text broken into lines; the ones after the first begin with ``hanging`` (default: the indent)."""
    rest = indent if hanging is None else hanging
    return textwrap.wrap(text, WIDTH, initial_indent=indent, subsequent_indent=rest, break_on_hyphens=False)


def bullets(texts: Iterable[str]) -> list[str]:
    """One item for each text."""
    return [line for text in texts for line in paragraph(text, "- ", "  ")]


def figures(pairs: Sequence[tuple[str, str]]) -> list[str]:
    """Names and values in two columns; long values go on below themselves."""
    column = min(max(len(name) for name, _ in pairs) + 2, 34)
    lines: list[str] = []
    for name, value in pairs:
        lines += paragraph(value or "-", f"{name:<{column}}", " " * column)
    return lines


def table(header: Sequence[str], rows: Sequence[Sequence[str]], left: int = 1) -> list[str]:
    """Columns two blanks apart, the first ``left`` ones flush left, the others flush right."""
    widths = [max(len(row[i]) for row in (header, *rows)) for i in range(len(header))]

    def line(row: Sequence[str]) -> str:
        cells = (
            f"{cell:<{w}}" if i < left else f"{cell:>{w}}"
            for i, (cell, w) in enumerate(zip(row, widths, strict=True))
        )
        return "  ".join(cells).rstrip()

    return [line(header), *(line(row) for row in rows)]
