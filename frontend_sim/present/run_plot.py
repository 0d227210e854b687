"""The plot of a run: what the pin did, what the codes say of it, what arrived."""

from __future__ import annotations

import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from frontend_sim.converter import AnyAdc
from frontend_sim.present.error_panel import draw_error, error_views
from frontend_sim.present.figure_file import check_plot_target, new_figure, save_figure
from frontend_sim.present.margin_panel import LINE, draw_margins, verdicts_of
from frontend_sim.present.numbers import counted, engineering, prefix_of
from frontend_sim.present.run_panels import Conversions, draw_codes, draw_difference, draw_waveforms
from frontend_sim.present.settling_panel import draw_settling, settling_views
from frontend_sim.present.spectrum_panel import draw_spectrum, spectrum_view
from frontend_sim.scenario.signal import PIN
from frontend_sim.simulation.finished import RunLike

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Real = NDArray[np.float64]


def plot_run(run: RunLike, path: str | os.PathLike[str], overwrite: bool = False) -> Path:
    """Draw a run, or a record, into a PNG or SVG file.

    Pin voltage and the codes read back, with the limits of the ADC's range and marks where it was
    exceeded; the pin between conversions where its waveform is kept, and where it is not, a few
    conversions are dots that no line joins; the difference of the two in LSB; the waveforms, where
    some are kept; and for each settling check the distance from the end in LSB on a logarithmic
    axis, with the band, the last exit and the time that is granted; where lines or bands fold, the
    spectrum of the codes with each named by its source; for each total-error check its parts as
    bars; and, of a record, the margins of all checks, also as bars. A long run is reduced to the
    lowest and the highest value of each column of pixels, so no peak is lost.

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
    check_plot_target(path, overwrite)
    return save_figure(run_figure(run), path, overwrite)


def run_figure(run: RunLike) -> Figure:
    """Return the figure of a run, to draw on or to show elsewhere."""
    adc, time = run.scenario.adc, run.time
    waveform_time = run.waveform_time if len(run.waveform) else np.empty(0)
    by_unit = _by_unit(run) if len(waveform_time) else {}
    views, spectrum = settling_views(run), spectrum_view(run)
    errors, verdicts = error_views(run), verdicts_of(getattr(run, "results", ()))
    heights = [3.0, 1.2, *(2.2 for _ in by_unit)]
    own = [2.4 for _ in views]
    own += [] if spectrum is None else [2.8]
    own += [0.6 + 0.45 * len(view.bars) for view in errors]
    own += [0.7 + LINE * len(verdicts)] if verdicts else []
    figure = new_figure(10.0, 1.9 + 1.1 * (sum(heights) + sum(own)))
    axes = _rows(figure, heights, own)
    last = max((float(times[-1]) for times in (time, waveform_time) if len(times)), default=0.0)
    factor, letter = prefix_of(last)
    # The output of the last stage is the pin.
    between = run.waveform.get(run.scenario.points()[-1], np.empty(0))
    conversions = Conversions(
        adc, factor * time, run.pin, run.voltage, run.overrange,
        factor * waveform_time[: len(between)], between,
    )  # fmt: skip
    draw_codes(axes[0], conversions)
    draw_difference(axes[1], conversions)
    last_row = len(heights)
    for panel, (unit, waveform) in zip(axes[2:last_row], by_unit.items(), strict=True):
        draw_waveforms(panel, factor * waveform_time, waveform, unit)
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
    figure.suptitle(_title(run.scenario.title, adc, len(time), beyond))
    for each in axes:
        each.grid(True, color="0.9", linewidth=0.6)
        each.set_axisbelow(True)
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


def _by_unit(run: RunLike) -> dict[str, dict[str, Real]]:
    """Return the waveforms by the SI unit of their points, in the order of the chain."""
    units = dict(zip(run.scenario.points(), run.scenario.units(), strict=True))
    found: dict[str, dict[str, Real]] = {}
    for name in run.waveform:
        found.setdefault(units.get(name, PIN), {})[name] = run.waveform[name]
    return found


def _title(title: str, adc: AnyAdc, count: int, beyond: int) -> str:
    low, high = engineering(adc.low, "V"), engineering(adc.high, "V")
    rate = engineering(adc.rate, "Hz")
    facts = f"{counted(count, 'conversion')} at {rate}, {adc.bits} bits, {low} to {high}"
    facts += f", {beyond} beyond the range" if beyond else ", none beyond the range"
    # A dollar sign would begin a formula.
    return fill(title or "Run without a title", 90).replace("$", r"\$") + "\n" + facts
