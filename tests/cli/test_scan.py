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


def test_a_plot_of_too_many_channels_is_refused_before_the_run(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A picture of 33 rows is too tall; nothing is run for it, and nothing written."""
    channels = "".join(
        f'[[channel]]\nname = "c{i}"\n[channel.stimulus]\nkind = "step"\nafter = 1\n'
        for i in range(33)
    )
    file = tmp_path / "many.toml"
    file.write_text(
        f"format = 1\n{channels}[adc]\nrate = 1e5\nbits = 12\nhigh = 3\n"
        "[simulation]\nduration = 1e-3\n"
    )
    for command in (["run", "-o", str(tmp_path / "many.h5")], ["inspect"]):
        assert main([*command, str(file), "--plot", str(tmp_path / "a.png")]) == 2
        assert "at most 32 channels, and this scan has 33" in capsys.readouterr().err
    assert [path.name for path in tmp_path.iterdir()] == ["many.toml"]


def test_inspect_draws_every_channel(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """One picture; it is not replaced unasked, and other formats are refused."""
    picture = tmp_path / "channels.svg"
    asked = ["inspect", str(SCANS[0]), "--plot", str(picture)]
    assert main(asked) == 0
    assert f"plot: {picture}" in capsys.readouterr().out
    assert picture.read_text().startswith("<?xml")
    assert main(asked) == 2
    assert "--overwrite" in capsys.readouterr().err
    assert main([*asked, "--overwrite", "--json"]) == 0
    assert main(["inspect", str(SCANS[0]), "--plot", str(tmp_path / "a.pdf")]) == 2
    assert [file.name for file in tmp_path.iterdir()] == ["channels.svg"]
