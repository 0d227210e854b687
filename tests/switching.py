"""Independent answers for a switched sampling capacitor: circuit equations at 50 digits, mpmath.

Every circuit is written from Kirchhoff's laws in its own voltages and currents, open and closed. It
goes from switching to switching by matrix exponentials; nothing of the package is used.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import mpmath as mp

DIGITS = 50


@dataclass
class Circuit:
    """dx/dt = A x + B u, the capacitor's voltage last; ``pin`` gives the pin's voltage from x."""

    opened: tuple[Any, Any]
    closed: tuple[Any, Any]
    pin: Callable[[Any, Any], Any]


def _matrix(rows: Sequence[Sequence[Any]]) -> tuple[Any, Any]:
    """Return A and B of rows whose last entry belongs to u."""
    return mp.matrix([row[:-1] for row in rows]), mp.matrix([[row[-1]] for row in rows])


def behind_resistance(rs: float, cp: float, rw: float, cs: float) -> Circuit:
    """An ideal source behind rs, cp at the pin; x = [pin, s]."""
    rs, cp, rw, cs = (mp.mpf(value) for value in (rs, cp, rw, cs))
    g, w = 1 / rs, 1 / rw
    closed: list[list[Any]] = [[-(g + w) / cp, w / cp, g / cp], [w / cs, -w / cs, 0]]
    opened: list[list[Any]] = [[-g / cp, 0, g / cp], [0, 0, 0]]
    return Circuit(_matrix(opened), _matrix(closed), lambda x, u: x[0])


def straight(rs: float, rw: float, cs: float) -> Circuit:
    """An ideal source behind rs and nothing at the pin; x = [s]. The open pin is the source."""
    rate = 1 / ((mp.mpf(rs) + mp.mpf(rw)) * mp.mpf(cs))
    return Circuit(_matrix([[0, 0]]), _matrix([[-rate, rate]]), lambda x, u: u)


def low_pass(r: float, c: float, rs: float, cp: float, rw: float, cs: float) -> Circuit:
    """R and C without a buffer, then rs and cp; x = [over C, pin, s]."""
    r, c, rs, cp, rw, cs = (mp.mpf(value) for value in (r, c, rs, cp, rw, cs))
    g, h, w = 1 / r, 1 / rs, 1 / rw
    first = [-(g + h) / c, h / c, 0, g / c]
    opened: list[list[Any]] = [first, [h / cp, -h / cp, 0, 0], [0, 0, 0, 0]]
    closed: list[list[Any]] = [first, [h / cp, -(h + w) / cp, w / cp, 0], [0, w / cs, -w / cs, 0]]
    return Circuit(_matrix(opened), _matrix(closed), lambda x, u: x[1])


def low_pass_alone(r: float, c: float, rw: float, cs: float) -> Circuit:
    """R and C without a buffer, the switch straight at C; x = [over C, s]."""
    return behind_resistance(r, c, rw, cs)


def resonant(r: float, l: float, c: float, rw: float, cs: float) -> Circuit:  # noqa: E741  # inductance
    """R and L in series, C to ground, the switch at C; x = [current, over C, s]."""
    r, l, c, rw, cs = (mp.mpf(value) for value in (r, l, c, rw, cs))  # noqa: E741
    w = 1 / rw
    first = [-r / l, -1 / l, 0, 1 / l]
    opened: list[list[Any]] = [first, [1 / c, 0, 0, 0], [0, 0, 0, 0]]
    closed: list[list[Any]] = [first, [1 / c, -w / c, w / c, 0], [0, w / cs, -w / cs, 0]]
    return Circuit(_matrix(opened), _matrix(closed), lambda x, u: x[1])


def follower(unity: float, ro: float, rs: float, cp: float, rw: float, cs: float) -> Circuit:
    """A buffer, A(s) = 2 pi unity / s with ro in its loop, rs and cp; x = [inner, pin, s]."""
    ro, rs, cp, rw, cs = (mp.mpf(value) for value in (ro, rs, cp, rw, cs))
    wu, w, h = mp.mpf(2.0 * float(mp.pi) * unity), 1 / rw, 1 / (ro + rs)
    # The output node divides what lies between the inner source and the pin.
    inner, pin = rs * h, ro * h
    first = [-wu * inner, -wu * pin, 0, wu]
    opened: list[list[Any]] = [first, [h / cp, -h / cp, 0, 0], [0, 0, 0, 0]]
    closed: list[list[Any]] = [first, [h / cp, -(h + w) / cp, w / cp, 0], [0, w / cs, -w / cs, 0]]
    return Circuit(_matrix(opened), _matrix(closed), lambda x, u: x[1])


@dataclass
class Signal:
    """Pieces of a generator: from ``starts[i]`` on, dg/dt = G g, u = g[0], g as ``state`` gives."""

    starts: Sequence[Any]
    generator: Any
    state: Callable[[int, Any], Any]

    def until(self, begin: Any, end: Any) -> list[tuple[Any, Any]]:
        """Return the pieces between two times: state at the begin of each, and its length."""
        edges = [begin, *(t for t in self.starts if begin < t < end), end]
        return [(self.state(self._piece(a), a), b - a) for a, b in pairwise(edges)]

    def value(self, time: Any, before: bool = False) -> Any:
        """Return u at a time."""
        piece = self._piece(time)
        if before and piece and self.starts[piece] == time:
            piece -= 1
        return self.state(piece, time)[0]

    def _piece(self, time: Any) -> int:
        return max(i for i, start in enumerate(self.starts) if start <= time)


LINE = mp.matrix([[0, 1], [0, 0]])


def lines(starts: Sequence[float], levels: Sequence[float], slopes: Sequence[float]) -> Signal:
    """Pieces of straight lines."""
    begin = [mp.mpf(start) for start in starts]

    def state(i: int, time: Any) -> Any:
        slope = mp.mpf(slopes[i])
        return mp.matrix([mp.mpf(levels[i]) + slope * (time - begin[i]), slope])

    return Signal(begin, LINE, state)


def sine(offset: float, amplitude: float, frequency: float) -> Signal:
    """offset + amplitude sin(2 pi f t); the states are u, the sine's other half, and one."""
    w = 2 * mp.pi * mp.mpf(frequency)

    def state(i: int, time: Any) -> Any:
        amplitude_, offset_ = mp.mpf(amplitude), mp.mpf(offset)
        return mp.matrix(
            [
                offset_ + amplitude_ * mp.sin(w * time),
                amplitude_ * mp.cos(w * time),
                offset_,
            ]
        )

    generator = mp.matrix([[0, w, 0], [-w, 0, w], [0, 0, 0]])
    return Signal([mp.mpf(0)], generator, state)


def held(
    circuit: Circuit,
    signal: Signal,
    instants: Sequence[float],
    acquisition: float,
    starts: tuple[float, float, float],
    period: float,
    settled: float | None,
) -> list[Any]:
    """Return what the capacitor holds at instants.

    Parameters
    ----------
    starts : m, c, p of m · previous + c + p · pin when the switch closes
    period : between the looks that there have been for ever before
    settled : value of the signal before t = 0, None for a circuit at rest
    """
    with mp.workdps(DIGITS):
        n, taken = circuit.opened[0].rows, mp.mpf(acquisition)
        x = mp.matrix(n, 1)
        time = mp.mpf(instants[0]) - mp.mpf(period)
        if settled is not None:
            x = _fixed(circuit, mp.mpf(settled), mp.mpf(period), taken, starts)
            # Looks before the first have seen the settled value; the signal since t = 0 is added.
            zero = _rest(circuit, mp.mpf(settled))
        else:
            zero = mp.matrix(n, 1)
        found = []
        deviation, s = x - zero, x[n - 1]
        # What the signal alone does, with the switch never closed, from t = 0 on.
        alone, at = zero, mp.mpf(0)
        if time > 0:
            raise ValueError("the first look must come within a period")
        deviation = _step(circuit.opened, deviation, -time) if time < 0 else deviation
        deviation[n - 1] = 0
        x = alone + deviation
        x[n - 1] = s
        for instant in instants:
            closing = mp.mpf(instant) - taken
            if closing < 0:
                raise ValueError("the first window must lie within the run")
            x = _driven(circuit.opened, x, signal, at, closing)
            u = signal.value(closing)
            m, c, p = (mp.mpf(value) for value in starts)
            x[n - 1] = m * x[n - 1] + c + p * circuit.pin(x, u)
            x = _driven(circuit.closed, x, signal, closing, mp.mpf(instant))
            at = mp.mpf(instant)
            found.append(x[n - 1])
        return found


def _step(model: tuple[Any, Any], x: Any, time: Any) -> Any:
    return mp.expm(model[0] * time, method="taylor") * x


def _driven(model: tuple[Any, Any], x: Any, signal: Signal, begin: Any, end: Any) -> Any:
    """Advance x over the pieces of a signal; Van Loan's augmented matrix."""
    a, b = model
    n, g = a.rows, signal.generator
    for state, length in signal.until(begin, end):
        whole = mp.matrix(n + g.rows)
        for i in range(n):
            for j in range(n):
                whole[i, j] = a[i, j]
            whole[i, n] = b[i]
        for i in range(g.rows):
            for j in range(g.rows):
                whole[n + i, n + j] = g[i, j]
        start = mp.matrix([*x, *state])
        x = (mp.expm(whole * length, method="taylor") * start)[:n]
        x = mp.matrix(x)
    return x


def _rest(circuit: Circuit, level: Any) -> Any:
    """Return the open circuit settled on a level, its capacitor at zero."""
    a, b = circuit.opened
    n = a.rows
    if n == 1:
        return mp.matrix(1, 1)
    inner = mp.lu_solve(a[: n - 1, : n - 1], -b[: n - 1, 0] * level)
    return mp.matrix([*inner, 0])


def _fixed(circuit: Circuit, level: Any, period: Any, taken: Any, starts: Sequence[float]) -> Any:
    """Return x behind a look after looks for ever at a level: the fixed point of one period."""
    signal = Signal([-period], mp.matrix([[0]]), lambda i, time: mp.matrix([level]))
    n = circuit.opened[0].rows

    def around(x: Any) -> Any:
        x = _driven(circuit.opened, x, signal, mp.mpf(0), period - taken)
        m, c, p = (mp.mpf(value) for value in starts)
        x[n - 1] = m * x[n - 1] + c + p * circuit.pin(x, level)
        return _driven(circuit.closed, x, signal, period - taken, period)

    constant = around(mp.matrix(n, 1))
    matrix = mp.matrix(n)
    for j in range(n):
        unit = mp.matrix(n, 1)
        unit[j] = 1
        column = around(unit) - constant
        for i in range(n):
            matrix[i, j] = column[i]
    return mp.lu_solve(mp.eye(n) - matrix, constant)
