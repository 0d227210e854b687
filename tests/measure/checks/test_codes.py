"""Checks on range, noise, tones and hum, against closed forms."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from checked import FILTER, beside, made, verdicts

from frontend_sim.errors import ScenarioError
from frontend_sim.measure.checks import evaluate_checks, refuse_impossible
from frontend_sim.simulation import simulate

COHERENT = {"kind": "sine", "amplitude": 1.65, "frequency": 39 * 50e3 / 2048, "offset": 1.65}
RECORD = {"adc": {"rate": "50 kHz"}, "simulation": {"duration": 2048 / 50e3}, "chain": []}


def test_clipping_counts_the_flags() -> None:
    """A sine of twice the range is beyond it for two thirds of the time: acos(1/2) · 2/pi.

    4000 conversions of 39 cycles tell that to one in a thousand.
    """
    sine = {"kind": "sine", "amplitude": 3.3, "frequency": 975.0, "offset": 1.65}
    tables: dict[str, Any] = {"stimulus": sine, "chain": [], "simulation": {"duration": "200 ms"}}
    (found,) = verdicts({"kind": "clipping"}, **tables)
    assert found.value == pytest.approx(2.0 / 3.0, abs=5e-3)
    assert found.verdict == "fails"
    assert found.advice.startswith("lower the gain by 50 %")
    count = beside("clipping: clipped conversions", {"kind": "clipping"}, **tables)
    assert count == np.count_nonzero(simulate(made(**tables)).overrange)
    (allowed,) = verdicts({"kind": "clipping", "at_most": "70 %"}, **tables)
    assert allowed.verdict == "holds"


def test_what_came_before_does_not_count() -> None:
    """Clipping that is over at the stated instant is none."""
    pulse = {"kind": "pulse", "high": "5 V", "at": "1 ms", "width": "2 ms"}
    early, late = {"kind": "clipping"}, {"kind": "clipping", "name": "late", "after": "5 ms"}
    assert [row.verdict for row in verdicts(early, late, stimulus=pulse)] == ["fails", "holds"]


@pytest.mark.parametrize(
    ("limit", "value"), [("100 mV", 0.3), ("5 %", 0.3 / 3.3), ("10 LSB", 0.3 / 3.3 * 4096)]
)
def test_headroom_in_every_unit(limit: str, value: float) -> None:
    """A step from 0.5 V to 3 V leaves 0.3 V above."""
    step = {"kind": "step", "before": 0.5, "after": 3.0, "at": "1 ms"}
    (found,) = verdicts({"kind": "headroom", "at_least": limit}, stimulus=step)
    assert found.value == pytest.approx(value, rel=1e-9)
    assert found.verdict == "holds"


@pytest.mark.parametrize(
    ("beyond", "verdict"), [(4e-16, "holds"), (-4e-16, "holds"), (1e-9, "fails")]
)
def test_rounding_decides_no_headroom(beyond: float, verdict: str) -> None:
    """A step to the very end of the range has no room and needs none, whatever rounding adds."""
    step = {"kind": "step", "after": 3.3 + beyond, "at": "1 ms"}
    (found,) = verdicts({"kind": "headroom", "at_least": "0 V"}, stimulus=step, chain=[])
    assert found.verdict == verdict


def test_less_gain_may_need_a_shift_too() -> None:
    """0 V to 3.2 V, 0.2 V to either end of 3.3 V: 2.9 V / 3.2 V of the gain, and up by 0.2 V."""
    step = {"kind": "step", "after": 3.2, "at": "1 ms"}
    limit = {"kind": "headroom", "at_least": "200 mV"}
    (found,) = verdicts(limit, stimulus=step)
    assert found.advice.startswith("lower the gain by 9.4 % and shift the level up by 200 mV")
    mended = {"kind": "step", "before": 0.2001, "after": 0.2001 + 2.9 * 0.9999, "at": "1 ms"}
    (holds,) = verdicts(limit, stimulus=mended, chain=[])
    assert holds.verdict == "holds"


def test_headroom_tells_what_to_shift() -> None:
    """0.3 V above are 0.2 V too little, and there is room below."""
    step = {"kind": "step", "before": 1.0, "after": 3.0, "at": "1 ms"}
    (found,) = verdicts({"kind": "headroom", "at_least": "0.5 V"}, stimulus=step)
    assert found.margin == pytest.approx(-0.2, abs=1e-9)
    assert found.advice.startswith("shift the level down by 200 mV")


@pytest.mark.parametrize("quantity", ["rms", "peak-to-peak"])
def test_noise_of_a_capacitor(quantity: str) -> None:
    """kT/C at 25 degC: sqrt(1.380649e-23 · 298.15 / 4.7e-9) V, 6.6 times that peak to peak."""
    expected = math.sqrt(1.380649e-23 * 298.15 / 4.7e-9) * (1.0 if quantity == "rms" else 6.6)
    check = {"kind": "noise", "at_most": "1 uV", "quantity": quantity}
    (found,) = verdicts(check)
    assert found.value == pytest.approx(expected, rel=1e-6)
    assert found.verdict == ("holds" if quantity == "rms" else "fails")
    if quantity != "rms":
        assert "input filter" in found.advice
        assert "by a factor of 6.1" in found.advice


def test_noise_free_bits() -> None:
    """log2(3.3 V / (6.6 · 1 mV)) with the converter's noise of 1 mV, which tops that of the RC."""
    (found,) = verdicts({"kind": "noise-free-bits", "at_least": 9}, adc={"input_noise": "1 mV"})
    assert found.value == pytest.approx(math.log2(500.0), abs=1e-5)
    assert (found.verdict, found.unit) == ("fails", "bit")
    assert "converter" in found.advice


REST = {"kind": "step", "before": 1.0, "after": 1.0}


@pytest.mark.parametrize("basis", ["run", "budget"])
@pytest.mark.parametrize("bits", [12, 16])
def test_codes_have_no_more_quiet_bits_than_bits(basis: str, bits: int) -> None:
    """Without noise all bits stand still: those of the converter, and not one more."""
    check = {"kind": "noise-free-bits", "basis": basis, "at_least": bits}
    tables: dict[str, Any] = {"stimulus": REST, "chain": [], "adc": {"bits": bits}}
    (found,) = verdicts(check, **tables)
    assert (found.value, found.verdict) == (pytest.approx(bits, rel=1e-12), "holds")
    assert f"no more than the {bits} bits of the codes" in found.method
    (more,) = verdicts({**check, "at_least": bits + 0.1}, **tables)
    assert more.verdict == "fails"
    assert more.advice.startswith(
        f"take more bits, or averages that keep more: the codes have {bits}"
    )


@pytest.mark.parametrize("basis", ["run", "budget"])
def test_averages_have_the_bits_that_they_keep(basis: str) -> None:
    """Sixteen codes of 12 bits, added up and shifted by two, are of 14 bits."""
    average = {"averaging": {"count": 16, "interval": "1 us", "shift": 2}}
    check = {"kind": "noise-free-bits", "basis": basis, "at_least": 14}
    (found,) = verdicts(check, stimulus=REST, chain=[], adc=average)
    assert (found.value, found.verdict) == (pytest.approx(14.0, rel=1e-12), "holds")


def test_rare_noise_is_no_more_bits_either() -> None:
    """Where the pin moves within one code, its own movement is no measure of bits beyond 12."""
    creep = {"kind": "sine", "amplitude": 1e-5, "frequency": 1013, "offset": 1.6501}
    check = {"kind": "noise-free-bits", "basis": "run", "at_least": 12.5}
    (found,) = verdicts(check, stimulus=creep, chain=[])
    assert (found.value, found.verdict) == (pytest.approx(12.0, rel=1e-12), "fails")


def test_standing_codes_say_that_they_stand() -> None:
    """No noise and no hum in the codes is true of the codes, and told as what it is."""
    noise = {"kind": "noise", "basis": "run", "at_most": "1 uV"}
    extent = {**noise, "name": "extent", "quantity": "peak-to-peak"}
    hum = {"kind": "mains-level", "at_most": "1 uV"}
    tables: dict[str, Any] = {"chain": [], "simulation": {"duration": "100 ms"}}
    for found in verdicts(noise, extent, hum, stimulus=REST, **tables):
        assert (found.value, found.verdict) == (pytest.approx(0.0, abs=1e-12), "holds")
        assert found.method.endswith(
            "the codes stand still, and what moves none of them does not show"
        )
    sine = {"kind": "sine", "amplitude": 1e-3, "frequency": 50.0, "offset": 1.65}
    for found in verdicts(noise, extent, hum, stimulus=sine, **tables):
        assert "stand still" not in found.method


@pytest.mark.parametrize("kind", ["snr", "sinad", "effective-bits", "sfdr"])
def test_standing_codes_hold_no_tone_of_infinite_quality(kind: str) -> None:
    """A tone that moves no code is none, and one of a few phases tells no noise: both fail."""
    check = {"kind": kind, "at_least": 200 if kind != "effective-bits" else 20}
    for amplitude, reason in ((1e-5, "all samples are equal"), (1.0, "phases of the tone only")):
        sine = {"kind": "sine", "amplitude": amplitude, "frequency": 12.5e3, "offset": 1.6501}
        (found,) = verdicts(check, stimulus=sine, **RECORD)
        assert (found.verdict, found.value) == ("fails", None)
        assert reason in found.method


def test_noise_of_a_run_with_a_moving_signal() -> None:
    """Five LSB of noise and rounding, sqrt(25 + 1/12) LSB, on a sine; 20000 codes: 2 %."""
    check = {"kind": "noise", "basis": "run", "at_most": "6 LSB"}
    noisy = {"adc": {"input_noise": 5.0 * 3.3 / 4096}, "simulation": {"duration": "1 s"}}
    sine = {"kind": "sine", "amplitude": 1, "frequency": 37, "offset": 1.65}
    (found,) = verdicts(check, stimulus=sine, **noisy)
    assert found.value == pytest.approx(math.sqrt(25.0 + 1.0 / 12.0), rel=0.02)
    (extent,) = verdicts({**check, "quantity": "peak-to-peak"}, stimulus=sine, **noisy)
    assert 35.0 < (extent.value or 0.0) < 50.0
    assert extent.verdict == "fails"


def test_clipped_codes_tell_no_noise() -> None:
    """The check fails with the reason, and says no number."""
    check = {"kind": "noise", "basis": "run", "at_most": "6 LSB"}
    (found,) = verdicts(check, stimulus={"kind": "step", "after": "5 V"})
    assert (found.verdict, found.value, found.margin) == ("fails", None, None)
    assert "codes are clipped" in found.method


def test_a_noise_without_bandwidth_is_refused_before_the_run() -> None:
    """White noise that nothing filters is infinite; a budget without it would pass in silence."""
    white = {"kind": "buffer", "name": "buffer", "voltage_noise": "10 nV/sqrt(Hz)"}
    for kind in ({"kind": "noise", "at_most": "1 mV"}, {"kind": "noise-free-bits", "at_least": 1}):
        with pytest.raises(ScenarioError, match="nothing limits the bandwidth"):
            refuse_impossible(made(kind, chain=[FILTER, white]))


def test_a_full_scale_tone_has_the_bits_of_the_converter() -> None:
    """6.02 N + 1.76 dB and N effective bits, to 0.1 dB and 0.02 bits; harmonics are far below.

    Source: W. R. Bennett 1948, from memory.
    """
    amplitude = 1.65 * (1.0 - 1.0 / 4096)
    sine = {**COHERENT, "amplitude": amplitude, "offset": 1.65 - 3.3 / 8192}
    checks = [
        {"kind": "snr", "at_least": "70 dB"},
        {"kind": "sinad", "at_least": "70 dB"},
        {"kind": "effective-bits", "at_least": 11.9},
        {"kind": "thd", "at_most": "-80 dB"},
        {"kind": "sfdr", "at_least": "80 dB"},
    ]
    found = {row.name: row for row in verdicts(*checks, stimulus=sine, **RECORD)}
    assert all(row.verdict == "holds" for row in found.values())
    assert found["snr"].value == pytest.approx(74.0, abs=0.25)
    assert found["sinad"].value == pytest.approx(74.0, abs=0.25)
    assert found["effective-bits"].value == pytest.approx(12.0, abs=0.05)


def test_a_small_tone_is_told_to_be_raised() -> None:
    """20 dB below full scale SINAD is 20 dB less, and the advice says so."""
    sine = {**COHERENT, "amplitude": 0.165}
    (found,) = verdicts({"kind": "sinad", "at_least": "70 dB"}, stimulus=sine, **RECORD)
    assert found.value == pytest.approx(54.0, abs=1.0)
    assert "raise the level of the tone, which is 20.0 dB below full scale" in found.advice


def test_a_spur_is_named() -> None:
    """A second tone 40 dB below the first is the strongest line beside it; its place is told."""
    spur = {"amplitude": 0.015, "frequency": 301 * 50e3 / 2048}
    main = {"amplitude": 1.5, "frequency": 39 * 50e3 / 2048}
    tones = {"kind": "tones", "tone": [main, spur], "offset": 1.65}
    (found,) = verdicts({"kind": "sfdr", "at_least": "60 dB"}, stimulus=tones, **RECORD)
    assert found.value == pytest.approx(40.0, abs=0.1)
    assert "7348.63 Hz" in found.advice


def test_a_cubic_of_known_harmonics_is_measured() -> None:
    """Two harmonics put in at -40 and -50 dB give THD = 10 lg(1e-4 + 1e-5) = -39.59 dB."""
    parts = [(1.5, 39), (0.015, 78), (1.5 * 10**-2.5, 117)]
    tones = [{"amplitude": a, "frequency": k * 50e3 / 2048} for a, k in parts]
    stimulus = {"kind": "tones", "tone": tones, "offset": 1.65}
    (found,) = verdicts({"kind": "thd", "at_most": "-60 dB"}, stimulus=stimulus, **RECORD)
    assert found.value == pytest.approx(10.0 * math.log10(1.1e-4), abs=0.1)
    assert "harmonic 2 is the strongest" in found.advice


def test_harmonics_that_others_hide_are_no_proof() -> None:
    """At a third of the rate all fold onto the tone or zero: nothing is told, and nothing holds.

    At a quarter the second is left, at half the rate, and the check says which are not.
    """
    check = {"kind": "thd", "at_most": "-20 dB"}
    noisy = {"adc": {"rate": "60 kHz", "input_noise": "2 mV"}, "simulation": {"duration": 0.05}}
    for part, method in ((3, "cannot be told: harmonics 2, 3, "), (4, "without harmonics 3, 4, 5")):
        tone = {"kind": "sine", "amplitude": 1.5, "offset": 1.65, "frequency": 60e3 / part}
        (found,) = verdicts(check, stimulus=tone, chain=[], **noisy)
        assert found.verdict == ("fails" if part == 3 else "holds")
        assert method in found.method


def test_without_a_tone_it_fails() -> None:
    """A step holds no tone: the check fails with the measure's own reason."""
    (found,) = verdicts({"kind": "sinad", "at_least": "10 dB"})
    assert (found.verdict, found.value) == ("fails", None)
    assert found.method.startswith("cannot be told: ")


def test_a_tone_is_analysed_once() -> None:
    """Checks that ask alike share one spectrum: the same record gives the very same numbers."""
    both = [{"kind": "sinad", "name": name, "at_least": "10 dB", "window": "hann"} for name in "ab"]
    first, second = verdicts(*both, stimulus=COHERENT | {"amplitude": 1.5}, **RECORD)
    assert first.value == second.value


def test_mains_behind_a_low_pass() -> None:
    """50 Hz at 20 mV behind RC: |H| = 1 / sqrt(1 + (2 pi f RC)²), to half a percent of it."""
    filtered = {"kind": "rc-lowpass", "resistance": "100k", "capacitance": "100n"}
    hum = {"kind": "sine", "amplitude": "20 mV", "frequency": 50.2, "offset": 1.0}
    check = {"kind": "mains-level", "at_most": "5 mV", "after": "0.5 s"}
    tables: dict[str, Any] = {
        "stimulus": hum, "chain": [filtered], "adc": {"rate": 1e3, "bits": 16},
        "simulation": {"duration": "2 s"},
    }  # fmt: skip
    expected = 20e-3 / math.hypot(1.0, 2.0 * math.pi * 50.2 * 10e-3)
    (found,) = verdicts(check, **tables)
    assert found.value == pytest.approx(expected, rel=5e-3)
    assert found.verdict == "fails"
    more = 20.0 * math.log10(expected / 5e-3)
    assert f"attenuate 50.2 Hz by {more:.1f} dB more" in found.advice


@pytest.mark.parametrize("error", [-0.05, 0.05])
def test_hum_is_found_whatever_the_clock(error: float) -> None:
    """A clock 5 % off moves hum out of the 1 % that are searched; its true rate brings it back."""
    check = {"kind": "mains-level", "at_most": "5 mV"}
    (found,) = verdicts(
        check,
        stimulus={"kind": "sine", "amplitude": "20 mV", "frequency": 50.2, "offset": 1.0},
        adc={"rate": 1e3, "bits": 16, "rate_error": error},
        simulation={"duration": "2 s"},
    )
    assert found.value == pytest.approx(20e-3, rel=1e-3)
    assert found.verdict == "fails"


@pytest.mark.parametrize(
    ("keys", "reason"),
    [({"frequency": "9.95 kHz", "deviation": "1 %"}, "half the conversion rate"),
     ({"harmonics": 3, "frequency": 4000}, "ask for fewer"),
     ({"frequency": 50}, "it takes at least 40.4 ms")],
)  # fmt: skip
def test_hum_that_no_run_could_tell(keys: dict[str, Any], reason: str) -> None:
    """Too high a harmonic, or too short a run, is told before the run."""
    with pytest.raises(ScenarioError, match=reason):
        refuse_impossible(made({"kind": "mains-level", "at_most": "1 mV", **keys}))


def test_grid_error_of_a_discrete_model() -> None:
    """The largest distance that the run itself reports; the exact mode has none."""
    check = {"kind": "grid-error", "at_most": "0.5 LSB"}
    (exact,) = verdicts(check)
    assert (exact.value, exact.verdict) == (0.0, "holds")
    sine = {"kind": "sine", "amplitude": 1.5, "frequency": 1e3, "offset": 1.65}
    model = {"discretization": "bilinear", "grid_rate": "100 kHz"}
    run = simulate(made(check, stimulus=sine, simulation=model))
    (found,) = evaluate_checks(run)
    assert run.grid is not None
    assert found.value == run.grid.largest_error
    assert found.verdict == "fails"
    # Second order: the rate that is advised gives the limit, within a fifth.
    rate = float(found.advice.split("about ")[1].split(" kHz")[0]) * 1e3
    finer = made(check, stimulus=sine, simulation={**model, "grid_rate": rate})
    (again,) = evaluate_checks(simulate(finer))
    assert again.value == pytest.approx(0.5, rel=0.2)
