"""Where the noise at the converter comes from, without a run."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import Chain
from frontend_sim.analog.noise import NoiseModel, stationary_covariance
from frontend_sim.converter import AnyAdc

NODES = 12
"""Gauss-Legendre points in each panel of the integral over frequency."""
PANELS_PER_OCTAVE = 2
CONVERTER = "converter: input noise"


@dataclass(frozen=True)
class NoiseRow:
    """What one source contributes.

    Parameters
    ----------
    source : stage and cause
    rms : at the converter's pin [V]
    lsb : the same [LSB]
    share : of the total power [1]
    folded : rms of the part above half the conversion rate, which the converter folds down [V]
    """

    source: str
    rms: float
    lsb: float
    share: float
    folded: float


@dataclass(frozen=True)
class NoiseBudget:
    """All sources, the largest first, and their sum in power.

    Parameters
    ----------
    rms : of everything together, at the pin [V];  lsb : the same [LSB]
    folded : of the part above half the conversion rate [V]
    lowest : frequency down to which 1/f noise counts [Hz]
    unbounded : sources with a part whose bandwidth nothing limits before the pin; it is left out
    """

    rows: tuple[NoiseRow, ...]
    rms: float
    lsb: float
    folded: float
    lowest: float
    unbounded: tuple[str, ...] = ()


def noise_budget(chain: Chain, adc: AnyAdc, lowest: float) -> NoiseBudget:
    """Return the budget of a chain in front of a converter.

    The variance of a source at the pin is c P c' with a P + P a' + b b' = 0, its density at a
    frequency is 2 |c (jw - a)^-1 b|². What lies above half the rate is the variance less the
    integral of the density up to there. Source: any text on stochastic systems, e.g. Astrom,
    *Introduction to Stochastic Control Theory*; from memory.

    Parameters
    ----------
    lowest : frequency down to which 1/f noise counts [Hz]; a run takes a tenth of the reciprocal
        of its duration

    Raises
    ------
    ModelError
        If a pole at the origin gathers noise without bound.
    """
    model = chain.noise_model(lowest)
    half = 0.5 * adc.rate
    powers = []
    for number, name in enumerate(model.names):
        mine = [column for column, owner in enumerate(model.owner) if owner == number]
        b = model.b[:, mine]
        # Where a high pass takes nearly all of it away, rounding may fall below zero.
        variance = max(float(model.c @ stationary_covariance(model.a, b) @ model.c), 0.0)
        inside = _power_below(model, b, half)
        powers.append((name, variance, max(variance - inside, 0.0)))
    if adc.input_noise > 0.0:
        powers.append((CONVERTER, adc.input_noise**2, 0.0))
    total = sum(variance for _, variance, _ in powers)
    folded = sum(above for _, _, above in powers)
    rows = [
        NoiseRow(
            name,
            math.sqrt(variance),
            math.sqrt(variance) / adc.lsb,
            variance / total if total > 0.0 else 0.0,
            math.sqrt(above),
        )
        for name, variance, above in powers
    ]
    rows.sort(key=lambda row: -row.rms)
    rms = math.sqrt(total)
    return NoiseBudget(tuple(rows), rms, rms / adc.lsb, math.sqrt(folded), lowest, model.unbounded)


def noise_density(model: NoiseModel, b: Real, frequency: Real) -> Real:
    """Return the one-sided density at the pin, shape (K,) [V²/Hz].

    Parameters
    ----------
    b : the columns of the model that count, shape (n, q) [V/sqrt(s)]
    frequency : shape (K,) [Hz]
    """
    n = len(model.a)
    s = 2j * np.pi * frequency[:, None, None] * np.eye(n)
    right = np.broadcast_to(b, (len(frequency), *b.shape))
    states = np.linalg.solve(s - model.a, right.astype(np.complex128))
    through = np.einsum("n,knq->kq", model.c, states)
    return np.asarray(2.0 * np.sum(np.abs(through) ** 2, axis=1))


def _power_below(model: NoiseModel, b: Real, limit: float) -> float:
    """Return the integral of the density from zero to a frequency [V²]."""
    nodes, weights = np.polynomial.legendre.leggauss(NODES)
    total = 0.0
    for start, stop in _panels(model, limit):
        centre, half = 0.5 * (start + stop), 0.5 * (stop - start)
        total += half * float(weights @ noise_density(model, b, centre + half * nodes))
    return total


def _panels(model: NoiseModel, limit: float) -> Iterator[tuple[float, float]]:
    """Cut [0, limit] so finely that the density is smooth in every panel.

    Panels grow with frequency, and lie close around every resonance.
    """
    poles = np.linalg.eigvals(model.a)
    magnitude = np.abs(poles[poles != 0.0]) / (2.0 * np.pi)
    lowest = min(float(np.min(magnitude, initial=limit)), limit) * 1e-3
    count = max(math.ceil(math.log2(limit / lowest) * PANELS_PER_OCTAVE), 1)
    edges = [0.0, *np.geomspace(lowest, limit, count + 1)]
    for pole in poles[poles.imag > 0.0]:
        centre, width = pole.imag / (2.0 * np.pi), abs(pole.real) / (2.0 * np.pi)
        spread = width * 2.0 ** np.arange(-1.0, 8.0)
        edges += [centre, *(centre - spread), *(centre + spread)]
    kept = sorted({float(edge) for edge in edges if 0.0 <= edge <= limit})
    yield from pairwise(kept)
