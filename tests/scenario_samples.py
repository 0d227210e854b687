"""A scenario that is right, and ways to make it wrong."""

from __future__ import annotations

BASE = """format = 1
title = "Invented: a step behind an input filter and an amplifier"
seed = 7

[stimulus]
kind = "step"
after = "1 V"

[[chain]]
kind = "rc-lowpass"
name = "input filter"
resistance = "10 kohm"
capacitance = "4.7 nF"

[[chain]]
kind = "noninverting-amplifier"
gain = 2
gain_bandwidth = "1 MHz"

[adc]
rate = "20 kHz"
bits = 12
low = "0 V"
high = "3.3 V"

[simulation]
duration = "250 ms"
discretization = "exact"
grid_rate = "auto"
initial = "settled"
"""

MARK = "# <<"
"""Stands at the end of the line that a message must name."""


def edited(*edits: tuple[str, str]) -> str:
    """Return the scenario with pieces of its text replaced; each must be there."""
    text = BASE
    for old, new in edits:
        assert old in text, f"{old!r} is not in the sample"
        text = text.replace(old, new, 1)
    return text


def marked_line(text: str) -> int | None:
    """Return the line that carries the mark, if any does."""
    rows = [number for number, row in enumerate(text.split("\n"), 1) if row.endswith(MARK)]
    assert len(rows) <= 1
    return rows[0] if rows else None


def stimulus(text: str) -> str:
    """Return the scenario with another stimulus, given without its header."""
    return edited(('kind = "step"\nafter = "1 V"\n', text + "\n"))


def stage(text: str) -> str:
    """Return the scenario with one stage only, given without its header."""
    start, end = BASE.index("[[chain]]"), BASE.index("[adc]")
    return f"{BASE[:start]}[[chain]]\n{text}\n\n{BASE[end:]}"
