"""What can only be checked once the stimulus is opened and the circuit composed."""

from __future__ import annotations

import tomllib
from typing import Any

from frontend_sim.analog.section import Section
from frontend_sim.converter import AnyAdc
from frontend_sim.errors import ModelError, Problem, RecordingError, ScenarioError
from frontend_sim.quantities import TIME, as_text
from frontend_sim.scenario.channel_scenario import ChannelScenario, with_channel
from frontend_sim.scenario.checks.rules import instant_faults
from frontend_sim.scenario.fault import problem
from frontend_sim.scenario.input_port import discretization_fault, input_network_of, input_port
from frontend_sim.scenario.locate import lines_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.rules import Path
from frontend_sim.scenario.scan_scenario import NO_END, AnyScenario, ScanScenario
from frontend_sim.scenario.spread import moved

ROUNDING = 1e-9
"""Share by which a duration may exceed a recording, as rounding of either makes it."""


def check_scenario(scenario: AnyScenario, name: str = "") -> None:
    """Check that a scenario can be run: its stimulus is there and long enough, its stages stable.

    In a scan every channel is checked.

    Parameters
    ----------
    name : what the scenario is called in messages

    Raises
    ------
    RecordingError
        If a recorded stimulus cannot be read.
    ScenarioError
        If the run has no duration, or one beyond the end of what is known of the stimulus, or no
        conversion falls into it, or a table of the converter cannot be read or does not fit it.
    ModelError
        If a stage is unstable, or a drift takes a part or the reference to a value that it cannot
        have.
    """
    if isinstance(scenario, ScanScenario):
        _check_scan(scenario, name)
        return
    try:
        known = scenario.stimulus.known_length()
    except RecordingError as error:
        raise RecordingError(_located(scenario, name, ("stimulus",), str(error))) from error
    text = _duration_fault(scenario, known)
    if text is not None:
        raise ScenarioError([problem_of(scenario, ("simulation", "duration"), text)], name)
    if scenario.simulation.duration is None and known is not None:
        late = [problem_of(scenario, *fault) for fault in instant_faults(scenario.check, known)]
        if late:
            raise ScenarioError(late, name)
    temperature = scenario.environment.temperature
    for position, stage in enumerate(scenario.chain):
        label = stage.label(position + 1)
        try:
            warm = moved(stage, temperature, label)
            Section.of(warm, label, temperature)
            warm.limiter(temperature)
        except ModelError as error:
            raise ModelError(_located(scenario, name, ("chain", position), str(error))) from error
    try:
        scenario.adc.digitizer(scenario.seed, temperature)
    except ScenarioError as error:
        path = ("adc", "nonlinearity", "table")
        raise ScenarioError([problem_of(scenario, path, str(error))], name) from error
    except ModelError as error:
        raise ModelError(_located(scenario, name, ("adc", "reference"), str(error))) from error
    _check_input(scenario, name)


def _check_input(scenario: Scenario, name: str) -> None:
    """Check that the converter's input network can stand behind the last stage."""
    if (fault := discretization_fault(scenario)) is not None:
        path: Path = ("simulation", "discretization")
        raise ScenarioError([problem_of(scenario, path, fault)], name)
    found = input_network_of(scenario)
    if found is None:
        return
    path = ("chain", len(scenario.chain) - 1) if scenario.chain else ("adc", "input")
    try:
        input_port(scenario, found[1])
    except ModelError as error:
        raise ModelError(_located(scenario, name, path, str(error))) from error


def _check_scan(scan: ScanScenario, name: str) -> None:
    for channel in scan.channels():
        try:
            known = channel.stimulus.known_length()
        except RecordingError as error:
            raise RecordingError(_located(channel, name, ("stimulus",), str(error))) from error
        if known is not None or scan.simulation.duration is not None:
            check_scenario(channel, name)
    try:
        length = scan.run_length()
    except ScenarioError as error:
        path = ("simulation", "duration")
        raise ScenarioError([problem_of(scan, path, NO_END)], name) from error
    for channel in scan.channels(length):
        check_scenario(channel, name)


def scenario_notes(scenario: Scenario) -> tuple[str, ...]:
    """Return what is allowed in a scenario but has no effect, for the log of a run."""
    settings = scenario.simulation
    notes = []
    linear = all(stage.limiter() is None for stage in scenario.chain)
    if settings.discretization == "exact" and settings.grid_rate is not None and linear:
        notes.append(
            'simulation.grid_rate has no effect on a run with discretization = "exact" and nothing '
            "in the chain that limits; inspect shows how far discrete models at this rate are from "
            "exact"
        )
    usual = type(settings).model_fields["accuracy"].default
    if settings.grid_rate is not None and settings.accuracy != usual:
        notes.append('simulation.accuracy has no effect unless grid_rate = "auto"')
    return tuple(notes)


def _duration_fault(scenario: Scenario, known: float | None) -> str | None:
    duration = scenario.simulation.duration
    if duration is None and known is None:
        return (
            f"missing; a {getattr(scenario.stimulus, 'kind', 'stimulus')} never ends by itself, so "
            'say how long to run, for instance duration = "10 ms"'
        )
    if duration is None or known is None:
        return scenario.length_fault(known) if known is not None else None
    end = known * (1.0 + ROUNDING)
    if duration <= end or _all_conversions_before(end, duration, scenario.adc):
        return None
    hold = ', or set stimulus.beyond = "hold"' if hasattr(scenario.stimulus, "beyond") else ""
    return (
        f"given {as_text(duration, TIME, 9)}, but the stimulus is known for "
        f"{as_text(known, TIME, 9)} only; shorten duration, or leave it out to run to the end of "
        f"the stimulus{hold}"
    )


def _all_conversions_before(end: float, duration: float, adc: AnyAdc) -> bool:
    """Return whether a duration ends less than a conversion's interval late, and none is lost.

    N points at a rate may be said to last N or N - 1 intervals; both are let pass.
    """
    since = (adc.code_count(duration) - 1) / adc.true_rate
    last = adc.code_instant(0) + since + adc.aperture_delay
    return last <= end and duration <= end + 1.0 / adc.true_rate


def problem_of(scenario: AnyScenario, path: Path, text: str) -> Problem:
    """Return what is wrong at a path of a scenario, with its key and line.

    Parameters
    ----------
    path : keys and positions from the top of the scenario, ``("check", 0, "before")``
    text : the whole message
    """
    source = scenario.file_text
    if isinstance(scenario, ChannelScenario):
        text = with_channel(path, text, scenario.channel)
    data: dict[str, Any] = tomllib.loads(source) if source else {}
    return problem(scenario.in_file(path), text, data, lines_of(source, data))


def _located(scenario: AnyScenario, name: str, path: Path, text: str) -> str:
    return str(ScenarioError([problem_of(scenario, path, text)], name))
