"""Tables and plots of solutions, maps and sensitivities show what was found."""

from __future__ import annotations

import io
from pathlib import Path

import pytest
from checked import STEP, made
from rich.console import Console

from frontend_sim.errors import OutputError
from frontend_sim.measure.sensitivity import sensitivities
from frontend_sim.present import (
    map_figure,
    plot_map,
    plot_sensitivities,
    plot_solution,
    sensitivity_figure,
    sensitivity_tables,
    solution_figure,
    solution_tables,
)
from frontend_sim.solve import Solution, pass_map, solve_for, varied

KEY = "chain[input filter].resistance"
NAME = {"name": "a $ [b] name"}
SETTLING = {"kind": "settling", "within": "0.5 LSB", "before": "300 us", **NAME}
SCENARIO = made(SETTLING, {"kind": "clipping"}, stimulus={**STEP, "after": "3.2 V"})


def printed(tables: object) -> str:
    """Return what a terminal of 100 columns would show."""
    console = Console(file=io.StringIO(), width=100)
    with console.capture() as drawn:
        for table in tables:  # type: ignore[attr-defined]  # a tuple of renderables
            console.print(table)
    return drawn.get()


@pytest.fixture(scope="module")
def solution() -> Solution:
    """The largest resistor."""
    return solve_for(SCENARIO, KEY, "1k", "100k", "most")


def test_a_solution(solution: Solution, tmp_path: Path) -> None:
    """Names with brackets and dollar signs survive; both sides and their verdicts are there."""
    text = printed(solution_tables(solution))
    for part in ("a $ [b] name", "On either side", "holds", "fails", "300.000 us"):
        assert part in text
    assert "[input filter]" in " ".join(text.split())
    plot_solution(solution, tmp_path / "s.png")
    assert (tmp_path / "s.png").stat().st_size > 10_000
    with pytest.raises(OutputError, match="exists"):
        plot_solution(solution, tmp_path / "s.png")
    (axes,) = solution_figure(solution).axes
    assert len(axes.lines) == 4  # two checks, the limit, the answer


def test_each_side_has_its_own_limit() -> None:
    """Where a limit is varied, the side that fails is not read against the one that holds."""
    found = solve_for(SCENARIO, "check[1].before", "1 us", "5 ms", "least")
    assert found.beyond is not None
    (fails,) = (row for row in found.beyond.results if row.name == NAME["name"])
    assert f"{fails.limit * 1e6:.2f}0 us" in printed(solution_tables(found))


def test_a_name_with_an_underscore_is_in_the_legend() -> None:
    """A name that begins so is a private one to the plotting library, which would drop it."""
    scenario = made(SETTLING | {"name": "_wait"})
    (axes,) = solution_figure(solve_for(scenario, KEY, "1k", "100k", "most", points=5)).axes
    assert " _wait" in [text.get_text() for text in axes.get_legend().get_texts()]


def test_no_value() -> None:
    """Where none passes, the nearest is shown with its verdicts."""
    none = solve_for(SCENARIO, KEY, "50k", "100k", "least")
    assert "Nearest to passing" in printed(solution_tables(none))
    assert solution_figure(none).axes


def test_a_map(tmp_path: Path) -> None:
    """Whole numbers and parts side by side, tiles for each pair."""
    found = pass_map(
        SCENARIO, varied(SCENARIO, KEY, "1k", "100k"), varied(SCENARIO, "adc.bits", 8, 11), points=5
    )
    (axes,) = map_figure(found).axes
    (mesh,) = axes.collections
    assert mesh.get_array().size == 20
    plot_map(found, tmp_path / "m.svg")
    assert (tmp_path / "m.svg").exists()


def test_sensitivities(tmp_path: Path) -> None:
    """A table and a panel for each check, also for one that nothing moves."""
    found = sensitivities(SCENARIO, [KEY, "adc.bits"])
    text = printed(sensitivity_tables(found))
    assert "What moves a $ [b] name" in text
    assert KEY in " ".join(text.split())
    assert "nothing that was changed moves it" in " ".join(text.split())
    assert len(sensitivity_figure(found).axes) == 2
    plot_sensitivities(found, tmp_path / "b.png")
    assert (tmp_path / "b.png").exists()
