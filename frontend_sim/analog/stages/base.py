"""What every stage of the chain has in common."""

from __future__ import annotations

from abc import abstractmethod
from typing import ClassVar

from pydantic import Field

from frontend_sim.analog.block import Block
from frontend_sim.analog.limits import AmplifierLimits, Limiter
from frontend_sim.analog.network import Circuit
from frontend_sim.analog.noise import NoiseInput
from frontend_sim.quantities import REFERENCE_TEMPERATURE
from frontend_sim.values import Value


class Stage(Value):
    """One physical stage between the sensor and the converter's pin.

    A stage is buffered: it neither loads what stands before it nor is loaded by what follows.
    """

    passive: ClassVar[bool] = False
    """Whether the real circuit is one without an amplifier, which loads what stands before it."""

    name: str = Field(
        default="", max_length=60, description="name of the stage in tables, plots and records"
    )

    def label(self, position: int) -> str:
        """Return the stage's name, or its kind and position in the chain (from 1)."""
        kind = str(getattr(self, "kind", "stage"))
        return self.name or f"{position} {kind}"

    def units(self) -> tuple[str, str] | None:
        """Return the SI units of input and output; None for a stage that keeps any unit.

        The units are keys of ``frontend_sim.quantities.SIGNALS``.
        """
        return ("V", "V")

    @abstractmethod
    def blocks(self) -> tuple[Block, ...]:
        """Return the linear blocks of the stage, in the order of the signal."""

    def buffered(self) -> tuple[Block, ...] | None:
        """Return the blocks as if a buffer stood behind every section; None if there are none."""
        return None

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the stage's own noise sources at a temperature [K]; an ideal stage has none."""
        return ()

    def offset(self, temperature: float) -> float:
        """Return the constant that the stage adds to its own output at a temperature [K].

        It is what is left of offset voltages, bias currents and references long after they were
        switched on, in the unit of the output.
        """
        return 0.0

    def offset_spread(self, temperature: float) -> float:
        """Return how far offset voltages and bias currents of the sizes given, but of either sign,
        can move the output to either side [unit of the output].
        """
        return 0.0

    def resistance_at_rest(self) -> float | None:
        """Return the resistance of the output against ground long after anything moved [ohm].

        None for a stage that drives its output, or has no way to ground.
        """
        return None

    def rails(self) -> tuple[float, float]:
        """Return the levels that the output does not pass at rest, infinite without any [V]."""
        limits = self.limits()
        return limits.low, limits.high

    def output_circuit(self) -> Circuit | None:
        """Return the circuit that a load at the output sees; None for an ideal source."""
        return None

    def limits(self) -> AmplifierLimits:
        """Return the limits of the amplifier in the stage; without one nothing limits."""
        return AmplifierLimits()

    def limiter(self, temperature: float = REFERENCE_TEMPERATURE) -> Limiter | None:
        """Return what is not linear in the stage at a temperature [K]; None if all of it is.

        The limiter stands for the blocks that it names in ``replaced``: those before them stand
        before it, those after them behind it. ``blocks()`` is the model of small signals.

        Raises
        ------
        ModelError
            If the limits cannot be put on these blocks, see ``AmplifierLimits.around``.
        """
        limits = self.limits()
        return limits.around(self.blocks()) if limits.any else None

    def transport_delay(self) -> float:
        """Return the pure delay of the stage [s]."""
        return 0.0


class AnyUnitStage(Stage):
    """A stage that is given by its response alone, whatever quantity passes through it."""

    def units(self) -> None:
        """Return that the output has the unit of the input."""
        return
