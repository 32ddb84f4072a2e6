"""Write a commented specification to begin with."""

from __future__ import annotations

import argparse
import re
from pathlib import Path

from layoutgen.cli.console import Console
from layoutgen.errors import InputError

__all__ = ["add_arguments", "run"]


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Where to write it."""
    parser.add_argument(
        "path",
        metavar="PATH",
        help="file to be made, for example my-filter.toml; its name becomes the part number",
    )


def run(args: argparse.Namespace, console: Console) -> bool:
    """Write the file, unless there is one already."""
    from layoutgen.spec import starter_text

    path = Path(args.path)
    number = part_number(path)
    try:
        with path.open("x", encoding="utf-8", newline="\n") as file:
            file.write(starter_text(number))
    except FileExistsError:
        raise InputError(
            str(path), "", None, "exists already and is left as it is; choose another name"
        ) from None
    except OSError as error:
        raise InputError(str(path), "", None, f"cannot be written: {error.strerror or error}") from error
    console.say(f"{path}: written, part number {number}. Next: layoutgen plan {path}")
    return True


def part_number(path: Path) -> str:
    """Part number from a file's name: characters that no part number may have become hyphens."""
    number = re.sub(r"[^A-Za-z0-9._-]+", "-", path.stem)[:64].lstrip(".-").rstrip("-")
    if not number:
        raise InputError(
            str(path), "", None, "has no name that makes a part number; write for example my-filter.toml"
        )
    return number
