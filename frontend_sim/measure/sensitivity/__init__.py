"""Which part, rate or time moves the measures of the checks most."""

from frontend_sim.measure.sensitivity.derivative import Slope, slopes
from frontend_sim.measure.sensitivity.parameter import Parameter, parameters_of
from frontend_sim.measure.sensitivity.sensitivity import (
    CheckSensitivity,
    Sensitivity,
    sensitivities,
)

__all__ = [
    "CheckSensitivity",
    "Parameter",
    "Sensitivity",
    "Slope",
    "parameters_of",
    "sensitivities",
    "slopes",
]
