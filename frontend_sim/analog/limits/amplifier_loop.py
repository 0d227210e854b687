"""An amplifier in a circuit of its own, which slews and meets its rails."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.limits.follower import NAMES
from frontend_sim.analog.limits.limiter import Limiter, Segments, Touched, continuous
from frontend_sim.analog.limits.loop_model import LoopModel
from frontend_sim.analog.limits.loop_steps import LoopSteps, poles_of
from frontend_sim.analog.network import Opened, OpenLoop


@dataclass(frozen=True, eq=False)
class AmplifierLoop(Limiter):
    """The circuit around an amplifier, whose inner voltage w is held to slopes and levels.

    The states are those of the circuit cut open at the amplifier's output, of its second pole, and
    w as the last one. With e the difference of the amplifier's inputs,

        dx/dt = a x + b_u u + b_w w                         in any case,
        dw/dt = clip(w_u e - (w_u / A0) w, -down, up)       with a gain-bandwidth product w_u,
        w = A0 e, or e = 0                                  without: w = t x + t_u u while free,

    and low <= w <= high. Held at a rail w leaves it when the loop asks it back: when the asked
    slope turns, or w = t x + t_u u does; the capacitors have gone on charging meanwhile.

    Constants (offset, references, bias currents) are not among the inputs: all is told relative to
    where they let it stand, rails included.

    Parameters
    ----------
    free, held : dx/dt from x, u and du/dt while nothing limits, and from x, u and the limited slope
        while something does, shape (n, n + 2) [1/s]
    target : t, t_u of an amplifier without a pole, shape (n + 1,), the last state's weight zero;
        None for one with a gain-bandwidth product
    output : y from x and u, shape (n + 1,)
    standing : of the output, by constants alone [V]
    up, down : [V/s];  low, high : of w, relative to where constants let it stand [V]
    """

    replaced: range
    free: Real
    held: Real
    target: Real | None
    output: Real
    standing: float
    up: float
    down: float
    low: float
    high: float
    limits = NAMES
    bends = False
    raised = True
    _known: dict[int, LoopSteps] = field(default_factory=dict)

    @classmethod
    def of(
        cls,
        opened: Opened,
        gain: OpenLoop,
        limits: tuple[float, float, float, float],
        standing: tuple[float, float],
    ) -> Self:
        """Close an opened circuit again, with limits.

        Parameters
        ----------
        limits : up, down [V/s], low, high [V]
        standing : of the driven node and of the output, by constants alone [V]

        Raises
        ------
        ModelError
            If the amplifier is ideal, and its output cannot act on its inputs at once.
        """
        up, down, low, high = limits
        model = LoopModel.of(opened, gain)
        low, high = low - standing[0], high - standing[0]
        return cls(
            range(1), model.free, model.held, model.target, model.output, standing[1],
            up, down, low, high,
        )  # fmt: skip

    def rates(self) -> tuple[float, ...]:
        """Return the magnitudes of the poles, free and held [rad/s]."""
        return tuple(np.abs(poles_of(self.free, self.held)).tolist())

    def start(self, u: float, v: float) -> Real:
        """Return deviation, mode, input, x of the linear model, what lies beyond it, x, and age."""
        n = len(self.held)
        plain, beyond = np.zeros(n), np.zeros(n)
        states = slice(0, n) if self.target is None else slice(0, n - 1)
        plain[states] = -np.linalg.solve(self.free[states, states], self.free[states, n] * u)
        if self.target is not None:
            plain[-1] = self.target[:n] @ plain + self.target[n] * u
        beyond[-1] = min(max(plain[-1], self.low), self.high) - plain[-1]
        if beyond[-1] != 0.0:
            a, b = self.held[:-1, : n - 1], self.held[:-1, n - 1]
            beyond[:-1] = -np.linalg.solve(a, b * beyond[-1])
        d = float(self.output[:n] @ beyond)
        return np.concatenate([[d, -1.0, u], plain, beyond, plain + beyond, [math.inf]])

    def advance(self, state: Real, span: Segments) -> tuple[Real, Real, Real, Touched]:
        """Advance event by event; without a pole in the amplifier the deviation jumps as u does."""
        from frontend_sim.analog.limits.amplifier_kernels import loop

        touched, deviation = Touched.none(4), np.empty(len(span.length))
        begun = np.empty(len(span.jumps))
        after, n = state.copy(), len(self.held)
        static, steps = self.target is not None, self._steps(float(np.max(span.length)))
        target = np.zeros(n + 1) if self.target is None else self.target
        loop(
            (0.0,) * n, after, span.length, span.begin, span.end, span.linear, self.standing,
            span.jumps, steps.unit, steps.first, steps.fine, steps.steps, steps.rates,
            steps.lasting, steps.longest,
            self.free[-1], target, static, self.output,
            self.up, self.down, self.low, self.high,
            deviation, begun, touched.time, touched.piece, touched.since,
        )  # fmt: skip
        if not static:
            begun = continuous(state, deviation, span.jumps)
        return after, deviation, begun, touched

    def _steps(self, longest: float) -> LoopSteps:
        """Return the steps for pieces of up to ``longest`` [s]."""
        top = math.ceil(math.log2(max(longest, 1e-300)))
        if top not in self._known:
            self._known[top] = LoopSteps.of(self.free, self.held, top)
        return self._known[top]
