"""The order of visits with the least crosstalk."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import combinations, permutations

import numpy as np
from numpy.typing import NDArray

from frontend_sim.measure.scan.crosstalk import Crosstalk, crosstalk
from frontend_sim.scenario.scan_scenario import ScanScenario

Real = NDArray[np.float64]

MOST_EXHAUSTIVE = 8
"""Up to so many channels all orders are tried."""

SOLVED = 24
"""Of all orders so many, the best by the estimate, are solved for: every one of five channels."""

WORTH = 0.01
"""An order that is better by a smaller share than this is not worth a change."""


@dataclass(frozen=True)
class OrderFound:
    """An order of visits, and what it costs.

    Parameters
    ----------
    order : names of the channels; the scan's own where no other is better by one percent
    error : largest error of any channel from crosstalk, levels as given [LSB]
    before : the same in the scan's own order [LSB]
    exhaustive : whether all orders were tried; else it is the best that a search has met
    """

    order: tuple[str, ...]
    error: float
    before: float
    exhaustive: bool


def best_order(scan: ScanScenario, apart: Real) -> OrderFound | None:
    """Return the order in which the largest error from crosstalk is least.

    What a channel leaves in another depends on how many visits lie between, and on the victim; so
    that is taken from the fixed point in the scan's own order, and orders are compared by it. This
    is exact behind shared stages; the memory of a sampling capacitor depends on the sources between
    as well, so the best few orders are then solved for. Up to eight channels all orders are
    compared, beyond that neighbours are exchanged (pairs swapped, stretches turned round) for as
    long as it helps, from the order on that goes to the nearest level next.

    Parameters
    ----------
    apart : how far the pins of two channels are from each other, as a share of full scale, (N, N)

    Returns
    -------
    None where a channel is visited several times in a scan, or nothing couples the channels.
    """
    now = scan.rhythm.order
    count = len(scan.channel)
    found = crosstalk(scan)
    if len(now) != count or count < 3 or not np.any(found.matrix):
        return None
    share = _by_distance(found.matrix, now)
    exhaustive = count <= MOST_EXHAUSTIVE
    orders = (
        np.array([(0, *rest) for rest in permutations(range(1, count))])
        if exhaustive
        else _searched(share, apart)
    )
    costs = _costs(orders, share, apart)
    # Of two orders with the same largest error the one with the smaller sum; then the first.
    ranked = np.lexsort((costs[:, 1], np.round(costs[:, 0], 12)))
    solved = SOLVED if exhaustive and not scan.scan.chain else 1
    best, after = _solved(scan, orders[ranked[:solved]], apart)
    before = _error(found, apart)
    if after > before * (1.0 - WORTH):
        best, after = np.array(now), before
    return OrderFound(tuple(scan.names[i] for i in best), after, before, exhaustive)


def _solved(
    scan: ScanScenario, orders: NDArray[np.int64], apart: Real
) -> tuple[NDArray[np.int64], float]:
    """Return the best of some orders, each solved for by itself, and its error [LSB]."""
    errors = [_error(crosstalk(scan, order.tolist()), apart) for order in orders]
    least = int(np.argmin(np.round(errors, 12)))
    return orders[least], errors[least]


def _error(found: Crosstalk, apart: Real) -> float:
    return float(np.max(np.sum(np.abs(found.matrix) * apart, axis=1)))


def _by_distance(matrix: Real, order: tuple[int, ...]) -> Real:
    """Return what the visit d places before leaves in each channel, shape (N, N), d from 0."""
    count = len(order)
    share = np.zeros((count, count))
    for place, victim in enumerate(order):
        for distance in range(1, count):
            share[victim, distance] = abs(matrix[victim, order[place - distance]])
    return share


def _costs(orders: NDArray[np.int64], share: Real, apart: Real) -> Real:
    """Return the largest error of any channel, and the sum of all, for each order, shape (P, 2)."""
    errors = np.zeros(orders.shape)
    for distance in range(1, orders.shape[1]):
        aggressor = np.roll(orders, distance, axis=1)
        errors += share[orders, distance] * apart[orders, aggressor]
    return np.column_stack([errors.max(axis=1), errors.sum(axis=1)])


def _searched(share: Real, apart: Real) -> NDArray[np.int64]:
    """Return orders that no exchange of two channels, nor turning a stretch round, makes better."""
    found = []
    for start in range(len(apart)):
        order = _nearest_next(start, apart)
        cost = tuple(_costs(order[None], share, apart)[0])
        while True:
            near = np.array(list(_exchanged(order)))
            costs = _costs(near, share, apart)
            best = np.lexsort((costs[:, 1], costs[:, 0]))[0]
            if not tuple(costs[best]) < cost:
                break
            order, cost = near[best], tuple(costs[best])
        found.append(order)
    return np.array(found)


def _nearest_next(start: int, apart: Real) -> NDArray[np.int64]:
    order, left = [start], set(range(len(apart))) - {start}
    while left:
        order.append(min(left, key=lambda other: (apart[order[-1], other], other)))
        left.remove(order[-1])
    return np.array(order)


def _exchanged(order: NDArray[np.int64]) -> Iterator[NDArray[np.int64]]:
    for i, j in combinations(range(len(order)), 2):
        swapped, turned = order.copy(), order.copy()
        swapped[[i, j]] = order[[j, i]]
        turned[i : j + 1] = order[i : j + 1][::-1]
        yield swapped
        yield turned
