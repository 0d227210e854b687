"""All measures in one place; ``docs/measures.md`` lists what each takes and gives.

They live in the folders of ``frontend_sim.measure`` and load on first use.

    from frontend_sim import measures
    measures.fit_sine(run.voltage, rate=run.scenario.adc.rate)
    measures.alias_error(run).peak_lsb
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from frontend_sim.measure.aliasing import (
        alias_error,
        aliasing_of,
        part_above,
        sampled_alias_error,
    )
    from frontend_sim.measure.checks import checks_before_run, evaluate_checks
    from frontend_sim.measure.circuit_noise import circuit_noise
    from frontend_sim.measure.error import total_error
    from frontend_sim.measure.linearity import (
        ramp_linearity,
        ramp_samples_needed,
        sine_linearity,
        sine_samples_needed,
    )
    from frontend_sim.measure.mains import mains_levels, mains_rejection, rejections, tone_levels
    from frontend_sim.measure.noise import (
        before_rounding,
        code_histogram,
        code_noise,
        noise_of,
        rms_interval,
    )
    from frontend_sim.measure.noise_budget import noise_budget
    from frontend_sim.measure.response import inspect_scenario
    from frontend_sim.measure.sine_fit import cramer_rao, fit_sine, fit_sine_at
    from frontend_sim.measure.spectrum import (
        amplitude_spectrum,
        coherence_of,
        coherent_tone,
        folded,
        window_named,
    )
    from frontend_sim.measure.tone_quality import tone_quality
    from frontend_sim.measure.transition import (
        delay,
        droop_of,
        excursions_of,
        rise_time,
        sampled_settling,
    )

_HOME = {
    "alias_error": "aliasing",
    "aliasing_of": "aliasing",
    "amplitude_spectrum": "spectrum",
    "before_rounding": "noise",
    "checks_before_run": "checks",
    "circuit_noise": "circuit_noise",
    "code_histogram": "noise",
    "code_noise": "noise",
    "coherence_of": "spectrum",
    "coherent_tone": "spectrum",
    "cramer_rao": "sine_fit",
    "delay": "transition",
    "droop_of": "transition",
    "evaluate_checks": "checks",
    "excursions_of": "transition",
    "fit_sine": "sine_fit",
    "fit_sine_at": "sine_fit",
    "folded": "spectrum",
    "inspect_scenario": "response",
    "mains_levels": "mains",
    "mains_rejection": "mains",
    "noise_budget": "noise_budget",
    "noise_of": "noise",
    "part_above": "aliasing",
    "ramp_linearity": "linearity",
    "ramp_samples_needed": "linearity",
    "rejections": "mains",
    "rise_time": "transition",
    "rms_interval": "noise",
    "sampled_alias_error": "aliasing",
    "sampled_settling": "transition",
    "sine_linearity": "linearity",
    "sine_samples_needed": "linearity",
    "tone_levels": "mains",
    "tone_quality": "tone_quality",
    "total_error": "error",
    "window_named": "spectrum",
}

__all__ = [
    "alias_error",
    "aliasing_of",
    "amplitude_spectrum",
    "before_rounding",
    "checks_before_run",
    "circuit_noise",
    "code_histogram",
    "code_noise",
    "coherence_of",
    "coherent_tone",
    "cramer_rao",
    "delay",
    "droop_of",
    "evaluate_checks",
    "excursions_of",
    "fit_sine",
    "fit_sine_at",
    "folded",
    "inspect_scenario",
    "mains_levels",
    "mains_rejection",
    "noise_budget",
    "noise_of",
    "part_above",
    "ramp_linearity",
    "ramp_samples_needed",
    "rejections",
    "rise_time",
    "rms_interval",
    "sampled_alias_error",
    "sampled_settling",
    "sine_linearity",
    "sine_samples_needed",
    "tone_levels",
    "tone_quality",
    "total_error",
    "window_named",
]


def __getattr__(name: str) -> object:
    """Load a measure where it lives, at its first use."""
    if name not in _HOME:
        raise AttributeError(f"module 'frontend_sim.measures' has no attribute {name!r}")
    return getattr(import_module(f"frontend_sim.measure.{_HOME[name]}"), name)


def __dir__() -> list[str]:
    """List the measures."""
    return list(__all__)
