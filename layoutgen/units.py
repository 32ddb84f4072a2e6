"""Quantities as people write them (``"0.813 mm"``) and as they read them back."""

from __future__ import annotations

import math
import re
from decimal import Decimal

UNITS: dict[str, dict[str, float]] = {
    "length": {
        "m": 1.0,
        "cm": 1e-2,
        "mm": 1e-3,
        "um": 1e-6,
        "µm": 1e-6,
        "μm": 1e-6,
        "nm": 1e-9,
        "mil": 25.4e-6,
        "in": 25.4e-3,
    },
    "frequency": {"Hz": 1.0, "kHz": 1e3, "MHz": 1e6, "GHz": 1e9},
    "capacitance": {"F": 1.0, "uF": 1e-6, "nF": 1e-9, "pF": 1e-12, "fF": 1e-15},
    "inductance": {"H": 1.0, "uH": 1e-6, "nH": 1e-9, "pH": 1e-12},
    "resistance": {"ohm": 1.0, "Ω": 1.0, "mohm": 1e-3, "kohm": 1e3},
    "level": {"dB": 1.0},
    "angle": {"deg": math.pi / 180, "rad": 1.0},
    "conductivity": {"S/m": 1.0, "MS/m": 1e6},
    "per kelvin": {"1/K": 1.0, "ppm/K": 1e-6, "ppm/C": 1e-6},
    "voltage": {"V": 1.0, "kV": 1e3},
    "temperature": {"C": 1.0},
}
"""Accepted units of each dimension and their factor to SI; levels stay in decibels."""

_QUANTITY = re.compile(r"^\s*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(\S*)\s*$")
_EXAMPLE = {
    "length": "0.813 mm",
    "frequency": "1.69 GHz",
    "capacitance": "3.3 pF",
    "inductance": "0.1 nH",
    "resistance": "50 ohm",
    "level": "20 dB",
    "angle": "45 deg",
    "conductivity": "58 MS/m",
    "per kelvin": "50 ppm/K",
    "voltage": "50 V",
    "temperature": "25 C",
}


def parse_quantity(text: object, dimension: str) -> float:
    """Value in SI units of a quantity written with its unit.

    Parameters
    ----------
    text : object
        For example ``"1.69 GHz"``. Anything but a string is refused.
    dimension : str
        A key of `UNITS`.

    Returns
    -------
    float
        SI value; decibels for levels, degrees Celsius for temperatures.

    Raises
    ------
    ValueError
        With a message that says what would work.
    """
    example = _EXAMPLE[dimension]
    if isinstance(text, bool) or not isinstance(text, str | int | float):
        raise ValueError(f'must be a {dimension} with its unit, for example "{example}"')
    if isinstance(text, int | float):
        raise ValueError(f'needs a unit; write for example "{example}"')
    match = _QUANTITY.match(text)
    if match is None:
        raise ValueError(f'is not a finite number with a unit; write for example "{example}"')
    number, unit = float(match[1]), match[2]
    known = UNITS[dimension]
    if not unit:
        raise ValueError(f'needs a unit; write for example "{example}"')
    if unit not in known:
        listed = ", ".join(name for name in known if name.isascii())
        raise ValueError(f'unit "{unit}" is not a {dimension}; use one of {listed}')
    if not math.isfinite(number):
        raise ValueError("must be finite")
    # through decimals, so that "2.05 GHz" is 2.05e9 and not a bit beside it
    value = float(Decimal(match[1]) * Decimal(str(known[unit]))) if number else number
    if not math.isfinite(value):
        raise ValueError("must be finite")
    return value


_DISPLAY = {
    "length": (("mm", 1e-3),),
    "frequency": (("GHz", 1e9), ("MHz", 1e6), ("kHz", 1e3), ("Hz", 1.0)),
    "capacitance": (("pF", 1e-12),),
    "inductance": (("nH", 1e-9),),
    "resistance": (("ohm", 1.0),),
    "level": (("dB", 1.0),),
    "angle": (("deg", math.pi / 180),),
}


def show(value: float, dimension: str, digits: int = 4) -> str:
    """Text of an SI value with unit, to a number of significant digits, for people to read.

    Picks the largest unit below the value (``1.69 GHz``, ``45 MHz``); lengths are always
    millimetres, capacitances picofarads.
    """
    scales = _DISPLAY[dimension]
    unit, factor = next(((u, f) for u, f in scales if abs(value) >= f), scales[-1])
    return f"{float(f'{value / factor:.{digits}g}'):.12g} {unit}"
