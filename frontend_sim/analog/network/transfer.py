"""The transfer functions of a circuit as exact rational functions of s.

The equations M(s) x = sum_w column_w · w are solved at as many rational values of s as the degree
needs, each time transposed,

    M'(s) z = e_output,    H_w(s) = z' column_w,

which gives all inputs at once (the adjoint network; S. W. Director and R. A. Rohrer 1969, from
memory). det M(s) and det M(s) · H_w(s) are polynomials; they are read off exactly from their
values. No rank is ever guessed, so capacitors in parallel or straight across a source, inductors in
series and time constants any number of decades apart need no care.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from frontend_sim.analog.network.elimination import solved
from frontend_sim.analog.network.equations import Equations, most_states
from frontend_sim.analog.network.parts import Circuit
from frontend_sim.analog.network.polynomial import (
    Polynomial,
    added,
    common_factor,
    divided,
    through,
)
from frontend_sim.errors import ModelError


@dataclass(frozen=True)
class Transfer:
    """H_w = numerators[w] / denominator from every input w of a circuit to its output.

    A factor that all of them share is taken out: a state that nothing drives or nothing shows.
    """

    denominator: Polynomial
    numerators: dict[str, Polynomial]


def transfer_of(circuit: Circuit) -> Transfer:
    """Return the exact transfer functions of a circuit.

    Raises
    ------
    ModelError
        If the equations have no unique solution, or a gain grows without bound with frequency.
    """
    degree = most_states(circuit)
    rows: list[tuple[Fraction, dict[str, Fraction]]] = []
    point, singular = 0, 0
    while len(rows) <= degree:
        point += 1
        values = _values(circuit, point)
        if values is not None:
            rows.append(values)
            continue
        # A root that happens to be a whole number is stepped over; the points stay in a row.
        rows, singular = [], singular + 1
        if singular > degree:
            raise ModelError(
                "the circuit has no unique answer: some node is tied to nothing, or two sources "
                "hold the same node"
            )
    first = point - degree
    numerators = {source: through(first, [row[source] for _, row in rows]) for source in rows[0][1]}
    return _reduced(through(first, [determinant for determinant, _ in rows]), numerators)


def _values(circuit: Circuit, point: int) -> tuple[Fraction, dict[str, Fraction]] | None:
    """Return det M(s) and det M(s) · H_w(s) of every input at a whole s; None if singular."""
    equations = Equations.of(circuit, Fraction(point))
    right = [Fraction(0)] * len(equations.transposed)
    right[equations.nodes[circuit.output]] = Fraction(1)
    found = solved(equations.transposed, right)
    if found is None:
        return None
    determinant, adjoint = found
    return determinant, {
        source: determinant * sum((adjoint[i] * part for i, part in column.items()), Fraction(0))
        for source, column in equations.inputs.items()
    }


def _reduced(denominator: Polynomial, numerators: dict[str, Polynomial]) -> Transfer:
    for source, numerator in numerators.items():
        if len(numerator) > len(denominator):
            raise ModelError(
                f"the gain from {source!r} to the output grows without bound with frequency; put "
                "a resistance in series with the capacitance that feeds the amplifier, or give "
                "the amplifier a gain_bandwidth"
            )
    mixed: Polynomial = ()
    for weight, numerator in enumerate(numerators.values(), start=1):
        # A root of the mixture that is a root of the denominator is one of every numerator: the
        # odd weights keep roots of different numerators from meeting by accident.
        mixed = added(mixed, numerator, Fraction(2 * weight + 1, 7 + weight * weight))
    factor = common_factor(denominator, mixed)
    if len(factor) > 1 and all(not divided(row, factor)[1] for row in numerators.values()):
        denominator = divided(denominator, factor)[0]
        numerators = {source: divided(row, factor)[0] for source, row in numerators.items()}
    lead = denominator[-1]
    return Transfer(
        tuple(value / lead for value in denominator),
        {source: tuple(value / lead for value in row) for source, row in numerators.items()},
    )
