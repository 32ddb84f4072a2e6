"""Low-pass prototypes, band-pass transformation, couplings and the ideal reference response."""

from layoutgen.synthesis.bandpass import Couplings, couplings, ladder_response, normalised_frequency
from layoutgen.synthesis.prototype import (
    butterworth_g,
    chebyshev_g,
    first_order_estimate,
    return_loss_of_ripple,
    ripple_factor,
    ripple_of_return_loss,
)

__all__ = [
    "Couplings",
    "butterworth_g",
    "chebyshev_g",
    "couplings",
    "first_order_estimate",
    "ladder_response",
    "normalised_frequency",
    "return_loss_of_ripple",
    "ripple_factor",
    "ripple_of_return_loss",
]
