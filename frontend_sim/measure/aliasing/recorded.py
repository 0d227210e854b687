"""What of a recording, or of any row of points, lies above half a rate."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike

from frontend_sim.errors import MeasureError
from frontend_sim.measure.aliasing.alias import Alias, Folder, folded_band
from frontend_sim.measure.aliasing.error import BEYOND, AliasError
from frontend_sim.measure.aliasing.split import Edges, power_above, split_above
from frontend_sim.measure.arrays import Real, positive, samples
from frontend_sim.stimulus.drive import UniformDrive

LEAST_POINTS = 4
"""Fewest points that have a spectrum."""

MOST_POINTS = 1 << 22
"""Of a longer recording the first so many points tell its spectrum; the alias error takes all."""


IMAGES = 3
"""Images to either side; those further out have less than 1 % of the power of a line."""


def recorded_alias(folder: Folder, source: str, drive: UniformDrive, duration: float) -> Alias:
    """Return the rms value of what a recording holds above half the rate, and where it lands.

    Lines of the discrete sine transform add up in power, each with its gain (Parseval). Between the
    points the signal is held or goes in lines, which weakens it and adds images; as in the alias
    error both count.

    Parameters
    ----------
    folder : chain and converter
    source : name of the recording
    duration : of the run [s]
    """
    half, top = 0.5 * folder.rate, 0.5 * drive.rate
    count = int(getattr(drive, "count", MOST_POINTS))
    if math.isfinite(duration):
        count = min(count, math.ceil((duration - drive.origin) * drive.rate) + BEYOND)
    row = drive.points(0, min(max(count, LEAST_POINTS), MOST_POINTS))
    frequency, power = power_above(row, drive.rate, half)
    passed = power * _gain_squared(folder, drive, frequency)
    arrives, volts = math.sqrt(float(np.sum(power))), math.sqrt(float(np.sum(passed)))
    lands = folded_band(half, top, folder.rate)
    return folder.alias(source, (half, top), lands, "rms", arrives, volts)


def _gain_squared(folder: Folder, drive: UniformDrive, frequency: Real) -> Real:
    """Return |H D|² of lines that are played point by point, their images included.

    At f + m r, r the rate of the points, stands sinc(f / r + m) of a line that is held, the square
    of it of one between which lines are drawn. Images are counted as if they landed at places of
    their own; where the rates are whole multiples they meet their line again, which may be some
    percent more or less.
    """
    power = 1 if drive.between == "hold" else 2
    total = np.zeros(len(frequency))
    for image in range(-IMAGES, IMAGES + 1):
        there = frequency + image * drive.rate
        shape = np.sinc(there / drive.rate) ** power
        total += (shape * folder.gain(np.abs(there))) ** 2
    return total


def sampled_alias_error(
    values: ArrayLike, rate: float, conversion_rate: float, lsb: float = 1.0,
    edges: Edges = "reflected",
) -> AliasError:  # fmt: skip
    """Return what a slower converter would fold of a plain row of samples, at each of them.

    It is the part above half the slower rate: whichever of the samples the slower converter looks
    at, its codes hold that much which no band limit would have let through.

    Parameters
    ----------
    values : shape (N,) [V]
    rate : of the samples [Hz]
    conversion_rate : of the slower converter [Hz]
    lsb : width of a code [V]
    edges : how the row goes on beyond its ends, see ``part_above``

    Raises
    ------
    MeasureError
        If the samples are unusable, or their own rate cannot show aliasing at all.
    """
    row = samples(values, LEAST_POINTS)
    own = positive(rate, "the rate", "Hz")
    slower = positive(conversion_rate, "the conversion rate", "Hz")
    if own <= slower * (1.0 + 1e-9):
        raise MeasureError(
            f"samples at {own:g} Hz hold nothing above {0.5 * own:g} Hz, so they cannot show what "
            f"a converter at {slower:g} Hz would fold; record faster than that, with a wider "
            "filter, or ask about a slower converter"
        )
    width = positive(lsb, "the LSB", "V")
    high = split_above(row, own, 0.5 * slower, edges)
    how = f"ideal split of the samples, {edges} ends"
    return AliasError(np.arange(len(row)) / own, high, width, np.zeros(len(row)), (how,))
