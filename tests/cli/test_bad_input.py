"""Wrong input through the command: status 2, one message, no traceback, no file left behind."""

from __future__ import annotations

import os
import pickle
import struct
from collections.abc import Callable
from pathlib import Path

import h5py
import numpy as np
import pytest

from frontend_sim.cli import main

GOOD = {
    "format": "format = 1",
    "stimulus": 'kind = "step"\nafter = "1 V"\nat = "1 ms"',
    "chain": 'kind = "rc-lowpass"\nname = "filter"\nresistance = "10 kohm"\ncapacitance = "4.7 nF"',
    "adc": 'rate = "20 kHz"\nbits = 12\nhigh = "3.3 V"',
    "simulation": 'duration = "10 ms"',
}


def _text(**parts: str) -> str:
    values = {**GOOD, **parts}
    return (
        f"{values['format']}\n[stimulus]\n{values['stimulus']}\n[[chain]]\n{values['chain']}\n"
        f"[adc]\n{values['adc']}\n[simulation]\n{values['simulation']}\n"
    )


def _adc(**keys: str) -> str:
    values = {"rate": '"20 kHz"', "bits": "12", "high": '"3.3 V"', **keys}
    return "\n".join(f"{key} = {value}" for key, value in values.items())


# What is wrong, and a word that the message must hold.
SCENARIOS: dict[str, tuple[str, str]] = {
    "empty file": ("", "empty"),
    "not TOML": ("format == 1", "line 1"),
    "unclosed text": (_text(format='title = "x'), "line 1"),
    "key twice": (_text(adc=_adc() + "\nbits = 10"), "bits"),
    "newer format": (_text(format="format = 99"), "newer"),
    "unknown table": (_text() + "[adcc]\nx = 1\n", "adcc"),
    "unknown key": (_text(adc=_adc(bit="3")), "bit"),
    "unknown stimulus": (_text(stimulus='kind = "stepp"'), "stepp"),
    "unknown stage": (_text(chain='kind = "rc-low"'), "rc-low"),
    "stage without kind": (_text(chain='resistance = "1 ohm"'), "kind"),
    "missing key": (_text(chain='kind = "rc-lowpass"\nresistance = "1 kohm"'), "capacitance"),
    "a set of runs": ('format = 1\nbase = "a.toml"\n[draws]\ncount = 3\n', "frontend-sim replay"),
    "missing adc": ('[stimulus]\nkind = "step"\nafter = 1\n', "adc"),
    "wrong dimension": (_text(adc=_adc(high='"3.3 ohm"')), "3.3 ohm"),
    "unknown unit": (_text(adc=_adc(rate='"20 kHzz"')), "kHzz"),
    "decimal comma": (_text(adc=_adc(high='"3,3 V"')), "point"),
    "text without unit": (_text(adc=_adc(high='"3.3"')), "unit"),
    "text in a number": (_text(adc=_adc(high='"three volts"')), "three volts"),
    "NaN": (_text(adc=_adc(high="nan")), "nan"),
    "infinity": (_text(adc=_adc(rate="inf")), "inf"),
    "a date for a number": (_text(adc=_adc(rate="2026-01-01")), "rate"),
    "true for a number": (_text(adc=_adc(rate="true")), "rate"),
    "a list for a number": (_text(adc=_adc(rate="[1, 2]")), "rate"),
    "a number for a table": ("adc = 3\n[stimulus]\nkind = 'step'\nafter = 1\n", "adc"),
    "zero rate": (_text(adc=_adc(rate="0")), "above 0"),
    "negative rate": (_text(adc=_adc(rate='"-1 Hz"')), "above 0"),
    "0 bits": (_text(adc=_adc(bits="0")), "bits"),
    "33 bits": (_text(adc=_adc(bits="33")), "bits"),
    "half a bit": (_text(adc=_adc(bits="12.5")), "bits"),
    "range reversed": (_text(adc=_adc(low='"4 V"')), "low"),
    "range empty": (_text(adc=_adc(low='"3.3 V"')), "low"),
    "offset binary from zero": (_text(adc=_adc(code='"offset-binary"')), "offset-binary"),
    "unknown code": (_text(adc=_adc(code='"gray"')), "gray"),
    "too much jitter": (_text(adc=_adc(aperture_jitter='"20 us"')), "jitter"),
    "first beyond the end": (_text(adc=_adc(first='"1 s"')), "first"),
    "negative capacitance": (
        _text(chain='kind = "rc-lowpass"\nresistance = "1 kohm"\ncapacitance = "-1 nF"'),
        "above 0",
    ),
    "zero resistance": (
        _text(chain='kind = "rc-lowpass"\nresistance = 0\ncapacitance = "1 nF"'),
        "above 0",
    ),
    "unstable chain": (_text(chain='kind = "poles-zeros"\npoles = [5.0]'), "unstable"),
    "more zeros than poles": (
        _text(chain='kind = "poles-zeros"\npoles = [-1.0]\nzeros = [-1.0, -2.0]'),
        "poles",
    ),
    "half a complex pair": (
        _text(chain='kind = "poles-zeros"\npoles = [[-1.0, 2.0]]'),
        "conjugate",
    ),
    "denominator of zero": (
        _text(chain='kind = "polynomial"\nnumerator = [1.0]\ndenominator = [0.0]'),
        "zero",
    ),
    "improper polynomial": (
        _text(chain='kind = "polynomial"\nnumerator = [1.0, 0.0]\ndenominator = [1.0]'),
        "poles",
    ),
    "order of a filter": (
        _text(chain='kind = "butterworth"\norder = 0\ncorner = "1 kHz"'),
        "order",
    ),
    "band without corners": (
        _text(chain='kind = "bessel"\norder = 2\nresponse = "band-pass"\ncorner = "1 kHz"'),
        "lower_corner",
    ),
    "band reversed": (
        _text(
            chain='kind = "butterworth"\norder = 2\nresponse = "band-pass"\n'
            'lower_corner = "2 kHz"\nupper_corner = "1 kHz"'
        ),
        "below",
    ),
    "gain given twice": (
        _text(
            chain='kind = "noninverting-amplifier"\ngain = 2\nfeedback_resistance = "1k"\n'
            'ground_resistance = "1k"'
        ),
        "either",
    ),
    "gain below one": (_text(chain='kind = "noninverting-amplifier"\ngain = 0.5'), "gain"),
    "two stages of one name": (
        _text() + '[[chain]]\nkind = "gain"\nname = "filter"\ngain = 2\n',
        "filter",
    ),
    "integrator that has drifted away": (
        _text(
            stimulus='kind = "step"\nbefore = "1 V"\nafter = "2 V"',
            chain='kind = "poles-zeros"\npoles = [0.0]',
        ),
        "origin",
    ),
    "no duration": (_text(simulation=""), "duration"),
    "negative duration": (_text(simulation='duration = "-1 s"'), "above 0"),
    "too short for a conversion": (
        _text(simulation='duration = "1 us"', adc=_adc(first='"5 us"')),
        "conversion",
    ),
    "unknown discretization": (
        _text(simulation='duration = "1 ms"\ndiscretization = "tustin"'),
        "tustin",
    ),
    "pre-warp without bilinear": (
        _text(simulation='duration = "1 ms"\nprewarp = "1 kHz"'),
        "bilinear",
    ),
    "unknown waveform point": (
        _text(
            simulation='duration = "1 ms"\nwaveform_rate = "1 MHz"\nwaveform_points = ["filtre"]'
        ),
        "filter",
    ),
    "pulse shorter than its edges": (
        _text(stimulus='kind = "pulse"\nhigh = 1\nwidth = "1 us"\nrise = "5 us"'),
        "width",
    ),
    "period shorter than the pulse": (
        _text(stimulus='kind = "pulse"\nhigh = 1\nwidth = "5 us"\nperiod = "1 us"'),
        "period",
    ),
    "surge with two shapes": (
        _text(
            stimulus='kind = "double-exponential"\npeak = 1\nfront_time = "1 us"\n'
            'half_time = "50 us"\nrise_constant = "1 us"\ndecay_constant = "5 us"'
        ),
        "either",
    ),
    "surge with a short tail": (
        _text(
            stimulus='kind = "double-exponential"\npeak = 1\nfront_time = "1 us"\n'
            'half_time = "2 us"'
        ),
        "half_time",
    ),
    "sum of nothing": (_text(stimulus='kind = "sum"\nterm = []'), "term"),
}


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder, which is the current one."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def _refused(
    arguments: list[str], folder: Path, capsys: pytest.CaptureFixture[str], word: str
) -> str:
    before = sorted(folder.rglob("*"))
    status = main(arguments)
    captured = capsys.readouterr()
    assert status == 2
    assert captured.out == ""
    assert "Traceback" not in captured.err
    assert captured.err.count("error:") + captured.err.count("Error:") == 1
    assert word in captured.err
    assert sorted(folder.rglob("*")) == before
    return captured.err


@pytest.mark.parametrize("name", SCENARIOS)
def test_wrong_scenario(name: str, folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A wrong scenario file is refused with its name and what is wrong."""
    text, word = SCENARIOS[name]
    (folder / "wrong.toml").write_text(text)
    message = _refused(["run", "wrong.toml"], folder, capsys, word)
    assert "wrong.toml" in message or "filter" in message or "stage" in message


def _truncated_wav() -> bytes:
    head = b"RIFF" + struct.pack("<I", 2036) + b"WAVEfmt " + struct.pack("<I", 16)
    head += struct.pack("<HHIIHH", 1, 1, 8000, 16000, 2, 16) + b"data" + struct.pack("<I", 2000)
    return head + b"\0" * 100


def _npy(values: object) -> Callable[[Path], object]:
    return lambda path: np.save(path, values, allow_pickle=True)  # type: ignore[arg-type]  # wrong values are the point


def _hdf5(path: Path) -> None:
    with h5py.File(path, "w") as file:
        file["level"] = np.zeros(10)
        file.create_group("more")


def _bytes(content: bytes) -> Callable[[Path], object]:
    return lambda path: path.write_bytes(content)


RECORDINGS: dict[str, tuple[str, Callable[[Path], object], str, str]] = {
    "missing file": ("a.csv", lambda path: None, 'rate = "1 kHz"', "a.csv"),
    "a directory": ("a.csv", lambda path: path.mkdir(), 'rate = "1 kHz"', "directory"),
    "empty CSV": ("a.csv", _bytes(b""), 'rate = "1 kHz"', "empty"),
    "header only": ("a.csv", _bytes(b"t,v\n"), 'time = "t"', "a.csv"),
    "text in numbers": ("a.csv", _bytes(b"t,v\n0,1\n1,abc\n2,3\n"), 'time = "t"', "abc"),
    "missing value": ("a.csv", _bytes(b"t,v\n0,1\n1,\n2,3\n"), 'time = "t"', "missing"),
    "time goes back": ("a.csv", _bytes(b"t,v\n0,1\n2,1\n1,3\n"), 'time = "t"', "time"),
    "wrong column": ("a.csv", _bytes(b"t,v\n0,1\n1,2\n"), 'time = "t"\ncolumn = "w"', "w"),
    "neither time nor rate": ("a.csv", _bytes(b"v\n1\n2\n"), "", "rate"),
    "truncated WAV": ("a.wav", _bytes(_truncated_wav()), "", "frames"),
    "not a WAV": ("a.wav", _bytes(b"hello world, this is text"), "", "WAV"),
    "pickled NPY": ("a.npy", _npy(np.array([{}, {}], dtype=object)), 'rate = "1 kHz"', "ickle"),
    "complex NPY": ("a.npy", _npy(np.ones(5, complex)), 'rate = "1 kHz"', "complex"),
    "NPY of three dimensions": ("a.npy", _npy(np.ones((2, 2, 2))), 'rate = "1 kHz"', "dimension"),
    "not a NPY": ("a.npy", _bytes(pickle.dumps([1, 2])), 'rate = "1 kHz"', "NPY"),
    "not HDF5": ("a.h5", _bytes(b"no"), 'rate = "1 kHz"', "HDF5"),
    "missing dataset": ("a.h5", _hdf5, 'rate = "1 kHz"\ncolumn = "levle"', "level"),
    "not MAT": ("a.mat", _bytes(b"no" * 100), 'rate = "1 kHz"', "MAT"),
    "unknown format": ("a.xyz", _bytes(b"no"), 'rate = "1 kHz"', "xyz"),
    "end before start": (
        "a.csv",
        _bytes(b"v\n" + b"1\n" * 100),
        'rate = "1 kHz"\nstart = "50 ms"\nend = "10 ms"',
        "end",
    ),
}


@pytest.mark.parametrize("name", RECORDINGS)
def test_wrong_recording(name: str, folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A recording that cannot be read as asked is refused with its name."""
    file, write, keys, word = RECORDINGS[name]
    write(folder / file)
    stimulus = f'kind = "recording"\nfile = "{file}"\n{keys}'
    (folder / "scenario.toml").write_text(_text(stimulus=stimulus, simulation=""))
    message = _refused(["run", "scenario.toml"], folder, capsys, word)
    assert file in message or "scenario.toml: line" in message


def test_a_run_longer_than_its_recording(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Both lengths are told."""
    (folder / "a.csv").write_text("v\n" + "1\n" * 100)
    stimulus = 'kind = "recording"\nfile = "a.csv"\nrate = "1 kHz"'
    (folder / "s.toml").write_text(_text(stimulus=stimulus, simulation='duration = "1 s"'))
    _refused(["run", "s.toml"], folder, capsys, "100 ms")


OUTPUTS: dict[str, tuple[list[str], str]] = {
    "no such directory": (["-o", "nowhere/a.h5"], "nowhere"),
    "a directory as record": (["-o", "taken"], "directory"),
    "an existing record": (["-o", "there.h5"], "exists"),
    "the scenario itself": (["-o", "s.toml", "--overwrite"], "s.toml"),
    "a plot of unknown format": (["--plot", "a.bmp"], "png"),
    "a plot in no directory": (["--plot", "nowhere/a.png"], "nowhere"),
    "an existing plot": (["--plot", "there.png"], "exists"),
    "unknown option": (["--outputt", "a.h5"], "--outputt"),
}


@pytest.mark.parametrize("name", OUTPUTS)
def test_unusable_output(name: str, folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A place that cannot be written to is told before anything is computed or replaced."""
    arguments, word = OUTPUTS[name]
    (folder / "s.toml").write_text(_text())
    (folder / "taken").mkdir()
    (folder / "there.h5").write_bytes(b"something of the user's")
    (folder / "there.png").write_bytes(b"a picture of the user's")
    _refused(["run", "s.toml", *arguments], folder, capsys, word)
    assert (folder / "there.h5").read_bytes() == b"something of the user's"
    assert (folder / "there.png").read_bytes() == b"a picture of the user's"
    assert (folder / "s.toml").read_text() == _text()


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write everywhere")
def test_unwritable_directory(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A directory without write permission is told."""
    (folder / "s.toml").write_text(_text())
    (folder / "locked").mkdir(mode=0o500)
    _refused(["run", "s.toml", "-o", "locked/a.h5"], folder, capsys, "locked")


@pytest.mark.parametrize("command", ["run", "inspect", "validate"])
@pytest.mark.parametrize("file", ["none.toml", "."])
def test_missing_scenario(
    command: str, file: str, folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A scenario that is not there, or is a directory, is told by every command."""
    _refused([command, file], folder, capsys, file)


def test_a_scenario_that_is_no_text(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A picture renamed to .toml is told."""
    (folder / "s.toml").write_bytes(b"\x89PNG\r\n\x1a\n\0\0\0\xff\xfe")
    _refused(["validate", "s.toml"], folder, capsys, "s.toml")


def test_unknown_command(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A mistyped command gets the nearest one."""
    _refused(["inspct", "s.toml"], folder, capsys, "inspect")
