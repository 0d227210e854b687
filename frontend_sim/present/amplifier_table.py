"""What amplifiers, offsets and slew rates do, for the terminal."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from frontend_sim.measure.level import decibel
from frontend_sim.measure.response.amplifiers import AmplifierResponse, StopBandRise
from frontend_sim.measure.response.gain import Corner
from frontend_sim.measure.response.inspection import Inspection
from frontend_sim.measure.response.large_signal import LargeSignal
from frontend_sim.measure.response.pin_level import PinLevel
from frontend_sim.measure.response.referred import Referred
from frontend_sim.present.numbers import engineering, fixed, level, plain, quantity

if TYPE_CHECKING:
    from rich.table import Table

Row = tuple[str, str]


def amplifier_table(rows: Sequence[AmplifierResponse]) -> Table:
    """Return what each amplifier as it is does to its stage, against an ideal one."""
    from rich.table import Table
    from rich.text import Text

    table = Table(title="What the amplifiers do", title_justify="left")
    for name in ("stage", "", "ideal amplifier", "as it is"):
        table.add_column(name, justify="left" if name in ("stage", "") else "right")
    for row in rows:
        name = row.stage
        for what, ideal, own in _amplifier_rows(row):
            table.add_row(Text(name), what, ideal, own)
            name = ""
    return table


def _amplifier_rows(row: AmplifierResponse) -> list[tuple[str, str, str]]:
    rows = []
    if (section := row.section) is not None:
        nominal = engineering(section.nominal_corner, "Hz", 4)
        rows.append(("corner f0", nominal, engineering(section.corner, "Hz", 4)))
        factor = plain(section.nominal_quality_factor)
        rows.append(("quality factor Q", factor, plain(section.quality_factor)))
    ideal = "without bound" if row.ideal_corners is None else _corners(row.ideal_corners)
    rows.append(("-3 dB corners", ideal, _corners(row.corners)))
    if row.loop_bandwidth is not None:
        rows.append(("closed-loop bandwidth", "", engineering(row.loop_bandwidth, "Hz", 4)))
    if (rise := row.stop_band) is not None:
        where = _where(rise)
        rows.append((f"stop band rises {where} to", _db(rise.ideal_gain), _db(rise.gain)))
    return rows


def _where(rise: StopBandRise) -> str:
    start = f"from {engineering(rise.least_frequency, 'Hz')}"
    if math.isinf(rise.frequency):
        return f"{start} on"
    return f"{start}, at {engineering(rise.frequency, 'Hz')}"


def _db(gain: float) -> str:
    return fixed(decibel(gain), 1, "dB") if gain > 0.0 else "nothing passes"


def _corners(corners: Sequence[Corner]) -> str:
    return ", ".join(engineering(corner.frequency, "Hz", 4) for corner in corners) or "none"


def level_rows(inspection: Inspection) -> list[Row]:
    """Return rows about the constant at the pin and the range in units of the stimulus."""
    found, unit = inspection.level, inspection.referred.unit
    rows = []
    if found.offset is not None and found.lsb is not None:
        zero = level(found.zero, unit)
        size = f"{engineering(found.offset, 'V', 4)}, {plain(found.lsb, 4)} LSB"
        rows.append((f"pin at a stimulus of {zero}", size))
        rows += _spread_rows(found, found.offset)
    adc = inspection.adc
    ends = (found.at_low, adc.low, found.low_held), (found.at_high, adc.high, found.high_held)
    for value, end, held in ends:
        if value is not None:
            name = f"pin reaches {engineering(end, 'V')} at a stimulus of"
            but = f", but a limit of {held} comes first" if held else ""
            rows.append((name, level(value, unit, 4) + but))
    return rows


def referred_rows(found: Referred) -> list[Row]:
    """Return rows about an LSB and all noise as a stimulus, where that is not the pin itself."""
    rows = []
    if found.unit.si != "V" or found.gain != 1.0:
        name = found.unit.difference
        if found.lsb is not None:
            rows.append(("one LSB, referred to the stimulus", quantity(found.lsb, name)))
        if found.noise:
            rows.append(("noise of all sources, likewise, rms", quantity(found.noise, name)))
    return rows


def _spread_rows(found: PinLevel, offset: float) -> list[Row]:
    if found.spread == 0.0:
        return []
    ends = (engineering(offset + sign * found.spread, "V", 4) for sign in (-1.0, 1.0))
    name = "with offset voltages and bias currents of either sign"
    return [(name, " to ".join(ends))]


def large_signal_rows(found: LargeSignal) -> list[Row]:
    """Return rows about full-power bandwidth and the settling of a step over the whole range."""
    rows = [
        (
            f"full-power bandwidth of {power.stage}, "
            f"{engineering(power.slew_rate * 1e-6, 'V/us')}, peak "
            f"{engineering(power.amplitude, 'V')}",
            engineering(power.bandwidth, "Hz", 4),
        )
        for power in found.stages
    ]
    whole = "range that rails leave" if found.held else "whole range"
    for way, time in (("up", found.rise), ("down", found.fall)):
        if time is not None:
            name = f"step over the {whole} {way}, stays within 0.5 LSB"
            rows.append((name, f"after {engineering(time, 's', 4)}"))
    if found.reason:
        rows.append(("step over the whole range", found.reason))
    return rows
