"""Small sets for the tests of nights; every setting is invented."""

from __future__ import annotations

from pathlib import Path

BASE = """
format = 1
title = "Invented: a step through a divider and a filter"

[stimulus]
kind = "step"
after = "1 V"

[[chain]]
kind = "rc-lowpass"
name = "input filter"
resistance = { value = "10 kohm", tolerance = "1 %", drift = "100 ppm/K" }
capacitance = { value = "4.7 nF", tolerance = "5 %" }

[[chain]]
kind = "gain"
gain = 2

[adc]
rate = "20 kHz"
bits = 12
high = "3.3 V"
input_noise = "1 mV"

[simulation]
duration = "5 ms"

[[check]]
kind = "level"
at = "0.1 ms"
at_least = "1.76 V"
"""


def base(directory: Path, text: str = BASE, name: str = "base.toml") -> Path:
    """Write a scenario."""
    file = directory / name
    file.write_text(text, encoding="utf-8")
    return file


def made_set(directory: Path, text: str, name: str = "set.toml", scenario: str = BASE) -> Path:
    """Write a set file and the scenario that it varies; ``base`` is added where it is missing."""
    base(directory, scenario)
    given = text if "base =" in text or "scenarios =" in text else f'base = "base.toml"\n{text}'
    file = directory / name
    file.write_text(given, encoding="utf-8")
    return file


RECORDED = """
format = 1
title = "Invented: noise through a filter"

[stimulus]
kind = "recording"
file = "recorded.csv"
rate = "100 kHz"

[[chain]]
kind = "rc-lowpass"
resistance = { value = "10 kohm", tolerance = "5 %" }
capacitance = "4.7 nF"

[adc]
rate = "10 kHz"
bits = 16
low = "-5 V"
high = "5 V"
input_noise = "100 uV"
"""
"""A recording through a filter with a spread, for draws."""

DRAWS = 'seed = 3\nkeep = "nothing"\n[draws]\ncount = {}\n'
"""A set of so many draws."""
