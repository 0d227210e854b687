"""What real amplifiers do to the stages around them, against ideal ones."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.chain import compose
from frontend_sim.analog.section import Section
from frontend_sim.analog.stages.active_filter import ActiveFilter
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.operational_amplifier import IDEAL
from frontend_sim.errors import ModelError
from frontend_sim.measure.response.frequency import frequency_grid
from frontend_sim.measure.response.gain import Corner, corners_of, largest_gain, magnitude_of
from frontend_sim.measure.response.step_response import StepResponse

RISES = 1.05
"""A stop band counts as rising where the gain grows by more than this factor again."""

DEEPEST = 1e-12
"""Below this share of the largest gain nothing is told of a stop band."""


@dataclass(frozen=True)
class SectionShift:
    """Corner f_0 and quality factor Q of a filter section, with an ideal amplifier and as it is.

    Parameters
    ----------
    nominal_corner, corner : [Hz]
    nominal_quality_factor, quality_factor : [1]
    """

    nominal_corner: float
    corner: float
    nominal_quality_factor: float
    quality_factor: float


@dataclass(frozen=True)
class StopBandRise:
    """Where a response that has fallen with frequency comes up again, and how high.

    Parameters
    ----------
    least_frequency : from where on it rises [Hz]
    least : gain there, over the largest gain [1]
    frequency : of the highest gain beyond; infinite where it only tends to it [Hz]
    gain : that gain, over the largest gain [1]
    ideal_gain : what an ideal amplifier would leave at ``frequency``, likewise [1]
    """

    least_frequency: float
    least: float
    frequency: float
    gain: float
    ideal_gain: float


@dataclass(frozen=True)
class AmplifierResponse:
    """What the amplifier of one stage does to its response.

    Parameters
    ----------
    stage : its name
    corners : -3 dB corners as it is;  ideal_corners : with an ideal amplifier; None where that
        would have a gain without bound
    loop_bandwidth : up to which frequency the loop has gain [Hz]; None without ``gain_bandwidth``
    section : shift of corner and Q, where the stage is a filter section
    stop_band : the highest rise of the stop band; None where it falls for ever
    """

    stage: str
    corners: tuple[Corner, ...]
    ideal_corners: tuple[Corner, ...] | None
    loop_bandwidth: float | None
    section: SectionShift | None
    stop_band: StopBandRise | None

    @classmethod
    def of(cls, stage: AmplifierStage, name: str) -> Self:
        """Measure a stage."""
        own, ideal = _response(stage, name), _ideal(stage, name)
        return cls(
            name,
            corners_of(own, largest_gain(own)),
            None if ideal is None else corners_of(ideal, largest_gain(ideal)),
            stage.closed_loop_bandwidth(),
            _section(stage) if isinstance(stage, ActiveFilter) else None,
            None if ideal is None else stop_band_rise(own, ideal),
        )


def amplifiers_of(stages: Sequence[Stage]) -> tuple[AmplifierResponse, ...]:
    """Return what the amplifiers do, for every stage whose amplifier is not ideal.

    Filter sections are told with ideal amplifiers too, for their nominal corner and Q.
    """
    return tuple(
        AmplifierResponse.of(stage, stage.label(position))
        for position, stage in enumerate(stages, start=1)
        if isinstance(stage, AmplifierStage)
        and (isinstance(stage, ActiveFilter) or any(getattr(stage, key) for key in IDEAL))
    )


def stop_band_rise(own: StepResponse, ideal: StepResponse) -> StopBandRise | None:
    """Return the highest gain beyond the least one above the largest gain; None if it only falls.

    Parameters
    ----------
    own, ideal : the stage as it is, and with an ideal amplifier
    """
    largest = largest_gain(own)
    if not 0.0 < largest.value < math.inf or math.isinf(largest.frequency):
        return None
    grid = frequency_grid(np.concatenate([own.roots.poles, own.roots.zeros]))
    grid = grid[grid > largest.frequency]
    gains = magnitude_of(own)(grid) / largest.value
    before = np.minimum.accumulate(gains)
    risen = np.flatnonzero(gains > RISES * np.maximum(before, DEEPEST))
    if len(risen) == 0 or not np.any(before < math.sqrt(0.5)):
        return None
    at = int(risen[np.argmax(gains[risen])])
    lowest = int(np.argmin(gains[: at + 1]))
    beyond, gain = float(grid[at]), float(gains[at])
    end = abs(own.start) / largest.value
    if end >= gain * (1.0 - 1e-3) and end > 0.0:
        beyond, gain = math.inf, end
    ideal_gain = _gain(ideal, beyond) / largest.value
    least = float(grid[lowest]), float(gains[lowest])
    if ideal_gain > 0.99 * gain:  # the ideal section rises there too, as a notch does
        return None
    return StopBandRise(*least, beyond, gain, ideal_gain)


def _gain(response: StepResponse, frequency: float) -> float:
    if math.isinf(frequency):
        return abs(response.start)
    where: Real = np.array([frequency])
    return float(magnitude_of(response)(where)[0])


def _section(stage: ActiveFilter) -> SectionShift:
    return SectionShift(
        stage.nominal_corner,
        stage.shifted_corner,
        stage.nominal_quality_factor,
        stage.shifted_quality_factor,
    )


def _ideal(stage: AmplifierStage, name: str) -> StepResponse | None:
    try:
        return _response(stage.with_ideal_amplifier(), name)
    except ModelError:  # a capacitance at the input of an ideal amplifier differentiates
        return None


def _response(stage: AmplifierStage, name: str) -> StepResponse:
    return StepResponse.of(compose([Section(name, stage.blocks(), 0.0)]))
