"""A state space for transfer functions that share their poles.

The poles make a row of sections, slow ones first, each of one state (a real pole p) or two (a
conjugate pair of magnitude w). With v the sum of what the sections before it put out,

    real    x' = p x + 2 p v,                                   out = x
    pair    x1' = -w x2,    x2' = w x1 + 2 Re(p) x2 + 4 Re(p) v,    out = x2

and y is the sum of all outputs. From v to v + out a section is an all-pass, D(-s)/D(s) but for the
sign. So whatever an input starts in a section reaches y at its full strength, whatever stands
behind it: no coefficient ever grows, the states are as large as the signals (volts), each row is
proportional to the rate of its own pole, and no slow pole is lost in the rounding of a fast one,
as it is in the capacitor voltages of two capacitors joined by a small resistance. Equal poles and
poles on the imaginary axis are nothing special. Sections of this kind: S. Takenaka 1925 and F.
Malmquist 1926 (orthogonal rational functions); R. A. Roberts and C. T. Mullis 1987, *Digital
Signal Processing*, for state spaces of all-passes. (From memory.) See docs/theory/networks.md.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from decimal import Decimal, localcontext

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.network.polynomial import Polynomial

DIGITS, DIGITS_PER_POLE = 60, 12
"""Decimal digits to divide polynomials with; what remains is rounded to doubles."""

_Coefficients = list[Decimal]


@dataclass(frozen=True)
class _Section:
    """One real pole or one conjugate pair: its monic polynomial and that of the mirrored poles."""

    pole: complex
    own: tuple[Decimal, ...]
    mirrored: tuple[Decimal, ...]

    @classmethod
    def of(cls, pole: complex) -> _Section:
        real, imaginary = Decimal(pole.real), Decimal(pole.imag)
        if pole.imag == 0.0:
            return cls(pole, (-real, Decimal(1)), (real, Decimal(1)))
        square = real * real + imaginary * imaginary
        return cls(pole, (square, -2 * real, Decimal(1)), (square, 2 * real, Decimal(1)))

    @property
    def order(self) -> int:
        return len(self.own) - 1


def state_matrix(poles: Sequence[complex]) -> tuple[Real, Real]:
    """Return a, shape (n, n) [1/s], and c, shape (n,), for poles in the left half plane."""
    sections = _sections(poles)
    n = sum(section.order for section in sections)
    a, c = np.zeros((n, n)), np.zeros(n)
    at = 0
    for section in sections:
        pole = section.pole
        last = at + section.order - 1
        if section.order == 1:
            a[at, at] = pole.real
            a[at, :at] = 2.0 * pole.real * c[:at]
        else:
            a[at : at + 2, at : at + 2] = [[0.0, -abs(pole)], [abs(pole), 2.0 * pole.real]]
            a[last, :at] = 4.0 * pole.real * c[:at]
        c[last] = 1.0
        at += section.order
    return a, c


def input_columns(
    poles: Sequence[complex], numerators: dict[str, Polynomial]
) -> dict[str, tuple[Real, float]]:
    """Return b, shape (n,), and d of every input for the states of ``state_matrix``.

    Parameters
    ----------
    poles : roots of the denominator, which has the leading coefficient one [rad/s]
    numerators : exact, of at most the denominator's degree

    The numerators are written as sum_k n_k · (own polynomials before k) · (mirrored ones behind
    k): modulo the first section's polynomial only its own term is left, which gives n_1, and so
    on, section by section.
    """
    with localcontext(prec=DIGITS + DIGITS_PER_POLE * len(poles)):
        sections = _sections(poles)
        behind: list[_Coefficients] = [[Decimal(1)]]
        whole: _Coefficients = [Decimal(1)]
        for section in reversed(sections):
            behind.append(_product(behind[-1], section.mirrored))
            whole = _product(whole, section.own)
        behind = behind[-2::-1]
        return {
            source: _column(sections, behind, whole, numerator)
            for source, numerator in numerators.items()
        }


def _sections(poles: Sequence[complex]) -> list[_Section]:
    return [_Section.of(pole) for pole in sorted(poles, key=abs) if pole.imag >= 0.0]


def _column(
    sections: list[_Section], behind: list[_Coefficients], whole: _Coefficients, p: Polynomial
) -> tuple[Real, float]:
    rest = [Decimal(value.numerator) / Decimal(value.denominator) for value in p]
    rest += [Decimal(0)] * (len(whole) - len(rest))
    direct = rest[-1]
    rest = [value - direct * other for value, other in zip(rest, whole, strict=True)][:-1]
    b: list[float] = []
    for section, mirrored in zip(sections, behind, strict=True):
        own = section.own
        share = _quotient_modulo(_remainder(rest, own), _remainder(mirrored, own), own)
        for power, value in enumerate(_product(share, mirrored)):
            rest[power] -= value
        rest = _divided(rest, own)[section.order :]
        if section.order == 1:
            b.append(float(share[0]))
        else:
            b += [float(share[0]) / abs(section.pole), float(share[1])]
    return np.array(b), float(direct)


def _product(p: Sequence[Decimal], q: Sequence[Decimal]) -> _Coefficients:
    result = [Decimal(0)] * (len(p) + len(q) - 1)
    for i, x in enumerate(p):
        for j, y in enumerate(q):
            result[i + j] += x * y
    return result


def _divided(p: _Coefficients, by: Sequence[Decimal]) -> _Coefficients:
    """Return p divided by a monic polynomial: the remainder, then the quotient, lowest first."""
    rest = list(p)
    order = len(by) - 1
    for top in range(len(rest) - 1, order - 1, -1):
        for i in range(order):
            rest[top - order + i] -= rest[top] * by[i]
    return rest


def _remainder(p: _Coefficients, by: Sequence[Decimal]) -> _Coefficients:
    order = len(by) - 1
    return (_divided(p, by) + [Decimal(0)] * order)[:order]


def _quotient_modulo(
    top: _Coefficients, bottom: _Coefficients, by: Sequence[Decimal]
) -> _Coefficients:
    """Return top / bottom modulo a monic polynomial of first or second degree."""
    if len(by) == 2:
        return [top[0] / bottom[0]]
    (r0, r1), (q0, q1), (a0, a1) = top, bottom, by[:2]
    norm = q0 * q0 - q0 * q1 * a1 + q1 * q1 * a0
    i0, i1 = (q0 - q1 * a1) / norm, -q1 / norm
    return [r0 * i0 - r1 * i1 * a0, r1 * i0 + r0 * i1 - r1 * i1 * a1]
