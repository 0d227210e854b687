"""Noise at the output of stages with amplifiers: by nodal analysis, and by their own sources."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import mpmath as mp
import numpy as np
from nodal import Build, Net, transfers
from numpy.typing import NDArray

from frontend_sim.analog.noise import BOLTZMANN
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage

Real = NDArray[np.float64]

NOISE = {
    "voltage_noise": 8e-9,
    "voltage_noise_corner": 30.0,
    "current_noise": 5e-12,
    "current_noise_corner": 200.0,
}
"""Of every amplifier below."""

QUIET = ("u", "reference", "common")
"""Inputs of circuits that make no noise."""


def spread(values: dict[str, Any], exponents: Sequence[float]) -> dict[str, Any]:
    """Return the keys of a stage with every number times its own power of ten."""
    numbers = [key for key, value in values.items() if isinstance(value, float)]
    return {
        **values,
        **{key: values[key] * 10.0**e for key, e in zip(numbers, exponents, strict=False)},
    }


def by_nodes(build: Build, frequencies: Real, temperature: float) -> Real:
    """Return the sum of |H|² S over all sources [V²/Hz].

    4 k T R of every resistor; e_n² (1 + f_c/f) at the noninverting input of every amplifier;
    i_n² (1 + f_c/f) into each of its inputs.
    """
    net = Net(mp.mpf(1))
    build(net)
    total = np.zeros(len(frequencies))
    for source, gain in transfers(build, frequencies).items():
        if source in net.resistors:
            ohms = float(net.resistors[source][2])
            total += np.abs(gain) ** 2 * 4.0 * BOLTZMANN * temperature * ohms
        elif source not in QUIET:
            key = "voltage_noise" if "amplifier" in source else "current_noise"
            rise = 1.0 + NOISE[f"{key}_corner"] / frequencies
            total += np.abs(gain) ** 2 * NOISE[key] ** 2 * rise
    return total


def by_sources(stage: AmplifierStage, frequencies: Real, temperature: float) -> Any:
    """Return the density that the stage's own noise sources make at its output [V²/Hz]."""
    (block,) = stage.blocks()
    total = np.zeros(len(frequencies))
    for source in stage.noise(temperature):
        for i, f in enumerate(frequencies):
            system = 2j * np.pi * f * np.eye(block.order) - block.a
            gain = block.c @ np.linalg.solve(system, source.b) + source.d
            total[i] += abs(gain) ** 2 * source.density**2 * (1.0 + source.corner / f)
    return total
