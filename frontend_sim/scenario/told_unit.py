"""The unit in which a reader is told of a scenario's stimulus."""

from __future__ import annotations

from contextlib import suppress

from frontend_sim.errors import InputError
from frontend_sim.quantities import SignalUnit
from frontend_sim.scenario.load import parse_scenario
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.signal import level_as_written


def told_unit(scenario: Scenario) -> SignalUnit:
    """Return the unit that the file has for the stimulus."""
    written = scenario.stimulus.written_level()
    if not written and scenario.source:  # of a record, whose values are in SI, a full scale too
        with suppress(InputError):
            whole = parse_scenario(scenario.source)
            if isinstance(whole, Scenario):
                written = level_as_written(whole.stimulus, whole.chain)
    written = written or level_as_written(scenario.stimulus, scenario.chain)
    return SignalUnit.of(scenario.stimulus_unit, written)
