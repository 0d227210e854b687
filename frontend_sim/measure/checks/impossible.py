"""Checks that no run could answer are refused before there is one."""

from __future__ import annotations

from frontend_sim.errors import MeasureError, ModelError, Problem, ScenarioError
from frontend_sim.measure.checks.subject import Subject
from frontend_sim.measure.checks.table import EVALUATIONS
from frontend_sim.scenario.channel_scenario import ChannelScenario
from frontend_sim.scenario.check import problem_of
from frontend_sim.scenario.checks import PointCheck, ToneCheck
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario
from frontend_sim.simulation import ScanSimulation, Simulation

EVENLY = ("mains-level", "latency")
"""Kinds besides those of tones that need evenly spaced conversions."""


def refuse_impossible(
    scenario: Scenario, name: str = "", prepared: Simulation | None = None
) -> None:
    """Refuse checks that no run of the scenario could answer, before it is run.

    Parameters
    ----------
    name : what the scenario is called in messages
    prepared : the simulation, where there is one already

    Raises
    ------
    ScenarioError
        If there is one; ``problems`` lists them with key and line.
    """
    if not scenario.check:
        return
    subject = Subject(scenario, prepared=prepared)
    problems = []
    for position, check in enumerate(scenario.check):
        possible = EVALUATIONS[check.kind].possible
        if possible is None:
            continue
        try:
            possible(check, subject)
        except (MeasureError, ModelError) as error:
            problems.append(problem_of(scenario, ("check", position), str(error)))
    if problems:
        raise ScenarioError(problems, name)


def refuse_impossible_checks(
    scenario: AnyScenario, name: str = "", prepared: ScanSimulation | None = None
) -> None:
    """Refuse checks that no run of a scenario, or of a channel, could answer, before it is run.

    Parameters
    ----------
    name : what the scenario is called in messages
    prepared : the simulation of a scan, where there is one already

    Raises
    ------
    ScenarioError
        If there is one; ``problems`` lists them with key and line.
    """
    if not isinstance(scenario, ScanScenario):
        refuse_impossible(scenario, name)
        return
    if not scenario.check:
        return
    channels = prepared.channels.values() if prepared else scenario.channels(scenario.run_length())
    problems: dict[Problem, None] = {}
    for channel in channels:
        problems.update(dict.fromkeys(_of_channel(channel, scenario)))
        try:
            refuse_impossible(channel)
        except ScenarioError as error:
            told = [
                Problem(f"channel {channel.channel!r}: {each.text}", each.key, each.line)
                for each in error.problems
            ]
            problems.update(dict.fromkeys(told))
    if problems:
        raise ScenarioError(list(problems), name)


def _of_channel(channel: ChannelScenario, scan: ScanScenario) -> list[Problem]:
    """Return which checks of a channel have no meaning in the scan."""
    found = []
    behind = (None, *channel.points()[channel.origin.stages + 1 :]) if scan.scan.chain else ()
    adc = channel.adc
    uneven = adc.pattern.looks > adc.last_look(0) + 1
    for position, check in enumerate(channel.check):
        if isinstance(check, PointCheck) and check.point in behind:
            text = (
                "looks between conversions, where the shared stages have another channel; name a "
                f"point of channel {channel.channel!r} before them"
            )
            found.append(problem_of(channel, ("check", position), text))
        if uneven and (isinstance(check, ToneCheck) or check.kind in EVENLY):
            text = (
                f"needs evenly spaced conversions, and those of channel {channel.channel!r} are "
                "not: its visits are not, or a visit keeps several of them; spread the visits "
                "evenly, or discard all conversions but one"
            )
            found.append(problem_of(channel, ("check", position), text))
    return found
