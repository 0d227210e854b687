"""The plot of an inspection: magnitude, phase, group delay, step response, settling."""

from __future__ import annotations

import os
from pathlib import Path
from textwrap import fill
from typing import TYPE_CHECKING

from frontend_sim.measure.response.inspection import Inspection
from frontend_sim.present.drawing import draw_grid, literal, new_figure
from frontend_sim.present.figure_file import save_figure
from frontend_sim.present.frequency_panels import draw_delay, draw_magnitude, draw_phase
from frontend_sim.present.frequency_view import FrequencyView
from frontend_sim.present.noise_panel import draw_noise
from frontend_sim.present.step_panels import draw_distance, draw_step
from frontend_sim.present.step_view import StepView

if TYPE_CHECKING:
    from matplotlib.figure import Figure


def plot_inspection(
    inspection: Inspection, path: str | os.PathLike[str], overwrite: bool = False
) -> Path:
    """Draw an inspection into a PNG or SVG file.

    Left magnitude, phase and group delay over frequency, with corners, half the conversion rate
    and the rate; right the response to a unit step, and how it comes near to its end, with the
    bands that it settles to, and the noise budget. Discrete models at the grid rate are laid over.

    Parameters and errors as ``plot_run``.
    """
    return save_figure(inspection_figure(inspection), path, overwrite)


def inspection_figure(inspection: Inspection) -> Figure:
    """Return the figure of an inspection, to draw on or to show elsewhere."""
    noisy = inspection.noise is not None and bool(inspection.noise.rows)
    figure = new_figure(13.0, 10.0 if noisy else 9.0)
    left, right = figure.subfigures(1, 2, wspace=0.02, squeeze=False)[0]
    magnitude, phase, delay = left.subplots(3, 1, sharex=True)
    step, distance, *others = right.subplots(3 if noisy else 2, 1)
    view = FrequencyView.of(inspection)
    draw_magnitude(magnitude, view)
    draw_phase(phase, view)
    draw_delay(delay, view)
    steps = StepView.of(inspection)
    draw_step(step, steps)
    draw_distance(distance, steps)
    if inspection.noise is not None and noisy:
        draw_noise(others[0], inspection.noise)
    figure.suptitle(_title(inspection))
    draw_grid(magnitude, phase, delay, step, distance, *others)
    return figure


def _title(inspection: Inspection) -> str:
    title = literal(fill(inspection.title or "Chain without a title", 110))
    return f"{title}\nResponse of the chain from the stimulus to the converter's pin"
