"""The parts of a small linear circuit, and how they are joined."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

GROUND = "ground"
"""Name of the node that all voltages are measured against."""

SIGNAL = "signal"
"""Name of the stage's own input among the inputs of a circuit."""


@dataclass(frozen=True)
class Resistor:
    """A resistance between two nodes; a noisy one brings the input ``name``, its noise voltage.

    Parameters
    ----------
    resistance : [ohm]
    noisy : False for the output resistance of an amplifier, which is no resistor
    """

    name: str
    first: str
    second: str
    resistance: float
    noisy: bool = True


@dataclass(frozen=True)
class Capacitor:
    """A capacitance between two nodes [F]."""

    first: str
    second: str
    capacitance: float


@dataclass(frozen=True)
class Inductor:
    """An inductance between two nodes [H]."""

    first: str
    second: str
    inductance: float


@dataclass(frozen=True)
class OpenLoop:
    """Gain of an amplifier without feedback, with A0 = open_loop_gain,

        A(s) = A0 / ((1 + s A0 / (2 pi f_u)) (1 + s / (2 pi f_2))).

    What is None is left out: without A0 the first factor is 2 pi f_u / s, without f_u the gain is
    A0 at every frequency, and without either the amplifier is ideal: it holds its inputs equal.

    Parameters
    ----------
    open_loop_gain : A0 [1]
    gain_bandwidth : f_u [Hz]
    second_pole : f_2 [Hz]
    """

    open_loop_gain: float | None = None
    gain_bandwidth: float | None = None
    second_pole: float | None = None

    @property
    def ideal(self) -> bool:
        """Whether the gain is infinite at every frequency."""
        return self.open_loop_gain is None and self.gain_bandwidth is None


@dataclass(frozen=True)
class Amplifier:
    """An amplifier that drives a node with A(s) times its input,

        v_output = A(s) (sum of weight · v_node + w),

    where w is the circuit's input ``name``: the voltage noise and offset of the amplifier.

    Parameters
    ----------
    senses : (node, weight) pairs: +1 for the noninverting input and -1 for the inverting one, or
        shares of nodes where a divider between them is ideal
    """

    name: str
    senses: tuple[tuple[str, float | Fraction], ...]
    output: str
    open_loop: OpenLoop


@dataclass(frozen=True)
class Held:
    """A node held at ``weight`` times an input by an ideal voltage source; several add up."""

    node: str
    source: str
    weight: float = 1.0


@dataclass(frozen=True)
class Injected:
    """A current of ``weight`` times an input that flows into a node [A]."""

    node: str
    source: str
    weight: float = 1.0


Part = Resistor | Capacitor | Inductor | Amplifier | Held | Injected


@dataclass(frozen=True)
class Circuit:
    """Parts between named nodes, and the node whose voltage is the output."""

    parts: tuple[Part, ...]
    output: str
