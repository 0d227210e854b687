"""The kinds of stage, one per file. ``AnyStage`` is the kind table."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.bessel import Bessel
from frontend_sim.analog.stages.butterworth import Butterworth
from frontend_sim.analog.stages.chebyshev import Chebyshev
from frontend_sim.analog.stages.gain import Gain
from frontend_sim.analog.stages.inverting_amplifier import InvertingAmplifier
from frontend_sim.analog.stages.noninverting_amplifier import NoninvertingAmplifier
from frontend_sim.analog.stages.poles_zeros import PolesZeros
from frontend_sim.analog.stages.polynomial import Polynomial
from frontend_sim.analog.stages.rc_highpass import RcHighpass
from frontend_sim.analog.stages.rc_lowpass import RcLowpass
from frontend_sim.analog.stages.second_order import SecondOrder
from frontend_sim.analog.stages.transport_delay import TransportDelay
from frontend_sim.values import table

AnyStage = Annotated[
    RcLowpass
    | RcHighpass
    | Gain
    | NoninvertingAmplifier
    | InvertingAmplifier
    | SecondOrder
    | Butterworth
    | Bessel
    | Chebyshev
    | PolesZeros
    | Polynomial
    | TransportDelay,
    Field(discriminator="kind"),
]

STAGES: dict[str, type[Stage]] = table(AnyStage, Stage)
