"""The change between two rests that overshoot, rise time and delay are measured on."""

from __future__ import annotations

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks.rest import Rest, rest_of
from frontend_sim.measure.checks.subject import Subject

NO_STEP = 1e-9
"""A change below this share of the way between is none."""


def change_of(subject: Subject, point: str | None, after: float | None, what: str) -> Rest:
    """Return the rest that a point comes to after an event, if it then is where it was not before.

    Parameters
    ----------
    point : of the chain; None for the converter's pin
    after : instant of the event [s]; left out, the last one of the run
    what : is to be measured, for messages

    Raises
    ------
    MeasureError
        If the stimulus does not rest, or the point returns to where it was.
    """
    rest = rest_of(subject, point, after)
    if rest is None:
        raise MeasureError(
            f"{what} needs a stimulus that changes and then rests, and a chain that comes to "
            "an end; let after name such an event, or check the level or the headroom"
        )
    if abs(rest.height) <= NO_STEP * _way(rest):
        raise MeasureError(
            "the point returns to where it was before the event, so nothing tells which way "
            f"{what} goes; check the level or the headroom"
        )
    return rest


def _way(rest: Rest) -> float:
    if rest.tail is None:
        return abs(rest.final) + abs(rest.before)
    return max(abs(rest.tail.arrival), abs(rest.tail.departure))
