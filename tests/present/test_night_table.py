"""A night at the terminal, and for programs."""

from __future__ import annotations

import io
import json
from pathlib import Path

import pytest
from compared import night
from rich.console import Console

from frontend_sim.cli import main
from frontend_sim.present.night_table import night_data, night_tables
from frontend_sim.summary import NightSummary, summarize

DRAWS = 'seed = 5\nkeep = "nothing"\n[draws]\ncount = 60\n'


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with a night of draws."""
    directory = tmp_path_factory.mktemp("nights")
    night(directory, "night", DRAWS)
    return directory


@pytest.fixture(scope="module")
def summary(folder: Path) -> NightSummary:
    """What the night says."""
    from frontend_sim.archive.set_table import open_set

    return summarize(open_set(folder / "night"))


def told(summary: NightSummary) -> str:
    """Return the tables as text."""
    console = Console(file=io.StringIO(), width=140)
    with console.capture() as drawn:
        for table in night_tables(summary):
            console.print(table)
    return drawn.get()


def test_the_terminal_tells_spread_yield_and_cause(summary: NightSummary) -> None:
    """Percentiles of each check, the yield with its interval, and the part that a check follows."""
    text = told(summary)
    assert "Spread over the draws" in text
    assert summary.rate is not None
    assert f"{summary.rate.passed} of 60 draws hold" in text
    assert "chain[input filter].capacitance (+0.9" not in text  # the corner falls with it
    assert "chain[input filter].capacitance (-0.9" in text


def test_a_few_runs_have_no_spread(tmp_path: Path) -> None:
    """Two runs are told one by one elsewhere; there is no spread to tell."""
    rules = '[[vary]]\nkey = "adc.bits"\nvalues = [10, 12]\n'
    assert night_tables(summarize(night(tmp_path, "night", rules))) == ()


def test_programs_get_it_all(summary: NightSummary) -> None:
    """Yield, worst runs, percentiles, limits and causes are plain data that JSON has words for."""
    data = json.loads(json.dumps(night_data(summary), allow_nan=False))
    assert data["yield"]["total"] == 60
    corner = next(check for check in data["checks"] if check["name"] == "corner")
    assert corner["worst"]["parameters"]["chain[input filter].capacitance"] > 4.7e-9
    assert [row["share"] for row in corner["percentiles"]] == [0.05, 0.5, 0.95]
    assert corner["tolerance_limits"]["high"] is None  # open: the check has a limit below
    assert corner["causes"][0]["rank_correlation"] < -0.9


def test_replay_prints_it(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The command that runs a night ends with what it says, as tables or as JSON."""
    arguments = ["replay", str(folder / "files of night" / "set.toml"), "-o", str(folder / "night")]
    main(arguments)
    assert "Spread over the draws" in capsys.readouterr().out
    main([*arguments, "--json"])
    assert json.loads(capsys.readouterr().out)["summary"]["yield"]["total"] == 60
