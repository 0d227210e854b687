"""Independent answers: chains and stimuli at 50 digits with mpmath, written from the physics."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import mpmath as mp
import numpy as np

DIGITS = 50


@dataclass
class System:
    """dx/dt = A x + B u, y = C x + D u in mpmath numbers."""

    a: Any
    b: Any
    c: Any
    d: Any


def low_pass(tau: float) -> System:
    """1 / (1 + s tau)."""
    r = 1 / mp.mpf(tau)
    return System(mp.matrix([[-r]]), mp.matrix([r]), mp.matrix([[1]]), mp.mpf(0))


def high_pass(tau: float) -> System:
    """s tau / (1 + s tau)."""
    r = 1 / mp.mpf(tau)
    return System(mp.matrix([[-r]]), mp.matrix([r]), mp.matrix([[-1]]), mp.mpf(1))


def integrator(rate: float) -> System:
    """rate / s."""
    return System(mp.matrix([[0]]), mp.matrix([mp.mpf(rate)]), mp.matrix([[1]]), mp.mpf(0))


def resonance(natural: float, quality: float) -> System:
    """w0² / (s² + s w0/Q + w0²) with w0 in rad/s."""
    w, q = mp.mpf(natural), mp.mpf(quality)
    return System(
        mp.matrix([[0, 1], [-w * w, -w / q]]),
        mp.matrix([0, w * w]),
        mp.matrix([[1, 0]]),
        mp.mpf(0),
    )


def amplifier(gain: float) -> System:
    """A gain without states."""
    return System(mp.matrix(0, 0), mp.matrix(0, 1), mp.matrix(1, 0), mp.mpf(gain))


def in_a_row(parts: Sequence[System]) -> System:
    """Cascade systems, the first one nearest to the stimulus."""
    n = sum(part.a.rows for part in parts)
    a, b, c, d = mp.zeros(n, n), mp.zeros(n, 1), mp.zeros(1, n), mp.mpf(1)
    at = 0
    for part in parts:
        m = part.a.rows
        for i in range(m):
            for j in range(n):
                a[at + i, j] += part.b[i] * c[0, j]
            for j in range(m):
                a[at + i, at + j] += part.a[i, j]
            b[at + i] = part.b[i] * d
        c = c * part.d
        for j in range(m):
            c[0, at + j] = part.c[0, j]
        d = part.d * d
        at += m
    return System(a, b, c, d)


@dataclass
class Piece:
    """From ``start`` on the input is r g(t), dg/dt = G g, g(start) = g0."""

    start: Any
    generator: Any
    readout: Any
    state: Any


def held(start: float, value: float) -> Piece:
    """A held value."""
    return Piece(mp.mpf(start), mp.matrix([[0]]), mp.matrix([[1]]), mp.matrix([mp.mpf(value)]))


def line(start: float, value: float, slope: Any) -> Piece:
    """A line."""
    return Piece(
        mp.mpf(start),
        mp.matrix([[0, 1], [0, 0]]),
        mp.matrix([[1, 0]]),
        mp.matrix([mp.mpf(value), mp.mpf(slope)]),
    )


def tone(amplitude: float, frequency: float, phase: float) -> Piece:
    """A sine from t = 0 on."""
    w = 2 * mp.pi * mp.mpf(frequency)
    return Piece(
        mp.mpf(0),
        mp.matrix([[0, w], [-w, 0]]),
        mp.matrix([[1, 0]]),
        mp.matrix([amplitude * mp.sin(mp.mpf(phase)), amplitude * mp.cos(mp.mpf(phase))]),
    )


def _stepped(system: System, piece: Piece, x: Any, since: Any) -> tuple[Any, Any]:
    n, m = system.a.rows, piece.generator.rows
    whole = mp.zeros(n + m, n + m)
    for i in range(n):
        for j in range(n):
            whole[i, j] = system.a[i, j] * since
        for j in range(m):
            whole[i, n + j] = system.b[i] * piece.readout[0, j] * since
    for i in range(m):
        for j in range(m):
            whole[n + i, n + j] = piece.generator[i, j] * since
    z = mp.matrix([*list(x), *list(piece.state)])
    z = mp.expm(whole, method="taylor") * z
    return z[:n], z[n:]


def response(
    system: System, pieces: Sequence[Piece], times: Sequence[float], initial: float | None
) -> np.ndarray[Any, np.dtype[np.float64]]:
    """Return y at float times, from settled on ``initial``, or from rest if it is None."""
    with mp.workdps(DIGITS):
        x = mp.zeros(system.a.rows, 1)
        if initial is not None and system.a.rows and initial != 0.0:
            x = mp.lu_solve(system.a, -system.b * mp.mpf(initial))
        results, index = [], 0
        current = held(0.0, initial or 0.0)
        for time in times:
            t = mp.mpf(float(time))
            while index < len(pieces) and pieces[index].start <= t:
                x, _ = _stepped(system, current, x, pieces[index].start - current.start)
                current = pieces[index]
                index += 1
            state, g = _stepped(system, current, x, t - current.start)
            u = (current.readout * g)[0]
            y = system.d * u
            for i in range(system.a.rows):
                y += system.c[0, i] * state[i]
            results.append(float(y))
    return np.array(results)
