"""``frontend-sim solve`` as a user meets it."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

import frontend_sim as fe
from frontend_sim.cli import main

SCENARIO = str(Path(__file__).resolve().parents[2] / "scenarios" / "solve" / "input-filter.toml")
WAIT = ["solve", SCENARIO, "--vary", "check[wait].before", "1 us", "3 ms"]
FILTER = ["solve", SCENARIO, "--vary", "chain[input filter].resistance", "100", "100 kohm"]


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder, which is the current one."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_the_least_wait(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The answer, both verdicts, the shape; the number of runs beforehand; the proof."""
    assert main([*WAIT, "--least", "-o", "proof", "--plot", "wait.png"]) == 0
    captured = capsys.readouterr()
    out = " ".join(captured.out.split())
    assert "the smallest check[wait].before that passes is 192.34 us; 192.33 us fails" in out
    assert "monotone" in out
    assert "holds" in out
    assert "fails" in out
    assert captured.err.startswith("at most ")
    assert (folder / "wait.png").read_bytes().startswith(b"\x89PNG")
    assert main(["run", "proof/passes.toml"]) == 0
    assert main(["run", "proof/fails.toml"]) == 1
    with fe.open_record("proof/fails.h5") as record:
        assert record.verdict == "fails"


def test_several_boundaries(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Filter against wait: a range passes, and both its ends are told."""
    assert main([*FILTER, "--most"]) == 0
    out = " ".join(capsys.readouterr().out.split())
    assert "not monotone over the" in out
    assert "2 boundaries" in out
    assert "Boundaries" in out
    assert "converter chatter" in out


@pytest.mark.parametrize(
    ("arguments", "status"),
    [
        ([*FILTER[:-2], "10 kohm", "100 kohm", "--most"], 1),
        ([*FILTER[:-2], "2 kohm", "2.2 kohm", "--most"], 0),
        ([*FILTER, "--most", "--check", "wait", "--series", "E24", "--within", "1 %"], 0),
        ([*FILTER, "--least", "--corners", "--scale", "linear", "--points", "9"], 0),
    ],
)
def test_status_and_json(
    arguments: list[str], status: int, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """0 where a value passes, 1 where none does; JSON has all trials and no other output."""
    assert main([*arguments, "--json"]) == status
    values = json.loads(capsys.readouterr().out)
    assert (values["value"] is None) == bool(status)
    assert len(values["trials"]) >= 9
    assert values["key"] == "chain[input filter].resistance"


def test_a_map(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Two keys: a table, a plot, and how many runs it will take."""
    more = ["--vary", "chain[input filter].capacitance", "2 nF", "40 nF"]
    assert main([*FILTER, *more, "--points", "5", "--plot", "map.svg"]) == 0
    captured = capsys.readouterr()
    assert "at most 25 runs" in captured.err
    assert "pairs pass" in captured.out
    assert "chain[input filter].capacitance" in captured.out
    assert (folder / "map.svg").stat().st_size > 5000
    assert main([*FILTER, *more, "--points", "4", "--json", "--plot", "4.png"]) in (0, 1)
    told = json.loads(capsys.readouterr().out)
    assert len(told["passes"]) == 4
    assert told["files"] == [str(folder / "4.png")]


WRONG = {
    "no goal": (WAIT, "--least or --most"),
    "two goals": ([*WAIT, "--least", "--most"], "give one of them"),
    "three keys": ([*WAIT, *WAIT[2:], *WAIT[2:]], "--vary is given 3 times"),
    "goal of a map": ([*WAIT, *FILTER[2:], "--most"], "--most has no meaning with two keys"),
    "proof of a map": ([*WAIT, *FILTER[2:], "-o", "d"], "with two keys take --plot"),
    "unknown key": (["solve", SCENARIO, "--vary", "adc.rat", "1", "2", "--least"], "'rate'"),
    "no number": (["solve", SCENARIO, "--vary", "stimulus.kind", "1", "2", "--least"], "no number"),
    "reversed": (["solve", SCENARIO, "--vary", "adc.bits", "9", "8", "--least"], "reversed"),
    "unknown check": ([*WAIT, "--least", "--check", "wat"], "did you mean 'wait'"),
    "share": ([*WAIT, "--least", "--within", "1 kg"], "--within"),
    "plot": ([*WAIT, "--least", "--plot", "x.gif"], ".png or .svg"),
    "folder": ([*WAIT, "--least", "-o", "no/where"], "there is no directory"),
}


@pytest.mark.parametrize("name", WRONG)
def test_wrong_input_is_status_2(
    name: str, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """One message, nothing on standard output, nothing left behind."""
    arguments, message = WRONG[name]
    assert main(arguments) == 2
    captured = capsys.readouterr()
    assert message in captured.err
    assert captured.out == ""
    assert "Traceback" not in captured.err
    assert not list(folder.iterdir())


def test_no_check_is_wrong_input(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A scenario that asks for nothing cannot be solved."""
    text = Path(SCENARIO).read_text()
    (folder / "s.toml").write_text(text[: text.index("[[check]]")])
    assert main(["solve", "s.toml", "--vary", "adc.bits", "8", "9", "--least"]) == 2
    assert "add a [[check]]" in capsys.readouterr().err


@pytest.mark.parametrize("more", [[], FILTER[2:]])
def test_ctrl_c_gives_what_is_known(
    more: list[str], folder: Path, capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:  # fmt: skip
    """An interruption is status 130, and what was tried until then is printed."""
    from frontend_sim.solve import trial

    judged, count = trial.judge, 0

    def stopped(scenario: fe.Scenario) -> tuple[fe.Result, ...]:
        nonlocal count
        count += 1
        if count > 8:
            raise KeyboardInterrupt
        return judged(scenario)

    monkeypatch.setattr(trial, "judge", stopped)
    goal = [] if more else ["--least", "-o", "proof"]
    assert main([*WAIT, *more, *goal]) == 130
    captured = capsys.readouterr()
    assert "interrupted" in captured.out
    assert "bound" not in captured.out
    assert more or "no proof is kept, since the search was interrupted" in captured.err
    assert not list(folder.iterdir())


def test_an_interruption_before_the_first_run(
    folder: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Nothing is said of values that were never tried."""

    def stopped(scenario: fe.Scenario) -> tuple[fe.Result, ...]:
        raise KeyboardInterrupt

    monkeypatch.setattr("frontend_sim.solve.trial.judge", stopped)
    assert main([*WAIT, "--least"]) == 130
    told = capsys.readouterr().out.splitlines()
    assert told == [
        "nothing of check[wait].before was tried",
        "interrupted: this is what was known until then",
    ]


def test_the_scenario_itself_is_never_replaced(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Its name may be one of a proof, and --overwrite given: it stays as it was."""
    text = Path(SCENARIO).read_text()
    (folder / "passes.toml").write_text(text)
    arguments = ["solve", "passes.toml", *WAIT[2:], "--least", "-o", ".", "--overwrite"]
    assert main(arguments) == 2
    assert "passes.toml, which is the scenario itself" in capsys.readouterr().err
    assert (folder / "passes.toml").read_text() == text


def test_no_proof_where_nothing_passes(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """It is told, and nothing is made."""
    assert main([*WAIT[:-2], "1 us", "2 us", "--least", "-o", "proof"]) == 1
    assert "no proof is kept, since no value passes" in capsys.readouterr().err
    assert not list(folder.iterdir())
