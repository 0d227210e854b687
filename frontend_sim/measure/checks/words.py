"""Numbers in the sentences that say what to change first."""

from __future__ import annotations

from decimal import ROUND_CEILING, Context

from frontend_sim.quantities import FREQUENCY, TIME, VOLTAGE, Dimension, as_text

DIGITS = 4


def time(value: float) -> str:
    """Return a time with its unit, ``13.1 ms``."""
    return _text(value, TIME)


def wait(value: float) -> str:
    """Return a time that is no shorter than a value, with its unit."""
    context = Context(prec=DIGITS, rounding=ROUND_CEILING)
    return as_text(float(context.create_decimal(repr(value))), TIME)


def frequency(value: float) -> str:
    """Return a frequency with its unit."""
    return _text(value, FREQUENCY)


def voltage(value: float) -> str:
    """Return a voltage with its unit."""
    return _text(value, VOLTAGE)


def known(unsure: float) -> str:
    """Return how far a voltage is known, for its method; nothing where it is exact."""
    return f", known to {voltage(unsure)}" if unsure > 0.0 else ""


def cannot_be_told(unsure: float) -> str:
    """Return the advice where a value lies within its limit by less than it is known [V]."""
    return (
        f"whether it holds cannot be told: the value is known to {voltage(unsure)}, and lies "
        "nearer to its limit; let after leave out the edges of the stimulus, or filter them more"
    )


def percent(factor: float) -> str:
    """Return how much more or less a factor is, ``12 %``; of large ones, ``a factor of 3.5``."""
    if not 0.0 < factor < 2.0:
        return f"a factor of {factor:.3g}"
    share = max(100.0 * abs(factor - 1.0), 0.1)
    return f"{share:.2g} %" if share < 10.0 else f"{share:.0f} %"


def _text(value: float, dimension: Dimension) -> str:
    return as_text(value, dimension, DIGITS)
