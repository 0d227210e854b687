"""The panel of a settling check: how far from the end, and what is allowed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from frontend_sim.errors import InputError
from frontend_sim.measure.checks.settled import Settled, settled
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.present.colours import BLACK, EXACT, GREEN, LIMIT, MARK, ORANGE
from frontend_sim.present.decimation import COLUMNS
from frontend_sim.present.drawing import literal
from frontend_sim.present.numbers import engineering, plain, prefix_of
from frontend_sim.scenario.checks.rules import labels
from frontend_sim.scenario.checks.settling import SettlingCheck
from frontend_sim.simulation.finished import RunLike

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Real = NDArray[np.float64]

SHOWN = 1.6
"""The time axis goes this factor beyond the last exit and the granted time."""

FEW = 200
"""Up to so many conversions are drawn as dots."""

FLOOR = 1e-3
"""The distance is shown down to this share of the band."""


@dataclass(frozen=True, eq=False)
class SettlingView:
    """What the panel of one check shows.

    Parameters
    ----------
    label : of the check;  granted : time that it allows [s]
    found : when it has settled; None where the run cannot tell, and ``reason`` says why
    time, distance : conversions after the event [s], and their distance from the end [LSB]
    exact_time, exact_distance : the same between conversions, empty where it is not known
    band : half its width [LSB]
    """

    label: str
    granted: float
    found: Settled | None
    reason: str
    time: Real
    distance: Real
    exact_time: Real
    exact_distance: Real
    band: float


def settling_views(run: RunLike) -> list[SettlingView]:
    """Return a view for each settling check of a run."""
    checks = run.scenario.check
    named = zip(checks, labels(checks), strict=True)
    wanted = [(check, label) for check, label in named if isinstance(check, SettlingCheck)]
    subject = Subject(run.scenario, run)
    return [_view(check, label, subject) for check, label in wanted]


def _view(check: SettlingCheck, label: str, subject: Subject) -> SettlingView:
    none, lsb = np.empty(0), subject.adc.lsb
    try:
        found = settled(check, subject)
    except InputError as error:
        return SettlingView(label, check.before, None, str(error), none, none, none, none, 0.0)
    last = min(found.since + SHOWN * max(found.seconds, check.before), subject.duration)
    shown = (subject.time >= found.since) & (subject.time <= last)
    time, values = subject.time[shown], subject.at_conversions(check.point)[shown]
    fine = np.linspace(found.since, last, COLUMNS) if found.tail is not None else none
    exact = np.empty(0)
    if len(fine):
        name = subject.chain.points[subject.point(check.point)]
        exact = np.abs(subject.simulation.values([name], fine)[0] - found.final) / lsb
    distance = np.abs(values - found.final) / lsb
    return SettlingView(
        label, check.before, found, "", time - found.since, distance, fine - found.since, exact,
        found.band / lsb,
    )  # fmt: skip


def draw_settling(axes: Axes, view: SettlingView) -> None:
    """Draw the distance from the end, the band, the last exit, and the time that is granted."""
    axes.set_ylabel("distance from\nthe end [LSB]")
    title = literal(view.label)
    if view.found is None:
        axes.set_axis_off()
        axes.text(
            0.5, 0.5, literal(f"{view.label}: cannot be told\n{view.reason}"),
            ha="center", va="center", transform=axes.transAxes, wrap=True, color=LIMIT,
        )  # fmt: skip
        return
    seconds, floor = view.found.seconds, FLOOR * view.band
    factor, letter = prefix_of(SHOWN * max(seconds, view.granted))
    if len(view.exact_time):
        axes.plot(
            factor * view.exact_time, np.maximum(view.exact_distance, floor),
            color=EXACT, linewidth=1.4, label="exact", zorder=3,
        )  # fmt: skip
    few = len(view.time) <= FEW
    axes.plot(
        factor * view.time, np.maximum(view.distance, floor), color=ORANGE, zorder=4,
        marker="o" if few else None, linestyle="none" if few else "-", markersize=4.0,
        linewidth=1.0, label="conversions",
    )  # fmt: skip
    axes.set_yscale("log")
    axes.axhline(view.band, color=LIMIT, linestyle="--", linewidth=1.0,
                 label=f"band ± {plain(view.band, 3)} LSB")  # fmt: skip
    axes.axvline(factor * view.granted, color=LIMIT, linewidth=1.2,
                 label=f"granted {engineering(view.granted, 's')}")  # fmt: skip
    holds = seconds <= view.granted
    axes.axvline(factor * seconds, color=GREEN if holds else BLACK, linestyle="-.", linewidth=1.4,
                 label=f"last exit {engineering(seconds, 's', 4)}")  # fmt: skip
    largest = max((float(np.max(row)) for row in (view.distance, view.exact_distance) if len(row)),
                  default=view.band)  # fmt: skip
    axes.set_ylim(floor, 2.0 * max(largest, view.band))
    axes.set_xlim(0.0, factor * SHOWN * max(seconds, view.granted))
    start = engineering(view.found.since, "s", 4)
    axes.set_xlabel(f"time after the event at {start} [{letter}s]")
    verdict = "holds" if holds else "fails"
    axes.set_title(f"{title}: {verdict}", loc="left", fontsize="medium",
                   color=MARK if holds else LIMIT)  # fmt: skip
    axes.legend(loc="upper right", fontsize="small", framealpha=0.9)
