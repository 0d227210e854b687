"""Simulate sampled sensor front ends: what arrives, the analog chain, the ADC, the codes.

    import frontend_sim as fe
    scenario = fe.load_single_scenario("scenarios/well_pump_valve_slam.toml")
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
        ScanRecord,
        open_record,
        open_single_record,
        record_run,
        rerun,
        rerun_scenario,
        save_record,
    )
    from frontend_sim.archive.set_table import SetTable, open_set
    from frontend_sim.comparison import (
        RecordComparison,
        SetComparison,
        Tolerances,
        attribute,
        compare_records,
        compare_scans,
        compare_sets,
        parse_tolerances,
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
    from frontend_sim.measure.scan import inspect_scan
    from frontend_sim.measure.sensitivity import CheckSensitivity, sensitivities
    from frontend_sim.present import (
        plot_inspection,
        plot_map,
        plot_run,
        plot_scan,
        plot_scan_inspection,
        plot_sensitivities,
        plot_solution,
    )
    from frontend_sim.present.page import night_page, record_page, write_page
    from frontend_sim.quantities import Part, Preferred, preferred
    from frontend_sim.replay import Replayed, preview_set, read_set, replay_set
    from frontend_sim.scenario import (
        Channel,
        Environment,
        Scan,
        ScanScenario,
        Scenario,
        SimulationSettings,
        SpreadPart,
        check_scenario,
        circuit_of,
        json_schema,
        load_scenario,
        load_single_scenario,
        parse_scenario,
        scenario_text,
        spread_parts,
        with_values,
    )
    from frontend_sim.simulation import (
        GridReport,
        Run,
        RunBlock,
        ScanRun,
        ScanSimulation,
        Simulation,
        simulate,
    )
    from frontend_sim.solve import PassMap, Solution, keep_proof, pass_map, solve_for, varied
    from frontend_sim.summary import NightSummary, summarize

_HOME = {
    "Adc": "converter.adc",
    "Chain": "analog.chain",
    "CheckSensitivity": "measure.sensitivity",
    "Environment": "scenario",
    "FrontendSimError": "errors",
    "GridReport": "simulation",
    "InputError": "errors",
    "Inspection": "measure.response",
    "ModelError": "errors",
    "NightSummary": "summary",
    "OutputError": "errors",
    "OversamplingAdc": "converter",
    "Part": "quantities",
    "PassMap": "solve",
    "Preferred": "quantities",
    "QuantityError": "errors",
    "Record": "archive",
    "RecordComparison": "comparison",
    "RecordError": "errors",
    "RecordingError": "errors",
    "Replayed": "replay",
    "Result": "measure.result",
    "Run": "simulation",
    "RunBlock": "simulation",
    "Scenario": "scenario",
    "ScenarioError": "errors",
    "SetComparison": "comparison",
    "SetTable": "archive.set_table",
    "Simulation": "simulation",
    "SimulationSettings": "scenario",
    "Solution": "solve",
    "SpreadPart": "scenario",
    "Tolerances": "comparison",
    "attribute": "comparison",
    "chain_of": "analog.chain",
    "check_scenario": "scenario",
    "circuit_of": "scenario",
    "compare_records": "comparison",
    "compare_scans": "comparison",
    "compare_sets": "comparison",
    "evaluate_checks": "measure.checks",
    "inspect_scenario": "measure.response",
    "json_schema": "scenario",
    "keep_proof": "solve",
    "load_scenario": "scenario",
    "night_page": "present.page",
    "open_record": "archive",
    "open_set": "archive.set_table",
    "parse_scenario": "scenario",
    "parse_tolerances": "comparison",
    "pass_map": "solve",
    "plot_inspection": "present",
    "plot_map": "present",
    "plot_run": "present",
    "plot_sensitivities": "present",
    "plot_solution": "present",
    "preferred": "quantities",
    "preview_set": "replay",
    "read_set": "replay",
    "record_page": "present.page",
    "record_run": "archive",
    "replay_set": "replay",
    "rerun": "archive",
    "rerun_scenario": "archive",
    "save_record": "archive",
    "scenario_text": "scenario",
    "sensitivities": "measure.sensitivity",
    "simulate": "simulation",
    "solve_for": "solve",
    "spread_parts": "scenario",
    "summarize": "summary",
    "varied": "solve",
    "with_values": "scenario",
    "write_page": "present.page",
    "ScanScenario": "scenario",
    "Channel": "scenario",
    "Scan": "scenario",
    "ScanSimulation": "simulation",
    "ScanRun": "simulation",
    "ScanRecord": "archive",
    "inspect_scan": "measure.scan",
    "plot_scan": "present",
    "plot_scan_inspection": "present",
    "open_single_record": "archive",
    "load_single_scenario": "scenario",
}

__all__ = [
    "Adc",
    "Chain",
    "Channel",
    "CheckSensitivity",
    "Environment",
    "FrontendSimError",
    "GridReport",
    "InputError",
    "Inspection",
    "ModelError",
    "NightSummary",
    "OutputError",
    "OversamplingAdc",
    "Part",
    "PassMap",
    "Preferred",
    "QuantityError",
    "Record",
    "RecordComparison",
    "RecordError",
    "RecordingError",
    "Replayed",
    "Result",
    "Run",
    "RunBlock",
    "Scan",
    "ScanRecord",
    "ScanRun",
    "ScanScenario",
    "ScanSimulation",
    "Scenario",
    "ScenarioError",
    "SetComparison",
    "SetTable",
    "Simulation",
    "SimulationSettings",
    "Solution",
    "SpreadPart",
    "Tolerances",
    "attribute",
    "chain_of",
    "check_scenario",
    "circuit_of",
    "compare_records",
    "compare_scans",
    "compare_sets",
    "evaluate_checks",
    "inspect_scan",
    "inspect_scenario",
    "json_schema",
    "keep_proof",
    "load_scenario",
    "load_single_scenario",
    "night_page",
    "open_record",
    "open_set",
    "open_single_record",
    "parse_scenario",
    "parse_tolerances",
    "pass_map",
    "plot_inspection",
    "plot_map",
    "plot_run",
    "plot_scan",
    "plot_scan_inspection",
    "plot_sensitivities",
    "plot_solution",
    "preferred",
    "preview_set",
    "read_set",
    "record_page",
    "record_run",
    "replay_set",
    "rerun",
    "rerun_scenario",
    "save_record",
    "scenario_text",
    "sensitivities",
    "simulate",
    "solve_for",
    "spread_parts",
    "summarize",
    "varied",
    "with_values",
    "write_page",
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
