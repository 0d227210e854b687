"""A scenario file becomes a scenario."""

from __future__ import annotations

import os
import tomllib
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from frontend_sim.errors import ScenarioError
from frontend_sim.scenario.check import check_scenario
from frontend_sim.scenario.content import read_text
from frontend_sim.scenario.explain import explain
from frontend_sim.scenario.locate import lines_of
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario, single
from frontend_sim.scenario.set_marks import looks_like_a_set
from frontend_sim.scenario.syntax import syntax_problem
from frontend_sim.scenario.tables import root
from frontend_sim.values import validated

DEEPEST = 24
"""Tables and arrays inside each other; a scenario needs fewer."""

_LEAST = """a scenario needs at least

  [stimulus]
  kind = "step"
  after = "1 V"

  [adc]
  rate = "20 kHz"
  bits = 12
  high = "3.3 V"

  [simulation]
  duration = "10 ms\""""


def load_scenario(path: str | os.PathLike[str]) -> AnyScenario:
    """Read a scenario file; with [[channel]] tables it is a ``ScanScenario``, else a ``Scenario``.

    Paths in the file are relative to the file. ``source`` of the result holds the file's text.

    Parameters
    ----------
    path : of a TOML file, see ``docs/scenario.md``

    Raises
    ------
    ScenarioError
        If the file cannot be read, is no TOML, or its keys do not make a scenario; ``problems``
        lists what is wrong with key and line.
    ModelError
        If a stage is unstable.
    RecordingError
        If a recorded stimulus cannot be read.
    """
    file = Path(path)
    scenario = parse_scenario(read_text(file), file.parent, str(file))
    check_scenario(scenario, str(file))
    return scenario


def load_single_scenario(path: str | os.PathLike[str], what: str = "this") -> Scenario:
    """Read a scenario file of one channel, for what knows no scans.

    Parameters
    ----------
    what : takes no scans, for the message

    Raises
    ------
    InputError
        As ``load_scenario``; ScenarioError also if the file describes a scan.
    """
    return single(load_scenario(path), what, str(Path(path)))


def parse_scenario(
    text: str, directory: str | os.PathLike[str] = ".", name: str = "scenario"
) -> AnyScenario:
    """Read a scenario from text.

    Unlike ``load_scenario`` it opens no recording: ``check_scenario`` does.

    Parameters
    ----------
    text : TOML, see ``docs/scenario.md``
    directory : what the paths in the text are relative to
    name : what the text is called in messages

    Raises
    ------
    ScenarioError
        If the text is no TOML, or its keys do not make a scenario.
    """
    data = _read_toml(text, name)
    if not data:
        what = "empty" if not text.strip() else "without any key"
        raise ScenarioError(f"the file is {what}; {_LEAST}", name)
    if looks_like_a_set(data):
        raise ScenarioError(
            "this is a set of runs, no scenario; 'frontend-sim replay' runs it", name
        )
    errors: list[Any] = []
    if "source" in data:  # the one field that no file may set
        errors.append({"type": "extra_forbidden", "loc": ("source",)})
    values = {key: value for key, value in data.items() if key != "source"}
    try:
        context = {"directory": Path(directory)}
        scenario: AnyScenario
        if root(data) is ScanScenario:
            scenario = validated(ScanScenario, values, context)
        else:
            scenario = validated(Scenario, values, context)
    except ValidationError as error:
        errors.extend(error.errors(include_url=False))
    except RecursionError:
        raise ScenarioError("tables are nested too deep", name) from None
    if errors:
        raise ScenarioError(explain(errors, data, lines_of(text, data)), name)
    return scenario.model_copy(update={"source": text})


def _read_toml(text: str, name: str) -> dict[str, Any]:
    deep = ScenarioError(f"tables or arrays are nested more than {DEEPEST} deep", name)
    try:
        data = tomllib.loads(text)
    except RecursionError:
        raise deep from None
    except ValueError as error:  # tomllib's own error is one, and int() raises it too
        raise ScenarioError([syntax_problem(text, error)], name) from None
    if _depth(data) > DEEPEST:
        raise deep
    return data


def _depth(data: dict[str, Any]) -> int:
    """Return how deep tables and arrays are nested, without recursion."""
    level: list[Any] = [data]
    depth = 0
    while level:
        depth += 1
        below = [value.values() if isinstance(value, dict) else value for value in level]
        level = [item for row in below for item in row if isinstance(item, (dict, list))]
    return depth
