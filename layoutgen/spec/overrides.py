"""Values given for one run: ``KEY=VALUE`` from the command line, sorted by the file they belong to."""

from __future__ import annotations

import re
from collections.abc import Sequence

from layoutgen.errors import InputError
from layoutgen.library import CHIP_CASE, LAMINATE, SET, SHOP, Change, nearest
from layoutgen.spec.keys import SPEC

__all__ = ["SCOPES", "sort_overrides"]

SCOPES = {"substrate": LAMINATE, "case": CHIP_CASE, "shop": SHOP}
"""First part of a key that belongs to a library file, and what the file may hold."""


def sort_overrides(overrides: Sequence[str]) -> tuple[dict[str, list[Change]], list[InputError]]:
    """Changes of each file, and the faults of those that name no known key.

    Parameters
    ----------
    overrides : sequence of str
        ``"KEY=VALUE"`` each. Keys of the specification stand as they are; those of the library files
        in use begin with ``substrate.``, ``case.`` or ``shop.``.

    Returns
    -------
    changes : dict
        By scope; the specification's own under the empty name.
    faults : list of InputError
        One for each override that cannot be used.
    """
    known = _known()
    changes: dict[str, list[Change]] = {scope: [] for scope in ("", *SCOPES)}
    faults: list[InputError] = []
    for override in overrides:
        given, equals, text = (part.strip() for part in override.partition("="))
        if not equals:
            faults.append(InputError(SET, override, None, "must be KEY=VALUE, for example passband.order=4"))
        elif not text:
            faults.append(InputError(SET, given, None, "has no value; write KEY=VALUE"))
        elif re.sub(r"\.\d{1,6}\.", ".1.", given) not in known:
            faults.append(InputError(SET, given, text, f"unknown key; {_suggestion(given, known)}"))
        else:
            scope, _, path = given.partition(".")
            inside = scope in SCOPES
            change = Change(given=given, path=path if inside else given, text=text)
            changes[scope if inside else ""].append(change)
    return changes, faults


def _known() -> list[str]:
    own = [name for name, _ in SPEC.dotted()]
    return own + [name for scope, table in SCOPES.items() for name, _ in table.dotted(f"{scope}.")]


def _suggestion(given: str, known: list[str]) -> str:
    same_end = [name for name in known if name.split(".")[-1] == given.split(".")[-1]]
    like = nearest(given, same_end or known) or next(iter(same_end), None)
    if like:
        return f'did you mean "{like}"?'
    return "a key is a table and a name, for example passband.order or substrate.eps_r"
