"""Which checks give the same answer whatever the seed."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from types import SimpleNamespace
from typing import Any

from frontend_sim.measure.checks.table import EVALUATIONS
from frontend_sim.scenario.checks.rules import labels

_OF_CODES = frozenset(["codes", "voltage", "overrange"])
"""Columns of a run that noise moves."""


def quiet_checks(
    scenarios: Iterable[Mapping[str, Any]], random_pin: bool = False
) -> frozenset[str]:
    """Return the labels of the checks that noise does not move, in none of some scenarios.

    A check is moved by noise if it reads the codes, or the pin where that is random itself.

    Parameters
    ----------
    scenarios : as ``Scenario.resolved`` gives them
    random_pin : whether the stimulus or the instants are random
    """
    every: set[str] = set()
    moved: set[str] = set()
    for values in scenarios:
        checks = [SimpleNamespace(**{"name": "", **check}) for check in values.get("check", ())]
        for check, label in zip(checks, labels(checks), strict=True):  # type: ignore[arg-type]  # labels ask for name and kind alone
            every.add(label)
            known = EVALUATIONS.get(check.kind)
            columns = frozenset(known.columns) if known is not None else _OF_CODES
            if columns & _OF_CODES or (random_pin and columns):
                moved.add(label)
    return frozenset(every - moved)
