"""A specification to begin with."""

from __future__ import annotations

__all__ = ["starter_text"]

_TEMPLATE = """\
# A comb-line band-pass filter. Quantities are text with a unit; "auto" leaves the choice to the program.
# Only lower, upper and substrate are mandatory: every other line may be removed and then takes its default.

[part]
number = "@NUMBER@"          # names the files; letters, digits, . _ -
title = "Receive pre-selector"
revision = "A"

[passband]
lower = "1.92 GHz"
upper = "2.05 GHz"
shape = "chebyshev"          # or "butterworth": then neither return_loss nor ripple, edges at 3 dB
return_loss = "20 dB"        # or ripple = "0.05 dB", not both
order = "auto"               # or 2 to 9; "auto" takes the smallest that meets the stop bands
# insertion_loss = "5 dB"    # a limit anywhere in the band, if there is one
impedance = "50 ohm"

[[stopband]]                 # as many as needed, none of them inside the pass band
from = "1.50 GHz"
to = "1.65 GHz"
rejection = "25 dB"

[[stopband]]
from = "2.35 GHz"
to = "2.60 GHz"
rejection = "30 dB"

[margin]                     # sized this much better than required, for loss and tolerances to use up
return_loss = "3 dB"
bandwidth = "10 MHz"

[construction]
kind = "microstrip"
substrate = "hydrocarbon-ceramic-3.55"   # from the library, or the path of a .toml file of your own
thickness = "0.813 mm"       # one that the laminate is stocked in, or "auto"
copper = "18 um"             # base foil; plating comes on top
plating = "25 um"
cover = "none"               # or the height of a metal cover above the laminate
line_width = "auto"
electrical_length = "auto"   # or 20 to 85 deg at the centre of the band

[load]
kind = "chip"                # chip capacitors; or "plate": a printed widening
case = "auto"                # or "0402", "0603", "0805"
series = "E24"               # or "E12", "0.1 pF", or a list: ["1.0 pF", "1.2 pF"]
value = "auto"
tolerance = "0.05 pF"
esr = "0.15 ohm"             # or q = 300 with q_frequency = "1 GHz"
inductance = "0 nH"          # of the part itself, beyond a plain conductor of its size

[short]
drill = "0.3 mm"             # finished diameter of the plated holes at the grounded ends
count = "auto"
pitch = "0.7 mm"

[board]
shop = "standard"            # or "advanced", or one of your own
grid = "1 um"
margin = "4 mm"
# max_width = "60 mm"
# max_height = "40 mm"
connector = "edge pads"      # or "none"
"""


def starter_text(number: str) -> str:
    """Text of a commented specification that loads as it stands.

    Parameters
    ----------
    number : str
        Part number to put into it; one that `load_spec` accepts.

    Returns
    -------
    str
        TOML.
    """
    return _TEMPLATE.replace("@NUMBER@", number)
