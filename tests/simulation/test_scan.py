"""Scans run: channels as if they were alone, shared stages, charge memory, the common clock."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray
from scanned import LOW_PASS, SHARED, level, scan_of, sine
from scipy.integrate import solve_ivp
from scipy.linalg import expm

from frontend_sim.measure.scan import crosstalk
from frontend_sim.scenario import ScanScenario, parse_scenario
from frontend_sim.simulation import ScanSimulation, simulate

Real = NDArray[np.float64]
FULL = 8.0
"""Full scale of the scans of ``scanned`` [V]."""


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
    adc = (
        "aperture_jitter = 1e-8\n[adc.input]\nsource_resistance = 1e4\npin_capacitance = 1e-10\n"
        "switch_resistance = 100\nsampling_capacitance = 1e-11\nacquisition_time = 1e-5"
    )
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


@pytest.mark.parametrize("jitter", ["", "aperture_jitter = 1e-7"], ids=["even", "jittered"])
@pytest.mark.parametrize("slot", ["", "slot = 130e-6"], ids=["tight", "spare"])
def test_shared_stages_against_an_ode(slot: str, jitter: str) -> None:
    """Two channels and one amplifier, whose input jumps: a tight solver, switch by switch."""
    scan = scan_of(
        [sine(200), sine(330, phase=1.0)],
        scan=f"dwell = 2\ndiscard = 1\nsettle = 5e-6\n{slot}\n{SHARED}",
        chain=LOW_PASS,
        adc=jitter,
        duration=4e-3,
    )
    run = simulate(scan, discarded=True)
    rhythm = scan.rhythm
    times = np.sort(np.concatenate([run.channels[name].time for name in scan.names]))
    w, phase = 2 * np.pi * np.array([200.0, 330.0]), np.array([0.0, 1.0])
    state, now = np.array([np.sin(0.0), np.sin(1.0), np.sin(0.0)]), 0.0
    expected: list[float] = []
    visits = times.reshape(-1, 2) if len(times) % 2 == 0 else times[:-1].reshape(-1, 2)
    for visit, looks in enumerate(visits):
        end = looks[-1]
        if slot:
            end = max(-rhythm.lead + (visit + 1) * rhythm.slot, end)

        def slope(t: float, x: Real, i: int = visit % 2) -> Real:
            u = np.sin(w * t + phase)
            return np.array([*((u - x[:2]) / 1e-4), (x[i] - x[2]) / 1e-5])

        for until in (*looks, end):
            if until > now:
                found = solve_ivp(slope, (now, until), state, "DOP853", rtol=1e-12, atol=1e-13)
                state, now = found.y[:, -1], until
            expected.append(state[2])
        expected.pop()
    pins = {
        time: pin
        for name in scan.names
        for time, pin in zip(run.channels[name].time, run.channels[name].pin, strict=True)
    }
    asked = np.array([pins[time] for time in visits.ravel()])
    np.testing.assert_allclose(asked, expected, rtol=0, atol=1e-9 * FULL)


def test_offsets_settle_through_shared_stages_too() -> None:
    """Offsets of the channels' own amplifiers jump at the switch, those of a shared one do not."""
    own = '[[channel.chain]]\nkind = "noninverting-amplifier"\ngain = 2\noffset_voltage = 1e-3'
    shared = (
        '[[scan.chain]]\nkind = "noninverting-amplifier"\ngain = 3\ngain_bandwidth = 60e3\n'
        "offset_voltage = 2e-3"
    )
    scan = scan_of([level(0.0), level(0.4)], scan=shared, chain=own, duration=5e-3)
    run = simulate(scan)
    # Levels before the shared stage, plus its own offset; each slot is 2 pi 20 kHz · 50 us long.
    a, b = 0.0 + 2e-3, 0.8 + 2e-3
    left = np.exp(-2 * np.pi * 20e3 * 50e-6)
    for name, own_level, other in [("c0", a, b), ("c1", b, a)]:
        expected = 3 * (own_level + 2e-3) + 3 * (other - own_level) * left / (1 + left)
        np.testing.assert_allclose(run.channels[name].pin[-1], expected, rtol=0, atol=1e-9 * FULL)


def test_a_transport_delay_before_the_switch_only_delays() -> None:
    """The channel arrives later, and the shared stage settles from the switch on as before."""
    delay = '[[channel.chain]]\nkind = "transport-delay"\ndelay = 1e-3'
    late = simulate(scan_of([sine(50), level(1)], scan=SHARED, chain=delay, duration=10e-3))
    early = simulate(scan_of([sine(50), level(1)], scan=SHARED, duration=10e-3))
    behind = late.channels["c0"].time >= 1e-3
    count = int(np.count_nonzero(behind))
    np.testing.assert_allclose(
        # The first few remember what the other delay had them start on.
        late.channels["c0"].pin[-count + 5 :],
        early.channels["c0"].pin[5:count],
        rtol=0,
        atol=1e-9 * FULL,
    )


def test_charge_memory_reaches_its_fixed_point() -> None:
    """0.0103991 of the difference is left (charge sharing, computed), after a long run as well."""
    adc = (
        "[adc.input]\nsource_resistance = 1e6\npin_capacitance = 1e-8\nswitch_resistance = 1\n"
        "sampling_capacitance = 1e-11\nacquisition_time = 1e-9\nnoise = false"
    )
    settled = scan_of([level(0.0), level(1.0)], rate=2e3, adc=adc, duration=0.2)
    run = simulate(settled)
    share = 1e-11 / (1e-11 + 1e-8)
    memory = share / (1 - (1 - share) * np.exp(-1e-3 / 1e-2))
    assert memory == pytest.approx(0.0103991, abs=5e-8)
    held = {name: float(run.channels[name].held[-1]) for name in settled.names}
    assert held["c0"] / held["c1"] == pytest.approx(memory, abs=1e-6)
    at_rest = scan_of(
        [level(0.0), level(1.0)], rate=2e3, adc=adc, duration=0.5, more='initial = "rest"'
    )
    for name in held:
        long = simulate(at_rest).channels[name].held[-1]
        assert long == pytest.approx(held[name], abs=0.01 * settled.adc.lsb)


def test_averages_take_all_their_looks_from_one_channel() -> None:
    """Four looks for each code: each channel at rest gives its own level, none of the other's."""
    adc = "[adc.averaging]\ncount = 4\nshift = 2"
    run = simulate(scan_of([level(-1.0), level(2.0)], adc=adc, scan="dwell = 2"))
    for name, volts in [("c0", -1.0), ("c1", 2.0)]:
        assert np.all(np.abs(run.channels[name].voltage - volts) <= FULL / 2**16)
    assert len(run.channels["c0"].codes) == 200


@pytest.fixture(scope="module")
def leads() -> Real:
    """Leads I, II and III of the example of pydicom, 1 kHz, shape (10000, 3) [1.25 uV]."""
    pydicom = pytest.importorskip("pydicom")
    from pydicom.examples import get_path

    data = pydicom.dcmread(get_path("waveform"))
    return np.rint(data.waveform_array(0)[:, :12] / 1.25)


def ecg(leads: Real, folder: Path, sampling: str) -> ScanScenario:
    """Return a scan of twelve leads, each once in a millisecond, at an LSB of one count."""
    file = folder / "leads.csv"
    np.savetxt(file, leads, fmt="%d", delimiter=",", header=",".join(NAMES), comments="")
    text = "".join(
        f'[[channel]]\nname = "{name}"\n[channel.stimulus]\nkind = "recording"\n'
        f'file = "leads.csv"\ncolumn = "{name}"\nrate = "1 kHz"\nscale = 1.25e-6\n'
        for name in NAMES
    )
    text += f'[scan]\nsampling = "{sampling}"\n[adc]\nrate = "12 kHz"\nbits = 16\n'
    text += 'low = -0.04096\nhigh = 0.04096\ncode = "twos-complement"\n'
    made = parse_scenario(text, folder)
    assert isinstance(made, ScanScenario)
    return made


NAMES = ("I", "II", "III", "aVR", "aVL", "aVF", "V1", "V2", "V3", "V4", "V5", "V6")


def test_leads_sampled_at_once_keep_their_sum(leads: Real, tmp_path: Path) -> None:
    """Einthoven: I + III - II = 0 counts at every instant of the recording."""
    run = simulate(ecg(leads, tmp_path, "simultaneous"))
    one, two, three = (run.channels[name].codes for name in NAMES[:3])
    assert len(one) == len(leads)
    assert np.all(one + three - two == 0)
    for name, column in zip(NAMES, leads.T, strict=True):
        np.testing.assert_array_equal(run.channels[name].codes, column[: len(one)])


def test_leads_sampled_in_turn_break_it_by_slope_times_skew(leads: Real, tmp_path: Path) -> None:
    """Lead II comes 1/12 ms late, III 2/12 ms: the sum is their slope times that, but rounding.

    The prediction is made of the recording itself: between its points the signal goes in lines.
    """
    run = simulate(ecg(leads, tmp_path, "sequential"))
    one, two, three = (run.channels[name].codes for name in NAMES[:3])
    count = min(len(one), len(two), len(three), len(leads) - 1)
    slope = np.diff(leads, axis=0)[:count]
    predicted = (2.0 * slope[:, 2] - slope[:, 1]) / 12.0
    broken = (one[:count] + three[:count] - two[:count]).astype(np.float64)
    assert np.max(np.abs(predicted)) > 5.0  # there is something to see
    # Three codes are rounded, lead I at a point of the recording to no error at all.
    assert np.max(np.abs(broken - predicted)) <= 1.0 + 1e-6
    assert np.max(np.abs(broken)) > 5.0


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


def test_the_fixed_point_is_where_long_runs_end() -> None:
    """Crosstalk in LSB from two runs that differ by one level, shared stage and three channels."""
    scan = scan_of(
        [level(0.0)] * 3,
        scan='order = ["c0", "c2", "c1", "c2"]\nsettle = 3e-6\n' + SHARED.replace("1e-8", "2e-8"),
        duration=10e-3,
    )
    found = crosstalk(scan)
    base = simulate(scan)
    for j, aggressor in enumerate(scan.names):
        raised = [level(1.0 if name == aggressor else 0.0) for name in scan.names]
        text = 'order = ["c0", "c2", "c1", "c2"]\nsettle = 3e-6\n' + SHARED.replace("1e-8", "2e-8")
        run = simulate(scan_of(raised, scan=text, duration=10e-3))
        for i, victim in enumerate(scan.names):
            if i == j:
                continue
            moved = (run.channels[victim].pin - base.channels[victim].pin)[-4:] * FULL
            largest = moved[np.argmax(np.abs(moved))] / scan.adc.lsb
            assert found.matrix[i, j] == pytest.approx(largest, abs=1e-6 * 2**16, rel=1e-9)


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


@pytest.mark.parametrize(
    ("scan", "adc"),
    [
        ("settle = 4e-6", "first = 3e-3\nrate_error = 0.003\naperture_delay = 2e-6"),
        ("slot = 190e-6\ndwell = 3", "[adc.averaging]\ncount = 4\nshift = 2\ninterval = 3e-6"),
        ('order = ["c0", "c1", "c1", "c2"]', "first = 1e-5"),
        ("dwell = 2\nslot = 150e-6", "[adc.averaging]\ncount = 2\nshift = 1"),
    ],
)
def test_columns_and_rows_of_instants_agree(
    scan: str, adc: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Stepping every column as an even row gives what going from instant to instant gives."""
    if "interval" in adc:
        scan = scan.replace("dwell = 3", "dwell = 1")
    made = scan_of(
        [sine(90), sine(70, phase=2), level(1)], scan=f"{scan}\n{SHARED}", chain=LOW_PASS, adc=adc
    )
    columns = simulate(made)
    monkeypatch.setattr("frontend_sim.simulation.shared_pins.MOST_COLUMNS", 0)
    rows = simulate(made)
    for name in made.names:
        one, two = columns.channels[name], rows.channels[name]
        np.testing.assert_array_equal(one.time, two.time)
        np.testing.assert_allclose(one.pin, two.pin, rtol=0, atol=1e-11 * FULL)


def test_one_capacitor_goes_round_against_the_whole_circuit() -> None:
    """Sources, pins and the capacitor as one linear circuit with switches, by SciPy's expm."""
    rs, cp, rsw, cs, taken = 2e4, 2e-9, 500.0, 2e-11, 8e-6
    adc = (
        f"[adc.input]\nsource_resistance = {rs}\npin_capacitance = {cp}\n"
        f"switch_resistance = {rsw}\n"
        f"sampling_capacitance = {cs}\nacquisition_time = {taken}\nnoise = false"
    )
    scan = scan_of(
        [sine(200), sine(330, phase=1.0), level(-2.0)],
        scan='order = ["c0", "c1", "c0", "c2"]\ndwell = 2\ndiscard = 1\nslot = 140e-6',
        adc=adc,
        duration=5e-3,
        more='initial = "rest"',
    )
    run = simulate(scan, discarded=True)
    looks = sorted(
        (time, i, held)
        for i, name in enumerate(scan.names)
        for time, held in zip(run.channels[name].time, run.channels[name].held, strict=True)
    )
    # Pins 0 to 2, the capacitor, then sine and cosine of two sources and a constant.
    open_ = np.zeros((9, 9))
    for i, source in enumerate((4, 6, 8)):
        open_[i, i], open_[i, source] = -1 / (rs * cp), (1.0, 1.0, -2.0)[i] / (rs * cp)
    for i, frequency in ((4, 200.0), (6, 330.0)):
        open_[i, i + 1], open_[i + 1, i] = 2 * np.pi * frequency, -2 * np.pi * frequency
    state, now = np.array([0, 0, 0, 0, 0, 1, np.sin(1.0), np.cos(1.0), 1.0]), 0.0
    expected = []
    for time, i, _ in looks:
        closed = open_.copy()
        closed[i, i] -= 1 / (rsw * cp)
        closed[i, 3] += 1 / (rsw * cp)
        closed[3, i], closed[3, 3] = 1 / (rsw * cs), -1 / (rsw * cs)
        closing = max(time - taken, now)  # the first look is at the start of the run
        state = expm(open_ * (closing - now)) @ state
        state = expm(closed * (time - closing)) @ state
        expected.append(state[3])
        now = time
    found = np.array([held for *_, held in looks])
    np.testing.assert_allclose(found[1:], expected[1:], rtol=0, atol=1e-9 * FULL)


def test_channels_have_noise_of_their_own() -> None:
    """Two bursts of noise at two channels are not the same, and a name keeps its own."""
    burst = 'kind = "noise-burst"\nrms = 1.0\nbandwidth = 5e3\nat = 0.0\nlength = 0.02'
    runs = [simulate(scan_of([burst] * count, rate=10e3 * count)) for count in (2, 3)]
    first, second = (runs[0].channels[name].pin for name in ("c0", "c1"))
    assert abs(np.corrcoef(first, second)[0, 1]) < 5 / np.sqrt(len(first))
    # In both scans c0 is looked at every 100 us from t = 0 on.
    np.testing.assert_allclose(runs[1].channels["c0"].pin, first, rtol=0, atol=1e-12)


@pytest.mark.parametrize("jitter", ["", "aperture_jitter = 1e-8\n"], ids=["even", "jittered"])
def test_one_capacitor_behind_shared_stages_against_the_whole_circuit(jitter: str) -> None:
    """Sources, multiplexer, a loaded shared low pass, pin and capacitor, by SciPy's expm."""
    rs, cp, rsw, cs, taken = 2e3, 1e-9, 500.0, 2e-11, 8e-6
    adc = (
        f"{jitter}[adc.input]\nsource_resistance = {rs}\npin_capacitance = {cp}\n"
        f"switch_resistance = {rsw}\nsampling_capacitance = {cs}\nacquisition_time = {taken}\n"
        "noise = false"
    )
    scan = scan_of(
        [sine(200), sine(330, phase=1.0)],
        scan=f"dwell = 2\ndiscard = 1\nslot = 140e-6\n{SHARED}",
        adc=adc,
        duration=5e-3,
        more='initial = "rest"',
    )
    run = simulate(scan, discarded=True)
    looks = sorted(
        (time, i, held)
        for i, name in enumerate(scan.names)
        for time, held in zip(run.channels[name].time, run.channels[name].held, strict=True)
    )
    # Node of the low pass, pin, capacitor, then sine and cosine of the sources.
    r, c = 1e3, 1e-8

    def circuit(channel: int, closed: bool) -> Real:
        a = np.zeros((7, 7))
        a[0, 0], a[0, 1] = -1 / (r * c) - 1 / (rs * c), 1 / (rs * c)
        a[0, 3 + 2 * channel] = 1 / (r * c)
        a[1, 0], a[1, 1] = 1 / (rs * cp), -1 / (rs * cp)
        if closed:
            a[1, 1] -= 1 / (rsw * cp)
            a[1, 2] = 1 / (rsw * cp)
            a[2, 1], a[2, 2] = 1 / (rsw * cs), -1 / (rsw * cs)
        for place, frequency in ((3, 200.0), (5, 330.0)):
            a[place, place + 1], a[place + 1, place] = 2 * np.pi * np.array([frequency, -frequency])
        return a

    state, now, connected = np.array([0, 0, 0, 0, 1, np.sin(1.0), np.cos(1.0)]), 0.0, 0
    expected, rhythm = [], scan.rhythm
    for number, (time, i, _) in enumerate(looks):
        switch = now
        if number and number % 2 == 0:  # spare time before the switch
            switch = max(number // 2 * rhythm.slot - rhythm.lead, now)
        state = expm(circuit(connected, False) * (switch - now)) @ state
        connected = i
        closing = max(time - taken, switch)
        state = expm(circuit(i, False) * (closing - switch)) @ state
        state = expm(circuit(i, True) * (time - closing)) @ state
        expected.append(state[2])
        now = time
    found = np.array([held for *_, held in looks])
    np.testing.assert_allclose(found[1:], expected[1:], rtol=0, atol=1e-9 * FULL)


def test_capacitor_behind_shared_stages_reaches_its_fixed_point() -> None:
    """Aggressor to victim from two long runs that differ by one level."""
    adc = (
        "[adc.input]\nsource_resistance = 2e3\npin_capacitance = 1e-9\nswitch_resistance = 500\n"
        "sampling_capacitance = 5e-11\nacquisition_time = 8e-6\nnoise = false"
    )
    order = 'order = ["c0", "c2", "c1", "c2"]\n' + SHARED
    scan = scan_of([level(0.0)] * 3, scan=order, adc=adc, duration=10e-3)
    found = crosstalk(scan)
    assert found.ways == ("shared stages", "sampling capacitor")
    base = simulate(scan)
    for j, aggressor in enumerate(scan.names):
        raised = [level(1.0 if name == aggressor else 0.0) for name in scan.names]
        run = simulate(scan_of(raised, scan=order, adc=adc, duration=10e-3))
        for i, victim in enumerate(scan.names):
            if i == j:
                continue
            moved = (run.channels[victim].held - base.channels[victim].held)[-4:] * FULL
            largest = moved[np.argmax(np.abs(moved))] / scan.adc.lsb
            assert found.matrix[i, j] == pytest.approx(largest, abs=1e-6 * 2**16, rel=1e-9)
