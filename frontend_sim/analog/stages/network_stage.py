"""What stages have in common that are given by the parts of a circuit."""

from __future__ import annotations

from abc import abstractmethod
from typing import Self

from pydantic import model_validator

from frontend_sim.analog.block import Block
from frontend_sim.analog.network import Circuit, Resistor, Solution, solve
from frontend_sim.analog.noise import NoiseInput, thermal_density
from frontend_sim.analog.stages.base import Stage
from frontend_sim.errors import ModelError


class NetworkStage(Stage):
    """A stage given by its parts, all of which act on each other; see docs/theory/networks.md."""

    @model_validator(mode="after")
    def _usable(self) -> Self:
        self.check()
        try:
            self.solution()
        except ModelError as error:
            raise ValueError(str(error)) from None
        return self

    def check(self) -> None:
        """Raise ValueError if keys contradict each other; the circuit is solved only after that."""

    @abstractmethod
    def circuit(self) -> Circuit:
        """Return the parts and how they are joined."""

    def output_circuit(self) -> Circuit:
        """Return the stage's own circuit."""
        return self.circuit()

    def solution(self) -> Solution:
        """Return the linear model of the circuit.

        Raises
        ------
        ModelError
            If the circuit has no unique answer, a gain without bound, or is unstable.
        """
        return solve(self.circuit())

    def blocks(self) -> tuple[Block, ...]:
        """Return one block with all poles of the circuit."""
        return (self.solution().block,)

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return the thermal noise of every resistor at a temperature [K]."""
        return tuple(
            self.noise_input(f"thermal noise of {part.name}", part.name, density)
            for part in self.circuit().parts
            if isinstance(part, Resistor) and part.noisy
            if (density := thermal_density(part.resistance, temperature)) > 0.0
        )

    def noise_input(
        self, name: str, source: str, density: float, corner: float = 0.0
    ) -> NoiseInput:
        """Return a noise source that enters where an input of the circuit does.

        Parameters
        ----------
        source : name of the circuit's input
        density : one-sided, where it is flat [V/sqrt(Hz) or A/sqrt(Hz)]
        corner : of the 1/f part [Hz]
        """
        b, d = self.solution().columns[source]
        return NoiseInput(name, density, corner, 0, b, d)
