"""Simulate sampled sensor front ends: what arrives, the analog chain, the ADC, the codes.

    import frontend_sim as fe
    scenario = fe.load_scenario("scenarios/well_pump_valve_slam.toml")
    run = fe.simulate(scenario)
    run.codes, run.time, run.pin             # NumPy arrays
    fe.save_record(run, "valve_slam.h5")

The names below are the public interface. They load on first use, so that importing the package
costs next to nothing.
"""

from __future__ import annotations

from importlib import import_module, metadata
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from frontend_sim.analog.chain import Chain, chain_of
    from frontend_sim.archive import (
        Record,
        open_record,
        record_run,
        rerun,
        rerun_scenario,
        save_record,
    )
    from frontend_sim.converter import OversamplingAdc
    from frontend_sim.converter.adc import Adc
    from frontend_sim.errors import (
        FrontendSimError,
        InputError,
        ModelError,
        OutputError,
        QuantityError,
        RecordError,
        RecordingError,
        ScenarioError,
    )
    from frontend_sim.measure.checks import evaluate_checks
    from frontend_sim.measure.response import Inspection, inspect_scenario
    from frontend_sim.measure.result import Result
    from frontend_sim.present import plot_inspection, plot_run
    from frontend_sim.quantities import Part, Preferred, preferred
    from frontend_sim.scenario import (
        Environment,
        Scenario,
        SimulationSettings,
        SpreadPart,
        check_scenario,
        circuit_of,
        json_schema,
        load_scenario,
        parse_scenario,
        scenario_text,
        spread_parts,
        with_values,
    )
    from frontend_sim.simulation import GridReport, Run, RunBlock, Simulation, simulate

_HOME = {
    "Adc": "converter.adc",
    "Chain": "analog.chain",
    "Environment": "scenario",
    "FrontendSimError": "errors",
    "GridReport": "simulation",
    "InputError": "errors",
    "Inspection": "measure.response",
    "ModelError": "errors",
    "OutputError": "errors",
    "OversamplingAdc": "converter",
    "Part": "quantities",
    "Preferred": "quantities",
    "QuantityError": "errors",
    "Record": "archive",
    "RecordError": "errors",
    "RecordingError": "errors",
    "Result": "measure.result",
    "Run": "simulation",
    "RunBlock": "simulation",
    "Scenario": "scenario",
    "ScenarioError": "errors",
    "Simulation": "simulation",
    "SimulationSettings": "scenario",
    "SpreadPart": "scenario",
    "chain_of": "analog.chain",
    "check_scenario": "scenario",
    "evaluate_checks": "measure.checks",
    "circuit_of": "scenario",
    "inspect_scenario": "measure.response",
    "json_schema": "scenario",
    "load_scenario": "scenario",
    "open_record": "archive",
    "parse_scenario": "scenario",
    "plot_inspection": "present",
    "plot_run": "present",
    "preferred": "quantities",
    "record_run": "archive",
    "rerun": "archive",
    "rerun_scenario": "archive",
    "save_record": "archive",
    "scenario_text": "scenario",
    "simulate": "simulation",
    "spread_parts": "scenario",
    "with_values": "scenario",
}

__all__ = [
    "Adc",
    "Chain",
    "Environment",
    "FrontendSimError",
    "GridReport",
    "InputError",
    "Inspection",
    "ModelError",
    "OutputError",
    "OversamplingAdc",
    "Part",
    "Preferred",
    "QuantityError",
    "Record",
    "RecordError",
    "RecordingError",
    "Result",
    "Run",
    "RunBlock",
    "Scenario",
    "ScenarioError",
    "Simulation",
    "SimulationSettings",
    "SpreadPart",
    "chain_of",
    "check_scenario",
    "circuit_of",
    "evaluate_checks",
    "inspect_scenario",
    "json_schema",
    "load_scenario",
    "open_record",
    "parse_scenario",
    "plot_inspection",
    "plot_run",
    "preferred",
    "record_run",
    "rerun",
    "rerun_scenario",
    "save_record",
    "scenario_text",
    "simulate",
    "spread_parts",
    "with_values",
]


def __getattr__(name: str) -> object:
    """Load a public name where it lives, at its first use."""
    if name == "__version__":
        return metadata.version("frontend-sim")
    if name not in _HOME:
        raise AttributeError(f"module 'frontend_sim' has no attribute {name!r}")
    value = getattr(import_module(f"frontend_sim.{_HOME[name]}"), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    """List the public names."""
    return [*__all__, "__version__"]
