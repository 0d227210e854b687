"""Scans for tests."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from frontend_sim.scenario import ScanScenario, parse_scenario
from frontend_sim.simulation import ScanRun, simulate

FULL = 8.0
"""Full scale of the scans below [V]."""


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


def sampled(source: float, pin: float, switch: float, sampling: float, taken: float) -> str:
    """Return the lines of [adc.input], without noise, in the order of the circuit.

    Parameters
    ----------
    source, switch : resistances [ohm];  pin, sampling : capacitances [F]
    taken : acquisition time [s]
    """
    return (
        f"[adc.input]\nsource_resistance = {source}\npin_capacitance = {pin}\n"
        f"switch_resistance = {switch}\nsampling_capacitance = {sampling}\n"
        f"acquisition_time = {taken}\nnoise = false"
    )


def held_looks(run: ScanRun) -> list[tuple[float, int, float]]:
    """Return instant, number of the channel and held voltage of every look, in order of time."""
    return sorted(
        (float(time), i, float(held))
        for i, channel in enumerate(run.channels.values())
        for time, held in zip(channel.time, channel.held, strict=True)
    )


LOW_PASS = '[[channel.chain]]\nkind = "rc-lowpass"\nresistance = 1e3\ncapacitance = 1e-7'
SHARED = (
    '[[scan.chain]]\nkind = "rc-lowpass"\nname = "shared"\nresistance = 1e3\ncapacitance = 1e-8'
)


def crosstalk_by_runs(array: str, scan: str, adc: str = "") -> NDArray[np.float64]:
    """Return what a full scale at one channel moves at the end of a long run of three.

    Parameters
    ----------
    array : of the run that is looked at, "pin" or "held"
    scan, adc : as ``scan_of`` takes them

    Returns the largest of the last four conversions, victim by aggressor, 0 on the diagonal,
    shape (3, 3) [LSB].
    """
    made = scan_of([level(0.0)] * 3, adc, scan, duration=10e-3)
    base, moved = simulate(made), np.zeros((3, 3))
    for j in range(3):
        raised = [level(1.0 if i == j else 0.0) for i in range(3)]
        run = simulate(scan_of(raised, adc, scan, duration=10e-3))
        for i, name in enumerate(made.names):
            if i != j:
                ends = (getattr(each.channels[name], array)[-4:] for each in (run, base))
                difference = np.subtract(*ends) * FULL / made.adc.lsb
                moved[i, j] = difference[np.argmax(np.abs(difference))]
    return moved
