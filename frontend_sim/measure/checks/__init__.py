"""Verdicts: the checks of a scenario, held against its run."""

from frontend_sim.measure.checks.before_run import checks_before_run
from frontend_sim.measure.checks.evaluate import evaluate_checks, evaluated, subject_of_run
from frontend_sim.measure.checks.failures import extent_of, failures_in
from frontend_sim.measure.checks.impossible import refuse_impossible
from frontend_sim.measure.checks.keeper import Keeper
from frontend_sim.measure.checks.table import EVALUATIONS, Evaluation
from frontend_sim.measure.checks.verdict import verdicts_on

__all__ = [
    "EVALUATIONS",
    "Evaluation",
    "Keeper",
    "checks_before_run",
    "evaluate_checks",
    "evaluated",
    "extent_of",
    "failures_in",
    "refuse_impossible",
    "subject_of_run",
    "verdicts_on",
]
