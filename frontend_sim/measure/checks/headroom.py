"""Evaluates the room between the signal and the ends of the range."""

from __future__ import annotations

import numpy as np

from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer, in_volts, scaled
from frontend_sim.measure.checks.places import beyond
from frontend_sim.measure.checks.subject import Real, Subject
from frontend_sim.scenario.checks.headroom import HeadroomCheck

NEAR = 1e-3
"""A shift by less than this share of what the pin may go through is none."""
ROUNDING = 1e-12
"""A pin this share of the range's ends from where it may just be is there."""


def headroom(check: HeadroomCheck, subject: Subject) -> Answer:
    """Return the least distance of the pin from an end of the range, below zero beyond it."""
    first = subject.first_after(check.after)
    adc, pin = subject.adc, subject.pin[first:]
    room = min(adc.high - float(np.max(pin)), float(np.min(pin)) - adc.low)
    needed = in_volts(check.at_least, adc.lsb, subject.whole)
    if abs(room - needed) <= ROUNDING * max(abs(adc.low), abs(adc.high)):
        room = needed
    value, unit = scaled(check.at_least, room, adc.lsb, subject.whole)

    def where() -> Real:
        return beyond(subject.time[first:], needed - np.minimum(adc.high - pin, pin - adc.low))

    return Answer(
        value,
        unit,
        float(check.at_least),
        "at least",
        "the exact pin at the conversions",
        lambda: advice(subject, pin, needed),
        where=where,
    )


def advice(subject: Subject, pin: Real, room: float) -> str:
    """Return how to bring a signal into the range, with some room to its ends.

    Parameters
    ----------
    pin : shape (K,) [V]
    room : wanted distance from the ends [V]
    """
    adc = subject.adc
    highest, lowest = float(np.max(pin)), float(np.min(pin))
    reach, width = highest - lowest, subject.whole - 2.0 * room
    over = max(highest - (adc.high - room), 0.0)
    under = max(adc.low + room - lowest, 0.0)
    if reach > width and width > 0.0:
        shift = adc.low + room - lowest * width / reach  # what is left to do with the lower gain
        then = ""
        if abs(shift) > NEAR * width:
            way = "up" if shift > 0.0 else "down"
            then = f" and shift the level {way} by {words.voltage(abs(shift))}"
        return (
            f"lower the gain by {words.percent(width / reach)}{then}: the pin goes from "
            f"{words.voltage(lowest)} to {words.voltage(highest)}, over "
            f"{words.voltage(reach)} of the {words.voltage(width)} that it may"
        )
    if over > 0.0 or under > 0.0:
        way, by = ("down", over) if over >= under else ("up", under)
        return (
            f"shift the level {way} by {words.voltage(by)}, or lower the gain: the pin goes from "
            f"{words.voltage(lowest)} to {words.voltage(highest)}"
        )
    return (
        "lower noise, offset or gain error of the converter: the pin itself stays within the range"
    )
