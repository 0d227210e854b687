"""What filter sections around an amplifier have in common: nominal and shifted corner and Q."""

from __future__ import annotations

import math
from abc import abstractmethod
from itertools import combinations
from typing import ClassVar

from frontend_sim.analog.stages.amplifier_stage import AmplifierStage


class ActiveFilter(AmplifierStage):
    """A filter section of second order made of part values.

    Its corner f_0 and quality factor Q are those of one pair of poles p, p' of the whole circuit,

        (2 pi f_0)² = p p',    Q = 2 pi f_0 / -(p + p').

    The nominal ones are those of an ideal amplifier. Finite bandwidth, finite gain and output
    resistance shift them and bring further poles; the shifted pair is the one whose corner lies
    nearest to the nominal one.
    """

    cure: ClassVar[str] = (
        "an amplifier with a faster second_pole and a larger gain_bandwidth, a smaller load, or a "
        "lower quality factor gives some"
    )

    def check(self) -> None:
        """Raise ValueError if the amplifier cannot make the filter, see ``NetworkStage``."""
        super().check()
        needed = self.nominal_corner * self.noise_gain()
        if self.gain_bandwidth is not None and self.gain_bandwidth < needed:
            raise ValueError(
                f"gain_bandwidth {self.gain_bandwidth:g} Hz lies below what the filter itself asks "
                f"for, its corner of {self.nominal_corner:.4g} Hz times the gain "
                f"{self.noise_gain():.4g}; take an amplifier of some {100.0 * needed:.2g} Hz, or a "
                "lower corner"
            )

    @property
    @abstractmethod
    def nominal_corner(self) -> float:
        """Corner with an ideal amplifier [Hz]."""

    @property
    @abstractmethod
    def nominal_quality_factor(self) -> float:
        """Quality factor with an ideal amplifier [1]."""

    @property
    def shifted_corner(self) -> float:
        """Corner with the amplifier as it is [Hz]."""
        return corner_of(*self._pair())

    @property
    def shifted_quality_factor(self) -> float:
        """Quality factor with the amplifier as it is [1]."""
        return quality_factor_of(*self._pair())

    def _pair(self) -> tuple[complex, complex]:
        return nearest_pair(self.solution().block.poles.tolist(), self.nominal_corner)


def nearest_pair(poles: list[complex], corner: float) -> tuple[complex, complex]:
    """Return the two poles, real or conjugate, whose corner lies nearest to one [Hz]."""
    pairs = [
        (first, second)
        for first, second in combinations(poles, 2)
        if first.imag == second.imag == 0.0 or first == second.conjugate()
    ]
    return min(pairs, key=lambda pair: abs(math.log(corner_of(*pair) / corner)))


def corner_of(first: complex, second: complex) -> float:
    """Return sqrt(p p') / (2 pi) of two poles [Hz]."""
    return math.sqrt(abs(first) * abs(second)) / (2.0 * math.pi)


def quality_factor_of(first: complex, second: complex) -> float:
    """Return sqrt(p p') / -(p + p') of two poles [1]."""
    damping = -(first + second).real
    return math.sqrt(abs(first) * abs(second)) / damping if damping else math.inf
