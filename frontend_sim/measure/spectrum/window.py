"""Windows as data: sums of cosines, and the numbers that follow from their coefficients."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from frontend_sim.errors import MeasureError, nearest
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.level import decibel

PEAK = 1e-7
"""How far the peak of a published table of coefficients may lie from one."""


@dataclass(frozen=True)
class Window:
    """A periodic sum of cosines,

        w[n] = sum_k (-1)^k a[k] cos(2 pi k n / N),    n = 0 ... N - 1.

    Parameters
    ----------
    name : as it is written in a scenario
    coefficients : a[0], a[1], ... [1]
    side_lobe : level of the highest side lobe below the main lobe [dB]
    source : where the coefficients come from

    Raises
    ------
    MeasureError
        If the table is empty, or its peak is not one.
    """

    name: str
    coefficients: tuple[float, ...]
    side_lobe: float
    source: str

    def __post_init__(self) -> None:
        """Check the data of a new window."""
        if not self.coefficients or not abs(math.fsum(self.coefficients) - 1.0) <= PEAK:
            raise MeasureError(
                f"window {self.name!r}: the coefficients must add up to its peak, one, but they "
                f"give {math.fsum(self.coefficients):.9g}"
            )

    @property
    def coherent_gain(self) -> float:
        """Gain for a tone on a bin, (1/N) sum w = a[0] [1]."""
        return self.coefficients[0]

    @property
    def noise_bandwidth(self) -> float:
        """Equivalent noise bandwidth, N sum w² / (sum w)² = 1 + sum_{k>0} (a[k]/a[0])² / 2 [bins].

        Source: F. J. Harris 1978, "On the use of windows for harmonic analysis with the discrete
        Fourier transform", Proc. IEEE 66, equation 11 (number from memory).
        """
        first, *rest = self.coefficients
        return 1.0 + 0.5 * math.fsum((a / first) ** 2 for a in rest)

    @property
    def scalloping(self) -> float:
        """Gain for a tone halfway between two bins, against one on a bin, at most 0 [dB].

        The transform of a long window at d bins is proportional to
        sinc(d) sum_k (-1)^k a[k] d² / (d² - k²), the term of k = 0 being a[0].
        """
        d2 = 0.25
        terms = [a * (-1.0) ** k * d2 / (d2 - k * k) for k, a in enumerate(self.coefficients) if k]
        halfway = (2.0 / math.pi) * abs(math.fsum([self.coefficients[0], *terms]))
        return decibel(halfway / self.coefficients[0])

    @property
    def half_width(self) -> int:
        """Bins on either side of a tone's bin that its main lobe reaches.

        0 for the rectangular window, whose tones must lie on their bins.
        """
        terms = len(self.coefficients)
        return terms if terms > 1 else 0

    def points(self, count: int) -> Real:
        """Return w[n], shape (count,) [1]."""
        return self.at(np.arange(count) / count)

    def at(self, share: Real) -> Real:
        """Return the window at shares of its length, 0 to 1, shape (K,) [1]."""
        turn = 2.0 * np.pi * share
        points = np.full(len(share), self.coefficients[0])
        for k, coefficient in enumerate(self.coefficients[1:], start=1):
            points += (-1.0) ** k * coefficient * np.cos(k * turn)
        return points


WINDOWS = {
    window.name: window
    for window in (
        Window("rectangular", (1.0,), 13.26, "no window"),
        Window("hann", (0.5, 0.5), 31.47, "F. J. Harris 1978"),
        Window(
            "blackman-harris",
            (0.35875, 0.48829, 0.14128, 0.01168),
            92.0,
            "F. J. Harris 1978, four terms",
        ),
        Window(
            "blackman-harris-7",
            (
                0.27105140069342,
                0.43329793923448,
                0.21812299954311,
                0.06592544638803,
                0.01081174209837,
                0.00077658482522,
                0.00001388721735,
            ),
            180.0,
            "after H.-H. Albrecht 2001, seven terms (from memory; side lobes as measured)",
        ),
        Window(
            "flat-top",
            (0.21557895, 0.41663158, 0.277263158, 0.083578947, 0.006947368),
            93.0,
            "G. D'Antona and A. Ferrero 2006, five terms",
        ),
    )
}
"""Every window by its name."""


def window_named(name: str) -> Window:
    """Return a window of the table. Raises MeasureError for a name that is not there."""
    if name not in WINDOWS:
        raise MeasureError(f"there is no window {name!r}{nearest(name, WINDOWS)}")
    return WINDOWS[name]
