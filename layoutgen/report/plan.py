"""The plan: what would be built and what it would do, as plain text."""

from __future__ import annotations

from layoutgen.design import Design
from layoutgen.report import sections
from layoutgen.report.text import paragraph

__all__ = ["body", "plan_text", "title"]


def plan_text(design: Design) -> str:
    """Plan of a design, in lines of at most 80 columns."""
    return "\n".join([*title(design), *body(design)]) + "\n"


def title(design: Design) -> list[str]:
    """Part, specification and outcome."""
    part = design.spec.part
    head = paragraph(f"{part.number} revision {part.revision}: {part.title}")
    rule = "=" * max(len(line) for line in head)
    return [
        *head,
        rule,
        *paragraph(f"Specification: {design.spec.path.name}"),
        *paragraph(sections.verdict_line(design)),
    ]


def body(design: Design) -> list[str]:
    """Everything that is known about a design before it is drawn."""
    parts = (
        sections.requirements,
        sections.help_wanted,
        sections.warnings,
        sections.overrides,
        sections.filter_values,
        sections.dimensions,
        sections.board,
        sections.material,
        sections.predicted,
        sections.losses,
        sections.choices,
        sections.defaults,
    )
    return [line for part in parts for line in part(design)]
