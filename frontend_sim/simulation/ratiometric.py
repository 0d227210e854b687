"""Excitation and reference that share a source: what of its changes reaches the codes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from frontend_sim.analog.stages.resistive_bridge import ResistiveBridge
from frontend_sim.scenario.circuit import stages_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.kernels import Real
from frontend_sim.stimulus.drive import Drive
from frontend_sim.stimulus.product import product
from frontend_sim.stimulus.supply_drive import SupplyDrive


def excited(scenario: Scenario, drives: Sequence[Drive]) -> tuple[Drive, ...]:
    """Return the drives as a bridge makes them that the scenario's supply excites.

    With the excitation e(t) over its nominal value, the quantity q and the zero z of the bridge in
    the unit of q, it gives (q + z) e in place of q + z, so q becomes q e + z (e - 1).
    """
    supply, stages = scenario.environment.supply, stages_of(scenario)
    bridge = stages[0] if stages else None
    if supply is None or not isinstance(bridge, ResistiveBridge) or not bridge.ratiometric:
        return tuple(drives)
    temperature = scenario.environment.temperature
    excitation = supply.behind(bridge.excitation_time_constant, temperature)
    changed: list[Drive] = [product(drive, excitation) for drive in drives]
    zero = bridge.zero_balance / bridge.sensitivity * bridge.full_scale
    if zero:
        beside = replace(excitation, level=excitation.level - 1.0, scale=zero)
        changed.append(beside)
    return tuple(changed)


@dataclass(frozen=True, eq=False)
class SharedReference:
    """A converter that compares with the supply of the scenario, over its nominal voltage."""

    level: SupplyDrive

    @classmethod
    def of(cls, scenario: Scenario) -> SharedReference | None:
        """Return the reference of a scenario; None where it has a source of its own."""
        supply, reference = scenario.environment.supply, scenario.adc.reference
        if supply is None or reference is None or not reference.ratiometric:
            return None
        constant = reference.filter_time_constant
        return cls(supply.behind(constant, scenario.environment.temperature))

    def added(self, instants: Real, pin: Real, added: Real | None) -> Real:
        """Return what makes of the pin what a converter with a constant reference has to see [V].

        Parameters
        ----------
        instants : of the looks, shape (K,) [s];  pin : there, shape (K,) [V]
        added : what the circuit adds to the pin already [V]
        """
        seen = pin if added is None else pin + added
        return np.asarray(seen / self.level.values(instants) - pin)
