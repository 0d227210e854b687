"""Twelve leads of an electrocardiogram, sampled at once and in turn."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from frontend_sim.scenario import ScanScenario, parse_scenario
from frontend_sim.simulation import simulate

Real = NDArray[np.float64]

NAMES = ("I", "II", "III", "aVR", "aVL", "aVF", "V1", "V2", "V3", "V4", "V5", "V6")


@pytest.fixture(scope="module")
def leads() -> Real:
    """Leads I, II and III of the example of pydicom, 1 kHz, shape (10000, 3) [1.25 uV]."""
    pydicom = pytest.importorskip("pydicom")
    from pydicom.examples import get_path

    data = pydicom.dcmread(get_path("waveform"))
    return np.rint(data.waveform_array(0)[:, :12] / 1.25)


def ecg(leads: Real, folder: Path, sampling: str) -> ScanScenario:
    """Return a scan of twelve leads, each once in a millisecond, at an LSB of one count."""
    file = folder / "leads.csv"
    np.savetxt(file, leads, fmt="%d", delimiter=",", header=",".join(NAMES), comments="")
    text = "".join(
        f'[[channel]]\nname = "{name}"\n[channel.stimulus]\nkind = "recording"\n'
        f'file = "leads.csv"\ncolumn = "{name}"\nrate = "1 kHz"\nscale = 1.25e-6\n'
        for name in NAMES
    )
    text += f'[scan]\nsampling = "{sampling}"\n[adc]\nrate = "12 kHz"\nbits = 16\n'
    text += 'low = -0.04096\nhigh = 0.04096\ncode = "twos-complement"\n'
    made = parse_scenario(text, folder)
    assert isinstance(made, ScanScenario)
    return made


def test_leads_sampled_at_once_keep_their_sum(leads: Real, tmp_path: Path) -> None:
    """Einthoven: I + III - II = 0 counts at every instant of the recording."""
    run = simulate(ecg(leads, tmp_path, "simultaneous"))
    one, two, three = (run.channels[name].codes for name in NAMES[:3])
    assert len(one) == len(leads)
    assert np.all(one + three - two == 0)
    for name, column in zip(NAMES, leads.T, strict=True):
        np.testing.assert_array_equal(run.channels[name].codes, column[: len(one)])


def test_leads_sampled_in_turn_break_it_by_slope_times_skew(leads: Real, tmp_path: Path) -> None:
    """Lead II comes 1/12 ms late, III 2/12 ms: the sum is their slope times that, but rounding.

    The prediction is made of the recording itself: between its points the signal goes in lines.
    """
    run = simulate(ecg(leads, tmp_path, "sequential"))
    one, two, three = (run.channels[name].codes for name in NAMES[:3])
    count = min(len(one), len(two), len(three), len(leads) - 1)
    slope = np.diff(leads, axis=0)[:count]
    predicted = (2.0 * slope[:, 2] - slope[:, 1]) / 12.0
    broken = (one[:count] + three[:count] - two[:count]).astype(np.float64)
    assert np.max(np.abs(predicted)) > 5.0  # there is something to see
    # Three codes are rounded, lead I at a point of the recording to no error at all.
    assert np.max(np.abs(broken - predicted)) <= 1.0 + 1e-6
    assert np.max(np.abs(broken)) > 5.0
