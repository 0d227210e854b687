"""The nodal equations of a circuit, M(s) x = sum of column_w · w, in exact rational arithmetic.

Unknowns are the node voltages and the currents of inductors, held nodes and amplifiers. Every node
has one equation (the currents into it add up to zero), and so has every such current. Source: C.-W.
Ho, A. Ruehli and P. Brennan 1975, "The modified nodal approach to network analysis" (from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from fractions import Fraction

from frontend_sim.analog.network.elimination import Row
from frontend_sim.analog.network.parts import (
    GROUND,
    Amplifier,
    Capacitor,
    Circuit,
    Held,
    Inductor,
    Injected,
    OpenLoop,
    Resistor,
)

Column = dict[int, Fraction]
"""How one input enters: number of the equation -> weight."""


@dataclass
class Equations:
    """M(s) by columns, while it is written for one value of s, and the column of each input.

    transposed[unknown][equation] is an entry of M, so that the rows here are those of M'.
    """

    s: Fraction
    nodes: dict[str, int]
    transposed: list[Row] = field(default_factory=list)
    inputs: dict[str, Column] = field(default_factory=dict)

    @classmethod
    def of(cls, circuit: Circuit, s: Fraction) -> Equations:
        """Write the equations of a circuit at a rational s [rad/s]."""
        written = cls(s, {})
        written._node(circuit.output)
        held: dict[str, int] = {}
        for part in circuit.parts:
            written._write(part, held)
        return written

    def _write(self, part: object, held: dict[str, int]) -> None:
        if isinstance(part, Resistor):
            self._resistor(part)
        elif isinstance(part, Capacitor):
            self._admittance(part.first, part.second, self.s * Fraction(part.capacitance))
        elif isinstance(part, Inductor):
            self._inductor(part)
        elif isinstance(part, Amplifier):
            self._amplifier(part)
        elif isinstance(part, Held):
            if part.node not in held:
                held[part.node] = self._driven(part.node)
                self._add(held[part.node], part.node, Fraction(1))
            self._enter(part.source, held[part.node], Fraction(part.weight))
        elif isinstance(part, Injected):
            self._inject(part.source, part.node, Fraction(part.weight))

    def _node(self, name: str) -> int | None:
        if name == GROUND:
            return None
        if name not in self.nodes:
            self.nodes[name] = self._unknown()
        return self.nodes[name]

    def _unknown(self) -> int:
        self.transposed.append({})
        return len(self.transposed) - 1

    def _driven(self, node: str) -> int:
        """Give a node a current from outside; return the equation that goes with it."""
        number, equation = self._node(node), self._unknown()
        assert number is not None
        self._entry(number, equation, Fraction(-1))
        return equation

    def _entry(self, equation: int, unknown: int, value: Fraction) -> None:
        column = self.transposed[unknown]
        total = column.get(equation, Fraction(0)) + value
        if total:
            column[equation] = total
        else:
            column.pop(equation, None)

    def _add(self, equation: int, node: str, value: Fraction) -> None:
        number = self._node(node)
        if number is not None:
            self._entry(equation, number, value)

    def _enter(self, source: str, equation: int, weight: Fraction) -> None:
        column = self.inputs.setdefault(source, {})
        column[equation] = column.get(equation, Fraction(0)) + weight

    def _inject(self, source: str, node: str, current: Fraction) -> None:
        self.inputs.setdefault(source, {})
        number = self._node(node)
        if number is not None:
            self._enter(source, number, current)

    def _admittance(self, first: str, second: str, admittance: Fraction) -> None:
        a, b = self._node(first), self._node(second)
        if a is not None:
            self._entry(a, a, admittance)
        if b is not None:
            self._entry(b, b, admittance)
        if a is not None and b is not None:
            self._entry(a, b, -admittance)
            self._entry(b, a, -admittance)

    def _resistor(self, part: Resistor) -> None:
        conductance = 1 / Fraction(part.resistance)
        self._admittance(part.first, part.second, conductance)
        if part.noisy:
            # The noise voltage in series with the resistance, as the current that it drives.
            self._inject(part.name, part.first, conductance)
            self._inject(part.name, part.second, -conductance)

    def _inductor(self, part: Inductor) -> None:
        current = self._unknown()
        for node, sign in ((part.first, 1), (part.second, -1)):
            number = self._node(node)
            if number is not None:
                self._entry(number, current, Fraction(sign))
                self._entry(current, number, Fraction(sign))
        self._entry(current, current, -self.s * Fraction(part.inductance))

    def _amplifier(self, part: Amplifier) -> None:
        equation = self._driven(part.output)
        top, bottom = _open_loop(part.open_loop, self.s)
        for node, weight in part.senses:
            self._add(equation, node, -top * Fraction(weight))
        self._add(equation, part.output, bottom)
        self._enter(part.name, equation, top)


def _open_loop(gain: OpenLoop, s: Fraction) -> tuple[Fraction, Fraction]:
    """Return numerator and denominator of A(s), (1, 0) for an ideal amplifier."""
    if gain.ideal:
        return Fraction(1), Fraction(0)
    second = 1 if gain.second_pole is None else 1 + s / _angular(gain.second_pole)
    if gain.gain_bandwidth is None:
        assert gain.open_loop_gain is not None
        return Fraction(gain.open_loop_gain), Fraction(1) * second
    unity = _angular(gain.gain_bandwidth)
    finite = 0 if gain.open_loop_gain is None else unity / Fraction(gain.open_loop_gain)
    return unity, (s + finite) * second


def _angular(frequency: float) -> Fraction:
    return Fraction(2.0 * math.pi * frequency)


def most_states(circuit: Circuit) -> int:
    """Return a bound of the degree in s of the determinant: one for each part that stores."""
    count = 0
    for part in circuit.parts:
        if isinstance(part, (Capacitor, Inductor)):
            count += 1
        elif isinstance(part, Amplifier) and not part.open_loop.ideal:
            count += part.open_loop.gain_bandwidth is not None
            count += part.open_loop.second_pole is not None
    return count
