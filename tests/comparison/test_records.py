"""Two records: what differs, what is noise, and what did it."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from compared import LSB, TABLES, compared, made, varied

from frontend_sim.archive import open_record, record_run
from frontend_sim.comparison import (
    RecordComparison,
    SeriesDifference,
    attribute,
    changes,
    compare_records,
    over_seeds,
    parse_tolerances,
)
from frontend_sim.comparison.again import CODES, PIN
from frontend_sim.comparison.randomness import slow_noise
from frontend_sim.errors import InputError
from frontend_sim.scenario import Scenario
from frontend_sim.scenario.vary import with_values
from frontend_sim.simulation import Simulation


def series(comparison: RecordComparison, name: str) -> SeriesDifference:
    """Return the row of one signal."""
    return next(row for row in comparison.series if row.name == name)


def test_the_same_run_twice_is_the_same(tmp_path: Path) -> None:
    """Nothing differs, bit by bit, and the notes say that the scenarios are equal."""
    found = compared(tmp_path, made(), made(title="Another title"))
    assert not found.differs
    assert {row.finding for row in (*found.series, *found.results)} == {"same"}
    assert "the scenarios are the same, bit by bit" in found.notes


def _false_alarms(directory: Path, scenario: Scenario, pairs: int) -> list[tuple[str, ...]]:
    """Compare runs in which the seed alone differs; return what was found, wrongly."""
    alarms = []
    for seed in range(pairs + 1):
        path = directory / f"{seed}.h5"
        record_run(Simulation(scenario.model_copy(update={"seed": seed})), path)
    for seed in range(pairs):
        with (
            open_record(directory / f"{seed}.h5") as one,
            open_record(directory / f"{seed + 1}.h5") as other,
        ):
            found = compare_records(one, other)
        if found.differs:
            alarms.append(found.alarms)
    return alarms


@pytest.mark.slow
def test_seeds_alone_give_no_alarm_in_200_comparisons(tmp_path: Path) -> None:
    """Of 200 comparisons in which nothing but the seed changed at most two find something."""
    short = made(simulation={"duration": "50 ms"})
    assert len(_false_alarms(tmp_path, short, 200)) <= 2


@pytest.mark.parametrize(
    "changes",
    [
        {  # 1/f noise: nearly all of it is slower than the run
            "chain[buffer].voltage_noise": "3 uV/sqrt(Hz)",
            "chain[buffer].voltage_noise_corner": "2 kHz",
        },
        {  # the noise of a filter ten times slower than the run
            "chain[input filter].resistance": "10 Mohm",
            "chain[input filter].capacitance": "100 nF",
            "chain[buffer].current_noise": "20 fA/sqrt(Hz)",
            "adc.bits": 20,
        },
        {"adc.aperture_jitter": "1 us"},
        {"adc.input_noise": "0.05 mV", "stimulus.amplitude": "1 nV"},  # codes hardly move
    ],
)
def test_slow_noise_and_jitter_are_no_change(tmp_path: Path, changes: dict[str, object]) -> None:
    """Noise that one run cannot average, and a pin that moves with the seed, give no alarm."""
    scenario = with_values(made(simulation={"duration": "50 ms"}, check=[]), changes)
    assert _false_alarms(tmp_path, scenario, 8) == []


def test_the_error_of_slow_noise_is_what_runs_show() -> None:
    """Means of 60 runs with 1/f noise spread as the error says, within the spread of 60 runs."""
    scenario = with_values(
        made(simulation={"duration": "20 ms"}),
        {
            "chain[buffer].voltage_noise": "3 uV/sqrt(Hz)",
            "chain[buffer].voltage_noise_corner": "2 kHz",
        },
    )
    means, seen = [], []
    for seed in range(60):
        block = list(Simulation(scenario.model_copy(update={"seed": seed})).blocks())
        noise = np.concatenate([each.voltage - each.pin for each in block]) / LSB
        means.append(float(np.mean(noise)))
        seen.append(float(np.std(noise)) / np.sqrt(len(noise)))
    slow, quick = slow_noise(scenario, 0.02), float(np.mean(seen))
    assert slow > 0.5 * quick  # neither part alone would do
    # Chi-square of 59 degrees of freedom: 99.9 % within 30 % of the deviation.
    assert float(np.std(means)) == pytest.approx(np.hypot(slow, quick), rel=0.3)


def test_a_shift_of_a_tenth_of_an_lsb_is_found_and_named(tmp_path: Path) -> None:
    """One offset differs by 0.1 LSB, and so does the seed: the shift and the key are told."""
    moved = varied(offset=0.1e-3 + 0.1 * LSB, seed=2)
    found = compared(tmp_path, made(), moved)
    assert [change.key for change in found.changed] == ["chain[buffer].offset_voltage"]
    assert found.seeds == (1, 2)
    pin = series(found, "pin")
    assert pin.finding == "differs"
    assert pin.mean == pytest.approx(0.1, abs=1e-9)
    assert pin.peak == pytest.approx(0.1, abs=1e-9)
    codes = series(found, "codes")
    assert codes.shift is not None
    assert abs(codes.mean - 0.1) < 4.0 * codes.shift.error
    assert series(found, "noise").finding == "within noise"
    assert found.differs


def test_a_shift_behind_the_pin_is_found_in_the_codes(tmp_path: Path) -> None:
    """The converter's own offset moves no pin; 10 000 codes in noise of 0.5 LSB show 0.1 LSB."""
    longer = made(simulation={"duration": "1 s"})
    moved = with_values(longer, {"adc.offset": 0.1 * LSB, "seed": 2})
    found = compared(tmp_path, longer, moved)
    assert series(found, "pin").finding == "same"
    assert series(found, "codes").finding == "differs"
    assert abs(series(found, "codes").mean) == pytest.approx(0.1, abs=0.03)


def test_more_noise_is_found(tmp_path: Path) -> None:
    """Half as much noise again is told, with the rms of both; the mean stays."""
    found = compared(tmp_path, made(), varied(**{"adc.input_noise": "0.6 mV", "seed": 2}))
    noise = series(found, "noise")
    assert noise.finding == "differs"
    assert noise.mean == pytest.approx((0.4e-3**2 / LSB**2 + 1.0 / 12.0) ** 0.5, rel=0.05)
    assert noise.rms == pytest.approx((0.6e-3**2 / LSB**2 + 1.0 / 12.0) ** 0.5, rel=0.05)
    assert series(found, "codes").finding == "within noise"


def test_a_tolerance_lets_small_differences_pass(tmp_path: Path) -> None:
    """0.1 LSB more on the pin is within 0.2 LSB and beyond 0.05 LSB."""
    moved = varied(offset=0.1e-3 + 0.1 * LSB)
    wide = parse_tolerances(["0.2 LSB", "headroom=1 mV", "noise=10 %"])
    found = compared(tmp_path, made(), moved, wide)
    assert not found.differs
    assert series(found, "pin").finding == "within tolerance"
    tight = parse_tolerances(["0.05 LSB", "headroom=1 mV", "noise=10 %"])
    assert compared(tmp_path, made(), moved, tight).alarms[0] == "pin: differs"


def test_verdicts_that_flip_are_told(tmp_path: Path) -> None:
    """A limit that was raised makes a check fail, without a change of any signal."""
    found = compared(tmp_path, made(), varied(**{"check[1].at_least": "1.3 V"}))
    assert found.alarms == ("headroom: now fails",)
    row = found.results[0]
    assert (row.flip, row.change) == ("now fails", 0.0)
    assert row.margin_change == pytest.approx(-1.2, abs=1e-9)


def test_checks_that_come_and_go(tmp_path: Path) -> None:
    """A check that is gone counts as a difference, one that is new if it fails."""
    fewer = made(check=TABLES["check"][:1])
    assert compared(tmp_path, made(), fewer).alarms == ("noise: removed",)
    assert compared(tmp_path, fewer, made()).alarms == ()
    failing = varied(**{"check[1].at_least": "1.3 V"})
    assert compared(tmp_path, made(check=TABLES["check"][1:]), failing).alarms == (
        "headroom: added, fails",
    )


def test_other_rates_are_compared_at_common_instants(tmp_path: Path) -> None:
    """At twice the rate every second conversion has a partner, and the pins agree there."""
    found = compared(tmp_path, made(), varied(rate="20 kHz"))
    pin = series(found, "pin")
    assert pin.told == "at 1000 common instants of 1000 and 2000"
    assert (pin.finding, pin.count) == ("same", 1000)


def test_no_common_instants_are_not_comparable(tmp_path: Path) -> None:
    """Half an interval later no conversion has a partner: that is said, and counts."""
    found = compared(tmp_path, made(), varied(**{"adc.first": "50 us"}))
    assert series(found, "pin").finding == "not comparable"
    assert found.differs


def test_waveforms_are_compared_in_lsb(tmp_path: Path) -> None:
    """A filter with 2 % more capacitance differs most on its own output."""
    kept = {"simulation.waveform_rate": "20 kHz"}
    first = varied(**kept)
    found = compared(tmp_path, first, with_values(first, {"chain[1].capacitance": "4.8 nF"}))
    names = [row.name for row in found.series if row.name.startswith("waveform")]
    assert names == ["waveform: stimulus", "waveform: input filter", "waveform: buffer"]
    assert series(found, "waveform: stimulus").finding == "same"
    filtered = series(found, "waveform: input filter")
    # d|difference| = amplitude w R dC: 0.5 V 2 pi 37 Hz 10 kohm 0.1 nF, after the start.
    assert filtered.unit == "LSB"
    assert filtered.peak == pytest.approx(0.5 * 232.478 * 1e4 * 1e-10 / LSB, rel=0.2)


def test_other_bits_are_counted_in_codes_of_the_first(tmp_path: Path) -> None:
    """With two bits more the pins agree, the codes differ, and a note says whose LSB."""
    found = compared(tmp_path, made(), varied(bits=14))
    assert series(found, "pin").finding == "same"
    assert any("LSB here are those of the first" in note for note in found.notes)


def test_attribution_splits_a_change(tmp_path: Path) -> None:
    """Offset and filter each do their share of the pin's mean; the rest is told."""
    moved = varied(offset=0.1e-3 + 0.1 * LSB, capacitance="5.6 nF", seed=9)
    found = compared(tmp_path, made(), moved)
    split = attribute(made(), moved, found.changed)
    by_key = {row.key: row.moved for row in split.shares}
    assert by_key["chain[buffer].offset_voltage"][PIN] == pytest.approx(0.1, abs=1e-9)
    alone = [row.moved[PIN] for row in split.shares]
    assert split.remainder(PIN) == pytest.approx(split.total[PIN] - sum(alone), abs=1e-12)
    assert abs(split.remainder(PIN)) < 1e-9  # a linear chain: offset and filter do not interact
    assert split.units[CODES] == "LSB"
    assert by_key["chain[buffer].offset_voltage"]["headroom"] == pytest.approx(0.1 * LSB, abs=1e-9)


def test_attribution_tells_the_interaction() -> None:
    """Two gains that double each give four times: the sum of both alone is short by one."""
    chain = [{"kind": "gain", "gain": 1.0}, {"kind": "gain", "gain": 1.0}]
    dc = {"kind": "step", "before": 0.4, "after": 0.4}
    first = made(chain=chain, stimulus=dc, check=[])
    second = with_values(first, {"chain[1].gain": 2.0, "chain[2].gain": 2.0})
    split = attribute(first, second, changes(first.resolved(), second.resolved()))
    unit = 0.4 / LSB
    assert [row.moved[PIN] for row in split.shares] == pytest.approx([unit, unit], rel=1e-9)
    assert split.total[PIN] == pytest.approx(3.0 * unit, rel=1e-9)
    assert split.remainder(PIN) == pytest.approx(unit, rel=1e-9)


@pytest.mark.parametrize("level", [0.4, 1.234, 0.0])
def test_rounding_is_no_change(level: float) -> None:
    """Another corner moves no level at rest, though its states round by 1e-13 LSB otherwise.

    A gain beside it moves what it moves, and nothing is beyond the sum of both.
    """
    chain = [{"kind": "butterworth", "order": 4, "corner": "1 kHz"}, {"kind": "gain", "gain": 1.0}]
    dc = {"kind": "step", "before": level, "after": level}
    first = made(chain=chain, stimulus=dc, check=[{"kind": "headroom", "at_least": "10 mV"}])
    second = with_values(first, {"chain[1].corner": 1300.0, "chain[2].gain": 1.1})
    split = attribute(first, second, changes(first.resolved(), second.resolved()))
    corner, gain = (row.moved for row in split.shares)
    assert set(corner) == {PIN, CODES, "headroom"}
    assert set(corner.values()) == {0.0}
    for moved in (gain[PIN], split.total[PIN]):
        assert moved == pytest.approx(0.1 * level / LSB, rel=1e-9)
    assert [split.remainder(name) for name in (PIN, "headroom")] == [0.0, 0.0]


def test_noisy_measures_are_judged_over_seeds(tmp_path: Path) -> None:
    """One run each cannot tell whether noise changed; eight seeds can, and find no change else."""
    louder = varied(**{"adc.input_noise": "0.45 mV", "seed": 2})
    found = compared(tmp_path, made(), louder)
    assert [row.finding for row in found.results] == ["same", "not judged"]
    judged = over_seeds(made(), louder, found.results, 8, 1e-3)
    assert judged[1].finding == "differs"
    assert judged[1].shift is not None
    assert judged[1].shift.mean == pytest.approx(0.05, abs=0.02)
    again = compared(tmp_path, made(), varied(seed=2))
    assert over_seeds(made(), varied(seed=2), again.results, 8, 1e-3)[1].finding == "within noise"
    with pytest.raises(InputError, match="7 seeds are too few"):
        over_seeds(made(), louder, found.results, 7, 1e-3)
