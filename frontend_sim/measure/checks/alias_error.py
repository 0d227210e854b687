"""Evaluates how much of the codes is folded."""

from __future__ import annotations

from frontend_sim.errors import MeasureError
from frontend_sim.measure.aliasing import Aliasing
from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer, in_volts, scaled
from frontend_sim.measure.checks.places import peaks
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.result import Result
from frontend_sim.scenario.checks.alias_error import AliasErrorCheck


def alias_error(check: AliasErrorCheck, subject: Subject) -> Answer:
    """Return the part of the codes, or of a point at them, that lies above half the rate.

    Raises
    ------
    MeasureError
        If the recording cannot show aliasing, or the run is too long to be split.
    """
    alias_possible(check, subject)
    found = aliasing_in(subject)
    first = subject.first_after(check.after)
    error = found.error(subject.time, check.point)
    volts = error.volts[first:]
    peak, rms = float(max(abs(volts.max()), abs(volts.min()))), float((volts**2).mean() ** 0.5)
    chosen = peak if check.quantity == "peak" else rms
    # Of the root of a mean square the largest uncertainty is a bound too.
    unsure = float(error.unsure[first:].max())
    value, unit = scaled(check.at_most, chosen, subject.adc.lsb, subject.whole)
    uncertainty, _ = scaled(check.at_most, unsure, subject.adc.lsb, subject.whole)
    most = in_volts(check.at_most, subject.adc.lsb, subject.whole)
    beside = (
        Result("alias error, rms", rms / subject.adc.lsb, "LSB", method="; ".join(error.methods)),
        Result("alias error, peak", peak / subject.adc.lsb, "LSB", method="largest size"),
        Result("uncertainty", unsure / subject.adc.lsb, "LSB", method="of the split"),
    )

    def advice() -> str:
        if chosen <= most:
            return words.cannot_be_told(unsure)
        return _advice(found, (value + uncertainty) / float(check.at_most))

    return Answer(
        value,
        unit,
        float(check.at_most),
        "at most",
        f"stimulus above half the rate, through the chain, by superposition{words.known(unsure)}",
        advice,
        beside,
        peaks(check.quantity, subject.time[first:], volts, most - unsure),
        uncertainty,
    )


def alias_possible(check: AliasErrorCheck, subject: Subject) -> None:
    """Refuse a recording whose own rate holds nothing that could fold. Raises MeasureError."""
    found = aliasing_in(subject)
    recorded = [part for part in found.parts if part.reach <= found.half]
    if recorded and not found.possible:
        raise MeasureError(
            f"{found.notes[0]}; add what may arrive there as a term of a sum, or check "
            "alias-attenuation, which needs no signal"
        )


def aliasing_in(subject: Subject) -> Aliasing:
    """Return what folds in a scenario; once for all checks that ask."""
    if "aliasing" not in subject.kept:
        subject.kept["aliasing"] = Aliasing.of(subject.scenario, subject.chain)
    found: Aliasing = subject.kept["aliasing"]
    return found


def _advice(found: Aliasing, excess: float) -> str:
    known = [each for each in found.aliases if each.lsb is not None]
    worst = max(known, key=lambda each: each.lsb or 0.0, default=None)
    what = "lower the corner, raise the order of the filter before the converter, or raise adc.rate"
    if worst is None:
        return f"{what}: the error must fall by a factor of {excess:.3g}"
    where = words.frequency(worst.frequency)
    return (
        f"{what}: the error must fall by a factor of {excess:.3g}, and most of it comes from "
        f"{worst.source!r} at {where}, which lands at {words.frequency(worst.lands)}"
    )
