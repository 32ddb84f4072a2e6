"""What the files of the library hold: the keys of a laminate, a chip case and a shop."""

from __future__ import annotations

from layoutgen.library.keys import Key, Table

__all__ = ["CHIP_CASE", "LAMINATE", "SHOP"]

_NAME = Key(
    name="name", about="the file's name without .toml", required=True, example='"hydrocarbon-ceramic-3.55"'
)
_DESCRIPTION = Key(
    name="description", about="one line for the list", required=True, example='"PTFE, ceramic"'
)
_SOURCE = Key(
    name="source",
    about="where the figures come from and how sure they are",
    required=True,
    example='"maker\'s data sheet, 2024, read"',
)


def _length(name: str, about: str, *, zero: bool = False, required: bool = True) -> Key:
    """A length below 1 m, greater than zero unless zero is allowed."""
    return Key(
        name=name,
        about=about,
        kind="length",
        required=required,
        example='"0.5 mm"',
        high="1 m",
        low="0 mm" if zero else None,
        above=None if zero else "0 mm",
    )


LAMINATE = Table(
    name="",
    about="one laminate",
    keys=(
        _NAME,
        _DESCRIPTION,
        Key(
            name="eps_r",
            about="design permittivity",
            kind="number",
            required=True,
            low=1,
            high=1000,
            example="3.55",
        ),
        Key(
            name="eps_r_process",
            about="permittivity by the clamped stripline test",
            kind="number",
            required=True,
            low=1,
            high=1000,
            example="3.38",
        ),
        Key(
            name="eps_r_tolerance",
            about="half-width of its band",
            kind="number",
            required=True,
            low=0,
            high=100,
            example="0.05",
        ),
        Key(
            name="tan_delta",
            about="loss tangent",
            kind="number",
            required=True,
            low=0,
            below=1,
            example="0.0027",
        ),
        Key(
            name="reference_frequency",
            about="at which the two figures were taken",
            kind="frequency",
            required=True,
            above="0 Hz",
            high="1000 GHz",
            example='"10 GHz"',
        ),
        Key(
            name="eps_r_temperature_coefficient",
            about="of the permittivity",
            kind="per kelvin",
            required=True,
            low="-10000 ppm/K",
            high="10000 ppm/K",
            example='"50 ppm/K"',
            field="eps_r_tempco",
        ),
        Key(
            name="expansion",
            about="thermal, in the plane of the board",
            kind="per kelvin",
            required=True,
            low="-1000 ppm/K",
            high="1000 ppm/K",
            example='"16 ppm/K"',
        ),
        _SOURCE,
    ),
    tables=(
        Table(
            name="thickness",
            about="one stocked thickness",
            many=True,
            least=1,
            keys=(
                _length("nominal", "dielectric, without copper"),
                _length("tolerance", "half-width of its band", zero=True),
            ),
        ),
        Table(
            name="copper",
            about="one stocked foil",
            many=True,
            least=1,
            keys=(
                _length("base", "thickness of the foil before plating"),
                _length("roughness", "root mean square, on the laminate's side", zero=True),
                Key(
                    name="conductivity",
                    about="of the copper",
                    kind="conductivity",
                    required=True,
                    above="0 MS/m",
                    high="100 MS/m",
                    example='"58 MS/m"',
                ),
            ),
        ),
    ),
)

CHIP_CASE = Table(
    name="",
    about="one chip case and its land pattern",
    keys=(
        _NAME,
        _DESCRIPTION,
        _length("body_length", "over the terminals"),
        _length("body_length_tolerance", "half-width of its band", zero=True),
        _length("body_width", "across"),
        _length("body_width_tolerance", "half-width of its band", zero=True),
        _length("body_height", "above the lands"),
        _length("terminal_length", "of each terminal, along the body"),
        _length("terminal_length_tolerance", "half-width of its band", zero=True),
        _length("land_length", "of each land, along the body"),
        _length("land_width", "of each land, across the body"),
        _length("land_gap", "bare laminate between the lands"),
        _length(
            "current_height",
            "mean height of the current above the lands; half the body's when absent",
            zero=True,
            required=False,
        ),
        Key(
            name="voltage",
            about="rated, of common parts",
            kind="voltage",
            above="0 V",
            high="100 kV",
            example='"50 V"',
        ),
        _SOURCE,
    ),
)

SHOP = Table(
    name="",
    about="what a board shop holds",
    keys=(
        _NAME,
        _DESCRIPTION,
        _length("min_drill", "finished diameter of the smallest plated hole"),
        Key(
            name="aspect_ratio",
            about="greatest board thickness over tool diameter",
            kind="number",
            required=True,
            above=0,
            high=100,
            example="8",
        ),
        _length("annular_ring", "copper around a finished hole"),
        _length("drill_to_conductor", "edge of the tool to copper the hole does not join"),
        _length("conductor_to_edge", "copper to the routed outline", zero=True),
        _length("hole_tolerance_plus", "a finished hole may be larger by", zero=True),
        _length("hole_tolerance_minus", "a finished hole may be smaller by", zero=True),
        _length("outline_tolerance", "half-width of the band of the routed outline", zero=True),
        _length("registration", "greatest offset between drill and image", zero=True),
        _length("mask_web", "narrowest dam of solder mask"),
        _length("mask_expansion", "mask opening beyond the copper, each side", zero=True),
        _length("grid", "finest step of coordinates that is kept"),
        _SOURCE,
    ),
    tables=(
        Table(
            name="etching",
            about="limits up to one copper thickness",
            many=True,
            least=1,
            keys=(
                _length("copper", "greatest finished thickness, foil and plating"),
                _length("min_line", "narrowest line"),
                _length("min_gap", "narrowest gap"),
            ),
        ),
    ),
)
