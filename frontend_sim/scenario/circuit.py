"""The circuit that a scenario describes, at the temperature where it stands."""

from __future__ import annotations

from typing import TYPE_CHECKING

from frontend_sim.analog.chain import Chain, chain_of
from frontend_sim.scenario.spread import stages_at

if TYPE_CHECKING:
    from frontend_sim.analog.stages.base import Stage
    from frontend_sim.scenario.model import Scenario


def stages_of(scenario: Scenario) -> tuple[Stage, ...]:
    """Return the stages with parts of the values that they have at the scenario's temperature.

    Tolerances play no part here: nominal runs ignore them.

    Raises
    ------
    ModelError
        If a drift takes a part to a value that it cannot have.
    """
    return stages_at(scenario.chain, scenario.environment.temperature)


def circuit_of(scenario: Scenario) -> Chain:
    """Return the composed model of a scenario's chain at the scenario's temperature.

    Raises
    ------
    ModelError
        If a stage is unstable, or a drift takes a part to a value that it cannot have.
    """
    return chain_of(stages_of(scenario), scenario.environment.temperature)
