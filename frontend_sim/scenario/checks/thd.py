"""Harmonic distortion of a tone."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Decibel
from frontend_sim.scenario.checks.tone import ToneCheck


class ThdCheck(ToneCheck):
    """The harmonics together stay far enough below the tone."""

    kind: Literal["thd"] = "thd"
    at_most: Decibel = Field(description="most total harmonic distortion, a level below zero")
