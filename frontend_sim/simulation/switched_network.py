"""One input of a sampling converter: a port, and a capacitor that a switch connects to it."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Self

import numpy as np

from frontend_sim.analog.block import Block
from frontend_sim.analog.exponential import expm1
from frontend_sim.analog.port import Port
from frontend_sim.analog.section import Section, Tap
from frontend_sim.errors import ModelError
from frontend_sim.simulation.kernels import Real

NAME = "input network"
"""Of the section that stands behind the last stage."""


@dataclass(frozen=True, eq=False)
class SwitchedNetwork:
    """A port with its switch and sampling capacitor, open and closed.

    With q the state that earlier closings left in the port, s the voltage of the capacitor, and
    p0 the voltage at the pin if the switch had never closed,

        open    dq/dt = a q,                                ds/dt = 0
        closed  dq/dt = a q - kick i,   i = C ds/dt = (p0 + c q - s) / (R + series).

    In psi = q + b s, b = C kick, the current leaves the equations of the port,

        dpsi/dt = a psi - a b s,   ds/dt = r (p0 + c psi) - r (1 + c b) s,   r = 1 / (C (R+series)),

    so that every row stays proportional to the rate of its own pole, however fast the switch is.
    The order of z = [psi; s] is that of the port plus one; see docs/theory/switched.md.

    Parameters
    ----------
    port : the source, and what stands at the pin
    resistance : of the switch, R [ohm];  capacitance : that is switched, C [F]
    """

    port: Port
    resistance: float
    capacitance: float

    @classmethod
    def of(cls, port: Port, resistance: float, capacitance: float) -> Self:
        """Make the network.

        Raises
        ------
        ModelError
            If no resistance at all stands between two capacitances.
        """
        if not resistance + port.series > 0.0:
            raise ModelError("the switch needs a resistance: charge would flow without a time")
        return cls(port, float(resistance), float(capacitance))

    @property
    def order(self) -> int:
        """Number of states of z."""
        return self.port.order + 1

    @cached_property
    def share(self) -> Real:
        """b = C kick: what a volt on the capacitor takes from the port's states, shape (n,) [1]."""
        return self.capacitance * self.port.kick

    @cached_property
    def rate(self) -> float:
        """r = 1 / (C (R + series)) [1/s]."""
        return 1.0 / (self.capacitance * (self.resistance + self.port.series))

    @cached_property
    def closed(self) -> Real:
        """The matrix of z while the switch is closed, shape (n + 1, n + 1) [1/s]."""
        port, b, r = self.port, self.share, self.rate
        right = np.append(-(port.a @ b), -r * (1.0 + float(port.c @ b)))
        return np.column_stack([np.vstack([port.a, r * port.c[None]]), right])

    def section(self, acquisition: float, name: str = NAME) -> Section:
        """Return the network with its switch closed for ever, as the last section of a chain.

        What a real acquisition adds to it dies out by itself from the closing on, so that it is
        all that is needed of the signal: z and p0 at the instant, and both ``acquisition`` before
        it. The section's own output is s; its taps are z, then z and p0 that much earlier.

        Parameters
        ----------
        acquisition : how long the switch is closed before an instant [s]
        """
        port, n, m = self.port, self.port.order, self.order
        a = np.zeros((n + m, n + m))
        a[:n, :n] = port.a
        a[-1, :n] = self.rate * port.c
        a[n:, n:] = self.closed
        b = np.concatenate([port.b, np.zeros(n), [self.rate * port.d]])
        rows = np.eye(n + m)[n:]
        block = Block.of(a, b, rows[-1], 0.0)
        pin = np.concatenate([port.c, np.zeros(m)])
        taps = [Tap(f"{name}: state {i + 1}", row, 0.0) for i, row in enumerate(rows)]
        taps += [
            Tap(f"{name}: state {i + 1} at closing", row, 0.0, acquisition)
            for i, row in enumerate(rows)
        ]
        taps.append(Tap(f"{name}: pin at closing", pin, port.d, acquisition))
        return Section(name, (block,), 0.0, taps=tuple(taps))

    @property
    def tap_count(self) -> int:
        """Number of taps of ``section``."""
        return 2 * self.order + 1

    def residual(self, times: Real) -> Real:
        """Return what is left of one volt between capacitor and settled source, shape (K,) [1].

        The capacitor is connected one volt away from a source that rests, whose port has
        forgotten earlier closings; ``times`` [s] are counted from the closing.
        """
        start = np.append(self.share, 1.0)
        return np.array([start[-1] + (expm1(self.closed * t) @ start)[-1] for t in times])
