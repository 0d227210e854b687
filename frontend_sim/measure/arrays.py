"""The arrays that measures read: checked once, at the door."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from frontend_sim.errors import MeasureError
from frontend_sim.quantities.counting import counted

Real = NDArray[np.float64]
Codes = NDArray[np.int64]

LARGEST = 1e30
"""Numbers from here on, in SI units, are a fault and no measurement; their powers overflow."""

SMALLEST = 1e-30
"""Numbers below are zero; nothing that is measured is so small."""

LARGEST_CODE = 2.0**32
"""No code of a converter of 32 bits lies beyond."""


def samples(values: ArrayLike, least: int = 1, what: str = "record") -> Real:
    """Return samples as an array of floats, shape (N,), those below ``SMALLEST`` as zero.

    Parameters
    ----------
    values : shape (N,), any unit
    least : fewest samples that the measure can work with
    what : name of the array in messages

    Raises
    ------
    MeasureError
        If they are not one row of finite real numbers, or too few.
    """
    row = _one_row(values, what).astype(np.float64)
    _long_enough(row, least, what)
    bad = np.flatnonzero(~(np.abs(row) < LARGEST))
    if len(bad):
        raise MeasureError(
            f"sample {bad[0]} of the {what} is {row[bad[0]]:g}, the first of {len(bad)} that are "
            f"not numbers below {LARGEST:g}; cut the record there, or fill the gap first"
        )
    row[np.abs(row) < SMALLEST] = 0.0
    return row


def codes_of(values: ArrayLike, least: int = 1, what: str = "record of codes") -> Codes:
    """Return codes as an array of integers, shape (N,) [counts].

    Raises
    ------
    MeasureError
        If they are not one row of whole numbers, or too few.
    """
    given = _one_row(values, what)
    row = samples(given, least, what)
    if np.any(np.abs(row) > LARGEST_CODE):
        raise MeasureError(
            f"codes of the {what} reach {np.max(np.abs(row)):g}, more than {LARGEST_CODE:g}; no "
            "converter gives them"
        )
    whole = given.astype(np.int64)
    if given.dtype.kind == "f":
        broken = np.flatnonzero(whole != row)
        if len(broken):
            first = int(broken[0])
            raise MeasureError(
                f"sample {first} of the {what} is {float(row[first])!r}, but codes are whole "
                "numbers; give the codes themselves, not the voltages read back from them"
            )
    return whole


def increasing(times: ArrayLike, count: int) -> Real:
    """Return the instants of ``count`` samples, shape (count,) [s].

    Raises
    ------
    MeasureError
        If there are more or fewer of them, or if they do not increase.
    """
    row = samples(times, 0, "row of instants")
    if len(row) != count:
        needs = counted(count, "sample needs", "samples need")
        raise MeasureError(f"{needs} as many instants; given are {len(row)}")
    back = np.flatnonzero(np.diff(row) <= 0.0)
    if len(back):
        first = int(back[0])
        raise MeasureError(
            f"instants must increase, but number {first + 1} at {row[first + 1]:g} s follows "
            f"number {first} at {row[first]:g} s; sort them, and keep one of equal ones"
        )
    return row


def positive(value: float, name: str, unit: str) -> float:
    """Return a value that must lie above zero, between ``SMALLEST`` and ``LARGEST``.

    Raises
    ------
    MeasureError
        If it does not.
    """
    if not (isinstance(value, (int, float, np.number)) and SMALLEST <= value < LARGEST):
        raise MeasureError(
            f"{name} must be a number above zero and below {LARGEST:g}, but {value!r} {unit} was "
            "given"
        )
    return float(value)


def finite(value: float, name: str) -> float:
    """Return a value of any sign below ``LARGEST``, below ``SMALLEST`` zero.

    Raises
    ------
    MeasureError
        If it is not.
    """
    if not (isinstance(value, (int, float, np.number)) and abs(value) < LARGEST):
        raise MeasureError(f"{name} must be a number below {LARGEST:g}, but {value!r} was given")
    return float(value) if abs(value) >= SMALLEST else 0.0


def share(value: float, name: str) -> float:
    """Return a value that must lie strictly between 0 and 1. Raises MeasureError if not."""
    if not (isinstance(value, (int, float, np.number)) and 0.0 < value < 1.0):
        raise MeasureError(f"{name} must lie between 0 and 1, but {value!r} was given")
    return float(value)


def _one_row(values: ArrayLike, what: str) -> NDArray[Any]:
    try:
        given = np.asarray(values)
    except ValueError:
        # NumPy refuses rows of unequal length.
        raise MeasureError(f"the {what} must be one row of real numbers") from None
    if given.dtype.kind not in "iubf" and given.size:
        raise MeasureError(f"the {what} must hold real numbers, but it holds {given.dtype}")
    if given.ndim != 1:
        raise MeasureError(
            f"the {what} must be one row of numbers, but its shape is {given.shape}; "
            "measure each channel by itself"
        )
    return given


def _long_enough(row: NDArray[Any], least: int, what: str) -> None:
    if len(row) < least:
        raise MeasureError(
            f"the {what} has {counted(len(row), 'sample')}, this measure needs at least {least}; "
            "record longer"
        )
