"""What must hold, each with its limit. ``AnyCheck`` is the kind table."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from frontend_sim.scenario.checks.acquisition import AcquisitionCheck
from frontend_sim.scenario.checks.alias_attenuation import AliasAttenuationCheck
from frontend_sim.scenario.checks.alias_error import AliasErrorCheck
from frontend_sim.scenario.checks.base import Check, CodeCheck, PointCheck
from frontend_sim.scenario.checks.clipping import ClippingCheck
from frontend_sim.scenario.checks.corner import CornerCheck
from frontend_sim.scenario.checks.delay import DelayCheck
from frontend_sim.scenario.checks.dnl import DnlCheck
from frontend_sim.scenario.checks.droop import DroopCheck
from frontend_sim.scenario.checks.effective_bits import EffectiveBitsCheck
from frontend_sim.scenario.checks.grid_error import GridErrorCheck
from frontend_sim.scenario.checks.headroom import HeadroomCheck
from frontend_sim.scenario.checks.inl import InlCheck
from frontend_sim.scenario.checks.latency import LatencyCheck
from frontend_sim.scenario.checks.level import LevelCheck
from frontend_sim.scenario.checks.mains_level import MainsLevelCheck
from frontend_sim.scenario.checks.noise import NoiseCheck
from frontend_sim.scenario.checks.noise_free_bits import NoiseFreeBitsCheck
from frontend_sim.scenario.checks.overshoot import OvershootCheck
from frontend_sim.scenario.checks.recovery import RecoveryCheck
from frontend_sim.scenario.checks.rejection import RejectionCheck
from frontend_sim.scenario.checks.rise_time import RiseTimeCheck
from frontend_sim.scenario.checks.settling import SettlingCheck
from frontend_sim.scenario.checks.sfdr import SfdrCheck
from frontend_sim.scenario.checks.sinad import SinadCheck
from frontend_sim.scenario.checks.snr import SnrCheck
from frontend_sim.scenario.checks.thd import ThdCheck
from frontend_sim.scenario.checks.tone import ToneCheck
from frontend_sim.scenario.checks.total_error import TotalErrorCheck
from frontend_sim.scenario.checks.undershoot import UndershootCheck
from frontend_sim.values import table

AnyCheck = Annotated[
    SettlingCheck
    | OvershootCheck
    | UndershootCheck
    | RiseTimeCheck
    | DelayCheck
    | LatencyCheck
    | LevelCheck
    | DroopCheck
    | ClippingCheck
    | HeadroomCheck
    | RecoveryCheck
    | NoiseCheck
    | NoiseFreeBitsCheck
    | SnrCheck
    | SinadCheck
    | EffectiveBitsCheck
    | ThdCheck
    | SfdrCheck
    | InlCheck
    | DnlCheck
    | TotalErrorCheck
    | AliasErrorCheck
    | CornerCheck
    | RejectionCheck
    | AliasAttenuationCheck
    | MainsLevelCheck
    | AcquisitionCheck
    | GridErrorCheck,
    Field(discriminator="kind"),
]

CHECKS: dict[str, type[Check]] = table(AnyCheck)

__all__ = ["CHECKS", "AnyCheck", "Check", "CodeCheck", "PointCheck", "ToneCheck"]
