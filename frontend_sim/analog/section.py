"""What one stage brings into a chain."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Self

from frontend_sim.analog.block import Block, Real
from frontend_sim.analog.noise import NoiseInput
from frontend_sim.errors import ModelError
from frontend_sim.quantities import REFERENCE_TEMPERATURE

if TYPE_CHECKING:
    from frontend_sim.analog.stages.base import Stage


@dataclass(frozen=True, eq=False)
class Tap:
    """One more point of the chain, inside a section: c x + d u of its states and its input.

    Parameters
    ----------
    c : shape (n,), over the states of all blocks of the section;  d : direct part
    delay : further pure delay of this point alone [s]
    """

    name: str
    c: Real
    d: float
    delay: float = 0.0


@dataclass(frozen=True, eq=False)
class Section:
    """What one stage brings into the chain.

    Parameters
    ----------
    delay : pure delay [s]
    offset : constant that the stage adds to its output
    taps : further points, behind the section's own; only a section of one block has any
    """

    name: str
    blocks: tuple[Block, ...]
    delay: float
    noise: tuple[NoiseInput, ...] = ()
    offset: float = 0.0
    taps: tuple[Tap, ...] = ()

    @classmethod
    def of(cls, stage: Stage, name: str, temperature: float = REFERENCE_TEMPERATURE) -> Self:
        """Return the section of one stage at a temperature [K].

        Raises
        ------
        ModelError
            If a pole lies in the right half plane: the stage has no bounded response.
        """
        blocks = stage.blocks()
        for block in blocks:
            for pole in block.poles:
                if pole.real > 0.0:
                    raise ModelError(
                        f"stage {name!r} is unstable: it has a pole at {_text_of(pole)} rad/s; no "
                        "pole may lie in the right half plane"
                    )
        return cls(
            name,
            blocks,
            stage.transport_delay(),
            stage.noise(temperature),
            stage.offset(temperature),
        )


def _text_of(pole: complex) -> str:
    return f"{pole.real:g}" if pole.imag == 0.0 else f"{pole.real:g} ± j{abs(pole.imag):g}"
