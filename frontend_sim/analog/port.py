"""The output of a stage as a load sees it: an open-circuit voltage behind an impedance."""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Self

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.network import Circuit, Injected
from frontend_sim.analog.network.polynomial import (
    Polynomial,
    added,
    common_factor,
    divided,
    polynomial,
)
from frontend_sim.analog.network.realization import input_columns, state_matrix
from frontend_sim.analog.network.roots import roots_of
from frontend_sim.analog.network.transfer import transfer_of
from frontend_sim.errors import ModelError

_LOAD = "current into the load"


@dataclass(frozen=True)
class OutputImpedance:
    """Z(s) = numerator / denominator [ohm], exact, in lowest terms; zero for an ideal source."""

    numerator: Polynomial = ()
    denominator: Polynomial = (Fraction(1),)

    @classmethod
    def of(cls, circuit: Circuit | None) -> Self:
        """Return the impedance at a circuit's output with its sources at rest.

        Source: L. Thevenin 1883; modified nodal analysis as in ``network``.

        Raises
        ------
        ModelError
            If it grows without bound with frequency, as that of an inductance in series does.
        """
        if circuit is None:
            return cls()
        loaded = replace(circuit, parts=(*circuit.parts, Injected(circuit.output, _LOAD)))
        try:
            transfer = transfer_of(loaded)
        except ModelError as error:
            if "grows without bound" not in str(error):
                raise
            raise ModelError(
                "the last stage ends in an inductance, or in an amplifier whose output impedance "
                "grows without bound with frequency, straight at the converter's input network; "
                "give the stage a capacitance or a resistance to ground at its output"
            ) from None
        top = transfer.numerators.get(_LOAD, ())
        if not top:
            return cls()
        factor = common_factor(transfer.denominator, top)
        return cls(divided(top, factor)[0], divided(transfer.denominator, factor)[0])


@dataclass(frozen=True, eq=False)
class Port:
    """The voltage p at a node behind an impedance, from the open-circuit voltage v of the source
    and the current i that is drawn from the node,

        dx/dt = a x + b v - kick i,    p = c x + d v - series i.

    Parameters
    ----------
    a : shape (n, n) [1/s];  c : shape (n,) [1]
    b : shape (n,) [1/s];  d : [1]
    kick : shape (n,) [V/(A s)];  series : [ohm]
    """

    a: Real
    b: Real
    kick: Real
    c: Real
    d: float
    series: float

    @classmethod
    def of(cls, impedance: OutputImpedance, resistance: float, capacitance: float) -> Self:
        """Return the port behind an impedance Z and a resistance R, with a capacitance C to ground,

            p = (v - (Z + R) i) / (1 + s C (Z + R)).

        Both ways share the poles, which come from the exact polynomial.

        Parameters
        ----------
        resistance : R [ohm];  capacitance : C [F]; both at least 0
        """
        bottom = impedance.denominator
        behind = added(impedance.numerator, bottom, Fraction(resistance))
        charged = polynomial([Fraction(0), *behind])
        whole = added(bottom, charged, Fraction(capacitance))
        lead = whole[-1]
        poles = roots_of(tuple(value / lead for value in whole))
        if any(pole.real > 0.0 for pole in poles):
            raise ModelError(
                "the last stage is unstable with the converter's pin_capacitance at its output; "
                "put adc.input.source_resistance between them"
            )
        a, c = state_matrix(poles)
        rows = {"v": bottom, "i": behind}
        columns = input_columns(
            poles, {name: tuple(value / lead for value in row) for name, row in rows.items()}
        )
        (b, d), (kick, series) = columns["v"], columns["i"]
        return cls(a, np.asarray(b, float), np.asarray(kick, float), c, d, series)

    @property
    def order(self) -> int:
        """Number of states."""
        return len(self.b)
