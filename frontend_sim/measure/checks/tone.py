"""Evaluates the quality of the one tone in the codes."""

from __future__ import annotations

from frontend_sim.errors import MeasureError
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.level import quantization_limit
from frontend_sim.measure.tone_quality import ToneQuality, tone_quality
from frontend_sim.scenario.checks.effective_bits import EffectiveBitsCheck
from frontend_sim.scenario.checks.sfdr import SfdrCheck
from frontend_sim.scenario.checks.sinad import SinadCheck
from frontend_sim.scenario.checks.snr import SnrCheck
from frontend_sim.scenario.checks.thd import ThdCheck
from frontend_sim.scenario.checks.tone import ToneCheck


def snr(check: SnrCheck, subject: Subject) -> Answer:
    """Return the signal to noise of the tone. Raises MeasureError as ``quality_of`` does."""
    found = quality_of(check, subject)
    return _level(found.snr, check.at_least, found, subject)


def sinad(check: SinadCheck, subject: Subject) -> Answer:
    """Return signal to noise and distortion. Raises MeasureError as ``quality_of`` does."""
    found = quality_of(check, subject)
    return _level(found.sinad, check.at_least, found, subject)


def sfdr(check: SfdrCheck, subject: Subject) -> Answer:
    """Return the spurious-free dynamic range. Raises MeasureError as ``quality_of`` does."""
    found = quality_of(check, subject)

    def advice() -> str:
        return (
            f"find what makes the line at {found.spur_frequency:.6g} Hz, the strongest beside the "
            "tone: a harmonic, a clipped top, an alias, or mains"
        )

    return Answer(found.sfdr, "dB", check.at_least, "at least", _method(found), advice)


def thd(check: ThdCheck, subject: Subject) -> Answer:
    """Return the total harmonic distortion.

    Raises
    ------
    MeasureError
        As ``quality_of`` does, or if every harmonic folds onto another line.
    """
    found = quality_of(check, subject)
    hidden = ", ".join(map(str, found.hidden))
    if len(found.hidden) == len(found.harmonics):
        raise MeasureError(
            f"harmonics {hidden} all fold onto the tone, the offset or one another, so none can be "
            "told; move the tone away from a simple share of the rate"
        )
    method = _method(found) + (f"; without harmonics {hidden}, hidden by others" if hidden else "")

    def advice() -> str:
        seen = [each for each in found.harmonics if each.amplitude is not None]
        worst = max(seen, key=lambda each: each.amplitude or 0.0, default=None)
        which = "" if worst is None else f"; harmonic {worst.order} is the strongest"
        return f"lower the level of the tone, or give the stages more range{which}"

    return Answer(found.thd, "dB", check.at_most, "at most", method, advice)


def effective_bits(check: EffectiveBitsCheck, subject: Subject) -> Answer:
    """Return the effective number of bits. Raises MeasureError as ``quality_of`` does."""
    found = quality_of(check, subject)
    return Answer(
        found.effective_bits,
        "bit",
        check.at_least,
        "at least",
        _method(found),
        lambda: _advice(found, subject),
    )


def quality_of(check: ToneCheck, subject: Subject) -> ToneQuality:
    """Return noise and distortion of the tone in the codes; once for all checks that ask alike.

    Raises
    ------
    MeasureError
        If there is no tone, or the record cannot tell, see ``tone_quality``.
    """
    key = ("tone", check.after, check.frequency, check.harmonics, check.window)
    if key not in subject.kept:
        subject.kept[key] = tone_quality(
            subject.voltage[subject.first_after(check.after) :],
            subject.adc.true_rate,
            window=check.window,
            harmonics=check.harmonics,
            full_scale=subject.whole,
            frequency=check.frequency,
        )
    found: ToneQuality = subject.kept[key]
    return found


def _level(value: float, least: float, found: ToneQuality, subject: Subject) -> Answer:
    return Answer(value, "dB", least, "at least", _method(found), lambda: _advice(found, subject))


def _method(found: ToneQuality) -> str:
    return f"spectrum of the codes, {found.window} window; IEEE 1241, from memory"


def _advice(found: ToneQuality, subject: Subject) -> str:
    level = found.level or 0.0
    ideal = quantization_limit(subject.adc.bits) + level
    if level < -1.0:
        return (
            f"raise the level of the tone, which is {-level:.1f} dB below full scale; rounding to "
            f"{subject.adc.bits} bits alone leaves {ideal:.1f} dB there"
        )
    return (
        f"rounding to {subject.adc.bits} bits alone leaves {ideal:.1f} dB; beyond that take more "
        "bits, below it less noise, jitter and distortion"
    )
