"""The noise budget and the loading of ladders, as a user reads them."""

from __future__ import annotations

from pathlib import Path

import pytest
from rich.console import Console

from frontend_sim.measure.response import inspect_scenario
from frontend_sim.present import inspection_tables
from frontend_sim.scenario import load_scenario

STAGES = Path(__file__).resolve().parents[2] / "scenarios" / "stages"


def _text(name: str) -> str:
    console = Console(width=100, record=True, file=None, quiet=False, force_terminal=False)
    with console.capture() as capture:
        for table in inspection_tables(inspect_scenario(load_scenario(STAGES / f"{name}.toml"))):
            console.print(table)
    return capture.get()


def test_a_ladder_shows_its_loading_and_its_noise() -> None:
    """Loading lowers the gain 0.9091 of the buffered sections; every resistor has its row."""
    text = _text("ladder")
    assert "What loading does" in text
    assert "0.9091" in text
    assert "Noise at the pin" in text
    assert "together" in text


def test_a_chain_without_noise_has_no_budget_table() -> None:
    """A filter given by its poles has no resistor that could make noise."""
    assert "Noise at the pin" not in _text("butterworth")


def test_the_budget_is_part_of_the_plain_data() -> None:
    """``--json`` holds the rows in SI units."""
    inspection = inspect_scenario(load_scenario(STAGES / "rc-lowpass.toml"))
    noise = inspection.as_dict()["noise"]
    assert noise["rows"][0]["rms"] == pytest.approx(noise["rms"])
    assert noise["rows"][0]["share"] == pytest.approx(1.0)
