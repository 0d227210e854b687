"""Sensors as first stages: their formulas, their curves in a run, their noise, what they refuse."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

from frontend_sim.analog.block import Block
from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.noise import BOLTZMANN, NoiseInput
from frontend_sim.analog.sensors.thermocouple import thermovoltage
from frontend_sim.analog.stages import STAGES
from frontend_sim.analog.stages.base import Stage
from frontend_sim.errors import ScenarioError
from frontend_sim.scenario import Scenario
from frontend_sim.simulation import simulate

Real = NDArray[np.float64]

T0 = 298.15
CHARGE = 1.602176634e-19


def stage(kind: str, **values: Any) -> Any:
    """Return a stage of a kind."""
    return STAGES[kind].model_validate({"kind": kind, **values})


def run(stimulus: dict[str, Any], *stages: dict[str, Any], **simulation: Any) -> Any:
    """Run a stimulus through stages into a fine converter at 1 kHz."""
    return simulate(
        Scenario.model_validate(
            {
                "stimulus": stimulus,
                "chain": list(stages),
                "adc": {"rate": 1e3, "bits": 24, "low": -5.0, "high": 5.0},
                "simulation": {"duration": 0.05, **simulation},
            }
        )
    )


STEP = {"kind": "step", "before": 280.0, "after": 350.0, "at": 0.0101}
SWING = {"kind": "sine", "amplitude": 60.0, "frequency": 37.0, "offset": 330.0}


def platinum(kelvin: Any) -> Any:
    """IEC 60751 above zero, written out."""
    t = kelvin - 273.15
    return 100.0 * (1.0 + 3.9083e-3 * t - 5.775e-7 * t * t)


def beta(kelvin: Any) -> Any:
    """Resistance of a thermistor of 10 kohm and 3950 K, written out."""
    return 1e4 * np.exp(3950.0 * (1.0 / kelvin - 1.0 / T0))


CURVES: list[tuple[dict[str, Any], Any]] = [
    ({"kind": "rtd", "excitation_current": "1 mA"}, lambda T: 1e-3 * platinum(T)),
    ({"kind": "rtd", "nominal_resistance": "1 kohm", "excitation_current": "0.1 mA"},
     lambda T: 1e-3 * platinum(T)),
    ({"kind": "rtd", "excitation_current": "1 mA", "wiring": "two-wire", "lead_resistance": 2},
     lambda T: 1e-3 * (platinum(T) + 4.0)),
    ({"kind": "rtd", "excitation_current": "1 mA", "wiring": "four-wire", "lead_resistance": 2},
     lambda T: 1e-3 * platinum(T)),
    ({"kind": "rtd", "excitation_current": "1 mA", "wiring": "three-wire", "lead_resistance": 2,
      "lead_mismatch": 0.1}, lambda T: 1e-3 * (platinum(T) + 0.1)),
    ({"kind": "rtd", "excitation_voltage": 2.5, "series_resistance": 1e3},
     lambda T: 2.5 * platinum(T) / (1e3 + platinum(T))),
    ({"kind": "rtd", "excitation_voltage": 2.5, "series_resistance": 1e3, "lead_resistance": 5,
      "wiring": "two-wire"}, lambda T: 2.5 * (platinum(T) + 10) / (1e3 + platinum(T) + 10)),
    ({"kind": "rtd", "excitation_voltage": 2.5, "series_resistance": 1e3, "lead_resistance": 5},
     lambda T: 2.5 * platinum(T) / (1e3 + platinum(T) + 10)),
    ({"kind": "thermistor", "nominal_resistance": 1e4, "beta": "3950 K", "series_resistance": 1e4,
      "excitation_voltage": 3}, lambda T: 3 * beta(T) / (1e4 + beta(T))),
    ({"kind": "thermistor", "nominal_resistance": 1e4, "beta": "3950 K", "series_resistance": 1e4,
      "excitation_voltage": 3, "place": "to-excitation"}, lambda T: 3e4 / (1e4 + beta(T))),
    ({"kind": "thermocouple", "type": "K", "cold_junction": "20 degC"},
     lambda T: thermovoltage("K", T) - thermovoltage("K", np.array(293.15))),
]  # fmt: skip


@pytest.mark.parametrize(("values", "curve"), CURVES)
def test_a_thermometer_gives_its_curve_in_a_run(values: dict[str, Any], curve: Any) -> None:
    """A step of temperature gives the two points of the curve, a swing all between them.

    The step is exact to rounding; the swing to the accuracy of its grid, 0.05 LSB of 0.6 uV.
    """
    stepped = run(STEP, values)
    expected = np.where(stepped.time < 0.0101, curve(np.array(280.0)), curve(np.array(350.0)))
    np.testing.assert_allclose(stepped.pin, expected, rtol=0, atol=1e-12)
    swung = run(SWING, values)
    kelvin = 330.0 + 60.0 * np.sin(2.0 * np.pi * 37.0 * swung.time)
    np.testing.assert_allclose(swung.pin, curve(kelvin), rtol=0, atol=0.05 * 10.0 / 2**24)


@pytest.mark.parametrize(("values", "curve"), CURVES)
def test_the_tangent_is_the_slope_at_the_operating_point(
    values: dict[str, Any], curve: Any
) -> None:
    """Small signals see the derivative; central differences have an error below 1e-6 of it."""
    for kelvin in (280.0, T0, 400.0):
        made = stage(**{**values, "operating_temperature": kelvin})
        (block,) = made.blocks()
        step = 1e-2
        sides = curve(np.array([kelvin - step, kelvin + step]))
        assert block.d == pytest.approx((sides[1] - sides[0]) / (2.0 * step), rel=1e-6)


def test_steinhart_hart_in_a_divider() -> None:
    """The resistance that solves the equation, found by bisection here, divides the excitation."""
    a, b, c = 1.129148e-3, 2.34125e-4, 8.76741e-8
    made = stage(
        "thermistor", steinhart_hart=[a, b, c], series_resistance=1e4, excitation_voltage=2
    )
    low, high = 1.0, 1e7
    for _ in range(200):
        middle = np.sqrt(low * high)
        inverse = a + b * np.log(middle) + c * np.log(middle) ** 3
        low, high = (middle, high) if 1.0 / inverse > 310.0 else (low, middle)
    assert float(made.curve(np.array(310.0))) == pytest.approx(2 * low / (low + 1e4), rel=1e-12)


def test_a_lag_in_front_of_a_curve() -> None:
    """The thermometer sees the lagging temperature: the curve of an exponential."""
    found = run(STEP, {"kind": "thermal-lag", "time_constant": "7 ms"},
                {"kind": "rtd", "excitation_current": "1 mA"})  # fmt: skip
    since = np.maximum(found.time - 0.0101, 0.0)
    kelvin = 280.0 + 70.0 * -np.expm1(-since / 7e-3)
    np.testing.assert_allclose(found.pin, 1e-3 * platinum(kelvin), rtol=0, atol=3e-8)


def test_a_range_that_is_left_is_told() -> None:
    """Just beyond the end the curve goes on as its tangent, and the notes say for how long."""
    found = run({**STEP, "after": 1123.15 + 10.0}, {"kind": "rtd", "excitation_current": 1e-3})
    tangent = 3.9083e-3 + 2 * -5.775e-7 * 850
    expected = 1e-3 * (platinum(1123.15) + 100.0 * tangent * 10.0)
    assert found.pin[-1] == pytest.approx(expected, rel=1e-12)
    assert any("at the upper end of its range for" in note for note in found.notes)


PEDAL = {"kind": "potentiometer", "resistance": 1e4, "excitation_voltage": 5}


def test_a_loaded_potentiometer_is_bent() -> None:
    """A ramp of position: v = E p R_l / (R_l + R p (1 - p) + R_w), against the divider's nodes."""
    loaded = {**PEDAL, "load_resistance": 2e4, "wiper_resistance": 100}
    found = run({"kind": "ramp", "slope": 18.0}, loaded)
    p = 18.0 * found.time
    upper, lower = 1e4 * (1 - p), 1e4 * p
    # Node of the wiper on the track, loaded by wiper and load in series.
    with np.errstate(divide="ignore"):
        node = np.where(p > 0, (5 / upper) / (1 / upper + 1 / lower + 1 / 20100.0), 0.0)
    np.testing.assert_allclose(found.pin, node * 2e4 / 20100.0, rtol=0, atol=0.05 * 10 / 2**24)


def test_an_unloaded_potentiometer_is_straight() -> None:
    """Without a load the voltage is the position's share of the excitation, up to the stop."""
    found = run({"kind": "ramp", "slope": 22.0}, PEDAL)
    expected = 5.0 * np.minimum(22.0 * found.time, 1.0)
    np.testing.assert_allclose(found.pin, expected, rtol=0, atol=1e-7)
    assert any("at the upper end of its range" in note for note in found.notes)


CAPACITIVE = {**PEDAL, "load_resistance": 5e4, "wiper_resistance": 200, "load_capacitance": 1e-6}


def _charge(t: float, v: Real, position: Any) -> Real:
    """C dv/dt = (E p - v) / R_s(p) - v / R_l."""
    p = position(t)
    source = 1e4 * p * (1 - p) + 200.0
    return np.asarray(((5.0 * p - v) / source - v / 5e4) / 1e-6)


def _sine(t: float) -> float:
    return 0.5 + 0.45 * float(np.sin(2 * np.pi * 60.0 * t))


SINE = {"kind": "sine", "amplitude": 0.45, "frequency": 60.0, "offset": 0.5}


def _integrated(times: Real) -> Real:
    start = 2.5 / (1.0 + 2.7e3 / 5e4)
    solved = solve_ivp(
        _charge, (0.0, times[-1]), [start], t_eval=times, args=(_sine,), method="DOP853",
        rtol=1e-12, atol=1e-13, max_step=1e-4,
    )  # fmt: skip
    return np.asarray(solved.y[0])


def test_a_capacitance_settles_with_the_position() -> None:
    """A moving wiper on a capacitor agrees with an integration to tight tolerance."""
    found = run(SINE, CAPACITIVE)
    np.testing.assert_allclose(found.pin, _integrated(found.time), rtol=0, atol=0.05 * 10 / 2**24)


def test_the_capacitance_converges_with_the_second_order() -> None:
    """Halving the step divides the error by four, within a tenth of the order."""
    errors = []
    for rate in (4e3, 8e3, 16e3, 32e3):
        found = run(SINE, CAPACITIVE, grid_rate=rate)
        errors.append(float(np.max(np.abs(found.pin - _integrated(found.time)))))
    orders = np.log2(np.array(errors[:-1]) / errors[1:])
    assert np.all(np.abs(orders - 2.0) < 0.1), orders


def test_a_jump_of_position_charges_exponentially() -> None:
    """With the wiper at rest the time constant is C (R_s in parallel to R_l), exactly."""
    found = run({"kind": "step", "before": 0.2, "after": 0.7, "at": 0.0101}, CAPACITIVE)
    source = [1e4 * p * (1 - p) + 200.0 for p in (0.2, 0.7)]
    rest = [5.0 * p / (1 + r / 5e4) for p, r in zip((0.2, 0.7), source, strict=True)]
    tau = 1e-6 / (1 / source[1] + 1 / 5e4)
    since = np.maximum(found.time - 0.0101, 0.0)
    expected = rest[1] + (rest[0] - rest[1]) * np.exp(-since / tau)
    np.testing.assert_allclose(found.pin, expected, rtol=0, atol=2e-8)


def test_small_movements_see_the_linear_model() -> None:
    """Around the operating position the run agrees with the blocks to second order of the step."""
    made = stage(**{**CAPACITIVE, "operating_position": 0.3})
    (block,) = made.blocks()
    small = 1e-5
    found = run({"kind": "step", "before": 0.3, "after": 0.3 + small, "at": 0.0101}, CAPACITIVE)
    since = np.maximum(found.time - 0.0101, 0.0)
    gain = -block.c[0] * block.b[0] / block.a[0, 0]
    linear = small * gain * -np.expm1(block.a[0, 0] * since)
    np.testing.assert_allclose(found.pin - found.pin[0], linear, rtol=0, atol=1e-4 * small * gain)


def spectrum(made: Stage, source: NoiseInput, frequency: float) -> float:
    """Return the density of a source at the output of a stage of one block [V/sqrt(Hz)]."""
    blocks = made.blocks()
    block = blocks[source.block]
    entering = Block.of(block.a, source.b, block.c, source.d)
    s = np.array([2j * np.pi * frequency])
    total = entering.response(s)
    for later in blocks[source.block + 1 :]:
        total = total * later.response(s)
    return float(source.density * abs(total[0]))


def parallel(*resistances: float) -> float:
    """Resistance of several resistors side by side."""
    return 1.0 / sum(1.0 / r for r in resistances)


R_PLATINUM = float(platinum(T0))
W1 = 2 * np.pi * 1e3

NOISE: list[tuple[dict[str, Any], float]] = [
    # At 1 kHz: power of all sources, 4 k T times the real part of the output's impedance.
    ({"kind": "ac-coupled-source", "source_resistance": 1e3, "capacitance": 1e-7,
      "load_resistance": 1e4},
     4 * BOLTZMANN * T0 * (1 / (1e-4 + 1 / (1e3 + 1 / (1j * W1 * 1e-7)))).real),
    ({"kind": "resistive-bridge", "sensitivity": 2e-3, "full_scale": "10 N", "excitation": 5,
      "resistance": 350}, 4 * BOLTZMANN * T0 * 350),
    ({"kind": "rtd", "excitation_current": 1e-3}, 4 * BOLTZMANN * T0 * R_PLATINUM),
    ({"kind": "rtd", "excitation_voltage": 2.5, "series_resistance": 1e3},
     4 * BOLTZMANN * T0 * parallel(1e3, R_PLATINUM)),
    ({"kind": "thermistor", "nominal_resistance": 1e4, "beta": 3950, "series_resistance": 2e4,
      "excitation_voltage": 3}, 4 * BOLTZMANN * T0 * parallel(1e4, 2e4)),
    ({"kind": "thermocouple", "type": "K", "resistance": 20}, 4 * BOLTZMANN * T0 * 20),
    ({**PEDAL, "load_resistance": 2e4}, 4 * BOLTZMANN * T0 * parallel(2.5e3, 2e4)),
    ({**PEDAL, "wiper_resistance": 100, "load_capacitance": 1e-7},
     4 * BOLTZMANN * T0 * (1 / (1 / 2.6e3 + 1j * W1 * 1e-7)).real),
    ({"kind": "current-shunt", "resistance": 0.01}, 4 * BOLTZMANN * T0 * 0.01),
    ({"kind": "current-shunt", "resistance": 1, "inductance": 1e-6, "filter_resistance": 1e3,
      "filter_capacitance": 1e-7}, 4 * BOLTZMANN * T0 * 1001 / (1 + (W1 * 1e-4) ** 2)),
    ({"kind": "photodiode", "responsivity": 0.5, "load_resistance": 1e5, "dark_current": 1e-9,
      "operating_power": 1e-6, "junction_capacitance": 1e-9},
     (2 * CHARGE * 501e-9 * 1e10 + 4 * BOLTZMANN * T0 * 1e5) / (1 + (W1 * 1e-4) ** 2)),
    ({"kind": "photodiode", "responsivity": -0.5, "operating_power": 1e-6}, 2 * CHARGE * 5e-7),
    ({"kind": "accelerometer", "sensitivity": "100 mV/g", "natural_frequency": 2e3,
      "quality_factor": 5, "noise_density": "100 ug/sqrt(Hz)"},
     (1e-5 / abs(1 - 0.25 + 0.5j / 5)) ** 2),
]  # fmt: skip


@pytest.mark.parametrize(("values", "power"), NOISE, ids=lambda v: str(v)[:40])
def test_noise_is_that_of_the_impedance(values: dict[str, Any], power: float) -> None:
    """All sources together have the density that Nyquist gives the output's impedance at 1 kHz."""
    made = stage(**values)
    found = sum(spectrum(made, source, 1e3) ** 2 for source in made.noise(T0))
    assert found == pytest.approx(power, rel=1e-9)


@pytest.mark.parametrize(
    ("values", "offset"),
    [
        ({"kind": "accelerometer", "sensitivity": 0.01, "natural_frequency": 1e3,
          "quality_factor": 1, "offset_voltage": "1.65 V"}, 1.65),
        ({"kind": "resistive-bridge", "sensitivity": 2e-3, "full_scale": "10 N", "excitation": 5,
          "zero_balance": "0.1 mV/V"}, 0.5e-3),
        ({"kind": "photodiode", "responsivity": 0.5, "dark_current": 2e-9}, 2e-9),
        ({"kind": "photodiode", "responsivity": -0.5, "dark_current": 2e-9,
          "load_resistance": 1e6}, -2e-3),
    ],
)  # fmt: skip
def test_outputs_without_a_signal(values: dict[str, Any], offset: float) -> None:
    """What a sensor gives at zero: offset, unbalance, dark current."""
    made = stage(**values)
    assert made.offset(T0) == pytest.approx(offset, rel=1e-12)
    assert chain_of([made]).offset[-1] == pytest.approx(offset, rel=1e-12)


def test_a_cancelled_inductance_leaves_the_resistance() -> None:
    """With L / R = R_f C_f a jump of current is a jump of voltage, and noise is still filtered."""
    made = stage("current-shunt", resistance=1e-3, inductance=3e-9, filter_resistance=100.0,
                 filter_capacitance=30e-9)  # fmt: skip
    f = np.logspace(0, 8, 41)
    np.testing.assert_allclose(chain_of([made]).response(f), 1e-3, rtol=1e-12)
    assert all(source.d == 0.0 for source in made.noise(T0))


WRONG: list[tuple[dict[str, Any], str]] = [
    ({"kind": "thermal-lag", "time_constant": 0}, "above 0"),
    ({"kind": "rtd"}, "give either excitation_current, or excitation_voltage"),
    ({"kind": "rtd", "excitation_current": 1e-3, "excitation_voltage": 1}, "give either"),
    ({"kind": "rtd", "excitation_voltage": 1}, "together"),
    ({"kind": "rtd", "excitation_current": 1e-3, "lead_mismatch": 1}, "three-wire"),
    ({"kind": "rtd", "excitation_current": 1e-3, "operating_temperature": "900 degC"},
     "operating point, 900 degC, is beyond the sensor's range, -200 degC to 850 degC"),
    ({"kind": "rtd", "excitation_current": 1e-3, "operating_temperature": "-300 degC"},
     "absolute zero"),
    ({"kind": "rtd", "excitation_current": 1e-3, "lead_resistance": -1}, "at least 0"),
    ({"kind": "thermistor", "series_resistance": 1, "excitation_voltage": 1}, "give either"),
    ({"kind": "thermistor", "series_resistance": 1, "excitation_voltage": 1,
      "nominal_resistance": 1}, "together"),
    ({"kind": "thermistor", "series_resistance": 1, "excitation_voltage": 1,
      "nominal_resistance": 1, "beta": 3950, "steinhart_hart": [1, 1, 1]}, "give either"),
    ({"kind": "thermistor", "series_resistance": 1, "excitation_voltage": 1,
      "steinhart_hart": [1e-3, -1e-4, 0]}, "second must be above 0"),
    ({"kind": "thermistor", "series_resistance": 1, "excitation_voltage": 1,
      "nominal_resistance": 1, "beta": 3950, "nominal_temperature": 0}, "above 0 K"),
    ({"kind": "thermocouple", "type": "Q"}, "'B', 'E', 'J'"),
    ({"kind": "thermocouple", "type": "B", "cold_junction": "-10 degC"},
     "cold_junction -10 degC is beyond the sensor's range, 0 degC to 1820 degC"),
    ({"kind": "thermocouple", "type": "T", "operating_temperature": "500 degC"}, "beyond"),
    ({"kind": "accelerometer", "sensitivity": "1 V/A", "natural_frequency": 1,
      "quality_factor": 1}, "expected a sensitivity"),
    ({"kind": "resistive-bridge", "sensitivity": 1, "full_scale": "10 s", "excitation": 1},
     "'s' is a unit of time"),
    ({"kind": "resistive-bridge", "sensitivity": 1, "full_scale": 0, "excitation": 1}, "above 0"),
    ({"kind": "potentiometer", "resistance": 1, "excitation_voltage": 1,
      "operating_position": 1.5}, "at most 1"),
    ({"kind": "potentiometer", "resistance": 1, "excitation_voltage": 1,
      "load_capacitance": 1e-9}, "needs wiper_resistance"),
    ({"kind": "photodiode", "responsivity": 0}, "leaves nothing of the light"),
    ({"kind": "photodiode", "responsivity": 1, "junction_capacitance": 1e-12},
     "input_capacitance"),
    ({"kind": "current-shunt", "resistance": 1, "inductance": 1e-9}, "rises with frequency"),
    ({"kind": "current-shunt", "resistance": 1, "filter_resistance": 1}, "together"),
    ({"kind": "ac-coupled-source", "capacitance": 1e-9, "load_resistance": 0}, "above 0"),
]  # fmt: skip


@pytest.mark.parametrize(("values", "message"), WRONG)
def test_what_makes_no_sensor_is_refused(values: dict[str, Any], message: str) -> None:
    """Each contradiction is told in words of its own."""
    with pytest.raises(ScenarioError, match=message):
        stage(**values)


def test_a_thermistor_without_bound_leaves_the_noise_of_the_other_resistor() -> None:
    """Far in the cold its resistance leaves the range of numbers; sqrt(4 k T R_s) is then left."""
    cold = stage(
        kind="thermistor", nominal_resistance=1e4, beta=9e4, operating_temperature=60.0,
        series_resistance=2e4, excitation_voltage=1,
    )  # fmt: skip
    model = chain_of([cold, stage(kind="buffer", gain_bandwidth=1e6)], 300.0).noise_model(1.0)
    expected = np.sqrt(4.0 * BOLTZMANN * 300.0 * 2e4 / 2.0) * 2.0 * np.pi * 1e6
    assert np.sqrt(np.sum(model.b**2)) == pytest.approx(expected, rel=1e-12)
