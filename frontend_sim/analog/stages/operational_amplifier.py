"""An operational amplifier: its data, its limits, and its parts in a circuit."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from typing import Self

from pydantic import Field

from frontend_sim.analog.limits import AmplifierLimits
from frontend_sim.analog.network import (
    GROUND,
    Amplifier,
    Capacitor,
    Injected,
    OpenLoop,
    Part,
    Resistor,
)
from frontend_sim.quantities import (
    Capacitance,
    Current,
    CurrentNoiseDensity,
    Frequency,
    GainBandwidth,
    NoiseDensity,
    PositiveRatio,
    PositiveSlope,
    Resistance,
    Voltage,
    VoltageDrift,
)
from frontend_sim.values import Value

OUTPUT = "output"
"""Node of the stage's output."""

AMPLIFIER = "the amplifier"
"""Name of the amplifier at the output, the one that is limited."""

INPUTS = ("noninverting", "inverting")
"""Names of the two inputs of an amplifier, in the order in which they are given."""

NEEDS = {
    "second_pole": ("gain_bandwidth", "open_loop_gain"),
    "output_resistance": ("gain_bandwidth", "open_loop_gain"),
    "load_resistance": ("output_resistance",),
    "load_capacitance": ("output_resistance",),
    "voltage_noise_corner": ("voltage_noise",),
    "current_noise_corner": ("current_noise",),
}
"""Keys that do nothing without one of some others."""

IDEAL = (
    "gain_bandwidth",
    "open_loop_gain",
    "second_pole",
    "output_resistance",
    "load_resistance",
    "load_capacitance",
)
"""Keys without which the amplifier is ideal."""


class OperationalAmplifier(Value):
    """The data of an amplifier, or of several of one kind, with the gain

        A(s) = A0 / ((1 + s A0 / (2 pi f_u)) (1 + s / (2 pi f_2)))

    and an output resistance inside the loop. Left-out values are ideal: no pole, infinite gain,
    zero resistance, no error.
    """

    gain_bandwidth: GainBandwidth | None = Field(
        default=None, description="gain-bandwidth product f_u; left out, the gain has no pole there"
    )
    open_loop_gain: PositiveRatio | None = Field(
        default=None,
        description="gain A0 without feedback at low frequency; left out, it is infinite",
        json_schema_extra={"examples": ["100 dB", "200000"]},
    )
    second_pole: Frequency | None = Field(
        default=None, description="second pole f_2 of the open loop"
    )
    output_resistance: Resistance | None = Field(
        default=None, description="output resistance without feedback, ahead of the feedback"
    )
    load_resistance: Resistance | None = Field(
        default=None, description="load from the output to ground; needs output_resistance"
    )
    load_capacitance: Capacitance | None = Field(
        default=None, description="capacitive load of the output; needs output_resistance"
    )
    offset_voltage: Voltage = Field(
        default=0.0, description="input offset voltage at 25 degC, at the noninverting input"
    )
    offset_drift: VoltageDrift = Field(
        default=0.0, description="change of offset_voltage with temperature"
    )
    bias_current: Current = Field(
        default=0.0, description="current that flows into each of the two inputs"
    )
    voltage_noise: NoiseDensity = Field(
        default=0.0, description="density of the input voltage noise where it is flat"
    )
    voltage_noise_corner: Frequency | None = Field(
        default=None, description="frequency below which the voltage noise rises as 1/f"
    )
    current_noise: CurrentNoiseDensity = Field(
        default=0.0, description="density of the noise current of each input where it is flat"
    )
    current_noise_corner: Frequency | None = Field(
        default=None, description="frequency below which the noise currents rise as 1/f"
    )
    slew_rate: PositiveSlope | None = Field(
        default=None, description="steepest slope of the output; left out, there is no limit"
    )
    output_low: Voltage | None = Field(
        default=None, description="lower rail of the output; left out, there is none"
    )
    output_high: Voltage | None = Field(
        default=None, description="upper rail of the output; left out, there is none"
    )

    def refuse_idle_keys(self) -> None:
        """Raise ValueError if a key has no effect without another one."""
        for key, needs in NEEDS.items():
            if getattr(self, key) is not None and not any(getattr(self, need) for need in needs):
                raise ValueError(
                    f"{key} has no effect without {' or '.join(needs)}; give that too, or take "
                    f"{key} out"
                )

    def with_ideal_amplifier(self) -> Self:
        """Return the same parts around an amplifier without poles, of infinite gain, unloaded."""
        return self.model_copy(update=dict.fromkeys(IDEAL))

    def limits(self) -> AmplifierLimits:
        """Return slew rate and rails of the output.

        Raises
        ------
        ValueError
            If the rails are reversed.
        """
        return AmplifierLimits(self.slew_rate, self.output_low, self.output_high)

    def open_loop(self) -> OpenLoop:
        """Return the gain of the amplifier without feedback."""
        return OpenLoop(self.open_loop_gain, self.gain_bandwidth, self.second_pole)

    def amplifier(
        self,
        senses: Sequence[tuple[str, float | Fraction]],
        inputs: Sequence[str | None],
        output: str = OUTPUT,
        name: str = AMPLIFIER,
    ) -> list[Part]:
        """Return the parts of an amplifier: its gain, output resistance and input currents.

        Parameters
        ----------
        senses : nodes and weights, as ``network.Amplifier`` takes them
        inputs : nodes of the noninverting and of the inverting input; None where no current of
            the input can act
        """
        drive = output if self.output_resistance is None else f"drive of {name}"
        parts: list[Part] = [Amplifier(name, tuple(senses), drive, self.open_loop())]
        if self.output_resistance is not None:
            parts.append(Resistor(drive, drive, output, self.output_resistance, noisy=False))
        for node, word in zip(inputs, INPUTS, strict=True):
            if node is not None:
                parts.append(Injected(node, f"current into the {word} input of {name}"))
        return parts

    def load(self) -> list[Part]:
        """Return the load of the stage's output."""
        parts: list[Part] = []
        if self.load_resistance is not None:
            parts.append(Resistor("load_resistance", OUTPUT, GROUND, self.load_resistance))
        if self.load_capacitance is not None:
            parts.append(Capacitor(OUTPUT, GROUND, self.load_capacitance))
        return parts


def is_input_current(part: Injected) -> bool:
    """Return whether a current is that into an input of an amplifier."""
    return part.source.startswith("current into the ")
