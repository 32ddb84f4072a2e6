"""Size a filter and write its package: artwork, responses, record, pictures, summary."""

from __future__ import annotations

import argparse
import json
from pathlib import Path
from typing import TYPE_CHECKING

from layoutgen.cli.arguments import add_spec_arguments, spec_of
from layoutgen.cli.console import Console

if TYPE_CHECKING:
    from layoutgen.design import Design
    from layoutgen.package import Package

__all__ = ["add_arguments", "run"]


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """The specification, where the package goes, how the outcome is printed."""
    add_spec_arguments(parser)
    parser.add_argument(
        "--out", metavar="DIR", help="the package folder itself (default: outputs/<part number>)"
    )
    parser.add_argument("--json", action="store_true", help="print the outcome as JSON")


def run(args: argparse.Namespace, console: Console) -> bool:
    """Deliver the package and print the outcome; True when every requirement is met."""
    spec = spec_of(args)
    from layoutgen.package import check_target, default_target, deliver

    target = Path(args.out) if args.out is not None else default_target(spec.part.number)
    check_target(target)
    console.progress("sizing")
    from layoutgen.design import design

    built = design(spec)
    console.progress("writing")
    package = deliver(built, target)
    if args.json:
        console.result(_outcome_json(built, package))
    else:
        console.say(_outcome_text(built, package))
    return built.verdict.met


def _outcome_text(built: Design, package: Package) -> str:
    from layoutgen.report import sections
    from layoutgen.report.plan import title
    from layoutgen.report.text import figures, heading

    lines = [
        *title(built),
        *sections.requirements(built),
        *sections.help_wanted(built),
        *sections.warnings(built),
        *sections.overrides(built),
        *heading(f"Package: {package.directory}"),
    ]
    return "\n".join([*lines, *figures([(file.name, file.purpose) for file in package.files])])


def _outcome_json(built: Design, package: Package) -> str:
    from layoutgen.exports.record import judgement_data, performance_data

    return json.dumps(
        {
            "number": built.spec.part.number,
            "directory": str(package.directory),
            "met": built.verdict.met,
            "requirements": [judgement_data(judgement) for judgement in built.verdict.judgements],
            "predicted": performance_data(built.verdict.performance),
            "warnings": list(built.warnings),
            "overrides": list(built.spec.overrides),
            "files": [{"name": file.name, "purpose": file.purpose} for file in package.files],
        },
        indent=2,
    )
