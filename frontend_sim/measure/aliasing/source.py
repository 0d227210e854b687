"""What of each stimulus lies above half the rate: lines, bands, points, or edges."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np

from frontend_sim.measure.aliasing.train import harmonic_of, tones_below
from frontend_sim.stimulus.base import Key, Stimulus
from frontend_sim.stimulus.chirp import Chirp
from frontend_sim.stimulus.drive import Drive, Lines, UniformDrive
from frontend_sim.stimulus.noise_burst import NoiseBurst
from frontend_sim.stimulus.pulse import Pulse, Train
from frontend_sim.stimulus.sine import Tone

FLAT, BAND_EDGE = 0.9, 1.1
"""A burst of noise is flat up to so many times its bandwidth, and has nothing above so many."""

ROUNDING = 1.0 + 1e-12
"""A line that lies above half the rate by less than this is at half the rate, and does not fold."""

MOST_HARMONICS = 2000
"""Harmonics of a train that are looked at one by one."""


@dataclass(frozen=True)
class Line:
    """A line of a stimulus.

    Parameters
    ----------
    source : what it comes from
    frequency : [Hz];  amplitude : peak value, in the unit of the stimulus
    """

    source: str
    frequency: float
    amplitude: float


@dataclass(frozen=True, eq=False)
class Band:
    """A stretch of spectrum of a stimulus.

    Parameters
    ----------
    source : what it comes from
    low, high : ends [Hz]; the higher one may be infinite
    peak : of a sweep, its peak value; else None
    density : of noise, mean square per hertz where it is flat; else None
    flat : noise is flat up to there, and its amplitude then falls in a line to the upper end [Hz]
    """

    source: str
    low: float
    high: float
    peak: float | None = None
    density: float | None = None
    flat: float = math.inf


@dataclass(frozen=True, eq=False)
class Above:
    """What of one stimulus lies above a frequency.

    Parameters
    ----------
    source : name of the stimulus
    lines, bands : of its spectrum
    drives : the part above as drives, where it is known exactly
    points : drives whose points have to be split
    whole : drives that have no spectrum of their own; their response has to be split
    reach : of points, the frequency up to which they can hold anything [Hz]; else infinite
    """

    source: str
    lines: tuple[Line, ...] = ()
    bands: tuple[Band, ...] = ()
    drives: tuple[Drive, ...] = ()
    points: tuple[UniformDrive, ...] = field(default=())
    whole: tuple[Drive, ...] = ()
    reach: float = math.inf


def parts_above(stimulus: Stimulus, key: Key, limit: float, duration: float) -> Iterator[Above]:
    """Return what of each term of a stimulus lies above a frequency.

    Parameters
    ----------
    key : seed of what is random in the stimulus, as the run has it
    limit : [Hz]
    duration : of the run [s]
    """
    for path, term in stimulus.terms():
        places = tuple(step for step in path if isinstance(step, int))
        name = str(getattr(term, "kind", "stimulus"))
        if places:
            name = f"term {'.'.join(str(place + 1) for place in places)}: {name}"
        yield _above(term, name, (*key, *places), limit, duration)


def _above(term: Stimulus, name: str, key: Key, limit: float, duration: float) -> Above:
    drives = term.drives(key)
    if all(isinstance(drive, Tone) for drive in drives):
        return _of_tones(name, [drive for drive in drives if isinstance(drive, Tone)], limit)
    if isinstance(term, Pulse) and isinstance(drives[0], Train):
        return _of_train(name, drives[0], limit, duration)
    if isinstance(term, Chirp):
        return _of_chirp(name, term, drives, limit)
    uniform = tuple(drive for drive in drives if isinstance(drive, UniformDrive))
    if isinstance(term, NoiseBurst):
        top = BAND_EDGE * term.bandwidth
        flat = FLAT * term.bandwidth
        density = term.rms**2 / (flat + (top - flat) / 3.0)
        bands = (Band(name, limit, top, density=density, flat=flat),) if top > limit else ()
        return Above(name, bands=bands, points=uniform)
    if uniform:
        return Above(name, points=uniform, reach=0.5 * max(drive.rate for drive in uniform))
    if all(isinstance(drive, Lines) and _still(drive) for drive in drives):
        return Above(name)
    return Above(name, bands=(Band(name, limit, math.inf),), whole=drives)


def _still(drive: Lines) -> bool:
    """Return whether a drive never leaves the value that it has before t = 0."""
    return not np.any(drive.slopes) and bool(np.all(drive.levels == drive.initial))


def _of_tones(name: str, tones: list[Tone], limit: float) -> Above:
    """A sine, or several: the lines above, without the offset, which is below."""
    lines, drives = [], []
    for number, tone in enumerate(tones, start=1):
        if tone.frequency > limit * ROUNDING:
            source = name if len(tones) == 1 else f"{name}, tone {number}"
            lines.append(Line(source, tone.frequency, abs(tone.amplitude)))
            drives.append(Tone(tone.amplitude, tone.frequency, tone.phase, 0.0))
    return Above(name, tuple(lines), drives=tuple(drives))


def _of_train(name: str, train: Train, limit: float, duration: float) -> Above:
    """Harmonics; a train that fills the run is itself less what lies below."""
    lowest = math.floor(limit * train.period * ROUNDING) + 1
    orders = np.arange(lowest, lowest + MOST_HARMONICS)
    amplitudes = 2.0 * np.abs(harmonic_of(train, orders))
    lines = tuple(
        Line(f"{name}, harmonic {order}", float(order) / train.period, float(amplitude))
        for order, amplitude in zip(orders, amplitudes, strict=True)
    )
    fills = train.at == 0.0 and train.count * train.period >= duration
    if fills and lowest <= MOST_HARMONICS:
        return Above(name, lines, drives=(train, *tones_below(train, limit)))
    return Above(name, lines, whole=(train,))


def _of_chirp(name: str, term: Chirp, drives: tuple[Drive, ...], limit: float) -> Above:
    low, high = sorted((term.start_frequency, term.stop_frequency))
    bands: tuple[Band, ...] = ()
    if high > limit:
        bands = (Band(name, max(low, limit), high, peak=abs(term.amplitude)),)
    return Above(name, bands=bands, whole=drives)
