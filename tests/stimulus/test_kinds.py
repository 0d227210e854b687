"""Every kind of stimulus: closed form, events, generator, and its place in every list of kinds."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from importlib import import_module
from itertools import pairwise
from pathlib import Path
from typing import Any

import mpmath as mp
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy.linalg import expm

import frontend_sim.stimulus as package
from frontend_sim.stimulus import STIMULI, Stimulus
from frontend_sim.stimulus.drive import PiecewiseDrive

Real = NDArray[np.float64]

ELSEWHERE = {"noise-burst", "recording"}
"""Kinds made of points: tests/stimulus/test_noise_burst.py, tests/stimulus/recording."""

SCENARIOS = Path(__file__).parents[2] / "scenarios" / "stimuli"

END = 2.0
"""The rows below have all their events in (0, END] [s]."""


def _pulse(t: Real, at: float, rise: float, width: float, fall: float) -> Real:
    """A pulse from 0 to 1 with straight edges: its corners, joined by lines."""
    top = at + rise, at + rise / 2 + width - fall / 2
    return np.asarray(np.interp(t, [at, *top, top[1] + fall], [0.0, 1.0, 1.0, 0.0]))


def _exact_sine(frequency: int, t: Real) -> Real:
    with mp.workdps(30):
        turns = [frequency * mp.mpf(float(max(value, 0.0))) for value in t]
        return np.array([float(mp.sin(2 * mp.pi * turn)) for turn in turns])


def _inside(t: Real, start: float, stop: float) -> Any:
    return (t >= start) & (t < stop)


ROWS: list[tuple[str, dict[str, Any], Callable[[Real], Any], list[float]]] = [
    ("step", {"before": 0.5, "after": -2.0, "at": 0.3},
     lambda t: np.where(t < 0.3, 0.5, -2.0), [0.3]),
    ("step", {"before": 0.5, "after": -2.0}, lambda t: np.where(t < 0.0, 0.5, -2.0), []),
    ("ramp", {"before": 0.2, "slope": 3.0, "at": 0.25},
     lambda t: 0.2 + 3.0 * np.maximum(t - 0.25, 0.0), [0.25]),
    ("ramp", {"before": 0.2, "slope": -3.0, "at": 0.25, "length": 0.5},
     lambda t: 0.2 - 3.0 * np.clip(t - 0.25, 0.0, 0.5), [0.25, 0.75]),
    ("sine", {"amplitude": 1.5, "frequency": 7.3, "phase": "40 deg", "offset": 0.3},
     lambda t: 0.3 + 1.5 * np.sin(2 * np.pi * 7.3 * np.maximum(t, 0) + np.radians(40)), []),
    ("sine", {"amplitude": 1.0, "frequency": 2000.0},
     lambda t: _exact_sine(2000, t), []),
    ("tones", {"offset": -0.1, "tone": [{"amplitude": 1, "frequency": 3, "phase": 1},
                                        {"amplitude": 0.4, "frequency": 11}]},
     lambda t: -0.1 + np.sin(6 * np.pi * np.maximum(t, 0) + 1)
     + 0.4 * np.sin(22 * np.pi * np.maximum(t, 0)), []),
    ("pulse", {"low": 0.0, "high": 1.0, "at": 0.2, "width": 0.3, "rise": 0.04, "fall": 0.1},
     lambda t: _pulse(t, 0.2, 0.04, 0.3, 0.1), [0.2, 0.24, 0.47, 0.57]),
    ("pulse", {"low": 3.0, "high": 1.0, "at": 0.2, "width": 0.3},
     lambda t: np.where(_inside(t, 0.2, 0.5), 1.0, 3.0), [0.2, 0.5]),
    ("pulse", {"high": 1, "width": 0.125, "rise": 0.125, "fall": 0.125, "period": 0.25, "count": 2},
     lambda t: _pulse(t, 0, 0.125, 0.125, 0.125) + _pulse(t, 0.25, 0.125, 0.125, 0.125),
     [0.125, 0.25, 0.375, 0.5]),
    ("pulse", {"high": 1.0, "at": 0.5, "width": 0.1, "period": 0.75},
     lambda t: sum(np.where(_inside(t, s, s + 0.1), 1.0, 0.0) for s in (0.5, 1.25, 2.0)),
     [0.5, 0.6, 1.25, 1.35, 2.0]),
    ("half-sine", {"peak": 2.0, "length": 0.5, "at": 0.25, "baseline": 0.1},
     lambda t: 0.1 + np.where(_inside(t, 0.25, 0.75), 2 * np.sin(np.pi * (t - 0.25) / 0.5), 0),
     [0.25, 0.75]),
    ("double-exponential",
     {"peak": 2.0, "at": 0.25, "baseline": -1.0, "rise_constant": 0.1, "decay_constant": 0.4},
     # Largest where the slopes meet: t = ln(4)/(1/0.1 - 1/0.4); there the shape is 0.75 · 4^(-1/3).
     lambda t: -1 + np.where(t < 0.25, 0, 2 / (0.75 * 4 ** (-1 / 3))
                             * (np.exp(-(t - 0.25) / 0.4) - np.exp(-(t - 0.25) / 0.1))), [0.25]),
    ("sum", {"term": [{"kind": "step", "after": 2.0, "at": 0.3},
                      {"kind": "sum", "term": [{"kind": "ramp", "slope": 1.0, "at": 1.0},
                                               {"kind": "half-sine", "peak": 1, "length": 1.5}]}]},
     lambda t: np.where(t < 0.3, 0, 2.0) + np.maximum(t - 1, 0)
     + np.where(_inside(t, 0, 1.5), np.sin(np.pi * t / 1.5), 0), [0.3, 1.0, 1.5]),
]  # fmt: skip

CHIRPS: list[dict[str, Any]] = [
    {"amplitude": 1.5, "start_frequency": 2.0, "stop_frequency": 30.0, "length": 1.25,
     "at": 0.25, "phase": 0.4, "offset": 0.2, "sweep": sweep}
    for sweep in ("linear", "logarithmic")
]  # fmt: skip
"""Swept rows take part where no list of events is needed; more in test_chirp.py."""

MADE = [STIMULI[kind].model_validate({"kind": kind, **values}) for kind, values, _, _ in ROWS]
CHIRPED = [STIMULI["chirp"].model_validate({"kind": "chirp", **values}) for values in CHIRPS]
FORMULAS = list(zip(MADE, [row[2] for row in ROWS], [row[3] for row in ROWS], strict=True))


def _name(stimulus: object) -> str:
    return str(getattr(stimulus, "kind", ""))


def _value(stimulus: Stimulus, times: Real) -> Real:
    total = np.zeros(len(times))
    for drive in stimulus.drives((1,)):
        total += drive.values(times)
    return total


@pytest.mark.parametrize(("stimulus", "formula", "events"), FORMULAS, ids=_name)
def test_values_are_the_closed_form(
    stimulus: Stimulus, formula: Callable[[Real], Any], events: list[float]
) -> None:
    """Before zero, at zero, anywhere, at an event's own instant and one rounding beside it."""
    at = np.array([0.0, *events])
    times = np.concatenate([
        np.linspace(-0.5, 2.5, 1201), at, np.nextafter(at, -1.0), np.nextafter(at, 9.0)
    ])  # fmt: skip
    # Straight edges multiply the rounding of an instant by their slope, at most 20 / s here.
    np.testing.assert_allclose(_value(stimulus, times), formula(times), rtol=1e-12, atol=2e-14)


@pytest.mark.parametrize(("stimulus", "formula", "events"), FORMULAS, ids=_name)
def test_events_are_all_there(
    stimulus: Stimulus, formula: Callable[[Real], Any], events: list[float]
) -> None:
    """Just the expected instants in (0, END], in order."""
    found = np.unique([t for drive in stimulus.drives((1,)) for t in drive.events(0.0, END)])
    np.testing.assert_allclose(found, events, rtol=1e-15)


@pytest.mark.parametrize("stimulus", [*MADE, *CHIRPED], ids=_name)
@given(cuts=st.lists(st.floats(0.0, END), min_size=1, max_size=6), on_event=st.booleans())
@settings(max_examples=20, deadline=None)
def test_events_do_not_depend_on_cuts(
    stimulus: Stimulus, cuts: list[float], on_event: bool
) -> None:
    """(a, b] and (b, c] together hold the events of (a, c] once each, increasing."""
    for drive in stimulus.drives((1,)):
        assert isinstance(drive, PiecewiseDrive)
        whole = drive.events(0.0, END)
        at = [float(whole[int(c / END * (len(whole) - 1))]) for c in cuts if len(whole)]
        edges = np.unique([0.0, *cuts, *(at if on_event else []), END])
        parts = [drive.events(a, b) for a, b in pairwise(edges)]
        for part, (a, b) in zip(parts, pairwise(edges), strict=True):
            assert np.all((part > a) & (part <= b))
        joined = np.concatenate(parts)
        np.testing.assert_array_equal(joined, whole)
        assert np.all(np.diff(joined) > 0.0)
        assert len(drive.events(0.7, 0.7)) == 0


@pytest.mark.parametrize("stimulus", [*MADE, *CHIRPED], ids=_name)
@given(first=st.floats(0.0, END), share=st.floats(0.0, 1.0))
@settings(max_examples=40, deadline=None)
def test_states_follow_the_generator_between_events(
    stimulus: Stimulus, first: float, share: float
) -> None:
    """g(t2) = exp(G (t2 - t1)) g(t1) from any instant to just before the next event.

    The oracle is scipy.linalg.expm, itself right to 1e-11 after many turns. That no event is
    missing shows here too: the states would jump.
    """
    for drive in stimulus.drives((1,)):
        assert isinstance(drive, PiecewiseDrive)
        following = drive.events(first, END + 1.0)
        stop = min(float(following[0]) if len(following) else END + 1.0, first + 0.3)
        second = max(np.nextafter(first + share * (stop - first), 0.0), first)
        g1, g2 = drive.states(np.array([first, second]))
        moved = expm(drive.generator * (second - first)) @ g1
        size = np.max(np.abs(np.concatenate([g1, g2, [1e-3]])))
        np.testing.assert_allclose(drive.readout @ moved, drive.readout @ g2, atol=1e-10 * size)
        if drive.generator.shape[0] < 4:
            np.testing.assert_allclose(moved, g2, rtol=0, atol=1e-10 * size)


@pytest.mark.parametrize("stimulus", [*MADE, *CHIRPED], ids=_name)
def test_the_initial_value_reigns_before_zero(stimulus: Stimulus) -> None:
    """What the chain has settled on before the run is the value of every negative instant."""
    initial = sum(drive.initial for drive in stimulus.drives((1,)))
    before = _value(stimulus, np.array([-1e9, -1.0, -1e-300]))
    np.testing.assert_array_equal(before, initial)


def _kinds_in(module: str) -> set[type[Stimulus]]:
    """Return the classes with a kind of their own that a module or folder defines."""
    whole = f"{package.__name__}.{module}"
    return {
        member
        for member in vars(import_module(whole)).values()
        if isinstance(member, type)
        and issubclass(member, Stimulus)
        and (member.__module__ + ".").startswith(f"{whole}.")
        and "kind" in member.model_fields
    }


def test_every_file_is_one_row_of_the_kind_table() -> None:
    """Each module or folder that defines a kind defines one, named like it, in the table once."""
    (folder,) = package.__path__
    names = {file.stem for file in Path(folder).glob("*.py")} - {"__init__"}
    names |= {file.parent.name for file in Path(folder).glob("*/__init__.py")}
    kinds = {name: members for name in names if (members := _kinds_in(name))}
    assert kinds == {kind.replace("-", "_"): {member} for kind, member in STIMULI.items()}


def test_every_kind_has_an_example_scenario() -> None:
    """``scenarios/stimuli/<kind>.toml`` exists for each kind, uses it, and there is no other."""
    files = {file.stem: file for file in SCENARIOS.glob("*.toml")}
    assert set(files) == set(STIMULI)
    for kind, file in files.items():
        assert tomllib.loads(file.read_text(encoding="utf-8"))["stimulus"]["kind"] == kind


def test_every_kind_has_a_row_above() -> None:
    """No kind goes untested."""
    assert {kind for kind, *_ in ROWS} | {"chirp"} | ELSEWHERE == set(STIMULI)
