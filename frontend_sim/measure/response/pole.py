"""The poles of a chain as an engineer reads them."""

from __future__ import annotations

import math
from dataclasses import dataclass

from frontend_sim.analog.chain import Chain


@dataclass(frozen=True)
class Pole:
    """A real pole, or a conjugate pair, p = real ± j imaginary.

        w0 = |p|,    damping ratio z = -Re p / |p|,    Q = 1 / (2 z),    time constant = -1 / Re p

    Source: any control textbook, e.g. Ogata, *Modern Control Engineering* (from memory).

    Parameters
    ----------
    stage : name of the stage that brings it
    real, imaginary : the imaginary part at least 0 [rad/s]
    natural_frequency : w0 / (2 pi) [Hz]
    damping_ratio : 1 for a real pole; None at the origin [1]
    quality_factor : 0.5 for a real pole; None at the origin or without damping [1]
    time_constant : None without damping [s]
    """

    stage: str
    real: float
    imaginary: float
    natural_frequency: float
    damping_ratio: float | None
    quality_factor: float | None
    time_constant: float | None


def poles_of(chain: Chain) -> tuple[Pole, ...]:
    """Return the poles of a chain stage by stage, one for each conjugate pair."""
    return tuple(
        _described(section.name, complex(pole))
        for section in chain.sections
        for block in section.blocks
        for pole in block.poles
        if pole.imag >= 0.0
    )


def _described(stage: str, pole: complex) -> Pole:
    size = abs(pole)
    damping = -pole.real / size if size > 0.0 else None
    return Pole(
        stage,
        pole.real,
        pole.imag,
        size / (2.0 * math.pi),
        damping,
        0.5 / damping if damping else None,
        -1.0 / pole.real if pole.real != 0.0 else None,
    )
