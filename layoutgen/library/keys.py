"""What a key of a file may hold: one definition that reads, checks and explains.

A file is described by a `Table` of `Key` and further tables. The reader, the list of known keys and
the limits that physical objects check all come from that one description.
"""

from __future__ import annotations

import math
import operator
import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from difflib import get_close_matches
from itertools import pairwise
from typing import Any

from layoutgen.errors import InputError
from layoutgen.units import UNITS, parse_quantity

__all__ = ["Checked", "Key", "Table", "nearest"]

Limit = str | float | None


@dataclass(frozen=True, kw_only=True, slots=True)
class Key:
    """One key of a table.

    Attributes
    ----------
    name : str
        As written in the file.
    about : str
        Meaning, in a few words.
    kind : str
        ``"text"``, ``"number"``, ``"integer"``, or a dimension of `layoutgen.units.UNITS`, whose
        values are strings with a unit.
    example : str
        What a user could write, quotes included.
    required : bool
        Whether its absence is a fault.
    default : str, int, float or None
        Used when the key is absent, as a user would write it; None leaves it without a value.
    low, high, above, below : str, float or None
        Limits, the first two included; quantities are written with their unit.
    words : tuple of str
        Words that stand for no value (``"auto"``, ``"none"``).
    choices : tuple of str
        The words allowed; for a quantity, words allowed besides it.
    later : tuple of str
        Words with a meaning that this version does not offer yet.
    many : bool
        Whether a list of values is allowed as well.
    pattern, pattern_says : str
        Regular expression of the whole text, and its meaning in words.
    field : str
        Name of the value in the program, where it differs from `name`.
    """

    name: str
    about: str
    kind: str = "text"
    example: str = ""
    required: bool = False
    default: str | int | float | None = None
    low: Limit = None
    high: Limit = None
    above: Limit = None
    below: Limit = None
    words: tuple[str, ...] = ()
    choices: tuple[str, ...] = ()
    later: tuple[str, ...] = ()
    many: bool = False
    pattern: str = ""
    pattern_says: str = ""
    field: str = ""

    @property
    def target(self) -> str:
        """Name of the value in the program."""
        return self.field or self.name

    def parse(self, raw: object) -> Any:
        """Value in SI units; None for a word that stands for no value.

        Raises
        ------
        ValueError
            With a message that says what would work.
        """
        if isinstance(raw, str) and raw in self.words:
            return None
        if isinstance(raw, str) and raw in self.choices:
            return raw
        if self.many and isinstance(raw, list):
            return self._parse_list(raw)
        if self.kind == "text":
            return self._parse_text(raw)
        value = self._parse_quantity(raw) if self.kind in UNITS else self._parse_number(raw)
        self.require_limits(value)
        return value

    def require_limits(self, value: float) -> None:
        """Raise ValueError with the limits unless the value is within them; not-a-number is outside."""
        tests = (
            (self.low, "at least", operator.ge),
            (self.above, "greater than", operator.gt),
            (self.high, "at most", operator.le),
            (self.below, "below", operator.lt),
        )
        stated = [(limit, says, holds) for limit, says, holds in tests if limit is not None]
        if not all(holds(value, self._limit(limit)) for limit, _, holds in stated):
            limits = " and ".join(f"{says} {_plain(limit)}" for limit, says, _ in stated)
            raise ValueError(f"must be {limits}")

    def _limit(self, limit: str | float) -> float:
        return parse_quantity(limit, self.kind) if isinstance(limit, str) else limit

    def _parse_list(self, raw: list[object]) -> tuple[Any, ...]:
        if not raw:
            raise ValueError("must hold at least one value")
        values = sorted(self._parse_item(number, item) for number, item in enumerate(raw, start=1))
        if any(math.isclose(a, b, rel_tol=1e-9) for a, b in pairwise(values)):
            raise ValueError("must not hold the same value twice")
        return tuple(values)

    def _parse_item(self, number: int, item: object) -> float:
        try:
            value = parse_quantity(item, self.kind)
            self.require_limits(value)
        except ValueError as error:
            raise ValueError(f"value {number} of the list: {error}") from None
        return value

    def _parse_text(self, raw: object) -> str:
        if not isinstance(raw, str):
            raise ValueError("must be text in quotes")
        if raw in self.later:
            raise ValueError(f"is not available in this version; write {self._listed_words()}")
        if self.choices or (self.words and not self.pattern):
            raise ValueError(f"must be {self._listed_words()}" + did_you_mean(raw, self.choices + self.words))
        if not raw.strip():
            raise ValueError("must not be empty")
        if self.pattern and not re.fullmatch(self.pattern, raw):
            raise ValueError(f"must be {self.pattern_says}")
        return raw

    def _parse_quantity(self, raw: object) -> float:
        try:
            return parse_quantity(raw, self.kind)
        except ValueError as error:
            named = self._listed_words()
            raise ValueError(f"{error}, or {named}" if named else str(error)) from None

    def _parse_number(self, raw: object) -> float:
        noun = "a whole number" if self.kind == "integer" else "a bare number"
        kinds = int if self.kind == "integer" else (int, float)
        if isinstance(raw, bool) or not isinstance(raw, kinds):
            named = self._listed_words()
            raise ValueError(f"must be {noun}, without quotes" + (f", or {named}" if named else ""))
        if isinstance(raw, float) and not math.isfinite(raw):
            raise ValueError("must be finite")
        return raw if self.kind == "integer" or abs(raw) > 1e300 else float(raw)

    def _listed_words(self) -> str:
        words = [f'"{word}"' for word in self.choices + self.words]
        return " or ".join([", ".join(words[:-1]), words[-1]] if len(words) > 1 else words)


@dataclass(frozen=True, kw_only=True, slots=True)
class Table:
    """One table of a file, or the file itself.

    Attributes
    ----------
    name : str
        As written in the file; empty for the file itself.
    about : str
        Meaning, in a few words.
    keys : tuple of Key
        Its keys.
    tables : tuple of Table
        The tables inside it.
    many : bool
        Whether it is a list of tables, ``[[name]]``.
    least : int
        Smallest number of tables in the list.
    """

    name: str
    about: str
    keys: tuple[Key, ...] = ()
    tables: tuple[Table, ...] = ()
    many: bool = False
    least: int = 0

    def dotted(self, at: str = "") -> Iterator[tuple[str, Key]]:
        """Every key below this table by its dotted name; members of a list by ``1``."""
        for key in self.keys:
            yield f"{at}{key.name}", key
        for table in self.tables:
            yield from table.dotted(f"{at}{table.name}.{'1.' if table.many else ''}")


class Checked:
    """Limits of a physical object, from the keys of its file, checked when it is made."""

    __slots__ = ()

    def _require_keys(self, keys: Iterable[Key]) -> None:
        for key in keys:
            value = getattr(self, key.target, None)
            if isinstance(value, int | float):
                try:
                    key.require_limits(value)
                except ValueError as error:
                    raise InputError(type(self).__name__, key.target, value, str(error)) from None

    def _require(self, holds: bool, key: str, remedy: str) -> None:
        if not holds:
            raise InputError(type(self).__name__, key, getattr(self, key), remedy)


def nearest(name: str, known: Iterable[str]) -> str | None:
    """The known name most like the one given, if any is like it at all."""
    by_lower = {candidate.lower(): candidate for candidate in known}
    found = get_close_matches(name.lower(), by_lower, n=1, cutoff=0.5)
    return by_lower[found[0]] if found else None


def did_you_mean(name: str, known: Iterable[str]) -> str:
    """Tail of a remedy that names the nearest known name, or nothing."""
    like = nearest(name, known)
    return f'; did you mean "{like}"?' if like else ""


def _plain(limit: str | float) -> str:
    return limit if isinstance(limit, str) else f"{limit:g}"
