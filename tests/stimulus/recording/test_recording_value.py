"""The recording as a value: paths, equality, one opening, and its place among the stimuli."""

from __future__ import annotations

import os
import pickle
from pathlib import Path

import numpy as np
import pytest
from recorded import forget, points, recording, values, write

from frontend_sim.stimulus import STIMULI, Sum
from frontend_sim.stimulus.recording import READERS, Recording, prepare


@pytest.fixture
def ramp(tmp_path: Path) -> Path:
    """Five points in a row."""
    return write(tmp_path / "ramp.csv", "0\n1\n2\n3\n4\n")


def test_paths_are_relative_to_the_scenario(ramp: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A relative path starts at the scenario's folder, or the current one; it is kept absolute."""
    keys = {"file": "ramp.csv", "rate": 1}
    stimulus = Recording.model_validate(keys, context={"directory": ramp.parent})
    assert stimulus.files() == (ramp,)
    nested = Recording.model_validate(
        {**keys, "file": "x/../ramp.csv"}, context={"directory": ramp.parent}
    )
    assert nested == stimulus
    monkeypatch.chdir(ramp.parent)
    assert Recording.model_validate(keys) == stimulus
    assert (
        Recording.model_validate({**keys, "file": str(ramp)}, context={"directory": "/"})
        == stimulus
    )


def test_resolved_values_make_the_same_recording(ramp: Path) -> None:
    """What is stored of a recording makes it again: as JSON, and sent to another process."""
    stimulus = recording(ramp, rate="2 kHz", unit="mV", start="1 ms", timestamps="auto")
    assert Recording.model_validate_json(stimulus.model_dump_json()) == stimulus
    stimulus.notes()
    assert pickle.loads(pickle.dumps(stimulus)) == stimulus
    assert hash(stimulus) == hash(recording(ramp, rate=2000, unit="mV", start=1e-3))


def test_opened_once_and_again_when_the_file_changes(
    ramp: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Length, notes and drives open the file once; a changed file is opened anew."""
    opened = []
    original = prepare.open_source
    monkeypatch.setattr(prepare, "open_source", lambda *key: opened.append(key) or original(*key))
    forget()
    for _ in range(3):
        stimulus = recording(ramp, rate=1)
        assert stimulus.known_length() == 5.0
        assert stimulus.notes()
        assert np.array_equal(points(stimulus), np.arange(5.0))
    assert len(opened) == 1
    write(ramp, "5\n6\n7\n")
    os.utime(ramp, ns=(1, 1))
    assert np.array_equal(points(recording(ramp, rate=1)), [5.0, 6.0, 7.0])
    assert len(opened) == 2


def test_notes_name_the_file_and_warn_of_the_band(ramp: Path) -> None:
    """The notes say what the recording cannot show: anything above half its own rate."""
    notes = recording(ramp, rate=360, speed=2).notes()
    assert all(note.startswith("ramp.csv: ") for note in notes)
    assert any(
        "played 2 times as fast" in note and "nothing above 360 Hz" in note for note in notes
    )


def test_one_of_the_stimuli_and_a_term_of_a_sum(ramp: Path) -> None:
    """The kind table knows it, and a sum adds it to others, with its file, notes and length."""
    assert STIMULI["recording"] is Recording
    terms = [
        {"kind": "recording", "file": "ramp.csv", "rate": 1},
        {"kind": "step", "after": "10 V", "at": "2 s"},
    ]
    total = Sum.model_validate({"term": terms}, context={"directory": ramp.parent})
    assert total.files() == (ramp,)
    assert total.known_length() == 5.0
    assert total.notes()
    times = np.array([0.5, 2.0, 3.5])
    summed = np.sum([drive.values(times) for drive in total.drives((1,))], axis=0)
    assert np.allclose(summed, [0.5, 12.0, 13.5], rtol=0.0, atol=1e-12)


def test_every_format_has_its_reader_and_its_line_in_the_documents() -> None:
    """The kind table of formats and the reference of formats hold the same suffixes."""
    text = Path(__file__).parents[3].joinpath("docs", "recordings.md").read_text("utf-8")
    rows = [line for line in text.splitlines() if line.startswith("| `.")]
    documented = {cell.strip(" `") for row in rows for cell in row.split("|")[1].split(",")}
    assert documented == set(READERS)
    keys = {
        line.split("`")[1]
        for line in text.splitlines()
        if line.startswith("| `") and line not in rows
    }
    assert set(Recording.model_fields) - {"kind"} <= keys


def test_start_between_points_adds_what_is_missing_until_the_first(ramp: Path) -> None:
    """Two drives whose sum is exact from t = 0 on, also before it, where the chain settles."""
    stimulus = recording(ramp, rate=1, start=1.25)
    assert len(stimulus.drives((1,))) == 2
    assert sum(drive.initial for drive in stimulus.drives((1,))) == 1.25
    times = np.array([0.0, 0.25, 0.75, 1.0])
    assert np.allclose(values(stimulus, times), 1.25 + times, rtol=0.0, atol=1e-15)
