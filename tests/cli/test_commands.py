"""The command as a user calls it: results on standard output, status, files."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

import frontend_sim as fe
from frontend_sim.cli import main

SCENARIOS = Path(__file__).resolve().parents[2] / "scenarios"
PUMP = SCENARIOS / "well_pump_valve_slam.toml"


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder, which is the current one."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_run_stores_what_the_library_computes(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The record of the command holds the codes of ``simulate``; a plot is drawn beside it."""
    assert main(["run", str(PUMP), "-o", "pump.h5", "--plot", "pump.png"]) == 0
    captured = capsys.readouterr()
    assert "pump.h5" in captured.out
    assert "note:" in captured.err
    assert (folder / "pump.png").read_bytes().startswith(b"\x89PNG")
    run = fe.simulate(fe.load_scenario(PUMP))
    with fe.open_record("pump.h5") as record:
        np.testing.assert_array_equal(record.codes, run.codes)
        np.testing.assert_array_equal(fe.rerun(record).codes, run.codes)


def test_run_names_the_record_after_the_scenario(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Without -o the record stands in the current folder, under the scenario's name."""
    assert main(["run", str(SCENARIOS / "first_order_low_pass.toml")]) == 0
    assert (folder / "first_order_low_pass.h5").exists()
    capsys.readouterr()
    assert main(["run", str(SCENARIOS / "first_order_low_pass.toml")]) == 2
    assert "exists" in capsys.readouterr().err
    assert main(["run", str(SCENARIOS / "first_order_low_pass.toml"), "--overwrite"]) == 0


@pytest.mark.parametrize("command", ["run", "inspect"])
def test_json_is_all_that_is_printed(
    command: str, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """With --json standard output is one JSON value, and numbers are in SI."""
    assert main([command, str(PUMP), "--json"]) == 0
    values = json.loads(capsys.readouterr().out)
    assert values["title"] == "Well pump: pressure after the valve slams"


def test_inspect_tells_and_draws(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The tables name shape and corner; the plot is an SVG."""
    scenario = str(SCENARIOS / "critically_damped_pair.toml")
    assert main(["inspect", scenario, "--plot", "r.svg"]) == 0
    captured = capsys.readouterr()
    assert "critically damped" in captured.out
    assert "<svg" in (folder / "r.svg").read_text()


def test_validate_tells_each_file(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """All files are checked even if one is wrong; the status is then 2."""
    (folder / "wrong.toml").write_text("format = 1\n")
    good = str(SCENARIOS / "underdamped_section.toml")
    assert main(["validate", good, "wrong.toml", good]) == 2
    captured = capsys.readouterr()
    assert captured.out.count("right") == 2
    assert "wrong.toml" in captured.err
    assert main(["validate", "--json", "wrong.toml"]) == 2
    assert json.loads(capsys.readouterr().out)[0]["error"]


def test_schema_is_json(capsys: pytest.CaptureFixture[str]) -> None:
    """The schema is printed whole."""
    assert main(["schema"]) == 0
    assert json.loads(capsys.readouterr().out)["$schema"].startswith("https://json-schema.org")


def test_help_of_every_command(capsys: pytest.CaptureFixture[str]) -> None:
    """Every command explains itself."""
    for command in ("run", "inspect", "validate", "schema"):
        assert main([command, "--help"]) == 0
        assert "Usage: frontend-sim" in capsys.readouterr().out


def test_interrupted_run_leaves_nothing(
    folder: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Ctrl-C in the middle of a run: status 130, no record and no partial file."""
    from frontend_sim.simulation import Simulation

    def interrupted(self: object, *_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(Simulation, "pin_steps", interrupted)
    assert main(["run", str(PUMP), "-o", "pump.h5"]) == 130
    assert "interrupted" in capsys.readouterr().err
    assert list(folder.iterdir()) == []


@pytest.mark.parametrize("command", ["schema", "inspect {} --plot r.png", "run {} --plot r.png"])
def test_a_closed_pipe_is_no_error(command: str, folder: Path) -> None:
    """``frontend-sim schema | head -1`` ends quietly, and a plot that was asked for is there."""
    head = shutil.which("head")
    if head is None:
        pytest.skip("no head on this system")
    arguments = command.format(SCENARIOS / "stages" / "gain.toml")
    program = f"({sys.executable} -m frontend_sim {arguments}; echo $? >&2) | {head} -1"
    done = subprocess.run(program, shell=True, capture_output=True, text=True, check=True)
    assert done.stderr.splitlines()[-1] == "0"
    assert "Traceback" not in done.stderr
    assert "plot" not in command or (folder / "r.png").exists()


def test_only_a_closed_standard_output_is_no_error(
    folder: Path, monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    """Another pipe that breaks, to a process for instance, is an error, and nothing is left."""
    from frontend_sim.simulation import Simulation

    def broken(self: object, *_: object) -> None:
        raise BrokenPipeError(32, "Broken pipe")

    monkeypatch.setattr(Simulation, "pin_steps", broken)
    # click would put others in their place, and for good
    monkeypatch.setattr("sys.stdout", sys.stdout)
    monkeypatch.setattr("sys.stderr", sys.stderr)
    assert main(["run", str(PUMP), "-o", "pump.h5"]) == 2
    assert "went away" in capfd.readouterr().err
    assert list(folder.iterdir()) == []


def test_messages_that_nobody_reads_keep_the_status(folder: Path) -> None:
    """A wrong scenario is status 2 also where standard error is closed at its other end."""
    reader, writer = os.pipe()
    os.close(reader)
    (folder / "wrong.toml").write_text("format = 9\n")
    command = [sys.executable, "-m", "frontend_sim", "run", "wrong.toml"]
    done = subprocess.run(command, stderr=writer, stdout=subprocess.PIPE, check=False)
    os.close(writer)
    assert done.returncode == 2


def test_a_home_that_cannot_be_written_is_no_matter(folder: Path) -> None:
    """A plot without a place for the settings of Matplotlib says nothing of it."""
    # No folder, for the superuser either.
    homes = dict.fromkeys(("HOME", "XDG_CONFIG_HOME", "XDG_CACHE_HOME"), os.devnull)
    rest = {name: value for name, value in os.environ.items() if name != "MPLCONFIGDIR"}
    command = [sys.executable, "-m", "frontend_sim", "inspect", f"{SCENARIOS}/stages/gain.toml"]
    done = subprocess.run(
        [*command, "--plot", "gain.png"],
        env={**rest, **homes},
        capture_output=True, text=True, check=True,
    )  # fmt: skip
    assert done.stderr == ""
    assert (folder / "gain.png").exists()


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="needs the device that is always full")
def test_a_full_standard_output_is_told(folder: Path) -> None:
    """The record is kept, the message goes to the other channel, the status is 2."""
    program = f"{sys.executable} -m frontend_sim run {SCENARIOS}/stages/gain.toml > /dev/full"
    done = subprocess.run(program, shell=True, capture_output=True, text=True, check=False)
    assert done.returncode == 2
    assert "standard output" in done.stderr
    assert "Traceback" not in done.stderr
    assert (folder / "gain.h5").exists()


@pytest.mark.skipif(os.name != "posix", reason="needs POSIX signals")
def test_a_scheduler_may_end_a_run(folder: Path) -> None:
    """SIGTERM cleans up as Ctrl-C does: no record, no partial file, status 130."""
    text = (SCENARIOS / "stages" / "butterworth.toml").read_text()
    (folder / "long.toml").write_text(text.replace('duration = "10 ms"', 'duration = "3000 s"'))
    command = [sys.executable, "-m", "frontend_sim", "run", "long.toml"]
    with subprocess.Popen(command, stderr=subprocess.PIPE, text=True) as process:
        for _ in range(600):
            if any(file.stat().st_size > 1e6 for file in folder.glob(".frontend-sim-*")):
                break  # it is writing by now, libraries are loaded
            time.sleep(0.1)
        process.terminate()
        _, message = process.communicate(timeout=60)
    assert process.returncode == 130
    assert "interrupted" in message
    assert [file.name for file in folder.iterdir()] == ["long.toml"]
