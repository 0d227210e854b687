"""The total error of codes, and the parts that add up to it."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import frontend_sim as fe
from frontend_sim.errors import MeasureError, ScenarioError
from frontend_sim.measure.checks.impossible import refuse_impossible_checks
from frontend_sim.measure.error import Ideal, total_error
from frontend_sim.scenario import ScanScenario, Scenario, parse_scenario

ROOT = Path(__file__).resolve().parents[3] / "scenarios"
LEVEL = {"kind": "step", "before": 1.0, "after": 1.0}
ADC = {"rate": 1000, "bits": 16, "low": -4, "high": 4}


def made(**tables: Any) -> Scenario:
    """Return a scenario of a constant volt before a converter; arguments replace its tables."""
    values = {"stimulus": LEVEL, "adc": ADC, "simulation": {"duration": "1 s"}, **tables}
    return Scenario.model_validate(values)


def parts_of(scenario: Scenario, **given: float) -> dict[str, Any]:
    """Run, and return the parts by name, with the sum of them held against the total."""
    found = total_error(fe.simulate(scenario), **given)
    total = sum(part.volts for part in found.parts)
    np.testing.assert_allclose(total, found.volts, rtol=0.0, atol=1e-14 * found.total.peak)
    return {"total": found.total, **{part.name: part for part in found.parts}}


SOME = (
    "well_pump_valve_slam", "underdamped_section", "converter/averaging", "converter/bow",
    "converter/clock", "converter/dither", "converter/oversampling", "converter/reference",
    "converter/restarted",
    "converter/input-network", "stages/clamp", "stages/rc-highpass", "stages/rtd",
    "stages/slew-limit", "stages/thermistor", "stages/transport-delay", "stimuli/chirp",
    "stimuli/noise-burst", "stimuli/pulse", "stimuli/recording", "stimuli/sum",
)  # fmt: skip


@pytest.mark.parametrize("name", SOME)
def test_parts_add_up(name: str) -> None:
    """Code by code, for stages, stimuli and converters of all sorts among the examples."""
    scenario = fe.load_scenario(ROOT / f"{name}.toml")
    gain = None
    try:
        Ideal.of(scenario)
    except MeasureError:
        gain = 1.0
    found = total_error(fe.simulate(scenario), gain)
    total = sum(part.volts for part in found.parts)
    np.testing.assert_allclose(total, found.volts, rtol=0.0, atol=1e-14 * found.total.peak)
    squares = sum(part.rms**2 for part in found.parts)
    assert found.total.rms**2 == pytest.approx(squares + found.remainder, rel=1e-9, abs=1e-30)


def test_gain_and_offset() -> None:
    """(1 + 1 %) (2 · 1 V + 3 mV) + 5 mV - 2 V: gain and offset of chain and converter."""
    found = parts_of(
        made(
            chain=[
                {"kind": "noninverting-amplifier", "gain": 2, "offset_voltage": "1.5 mV"},
            ],
            adc={**ADC, "bits": 32, "gain_error": "1 %", "offset": "5 mV"},
        )
    )
    # The converter multiplies the offset of the chain too; that counts as gain.
    assert found["gain"].mean == pytest.approx(0.01 * 2.003, abs=1e-8)
    assert found["offset"].mean == pytest.approx(3e-3 + 5e-3, abs=1e-8)
    assert found["total"].mean == pytest.approx(0.02003 + 8e-3, abs=1e-8)


def test_drift_is_gain() -> None:
    """A divider of two parts, one of which drifts: the nominal gain is that at 25 degC."""
    chain = [
        {
            "kind": "inverting-amplifier",
            "input_resistance": "10k",
            "feedback_resistance": {"value": "10k", "drift": "100 ppm/K"},
        }
    ]
    found = parts_of(
        made(chain=chain, adc={**ADC, "bits": 32}, environment={"temperature": "75 degC"})
    )
    assert found["gain"].mean == pytest.approx(-50.0 * 100e-6, rel=1e-6)


def test_settling_of_a_step() -> None:
    """One section: -exp(-t/T) of the step, once band limit and aliasing are put together."""
    found = parts_of(
        made(
            stimulus={"kind": "step", "after": 1.0, "at": "100.2 ms"},
            chain=[{"kind": "rc-lowpass", "resistance": "10k", "capacitance": "1u"}],
            adc={**ADC, "bits": 32},
        )
    )
    time = np.arange(1000) / 1000.0
    lag = np.where(time > 0.1002, -np.exp(-(time - 0.1002) / 0.01), 0.0)
    together = sum(found[name].volts for name in ("settling", "aliasing", "beyond half the rate"))
    np.testing.assert_allclose(together, lag, rtol=0.0, atol=1e-9)


def test_timing() -> None:
    """A clock 100 ppm slow: the slope of a ramp times the time by which it lags."""
    found = parts_of(
        made(
            stimulus={"kind": "ramp", "slope": "1 V/s"},
            adc={**ADC, "bits": 32, "rate_error": "-100 ppm", "aperture_delay": "1 us"},
        )
    )
    k = np.arange(len(found["timing"].volts))
    late = k / 1000.0 * (1.0 / (1.0 - 1e-4) - 1.0) + 1e-6
    np.testing.assert_allclose(found["timing"].volts, late, rtol=0.0, atol=1e-12)


def test_noise_and_rounding() -> None:
    """Noise has its rms, rounding 1/sqrt(12) LSB (Bennett 1948, from memory), each within 5 %."""
    found = parts_of(made(adc={**ADC, "rate": 20e3, "input_noise": "1 mV"}))
    lsb = 8.0 / 2**16
    assert found["noise"].rms == pytest.approx(1e-3, rel=0.05)
    assert found["quantization"].rms == pytest.approx(lsb / math.sqrt(12.0), rel=0.05)


def test_clipping() -> None:
    """A volt in a range to 0.5 V: all that is beyond the top code."""
    found = parts_of(made(adc={"rate": 1000, "bits": 16, "low": -0.5, "high": 0.5}))
    assert found["clipping"].mean == pytest.approx(-0.5 - 2.0**-16, abs=1e-12)
    assert found["quantization"].peak < 1e-12


def test_nonlinearity_of_the_converter() -> None:
    """A bow of 6 LSB in the middle of the range."""
    bow = {"shape": "bow", "peak": "6 LSB"}
    found = parts_of(
        made(stimulus={"kind": "step", "before": 0, "after": 0}, adc={**ADC, "nonlinearity": bow})
    )
    assert abs(found["nonlinearity"].mean) == pytest.approx(6.0 * 8.0 / 2**16, rel=0.2)


def test_aliasing_is_the_alias_error() -> None:
    """A tone above half the rate: what comes through is aliasing, what is kept out is no error.

    The codes stand for the stimulus under a perfect band limit, so an ideal filter has no settling
    error; without any filter the two parts cancel.
    """
    tone = {"kind": "sine", "amplitude": 1.0, "frequency": 733.0}
    open_ = parts_of(made(stimulus=tone, adc={**ADC, "bits": 32}))
    np.testing.assert_allclose(
        open_["aliasing"].volts, -open_["beyond half the rate"].volts, atol=1e-9
    )
    assert open_["settling"].peak < 1e-9
    assert open_["total"].peak < 1e-8


def test_the_ideal() -> None:
    """The line of a sensor with a curve is its tangent; a chain that blocks dc needs a gain."""
    scenario = fe.load_scenario(ROOT / "stages" / "rtd.toml")
    found = Ideal.of(scenario)
    assert found.unit == "K"
    # At the operating point the tangent meets the curve.
    sensor: Any = scenario.chain[0]
    at = sensor.operating_point()
    gain = found.gain / float(sensor.slope())
    assert found.gain * at + found.offset == pytest.approx(
        gain * float(sensor.output(np.array([at]))[0]), rel=1e-9
    )
    ecg = [{"kind": "rc-highpass", "resistance": 1e6, "capacitance": 1e-6}]
    run = fe.simulate(made(chain=ecg))
    with pytest.raises(MeasureError, match="give gain, that of the pass band"):
        total_error(run)
    assert total_error(run, gain=1.0).ideal.gain == 1.0


@pytest.mark.parametrize("name", ["rtd", "thermistor", "thermocouple"])
def test_a_sensor_read_by_its_curve(name: str) -> None:
    """What is left of a slow ramp is rounding and lag; tens of LSB of bend are gone."""
    run = fe.simulate(fe.load_single_scenario(ROOT / "stages" / f"{name}.toml"))
    line, curve = total_error(run), total_error(run, curve=True)
    assert line.total.peak > 20.0 * line.lsb
    assert curve.total.peak < 0.6 * curve.lsb  # half an LSB, and the lag of a filter
    total = sum(part.volts for part in curve.parts)
    np.testing.assert_allclose(total, curve.volts, rtol=0.0, atol=1e-14 * line.total.peak)
    # From outside: the sensor's own function, at the instants of the codes.
    sensor: Any = run.scenario.chain[0]
    believed = np.arange(len(run.time)) / run.scenario.adc.rate
    drive: Any = run.scenario.stimulus.drives((0,))[0]
    gain = curve.ideal.gain / float(sensor.slope())
    expected = run.voltage - gain * sensor.output(drive.values(believed))
    np.testing.assert_allclose(curve.volts, expected, rtol=0.0, atol=1e-9)


def test_a_curve_is_refused_where_there_is_none() -> None:
    """Without a sensor that bends, or with a line besides."""
    run = fe.simulate(made())
    with pytest.raises(MeasureError, match="no sensor of the chain has a curve"):
        total_error(run, curve=True)
    with pytest.raises(MeasureError, match="exclude each other"):
        total_error(run, gain=1.0, curve=True)


def test_from_an_instant_on() -> None:
    """What comes before counts no more; an instant behind the end is refused."""
    scenario = made(
        stimulus={"kind": "step", "after": 1.0, "at": "10 ms"},
        chain=[{"kind": "rc-lowpass", "resistance": "10k", "capacitance": "100n"}],
    )
    found = total_error(fe.simulate(scenario))
    later = found.after(0.5)
    assert later.total.peak < found.lsb < found.total.peak
    assert found.quantity(2e-3) == 2e-3
    with pytest.raises(MeasureError, match="no conversion follows"):
        found.after(2.0)


@pytest.mark.parametrize("name", ["charge_memory", "sequential", "shared_amplifier"])
def test_parts_add_up_in_a_scan(name: str) -> None:
    """Every channel has parts of its own; what a shared stage holds is the change of channel."""
    run: Any = fe.simulate(fe.load_scenario(ROOT / "scan" / f"{name}.toml"))
    for channel in run.channels.values():
        found = total_error(channel)
        total = sum(part.volts for part in found.parts)
        np.testing.assert_allclose(total, found.volts, rtol=0.0, atol=1e-12)
        parts = {part.name: part for part in found.parts}
        assert parts["quantization"].peak <= 0.5001 * found.lsb
        shared = name == "shared_amplifier"
        assert (parts["channel change"].peak > 0.1 * found.lsb) == shared


def test_a_record_tells_the_same(tmp_path: Path) -> None:
    """What was stored is enough: the scenario and the arrays of the run."""
    run: Any = fe.simulate(fe.load_scenario(ROOT / "converter" / "input-network.toml"))
    fe.save_record(run, tmp_path / "run.h5")
    with fe.open_record(tmp_path / "run.h5") as record:
        stored: Any = record
        found = total_error(stored)
    assert found.volts.tolist() == total_error(run).volts.tolist()
    parts = {part.name: part for part in found.parts}
    assert parts["acquisition"].peak > 1.0 * found.lsb
    assert parts["quantization"].peak <= 0.5001 * found.lsb


def scanned(adc: str = "", scan: str = "", check: str = "") -> ScanScenario:
    """Return a scan of 3 V and 0.5 V that rest, with more lines of [adc] and more tables."""
    levels = "".join(
        f'[[channel]]\nname = "{name}"\n[channel.stimulus]\nkind = "step"\n'
        f"before = {volts}\nafter = {volts}\n"
        for name, volts in (("high", 3.0), ("low", 0.5))
    )
    text = f"{levels}{scan}\n[adc]\nrate = 20e3\nbits = 16\nhigh = 3.3\n{adc}\n"
    text += f"[simulation]\nduration = 0.2\n{check}"
    made = parse_scenario(text)
    assert isinstance(made, ScanScenario)
    return made


SHARED = """[[scan.chain]]
kind = "rc-lowpass"
resistance = "1k"
capacitance = "10n"
"""


@pytest.mark.parametrize("discard", [0, 1])
def test_noise_of_a_converter_that_scans(discard: int) -> None:
    """Its draws are the scan's: told with the rounding as one part, of the rms of both.

    Nothing else is to blame, and the level sits still: sqrt(1 mV² + LSB²/12), within 5 % of 2000
    or 4000 draws. Without noise every part is told, and rounding is half an LSB.
    """
    turns = f"[scan]\ndwell = {1 + discard}\ndiscard = {discard}"
    for found in map(
        total_error, fe.simulate(scanned('input_noise = "1 mV"', turns)).channels.values()
    ):
        parts = {part.name: part for part in found.parts if part.peak > 1e-9 * found.lsb}
        assert set(parts) == {"noise and quantization"}
        rms = math.hypot(1e-3, found.lsb / math.sqrt(12.0))
        assert parts["noise and quantization"].rms == pytest.approx(rms, rel=0.05)
    for found in map(total_error, fe.simulate(scanned("", turns)).channels.values()):
        parts = {part.name: part for part in found.parts if part.peak > 1e-9 * found.lsb}
        assert set(parts) == {"quantization"}
        assert parts["quantization"].peak <= 0.5001 * found.lsb


def test_levels_and_ends_of_a_converter_that_scans_with_noise() -> None:
    """What clips and what bows is told without the noise, and the parts still add up."""
    adc = 'input_noise = "0.2 mV"\n[adc.nonlinearity]\nshape = "bow"\npeak = "40 LSB"'
    values = scanned(adc).resolved()
    values["adc"]["high"] = 2.5
    run: Any = fe.simulate(ScanScenario.model_validate(values))
    low, high = (total_error(run.channels[name]) for name in ("low", "high"))
    for found in (low, high):
        total = sum(part.volts for part in found.parts)
        np.testing.assert_allclose(total, found.volts, rtol=0.0, atol=1e-12)
    parts = {part.name: part for part in low.parts}
    # A parabola of 40 LSB, at a fifth of the range: 4 · 0.2 · 0.8 of it.
    assert abs(parts["nonlinearity"].mean) == pytest.approx(25.6 * low.lsb, rel=0.05)
    assert {part.name: part for part in high.parts}["clipping"].mean == pytest.approx(
        -0.5, abs=2.0 * high.lsb
    )


def test_timing_in_a_scan() -> None:
    """A clock 100 ppm fast is early by that share of the time, whichever the channel."""
    values = scanned("rate_error = 100e-6").resolved()
    for channel in values["channel"]:
        channel["stimulus"] = {"kind": "ramp", "slope": "1 V/s"}
    run: Any = fe.simulate(ScanScenario.model_validate(values))
    for number, name in enumerate(("high", "low")):
        parts = {part.name: part for part in total_error(run.channels[name]).parts}
        nominal = (number + 2 * np.arange(len(parts["timing"].volts))) / 20e3
        early = -nominal * 1e-4 / (1.0 + 1e-4)
        np.testing.assert_allclose(parts["timing"].volts, early, rtol=0.0, atol=1e-12)


def test_averages_behind_what_is_shared_are_refused() -> None:
    """The pin between the last looks is not the channel's; before any run, and of the run."""
    adc, check = "[adc.averaging]\ncount = 2", '[[check]]\nkind = "total-error"\nat_most = "1 V"'
    with pytest.raises(ScenarioError, match=r"take adc\.averaging out"):
        refuse_impossible_checks(scanned(adc, SHARED, check))
    with pytest.raises(MeasureError, match=r"take adc\.averaging out"):
        total_error(fe.simulate(scanned(adc, SHARED)).channels["low"])
    assert total_error(fe.simulate(scanned(adc)).channels["low"]).total.peak < 1e-4


def test_total_error_is_a_check_behind_shared_stages() -> None:
    """The change of channel is what 10 us leave of 2.5 V after 50 us in turn."""
    check = '[[check]]\nkind = "total-error"\nat_most = "1 mV"'
    scenario = scanned("", SHARED, check)
    refuse_impossible_checks(scenario)
    run = fe.simulate(scenario)
    rows = {row.name: row.value for row in fe.evaluate_checks(run.channels["low"])}
    # Of two channels in turn (1 - q) q / (1 - q²) of the difference is left, q = exp(-T / tau).
    q = math.exp(-5.0)
    left = 2.5 * q / (1.0 + q) / (3.3 / 2**16)
    assert rows["total-error: channel change"] == pytest.approx(left, rel=1e-3)


def test_numbers_that_are_none_are_refused() -> None:
    """A gain or an offset that is no number, or a gain of zero, is told as what was given."""
    run = fe.simulate(made())
    for given in ({"gain": math.nan}, {"gain": math.inf}, {"offset": math.nan}):
        with pytest.raises(MeasureError, match="must be a"):
            total_error(run, **given)
    with pytest.raises(MeasureError, match="a gain of 0"):
        total_error(run, gain=0.0)
