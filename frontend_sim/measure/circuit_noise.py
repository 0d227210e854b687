"""The noise budget of a scenario: of its circuit, its input network and its converter."""

from __future__ import annotations

from frontend_sim.analog.chain import Chain
from frontend_sim.measure.noise_budget import NoiseBudget, noise_budget
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.switched import switched_input
from frontend_sim.simulation.switched_steps import capacitor_noise


def circuit_noise(scenario: Scenario, chain: Chain, lowest: float) -> NoiseBudget:
    """Return the budget of what the converter converts.

    Without an input network that is the pin. With one it is the sampling capacitor: noise of the
    chain reaches it through the network with its switch closed for ever, and it adds k T / C of its
    own, as in a run; see docs/theory/switched.md, section 6.

    Parameters
    ----------
    chain : of the scenario, at its temperature
    lowest : frequency down to which 1/f noise counts [Hz]

    Raises
    ------
    InputError
        If a pole at the origin gathers noise without bound, or the network is unusable.
    """
    sampler = switched_input(scenario)
    if sampler is None:
        return noise_budget(chain, scenario.adc, lowest)
    own = 0.0
    if sampler.values.noise:
        temperature = scenario.environment.temperature
        own = capacitor_noise(sampler.values.sampling_capacitance, temperature)
    return noise_budget(sampler.chain(chain), scenario.adc, lowest, own)
