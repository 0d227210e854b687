"""What folds, where it lands, and the error that it makes of the codes."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

import frontend_sim as fe
from frontend_sim.errors import MeasureError
from frontend_sim.measure.aliasing import (
    alias_error,
    aliasing_of,
    folded_band,
    part_above,
    sampled_alias_error,
)
from frontend_sim.measure.aliasing.sieve import Sieve
from frontend_sim.measure.aliasing.train import harmonic_of, tones_below
from frontend_sim.measure.spectrum import amplitude_spectrum
from frontend_sim.scenario import Scenario
from frontend_sim.stimulus.pulse import Pulse, Train
from frontend_sim.stimulus.sum import Sum

RATE, COUNT = 1000.0, 2000
FILTER = {"kind": "rc-lowpass", "resistance": "10k", "capacitance": "4n7"}
TWO = [FILTER, {"kind": "butterworth", "order": 3, "corner": "2 kHz"}]
FINE = {"rate": RATE, "bits": 32, "low": -4, "high": 4}
CONVERTERS: dict[str, dict[str, Any]] = {
    "single": FINE,
    "averaging": {**FINE, "bits": 24, "averaging": {"count": 4}},
    "burst": {**FINE, "bits": 24, "averaging": {"count": 8, "interval": "10 us"}},
    "sinc": {
        "kind": "oversampling", "modulator_rate": "64 kHz", "decimation": 64, "order": 3,
        "bits": 32, "low": -4, "high": 4,
    },
    "restarted sinc": {
        "kind": "oversampling", "modulator_rate": "192 kHz", "decimation": 64, "order": 3,
        "conversion": "restarted", "bits": 32, "low": -4, "high": 4,
    },
    "off its rate": {**FINE, "rate_error": "300 ppm"},
}  # fmt: skip


def made(stimulus: dict[str, Any], adc: dict[str, Any] = FINE, **tables: Any) -> Scenario:
    """Return a scenario of ``COUNT`` codes at about ``RATE``."""
    values = {
        "stimulus": stimulus,
        "chain": TWO,
        "adc": adc,
        "simulation": {"duration": (COUNT + 8) / RATE, "noise": False},
        **tables,
    }
    return Scenario.model_validate(values)


@pytest.mark.parametrize("name", CONVERTERS)
@pytest.mark.parametrize("times", [0.6137, 1.618, 7.387, 23.71, 49.87])
def test_alias_lines_against_the_codes(name: str, times: float) -> None:
    """Up to 50 times the rate: within half a bin and 0.01 dB of the line in the codes.

    The line is so placed that it folds onto a bin of the last ``COUNT`` codes. |H| is the product
    of two transfer functions, written down here, and of the converter's filter, which the codes
    themselves show.
    """
    scenario = made({"kind": "sine", "amplitude": 1.0, "frequency": 1.0}, CONVERTERS[name])
    rate = scenario.adc.true_rate
    frequency = round(times * COUNT) * rate / COUNT
    tone = {"kind": "sine", "amplitude": 1.0, "frequency": frequency, "phase": "40 deg"}
    scenario = made(tone, CONVERTERS[name])
    (alias,) = aliasing_of(scenario).aliases
    run = fe.simulate(scenario)
    shown = amplitude_spectrum(run.voltage[-COUNT:], rate, "rectangular")
    peak = 1 + int(np.argmax(shown.amplitude[1:]))
    assert alias.volts is not None
    # A line weaker than the converter's own rounding is not in the codes.
    if alias.volts > 1e3 * run.scenario.adc.lsb:
        assert abs(alias.lands - shown.frequency[peak]) < 0.5 * shown.resolution
        assert abs(20.0 * math.log10(shown.amplitude[peak] / alias.volts)) < 0.01
    waveform = alias_error(run).volts[-COUNT:]
    exact = amplitude_spectrum(waveform / alias.volts, rate, "rectangular")
    top = 1 + int(np.argmax(exact.amplitude[1:]))
    assert abs(alias.lands - exact.frequency[top]) < 0.5 * exact.resolution
    assert abs(20.0 * math.log10(exact.amplitude[top])) < 0.01
    s = 2j * math.pi * frequency
    w = 2.0 * math.pi * 2e3
    butterworth = w**3 / ((s + w) * (s * s + w * s + w * w))
    gain = abs(butterworth / (1.0 + s * 47e-6)) * float(Sieve.of(scenario.adc).gain(frequency))
    assert alias.volts == pytest.approx(gain, rel=1e-9)


@pytest.mark.parametrize("name", CONVERTERS)
def test_alias_error_is_what_the_low_lines_leave(name: str) -> None:
    """The codes of all lines less the codes of those below half the rate, to 2 LSB of a look."""
    low = {"amplitude": 0.7, "frequency": 103.7}
    high = [{"amplitude": 0.5, "frequency": 733.1}, {"amplitude": 0.3, "frequency": 1801.3}]
    whole = fe.simulate(made({"kind": "tones", "tone": [low, *high]}, CONVERTERS[name]))
    limited = fe.simulate(made({"kind": "tones", "tone": [low]}, CONVERTERS[name]))
    found = alias_error(whole)
    np.testing.assert_allclose(
        found.volts,
        whole.voltage - limited.voltage,
        rtol=0.0,
        atol=2.0 * whole.scenario.adc.core_lsb,
    )
    assert found.uncertainty == 0.0


@pytest.mark.parametrize(
    "stimulus",
    [
        {"kind": "sine", "amplitude": 2.0, "frequency": 499.9, "offset": 1.0},
        {"kind": "sine", "amplitude": 2.0, "frequency": 500.0},
        {"kind": "tones", "tone": [{"amplitude": 1, "frequency": f} for f in (1, 100, 431.7)]},
    ],
)
def test_a_band_limited_stimulus_has_no_alias_error(stimulus: dict[str, Any]) -> None:
    """Lines up to half the rate fold nowhere: exactly zero."""
    scenario = made(stimulus)
    aliasing = aliasing_of(scenario)
    assert aliasing.aliases == ()
    assert not aliasing.possible
    assert np.all(alias_error(fe.simulate(scenario)).volts == 0.0)


def test_a_pulse_train_by_its_harmonics() -> None:
    """The Fourier series of a square wave, 2 / (pi k) for odd k (any text, from memory).

    And with edges: sinc factors of width and rise, in product.
    """
    square = Pulse(high=1.0, width=0.5, period=1.0).drives(())[0]
    assert isinstance(square, Train)
    orders = np.arange(1, 8)
    expected = np.where(orders % 2 == 1, 2.0 / (np.pi * orders), 0.0)
    np.testing.assert_allclose(2.0 * np.abs(harmonic_of(square, orders)), expected, atol=1e-15)
    slow = Pulse(high=1.0, width=0.3, rise=0.1, fall=0.1, period=1.0).drives(())[0]
    assert isinstance(slow, Train)
    product = 0.6 * np.abs(np.sinc(0.3 * orders) * np.sinc(0.1 * orders))
    np.testing.assert_allclose(2.0 * np.abs(harmonic_of(slow, orders)), product, atol=1e-15)
    times = np.linspace(0.0, 1.0, 4001)[1:]
    partial = -sum(drive.values(times) for drive in tones_below(slow, 2000.0))
    # What 2000 harmonics leave of straight edges: below 2 / (pi² · 0.1 · 2000) between all four.
    np.testing.assert_allclose(partial, slow.values(times), atol=4e-3)


def test_the_strongest_harmonics_are_listed() -> None:
    """Of 2000 the 50 largest behind the chain, one by one worked out, and none below 0.001 LSB."""
    train = {"kind": "pulse", "high": 1.0, "width": "3 us", "period": "2.137 ms"}
    found = aliasing_of(made(train))
    every = [
        alias for line in found.parts[0].lines for alias in found.folder.of_lines([line], 1, 0)
    ]
    assert len(every) == 2000
    strongest = sorted(every, key=lambda alias: -(alias.lsb or 0.0))[:50]
    assert {alias.source for alias in found.aliases} == {alias.source for alias in strongest}
    gain = np.abs(found.folder.chain.response(np.array([each.frequency for each in every])))
    volts = gain * np.array([line.amplitude for line in found.parts[0].lines])
    np.testing.assert_allclose([alias.volts for alias in every], volts, rtol=1e-12)
    coarse = aliasing_of(made(train, {**FINE, "bits": 8}))
    seen = np.count_nonzero(volts >= 1e-3 * 8.0 / 2**8)
    assert 0 < len(coarse.aliases) == seen < 50


def test_alias_error_of_a_train() -> None:
    """Train less its low harmonics, against the sum of its high ones, to what those leave out."""
    train = {"kind": "pulse", "high": 1.0, "width": "0.7 ms", "rise": "0.2 ms", "fall": "0.2 ms",
             "period": "2.137 ms"}  # fmt: skip
    settings = {"duration": 0.4}
    run = fe.simulate(made(train, simulation=settings))
    drive = Pulse.model_validate(train).drives(())[0]
    assert isinstance(drive, Train)
    orders = np.arange(2, 400)
    tones = [
        {"amplitude": 2.0 * abs(c), "frequency": k / drive.period,
         "phase": float(np.angle(c) + 0.5 * np.pi)}
        for k, c in zip(orders, harmonic_of(drive, orders), strict=True)
    ]  # fmt: skip
    high = fe.simulate(made({"kind": "tones", "tone": tones}, simulation=settings))
    later = run.time > 0.1  # both have forgotten how they began
    found = alias_error(run)
    np.testing.assert_allclose(found.volts[later], high.pin[later], rtol=0.0, atol=2e-7)
    named = [alias.source for alias in aliasing_of(run).aliases]
    assert "pulse, harmonic 2" in named


def test_a_recording_whose_rate_holds_nothing_says_so(tmp_path: Any) -> None:
    """No alias error, and a plain statement why."""
    np.save(tmp_path / "slow.npy", np.sin(np.arange(5000)))
    recording = {"kind": "recording", "file": str(tmp_path / "slow.npy"), "rate": 1000}
    scenario = made(recording)
    aliasing = aliasing_of(scenario)
    assert "cannot show aliasing: at 1 kHz it holds nothing above 500 Hz" in aliasing.notes[0]
    assert np.all(aliasing.error(np.arange(4000) / RATE).volts == 0.0)


@pytest.mark.parametrize(("edges", "bound"), [("periodic", 1e-13), ("reflected", 4e-3)])
def test_a_band_limited_recording(tmp_path: Any, edges: Any, bound: float) -> None:
    """Zero to rounding for a whole number of periods; else what a kink at the ends brings."""
    t = np.arange(10000) / 10e3
    np.save(tmp_path / "fast.npy", np.sin(2.0 * np.pi * 123.0 * t) + 0.2)
    recording = {"kind": "recording", "file": str(tmp_path / "fast.npy"), "rate": 10e3}
    run = fe.simulate(made(recording, simulation={"duration": 0.9999}))
    assert alias_error(run, edges=edges).peak < bound


def test_lines_of_a_recording_fold_as_lines_do(tmp_path: Any) -> None:
    """A tone of 1.7 kHz in points at 20 kHz, against the same tone, through the same chain."""
    t = np.arange(20000) / 20e3
    high = 0.3 * np.sin(2.0 * np.pi * 1700.0 * t)
    np.save(tmp_path / "tone.npy", np.sin(2.0 * np.pi * 50.0 * t) + high)
    np.save(tmp_path / "high.npy", high)
    tables = {"kind": "recording", "rate": 20e3}
    settings = {"duration": 0.9999}
    run = fe.simulate(made({**tables, "file": str(tmp_path / "tone.npy")}, simulation=settings))
    only = fe.simulate(made({**tables, "file": str(tmp_path / "high.npy")}, simulation=settings))
    found = alias_error(run, edges="periodic")
    np.testing.assert_allclose(found.volts, only.pin, rtol=0.0, atol=1e-12)
    (alias,) = aliasing_of(run).aliases
    assert (alias.measure, alias.frequency, alias.up_to) == ("rms", 500.0, 10e3)
    assert alias.arrives == pytest.approx(0.3 / math.sqrt(2.0), rel=1e-3)


@pytest.mark.parametrize("between", ["hold", "line"])
def test_the_level_of_a_recording_is_that_of_its_alias_error(tmp_path: Any, between: str) -> None:
    """Noise in points at 1440 Hz, half of which lies above 361.7 Hz: as in the run, within 3 %.

    Lines between points let only sinc² through: what a list without it would tell is 1.5 times as
    much. One draw of 20 000 points is known to 1 %.
    """
    noise = np.random.default_rng(4).standard_normal(20_000)
    np.save(tmp_path / "noise.npy", noise)
    recording = {"kind": "recording", "file": str(tmp_path / "noise.npy"), "rate": 1440.0,
                 "between": between}  # fmt: skip
    scenario = made(recording, {**FINE, "rate": 723.4}, simulation={"duration": 13.8})
    (alias,) = aliasing_of(scenario).aliases
    found = alias_error(fe.simulate(scenario))
    assert alias.volts == pytest.approx(found.rms, rel=0.03)
    assert alias.arrives == pytest.approx(math.sqrt(0.5), rel=0.03)


def test_alias_error_of_a_step_against_its_band_limit() -> None:
    """A step through one section, against the integral of its spectrum above half the rate.

    The part above of 1 - exp(-t/T) from t0 on is 1/pi times the integral over w from pi·rate on of
    Im( exp(j w (t - t0)) / (w (1 + j w T)) · ...); here by a fine sum of the inverse transform.
    """
    at, tau = 0.2003, 1e-3
    scenario = made(
        {"kind": "step", "after": 1.0, "at": at},
        chain=[{"kind": "rc-lowpass", "resistance": "1k", "capacitance": "1u"}],
        simulation={"duration": 0.4},
    )
    run = fe.simulate(scenario)
    found = alias_error(run)
    w = np.linspace(np.pi * RATE, 3000.0 * np.pi * RATE, 1_000_001)
    spectrum = 1.0 / (1j * w * (1.0 + 1j * w * tau))
    near = np.flatnonzero(np.abs(run.time - at) < 0.0105)
    for k in near:
        turned = spectrum * np.exp(1j * w * (run.time[k] - at))
        expected = float(np.trapezoid(turned.real, w)) / np.pi
        assert found.volts[k] == pytest.approx(expected, abs=2e-5)
    assert found.uncertainty < 1e-4


def test_bands_and_where_they_land() -> None:
    """A sweep and a burst of noise: ends, folded ends, and the noise that comes through."""
    sweep = {"kind": "chirp", "amplitude": 1, "start_frequency": 100, "stop_frequency": 700,
             "length": 1}  # fmt: skip
    (band,) = aliasing_of(made(sweep)).aliases
    assert (band.frequency, band.up_to, band.lands, band.lands_up_to) == (500, 700, 300, 500)
    burst = {"kind": "noise-burst", "rms": 1, "bandwidth": "2 kHz", "length": 20}
    scenario = made(burst, chain=[], simulation={"duration": 20})
    (noise,) = aliasing_of(scenario).aliases
    found = alias_error(fe.simulate(scenario))
    # 3/4 of the power lies above 500 Hz; 2 % for one draw, and for the filter, which is no brick.
    assert found.rms == pytest.approx(math.sqrt(0.75), rel=0.02)
    assert noise.volts == pytest.approx(found.rms, rel=0.02)


@pytest.mark.parametrize(
    ("low", "high", "lands"),
    [
        (600.0, 700.0, (300.0, 400.0)),
        (900.0, 1100.0, (0.0, 100.0)),
        (1400.0, 1550.0, (400.0, 500.0)),
        (500.0, 1700.0, (0.0, 500.0)),
        (500.0, math.inf, (0.0, 500.0)),
    ],
)
def test_folded_bands(low: float, high: float, lands: tuple[float, float]) -> None:
    """Ends fold; what reaches over a multiple of half the rate has it as one end."""
    assert folded_band(low, high, 1000.0) == pytest.approx(lands)


def test_terms_of_a_sum_add_up() -> None:
    """The alias error of a sum is the sum of those of its terms, each with its own seed."""
    terms: list[dict[str, Any]] = [
        {"kind": "sine", "amplitude": 0.5, "frequency": 900.0},
        {"kind": "noise-burst", "rms": 0.1, "bandwidth": "2 kHz", "length": 1},
        {"kind": "step", "after": 1, "at": "0.1234 s"},
    ]
    whole = made({"kind": "sum", "term": terms}, simulation={"duration": 1})
    found = aliasing_of(whole)
    time = np.arange(1000) / RATE
    parts = np.zeros(1000)
    assert isinstance(whole.stimulus, Sum)
    for part in found.parts:
        parts += type(found)(whole, (part,), found.folder).error(time).volts
    np.testing.assert_allclose(found.error(time).volts, parts, rtol=0, atol=1e-14)
    assert found.parts[0].source == "term 1: sine"


def test_limits_and_models_are_told() -> None:
    """Where something limits, or a discrete model runs, the notes say what the numbers are for."""
    clipped = made(
        {"kind": "sine", "amplitude": 1, "frequency": 700},
        chain=[{"kind": "rail-limit", "low": -0.5, "high": 0.5}, *TWO],
    )
    assert "small signals" in aliasing_of(clipped).notes[0]
    model = made(
        {"kind": "sine", "amplitude": 1, "frequency": 700},
        simulation={"duration": 1, "discretization": "foh", "grid_rate": 1e5},
    )
    assert "the exact chain" in aliasing_of(model).notes[0]


def test_plain_samples() -> None:
    """A row of samples at a rate, and a slower converter; rates that show nothing are refused."""
    t = np.arange(8000) / 8000.0
    row = np.sin(2.0 * np.pi * 100.0 * t) + 0.25 * np.sin(2.0 * np.pi * 1300.0 * t)
    found = sampled_alias_error(row, 8000.0, 1000.0, lsb=1e-3, edges="periodic")
    assert found.rms == pytest.approx(0.25 / math.sqrt(2.0), rel=1e-12)
    assert found.peak_lsb == pytest.approx(250.0, rel=1e-3)
    assert found.peak_time == pytest.approx(t[np.argmax(np.abs(found.volts))])
    with pytest.raises(MeasureError, match="cannot show what a converter at 1000 Hz would fold"):
        sampled_alias_error(row, 1000.0, 1000.0)
    with pytest.raises(MeasureError, match="reflected, periodic"):
        part_above(row, 8000.0, 100.0, "wrapped")  # type: ignore[arg-type]  # on purpose
    assert np.array_equal(part_above(row.tolist(), 8000, 500), part_above(row, 8000.0, 500.0))


@pytest.mark.parametrize(
    ("values", "rate", "limit", "message"),
    [
        ([1.0, math.nan, 2.0, 3.0], 10.0, 2.0, "sample 1 of the record is nan"),
        (np.ones((5, 5)), 10.0, 2.0, "must be one row"),
        ([], 10.0, 2.0, "needs at least 4"),
        (np.arange(9.0), -10.0, 2.0, "the rate must be a number above zero"),
        (np.arange(9.0), 10.0, math.nan, "the limit must be a number above zero"),
    ],
)
def test_points_that_cannot_be_split(values: Any, rate: float, limit: float, message: str) -> None:
    """Refused, instead of a row that is no number or all zeros."""
    with pytest.raises(MeasureError, match=message):
        part_above(values, rate, limit)


def test_a_point_of_the_chain() -> None:
    """Looked at inside the chain the converter's filter is not in it; wrong names are told."""
    scenario = made({"kind": "sine", "amplitude": 1, "frequency": 700}, CONVERTERS["sinc"])
    run = fe.simulate(scenario)
    at_pin = alias_error(run, "stimulus")
    np.testing.assert_allclose(
        at_pin.volts, np.sin(2.0 * np.pi * 700.0 * run.time), rtol=0, atol=1e-9
    )
    with pytest.raises(MeasureError, match="the chain has no point 'stimulous'"):
        alias_error(run, "stimulous")
