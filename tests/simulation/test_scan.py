"""Scans run: each channel as if it were alone, by one clock."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scanned import FULL, LOW_PASS, SHARED, level, sampled, scan_of, sine

from frontend_sim.scenario import parse_scenario
from frontend_sim.simulation import ScanSimulation, simulate

Real = NDArray[np.float64]


def test_channels_are_exact_at_their_own_instants() -> None:
    """A sine behind a low pass that has settled, uneven visits: the closed form within 1e-9."""
    scan = scan_of(
        [sine(50), sine(60, phase=0.5), sine(70)],
        scan='order = ["c0", "c1", "c0", "c0", "c2"]\ndwell = 3\ndiscard = 1\nslot = 230e-6',
        chain=LOW_PASS,
        duration=50e-3,
    )
    run = simulate(scan)
    for name, frequency, phase in [("c0", 50, 0.0), ("c1", 60, 0.5), ("c2", 70, 0.0)]:
        channel, w = run.channels[name], 2 * np.pi * frequency
        pole = 1.0 / (1e3 * 1e-7)
        gain = pole / (pole + 1j * w)
        steady = np.imag(gain * np.exp(1j * (w * channel.time + phase)))
        start = np.sin(phase) - np.imag(gain * np.exp(1j * phase))
        exact = steady + start * np.exp(-pole * channel.time)
        np.testing.assert_allclose(channel.pin, exact, rtol=0, atol=1e-9 * FULL)
        assert np.all(np.diff(channel.time) > 0)


def test_a_clock_far_ahead_finds_the_pins_behind_shared_stages() -> None:
    """A first look 0.7 s late, 350 scans, still sees A (1 - exp(-t / RC)).

    The shared stage lags behind by its 1 us, of a slope of A / RC at most.
    """
    rc = 'kind = "rc-lowpass"\nresistance = {}\ncapacitance = {}\n'
    scan = scan_of(
        [f'kind = "step"\nbefore = 0.0\nafter = {volts}' for volts in (1.0, 0.5)],
        rate=1e3,
        adc='wander = {shape = "sinusoidal", rms = "0.5 s", frequency = "1 mHz", phase = "90 deg"}',
        scan=f"[[scan.chain]]\n{rc.format(1e3, 1e-9)}",
        chain=f"[[channel.chain]]\n{rc.format(1e4, 1e-4)}",
    )
    for run, volts in zip(simulate(scan).channels.values(), (1.0, 0.5), strict=True):
        assert run.time[0] > 0.7
        ideal = -volts * np.expm1(-(run.time - 1e-6))
        np.testing.assert_allclose(run.pin, ideal, rtol=0, atol=1e-9)


def test_a_channel_that_is_alone_is_a_scenario_of_its_own() -> None:
    """A scan of one channel gives, bit by bit, the codes of the file without channels."""
    noise = 'input_noise = 1e-3\naperture_jitter = 1e-7\n[adc.dither]\nshape = "uniform"\nwidth = 1'
    scan = simulate(scan_of([sine(50)], adc=noise)).channels["c0"]
    text = (
        f"[stimulus]\n{sine(50)}\n[adc]\nrate = 20e3\nbits = 16\nlow = -4.0\nhigh = 4.0\n{noise}\n"
    )
    one = simulate(parse_scenario(text + "[simulation]\nduration = 0.02\n"))
    np.testing.assert_array_equal(scan.codes, one.codes)
    np.testing.assert_array_equal(scan.time, one.time)


def test_what_a_conversion_draws_follows_from_its_number() -> None:
    """In another order, conversion n has the same jitter, noise and dither."""
    noise = 'input_noise = 1e-3\naperture_jitter = 1e-7\n[adc.dither]\nshape = "uniform"\nwidth = 1'
    stimuli = [level(1.0)] * 3
    runs = [
        simulate(scan_of(stimuli, adc=noise, scan=f'order = ["{a}", "{b}", "{c}"]'))
        for a, b, c in [("c0", "c1", "c2"), ("c2", "c0", "c1")]
    ]
    for k, other in [(0, 1), (1, 2), (2, 0)]:
        first, second = runs[1].channels[f"c{k}"], runs[0].channels[f"c{other}"]
        np.testing.assert_array_equal(first.codes, second.codes)
        np.testing.assert_array_equal(first.time, second.time)


def test_whole_scans_at_once_change_no_code() -> None:
    """Cut after every 7 scans, or not at all: the same codes, with shared stages and charge."""
    adc = "aperture_jitter = 1e-8\n" + sampled(1e4, 1e-10, 100.0, 1e-11, 1e-5)
    for chain, given in [(SHARED, ""), (SHARED, "aperture_jitter = 1e-8"), ("", adc)]:
        scan = scan_of([sine(50), sine(70), level(1)], scan=chain, adc=given, duration=10e-3)
        found: list[dict[str, Real]] = []
        for scans in (7, 1000):
            parts: dict[str, list[Real]] = {name: [] for name in scan.names}
            for name, block in ScanSimulation(scan, scans).blocks():
                parts[name].append(block.pin)
            found.append({name: np.concatenate(rows) for name, rows in parts.items()})
        for name in scan.names:
            np.testing.assert_allclose(found[0][name], found[1][name], rtol=0, atol=1e-12)


def test_what_is_thrown_away_is_there_if_asked_for() -> None:
    """Kept conversions stay as they are; the others stand between them."""
    scan = scan_of([sine(50), level(1)], scan="dwell = 3\ndiscard = 2", adc="input_noise = 1e-3")
    kept, every = simulate(scan), simulate(scan, discarded=True)
    for name in scan.names:
        assert len(every.channels[name].codes) >= 3 * len(kept.channels[name].codes)
        np.testing.assert_array_equal(every.channels[name].codes[2::3], kept.channels[name].codes)


def test_averages_take_all_their_looks_from_one_channel() -> None:
    """Four looks for each code: each channel at rest gives its own level, none of the other's."""
    adc = "[adc.averaging]\ncount = 4\nshift = 2"
    run = simulate(scan_of([level(-1.0), level(2.0)], adc=adc, scan="dwell = 2"))
    for name, volts in [("c0", -1.0), ("c1", 2.0)]:
        assert np.all(np.abs(run.channels[name].voltage - volts) <= FULL / 2**16)
    assert len(run.channels["c0"].codes) == 200


def test_jitter_of_sample_and_holds_is_one_edge() -> None:
    """Sampled at once, all channels have the same instant, jitter included."""
    scan = scan_of(
        [sine(50), sine(50)], scan='sampling = "simultaneous"', adc="aperture_jitter = 1e-6"
    )
    run = simulate(scan)
    first, second = run.channels["c0"], run.channels["c1"]
    np.testing.assert_array_equal(first.time, second.time)
    np.testing.assert_array_equal(first.codes, second.codes)
    assert np.std(first.time - np.arange(len(first.time)) / 10e3) > 1e-7


def test_a_sensor_tells_what_arrived() -> None:
    """Behind a thermistor the run has the temperature at the channel's own instants."""
    text = (
        '[[channel]]\nname = "hot"\n[channel.stimulus]\nkind = "ramp"\nbefore = "20 degC"\n'
        'slope = "10 K/s"\n[[channel.chain]]\nkind = "thermistor"\n'
        'nominal_resistance = "10 kohm"\nbeta = "3950 K"\nseries_resistance = "10 kohm"\n'
        'excitation_voltage = "3 V"\n'
        '[[channel]]\nname = "cold"\n[channel.stimulus]\nkind = "step"\nafter = "1 V"\n'
        '[scan]\norder = ["hot", "cold", "hot"]\n'
        "[adc]\nrate = 1e3\nbits = 12\nhigh = 3\n[simulation]\nduration = 1\n"
    )
    run = simulate(parse_scenario(text))
    hot = run.channels["hot"]
    np.testing.assert_allclose(hot.stimulus, 293.15 + 10.0 * hot.time, rtol=0, atol=1e-9)
    divider = 3.0 / (1.0 + np.exp(-3950.0 * (1.0 / hot.stimulus - 1.0 / 298.15)))
    np.testing.assert_allclose(hot.pin, divider, rtol=0, atol=1e-6)
    assert len(run.channels["cold"].stimulus) == 0


def test_channels_have_noise_of_their_own() -> None:
    """Two bursts of noise at two channels are not the same, and a name keeps its own."""
    burst = 'kind = "noise-burst"\nrms = 1.0\nbandwidth = 5e3\nat = 0.0\nlength = 0.02'
    runs = [simulate(scan_of([burst] * count, rate=10e3 * count)) for count in (2, 3)]
    first, second = (runs[0].channels[name].pin for name in ("c0", "c1"))
    assert abs(np.corrcoef(first, second)[0, 1]) < 5 / np.sqrt(len(first))
    # In both scans c0 is looked at every 100 us from t = 0 on.
    np.testing.assert_allclose(runs[1].channels["c0"].pin, first, rtol=0, atol=1e-12)
