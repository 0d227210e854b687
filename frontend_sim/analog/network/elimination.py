"""A sparse system of linear equations, solved in exact rational arithmetic."""

from __future__ import annotations

from fractions import Fraction

Row = dict[int, Fraction]
"""Entries of one equation: number of the unknown -> coefficient, without zeros."""


def solved(rows: list[Row], right: list[Fraction]) -> tuple[Fraction, list[Fraction]] | None:
    """Return the determinant and the solution, or None where the system is singular.

    Rows with few entries are used up first, so that the band of a ladder stays a band. ``rows``
    and ``right`` are worked on in place.
    """
    size = len(rows)
    left, pivots, determinant = set(range(size)), [], Fraction(1)
    users: list[set[int]] = [set() for _ in range(size)]
    for number, row in enumerate(rows):
        for unknown in row:
            users[unknown].add(number)
    while left:
        chosen = min(left, key=lambda number: (len(rows[number]), number))
        row = rows[chosen]
        if not row:
            return None
        unknown = min(row, key=lambda column: (len(users[column]), column))
        left.remove(chosen)
        pivots.append((chosen, unknown))
        determinant *= row[unknown]
        for column in row:
            users[column].discard(chosen)
        for other in tuple(users[unknown]):
            factor = rows[other].pop(unknown) / row[unknown]
            _take_off(rows[other], row, unknown, factor, other, users)
            if right[chosen]:
                right[other] -= factor * right[chosen]
        users[unknown].clear()
    return determinant * _sign(pivots), _substituted(rows, right, pivots)


def _take_off(
    row: Row, pivot: Row, unknown: int, factor: Fraction, number: int, users: list[set[int]]
) -> None:
    """Subtract factor times the pivot's row, the eliminated unknown left out."""
    for column, value in pivot.items():
        if column == unknown:
            continue
        entry = row.get(column, 0) - factor * value
        if entry:
            row[column] = entry
            users[column].add(number)
        elif column in row:
            del row[column]
            users[column].discard(number)


def _substituted(
    rows: list[Row], right: list[Fraction], pivots: list[tuple[int, int]]
) -> list[Fraction]:
    solution = [Fraction(0)] * len(rows)
    for number, unknown in reversed(pivots):
        row, total = rows[number], right[number]
        for column, value in row.items():
            if column != unknown and solution[column]:
                total -= value * solution[column]
        solution[unknown] = total / row[unknown]
    return solution


def _sign(pivots: list[tuple[int, int]]) -> int:
    """Return the sign of the permutation that takes each row to its unknown."""
    target, seen, sign = dict(pivots), set(), 1
    for start in target:
        at, length = start, 0
        while at not in seen:
            seen.add(at)
            at = target[at]
            length += 1
        if length and length % 2 == 0:
            sign = -sign
    return sign
