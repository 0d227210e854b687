"""``frontend-sim sensitivity`` as a user meets it."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from frontend_sim.cli import main

SCENARIO = str(Path(__file__).resolve().parents[2] / "scenarios" / "solve" / "input-filter.toml")
KEYS = ["--key", "chain[input filter].resistance", "--key", "adc.high"]


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder, which is the current one."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_tables_and_bars(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A table for each check, keys in full, what a tolerance costs; a plot beside it."""
    assert main(["sensitivity", SCENARIO, *KEYS, "--plot", "bars.png"]) == 0
    out = capsys.readouterr().out
    for text in ("What moves wait", "What moves headroom", "+0.999", "1.921 us", "adc.high", "+11"):
        assert text in out
    assert (folder / "bars.png").read_bytes().startswith(b"\x89PNG")
    assert main(["sensitivity", SCENARIO, "--plot", "bars.png"]) == 2


def test_json(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """For programs: every number, in SI."""
    assert main(["sensitivity", SCENARIO, *KEYS, "--json"]) == 0
    wait, chatter, _ = json.loads(capsys.readouterr().out)
    assert wait["parameters"][0]["key"] == "chain[input filter].resistance"
    assert wait["parameters"][0]["normalized"] == pytest.approx(0.99896, abs=1e-4)
    assert chatter["parameters"][1]["normalized"] == 0.0


@pytest.mark.parametrize(
    ("arguments", "message"),
    [(["--key", "adc.rat"], "did you mean 'rate'"), (["--plot", "x.gif"], ".png or .svg")],
)
def test_wrong_input(
    arguments: list[str], message: str, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Status 2, one message, nothing written."""
    assert main(["sensitivity", SCENARIO, *arguments]) == 2
    captured = capsys.readouterr()
    assert message in captured.err
    assert captured.out == ""
    assert not list(folder.iterdir())
