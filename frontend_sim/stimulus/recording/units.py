"""The units of a recording: those asked for, or else those that the file states."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import dataclass

from frontend_sim.errors import QuantityError
from frontend_sim.quantities import SIGNALS, TIME, Dimension, parse, signal_dimension
from frontend_sim.quantities.units import noun_of
from frontend_sim.stimulus.recording.series import Series


@dataclass(frozen=True)
class Factor:
    """From numbers of the file to SI, number · value + zero, and what to tell about it."""

    value: float
    zero: float = 0.0
    notes: tuple[str, ...] = ()


def factor_of(unit: str, dimension: Dimension, name: str = "") -> float:
    """Return how many SI units one ``unit`` is.

    Parameters
    ----------
    name : of what has the dimension, for the message; left out, that of the dimension

    Raises QuantityError if it is no unit of the dimension.
    """
    if unit == dimension.unit:
        return 1.0
    try:
        return parse(f"1 {unit}", dimension)
    except QuantityError:
        likely = {"V": "mV", "s": "ms", "K": "degC"}.get(dimension.unit, dimension.unit)
        raise QuantityError(
            f"given {unit!r}, which is not a unit of {name or dimension.name}; expected for "
            f"instance {likely or '%'}"
        ) from None


def signal_factor_of(unit: str, signal: str) -> tuple[float, float]:
    """Return size and zero, both in SI, of a unit for a signal.

    Parameters
    ----------
    unit : of the numbers, ``degC``
    signal : SI unit of the signal, ``K``

    Raises QuantityError if it is no unit of the signal.
    """
    dimension = SIGNALS[signal]
    size = factor_of(unit, signal_dimension(signal, "difference"), dimension.name)
    return size, parse(f"0 {unit}", dimension) if dimension.absolute else 0.0


def time_factor(series: Series, unit: str | None) -> Factor:
    """Return seconds in one unit of the time column.

    Raises QuantityError if the file gives the unit of another quantity, and nobody said otherwise.
    """
    if unit is not None:
        return Factor(factor_of(unit, TIME))
    if not series.unit or series.absolute:
        return Factor(1.0)
    try:
        value = factor_of(series.unit, TIME)
    except QuantityError:
        if _is_quantity(series.unit):
            raise QuantityError(
                f'{_no_unit(series, TIME)}; give time_unit, "s" if its numbers are in s all the '
                "same"
            ) from None
        return Factor(1.0, notes=(f"{_no_unit(series, TIME)}; its numbers are taken in s",))
    return Factor(value, notes=_told(series, value))


def signal_factor(series: Series, unit: str | None, signal: str, scale: float = 1.0) -> Factor:
    """Return how numbers of the signal become SI.

    Parameters
    ----------
    unit : that was asked for, or None
    signal : SI unit of the signal
    scale : that was asked for; other than 1, it says what the file's own numbers are worth

    Raises QuantityError if the file gives the unit of another quantity, and nobody said what of it.
    """
    if unit is not None:
        return Factor(*signal_factor_of(unit, signal))
    if not series.unit or series.absolute:
        return Factor(1.0)
    try:
        value, zero = signal_factor_of(series.unit, signal)
    except QuantityError:
        if scale == 1.0 and _is_quantity(series.unit):
            one = signal or "%"
            raise QuantityError(
                f'{_no_unit(series, SIGNALS[signal])}; give unit, "{one}" if its numbers are in '
                f"{one} all the same, or scale, which says what 1 {series.unit} is"
            ) from None
        taken = f"its numbers are taken in {signal or 'shares of 1'} after scale"
        return Factor(1.0, notes=(f"{_no_unit(series, SIGNALS[signal])}; {taken}",))
    return Factor(value, zero, _told(series, value if zero == 0.0 else 0.0))


def _is_quantity(unit: str) -> bool:
    """Return whether a unit is known, so that numbers in it are no bare counts."""
    if noun_of(unit):
        return True
    for signal in SIGNALS:
        with suppress(QuantityError):
            signal_factor_of(unit, signal)
            return True
    return False


def _no_unit(series: Series, dimension: Dimension) -> str:
    return f"{series.label}: the file gives the unit {series.unit!r}, which is no {dimension.name}"


def _told(series: Series, value: float) -> tuple[str, ...]:
    return () if value == 1.0 else (f"{series.label}: read in {series.unit}, as the file says",)
