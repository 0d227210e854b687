"""The loop from acquisition to acquisition, compiled; one fixed order, so no cut of time shows."""

from __future__ import annotations

from typing import Any

from frontend_sim.compiled import compiled
from frontend_sim.simulation.interval_kernels import add_columns, advance
from frontend_sim.simulation.since_kernels import NEAR, TERMS


@compiled()
def nearby(
    x: Any,
    work: Any,
    more: Any,
    n: int,
    rest: float,
    unit: float,
    step: Any,
    system: Any,
) -> None:
    """Advance x by a known step, less the identity, and by a short rest, which may be negative.

    Step and system stand by columns.
    The rest is at most NEAR units of time, see ``since_kernels``.
    """
    work[:n] = x[:n]
    add_columns(step, x, 0, n, n, work)
    x[:n] = work[:n]
    if rest != 0.0:
        for term in range(1, 3 if abs(rest) <= unit else TERMS + 1):
            more[:n] = 0.0
            add_columns(system, work, 0, n, n, more)
            for r in range(n):
                work[r] = rest / term * more[r]
                x[r] += work[r]


@compiled()
def acquire(
    q: Any,
    s: float,
    last: Any,
    which: Any,
    instants: Any,
    acquisition: float,
    ended: Any,
    begun: Any,
    pin: Any,
    order: Any,
    c: Any,
    b: Any,
    closed: Any,
    system: Any,
    unit: Any,
    table: Any,
    usual: Any,
    steps: Any,
    starts: Any,
    held: Any,
    moved: Any,
    work: Any,
) -> float:
    """Go through acquisitions, of channel which[k] each, and return s behind the last one.

    q (N, n) and last (N,), when each channel was left, are advanced in place. order (N,) are the
    states of each port, c and b (N, n) its output and share, closed (N, n + 1, n + 1) the step of
    a closed switch less the identity, of which psi takes the first entries and s the last one;
    system, unit and table step the open ports, see ``interval_kernels.advance``; usual (N, G) are
    intervals whose steps (N, G, n, n), less the identity and by columns, are known. ended and begun
    (K, n + 1) and pin (K,) are z and p0 of the signal. held[k] becomes s at the instant, moved[k]
    the volts that s went since the closing. starts = (memory, constant, share).
    """
    top = closed.shape[1] - 1
    z, after = work[0], work[1]
    for k in range(len(which)):
        channel = which[k]
        n = order[channel]
        gap = instants[k] - acquisition - last[channel]
        if n > 0 and gap > 0.0:
            near = -1
            for g in range(usual.shape[1]):
                if abs(gap - usual[channel, g]) <= NEAR * unit[channel]:
                    near = g
                    break
            if near >= 0:
                nearby(
                    q[channel],
                    after,
                    z,
                    n,
                    gap - usual[channel, near],
                    unit[channel],
                    steps[channel, near],
                    system[channel],
                )
            else:
                advance(  # takes every entry beyond n for one more state
                    q[channel, :n],
                    after[:n],
                    z[:n],
                    n,
                    gap,
                    unit[channel],
                    system[channel, :n, :n],
                    table[channel, :, :, :n, :n],
                )
        voltage = pin[k]
        for i in range(n):
            voltage += c[channel, i] * q[channel, i]
        s = starts[0] * s + starts[1] + starts[2] * voltage
        begin = s
        for i in range(n):
            z[i] = q[channel, i] + b[channel, i] * s - begun[k, i]
        z[top] = s - begun[k, top]
        for i in range(top + 1):
            if i < n or i == top:
                total = closed[channel, i, top] * z[top]
                for j in range(n):
                    total += closed[channel, i, j] * z[j]
                after[i] = ended[k, i] + (z[i] + total)
        s = after[top]
        for i in range(n):
            q[channel, i] = after[i] - b[channel, i] * s
        last[channel] = instants[k]
        held[k] = s
        moved[k] = s - begin
    return s
