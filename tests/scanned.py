"""Scans for tests."""

from __future__ import annotations

from collections.abc import Sequence

from frontend_sim.scenario import ScanScenario, parse_scenario


def scan_of(
    stimuli: Sequence[str],
    adc: str = "",
    scan: str = "",
    chain: str = "",
    duration: float = 20e-3,
    more: str = "",
    rate: float = 20e3,
) -> ScanScenario:
    """Return a scan of channels c0, c1, ...; texts are lines of their tables.

    Parameters
    ----------
    stimuli : of the channels;  chain : a whole [[channel.chain]] of all of them
    adc, scan : lines of [adc] and of [scan], with what tables follow
    """
    text = "".join(
        f'[[channel]]\nname = "c{i}"\n[channel.stimulus]\n{stimulus}\n{chain}\n'
        for i, stimulus in enumerate(stimuli)
    )
    text += f"[scan]\n{scan}\n[simulation]\nduration = {duration}\n{more}\n"
    text += f"[adc]\nrate = {rate}\nbits = 16\nlow = -4.0\nhigh = 4.0\n{adc}\n"
    made = parse_scenario(text)
    assert isinstance(made, ScanScenario)
    return made


def level(volts: float) -> str:
    """Return a stimulus that rests."""
    return f'kind = "step"\nbefore = {volts}\nafter = {volts}'


def sine(frequency: float, amplitude: float = 1.0, phase: float = 0.0) -> str:
    """Return a sine."""
    return f'kind = "sine"\namplitude = {amplitude}\nfrequency = {frequency}\nphase = {phase}'


LOW_PASS = '[[channel.chain]]\nkind = "rc-lowpass"\nresistance = 1e3\ncapacitance = 1e-7'
SHARED = (
    '[[scan.chain]]\nkind = "rc-lowpass"\nname = "shared"\nresistance = 1e3\ncapacitance = 1e-8'
)
