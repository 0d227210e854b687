"""A circuit solved: its block, and the way of every other input to the output."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.factored_block import FactoredBlock
from frontend_sim.analog.network.parts import SIGNAL, Circuit
from frontend_sim.analog.network.polynomial import Polynomial
from frontend_sim.analog.network.realization import input_columns, state_matrix
from frontend_sim.analog.network.roots import roots_of
from frontend_sim.analog.network.transfer import Transfer, transfer_of
from frontend_sim.errors import ModelError


@dataclass(frozen=True, eq=False)
class Solution:
    """The linear model of a circuit.

    Parameters
    ----------
    block : from the signal to the output
    columns : for every input, b of shape (n,) and d, with the a and c of the block
    levels : for every input, the output after it has rested at one for ever; None where the
        output never rests
    """

    block: FactoredBlock
    columns: dict[str, tuple[Real, float]]
    levels: dict[str, float | None]


@lru_cache(maxsize=512)
def solve(circuit: Circuit) -> Solution:
    """Return the linear model of a circuit; the last ones asked for are remembered.

    Raises
    ------
    ModelError
        If the circuit has no unique answer, a gain without bound, or a pole in the right half
        plane.
    """
    transfer = transfer_of(circuit)
    poles = roots_of(transfer.denominator)
    for pole in poles:
        if pole.real > 0.0:
            beside = "" if pole.imag == 0.0 else f" ± j{abs(pole.imag):.4g}"
            raise ModelError(
                f"the circuit is unstable: it has a pole at {pole.real:.4g}{beside} rad/s in the "
                "right half plane and would oscillate or latch"
            )
    a, c = state_matrix(poles)
    columns = input_columns(poles, transfer.numerators)
    levels = {source: _level(transfer, source) for source in transfer.numerators}
    return Solution(_block(a, c, poles, columns[SIGNAL], transfer), columns, levels)


def _level(transfer: Transfer, source: str) -> float | None:
    top, bottom = transfer.numerators[source], transfer.denominator
    if not top:
        return 0.0
    power = next(k for k, value in enumerate(bottom) if value)
    if any(top[:power]):
        return None
    return float(top[power] / bottom[power]) if power < len(top) else 0.0


def _block(
    a: Real, c: Real, poles: list[complex], column: tuple[Real, float], transfer: Transfer
) -> FactoredBlock:
    numerator: Polynomial = transfer.numerators[SIGNAL]
    roots = sorted(poles, key=abs)
    zeros = sorted(roots_of(numerator), key=abs) if numerator else []
    leading = numerator[-1] if numerator else Fraction(0)
    level = leading
    for pole in roots[len(zeros) :]:
        level /= Fraction(abs(pole) or 1.0)
    b, d = column
    for array in (a, b, c):
        array.setflags(write=False)
    try:
        return FactoredBlock(
            a,
            b,
            c,
            d,
            np.array(roots, dtype=np.complex128),
            np.array(zeros, dtype=np.complex128),
            float(leading),
            float(level),
        )
    except OverflowError:
        raise ModelError(
            f"the part values of this circuit of order {len(poles)} lie too far apart: its gain "
            "leaves the range of numbers; take out what is too fast to matter"
        ) from None
