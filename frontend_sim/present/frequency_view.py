"""What the frequency panels show: which frequencies, and the curves over them."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.look_weights import LookWeights
from frontend_sim.measure.response.frequency import frequency_grid
from frontend_sim.measure.response.group_delay import group_delay
from frontend_sim.measure.response.inspection import Inspection
from frontend_sim.measure.response.roots import Roots

Real = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class ModelCurve:
    """A discrete model over the frequencies that its grid can show.

    Parameters
    ----------
    method : zoh, foh or bilinear
    frequency : up to half the grid rate, shape (F,) [Hz]
    magnitude : [dB];  phase : [deg], both of shape (F,)
    """

    method: str
    frequency: Real
    magnitude: Real
    phase: Real


@dataclass(frozen=True, eq=False)
class FrequencyView:
    """The curves of the frequency panels, for the stimulus in the unit that the file has for it.

    Parameters
    ----------
    inspection : what is shown
    frequency : shape (F,) [Hz]
    magnitude : [dB];  phase : without the pure delay [deg];  delay : group delay [s]; shape (F,)
    models : one for each discrete model
    filtered : magnitude with the converter's own filter behind the chain, shape (F,) [dB]; None
        where it has none
    """

    inspection: Inspection
    frequency: Real
    magnitude: Real
    phase: Real
    delay: Real
    models: tuple[ModelCurve, ...]
    filtered: Real | None

    @classmethod
    def of(cls, inspection: Inspection) -> Self:
        """Compute the curves of an inspection."""
        roots = inspection.response.roots
        low, high = _range(inspection)
        # Around narrow resonances the points of the measures, elsewhere a plain grid.
        found = frequency_grid(np.concatenate([roots.poles, roots.zeros]))
        plain = np.geomspace(low, high, 800)
        inside = found[(found > low) & (found < high)]
        frequency = np.unique(np.concatenate([plain, inside]))
        magnitude = _decibel(np.abs(_response(inspection, frequency)))
        phase = phase_of(roots, frequency)
        return cls(
            inspection,
            frequency,
            magnitude,
            phase,
            group_delay(roots, frequency),
            tuple(_curves(inspection, frequency)),
            _filtered(inspection, frequency, magnitude),
        )


def _filtered(inspection: Inspection, frequency: Real, magnitude: Real) -> Real | None:
    """Return the magnitude with the converter's filter behind the chain [dB]."""
    looks = LookWeights.of(inspection.adc)
    if looks.sinc is None:
        return None
    return np.asarray(magnitude + _decibel(np.sqrt(looks.power(frequency))))


def phase_of(roots: Roots, frequency: Real) -> Real:
    """Return arg H without the pure delay, as a sum over poles and zeros, never wrapped [deg].

    arg H = [180 deg if the gain is negative] + sum_z arg(jw - z) - sum_p arg(jw - p), turned by
    whole turns so that it starts between -180 and 180 deg.
    """
    s = 2j * np.pi * frequency
    total = np.full(len(frequency), 0.0 if roots.sign >= 0.0 else np.pi)
    for zero in roots.zeros:
        total += np.angle(s - zero)
    for pole in roots.poles:
        total -= np.angle(s - pole)
    degrees = np.degrees(total)
    first = float(degrees[0])
    turns = math.ceil((first - 180.0) / 360.0 - 1e-9)
    return np.asarray(degrees - 360.0 * turns)


def _range(inspection: Inspection) -> tuple[float, float]:
    """Return the frequencies shown: a decade and more around corners and the conversion rate."""
    rate = inspection.adc.true_rate
    marks = [0.5 * rate, rate, *(corner.frequency for corner in inspection.frequency.corners)]
    if (sinc := LookWeights.of(inspection.adc).sinc) is not None:
        marks.append(0.2 * sinc.modulator_rate)  # where the filter passes again
    if not inspection.frequency.corners:
        marks += [
            pole.natural_frequency for pole in inspection.poles if pole.natural_frequency > 0.0
        ]
    return min(marks) / 50.0, max(marks) * 10.0


def _response(inspection: Inspection, frequency: Real) -> NDArray[np.complex128]:
    chain = inspection.response.chain.without_delay()
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(inspection.referred.unit.size * chain.response(frequency))


def _decibel(size: Real) -> Real:
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(20.0 * np.log10(size))


def _curves(inspection: Inspection, frequency: Real) -> list[ModelCurve]:
    curves = []
    for model in inspection.grid_models:
        shown = frequency[frequency < 0.5 * model.rate]
        if len(shown) == 0:
            continue
        discrete = inspection.referred.unit.size * model.response(shown)
        with np.errstate(divide="ignore", invalid="ignore"):
            beside = np.angle(discrete / _response(inspection, shown))
        phase = phase_of(inspection.response.roots, shown) + np.degrees(beside)
        curves.append(ModelCurve(model.method, shown, _decibel(np.abs(discrete)), phase))
    return curves
