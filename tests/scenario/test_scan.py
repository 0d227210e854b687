"""The tables of a scan: read, refused, written back, and what each channel is of itself."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from scanned import LOW_PASS, SHARED, level, scan_of, sine

from frontend_sim.errors import ScenarioError
from frontend_sim.scenario import (
    ScanScenario,
    load_scenario,
    load_single_scenario,
    numeric_keys,
    parse_scenario,
    scenario_text,
    value_at,
    with_values,
)

SCANS = sorted((Path(__file__).parents[2] / "scenarios" / "scan").glob("*.toml"))


def refused(**changes: object) -> str:
    """Return the message of a scan of three channels with something wrong in it."""
    with pytest.raises(ScenarioError) as caught:
        scan_of([level(0), level(1), level(2)], **changes)  # type: ignore[arg-type] # texts
    return str(caught.value)


@pytest.mark.parametrize("file", SCANS, ids=lambda file: file.stem)
def test_a_scan_reads_back_as_itself(file: Path) -> None:
    """Written as TOML it gives the same values, hence the same digest."""
    scan = load_scenario(file)
    assert isinstance(scan, ScanScenario)
    again = parse_scenario(scenario_text(scan))
    assert again.resolved() == scan.resolved()
    assert again.digest() == scan.digest()


def test_channels_are_scenarios_with_the_looks_of_their_visits() -> None:
    """Order c0 c1 c0 c2, two conversions a visit, the first thrown away, slots of 105 us."""
    scan = scan_of(
        [sine(50), level(1), level(2)],
        scan='order = ["c0", "c1", "c0", "c2"]\ndwell = 2\ndiscard = 1\nsettle = 5e-6\n' + SHARED,
        chain=LOW_PASS,
    )
    first, second, third = scan.channels()
    assert first.points() == ("stimulus", "1 rc-lowpass", "shared")
    assert first.adc.pattern.between(0, 3) == pytest.approx([50e-6, 260e-6, 470e-6])
    assert second.adc.pattern.between(0, 2) == pytest.approx([155e-6, 575e-6])
    assert third.adc.pattern.between(0, 2) == pytest.approx([365e-6, 785e-6])
    assert [scan.rhythm.skew(i) for i in range(3)] == pytest.approx([0.0, 105e-6, 315e-6])


def test_uneven_visits_have_uneven_looks() -> None:
    """Order c0 c0 c1: the first channel's looks are 1 and 2 slots apart."""
    scan = scan_of([level(0), level(1)], scan='order = ["c0", "c0", "c1"]')
    looks = scan.channels()[0].adc.pattern.between(0, 4)
    assert looks == pytest.approx([0.0, 50e-6, 150e-6, 200e-6])


def test_a_plain_scan_keeps_the_converters_clock() -> None:
    """With one conversion a visit and no wait, conversion n is at n / rate."""
    scan = scan_of([level(0), level(1), level(2)])
    sequence = scan.rhythm.sequence(scan.sampling_adc)
    assert sequence.pattern.between(0, 7) == pytest.approx([k / 20e3 for k in range(7)])


def test_checks_go_to_the_channel_that_they_name() -> None:
    """Without a name they go to every channel."""
    more = '[[check]]\nkind = "clipping"\n[[check]]\nkind = "headroom"\nat_least = "10 mV"\n'
    more += 'channel = "c1"'
    scan = scan_of([level(0), level(1)], more=more)
    first, second = scan.channels()
    assert [check.kind for check in first.check] == ["clipping"]
    assert [check.kind for check in second.check] == ["clipping", "headroom"]


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"scan": 'order = ["c0", "c1", "c22"]'}, r"line \d+: scan.order\[3\]: .*you mean 'c2'"),
        ({"scan": 'order = ["c0", "c1"]'}, r"scan.order: no visit to 'c2'"),
        ({"scan": "dwell = 2\ndiscard = 2"}, r"scan.discard: discard 2 leaves no conversion"),
        (
            {"scan": "slot = 60e-6\nsettle = 20e-6"},
            r"scan.slot: given 60 us, but a visit takes 70 us",
        ),
        ({"scan": 'sampling = "simultaneous"\ndwell = 2'}, "scan.dwell: a sample-and-hold"),
        ({"more": '[[check]]\nkind = "clipping"\nchannel = "c7"'}, "check.1..channel .*no channel"),
        ({"more": '[stimulus]\nkind = "step"\nafter = 1'}, r"line \d+: stimulus: .*\[channel.stim"),
        (
            {"scan": '[[scan.chain]]\nkind = "transport-delay"\ndelay = 1e-6'},
            "scan.chain.1.*transport delay",
        ),
        ({"chain": LOW_PASS.replace("1e3", "-1")}, r"channel\[1\].chain\[1\].resistance"),
        (
            {"scan": SHARED.replace("1e3", '"5 Hz"')},
            r"scan.chain\[1\].resistance \(rc-lowpass \"shared\"\)",
        ),
        ({"more": '[[check]]\nkind = "level"\nat = 1.0\nat_least = 0'}, r"check\[1\].at"),
        ({"duration": 75e-6}, r"simulation.duration: channel 'c2': no conversion .* at 100 us"),
        (
            {"more": 'waveform_rate = 1e5\nwaveform_points = ["pin"]'},
            r"waveform_points\[1\]: channel 'c2': the chain has no point 'pin'",
        ),
        (
            {
                "chain": '[[channel.chain]]\nkind = "rail-limit"\nlow = -1\nhigh = 1',
                "scan": SHARED,
            },
            r"channel\[3\].chain\[1\].*not linear .* before shared stages",
        ),
    ],
)  # fmt: skip
def test_what_cannot_be_is_refused_by_name(changes: dict[str, str], words: str) -> None:
    """Each message names the key, and where there is one the line."""
    assert re.search(words, refused(**changes)), refused(**changes)


def test_a_scan_without_end_says_so_once(tmp_path: Path) -> None:
    """The key stands once before the sentence, from a file as from a scan made in Python."""
    scan = scan_of([level(0), level(1)])
    endless = scan.model_copy(
        update={"simulation": scan.simulation.model_copy(update={"duration": None})}
    )
    file = tmp_path / "endless.toml"
    file.write_text(scenario_text(endless))
    for ask in (lambda: load_scenario(file), endless.run_length):
        with pytest.raises(ScenarioError) as caught:
            ask()
        assert str(caught.value).count("simulation.duration") == 1
        assert "missing; none of the channels' stimuli ends by itself" in str(caught.value)


def test_names_of_channels_are_their_own() -> None:
    """Two channels of one name are refused."""
    text = scenario_text(scan_of([level(0), level(1)])).replace('"c1"', '"c0"')
    with pytest.raises(ScenarioError, match=r"channel\[2\].name .*taken by channel 1"):
        parse_scenario(text)


def test_an_oversampling_converter_is_refused() -> None:
    """Its filter behind a multiplexer is not modelled."""
    text = scenario_text(scan_of([level(0), level(1)]))
    other = 'kind = "oversampling"\nmodulator_rate = 1e6\norder = 3\ndecimation = 64'
    with pytest.raises(ScenarioError, match="a scan takes a sampling converter"):
        parse_scenario(re.sub(r"rate = .*", other, text))


def test_a_channel_key_has_no_meaning_without_channels() -> None:
    """In a file of one channel it is refused."""
    text = (
        '[stimulus]\nkind = "step"\nafter = 1\n[adc]\nrate = 1e3\nbits = 12\nhigh = 2\n'
        '[simulation]\nduration = 1\n[[check]]\nkind = "clipping"\nchannel = "a"'
    )
    with pytest.raises(ScenarioError, match=r"check\[1\].channel .*scan of several"):
        parse_scenario(text)


def test_one_channel_only_is_told_to_take_one(tmp_path: Path) -> None:
    """What knows no scans says so."""
    file = tmp_path / "scan.toml"
    file.write_text(scenario_text(scan_of([level(0), level(1)])))
    with pytest.raises(ScenarioError, match=r"solve takes a scenario of one channel.*scan of 2"):
        load_single_scenario(file, "solve")


def test_values_have_addresses() -> None:
    """A key may name the channel; a changed scan is validated as a whole."""
    scan = scan_of([sine(50), level(1)], chain=LOW_PASS, scan=SHARED)
    assert value_at(scan, "channel[c1].chain[1].resistance") == 1e3
    assert "scan.chain[shared].capacitance" in numeric_keys(scan)
    other = with_values(scan, {"channel[c0].stimulus.frequency": "60 Hz", "scan.dwell": 3})
    assert other.channels()[0].stimulus.frequency == 60.0
    assert other.rhythm.period == pytest.approx(2 * 3 * 50e-6)
    with pytest.raises(ScenarioError, match=r"scan\.discard"):
        with_values(scan, {"scan.discard": 1})


def test_a_channel_takes_other_values_as_any_scenario() -> None:
    """All but its rate, which is the scan's."""
    channel = scan_of([sine(50), level(1)], chain=LOW_PASS).channels()[1]
    other = with_values(channel, {"chain[1].resistance": "2 kohm", "adc.bits": 12})
    assert other.chain[0].resistance == 2e3
    assert other.adc.bits == 12
    assert other.adc.pattern == channel.adc.pattern
    assert (other.channel, other.origin) == (channel.channel, channel.origin)
    with pytest.raises(ScenarioError, match="follows from the scan"):
        with_values(channel, {"adc.rate": "1 kHz"})
