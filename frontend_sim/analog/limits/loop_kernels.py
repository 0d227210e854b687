"""The compiled steps of ``HigherLoop``."""

from __future__ import annotations

from typing import Any

import numpy as np

from frontend_sim.analog.limits.kernels import DOWN, FREE, GONE, HIGH, LOW, MOST_EVENTS, UP
from frontend_sim.compiled import compiled

EDGE = 1e-9
"""Share of a slew rate by which its end is later than its begin, so that the two never meet."""


@compiled()
def stepped(table: Any, level: int, z: Any, out: Any) -> None:
    """out = z after step number ``level`` of a table of steps, which are less the identity."""
    size = len(z)
    for r in range(size):
        total = z[r]
        for k in range(size):
            total += table[level, r, k] * z[k]
        out[r] = total


@compiled()
def join(table: Any, count: int, whole: Any) -> None:
    """whole = the step over ``count`` smallest steps, less the identity."""
    whole[:] = 0.0
    level = 0
    while count > 0:
        if count & 1:
            e = table[level]
            whole[:] += e + e @ whole
        count >>= 1
        level += 1


@compiled()
def demand(x: Any, u: float, c: Any, w_row: Any, rate: float, gain: float) -> tuple[float, float]:
    """Return where the integrator stands at states x and input u, and the slope asked of it.

    With a rate of -1 and no gain the second is the output.
    """
    y, w = 0.0, 0.0
    for i in range(len(c)):
        y += c[i] * x[i]
        w += w_row[i] * x[i]
    return w, rate * (gain * u - y)


@compiled()
def valid(
    mode: int, w: float, slope: float, up: float, down: float, low: float, high: float
) -> bool:
    """Tell whether a mode still holds, for an integrator at w with a demand for a slope."""
    if mode == FREE:
        inside = (w <= high or slope <= 0.0) and (w >= low or slope >= 0.0)
        return inside and -down <= slope <= up
    if mode == UP:
        return slope >= up * (1.0 - EDGE) and w <= high
    if mode == DOWN:
        return slope <= -down * (1.0 - EDGE) and w >= low
    return slope >= 0.0 if mode == HIGH else slope <= 0.0


@compiled()
def mode_at(
    mode: int, w: float, slope: float, up: float, down: float, low: float, high: float
) -> int:
    """Return what limits from here on, given what limited up to here."""
    near = EDGE * (1.0 + abs(w))
    if slope > 0.0 and (mode == HIGH or w >= high or (mode != LOW and w >= high - near)):
        return HIGH
    if slope < 0.0 and (mode == LOW or w <= low or (mode != HIGH and w <= low + near)):
        return LOW
    if slope >= up * (1.0 - 0.5 * EDGE):
        return UP
    return DOWN if slope <= -down * (1.0 - 0.5 * EDGE) else FREE


@compiled()
def loop(
    state: Any, length: Any, begin: Any, end: Any, linear: Any,
    unit: float, free: Any, held: Any, c: Any, w_row: Any,
    rate: float, gain: float, up: float, down: float, low: float, high: float,
    deviation: Any, time: Any, piece: Any, since: Any,
) -> None:  # fmt: skip
    """Advance state = [d, mode, x_lin, x - x_lin] over pieces; deviation[s] = y - linear[s].

    Loops are written out rather than called: a call with arrays costs more than the whole piece.
    """
    n = len(c)
    mode, known, share, count = int(state[1]), -1.0, 0.0, 0
    plain, following = state[2 : 2 + n].copy(), np.empty(n)
    beyond, moved = state[2 + n :].copy(), np.empty(n)
    x, after = np.empty(n), np.empty(n)
    whole, whole_held = np.zeros((n + 2, n + 2)), np.zeros((n + 1, n + 1))
    x[:] = plain + beyond
    w, y = demand(x, 0.0, c, w_row, -1.0, 0.0)
    still = not np.any(beyond)
    for s in range(len(length)):
        dt = length[s]
        if dt != known:
            known, share, count = dt, 1.0 / dt if dt > 0.0 else 0.0, round(dt / unit)
            join(free, count, whole)
            join(held, count, whole_held)
        rise = (end[s] - begin[s]) * share
        mode = mode_at(mode, w, rate * (gain * begin[s] - y), up, down, low, high)
        speed = up if mode == UP else -down if mode == DOWN else 0.0
        y, w = 0.0, 0.0
        for r in range(n):
            total = plain[r] + whole[r, n] * begin[s] + whole[r, n + 1] * rise
            for k in range(n):
                total += whole[r, k] * plain[k]
            following[r] = total
            if mode == FREE:
                total = beyond[r]
                if not still:
                    for k in range(n):
                        total += whole[r, k] * beyond[k]
                moved[r] = total
            else:
                total = x[r] + whole_held[r, n] * speed
                for k in range(n):
                    total += whole_held[r, k] * x[k]
                moved[r] = total - following[r]
            after[r] = following[r] + moved[r]
            y += c[r] * after[r]
            w += w_row[r] * after[r]
        if valid(mode, w, rate * (gain * end[s] - y), up, down, low, high):
            if mode >= 0:
                time[mode] += dt
                if piece[mode] < 0:
                    piece[mode], since[mode] = s, 0.0
        else:
            mode = through(
                mode, x, begin[s], rise, count, unit, free, held, c, w_row,
                rate, gain, up, down, low, high, s, time, piece, since,
            )  # fmt: skip
            w, y = demand(x, 0.0, c, w_row, -1.0, 0.0)
            for r in range(n):
                moved[r], after[r] = x[r] - following[r], x[r]
        d, still = 0.0, True
        for r in range(n):
            d += c[r] * moved[r]
            still = still and abs(moved[r]) < GONE
            plain[r], beyond[r], x[r] = following[r], moved[r], after[r]
        if still:
            beyond[:] = 0.0
            d = 0.0
        elif mode != FREE:
            d = y - linear[s]
        deviation[s] = d
    state[0], state[1] = deviation[len(length) - 1], mode
    state[2 : 2 + n] = plain
    state[2 + n :] = beyond


@compiled()
def through(
    mode: int, x: Any, u: float, rise: float, count: int, unit: float,
    free: Any, held: Any, c: Any, w_row: Any,
    rate: float, gain: float, up: float, down: float, low: float, high: float,
    s: int, time: Any, piece: Any, since: Any,
) -> int:  # fmt: skip
    """Go through the events of one piece; x is advanced in place, and what limits is returned.

    The end of a mode is found by bisection: from the longest step to the shortest, each is taken if
    the mode still holds behind it.
    """
    n = len(c)
    done = 0
    wide, wide_out = np.empty(n + 2), np.empty(n + 2)
    narrow, narrow_out = np.empty(n + 1), np.empty(n + 1)
    for _ in range(MOST_EVENTS):
        begun = done
        wide[:n], narrow[:n] = x, x
        wide[n], wide[n + 1] = u + rise * (done * unit), rise
        narrow[n] = up if mode == UP else -down if mode == DOWN else 0.0
        for level in range(len(free) - 1, -1, -1):
            step = 1 << level
            if done + step > count:
                continue
            if mode == FREE:
                stepped(free, level, wide, wide_out)
                w, slope = demand(wide_out, wide_out[n], c, w_row, rate, gain)
                holds = valid(mode, w, slope, up, down, low, high)
                if holds:
                    wide[:] = wide_out
            else:
                stepped(held, level, narrow, narrow_out)
                there = u + rise * ((done + step) * unit)
                w, slope = demand(narrow_out, there, c, w_row, rate, gain)
                holds = valid(mode, w, slope, up, down, low, high)
                if holds:
                    narrow[:] = narrow_out
            if holds:
                done += step
        x[:] = wide[:n] if mode == FREE else narrow[:n]
        if mode >= 0 and done > begun:
            time[mode] += (done - begun) * unit
            if piece[mode] < 0:
                piece[mode], since[mode] = s, begun * unit
        if done >= count:
            break
        # The smallest step is taken in any case, so that time goes on.
        if mode == FREE:
            stepped(free, 0, wide, wide_out)
            x[:] = wide_out[:n]
        else:
            stepped(held, 0, narrow, narrow_out)
            x[:] = narrow_out[:n]
        done += 1
        w, slope = demand(x, u + rise * (done * unit), c, w_row, rate, gain)
        mode = mode_at(mode, w, slope, up, down, low, high)
    return mode
