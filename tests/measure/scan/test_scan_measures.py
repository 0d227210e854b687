"""Skew, crosstalk and order of a scan, against closed forms and all orders tried."""

from __future__ import annotations

from itertools import permutations

import numpy as np
import pytest
from scanned import SHARED, level, sampled, scan_of, sine

from frontend_sim.measure.scan import best_order, crosstalk, inspect_scan, scan_report, skews
from frontend_sim.measure.scan.order import MOST_EXHAUSTIVE
from frontend_sim.scenario import ScanScenario, parse_scenario

FULL = 2.0**16
"""Full scale of the scans of ``scanned`` [LSB]."""


def test_skew_in_time_and_degrees() -> None:
    """A slot of 50 us at 50 Hz is 0.9 degrees; a rate error shortens it."""
    scan = scan_of([sine(50), sine(50), level(0)], adc="rate_error = 0.01")
    first, second, third = skews(scan)
    assert (first.time, first.degrees) == (0.0, 0.0)
    assert second.time == pytest.approx(50e-6 / 1.01)
    assert second.degrees == pytest.approx(0.9 / 1.01)
    assert third.degrees is None
    given = scan_of([sine(50), level(0)], scan="skew_frequency = 1e3")
    assert skews(given)[1].degrees == pytest.approx(18.0)


def test_samples_taken_at_once_have_no_skew() -> None:
    """With sample-and-holds all channels are taken at the same instant."""
    scan = scan_of([sine(50), sine(50)], scan='sampling = "simultaneous"')
    assert [skew.time for skew in skews(scan)] == [0.0, 0.0]


def test_one_pole_behind_the_multiplexer() -> None:
    """What stays of the channel d visits before is (1 - q) q^d / (1 - q^N), q = exp(-T / tau).

    The pole's step response from visit to visit is a first-order recursion, y <- q y + (1 - q) u,
    and the scan repeats after N visits.
    """
    count = 4
    scan = scan_of([level(0)] * count, scan=SHARED.replace("1e-8", "3e-8"))
    q = np.exp(-50e-6 / 30e-6)
    found = crosstalk(scan)
    assert found.ways == ("shared stages",)
    for victim in range(count):
        for distance in range(1, count):
            expected = (1 - q) * q**distance / (1 - q**count)
            aggressor = (victim - distance) % count
            share = found.matrix[victim, aggressor] / FULL
            assert share == pytest.approx(expected, rel=1e-12)


def test_throwing_conversions_away_lets_it_settle() -> None:
    """After three conversions of a visit the error is q³ of the difference, not q."""
    one = crosstalk(scan_of([level(0)] * 2, scan="dwell = 3\n" + SHARED))
    last = crosstalk(scan_of([level(0)] * 2, scan="dwell = 3\ndiscard = 2\n" + SHARED))
    q = np.exp(-50e-6 / 10e-6)
    assert one.matrix[0, 1] / FULL == pytest.approx(q / (1 + q**3), rel=1e-9)
    assert last.matrix[0, 1] / FULL == pytest.approx(q**3 / (1 + q**3), rel=1e-9)


def test_the_unit_is_a_full_scale_at_the_pin() -> None:
    """A gain of the shared stage changes nothing: the difference is told where codes are."""
    plain = '[[scan.chain]]\nkind = "noninverting-amplifier"\ngain = 1\ngain_bandwidth = 30e3'
    double = '[[scan.chain]]\nkind = "noninverting-amplifier"\ngain = 2\ngain_bandwidth = 60e3'
    first = crosstalk(scan_of([level(0)] * 2, scan=plain))
    second = crosstalk(scan_of([level(0)] * 2, scan=double))
    np.testing.assert_allclose(first.matrix, second.matrix, rtol=1e-9)


def test_charge_memory_is_crosstalk() -> None:
    """Check value: 0.0103991 of the difference to what the other channel is held at."""
    found = crosstalk(scan_of([level(0)] * 2, rate=2e3, adc=sampled(1e6, 1e-8, 1.0, 1e-11, 1e-9)))
    assert found.ways == ("sampling capacitor",)
    share = found.matrix[0, 1] / FULL
    # With both at their fixed point: x = m (1 - x), hence m = x / (1 - x).
    assert share / (1 - share) == pytest.approx(0.0103991, abs=1e-6)


def test_the_best_order_is_the_best_of_all() -> None:
    """Five levels behind one pole: the answer is no worse than any order solved for by itself."""
    levels = [0.0, 3.0, 0.2, -2.0, 2.8]
    scan = scan_of([level(volts) for volts in levels], scan=SHARED.replace("1e-8", "3e-8"))
    apart = np.abs(np.subtract.outer(levels, levels)) / 8.0
    found = best_order(scan, apart)
    assert found is not None
    assert found.exhaustive

    def error(order: list[int]) -> float:
        matrix = np.abs(crosstalk(scan, order).matrix)
        return float(np.max(np.sum(matrix * apart, axis=1)))

    every = [error([0, *rest]) for rest in permutations(range(1, 5))]
    assert found.error == pytest.approx(min(every), rel=1e-9)
    assert found.before == pytest.approx(error([0, 1, 2, 3, 4]), rel=1e-12)
    assert found.error < 0.8 * found.before
    report = scan_report(scan)  # finds the levels itself
    assert report.best is not None
    assert report.best.order == found.order


def test_many_channels_are_searched() -> None:
    """Beyond eight channels neighbours are exchanged, and the result is said to be a search's."""
    levels = np.random.default_rng(3).uniform(-3, 3, MOST_EXHAUSTIVE + 2)
    scan = scan_of([level(float(volts)) for volts in levels], scan=SHARED.replace("1e-8", "3e-8"))
    found = best_order(scan, np.abs(np.subtract.outer(levels, levels)) / 8.0)
    assert found is not None
    assert not found.exhaustive
    assert sorted(found.order) == sorted(scan.names)
    # Levels in a ring, up and down again: neighbours then are never far.
    ring = np.argsort(levels)
    ring = np.concatenate([ring[::2], ring[1::2][::-1]])
    matrix = np.abs(crosstalk(scan, ring.tolist()).matrix)
    apart = np.abs(np.subtract.outer(levels, levels)) / 8.0
    assert found.error <= np.max(np.sum(matrix * apart, axis=1)) * (1 + 1e-9)


def test_without_a_way_there_is_no_crosstalk() -> None:
    """Nothing shared, nothing to choose."""
    report = scan_report(scan_of([level(0), level(1), level(2)]))
    assert report.crosstalk.ways == ()
    assert not np.any(report.crosstalk.matrix)
    assert report.best is None


def test_inspection_has_every_channel() -> None:
    """Timing of the scan, and each channel's own response with the shared stages in it."""
    inspection = inspect_scan(scan_of([level(0), level(1)], scan=SHARED))
    told = inspection.as_dict()
    assert list(told["channels"]) == ["c0", "c1"]
    assert told["scan"]["period"] == pytest.approx(100e-6)
    assert len(inspection.channels["c0"].poles) == 1


def test_the_best_order_of_unlike_sources_is_solved_for() -> None:
    """Charge memory: what is left depends on the sources between; still no order is better."""
    levels = [0.2, 3.0, 1.9, 0.9]
    sources = [(1e4, 2e-11), (2e6, 1e-10), (3e5, 6e-12), (5e4, 2e-9)]
    text = "".join(
        f'[[channel]]\nname = "c{i}"\n[channel.stimulus]\n{level(volts)}\n'
        f'[[channel.chain]]\nkind = "rc-lowpass"\nresistance = {r}\ncapacitance = {c}\n'
        for i, (volts, (r, c)) in enumerate(zip(levels, sources, strict=True))
    )
    text += "[simulation]\nduration = 5e-3\n[adc]\nrate = 100e3\nbits = 16\nhigh = 4.0\n"
    text += "[adc.input]\nacquisition_time = 2e-6\nsampling_capacitance = 15e-12\n"
    scan = parse_scenario(text + "switch_resistance = 100\n")
    assert isinstance(scan, ScanScenario)
    apart = np.abs(np.subtract.outer(levels, levels)) / 4.0
    found = best_order(scan, apart)
    assert found is not None
    every = [
        float(np.max(np.sum(np.abs(crosstalk(scan, [0, *rest]).matrix) * apart, axis=1)))
        for rest in permutations(range(1, 4))
    ]
    assert found.error <= min(every) * 1.01
    assert max(every) > 1.5 * min(every)
