"""What of a scenario can be changed by a little: parts, rates, times, levels."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any, TypeVar

from frontend_sim.quantities import Dimension, Limit, Part
from frontend_sim.scenario.key import find, numeric_keys, text_of
from frontend_sim.scenario.scan_scenario import AnyScenario
from frontend_sim.scenario.vary import with_values
from frontend_sim.values import Value

Kind = TypeVar("Kind", bound=Value)

LIMITS = ("at_least", "at_most", "within", "before", "timer_clock")
"""Keys of a check that say what is asked, and move no measure."""

WITHOUT_EFFECT = ("waveform_rate", "accuracy", "prewarp", "duration")
"""Keys of ``[simulation]`` that say how is computed; ``grid_rate`` is one of a run."""

DESIGN = re.compile(r"(?:^|\.)(?:chain\[|adc\.(?:rate|modulator_rate|bits|averaging|oversampling))")
"""Keys that are a designer's to choose; the stimulus, the place and the converter's errors are
given."""


@dataclass(frozen=True)
class Parameter:
    """A key with a number other than zero.

    Parameters
    ----------
    key : see ``frontend_sim.scenario.key``
    value : in SI
    dimension : what is measured; None for a bare or whole number
    tolerance : of the part, as a share; 0 where there is none
    whole : whether it is a whole number, which has no smaller step than one
    """

    key: str
    value: float
    dimension: Dimension | None
    tolerance: float = 0.0
    whole: bool = False

    @property
    def designed(self) -> bool:
        """Whether the key is a designer's to choose."""
        return DESIGN.search(self.key) is not None

    def text(self, value: float | None = None) -> str:
        """Return a value of the parameter, or its own, with its unit."""
        shown = self.value if value is None else value
        return str(round(shown)) if self.whole else text_of(float(shown), self.dimension)

    def placed(self, scenario: Kind, value: float) -> Kind:
        """Return a scenario with another value; a part keeps tolerance and drift, not its series.

        Raises
        ------
        ScenarioError
            If the value does not make a scenario.
        """
        old = find(scenario, self.key).value
        new: Any = round(value) if self.whole else float(value)
        if isinstance(old, Part):
            new = Part(value, old.tolerance, old.drift)
        return with_values(scenario, {self.key: new})


def parameters_of(scenario: AnyScenario) -> tuple[Parameter, ...]:
    """Return what of a scenario can be changed by a little, in the order of the file.

    Numbers that are zero have no relative change and are left out, as are limits of checks, and
    what says how a run is computed.
    """
    found = (_parameter(scenario, key) for key in numeric_keys(scenario) if _counts(key))
    return tuple(each for each in found if each is not None)


def parameter_at(scenario: AnyScenario, key: str) -> Parameter | None:
    """Return a parameter by its key; None where its number is zero. Raises ScenarioError."""
    from frontend_sim.scenario.key import number_at

    number_at(scenario, key)
    return _parameter(scenario, key)


def _parameter(scenario: AnyScenario, key: str) -> Parameter | None:
    found = find(scenario, key)
    value = found.value
    if value == 0 or isinstance(value, Limit):
        return None
    tolerance = value.tolerance if isinstance(value, Part) else 0.0
    return Parameter(key, float(value), found.dimension, tolerance, type(value) is int)


def _counts(key: str) -> bool:
    table, _, last = key.rpartition(".")
    if table.startswith("check["):
        return last not in LIMITS
    return not (table.endswith("simulation") and last in WITHOUT_EFFECT)
