"""What the user writes: a TOML file becomes frozen, validated values."""

from frontend_sim.scenario.check import check_scenario, scenario_notes
from frontend_sim.scenario.load import load_scenario, parse_scenario
from frontend_sim.scenario.model import Scenario, SimulationSettings
from frontend_sim.scenario.schema import json_schema
from frontend_sim.scenario.write import scenario_text

__all__ = [
    "Scenario",
    "SimulationSettings",
    "check_scenario",
    "json_schema",
    "load_scenario",
    "parse_scenario",
    "scenario_notes",
    "scenario_text",
]
