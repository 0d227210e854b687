"""The levels of several tones of known frequency, fitted at once."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.arrays import Real, positive, samples
from frontend_sim.measure.instants import Instants
from frontend_sim.measure.mains.uncertainty import Beside
from frontend_sim.measure.sine_fit.least_squares import least_squares
from frontend_sim.measure.spectrum.folding import folded
from frontend_sim.measure.spectrum.window import Window, window_named


@dataclass(frozen=True, eq=False)
class ToneLevels:
    """Tones fitted to a record, y(t) = offset + sum_i amplitude[i] sin(2 pi frequency[i] t + ...).

    Parameters
    ----------
    frequency : of each tone, shape (K,) [Hz]
    amplitude : peak values, shape (K,) [V]
    uncertainty : standard deviation of each, from what the record holds beside the tone, (K,) [V]
    offset : [V]
    """

    frequency: Real
    amplitude: Real
    uncertainty: Real
    offset: float


def tone_levels(
    values: ArrayLike,
    frequencies: Sequence[float],
    *,
    rate: float | None = None,
    times: ArrayLike | None = None,
    window: str = "hann",
) -> ToneLevels:
    """Fit sine and cosine of every tone and an offset at once, by weighted least squares.

    The weights are a window over the record, so that what lies far from the tones (a heart beat, a
    drift) disturbs them little. The fit is exact for any sum of these tones. A tone above half the
    rate is measured where it folds to; that it is this tone is for the caller to know. The
    uncertainty comes from the residual: its level, under the same window, at frequencies beside
    the tone. Source: linear least squares; common practice.

    Parameters
    ----------
    values : shape (N,) [V]
    frequencies : of the tones [Hz]
    rate, times : of the samples, one of both [Hz], [s]
    window : of the weights

    Raises
    ------
    MeasureError
        If the record is too short to tell the tones from one another, from zero and from half the
        rate.
    """
    wanted = [positive(each, "the frequency of a tone", "Hz") for each in frequencies]
    if not wanted:
        raise MeasureError("no frequency of a tone was given")
    row = samples(values, 2 * len(wanted) + 2)
    instants, chosen = Instants.of(len(row), rate, times), window_named(window)
    places = [each if rate is None else folded(each, rate) for each in wanted]
    _refuse_close(wanted, places, rate, instants.span, chosen)
    share = (instants.ticks - instants.ticks[0]) * instants.tick / instants.span
    weights = np.maximum(chosen.at(share), 0.0)
    columns, root = _columns(wanted, instants), np.sqrt(weights)
    named = ", ".join(f"{each:g}" for each in wanted)
    found = least_squares(columns * root[:, None], row * root, f"an offset and tones of {named} Hz")
    rest = row - columns @ found
    beside = Beside(rest, weights, places, instants, rate, chosen.half_width + 1)
    return ToneLevels(
        np.array(wanted),
        np.hypot(found[1::2], found[2::2]),
        np.array([beside.deviation(place) for place in places]),
        float(found[0]),
    )


def _columns(frequencies: Sequence[float], instants: Instants) -> Real:
    """Return an offset, and sine and cosine of each tone, shape (N, 1 + 2 K)."""
    columns = [np.ones(len(instants.ticks))]
    for frequency in frequencies:
        phase = instants.phase(frequency)
        columns += [np.sin(phase), np.cos(phase)]
    return np.column_stack(columns)


def _refuse_close(
    frequencies: Sequence[float],
    places: Sequence[float],
    rate: float | None,
    span: float,
    window: Window,
) -> None:
    """Raise MeasureError if two tones, or a tone and an end of the band, show up too close."""
    least = max(window.half_width, 1) / span
    named = [
        (place, f"the tone of {each:g} Hz") for place, each in zip(places, frequencies, strict=True)
    ]
    ends = [(0.0, "zero")] + ([] if rate is None else [(0.5 * rate, "half the rate")])
    for (low, left), (high, right) in pairwise(sorted(named + ends)):
        if high - low < least:
            raise MeasureError(
                f"{left} and {right} show up {high - low:.3g} Hz apart, and {span:.3g} s of record "
                f"under a {window.name} window tell only {least:.3g} Hz apart; record longer, ask "
                "for fewer tones, or change the rate"
            )
