"""Size a filter and print what it would be and do; write nothing."""

from __future__ import annotations

import argparse

from layoutgen.cli.arguments import add_spec_arguments, spec_of
from layoutgen.cli.console import Console

__all__ = ["add_arguments", "run"]


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """The specification."""
    add_spec_arguments(parser)


def run(args: argparse.Namespace, console: Console) -> bool:
    """Print the plan; True when every requirement is met."""
    spec = spec_of(args)
    console.progress("sizing")
    from layoutgen.design import design
    from layoutgen.report.plan import plan_text

    planned = design(spec)
    console.say(plan_text(planned))
    return planned.verdict.met
