"""Numbers that follow from the transfer function alone, before any run."""

from frontend_sim.measure.response.inspection import Inspection, inspect_scenario

__all__ = ["Inspection", "inspect_scenario"]
