"""The example of ``docs/leads.md`` on a real recording, with pinned numbers and an oracle."""

from __future__ import annotations

import re
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.signal import lsim

import frontend_sim as fe

PAGE = Path(__file__).resolve().parents[2] / "docs" / "leads.md"
LSB = 1e6 * 5.0 / 2**16 / 500.0
"""Of a code, referred to the electrodes [uV]."""

# Checks of the leads sampled at once: rms of the total error, and the hum, as shares of the range.
PINNED = {
    "I": (1.00136e-3, 1.54412e-4),
    "II": (1.38754e-3, 1.55612e-4),
    "III": (1.05490e-3, 2.21564e-4),
    "V5": (2.17099e-3, 2.37155e-4),
}


@pytest.fixture(scope="module")
def page(tmp_path_factory: pytest.TempPathFactory) -> dict[str, Any]:
    """Run the page, and return the names that it defines."""
    pytest.importorskip("pydicom")
    (text,) = re.findall(r"```python\n(.*?)```", PAGE.read_text("utf-8"), re.DOTALL)
    names: dict[str, Any] = {}
    with pytest.MonkeyPatch.context() as patch:
        patch.chdir(tmp_path_factory.mktemp("leads"))
        exec(compile(text, str(PAGE), "exec"), names)
        patch.undo()
    return names


def sum_of_leads(page: dict[str, Any], scan: Any, third: float) -> NDArray[np.float64]:
    """Return I + III - II at the scan's own instants, by SciPy, with no engine of ours [uV].

    Lines between the points of the recording, both poles of each lead, steps of 1/12 ms.
    """
    points = page["data"].waveform_array(0)[:, :3]
    fine = np.arange((len(points) - 1) * 12 + 1) / 12e3
    count = min(len(scan.channels[name].codes) for name in ("I", "II", "III")) - 2
    total = np.zeros(count)
    for lead, (name, sign) in enumerate([("I", 1.0), ("II", -1.0), ("III", 1.0)]):
        drive = np.interp(fine, np.arange(len(points)) / 1e3, points[:, lead])
        tau, slow = 1e4 * (third if name == "III" else 100e-9), 500.0 / (2.0 * np.pi * 1e6)
        system = ([1.0], np.polymul([tau, 1.0], [slow, 1.0]))
        _, moved, _ = lsim(system, drive - drive[0], fine)
        step = np.rint(scan.channels[name].time[:count] * 12e3).astype(np.int64)
        total += sign * (drive[0] + moved[step])
    return total


def test_numbers_of_the_page(page: dict[str, Any]) -> None:
    """At once 1 LSB, in turn 7.6 uV, with unequal filters 8.5 uV; all checks hold in all three."""
    assert page["peaks"] == pytest.approx([LSB, 50.0 * LSB, 56.0 * LSB], rel=1e-6)
    assert "0.15 uV" in PAGE.read_text("utf-8")
    assert [f"{peak:.1f}" for peak in page["peaks"][1:]] == ["7.6", "8.5"]
    for scan in ("at_once", "in_turn", "unequal"):
        for name in ("I", "II", "III"):
            rows = fe.evaluate_checks(page[scan].channels[name])
            assert {row.verdict for row in rows} == {"holds", "none"}


@pytest.mark.parametrize(
    ("scan", "third"), [("at_once", 100e-9), ("in_turn", 100e-9), ("unequal", 110e-9)]
)
def test_the_identity_breaks_as_scipy_says(page: dict[str, Any], scan: str, third: float) -> None:
    """Code by code within the rounding of three codes, half an LSB each."""
    expected = sum_of_leads(page, page[scan], third)
    found = page["identity"](page[scan])[: len(expected)]
    assert np.max(np.abs(found - expected)) <= 1.5 * LSB * (1.0 + 1e-6)


def test_checks_of_each_lead(page: dict[str, Any]) -> None:
    """Total error and hum of four of the leads are what they were."""
    for name, (error, hum) in PINNED.items():
        rows = {row.name: row.value for row in fe.evaluate_checks(page["at_once"].channels[name])}
        assert rows["total-error"] == pytest.approx(error, rel=2e-4)
        assert rows["mains-level"] == pytest.approx(hum, rel=2e-4)
