"""The library as text: a list of what is there, and one entry with everything it says."""

from __future__ import annotations

from collections.abc import Sequence

from layoutgen.library import CHIP_CASE, LAMINATE, SHOP, ChipCase, Key, Laminate, Library, Shop, Table
from layoutgen.report.text import WIDTH, figures, heading, paragraph
from layoutgen.units import show

__all__ = ["entry_text", "shelf_text"]

_NAME, _EPS, _TAN = 26, 8, 11
"""Columns of the list."""

_THIN = ("base", "roughness", "copper")
"""Lengths that the trade says in micrometres."""


def shelf_text(library: Library) -> str:
    """Laminates with permittivity, loss tangent and stocked thicknesses, then chip cases and shops."""
    rest = _NAME + _EPS + _TAN
    lines = [f"{'laminate':<{_NAME}}{'eps_r':<{_EPS}}{'tan delta':<{_TAN}}thickness (mm)", "-" * WIDTH]
    for laminate in library.laminates():
        stocked = ", ".join(f"{t.nominal * 1e3:.3f}" for t in laminate.thicknesses)
        name = f"{laminate.name + '  ':<{_NAME}}"
        head = f"{name}{laminate.eps_r:<{_EPS}g}{laminate.tan_delta:<{_TAN}g}"
        lines += paragraph(stocked, head, " " * rest)
    others: tuple[tuple[str, Sequence[ChipCase | Shop]], ...] = (
        ("Chip cases", library.chip_cases()),
        ("Shops", library.shops()),
    )
    for title, entries in others:
        lines += [*heading(title), *figures([(entry.name, entry.description) for entry in entries])]
    return "\n".join([*lines, "", "layoutgen substrates NAME shows one entry whole."]) + "\n"


def entry_text(entry: Laminate | ChipCase | Shop) -> str:
    """Every value of an entry with unit and meaning, and the source of its figures."""
    layout = LAMINATE if isinstance(entry, Laminate) else CHIP_CASE if isinstance(entry, ChipCase) else SHOP
    lines = [entry.name, "=" * len(entry.name), *paragraph(entry.description), ""]
    lines += figures(_rows(entry, layout, skip=("name", "description", "source")))
    for table in layout.tables:
        lines += heading(f"{table.name}: {table.about}")
        for row in _members(entry, table.name):
            lines += paragraph(
                "; ".join(f"{name} {value}" for name, value in _values(row, table)), "- ", "  "
            )
    lines += [*heading("Source"), *paragraph(" ".join(entry.source.split()))]
    return "\n".join([*lines, "", f"File: {entry.path.name}"]) + "\n"


def _members(entry: object, table: str) -> Sequence[object]:
    plural = {"thickness": "thicknesses", "copper": "coppers"}.get(table, table)
    members: Sequence[object] = getattr(entry, plural)
    return members


def _rows(entry: object, layout: Table, skip: Sequence[str]) -> list[tuple[str, str]]:
    return [
        (key.name, f"{_shown(getattr(entry, key.target), key)}  ({key.about})")
        for key in layout.keys
        if key.name not in skip
    ]


def _values(row: object, table: Table) -> list[tuple[str, str]]:
    return [(key.name, _shown(getattr(row, key.target), key)) for key in table.keys]


def _shown(value: float | None, key: Key) -> str:
    kind = key.kind
    if value is None:
        return "none"
    if kind == "length":
        return f"{value * 1e6:.6g} um" if key.name in _THIN else f"{value * 1e3:.6g} mm"
    factors = {"per kelvin": (1e6, " ppm/K"), "conductivity": (1e-6, " MS/m"), "voltage": (1.0, " V")}
    if kind in factors:
        factor, unit = factors[kind]
        return f"{value * factor:.6g}{unit}"
    return show(value, kind, 6) if kind == "frequency" else f"{value:.6g}"
