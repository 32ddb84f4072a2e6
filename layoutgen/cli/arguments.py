"""Arguments that several commands take, and the specification they name."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from layoutgen.spec import Spec

__all__ = ["add_spec_arguments", "add_substrates_argument", "folder_of", "spec_of"]


def add_spec_arguments(parser: argparse.ArgumentParser) -> None:
    """A specification, values changed for this run, a library folder."""
    parser.add_argument("spec", metavar="SPEC", help="specification, a TOML file")
    parser.add_argument(
        "--set",
        metavar="KEY=VALUE",
        action="append",
        default=[],
        dest="overrides",
        help="value for this run, of the specification (passband.order=4) or of the library files it "
        "uses (substrate.eps_r=3.48); may be repeated",
    )
    add_substrates_argument(parser)


def add_substrates_argument(parser: argparse.ArgumentParser) -> None:
    """A library folder of the user."""
    parser.add_argument("--substrates", metavar="DIR", help="library folder of your own, searched first")


def spec_of(args: argparse.Namespace) -> Spec:
    """The specification that the arguments name."""
    from layoutgen.spec import load_spec

    return load_spec(args.spec, overrides=args.overrides, substrates=folder_of(args))


def folder_of(args: argparse.Namespace) -> Path | None:
    """The user's own library folder."""
    return None if args.substrates is None else Path(args.substrates)
