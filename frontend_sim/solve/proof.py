"""The two runs on either side of a boundary, kept as proof."""

from __future__ import annotations

import os
from collections.abc import Iterable
from contextlib import suppress
from pathlib import Path

from frontend_sim.archive import record_run
from frontend_sim.archive.target import HOW_TO_REPLACE, new_file, writing
from frontend_sim.errors import InputError, OutputError
from frontend_sim.scenario.scan_scenario import AnyScenario, ScanScenario
from frontend_sim.scenario.write import scenario_text
from frontend_sim.simulation import ScanSimulation, Simulation
from frontend_sim.solve.solution import Solution
from frontend_sim.solve.trial import Trial

PASSES, FAILS = "passes", "fails"
"""Names of the files, which end in .toml and .h5."""

FILES = tuple(f"{name}{suffix}" for name in (PASSES, FAILS) for suffix in (".toml", ".h5"))
"""All files that a proof may have."""


def check_proof_target(
    directory: str | os.PathLike[str], overwrite: bool = False, inputs: Iterable[Path] = ()
) -> Path:
    """Return where a proof goes, after everything that could forbid it.

    Raises
    ------
    OutputError
        If it is no directory and cannot become one, or a proof or an input is there that must not
        be replaced.
    """
    with writing(directory):
        target = Path(os.path.realpath(directory))
        if target.exists() and not target.is_dir():
            raise OutputError(f"{directory} is a file; give the name of a directory")
        if not target.parent.is_dir():
            raise OutputError(
                f"{directory}: there is no directory {target.parent}; make it first, or give "
                "another place"
            )
        there = [name for name in FILES if (target / name).exists()]
        for name in there:
            if any(file.exists() and file.samefile(target / name) for file in inputs):
                raise OutputError(
                    f"{directory} holds {name}, which is the scenario itself and is not replaced; "
                    "give another directory"
                )
        if there and not overwrite:
            raise OutputError(f"{directory} holds {', '.join(there)} already; {HOW_TO_REPLACE}")
    return target


def keep_proof(
    solution: Solution,
    directory: str | os.PathLike[str],
    *,
    overwrite: bool = False,
    inputs: Iterable[Path] = (),
) -> tuple[Path, ...]:
    """Write the answer and its failing neighbour: each a scenario and the record of its run.

    What an earlier proof left there of a side that this one has not is taken out, so that the
    files of a directory belong together. Where no value passes, nothing there is touched.

    Parameters
    ----------
    solution : what was found
    directory : where ``passes.toml``, ``passes.h5``, ``fails.toml`` and ``fails.h5`` go; it is made
        if it is not there
    overwrite : whether files of these names may be replaced
    inputs : files that must not be replaced

    Returns
    -------
    The files that were written. A side that is not there, or cannot be run, has none;
    one with a check that no run could answer has a scenario alone.

    Raises
    ------
    OutputError
        If they cannot be written there.
    """
    inputs = tuple(inputs)
    target = check_proof_target(directory, overwrite, inputs)
    if solution.answer is None:
        return ()
    with writing(directory):
        target.mkdir(exist_ok=True)
    written: list[Path] = []
    for name, trial in ((PASSES, solution.answer), (FAILS, solution.beyond)):
        if trial is not None and trial.scenario is not None and trial.results:
            scenario = _titled(trial, solution)
            written.append(_scenario_file(scenario, target / f"{name}.toml", overwrite))
            with suppress(InputError):  # a check that no run could answer: the scenario tells why
                path = target / f"{name}.h5"
                run = _prepared(scenario)
                written.append(record_run(run, path, overwrite=overwrite, inputs=inputs))
    with writing(directory):
        for old in {target / name for name in FILES}.difference(written):
            old.unlink(missing_ok=True)
    return tuple(written)


def _prepared(scenario: AnyScenario) -> Simulation | ScanSimulation:
    if isinstance(scenario, ScanScenario):
        return ScanSimulation(scenario)
    return Simulation(scenario)


def _titled(trial: Trial, solution: Solution) -> AnyScenario:
    scenario = trial.scenario
    assert scenario is not None  # the caller knows
    told = f"{solution.key.key} = {solution.key.text(trial.values[0])}"
    at = f", {trial.corner}" if trial.corner else ""
    title = f"{scenario.title}: {told}{at}" if scenario.title else f"{told}{at}"
    longest = 200
    cut = title if len(title) <= longest else f"{title[: longest - 3]}..."
    return scenario.model_copy(update={"title": cut})


def _scenario_file(scenario: AnyScenario, path: Path, overwrite: bool) -> Path:
    text = scenario_text(scenario, path.parent)
    with (
        new_file(path, path, overwrite) as temporary,
        writing(path),
        temporary.open("x", encoding="utf-8") as stream,
    ):
        stream.write(text)
    return path
