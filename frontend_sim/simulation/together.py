"""Runs that differ in their parts alone take their pins from one pass over the recording."""

from __future__ import annotations

from collections.abc import Sequence

from frontend_sim.converter import clock
from frontend_sim.simulation.draws import MOST_VALUES, Draws, Known
from frontend_sim.simulation.engine import Simulation
from frontend_sim.simulation.linear import Linear


def together(simulations: Sequence[Simulation]) -> int:
    """Let simulations that can go side by side do so, and return how many they are.

    What each of them gives is the same to the last bit, see ``Draws``; those that cannot stay as
    they are.

    Parameters
    ----------
    simulations : made ready, not yet run
    """
    if len(simulations) < 2 or Draws.of(_models(simulations[:1])) is None:
        return 0
    instants, looks = simulations[0].look_instants(), _looks(simulations[0])
    alike = [each for each in simulations if _looks(each) == looks]
    most = max(1, MOST_VALUES // max(len(instants), 1))
    done = 0
    for start in range(0, len(alike), most):
        group = alike[start : start + most]
        models = _models(group)
        draws = Draws.of(models) if len(group) > 1 else None
        if draws is None:
            continue
        for each, model, pin in zip(group, models, draws.outputs(instants), strict=True):
            each.know_pin(Known(pin, float(model.before()[0])))
        done += len(group)
    return done


def _looks(simulation: Simulation) -> tuple[object, ...]:
    """Return all that the instants of an even row of looks follow from."""
    adc = simulation.scenario.adc
    count = clock.look_count(adc, simulation.count)
    return simulation.look_axis(), adc.pattern, adc.aperture_delay, count


def _models(simulations: Sequence[Simulation]) -> list[Linear]:
    """Return the pins of linear chains; none where one of them is no linear chain."""
    models = [each.pin_model(each.look_axis()) for each in simulations]
    linear = [model for model in models if isinstance(model, Linear)]
    return linear if len(linear) == len(models) else []
