"""The compiled steps of ``AmplifierLoop``.

They stand in one file, as what numba keeps on disk is known by the file of the calling loop alone.
"""

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

TOWARDS = 0.2
"""Share of the width by which ``between`` moves its look, at the first one."""

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
def margin(
    mode: int, static: bool, w: float, gap: float, slope: float,
    up: float, down: float, low: float, high: float,
) -> float:  # fmt: skip
    """Return how far a mode is from its end, at w with a gap to where it is driven, and a slope.

    The mode holds where this is not negative [V, or V/s].
    """
    half = 0.5 * NEAR * (1.0 + abs(w))
    if mode == FREE:
        level = min(high + half - w, w - low + half)
        return min(level, min(slope + down, up - slope))
    if static:
        left = half + (gap if mode in (UP, HIGH) else -gap)
    elif mode == UP:
        left = slope - up * (1.0 - EDGE)
    elif mode == DOWN:
        left = -down * (1.0 - EDGE) - slope
    else:
        left = slope if mode == HIGH else -slope
    if mode == UP:
        return min(left, high - w)
    return min(left, w - low) if mode == DOWN else left


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
def joined(steps: Any, count: int) -> Any:
    """Return the steps over ``count`` smallest ones, free and held, as tables of one level."""
    whole = np.zeros((2, 1, *steps.shape[2:]))
    for way in range(2):
        level, left = 0, count
        while left > 0:
            if left & 1:
                e = steps[way, level]
                whole[way, 0] += e + e @ whole[way, 0]
            left >>= 1
            level += 1
    return whole


@compiled()
def doubled(dims: Any, table: Any, count: int, z: Any, work: Any) -> None:
    """Advance z = [x, u, du/dt, slope] in place by ``count`` smallest steps."""
    n, level = len(dims), 0
    while count > 0:
        if count & 1:
            for r in range(n + 1):
                total = 0.0
                for k in range(n + 3):
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


@compiled(inline="always")
def window(
    mode: int, static: bool, up: float, down: float, low: float, high: float
) -> tuple[float, float, float, float, float, float]:  # fmt: skip
    """Return between which slopes, levels of w and gaps a mode goes on for certain."""
    ends = (low if low > -math.inf else 0.0, high if high < math.inf else 0.0)
    near = 2.0 * NEAR * (1.0 + max(abs(ends[0]), abs(ends[1])))
    any_low, any_high = -math.inf, math.inf
    if mode == FREE:
        return -down * (1.0 - EDGE), up * (1.0 - EDGE), low + near, high - near, any_low, any_high
    lowest = low + near if mode == DOWN else any_low
    highest = high - near if mode == UP else any_high
    upwards = mode in (UP, HIGH)
    if static and upwards:
        return any_low, any_high, lowest, highest, near, any_high
    if static:
        return any_low, any_high, lowest, highest, any_low, -near
    if upwards:
        return up if mode == UP else 0.0, any_high, lowest, highest, any_low, any_high
    return any_low, -down if mode == DOWN else 0.0, lowest, highest, any_low, any_high


@compiled(fastmath={"contract"})
def glide(
    dims: Any, mode: int, still: bool, last: float, plain: Any, beyond: Any, x: Any,
    length: Any, end: Any, linear: Any, standing: float, usual: float, whole: Any, held: Any,
    asked: Any, target: Any, static: bool, output: Any,
    up: float, down: float, low: float, high: float, deviation: Any,
) -> tuple[int, bool]:  # fmt: skip
    """Take pieces of the usual length while a mode goes on for certain.

    Advances plain, beyond and x in place, and returns the number of pieces taken, and whether
    nothing lies beyond the linear model behind them.
    """
    n = len(dims)
    now, then, here, after, rest = plain, np.empty(n), x, np.empty(n), np.zeros(n)
    speed = up if mode == UP else -down if mode == DOWN else 0.0
    least, most, lowest, highest, narrowest, widest = window(mode, static, up, down, low, high)
    share, free, taken = 1.0 / usual, mode == FREE, 0
    slope, gap = asked[n] * last, 0.0
    for k in range(n):
        slope += asked[k] * x[k]
    if static and not free:
        gap = target[n] * last - x[n - 1]
        for k in range(n):
            gap += target[k] * x[k]
    begins = lowest < x[n - 1] < highest and narrowest < gap < widest
    for s in range(len(length) if begins else 0):
        if length[s] != usual:
            break
        ahead = end[s]
        rise = (ahead - last) * share
        for r in range(n):
            total = now[r] + whole[r, n] * last + whole[r, n + 1] * rise
            for k in range(n):
                total += whole[r, k] * now[k]
            then[r] = total
        if not free:
            for r in range(n):
                total = here[r] + held[r, n] * last + held[r, n + 1] * rise
                total += held[r, n + 2] * speed
                for k in range(n):
                    total += held[r, k] * here[k]
                after[r] = total
        elif still:
            for r in range(n):
                after[r] = then[r]
        else:
            for r in range(n):
                total = beyond[r]
                for k in range(n):
                    total += whole[r, k] * beyond[k]
                rest[r] = total
                after[r] = then[r] + total
        following, gap = asked[n] * ahead, 0.0
        for k in range(n):
            following += asked[k] * after[k]
        if static:
            plain_goal, goal = target[n] * ahead, target[n] * ahead
            for k in range(n):
                plain_goal += target[k] * then[k]
                goal += target[k] * after[k]
            then[n - 1] = plain_goal
            if free:
                after[n - 1] = goal
                rest[n - 1] = goal - plain_goal
            else:
                gap = goal - after[n - 1]
        bend = asked[n + 1] * rise
        if not (
            least < slope + bend < most
            and least < following + bend < most
            and lowest < after[n - 1] < highest
            and narrowest < gap < widest
        ):
            break
        d = 0.0
        if not free:
            d = output[n] * ahead + standing - linear[s]
            for r in range(n):
                d += output[r] * after[r]
        elif not still:
            still = True
            for r in range(n):
                d += output[r] * rest[r]
                still = still and abs(rest[r]) < GONE
                beyond[r] = rest[r]
            if still:
                d = 0.0
        deviation[s] = d
        now, then, here, after = then, now, after, here
        last, slope, taken = ahead, following, s + 1
    for r in range(n):
        plain[r], x[r] = now[r], here[r]
        if not free:
            beyond[r] = x[r] - plain[r]
        elif still:
            beyond[r] = 0.0
    return taken, still


@compiled(fastmath={"contract"})
def loop(
    dims: Any, state: Any, length: Any, begin: Any, end: Any, linear: Any, standing: float,
    jumps: Any, unit: float, first: int, fine: int, steps: Any, rates: Any,
    lasting: Any, longest: Any,
    asked: Any, target: Any, static: bool, output: Any,
    up: float, down: float, low: float, high: float,
    deviation: Any, begun: Any, time: Any, piece: Any, since: Any,
) -> None:  # fmt: skip
    """Advance state = [d, mode, u, x_lin, x - x_lin, x, age]; deviation[s] = y - linear[s].

    ``age`` is the time since the last jump or event. Pieces go by ``glide`` where they can. Any
    other is one step if its mode still holds at the end, and if nothing that the step would not
    follow rings on; else it is walked ``through``. Which of the three it is hangs on the state and
    the piece alone, so no cut of time shows.

    ``dims`` is a tuple as long as x, so that the loops over x are compiled for its length. They are
    written out rather than called: a call with arrays costs more than a whole piece.
    """
    n = len(dims)
    d, mode, last = state[0], int(state[1]), state[2]
    plain, following = state[3 : 3 + n].copy(), np.empty(n)
    beyond, moved = state[3 + n : 3 + 2 * n].copy(), np.zeros(n)
    x, after, age = state[3 + 2 * n : -1].copy(), np.empty(n), state[-1:]
    still = not np.any(beyond)
    z, work = np.zeros(n + 3), np.empty(n + 3)
    usual = np.max(length)
    usual_count = round(usual / unit)
    whole = joined(steps, usual_count)
    jump, s = 0, 0
    while s < len(length):
        stop = jumps[jump] if jump < len(jumps) else len(length)
        if s < stop and most_count(lasting, longest, age[0]) >= usual_count:
            taken, still = glide(
                dims, mode, still, last, plain, beyond, x,
                length[s:stop], end[s:stop], linear[s:stop], standing, usual,
                whole[0, 0], whole[1, 0], asked, target, static, output,
                up, down, low, high, deviation[s:stop],
            )  # fmt: skip
            if taken > 0:
                if mode >= 0:
                    time[mode] += taken * usual
                    if piece[mode] < 0:
                        piece[mode], since[mode] = s, 0.0
                s += taken
                d, last = deviation[s - 1], end[s - 1]
                age[0] += taken * usual
            if s == len(length):
                break
        dt, u, ahead = length[s], begin[s], end[s]
        rise = (ahead - u) / dt if dt > 0.0 else 0.0
        jumped = jump < len(jumps) and jumps[jump] == s
        w, gap = x[n - 1], 0.0
        slope = asked[n] * u + asked[n + 1] * rise
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
            age[0] = 0.0
        x[n - 1] = w
        if static and not still:
            beyond[n - 1] = w - plain[n - 1]
        speed = up if mode == UP else -down if mode == DOWN else 0.0
        count = round(dt / unit)
        # Beside a jump: not worth a matrix of its own.
        table, many = (whole, 1) if dt == usual else (steps, count)
        z[:n], z[n], z[n + 1], z[n + 2] = plain, u, rise, 0.0
        doubled(dims, table[0], many, z, work)
        following[:] = z[:n]
        if mode == FREE:
            z[:n], z[n], z[n + 1] = beyond, 0.0, 0.0
            doubled(dims, table[0], many, z, work)
            for r in range(n):
                moved[r] = z[r]
                after[r] = following[r] + moved[r]
        else:
            z[:n], z[n], z[n + 1], z[n + 2] = x, u, rise, speed
            doubled(dims, table[1], many, z, work)
            for r in range(n):
                after[r] = z[r]
                moved[r] = after[r] - following[r]
        slope = asked[n] * ahead + asked[n + 1] * rise
        for k in range(n):
            slope += asked[k] * after[k]
        w, gap = after[n - 1], 0.0
        if static:
            gap = target[n] * ahead - w
            for k in range(n):
                gap += target[k] * after[k]
        holds = margin(mode, static, w, gap, slope, up, down, low, high) >= 0.0
        most = most_count(lasting, longest, age[0])
        if jumped or not holds or most < count:
            for r in range(n):
                after[r] = x[r]
            passed = through(
                dims, mode, after, u, rise, count, unit,
                1 << first if jumped or not holds else most, first, fine,
                steps, rates, lasting, longest, age, asked, target, static,
                up, down, low, high, s, time, piece, since,
            )  # fmt: skip
            if passed == UNTOUCHED:
                for r in range(n):
                    after[r] = following[r] + moved[r]
            else:
                mode, still = passed, False
                for r in range(n):
                    moved[r] = after[r] - following[r]
        else:
            age[0] += dt
            if mode >= 0:
                time[mode] += dt
                if piece[mode] < 0:
                    piece[mode], since[mode] = s, 0.0
        d = 0.0
        if mode == FREE:
            if not still:
                still = True
                for r in range(n):
                    d += output[r] * moved[r]
                    still = still and abs(moved[r]) < GONE
                if still:
                    d = 0.0
                    moved[:] = 0.0
        else:
            still = False
            d = output[n] * ahead + standing - linear[s]
            for r in range(n):
                d += output[r] * after[r]
        for r in range(n):
            plain[r], beyond[r], x[r] = following[r], moved[r], after[r]
        deviation[s] = d
        last = ahead
        s += 1
    state[0], state[1], state[2] = d, mode, last
    state[3 : 3 + n] = plain
    state[3 + n : 3 + 2 * n], state[3 + 2 * n : -1] = beyond, x


@compiled(inline="always")
def level_within(count: int) -> int:
    """Return the level of the longest doubled step within so many smallest ones."""
    level = 0
    while 2 << level <= count:
        level += 1
    return level


@compiled()
def expand(
    dims: Any, z: Any, over: float, rate: Any, asked: Any, target: Any, static: bool,
    terms: Any, told: Any,
) -> int:  # fmt: skip
    """Expand what follows z = [x, u, du/dt, slope] in powers of a share of the time ``over`` [s].

    terms[i] are the coefficients of x, told[i] those of w, of the slope that is asked, and of the
    gap to where w is driven. Returns the number of terms.
    """
    n = len(dims)
    for r in range(n):
        terms[0, r] = z[r]
    u, bend, forced, largest, many = z[n], z[n + 1], z[n + 2], 0.0, TERMS
    for i in range(TERMS):
        slope, goal, here = asked[n] * u + asked[n + 1] * bend, target[n] * u, abs(u)
        for r in range(n):
            slope += asked[r] * terms[i, r]
            goal += target[r] * terms[i, r]
            here = max(here, abs(terms[i, r]))
        told[i, 0], told[i, 1] = terms[i, n - 1], slope
        told[i, 2] = goal - terms[i, n - 1] if static else 0.0
        largest = max(largest, here)
        if i + 1 == TERMS or (i > 1 and here <= RESOLVED * largest):
            many = i + 1
            break
        share = over / (i + 1)
        for r in range(n):
            total = rate[r, n] * u + rate[r, n + 1] * bend + rate[r, n + 2] * forced
            for k in range(n):
                total += rate[r, k] * terms[i, k]
            terms[i + 1, r] = total * share
        u, bend, forced = z[n + 1] * over if i == 0 else 0.0, 0.0, 0.0
    return many


@compiled(inline="always")
def between(holds: int, ends: int, left: float, right: float, share: float, most: int) -> int:
    """Return where between two steps, of margins left >= 0 > right, to look for the end of a mode.

    Regula falsi, moved towards the middle by TOWARDS of the width times its share of the first one,
    and no farther from it than lets halving end one look later; ``most`` steps may be left after
    this one. Source: Oliveira and Takahashi 2020, *An Enhancement of the Bisection Method Average
    Performance Preserving Minmax Optimality*, ACM Trans. Math. Softw. 47 (1); from memory.
    """
    width = float(ends - holds)
    middle, reach = 0.5 * width, max(most - 0.5 * width, 0.0)
    found = width * left / (left - right)
    towards = TOWARDS * width * (width * share)
    if abs(found - middle) <= towards:
        found = middle
    else:
        found += towards if found < middle else -towards
    found = min(max(found, middle - reach), middle + reach)
    return holds + min(max(int(found), 1), ends - holds - 1)


@compiled()
def through(
    dims: Any, mode: int, x: Any, u: float, rise: float, count: int, unit: float,
    begin: int, first: int, fine: int,
    steps: Any, rates: Any, lasting: Any, longest: Any, age: Any,
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
    highest = steps.shape[1] - 1
    level = min(level_within(begin), highest)
    z, out = np.zeros(n + 3), np.zeros(n)
    terms, told = np.empty((TERMS, n)), np.empty((TERMS, 3))
    z[:n], z[n + 1] = x, rise
    untouched = mode == FREE
    while done < count:
        while level > fine and 1 << level > count - done:
            level, taken = level - 1, 0
        step = min(1 << level, count - done)
        z[n], z[n + 2] = u + rise * (done * unit), 0.0
        way, many = 0, 0
        if mode != FREE:
            way, z[n + 2] = 1, up if mode == UP else -down if mode == DOWN else 0.0
        if step == 1 << level:
            for r in range(n):
                total = z[r]
                for k in range(n + 3):
                    total += steps[way, level, r, k] * z[k]
                out[r] = total
        else:
            many = expand(dims, z, step * unit, rates[way], asked, target, static, terms, told)
            for r in range(n):
                total = 0.0
                for i in range(many - 1, -1, -1):
                    total += terms[i, r]
                out[r] = total
        there = u + rise * ((done + step) * unit)
        slope, gap = asked[n] * there + asked[n + 1] * rise, 0.0
        for k in range(n):
            slope += asked[k] * out[k]
        if static:
            gap = target[n] * there - out[n - 1]
            for k in range(n):
                gap += target[k] * out[k]
        right = margin(mode, static, out[n - 1], gap, slope, up, down, low, high)
        ends = right < 0.0 and events < MOST_EVENTS
        if ends and level > fine:
            level, halving = level - 1, True
            continue
        if ends:
            if many == 0:
                many = expand(dims, z, step * unit, rates[way], asked, target, static, terms, told)
            holds, share, most = 0, 1.0 / step, step
            left = margin(mode, static, told[0, 0], told[0, 2], told[0, 1], up, down, low, high)
            while step - holds > 1:
                middle = between(holds, step, max(left, 0.0), right, share, most)
                w, slope_there, gap_there = 0.0, 0.0, 0.0
                for i in range(many - 1, -1, -1):
                    w = w * (middle * share) + told[i, 0]
                    slope_there = slope_there * (middle * share) + told[i, 1]
                    gap_there = gap_there * (middle * share) + told[i, 2]
                most = (most + 1) >> 1
                here = margin(mode, static, w, gap_there, slope_there, up, down, low, high)
                if here >= 0.0:
                    holds, left = middle, here
                else:
                    step, right, slope, gap = middle, here, slope_there, gap_there
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
            longer = level < highest and taken >= EACH
            if longer and 2 << level <= most_count(lasting, longest, age[0]):
                level, taken = level + 1, 0
    for r in range(n):
        x[r] = z[r]
    return UNTOUCHED if untouched else mode
