"""The error of codes against the quantity that arrived, with its parts."""

from frontend_sim.measure.error.ideal import Ideal
from frontend_sim.measure.error.part import Part
from frontend_sim.measure.error.total import TotalError, refuse_looks_of_a_scan, total_error

__all__ = ["Ideal", "Part", "TotalError", "refuse_looks_of_a_scan", "total_error"]
