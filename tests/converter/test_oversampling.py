"""The oversampling converter: rates, codes against plain convolution, restarts, overload."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from digitizing import constant, digitized, residual
from hypothesis import given, settings
from hypothesis import strategies as st
from pydantic import TypeAdapter, ValidationError

from frontend_sim.converter import ADCS, Adc, AnyAdc, OversamplingAdc
from frontend_sim.converter.clock import look_count
from frontend_sim.converter.sinc_filter import SincFilter
from frontend_sim.errors import ScenarioError
from frontend_sim.values import may_be_left_out


def adc(**values: Any) -> OversamplingAdc:
    """Return a sinc³ converter of 24 bits, 100 kHz, decimation 50, -1 to 1 V."""
    given: dict[str, Any] = {
        "modulator_rate": 100e3, "order": 3, "bits": 24, "low": -1.0, "high": 1.0, **values,
    }  # fmt: skip
    if "data_rate" not in given:
        given.setdefault("decimation", 50)
    return OversamplingAdc(**given)


def test_the_kind_is_sampling_unless_told() -> None:
    """A table without a kind is what it was before there were two; each kind is in the table."""
    read: TypeAdapter[Any] = TypeAdapter(AnyAdc)
    plain = {"rate": 1e3, "bits": 12, "high": 1.0}
    assert read.validate_python(plain) == Adc(**plain)
    assert type(read.validate_python({**plain, "kind": "sampling"})) is Adc
    over = {"kind": "oversampling", "modulator_rate": 1e5, "decimation": 10, "order": 2,
            "bits": 16, "high": 1.0}  # fmt: skip
    assert type(read.validate_python(over)) is OversamplingAdc
    assert read.validate_python(Adc(**plain)) == Adc(**plain)
    for kind, made in ADCS.items():
        field = made.model_fields["kind"]
        assert field.default == kind
        assert may_be_left_out(field) is (kind == "sampling")
    for wrong in ("delta", 5, None, ["sampling"]):
        with pytest.raises(ValidationError, match="does not match any of the expected tags"):
            read.validate_python({**plain, "kind": wrong})


@pytest.mark.parametrize(
    ("values", "ratio", "rate"),
    [
        ({"decimation": 128}, 128, 100e3 / 128),
        ({"data_rate": "50 Hz"}, 2000, 50.0),
        ({"data_rate": "781.25 Hz", "decimation": 128}, 128, 781.25),
        ({"modulator_rate": "19.2 kHz", "data_rate": "60 Hz"}, 320, 60.0),
        ({"conversion": "restarted", "decimation": 100}, 100, 1e3 / 3.0),
        ({"conversion": "restarted", "data_rate": "100 Hz"}, None, None),
        ({"conversion": "restarted", "data_rate": "10 Hz", "decimation": 100}, 100, 10.0),
        ({"conversion": "restarted", "order": 4, "data_rate": "100 Hz"}, 250, 100.0),
    ],
)
def test_rates_and_ratio_tell_each_other(
    values: dict[str, Any], ratio: int | None, rate: float | None
) -> None:
    """Any two of modulator rate, decimation and data rate; a ratio that is no whole one is told."""
    if ratio is None:
        with pytest.raises(ScenarioError, match=r"100 Hz needs a decimation of 333.333333"):
            adc(**values)
        return
    made = adc(**values)
    assert made.ratio == ratio
    assert made.rate == pytest.approx(rate, rel=1e-15)


def expected(made: OversamplingAdc, signal: Any, codes: int) -> Any:
    """Return the filtered voltages by one convolution over all modulator samples."""
    times = made.digitizer(0).instants(0, look_count(made, codes))
    samples = signal(times)
    if made.continuous:
        whole = np.convolve(samples, made.sinc.taps)
        return whole[made.last_look(0) :: made.ratio][:codes], times[
            made.last_look(0) :: made.ratio
        ]
    groups = samples.reshape(codes, -1)[:, -made.sinc.length :]
    return groups @ made.sinc.taps[::-1], times[made.last_look(0) :: made.order * made.ratio]


@given(
    order=st.integers(1, 5),
    ratio=st.integers(2, 60),
    conversion=st.sampled_from(["continuous", "restarted"]),
    slow=st.floats(0.1, 1.0),
    codes=st.integers(1, 40),
    cuts=st.lists(st.integers(1, 12_000), max_size=30),
)
@settings(max_examples=80, deadline=None)
def test_codes_are_those_of_a_convolution(
    order: int, ratio: int, conversion: str, slow: float, codes: int, cuts: list[int]
) -> None:
    """At 32 bits within one code of a plain convolution, whatever the cuts; times are exact."""
    keys: dict[str, Any] = {"order": order, "decimation": ratio, "conversion": conversion}
    if conversion == "restarted":
        keys["data_rate"] = slow * 100e3 / (order * ratio)
    made = adc(**keys, bits=32, first=2e-5)

    def signal(times: Any) -> Any:
        return 0.9 * np.sin(2.0 * np.pi * 1234.5 * times) * np.exp(-50.0 * times)

    found = digitized(made, signal, codes, cuts=cuts)
    voltage, times = expected(made, signal, codes)
    assert np.max(np.abs(found.voltage - voltage)) <= 0.51 * made.lsb
    np.testing.assert_array_equal(found.time, times)
    np.testing.assert_array_equal(found.pin, signal(times))


@given(
    order=st.integers(1, 5),
    ratio=st.integers(2, 300),
    conversion=st.sampled_from(["continuous", "restarted"]),
    seed=st.integers(0, 2**63 - 1),
    cuts=st.lists(st.integers(1, 20_000), max_size=40),
)
@settings(max_examples=60, deadline=None)
def test_cuts_never_change_a_bit(
    order: int, ratio: int, conversion: str, seed: int, cuts: list[int]
) -> None:
    """Codes, voltages, flags and instants at 32 bits, with every kind of noise in them."""
    made = adc(
        order=order, decimation=ratio, conversion=conversion, bits=32, input_noise=1e-3,
        aperture_jitter=1e-7, wander={"shape": "gauss-markov", "rms": 1e-8, "correlation_time": 1},
        reference={"noise": 1e-3, "filter_time_constant": 1e-3},
        nonlinearity={"shape": "s-shape", "peak": 1000.0},
    )  # fmt: skip
    codes = max(20_000 // (order * ratio), 2)

    def signal(times: Any) -> Any:
        return 1.01 * np.sin(2.0 * np.pi * 777.7 * times)

    whole, parts = digitized(made, signal, codes, seed), digitized(made, signal, codes, seed, cuts)
    for name in ("time", "pin", "codes", "voltage", "overrange"):
        np.testing.assert_array_equal(getattr(whole, name), getattr(parts, name))


def tones() -> list[tuple[int, float]]:
    """Return orders with frequencies in data rates, of which enough is left to see 0.001 dB."""
    shares = (0.07, 0.31, 0.49, 0.77, 1.27, 2.4, 10.3, 49.6)
    return [
        (order, share)
        for order in range(1, 6)
        for share in shares
        if SincFilter(order, 50, 50.0).amplitude(share) > 1e-6
    ]


@pytest.mark.parametrize(("order", "share"), tones())
def test_tones_agree_with_the_closed_form(order: int, share: float) -> None:
    """The amplitude of a tone behind filter and decimation, within 0.001 dB.

    Tones above half the data rate are found at their alias. 64 codes of 32 bits at a frequency that
    fits into them: rounding leaves 3e-11 of full scale, 0.0003 dB of the weakest tone.
    """
    made = adc(order=order, decimation=50, bits=32)
    points = 64
    cycles = round(share * points) | 1
    frequency = cycles * made.rate / points

    def signal(times: Any) -> Any:
        return 0.999 * np.cos(2.0 * np.pi * frequency * times + 0.4)

    found = digitized(made, signal, points)
    alias = abs((cycles + points // 2) % points - points // 2) * made.rate / points
    amplitude, _ = residual(found.voltage, found.time, alias)
    gain = float(made.sinc.amplitude(frequency))
    assert 20.0 * np.log10(amplitude / 0.999) == pytest.approx(20.0 * np.log10(gain), abs=1e-3)


def test_a_step_is_seen_as_the_filter_says() -> None:
    """A step right after a code: the next ones show the shares of ``step``, then all of it.

    A change in the middle of a running mean spoils one code more.
    """
    made = adc(order=3, decimation=50)
    first = float(digitized(made, constant(0.0), 1).time[0])
    for offset, valid in ((0.5e-5, 3), (20.5e-5, 4)):
        at = first + offset
        found = digitized(made, lambda times, at=at: np.where(times > at, 0.5, 0.0), 8).voltage
        if valid == 3:
            assert found[1:4] == pytest.approx(0.5 * made.sinc.step(), abs=made.lsb)
        whole = np.flatnonzero(np.abs(found - 0.5) <= made.lsb)
        assert whole[0] == valid
    quantities = made.quantities()
    assert (quantities.first_valid, quantities.first_valid_after_change) == (3, 4)


def test_restarted_codes_share_nothing() -> None:
    """A pulse within one conversion is seen in that code alone; outside of the windows in none."""
    made = adc(conversion="restarted", decimation=10, data_rate="1 kHz")
    inside = digitized(made, lambda t: np.where((t > 2.1e-3) & (t < 2.2e-3), 0.5, 0.0), 5).voltage
    assert np.all(np.abs(inside[[0, 1, 3, 4]]) <= made.lsb)
    assert inside[2] > 0.1
    outside = digitized(made, lambda t: np.where((t > 2.5e-3) & (t < 2.9e-3), 0.5, 0.0), 5).voltage
    assert np.all(np.abs(outside) <= made.lsb)


def test_input_noise_is_that_of_a_code() -> None:
    """The rms that was asked for; a sinc³ correlates neighbours by its own weights.

    The correlation at a lag of one code is that of the weights, R apart. Within 4.5 standard
    errors, both signs of correlation counted in.
    """
    made, count = adc(input_noise=1e-4), 20_000
    noise = digitized(made, constant(0.0), count, seed=4).voltage
    taps = made.sinc.taps
    expected_correlation = np.sum(taps[50:] * taps[:-50]) / np.sum(taps**2)
    error = 4.5 * np.sqrt((1.0 + 2.0 * expected_correlation**2 * 2.0) / count)
    assert np.mean(noise**2) / 1e-8 == pytest.approx(1.0, abs=np.sqrt(2.0) * error)
    correlation = np.mean(noise[1:] * noise[:-1]) / 1e-8
    assert correlation == pytest.approx(expected_correlation, abs=error)
    restarted = adc(input_noise=1e-4, conversion="restarted")
    single = digitized(restarted, constant(0.0), 5000, seed=4).voltage
    assert np.std(single) == pytest.approx(1e-4, rel=4.5 / np.sqrt(10_000))


def test_a_modulator_cannot_go_beyond_its_range() -> None:
    """A spike beyond the range counts as full scale, and is told in the codes that saw it."""
    made = adc(order=1, decimation=50)
    found = digitized(made, lambda t: np.where((t > 1.1e-3) & (t < 1.2e-3), 30.0, 0.0), 5)
    samples = int(np.sum((made.digitizer(0).instants(0, 250) > 1.1e-3)
                         & (made.digitizer(0).instants(0, 250) < 1.2e-3)))  # fmt: skip
    assert found.voltage[2] == pytest.approx(samples / 50.0, abs=made.lsb)
    assert found.overrange.tolist() == [False, False, True, False, False]
    high = digitized(made, constant(1.5), 3)
    assert high.codes.tolist() == [made.highest_code] * 3
    assert np.all(high.overrange)


def test_a_slow_clock_moves_the_notch() -> None:
    """-1 %: what should reject 50 Hz has its notch at 49.5 Hz, and 50 Hz comes through."""
    made = adc(data_rate="50 Hz", rate_error="-1 %")
    assert made.sinc.notch() == pytest.approx(49.5, rel=1e-15)
    right = adc(data_rate="50 Hz")

    def hum(times: Any) -> Any:
        return 0.9 * np.sin(2.0 * np.pi * 50.0 * times)

    assert np.max(np.abs(digitized(right, hum, 10).voltage)) <= right.lsb
    seen = np.max(np.abs(digitized(made, hum, 60).voltage))
    assert seen == pytest.approx(0.9 * float(made.sinc.amplitude(50.0)), rel=0.1)


def test_looks_of_both_conversions() -> None:
    """Evenly, or in bursts of K R; usual and longest intervals bound those between instants."""
    running = adc(decimation=10, aperture_delay=3e-6)
    single = adc(decimation=10, conversion="restarted", data_rate="1 kHz")
    for made, looks in ((running, 200), (single, 90)):
        digitizer = made.digitizer(0)
        gaps = np.diff(digitizer.instants(0, looks))
        assert np.min(gaps) == pytest.approx(digitizer.interval, rel=1e-9)
        assert np.max(gaps) <= digitizer.longest
    assert np.max(np.diff(single.digitizer(0).instants(0, 90))) == pytest.approx(0.71e-3)


@pytest.mark.parametrize(
    ("values", "message"),
    [
        ({"order": 0}, "greater than or equal to 1"),
        ({"order": 6}, "less than or equal to 5"),
        ({"decimation": 1}, "greater than or equal to 2"),
        ({"decimation": 2**20 + 1}, "less than or equal to 1048576"),
        ({"decimation": None}, "give decimation or data_rate"),
        ({"decimation": 50, "data_rate": "1999 Hz"}, "disagree: together .* make 2 kHz"),
        ({"data_rate": "60 kHz"}, "needs a decimation of 1.66666667"),
        ({"data_rate": "0.01 Hz"}, "must be a whole number from 2 to 1048576"),
        ({"conversion": "restarted", "decimation": 50, "data_rate": "700 Hz"},
         r"700 Hz is too fast: .* 3 times 50 samples, at most 666.666667 Hz"),
        ({"conversion": "single"}, "'continuous' or 'restarted'"),
        ({"modulator_rate": 0.0}, "above 0"),
        ({"rate": 5.0}, "unknown here"),
        ({"averaging": {"count": 2}}, "unknown here"),
        ({"aperture_jitter": "1 us"}, "at most 5% of the modulator's period, 5e-07 s"),
        ({"high": -2.0}, "reversed or empty"),
        ({"reference": {"voltage": 0.5}}, "reference of 0.5 V"),
    ],
)  # fmt: skip
def test_impossible_converters_are_refused(values: dict[str, Any], message: str) -> None:
    """Each with a message of its own."""
    with pytest.raises(ScenarioError, match=message):
        adc(**values)
