"""Combs as a sizing would deliver them, for tests of what comes after: chips, plates, and any valid one."""

from __future__ import annotations

from itertools import accumulate

from hypothesis import strategies as st

from layoutgen.comb import ChipLoad, Comb, Feed, Launch, Resonator, Segment, Stack, ViaRow

UM = 1e-6

STACK = Stack(height=813 * UM, eps_r=3.55, tan_delta=0.0027, conductor=43 * UM, conductivity=58e6,
              roughness=1.8 * UM, cover=None)
LAUNCH = Launch(ground_gap=480 * UM, ground_width=2300 * UM, ground_length=3100 * UM)


def via_row(count: int) -> ViaRow:
    """Vias of 0.3 mm finished diameter."""
    return ViaRow(count=count, pitch=700 * UM, drill=400 * UM, finished=300 * UM, pad=600 * UM)


def chip(capacitance: float) -> ChipLoad:
    """A small chip on its lands, two vias behind a mask dam."""
    return ChipLoad(
        case="0402", capacitance=capacitance, tolerance=0.05e-12, resistance=0.11, inductance=0.05e-9,
        body_length=1000 * UM, body_width=500 * UM, body_height=350 * UM, current_height=120 * UM,
        land_length=500 * UM, land_width=600 * UM, land_gap=440 * UM,
        pad_length=1254 * UM, pad_width=1300 * UM, via_offset=954 * UM, vias=via_row(2),
    )


def comb_of(*, resonators: tuple[Resonator, ...], tap: float, feed_width: float, board: tuple[float, float],
            short_line: float, ground_clearance: float = 6504 * UM, launch: Launch | None = LAUNCH) -> Comb:
    """Comb with a feed at each end, symmetric about the middle of the board."""
    last = len(resonators) - 1
    left, right = (
        Feed(resonator=index, side=side, tap=tap, width=feed_width, impedance=50.0, launch=launch)
        for index, side in ((0, "left"), (last, "right"))
    )
    return Comb(stack=STACK, resonators=resonators, feeds=(left, right), width=board[0], height=board[1],
                short_line=short_line, ground_clearance=ground_clearance, feed_clearance=2440 * UM,
                side_walls=None)


def centres(gaps: tuple[float, ...], widths: tuple[float, ...], middle: float) -> tuple[float, ...]:
    """Centre lines of strips of given widths with given gaps between them, about a middle. [m]"""
    steps = [gap + (a + b) / 2 for gap, a, b in zip(gaps, widths[:-1], widths[1:], strict=True)]
    xs = list(accumulate(steps, initial=0.0))
    return tuple(x + middle - xs[-1] / 2 for x in xs)


def chip_comb() -> Comb:
    """Five resonators near 1.7 GHz on 0.813 mm, chips of 3.3 pF."""
    width = 1800 * UM
    gaps = tuple(gap * UM for gap in (1734, 2318, 2318, 1734))
    board = (43_000 * UM, 33_500 * UM)
    lengths = (8_231, 8_402, 8_416, 8_402, 8_231)
    resonators = tuple(
        Resonator(
            x=x, segments=(Segment(length=400 * UM, width=2000 * UM),
                           Segment(length=(length - 400) * UM, width=width)),
            short=via_row(3), overhang=300 * UM, load=chip(3.3e-12),
        )
        for x, length in zip(centres(gaps, (2000 * UM,) * 5, board[0] / 2), lengths, strict=True)
    )
    return comb_of(resonators=resonators, tap=2_150 * UM, feed_width=1782 * UM, board=board,
                   short_line=12_000 * UM)


def plate_comb() -> Comb:
    """Three resonators with printed plates near 2.6 GHz on 0.813 mm."""
    board = (44_000 * UM, 36_000 * UM)
    gaps = (704 * UM, 704 * UM)
    xs = centres(gaps, (4_800 * UM,) * 3, board[0] / 2)
    resonators = tuple(
        Resonator(
            x=x, segments=(Segment(length=9_120 * UM, width=1300 * UM),
                           Segment(length=length * UM, width=4_800 * UM)),
            short=via_row(2), overhang=300 * UM, load=None,
        )
        for x, length in zip(xs, (4_210, 4_304, 4_210), strict=True)
    )
    return comb_of(resonators=resonators, tap=1_900 * UM, feed_width=1782 * UM, board=board,
                   short_line=11_500 * UM)


@st.composite
def combs(draw: st.DrawFn) -> Comb:
    """Any comb of two to six resonators that a board can carry, every edge on the micrometre grid."""
    order = draw(st.integers(2, 6))
    width = 2 * draw(st.integers(700, 1_100)) * UM
    chips = draw(st.booleans())
    widest = width if chips else width + 2 * draw(st.integers(0, 900)) * UM
    gaps = tuple(2 * draw(st.integers(150, 1_200)) * UM for _ in range(order - 1))
    clearance = draw(st.integers(2_500, 6_600)) * UM
    launch = draw(st.sampled_from([None, LAUNCH]))
    frame = draw(st.integers(4_300, 7_000)) * UM
    length, spread = draw(st.integers(5_600, 10_000)), 600 if chips else 200
    lengths = [(length + draw(st.integers(-spread, spread))) * UM for _ in range(order)]
    tallest = max(lengths) + (1_694 * UM if chips else 3_000 * UM)
    span = sum(gaps) + order * widest
    board = (span + 2 * (clearance + frame), tallest + 300 * UM + 2 * (clearance + frame))
    resonators = tuple(
        Resonator(x=x, segments=(Segment(length=length, width=width),) if chips else (
                      Segment(length=length, width=width), Segment(length=3_000 * UM, width=widest)),
                  short=via_row(2), overhang=300 * UM, load=chip(2.2e-12) if chips else None)
        for x, length in zip(centres(gaps, (widest,) * order, board[0] / 2), lengths, strict=True)
    )
    return comb_of(resonators=resonators, tap=draw(st.integers(1_300, 4_000)) * UM,
                   feed_width=2 * draw(st.integers(300, 900)) * UM, board=board,
                   short_line=300 * UM + clearance + frame, ground_clearance=clearance, launch=launch)
