"""What amplifiers do to their stages, levels at rest, and large signals."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from frontend_sim.analog.stages import STAGES
from frontend_sim.analog.stages.loop_bandwidth import feedback_times, loop_bandwidth
from frontend_sim.analog.stages.multiple_feedback import MultipleFeedback
from frontend_sim.measure.response import Inspection, inspect_scenario
from frontend_sim.present import inspection_tables
from frontend_sim.present.amplifier_table import level_rows
from frontend_sim.scenario.model import Scenario

SALLEN_KEY = {
    "kind": "sallen-key", "resistance_1": "10 kohm", "resistance_2": "10 kohm",
    "capacitance_1": "20 nF", "capacitance_2": "10 nF",
}  # fmt: skip
REAL = {"gain_bandwidth": "1 MHz", "output_resistance": "100 ohm"}
BAND_PASS = {
    "kind": "multiple-feedback", "response": "band-pass", "input_resistance": "10 kohm",
    "ground_resistance": "270 ohm", "feedback_resistance": "100 kohm",
    "feedback_capacitance": "22 nF", "middle_capacitance": "47 nF",
}  # fmt: skip


def scenario(*stages: dict[str, Any], **others: Any) -> Scenario:
    """Make a scenario of an invented chain in front of 12 bits from 0 V to 4 V."""
    return Scenario.model_validate(
        {
            "stimulus": {"kind": "step", "after": 1.0},
            "chain": stages,
            "adc": {"rate": "20 kHz", "bits": 12, "high": "4 V"},
            "simulation": {"duration": "1 ms"},
            **others,
        }
    )


def inspected(*stages: dict[str, Any], **others: Any) -> Inspection:
    """Inspect an invented chain."""
    return inspect_scenario(scenario(*stages, **others))


def test_corner_and_q_beside_those_of_an_ideal_amplifier():
    """The nominal ones are 1/(2 pi sqrt(R1 R2 C1 C2)) and sqrt(C1/C2)/2; real ones lie lower."""
    (row,) = inspected(SALLEN_KEY | REAL).amplifiers
    assert row.section.nominal_corner == pytest.approx(1125.395, rel=1e-6)
    assert row.section.nominal_quality_factor == pytest.approx(math.sqrt(0.5), rel=1e-12)
    assert 0.98 < row.section.corner / row.section.nominal_corner < 0.9999
    assert row.ideal_corners[0].frequency == pytest.approx(1125.395, rel=1e-6)


def test_the_stop_band_rises_to_what_the_output_resistance_lets_through():
    """Far up both capacitors are shorts: R_1 against R_out and R_2; an ideal section has 0."""
    (row,) = inspected(SALLEN_KEY | REAL).amplifiers
    peak = 1e-6  # of the pass band above one, for the loose tolerance
    assert row.stop_band.gain == pytest.approx(100.0 / 10_200.0, rel=1e-5 + peak)
    assert math.isinf(row.stop_band.frequency)
    assert row.stop_band.ideal_gain == 0.0
    assert row.stop_band.least < row.stop_band.gain


def test_an_ideal_amplifier_shifts_nothing():
    """A filter section is told with an ideal amplifier too, and its stop band falls for ever."""
    (row,) = inspected(SALLEN_KEY).amplifiers
    assert row.section.corner == pytest.approx(row.section.nominal_corner, rel=1e-12)
    assert row.stop_band is None
    assert row.loop_bandwidth is None


def test_the_noise_gain_of_a_band_pass_is_that_at_its_centre():
    """Against the solved circuit: the way from the amplifier's input to the output at the centre,
    and 1 + Q² (C1 + C2) / C1.
    """
    stage = MultipleFeedback.model_validate(BAND_PASS)
    solution = stage.solution()
    b, d = solution.columns["the amplifier"]
    s = 2j * math.pi * stage.nominal_corner
    block = solution.block
    gain = d + block.c @ np.linalg.solve(s * np.eye(block.order) - block.a, b)
    assert stage.noise_gain() == pytest.approx(abs(gain), rel=1e-9)
    share = (22.0 + 47.0) / 22.0
    expected = 1.0 + stage.nominal_quality_factor**2 * share
    assert stage.noise_gain() == pytest.approx(expected, rel=1e-12)


def test_a_band_pass_needs_its_noise_gain_times_its_centre():
    """An amplifier that has the centre's frequency but not its gain there is refused."""
    stage = MultipleFeedback.model_validate(BAND_PASS)
    needed = stage.nominal_corner * stage.noise_gain()
    MultipleFeedback.model_validate(BAND_PASS | {"gain_bandwidth": 1.01 * needed})
    with pytest.raises(ValueError, match="lies below what the filter itself asks for"):
        MultipleFeedback.model_validate(BAND_PASS | {"gain_bandwidth": 0.99 * needed})


@pytest.mark.parametrize(
    ("values", "noise_gain"),
    [
        (
            {
                "kind": "transimpedance-amplifier", "feedback_resistance": 1e6,
                "input_capacitance": 100e-12, "feedback_capacitance": 1e-12,
                "shunt_resistance": 5e6,
            },
            lambda s: 1.0 + (1e6 / (1 + s * 1e-6)) * (1 / 5e6 + s * 100e-12),
        ),
        (
            {
                "kind": "inverting-amplifier", "feedback_resistance": 1e5,
                "input_resistance": 1e3, "feedback_capacitance": 10e-12,
            },
            lambda s: 1.0 + (1e5 / (1 + s * 1e-6)) / 1e3,
        ),
        ({"kind": "buffer"}, lambda s: 1.0 + 0.0 * s),
        ({"kind": "noninverting-amplifier", "gain": 7.0}, lambda s: 7.0 + 0.0 * s),
    ],
)  # fmt: skip
def test_the_loop_has_gain_up_to_where_both_gains_meet(values, noise_gain):
    """At the frequency that is told, the noise gain from impedances is gain-bandwidth over it."""
    kind = STAGES[values["kind"]]
    stage = kind.model_validate(values | {"gain_bandwidth": 3e6})
    found = stage.closed_loop_bandwidth()
    assert abs(noise_gain(2j * math.pi * found)) == pytest.approx(3e6 / found, rel=1e-9)


def test_a_capacitor_that_takes_all_noise_gain_away_leaves_the_loop_open_ended():
    """Without a zero the noise gain falls as the amplifier's does: there is no such frequency."""
    assert math.isinf(loop_bandwidth(1e6, 10.0, 0.0, 1.0))
    assert feedback_times(1e4, math.inf, 1e-9) == pytest.approx((1e-5, 1e-5))


AMPLIFIER = {
    "kind": "noninverting-amplifier", "feedback_resistance": "9 kohm",
    "ground_resistance": "1 kohm", "offset_voltage": "2 mV", "bias_current": "1 uA",
    "source_resistance": "1 kohm",
}  # fmt: skip


def test_offset_and_range_at_the_pin():
    """2 mV less 1 uA through 1 kohm, times 10, plus 1 uA through the 9 kohm; then -2 times."""
    found = inspected(AMPLIFIER, {"kind": "gain", "gain": -2}).level
    offset = -2.0 * (10.0 * (2e-3 - 1e-3) + 9e-3)
    assert found.offset == pytest.approx(offset, rel=1e-9)
    assert found.lsb == pytest.approx(offset / (4.0 / 4096), rel=1e-9)
    # Either sign: 20 mV of the offset voltage, and 10 mV - 9 mV of the one bias current.
    assert found.spread == pytest.approx(2.0 * (20e-3 + 1e-3), rel=1e-9)
    assert found.at_low == pytest.approx((0.0 - offset) / -20.0, rel=1e-9)
    assert found.at_high == pytest.approx((4.0 - offset) / -20.0, rel=1e-9)


@pytest.mark.parametrize(
    ("limit", "name"),
    [
        ({"kind": "rail-limit", "high": "1.9 V"}, "2 rail-limit"),
        ({"kind": "rail-limit", "name": "supply", "low": "-1 V", "high": "2 V"}, ""),
        ({"kind": "clamp", "high": "1.5 V", "upper_forward_voltage": "0.3 V"}, "2 clamp"),
        ({"kind": "clamp", "high": "1.5 V", "upper_forward_voltage": "0.6 V"}, ""),
        ({"kind": "noninverting-amplifier", "gain": 1, "output_high": "1.9 V"},
         "2 noninverting-amplifier"),
    ],
)  # fmt: skip
def test_a_limit_that_comes_before_the_end_of_the_range_is_named(limit, name):
    """2 V before the gain of two reach the upper end, 4 V: rails and clamps below keep it away."""
    chain = [{"kind": "gain", "gain": 1}, limit, {"kind": "gain", "gain": 2}]
    found = inspected(*chain)
    assert found.level.at_high == pytest.approx(2.0)
    assert (found.level.low_held, found.level.high_held) == ("", name)
    told = dict(level_rows(found))["pin reaches 4.00 V at a stimulus of"]
    assert told == (f"2.000 V, but a limit of {name} comes first" if name else "2.000 V")


RAIL = {"kind": "rail-limit", "name": "rail", "low": "-1 V", "high": "1 V"}
CLAMP = {"kind": "clamp", "name": "clamp", "low": "-3 V", "high": "0.5 V"}


@pytest.mark.parametrize(
    ("chain", "names"),
    [
        ((RAIL, CLAMP), ("rail", "clamp")),
        ((CLAMP, RAIL), ("rail", "clamp")),
        ((RAIL, {"kind": "gain", "gain": 0.4}, CLAMP), ("rail", "rail")),
        ((RAIL, {"kind": "gain", "gain": -3}, CLAMP), ("rail", "clamp")),
        # Raised to 0.6 V at rest, the clamp conducts before any stimulus.
        (({"kind": "inverting-amplifier", "gain": -1, "reference_voltage": "0.3 V"}, RAIL, CLAMP),
         ("rail", "clamp")),
    ],
)  # fmt: skip
def test_of_several_limits_the_one_that_is_met_first_is_named(chain, names):
    """The stimulus goes from 0 to where the pin would be at an end of -4 V to 4 V, which all limits
    keep it from: by hand, the one that asks for the smallest stimulus."""
    found = inspected(*chain, adc={"rate": "20 kHz", "bits": 12, "low": "-4 V", "high": "4 V"})
    assert (found.level.low_held, found.level.high_held) == names


@pytest.mark.parametrize(("place", "gain"), [("to-ground", 1.0), ("to-excitation", 0.2)])
def test_a_sensor_meets_the_limits_in_the_same_order(place, gain):
    """Of a thermistor's 3.7 V at 0 degC, beyond both limits, or 0.26 V, before both."""
    sensor = THERMISTOR | {"place": place}
    stimulus = {"kind": "step", "before": "20 degC", "after": "30 degC"}
    found = inspected(sensor, {"kind": "gain", "gain": gain}, RAIL | {"high": "0.8 V"}, CLAMP,
                      adc={"rate": "20 kHz", "bits": 12, "high": 4.0 * gain + 0.1},
                      stimulus=stimulus)  # fmt: skip
    assert found.level.high_held == "clamp"


LOADED = {
    "open_loop_gain": "120 dB", "output_resistance": "100 ohm", "load_resistance": "300 ohm",
    "output_low": "-2 V", "output_high": "4 V",
}  # fmt: skip


@pytest.mark.parametrize(
    ("amplifier", "highest"),
    [
        # The divider of 400 ohm takes its share too: 4 V · 171.43 / 271.43.
        ({"kind": "noninverting-amplifier", "feedback_resistance": "200 ohm",
          "ground_resistance": "200 ohm"}, 4.0 * 171.428571 / 271.428571),
        ({"kind": "buffer"}, 3.0),
        # (4 V - y) / 100 ohm = y / 300 ohm + (y - 1 V) / 200 ohm, the minus input at 1 V.
        ({"kind": "inverting-amplifier", "feedback_resistance": "200 ohm",
          "input_resistance": "400 ohm", "reference_voltage": "1 V"},
         (4.0 / 100 + 1.0 / 200) / (1 / 100 + 1 / 300 + 1 / 200)),
    ],
)  # fmt: skip
def test_a_load_brings_the_rail_nearer(amplifier, highest):
    """4 V behind 100 ohm: less is left of it at the output. A run to just below it stays with the
    linear chain, one to just above does not, and is named."""
    from frontend_sim.simulation import simulate

    stage = amplifier | LOADED
    for share, name in ((0.999, ""), (1.001, f"1 {amplifier['kind']}")):
        adc = {"rate": "20 kHz", "bits": 12, "high": share * highest}
        found = inspected(stage, adc=adc).level
        assert found.high_held == name
        run = simulate(scenario(stage, adc=adc, stimulus={"kind": "step", "before": found.at_high,
                                                          "after": found.at_high}))  # fmt: skip
        reached = bool(abs(run.pin[-1] - share * highest) < 1e-9)
        assert reached == (name == "")


THERMISTOR = {
    "kind": "thermistor", "nominal_resistance": "10 kohm", "beta": "3435 K",
    "series_resistance": "10 kohm", "excitation_voltage": "5 V",
}  # fmt: skip


def test_the_range_in_degrees_goes_through_the_curve():
    """The temperature told for the upper end is one at which a run's pin lies there."""
    from frontend_sim.simulation import simulate

    stimulus = {"kind": "step", "before": "20 degC", "after": "20 degC"}
    chain = [THERMISTOR, {"kind": "gain", "gain": 1.3}]
    found = inspected(*chain, stimulus=stimulus).level
    values = scenario(*chain, stimulus=stimulus).model_copy(
        update={
            "stimulus": scenario(*chain, stimulus=stimulus).stimulus.model_copy(
                update={"before": found.at_high, "after": found.at_high}
            )
        }
    )
    assert simulate(values).pin[-1] == pytest.approx(4.0, abs=1e-6)


SLEW = {"kind": "slew-limit", "slew_rate": "1 V/us", "bandwidth": "1 MHz"}


def test_a_step_over_the_range_takes_the_closed_form():
    """(H - S T)/S + T ln(S T / e), which the stage knows; the step is 99.8 % of the range."""
    from frontend_sim.analog.stages.slew_limit import SlewLimit

    found = inspected(SLEW).large_signal
    expected = SlewLimit.model_validate(SLEW).settling_time(0.998 * 4.0, 0.5 * 4.0 / 4096)
    assert found.rise == pytest.approx(expected, rel=2e-4)
    assert found.fall == pytest.approx(expected, rel=2e-4)
    (power,) = found.stages
    assert power.bandwidth == pytest.approx(1e6 / (2.0 * math.pi * 2.0), rel=1e-12)


def test_a_fast_pole_before_a_slow_filter_costs_no_fine_grid(monkeypatch):
    """100 MHz, slewing at 1 V/s into an RC of 0.1 s: (H/S) + R C ln(S R C / e), on a bounded grid.

    Left to itself, a grid that follows the pole had 3e7 points over these six seconds, many times.
    """
    from frontend_sim import simulation

    points = []

    class Counted(simulation.Simulation):
        def __init__(self, scenario):
            points.append(scenario.simulation.grid_rate * scenario.simulation.duration)
            super().__init__(scenario)

    monkeypatch.setattr(simulation, "Simulation", Counted)
    slow = {"kind": "rc-lowpass", "resistance": "100 kohm", "capacitance": "1 uF"}
    found = inspected(SLEW | {"slew_rate": 1.0, "bandwidth": "100 MHz"}, slow).large_signal
    expected = 0.998 * 4.0 + 0.1 * math.log(0.1 / (0.5 * 4.0 / 4096))
    assert found.rise == pytest.approx(expected, rel=2e-5)
    assert found.fall == pytest.approx(expected, rel=2e-5)
    assert max(points) <= 1e5


def test_full_power_counts_what_stands_behind_and_the_rails():
    """A gain of four behind asks for a quarter of the swing; rails that are nearer cut it."""
    limited = {
        "kind": "noninverting-amplifier", "gain": 1, "gain_bandwidth": "1 MHz",
        "slew_rate": "1 V/us",
    }  # fmt: skip
    four = {"kind": "gain", "gain": 4}
    (power,) = inspected(limited, four).large_signal.stages
    assert power.amplitude == pytest.approx(0.5)
    (power,) = inspected(
        limited | {"output_low": 0.0, "output_high": 0.6}, four
    ).large_signal.stages
    assert power.amplitude == pytest.approx(0.3)


def test_why_there_is_no_large_step():
    """Behind a high pass no constant stays; where rails cut it, it still comes to rest."""
    high = {"kind": "rc-highpass", "resistance": "1 kohm", "capacitance": "1 uF"}
    found = inspected(SLEW, high).large_signal
    assert (found.rise, found.fall) == (None, None)
    assert "does not take the pin" in found.reason


def test_rails_that_come_before_the_range_are_named():
    """A stimulus that would take the pin beyond a rail is told with the rail that is in the way."""
    rails = AMPLIFIER | {"output_low": "0.5 V", "output_high": "100 V"}
    found = inspected(rails)
    assert found.level.low_held == "1 noninverting-amplifier"
    assert found.level.high_held == ""
    assert inspected(AMPLIFIER).level.low_held == ""


def test_no_slew_rate_no_large_signal():
    """A chain without a slew rate is told by its small signals."""
    assert inspected(AMPLIFIER).large_signal is None


def test_tables_tell_all_of_it():
    """Each number has its row, with its unit, at the terminal."""
    import io

    from rich.console import Console

    console = Console(file=io.StringIO(), width=160)
    for table in inspection_tables(inspected(SALLEN_KEY | REAL, AMPLIFIER, SLEW)):
        console.print(table)
    text = console.file.getvalue()
    for part in (
        "corner f0", "quality factor Q", "stop band rises from", "closed-loop bandwidth",
        "pin at a stimulus of 0 V", "either sign", "pin reaches 4.00 V at a stimulus of",
        "full-power bandwidth of 3 slew-limit", "step over the whole range up",
    ):  # fmt: skip
        assert part in text, part
