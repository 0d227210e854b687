"""The attenuation of a chain over a band of frequencies, against its largest gain or dc."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.chain import Chain
from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.speed import strongest_lever
from frontend_sim.measure.checks.subject import Real, Subject
from frontend_sim.measure.level import decibel
from frontend_sim.measure.response.frequency import frequency_grid
from frontend_sim.measure.response.gain import magnitude_of
from frontend_sim.scenario.checks.rejection import Reference

PER_BAND = 401
"""Frequencies in a band of stated ends, beside those that poles and zeros ask for."""

ROUNDING = 1e-12
"""A gain within this share of the reference is the reference."""

FURTHEST = 30.0
"""A corner that must move by more than this factor is no advice."""


@dataclass(frozen=True)
class Attenuation:
    """The least attenuation over some frequencies.

    Parameters
    ----------
    level : 20 lg( reference / gain ) [dB]
    frequency : where it is least [Hz]
    """

    level: float
    frequency: float


def least_attenuation(subject: Subject, frequencies: Real, against: Reference) -> Attenuation:
    """Return the least attenuation over frequencies, shape (F,) [Hz]; infinity may be one of them.

    Raises
    ------
    MeasureError
        If the reference is zero or infinite.
    """
    reference = reference_gain(subject, against)
    response = subject.response
    finite = np.isfinite(frequencies)
    gains = np.full(len(frequencies), abs(response.start))
    gains[finite] = magnitude_of(response)(frequencies[finite])
    worst = int(np.argmax(gains))
    ratio = float(gains[worst]) / reference
    # What rounding makes of a gain at its reference would be printed as a level below zero.
    level = 0.0 if abs(ratio - 1.0) < ROUNDING else -decibel(ratio)
    return Attenuation(level, float(frequencies[worst]))


def reference_gain(subject: Subject, against: Reference) -> float:
    """Return the gain that attenuation counts from, above zero [1].

    Raises
    ------
    MeasureError
        If it is zero or infinite.
    """
    end = subject.response.end
    dc = math.inf if end is None else abs(end)
    gain = subject.largest.value if against == "largest" else dc
    if not 0.0 < gain < math.inf:
        other = 'take against = "dc"' if against == "largest" else 'take against = "largest"'
        name = "largest gain" if against == "largest" else "gain at dc"
        raise MeasureError(
            f"the {name} of the chain is {gain:g}, and nothing can be counted from it; {other}, or "
            "correct the chain"
        )
    return gain


def band(subject: Subject, low: float, high: float) -> Real:
    """Return frequencies that tell the gain between two of them [Hz]; high may be infinite."""
    roots = np.concatenate([subject.response.roots.poles, subject.response.roots.zeros])
    if low == high:
        return np.array([low])
    if math.isfinite(high):
        grid = frequency_grid(roots, high)
        inside = grid[(grid >= low) & (grid <= high)]
        return np.unique(np.concatenate([inside, np.linspace(low, high, PER_BAND)]))
    grid = frequency_grid(np.append(roots, 2.0 * np.pi * low))
    return np.unique(np.concatenate([grid[grid >= low], [low, math.inf]]))


def advice(subject: Subject, found: Attenuation, least: float, otherwise: str) -> str:
    """Return which stage to change for more attenuation at a frequency.

    Parameters
    ----------
    least : attenuation that is asked for [dB]
    otherwise : what else would help
    """
    more = f"{least - found.level:.2g} dB more at {words.frequency(found.frequency)}"
    if not math.isfinite(found.frequency):
        return f"{otherwise}: high frequencies pass the chain unhindered"

    def gain(chain: Chain) -> float:
        return float(abs(chain.response(np.array([found.frequency]))[0]))

    lever = strongest_lever(subject.chain, gain)
    if lever is None:
        return f"put in a filter ({more} are needed), or {otherwise}"
    factor = lever.factor(10.0 ** ((found.level - least) / 20.0))
    if not 1.0 / FURTHEST < factor < FURTHEST:
        return f"{otherwise}: {more}, which no shift of a corner gives"
    way = "lower" if factor < 1.0 else "raise"
    by = words.percent(factor)
    return f"{way} the corner of {lever.stage!r} by about {by} ({more}), or {otherwise}"
