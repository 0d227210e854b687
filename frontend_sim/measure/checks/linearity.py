"""Evaluates INL and DNL by counting the codes of the run."""

from __future__ import annotations

from typing import Any

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.linearity import Linearity, ramp_linearity, sine_linearity
from frontend_sim.measure.linearity.by_sine import RANDOM
from frontend_sim.measure.linearity.confidence import deviate
from frontend_sim.measure.result import Result
from frontend_sim.scenario.checks.dnl import DnlCheck
from frontend_sim.scenario.checks.inl import InlCheck, LinearityCheck

KNOWN = {"sine": "sine", "ramp": "ramp"}
"""Stimuli that say by themselves how their codes are counted."""

SOURCES = {
    "sine": "Doernberg, Lee and Hodges 1984",
    "ramp": "IEEE 1241, ramp histogram, from memory",
}


def inl(check: InlCheck, subject: Subject) -> Answer:
    """Return the largest distance of a code level from the line, to either side.

    Raises
    ------
    MeasureError
        If the codes are too few, or clip nowhere near enough of the range.
    """
    found = linearity_in(check, subject)
    end_point = check.line == "end-point"
    row = found.inl_end_point if end_point else found.inl_best_fit
    by, first = method_of(check, subject), int(found.codes[0]) - 1
    # All levels at once are known to 1.63 / sqrt(N), each to z sqrt(1/4 / N) at the most.
    together = RANDOM / (0.5 * deviate(found.confidence))
    return _answer(check, by, found, np.abs(row), found.inl_confidence, first, together)


def dnl(check: DnlCheck, subject: Subject) -> Answer:
    """Return the largest distance of a code's width from one LSB. Raises as ``inl``."""
    found = linearity_in(check, subject)
    by, first = method_of(check, subject), int(found.codes[0])
    alone = 1.0 - (1.0 - found.confidence) / len(found.dnl)
    together = deviate(alone) / deviate(found.confidence)
    return _answer(check, by, found, np.abs(found.dnl), found.dnl_confidence, first, together)


def linearity_possible(check: LinearityCheck, subject: Subject) -> None:
    """Refuse a stimulus that does not say how its codes are counted. Raises MeasureError."""
    method_of(check, subject)


def method_of(check: LinearityCheck, subject: Subject) -> str:
    """Return "sine" or "ramp": as the check says, or else as the stimulus is."""
    kind = str(getattr(subject.scenario.stimulus, "kind", ""))
    found = check.by or KNOWN.get(kind)
    if found is None:
        raise MeasureError(
            f"a stimulus of kind {kind!r} does not say how its codes are counted; set by to "
            '"sine" or "ramp", or take a sine or a ramp over the whole range'
        )
    return found


def linearity_in(check: LinearityCheck, subject: Subject) -> Linearity:
    """Return the linearity of the codes from an instant on; once for all checks that ask alike."""
    by = method_of(check, subject)
    key = ("linearity", by, check.after)
    if key not in subject.kept:
        adc: Any = subject.adc
        first, held = subject.first_after(check.after), subject.held
        codes, analog = subject.codes[first:], held if len(held) else subject.pin
        subject.kept[key] = (
            sine_linearity(codes, adc, values=analog[first:])
            if by == "sine"
            else ramp_linearity(codes, adc)
        )
    found: Linearity = subject.kept[key]
    return found


def _answer(
    check: InlCheck | DnlCheck,
    by: str,
    found: Linearity,
    sizes: Real,
    halves: Real,
    first: int,
    together: float,
) -> Answer:
    """Return the largest size against its limit.

    What the samples leave open counts against the check, of every code: one that is not the
    furthest off may be the one that is known the least. The converter is blamed only where a code
    lies beyond the limit by half an interval that holds all codes at once: of 256 the furthest is
    beyond its own of 99 % by chance more often than not.

    Parameters
    ----------
    sizes, halves : of each code, and half of its interval, shape (K,) [LSB];  first : its number
    together : how many times as wide the intervals are that hold all codes at once
    """
    worst = int(np.argmax(sizes))
    value, half, where = float(sizes[worst]), float(halves[worst]), first + worst
    unsure = float(np.max(sizes + halves)) - value
    surely = float(np.max(sizes - together * halves))
    interval = f"half the {100 * found.confidence:g} % interval"
    beside = (
        Result("confidence", half, "LSB", method=interval),
        Result("at code", float(where), "counts", method="where it is largest"),
        Result("missing codes", float(len(found.missing)), "codes", method="never seen between"),
        Result("codes beyond", float(found.below + found.above), "codes", method="never reached"),
    )  # fmt: skip

    def advice() -> str:
        if surely <= check.at_most:
            apart = ", of a frequency that no small ratio ties to it" if by == "sine" else ""
            known = unsure if value <= check.at_most else value - surely
            return (
                f"whether it holds cannot be told: {found.count} samples let it be known to "
                f"{known:.2g} LSB, and it lies nearer to its limit; take more samples: a longer "
                f"run, or a higher adc.rate{apart}"
            )
        return (
            f"take a more linear converter, or correct the codes by a table: code {where} is the "
            f"furthest off, known to ± {half:.2g} LSB"
        )

    method = f"counting the codes of a {by}; {SOURCES[by]}"
    return Answer(
        value, "LSB", check.at_most, "at most", method, advice, beside, uncertainty=unsure
    )
