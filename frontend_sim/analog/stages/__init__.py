"""The kinds of stage, one per file. ``AnyStage`` is the kind table."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from frontend_sim.analog.stages.ac_coupled_source import AcCoupledSource
from frontend_sim.analog.stages.accelerometer import Accelerometer
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.bessel import Bessel
from frontend_sim.analog.stages.buffer import Buffer
from frontend_sim.analog.stages.butterworth import Butterworth
from frontend_sim.analog.stages.chebyshev import Chebyshev
from frontend_sim.analog.stages.clamp import Clamp
from frontend_sim.analog.stages.current_shunt import CurrentShunt
from frontend_sim.analog.stages.difference_amplifier import DifferenceAmplifier
from frontend_sim.analog.stages.gain import Gain
from frontend_sim.analog.stages.inverting_amplifier import InvertingAmplifier
from frontend_sim.analog.stages.ladder import Ladder
from frontend_sim.analog.stages.multiple_feedback import MultipleFeedback
from frontend_sim.analog.stages.noninverting_amplifier import NoninvertingAmplifier
from frontend_sim.analog.stages.photodiode import Photodiode
from frontend_sim.analog.stages.poles_zeros import PolesZeros
from frontend_sim.analog.stages.polynomial import Polynomial
from frontend_sim.analog.stages.potentiometer import Potentiometer
from frontend_sim.analog.stages.rail_limit import RailLimit
from frontend_sim.analog.stages.rc_highpass import RcHighpass
from frontend_sim.analog.stages.rc_lowpass import RcLowpass
from frontend_sim.analog.stages.resistive_bridge import ResistiveBridge
from frontend_sim.analog.stages.rtd import Rtd
from frontend_sim.analog.stages.sallen_key import SallenKey
from frontend_sim.analog.stages.second_order import SecondOrder
from frontend_sim.analog.stages.slew_limit import SlewLimit
from frontend_sim.analog.stages.thermal_lag import ThermalLag
from frontend_sim.analog.stages.thermistor import Thermistor
from frontend_sim.analog.stages.thermocouple import Thermocouple
from frontend_sim.analog.stages.transimpedance_amplifier import TransimpedanceAmplifier
from frontend_sim.analog.stages.transport_delay import TransportDelay
from frontend_sim.analog.stages.twin_t_notch import TwinTNotch
from frontend_sim.values import table

AnyStage = Annotated[
    ThermalLag
    | Rtd
    | Thermistor
    | Thermocouple
    | Accelerometer
    | ResistiveBridge
    | Potentiometer
    | Photodiode
    | CurrentShunt
    | AcCoupledSource
    | RcLowpass
    | RcHighpass
    | Gain
    | NoninvertingAmplifier
    | InvertingAmplifier
    | Buffer
    | DifferenceAmplifier
    | TransimpedanceAmplifier
    | SecondOrder
    | Butterworth
    | Bessel
    | Chebyshev
    | Ladder
    | SallenKey
    | MultipleFeedback
    | TwinTNotch
    | PolesZeros
    | Polynomial
    | TransportDelay
    | RailLimit
    | SlewLimit
    | Clamp,
    Field(discriminator="kind"),
]

STAGES: dict[str, type[Stage]] = table(AnyStage)
