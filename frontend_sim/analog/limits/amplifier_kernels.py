"""The compiled steps of ``AmplifierLoop``."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from frontend_sim.analog.limits.kernels import (
    DOWN,
    FREE,
    HIGH,
    LOW,
    MOST_EVENTS,
    UNTOUCHED,
    UP,
)
from frontend_sim.compiled import compiled

EDGE = 1e-9
"""Share of a slew rate by which its end is later than its begin, so that the two never meet."""

NEAR = 1e-11
"""An output this near to where it is driven, or to a rail, is there [V, and share of itself]."""

GONE = 1e-20
"""A deviation of all states below this is none [V]."""

EACH = 8
"""Steps of one length after a jump or an event, before they are doubled."""

ENDLESS = 1 << 62
"""No bound of a step, in smallest steps."""

TERMS = 32
"""Most terms of a Taylor series; over a step of level ``fine`` about twelve are needed."""

RESOLVED = 1e-18
"""A series ends with a term below this share of its largest one."""


@compiled(inline="always")
def valid(
    mode: int, static: bool, w: float, gap: float, slope: float,
    up: float, down: float, low: float, high: float,
) -> bool:  # fmt: skip
    """Tell whether a mode still holds, at w with a gap to where it is driven, and a slope asked."""
    near = NEAR * (1.0 + abs(w))
    if mode == FREE:
        return w <= high + 0.5 * near and w >= low - 0.5 * near and -down <= slope <= up
    if static:
        if mode in (UP, HIGH):
            return gap >= -0.5 * near and (mode == HIGH or w <= high)
        return gap <= 0.5 * near and (mode == LOW or w >= low)
    if mode == UP:
        return slope >= up * (1.0 - EDGE) and w <= high
    if mode == DOWN:
        return slope <= -down * (1.0 - EDGE) and w >= low
    return slope >= 0.0 if mode == HIGH else slope <= 0.0


@compiled(inline="always")
def mode_at(
    mode: int, static: bool, w: float, gap: float, slope: float,
    up: float, down: float, low: float, high: float,
) -> tuple[int, float]:  # fmt: skip
    """Return what limits from here on, given what limited up to here, and w."""
    near = NEAR * (1.0 + abs(w))
    if static and math.isinf(up):
        w, gap = min(max(w + gap, low), high), w + gap
        if gap > high or (gap == high and slope > 0.0):
            return HIGH, high
        if gap < low or (gap == low and slope < 0.0):
            return LOW, low
        return FREE, w
    if static and gap > near:
        return (HIGH, high) if w >= high - near else (UP, w)
    if static and gap < -near:
        return (LOW, low) if w <= low + near else (DOWN, w)
    if static:
        w += gap
    if slope > 0.0 and w >= high - (near if mode != LOW else 0.0):
        return HIGH, high
    if slope < 0.0 and w <= low + (near if mode != HIGH else 0.0):
        return LOW, low
    if slope >= up * (1.0 - 0.5 * EDGE):
        return UP, w
    if slope <= -down * (1.0 - 0.5 * EDGE):
        return DOWN, w
    return FREE, w


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
def doubled(dims: Any, table: Any, count: int, z: Any, work: Any) -> None:
    """Advance z = [x, u, du/dt, ...] in place by ``count`` smallest steps."""
    n = len(dims)
    size, level = table.shape[1], 0
    while count > 0:
        if count & 1:
            for r in range(n + 1):
                total = 0.0
                for k in range(size):
                    total += table[level, r, k] * z[k]
                work[r] = total
            for r in range(n + 1):
                z[r] += work[r]
        count >>= 1
        level += 1


@compiled(inline="always")
def most_count(lasting: Any, longest: Any, age: float) -> int:
    """Return the longest step that follows what rings on at an age [s], in smallest steps."""
    most = ENDLESS
    for k in range(len(lasting)):
        if age < lasting[k] and longest[k] < most:
            most = longest[k]
    return most


@compiled(fastmath={"contract"})
def loop(
    dims: Any, state: Any, length: Any, begin: Any, end: Any, linear: Any, standing: float,
    jumps: Any, unit: float, first: int, fine: int, free: Any, held: Any,
    free_rate: Any, held_rate: Any, lasting: Any, longest: Any,
    asked: Any, target: Any, static: bool, output: Any,
    up: float, down: float, low: float, high: float,
    deviation: Any, begun: Any, time: Any, piece: Any, since: Any,
) -> None:  # fmt: skip
    """Advance state = [d, mode, u, x_lin, x - x_lin, age]; deviation[s] = y - linear[s].

    ``age`` is the time since the last jump or event. A piece is one step if its mode still holds at
    the end, and if nothing that the step would not follow rings on; else it is walked through.

    ``dims`` is a tuple as long as x, so that the loops over x are compiled for its length. They are
    written out rather than called: a call with arrays costs more than the whole piece.
    """
    n = len(dims)
    d, mode, last = state[0], int(state[1]), state[2]
    plain, following = state[3 : 3 + n].copy(), np.empty(n)
    beyond, moved, age = state[3 + n : -1].copy(), np.zeros(n), state[-1:]
    x, after = plain + beyond, np.empty(n)
    whole, whole_held = np.zeros((n + 2, n + 2)), np.zeros((n + 3, n + 3))
    still = not np.any(beyond)
    z, work = np.zeros(n + 3), np.empty(n + 3)
    usual = np.max(length)
    count = round(usual / unit)
    join(free, count, whole)
    join(held, count, whole_held)
    known, share, jump = -1.0, 0.0, 0
    slope, gap = 0.0, 0.0
    for s in range(len(length)):
        dt, u, ahead = length[s], begin[s], end[s]
        if dt != known:
            known, share, count = dt, 1.0 / dt if dt > 0.0 else 0.0, round(dt / unit)
        rise = (ahead - u) * share
        jumped = jump < len(jumps) and jumps[jump] == s
        w = x[n - 1]
        if static or jumped or u != last or s == 0:
            slope, gap = asked[n] * u + asked[n + 1] * rise, 0.0
            for k in range(n):
                slope += asked[k] * x[k]
        if static:
            goal, plain_goal = target[n] * u, target[n] * u
            for k in range(n):
                goal += target[k] * x[k]
                plain_goal += target[k] * plain[k]
            plain[n - 1] = plain_goal
            gap = goal - w
            if mode == FREE and not jumped:
                w, gap = goal, 0.0
        mode, w = mode_at(mode, static, w, gap, slope, up, down, low, high)
        if jumped:
            if static:
                d += output[n - 1] * ((w - x[n - 1]) - target[n] * (u - last))
                begun[jump] = d
            jump += 1
        x[n - 1] = w
        if static and not still:
            beyond[n - 1] = w - plain[n - 1]
        speed = up if mode == UP else -down if mode == DOWN else 0.0
        if dt != usual:
            # Beside a jump: not worth a matrix of its own.
            z[:n], z[n], z[n + 1] = plain, u, rise
            doubled(dims, free, count, z, work)
            following[:] = z[:n]
            if mode == FREE:
                z[:n], z[n], z[n + 1] = beyond, 0.0, 0.0
                doubled(dims, free, count, z, work)
                for r in range(n):
                    moved[r] = z[r]
                    after[r] = following[r] + moved[r]
            else:
                z[:n], z[n], z[n + 1], z[n + 2] = x, u, rise, speed
                doubled(dims, held, count, z, work)
                for r in range(n):
                    after[r] = z[r]
                    moved[r] = after[r] - following[r]
        elif mode == FREE:
            for r in range(n):
                total = plain[r] + whole[r, n] * u + whole[r, n + 1] * rise
                for k in range(n):
                    total += whole[r, k] * plain[k]
                following[r] = total
                if not still:
                    total = beyond[r]
                    for k in range(n):
                        total += whole[r, k] * beyond[k]
                    moved[r] = total
                    total += following[r]
                after[r] = total
        else:
            for r in range(n):
                total = plain[r] + whole[r, n] * u + whole[r, n + 1] * rise
                for k in range(n):
                    total += whole[r, k] * plain[k]
                following[r] = total
                total = x[r] + whole_held[r, n] * u + whole_held[r, n + 1] * rise
                total += whole_held[r, n + 2] * speed
                for k in range(n):
                    total += whole_held[r, k] * x[k]
                moved[r] = total - following[r]
                after[r] = total
        slope = asked[n] * ahead + asked[n + 1] * rise
        for k in range(n):
            slope += asked[k] * after[k]
        w, gap = after[n - 1], 0.0
        if static:
            gap = target[n] * ahead - w
            for k in range(n):
                gap += target[k] * after[k]
        holds = valid(mode, static, w, gap, slope, up, down, low, high)
        if jumped:
            age[0] = 0.0
        most = most_count(lasting, longest, age[0])
        if jumped or not holds or most < count:
            for r in range(n):
                after[r] = x[r]
            passed = through(
                dims, mode, after, u, rise, count, unit,
                1 << first if jumped or not holds else most, first, fine,
                free, held, free_rate, held_rate, lasting, longest, age, asked, target, static,
                up, down, low, high, s, time, piece, since,
            )  # fmt: skip
            if passed == UNTOUCHED:
                for r in range(n):
                    after[r] = following[r] + moved[r]
            else:
                mode, still = passed, False
                slope = asked[n] * ahead
                for r in range(n):
                    moved[r] = after[r] - following[r]
                    slope += asked[r] * after[r]
        else:
            age[0] += dt
            if mode >= 0:
                time[mode] += dt
                if piece[mode] < 0:
                    piece[mode], since[mode] = s, 0.0
        last = ahead
        if mode == FREE:
            d = 0.0
            if not still:
                still = True
                for r in range(n):
                    d += output[r] * moved[r]
                    still = still and abs(moved[r]) < GONE
                if still:
                    d = 0.0
                    for r in range(n):
                        moved[r] = 0.0
        else:
            still = False
            d = output[n] * ahead + standing - linear[s]
            for r in range(n):
                d += output[r] * after[r]
        for r in range(n):
            plain[r], beyond[r], x[r] = following[r], moved[r], after[r]
        deviation[s] = d
    state[0], state[1], state[2] = d, mode, last
    state[3 : 3 + n] = plain
    state[3 + n : -1] = beyond


@compiled(inline="always")
def level_within(count: int) -> int:
    """Return the level of the longest doubled step within so many smallest ones."""
    level = 0
    while 2 << level <= count:
        level += 1
    return level


@compiled(inline="always")
def expand(
    dims: Any, z: Any, over: float, rate: Any, size: int, asked: Any, target: Any, static: bool,
    terms: Any, told: Any,
) -> int:  # fmt: skip
    """Expand what follows z = [x, u, du/dt, slope] in powers of a share of the time ``over`` [s].

    terms[i, :n] are the coefficients of x, told[i] those of w, of the slope that is asked, and of
    the gap to where w is driven. Returns the number of terms.
    """
    n = len(dims)
    largest, many = 0.0, 0
    for i in range(TERMS):
        here = 0.0
        for r in range(n + 3):
            if i == 0:
                terms[0, r] = z[r]
            elif r < size:
                total = 0.0
                for k in range(size):
                    total += rate[r, k] * terms[i - 1, k]
                terms[i, r] = total * over / i
            else:
                terms[i, r] = 0.0
            here = max(here, abs(terms[i, r]))
        slope, goal = asked[n] * terms[i, n], target[n] * terms[i, n]
        if i == 0:
            slope += asked[n + 1] * z[n + 1]
        for k in range(n):
            slope += asked[k] * terms[i, k]
            goal += target[k] * terms[i, k]
        told[i, 0], told[i, 1] = terms[i, n - 1], slope
        told[i, 2] = goal - terms[i, n - 1] if static else 0.0
        many = i + 1
        largest = max(largest, here)
        if i > 1 and here <= RESOLVED * largest:
            break
    return many


@compiled()
def through(
    dims: Any, mode: int, x: Any, u: float, rise: float, count: int, unit: float,
    begin: int, first: int, fine: int,
    free: Any, held: Any, free_rate: Any, held_rate: Any, lasting: Any, longest: Any, age: Any,
    asked: Any, target: Any, static: bool,
    up: float, down: float, low: float, high: float,
    s: int, time: Any, piece: Any, since: Any,
) -> int:  # fmt: skip
    """Go through the events of one piece; x and age are advanced, and what limits is returned.

    After a jump and after every event, steps are short at first, a share of the fastest time
    constant, and are doubled as the transient dies out, but not beyond what follows a pole that
    still rings: none is missed between the ends of the piece. The end of a mode lies in the first
    step behind which it does not hold any more. That step is halved down to the level ``fine``,
    below which a Taylor series converges fast; the series tells where in it the mode ends.
    """
    n = len(dims)
    done, events, taken, halving = 0, 0, 0, False
    level = min(level_within(begin), len(free) - 1)
    z, out = np.zeros(n + 3), np.zeros(n + 3)
    terms, told = np.empty((TERMS, n + 3)), np.empty((TERMS, 3))
    z[:n] = x
    untouched = mode == FREE
    while done < count:
        while level > fine and 1 << level > count - done:
            level, taken = level - 1, 0
        step = min(1 << level, count - done)
        z[n], z[n + 1] = u + rise * (done * unit), rise
        z[n + 2] = up if mode == UP else -down if mode == DOWN else 0.0
        table, rate = (free, free_rate) if mode == FREE else (held, held_rate)
        size, many = len(rate), 0
        if step == 1 << level:
            for r in range(n):
                total = z[r]
                for k in range(size):
                    total += table[level, r, k] * z[k]
                out[r] = total
        else:
            many = expand(dims, z, step * unit, rate, size, asked, target, static, terms, told)
            for r in range(n):
                total = 0.0
                for i in range(many - 1, -1, -1):
                    total += terms[i, r]
                out[r] = total
        there = u + rise * ((done + step) * unit)
        slope, goal = asked[n] * there + asked[n + 1] * rise, target[n] * there
        for k in range(n):
            slope += asked[k] * out[k]
            goal += target[k] * out[k]
        gap = goal - out[n - 1] if static else 0.0
        ends = events < MOST_EVENTS and not valid(
            mode, static, out[n - 1], gap, slope, up, down, low, high
        )
        if ends and level > fine:
            level, halving = level - 1, True
            continue
        if ends:
            if many == 0:
                many = expand(dims, z, step * unit, rate, size, asked, target, static, terms, told)
            holds, share = 0, 1.0 / step
            while step - holds > 1:
                middle = (holds + step) >> 1
                w, slope_there, gap_there = 0.0, 0.0, 0.0
                for i in range(many - 1, -1, -1):
                    w = w * (middle * share) + told[i, 0]
                    slope_there = slope_there * (middle * share) + told[i, 1]
                    gap_there = gap_there * (middle * share) + told[i, 2]
                if valid(mode, static, w, gap_there, slope_there, up, down, low, high):
                    holds = middle
                else:
                    step, slope, gap = middle, slope_there, gap_there
            for r in range(n):
                total = 0.0
                for i in range(many - 1, -1, -1):
                    total = total * (step * share) + terms[i, r]
                out[r] = total
        if mode >= 0:
            time[mode] += step * unit
            if piece[mode] < 0:
                piece[mode], since[mode] = s, done * unit
        done += step
        age[0] += step * unit
        for r in range(n):
            z[r] = out[r]
        if ends:
            mode, z[n - 1] = mode_at(mode, static, z[n - 1], gap, slope, up, down, low, high)
            untouched, events, level, taken, halving = False, events + 1, first, 0, False
            age[0] = 0.0
        elif halving:
            halving = level > fine
            level, taken = max(level - 1, fine), 0
        else:
            taken += 1
            most = most_count(lasting, longest, age[0])
            if taken >= EACH and level + 1 < len(free) and 2 << level <= most:
                level, taken = level + 1, 0
    for r in range(n):
        x[r] = z[r]
    return UNTOUCHED if untouched else mode
