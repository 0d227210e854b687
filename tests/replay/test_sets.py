"""Sets: which runs they have, what these are called, and which sets are refused."""

from __future__ import annotations

import math
from pathlib import Path

import pytest
from nights import BASE, base, made_set

from frontend_sim.errors import InputError, ScenarioError
from frontend_sim.quantities import Part
from frontend_sim.replay import PlannedRun, read_set


def runs(directory: Path, text: str) -> list[PlannedRun]:
    """Return the runs of a set file."""
    return list(read_set(made_set(directory, text)).runs())


def test_a_full_grid_has_every_combination_under_a_readable_name(tmp_path: Path) -> None:
    """Two keys of two values each make four runs, the last key the fastest."""
    found = runs(
        tmp_path,
        '[[vary]]\nkey = "chain[1].resistance"\nvalues = ["10 kohm", "12k"]\n'
        '[[vary]]\nkey = "environment.temperature"\nvalues = ["25 degC", "85 degC"]\n',
    )
    assert [run.name for run in found] == [
        "resistance=10kohm,temperature=25degC",
        "resistance=10kohm,temperature=85degC",
        "resistance=12kohm,temperature=25degC",
        "resistance=12kohm,temperature=85degC",
    ]
    assert dict(found[3].values) == {
        "chain[1].resistance": 12e3,
        "environment.temperature": 358.15,
    }


def test_paired_keys_change_together(tmp_path: Path) -> None:
    """Keys with the same word in ``together`` are no grid."""
    found = runs(
        tmp_path,
        '[[vary]]\nkey = "adc.bits"\nvalues = [10, 12]\ntogether = "part"\n'
        '[[vary]]\nkey = "adc.rate"\nvalues = ["20 kHz", "10 kHz"]\ntogether = "part"\n',
    )
    assert [run.name for run in found] == ["bits=10,rate=20kHz", "bits=12,rate=10kHz"]


def test_a_word_may_stand_among_values(tmp_path: Path) -> None:
    """A key that takes a quantity or a word is varied over both."""
    found = runs(tmp_path, '[[vary]]\nkey = "simulation.grid_rate"\nvalues = ["auto", "1 MHz"]\n')
    assert [run.name for run in found] == ["grid_rate=auto", "grid_rate=1MHz"]
    assert [run.values["simulation.grid_rate"] for run in found] == ["auto", 1e6]


@pytest.mark.parametrize(
    ("spacing", "expected"),
    [("linear", [1e3, 2e3, 3e3]), ("logarithmic", [1e3, math.sqrt(3.0) * 1e3, 3e3])],
)
def test_ranges_have_both_ends(tmp_path: Path, spacing: str, expected: list[float]) -> None:
    """Points of a range lie at equal steps, or at equal factors."""
    found = runs(
        tmp_path,
        '[[vary]]\nkey = "chain[input filter].resistance"\nfrom = "1 kohm"\nto = "3 kohm"\n'
        f'points = 3\nspacing = "{spacing}"\n',
    )
    values = [run.values["chain[input filter].resistance"] for run in found]
    assert values == pytest.approx(expected, rel=1e-12)


def test_corners_are_the_ends_of_all_tolerances_and_of_temperature(tmp_path: Path) -> None:
    """Two parts and a temperature make eight corners, and the nominal circuit comes first."""
    found = runs(tmp_path, '[corners]\ntemperature = ["-40 degC", "85 degC"]\n')
    assert [run.name for run in found][:3] == ["corner nominal", "corner 0-0-0", "corner 0-0-1"]
    assert len(found) == 9
    last = found[-1].values
    assert last["chain[input filter].resistance"] == Part(10_100.0, 0.01, 1e-4)
    assert float(last["chain[input filter].capacitance"]) == pytest.approx(4.935e-9, rel=1e-12)
    assert last["environment.temperature"] == pytest.approx(358.15)


def test_corners_stand_around_the_value_that_the_grid_has(tmp_path: Path) -> None:
    """A part that is varied and has a tolerance has its corners around each value."""
    found = runs(
        tmp_path,
        '[[vary]]\nkey = "chain[input filter].resistance"\nvalues = [20000]\n'
        '[corners]\nparts = ["chain[1].resistance"]\n',
    )
    assert [run.name for run in found][1:] == [
        "resistance=20kohm,corner 0",
        "resistance=20kohm,corner 1",
    ]
    values = [float(run.values["chain[input filter].resistance"]) for run in found]
    assert values == pytest.approx([20e3, 19.8e3, 20.2e3])


@pytest.mark.parametrize("distribution", ["uniform", "normal"])
def test_draws_stay_within_the_tolerance_and_have_their_distribution(
    tmp_path: Path, distribution: str
) -> None:
    """Mean and standard deviation of 2000 draws agree with theory within four standard errors."""
    found = runs(tmp_path, f'[draws]\ncount = 2000\ndistribution = "{distribution}"\n')
    key = "chain[input filter].resistance"
    shares = [(float(run.values[key]) / 10e3 - 1.0) / 0.01 for run in found]
    assert max(map(abs, shares)) <= 1.0 + 1e-12
    mean = sum(shares) / len(shares)
    deviation = math.sqrt(sum((share - mean) ** 2 for share in shares) / len(shares))
    # Uniform over -1 to 1: 1/sqrt(3). Normal of 1/3, cut at three of its deviations: variance
    # (1 - 2 · 3 phi(3) / (2 Phi(3) - 1)) / 9, with phi(3) = 0.0044318, 2 Phi(3) - 1 = 0.9973002.
    truncated = math.sqrt((1.0 - 6.0 * 0.0044318 / 0.9973002) / 9.0)
    expected = {"uniform": 1.0 / math.sqrt(3.0), "normal": truncated}[distribution]
    assert mean == pytest.approx(0.0, abs=4.0 * expected / math.sqrt(2000))
    assert deviation == pytest.approx(expected, rel=4.0 / math.sqrt(2.0 * 2000))


def test_a_draw_does_not_depend_on_how_many_there_are(tmp_path: Path) -> None:
    """The third of three draws is the third of thirty; names and seeds are the same as well."""
    few, many = (runs(tmp_path, f"seed = 5\n[draws]\ncount = {count}\n") for count in (3, 30))
    assert [(run.name, run.seed, run.recipe) for run in few] == [
        (run.name, run.seed, run.recipe) for run in many[:3]
    ]
    assert few[2].values == many[2].values


def test_parts_of_a_group_move_together(tmp_path: Path) -> None:
    """Each part of a group takes the same share of its own tolerance; others do not."""
    rule = '[[draws.part]]\nkey = "chain[1].{}"\ngroup = "lot"\n'
    text = "[draws]\ncount = 50\n" + rule.format("resistance") + rule.format("capacitance")
    keys = ("chain[input filter].resistance", "chain[input filter].capacitance")

    def shares(run: PlannedRun) -> list[float]:
        nominal = zip(keys, (10e3, 4.7e-9), (0.01, 0.05), strict=True)
        return [(float(run.values[key]) / value - 1.0) / share for key, value, share in nominal]

    for first, second in map(shares, runs(tmp_path, text)):
        assert first == pytest.approx(second, abs=1e-9)
    apart = [shares(run) for run in runs(tmp_path, "[draws]\ncount = 50\n")]
    assert any(abs(first - second) > 0.1 for first, second in apart)


def test_measured_values_are_drawn_from_their_table(tmp_path: Path) -> None:
    """Parts with measured values take those of one row, the same row within a group."""
    rows = "\n".join(f"{9990 + k},{4.6e-9 + k * 1e-11}" for k in range(10))
    (tmp_path / "lot.csv").write_text(f"R,C\n{rows}\n")
    rule = '[[draws.part]]\nkey = "chain[1].{}"\nfile = "lot.csv"\ncolumn = "{}"\ngroup = "lot"\n'
    text = (
        "[draws]\ncount = 40\n" + rule.format("resistance", "R") + rule.format("capacitance", "C")
    )
    seen = set()
    for run in runs(tmp_path, text):
        row = round(float(run.values["chain[input filter].resistance"]) - 9990)
        seen.add(row)
        capacitance = float(run.values["chain[input filter].capacitance"])
        assert capacitance == pytest.approx(4.6e-9 + row * 1e-11, rel=1e-12)
    assert len(seen) > 5


def test_recordings_are_found_by_a_pattern(tmp_path: Path) -> None:
    """A run for each file, called by its name; a file counts by its content."""
    recorded = BASE.replace(
        'kind = "step"\nafter = "1 V"', 'kind = "recording"\nfile = "a.csv"\nrate = "10 kHz"'
    ).replace('duration = "5 ms"', "")
    for name in ("a", "b"):
        (tmp_path / f"{name}.csv").write_text("v\n" + "1.0\n" * 100 + f"{len(name)}.5\n")
    text = '[[vary]]\nkey = "stimulus.file"\nglob = "*.csv"\n'
    found = list(read_set(made_set(tmp_path, text, scenario=recorded)).runs())
    assert [run.name for run in found] == ["file=a", "file=b"]
    before = found[1].recipe
    (tmp_path / "b.csv").write_text("v\n" + "1.0\n" * 100 + "0.25\n")
    found = list(read_set(tmp_path / "set.toml").runs())
    assert found[1].recipe != before


def test_a_directory_is_a_set_whose_scenarios_keep_their_seeds(tmp_path: Path) -> None:
    """Scenarios of a directory are called by their files; one that is wrong is a run that fails."""
    base(tmp_path, BASE.replace("format = 1", "format = 1\nseed = 11"), "a.toml")
    base(tmp_path, BASE.replace("10 kohm", "10 kHz"), "b.toml")
    prepared = read_set(tmp_path)
    found = list(prepared.runs())
    assert [(run.name, run.seed) for run in found] == [("a", 11), ("b", 0)]
    assert found[0].error == ""
    assert "resistance" in found[1].error
    assert prepared.count == 2


def test_a_set_may_stand_on_another(tmp_path: Path) -> None:
    """The keys of both are combined, those of the inner set first."""
    made_set(tmp_path, '[[vary]]\nkey = "adc.bits"\nvalues = [10, 12]\n', "inner.toml")
    file = made_set(
        tmp_path, 'base = "inner.toml"\n[[vary]]\nkey = "adc.rate"\nvalues = ["1 kHz"]\n'
    )
    found = list(read_set(file).runs())
    assert [run.name for run in found] == ["bits=10,rate=1kHz", "bits=12,rate=1kHz"]


def test_a_set_has_seed_and_keep_of_the_one_it_stands_on(tmp_path: Path) -> None:
    """What the outer set does not say, the inner says; what it says counts."""
    made_set(tmp_path, 'seed = 7\nkeep = "all"\ntitle = "inner"\n[corners]\n', "inner.toml")
    found = read_set(made_set(tmp_path, 'base = "inner.toml"\n'))
    assert (found.seed, found.keep, found.title) == (7, "all", "inner")
    found = read_set(made_set(tmp_path, 'base = "inner.toml"\nseed = 0\nkeep = "nothing"\n'))
    assert (found.seed, found.keep) == (0, "nothing")
    assert read_set(made_set(tmp_path, "[corners]\n")).seed == 0


GRID = "".join(
    f'[[vary]]\nkey = "{key}"\nfrom = {low}\nto = {high}\npoints = 1000\n'
    for key, low, high in (
        ("chain[1].resistance", 1e3, 1e4),
        ("chain[1].capacitance", 1e-9, 1e-8),
        ("chain[2].gain", 1, 2),
    )
)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ('[[vary]]\nkey = "chain[1].resistence"\nvalues = [1]\n', "did you mean 'resistance'"),
        ("[adc]\nbits = 10\n", "adc: unknown key; known are"),
        ('[[vary]]\nkey = "chain[7].gain"\nvalues = [1]\n', "it has 2"),
        ('[[vary]]\nkey = "adc.rate"\nvalues = ["20 kohm"]\n', "adc.rate"),
        ('[[vary]]\nkey = "adc.bits"\nvalues = [12, 12]\n', "listed twice"),
        ('[[vary]]\nkey = "adc.rate"\nvalues = ["1 kHz", 1000]\n', "1kHz is listed twice"),
        ('[[vary]]\nkey = "adc.rate"\n', "one way"),
        ('[[vary]]\nkey = "adc.rate"\nfrom = 1000\npoints = 3\n', "from, to and points"),
        ('[[vary]]\nkey = "adc.rates"\nvalue = [1]\n', "unknown key; did you mean 'values'"),
        ('[[vary]]\nkey = "stimulus.after"\nglob = "no/*.csv"\n', "matches no file"),
        (GRID, r"1,000,000,000 runs \(1000 x 1000 x 1000\), the limit is 1,000,000"),
        ('[corners]\nparts = ["chain[2].gain"]\n', "has no tolerance.*resistance"),
        ("[draws]\ncount = 0\n", "draws.count: given 0; at least 1 is needed"),
        ('[[vary]]\nkey = "adc.rate"\nvalues = [inf]\n', "given inf; a number must be finite"),
        ('[[vary]]\nkey = "adc.rate"\nvalues = []\n', "given an empty list; give at least 1"),
        ('[corners]\ntemperature = ["85 degC", "-40 degC"]\n', "the lowest temperature first"),
        ("[draws]\ncount = 2\ntemperature = [300, 300]\n", "the lowest temperature first"),
        ('[draws]\ncount = 5\ndistribution = "gauss"\n', "'uniform' or 'normal'"),
        ('base = "set.toml"\n', "in a circle: .*set.toml -> .*set.toml; name a scenario"),
        ('scenarios = "none/*.toml"\n', "matches no file"),
        ('base = "base.toml"\nscenarios = "*.toml"\n', "one of them"),
        ("keeps = 3\n", "unknown key; did you mean 'keep'"),
        (
            '[[vary]]\nkey = "adc.bits"\nvalues = [1, 2]\ntogether = "a"\n'
            '[[vary]]\nkey = "adc.rate"\nvalues = [1000]\ntogether = "a"\n',
            "adc.bits has 2, adc.rate has 1",
        ),
        ('[[vary]]\nkey = "adc.bits"\nvalues = [12, 1200]\n', "bits"),
        ('[[vary]]\nkey = "adc.rate"\nvalues = ["fast"]\n', "fast"),
    ],
)
def test_wrong_sets_are_refused_with_the_cure(tmp_path: Path, text: str, message: str) -> None:
    """Nothing is run of a set that is wrong; the message says where, and what to do."""
    with pytest.raises(InputError, match=message):
        runs(tmp_path, text)


def test_a_huge_grid_is_refused_before_its_runs_are_named(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Nine million runs are counted, not listed: no value gets a name."""
    monkeypatch.delattr("frontend_sim.replay.points._labels")
    text = (
        '[[vary]]\nkey = "adc.rate"\nfrom = 1000\nto = 50000\npoints = 1000000\n'
        '[[vary]]\nkey = "adc.bits"\nfrom = 8\nto = 16\npoints = 1000\n'
    )
    with pytest.raises(ScenarioError, match=r"9,000,000 runs \(1000000 x 9\)"):
        runs(tmp_path, text)


def test_a_scenario_that_is_given_twice_is_refused(tmp_path: Path) -> None:
    """Two runs of one name would be one run too few."""
    file = base(tmp_path)
    with pytest.raises(ScenarioError, match=r"base\.toml is given 2 times"):
        read_set([file, file])


def test_a_circle_of_two_sets_is_told_whole(tmp_path: Path) -> None:
    """Two sets that stand on each other are refused."""
    made_set(tmp_path, 'base = "set.toml"\n', "other.toml")
    with pytest.raises(ScenarioError, match=r"set.toml -> .*other.toml -> .*set.toml"):
        runs(tmp_path, 'base = "other.toml"\n')


def test_an_empty_directory_is_refused(tmp_path: Path) -> None:
    """A directory without scenarios is no set."""
    with pytest.raises(ScenarioError, match="holds no scenario"):
        read_set(tmp_path)
