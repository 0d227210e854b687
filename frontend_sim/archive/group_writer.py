"""Blocks of one channel go into a group of HDF5."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

from frontend_sim.archive import layout
from frontend_sim.archive.datasets import attach_axis, extend, open_column
from frontend_sim.archive.kept import put_stretches
from frontend_sim.archive.names import dataset_name
from frontend_sim.archive.table import put_table
from frontend_sim.archive.text import clean, put_text
from frontend_sim.measure.result import Result
from frontend_sim.quantities import SIGNALS
from frontend_sim.scenario.model import Scenario
from frontend_sim.scenario.signal import PIN
from frontend_sim.simulation.run import RunBlock
from frontend_sim.simulation.stretches import Index, Stretches

if TYPE_CHECKING:
    import h5py


class GroupWriter:
    """Conversions, waveforms, notes and tables of one channel, in the layout of ``layout.py``.

    Parameters
    ----------
    group : the root of a record, or the group of a channel
    scenario : what is run
    stretches : what of the run is kept; None for all of it
    """

    def __init__(
        self, group: h5py.Group, scenario: Scenario, stretches: Stretches | None = None
    ) -> None:
        """Write nothing yet."""
        self._group, self._scenario, self._stretches = group, scenario, stretches
        self._points: tuple[str, ...] | None = None
        self._seen = 0

    def append(self, block: RunBlock) -> None:
        """Add some conversions, a stretch of waveform, or both."""
        numbers, seen = None, len(block.time)
        if self._stretches is not None:
            block, places = self._stretches.part(block)
            numbers = self._seen + places
        self._seen += seen
        if len(block.time) > 0:
            self._append_conversions(block, numbers)
        self._points = self._points or tuple(block.waveform)
        if len(block.waveform_time) > 0:
            self._append_waveform(block)

    def _append_conversions(self, block: RunBlock, numbers: Index | None) -> None:
        if layout.ADC not in self._group:
            held = len(block.held) > 0
            self._open_conversions(len(block.time), len(block.stimulus) > 0, held)
        group = self._group[layout.ADC]
        for column in layout.CONVERSIONS:
            extend(group[column.name], getattr(block, column.field))
        if numbers is not None:
            extend(group[layout.NUMBER.name], numbers)
        if layout.STIMULUS in group:
            extend(group[layout.STIMULUS], block.stimulus)
        if layout.HELD.name in group:
            extend(group[layout.HELD.name], block.held)

    def _open_conversions(self, expected: int, stimulus: bool = False, held: bool = False) -> None:
        adc = self._scenario.adc
        group = self._group.create_group(layout.ADC, track_order=True)
        group.attrs["description"] = "conversions; low, high and lsb are in V"
        for name in ("bits", "code_format", "lowest_code", "highest_code", "low", "high", "lsb"):
            group.attrs[name] = getattr(adc, name)
        for column in layout.CONVERSIONS:
            open_column(group, column, column.kind or layout.code_type(adc), expected)
        if self._stretches is not None:
            open_column(group, layout.NUMBER, str(layout.NUMBER.kind), expected)
        if stimulus:
            column = layout.stimulus_column(self._scenario.stimulus_unit)
            open_column(group, column, "<f8", expected)
        if held:
            open_column(group, layout.HELD, "<f8", expected)
        attach_axis(group)

    def _append_waveform(self, block: RunBlock) -> None:
        if layout.WAVEFORM not in self._group:
            self._open_waveform(len(block.waveform_time))
        group = self._group[layout.WAVEFORM]
        extend(group[layout.TIME], block.waveform_time)
        for point, values in block.waveform.items():
            extend(group[dataset_name(point)], values)

    def _open_waveform(self, expected: int) -> None:
        group = self._group.create_group(layout.WAVEFORM, track_order=True)
        group.attrs["description"] = "points of the chain, from the stimulus to the pin"
        open_column(group, layout.WAVEFORM_TIME, "<f8", expected)
        units = dict(zip(self._scenario.points(), self._scenario.units(), strict=True))
        for point in self._points or ():
            unit = units.get(point, PIN)
            noun = SIGNALS[unit].name
            column = layout.Column(dataset_name(point), "", unit or "1", f"{noun} at this point")
            open_column(group, column, "<f8", expected).attrs["point"] = clean(point)
        attach_axis(group)

    def finish(self, notes: Iterable[str], results: Sequence[Result]) -> None:
        """Write what is known after the run: notes and tables."""
        if layout.ADC not in self._group:
            self._open_conversions(0)
        if self._points and layout.WAVEFORM not in self._group:
            self._open_waveform(0)
        if self._stretches is not None:
            put_stretches(self._group, self._stretches, self._seen)
        put_ending(self._group, notes, results)


def put_ending(group: h5py.Group, notes: Iterable[str], results: Sequence[Result]) -> None:
    """Write notes and tables of results."""
    checks = [result for result in results if result.verdict != "none"]
    measures = [result for result in results if result.verdict == "none"]
    put_text(group, layout.NOTES, tuple(notes), "what was decided during the run")
    put_table(group, layout.MEASURE, measures, "measured numbers")
    put_table(group, layout.CHECK, checks, "numbers held against their limits")
