"""Rounding to the grid, rings, and the letters of the legend."""

from __future__ import annotations

import string
from itertools import combinations

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from layoutgen.errors import InputError
from layoutgen.geometry.font import text_outline, text_width
from layoutgen.geometry.grid import Grid

GRID = Grid(0.001)


@pytest.mark.parametrize(("value", "expected"), [
    (1.0005, 1.001), (-1.0005, -1.001), (2.0005, 2.001), (1.00049, 1.0), (0.1 + 0.2, 0.3), (-0.0002, 0.0),
    (1.0045, 1.005), (1.0055, 1.006),  # banker's rounding would give 1.004 and 1.006
])
def test_ties_go_away_from_zero(value, expected):
    assert GRID.number(value) == expected
    assert str(GRID.number(value)) == str(expected)


@given(st.floats(-500, 500))
def test_snapping_moves_by_half_a_step_at_most_and_once(value):
    snapped = GRID.number(value)

    assert abs(snapped - value) <= 0.0005 + 1e-8
    assert GRID.number(snapped) == snapped
    assert snapped == round(snapped, 3)


def test_idle_corners_go_and_rings_start_at_the_lower_left():
    area = shapely.box(0, 0, 1, 1).union(shapely.box(1, 0, 2, 1)).union(shapely.box(0, 1, 1, 2))

    (shape,) = GRID.polygons(area)

    assert shape.exterior == ((0, 0), (2, 0), (2, 1), (1, 1), (1, 2), (0, 2))


def test_holes_stay_and_run_the_other_way():
    area = shapely.box(0, 0, 5, 5).difference(shapely.box(1, 1, 2, 2)).difference(shapely.box(3, 3, 4, 4))

    (shape,) = GRID.polygons(area)

    assert len(shape.holes) == 2
    assert shapely.LinearRing(shape.exterior).is_ccw
    assert not any(shapely.LinearRing(hole).is_ccw for hole in shape.holes)
    assert shape.geometry.equals(area)


CHARACTERS = string.ascii_letters + string.digits + "._-/+:"


@pytest.mark.parametrize("character", CHARACTERS)
def test_a_letter_stays_in_its_box_and_is_no_thinner_than_its_stroke(character):
    ink = text_outline(character, height=1.0, stroke=0.15)

    x_min, y_min, x_max, y_max = ink.bounds
    half = 0.075 + 1e-9
    assert x_min >= -half
    assert y_min >= -half
    assert x_max <= text_width(character, 1.0) + half
    assert y_max <= 1.0 + half
    assert ink.is_valid
    opened = ink.buffer(-0.065, join_style="mitre").buffer(0.075, join_style="mitre")
    assert ink.difference(opened).area < 1e-3  # a corner of an octagon here and there


def test_no_two_characters_look_the_same():
    inks = {c: text_outline(c, height=1.0, stroke=0.15) for c in CHARACTERS}

    for (one, a), (other, b) in combinations(inks.items(), 2):
        assert a.symmetric_difference(b).area > 0.02, f"{one} and {other}"


def test_characters_stand_apart():
    ink = text_outline("WM08-88", height=0.8, stroke=0.15)

    singles = [text_outline(c, height=0.8, stroke=0.15).area for c in "WM08-88"]
    assert ink.area == pytest.approx(sum(singles), rel=1e-9)
    gaps = np.diff(sorted(bound for part in ink.geoms for bound in (part.bounds[0], part.bounds[2])))
    assert ink.bounds[2] == pytest.approx(text_width("WM08-88", 0.8) + 0.075, abs=1e-9)
    assert gaps.min() >= 0


def test_an_unknown_character_is_named():
    with pytest.raises(InputError, match='no "é"'):
        text_outline("René", height=1.0, stroke=0.15)
