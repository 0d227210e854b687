"""An independent answer for circuits: complex nodal analysis at 40 digits, one frequency at a time.

A test writes a circuit down once more, by hand, as admittances between nodes. Nothing here knows
the package.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import mpmath as mp
import numpy as np
from numpy.typing import NDArray

DIGITS = 40
GROUND = "0"


@dataclass
class Net:
    """A circuit at one complex frequency s."""

    s: Any
    nodes: dict[str, int] = field(default_factory=dict)
    branches: list[tuple[str, str, Any]] = field(default_factory=list)
    resistors: dict[str, tuple[str, str, Any]] = field(default_factory=dict)
    held: dict[str, dict[str, Any]] = field(default_factory=dict)
    currents: dict[str, dict[str, Any]] = field(default_factory=dict)
    amplifiers: dict[str, tuple[dict[str, Any], str, Any]] = field(default_factory=dict)

    def _known(self, *nodes: str) -> None:
        for node in nodes:
            if node != GROUND:
                self.nodes.setdefault(node, len(self.nodes))

    def admittance(self, first: str, second: str, value: Any) -> None:
        """Put an admittance between two nodes."""
        self._known(first, second)
        self.branches.append((first, second, mp.mpmathify(value)))

    def resistor(self, name: str, first: str, second: str, ohms: float) -> None:
        """Put a noisy resistor between two nodes."""
        self.admittance(first, second, 1 / mp.mpf(float(ohms)))
        self.resistors[name] = (first, second, mp.mpf(float(ohms)))

    def capacitor(self, first: str, second: str, farads: float) -> None:
        """Put a capacitor between two nodes."""
        self.admittance(first, second, self.s * mp.mpf(float(farads)))

    def inductor(self, first: str, second: str, henries: float) -> None:
        """Put an inductor between two nodes."""
        self.admittance(first, second, 1 / (self.s * mp.mpf(float(henries))))

    def hold(self, node: str, source: str = "u", weight: float = 1.0) -> None:
        """Hold a node at a weight times a source; several add up."""
        self._known(node)
        self.held.setdefault(node, {})[source] = mp.mpf(weight)

    def inject(self, node: str, source: str, weight: float = 1.0) -> None:
        """Let a current flow into a node."""
        self._known(node)
        self.currents.setdefault(source, {})[node] = mp.mpf(weight)

    def amplifier(
        self, name: str, senses: dict[str, Any], output: str, gain: Any, resistance: float | None
    ) -> None:
        """Put an amplifier in; a gain of None is ideal, a resistance stands before its output."""
        self._known(output, *(node for node in senses if node != GROUND))
        drive = output
        if resistance is not None:
            drive = f"drive of {name}"
            self.admittance(drive, output, 1 / mp.mpf(resistance))
        self.amplifiers[name] = (senses, drive, gain)

    def transfers(self, output: str) -> dict[str, complex]:
        """Return the transfer from every source, resistor's noise and amplifier's input noise."""
        matrix, right = self._system()
        inverse = mp.inverse(matrix)
        at, size = self.nodes[output], matrix.rows
        return {
            name: complex(sum(inverse[at, i] * vector[i] for i in range(size)))
            for name, vector in right.items()
        }

    def determinant(self) -> Any:
        """Return the determinant of the nodal equations, zero at a pole of the circuit."""
        return mp.det(self._system()[0])

    def _system(self) -> tuple[Any, dict[str, Any]]:
        n = len(self.nodes)
        size = n + len(self.held) + len(self.amplifiers)
        matrix = mp.zeros(size, size)
        right: dict[str, Any] = {}

        def column(name: str) -> Any:
            return right.setdefault(name, mp.zeros(size, 1))

        at = self.nodes
        for first, second, y in self.branches:
            for a, b in ((first, second), (second, first)):
                if a != GROUND:
                    matrix[at[a], at[a]] += y
                    if b != GROUND:
                        matrix[at[a], at[b]] -= y
        for name, (first, second, ohms) in self.resistors.items():
            for node, sign in ((first, 1), (second, -1)):
                column(name)
                if node != GROUND:
                    column(name)[at[node]] += sign / ohms
        for source, entries in self.currents.items():
            for node, weight in entries.items():
                column(source)[at[node]] += weight
        row = n
        for node, sources in self.held.items():
            matrix[at[node], row] = -1
            matrix[row, at[node]] = 1
            for source, weight in sources.items():
                column(source)[row] += weight
            row += 1
        for name, (senses, drive, gain) in self.amplifiers.items():
            matrix[at[drive], row] = -1
            if gain is not None:
                matrix[row, at[drive]] += 1 / gain
            for node, weight in senses.items():
                if node != GROUND:
                    matrix[row, at[node]] -= weight
            column(name)[row] += 1
            row += 1
        return matrix, right


Build = Callable[[Net], str]
"""Writes a circuit into a net and returns its output node."""


def transfers(build: Build, frequency: NDArray[np.float64]) -> dict[str, NDArray[np.complex128]]:
    """Return the transfer function from every source of a circuit at frequencies [Hz]."""
    rows = []
    with mp.workdps(DIGITS):
        for f in frequency:
            net = Net(mp.mpc(0, 2 * mp.pi * mp.mpf(float(f))))
            output = build(net)
            rows.append(net.transfers(output))
    return {name: np.array([row[name] for row in rows]) for name in rows[0]}


def at_rest(build: Build) -> dict[str, float]:
    """Return the transfer from every source at zero frequency; inductors must not short a node."""
    with mp.workdps(DIGITS):
        net = Net(mp.mpf(10) ** -30)
        output = build(net)
        return {name: value.real for name, value in net.transfers(output).items()}


def open_loop(net: Net, values: dict[str, Any]) -> Any:
    """Return A(s) of an amplifier from the keys of a stage, None for an ideal one."""
    unity, gain = values.get("gain_bandwidth"), values.get("open_loop_gain")
    if unity is None and gain is None:
        return None
    second = (
        1 + net.s / (2 * mp.pi * mp.mpf(values["second_pole"])) if "second_pole" in values else 1
    )
    if unity is None:
        return mp.mpf(gain) / second
    w = 2 * mp.pi * mp.mpf(unity)
    return w / (net.s + (w / mp.mpf(gain) if gain is not None else 0)) / second
