"""Which function evaluates which kind of check, and what it needs of a run."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from frontend_sim.measure.checks.acquisition import acquisition, acquisition_possible
from frontend_sim.measure.checks.alias_attenuation import alias_attenuation
from frontend_sim.measure.checks.alias_error import alias_error, alias_possible
from frontend_sim.measure.checks.answer import Answer
from frontend_sim.measure.checks.clipping import clipping
from frontend_sim.measure.checks.corner import corner
from frontend_sim.measure.checks.droop import droop
from frontend_sim.measure.checks.edge import (
    delay,
    delay_possible,
    latency,
    latency_possible,
    rise_time,
    rise_time_possible,
)
from frontend_sim.measure.checks.grid_error import grid_error
from frontend_sim.measure.checks.headroom import headroom
from frontend_sim.measure.checks.level import level
from frontend_sim.measure.checks.linearity import dnl, inl, linearity_possible
from frontend_sim.measure.checks.mains_level import mains_level, mains_possible
from frontend_sim.measure.checks.noise import noise, noise_free_bits, noise_possible
from frontend_sim.measure.checks.overshoot import overshoot, overshoot_possible
from frontend_sim.measure.checks.recovery import recovery, recovery_possible
from frontend_sim.measure.checks.rejection import rejection
from frontend_sim.measure.checks.settling import settling, settling_possible
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.tone import effective_bits, sfdr, sinad, snr, thd
from frontend_sim.measure.checks.total_error import total_error, total_possible
from frontend_sim.measure.checks.undershoot import undershoot, undershoot_possible


@dataclass(frozen=True)
class Evaluation:
    """How a kind of check is evaluated.

    Parameters
    ----------
    measure : finds the value after the run
    columns : arrays of the run that it reads
    possible : raises MeasureError before the run where no run could answer
    """

    measure: Callable[[Any, Subject], Answer]
    columns: tuple[str, ...] = ()
    possible: Callable[[Any, Subject], object] | None = None


_TONE = ("time", "voltage")
_NOISE = ("time", "pin", "held", "voltage", "overrange")
_LEVELS = ("time", "pin", "held", "codes")

EVALUATIONS: dict[str, Evaluation] = {
    "settling": Evaluation(settling, ("time", "pin"), settling_possible),
    "overshoot": Evaluation(overshoot, ("time", "pin"), overshoot_possible),
    "undershoot": Evaluation(undershoot, ("time", "pin"), undershoot_possible),
    "rise-time": Evaluation(rise_time, (), rise_time_possible),
    "delay": Evaluation(delay, (), delay_possible),
    "latency": Evaluation(latency, ("time", "voltage"), latency_possible),
    "level": Evaluation(level),
    "droop": Evaluation(droop),
    "clipping": Evaluation(clipping, ("time", "pin", "overrange")),
    "headroom": Evaluation(headroom, ("time", "pin")),
    "recovery": Evaluation(recovery, ("time", "pin", "overrange"), recovery_possible),
    "noise": Evaluation(noise, _NOISE, noise_possible),
    "noise-free-bits": Evaluation(noise_free_bits, _NOISE, noise_possible),
    "snr": Evaluation(snr, _TONE),
    "sinad": Evaluation(sinad, _TONE),
    "effective-bits": Evaluation(effective_bits, _TONE),
    "thd": Evaluation(thd, _TONE),
    "sfdr": Evaluation(sfdr, _TONE),
    "inl": Evaluation(inl, _LEVELS, linearity_possible),
    "dnl": Evaluation(dnl, _LEVELS, linearity_possible),
    "total-error": Evaluation(total_error, ("time", "pin", "held", "voltage"), total_possible),
    "alias-error": Evaluation(alias_error, ("time",), alias_possible),
    "corner": Evaluation(corner, (), corner),
    "rejection": Evaluation(rejection, (), rejection),
    "alias-attenuation": Evaluation(alias_attenuation, (), alias_attenuation),
    "mains-level": Evaluation(mains_level, _TONE, mains_possible),
    "acquisition": Evaluation(acquisition, ("time", "pin", "held"), acquisition_possible),
    "grid-error": Evaluation(grid_error),
}
"""Kind -> how it is evaluated; the kinds are those of ``frontend_sim.scenario.checks.CHECKS``."""
