"""What a night says: yield, worst cases, distributions, causes."""

from frontend_sim.summary.check_summary import CheckSummary
from frontend_sim.summary.measure_summary import MeasureSummary
from frontend_sim.summary.night_summary import NightSummary, summarize
from frontend_sim.summary.population import Population

__all__ = ["CheckSummary", "MeasureSummary", "NightSummary", "Population", "summarize"]
