"""The compiled steps of the limiters: from event to event within each piece, in one order."""

from __future__ import annotations

import math
from typing import Any

from frontend_sim.compiled import compiled

FREE, HIGH, LOW, UP, DOWN = -1, 0, 1, 2, 3
"""What limits: nothing, a rail or a diode, the slew rate; from 0 on, numbers of limits."""

UNTOUCHED = -2
"""The piece turned out to be free from its begin to its end."""

GONE = 1e-40
"""A deviation below this is none [V]."""

MOST_EVENTS = 64
"""Events in one piece, far more than a line as input can make."""


@compiled(inline="always")
def relaxed(y: float, z: float, slope: float, rate: float, t: float) -> float:
    """Return y after t, for dy/dt = z at first, relaxing at a rate towards a constant slope:

    y + slope t + (z - slope) (1 - exp(-rate t)) / rate.
    """
    return y + slope * t - (z - slope) * math.expm1(-rate * t) / rate


@compiled()
def rise_through(y: float, z: float, slope: float, rate: float, level: float, rest: float) -> float:
    """Return when ``relaxed`` first rises through a level, or infinity if not within ``rest``.

    The derivative goes from z to the slope without turning back, so y rises over one interval at
    most; there Newton's steps, kept inside of a bracket, find the root to rounding.
    """
    begin, end = 0.0, rest
    if z > 0.0 and slope < 0.0:
        end = min(rest, math.log((z - slope) / -slope) / rate)
    elif z <= 0.0:
        if slope <= 0.0:
            return math.inf
        begin = math.log((slope - z) / slope) / rate
    if not begin < end or relaxed(y, z, slope, rate, end) <= level:
        return math.inf
    low, high = begin, end
    t = 0.5 * (low + high)
    for _ in range(100):
        above = relaxed(y, z, slope, rate, t) - level
        if above > 0.0:
            high = t
        else:
            low = t
        speed = slope + (z - slope) * math.exp(-rate * t)
        following = t - above / speed if speed > 0.0 else low
        if not low < following < high:
            following = 0.5 * (low + high)
        if abs(following - t) <= 1e-16 * end or high - low <= 1e-16 * end:
            return following
        t = following
    return t


@compiled()
def steepening(z: float, slope: float, rate: float, up: float, down: float) -> float:
    """Return when the derivative of ``relaxed`` leaves [-down, up], or infinity."""
    if slope > up:
        return max(math.log((slope - z) / (slope - up)) / rate, 0.0)
    if slope < -down:
        return max(math.log((slope - z) / (slope + down)) / rate, 0.0)
    return math.inf


@compiled(inline="always")
def left_over(mode: int, d: float, y: float, v: float, decay: float) -> float:
    """Return the deviation y - v at the end of a piece, at whose begin it was d.

    One that was free all along dies out by itself; in one that ends free, d was told before.
    """
    if mode == UNTOUCHED:
        d *= decay
    elif mode != FREE:
        d = y - v
    return 0.0 if abs(d) < GONE else d


@compiled()
def closed_loop(
    d: float, y: float, v: float, length: Any, begin: Any, end: Any, linear: Any, apart: Any,
    rate: float, gain: float, up: float, down: float, low: float, high: float,
    deviation: Any, time: Any, piece: Any, since: Any,
) -> tuple[float, float]:  # fmt: skip
    """dy/dt = clip(w (G u - y), -down, up) between low and high; deviation[s] = y - linear[s].

    While nothing limits, the deviation dies out with exp(-w t) and needs no input at all; while
    something does, y is known and the deviation with it. Only where a piece ends free after it was
    limited, the linear answer is taken from the line as well, so that its error cancels.

    Returns d and y at the end. A piece that one limit fills takes a way of its own, for speed.
    """
    known, decay, share = -1.0, 0.0, 0.0
    for s in range(len(length)):
        dt = length[s]
        if dt != known:
            known, decay = dt, math.exp(-rate * dt)
            share = 1.0 / dt if dt > 0.0 else 0.0
        target, last = gain * begin[s], gain * end[s]
        if apart.shape[1]:
            d, v = apart[0, s], apart[1, s]
            y = min(max(v + d, low), high)
        z, slope = rate * (target - y), (last - target) * share
        least, most = (target, last) if target < last else (last, target)
        mode = FREE
        if y == high and least >= high:
            mode = HIGH
        elif y == low and most <= low:
            mode = LOW
        elif z > up or z < -down or slope > up or slope < -down:
            speed = up if z > 0.0 else -down
            after = y + speed * dt
            ending = rate * (last - after)
            if after < high and after > low:
                if z > up and ending > up:
                    y, mode = after, UP
                elif z < -down and ending < -down:
                    y, mode = after, DOWN
        # y moves towards the line, and its derivative towards the line's slope.
        elif most < high and least > low and y < high and y > low:
            mode = UNTOUCHED
        if mode >= 0:
            time[mode] += dt
            if piece[mode] < 0:
                piece[mode], since[mode] = s, 0.0
        elif mode == FREE:
            y, mode = limited_piece(
                y, target, slope, dt, rate, up, down, low, high, s, time, piece, since
            )
            if mode == FREE:
                d = y - relaxed(v, rate * (target - v), slope, rate, dt)
        v = linear[s]
        d = left_over(mode, d, y, v, decay)
        if mode < 0:
            y = min(max(v + d, low), high)
        deviation[s] = d
    return d, y


@compiled()
def limited_piece(
    y: float, target: float, slope: float, dt: float, rate: float,
    up: float, down: float, low: float, high: float,
    s: int, time: Any, piece: Any, since: Any,
) -> tuple[float, int]:  # fmt: skip
    """Go through the events of a piece of ``closed_loop``; return y at its end and what limits."""
    t, z = 0.0, rate * (target - y)
    if y >= high and (z > 0.0 or (z == 0.0 and slope > 0.0)):
        mode = HIGH
    elif y <= low and (z < 0.0 or (z == 0.0 and slope < 0.0)):
        mode = LOW
    elif z > up:
        mode = UP
    elif z < -down:
        mode = DOWN
    else:
        mode = FREE
    untouched = mode == FREE
    for _ in range(MOST_EVENTS):
        rest = dt - t
        if mode == FREE:
            steep = steepening(z, slope, rate, up, down)
            until = min(rest, steep)
            to_high = rise_through(y, z, slope, rate, high, until)
            to_low = rise_through(-y, -z, -slope, rate, -low, until)
            step, after = min(until, to_high, to_low), FREE
            y = relaxed(y, z, slope, rate, step)
            if to_high < to_low:
                y, after = high, HIGH
            elif to_low < to_high:
                y, after = low, LOW
            elif steep < rest:
                after = UP if slope > up else DOWN
        elif mode in (UP, DOWN):
            speed, edge = (up, high) if mode == UP else (-down, low)
            to_edge = (edge - y) / speed
            change = rate * (slope - speed)
            ends = (z - speed) / -change if change * speed < 0.0 else math.inf
            step, after = min(rest, to_edge, ends), FREE
            y += speed * step
            if to_edge <= ends:
                y, after = (edge if to_edge <= rest else y), (HIGH if mode == UP else LOW)
        else:
            edge = high if mode == HIGH else low
            back = slope < 0.0 if mode == HIGH else slope > 0.0
            ends = max((target + slope * t - edge) / -slope, 0.0) if back else math.inf
            step, after = min(rest, ends), FREE
            y = edge
        if mode != FREE:
            time[mode] += step
            if piece[mode] < 0:
                piece[mode], since[mode] = s, t
        t += step
        if step >= rest:
            break
        # An output leaves its rail with no slope at all, whatever rounding says.
        z = rate * (target + slope * t - y) if mode != HIGH and mode != LOW else 0.0
        mode, untouched = after, False
    return y, UNTOUCHED if untouched else mode


@compiled()
def clamp(
    d: float, y: float, v: float, length: Any, begin: Any, end: Any, linear: Any, apart: Any,
    rate: float, ratio: float, low: float, high: float,
    deviation: Any, time: Any, piece: Any, since: Any,
) -> tuple[float, float]:  # fmt: skip
    """dy/dt = w (u - y) - w ratio (y - clip(y, low, high)); deviation[s] = y - linear[s].

    A conducting diode makes the node faster by 1 + ratio, and pulls its target towards the level.
    Returns d and y at the end.
    """
    known, decay, gone, share = -1.0, 0.0, 0.0, 0.0
    faster = rate * (1.0 + ratio)
    for s in range(len(length)):
        dt, first, last = length[s], begin[s], end[s]
        if dt != known:
            known, decay = dt, math.exp(-rate * dt)
            gone = -math.expm1(-faster * dt) / faster
            share = 1.0 / dt if dt > 0.0 else 0.0
        if apart.shape[1]:
            d, v = apart[0, s], apart[1, s]
            y = v + d
        least, most = (first, last) if first < last else (last, first)
        # y moves towards the line, and never across a level that the line stays beyond.
        if y <= high and most <= high and y >= low and least >= low:
            mode = UNTOUCHED
        elif y >= high and least >= high:
            mode = HIGH
        elif y <= low and most <= low:
            mode = LOW
        else:
            mode = FREE
        slope = (last - first) * share
        if mode >= 0:
            time[mode] += dt
            if piece[mode] < 0:
                piece[mode], since[mode] = s, 0.0
            level = high if mode == HIGH else low
            z = rate * (first - y) - rate * ratio * (y - level)
            slower = slope / (1.0 + ratio)
            y += slower * dt + (z - slower) * gone
        elif mode == FREE:
            y, mode = clamped_piece(
                y, first, slope, dt, rate, ratio, low, high, s, time, piece, since
            )
            if mode == FREE:
                d = y - relaxed(v, rate * (first - v), slope, rate, dt)
        v = linear[s]
        d = left_over(mode, d, y, v, decay)
        if mode < 0:
            y = v + d
        deviation[s] = d
    return d, y


@compiled()
def clamped_piece(
    y: float, first: float, slope: float, dt: float, rate: float, ratio: float,
    low: float, high: float, s: int, time: Any, piece: Any, since: Any,
) -> tuple[float, int]:  # fmt: skip
    """Go through the events of one piece of ``clamp``; return y at its end, and what limits."""
    t, z = 0.0, rate * (first - y)
    mode = FREE
    if y > high or (y == high and z > 0.0):
        mode = HIGH
    elif y < low or (y == low and z < 0.0):
        mode = LOW
    untouched = mode == FREE
    for _ in range(MOST_EVENTS):
        rest, u = dt - t, first + slope * t
        if mode == FREE:
            z = rate * (u - y)
            to_high = rise_through(y, z, slope, rate, high, rest)
            to_low = rise_through(-y, -z, -slope, rate, -low, rest)
            step, after = min(rest, to_high, to_low), HIGH if to_high < to_low else LOW
            y = relaxed(y, z, slope, rate, step)
            if step < rest:
                y = high if after == HIGH else low
        else:
            level, sign = (high, 1.0) if mode == HIGH else (low, -1.0)
            faster = rate * (1.0 + ratio)
            z = rate * (u - y) - rate * ratio * (y - level)
            slower = slope / (1.0 + ratio)
            back = rise_through(-sign * y, -sign * z, -sign * slower, faster, -sign * level, rest)
            step, after = min(rest, back), FREE
            y = level if back < rest else relaxed(y, z, slower, faster, step)
            time[mode] += step
            if piece[mode] < 0:
                piece[mode], since[mode] = s, t
        t += step
        if step >= rest:
            break
        mode, untouched = after, False
    return y, UNTOUCHED if untouched else mode


@compiled()
def cut_off(
    length: Any, begin: Any, end: Any, gain: float, low: float, high: float, residue: float,
    deviation: Any, time: Any, piece: Any, since: Any,
) -> None:  # fmt: skip
    """deviation[s] = (1 - residue) (clip(v, low, high) - v) with v = gain · end[s]."""
    for s in range(len(length)):
        first, last = gain * begin[s], gain * end[s]
        if max(first, last) > high:
            share, entered = beyond(first, last, high)
            time[HIGH] += share * length[s]
            if piece[HIGH] < 0:
                piece[HIGH], since[HIGH] = s, entered * length[s]
        if min(first, last) < low:
            share, entered = beyond(-first, -last, -low)
            time[LOW] += share * length[s]
            if piece[LOW] < 0:
                piece[LOW], since[LOW] = s, entered * length[s]
        deviation[s] = (1.0 - residue) * (min(max(last, low), high) - last)


@compiled(inline="always")
def beyond(first: float, last: float, level: float) -> tuple[float, float]:
    """Return which share of a line lies above a level that it does reach, and where it enters."""
    if first > level and last > level:
        return 1.0, 0.0
    crossing = (level - first) / (last - first)
    return (crossing, 0.0) if first > level else (1.0 - crossing, crossing)


@compiled()
def follow(
    length: Any, begin: Any, end: Any, apart: Any,
    gain: float, up: float, down: float, low: float, high: float,
    y: Any, time: Any, piece: Any, since: Any,
) -> None:  # fmt: skip
    """y[s + 1] moves from y[s] to clip(gain u, low, high) no faster than -down to up."""
    for s in range(len(length)):
        dt, first, last = length[s], gain * begin[s], gain * end[s]
        slope = (last - first) / dt if dt > 0.0 else 0.0
        here, t = y[s], 0.0
        if apart.shape[1]:
            here = min(max(apart[1, s] + apart[0, s], low), high)
        # The line comes in at a rail and goes out at the other one; between them it is the goal.
        comes, goes = (low, high) if slope > 0.0 else (high, low)
        enters = (comes - first) / slope if slope != 0.0 else -math.inf
        leaves = (goes - first) / slope if slope != 0.0 else math.inf
        for _ in range(MOST_EVENTS):
            until, steep, goal = dt, 0.0, min(max(first + slope * t, low), high)
            if t < enters:
                until, goal = min(enters, dt), comes
            elif t < leaves:
                until, steep = min(leaves, dt), slope
            elif slope != 0.0:
                goal = goes
            part = until - t
            if here == goal and -down <= steep <= up:
                mode, step, reached = FREE, part, True
                if steep == 0.0 and abs(goal) < math.inf:
                    mode = HIGH if goal == high else LOW if goal == low else FREE
            else:
                rising = goal > here or (here == goal and steep > up)
                speed, mode = (up, UP) if rising else (-down, DOWN)
                # How fast the gap closes; it need not, if the line runs away.
                closing = (speed - steep) if rising else (steep - speed)
                meets = abs(goal - here) / closing if closing > 0.0 and here != goal else math.inf
                step, reached = min(part, meets), meets <= part
                here += speed * step
            if mode >= 0:
                time[mode] += step
                if piece[mode] < 0:
                    piece[mode], since[mode] = s, t
            t = until if step >= part else t + step
            if reached and steep == 0.0:
                here = goal
            elif reached and t >= leaves:
                here = goes
            elif reached:
                here = min(max(last if t >= dt else first + slope * t, low), high)
            if t >= dt:
                break
        y[s + 1] = here
