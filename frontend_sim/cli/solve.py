"""``frontend-sim solve``: which value of a key just passes."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from frontend_sim.cli.console import print_json, print_tables, progress_bar
from frontend_sim.cli.options import PATH, json_option, output_option, overwrite_option, plot_option
from frontend_sim.cli.status import FAILS, HOLDS, INTERRUPTED
from frontend_sim.quantities.counting import counted

if TYPE_CHECKING:
    from frontend_sim.scenario.scan_scenario import AnyScenario
    from frontend_sim.solve import PassMap, Solution, Varied
    from frontend_sim.solve.solution import Goal


@click.command("solve")
@click.argument("scenario", type=PATH)
@click.option(
    "--vary",
    nargs=3,
    multiple=True,
    required=True,
    metavar="KEY FROM TO",
    help="A key and its bounds: --vary check[1].before 1us 4ms. Given twice: a map of both.",
)
@click.option("--least", is_flag=True, help="Find the least value that passes.")
@click.option("--most", is_flag=True, help="Find the largest value that passes.")
@click.option("--check", "checks", multiple=True, metavar="NAME", help="Only this check counts.")
@click.option(
    "--corners",
    is_flag=True,
    help="Hold with every part at either end of its tolerance.",
)
@click.option(
    "--series", metavar="E24", help="Take preferred numbers: E3, E6, E12, E24, E48, E96, E192."
)
@click.option(
    "--scale",
    type=click.Choice(["log", "linear"]),
    help="How values are spread; left out, log for bounds more than a decade apart.",
)
@click.option(
    "--within", metavar="SHARE", help="How near to the boundary, as a share; left out, 0.01 %."
)
@click.option("--points", type=int, help="Values that are looked at first; 17, in a map 15 by 15.")
@output_option(
    "DIR",
    "Keep the two runs on either side of the boundary: passes.h5, fails.h5, and their .toml.",
)
@plot_option("Draw the margins, or the map,")
@overwrite_option("files that are there")
@json_option
def command(scenario: Path, vary: tuple[tuple[str, str, str], ...], **options: Any) -> int:
    """Find which values of a KEY of SCENARIO pass its checks.

    With one key: the least or the largest value that passes, and its neighbour, which fails. Of
    the tolerance of a part (chain[1].resistance.tolerance) the checks must hold at all corners.
    With two keys: a map of what passes.

    Exit status: 0 a value passes, 1 none does, 2 the input is wrong.
    """
    from frontend_sim.present import check_plot_target
    from frontend_sim.scenario import load_scenario

    options["goal"] = _goal(options.pop("least"), options.pop("most"))
    _refuse_combinations(len(vary), options["goal"], options["output"])
    values = load_scenario(scenario)
    if options["plot"] is not None:
        check_plot_target(options["plot"], options["overwrite"])
    keys = [_varied(values, each, options) for each in vary]
    if len(keys) == 2:
        return _mapped(values, keys, scenario.name, options)
    return _solved(values, keys[0], scenario, options)


def _goal(least: bool, most: bool) -> Goal | None:
    if least and most:
        raise click.UsageError("--least and --most ask for two answers; give one of them")
    return "least" if least else "most" if most else None


def _refuse_combinations(keys: int, goal: Goal | None, output: Path | None) -> None:
    if keys > 2:
        raise click.UsageError(f"--vary is given {keys} times; give it once, or twice for a map")
    if keys == 1 and goal is None:
        raise click.UsageError("say what to look for: --least or --most")
    if keys == 2 and goal is not None:
        raise click.UsageError(f"--{goal} has no meaning with two keys; take it out, or one key")
    if keys == 2 and output is not None:
        raise click.UsageError("-o keeps two runs beside one boundary; with two keys take --plot")


def _varied(scenario: AnyScenario, given: tuple[str, str, str], options: dict[str, Any]) -> Varied:
    from frontend_sim.errors import InputError, QuantityError
    from frontend_sim.quantities import parse
    from frontend_sim.quantities.dimension import FRACTION
    from frontend_sim.solve import varied
    from frontend_sim.solve.varied import TOLERANCE

    tolerance = TOLERANCE
    if options["within"] is not None:
        try:
            tolerance = float(parse(_value(options["within"]), FRACTION))
        except QuantityError as error:
            raise InputError(f"--within: {error}") from None
    key, low, high = given
    return varied(
        scenario, key, _value(low), _value(high),
        series=options["series"], scale=options["scale"], tolerance=tolerance,
    )  # fmt: skip


def _value(text: str) -> str | float:
    """Return a bare number as one: a shell has no other way to give it."""
    try:
        return float(text)
    except ValueError:
        return text


def _points(options: dict[str, Any], usual: int) -> int:
    given = options["points"]
    return usual if given is None else int(given)


def _solved(values: AnyScenario, key: Varied, file: Path, options: dict[str, Any]) -> int:
    from frontend_sim.solve import Solver, check_proof_target
    from frontend_sim.solve.search import POINTS

    if options["output"] is not None:
        check_proof_target(options["output"], options["overwrite"], [file])
    solver = Solver(
        values, key, options["goal"],
        checks=options["checks"], corners=options["corners"], points=_points(options, POINTS),
    )  # fmt: skip
    click.echo(f"at most {counted(solver.most_runs, 'run')}, where there is one boundary", err=True)
    with progress_bar(file.name) as advance:
        try:
            found = solver.run(advance)
        except KeyboardInterrupt:
            found = solver.solution()
    _tell_solution(found, file, options)
    if not found.complete:
        return INTERRUPTED
    return HOLDS if found.answer is not None else FAILS


def _tell_solution(found: Solution, file: Path, options: dict[str, Any]) -> None:
    from frontend_sim.present import plot_solution, solution_tables
    from frontend_sim.solve import keep_proof

    overwrite, written = options["overwrite"], []
    if options["output"] is not None and found.complete:
        written = [*keep_proof(found, options["output"], overwrite=overwrite, inputs=[file])]
    if options["plot"] is not None and found.trials:
        written.append(plot_solution(found, options["plot"], overwrite=overwrite))
    if options["as_json"]:
        print_json({**found.as_dict(), "files": [str(path) for path in written]})
        return
    print_tables(solution_tables(found))
    for path in written:
        click.echo(f"written: {path}")
    if options["output"] is not None and not (found.complete and found.answer):
        why = "no value passes" if found.complete else "the search was interrupted"
        click.echo(f"no proof is kept, since {why}; {options['output']} stays as it was", err=True)


def _mapped(values: AnyScenario, keys: list[Varied], name: str, options: dict[str, Any]) -> int:
    from frontend_sim.solve import Mapper
    from frontend_sim.solve.pass_map import POINTS

    mapper = Mapper(
        values, keys[0], keys[1],
        checks=options["checks"], corners=options["corners"], points=_points(options, POINTS),
    )  # fmt: skip
    click.echo(f"at most {counted(mapper.most_runs, 'run')}", err=True)
    with progress_bar(name) as advance:
        try:
            found = mapper.run(advance)
        except KeyboardInterrupt:
            found = mapper.found()
    _tell_map(found, options)
    if not found.complete:
        return INTERRUPTED
    return HOLDS if found.passing else FAILS


def _tell_map(found: PassMap, options: dict[str, Any]) -> None:
    from frontend_sim.present import map_tables, plot_map

    written = []
    if options["plot"] is not None:
        written = [plot_map(found, options["plot"], overwrite=options["overwrite"])]
    if options["as_json"]:
        print_json({**found.as_dict(), "files": [str(path) for path in written]})
        return
    print_tables(map_tables(found))
    for path in written:
        click.echo(f"written: {path}")
