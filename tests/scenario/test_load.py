"""A file or a text becomes a scenario."""

from __future__ import annotations

from pathlib import Path

import pytest
from scenario_samples import BASE, edited, stimulus

from frontend_sim.errors import RecordingError, ScenarioError
from frontend_sim.scenario import Scenario, check_scenario, load_scenario, parse_scenario


def test_values_are_in_si_and_defaults_are_filled_in() -> None:
    """Text with units becomes SI floats; what is left out has its default."""
    scenario = parse_scenario(BASE)
    stage = scenario.resolved()["chain"][0]
    assert stage["resistance"] == 10e3
    assert stage["capacitance"] == 4.7e-9
    assert scenario.adc.rate == 20e3
    assert scenario.simulation.duration == 0.25
    assert scenario.simulation.grid_rate is None
    assert scenario.simulation.accuracy == 0.05
    assert scenario.points() == ("stimulus", "input filter", "2 noninverting-amplifier")


def test_the_order_of_keys_and_tables_does_not_matter() -> None:
    """TOML's tables may stand in any order."""
    start = BASE.index("[stimulus]")
    moved = BASE[:start] + BASE[BASE.index("[adc]") :] + BASE[start : BASE.index("[adc]")]
    assert parse_scenario(moved).resolved() == parse_scenario(BASE).resolved()


def test_inline_tables_are_the_same_as_headers() -> None:
    """Both notations of TOML make the same scenario."""
    inline = """
    stimulus = {kind = "step", after = 1}
    chain = [{kind = "rc-lowpass", resistance = "4k7", capacitance = "4n7"}]
    adc = {rate = 1e3, bits = 8, high = 1}
    simulation.duration = 1
    """
    headers = """
    [stimulus]
    kind = "step"
    after = "1 V"
    [[chain]]
    kind = "rc-lowpass"
    resistance = 4700
    capacitance = 4.7e-9
    [adc]
    rate = "1 kHz"
    bits = 8
    high = "1 V"
    [simulation]
    duration = "1 s"
    """
    assert parse_scenario(inline).resolved() == parse_scenario(headers).resolved()


def test_resolved_values_make_the_same_scenario_again() -> None:
    """What a record stores can be read back."""
    scenario = parse_scenario(BASE)
    again = Scenario.model_validate(scenario.resolved())
    assert again.resolved() == scenario.resolved()
    assert again.digest() == scenario.digest()


def test_a_copy_with_changes_has_no_source() -> None:
    """The text of the old values would lie about the new ones."""
    scenario = parse_scenario(BASE)
    assert scenario.model_copy().source == BASE
    assert scenario.model_copy(update={"seed": 8}).source == ""
    assert scenario.model_copy(update={"source": "x"}).source == "x"


RECORDING = 'kind = "recording"\nfile = "signal.csv"\ntime = "t"\ncolumn = "u"'


def recorded(folder: Path, *edits: tuple[str, str]) -> Path:
    """Write a recording of five points in 4 ms, one every ms, and a scenario that reads it."""
    rows = "".join(f"{k / 1000},{k}\n" for k in range(5))
    (folder / "signal.csv").write_text("t,u\n" + rows, encoding="utf-8")
    text = stimulus(RECORDING)
    for old, new in edits:
        assert old in text
        text = text.replace(old, new)
    file = folder / "scenario.toml"
    file.write_text(text, encoding="utf-8")
    return file


def test_a_recording_is_looked_for_beside_the_scenario(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A path is relative to the scenario file, wherever the program was started."""
    file = recorded(tmp_path, ('duration = "250 ms"\n', ""))
    monkeypatch.chdir("/")
    scenario = load_scenario(file)
    assert scenario.stimulus.files() == (tmp_path / "signal.csv",)


def test_a_missing_recording_is_told_with_file_and_line(tmp_path: Path) -> None:
    """The message names the scenario, the line of the table, and the recording."""
    file = recorded(tmp_path, ("signal.csv", "sigmal.csv"))
    with pytest.raises(RecordingError) as caught:
        load_scenario(file)
    message = str(caught.value)
    assert message.startswith(f"{file}: line ")
    assert "stimulus" in message
    assert "sigmal.csv" in message


def test_parsing_opens_no_recording(tmp_path: Path) -> None:
    """A text can be read without the files that it names."""
    scenario = parse_scenario(stimulus(RECORDING), tmp_path)
    assert scenario.stimulus.files() == (tmp_path / "signal.csv",)


@pytest.mark.parametrize(
    ("duration", "right"),
    [
        ("1 ms", True),
        ("5 ms", True),
        ("5.0000000001 ms", True),  # rounding
        ("5.01 ms", True),  # less than an interval of the converter late, no conversion behind
        ("5.06 ms", False),  # the conversion at 5.05 ms lies behind the end
        ("6 ms", False),
        ("250 ms", False),
    ],
)
def test_a_run_ends_with_its_recording(tmp_path: Path, duration: str, right: bool) -> None:
    """A duration beyond the end names both numbers and the remedy; rounding is forgiven."""
    file = recorded(tmp_path, ('"250 ms"', f'"{duration}"'))
    if right:
        load_scenario(file)
        return
    with pytest.raises(ScenarioError) as caught:
        load_scenario(file)
    message = str(caught.value)
    assert f"given {duration}, but the stimulus is known for 5 ms only" in message
    assert "shorten duration, or leave it out" in message
    assert caught.value.problems[0].key == "simulation.duration"
    assert caught.value.problems[0].line == load_line(file, "duration =")


def load_line(file: Path, start: str) -> int:
    """Return the line of a file that begins with a text."""
    rows = file.read_text(encoding="utf-8").split("\n")
    return next(number for number, row in enumerate(rows, 1) if row.startswith(start))


def test_a_recording_gives_its_length_to_the_run(tmp_path: Path) -> None:
    """Without a duration the first conversion must still lie within the recording."""
    load_scenario(recorded(tmp_path, ('duration = "250 ms"\n', "")))
    late = recorded(
        tmp_path, ('duration = "250 ms"\n', ""), ("bits = 12", 'bits = 12\nfirst = "1 s"')
    )
    with pytest.raises(ScenarioError, match="no conversion falls into the run"):
        load_scenario(late)


def test_a_scenario_made_in_python_is_checked_too() -> None:
    """Without a text there are no lines, but the same message."""
    scenario = Scenario.model_validate(
        {"stimulus": {"kind": "step", "after": 1}, "adc": {"rate": 1e3, "bits": 8, "high": 1}}
    )
    with pytest.raises(ScenarioError, match=r"^simulation\.duration: missing; a step never ends"):
        check_scenario(scenario)


def test_first_and_last_conversion_may_meet_the_ends() -> None:
    """One conversion is enough, at zero or just before the end."""
    parse_scenario(edited(('"250 ms"', '"1 us"')))
    parse_scenario(edited(('"250 ms"', '"1 ms"'), ("bits = 12", 'bits = 12\nfirst = "0.999 ms"')))
    with pytest.raises(ScenarioError, match="no conversion"):
        parse_scenario(edited(('"250 ms"', '"1 ms"'), ("bits = 12", 'bits = 12\nfirst = "1 ms"')))
