"""List the library of laminates, chip cases and shops, or show one entry whole."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from layoutgen.cli.arguments import add_substrates_argument, folder_of
from layoutgen.cli.console import Console

if TYPE_CHECKING:
    from layoutgen.library import ChipCase, Laminate, Library, Shop

__all__ = ["add_arguments", "run"]


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Which entry."""
    parser.add_argument(
        "name",
        metavar="NAME",
        nargs="?",
        help="entry to show, or a laminate's own .toml file; without it, the list",
    )
    add_substrates_argument(parser)


def run(args: argparse.Namespace, console: Console) -> bool:
    """Print the list or the entry."""
    from layoutgen.library import default_library
    from layoutgen.report.shelf import entry_text, shelf_text

    library = default_library(folder_of(args))
    console.say(shelf_text(library) if args.name is None else entry_text(_entry(library, args.name)))
    return True


def _entry(library: Library, name: str) -> Laminate | ChipCase | Shop:
    """A chip case or shop of the name, or else a laminate; an unknown name gets the list of laminates."""
    from layoutgen.library import read_laminate

    if name.endswith(".toml"):
        return read_laminate(Path(name))
    for folder, find in (("parts", library.chip_case), ("shops", library.shop)):
        if any((directory / folder / f"{name}.toml").is_file() for directory in library.directories):
            return find(name)
    return library.laminate(name)
