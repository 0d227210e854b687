"""Evaluates how far the codes lie from what they stand for."""

from __future__ import annotations

from frontend_sim.measure.checks import words
from frontend_sim.measure.checks.answer import Answer, in_volts, scaled
from frontend_sim.measure.checks.places import peaks
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.error import Ideal, TotalError, refuse_looks_of_a_scan
from frontend_sim.measure.error import total_error as measured
from frontend_sim.measure.result import Result
from frontend_sim.scenario.checks.total_error import TotalErrorCheck

CURES = {
    "timing": "correct adc.rate_error and aperture_delay in firmware, or take a better clock",
    "gain": "calibrate the gain, or take parts of less tolerance and drift",
    "offset": "calibrate the offset, or take amplifiers with less of it",
    "beyond half the rate": "raise adc.rate, as the codes cannot follow the stimulus, or set "
    "band_limited where it is interference",
    "settling": "give the chain a wider band, wait longer after changes, or let after leave out "
    "what comes before",
    "aliasing": "lower the corner of the filter before the converter, or raise adc.rate",
    "channel change": "wait longer after a change of channel, or give channels stages of their own",
    "nonlinearity": "keep the signal away from limits, take a more linear converter, or correct "
    'the curve of the sensor in firmware (reads = "curve")',
    "acquisition": "lower the source's resistance, lengthen the acquisition, or buffer the pin",
    "noise": "take quieter parts, lower the bandwidth, or average",
    "clipping": "bring the signal into the range",
    "quantization": "take more bits, or fill more of the range",
    "noise and quantization": "take quieter parts, lower the bandwidth, average, or take more bits",
}
"""What helps first against each part."""


ROUNDING = 1e-9
"""A part below this is the rounding of the simulator itself [LSB]."""


IN_COMMON = 1e-5
"""What parts have in common below this share of the total is rounding, under its root."""


def total_error(check: TotalErrorCheck, subject: Subject) -> Answer:
    """Return the error of the codes against the quantity.

    Raises
    ------
    MeasureError
        If the chain has no gain at dc and none is given, or the run is too long.
    """
    found = total_of(check, subject).after(check.after)
    chosen = found.total.peak if check.quantity == "peak" else found.total.rms
    value, unit = scaled(check.at_most, chosen, subject.adc.lsb, subject.whole)
    limit = float(check.at_most)
    most = in_volts(check.at_most, subject.adc.lsb, subject.whole)
    unsure = float(found.unsure.max())
    uncertainty, _ = scaled(check.at_most, unsure, subject.adc.lsb, subject.whole)
    return Answer(
        value,
        unit,
        limit,
        "at most",
        _method(found.ideal) + words.known(unsure),
        lambda: (
            _advice(found, (value + uncertainty) / limit)
            if chosen > most
            else words.cannot_be_told(unsure)
        ),
        tuple(_beside(found)),
        peaks(check.quantity, found.time, found.volts, most - unsure),
        uncertainty,
    )


def _method(ideal: Ideal) -> str:
    if ideal.curve is not None:
        return "codes read back, less what the sensor's nominal curve gives for the quantity"
    return f"codes read back, less {ideal.gain:.6g} times the quantity and {ideal.offset:.6g} V"


def total_possible(check: TotalErrorCheck, subject: Subject) -> None:
    """Refuse a chain without gain at dc, if none is given, and some averages of a scan.

    Raises
    ------
    MeasureError
        As ``Ideal.of`` and ``refuse_looks_of_a_scan`` do.
    """
    refuse_looks_of_a_scan(subject.scenario)
    Ideal.of(subject.scenario, check.gain, check.offset, check.reads == "curve")


def total_of(check: TotalErrorCheck, subject: Subject) -> TotalError:
    """Return the total error of a run; once for all checks that ask alike."""
    key = ("total error", check.gain, check.offset, check.band_limited, check.reads)
    if key not in subject.kept:
        subject.kept[key] = measured(
            subject.finished,
            check.gain,
            check.offset,
            band_limited=check.band_limited,
            prepared=subject.simulation,
            curve=check.reads == "curve",
        )
    found: TotalError = subject.kept[key]
    return found


def _beside(found: TotalError) -> list[Result]:
    rows = [Result("total, peak", found.total.peak / found.lsb, "LSB", method="largest size")]
    rows.append(Result("total, rms", found.total.rms / found.lsb, "LSB", method="over the run"))
    rows += [
        Result(part.name, part.rms / found.lsb, "LSB", method="rms of this part")
        for part in found.parts
        if part.peak > ROUNDING * found.lsb
    ]
    told = "signed root of the mean square of the total less those of the parts"
    if abs(found.common_rms) > IN_COMMON * found.total.rms:
        rows.append(Result("in common", found.common_rms / found.lsb, "LSB", method=told))
    return rows


def _advice(found: TotalError, excess: float) -> str:
    worst = max(found.parts, key=lambda part: part.rms)
    return (
        f"{CURES[worst.name]}: {worst.name} is the largest part with "
        f"{words.voltage(worst.rms)} rms, and the error must fall by a factor of {excess:.3g}"
    )
