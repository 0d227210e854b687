"""Derivatives by central differences, each verified by a second step."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

STEPS = (1e-3, 1e-2, 5e-2)
"""Relative steps that are tried in turn; each with one twice as large."""

AGREEMENT = 0.02
"""Two steps whose differences agree to this share of the derivative resolve it."""

NOTHING = 1e-6
"""A change of the parameter by its own size that moves a value by less than this share of the
value's size moves it by nothing."""

LARGEST_FOR_NOTHING = 1e-2
"""A parameter without effect is changed by this step and by twice as much, not by more."""

Values = Sequence[float | None]


@dataclass(frozen=True)
class Slope:
    """The derivative of a value by the logarithm of a parameter: value per relative change.

    Parameters
    ----------
    value : dv / d(ln p), in the unit of v; None where it is not resolved
    error : estimated error, in the same unit
    step : relative step that it was taken with
    reason : why it is not resolved; else ""
    """

    value: float | None
    error: float = 0.0
    step: float = 0.0
    reason: str = ""


def slopes(
    measured: Callable[[float], Values], base: Values, steps: Sequence[float] = STEPS
) -> tuple[Slope, ...]:
    """Return the derivatives of several values by one parameter.

    With D(h) = (v(1 + h) - v(1 - h)) / 2h the derivative is (4 D(h) - D(2h)) / 3, which is exact to
    the fourth power of h where v is smooth, and its error about (D(h) - D(2h)) / 3. Where the two
    differ by more than ``AGREEMENT``, a larger step is tried, which rounding disturbs less; where
    none agrees, the derivative is not resolved.

    Parameters
    ----------
    measured : factor on the parameter -> the values, None for one that cannot be told; it raises
        ``ValueError`` where the parameter cannot have the value
    base : the values at a factor of one
    steps : relative steps to try

    Returns
    -------
    One for each value.
    """
    found: list[Slope] = [_unknown(value) for value in base]
    for step in steps:
        open_ = [
            place
            for place, slope in enumerate(found)
            if not _hopeless(base[place]) and _open(slope, step)
        ]
        if not open_:
            break
        try:
            rows = [measured(1.0 + factor * step) for factor in (-2.0, -1.0, 1.0, 2.0)]
        except ValueError as error:
            reason = f"{100.0 * step:g} % more or less is refused: {' '.join(str(error).split())}"
            for place in open_:
                found[place] = Slope(None, reason=reason)
            break
        for place in open_:
            found[place] = _slope([row[place] for row in rows], base[place], step)
    return tuple(found)


def _slope(values: Values, base: float | None, step: float) -> Slope:
    kept = [value for value in values if value is not None and math.isfinite(value)]
    if len(kept) < len(values) or base is None:
        return Slope(None, step=step, reason=f"within {200.0 * step:g} % it cannot be told")
    outer, inner = (kept[3] - kept[0]) / (4.0 * step), (kept[2] - kept[1]) / (2.0 * step)
    best, error = (4.0 * inner - outer) / 3.0, abs(inner - outer) / 3.0
    size = max(abs(base), *map(abs, kept))
    if max(abs(inner), abs(outer)) <= NOTHING * size:
        return Slope(0.0, 0.0, step)
    if 3.0 * error > AGREEMENT * max(abs(inner), abs(outer)):
        reason = (
            f"steps of {100.0 * step:g} and {200.0 * step:g} % give {inner:.3g} and {outer:.3g} "
            "for 100 %: rounding to codes, noise, or a bend"
        )
        return Slope(None, error, step, reason)
    return Slope(best, error, step)


def whole_slope(below: float | None, above: float | None, value: float) -> Slope:
    """Return the difference over a whole number's two neighbours as dv / d(ln p).

    Parameters
    ----------
    below, above : the value with one less and one more; None where it cannot be told
    value : of the parameter
    """
    if below is None or above is None or not (math.isfinite(below) and math.isfinite(above)):
        return Slope(None, step=1.0 / value, reason="one less or one more cannot be told")
    return Slope(0.5 * (above - below) * value, step=1.0 / value)


def _open(slope: Slope, step: float) -> bool:
    """Return whether a larger step may tell more: nothing at the smallest one may be rounding."""
    return slope.value is None or (slope.value == 0.0 and step <= LARGEST_FOR_NOTHING)


def _hopeless(base: float | None) -> bool:
    return base is None or not math.isfinite(base)


def _unknown(base: float | None) -> Slope:
    if base is None:
        return Slope(None, reason="the check cannot be told")
    return Slope(None, reason="" if math.isfinite(base) else "the value is infinite")
