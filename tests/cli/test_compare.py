"""``compare`` and ``report`` as a user meets them: tables, JSON, plots, pages, exit status."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from compared import LSB, TABLES, made, night, varied

from frontend_sim.archive import record_run
from frontend_sim.cli import main
from frontend_sim.scenario import parse_scenario
from frontend_sim.simulation import ScanSimulation, Simulation

RULES = 'seed = 1\nkeep = "nothing"\n[draws]\ncount = 9\n'

SCAN = """
format = 1
title = "Invented: two sensors, one converter"

[[channel]]
name = "oil"
[channel.stimulus]
kind = "step"
after = "1 V"
at = "1 ms"
[[channel.chain]]
kind = "rc-lowpass"
name = "filter"
resistance = "RESISTANCE"
capacitance = "4.7 nF"

[[channel]]
name = "water"
[channel.stimulus]
kind = "ramp"
slope = "30 V/s"

[adc]
rate = "20 kHz"
bits = 12
low = "-0.5 V"
high = "3.3 V"

[simulation]
duration = "20 ms"

[[check]]
kind = "headroom"
at_least = "10 mV"
"""


@pytest.fixture(scope="module")
def runs(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder of records and nights."""
    folder = tmp_path_factory.mktemp("runs")
    scenarios = {
        "a": made(),
        "same": made(),
        "moved": varied(offset=0.1e-3 + 0.1 * LSB),
        "seed": varied(seed=2),
        "loud": varied(**{"adc.input_noise": "0.6 mV", "seed": 3}),
        "broken": varied(**{"check[1].at_least": "1.4 V"}),
        "shifted": varied(**{"adc.first": "50 us"}),
        "unchecked": made(check=[]),
    }
    for name, scenario in scenarios.items():
        record_run(Simulation(scenario), folder / f"{name}.h5")
    for name, resistance in (("scan", "10 kohm"), ("scan2", "11 kohm")):
        scan: Any = parse_scenario(SCAN.replace("RESISTANCE", resistance))
        record_run(ScanSimulation(scan), folder / f"{name}.h5")
    night(folder, "one", RULES)
    night(folder, "two", RULES, offset="0.2 mV", corner="3.36 kHz")
    return folder


@pytest.fixture
def here(runs: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty current folder, with links to the records and nights."""
    for path in runs.iterdir():
        (tmp_path / path.name).symlink_to(path)
    monkeypatch.chdir(tmp_path)
    return tmp_path


@pytest.mark.parametrize(
    ("arguments", "status"),
    [
        (["a.h5", "same.h5"], 0),
        (["a.h5", "moved.h5"], 1),
        (["a.h5", "moved.h5", "--tolerance", "0.2 LSB", "--tolerance", "5 %"], 0),
        (["a.h5", "moved.h5", "--tolerance", "0.05 LSB", "--tolerance", "5 %"], 1),
        (["a.h5", "seed.h5"], 0),
        (["a.h5", "seed.h5", "--seeds", "8"], 0),
        (["a.h5", "loud.h5", "--seeds", "8"], 1),
        (["a.h5", "broken.h5"], 1),
        (["a.h5", "broken.h5", "--tolerance", "99 %"], 1),
        (["a.h5", "shifted.h5"], 1),
        (["a.h5", "same.h5", "moved.h5"], 1),
        (["scan.h5", "scan.h5"], 0),
        (["scan.h5", "scan2.h5"], 1),
        (["scan.h5", "scan2.h5", "--tolerance", "40 LSB", "--tolerance", "1 %"], 0),
        (["scan.h5", "scan.h5", "--attribute", "--seeds", "8"], 0),
        (["one", "one"], 0),
        (["one", "two"], 1),
        (["one/set.h5", "two"], 1),
    ],
)
def test_the_status_is_that_of_a_gate(
    here: Path, arguments: list[str], status: int, capsys: pytest.CaptureFixture[str]
) -> None:
    """0 where nothing differs by more than noise and tolerance, 1 where something does."""
    assert main(["compare", *arguments]) == status
    told = capsys.readouterr().out.splitlines()[-1 if status == 0 else slice(None)]
    if status == 0:
        assert told == "nothing differs by more than noise and tolerance"
    else:
        assert any(line.startswith("differs: ") for line in told)


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (["a.h5"], "two or more records or sets"),
        (["a.h5", "none.h5"], "none.h5 cannot be opened"),
        (["a.h5", "one"], "one is a set and the other is none"),
        (["a.h5", "scan.h5"], "scan.h5 is a scan and the other is none"),
        (["one", "two", "--seeds", "9"], "the runs of sets have many seeds already"),
        (["a.h5", "moved.h5", "--tolerance", "much"], '"much" is no tolerance'),
        (["a.h5", "moved.h5", "--tolerance", "hedroom=1 V"], "did you mean 'headroom'"),
        (["a.h5", "moved.h5", "--tolerance", "headroom=1 Hz"], "headroom is measured in V"),
        (["a.h5", "moved.h5", "--plot", "x.pdf"], "a plot is written as .png or .svg"),
        (["a.h5", "moved.h5", "seed.h5", "--plot", "x.png"], "a plot shows two runs"),
        (["one", "nowhere"], "nowhere: there is no such record or set"),
        (["a.h5", "moved.h5", "--seeds", "3"], "Invalid value for '--seeds'"),
    ],
)
def test_wrong_input_is_one_message(
    here: Path, arguments: list[str], told: str, capsys: pytest.CaptureFixture[str]
) -> None:
    """Status 2, one message that says what to do, no traceback, no file left."""
    before = sorted(here.iterdir())
    assert main(["compare", *arguments]) == 2
    error = capsys.readouterr().err
    assert told in error
    assert "Traceback" not in error
    assert sorted(here.iterdir()) == before


def test_json_tells_all(here: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Keys, shifts with errors, margins, and what each change does alone, as plain data."""
    assert main(["compare", "a.h5", "moved.h5", "--attribute", "--json"]) == 1
    (found,) = json.loads(capsys.readouterr().out)
    assert found["changed"][0]["key"] == "chain[buffer].offset_voltage"
    pin = next(row for row in found["series"] if row["name"] == "pin")
    assert pin["mean"] == pytest.approx(0.1, abs=1e-9)
    assert pin["differs"]
    noise = next(row for row in found["series"] if row["name"] == "noise")
    assert set(noise) >= {"first", "second", "change"}
    share = found["attribution"]["parameters"][0]
    assert share["moved"]["pin, mean"] == pytest.approx(0.1, abs=1e-9)
    assert found["attribution"]["remainder"]["pin, mean"] == pytest.approx(0.0, abs=1e-9)


def test_json_of_scans(here: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The key that changed names its channel, and so do the measures that it moves."""
    assert main(["compare", "scan.h5", "scan2.h5", "--attribute", "--json"]) == 1
    (found,) = json.loads(capsys.readouterr().out)
    key = "channel[oil].chain[filter].resistance"
    assert [row["key"] for row in found["changed"]] == [key]
    (share,) = found["attribution"]["parameters"]
    assert share["moved"]["oil: pin, mean"] < -0.01
    assert share["moved"]["water: pin, mean"] == 0.0
    assert found["attribution"]["units"]["oil: headroom"] == "V"


def test_more_channels_than_a_picture_has_rows_are_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """The message names the number, before anything is run again, and no file is left."""
    monkeypatch.chdir(tmp_path)
    head, _, tail = SCAN.replace("RESISTANCE", "10 kohm").partition("[[channel]]")
    _, _, rest = tail.partition("[adc]")
    level = '[channel.stimulus]\nkind = "step"\nafter = "1 V"\n'
    channels = "".join(f'[[channel]]\nname = "c{i}"\n{level}' for i in range(33))
    scan: Any = parse_scenario(f"{head}{channels}[adc]{rest}")
    record_run(ScanSimulation(scan), "many.h5")
    assert main(["compare", "many.h5", "many.h5", "--plot", "x.png"]) == 2
    assert "at most 32 channels, and this scan has 33" in capsys.readouterr().err
    assert not Path("x.png").exists()


def test_json_of_nights(here: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Runs, changed keys and flipped verdicts of two sets, as plain data."""
    assert main(["compare", "one", "two", "--json"]) == 1
    (found,) = json.loads(capsys.readouterr().out)
    assert (found["matched"], found["reseeded"]) == (9, 0)
    assert {row["key"] for row in found["changed"]} == {
        "chain[buffer].offset_voltage",
        "check[1].at_least",
    }
    corner = next(row for row in found["columns"] if row["name"] == "corner")
    assert corner["now_fail"] > 0


@pytest.mark.parametrize(
    "pair", [("a.h5", "moved.h5"), ("a.h5", "shifted.h5"), ("scan.h5", "scan2.h5"), ("one", "two")]
)
@pytest.mark.parametrize("name", ["both.png", "both.svg"])
def test_plots_are_drawn(here: Path, pair: tuple[str, str], name: str) -> None:
    """Both runs and their difference become a file, which is not overwritten unasked."""
    assert main(["compare", *pair, "--plot", name]) == 1
    assert (here / name).stat().st_size > 10_000
    assert main(["compare", *pair, "--plot", name]) == 2
    assert main(["compare", *pair, "--plot", name, "--overwrite"]) == 1


@pytest.mark.parametrize(
    ("arguments", "status", "told"),
    [
        (["a.h5"], 0, "Holds: all 2 checks"),
        (["broken.h5", "--since", "a.h5"], 1, "Fails: 1 of 2 checks"),
        (["unchecked.h5"], 0, "No check was made"),
        (["scan.h5", "--since", "scan2.h5"], 0, "Holds: all 2 checks"),
        (["two", "--since", "one"], 1, "Fails in "),
    ],
)
def test_report_writes_a_page(
    here: Path, arguments: list[str], status: int, told: str, capsys: pytest.CaptureFixture[str]
) -> None:
    """The page says what the status says, and is named after the run by default."""
    assert main(["report", *arguments]) == status
    assert told in capsys.readouterr().out
    page = here / f"{Path(arguments[0]).resolve().stem}.html"
    text = page.read_text("utf-8")
    assert f'<p class="verdict">{told}' in text
    assert ("What changed" in text) == ("--since" in arguments)
    assert ("Nearest to its limit: " in text) == told.startswith("Holds")
    assert main(["report", *arguments]) == 2
    assert "exists" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (["none.h5"], "none.h5 cannot be opened"),
        (["a.h5", "-o", "page.pdf"], "a page is written as .html"),
        (["a.h5", "--since", "scan.h5"], "scan.h5 is a scan and the other is none"),
        (["a.h5", "--since", "one"], "one is a directory"),
        (["one", "--since", "a.h5"], "no set of this program"),
    ],
)
def test_report_refuses(
    here: Path, arguments: list[str], told: str, capsys: pytest.CaptureFixture[str]
) -> None:
    """Status 2 with one message, and no page."""
    assert main(["report", *arguments]) == 2
    assert told in capsys.readouterr().err
    assert not list(here.glob("*.html"))


def test_titles_and_names_are_no_markup(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Square brackets and dollar signs in names reach tables and plots as they are."""
    monkeypatch.chdir(tmp_path)
    check = {**TABLES["check"][0], "name": "a [red] $x_$ b"}
    for name, limit in (("a", 0.1), ("b", 1.4)):
        scenario = made(title="[bold] $y_$", check=[{**check, "at_least": f"{limit} V"}])
        record_run(Simulation(scenario), f"{name}.h5")
    assert main(["compare", "a.h5", "b.h5", "--attribute", "--plot", "x.png"]) == 1
    told = capsys.readouterr().out
    assert told.count("a [red] $x_$ b") >= 2  # in the table and in the last line
    assert main(["report", "b.h5", "--since", "a.h5"]) == 1


@pytest.mark.parametrize("name", ["a.h5", "one/set.h5"])
@pytest.mark.parametrize("seed", range(6))
def test_damaged_files_are_one_message(
    runs: Path, tmp_path: Path, name: str, seed: int, capsys: pytest.CaptureFixture[str]
) -> None:
    """Bytes that were turned over anywhere give a message or a result, never a traceback."""
    content = bytearray((runs / name).read_bytes())
    for place in np.random.default_rng(seed).integers(0, len(content), 20).tolist():
        content[place] ^= 255
    damaged = tmp_path / Path(name).name
    damaged.write_bytes(content)
    given = tmp_path if name.startswith("one") else damaged
    first, page = str(runs / Path(name).parts[0]), str(tmp_path / "x.html")
    for arguments in (["compare", first, str(given)], ["report", str(given), "-o", page]):
        assert main(arguments) in (0, 1, 2)
        assert "Traceback" not in capsys.readouterr().err
