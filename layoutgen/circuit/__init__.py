"""From a comb to its response: network, S-parameters, losses, verdict."""

from layoutgen.circuit.network import ALL_LOSSES, NO_LOSSES, Circuit, Mechanism
from layoutgen.circuit.performance import Performance, Spurious, attenuation_db, box_mode, measure, unloaded_q
from layoutgen.circuit.sections import Section, SectionSolver, cut_into_sections
from layoutgen.circuit.verdict import Judgement, Verdict, judge, meets_stopbands

__all__ = [
    "ALL_LOSSES",
    "NO_LOSSES",
    "Circuit",
    "Judgement",
    "Mechanism",
    "Performance",
    "Section",
    "SectionSolver",
    "Spurious",
    "Verdict",
    "attenuation_db",
    "box_mode",
    "cut_into_sections",
    "judge",
    "measure",
    "meets_stopbands",
    "unloaded_q",
]
