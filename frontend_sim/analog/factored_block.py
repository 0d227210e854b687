"""A block of any order whose poles, zeros and gain are known."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Block, Complex, Real


@dataclass(frozen=True, eq=False)
class FactoredBlock(Block):
    """A block that also knows its response in factors,

        H(s) = leading · prod(s - zero) / prod(s - pole),

    where nothing cancels: deep in a stop band, and beside a notch, H keeps its relative accuracy.

    Parameters
    ----------
    roots : the poles, shape (n,) [rad/s]
    zeros : shape (m,), m <= n [rad/s]
    leading : first coefficient of the numerator
    level : leading / product of the magnitudes of those poles, other than zero, that are left
        over when the slowest ones are paired with the zeros; it stays in range where leading may
        not
    """

    roots: Complex
    zeros: Complex
    leading: float
    level: float

    @property
    def poles(self) -> Complex:
        """The poles [rad/s]."""
        return self.roots

    def response(self, s: Complex) -> Complex:
        """Return the transfer function at complex frequencies s [rad/s]."""
        s = np.asarray(s, dtype=np.complex128)
        total = np.full(s.shape, self.level, dtype=np.complex128)
        for number, pole in enumerate(self.roots):
            if number < len(self.zeros):
                total *= (s - self.zeros[number]) / (s - pole)
            else:
                total *= (abs(pole) or 1.0) / (s - pole)
        return total

    def polynomials(self) -> tuple[Real, Real]:
        """Return numerator and denominator, highest power first, the denominator monic."""
        denominator = np.atleast_1d(np.real(np.poly(self.roots)))
        numerator = self.leading * np.atleast_1d(np.real(np.poly(self.zeros)))
        return np.pad(numerator, (len(denominator) - len(numerator), 0)), denominator
