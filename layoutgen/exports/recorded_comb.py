"""A comb as plain data with units in the key names, and back.

The two directions walk the same dataclasses, so that a dimension added to the comb is recorded and read
without a line here, unless it is neither a length nor without unit.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import fields, is_dataclass
from typing import Any

from layoutgen.comb import ChipLoad, Comb, Feed, Launch, Resonator, Segment, Stack, ViaRow
from layoutgen.errors import InputError

__all__ = ["MM", "comb_data", "comb_of", "rounded"]

MM = 1e3
"""Millimetres in a metre."""

_DECIMALS = 9
"""Of every recorded number: picometres, attofarads; far below any grid, far above the noise of doubles."""

_PARTS: dict[str, type] = {
    "stack": Stack,
    "resonators": Resonator,
    "segments": Segment,
    "short": ViaRow,
    "vias": ViaRow,
    "load": ChipLoad,
    "feeds": Feed,
    "launch": Launch,
}
_KEYS: dict[str, tuple[str, float]] = {
    "capacitance": ("capacitance_pf", 1e12),
    "tolerance": ("tolerance_pf", 1e12),
    "resistance": ("resistance_ohm", 1.0),
    "inductance": ("inductance_nh", 1e9),
    "impedance": ("impedance_ohm", 1.0),
    "conductivity": ("conductivity_s_per_m", 1.0),
    "roughness": ("roughness_um", 1e6),
    "eps_r": ("eps_r", 1.0),
    "tan_delta": ("tan_delta", 1.0),
}
"""Key and factor of each value that is no length."""

_AS_THEY_ARE = {"count": "count", "case": "case", "side": "side", "resonator": "resonator_index"}


def rounded(value: float, factor: float = 1.0) -> float:
    """A number for a file: scaled, and rid of the last digits that only arithmetic put there."""
    return round(value * factor, _DECIMALS) + 0.0


def comb_data(comb: Comb) -> dict[str, Any]:
    """A comb as nested dictionaries; lengths in millimetres, indices from 0."""
    return _data(comb)


def comb_of(data: Mapping[str, Any]) -> Comb:
    """The comb of `comb_data`'s result; further keys are ignored.

    Raises
    ------
    InputError
        If a dimension is missing, or the numbers make no comb.
    """
    comb = _object(Comb, data)
    assert isinstance(comb, Comb)
    return comb


def _data(thing: Any) -> dict[str, Any]:
    found: dict[str, Any] = {}
    for field in fields(thing):
        value = getattr(thing, field.name)
        if field.name in _PARTS:
            found[field.name] = _nested(value)
        elif field.name in _AS_THEY_ARE:
            found[_AS_THEY_ARE[field.name]] = value
        else:
            key, factor = _KEYS.get(field.name, (f"{field.name}_mm", MM))
            found[key] = _scaled(value, factor)
    return found


def _nested(value: Any) -> Any:
    if value is None or is_dataclass(value):
        return None if value is None else _data(value)
    return [_data(part) for part in value]


def _scaled(value: Any, factor: float) -> Any:
    if value is None:
        return None
    return [rounded(v, factor) for v in value] if isinstance(value, tuple) else rounded(value, factor)


def _object(kind: type, data: Mapping[str, Any]) -> object:
    values: dict[str, Any] = {}
    for field in fields(kind):
        if field.name in _PARTS:
            values[field.name] = _part(_PARTS[field.name], _get(kind, data, field.name))
        elif field.name in _AS_THEY_ARE:
            values[field.name] = _get(kind, data, _AS_THEY_ARE[field.name])
        else:
            key, factor = _KEYS.get(field.name, (f"{field.name}_mm", MM))
            values[field.name] = _unscaled(_get(kind, data, key), factor)
    return kind(**values)


def _get(kind: type, data: Mapping[str, Any], key: str) -> Any:
    if key not in data:
        raise InputError("design record", f"{kind.__name__.lower()}.{key}", None, "is missing")
    return data[key]


def _part(kind: type, value: Any) -> Any:
    if value is None or isinstance(value, Mapping):
        return None if value is None else _object(kind, value)
    return tuple(_object(kind, part) for part in value)


def _unscaled(value: Any, factor: float) -> Any:
    if value is None:
        return None
    return tuple(v / factor for v in value) if isinstance(value, list) else value / factor
