"""The panel of a total-error check: what the error of the codes is made of."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from frontend_sim.errors import InputError
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.total_error import ROUNDING, total_of
from frontend_sim.present.colours import LIMIT, MARK
from frontend_sim.present.drawing import literal
from frontend_sim.present.named_bars import Bar, draw_named_bars, short
from frontend_sim.present.numbers import plain
from frontend_sim.quantities import Limit
from frontend_sim.scenario.checks.rules import labels
from frontend_sim.scenario.checks.total_error import TotalErrorCheck
from frontend_sim.simulation.finished import RunLike

if TYPE_CHECKING:
    from matplotlib.axes import Axes


@dataclass(frozen=True)
class ErrorView:
    """What the panel of one check shows.

    Parameters
    ----------
    label : of the check
    bars : text, rms and peak [LSB], in the order of the signal path, and the total last
    limit : [LSB];  of : what it limits, "rms" or "peak"
    """

    label: str
    bars: tuple[Bar, ...]
    limit: float
    of: str


def error_views(run: RunLike) -> list[ErrorView]:
    """Return a view for each total-error check of a run that its run can answer."""
    checks = run.scenario.check
    named = zip(checks, labels(checks), strict=True)
    subject = Subject(run.scenario, run)
    views = []
    for check, label in named:
        if isinstance(check, TotalErrorCheck):
            try:
                views.append(_view(check, label, subject))
            except InputError:
                continue  # the margin panel says that it cannot be told
    return views


def _view(check: TotalErrorCheck, label: str, subject: Subject) -> ErrorView:
    found, limit = total_of(check, subject).after(check.after), check.at_most
    assert isinstance(limit, Limit)  # its field reads one
    seen = [part for part in found.parts if part.peak > ROUNDING * found.lsb]
    bars = tuple(
        (
            f"{short(part.name)}: {plain(part.rms / found.lsb, 3)} LSB rms, "
            f"{plain(part.peak / found.lsb, 3)} at most",
            part.rms / found.lsb,
            part.peak / found.lsb,
        )
        for part in (*seen, found.total)
    )
    volts = float(limit) * limit.scale(subject.adc.lsb, subject.whole)
    return ErrorView(label, bars, volts / found.lsb, check.quantity)


def draw_error(axes: Axes, view: ErrorView) -> None:
    """Draw rms and peak of every part, and of the total, with the limit where it is in view."""
    draw_named_bars(axes, view.bars, ("rms", "peak"))
    title = literal(view.label)
    told = f"limit of the {view.of}: {plain(view.limit, 3)} LSB"
    if view.limit <= axes.get_xlim()[1]:
        axes.axvline(view.limit, color=LIMIT, linestyle="--", linewidth=1.0, zorder=4.5)
    else:
        told += ", out of view"
    axes.set_title(f"{title}: its parts ({told})", loc="left", fontsize="medium", color=MARK)
    axes.set_xlabel("error of the codes, referred to the pin [LSB]")
