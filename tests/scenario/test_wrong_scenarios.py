"""Wrong scenarios: one message each that names the key, the line, what was given and the remedy."""

from __future__ import annotations

import re

import pytest
from scenario_samples import BASE, MARK, edited, marked_line, stage, stimulus

from frontend_sim.errors import ModelError, ScenarioError
from frontend_sim.scenario import check_scenario, parse_scenario

JARGON = re.compile(
    r"pydantic|union_tag|input_value|input_type|Input should|Value error|discriminator|"
    r"validation|_type\b|<class|function-|\bint_|\bNone\b|Traceback|tuple\b|dict\b"
)
"""Words of the libraries below, which no user should meet."""


def case(text: str, *parts: str) -> object:
    """Make one row of the table, named by the first part of its message."""
    return pytest.param(text, parts, id=re.sub(r"\W+", "-", parts[0])[:40] + f"-{len(parts[-1])}")


TOP = [
    case(edited(("format = 1", f"format = 2 {MARK}")), "format", "newer version", "install"),
    case(edited(("format = 1", f"format = 0 {MARK}")), "format", "given 0", "the number 1"),
    case(edited(("format = 1", f'format = "1" {MARK}')), "format", 'given "1"', "the number 1"),
    case(edited(("format = 1", f"format = true {MARK}")), "format", "given true", "the number 1"),
    case(edited(("format = 1", f"format = 1.0 {MARK}")), "format", "given 1.0", "the number 1"),
    case(edited(("seed = 7", f"seed = -1 {MARK}")), "seed", "given -1", "whole number from 0 to"),
    case(edited(("seed = 7", f"seed = 7.5 {MARK}")), "seed", "given 7.5", "whole number from 0"),
    case(edited(("seed = 7", f'seed = "7" {MARK}')), "seed", 'given "7"', "7 without quotes"),
    case(edited(("seed = 7", f"sead = 7 {MARK}")), "sead", "unknown key", "did you mean 'seed'?"),
    case(edited(("seed = 7", f"title2 = 7 {MARK}")), "title2", "unknown key", "mean 'title'?"),
    case(edited(("seed = 7", f"source = 'x' {MARK}")), "source", "unknown key", "known are adc"),
    case(edited(("seed = 7", f"duration = '1 s' {MARK}")), "duration", "belongs in [simulation]"),
    case(edited(('title = "I', f'title = 5 {MARK}\n# "I')), "title", "given 5", 'write "5"'),
    case(edited(('title = "I', f"title = '{'x' * 201}' {MARK}\n# ")), "title", "201 characters"),
    case(edited(("seed = 7", f"seed = 1979-05-27 {MARK}")), "seed", "date or time 1979-05-27"),
    case(edited(("[adc]", f"[acd] {MARK}")), "acd", "unknown table", "did you mean 'adc'?"),
    case(edited(("[adc]", f"[firmware] {MARK}\n[adc]")), "firmware", "unknown table", "known are"),
    case(BASE[BASE.index("[[chain]]") :], "stimulus: missing; add the table [stimulus]", '"sine"'),
    case(BASE[: BASE.index("[adc]")], "adc: missing", 'rate = "20 kHz"', "bits (a whole number"),
    case(BASE.replace("[adc]", f"[[adc]] {MARK}"), "adc", "as an array", "[adc] with single"),
    case(f"adc = 7 {MARK}\n" + BASE[: BASE.index("[adc]")], "adc", "given 7", "table, [adc]"),
    case(
        BASE[: BASE.index("[stimulus]")] + f"stimulus = 5 {MARK}\n" + BASE[BASE.index("[adc]") :],
        "stimulus",
        "given 5",
        "expected a table, [stimulus]",
    ),
    case(BASE.replace("[stimulus]", f"[[stimulus]] {MARK}"), "stimulus", "[stimulus] with single"),
]

STIMULUS = [
    case(stimulus(f'kind = "stp" {MARK}\nafter = 1'), "stimulus.kind", "mean 'step'?"),
    case(stimulus(f'kind = "Step" {MARK}\nafter = 1'), "stimulus.kind", "mean 'step'?"),
    case(stimulus(f'kind = "half_sine" {MARK}\npeak = 1'), "stimulus.kind", "mean 'half-sine'?"),
    case(stimulus(f'kind = "gain" {MARK}\ngain = 1'), "stimulus.kind", "a kind of [[chain]]"),
    case(stimulus(f"kind = 5 {MARK}"), "stimulus.kind", "given 5", "one of step, ramp"),
    case(stimulus(f"kind = ['step'] {MARK}"), "stimulus.kind", 'given ["step"]', "text in quotes"),
    case(stimulus(f'kind = "" {MARK}'), "stimulus.kind", 'unknown kind ""', "step, ramp"),
    case(stimulus("after = 1").replace("[stimulus]", f"[stimulus] {MARK}"), "the kind is missing"),
    case(
        stimulus('kind = "step"').replace("[stimulus]", f"[stimulus] {MARK}"),
        "stimulus.after",
        "missing; add for instance after =",
        "value from the step on",
    ),
    case(stimulus(f'kind = "step"\nafter = "1 A" {MARK}'), "stimulus.after", "a unit of current"),
    case(stimulus(f'kind = "step"\nafter = nan {MARK}'), "stimulus.after", "not a finite number"),
    case(stimulus(f'kind = "step"\nafter = -inf {MARK}'), "stimulus.after", "not a finite number"),
    case(stimulus(f'kind = "step"\nafter = 1e400 {MARK}'), "stimulus.after", "not a finite number"),
    case(stimulus(f"kind = 'step'\nafter = {{}} {MARK}"), "stimulus.after", "given a table"),
    case(stimulus(f"kind = 'step'\nafter = [1] {MARK}"), "stimulus.after", "given [1]"),
    case(stimulus(f"kind = 'step'\nafter = 1\nat = -1 {MARK}"), "stimulus.at", "at least 0 s"),
    case(stimulus(f"kind = 'step'\nafter = 1\nslope = 1 {MARK}"), "slope", 'kind "ramp"'),
    case(
        stimulus(f'kind = "tones"\n[[stimulus.tone]]\namplitude = 1\nfrequency = 0 {MARK}'),
        "stimulus.tone[1].frequency",
        "above 0 Hz",
    ),
    case(
        stimulus(f'kind = "tones"\n[stimulus.tone] {MARK}\namplitude = 1\nfrequency = 1'),
        "stimulus.tone",
        "write [[stimulus.tone]] with double brackets",
    ),
    case(stimulus(f'kind = "tones"\ntone = [] {MARK}'), "stimulus.tone", "at least 1"),
    case(
        stimulus(f'kind = "sum"\nterm = [\n{{kind = "step", after = 1}},\n5, {MARK}\n]'),
        "stimulus.term[2]",
        "given 5",
        "[[stimulus.term]]",
    ),
    case(
        stimulus(f'kind = "sum"\n[[stimulus.term]]\nkind = "step"\nafter = "1 W" {MARK}'),
        "stimulus.term[1].after (step)",
        "power",
    ),
    case(
        stimulus(f'kind = "pulse"\nhigh = 1\nwidth = 1\nperiod = 2\ncount = true {MARK}'),
        "stimulus.count",
        "given true",
        "whole number of at least 1",
    ),
    case(stimulus(f"kind = 'pulse'\nhigh = 1\nwidth = 1\ncount = 3 {MARK}"), "needs a period"),
    case(stimulus(f"kind = 'recording'\nfile = 5 {MARK}"), "stimulus.file", "name of a file"),
    case(stimulus(f"kind = 'recording'\nfile = 'a'\ncolumn = 1.5 {MARK}"), "column", "1.5"),
]

CHAIN = [
    case(stage('kind = "gain"\ngain = 1').replace("[[chain]]", f"[chain] {MARK}"),
         "chain", "given one table", "[[chain]] with double brackets"),
    case(f'chain = "x" {MARK}\n' + stage("").replace("[[chain]]", ""), "chain", 'given "x"'),
    case(edited(("[[chain]]", f"[[chian]] {MARK}")), "chian", "unknown table", "mean 'chain'?"),
    case(edited(("resistance =", f"resistence = 1 {MARK}\n#")),
         'chain[1].resistence (rc-lowpass "input filter")', "did you mean 'resistance'?"),
    case(edited(("resistance =", f"R = 1 {MARK}\n#")), "chain[1].R", "did you mean 'resistance'?"),
    case(edited(("resistance =", "#")).replace("[[chain]]", f"[[chain]] {MARK}", 1),
         "chain[1].resistance", 'add for instance resistance = "10 kohm"', "series resistance"),
    case(edited(('"10 kohm"', f'"4.7 nF" {MARK}')), "chain[1].resistance", "unit of capacitance"),
    case(edited(('"4.7 nF"', f'"4,7 nF" {MARK}')), "chain[1].capacitance", '"4.7 nF"'),
    case(edited(('"4.7 nF"', f'"-4.7 nF" {MARK}')), "chain[1].capacitance", "above 0 F"),
    case(edited(('"10 kohm"', f'"0 ohm" {MARK}')), "chain[1].resistance", "above 0 ohm"),
    case(edited(('"10 kohm"', f"true {MARK}")), "chain[1].resistance", "given true"),
    case(edited(('"10 kohm"', f'"" {MARK}')), "chain[1].resistance", "the text is empty"),
    case(edited(('"10 kohm"', f'"10" {MARK}')), "chain[1].resistance", '"10 ohm"'),
    case(edited(('"rc-lowpass"', f'"rc" {MARK}')), "chain[1].kind (rc", "rc-lowpass"),
    case(edited(('"rc-lowpass"', f'"step" {MARK}')), "chain[1].kind", "is a kind of [stimulus]"),
    case(edited(('name = "input filter"', f"name = 5 {MARK}")), "chain[1].name", 'write "5"'),
    case(edited(('name = "input filter"', f'name = "a\\tb" {MARK}')), "chain[1].name", "one line"),
    case(edited(('name = "input filter"', f'name = "stimulus" {MARK}')), "'stimulus' is taken"),
    case(edited(("gain = 2", f'gain = 2\nname = "input filter" {MARK}')),
         "chain[2].name", "'input filter' is taken", "stage 1"),
    case(edited(("gain = 2", f'gain = 2\nname = "1 rc-lowpass" {MARK}'), ('name = "input f', "# ")),
         "chain[2].name", "stage 1"),
    case(edited(("gain = 2", f"gain = 0.5 {MARK}")), "chain[2].gain", "given 0.5", "at least 1"),
    case(edited(("gain = 2", f"gain = 2\ncorner = 1 {MARK}")), "chain[2].corner", '"butterworth"'),
    case(stage(f'kind = "gain"\ngain = "x" {MARK}'), "chain[1].gain (gain)", "number is missing"),
    case(stage(f'kind = "gain"\ngain = 1\ngian = 1 {MARK}'), "chain[1].gian (gain)", "unknown key"),
    case(stage(f'kind = "inverting-amplifier"\ngain = 2 {MARK}'), "chain[1].gain", "below 0"),
    case(stage(f'kind = "butterworth"\norder = 0 {MARK}\ncorner = 1'), "order", "from 1 to 12"),
    case(stage(f'kind = "butterworth"\norder = 4.0 {MARK}\ncorner = 1'), "order", "write 4"),
    case(stage(f'kind = "butterworth"\norder = 4\ncorner = 1\nresponse = "Lowpass" {MARK}'),
         "chain[1].response", 'one of "low-pass", "high-pass"'),
    case(stage(f'kind = "butterworth"\norder = 4\nresponse = "band-pass" {MARK}\ncorner = 1'),
         "band-pass response needs lower_corner and upper_corner"),
    case(stage(f'kind = "poles-zeros"\npoles = [-1,\n"x" {MARK}\n]'),
         "chain[1].poles[2]", 'given "x"', "a number or an array of 2 items"),
    case(stage(f'kind = "poles-zeros"\npoles = [\n-1,\n[1, 2, 3], {MARK}\n]'),
         "chain[1].poles[2]", "given [1, 2, 3]"),
    case(stage(f'kind = "poles-zeros"\npoles = [[-1, 2]] {MARK}'), "without its conjugate"),
    case(stage('kind = "poles-zeros"\npoles = [-1]\nzeros = [1, 2]'), "2 zeros", "1 pole;"),
    case(stage(f'kind = "poles-zeros"\npoles = [-1e300] {MARK}'), "out of reach", "1e+21"),
    case(stage('kind = "polynomial"\nnumerator = [1]\n' f'denominator = [1, "2"] {MARK}'),
         "chain[1].denominator[2]", 'given "2"', "2 without quotes"),
    case(stage(f'kind = "polynomial"\nnumerator = [1]\ndenominator = [0] {MARK}'), "is zero"),
]  # fmt: skip

ADC = [
    case(edited(('"20 kHz"', f'"10 KHz" {MARK}')), "adc.rate", "'kHz' (kilo)"),
    case(edited(('"20 kHz"', f'"0 Hz" {MARK}')), "adc.rate", "above 0 Hz"),
    case(edited(('"20 kHz"', f"true {MARK}")), "adc.rate", "given true", "a frequency"),
    case(edited(('"20 kHz"', f'"20 V" {MARK}')), "adc.rate", "unit of voltage", '"20 kHz"'),
    case(edited(("bits = 12", f"bits = 12.5 {MARK}")), "adc.bits", "12.5", "from 4 to 32"),
    case(edited(("bits = 12", f'bits = "12" {MARK}')), "adc.bits", "12 without quotes"),
    case(edited(("bits = 12", f"bits = 0 {MARK}")), "adc.bits", "given 0", "from 4 to 32"),
    case(edited(("bits = 12", f"bits = {10**30} {MARK}")), "adc.bits", "more than 20 digits"),
    case(edited(("bits = 12", f"bit = 12 {MARK}")), "adc.bit", "did you mean 'bits'?"),
    case(edited(('low = "0 V"', f'low = "5 V" {MARK}')), "adc: the range is reversed", "5 V"),
    case(edited(('low = "0 V"', f'code = "binary" {MARK}')), "adc.code", '"straight-binary"'),
    case(edited(('low = "0 V"', f'code = "offset-binary" {MARK}')), "low below 0 V"),
    case(edited(('low = "0 V"', f'aperture_jitter = "1 ms" {MARK}')), "at most 5%"),
    case(edited(('low = "0 V"', f"seed = 3 {MARK}")), "adc.seed", "at the top of the file"),
    case(edited(("bits = 12", f"bits = 12\nbits = 12 {MARK}")), "bits is given twice"),
]

PARTS = [
    case(edited(('"10 kohm"', f'{{ value = "10 kohm", tolerance = "-1 %" }} {MARK}')),
         'chain[1].resistance.tolerance (rc-lowpass "input filter")', 'given "-1 %"', "at least 0"),
    case(edited(('"10 kohm"', f'{{ value = "10 kohm", tolerance = "100 %" }} {MARK}')),
         "chain[1].resistance.tolerance", 'given "100 %"', "below 100 %"),
    case(edited(('"10 kohm"', f'{{ value = "10 kohm", tolerance = "1 ohm" }} {MARK}')),
         "chain[1].resistance.tolerance", "unit of resistance", '"0.1 %"'),
    case(edited(('"10 kohm"', f'{{ value = "10 kohm", drift = "50 ppm" }} {MARK}')),
         "chain[1].resistance.drift", '"50 ppm/K"'),
    case(edited(('"10 kohm"', f'{{ value = "10 kohm", tolerence = "1 %" }} {MARK}')),
         "chain[1].resistance.tolerence", "unknown key", "mean 'tolerance'?"),
    case(edited(('"10 kohm"', f'{{ tolerance = "1 %" }} {MARK}')),
         "chain[1].resistance", "without value", '{ value = "10 kohm", tolerance = "1 %" }'),
    case(edited(('"10 kohm"', f'{{ value = "-10 kohm", tolerance = "1 %" }} {MARK}')),
         "chain[1].resistance.value", 'given "-10 kohm"', "above 0 ohm"),
    case(edited(('"10 kohm"', f'{{ value = "10.3 kohm", series = "E24" }} {MARK}')),
         "chain[1].resistance.value", "series E24 of IEC 60063", "10 kohm and 11 kohm"),
    case(edited(('"10 kohm"', f'{{ value = "10 kohm", series = "E10" }} {MARK}')),
         "chain[1].resistance.series", 'given "E10"', "E3, E6, E12"),
    case(edited(('"4.7 nF"', f'"4n7F" {MARK}')), "chain[1].capacitance", "unit or the letter",
         'write "4n7"'),
    case(edited(('"4.7 nF"', f'"4n7V" {MARK}')), "chain[1].capacitance", "no letter for a tol"),
    case(edited(('"20 kHz"', f'{{ value = "20 kHz", tolerance = "1 %" }} {MARK}')),
         "adc.rate", "given a table", "a frequency"),
    case(edited(("[adc]", f'[environment]\ntemperature = "-300 degC" {MARK}\n\n[adc]')),
         "environment.temperature", 'given "-300 degC"', "absolute zero", "-273.15 degC"),
    case(edited(("[adc]", f"[environment]\ntemperature = -1 {MARK}\n\n[adc]")),
         "environment.temperature", "given -1", "at least 0 K"),
    case(edited(("[adc]", f'[environment]\ntemperature = "25 C" {MARK}\n\n[adc]')),
         "environment.temperature", "unit of charge", "did you mean 'degC'?"),
    case(edited(("[adc]", f'[environment]\ntemperatur = "25 degC" {MARK}\n\n[adc]')),
         "environment.temperatur", "unknown key", "mean 'temperature'?"),
    case(edited(('after = "1 V"', f'after = "1 degC" {MARK}')), "stimulus.after",
         "unit of temperature", "a voltage"),
    case(edited(('after = "1 V"', f'after = "1 V/s" {MARK}')), "stimulus.after", "dimension"),
    case(stage('kind = "rtd"\nexcitation_current = "1 mA"').replace('"1 V"', f'"1 V" {MARK}'),
         "stimulus.after", "unit of voltage", "'1 rtd' takes a temperature (K)"),
    case(stage(f'kind = "thermal-lag" {MARK}\ntime_constant = 1').replace(MARK, "", 1)
         .replace("[[chain]]", f"[[chain]] {MARK}"), "chain[1] (thermal-lag)",
         "gives a temperature (K)", "the converter takes a voltage (V)", "put a sensor"),
    case(stage(f'kind = "thermocouple"\ntype = "X" {MARK}').replace('"1 V"', "300"),
         "chain[1].type (thermocouple)", 'one of "B", "E"'),
]  # fmt: skip

RATE = "waveform_rate = 1\n"

SIMULATION = [
    case(edited(('duration = "250 ms"', f'duration = "-1 s" {MARK}')), "duration", "above 0 s"),
    case(edited(('duration = "250 ms"', f'duration = "1e11 s" {MARK}')), "conversions", "shorten"),
    case(edited(("bits = 12", 'bits = 12\nfirst = "1 s"'), ('"250 ms"', f'"250 ms" {MARK}')),
         "simulation.duration", "no conversion falls into", "1 s", "250 ms", "lower adc.first"),
    case(edited(('duration = "250 ms"', "")).replace("[simulation]", f"[simulation] {MARK}"),
         "simulation.duration", "a step never ends by itself", 'duration = "10 ms"'),
    case(BASE[: BASE.index("[simulation]")], "simulation.duration", 'for instance duration ='),
    case(edited(('"exact"', f'"Exact" {MARK}')), "discretization", 'one of "exact", "zoh"'),
    case(edited(('"auto"', f'"fast" {MARK}')), "grid_rate", "number is missing"),
    case(edited(('"auto"', f'"auto"\naccuracy = "5 mV" {MARK}')), "accuracy", "'mV' is not LSB"),
    case(edited(('"auto"', f'"auto"\naccuracy = 0 {MARK}')), "accuracy", "above 0 LSB"),
    case(edited(('"auto"', f'"auto"\nprewarp = "1 kHz" {MARK}')), "prewarp", 'choose "bilinear"'),
    case(edited(('"exact"', '"bilinear"'), ('"auto"', f'"1 MHz"\nprewarp = "1 MHz" {MARK}')),
         "simulation.prewarp", "half the grid_rate, 500 kHz"),
    case(edited(('"auto"', f'"auto"\nwaveform_points = ["stimulus"] {MARK}')), "waveform_rate = "),
    case(edited(('"auto"', f'"auto"\nwaveform_points = "x" {MARK}\nwaveform_rate = 1')), '["x"]'),
    case(edited(('"auto"', f'"auto"\nwaveform_points = [] {MARK}\nwaveform_rate = 1')), "no point"),
    case(edited(('"auto"', f'"auto"\n{RATE}waveform_points = ["stimulus",\n5] {MARK}')),
         "simulation.waveform_points[2]", "given 5", "text in quotes"),
    case(edited(('"auto"', f'"auto"\n{RATE}waveform_points = ["input filtre"] {MARK}')),
         "simulation.waveform_points[1]", "did you mean 'input filter'?"),
    case(edited(('"auto"', f'"auto"\n{RATE}waveform_points = ["stimulus",\n"stimulus"] {MARK}')),
         "simulation.waveform_points[2]", "listed twice"),
    case(edited(("initial =", f"inital = 1 {MARK}\n#")), "inital", "did you mean 'initial'?"),
    case(edited(("initial =", f"bits = 1 {MARK}\n#")), "simulation.bits", "it belongs in [adc]"),
]  # fmt: skip

SYNTAX = [
    case(edited(('"20 kHz"', f"20 kHz {MARK}")), "needs quotes", 'rate = "20 kHz"'),
    case(edited(('"20 kHz"', f"20kHz {MARK}")), "needs quotes", 'rate = "20kHz"'),
    case(edited(('"4.7 nF"', f"4,7 {MARK}")), "decimal point", "capacitance = 4.7"),
    case(edited(('kind = "step"', f"kind = step {MARK}")), "text needs quotes", 'kind = "step"'),
    case(edited(("bits = 12", f"bits = {MARK}")), "the value of bits is missing"),
    case(edited(("bits = 12", f"bits = True {MARK}")), "write bits = true, in lower case"),
    case(edited(("bits = 12", "bits 12 ")), "expected key = value", "bits 12"),
    case(edited(("[adc]", f"[adc {MARK}")), "not TOML", "expected ']'"),
    case(edited(("[adc]", f"[adc]\n[stimulus] {MARK}")), "[stimulus] # << stands twice"),
    case(edited(('"1 V"', f'"1 V {MARK}')), "its second quote is missing"),
    case(stimulus(f'kind = "recording"\nfile = "C:\\data\\x.csv" {MARK}'), "backslash", "'/'"),
    case(edited(("[[chain]]", "[chain]"), ("[[chain]]", f"[[chain]] {MARK}")), "given twice"),
]

EVERY = [*TOP, *STIMULUS, *CHAIN, *PARTS, *ADC, *SIMULATION, *SYNTAX]


@pytest.mark.parametrize(("text", "parts"), EVERY)
def test_a_wrong_scenario_is_told(text: str, parts: tuple[str, ...]) -> None:
    """Each wrong scenario gives one error, whose message has key, line and remedy."""
    with pytest.raises(ScenarioError) as caught:
        check_scenario(parse_scenario(text, ".", "wrong.toml"), "wrong.toml")
    error = caught.value
    message = str(error)
    for part in parts:
        assert part in message
    assert message.startswith("wrong.toml: ")
    assert not JARGON.search(message)
    assert len(error.problems) == 1, message
    line = marked_line(text)
    if line is not None:
        assert error.problems[0].line == line, message


def test_there_are_many_wrong_scenarios() -> None:
    """The table does not shrink below what the project asks for."""
    assert len(EVERY) >= 60


def test_the_sample_is_right() -> None:
    """The scenario that the wrong ones are made from is right."""
    check_scenario(parse_scenario(BASE))


def test_an_unstable_stage_is_told() -> None:
    """A pole in the right half plane is a model error, with the stage's line."""
    with pytest.raises(ModelError) as caught:
        check_scenario(parse_scenario(stage('kind = "poles-zeros"\npoles = [3, -5]')), "a.toml")
    assert str(caught.value).startswith("a.toml: line 11: chain[1] (poles-zeros): ")
    assert "unstable" in str(caught.value)
    assert "3 rad/s" in str(caught.value)


def test_all_that_is_wrong_is_told_at_once_and_in_order() -> None:
    """Several faults give one error with one problem each, in the order of the file."""
    text = edited(("bits = 12", "bits = 3"), ('"10 kohm"', '"1 V"'), ("seed = 7", "seed = -1"))
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(text, ".", "wrong.toml")
    assert [problem.key for problem in caught.value.problems] == [
        "seed",
        'chain[1].resistance (rc-lowpass "input filter")',
        "adc.bits",
    ]
    assert [problem.line for problem in caught.value.problems] == [3, 12, 22]
    assert str(caught.value).startswith("wrong.toml: 3 problems\n  line 3: seed: given -1")


def test_a_misspelt_key_is_one_problem_not_two() -> None:
    """The key that was meant is not also called missing."""
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(edited(("resistance", "resistanse")))
    assert len(caught.value.problems) == 1


def test_an_array_with_a_wrong_item_is_not_also_too_short() -> None:
    """Only the item is told."""
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(stimulus('kind = "tones"\ntone = [{amplitude = 1, frequency = "1 V"}]'))
    assert [problem.key for problem in caught.value.problems] == ["stimulus.tone[1].frequency"]


def test_of_a_newer_format_nothing_else_is_told() -> None:
    """What else an old program would find wrong in a newer file is beside the point."""
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(edited(("format = 1", "format = 3"), ("bits = 12", "bits = 99")))
    assert [problem.key for problem in caught.value.problems] == ["format"]


def test_very_many_problems_are_counted() -> None:
    """A message stays short enough to read."""
    wrong = "\n".join(f"key{number} = 1" for number in range(100))
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(wrong + "\n" + BASE)
    assert len(caught.value.problems) == 26
    assert "and 75 more problems" in str(caught.value)
