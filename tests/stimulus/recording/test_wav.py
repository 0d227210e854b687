"""WAV files: every width, against two independent writers and headers built by hand."""

from __future__ import annotations

import struct
import wave
from pathlib import Path

import numpy as np
import pytest
from recorded import points, rate, recording, wav
from scipy.io import wavfile

from frontend_sim.errors import RecordingError


@pytest.mark.parametrize("dtype", [np.uint8, np.int16, np.int32, np.float32, np.float64])
@pytest.mark.parametrize("channels", [1, 3])
def test_against_an_independent_writer(tmp_path: Path, dtype: type, channels: int) -> None:
    """Files of another library read back exactly, scaled to full scale 1.0."""
    rng = np.random.default_rng(2)
    if np.issubdtype(dtype, np.integer):
        info = np.iinfo(dtype)
        data = rng.integers(info.min, info.max, (500, channels), dtype, endpoint=True)
        data[0], data[1] = info.min, info.max
        zero = 128.0 if dtype is np.uint8 else 0.0
        expected = (data.astype(float) - zero) / 2.0 ** (info.bits - 1)
        assert expected.min() == -1.0
    else:
        data = rng.standard_normal((500, channels)).astype(dtype)
        expected = data.astype(float)
    wavfile.write(tmp_path / "a.wav", 22050, data)
    for channel in range(channels):
        stimulus = recording(tmp_path / "a.wav", channel=channel + 1)
        assert np.array_equal(points(stimulus), expected[:, channel])
        assert rate(stimulus) == 22050.0


def test_24_bits(tmp_path: Path) -> None:
    """Three bytes per sample, written by the standard library, keep sign and every bit."""
    codes = np.array([-(2**23), -1, 0, 1, 2**23 - 1, 123456, -654321])
    with wave.open(str(tmp_path / "a.wav"), "wb") as out:
        out.setnchannels(1)
        out.setsampwidth(3)
        out.setframerate(48000)
        out.writeframes(b"".join(int(code).to_bytes(3, "little", signed=True) for code in codes))
    assert np.array_equal(points(recording(tmp_path / "a.wav")), codes / 2.0**23)


@pytest.mark.parametrize(("codec", "bits", "form"), [(1, 16, "<h"), (1, 32, "<i"), (3, 32, "<f")])
def test_extensible(tmp_path: Path, codec: int, bits: int, form: str) -> None:
    """The extensible header, with other chunks before the data, one of them of odd length."""
    data = b"".join(struct.pack(form, number) for number in (1, -2, 3))
    before = b"LIST" + struct.pack("<I", 5) + b"hello\x00" + b"fact" + struct.pack("<II", 4, 3)
    file = tmp_path / "a.wav"
    file.write_bytes(wav(data, codec, 1, bits, 8000, extensible=True, before=before))
    full = 1.0 if codec == 3 else 2.0 ** (bits - 1)
    assert np.array_equal(points(recording(file)), np.array([1.0, -2.0, 3.0]) / full)


def test_scale_comes_after_full_scale(tmp_path: Path) -> None:
    """Full scale is 1.0, then scale, unit and offset make volts of it."""
    (tmp_path / "a.wav").write_bytes(wav(struct.pack("<hh", -32768, 16384)))
    stimulus = recording(tmp_path / "a.wav", scale=2500, unit="mV", offset="1 V")
    assert np.allclose(points(stimulus), [-1.5, 2.25], rtol=0.0, atol=1e-15)


def test_given_rate_wins_and_is_told(tmp_path: Path) -> None:
    """A rate that differs from the header's is used, and the notes say so."""
    (tmp_path / "a.wav").write_bytes(wav(bytes(16), rate=8000))
    stimulus = recording(tmp_path / "a.wav", rate="8001 Hz")
    assert rate(stimulus) == 8001.0
    assert any("not at the file's own, 8000 Hz" in note for note in stimulus.notes())


def test_truncated_data_tell_how_many_frames_there_are(tmp_path: Path) -> None:
    """A recording that broke off is an error with both numbers of frames."""
    (tmp_path / "a.wav").write_bytes(wav(bytes(400), promised=1000, channels=2))
    with pytest.raises(RecordingError, match=r"truncated: .* 250 frames, there: 100"):
        recording(tmp_path / "a.wav", channel=1).notes()


def test_trailing_chunks_and_half_frames_are_no_data(tmp_path: Path) -> None:
    """What follows the data is not played, and a last half frame is left out."""
    body = wav(struct.pack("<hh", 5, 6) + b"\x01", promised=5) + b"\x00LIST" + struct.pack("<I", 0)
    (tmp_path / "a.wav").write_bytes(body)
    assert np.array_equal(points(recording(tmp_path / "a.wav")) * 32768.0, [5.0, 6.0])
