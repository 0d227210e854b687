"""Pairs of records and nights for the tests of comparisons; every setting is invented."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from frontend_sim.archive import open_record, record_run
from frontend_sim.archive.set_table import SetTable, open_set
from frontend_sim.comparison import RecordComparison, Tolerances, compare_records
from frontend_sim.replay import replay_set
from frontend_sim.scenario import Scenario
from frontend_sim.scenario.vary import with_values
from frontend_sim.simulation import Simulation

LSB = 3.3 / 4096.0
"""Width of a code [V]."""

TABLES: dict[str, Any] = {
    "title": "Invented: a level through a filter and a buffer",
    "seed": 1,
    "stimulus": {"kind": "sine", "amplitude": 0.5, "offset": 1.5, "frequency": "37 Hz"},
    "chain": [
        {"kind": "rc-lowpass", "name": "input filter", "resistance": "10k", "capacitance": "4n7"},
        {
            "kind": "noninverting-amplifier",
            "name": "buffer",
            "gain": 1,
            "gain_bandwidth": "1 MHz",
            "offset_voltage": "0.1 mV",
        },
    ],
    "adc": {"rate": "10 kHz", "bits": 12, "high": 3.3, "input_noise": "0.4 mV"},
    "simulation": {"duration": "100 ms"},
    "check": [
        {"kind": "headroom", "at_least": "100 mV"},
        {"kind": "noise", "basis": "run", "at_most": "1 LSB"},
    ],
}


def made(**changes: Any) -> Scenario:
    """Return the setting; keyword arguments replace its tables."""
    return Scenario.model_validate({**TABLES, **changes})


def compared(
    directory: Path,
    first: Scenario,
    second: Scenario,
    tolerances: Tolerances | None = None,
) -> RecordComparison:
    """Run two scenarios, and compare their records."""
    paths = directory / "first.h5", directory / "second.h5"
    for scenario, path in zip((first, second), paths, strict=True):
        record_run(Simulation(scenario), path, overwrite=True)
    with open_record(paths[0]) as one, open_record(paths[1]) as other:
        return compare_records(one, other, tolerances)


def varied(**values: Any) -> Scenario:
    """Return the setting with other values; ``_`` in a name is a dot, see ``KEYS``."""
    return with_values(made(), {KEYS.get(name, name): value for name, value in values.items()})


KEYS = {
    "capacitance": "chain[input filter].capacitance",
    "offset": "chain[buffer].offset_voltage",
    "rate": "adc.rate",
    "bits": "adc.bits",
}

NIGHT = """
format = 1
title = "Invented: a level through a filter"

[stimulus]
kind = "sine"
amplitude = "0.5 V"
offset = "1.5 V"
frequency = "200 Hz"

[[chain]]
kind = "rc-lowpass"
name = "input filter"
resistance = { value = "10 kohm", tolerance = "1 %" }
capacitance = { value = "4.7 nF", tolerance = "5 %" }

[[chain]]
kind = "noninverting-amplifier"
name = "buffer"
gain = 1
gain_bandwidth = "1 MHz"
offset_voltage = "OFFSET"

[adc]
rate = "10 kHz"
bits = 12
high = "3.3 V"
input_noise = "0.4 mV"

[simulation]
duration = "50 ms"

[[check]]
kind = "corner"
at_least = "CORNER"

[[check]]
kind = "noise"
basis = "run"
at_most = "0.7 LSB"
"""


def night(
    directory: Path,
    name: str,
    rules: str,
    offset: str = "0.1 mV",
    corner: str = "3.3 kHz",
    checks: bool = True,
) -> SetTable:
    """Replay a set in this process, and return its table."""
    folder = directory / f"files of {name}"
    folder.mkdir()
    text = NIGHT.replace("OFFSET", offset).replace("CORNER", corner)
    text = text if checks else text.partition("[[check]]")[0]
    (folder / "level.toml").write_text(text, encoding="utf-8")
    (folder / "set.toml").write_text(f'base = "level.toml"\n{rules}', encoding="utf-8")
    replay_set(folder / "set.toml", directory / name, on="in-process")
    return open_set(directory / name)
