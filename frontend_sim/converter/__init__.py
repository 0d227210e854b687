"""When and how the ADC looks: clock, range, quantizer. ``AnyAdc`` is the kind table."""

from __future__ import annotations

from typing import Annotated, Any

from pydantic import Discriminator, Tag

from frontend_sim.converter.adc import Adc
from frontend_sim.converter.base import Converter
from frontend_sim.converter.oversampling import OversamplingAdc

__all__ = ["ADCS", "Adc", "AnyAdc", "Converter", "OversamplingAdc"]


def _kind(value: Any) -> str:
    """Return the kind of a table; one without a kind is a sampling converter."""
    if isinstance(value, dict):
        kind = value.get("kind", "sampling")
        return kind if isinstance(kind, str) else "unknown"
    return str(getattr(value, "kind", "sampling"))


AnyAdc = Annotated[
    Annotated[Adc, Tag("sampling")] | Annotated[OversamplingAdc, Tag("oversampling")],
    Discriminator(_kind),
]

ADCS: dict[str, type[Converter]] = {"sampling": Adc, "oversampling": OversamplingAdc}
