"""What of a run depends on its seed, and how slowly its noise moves."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np

from frontend_sim.errors import InputError
from frontend_sim.scenario.circuit import circuit_of
from frontend_sim.scenario.model import Scenario

QUICK = 10.0
"""Noise above so many cycles in a run is averaged out as white noise is."""

SLOWEST = 1e-3
"""Below so many cycles in a run the density is flat, for noise of runs with a bound."""

POINTS = 150
"""Frequencies at which the density is taken."""


def random_pin(resolved: Mapping[str, Any]) -> bool:
    """Return whether the voltage at the pin depends on the seed.

    It does if the stimulus is random, or the instants are. Noise of the circuit is not in the pin.
    In a scan channels that share stages, or the sampling capacitor, see each other's stimulus.

    Parameters
    ----------
    resolved : the scenario, as ``Scenario.resolved`` gives it, or the scan that it is a channel of
    """
    adc = resolved.get("adc", {})
    wander = adc.get("wander") or {}
    shared = resolved.get("scan", {}).get("chain") or adc.get("input")
    return (
        _has_kind(resolved.get("stimulus"), "noise-burst")
        or (bool(shared) and _has_kind(resolved.get("channel"), "noise-burst"))
        or bool(adc.get("aperture_jitter"))
        or wander.get("shape") == "gauss-markov"
    )


def _has_kind(value: Any, kind: str) -> bool:
    if isinstance(value, Mapping):
        return value.get("kind") == kind or any(_has_kind(item, kind) for item in value.values())
    return isinstance(value, list) and any(_has_kind(item, kind) for item in value)


def slow_noise(scenario: Scenario, duration: float) -> float:
    """Return the standard error of a run's mean that the run itself does not reveal [LSB].

    The mean of noise with a density S over a time T has the variance of the integral of
    S(f) sinc²(f T). Where the density rises towards zero, by 1/f noise or a slow filter, that
    is more than the white noise of quicker frequencies would give, S / (2 T); the excess moves a
    run as a whole with its seed, as a change of a part would. Noise of a reference behind a slow
    filter counts in full.

    Parameters
    ----------
    duration : of the run, T [s]
    """
    if duration <= 0.0:
        return 0.0
    adc = scenario.adc
    power = _excess(scenario, duration) if scenario.simulation.noise else 0.0
    reference = getattr(adc, "reference", None)
    if reference is not None and reference.filter_time_constant * QUICK > duration:
        power += (reference.noise * max(abs(adc.low), abs(adc.high))) ** 2
    return math.sqrt(power) / adc.lsb


def _excess(scenario: Scenario, duration: float) -> float:
    """Return the variance of a run's mean beyond that of its quick noise [V²]."""
    from frontend_sim.measure.noise_budget import noise_density

    try:
        model = circuit_of(scenario).noise_model(0.1 / duration)
    except InputError:
        return 0.0  # noise without a bound: the run has none of it either
    if model.b.shape[1] == 0:
        return 0.0
    cycles = np.geomspace(SLOWEST, QUICK, POINTS)
    density = noise_density(model, model.b, cycles / duration)
    seen = density * np.sinc(cycles) ** 2
    whole = float(np.trapezoid(seen, cycles)) + SLOWEST * float(density[0])
    # What lies above the last frequency averages out as white noise of that density does.
    quick = float(np.trapezoid(density[-1] * np.sinc(cycles) ** 2, cycles))
    return max(whole - quick, 0.0) / duration
