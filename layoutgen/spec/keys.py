"""The keys of a specification: what may be written, within which limits, and what holds otherwise.

The limits here are those of any comb-line filter that could be meant; whether a filter can be built
inside them is for the sizing to say.
"""

from __future__ import annotations

from layoutgen.library import Key, Table

__all__ = ["CHIP_KEYS", "SPEC"]

NUMBER_PATTERN = r"(?![.-])[A-Za-z0-9._-]{1,64}"
CHIP_KEYS = ("case", "series", "value", "tolerance", "esr", "q", "q_frequency", "inductance")
"""Keys of ``[load]`` that belong to chip loads only."""

PART = Table(
    name="part",
    about="what the part is called",
    keys=(
        Key(
            name="number",
            about="part number, also the name of the files; the file's own name when absent",
            pattern=NUMBER_PATTERN,
            example='"DL-1690"',
            pattern_says="1 to 64 of the characters A-Z a-z 0-9 . _ -, not beginning with . or -",
        ),
        Key(
            name="title",
            about="one line for drawings and pages",
            default="Comb-line band-pass filter",
            pattern=r"[^\x00-\x1f\x7f-\x9f\u2028\u2029]{1,80}",
            pattern_says="1 to 80 printable characters on one line",
        ),
        Key(
            name="revision",
            about="of the part",
            default="A",
            pattern=r"[A-Za-z0-9._-]{1,16}",
            pattern_says="1 to 16 of the characters A-Z a-z 0-9 . _ -",
        ),
    ),
)

PASSBAND = Table(
    name="passband",
    about="the wanted band",
    keys=(
        Key(
            name="lower",
            about="lower edge",
            kind="frequency",
            required=True,
            low="50 MHz",
            high="20 GHz",
            example='"1.92 GHz"',
        ),
        Key(
            name="upper",
            about="upper edge",
            kind="frequency",
            required=True,
            low="50 MHz",
            high="20 GHz",
            example='"2.05 GHz"',
        ),
        Key(name="shape", about="of the response", choices=("chebyshev", "butterworth"), default="chebyshev"),
        Key(
            name="return_loss",
            about="least in the band, Chebyshev only; 20 dB when no ripple is given either",
            kind="level",
            low="6 dB",
            high="40 dB",
            example='"20 dB"',
        ),
        Key(
            name="ripple",
            about="greatest in the band, instead of return loss",
            kind="level",
            low="0.00044 dB",
            high="1.25 dB",
            example='"0.1 dB"',
        ),
        Key(
            name="order",
            about="number of resonators",
            kind="integer",
            low=2,
            high=9,
            words=("auto",),
            default="auto",
        ),
        Key(
            name="insertion_loss",
            about="greatest allowed anywhere in the band; for Butterworth, at its centre",
            kind="level",
            above="0 dB",
            high="40 dB",
            words=("none",),
            default="none",
        ),
        Key(
            name="impedance",
            about="of both ports",
            kind="resistance",
            low="10 ohm",
            high="200 ohm",
            default="50 ohm",
        ),
    ),
)

STOPBAND = Table(
    name="stopband",
    about="a band to be rejected",
    many=True,
    keys=(
        Key(
            name="from",
            about="lower end",
            kind="frequency",
            required=True,
            above="0 GHz",
            high="20 GHz",
            field="lower",
            example='"2.3 GHz"',
        ),
        Key(
            name="to",
            about="upper end",
            kind="frequency",
            required=True,
            above="0 GHz",
            high="20 GHz",
            field="upper",
            example='"2.6 GHz"',
        ),
        Key(
            name="rejection",
            about="least attenuation",
            kind="level",
            required=True,
            low="1 dB",
            high="120 dB",
            example='"30 dB"',
        ),
    ),
)

CONSTRUCTION = Table(
    name="construction",
    about="what the filter is made of",
    keys=(
        Key(
            name="kind",
            about="of line",
            choices=("microstrip",),
            later=("stripline", "bar"),
            default="microstrip",
        ),
        Key(
            name="substrate",
            about="laminate of the library, or the path of a file",
            required=True,
            example='"hydrocarbon-ceramic-3.55"',
        ),
        Key(
            name="thickness",
            about="one that the laminate is stocked in",
            kind="length",
            above="0 mm",
            high="50 mm",
            words=("auto",),
            default="auto",
        ),
        Key(
            name="copper",
            about="base foil, one that the laminate is stocked with",
            kind="length",
            above="0 um",
            high="1 mm",
            default="18 um",
        ),
        Key(
            name="plating",
            about="added to the foil by the shop",
            kind="length",
            low="0 um",
            high="100 um",
            default="25 um",
        ),
        Key(
            name="cover",
            about="height of a metal cover above the laminate",
            kind="length",
            low="0.2 mm",
            high="1 m",
            words=("none",),
            default="none",
        ),
        Key(
            name="line_width",
            about="of the resonators",
            kind="length",
            low="10 um",
            high="100 mm",
            words=("auto",),
            default="auto",
        ),
        Key(
            name="electrical_length",
            about="of the resonators at the centre of the band",
            kind="angle",
            low="20 deg",
            high="85 deg",
            words=("auto",),
            default="auto",
        ),
    ),
)

LOAD = Table(
    name="load",
    about="what loads the open ends",
    keys=(
        Key(name="kind", about="chip capacitor, or printed plate", choices=("chip", "plate"), default="chip"),
        Key(
            name="case",
            about="chip case of the library",
            words=("auto",),
            default="auto",
            pattern=".{1,64}",
            pattern_says="the name of a chip case",
        ),
        Key(
            name="series",
            about="stocked values",
            kind="capacitance",
            choices=("E12", "E24", "0.1 pF"),
            many=True,
            low="0.01 pF",
            high="1000 pF",
            default="E24",
            example='["1.0 pF", "1.2 pF"]',
        ),
        Key(
            name="value",
            about="the capacitance itself; it need not be in the series",
            kind="capacitance",
            low="0.01 pF",
            high="1000 pF",
            words=("auto",),
            default="auto",
        ),
        Key(
            name="tolerance",
            about="half-width of the value's band",
            kind="capacitance",
            low="0 pF",
            high="10 pF",
            default="0.05 pF",
        ),
        Key(
            name="esr",
            about="series resistance, constant with frequency; 0.15 ohm when no q is given either",
            kind="resistance",
            low="0 ohm",
            high="10 ohm",
            example='"0.15 ohm"',
        ),
        Key(
            name="q",
            about="quality factor, instead of esr",
            kind="number",
            low=1,
            high=100_000,
            example="300",
        ),
        Key(
            name="q_frequency",
            about="at which q was taken",
            kind="frequency",
            low="1 MHz",
            high="20 GHz",
            example='"1 GHz"',
        ),
        Key(
            name="inductance",
            about="of the part beyond a plain conductor of its outline",
            kind="inductance",
            low="0 nH",
            high="5 nH",
            default="0 nH",
        ),
    ),
)

SHORT = Table(
    name="short",
    about="plated holes at the grounded ends",
    keys=(
        Key(
            name="drill",
            about="finished diameter",
            kind="length",
            low="0.05 mm",
            high="5 mm",
            default="0.3 mm",
        ),
        Key(
            name="plating",
            about="tool diameter less finished diameter",
            kind="length",
            low="0.01 mm",
            high="0.5 mm",
            default="0.10 mm",
        ),
        Key(
            name="count",
            about="holes of each resonator",
            kind="integer",
            low=1,
            high=20,
            words=("auto",),
            default="auto",
        ),
        Key(
            name="pitch",
            about="between their centres",
            kind="length",
            low="0.1 mm",
            high="20 mm",
            default="0.7 mm",
        ),
    ),
)

BOARD = Table(
    name="board",
    about="the board and who makes it",
    keys=(
        Key(name="shop", about="shop of the library", default="standard"),
        Key(
            name="grid",
            about="step of all coordinates",
            kind="length",
            low="0.01 um",
            high="0.1 mm",
            default="1 um",
        ),
        Key(
            name="margin",
            about="ground border between the clear area and the board edge",
            kind="length",
            low="0.5 mm",
            high="100 mm",
            default="4 mm",
        ),
        Key(
            name="clearance",
            about="from resonators to top ground; 8 laminate thicknesses when auto",
            kind="length",
            low="0.1 mm",
            high="100 mm",
            words=("auto",),
            default="auto",
        ),
        Key(
            name="max_width",
            about="greatest width of the board",
            kind="length",
            low="1 mm",
            high="2 m",
            words=("none",),
            default="none",
        ),
        Key(
            name="max_height",
            about="greatest height of the board",
            kind="length",
            low="1 mm",
            high="2 m",
            words=("none",),
            default="none",
        ),
        Key(
            name="connector",
            about="copper at the board edge",
            choices=("edge pads", "none"),
            default="edge pads",
        ),
    ),
)

MARGIN = Table(
    name="margin",
    about="how much better than required the comb is sized, for loss and tolerances to use up",
    keys=(
        Key(
            name="return_loss",
            about="deeper than passband.return_loss, Chebyshev only",
            kind="level",
            low="0 dB",
            high="20 dB",
            default="0 dB",
        ),
        Key(
            name="bandwidth",
            about="wider than the pass band, half of it at each edge",
            kind="frequency",
            low="0 Hz",
            high="2 GHz",
            default="0 MHz",
        ),
    ),
)

SPEC = Table(
    name="",
    about="a filter specification",
    tables=(PART, PASSBAND, STOPBAND, MARGIN, CONSTRUCTION, LOAD, SHORT, BOARD),
)
