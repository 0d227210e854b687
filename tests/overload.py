"""Independent answers for limiters: event-driven integration with scipy at tight tolerances."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

Real = NDArray[np.float64]
Input = Callable[[float], float]
Test = Callable[[float, Any, Input], float]


@dataclass
class Mode:
    """One regime: its derivative, and for each way out the function that crosses zero and how.

    ``out`` maps the next mode to (function of t, state and input, direction of the crossing).
    """

    rhs: Callable[[float, Any, Input], list[float]]
    out: dict[str, tuple[Test, int]]


def forget(modes: Mapping[str, Mode], **limits: float) -> None:
    """Take out the ways to infinite limits: they have no events, and scipy seeks their sign."""
    for name, limit in limits.items():
        if np.isinf(limit):
            for mode in modes.values():
                mode.out.pop(name, None)


@dataclass
class Machine:
    """Regimes, how to tell the one to begin with, the output, and the longest step [s]."""

    modes: dict[str, Mode]
    begin: Callable[[float, Any, Input], str]
    output: Callable[[Any], float]
    longest: float = 2e-5
    again: Callable[[float, Any, Input], str] | None = None
    """Tells the regime behind a way out that is called "again"."""

    def run(
        self, u: Input, state: Sequence[float], times: Real, jumps: Sequence[float] = ()
    ) -> Real:
        """Return the output at increasing times; the input may jump at ``jumps``."""
        s, t, found, k = np.array(state, dtype=np.float64), 0.0, np.empty(len(times)), 0
        for end in sorted({*jumps, float(times[-1]) + 1e-9}):
            begin = t

            def part(time: float, a: float = begin, b: float = end) -> float:
                # The value before the jump, up to the jump.
                return u(min(max(time, a), b - 1e-13))

            mode = self.begin(t, s, part)
            while end - t > 1e-13:
                solution = self._solve(mode, part, t, end, s)
                while k < len(times) and times[k] < solution.t[-1]:
                    found[k] = self.output(solution.sol(times[k]))
                    k += 1
                t, s = float(solution.t[-1]), solution.y[:, -1].copy()
                if solution.status == 1:
                    names = list(self.modes[mode].out)
                    mode = next(
                        name for name, at in zip(names, solution.t_events, strict=True) if len(at)
                    )
                    if mode.startswith("again") and self.again is not None:
                        mode = self.again(t, s, part)
        return found

    def _solve(self, mode: str, u: Input, t: float, end: float, s: Real) -> Any:
        current = self.modes[mode]
        events = []
        for test, direction in current.out.values():

            def event(time: float, state: Any, test: Test = test) -> float:
                return test(time, state, u)

            event.terminal = True  # type: ignore[attr-defined]  # how scipy marks events
            event.direction = direction  # type: ignore[attr-defined]  # the same
            events.append(event)
        return solve_ivp(
            lambda time, state: current.rhs(time, state, u),
            (t, end),
            s,
            method="DOP853",
            rtol=1e-12,
            atol=1e-13,
            # A held or slewing output asks for no steps at all, and events would be stepped over.
            max_step=self.longest,
            events=events,
            dense_output=True,
        )


@dataclass
class Amplifier:
    """RC low pass w1 (if any), closed loop of rate w and gain, limits, second pole (if any), RC
    high pass w3 (if any); states: low pass, integrator, second pole, high pass.
    """

    rate: float
    gain: float
    up: float = np.inf
    down: float = np.inf
    low: float = -np.inf
    high: float = np.inf
    before: float | None = None
    second: float | None = None
    behind: float | None = None

    def machine(self) -> Machine:
        """Return the regimes of the amplifier."""

        def x(t: float, s: Any, u: Input) -> float:
            return u(t) if self.before is None else s[0]

        def y(s: Any) -> float:
            return s[1] if self.second is None else s[2]

        def z(t: float, s: Any, u: Input) -> float:
            return self.rate * (self.gain * x(t, s, u) - y(s))

        def rhs(slope: Callable[[float, Any, Input], float]) -> Any:
            def f(t: float, s: Any, u: Input) -> list[float]:
                first = 0.0 if self.before is None else self.before * (u(t) - s[0])
                second = 0.0 if self.second is None else self.second * (s[1] - s[2])
                last = 0.0 if self.behind is None else self.behind * (y(s) - s[3])
                return [first, slope(t, s, u), second, last]

            return f

        high = (lambda t, s, u: s[1] - self.high, 1)
        low = (lambda t, s, u: s[1] - self.low, -1)
        modes = {
            "free": Mode(
                rhs(z),
                {
                    "high": high,
                    "low": low,
                    "up": (lambda t, s, u: z(t, s, u) - self.up, 1),
                    "down": (lambda t, s, u: z(t, s, u) + self.down, -1),
                },
            ),
            "high": Mode(rhs(lambda t, s, u: 0.0), {"free": (z, -1)}),
            "low": Mode(rhs(lambda t, s, u: 0.0), {"free": (z, 1)}),
            "up": Mode(
                rhs(lambda t, s, u: self.up),
                {"high": high, "free": (lambda t, s, u: z(t, s, u) - self.up, -1)},
            ),
            "down": Mode(
                rhs(lambda t, s, u: -self.down),
                {"low": low, "free": (lambda t, s, u: z(t, s, u) + self.down, 1)},
            ),
        }
        forget(modes, up=self.up, down=self.down, high=self.high, low=self.low)

        def begin(t: float, s: Any, u: Input) -> str:
            slope = z(t, s, u)
            if s[1] >= self.high - 1e-9 and slope > 0.0:
                return "high"
            if s[1] <= self.low + 1e-9 and slope < 0.0:
                return "low"
            return "up" if slope > self.up else "down" if slope < -self.down else "free"

        behind = self.behind is not None
        return Machine(modes, begin, lambda s: y(s) - s[3] if behind else y(s))

    def settled(self, u: float) -> list[float]:
        """Return the states at rest."""
        y = min(max(self.gain * u, self.low), self.high)
        return [u, y, y, y]


@dataclass
class Clamp:
    """R into C, with a diode of resistance R_d (if any) to each level; then RC high pass w3."""

    rate: float
    low: float
    high: float
    ratio: float
    behind: float

    def machine(self) -> Machine:
        """Return the regimes of the clamp; the states are node and high pass."""

        def free(t: float, s: Any, u: Input) -> float:
            return self.rate * (u(t) - s[0])

        def rhs(level: float | None) -> Any:
            def f(t: float, s: Any, u: Input) -> list[float]:
                slope = free(t, s, u)
                if level is not None:
                    held = np.isinf(self.ratio)
                    slope = 0.0 if held else slope - self.rate * self.ratio * (s[0] - level)
                return [slope, self.behind * (s[0] - s[1])]

            return f

        def back(level: float) -> Test:
            if np.isinf(self.ratio):
                return free
            return lambda t, s, u: s[0] - level

        modes = {
            "free": Mode(
                rhs(None),
                {
                    "high": (lambda t, s, u: s[0] - self.high, 1),
                    "low": (lambda t, s, u: s[0] - self.low, -1),
                },
            ),
            "high": Mode(rhs(self.high), {"free": (back(self.high), -1)}),
            "low": Mode(rhs(self.low), {"free": (back(self.low), 1)}),
        }

        def begin(t: float, s: Any, u: Input) -> str:
            slope = free(t, s, u)
            for name, sign, level in (("high", 1.0, self.high), ("low", -1.0, self.low)):
                # scipy finds an event to about 1e-11 V: nearer than this the node is at the level.
                past = sign * (s[0] - level)
                if past > 1e-9 or (past > -1e-9 and sign * slope > 0.0):
                    return name
            return "free"

        return Machine(modes, begin, lambda s: s[0] - s[1])
