"""Whether the disk has room for a record, and the memory for what its checks keep of the run."""

from __future__ import annotations

import os
import shutil
from dataclasses import dataclass
from pathlib import Path
from typing import Self

import numpy as np

from frontend_sim.archive import layout
from frontend_sim.converter.adc import Adc
from frontend_sim.errors import OutputError
from frontend_sim.measure.checks import Keeper
from frontend_sim.quantities.counting import counted
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.signal import PIN
from frontend_sim.simulation import ScanSimulation, Simulation

VALUE = 8
"""Bytes of a value with a full mantissa, which compression does not shrink."""


@dataclass(frozen=True)
class Room:
    """What a run takes, told before it begins.

    Parameters
    ----------
    conversions : of all channels
    least, most : bytes of the record: what is not compressed, and all if nothing shrinks
    memory : bytes that the checks keep until the end
    """

    conversions: int
    least: int
    most: int
    memory: int

    @classmethod
    def of(cls, simulation: Simulation | ScanSimulation) -> Self:
        """Return what a run takes, the sum over the channels of a scan."""
        duration = simulation.duration
        if isinstance(simulation, Simulation):
            return cls(*_of_channel(simulation.scenario, duration))
        rows = [_of_channel(channel, duration) for channel in simulation.channels.values()]
        return cls(*(sum(column) for column in zip(*rows, strict=True)))


def _of_channel(scenario: Scenario, duration: float) -> tuple[int, int, int, int]:
    adc, settings = scenario.adc, scenario.simulation
    count, held = adc.code_count(duration), isinstance(adc, Adc) and adc.input is not None
    full = VALUE * (1 + (scenario.stimulus_unit != PIN) + held)
    packed = sum(
        np.dtype(column.kind or layout.code_type(adc)).itemsize
        for column in layout.CONVERSIONS
        if column.compressed
    )
    rows = int(duration * (settings.waveform_rate or 0.0))
    kept = settings.waveform_points
    least = count * full + rows * VALUE * len(scenario.points() if kept is None else kept)
    most = least + count * packed + rows * VALUE
    return count, least, most, count * Keeper(scenario).per_conversion


def check_room(simulation: Simulation | ScanSimulation, path: Path) -> tuple[str, ...]:
    """Return notes on a disk or a memory that may be too small for a run.

    Parameters
    ----------
    path : where the record would go

    Raises
    ------
    OutputError
        If the disk is too small however well the record is compressed.
    """
    room, free, memory = Room.of(simulation), free_bytes(path.parent), memory_bytes()
    if room.least > free:
        raise OutputError(
            f"{path}: the record of {counted(room.conversions, 'conversion')} needs at least "
            f"{told_bytes(room.least)}, but the disk has {told_bytes(free)} left; shorten "
            "simulation.duration, keep fewer waveforms, free some space, or choose another place"
        )
    notes = []
    if room.most > free:
        notes.append(
            f"{path} will take {told_bytes(room.least)} to {told_bytes(room.most)}, by how well it "
            f"is compressed, and the disk has {told_bytes(free)} left; if it gets full, the run "
            "ends and leaves nothing"
        )
    if memory is not None and room.memory > memory:
        notes.append(
            f"the checks keep {told_bytes(room.memory)} of "
            f"{counted(room.conversions, 'conversion')} in memory, and this machine has "
            f"{told_bytes(memory)}; shorten simulation.duration, or leave out the checks that read "
            "codes"
        )
    return tuple(notes)


def refuse_beyond_memory(room: Room) -> None:
    """Refuse a run that is kept until its verdict, and is larger than the machine's memory.

    Raises
    ------
    OutputError
        If it is; the message begins with what it takes.
    """
    wanted, memory = room.most + room.memory, memory_bytes()
    if memory is not None and wanted > memory:
        raise OutputError(
            f"until its verdict the run takes {told_bytes(wanted)} of memory, and this machine has "
            f"{told_bytes(memory)}; shorten simulation.duration, keep fewer waveforms, or set "
            'keep = "nothing", which keeps what the checks read alone'
        )


def free_bytes(directory: Path) -> int:
    """Return how many bytes the disk of a directory, which may not be there yet, has left."""
    place = directory.absolute()
    while not place.exists():
        place = place.parent
    return shutil.disk_usage(place).free


def memory_bytes() -> int | None:
    """Return the size of the machine's memory; None where the system does not tell it."""
    try:
        return os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")
    except (AttributeError, OSError, ValueError):
        return None


def told_bytes(size: float) -> str:
    """Return a size for people, ``1.2 GB``."""
    for unit in ("B", "kB", "MB", "GB"):
        if size < 1000.0:
            return f"{size:.3g} {unit}"
        size /= 1000.0
    return f"{size:.3g} TB"
