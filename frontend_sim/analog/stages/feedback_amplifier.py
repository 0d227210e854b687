"""What inverting and noninverting amplifiers have in common: two resistors, or a gain."""

from __future__ import annotations

from typing import ClassVar

from pydantic import Field

from frontend_sim.analog.network import Held, Part, Resistor
from frontend_sim.analog.stages.amplifier_stage import AmplifierStage
from frontend_sim.analog.stages.loop_bandwidth import feedback_times
from frontend_sim.quantities import Capacitance, Ratio, Resistance


class FeedbackAmplifier(AmplifierStage):
    """An amplifier whose gain two resistors at its inverting input set, or a number alone."""

    second_resistor: ClassVar[str]
    """Key of the resistor that ends at the inverting input and is not the feedback."""

    gain: Ratio | None = Field(default=None, description="gain; or give the two resistors")
    feedback_resistance: Resistance | None = Field(
        default=None, description="resistor from the output to the inverting input"
    )
    feedback_capacitance: Capacitance | None = Field(
        default=None, description="capacitor across feedback_resistance; needs the resistors"
    )

    def check(self) -> None:
        """Raise ValueError if the gain is given twice or not at all, see ``NetworkStage``."""
        keys = f"feedback_resistance and {self.second_resistor}"
        given = (self.feedback_resistance is not None, self._second() is not None)
        if (self.gain is not None) == any(given) or any(given) != all(given):
            raise ValueError(f"give either gain, or {keys} together")
        if self.feedback_capacitance is not None and not all(given):
            raise ValueError(f"feedback_capacitance needs {keys}; give these instead of gain")
        super().check()

    @property
    def resistors(self) -> tuple[float, float] | None:
        """The feedback resistor and the second one [ohm]; None where the gain alone is given."""
        feedback, second = self.feedback_resistance, self._second()
        return None if feedback is None or second is None else (feedback, second)

    def _second(self) -> float | None:
        value: float | None = getattr(self, self.second_resistor)
        return value

    def noise_gain_times(self) -> tuple[float, float]:
        """Return zero and pole that ``feedback_capacitance`` makes [s]."""
        if self.resistors is None:
            return 0.0, 0.0
        return feedback_times(*self.resistors, self.feedback_capacitance)


def held_behind(
    name: str, given: str, key: str, resistance: float | None
) -> tuple[list[Part], str]:
    """Return what holds the noninverting input, perhaps behind a resistor, and the input's node.

    Parameters
    ----------
    name : of the node that is held;  given : input of the circuit that tells at what
    key : of the resistor;  resistance : None for none [ohm]
    """
    held = Held(name, given)
    if resistance is None:
        return [held], name
    return [held, Resistor(key, name, "plus", resistance)], "plus"
