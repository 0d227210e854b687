"""The scenario: everything that one run depends on, frozen and validated."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field

from frontend_sim.analog.stages import AnyStage
from frontend_sim.converter.adc import Adc
from frontend_sim.quantities import Frequency, PositiveTime
from frontend_sim.stimulus import AnyStimulus
from frontend_sim.values import Value

Discretization = Literal["exact", "zoh", "foh", "bilinear"]


def _auto_or(value: object) -> object:
    return None if value == "auto" else value


def _without_lsb(value: object) -> object:
    if isinstance(value, str) and value.strip().endswith("LSB"):
        return value.strip()[:-3].strip()
    return value


Lsb = Annotated[
    float,
    BeforeValidator(_without_lsb, json_schema_input_type=float | str),
    Field(gt=0.0, json_schema_extra={"unit": "LSB", "examples": ["0.05 LSB"]}),
]


class SimulationSettings(Value):
    """How the run is computed and what is kept of it."""

    duration: PositiveTime | None = Field(
        default=None,
        description="conversions are taken for t in [0, duration); left out, the length of the recording",
    )
    discretization: Discretization = Field(
        default="exact",
        description="exact, or a discrete model of the chain at grid_rate: zoh (step-invariant), "
        "foh (ramp-invariant), bilinear (trapezoidal)",
    )
    grid_rate: Annotated[
        Frequency | None, BeforeValidator(_auto_or, json_schema_input_type=str | float)
    ] = Field(
        default=None,
        description='points per second of a discrete model; "auto" (the default) picks the '
        "coarsest multiple of the conversion rate whose estimated error stays below accuracy",
    )
    accuracy: Lsb = Field(
        default=0.05, description='largest error of a grid picked by "auto", in LSB'
    )
    prewarp: Frequency | None = Field(
        default=None, description="frequency that the bilinear model keeps exactly"
    )
    initial: Literal["settled", "rest"] = Field(
        default="settled",
        description="before t = 0 the chain has settled on the stimulus's first value, or is at rest",
    )
    waveform_rate: Frequency | None = Field(
        default=None, description="points per second of the kept waveforms; left out, none is kept"
    )
    waveform_points: tuple[str, ...] | None = Field(
        default=None,
        description='points of the chain whose waveform is kept: "stimulus" or names of stages; '
        "left out, all of them",
    )


class Scenario(Value):
    """What arrives, what the circuit does to it, how the converter looks, and how it is computed."""

    format: Literal[1] = Field(default=1, description="version of the scenario format")
    title: str = Field(default="", max_length=200, description="what the scenario shows")
    seed: int = Field(
        default=0, ge=0, lt=2**63, strict=True, description="seed of everything random in the run"
    )
    stimulus: AnyStimulus = Field(description="what arrives at the first stage")
    chain: tuple[AnyStage, ...] = Field(
        default=(), description="the stages, in order from the sensor to the converter's pin"
    )
    adc: Adc = Field(description="the converter")
    simulation: SimulationSettings = Field(
        default=SimulationSettings(), description="how the run is computed"
    )
    source: str = Field(default="", exclude=True, repr=False, description="the file as written")

    def resolved(self) -> dict[str, Any]:
        """Return every value in SI units, defaults filled in, as plain data for JSON."""
        return self.model_dump(mode="json")

    def digest(self) -> str:
        """Return the SHA-256 of the resolved values, files counted by content, not by name.

        The same scenario in another folder has the same digest; title and source text do not
        count.
        """
        values = self.resolved()
        del values["title"]
        named = {str(file): sha256_of(file) for file in self.stimulus.files()}
        text = json.dumps(_renamed(values, named), sort_keys=True, separators=(",", ":"))
        return hashlib.sha256(text.encode()).hexdigest()


def sha256_of(file: Path) -> str:
    """Return the SHA-256 of a file's content, read in blocks."""
    with file.open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()


def _renamed(value: Any, names: dict[str, str]) -> Any:  # noqa: ANN401 - JSON has no tighter type
    if isinstance(value, dict):
        return {key: _renamed(item, names) for key, item in value.items()}
    if isinstance(value, list):
        return [_renamed(item, names) for item in value]
    return names.get(value, value) if isinstance(value, str) else value
