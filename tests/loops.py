"""Amplifiers in circuits with capacitors, as the ordinary differential equations of their nodes."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from overload import Input, Machine, Mode, Real, forget

Caps = Callable[[Sequence[float], float, float], list[float]]
"""Derivatives of the capacitors' voltages at their voltages, the input and the drive w."""
Value = Callable[[Sequence[float], float, float], float]


@dataclass
class Loop:
    """Capacitors around an amplifier; states: their voltages, then w, then the second pole.

    Parameters
    ----------
    caps : derivatives of the voltages
    difference : of the amplifier's inputs
    count : of capacitors
    rate : 2 pi f_u, or None for an ideal amplifier
    driven : for an ideal amplifier the w that makes the difference zero
    change : and its derivative, from voltages, input and w
    second : second pole [rad/s]
    leak : 2 pi f_u / A0
    output : y from voltages, input and what drives the output's node, which it is by default
    """

    caps: Caps
    difference: Value
    count: int
    rate: float | None = None
    driven: Value | None = None
    change: Value | None = None
    second: float | None = None
    leak: float = 0.0
    up: float = np.inf
    down: float = np.inf
    low: float = -np.inf
    high: float = np.inf
    output: Value = lambda v, u, w: w

    def _drive(self, s: Any) -> float:
        return float(s[-1])

    def asked(self, t: float, s: Any, u: Input) -> float:
        """Return the slope of w while nothing limits."""
        if self.rate is None:
            assert self.change is not None
            return self.change(s[: self.count], u(t), s[self.count])
        e = self.difference(s[: self.count], u(t), self._drive(s))
        return self.rate * e - self.leak * float(s[self.count])

    def pull(self, t: float, s: Any, u: Input) -> float:
        """Return what drives w outwards at a rail."""
        if self.rate is None:
            assert self.driven is not None
            return self.driven(s[: self.count], u(t), s[self.count]) - float(s[self.count])
        return self.asked(t, s, u)

    def machine(self, longest: float) -> Machine:
        """Return the regimes."""

        def rhs(slope: Callable[[float, Any, Input], float]) -> Any:
            def f(t: float, s: Any, u: Input) -> list[float]:
                caps = self.caps(s[: self.count], u(t), self._drive(s))
                tail = [] if self.second is None else [self.second * (s[-2] - s[-1])]
                return [*caps, slope(t, s, u), *tail]

            return f

        n = self.count
        high = (lambda t, s, u: s[n] - self.high, 1)
        low = (lambda t, s, u: s[n] - self.low, -1)
        ideal = self.rate is None
        over = (lambda t, s, u: self.asked(t, s, u) - self.up, 1)
        under = (lambda t, s, u: self.asked(t, s, u) + self.down, -1)
        back_up = (self.pull if ideal else over[0], -1)
        back_down = (self.pull if ideal else under[0], 1)
        # An ideal amplifier that has caught up may have to turn at once.
        done = "again, from slew" if ideal else "free"
        modes = {
            "free": Mode(rhs(self.asked), {"high": high, "low": low, "up": over, "down": under}),
            "high": Mode(rhs(lambda t, s, u: 0.0), {"again, from high": (self.pull, -1)}),
            "low": Mode(rhs(lambda t, s, u: 0.0), {"again, from low": (self.pull, 1)}),
            "up": Mode(rhs(lambda t, s, u: self.up), {"high": high, done: back_up}),
            "down": Mode(rhs(lambda t, s, u: -self.down), {"low": low, done: back_down}),
        }
        forget(modes, up=self.up, down=self.down, high=self.high, low=self.low)

        def begin(t: float, s: Any, u: Input) -> str:
            slope, pull = self.asked(t, s, u), self.pull(t, s, u)
            if ideal and np.isinf(self.up):
                # An ideal amplifier goes with a jump at once, as far as its rails.
                s[n] = min(max(s[n] + pull, self.low), self.high)
                if pull := self.pull(t, s, u):
                    return "free" if abs(pull) < 1e-9 else "high" if pull > 0.0 else "low"
            if ideal and abs(pull) > 1e-9:
                slope = pull
            top, bottom = s[n] >= self.high - 1e-9, s[n] <= self.low + 1e-9
            if top and slope > 0.0:
                return "high"
            if bottom and slope < 0.0:
                return "low"
            if ideal and abs(pull) > 1e-9:
                return "up" if pull > 0.0 else "down"
            return "up" if slope > self.up else "down" if slope < -self.down else "free"

        def again(t: float, s: Any, u: Input) -> str:
            # A rail may be left at once at the slew rate, by an ideal amplifier.
            slope = self.asked(t, s, u)
            return "up" if slope > self.up else "down" if slope < -self.down else "free"

        return Machine(modes, begin, lambda s: float("nan"), longest, again)

    def run(
        self, u: Input, times: Real, jumps: Sequence[float] = (), longest: float = 2e-6
    ) -> Real:
        """Return the output at increasing times, from rest on u(0)."""
        machine = self.machine(longest)
        rows: list[Any] = []

        def kept(s: Any) -> float:
            rows.append(np.array(s))
            return 0.0

        machine.output = kept
        machine.run(u, self.settled(u(0.0)), times, jumps)
        states = np.array(rows)
        n = self.count
        return np.array(
            [self.output(s[:n], u(t), s[-1]) for s, t in zip(states, times, strict=True)]
        )

    def settled(self, u: float) -> list[float]:
        """Return the states at rest, at a rail if need be."""
        n = self.count

        def balance(x: Any) -> Any:
            e = self.difference(x[:n], u, x[n])
            back = e if self.rate is None else e - self.leak / self.rate * x[n]
            return np.array([*self.caps(x[:n], u, x[n]), back])

        x = _root(balance, n + 1)
        w = min(max(float(x[n]), self.low), self.high)
        if w != x[n]:
            x = np.append(_root(lambda v: np.array(self.caps(v, u, w)), n), w)
        return [*x, *([] if self.second is None else [w])]


def _root(line: Callable[[Any], Any], size: int) -> Real:
    """Return where a linear function of a vector is zero."""
    at_zero = line(np.zeros(size))
    columns = [line(row) - at_zero for row in np.eye(size)]
    return np.asarray(-np.linalg.solve(np.array(columns).T, at_zero))
