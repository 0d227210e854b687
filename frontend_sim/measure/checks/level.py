"""Evaluates a point of the chain at an instant."""

from __future__ import annotations

from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer, nearer
from frontend_sim.measure.checks.places import instants
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.result import Bound
from frontend_sim.scenario.checks.level import LevelCheck


def level(check: LevelCheck, subject: Subject) -> Answer:
    """Return the value of a point at an instant, which need not be one of a conversion."""
    value = float(subject.at_instants(check.point, [check.at])[0])

    def advice(side: Bound) -> str:
        limit = check.at_most if side == "at most" else check.at_least
        assert limit is not None
        way = "lower" if side == "at most" else "raise"
        by = f" by {words.voltage(abs(value - limit))}"
        if value * limit > 0.0:
            by += f", {words.percent(limit / value)}"
        return f"{way} the level{by}: gain, offset or stimulus"

    method = "the engine's own steps, at the instant"
    limits = check.at_least, check.at_most
    return nearer(value, *limits, "V", method, advice, lambda: instants(check.at))
