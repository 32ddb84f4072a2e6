"""The library files: laminates, chip cases with their land patterns, board shops."""

from __future__ import annotations

from layoutgen.library.entries import ChipCase, Copper, Etching, Laminate, Shop, Thickness
from layoutgen.library.keys import Checked, Key, Table, nearest
from layoutgen.library.layouts import CHIP_CASE, LAMINATE, SHOP
from layoutgen.library.shelf import Library, default_library, read_chip_case, read_laminate, read_shop
from layoutgen.library.source import SET, Change, Source, read_toml

__all__ = [
    "CHIP_CASE",
    "LAMINATE",
    "SET",
    "SHOP",
    "Change",
    "Checked",
    "ChipCase",
    "Copper",
    "Etching",
    "Key",
    "Laminate",
    "Library",
    "Shop",
    "Source",
    "Table",
    "Thickness",
    "default_library",
    "nearest",
    "read_chip_case",
    "read_laminate",
    "read_shop",
    "read_toml",
]
