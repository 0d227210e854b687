"""What every stage with an operational amplifier has in common: the amplifier's own data."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Iterator, Sequence
from fractions import Fraction
from typing import ClassVar, Self

from pydantic import Field

from frontend_sim.analog.limits import AmplifierLimits, AmplifierLoop, Limiter
from frontend_sim.analog.network import (
    GROUND,
    Amplifier,
    Capacitor,
    Circuit,
    Injected,
    OpenLoop,
    Part,
    Resistor,
    Solution,
    opened,
    solve,
)
from frontend_sim.analog.noise import NoiseInput
from frontend_sim.analog.stages.loop_bandwidth import loop_bandwidth
from frontend_sim.analog.stages.network_stage import NetworkStage
from frontend_sim.errors import ModelError
from frontend_sim.quantities import (
    REFERENCE_TEMPERATURE,
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

OUTPUT = "output"
"""Node of the stage's output."""

REFERENCE = "reference voltage"
"""Input of the circuit that a reference voltage holds."""

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


class AmplifierStage(NetworkStage):
    """A stage around one amplifier, or several of one kind, with the gain

        A(s) = A0 / ((1 + s A0 / (2 pi f_u)) (1 + s / (2 pi f_2)))

    and an output resistance inside the loop. Input offset and voltage noise stand in series with
    the noninverting input; into each input flows the bias current, and its noise. Left-out values
    are ideal: no pole, infinite gain, zero resistance, no error.
    """

    cure: ClassVar[str] = (
        "more gain, a faster second_pole, a smaller output_resistance or load_capacitance, or a "
        "small capacitance across the feedback resistor gives some"
    )

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

    def check(self) -> None:
        """Raise ValueError if the amplifier's data contradict each other, see ``NetworkStage``."""
        for key, needs in NEEDS.items():
            if getattr(self, key) is not None and not any(getattr(self, need) for need in needs):
                raise ValueError(
                    f"{key} has no effect without {' or '.join(needs)}; give that too, or take "
                    f"{key} out"
                )
        self.limits()
        gain = self.noise_gain()
        if self.open_loop_gain is not None and self.open_loop_gain <= gain:
            raise ValueError(
                f"open_loop_gain {self.open_loop_gain:g} must be above the gain {gain:g} that the "
                "feedback asks for; take an amplifier with more gain"
            )

    @abstractmethod
    def noise_gain(self) -> float:
        """Return the gain from the noninverting input at low frequency, ideal amplifier [1]."""

    def noise_gain_times(self) -> tuple[float, float]:
        """Return the time constants of zero and pole of the noise gain, see ``loop_bandwidth``."""
        return 0.0, 0.0

    def closed_loop_bandwidth(self) -> float | None:
        """Return up to which frequency the loop has gain, None without ``gain_bandwidth`` [Hz]."""
        if self.gain_bandwidth is None:
            return None
        return loop_bandwidth(self.gain_bandwidth, self.noise_gain(), *self.noise_gain_times())

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

    def limiter(self, temperature: float = REFERENCE_TEMPERATURE) -> Limiter | None:
        """Return the limits of the amplifier in its circuit, see ``Stage``.

        With resistors alone around an amplifier of one pole or none the closed loop has a closed
        form; else the circuit is cut open at what the amplifier drives, see ``AmplifierLoop``.
        """
        limits = self.limits()
        if limits == AmplifierLimits():
            return None
        circuit = self.circuit()
        around = opened(circuit, AMPLIFIER)
        if around.output is None and self.second_pole is None and not len(around.difference.c):
            return limits.around(self.blocks())
        output = self.offset(temperature)
        drive = output if around.output is None else self._standing(around.drive, temperature)
        within = (limits.up, limits.down, limits.low, limits.high)
        return AmplifierLoop.of(around, self.open_loop(), within, (drive, output))

    def _standing(self, node: str, temperature: float) -> float:
        """Return where the constant inputs of the circuit let a node stand [V]."""
        levels = solve(Circuit(self.circuit().parts, node)).levels
        constants = self.constants(temperature)
        return sum((levels[key] or 0.0) * value for key, value in constants.items() if value)

    def solution(self) -> Solution:
        """Return the linear model of the circuit; see ``NetworkStage``."""
        try:
            return super().solution()
        except ModelError as error:
            if "unstable" not in str(error):
                raise
            raise ModelError(
                f"the closed loop has no phase margin left: {error}; {self.cure}"
            ) from error

    def noise(self, temperature: float) -> tuple[NoiseInput, ...]:
        """Return thermal noise of the resistors, voltage and current noise of the amplifiers."""
        return (*super().noise(temperature), *self._amplifier_noise())

    def _amplifier_noise(self) -> Iterator[NoiseInput]:
        solution = self.solution()
        for part in self.circuit().parts:
            if isinstance(part, Amplifier) and self.voltage_noise > 0.0:
                corner = self.voltage_noise_corner or 0.0
                name = f"voltage noise of {part.name}"
                yield self.noise_input(name, part.name, self.voltage_noise, corner)
            elif isinstance(part, Injected) and _is_input(part) and self.current_noise > 0.0:
                corner = self.current_noise_corner or 0.0
                # As a voltage, through the resistance from the input to the output at rest.
                resistance = abs(solution.levels[part.source] or 0.0) or 1.0
                b, d = solution.columns[part.source]
                if b.any() or d != 0.0:
                    yield NoiseInput(
                        f"noise of the {part.source}",
                        self.current_noise * resistance,
                        corner,
                        0,
                        b / resistance,
                        d / resistance,
                    )

    def offset(self, temperature: float) -> float:
        """Return what offset voltage, bias currents and references leave at the output [V].

        The offset voltage is offset_voltage + offset_drift · (temperature - 25 degC).

        Raises
        ------
        ModelError
            If one of them makes the output drift away.
        """
        total = 0.0
        for source, value in self.constants(temperature).items():
            if value == 0.0:
                continue
            level = self.solution().levels[source]
            if level is None:
                raise ModelError(f"the {source} makes the output drift away without end")
            total += level * value
        return total

    def offset_spread(self, temperature: float) -> float:
        """Return how far the output can lie to either side, see ``Stage.offset_spread``.

        Offset voltages may have either sign, each amplifier its own; so may the bias current, of
        which that of both inputs is one.
        """
        levels, amplifiers = (
            self.solution().levels,
            {part.name for part in self.circuit().parts if isinstance(part, Amplifier)},
        )
        own = AmplifierStage.constants(self, temperature)
        sizes = {source: (levels[source] or 0.0) * value for source, value in own.items()}
        voltages = sum(abs(size) for source, size in sizes.items() if source in amplifiers)
        return voltages + abs(
            sum(size for source, size in sizes.items() if source not in amplifiers)
        )

    def constants(self, temperature: float) -> dict[str, float]:
        """Return the inputs of the circuit that are held constant, and at what [V or A]."""
        voltage = self.offset_voltage + self.offset_drift * (temperature - REFERENCE_TEMPERATURE)
        constants: dict[str, float] = {}
        for part in self.circuit().parts:
            if isinstance(part, Amplifier):
                constants[part.name] = voltage
            elif isinstance(part, Injected) and _is_input(part):
                constants[part.source] = -self.bias_current
        return constants

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


def _is_input(part: Injected) -> bool:
    return part.source.startswith("current into the ")
