"""Rules that several values of a scenario must keep together, and how a broken one is told."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

from pydantic_core import InitErrorDetails, PydanticCustomError, ValidationError

from frontend_sim.converter import AnyAdc
from frontend_sim.quantities import FREQUENCY, TIME, as_text, shown

Path = tuple[str | int, ...]
"""Keys and positions (from 0) on the way from the top of a scenario to a value."""

BrokenRule = tuple[Path, str]
"""Path from the top of a scenario, and the whole message."""

MOST_CONVERSIONS = 10**12
"""More conversions than this are a slip of the pen; an array of their codes takes 8 TB."""

MOST_POINTS = 10**10
"""More points of a waveform or a grid than this are one, too; a waveform of them takes 80 GB."""


def fault(path: Sequence[str | int], text: str) -> PydanticCustomError:
    """Return the error of a rule between keys, for a validator to raise.

    Parameters
    ----------
    path : of the key at fault, seen from the value whose validator raises
    text : the whole message
    """
    return PydanticCustomError("rule", "{reason}", {"reason": text, "path": list(path)})


def faults(title: str, told: Sequence[tuple[Sequence[str | int], str]]) -> ValidationError:
    """Return the error of several rules at once, for a validator to raise.

    Parameters
    ----------
    title : name of the value whose validator raises
    told : path and whole message of each, as for ``fault``
    """
    return ValidationError.from_exception_data(
        title,
        [InitErrorDetails(type=fault(path, text), loc=(), input=None) for path, text in told],
    )


def newer_format(known: int) -> Callable[[object], object]:
    """Return a validator that tells a file of a newer format apart from a wrong number."""

    def check(value: object) -> object:
        if isinstance(value, bool) or not isinstance(value, int) or value < 1:
            raise fault([], f"given {shown(value)}; expected the number {known}")
        if value > known:
            raise fault(
                [],
                f"the file is written for a newer version: its format is {value}, and this "
                f"frontend-sim reads format {known}; install a newer frontend-sim",
            )
        return value

    return check


def conversions_fault(adc: AnyAdc, duration: float) -> str | None:
    """Return what is wrong with the number of conversions in [0, duration), or None.

    Parameters
    ----------
    duration [s]
    """
    rate, key = adc.pattern.look_rate, "rate" if adc.kind == "sampling" else "modulator_rate"
    if duration * rate > MOST_CONVERSIONS:
        return (
            f"{as_text(duration, TIME, 6)} at {as_text(rate, FREQUENCY, 6)} are "
            f"{duration * rate:.3g} conversions, more than {MOST_CONVERSIONS:.0e}; shorten "
            f"simulation.duration, or lower adc.{key}"
        )
    if adc.code_count(duration) < 1:
        return (
            "no conversion falls into the run: the first is done at "
            f"{as_text(adc.code_instant(0), TIME, 6)} (adc.first, and what it takes from there "
            f"on), and the run ends at {as_text(duration, TIME, 6)}; lengthen simulation.duration, "
            "or lower adc.first"
        )
    return None


def points_fault(duration: float, rates: Mapping[str, float | None]) -> str | None:
    """Return what is wrong with the number of points in [0, duration), or None.

    Parameters
    ----------
    duration [s]
    rates : key of the scenario -> points per second, None where there are none [Hz]
    """
    for key, rate in rates.items():
        if rate is not None and duration * rate > MOST_POINTS:
            return (
                f"{as_text(duration, TIME, 6)} at a {key} of {as_text(rate, FREQUENCY, 6)} are "
                f"{duration * rate:.3g} points, more than {MOST_POINTS:.0e}; shorten "
                f"simulation.duration, or lower simulation.{key}"
            )
    return None
