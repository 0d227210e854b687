"""Verdicts: the checks of a scenario, held against its run."""

from frontend_sim.measure.checks.before_run import checks_before_run
from frontend_sim.measure.checks.evaluate import evaluate_checks, evaluated, refuse_impossible
from frontend_sim.measure.checks.keeper import Keeper
from frontend_sim.measure.checks.table import EVALUATIONS, Evaluation

__all__ = [
    "EVALUATIONS",
    "Evaluation",
    "Keeper",
    "checks_before_run",
    "evaluate_checks",
    "evaluated",
    "refuse_impossible",
]
