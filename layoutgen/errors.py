"""The error family: everything layoutgen raises on purpose descends from LayoutError."""

from __future__ import annotations

from collections.abc import Iterable


class LayoutError(Exception):
    """Anything layoutgen refuses or cannot do; never a fault of its own."""


class InputError(LayoutError, ValueError):
    """A value from a file or a call that cannot be used; the parts stay on the object.

    Attributes
    ----------
    where : str
        File, table entry or function the value belongs to.
    key : str
        Name of the value, dotted as in the file (``passband.lower``).
    got : object
        The value as the user wrote it; None when it is absent.
    remedy : str
        What would work.
    """

    def __init__(self, where: str, key: str, got: object, remedy: str) -> None:
        self.where, self.key, self.got, self.remedy = where, key, got, remedy
        subject = f"{key} = {_shown(got)}" if got is not None else key
        super().__init__(": ".join(part for part in (where, subject, remedy) if part))


class InputErrors(LayoutError, ValueError):
    """Every fault found in one reading, in the order of the file.

    Attributes
    ----------
    faults : tuple of InputError
        At least one.
    """

    def __init__(self, faults: Iterable[InputError]) -> None:
        self.faults = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class PhysicalRefusal(InputError):
    """A valid request that this construction cannot fulfil; says the figure and what would help."""


class ReadBackError(LayoutError):
    """A file that was written does not read back as what was meant."""


class ModelRangeWarning(UserWarning):
    """A model is used near or beyond the limits its source states."""


def require_inside(where: str, key: str, values: object, low: float, high: float) -> None:
    """Raise InputError unless every value lies in ``low`` to ``high``; not-a-number is outside."""
    import numpy as np

    array = np.asarray(values, dtype=float)
    inside = (array >= low) & (array <= high)
    if not bool(np.all(inside)):
        worst = float(array[~inside].flat[0]) if array.ndim else float(array)
        raise InputError(where, key, f"{worst:.6g}", f"must lie between {low:g} and {high:g}")


def _shown(value: object) -> str:
    if isinstance(value, bool):
        return str(value).lower()  # as TOML spells it
    return f'"{value}"' if isinstance(value, str) and not _is_number(value) else str(value)


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True
