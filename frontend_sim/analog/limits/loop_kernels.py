"""The compiled steps of ``HigherLoop``."""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit

from frontend_sim.analog.limits.kernels import DOWN, FREE, GONE, HIGH, LOW, MOST_EVENTS, UP

EDGE = 1e-9
"""Share of a slew rate by which its end is later than its begin, so that the two never meet."""


@njit(cache=True)
def stepped(table: Any, level: int, z: Any, out: Any) -> None:
    """out = z after step number ``level`` of a table of steps, which are less the identity."""
    size = len(z)
    for r in range(size):
        total = z[r]
        for k in range(size):
            total += table[level, r, k] * z[k]
        out[r] = total


@njit(cache=True)
def join(table: Any, count: int, whole: Any) -> None:
    """whole = the step over ``count`` smallest steps, less the identity."""
    size = len(whole)
    whole[:] = 0.0
    level = 0
    while count > 0:
        if count & 1:
            e = table[level]
            whole[:] += e + e @ whole
        count >>= 1
        level += 1


@njit(cache=True)
def valid(
    mode: int, x: Any, u: float, c: Any, w_row: Any,
    rate: float, gain: float, up: float, down: float, low: float, high: float,
) -> bool:  # fmt: skip
    """Tell whether a mode still holds at states x and input u."""
    y, w = 0.0, 0.0
    for i in range(len(c)):
        y += c[i] * x[i]
        w += w_row[i] * x[i]
    slope = rate * (gain * u - y)
    if mode == FREE:
        inside = (w <= high or slope <= 0.0) and (w >= low or slope >= 0.0)
        return inside and -down <= slope <= up
    if mode == UP:
        return slope >= up * (1.0 - EDGE) and w <= high
    if mode == DOWN:
        return slope <= -down * (1.0 - EDGE) and w >= low
    return slope >= 0.0 if mode == HIGH else slope <= 0.0


@njit(cache=True)
def mode_at(
    mode: int, x: Any, u: float, c: Any, w_row: Any,
    rate: float, gain: float, up: float, down: float, low: float, high: float,
) -> int:  # fmt: skip
    """Return what limits from here on, given what limited up to here."""
    y, w = 0.0, 0.0
    for i in range(len(c)):
        y += c[i] * x[i]
        w += w_row[i] * x[i]
    slope = rate * (gain * u - y)
    near = 1e-9 * (1.0 + abs(w))
    if slope > 0.0 and (mode == HIGH or w >= high or (mode != LOW and w >= high - near)):
        return HIGH
    if slope < 0.0 and (mode == LOW or w <= low or (mode != HIGH and w <= low + near)):
        return LOW
    if slope >= up * (1.0 - 0.5 * EDGE):
        return UP
    return DOWN if slope <= -down * (1.0 - 0.5 * EDGE) else FREE


@njit(cache=True)
def loop(
    state: Any, length: Any, begin: Any, end: Any, linear: Any,
    unit: float, free: Any, held: Any, c: Any, w_row: Any,
    rate: float, gain: float, up: float, down: float, low: float, high: float,
    deviation: Any, time: Any, piece: Any, since: Any,
) -> None:  # fmt: skip
    """Advance state = [d, mode, x_lin, x - x_lin] over pieces; deviation[s] = y - linear[s]."""
    n = len(c)
    mode = np.int64(state[1])
    plain, plain_out = np.empty(n + 2), np.empty(n + 2)
    x, trial = np.empty(n), np.empty(n)
    beyond, moved = state[2 + n :].copy(), np.empty(n)
    plain[:n] = state[2 : 2 + n]
    known = -1.0
    count = np.int64(0)
    whole, whole_held = np.zeros((1, n + 2, n + 2)), np.zeros((1, n + 1, n + 1))
    narrow, narrow_out = np.empty(n + 1), np.empty(n + 1)
    for s in range(len(length)):
        dt = length[s]
        if dt != known:
            known, count = dt, np.int64(np.rint(dt / unit))
            join(free, count, whole[0])
            join(held, count, whole_held[0])
        slope = (end[s] - begin[s]) / dt if dt > 0.0 else 0.0
        plain[n], plain[n + 1] = begin[s], slope
        for i in range(n):
            x[i] = plain[i] + beyond[i]
        mode = mode_at(mode, x, begin[s], c, w_row, rate, gain, up, down, low, high)
        stepped(whole, 0, plain, plain_out)
        if mode == FREE:
            for r in range(n):
                moved[r] = beyond[r]
                for k in range(n):
                    moved[r] += whole[0, r, k] * beyond[k]
                trial[r] = plain_out[r] + moved[r]
        else:
            narrow[:n] = x
            narrow[n] = up if mode == UP else -down if mode == DOWN else 0.0
            stepped(whole_held, 0, narrow, narrow_out)
            trial[:] = narrow_out[:n]
            for r in range(n):
                moved[r] = trial[r] - plain_out[r]
        if valid(mode, trial, end[s], c, w_row, rate, gain, up, down, low, high):
            if mode >= 0:
                time[mode] += dt
                if piece[mode] < 0:
                    piece[mode], since[mode] = s, 0.0
        else:
            mode = through(
                mode, x, begin[s], slope, count, unit, free, held, c, w_row,
                rate, gain, up, down, low, high, s, time, piece, since,
            )  # fmt: skip
            for r in range(n):
                moved[r] = x[r] - plain_out[r]
        d, y, gone = 0.0, 0.0, True
        for r in range(n):
            d += c[r] * moved[r]
            y += c[r] * (plain_out[r] + moved[r])
            gone = gone and abs(moved[r]) < GONE
        for r in range(n):
            beyond[r] = 0.0 if gone else moved[r]
            plain[r] = plain_out[r]
        if gone:
            d = 0.0
        elif mode != FREE:
            d = y - linear[s]
        deviation[s] = d
    state[0], state[1] = deviation[len(length) - 1], mode
    state[2 : 2 + n] = plain[:n]
    state[2 + n :] = beyond


@njit(cache=True)
def through(
    mode: int, x: Any, u: float, slope: float, count: int, unit: float,
    free: Any, held: Any, c: Any, w_row: Any,
    rate: float, gain: float, up: float, down: float, low: float, high: float,
    s: int, time: Any, piece: Any, since: Any,
) -> int:  # fmt: skip
    """Go through the events of one piece; x is advanced in place, and what limits is returned.

    The end of a mode is found by bisection: from the longest step to the shortest, each is taken if
    the mode still holds behind it.
    """
    n = len(c)
    done = np.int64(0)
    wide, wide_out = np.empty(n + 2), np.empty(n + 2)
    narrow, narrow_out = np.empty(n + 1), np.empty(n + 1)
    for _ in range(MOST_EVENTS):
        begun = done
        at = u + slope * (done * unit)
        wide[:n], narrow[:n] = x, x
        wide[n], wide[n + 1] = at, slope
        narrow[n] = up if mode == UP else -down if mode == DOWN else 0.0
        for level in range(len(free) - 1, -1, -1):
            step = np.int64(1) << level
            if done + step > count:
                continue
            if mode == FREE:
                stepped(free, level, wide, wide_out)
                holds = valid(
                    mode, wide_out[:n], wide_out[n], c, w_row, rate, gain, up, down, low, high
                )
                if holds:
                    wide[:] = wide_out
            else:
                stepped(held, level, narrow, narrow_out)
                holds = valid(
                    mode, narrow_out[:n], u + slope * ((done + step) * unit), c, w_row,
                    rate, gain, up, down, low, high,
                )  # fmt: skip
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
        at = u + slope * (done * unit)
        mode = mode_at(mode, x, at, c, w_row, rate, gain, up, down, low, high)
    return mode
