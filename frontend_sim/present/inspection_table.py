"""The tables of an inspection, for the terminal."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from frontend_sim.measure.level import decibel
from frontend_sim.measure.response.attenuation import Attenuation
from frontend_sim.measure.response.inspection import Inspection
from frontend_sim.measure.response.model_distance import ModelDistance, ResponseError
from frontend_sim.present.acquisition_rows import acquisition_rows
from frontend_sim.present.amplifier_table import (
    amplifier_table,
    large_signal_rows,
    level_rows,
    referred_rows,
)
from frontend_sim.present.filter_rows import filter_rows
from frontend_sim.present.noise_table import loading_table, noise_table
from frontend_sim.present.numbers import difference, engineering, fixed, per_unit, plain
from frontend_sim.quantities import SignalUnit

if TYPE_CHECKING:
    from rich.table import Table


def inspection_tables(inspection: Inspection) -> tuple[Table, ...]:
    """Return the tables of an inspection: step response, frequency response, poles, models."""
    tables = [
        _pairs(f"Step response of the chain: {inspection.time.shape.word}", _step_rows(inspection)),
        _pairs("Frequency response", _frequency_rows(inspection)),
    ]
    if rows := [*level_rows(inspection), *referred_rows(inspection.referred)]:
        tables.append(_pairs("Levels at rest", rows))
    if inspection.poles:
        tables.append(_pole_table(inspection))
    if inspection.loading:
        tables.append(loading_table(inspection.loading))
    if inspection.amplifiers:
        tables.append(amplifier_table(inspection.amplifiers))
    if inspection.large_signal is not None:
        tables.append(_pairs("Large signals", large_signal_rows(inspection.large_signal)))
    if inspection.acquisition is not None:
        tables.append(_pairs("Input of the converter", acquisition_rows(inspection.acquisition)))
    if inspection.filter is not None:
        tables.append(_pairs("Filter of the converter", filter_rows(inspection)))
    if inspection.noise is not None and inspection.noise.rows:
        tables.append(noise_table(inspection.noise))
    if inspection.models:
        tables.append(_model_table(inspection))
    return tuple(tables)


def _pairs(title: str, rows: list[tuple[str, str]]) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title=title, show_header=False, title_justify="left")
    table.add_column("quantity")
    table.add_column("value", justify="right")
    for name, value in rows:
        table.add_row(Text(name), Text(value))
    return table


def _step_rows(inspection: Inspection) -> list[tuple[str, str]]:
    time, shape = inspection.time, inspection.time.shape
    unit = inspection.referred.unit

    def response(value: float) -> str:
        return engineering(value * unit.size, "V", 4)

    rows = []
    if time.delay > 0.0:
        rows.append(("pure delay, counted in the times below", engineering(time.delay, "s", 4)))
    one = f"1 {unit.difference}".rstrip()
    rows.append((f"at the start, for a step of {one}", response(time.start)))
    rows.append(("in the end", _end_text(time.end) or response(time.end or 0.0)))
    if shape.peak is not None and shape.peak_time is not None:
        when = shape.peak_time
        at = f"at {engineering(when, 's', 4)}" if math.isfinite(when) else "in the end"
        rows.append(("largest excursion", f"{response(shape.peak)} {at}"))
    if shape.overshoot is not None:
        of = "the end value" if shape.reference == "end value" else "the start value"
        rows.append((f"overshoot, of {of}", fixed(100.0 * shape.overshoot, 2, "%")))
    if shape.undershoot is not None:
        rows.append(
            (f"undershoot, of the {shape.reference}", fixed(100.0 * shape.undershoot, 2, "%"))
        )
    for settling in time.settlings:
        name = f"stays within {settling.label}"
        if settling.label.endswith("%"):
            name += f" of the {shape.reference}"
        else:
            name += f" of {inspection.adc.bits} bits, step of "
            name += difference(time.full_scale_step, unit, 4)
        if settling.time is not None:
            rows.append((name, f"after {engineering(settling.time, 's', 4)}"))
    return rows


def _end_text(end: float | None) -> str:
    """Return what becomes of a response that has no end, "" where it has one."""
    if end is None:
        return "rings for ever"
    return "" if math.isfinite(end) else "drifts without bound"


def _frequency_rows(inspection: Inspection) -> list[tuple[str, str]]:
    frequency, largest = inspection.frequency, inspection.frequency.largest
    where = {0.0: "at zero frequency", math.inf: "at high frequencies"}.get(
        largest.frequency, f"at {engineering(largest.frequency, 'Hz', 4)}"
    )
    rows = [("largest gain", f"{_gain(largest.value, inspection.referred.unit)} {where}")]
    rows += [
        (f"-3 dB corner, {corner.side}", engineering(corner.frequency, "Hz", 4))
        for corner in frequency.corners
    ]
    rows.append(("group delay at zero frequency", engineering(frequency.group_delay_dc, "s", 4)))
    if largest.frequency != 0.0 and math.isfinite(largest.value):
        rows.append(
            (
                "group delay where the gain is largest",
                engineering(frequency.group_delay_band, "s", 4),
            )
        )
    rows += [_attenuation_row(each) for each in frequency.attenuations]
    if frequency.noise_bandwidth is not None:
        rows.append(("noise bandwidth", engineering(frequency.noise_bandwidth, "Hz", 4)))
    return rows


def _attenuation_row(attenuation: Attenuation) -> tuple[str, str]:
    name = f"attenuation at {attenuation.label}, {engineering(attenuation.frequency, 'Hz', 4)}"
    parts = []
    if attenuation.below_largest is not None:
        parts.append(f"{_db(attenuation.below_largest)} below the largest gain")
    same = attenuation.below_dc == attenuation.below_largest
    if attenuation.below_dc is not None and not same:
        parts.append(f"{_db(attenuation.below_dc)} below zero frequency")
    return name, ", ".join(parts) or f"gain {plain(attenuation.gain)}"


def _gain(value: float, unit: SignalUnit) -> str:
    if unit.si != "V":
        return engineering(value * unit.size, per_unit(unit.difference), 4)
    return f"{plain(value)} ({_db(decibel(value))})" if 0.0 < value < math.inf else plain(value)


def _db(value: float) -> str:
    return fixed(value, 2, "dB")


def _pole_table(inspection: Inspection) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(title="Poles", title_justify="left")
    for name in ("stage", "pole [rad/s]", "natural frequency", "damping", "Q", "time constant"):
        table.add_column(name, justify="left" if name == "stage" else "right")
    for pole in inspection.poles:
        real, imaginary = plain(pole.real), plain(pole.imaginary)
        table.add_row(
            Text(pole.stage),
            real if pole.imaginary == 0.0 else f"{real} ± j {imaginary}",
            engineering(pole.natural_frequency, "Hz", 4),
            "" if pole.damping_ratio is None else plain(pole.damping_ratio),
            "" if pole.quality_factor is None else plain(pole.quality_factor),
            "" if pole.time_constant is None else engineering(pole.time_constant, "s", 4),
        )
    return table


def _model_table(inspection: Inspection) -> Table:
    from rich.table import Table

    models = inspection.models
    rate = engineering(models[0].grid_rate, "Hz", 4)
    if models[0].grid_rate == inspection.adc.rate:
        rate += ", the conversion rate"
    table = Table(title=f"Discrete models against exact, grid at {rate}", title_justify="left")
    table.add_column("")
    for model in models:
        table.add_column(_model_name(model), justify="right")
    for place, error in enumerate(models[0].corners):
        at = engineering(error.corner.frequency, "Hz")
        rows = [model.corners[place] for model in models]
        table.add_row(f"error at the corner {at}", *(_error(row.at_corner) for row in rows))
        warped = ["" if row.warping is None else fixed(100.0 * row.warping, 3, "%") for row in rows]
        table.add_row(f"shift of the corner {at}", *warped)
    half = engineering(0.5 * inspection.adc.rate, "Hz")
    table.add_row(
        f"error at half the rate {half}", *(_error(model.at_half_rate) for model in models)
    )
    table.add_row("step on the grid, largest", *(_lsb(model.step_on_grid) for model in models))
    table.add_row("step anywhere, largest", *(_lsb(model.step_anywhere) for model in models))
    return table


def _model_name(model: ModelDistance) -> str:
    if model.prewarp is None:
        return model.method
    return f"{model.method}, kept at {engineering(model.prewarp, 'Hz')}"


def _error(error: ResponseError | None) -> str:
    if error is None:
        return "beyond the grid"
    if math.isinf(error.magnitude):
        return "nothing passes"
    return f"{fixed(error.magnitude, 3, 'dB')}, {fixed(error.phase, 2)}°"


def _lsb(value: float) -> str:
    return f"{plain(value, 3)} LSB" if value >= 1e-6 else "0 LSB"
