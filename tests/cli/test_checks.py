"""Verdicts as a user of the command meets them: tables, sentences, JSON, exit status."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

import frontend_sim as fe
from frontend_sim.cli import main

TEXT = """# Invented setting.
format = 1
title = "Invented: a step through a filter"

[stimulus]
kind = "step"
after = "1 V"
at = "1 ms"

[[chain]]
kind = "rc-lowpass"
name = "input filter"
resistance = "10 kohm"
capacitance = "4.7 nF"

[adc]
rate = "20 kHz"
bits = 12
high = "3.3 V"

[simulation]
duration = "20 ms"

[[check]]
kind = "settling"
within = "0.5 LSB"
before = "BEFORE"
timer_clock = "1 MHz"

[[check]]
kind = "clipping"
"""


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder, which is the current one."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def written(folder: Path, before: str, more: str = "") -> str:
    """Write the scenario with a granted time, and return its name."""
    (folder / "s.toml").write_text(TEXT.replace("BEFORE", before) + more)
    return "s.toml"


def test_all_checks_hold(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Status 0, a table with value, limit, margin and verdict, and the measures beside."""
    assert main(["run", written(folder, "12 ms")]) == 0
    out = capsys.readouterr().out
    for text in (
        "Checks", "367.4 us", "≤ 12.00 ms", "11.63 ms", "holds", "verdict: holds, all 2 checks",
        "settling: conversions to discard", "8 conversions", "368 ticks",
    ):  # fmt: skip
        assert text in out
    with fe.open_record("s.h5") as record:
        assert record.verdict == "holds"


def test_one_check_fails(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Status 1, the record is there all the same, and a sentence says what to change first."""
    assert main(["run", written(folder, "200 us")]) == 1
    out = " ".join(capsys.readouterr().out.split())
    assert "settling fails: lengthen the wait to 367.4 us, or make 'input filter' faster by" in out
    assert "verdict: fails, 1 of 2 checks" in out
    with fe.open_record("s.h5") as record:
        assert record.verdict == "fails"


@pytest.mark.parametrize(("before", "status"), [("12 ms", 0), ("200 us", 1)])
def test_json_has_the_results(
    before: str, status: int, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """For programs: the whole verdict, and each result with all that it says."""
    assert main(["run", written(folder, before), "--json"]) == status
    values = json.loads(capsys.readouterr().out)
    assert values["verdict"] == ("fails" if status else "holds")
    row = next(row for row in values["results"] if row["name"] == "settling")
    assert row["value"] == pytest.approx(367.3985713e-6, rel=1e-9)
    assert row["bound"] == "at most"
    assert bool(row["advice"]) == bool(status)
    assert "last exit of the exact response" in row["method"]


def test_no_check_is_no_verdict(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A scenario without checks has none, and no table of them."""
    (folder / "s.toml").write_text(TEXT[: TEXT.index("[[check]]")])
    assert main(["run", "s.toml"]) == 0
    assert "Checks" not in capsys.readouterr().out
    assert main(["run", "s.toml", "--json", "--overwrite"]) == 0
    assert json.loads(capsys.readouterr().out)["verdict"] == "none"


WRONG = {
    "beyond the end": ("1 s", "", "s.toml: line 27: check[1].before (settling)"),
    "beyond the end, counted from the event": ("19.5 ms", "", "before leads to t = 20.5 ms"),
    "unknown kind": ("1 ms", '\n[[check]]\nkind = "setling"\n', "did you mean 'settling'?"),
    "no input network": (
        "1 ms",
        '\n[[check]]\nkind = "acquisition"\n',
        "the converter has no input network; give [adc.input]",
    ),
    "hum in a short run": (
        "1 ms",
        '\n[[check]]\nkind = "mains-level"\nat_most = "1 mV"\n',
        "it takes at least 40.4 ms",
    ),
}


@pytest.mark.parametrize("name", WRONG)
@pytest.mark.parametrize("command", ["run", "inspect", "validate"])
def test_a_wrong_check_is_status_2(
    name: str, command: str, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Before anything is run, with file, line and key; nothing is written."""
    before, more, message = WRONG[name]
    assert main([command, written(folder, before, more)]) == 2
    captured = capsys.readouterr()
    assert message in captured.err
    assert captured.err.startswith("error: s.toml")
    assert captured.out == ""
    assert [file.name for file in folder.iterdir()] == ["s.toml"]


def test_what_cannot_be_told_fails(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A check without an answer is status 1, and the reason is printed in its place."""
    more = '\n[[check]]\nkind = "sinad"\nat_least = "60 dB"\n'
    assert main(["run", written(folder, "12 ms", more)]) == 1
    out = " ".join(capsys.readouterr().out.split())
    assert "sinad fails: cannot be told: " in out
    assert "none" in out


def test_the_plot_marks_limit_and_last_exit(folder: Path) -> None:
    """``--plot`` draws a panel for the settling check: band, last exit, and the granted time."""
    assert main(["run", written(folder, "12 ms"), "--plot", "s.svg"]) == 0
    assert (folder / "s.svg").stat().st_size > 10_000


def test_the_designs_example_is_judged(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The example of the design: a recording that never rests does not settle to half an LSB."""
    source = Path(__file__).resolve().parents[2] / "scenarios" / "well_pump_valve_slam.toml"
    data = source.parent / "data" / "valve_slam.csv"
    text = source.read_text().replace("data/valve_slam.csv", data.as_posix())
    check = '\n[[check]]\nkind = "settling"\nwithin = "0.5 LSB"\nbefore = "12 ms"\n'
    (folder / "pump.toml").write_text(text + check)
    assert main(["run", "pump.toml"]) == 1
    assert "it has not settled" in " ".join(capsys.readouterr().out.split())


@pytest.mark.parametrize("command", ["run", "inspect", "sensitivity"])
def test_names_that_look_like_marks_are_shown(
    command: str, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Brackets and colons of a name are no styles and no pictures, in any table."""
    name = "[red]a[/] [/] :smile:"
    text = TEXT.replace("BEFORE", "10 ms").replace("input filter", name)
    (folder / "s.toml").write_text(text.replace('"clipping"', f'"level"\nname = "{name}"\n'
                                                'at = "2 ms"\nat_least = "0.1 V"'))  # fmt: skip
    assert main([command, "s.toml"]) == 0
    assert name in " ".join(capsys.readouterr().out.split())
