"""What goes into a record comes out of it, bit by bit."""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
import pytest
from archived import Cut, assert_same, made_run, scenario
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from frontend_sim.archive import Result, open_record, record_run, save_record
from frontend_sim.scenario import parse_scenario
from frontend_sim.simulation import GridReport, Run

TEXT = st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\0"), max_size=40)
NUMBERS = st.floats(allow_nan=True, allow_infinity=True, width=64)
GRID = GridReport("bilinear", 1e6, None, 0.25, 0.125, -0.03)


@given(
    count=st.integers(0, 60), title=TEXT, notes=st.lists(TEXT, max_size=3), data=st.data(),
    points=st.lists(st.sampled_from(["stimulus", "a/b", "time", "..", "%2F", "Ω"]), unique=True),
)  # fmt: skip
@settings(max_examples=40, deadline=None)
def test_anything_comes_back(
    count: int, title: str, notes: list[str], data: st.DataObject, points: list[str]
) -> None:
    """Arrays of any floats, texts of any characters and lines, names of any kind come back."""
    run = made_run(scenario(title=title), count, tuple(points), tuple(notes))
    pin = data.draw(arrays(np.float64, count, elements=NUMBERS))
    run = Run(**{**vars(run), "pin": pin})
    with tempfile.TemporaryDirectory() as folder:
        with open_record(save_record(run, Path(folder) / "r.h5")) as record:
            record.verify()
            assert_same(record, run)
            assert record.title == run.scenario.title
        assert [path.name for path in Path(folder).iterdir()] == ["r.h5"]


@pytest.mark.parametrize("size", [61, 1023, 1025, 5000])
def test_blocks_do_not_show(tmp_path: Path, size: int) -> None:
    """A run that comes in blocks of any size gives the record of the same run in one piece."""
    run = made_run(scenario(), 3000, ("stimulus", "input filter"), ("a note",), GRID)
    with open_record(record_run(Cut(run, size), tmp_path / "r.h5")) as record:
        assert_same(record, run)


def test_longer_than_a_chunk(tmp_path: Path) -> None:
    """Columns of several chunks come back, and a stretch across a boundary is the same stretch."""
    run = made_run(scenario(), 150_000, ("stimulus",))
    with open_record(record_run(Cut(run, 40_000), tmp_path / "r.h5")) as record:
        assert_same(record, run)
        part = record.conversions(65_000, 66_000)
        assert part.start == 65_000
        np.testing.assert_array_equal(part.codes, run.codes[65_000:66_000])
        np.testing.assert_array_equal(record.conversions(-10).pin, run.pin[-10:])
        stretch = record.waveform.stretch("stimulus", 65_500, 65_600)
        np.testing.assert_array_equal(stretch, run.waveform["stimulus"][65_500:65_600])
        assert len(record.conversions(200_000).time) == 0


@pytest.mark.parametrize("code", ["straight-binary", "offset-binary", "twos-complement"])
def test_codes_of_32_bits(tmp_path: Path, code: str) -> None:
    """The lowest and the highest code of the widest converter come back, in each format."""
    low = 0.0 if code == "straight-binary" else -1.0
    adc = {"rate": 1e3, "bits": 32, "low": low, "high": 1.0, "code": code}
    run = made_run(scenario(adc=adc), 100)
    with open_record(save_record(run, tmp_path / "r.h5")) as record:
        assert record.codes.min() == run.scenario.adc.lowest_code
        assert record.codes.max() == run.scenario.adc.highest_code
        assert_same(record, run)


def test_without_notes_waveform_and_results(tmp_path: Path) -> None:
    """What a run does not have is empty in the record, and its verdict is "none"."""
    with open_record(save_record(made_run(scenario(), 10), tmp_path / "r.h5")) as record:
        assert record.notes == ()
        assert dict(record.waveform) == {}
        assert record.waveform_time.shape == (0,)
        assert record.results == ()
        assert record.grid is None
        assert record.verdict == "none"


def test_results_come_back(tmp_path: Path) -> None:
    """Measures and checks come back with their numbers and texts; a number that is not is None."""
    results = [
        Result("settling", 0.31, "LSB", 0.5, 0.19, "holds", "largest error after 12 ms"),
        Result("größter Fehler", None, "µV"),
        Result("overrange", 3.0, limit=0.0, margin=-3.0, verdict="fails"),
    ]
    run = made_run(scenario(), 10, grid=GRID)
    with open_record(save_record(run, tmp_path / "r.h5", results=iter(results))) as record:
        given = [result for result in record.results if result.method != "bilinear"]
        assert given == [results[1], results[0], results[2]]
        assert record.verdict == "fails"
        assert_same(record, run)


def test_results_are_read_after_the_last_block(tmp_path: Path) -> None:
    """A generator of results can compute them from the run, for the run is over then."""
    seen: list[int] = []
    run = made_run(scenario(), 100)
    source = Cut(run, 10, between=seen.append)
    results = (Result("blocks", float(len(seen))) for _ in range(1))
    with open_record(record_run(source, tmp_path / "r.h5", results=results)) as record:
        assert record.results == (Result("blocks", 10.0),)


@pytest.mark.parametrize(
    ("verdicts", "expected"),
    [([], "none"), (["none"], "none"), (["none", "holds"], "holds"), (["fails", "holds"], "fails")],
)
def test_verdict(tmp_path: Path, verdicts: list[str], expected: str) -> None:
    """A record holds if all its checks hold, fails if one fails, and is silent without checks."""
    results = [Result(str(k), 1.0, verdict=each) for k, each in enumerate(verdicts)]  # type: ignore[arg-type]  # parametrized text
    path = save_record(made_run(scenario(), 4), tmp_path / "r.h5", results=results)
    with open_record(path) as record:
        assert record.verdict == expected


def test_progress_is_that_of_the_run(tmp_path: Path) -> None:
    """The share that is done rises to one."""
    shares: list[float] = []
    record_run(Cut(made_run(scenario(), 100), 30), tmp_path / "r.h5", progress=shares.append)
    assert shares == [0.3, 0.6, 0.9, 1.0]


def test_the_scenario_file_is_kept_as_written(tmp_path: Path) -> None:
    """Comments, umlauts, line ends and all stand in the record."""
    text = (
        "# Prüfling\r\n[stimulus]\r\nkind = 'step'\r\nafter = 1\r\n\n[adc]\nrate = '1 kHz'\n"
        "bits = 8\nhigh = 2\n[simulation]\nduration = 1\n\n"
    )
    with open_record(save_record(made_run(parse_scenario(text), 10), tmp_path / "r.h5")) as record:
        assert record.scenario_text == text
        assert record.source == text
        assert record.scenario.source == text


def test_a_scenario_made_in_python_is_written_as_a_file(tmp_path: Path) -> None:
    """The generated text reads back as the same scenario, and is not taken for the user's own."""
    values = scenario()
    with open_record(save_record(made_run(values, 10), tmp_path / "r.h5")) as record:
        assert parse_scenario(record.scenario_text).resolved() == values.resolved()
        assert record.source == ""


def test_same_run_same_datasets(tmp_path: Path) -> None:
    """Two records of one run differ in nothing but the time of their making."""
    run = made_run(scenario(), 500, ("stimulus", "input filter"), ("note",), GRID)
    with (
        open_record(save_record(run, tmp_path / "a.h5")) as first,
        open_record(record_run(Cut(run, 60), tmp_path / "b.h5")) as second,
    ):
        assert_same(first, second.run())
        assert first.scenario_text == second.scenario_text
        assert first.resolved == second.resolved
        assert first.scenario_digest == second.scenario_digest == run.scenario.digest()


def test_a_closed_record_says_so(tmp_path: Path) -> None:
    """Reading after the end of the context is one clear message."""
    with open_record(save_record(made_run(scenario(), 10), tmp_path / "r.h5")) as record:
        assert repr(record).startswith("<Record ")
    assert repr(record).startswith("<closed Record ")
    with pytest.raises(Exception, match="is closed; open it again"):
        _ = record.codes
