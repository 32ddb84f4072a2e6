"""The requirement: read, checked, every fault at once; values remember how the user wrote them."""

from __future__ import annotations

from layoutgen.spec.keys import SPEC
from layoutgen.spec.reader import load_spec
from layoutgen.spec.requirement import (
    Board,
    Construction,
    Load,
    Margin,
    Part,
    Passband,
    Short,
    Spec,
    Stopband,
)
from layoutgen.spec.starter import starter_text

__all__ = [
    "SPEC",
    "Board",
    "Construction",
    "Load",
    "Margin",
    "Part",
    "Passband",
    "Short",
    "Spec",
    "Stopband",
    "load_spec",
    "starter_text",
]
