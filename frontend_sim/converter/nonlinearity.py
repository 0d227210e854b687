"""How the changes of code lie off the straight line: integral and differential nonlinearity."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Annotated, Literal, Self

import numpy as np
from numpy.typing import NDArray
from pydantic import AfterValidator, Field, ValidationInfo, model_validator

from frontend_sim.converter.bends import bend, largest_peak, unbent
from frontend_sim.converter.capacitor_array import bit_weights, found_levels, trial_levels
from frontend_sim.converter.code_table import read_code_table
from frontend_sim.errors import ScenarioError
from frontend_sim.quantities import FRACTION, LSB, Bounds, Reads
from frontend_sim.quantities.counting import counted
from frontend_sim.values import Value

Real = NDArray[np.float64]

MOST_LEVELS_BITS = 20
"""Most bits for which a level is kept for every code."""


def _absolute(value: Path, info: ValidationInfo) -> Path:
    """Make a path absolute, from the folder of the scenario."""
    folder = (info.context or {}).get("directory")
    return Path(os.path.abspath(Path(folder, value) if folder is not None else value))


Lsb = Annotated[float, Reads(LSB, Bounds())]
Mismatch = Annotated[float, Reads(FRACTION, Bounds(least=0.0, most=0.1))]


class Nonlinearity(Value):
    """Static nonlinearity: all that is given adds up, in LSB, at every change of code.

    level[code] = code + shape + table + capacitors; a search by successive approximation then
    finds its codes, so levels never fall and codes can be missing.
    """

    shape: Literal["bow", "s-shape"] | None = Field(
        default=None, description="smooth curve, zero at both ends of the range"
    )
    peak: Lsb = Field(
        default=0.0,
        description="largest deviation of the shape; of an s-shape, in the upper half",
    )
    table: Annotated[Path, AfterValidator(_absolute)] | None = Field(
        default=None,
        description="file with one number for every code: .csv .tsv .txt .npy, relative to the "
        "scenario",
    )
    table_holds: Literal["inl", "dnl"] = Field(
        default="inl",
        description="inl: how far the change to a code lies off, in LSB; dnl: how much wider than "
        "an LSB a code is, in LSB",
    )
    capacitor_mismatch: Mismatch = Field(
        default=0.0,
        description="relative standard deviation of one unit capacitor in the binary-weighted "
        "array of a successive-approximation converter; drawn from the seed",
    )

    @model_validator(mode="after")
    def _says_something(self) -> Self:
        if self.shape is None and self.peak != 0.0:
            raise ValueError('peak needs a shape; add for instance shape = "bow"')
        if self.shape is not None and self.peak == 0.0:
            raise ValueError('shape needs a peak; add for instance peak = "2 LSB"')
        if self.table is None and self.table_holds != "inl":
            raise ValueError("table_holds says what a table holds; add table, or take it out")
        if not (self.shape or self.table or self.capacitor_mismatch):
            raise ValueError("nothing is given; give shape and peak, table, or capacitor_mismatch")
        return self

    @property
    def needs_levels(self) -> bool:
        """Whether every code has a deviation of its own."""
        return self.table is not None or self.capacitor_mismatch > 0.0

    def refuse_bits(self, bits: int) -> None:
        """Raise ValueError if a converter of so many bits cannot have these deviations."""
        if self.needs_levels and bits > MOST_LEVELS_BITS:
            key = "table" if self.table is not None else "capacitor_mismatch"
            raise ValueError(
                f"nonlinearity.{key} gives every code a level of its own, which is possible up to "
                f"{MOST_LEVELS_BITS} bits, not for {bits}; take a shape with a peak instead"
            )
        if self.shape is not None and not abs(self.peak) < largest_peak(self.shape, bits):
            raise ValueError(
                f"nonlinearity.peak of {self.peak:g} LSB folds the {self.shape} back on itself; at "
                f"{bits} bits it must be below {largest_peak(self.shape, bits):.4g} LSB"
            )

    def levels(self, bits: int, seed: int) -> Real:
        """Return where the code changes to 1, 2, ..., 2^bits - 1, shape (2^bits - 1,) [LSB].

        The straight line is level[code] = code. The capacitors depend on the seed alone.

        Raises
        ------
        ScenarioError
            If the table cannot be read or does not fit the converter.
        """
        codes = np.arange(2.0**bits)
        trial = codes.copy()
        if self.capacitor_mismatch > 0.0:
            trial = trial_levels(bit_weights(bits, self.capacitor_mismatch, seed))
        if self.shape is not None:
            trial += bend(self.shape, self.peak, bits, codes)
        if self.table is not None:
            trial[1:] += table_deviations(self.table, self.table_holds, bits)
        return found_levels(trial)

    def straightened(self, bits: int, position: Real) -> Real:
        """Return where on the straight line a position with the shape's bend is, of its shape.

        The code at a position is the whole part of the result. For converters of so many bits that
        no level of every code is kept; they have no other nonlinearity than a shape.

        Parameters
        ----------
        position : from the lower end of the range [LSB]
        """
        return position if self.shape is None else unbent(self.shape, self.peak, bits, position)


def table_deviations(file: Path, holds: Literal["inl", "dnl"], bits: int) -> Real:
    """Return the deviations of the changes to codes 1 to 2^bits - 1 that a table tells [LSB].

    A table of INL has one number for every change, or for every code, where that of the first is
    ignored. A table of DNL has one for every code, or for all but the first and the last, which
    have no width; the change to code 1 stays where it is.

    Raises
    ------
    ScenarioError
        If the table has another length, or a level would lie below the one before.
    """
    count, numbers = 1 << bits, read_code_table(file)
    shorter = count - 1 if holds == "inl" else count - 2
    if len(numbers) not in (count, shorter):
        raise ScenarioError(
            f"{file}: has {counted(len(numbers), 'number')}; a table of {holds.upper()} for {bits} "
            f"bits has {count}, one for every code, or {shorter}, "
            + ("one for every change of code" if holds == "inl" else "without the two end codes")
        )
    if holds == "inl":
        numbers = numbers[-(count - 1) :]
    else:
        widths = numbers if len(numbers) == shorter else numbers[1:-1]
        numbers = np.concatenate([np.zeros(1), np.cumsum(widths)])
    narrow = np.flatnonzero(np.diff(numbers) < -1.0 - 1e-9)
    if len(narrow):
        code = int(narrow[0]) + 1
        raise ScenarioError(
            f"{file}: the levels are not monotonic: code {code}, counted from 0, would have a "
            f"width of {1.0 + numbers[code] - numbers[code - 1]:.3g} LSB; "
            "a missing code has 0 LSB, a DNL of -1"
        )
    return numbers
