"""Poles, zeros and gain of a whole chain, and what follows from them in closed form."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from frontend_sim.analog.block import Block, Complex, Real
from frontend_sim.analog.chain import Chain, compose
from frontend_sim.analog.factored_block import FactoredBlock
from frontend_sim.analog.factors import cascade
from frontend_sim.analog.section import Section

ROUNDING = 8.0 * float(np.finfo(np.float64).eps)
"""A coefficient below this share of its neighbours is what rounding left of zero."""

ON_AXIS = 1e-12
"""A zero whose real part is below this share of its magnitude lies on the imaginary axis."""


@dataclass(frozen=True, eq=False)
class Roots:
    """H(s) = prod(leading) · prod(s - zero) / prod(s - pole) · exp(-s delay).

    Parameters
    ----------
    zeros, poles : shape (z,), (n,) [rad/s]
    leading : first coefficient of the numerator of each block, whose product may leave the range
        of a double
    delay : pure delay [s]
    """

    zeros: Complex
    poles: Complex
    leading: Real
    delay: float

    @property
    def silent(self) -> bool:
        """Whether the chain passes nothing at all."""
        return bool(np.any(self.leading == 0.0))

    @property
    def sign(self) -> float:
        """Sign of the product of the leading coefficients."""
        return float(np.prod(np.sign(self.leading)))

    @property
    def undamped(self) -> bool:
        """Whether a pair of poles lies on the imaginary axis, away from the origin."""
        return bool(np.any((self.poles.real == 0.0) & (self.poles != 0.0)))

    def logarithmic_derivative(self, s: Complex) -> Complex:
        """Return H'(s) / H(s) = sum 1/(s - zero) - sum 1/(s - pole) - delay [s].

        On the imaginary axis, with s = jw, the magnitude and the phase of H follow from it:
        d ln|H| / dw = -Im(H'/H) and d arg H / dw = Re(H'/H). A root that s meets counts nothing.
        """
        total = np.full(s.shape, -self.delay, dtype=np.complex128)
        for sign, roots in ((1.0, self.zeros), (-1.0, self.poles)):
            for root in roots:
                distance = s - root
                met = distance == 0.0
                total += np.where(met, 0.0, sign / np.where(met, 1.0, distance))
        return total


def roots_of(chain: Chain) -> Roots:
    """Return the poles, zeros and leading coefficients of all blocks of a chain."""
    zeros, leading = [np.empty(0, dtype=np.complex128)], []
    for section in chain.sections:
        for block in section.blocks:
            found, first = _zeros_of(block)
            zeros.append(found)
            leading.append(first)
    return Roots(np.concatenate(zeros), chain.poles, np.array(leading), float(chain.delay[-1]))


def without_hidden_drift(chain: Chain) -> Chain:
    """Return a chain of the same response in which no zero at the origin hides a pole there.

    An integrator before a high pass drifts away inside while the output stays finite. Pairs of a
    pole and a zero at the origin are taken out; a chain without any comes back as it is.
    """
    roots = roots_of(chain)
    pairs = min(int(np.sum(roots.poles == 0.0)), int(np.sum(roots.zeros == 0.0)))
    if pairs == 0 or roots.silent:
        return chain
    zeros, poles = _less_origin(roots.zeros, pairs), _less_origin(roots.poles, pairs)
    blocks = cascade(list(zeros), list(poles), float(np.prod(roots.leading)))
    return compose([Section(chain.points[-1], blocks, roots.delay)])


def _less_origin(roots: Complex, count: int) -> Complex:
    keep = np.ones(len(roots), dtype=bool)
    keep[np.flatnonzero(roots == 0.0)[:count]] = False
    return np.asarray(roots[keep], dtype=np.complex128)


def _zeros_of(block: Block) -> tuple[Complex, float]:
    """Return the zeros of a block [rad/s] and the leading coefficient of its numerator."""
    if isinstance(block, FactoredBlock):
        return block.zeros, block.leading
    numerator, _ = block.polynomials()
    moving = np.abs(block.poles[block.poles != 0.0])
    rate = float(np.exp(np.mean(np.log(moving)))) if len(moving) else 1.0
    order = len(numerator) - 1
    # In x = s / rate all coefficients of a block are of one size, so rounding shows as such.
    scaled = numerator * rate ** -np.arange(order + 1.0)
    size = float(np.max(np.abs(scaled)))
    if size == 0.0:
        return np.empty(0, dtype=np.complex128), 0.0
    scaled = np.where(np.abs(scaled) <= ROUNDING * size, 0.0, scaled)
    first = int(np.flatnonzero(scaled)[0])
    found = rate * _polynomial_roots(scaled[first:])
    upright = np.abs(found.real) <= ON_AXIS * np.abs(found)
    return np.where(upright, 1j * found.imag, found), float(numerator[first])


def _polynomial_roots(coefficients: Real) -> Complex:
    """Return the roots, in closed form up to the second order; a zero at the origin is exact."""
    if len(coefficients) == 3 and coefficients[2] != 0.0:
        a, b, c = (float(value) for value in coefficients)
        discriminant = b * b - 4.0 * a * c
        if discriminant < 0.0:
            imaginary = float(np.sqrt(-discriminant))
            pair = [complex(-b, imaginary) / (2.0 * a), complex(-b, -imaginary) / (2.0 * a)]
            return np.array(pair, dtype=np.complex128)
        larger = -0.5 * (b + float(np.copysign(np.sqrt(discriminant), b)))
        return np.array([larger / a, c / larger], dtype=np.complex128)
    return np.asarray(np.roots(coefficients), dtype=np.complex128)
