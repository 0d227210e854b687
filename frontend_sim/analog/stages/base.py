"""What every stage of the chain has in common."""

from __future__ import annotations

from abc import abstractmethod

from pydantic import Field

from frontend_sim.analog.block import Block
from frontend_sim.analog.noise import NoiseInput
from frontend_sim.values import Value


class Stage(Value):
    """One physical stage between the sensor and the converter's pin.

    A stage is buffered: it neither loads what stands before it nor is loaded by what follows.
    """

    name: str = Field(
        default="", max_length=60, description="name of the stage in tables, plots and records"
    )

    def label(self, position: int) -> str:
        """Return the stage's name, or its kind and position in the chain (from 1)."""
        kind = str(getattr(self, "kind", "stage"))
        return self.name or f"{position} {kind}"

    @abstractmethod
    def blocks(self) -> tuple[Block, ...]:
        """Return the linear blocks of the stage, in the order of the signal."""

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the stage's own noise sources at a temperature [K]; an ideal stage has none."""
        return ()

    def transport_delay(self) -> float:
        """Return the pure delay of the stage [s]."""
        return 0.0
