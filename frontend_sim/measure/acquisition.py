"""How well a converter's input network settles: residual error, time needed, current drawn."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.analog.exponential import expm1
from frontend_sim.scenario.model import Scenario
from frontend_sim.simulation.switched import SwitchedInput, switched_input
from frontend_sim.simulation.switched_network import SwitchedNetwork
from frontend_sim.simulation.switched_period import constant_visits, settled_state
from frontend_sim.simulation.switched_steps import capacitor_noise

Real = NDArray[np.float64]

POINTS = 4096
"""Points of one look at the residual."""
FIRST = 64
"""Points that must lie before the last crossing, else the look is closer."""
MOST_LOOKS = 60
"""Looks until the last crossing is found; each is four times as long or as short."""
HALVINGS = 60


@dataclass(frozen=True)
class Acquisition:
    """What the input network of a converter does, from its parts alone.

    Parameters
    ----------
    time : how long the switch is closed [s]
    step : voltage between the capacitor and the source in the worst case, inputs in the range [V]
    step_error : what is left of it when the switch opens, with its sign counted off [LSB]
    time_needed : smallest acquisition time from which on half an LSB is met; None if none is [s]
    steady_error : largest error for an input that rests at an end of the range [LSB]
    steady_current : largest mean current that such an input gives, by its size [A]
    noise : rms noise of the capacitor, the square root of k T / C [V]
    """

    time: float
    step: float
    step_error: float
    time_needed: float | None
    steady_error: float
    steady_current: float
    noise: float

    @classmethod
    def of(cls, scenario: Scenario) -> Self | None:
        """Work it out; None where the converter has no input network.

        Raises
        ------
        InputError
            If the network is unusable, see ``switched_input``.
        """
        found = switched_input(scenario)
        if found is None:
            return None
        adc, values, network = found.adc, found.values, found.network
        step = values.furthest(adc.low, adc.high)
        left = float(network.residual(np.array([values.acquisition_time]))[0])
        error, current = _steady(found)
        temperature = scenario.environment.temperature
        return cls(
            values.acquisition_time,
            step,
            abs(step * left) / adc.lsb,
            time_needed(network, step, 0.5 * adc.lsb),
            error / adc.lsb,
            current,
            capacitor_noise(values.sampling_capacitance, temperature) if values.noise else 0.0,
        )


def time_needed(network: SwitchedNetwork, step: float, limit: float) -> float | None:
    """Return the time after which what is left of a step stays within a limit [s].

    The residual is looked at in POINTS points; the look is made longer until it ends within the
    limit for three quarters of its length, and closer until FIRST points lie before the last
    crossing, which is then halved in. A residual that rings so often that peaks fall between the
    points is not told exactly.

    Parameters
    ----------
    step, limit : [V]
    """
    share = limit / step if step > 0.0 else 1.0
    if share >= 1.0 and network.order == 1:
        return 0.0
    length, shortest = 16.0 / network.rate, 1e-6 / network.rate
    for _ in range(MOST_LOOKS):
        outside = np.flatnonzero(np.abs(_residuals(network, length / POINTS)) > share)
        if len(outside) == 0:
            if length < shortest:
                return 0.0
            length /= 4.0
        elif outside[-1] > POINTS // 4:
            length *= 4.0
        elif outside[-1] < FIRST and length > shortest:
            length /= 4.0
        else:
            begin = float(outside[-1]) * length / POINTS
            return _halved(network, share, begin, begin + length / POINTS)
    return None


def _residuals(network: SwitchedNetwork, interval: float) -> Real:
    """Return the residual of one volt at 0, 1, ..., POINTS intervals, by doubling."""
    step = expm1(network.closed * interval)
    states = np.append(network.share, 1.0)[:, None]
    while states.shape[1] <= POINTS:
        states = np.concatenate([states, states + step @ states], axis=1)
        step = 2.0 * step + step @ step
    return np.asarray(states[-1, : POINTS + 1])


def _halved(network: SwitchedNetwork, share: float, low: float, high: float) -> float:
    """Return where the residual crosses the share between a time outside and one inside."""
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        if abs(float(network.residual(np.array([middle]))[0])) > share:
            low = middle
        else:
            high = middle
    return high


def _steady(found: SwitchedInput) -> tuple[float, float]:
    """Return the largest error [V] and mean current [A] of inputs at the ends of the range."""
    pattern, adc = found.adc.pattern, found.adc
    memory = found.memory(2.0 * (pattern.widest + pattern.closest))
    period = found.period()
    errors, currents = [0.0], [0.0]
    for level in (adc.low, adc.high):
        levels = np.array([level])
        state = settled_state(memory, period, levels)
        visits = constant_visits(memory, period.channel, period.instants, levels)
        _, held, moved = memory.advance(state, visits)
        errors.append(float(np.max(np.abs(held - level))))
        charge = found.values.sampling_capacitance * float(np.sum(moved))
        currents.append(abs(charge) / period.length)
    return max(errors), max(currents)
