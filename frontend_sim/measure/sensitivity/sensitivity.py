"""How much each parameter of a scenario moves what each check measures."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import Any

from frontend_sim.errors import InputError
from frontend_sim.measure.checks.answer import SENSES
from frontend_sim.measure.checks.judge import judge
from frontend_sim.measure.result import Result
from frontend_sim.measure.sensitivity.derivative import Slope, Values, slopes, whole_slope
from frontend_sim.measure.sensitivity.number import numbers_of, ratio_power
from frontend_sim.measure.sensitivity.parameter import Parameter, parameter_at, parameters_of
from frontend_sim.scenario.scan_scenario import AnyScenario

PERCENT = 0.01


@dataclass(frozen=True)
class Sensitivity:
    """How much one parameter moves what one check measures.

    Parameters
    ----------
    parameter : what is changed
    slope : dv / d(ln p), in the unit of the check
    normalized : (dv / v) / (dp / p); of a level in dB or in bits that of the ratio it stands for;
        None where it is not resolved, or the value is zero
    per_percent : what 1 % more of the parameter adds to the margin, in the unit of the check; of a
        whole number, what one more adds
    share_per_percent : the same as a share of the margin's size
    per_tolerance : how much margin the tolerance of the part can cost, at least 0, in the unit of
        the check; None where there is no tolerance
    """

    parameter: Parameter
    slope: Slope
    normalized: float | None
    per_percent: float | None
    share_per_percent: float | None
    per_tolerance: float | None

    @property
    def resolved(self) -> bool:
        """Whether the derivative is known."""
        return self.slope.value is not None

    @property
    def moves(self) -> bool:
        """Whether the parameter is known to move the value."""
        return bool(self.slope.value)


@dataclass(frozen=True)
class CheckSensitivity:
    """What one check measures, and what moves it, the strongest first.

    Parameters
    ----------
    result : the verdict
    rows : one for each parameter: those that move it by falling strength, those whose derivative
        is not resolved, those without effect
    """

    result: Result
    rows: tuple[Sensitivity, ...]

    @property
    def name(self) -> str:
        """Name of the check."""
        return self.result.name

    def as_dict(self) -> dict[str, Any]:
        """Return plain data for JSON, in SI; None for what is not there."""
        told = ("name", "value", "unit", "limit", "bound", "margin", "verdict")
        return {
            **{name: _finite(getattr(self.result, name)) for name in told},
            "parameters": [_row(row) for row in self.rows],
        }


def sensitivities(
    scenario: AnyScenario,
    keys: Sequence[str] = (),
    progress: Callable[[float], None] | None = None,
) -> tuple[CheckSensitivity, ...]:
    """Return what moves the measure of each check of a scenario most.

    Each parameter is changed by a little to either side, all else kept, the seed of everything
    random too; a run is made where a check asks for one. The chosen step is verified by one twice
    as large, see ``slopes``. Whole numbers are changed by one.

    Parameters
    ----------
    scenario : with its checks
    keys : parameters to change; left out, all that are not zero
    progress : called with the share that is done, from 0 to 1

    Raises
    ------
    InputError
        If there is no check, a key is none or its number is zero, or the scenario cannot be run.
    """
    if not scenario.check:
        raise InputError(
            "the scenario has no check, so nothing says what is measured; add a [[check]], see "
            "docs/checks.md"
        )
    chosen = [_chosen(scenario, key) for key in keys] or parameters_of(scenario)
    results, base = judge(scenario), numbers_of(scenario)
    found: list[tuple[Slope, ...]] = []
    for done, parameter in enumerate(chosen, start=1):
        found.append(_slopes(scenario, parameter, base))
        if progress is not None:
            progress(done / len(chosen))
    return tuple(
        CheckSensitivity(result, _ranked(_row_of(result, parameter, slope[place])
                         for parameter, slope in zip(chosen, found, strict=True)))
        for place, result in enumerate(results)
    )  # fmt: skip


def _chosen(scenario: AnyScenario, key: str) -> Parameter:
    parameter = parameter_at(scenario, key)
    if parameter is None:
        raise InputError(f"{key} is zero, or a limit, and has no relative change; take it out")
    return parameter


def _slopes(scenario: AnyScenario, parameter: Parameter, base: Values) -> tuple[Slope, ...]:
    def measured(factor: float) -> Values:
        return numbers_of(parameter.placed(scenario, factor * parameter.value))

    if not parameter.whole:
        return slopes(measured, base)
    rows: list[Values] = []
    for step in (-1.0, 1.0):
        try:
            rows.append(numbers_of(parameter.placed(scenario, parameter.value + step)))
        except InputError:
            rows.append([None] * len(base))
    return tuple(
        whole_slope(below, above, parameter.value)
        for below, above in zip(rows[0], rows[1], strict=True)
    )


def _row_of(result: Result, parameter: Parameter, slope: Slope) -> Sensitivity:
    value, power = slope.value, ratio_power(result)
    if value is None or not result.bound:
        return Sensitivity(parameter, slope, None, None, None, None)
    step = 1.0 / parameter.value if parameter.whole else PERCENT
    per_percent = -SENSES[result.bound] * step * value
    margin = result.margin
    return Sensitivity(
        parameter,
        slope,
        None if power is None else power * value,
        per_percent,
        per_percent / abs(margin) if margin else None,
        abs(value) * parameter.tolerance if parameter.tolerance else None,
    )


def _ranked(rows: Iterable[Sensitivity]) -> tuple[Sensitivity, ...]:
    def order(row: Sensitivity) -> tuple[int, float]:
        group = 1 if not row.resolved else 0 if row.moves else 2
        return group, -abs(row.slope.value or 0.0)

    return tuple(sorted(rows, key=order))


def _row(row: Sensitivity) -> dict[str, Any]:
    parameter = row.parameter
    return {
        "key": parameter.key,
        "value": parameter.value,
        "unit": parameter.dimension.unit if parameter.dimension else "",
        "tolerance": parameter.tolerance or None,
        "whole": parameter.whole,
        "resolved": row.resolved,
        "reason": row.slope.reason,
        "slope": row.slope.value,
        "slope_error": row.slope.error,
        "step": row.slope.step,
        "normalized": row.normalized,
        "margin_per_percent": row.per_percent,
        "share_of_margin_per_percent": row.share_per_percent,
        "margin_per_tolerance": row.per_tolerance,
    }


def _finite(value: Any) -> Any:
    return None if isinstance(value, float) and not math.isfinite(value) else value
