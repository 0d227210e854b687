"""A circuit with one of its amplifiers cut open: what drives the loop, and what comes back."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from frontend_sim.analog.block import Real
from frontend_sim.analog.network.parts import SIGNAL, Amplifier, Circuit, Held, OpenLoop
from frontend_sim.analog.network.realization import input_columns, state_matrix
from frontend_sim.analog.network.roots import roots_of
from frontend_sim.analog.network.transfer import transfer_of
from frontend_sim.errors import ModelError

DRIVE = "held output of the amplifier"
"""Input of an opened circuit: the voltage that the amplifier would drive its node with."""

_PROBE = "difference of the amplifier's inputs"


@dataclass(frozen=True, eq=False)
class Way:
    """From the signal u and the drive w to one voltage, x' = a x + b_u u + b_w w,

        c x + d_u u + d_w w.

    Parameters
    ----------
    a : shape (n, n) [1/s];  b : columns of u and w, shape (n, 2);  c : shape (n,)
    d : d_u and d_w, shape (2,)
    """

    a: Real
    b: Real
    c: Real
    d: Real


@dataclass(frozen=True, eq=False)
class Opened:
    """What an amplifier's circuit makes of the signal and of the voltage that drives it.

    Parameters
    ----------
    difference : the way to the difference of the amplifier's inputs
    output : the way to the circuit's output; None where that is what the amplifier drives
    drive : name of the node that the amplifier drives
    """

    difference: Way
    output: Way | None
    drive: str


@lru_cache(maxsize=128)
def opened(circuit: Circuit, name: str) -> Opened:
    """Cut a circuit open at the output of an amplifier; other amplifiers stay as they are.

    Raises
    ------
    ModelError
        If what is left has no unique answer, or would not come to rest by itself.
    """
    amplifier = next(
        part for part in circuit.parts if isinstance(part, Amplifier) and part.name == name
    )
    rest = tuple(part for part in circuit.parts if part is not amplifier)
    probe = Amplifier(name, amplifier.senses, _PROBE, OpenLoop(open_loop_gain=1.0))
    parts = (*rest, Held(amplifier.output, DRIVE), probe)
    output = None
    if amplifier.output != circuit.output:
        output = _way(Circuit(parts, circuit.output))
    return Opened(_way(Circuit(parts, _PROBE)), output, amplifier.output)


def _way(circuit: Circuit) -> Way:
    transfer = transfer_of(circuit)
    poles = roots_of(transfer.denominator)
    slow = [pole for pole in poles if pole.real >= 0.0]
    if slow:
        raise ModelError(
            "while the output of the amplifier is held, the circuit around it does not come to "
            f"rest: it has a pole at {slow[0].real:.4g} rad/s; leave slew_rate and rails out"
        )
    a, c = state_matrix(poles)
    columns = input_columns(poles, {key: transfer.numerators[key] for key in (SIGNAL, DRIVE)})
    (signal, through), (drive, back) = columns[SIGNAL], columns[DRIVE]
    return Way(a, np.column_stack([signal, drive]), c, np.array([through, back]))
