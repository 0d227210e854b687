"""What checks must keep together with the rest of a scenario."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence

from frontend_sim.errors import nearest
from frontend_sim.quantities import FREQUENCY, TIME, as_text
from frontend_sim.scenario.checks.alias_attenuation import AliasAttenuationCheck
from frontend_sim.scenario.checks.base import Check, PointCheck
from frontend_sim.scenario.rules import BrokenRule

MEASURED_IN = "V"
"""Limits of checks are voltages, and so are the points that they look at."""


def labels(checks: Sequence[Check]) -> tuple[str, ...]:
    """Return what each check is called: its name, or its kind, with a number if there are several.

    The number counts the checks of this kind that have no name: ``level 1``, ``level 2``.
    """
    kinds = [str(getattr(check, "kind", "check")) for check in checks]
    unnamed = [kind for check, kind in zip(checks, kinds, strict=True) if not check.name]
    several = {kind for kind, count in Counter(unnamed).items() if count > 1}
    seen: Counter[str] = Counter()
    found = []
    for check, kind in zip(checks, kinds, strict=True):
        if not check.name:
            seen[kind] += 1
        numbered = f"{kind} {seen[kind]}" if kind in several else kind
        found.append(check.name or numbered)
    return tuple(found)


def check_faults(
    checks: Sequence[Check], points: Sequence[str], units: Sequence[str], rate: float
) -> Iterator[BrokenRule]:
    """Return what is wrong with checks in front of a chain and a converter.

    Parameters
    ----------
    points, units : of the chain, names and SI units
    rate : of the conversions [Hz]
    """
    taken: set[str] = set()
    for position, (check, label) in enumerate(zip(checks, labels(checks), strict=True)):
        if not label.isprintable():
            yield ("check", position, "name"), "the name must be one line of text"
        if label in taken:
            yield (
                ("check", position, "name" if check.name else "kind"),
                f"the name {label!r} is taken by a check before; give every check a name of its "
                "own, or none",
            )
        taken.add(label)
        if isinstance(check, PointCheck) and check.point is not None:
            text = _point_fault(check.point, points, units)
            if text:
                yield ("check", position, "point"), text
        if isinstance(check, AliasAttenuationCheck):
            for key, text in _alias_faults(check, rate):
                yield ("check", position, key), text


def instant_faults(checks: Sequence[Check], duration: float) -> Iterator[BrokenRule]:
    """Return which checks ask for what lies beyond the end of the run.

    Parameters
    ----------
    duration : of the run [s]
    """
    for position, check in enumerate(checks):
        found = check.latest()
        if found is not None and not found[1] <= duration:
            yield ("check", position, found[0]), beyond_end(found[0], found[1], duration)


def beyond_end(key: str, instant: float, duration: float) -> str:
    """Return the message for a key that asks for an instant beyond the end of the run [s]."""
    return (
        f"{key} leads to t = {as_text(instant, TIME, 6)}, but the run ends at "
        f"{as_text(duration, TIME, 6)}; lengthen simulation.duration, or ask for an earlier instant"
    )


def _point_fault(point: str, points: Sequence[str], units: Sequence[str]) -> str:
    if point not in points:
        return f"the chain has no point {point!r}{nearest(point, points)}"
    unit = units[list(points).index(point)]
    if unit == MEASURED_IN:
        return ""
    return (
        f"the point {point!r} is measured in {unit or '1'}, and checks are made on voltages; name "
        "a point behind the sensor, or leave point out for the converter's pin"
    )


def _alias_faults(check: AliasAttenuationCheck, rate: float) -> Iterator[tuple[str, str]]:
    half = as_text(0.5 * rate, FREQUENCY, 6)
    if check.band is not None and check.band > 0.5 * rate:
        given = as_text(check.band, FREQUENCY, 6)
        yield "band", f"band {given} lies above half the conversion rate, {half}, and folds itself"
    if check.frequency is not None and not check.frequency > 0.5 * rate:
        given = as_text(check.frequency, FREQUENCY, 6)
        yield (
            "frequency",
            f"frequency {given} lies below half the conversion rate, {half}, and does not fold; "
            'take a check of kind = "rejection" for it',
        )
