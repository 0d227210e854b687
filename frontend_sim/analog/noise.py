"""White and 1/f sources inside the chain, as one continuous model that noise drives."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Block, Real
from frontend_sim.analog.exponential import expm1
from frontend_sim.errors import ModelError

BOLTZMANN = 1.380649e-23
"""J/K, exact since the SI of 2019."""

POLES_PER_DECADE = 2
"""Poles of the bank that makes 1/f noise: the density then ripples by less than 0.1 dB."""


@dataclass(frozen=True, eq=False)
class NoiseInput:
    """A noise source of one stage, and where it enters the stage's blocks.

    With w the source, block number ``block`` becomes

        dx/dt = a x + b_u u + b w,    y = c x + d_u u + d w.

    Parameters
    ----------
    name : what makes the noise, for budgets
    density : one-sided density where it is flat [V/sqrt(Hz)]
    corner : frequency below which the density rises as 1/f, S = density² (1 + corner/f) [Hz]
    block : number of the block in the stage, from 0
    b : shape (n,) [1/s];  d : [1]
    """

    name: str
    density: float
    corner: float
    block: int
    b: Real
    d: float


def at_input(
    name: str, density: float, blocks: Sequence[Block], corner: float = 0.0, factor: float = 1.0
) -> NoiseInput:
    """Return a source that acts like ``factor`` times the stage's own input."""
    first = blocks[0]
    return NoiseInput(name, density, corner, 0, factor * first.b, factor * first.d)


def at_output(name: str, density: float, share: float = 1.0) -> NoiseInput:
    """Return a white source that reaches the output of a stage without memory by some share."""
    return NoiseInput(name, density, 0.0, 0, np.empty(0), share)


def thermal_density(resistance: float, temperature: float) -> float:
    """Return sqrt(4 k T R) [V/sqrt(Hz)].

    Parameters
    ----------
    resistance [ohm];  temperature [K]

    Source: J. B. Johnson 1928 and H. Nyquist 1928, "Thermal agitation of electric charge in
    conductors".
    """
    return math.sqrt(4.0 * BOLTZMANN * temperature * resistance)


@dataclass(frozen=True, eq=False)
class NoiseModel:
    """dx = a x dt + b dW, y = c x, with q independent unit Wiener processes W.

    A one-sided density S is a two-sided one of S/2, so a source of density e enters as e/sqrt(2).

    Parameters
    ----------
    a : shape (n, n) [1/s];  b : shape (n, q) [V/sqrt(s)];  c : shape (n,) [1]
    owner : for each of the q processes, the number of the source in ``names``
    unbounded : sources whose white noise has a direct way to the point, with nothing that limits
        its bandwidth, so that its power is infinite; of these the direct part is left out
    """

    a: Real
    b: Real
    c: Real
    owner: tuple[int, ...]
    names: tuple[str, ...]
    unbounded: tuple[str, ...] = ()


def model_of(
    a: Real, c: Real, inputs: Sequence[tuple[NoiseInput, Real, float]], lowest: float
) -> NoiseModel:
    """Return the noise model of a chain for one of its points.

    Parameters
    ----------
    a : the chain's matrix, shape (n, n) [1/s];  c : row of the point, shape (n,)
    inputs : each source with its column in the whole chain, shape (n,), and its direct way to the
        point
    lowest : frequency down to which 1/f noise is made [Hz]
    """
    unbounded = tuple(s.name for s, _, direct in inputs if s.density > 0.0 and direct != 0.0)
    n = len(a)
    banks = [(source, _bank(source, lowest)) for source, _, _ in inputs]
    size = n + sum(len(rates) for _, rates in banks)
    whole, row = np.zeros((size, size)), np.zeros(size)
    whole[:n, :n], row[:n] = a, c
    columns, owner, at = [], [], n
    for number, ((source, column, direct), (_, rates)) in enumerate(
        zip(inputs, banks, strict=True)
    ):
        white = np.zeros(size)
        white[:n] = column * (source.density / math.sqrt(2.0))
        columns.append(white)
        owner.append(number)
        for rate in rates:
            # A process of variance v and this rate has the one-sided density 4 v rate/(rate² + w²);
            # spaced by a factor r, they add up to v / (ln r · f).
            variance = source.density**2 * source.corner * math.log(10.0) / POLES_PER_DECADE
            whole[at, at] = -rate
            whole[:n, at] = column
            row[at] = direct
            driven = np.zeros(size)
            driven[at] = math.sqrt(2.0 * variance * rate)
            columns.append(driven)
            owner.append(number)
            at += 1
    b = np.column_stack(columns) if columns else np.zeros((size, 0))
    names = tuple(source.name for source, _, _ in inputs)
    return NoiseModel(whole, b, row, tuple(owner), names, unbounded)


def _bank(source: NoiseInput, lowest: float) -> Real:
    """Return the rates of the bank of a source [rad/s], from ``lowest`` to 100 times the corner.

    Poles stand in the middle of equal ratios of frequency, so the power of the bank is that of
    density² · corner / f between both ends; the density itself turns flat around ``lowest``. Above
    the upper end the 1/f part is one percent of the white part and is left out.
    """
    if source.corner <= 0.0 or source.density <= 0.0:
        return np.empty(0)
    decades = math.log10(100.0 * source.corner / lowest)
    count = max(round(decades * POLES_PER_DECADE), 1)
    exponents = (np.arange(count) + 0.5) / POLES_PER_DECADE
    return np.asarray(2.0 * np.pi * lowest * 10.0**exponents)


def step_covariance(a: Real, b: Real, step: float) -> tuple[Real, Real]:
    """Return E = exp(a h) - I and the covariance of the states that noise adds over h,

        Q(h) = integral from 0 to h of exp(a s) b b' exp(a' s) ds.

    Q of a short step comes from its Taylor series and is doubled,

        Q(2h) = Q(h) + (I + E(h)) Q(h) (I + E(h))',

    which is stable for rates that are far apart; the matrix of twice the size in Van Loan 1978
    would hold exp(-a h), which overflows for them.

    Parameters
    ----------
    a : shape (n, n) [1/s];  b : shape (n, q) [V/sqrt(s)];  step : h [s]
    """
    norm = float(np.max(np.sum(np.abs(a), axis=1), initial=0.0)) * step
    doublings = max(math.ceil(math.log2(4.0 * norm)), 0) if norm > 0.0 else 0
    h = step * 2.0**-doublings
    power = b @ b.T
    term, q = power * h, power * h
    for order in range(2, 16):
        term = (a @ term + term @ a.T) * (h / order)
        q = q + term
    e = expm1(a * h)
    for _ in range(doublings):
        q, e = _doubled(q, e)
    return e, 0.5 * (q + q.T)


def _doubled(q: Real, e: Real) -> tuple[Real, Real]:
    moved = q + e @ q
    return q + moved + moved @ e.T, 2.0 * e + e @ e


def stationary_covariance(a: Real, b: Real) -> Real:
    """Return the covariance P of the states after noise has acted for ever, a P + P a' + b b' = 0.

    Found by doubling the step until nothing is added (Smith's method: R. A. Smith 1968, "Matrix
    equation XA + BX = C"), which keeps slow and fast states accurate side by side.

    Raises
    ------
    ModelError
        If a pole at the origin gathers noise without bound.
    """
    if len(a) == 0:
        return np.zeros((0, 0))
    norm = float(np.max(np.sum(np.abs(a), axis=1)))
    e, q = step_covariance(a, b, 1.0 / norm if norm > 0.0 else 1.0)
    for _ in range(200):
        after, e = _doubled(q, e)
        if np.allclose(after, q, rtol=1e-14, atol=0.0):
            return 0.5 * (after + after.T)
        if not np.all(np.isfinite(after)) or np.max(np.abs(after)) > 1e200:
            break
        q = after
    raise ModelError(
        "a pole at the origin gathers noise without bound, so there is no stationary noise; give "
        "the integrator a large but finite time constant"
    )


def factor(covariance: Real) -> Real:
    """Return L with L L' = covariance, shape (n, n), for a semidefinite matrix.

    Each state is scaled to its own deviation first, so that small ones keep their digits.
    """
    deviation = np.sqrt(np.maximum(np.diag(covariance), 0.0))
    scale = np.where(deviation > 0.0, deviation, 1.0)
    values, vectors = np.linalg.eigh(covariance / np.outer(scale, scale))
    return np.asarray(scale[:, None] * vectors * np.sqrt(np.maximum(values, 0.0)))
