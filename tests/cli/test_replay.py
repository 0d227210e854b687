"""``frontend-sim replay`` as a user, and as a scheduler, meets it."""

from __future__ import annotations

import errno
import json
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path

import pytest
from nights import BASE, DRAWS, base, made_set

from frontend_sim.archive import Record, open_record
from frontend_sim.archive.set_table import open_set
from frontend_sim.cli import main
from frontend_sim.cli import night_bar as bar
from frontend_sim.replay import Progress, preview

HERE = ["--on", "in-process"]


def test_all_checks_hold(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit status 0; the table names the worst run of each check, and says where it is."""
    file = made_set(tmp_path, 'keep = "nothing"\n[[vary]]\nkey = "chain[2].gain"\nvalues = [2]\n')
    assert main(["replay", str(file), "-o", str(tmp_path / "night"), *HERE]) == 0
    told = capsys.readouterr()
    assert "all checks hold in the only run" in told.out
    assert "gain=2" in told.out
    assert str(tmp_path / "night" / "set.h5") in told.out.replace("\n", "")
    assert told.err == ""


def test_a_check_fails(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit status 1; JSON has the counts."""
    file = made_set(tmp_path, '[[vary]]\nkey = "chain[2].gain"\nvalues = [1, 2]\n')
    arguments = ["replay", str(file), "-o", str(tmp_path / "night"), "--json", *HERE]
    assert main(arguments) == 1
    told = json.loads(capsys.readouterr().out)
    assert (told["planned"], told["ran"], told["kept"]) == (2, 2, 0)
    assert (told["fails"], told["holds"], told["verdict"]) == (1, 1, "fails")
    assert told["complete"]
    assert len(list((tmp_path / "night" / "records").iterdir())) == 1
    assert main(arguments) == 1
    assert json.loads(capsys.readouterr().out)["kept"] == 2


def test_what_lies_around_failures_is_kept(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """By two options; a window that is no time, or stands around nothing, is exit status 2."""
    file = made_set(tmp_path, '[[vary]]\nkey = "chain[2].gain"\nvalues = [1, 2]\n')
    arguments = ["replay", str(file), "-o", str(tmp_path / "night"), *HERE]
    kept = ["--keep", "around-failures", "--around"]
    assert main([*arguments, *kept, "0.12 ms"]) == 1
    with open_record(tmp_path / "night" / "records" / "gain=1.h5") as record:
        assert isinstance(record, Record)
        assert record.time.tolist() == pytest.approx([0.0, 0.05e-3, 0.1e-3, 0.15e-3, 0.2e-3])
    capsys.readouterr()
    for wrong, message in (
        ([*kept, "3 V"], "unit of voltage"),
        ([*kept, "-1 ms"], "0 s or more"),
        (["--around", "1 ms"], "around means nothing with keep = 'failures'"),
    ):
        assert main([*arguments, *wrong]) == 2
        assert message in capsys.readouterr().err


def test_the_input_is_wrong(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit status 2, one message, and nothing written."""
    file = made_set(tmp_path, '[[vary]]\nkey = "chain[2].gian"\nvalues = [1]\n')
    assert main(["replay", str(file), "-o", str(tmp_path / "night"), *HERE]) == 2
    told = capsys.readouterr()
    assert told.err.startswith("error: ")
    assert "did you mean 'gain'" in told.err
    assert not (tmp_path / "night").exists()


def test_a_run_gives_no_result(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit status 3: a set with a run that failed is incomplete, and the reason is told."""
    (tmp_path / "night").mkdir()
    base(tmp_path / "night", BASE, "a.toml")
    base(tmp_path / "night", BASE.replace('rate = "20 kHz"', 'rate = "20 kV"'), "b.toml")
    arguments = ["replay", str(tmp_path / "night"), "-o", str(tmp_path / "out"), *HERE]
    assert main([*arguments, "--keep", "nothing"]) == 3
    told = capsys.readouterr()
    assert "a result is missing in 1 of 2 runs" in told.out
    assert "20 kV" in told.out
    assert "incomplete" in told.err


def test_a_dry_run_lists_what_would_be_done(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Names, time and disk are told, and nothing is written; what is done already is left out."""
    file = made_set(tmp_path, DRAWS.format(30))
    arguments = ["replay", str(file), "-o", str(tmp_path / "night")]
    assert main([*arguments, "--dry-run"]) == 0
    told = capsys.readouterr().out
    assert told.splitlines()[0] == "draw 0001"
    assert "... and 10 more" in told
    assert "all 30 runs would be done" in told
    assert not (tmp_path / "night").exists()
    main([*arguments, *HERE])
    made_set(tmp_path, DRAWS.format(31))
    capsys.readouterr()
    assert main([*arguments, "--dry-run", "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["runs"] == ["draw 0031"]
    assert found["kept"] == 30
    assert found["bytes"] > 0
    made_set(tmp_path, DRAWS.format(400) + '[draws.until]\nyield = "5 %"\n')
    assert main([*arguments, "--dry-run"]) == 0
    assert "fewer may be enough" in capsys.readouterr().out


def test_a_dry_run_tells_of_a_disk_that_is_too_small(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Before the night, not after its first run."""
    file = made_set(tmp_path, DRAWS.format(30))
    arguments = ["replay", str(file), "-o", str(tmp_path / "night"), "--dry-run"]
    monkeypatch.setattr(preview, "free_bytes", lambda directory: 1_000)
    assert main(arguments) == 0
    assert "the disk has 1 kB left, which is not enough" in capsys.readouterr().out
    assert main([*arguments, "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["bytes_free"] == 1_000
    monkeypatch.undo()
    assert main(arguments) == 0
    assert "not enough" not in capsys.readouterr().out


def test_several_scenarios_are_a_set(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """What a shell makes of a pattern is taken as it is."""
    files = [base(tmp_path, BASE, f"{name}.toml") for name in ("a", "b")]
    arguments = ["replay", *map(str, files), "-o", str(tmp_path / "night"), "--json", *HERE]
    assert main(arguments) == 0
    assert json.loads(capsys.readouterr().out)["planned"] == 2


def test_a_directory_of_others_is_left_alone(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Exit status 2 where the output directory holds something else."""
    file = made_set(tmp_path, DRAWS.format(1))
    assert main(["replay", str(file), "-o", str(tmp_path), *HERE]) == 2
    assert "holds something else" in capsys.readouterr().err


def test_validate_checks_sets(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A set is checked like a scenario, with the scenario that it varies."""
    right = made_set(tmp_path, DRAWS.format(3))
    wrong = made_set(tmp_path, '[[vary]]\nkey = "adc.rates"\nvalues = [1]\n', "wrong.toml")
    assert main(["validate", str(right)]) == 0
    assert main(["validate", str(wrong)]) == 2
    assert "did you mean 'rate'" in capsys.readouterr().err


@pytest.mark.skipif(not hasattr(signal, "SIGTERM"), reason="sends a signal")
@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_a_night_that_is_stopped_says_how_to_go_on(tmp_path: Path, number: signal.Signals) -> None:
    """Exit status 130 after Ctrl-C and after a scheduler's end, with workers at work."""
    file = made_set(tmp_path, DRAWS.format(5000))
    arguments = ["replay", str(file), "-o", str(tmp_path / "night"), "--workers", "2"]
    command = [sys.executable, "-m", "frontend_sim", *arguments]
    with subprocess.Popen(command, stderr=subprocess.PIPE, text=True) as process:
        journal = tmp_path / "night" / "night.journal"
        until = time.monotonic() + 60.0
        while not (journal.is_file() and journal.stat().st_size > 4000):
            assert time.monotonic() < until
            time.sleep(0.02)
        process.send_signal(number)
        _, told = process.communicate(timeout=60.0)
    assert process.returncode == 130, told
    assert "the same call goes on from here" in told
    assert "Traceback" not in told
    assert 0 < len(open_set(tmp_path / "night").runs) < 5000


def test_a_stop_among_damaged_records_says_how_many_are_left(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """They are not done before they are made again, whatever the journal has of them."""
    file = made_set(tmp_path, DRAWS.format(3))
    arguments = ["replay", str(file), "-o", str(tmp_path / "night"), "--keep", "all", *HERE]
    main(arguments)
    for record in (tmp_path / "night" / "records").iterdir():
        record.unlink()
    capsys.readouterr()

    @contextmanager
    def impatient(title: str) -> Iterator[Callable[[Progress], None]]:
        def report(progress: Progress) -> None:
            raise KeyboardInterrupt

        yield report

    monkeypatch.setattr(bar, "night_bar", impatient)
    assert main(arguments) == 130
    told = capsys.readouterr().err
    assert "stopped after 1 run, 2 left: it was interrupted; the same call goes on" in told


@pytest.mark.skipif(not hasattr(signal, "SIGHUP"), reason="sends a signal")
def test_nohup_keeps_its_word(tmp_path: Path) -> None:
    """A night that shall not end with its terminal goes on when that is closed."""
    file = made_set(tmp_path, DRAWS.format(2))
    script = (
        "import os, signal, sys\n"
        "signal.signal(signal.SIGHUP, signal.SIG_IGN)\n"
        "from frontend_sim.cli import main\n"
        "from frontend_sim.cli import night_bar\n"
        "night_bar.told = lambda progress: os.kill(os.getpid(), signal.SIGHUP)\n"
        "night_bar.INTERVAL = -1.0\n"
        "sys.exit(main(sys.argv[1:]))\n"
    )
    arguments = ["replay", str(file), "-o", str(tmp_path / "night"), *HERE]
    command = [sys.executable, "-c", script, *arguments]
    done = subprocess.run(command, capture_output=True, text=True, check=False)
    assert done.returncode in (0, 1), done.stderr
    assert len(open_set(tmp_path / "night").runs) == 2


def test_what_a_night_waits_for_is_told_at_once(capsys: pytest.CaptureFixture[str]) -> None:
    """And when it goes on; a log that is full, or that nobody reads, ends nothing."""
    going = Progress(1, 9, 0, 1, 0, 2.0, 4.0)
    with bar.night_bar("pump.toml") as report:
        report(going)
        assert capsys.readouterr().err == ""
        for _ in range(3):
            report(replace(going, note="there is no worker since 02:13"))
        assert capsys.readouterr().err == "pump.toml: there is no worker since 02:13\n"
        report(going)
        assert capsys.readouterr().err == "pump.toml: 1 of 9 runs, 2/s, 4 s left, 1 fail\n"


def test_a_log_that_cannot_be_written_ends_no_night(monkeypatch: pytest.MonkeyPatch) -> None:
    """A disk may be full, or the reader of a pipe may have gone home."""

    def full(*_: object, **__: object) -> None:
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(bar.click, "echo", full)
    with bar.night_bar("pump.toml") as report:
        report(Progress(1, 9, 0, 1, 0, 2.0, 4.0, "there is no worker"))


def test_a_scan_is_varied_like_any_scenario(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Channels keep their names in the results, and every record is kept whole."""
    scan = Path(__file__).resolve().parents[2] / "scenarios" / "scan" / "sequential.toml"
    file = tmp_path / "set.toml"
    file.write_text(f'base = "{scan.as_posix()}"\n[[vary]]\nkey = "adc.bits"\nvalues = [12, 14]\n')
    arguments = ["replay", str(file), "-o", str(tmp_path / "night"), "--keep", "all", *HERE]
    assert main(arguments) in (0, 1)
    table = open_set(tmp_path / "night")
    assert table.names == ("bits=12", "bits=14")
    path = table.record_path("bits=14")
    assert path is not None
    with open_record(path) as record:
        record.verify()
        assert record.scenario.adc.bits == 14


def test_a_cluster_that_does_not_answer_leaves_nothing_behind(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Exit status 2 and no directory where Dask is not installed."""
    monkeypatch.setitem(sys.modules, "distributed", None)
    file = made_set(tmp_path, DRAWS.format(1))
    assert main(["replay", str(file), "-o", str(tmp_path / "night"), "--on", "dask"]) == 2
    assert "pip install" in capsys.readouterr().err
    assert not (tmp_path / "night").exists()
