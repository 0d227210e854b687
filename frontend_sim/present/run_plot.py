"""The plot of a run: what the pin did, what the codes say of it, what arrived."""

from __future__ import annotations

import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter import AnyAdc
from frontend_sim.present.decimation import broken
from frontend_sim.present.drawing import draw_grid, literal, new_figure
from frontend_sim.present.error_panel import ErrorView, draw_error, error_views
from frontend_sim.present.figure_file import save_figure
from frontend_sim.present.margin_panel import LINE, bars_of, draw_margins, verdicts_of
from frontend_sim.present.numbers import engineering, prefix_of
from frontend_sim.present.part import kept_conversions
from frontend_sim.present.run_panels import Conversions, draw_codes, draw_difference, draw_waveforms
from frontend_sim.present.settling_panel import SettlingView, draw_settling, settling_views
from frontend_sim.present.spectrum_panel import SpectrumView, draw_spectrum, spectrum_view
from frontend_sim.quantities import SignalUnit
from frontend_sim.scenario.signal import PIN
from frontend_sim.scenario.told_unit import told_unit
from frontend_sim.simulation.finished import RunLike
from frontend_sim.simulation.stretches import breaks_in, stretches_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Real = NDArray[np.float64]


def plot_run(run: RunLike, path: str | os.PathLike[str], overwrite: bool = False) -> Path:
    """Draw a run, or a record, into a PNG or SVG file.

    Pin voltage and the codes read back, with the limits of the ADC's range and marks where it was
    exceeded; the pin between conversions where its waveform is kept, and where it is not, a few
    conversions are dots that no line joins; the difference of the two in LSB, beside that of what
    the sampling capacitor held, where there is one; the waveforms, where some are kept; and for
    each settling check the distance from the end in LSB on a logarithmic axis, with the band, the
    last exit and the time that is granted; where lines or bands fold, the spectrum of the codes
    with each named by its source; for each total-error check its parts as bars; and, of a record,
    the margins of all checks, also as bars. A long run is reduced to the lowest and the highest
    value of each column of pixels, so no peak is lost. Of a record that keeps a part of its run,
    lines break at each gap, and panels that need all of it are left out.

    Parameters
    ----------
    run : a ``Run`` or an open ``Record``
    path : ends in .png or .svg
    overwrite : whether a file that is there may be replaced

    Returns
    -------
    The file that was written, links followed.

    Raises
    ------
    OutputError
        If the path cannot be written as asked for.
    """
    return save_figure(run_figure(run), path, overwrite)


def run_figure(run: RunLike) -> Figure:
    """Return the figure of a run, to draw on or to show elsewhere."""
    adc, time = run.scenario.adc, run.time
    waveform_time = run.waveform_time if len(run.waveform) else np.empty(0)
    by_unit = _by_unit(run) if len(waveform_time) else {}
    views, spectrum, errors = _own_panels(run)
    verdicts = verdicts_of(getattr(run, "results", ()))
    heights = [3.0, 1.2, *(2.2 for _ in by_unit)]
    own = [2.4 for _ in views]
    own += [] if spectrum is None else [2.8]
    own += [0.6 + 0.45 * len(view.bars) for view in errors]
    own += [0.7 + LINE * bars_of(verdicts)] if verdicts else []
    figure = new_figure(10.0, 1.9 + 1.1 * (sum(heights) + sum(own)))
    axes = _rows(figure, heights, own)
    last = max((float(times[-1]) for times in (time, waveform_time) if len(times)), default=0.0)
    factor, letter = prefix_of(last)
    # The output of the last stage is the pin.
    conversions = Conversions.of(run, factor, run.scenario.points()[-1])
    draw_codes(axes[0], conversions)
    draw_difference(axes[1], conversions)
    last_row = len(heights)
    for panel, (unit, waveform) in zip(axes[2:last_row], by_unit.items(), strict=True):
        arrives = unit == run.scenario.stimulus_unit
        told = told_unit(run.scenario) if arrives else SignalUnit.of(unit)
        gaps = breaks_in(run, waveform_time)
        at, *values = broken(gaps, factor * waveform_time, *waveform.values())
        draw_waveforms(panel, at, dict(zip(waveform, values, strict=True)), told)
    axes[last_row - 1].set_xlabel(f"time [{letter}s]")
    others = iter(axes[last_row:])
    for view in views:
        draw_settling(next(others), view)
    if spectrum is not None:
        draw_spectrum(next(others), spectrum)
    for error in errors:
        draw_error(next(others), error)
    if verdicts:
        draw_margins(next(others), verdicts)
    beyond = int(np.count_nonzero(conversions.overrange))
    figure.suptitle(_title(run.scenario.title, adc, kept_conversions(run), beyond))
    draw_grid(*axes)
    return figure


def _rows(figure: Figure, heights: list[float], own: list[float]) -> list[Axes]:
    """Return panels below each other; those after the first ones have axes of their own."""
    every = [*heights, *own]
    axes: list[Axes] = list(
        figure.subplots(len(every), 1, height_ratios=every, squeeze=False)[:, 0]
    )
    for panel in axes[1 : len(heights)]:
        panel.sharex(axes[0])
    for panel in axes[: len(heights) - 1]:
        panel.tick_params(labelbottom=False)
    return axes


def _own_panels(
    run: RunLike,
) -> tuple[list[SettlingView], SpectrumView | None, list[ErrorView]]:
    """Return what panels of their own show; nothing for a part of a run, as all of it is needed."""
    if stretches_of(run) is not None:
        return [], None, []
    return settling_views(run), spectrum_view(run), error_views(run)


def _by_unit(run: RunLike) -> dict[str, dict[str, Real]]:
    """Return the waveforms by the SI unit of their points, in the order of the chain."""
    units = dict(zip(run.scenario.points(), run.scenario.units(), strict=True))
    found: dict[str, dict[str, Real]] = {}
    for name in run.waveform:
        found.setdefault(units.get(name, PIN), {})[name] = run.waveform[name]
    return found


def _title(title: str, adc: AnyAdc, count: str, beyond: int) -> str:
    low, high = engineering(adc.low, "V"), engineering(adc.high, "V")
    rate = engineering(adc.rate, "Hz")
    facts = f"{count} at {rate}, {adc.bits} bits, {low} to {high}"
    facts += f", {beyond} beyond the range" if beyond else ", none beyond the range"
    return literal(fill(title or "Run without a title", 90)) + "\n" + facts
