"""Conversions beyond the range of the converter."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from frontend_sim.quantities import Share
from frontend_sim.scenario.checks.base import CodeCheck


class ClippingCheck(CodeCheck):
    """No conversion is clipped at an end of the range, or only a share of them."""

    kind: Literal["clipping"] = "clipping"
    at_most: Share = Field(default=0.0, description="share of the conversions that may be clipped")
