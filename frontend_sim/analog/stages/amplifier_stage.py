"""What every stage has in common that stands around an operational amplifier."""

from __future__ import annotations

import math
from abc import abstractmethod
from collections.abc import Iterator
from typing import ClassVar

from frontend_sim.analog.limits import AmplifierLoop, Limiter
from frontend_sim.analog.network import (
    SIGNAL,
    Amplifier,
    Circuit,
    Injected,
    Solution,
    opened,
    solve,
)
from frontend_sim.analog.noise import NoiseInput
from frontend_sim.analog.stages.loop_bandwidth import loop_bandwidth
from frontend_sim.analog.stages.network_stage import NetworkStage
from frontend_sim.analog.stages.operational_amplifier import (
    AMPLIFIER,
    OUTPUT,
    OperationalAmplifier,
    is_input_current,
)
from frontend_sim.errors import ModelError
from frontend_sim.quantities import REFERENCE_TEMPERATURE

REFERENCE = "reference voltage"
"""Input of the circuit that a reference voltage holds."""


class AmplifierStage(OperationalAmplifier, NetworkStage):
    """A stage around one amplifier, or several of one kind.

    Input offset and voltage noise stand in series with the noninverting input; into each input
    flows the bias current, and its noise.
    """

    cure: ClassVar[str] = (
        "more gain, a faster second_pole, a smaller output_resistance or load_capacitance, or a "
        "small capacitance across the feedback resistor gives some"
    )

    @abstractmethod
    def noise_gain(self) -> float:
        """Return the gain from the noninverting input at low frequency, ideal amplifier [1]."""

    def check(self) -> None:
        """Raise ValueError if the amplifier's data contradict each other, see ``NetworkStage``."""
        self.refuse_idle_keys()
        self.limits()
        gain = self.noise_gain()
        if self.open_loop_gain is not None and self.open_loop_gain <= gain:
            raise ValueError(
                f"open_loop_gain {self.open_loop_gain:g} must be above the gain {gain:g} that the "
                "feedback asks for; take an amplifier with more gain"
            )

    def noise_gain_times(self) -> tuple[float, float]:
        """Return the time constants of zero and pole of the noise gain, see ``loop_bandwidth``."""
        return 0.0, 0.0

    def closed_loop_bandwidth(self) -> float | None:
        """Return up to which frequency the loop has gain, None without ``gain_bandwidth`` [Hz]."""
        if self.gain_bandwidth is None:
            return None
        return loop_bandwidth(self.gain_bandwidth, self.noise_gain(), *self.noise_gain_times())

    def limiter(self, temperature: float = REFERENCE_TEMPERATURE) -> Limiter | None:
        """Return the limits of the amplifier in its circuit, see ``Stage``.

        With resistors alone around an amplifier of one pole or none the closed loop has a closed
        form; else the circuit is cut open at what the amplifier drives, see ``AmplifierLoop``.
        """
        limits = self.limits()
        if not limits.any:
            return None
        circuit = self.circuit()
        around = opened(circuit, AMPLIFIER)
        if around.output is None and self.second_pole is None and not len(around.difference.c):
            return limits.around(self.blocks())
        output = self.offset(temperature)
        drive = output if around.output is None else self._standing(around.drive, temperature)
        within = (limits.up, limits.down, limits.low, limits.high)
        return AmplifierLoop.of(around, self.open_loop(), within, (drive, output))

    def rails(self) -> tuple[float, float]:
        """Return the levels of the output at rest at which what the amplifier drives is at a rail.

        Behind ``output_resistance`` a load leaves the output a share of it [V].
        """
        ends, parts = super().rails(), self.circuit().parts
        drive = next(p.output for p in parts if isinstance(p, Amplifier) and p.name == AMPLIFIER)
        if drive == OUTPUT or not any(map(math.isfinite, ends)):
            return ends
        gains = [solve(Circuit(parts, node)).levels[SIGNAL] or 0.0 for node in (drive, OUTPUT)]
        if 0.0 in gains:
            return ends
        inner, outer = (self._standing(n, REFERENCE_TEMPERATURE) for n in (drive, OUTPUT))
        low, high = sorted(outer + (end - inner) * (gains[1] / gains[0]) for end in ends)
        return low, high

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
            elif isinstance(part, Injected) and is_input_current(part) and self.current_noise > 0.0:
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
        levels = self.solution().levels
        amplifiers = {part.name for part in self.circuit().parts if isinstance(part, Amplifier)}
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
            elif isinstance(part, Injected) and is_input_current(part):
                constants[part.source] = -self.bias_current
        return constants
