"""From a requirement to a sized comb."""

from layoutgen.sizing.choices import Note
from layoutgen.sizing.size import Sizing, size

__all__ = ["Note", "Sizing", "size"]
