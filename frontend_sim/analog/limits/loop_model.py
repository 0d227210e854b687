"""The equations of an amplifier in its circuit, free and held."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.network import Opened, OpenLoop
from frontend_sim.errors import ModelError


@dataclass(frozen=True, eq=False)
class LoopModel:
    """The matrices of ``AmplifierLoop``, which see.

    Parameters
    ----------
    free, held : shape (n, n + 2) [1/s];  target : shape (n + 1,), or None
    output : shape (n + 1,)
    """

    free: Real
    held: Real
    target: Real | None
    output: Real

    @classmethod
    def of(cls, opened: Opened, gain: OpenLoop) -> Self:
        """Write the matrices of an opened circuit with its amplifier."""
        ways = [opened.difference, *([] if opened.output is None else [opened.output])]
        orders = [len(way.c) for way in ways]
        pole = None if gain.gain_bandwidth is None else gain.second_pole
        second = pole is not None
        n = sum(orders) + second + 1
        driven = n - 2 if second else n - 1
        held = np.zeros((n, n + 2))
        rows = []
        at = 0
        for way, order in zip(ways, orders, strict=True):
            own = slice(at, at + order)
            held[own, own], held[own, n], held[own, driven] = way.a, way.b[:, 0], way.b[:, 1]
            row = np.zeros(n + 1)
            row[own], row[n], row[driven] = way.c, way.d[0], way.d[1]
            rows.append(row)
            at += order
        if pole is not None:
            rate = 2.0 * math.pi * pole
            held[driven, driven], held[driven, n - 1] = -rate, rate
        held[n - 1, n + 1] = 1.0
        output = rows[1] if opened.output is not None else np.eye(n + 1)[driven]
        free = held.copy()
        free[:, n + 1] = 0.0
        unity = _unity(gain)
        if unity is not None:
            free[-1, : n + 1] = unity * rows[0]
            free[-1, n - 1] -= 0.0 if gain.open_loop_gain is None else unity / gain.open_loop_gain
            return cls(free, held, None, output)
        target = _target(rows[0], gain)
        free[:-1, : n + 1] += np.outer(held[:-1, n - 1], target)
        free[:-1, n - 1] = 0.0
        free[-1, : n + 1] = target[: n - 1] @ free[:-1, : n + 1]
        free[-1, n + 1] = target[n]
        return cls(free, held, target, output)


def _unity(gain: OpenLoop) -> float | None:
    """Return w_u of the amplifier's integrator, None if it has no pole at all [rad/s]."""
    if gain.gain_bandwidth is not None:
        return 2.0 * math.pi * gain.gain_bandwidth
    if gain.second_pole is not None and gain.open_loop_gain is not None:
        return 2.0 * math.pi * gain.second_pole * gain.open_loop_gain
    return None


def _target(difference: Real, gain: OpenLoop) -> Real:
    """Return w from x and u where w = A0 e, or e = 0."""
    least = 0.0 if gain.open_loop_gain is None else 1.0 / gain.open_loop_gain
    back = least - difference[-2]
    if not back > 0.0:
        raise ModelError(
            "slew_rate and rails of an ideal amplifier need a feedback that acts at once, and here "
            "a capacitance at its input delays it; give gain_bandwidth, or feedback_capacitance"
        )
    target = difference / back
    target[-2] = 0.0
    return np.asarray(target)
