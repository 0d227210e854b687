"""Static nonlinearity: curves, tables, capacitors, and what the quantizer makes of them."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from frontend_sim.converter import Adc, OversamplingAdc
from frontend_sim.converter.bends import bend, largest_peak
from frontend_sim.converter.nonlinearity import table_deviations
from frontend_sim.converter.quantizer import Quantizer, quantize, read_back
from frontend_sim.errors import ScenarioError
from frontend_sim.measure.linearity import ramp_linearity, sine_linearity

Real = np.ndarray[tuple[int], np.dtype[np.float64]]


def adc(nonlinearity: dict[str, Any] | None, **values: Any) -> Adc:
    """Return a converter of 8 bits, -1 to 1 V, with a nonlinearity."""
    given: dict[str, Any] = {"rate": 1e3, "bits": 8, "low": -1.0, "high": 1.0, **values}
    return Adc(**given, nonlinearity=nonlinearity)


def codes(made: Adc, voltage: Any, seed: int = 0) -> Any:
    """Return the codes of some voltages."""
    return Quantizer.of(made, seed).codes(np.asarray(voltage, dtype=np.float64))[0]


def file(folder: Path, numbers: Any) -> dict[str, Any]:
    """Write a table and return the keys that name it."""
    path = folder / "table.csv"
    path.write_text("\n".join(repr(float(number)) for number in numbers))
    return {"table": str(path)}


@pytest.mark.parametrize(("shape", "sign"), [("bow", 1.0), ("s-shape", 1.0), ("s-shape", -1.0)])
def test_curves_have_their_peak_and_ends(shape: str, sign: float) -> None:
    """Zero at the first and the last change, the peak once (bow) or with both signs (s-shape)."""
    at = np.linspace(1.0, 4095.0, 400_001)
    curve = bend(shape, sign * 3.0, 12, at)
    assert abs(curve[0]) < 1e-12
    assert abs(curve[-1]) < 1e-12
    if shape == "bow":
        assert at[np.argmax(curve)] == pytest.approx(2048.0, abs=0.02)
        assert np.max(curve) == pytest.approx(3.0, abs=1e-6)
        assert np.min(curve) > -1e-9
    else:
        # The cubic has its extremes at x = ±1/sqrt 3.
        peak = at[np.argmax(sign * curve)]
        assert peak == pytest.approx(1.0 + 4094.0 * 0.5 * (1.0 + 3.0**-0.5), abs=0.02)
        assert (np.max(curve), np.min(curve)) == pytest.approx((3.0, -3.0), abs=1e-6)
    assert bend(shape, 3.0, 12, np.array([-5.0, 5000.0])) == pytest.approx([0.0, 0.0], abs=1e-12)
    slopes = np.abs(np.diff(curve) / np.diff(at))
    assert np.max(slopes) == pytest.approx(3.0 / largest_peak(shape, 12), rel=1e-3)


@pytest.mark.parametrize(
    "nonlinearity",
    [
        {"shape": "bow", "peak": "2 LSB"},
        {"shape": "s-shape", "peak": "-1.5 LSB"},
        {"capacitor_mismatch": "3 %"},
        {"shape": "bow", "peak": "-1 LSB", "capacitor_mismatch": "5 %"},
        {"table": "dnl"},
        {"table": "inl"},
    ],
    ids=lambda given: "-".join(map(str, given.values())),
)
def test_a_code_density_test_finds_what_was_put_in(
    nonlinearity: dict[str, Any], tmp_path: Path
) -> None:
    """INL and DNL of the levels come back by ramp and by sine, within the confidence that is told.

    A ramp of 1/800 LSB per step knows a level to its step, so DNL to 0.003 LSB. Of the intervals
    of a sine at random phases, 99 % by design, at least 97 % must hold the true value.
    """
    rng = np.random.default_rng(11)
    if "table" in nonlinearity:
        holds = nonlinearity["table"]
        dnl = np.clip(rng.normal(0.0, 0.4, 256), -1.0, 2.0)
        numbers = dnl if holds == "dnl" else np.append(0.0, np.cumsum(dnl[:-1]))
        nonlinearity = {**file(tmp_path, numbers), "table_holds": holds}
    made = adc(nonlinearity)
    assert made.nonlinearity is not None
    levels = made.nonlinearity.levels(8, 4)
    lsb = (levels[-1] - levels[0]) / 254.0
    true_dnl = np.diff(levels) / lsb - 1.0
    true_inl = (levels - levels[0]) / lsb - np.arange(255.0)
    ramp = np.linspace(-1.05, 1.05, int(800 * 256 * 1.05))
    found = ramp_linearity(codes(made, ramp, 4), made)
    np.testing.assert_allclose(found.dnl, true_dnl, atol=0.004)
    np.testing.assert_allclose(found.inl_end_point, true_inl, atol=0.004)
    lost = tuple(int(code) for code in np.flatnonzero(np.diff(levels) <= 0.0) + 1)
    assert set(lost) <= set(found.missing)
    phases = rng.uniform(0.0, 2.0 * np.pi, 300_000)
    by_sine = sine_linearity(codes(made, 1.03 * np.sin(phases), 4), made)
    assert np.mean(np.abs(by_sine.dnl - true_dnl) <= by_sine.dnl_confidence) >= 0.97
    assert np.mean(np.abs(by_sine.inl_end_point - true_inl) <= by_sine.inl_confidence) >= 0.97


def test_missing_codes_come_out_of_mismatch() -> None:
    """With 10 % of mismatch at 8 bits some part loses codes; no voltage then gives them."""
    made = adc({"capacitor_mismatch": "10 %"})
    ramp = np.linspace(-1.0, 1.0, 400_000)
    lost = {seed: 256 - len(np.unique(codes(made, ramp, seed))) for seed in range(6)}
    assert any(lost.values())
    for seed, count in lost.items():
        assert made.nonlinearity is not None
        assert np.count_nonzero(np.diff(made.nonlinearity.levels(8, seed)) <= 5e-3) >= count


@given(
    bits=st.integers(4, 14),
    low=st.floats(-5.0, 0.0).map(lambda value: round(value, 6)),
    rounding=st.sampled_from(["nearest", "down"]),
    code=st.sampled_from(["straight-binary", "twos-complement"]),
    mismatch=st.floats(1e-6, 0.1),
    seed=st.integers(0, 2**63 - 1),
    data=st.lists(st.floats(-7.0, 7.0), min_size=2, max_size=30),
)
@settings(max_examples=100, deadline=None)
def test_a_bent_quantizer_is_monotonic_and_counts_levels(
    bits: int,
    low: float,
    rounding: Any,
    code: Any,
    mismatch: float,
    seed: int,
    data: list[float],
) -> None:
    """Codes never fall, lie in the format's range, clip at its ends with the flag."""
    made = adc(
        {"capacitor_mismatch": mismatch}, bits=bits, low=low, high=low + 4.0, code=code,
        rounding=rounding,
    )  # fmt: skip
    found, overrange = Quantizer.of(made, seed).codes(np.sort(np.array([*data, -20.0, 20.0])))
    assert np.all(np.diff(found) >= 0)
    assert (found[0], found[-1]) == (made.lowest_code, made.highest_code)
    assert overrange[0]
    assert overrange[-1]
    inside = ~overrange
    assert made.nonlinearity is not None
    worst = np.max(np.abs(made.nonlinearity.levels(bits, seed) - np.arange(1.0, 2.0**bits)))
    error = read_back(made, found) - np.sort(np.array([*data, -20.0, 20.0]))
    assert np.all(np.abs(error[inside]) <= (1.0 + worst) * made.lsb * (1.0 + 1e-9))


@given(
    bits=st.integers(4, 20),
    rounding=st.sampled_from(["nearest", "down"]),
    data=st.lists(st.floats(-1.3, 1.3), max_size=50),
)
@settings(max_examples=60, deadline=None)
def test_no_deviation_is_the_ideal_quantizer(bits: int, rounding: Any, data: list[float]) -> None:
    """Levels on the straight line give the ideal codes and flags, edges included.

    The table of zeros goes the way of the levels; edges are floats, the range is a power of two.
    """
    made = adc(None, bits=bits, rounding=rounding)
    half = 0.5 if rounding == "nearest" else 0.0
    straight = Quantizer(adc({"shape": "bow", "peak": 1e-9}, bits=bits, rounding=rounding),
                         np.arange(1.0, 2.0**bits) - half)  # fmt: skip
    edges = -1.0 + (np.array([0, 1, 2, 2**bits - 1, 2**bits]) - half) * made.lsb
    voltage = np.array([*data, *edges, *np.nextafter(edges, -9.0)])
    for one, other in zip(straight.codes(voltage), quantize(made, voltage), strict=True):
        np.testing.assert_array_equal(one, other)


@pytest.mark.parametrize("shape", ["bow", "s-shape"])
@pytest.mark.parametrize("bits", [21, 24, 32])
def test_many_bits_have_smooth_curves(shape: str, bits: int) -> None:
    """Without a table of levels: the voltage of each edge, worked out forwards, meets its code.

    A thousandth of an LSB to either side of 2000 edges; at 32 bits a position has 21 bits left for
    a part of an LSB.
    """
    peak = 40.0
    made = adc({"shape": shape, "peak": peak}, bits=bits)
    rng = np.random.default_rng(bits)
    edge = np.floor(rng.uniform(1.0, 2.0**bits - 1.0, 2000))
    position = edge + bend(shape, peak, bits, edge) - 0.5
    for side, expected in ((1e-3, edge), (-1e-3, edge - 1.0)):
        found = codes(made, -1.0 + (position + side) * made.lsb)
        np.testing.assert_array_equal(found, expected)
    assert codes(made, [-2.0, 2.0]).tolist() == [0, 2**bits - 1]


def test_tables_of_both_lengths(tmp_path: Path) -> None:
    """4 bits: INL of 16 or 15 numbers, DNL of 16 or 14; the ends that mean nothing are ignored."""
    inl = np.linspace(-0.5, 0.7, 15)
    for numbers in ([99.0, *inl], inl):
        path = Path(file(tmp_path, numbers)["table"])
        np.testing.assert_allclose(table_deviations(path, "inl", 4), inl, rtol=0, atol=1e-15)
    dnl = np.linspace(-1.0, 0.5, 14)
    for numbers in ([99.0, *dnl, -99.0], dnl):
        path = Path(file(tmp_path, numbers)["table"])
        found = table_deviations(path, "dnl", 4)
        np.testing.assert_allclose(np.diff(found), dnl, rtol=0, atol=1e-15)
        assert found[0] == 0.0


def test_all_contributions_add_up(tmp_path: Path) -> None:
    """Shape, table and capacitors together deviate by the sum of what each does by itself."""
    keys: list[dict[str, Any]] = [
        {"shape": "bow", "peak": 1.0},
        file(tmp_path, 0.1 * np.sin(np.arange(256.0))),
        {"capacitor_mismatch": 0.001},
    ]
    straight = np.arange(1.0, 256.0)
    single = []
    for given_keys in keys:
        nonlinearity = adc(given_keys).nonlinearity
        assert nonlinearity is not None
        single.append(nonlinearity.levels(8, 3) - straight)
    whole = adc({key: value for given_keys in keys for key, value in given_keys.items()})
    assert whole.nonlinearity is not None
    np.testing.assert_allclose(whole.nonlinearity.levels(8, 3) - straight, sum(single), atol=1e-9)


@pytest.mark.parametrize(
    ("nonlinearity", "values", "message"),
    [
        ({}, {}, "nothing is given; give shape and peak, table, or capacitor_mismatch"),
        ({"peak": 1.0}, {}, "peak needs a shape"),
        ({"shape": "bow"}, {}, "shape needs a peak"),
        ({"shape": "banana", "peak": 1.0}, {}, "'bow' or 's-shape'"),
        ({"shape": "bow", "peak": "2 mV"}, {}, "not LSB"),
        ({"shape": "bow", "peak": 70.0}, {}, "folds the bow .* 8 bits it must be below 63.5 LSB"),
        ({"shape": "s-shape", "peak": -25.0}, {}, "must be below 24.44 LSB"),
        ({"table_holds": "dnl", "capacitor_mismatch": 0.01}, {}, "table_holds says what a table"),
        ({"capacitor_mismatch": "11 %"}, {}, "at most 0.1"),
        ({"capacitor_mismatch": -0.1}, {}, "at least 0"),
        ({"capacitor_mismatch": 0.01}, {"bits": 21}, "up to 20 bits, not for 21"),
        ({"table": "a.csv"}, {"bits": 24}, "nonlinearity.table gives every code a level"),
    ],
)
def test_impossible_nonlinearity_is_refused(
    nonlinearity: dict[str, Any], values: dict[str, Any], message: str
) -> None:
    """Each with a message of its own, the number and the limit in it."""
    with pytest.raises(ScenarioError, match=message):
        adc(nonlinearity, **values)


def test_an_oversampling_converter_has_no_array() -> None:
    """Capacitor mismatch is about successive approximation; a bow is welcome."""
    keys: dict[str, Any] = {"modulator_rate": 1e5, "decimation": 8, "order": 2, "high": 1.0}
    with pytest.raises(ScenarioError, match="successive-approximation array"):
        OversamplingAdc(**keys, bits=16, nonlinearity={"capacitor_mismatch": 0.01})
    OversamplingAdc(**keys, bits=24, nonlinearity={"shape": "bow", "peak": 10.0})


@pytest.mark.parametrize(
    ("numbers", "holds", "message"),
    [
        (np.zeros(14), "inl", r"has 14 numbers; a table of INL for 4 bits has 16, .* or 15, one"),
        (np.zeros(15), "dnl", r"has 15 numbers; a table of DNL for 4 bits has 16, .* or 14"),
        (np.zeros(17), "inl", "has 17 numbers"),
        ([0.0] * 5 + [3.0, 1.5] + [0.0] * 8, "inl", r"not monotonic: code 6, .* width of -0.5 LSB"),
        ([0.0] * 3 + [-1.2] + [0.0] * 10, "dnl", r"not monotonic: code 4, .* width of -0.2 LSB"),
    ],
)
def test_tables_that_do_not_fit_are_refused(
    tmp_path: Path, numbers: Any, holds: str, message: str
) -> None:
    """The converter is refused before it runs; the message names file, count and code."""
    made = adc({**file(tmp_path, numbers), "table_holds": holds}, bits=4)
    with pytest.raises(ScenarioError, match=rf"table.csv: .*{message}"):
        made.digitizer(0)


def test_the_table_is_a_file_of_the_converter(tmp_path: Path) -> None:
    """Its path is relative to the scenario, and told to those who keep record of files."""
    context = {"directory": tmp_path}
    keys = {"rate": 1, "bits": 8, "high": 1, "nonlinearity": {"table": "a/b.csv"}}
    made = Adc.model_validate(keys, context=context)
    assert made.files() == (tmp_path / "a" / "b.csv",)
    assert adc(None).files() == ()
