"""INL, DNL, gain and offset that follow from the levels at which codes change."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.measure.arrays import Real
from frontend_sim.measure.linearity.confidence import Counts
from frontend_sim.measure.linearity.histogram import CodeDensity


@dataclass(frozen=True)
class StraightLine:
    """A line through the levels at which codes change.

    (1 + gain_error) · level + offset is the level of the ideal converter, as ``Adc`` has it.

    Parameters
    ----------
    gain_error : [1]
    offset : [V]
    """

    gain_error: float
    offset: float


@dataclass(frozen=True, eq=False)
class Linearity:
    """Static linearity of the codes between the lowest and the highest one seen.

    Definitions: IEEE 1241 (from memory). K codes seen have K - 1 levels between them and K - 2
    widths.

    Parameters
    ----------
    codes : whose widths are known, shape (K - 2,) [counts]
    dnl : width / LSB - 1, the LSB being the average width, shape (K - 2,) [LSB]
    dnl_confidence : half the confidence interval of each, shape (K - 2,) [LSB]
    inl_end_point : level less the line through the first and the last one, shape (K - 1,) [LSB];
        entry k stands for the change from code codes[0] - 1 + k to the next one
    inl_best_fit : the same to the line with the least squared distance, shape (K - 1,) [LSB]
    inl_confidence : half the confidence interval of each level, shape (K - 1,) [LSB]
    missing : codes between that were never seen [counts]
    below, above : codes beyond the two ends that were never seen
    end_point, best_fit : gain and offset of the two lines; None where the levels of the signal
        were not given, so that only their relation is known
    count : samples
    confidence : share of intervals that hold the true value
    """

    codes: Counts
    dnl: Real
    dnl_confidence: Real
    inl_end_point: Real
    inl_best_fit: Real
    inl_confidence: Real
    missing: tuple[int, ...]
    below: int
    above: int
    end_point: StraightLine | None
    best_fit: StraightLine | None
    count: int
    confidence: float

    @property
    def worst_dnl(self) -> float:
        """The DNL furthest from zero, with its sign [LSB]."""
        return float(self.dnl[np.argmax(np.abs(self.dnl))])

    @property
    def worst_inl(self) -> float:
        """The end-point INL furthest from zero, with its sign [LSB]."""
        return float(self.inl_end_point[np.argmax(np.abs(self.inl_end_point))])

    @property
    def worst_inl_best_fit(self) -> float:
        """The best-fit INL furthest from zero, with its sign [LSB]."""
        return float(self.inl_best_fit[np.argmax(np.abs(self.inl_best_fit))])


@dataclass(frozen=True, eq=False)
class Levels:
    """Levels at which codes change, as a histogram gives them.

    Parameters
    ----------
    level : of each change, shape (K - 1,), in volts or in any unit
    uncertainty : half the confidence interval, shape (K - 1,), same unit
    in_volts : whether the unit is the volt
    """

    level: Real
    uncertainty: Real
    in_volts: bool


def linearity_of(
    density: CodeDensity,
    levels: Levels,
    dnl_confidence: Real,
    ideal: Real,
    confidence: float,
) -> Linearity:
    """Return the linearity that belongs to levels.

    Parameters
    ----------
    dnl_confidence : shape (K - 2,) [LSB]
    ideal : level of each change in the ideal converter, shape (K - 1,) [V]
    confidence : share of intervals that hold the true value
    """
    level = levels.level
    number = np.arange(len(level), dtype=np.float64)
    lsb = (level[-1] - level[0]) / number[-1]
    in_lsb = (level - level[0]) / lsb
    slope, start = np.polyfit(number, in_lsb, 1)
    return Linearity(
        codes=density.inner_codes,
        dnl=np.diff(in_lsb) - 1.0,
        dnl_confidence=dnl_confidence,
        inl_end_point=in_lsb - number,
        inl_best_fit=(in_lsb - start) / slope - number,
        inl_confidence=levels.uncertainty / lsb,
        missing=tuple(int(code) for code in density.inner_codes[density.counts[1:-1] == 0]),
        below=density.below,
        above=density.above,
        end_point=_end_point(level, ideal) if levels.in_volts else None,
        best_fit=_best_fit(level, ideal) if levels.in_volts else None,
        count=density.total,
        confidence=confidence,
    )


def _end_point(level: Real, ideal: Real) -> StraightLine:
    gain = float((ideal[-1] - ideal[0]) / (level[-1] - level[0]))
    return StraightLine(gain - 1.0, float(ideal[0] - gain * level[0]))


def _best_fit(level: Real, ideal: Real) -> StraightLine:
    """Return the line whose levels have the least squared distance from those measured."""
    slope, start = np.polyfit(ideal, level, 1)
    return StraightLine(float(1.0 / slope - 1.0), float(-start / slope))
