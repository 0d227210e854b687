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
from frontend_sim.measure.look_weights import LookWeights

NODES = 12
"""Gauss-Legendre points in each panel of the integral over frequency."""
PANELS_PER_OCTAVE = 2
MOST_ENTRIES = 1 << 18
"""Entries of the matrices that are solved with at once, 4 MB."""

CONVERTER = "converter: input noise"
CAPACITOR = "converter: k T / C of the sampling capacitor"


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
    filtered : whether a code is made of several looks at the pin, by an average or a sinc filter;
        all numbers are then those of a code, referred to the input
    sampled : whether the pin of all these numbers is the sampling capacitor behind it
    """

    rows: tuple[NoiseRow, ...]
    rms: float
    lsb: float
    folded: float
    lowest: float
    unbounded: tuple[str, ...] = ()
    filtered: bool = False
    sampled: bool = False


def noise_budget(
    chain: Chain, adc: AnyAdc, lowest: float, capacitor: float | None = None
) -> NoiseBudget:
    """Return the budget of a chain in front of a converter.

    The variance of a source at the pin is c P c' with a P + P a' + b b' = 0, its density at a
    frequency is 2 |c (jw - a)^-1 b|². What lies above half the rate is the variance less the
    integral of the density up to there. Where a code is made of several looks, both are those of
    the code, see ``LookWeights``. Source: any text on stochastic systems, e.g. Astrom,
    *Introduction to Stochastic Control Theory*; from memory.

    Parameters
    ----------
    lowest : frequency down to which 1/f noise counts [Hz]; a run takes a tenth of the reciprocal
        of its duration
    capacitor : rms noise of its own that a sampling capacitor at the end of the chain adds to each
        look; None where there is none, see ``circuit_noise`` [V]

    Raises
    ------
    ModelError
        If a pole at the origin gathers noise without bound.
    """
    model = chain.noise_model(lowest)
    half, looks = 0.5 * adc.true_rate, LookWeights.of(adc)
    powers = []
    for number, name in enumerate(model.names):
        mine = [column for column, owner in enumerate(model.owner) if owner == number]
        b = model.b[:, mine]
        # Where a high pass takes nearly all of it away, rounding may fall below zero.
        variance = max(looks.variance(model, stationary_covariance(model.a, b)), 0.0)
        inside = _power_below(model, b, half, looks)
        powers.append((name, variance, max(variance - inside, 0.0)))
    if adc.input_noise > 0.0:
        # That of an oversampling converter is told for a code already.
        counted = 1.0 if adc.kind == "oversampling" else looks.white
        powers.append((CONVERTER, counted * adc.input_noise**2, 0.0))
    if capacitor:
        powers.append((CAPACITOR, looks.white * capacitor**2, 0.0))
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
    ends = rms, rms / adc.lsb, math.sqrt(folded)
    filtered, sampled = looks.sinc is not None, capacitor is not None
    return NoiseBudget(tuple(rows), *ends, lowest, model.unbounded, filtered, sampled)


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


def _power_below(model: NoiseModel, b: Real, limit: float, looks: LookWeights) -> float:
    """Return the integral of the density of codes from zero to a frequency [V²]."""
    nodes, weights = np.polynomial.legendre.leggauss(NODES)
    panels = np.array(list(_panels(model, limit)))
    # As many panels at once as keep the matrices of all their nodes small.
    most = max(MOST_ENTRIES // (NODES * max(len(model.a), 1) ** 2), 1)
    total = 0.0
    for some in np.split(panels, range(most, len(panels), most)):
        centre, half = 0.5 * np.sum(some, axis=1), 0.5 * np.diff(some, axis=1)[:, 0]
        frequency = centre[:, None] + half[:, None] * nodes
        density = noise_density(model, b, frequency.ravel()) * looks.power(frequency.ravel())
        total += float(half @ (density.reshape(frequency.shape) @ weights))
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
