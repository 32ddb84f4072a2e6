"""A TOML file on its way to values: read, changed for this run, checked, every fault collected."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from layoutgen.errors import InputError, InputErrors
from layoutgen.library.keys import Key, Table, did_you_mean

__all__ = ["SET", "Change", "Source", "read_toml"]

SET = "--set"
"""Where a value comes from that was changed for one run."""


@dataclass(frozen=True, kw_only=True, slots=True)
class Change:
    """A value that replaces one of a file for this run.

    Attributes
    ----------
    given : str
        Key as the user named it, for messages.
    path : str
        Dotted key inside the file; members of a list are counted from 1.
    text : str
        Value as the user wrote it.
    """

    given: str
    path: str
    text: str


class Source:
    """One file being read, and the faults found in it so far.

    Parameters
    ----------
    path : Path
        The file.
    layout : Table
        What the file may hold.
    changes : sequence of Change
        Values replaced for this run.

    Attributes
    ----------
    where : str
        The file, for messages.
    data : dict
        What the file holds, changes included.
    faults : list of InputError
        So far.
    defaults : list of str
        ``"key = value"`` of each key that was absent.
    """

    def __init__(self, path: Path, layout: Table, changes: Sequence[Change] = ()) -> None:
        self.where = str(path)
        self.data = read_toml(path)
        self.faults: list[InputError] = []
        self.defaults: list[str] = []
        self.changed: dict[str, Change] = {}
        self._layout = layout
        for change in changes:
            self._apply(change)

    def read(self) -> dict[str, Any]:
        """Checked values in SI units, nested as in the file; a faulty one is left out."""
        return self._read(self._layout, self.data, "")

    def fault(self, key: str, remedy: str, *, blame: Sequence[str] = ()) -> None:
        """Note a fault of a key.

        Parameters
        ----------
        key : str
            Dotted key; its value as written is looked up.
        remedy : str
            What would work.
        blame : sequence of str
            Further keys that take part. One that was changed for this run is named instead of `key`.
        """
        changed = next((self.changed[name] for name in (key, *blame) if name in self.changed), None)
        if changed is not None:
            self.faults.append(InputError(SET, changed.given, as_written(changed.text), remedy))
        else:
            self.faults.append(InputError(self.where, key, as_written(self.written(key)), remedy))

    def written(self, key: str) -> object:
        """Value of a dotted key as it stands in the file, changes included; None when absent."""
        node: Any = self.data
        for part in key.split("."):
            if isinstance(node, dict):
                node = node.get(part)
            elif isinstance(node, list) and part.isdecimal() and 0 < int(part) <= len(node):
                node = node[int(part) - 1]
            else:
                return None
        return node

    def count(self, table: str) -> int:
        """How many tables ``[[table]]`` the file has, faulty ones included."""
        raw = self.data.get(table)
        return len(raw) if isinstance(raw, list) else 0

    def texts(self) -> dict[str, str]:
        """Every dotted key of the file, changes included, with its value as text."""
        return {key: _text_of(self.written(key)) for key in _walk(self.data)}

    def raise_faults(self) -> None:
        """Raise InputErrors if there is any fault, in the order of the file."""
        if self.faults:
            order = {key: position for position, key in enumerate(_walk(self.data))}
            ranked = sorted(self.faults, key=lambda fault: order.get(fault.key, len(order)))
            raise InputErrors(ranked)

    def _read(self, layout: Table, data: Mapping[str, object], at: str) -> dict[str, Any]:
        keys = {key.name: key for key in layout.keys}
        tables = {table.name: table for table in layout.tables}
        for name in data:
            if name not in keys and name not in tables:
                known = [*keys, *tables]
                hint = did_you_mean(name, known) or f"; known: {', '.join(known)}"
                self.fault(at + name, f"unknown {'key' if keys else 'table'}{hint}")
        values: dict[str, Any] = {}
        for key in layout.keys:
            self._read_key(key, data, at, values)
        for table in layout.tables:
            values[table.name] = self._read_table(table, data.get(table.name), f"{at}{table.name}")
        return values

    def _read_key(self, key: Key, data: Mapping[str, object], at: str, values: dict[str, Any]) -> None:
        raw = data.get(key.name, key.default)
        if raw is None:
            if key.required:
                example = f"; write for example {key.name} = {key.example}" if key.example else ""
                self.fault(at + key.name, f"is missing{example}")
            else:
                values[key.target] = None
            return
        if key.name not in data:
            self.defaults.append(f"{at}{key.name} = {raw}")
        try:
            values[key.target] = key.parse(raw)
        except ValueError as error:
            self.fault(at + key.name, str(error))

    def _read_table(self, table: Table, raw: object, at: str) -> Any:
        if table.many:
            return self._read_list(table, raw, at)
        if raw is not None and not isinstance(raw, dict):
            self.fault(at, f"must be a table; write [{at}] on a line of its own, its keys below")
            return {}
        return self._read(table, raw or {}, f"{at}.")

    def _read_list(self, table: Table, raw: object, at: str) -> list[dict[str, Any]]:
        if raw is None and not table.least:
            return []
        entries = raw if isinstance(raw, list) else []
        if not isinstance(raw, list | None) or not all(isinstance(entry, dict) for entry in entries):
            self.fault(at, f"must be a list of tables; write [[{at}]], in double brackets, for each")
            return []
        if len(entries) < table.least:
            self.fault(at, f"is missing; write at least {table.least} table [[{at}]]")
        return [self._read(table, entry, f"{at}.{n}.") for n, entry in enumerate(entries, start=1)]

    def _apply(self, change: Change) -> None:
        """Put a changed value where the file would have it; the path is a known one."""
        *tables, name = change.path.split(".")
        layout, node = self._layout, self.data
        while tables:
            head = tables.pop(0)
            layout = next(table for table in layout.tables if table.name == head)
            inner: Any = node.setdefault(head, [] if layout.many else {})
            if layout.many and isinstance(inner, list):
                number = int(tables.pop(0))
                if not 0 < number <= len(inner):
                    remedy = f"there is no number {number}; the file has {len(inner)} [[{head}]]"
                    self.faults.append(InputError(SET, change.given, change.text, remedy))
                    return
                inner = inner[number - 1]
            if not isinstance(inner, dict):
                return  # the file is at fault here, and reading it says so
            node = inner
        key = next(key for key in layout.keys if key.name == name)
        node[name] = literal(change.text, key)
        self.changed[change.path] = change


def read_toml(path: Path) -> dict[str, Any]:
    """Content of a TOML file.

    Raises
    ------
    InputError
        If the file is absent, a directory, unreadable, empty, not UTF-8 or not TOML.
    """
    data = _parse(path, _text(path))
    if not data:
        raise InputError(str(path), "", None, "is empty; it must hold at least the mandatory keys")
    return data


def literal(text: str, key: Key) -> object:
    """Value of a text from the command line: a TOML value if it is one, else the text itself.

    A key that holds text takes anything but a quoted string as it stands, so that ``revision=2`` is text.
    """
    try:
        found = tomllib.loads(f"value = {text}")
    except (ValueError, RecursionError):
        return text
    if found.keys() != {"value"} or (key.kind == "text" and not isinstance(found["value"], str)):
        return text
    return found["value"]


def as_written(raw: object) -> object:
    """A value fit for one line of a message."""
    if isinstance(raw, int) and not isinstance(raw, bool) and abs(raw) > 10**30:
        return "a number of more than 30 digits"
    if isinstance(raw, str | list | dict):
        text = raw if isinstance(raw, str) else str(raw)
        return text if len(text) <= 100 else text[:97] + "..."
    return raw


def _text_of(raw: object) -> str:
    return ", ".join(str(item) for item in raw) if isinstance(raw, list) else str(raw)


def _text(path: Path) -> str:
    where = str(path)
    if "\0" in where:
        raise InputError(repr(where), "", None, "is not a possible file name")
    try:
        if path.exists() and not path.is_file():
            what = "a directory" if path.is_dir() else "not a regular file"
            raise InputError(where, "", None, f"is {what}; name a TOML file")
        content = path.read_bytes()
    except FileNotFoundError:
        raise InputError(where, "", None, "does not exist; check the name and the folder") from None
    except OSError as error:
        raise InputError(where, "", None, f"cannot be read: {error.strerror or error}") from None
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        raise InputError(where, "", None, f"is not UTF-8 text (line {line}); save it as UTF-8") from None


def _parse(path: Path, text: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except RecursionError:
        raise InputError(str(path), "", None, "is not usable TOML: brackets are nested too deeply") from None
    except ValueError as error:  # a syntax error, or a number that Python refuses to convert
        says = re.sub(r"^(\w)", lambda match: match[1].lower(), str(error))
        raise InputError(str(path), "", None, f"is not valid TOML: {says}") from None


def _walk(data: Mapping[str, object], at: str = "") -> Iterable[str]:
    for name, raw in data.items():
        yield at + name
        if isinstance(raw, dict):
            yield from _walk(raw, f"{at}{name}.")
        elif isinstance(raw, list):
            for number, entry in enumerate(raw, start=1):
                if isinstance(entry, dict):
                    yield from _walk(entry, f"{at}{name}.{number}.")
