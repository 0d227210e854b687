"""The command with scans: run, inspect, validate."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from frontend_sim.cli import main

SCANS = sorted((Path(__file__).parents[2] / "scenarios" / "scan").glob("*.toml"))


@pytest.mark.parametrize("file", SCANS, ids=lambda file: file.stem)
def test_run_and_inspect(
    file: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Tables, JSON, record and plot of every example; its checks hold."""
    monkeypatch.chdir(tmp_path)
    assert main(["validate", str(file)]) == 0
    assert main(["run", str(file), "--plot", "scan.png"]) == 0
    told = capsys.readouterr().out
    assert "skew" in told
    assert Path(f"{file.stem}.h5").exists()
    assert Path("scan.png").stat().st_size > 10_000
    assert main(["run", str(file), "-o", "again.h5", "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert set(found["scan"]["rate"]) == set(found["channels"])
    assert main(["inspect", str(file)]) == 0
    assert "skew" in capsys.readouterr().out
    assert main(["inspect", str(file), "--json"]) == 0
    assert set(json.loads(capsys.readouterr().out)) == {"title", "scan", "channels"}


def test_a_picture_of_one_chain_refuses_a_scan(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """With exit status 2 and one sentence."""
    assert main(["inspect", str(SCANS[0]), "--plot", str(tmp_path / "a.png")]) == 2
    assert "leave --plot out" in capsys.readouterr().err
