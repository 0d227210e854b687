"""What the user writes: a TOML file becomes frozen, validated values."""

from frontend_sim.scenario.check import check_scenario, scenario_notes
from frontend_sim.scenario.circuit import circuit_of, stages_of
from frontend_sim.scenario.environment import Environment
from frontend_sim.scenario.key import dimension_at, numeric_keys, value_at
from frontend_sim.scenario.load import load_scenario, load_single_scenario, parse_scenario
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan import Channel, Scan
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario, single
from frontend_sim.scenario.schema import json_schema
from frontend_sim.scenario.settings import SimulationSettings
from frontend_sim.scenario.spread import SpreadPart, spread_parts
from frontend_sim.scenario.vary import with_values
from frontend_sim.scenario.write import scenario_text

__all__ = [
    "AnyScenario",
    "Channel",
    "Environment",
    "Scan",
    "ScanScenario",
    "Scenario",
    "SimulationSettings",
    "SpreadPart",
    "check_scenario",
    "circuit_of",
    "dimension_at",
    "json_schema",
    "load_scenario",
    "load_single_scenario",
    "numeric_keys",
    "parse_scenario",
    "scenario_notes",
    "scenario_text",
    "single",
    "spread_parts",
    "stages_of",
    "value_at",
    "with_values",
]
