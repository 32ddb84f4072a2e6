"""A stroke font: characters as outlines, for ink.

Each character is drawn with straight strokes on a field four steps wide and six high. Lower case letters
are smaller capitals, so that they can be told from the capitals.
"""

from __future__ import annotations

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.errors import InputError

__all__ = ["text_outline", "text_width"]

_WIDE, _HIGH = 4, 6
_SLIM = 0.9
"""Width of a step over its height."""

_SMALL = 0.75
"""Size of small capitals."""

_GAP = 1.7
"""Steps between characters."""

# Strokes are separated by spaces; a stroke is a row of corners, each written as the two digits of x and y.
_STROKES = {
    "0": "103041453616050110 2224", "1": "152620 1030", "2": "05163645440040",
    "3": "05163645443313 334241301001", "4": "30360242", "5": "460603334241301001",
    "6": "4536160501103041423303", "7": "064610", "8": "13040516364544331302011030414233",
    "9": "0110304145361605041343", "A": "0004264440 0242", "B": "00063645443303 3342413000",
    "C": "4536160501103041", "D": "00062644422000", "E": "46060040 0333", "F": "460600 0333",
    "G": "45361605011030414323", "H": "0006 4046 0343", "I": "2026 1030 1636", "J": "4641301001",
    "K": "0006 461340 0313", "L": "060040", "M": "0006244640", "N": "00064046", "O": "103041453616050110",
    "P": "00063645443303", "Q": "103041453616050110 2240", "R": "00063645443303 2340",
    "S": "453616050413334241301001", "T": "0646 2026", "U": "060110304146", "V": "062046",
    "W": "0610243046", "X": "0046 0640", "Y": "062346 2023", "Z": "06460040",
    ".": "20", "_": "0040", "-": "1333", "/": "0046", "+": "1333 2224", ":": "21 24", " ": "",
}


def text_width(text: str, height: float) -> float:
    """Width of a line of text between the middles of its outermost strokes, in the unit of the height."""
    step = height / _HIGH * _SLIM
    return step * (len(text) * (_WIDE + _GAP) - _GAP) if text else 0.0


def text_outline(text: str, *, height: float, stroke: float) -> BaseGeometry:
    """Area of a line of text, its lower left corner at the origin.

    Parameters
    ----------
    text : str
        Letters, digits, space and ``. _ - / + :``.
    height : float
        Of a capital letter between the middles of its outermost strokes. [mm]
    stroke : float
        Line width. [mm]

    Returns
    -------
    geometry
        One part for each character, or more.

    Raises
    ------
    InputError
        For a character that the font lacks.
    """
    strokes = []
    step = height / _HIGH
    for index, character in enumerate(text):
        if character.upper() not in _STROKES:
            raise InputError("legend", "text", text, f'the legend has no "{character}"; use letters, digits, '
                             "space and . _ - / + :")
        size = step * (_SMALL if character.islower() else 1.0)
        left = index * (_WIDE + _GAP) * step * _SLIM
        for code in _STROKES[character.upper()].split():
            corners = [(left + int(code[i]) * size * _SLIM, int(code[i + 1]) * size)
                       for i in range(0, len(code), 2)]
            path = shapely.LineString(corners) if len(corners) > 1 else shapely.Point(corners)
            strokes.append(path.buffer(stroke / 2, quad_segs=2))
    return shapely.union_all(strokes)
