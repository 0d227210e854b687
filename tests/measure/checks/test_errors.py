"""Alias error, total error, INL and DNL as checks."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from checked import FILTER, TAU, beside, made, verdicts

from frontend_sim.errors import ScenarioError
from frontend_sim.measure.checks import refuse_impossible
from frontend_sim.measure.result import Result

TWO = {
    "kind": "tones",
    "tone": [{"amplitude": 1, "frequency": 400}, {"amplitude": "50 mV", "frequency": "47.3 kHz"}],
    "offset": "1.6 V",
}
WHOLE = {"adc": {"rate": "100 kHz", "bits": 8, "high": 2.5}, "chain": []}
RAMP = {"kind": "ramp", "before": "-0.1 V", "slope": "5.4 V/s"}


def test_alias_error_of_a_line() -> None:
    """|H| of one section times the line's peak value; over a few turns its rms is that / sqrt 2."""
    gain = 1.0 / math.hypot(1.0, 2.0 * math.pi * 47.3e3 * TAU)
    (peak,) = verdicts({"kind": "alias-error", "at_most": "10 LSB", "after": "1 ms"}, stimulus=TWO)
    lsb = 3.3 / 4096
    assert peak.value == pytest.approx(0.05 * gain / lsb, rel=0.01)
    (rms,) = verdicts(
        {"kind": "alias-error", "at_most": "10 mV", "quantity": "rms", "after": "1 ms"},
        stimulus=TWO,
    )
    assert rms.value == pytest.approx(0.05 * gain / math.sqrt(2.0), rel=0.01)
    (before,) = verdicts({"kind": "alias-error", "at_most": "1 LSB", "point": "stimulus"},
                         stimulus=TWO)  # fmt: skip
    assert before.value == pytest.approx(0.05 / lsb, rel=0.01)
    assert "'tones, tone 2' at 47.3 kHz, which lands at 7.3 kHz" in before.advice


@pytest.mark.parametrize("quantity", ["peak", "rms"])
def test_an_alias_error_holds_only_as_far_as_it_is_known(quantity: str) -> None:
    """A limit above the value and below value plus uncertainty fails, and says why; above, holds.

    An edge has no split into lines, so what lies above half the rate is known to some LSB only.
    """

    def found(limit: float) -> Result:
        check = {"kind": "alias-error", "point": "stimulus", "quantity": quantity}
        (row,) = verdicts({**check, "at_most": f"{limit!r} LSB"}, chain=[])
        return row

    check = {"kind": "alias-error", "point": "stimulus", "at_most": "1 LSB"}
    unsure = beside("alias-error: uncertainty", check, chain=[])
    value = found(1.0).value
    assert value is not None
    assert 1.0 < unsure < value
    near, far = found(value + 0.9 * unsure), found(value + 1.1 * unsure)
    assert (near.verdict, far.verdict) == ("fails", "holds")
    assert near.value == far.value == value
    assert near.margin == pytest.approx(-0.1 * unsure, rel=1e-6)
    assert near.advice.startswith("whether it holds cannot be told: the value is known to ")
    assert found(0.9 * value).advice.startswith("lower the corner")


def test_an_error_under_a_band_limit_holds_only_as_far_as_it_is_known() -> None:
    """The limit of the quantity is known as far as that of the stimulus; without it all is."""

    def found(limit: float, band_limited: bool = True) -> Result:
        check = {"kind": "total-error", "band_limited": band_limited}
        (row,) = verdicts({**check, "at_most": f"{limit!r} LSB"})
        return row

    stimulus = {"kind": "alias-error", "point": "stimulus", "at_most": "1 LSB"}
    unsure = beside("alias-error: uncertainty", stimulus)
    value, plain = found(1.0).value, found(1.0, band_limited=False).value
    assert value is not None
    assert plain is not None
    near, far = found(value + 0.9 * unsure), found(value + 1.1 * unsure)
    assert (near.verdict, far.verdict) == ("fails", "holds")
    assert near.advice.startswith("whether it holds cannot be told")
    assert ", known to " in near.method
    assert found(plain + 0.1 * unsure, band_limited=False).verdict == "holds"


def test_what_came_before_is_no_part_of_the_uncertainty() -> None:
    """The edge at 1 ms is known worst; from 10 ms on a tenth of that is left at most.

    So it is of averages, whose looks are known worst at one and the same edge.
    """
    check = {"kind": "alias-error", "at_most": "1 LSB"}
    for adc in ({}, {"averaging": {"count": 4, "interval": "5 us"}}):
        whole = beside("alias-error: uncertainty", check, adc=adc)
        late = beside("alias-error: uncertainty", {**check, "after": "10 ms"}, adc=adc)
        assert 0.0 < late < 0.1 * whole


def test_a_slow_recording_is_no_proof(tmp_path: Path) -> None:
    """Told before any run; with interference beside it, the question has an answer."""
    np.save(tmp_path / "slow.npy", np.linspace(0.0, 1.0, 400))
    slow = {"kind": "recording", "file": str(tmp_path / "slow.npy"), "rate": "10 kHz"}
    check = {"kind": "alias-error", "at_most": "1 LSB"}
    with pytest.raises(ScenarioError, match="the recording cannot show aliasing"):
        refuse_impossible(made(check, stimulus=slow))
    hum = {"kind": "sine", "amplitude": "1 mV", "frequency": "33 kHz"}
    both = made(check, stimulus={"kind": "sum", "term": [slow, hum]})
    refuse_impossible(both)


def test_total_error_and_what_it_names() -> None:
    """A converter 1 % off: the gain is the largest part, and the share is one of the range."""
    level = {"kind": "step", "before": "2 V", "after": "2 V"}
    check = {"kind": "total-error", "at_most": "0.1 %"}
    (found,) = verdicts(check, stimulus=level, adc={"gain_error": "1 %"})
    assert (found.unit, found.verdict) == ("1", "fails")
    assert found.value == pytest.approx(0.02 / 3.3, abs=0.5 / 4096)
    assert found.advice.startswith("calibrate the gain")
    gain = beside("total-error: gain", check, stimulus=level, adc={"gain_error": "1 %"})
    assert gain == pytest.approx(0.02 / 3.3 * 4096, rel=1e-9)
    # Firmware that knows the gain and an offset reads the right value.
    (known,) = verdicts({**check, "gain": 1.01}, stimulus=level, adc={"gain_error": "1 %"})
    assert known.verdict == "holds"
    (shifted,) = verdicts({**check, "offset": "0.5 V"}, stimulus=level)
    assert shifted.value == pytest.approx(0.5 / 3.3, abs=0.5 / 4096)


def test_total_error_refuses_a_chain_without_gain() -> None:
    """Told before any run, and with a gain it is answered."""
    coupled = [{"kind": "rc-highpass", "resistance": "100k", "capacitance": "1u"}]
    check = {"kind": "total-error", "at_most": "50 %"}
    with pytest.raises(ScenarioError, match="give gain, that of the pass band"):
        refuse_impossible(made(check, chain=coupled))
    refuse_impossible(made({**check, "gain": 1}, chain=coupled))
    with pytest.raises(ScenarioError, match="a gain of 0"):
        made({**check, "gain": 0})


@pytest.mark.parametrize("line", ["end-point", "best-fit"])
def test_inl_of_a_bow(line: str) -> None:
    """A parabola of 2 LSB: that from end to end, half of it... 4/3 less from the nearest line.

    The nearest line to a parabola of height h lies h · 2/3 above its ends, so at most that is left.
    """
    adc = {**WHOLE["adc"], "nonlinearity": {"shape": "bow", "peak": "2 LSB"}}
    (found,) = verdicts(
        {"kind": "inl", "at_most": "1 LSB", "line": line},
        stimulus=RAMP, chain=[], adc=adc, simulation={"duration": "0.5 s"},
    )  # fmt: skip
    expected = 2.0 if line == "end-point" else 4.0 / 3.0
    assert found.value == pytest.approx(expected, abs=0.06)
    assert (found.unit, found.verdict) == ("LSB", "fails")
    assert "correct the codes by a table" in found.advice
    assert found.method == "counting the codes of a ramp; IEEE 1241, ramp histogram, from memory"
    # A clean ramp of 5.4 V/s at 100 kHz moves by 54 uV, 1/181 LSB; both levels together know that.
    half = beside(
        "inl: confidence", {"kind": "inl", "at_most": "1 LSB", "line": line},
        stimulus=RAMP, chain=[], adc=adc, simulation={"duration": "0.5 s"},
    )  # fmt: skip
    assert half < 2.0 / 181.0


@pytest.mark.parametrize(("amplitude", "beyond"), [("1.4 V", 0.0), ("0.625 V", 126.0)])
def test_codes_that_were_not_reached_are_told(amplitude: str, beyond: float) -> None:
    """A sine over half of 256 codes sees 129 or 130 of them; the others are counted beside."""
    sine = {"kind": "sine", "amplitude": amplitude, "offset": "1.25 V", "frequency": "997.137 Hz"}
    tables: dict[str, Any] = {"stimulus": sine, **WHOLE, "simulation": {"duration": "0.1 s"}}
    found = beside("inl: codes beyond", {"kind": "inl", "at_most": "1 LSB"}, **tables)
    assert found == pytest.approx(beyond, abs=1.0)


def test_dnl_by_sine_and_by_ramp() -> None:
    """A bow of 2 LSB makes codes at the ends 8/256 LSB too wide or too narrow; both ways tell."""
    adc = {**WHOLE["adc"], "nonlinearity": {"shape": "bow", "peak": "2 LSB"}}
    sine = {"kind": "sine", "amplitude": "1.4 V", "offset": "1.25 V", "frequency": "997.137 Hz"}
    for stimulus in (RAMP, sine):
        tables: dict[str, Any] = {"stimulus": stimulus, "chain": [], "adc": adc}
        (found,) = verdicts(
            {"kind": "dnl", "at_most": "0.5 LSB"}, **tables, simulation={"duration": "0.5 s"}
        )
        assert found.value == pytest.approx(8.0 / 256.0, abs=0.03)


@pytest.mark.parametrize("kind", ["inl", "dnl"])
def test_what_the_samples_leave_open_counts_against_the_check(kind: str) -> None:
    """A limit fails, cannot be told, or holds, by where it lies to the value and its interval.

    A sine whose samples are few enough for their chance to be seen: the interval of a code is
    that of Doernberg, Lee and Hodges, sqrt(z² pi 2^(bits - 1) / N) with z = 2.576 for the rarest.
    """
    sine = {"kind": "sine", "amplitude": "1.4 V", "offset": "1.25 V", "frequency": "997.137 Hz"}
    tables: dict[str, Any] = {"stimulus": sine, **WHOLE, "simulation": {"duration": "0.5 s"}}

    def answer(limit: float) -> Result:
        return verdicts({"kind": kind, "at_most": f"{limit:.9f} LSB"}, **tables)[0]

    found = answer(9.0)
    assert found.value is not None
    assert found.margin is not None
    unsure = 9.0 - found.value - found.margin
    rarest = math.sqrt(2.576**2 * math.pi * 2.0**7 / 50_000)
    assert 0.0 < unsure < 1.1 * rarest  # the phases are no less even than random ones
    holds, open_ = (answer(found.value + share * unsure) for share in (1.001, 0.5))
    assert [row.verdict for row in (holds, open_)] == ["holds", "fails"]
    assert "cannot be told" in open_.advice
    assert "take more samples" in open_.advice
    assert open_.margin == pytest.approx(-0.5 * unsure, rel=1e-6)


@pytest.mark.parametrize(("kind", "limits"), [("inl", (0.1, 0.4)), ("dnl", (0.1, 0.2))])
def test_an_ideal_converter_is_never_blamed(kind: str, limits: tuple[float, float]) -> None:
    """Limits below what chance alone shows fail, and it is said that this cannot be told.

    An ideal converter of 8 bits with noise shows some 0.3 LSB of INL and 0.2 of DNL in 30 000
    samples. One whose levels bow by 3 LSB is blamed, and one whose capacitors match to 10 % alone.
    """
    quiet = {**WHOLE["adc"], "input_noise": "3 mV"}

    def found(limit: float, nonlinearity: dict[str, str], seed: int) -> Result:
        sine = {"kind": "sine", "amplitude": "1.3 V", "offset": "1.25 V"}
        tables: dict[str, Any] = {
            "stimulus": {**sine, "frequency": f"{700 + 137.137 * seed} Hz"}, "chain": [],
            "adc": {**quiet, **({"nonlinearity": nonlinearity} if nonlinearity else {})},
            "simulation": {"duration": "0.3 s"}, "seed": seed,
        }  # fmt: skip
        return verdicts({"kind": kind, "at_most": f"{limit} LSB"}, **tables)[0]

    shown = [found(limit, {}, seed) for limit in limits for seed in (1, 2)]
    assert any(row.value > row.limit for row in shown if row.value and row.limit)
    assert {row.verdict for row in shown} == {"fails"}
    assert all("cannot be told" in row.advice for row in shown)
    bad = {"inl": {"shape": "bow", "peak": "3 LSB"}, "dnl": {"capacitor_mismatch": "10 %"}}
    assert "correct the codes by a table" in found(limits[1], bad[kind], 1).advice


def test_how_codes_are_counted_must_be_known() -> None:
    """A step says nothing; two tones do not either, until the check does."""
    with pytest.raises(ScenarioError, match="does not say how its codes are counted"):
        refuse_impossible(made({"kind": "inl", "at_most": "1 LSB"}))
    refuse_impossible(made({"kind": "inl", "at_most": "1 LSB", "by": "ramp"}))
    (few,) = verdicts({"kind": "dnl", "at_most": "1 LSB", "by": "sine"}, chain=[FILTER])
    assert few.verdict == "fails"
    assert few.value is None
