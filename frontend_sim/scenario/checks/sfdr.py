"""Spurs beside a tone."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Decibel
from frontend_sim.scenario.checks.tone import ToneCheck


class SfdrCheck(ToneCheck):
    """The strongest line beside the tone stays far enough below it."""

    kind: Literal["sfdr"] = "sfdr"
    at_least: Decibel = Field(description="least spurious-free dynamic range")
