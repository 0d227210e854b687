"""Evaluates noise: by the budget of the circuit, or in the codes of the run."""

from __future__ import annotations

import math

import numpy as np

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks.answer import Answer, scaled
from frontend_sim.measure.checks.places import nowhere
from frontend_sim.measure.checks.still import standing
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.circuit_noise import circuit_noise
from frontend_sim.measure.noise.summary import CREST, Noise, noise_of
from frontend_sim.measure.noise_budget import NoiseBudget
from frontend_sim.quantities.counting import counted
from frontend_sim.scenario.checks.noise import NoiseCheck
from frontend_sim.scenario.checks.noise_free_bits import NoiseFreeBitsCheck

BUDGET = "stationary covariance of the circuit's noise (Lyapunov equation) and the converter's own"
RUN = "codes read back less the exact pin, standard deviation"
RUN_EXTENT = "codes read back less the exact pin, largest less smallest"


def noise(check: NoiseCheck, subject: Subject) -> Answer:
    """Return the noise, rms or peak-to-peak.

    Raises
    ------
    MeasureError
        If a source has no bandwidth, or codes are clipped.
    """
    wide = check.quantity == "peak-to-peak"
    if check.basis == "budget":
        volts = budget_of(subject).rms * (CREST if wide else 1.0)
        method = f"{CREST:g} times the {BUDGET}" if wide else BUDGET
    else:
        found = seen_noise(subject, check.after)
        volts = found.peak_to_peak if wide else found.rms
        method = (RUN_EXTENT if wide else RUN) + standing(subject, check.after)
    value, unit = scaled(check.at_most, volts, subject.adc.lsb, subject.whole)
    limit = float(check.at_most)
    rounded = check.basis == "run"
    return Answer(
        value, unit, limit, "at most", method, lambda: advice(subject, value / limit, rounded),
        where=None if rounded else nowhere,
    )  # fmt: skip


def noise_free_bits(check: NoiseFreeBitsCheck, subject: Subject) -> Answer:
    """Return log2( range / (6.6 rms) ), at most the bits that the codes have.

    Raises
    ------
    MeasureError
        As ``noise`` does.
    """
    if check.basis == "budget":
        rms, method = budget_of(subject).rms, BUDGET
    else:
        rms, method = seen_noise(subject, check.after).rms, RUN
    lsb, extent = subject.adc.lsb, CREST * rms
    value = math.log2(subject.whole / max(extent, lsb))
    if extent < lsb:
        method += f"; no more than the {value:.4g} bits of the codes, which resolve no less noise"
    return Answer(
        value,
        "bit",
        check.at_least,
        "at least",
        f"log2(range / ({CREST:g} rms)); {method}",
        lambda: _bits_advice(check, subject, value),
        where=None if check.basis == "run" else nowhere,
    )


def _bits_advice(check: NoiseFreeBitsCheck, subject: Subject, value: float) -> str:
    bits = math.log2(subject.whole / subject.adc.lsb)
    if check.at_least > bits:
        return f"take more bits, or averages that keep more: the codes have {bits:.4g}"
    return advice(subject, 2.0 ** (check.at_least - value), check.basis == "run")


def noise_possible(check: NoiseCheck | NoiseFreeBitsCheck, subject: Subject) -> None:
    """Refuse a budget that is infinite. Raises MeasureError."""
    if check.basis == "budget":
        budget_of(subject)


def budget_of(subject: Subject) -> NoiseBudget:
    """Return the noise budget of the circuit, with 1/f noise down to a tenth of 1 / duration.

    Raises
    ------
    MeasureError
        If a source has no bandwidth.
    """
    if "budget" not in subject.kept:
        lowest = 0.1 / subject.duration
        subject.kept["budget"] = circuit_noise(subject.scenario, subject.chain, lowest)
    found: NoiseBudget = subject.kept["budget"]
    if found.unbounded:
        raise MeasureError(
            "nothing limits the bandwidth of these noise sources before the converter, so their "
            f"noise is infinite: {', '.join(found.unbounded)}; put a filter behind them, or give "
            "the amplifier a gain_bandwidth"
        )
    return found


def seen_noise(subject: Subject, after: float) -> Noise:
    """Return the noise of the codes of a run, from an instant on [s].

    The exact pin is taken off, so the signal may move. Errors of the converter that follow the
    signal count as noise.

    Raises
    ------
    MeasureError
        If codes are clipped, or there are fewer than two.
    """
    first = subject.first_after(after)
    clipped = int(np.count_nonzero(subject.overrange[first:]))
    if clipped:
        raise MeasureError(
            f"{counted(clipped, 'code is', 'codes are')} clipped, which cuts their noise off; "
            "bring the signal into the range, or let after name a later instant"
        )
    analog = subject.held if len(subject.held) else subject.pin
    return noise_of(subject.voltage[first:] - analog[first:], subject.whole)


def advice(subject: Subject, excess: float, rounded: bool) -> str:
    """Return which source to make smaller first.

    Parameters
    ----------
    excess : noise over its limit [1]
    rounded : whether rounding to codes counts as noise
    """
    rows = budget_of(subject).rows
    fall = f"noise must fall by a factor of {excess:.3g}"
    rounding = subject.adc.lsb / math.sqrt(12.0)
    if not rows or (rounded and rows[0].rms < rounding):
        return f"take more bits, or average: rounding is the largest source, and {fall}"
    first = rows[0]
    return (
        f"make {first.source!r} quieter, the largest source with {first.share:.0%} of the power, "
        f"or lower the bandwidth, or average: {fall}"
    )
