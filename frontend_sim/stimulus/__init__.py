"""What arrives: shapes, bursts of noise, recordings. ``AnyStimulus`` is the kind table."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from frontend_sim.stimulus.base import Stimulus
from frontend_sim.stimulus.chirp import Chirp
from frontend_sim.stimulus.double_exponential import DoubleExponential
from frontend_sim.stimulus.half_sine import HalfSine
from frontend_sim.stimulus.noise_burst import NoiseBurst
from frontend_sim.stimulus.pulse import Pulse
from frontend_sim.stimulus.ramp import Ramp
from frontend_sim.stimulus.recording import Recording
from frontend_sim.stimulus.sine import Sine
from frontend_sim.stimulus.step import Step
from frontend_sim.stimulus.sum import Sum
from frontend_sim.stimulus.tones import Tones
from frontend_sim.values import table

AnyStimulus = Annotated[
    Step
    | Ramp
    | Sine
    | Tones
    | Chirp
    | Pulse
    | HalfSine
    | DoubleExponential
    | NoiseBurst
    | Sum
    | Recording,
    Field(discriminator="kind"),
]

Sum.model_rebuild(_types_namespace={"AnyStimulus": AnyStimulus})

STIMULI: dict[str, type[Stimulus]] = table(AnyStimulus)
