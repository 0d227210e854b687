"""Every kind of stage: its response against its formula, and its place in every list of kinds."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from importlib import import_module
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

import frontend_sim.analog.stages as package
from frontend_sim.analog.chain import chain_of
from frontend_sim.analog.stages import STAGES
from frontend_sim.analog.stages.base import Stage

Complex = NDArray[np.complex128]
Formula = Callable[[Complex], Any]

SHARED = {
    "base",
    "filters",
    "operational_amplifier",
    "amplifier_stage",
    "network_stage",
    "active_filter",
    "feedback_amplifier",
    "temperature_sensor",
}
"""Modules of the folder that are no kind, among others."""

SCENARIOS = Path(__file__).parents[3] / "scenarios" / "stages"

F = 1e3
W = 2.0 * np.pi * F
DECADES = np.logspace(-4, 4, 65)
"""Eight decades around F, where the stages below have their corners."""

LOWER, UPPER = 700.0, 1600.0


def _butterworth3(p: Complex) -> Any:
    """1/((p + 1)(p² + p + 1))."""
    return 1.0 / ((p + 1.0) * (p * p + p + 1.0))


def _bessel3(p: Complex) -> Any:
    """15/(q³ + 6q² + 15q + 15), q = p times the -3 dB corner, where |q³ + ...|² = 2 · 15²."""
    corner = np.sqrt(max(np.roots([1.0, 6.0, 45.0, -225.0]).real))
    q = p * corner
    return 15.0 / (((q + 6.0) * q + 15.0) * q + 15.0)


def _chebyshev2(p: Complex) -> Any:
    """Poles: the left roots of 1 + e² T_2(p/j)² = 1 + e² (2p² + 1)², of 1 dB ripple."""
    e2 = 10.0**0.1 - 1.0
    roots = np.roots([4.0 * e2, 0.0, 4.0 * e2, 0.0, e2 + 1.0])
    left = roots[roots.real < 0.0]
    return 10.0**-0.05 * np.prod(left).real / np.prod([p - root for root in left], axis=0)


def _band(s: Complex) -> Any:
    return (s * s + W**2 * LOWER * UPPER / F**2) / (2.0 * np.pi * (UPPER - LOWER) * s)


def _section(s: Complex, q: float) -> Any:
    return s * s + s * W / q + W * W


BAND = {"lower_corner": LOWER, "upper_corner": UPPER}
BUTTERWORTH = {"order": 3, "corner": F}

ROWS: list[tuple[str, dict[str, Any], Formula]] = [
    ("rc-lowpass", {"resistance": 1e4, "capacitance": 1.59e-8}, lambda s: 1 / (1 + s * 1.59e-4)),
    ("rc-highpass", {"resistance": "4k7", "capacitance": "33n"},
     lambda s: s * 4700 * 33e-9 / (1 + s * 4700 * 33e-9)),
    ("gain", {"gain": -7.5}, lambda s: -7.5 + 0 * s),
    ("gain", {"gain": "20 dB"}, lambda s: 10 + 0 * s),
    ("noninverting-amplifier", {"gain": 3}, lambda s: 3 + 0 * s),
    ("noninverting-amplifier", {"gain": 5, "gain_bandwidth": 5e3}, lambda s: 5 / (1 + s / W)),
    ("noninverting-amplifier",
     {"feedback_resistance": 9e3, "ground_resistance": 1e3, "gain_bandwidth": 2e4},
     lambda s: 10 / (1 + s * 10 / (2 * np.pi * 2e4))),
    ("inverting-amplifier", {"gain": -4}, lambda s: -4 + 0 * s),
    ("inverting-amplifier", {"gain": -4, "gain_bandwidth": 5e3}, lambda s: -4 / (1 + s / W)),
    ("inverting-amplifier",
     {"feedback_resistance": 1e4, "input_resistance": 1e4, "gain_bandwidth": 2e3},
     lambda s: -1 / (1 + s * 2 / (2 * np.pi * 2e3))),
    ("buffer", {"gain_bandwidth": F}, lambda s: 1 / (1 + s / W)),
    ("difference-amplifier",
     {"input_resistance": 1e3, "feedback_resistance": 4e3, "noninverting_input_resistance": 1e3,
      "reference_resistance": 4e3}, lambda s: 4 + 0 * s),
    ("transimpedance-amplifier", {"feedback_resistance": 1e5, "feedback_capacitance": 2e-9},
     lambda s: -1e5 / (1 + s * 2e-4)),
    ("ladder",
     {"element": 2 * [{"place": "series", "resistance": 1e4},
                      {"place": "shunt", "capacitance": 1e-8}]},
     lambda s: 1 / (1 + 3e-4 * s + (1e-4 * s) ** 2)),
    ("sallen-key",
     {"resistance_1": 1e4, "resistance_2": 1e4, "capacitance_1": 2e-8, "capacitance_2": 1e-8},
     lambda s: 1 / (1 + 2e-4 * s + 2 * (1e-4 * s) ** 2)),
    ("multiple-feedback",
     {"response": "band-pass", "input_resistance": 1e4, "feedback_resistance": 8e4,
      "feedback_capacitance": 1e-8, "middle_capacitance": 1e-8},
     lambda s: -8e-4 * s / (1 + 2e-4 * s + 8 * (1e-4 * s) ** 2)),
    ("twin-t-notch",
     {"resistance_1": 1e4, "resistance_2": 1e4, "shunt_resistance": 5e3, "capacitance_1": 1e-8,
      "capacitance_2": 1e-8, "shunt_capacitance": 2e-8},
     lambda s: (s * s + 1e8) / (s * s + 4e4 * s + 1e8)),
    *(("second-order", {"corner": F, "quality_factor": q, "gain": 2},
       lambda s, q=q: 2 * W * W / _section(s, q)) for q in (0.2, 0.5, 0.51, 5.0, 1e3)),
    ("second-order", {"corner": F, "quality_factor": 0.3, "response": "high-pass"},
     lambda s: s * s / _section(s, 0.3)),
    ("second-order", {"corner": F, "quality_factor": 4, "response": "band-pass"},
     lambda s: s * W / 4 / _section(s, 4)),
    ("second-order", {"corner": F, "quality_factor": 0.4, "response": "notch"},
     lambda s: (s - 1j * W) * (s + 1j * W) / _section(s, 0.4)),
    ("butterworth", BUTTERWORTH, lambda s: _butterworth3(s / W)),
    ("butterworth", {**BUTTERWORTH, "response": "high-pass"}, lambda s: _butterworth3(W / s)),
    ("butterworth", {"order": 3, "response": "band-pass", **BAND},
     lambda s: _butterworth3(_band(s))),
    ("butterworth", {"order": 3, "response": "band-stop", **BAND},
     lambda s: _butterworth3(1 / _band(s))),
    ("bessel", {"order": 3, "corner": F}, lambda s: _bessel3(s / W)),
    ("bessel", {"order": 3, "corner": F, "response": "high-pass"}, lambda s: _bessel3(W / s)),
    ("bessel", {"order": 3, "response": "band-pass", **BAND}, lambda s: _bessel3(_band(s))),
    ("chebyshev", {"order": 2, "ripple": "1 dB", "corner": F}, lambda s: _chebyshev2(s / W)),
    ("chebyshev", {"order": 2, "ripple": 1, "response": "band-stop", **BAND},
     lambda s: _chebyshev2(1 / _band(s))),
    ("poles-zeros",
     {"poles": [-W, [-W, 2 * W], [-W, -2 * W], 0.0], "zeros": [-3 * W, -0.2 * W], "gain": 1e6},
     lambda s: 1e6 * (s + 3 * W) * (s + 0.2 * W) / ((s + W) * ((s + W) ** 2 + 4 * W * W) * s)),
    ("poles-zeros", {"poles": [-W, -W, -W], "gain": 1e9}, lambda s: 1e9 / (s + W) ** 3),
    ("poles-zeros", {"gain": 4}, lambda s: 4 + 0 * s),
    ("polynomial", {"numerator": [5.0], "denominator": [1e-12, 4e-9, 6e-6, 4e-3, 1.0]},
     lambda s: 5 / (1 + s * 1e-3) ** 4),
    ("polynomial", {"numerator": [2.0, 0.0], "denominator": [0.0, 1.0, 3e3]},
     lambda s: 2 * s / (s + 3e3)),
    ("polynomial", {"numerator": [0.0], "denominator": [1.0, 3e3]}, lambda s: 0 * s),
    ("transport-delay", {"delay": "0.1 ms"}, lambda s: np.exp(-s * 1e-4)),
    ("thermal-lag", {"time_constant": "0.2 ms"}, lambda s: 1 / (1 + s * 2e-4)),
    ("rtd", {"excitation_current": "1 mA", "operating_temperature": "0 degC"},
     lambda s: 0.1 * 3.9083e-3 + 0 * s),
    ("thermistor",
     {"nominal_resistance": 1e4, "beta": 3000, "nominal_temperature": 300, "excitation_voltage": 3,
      "series_resistance": 1e4, "operating_temperature": 300}, lambda s: -0.75 / 30 + 0 * s),
    ("thermocouple", {"type": "T", "operating_temperature": "0 degC"},
     lambda s: 0.387481063640e-4 + 0 * s),
    *(("accelerometer",
       {"sensitivity": "-1 V/g", "natural_frequency": F, "quality_factor": q},
       lambda s, q=q: -W * W / 9.80665 / _section(s, q)) for q in (0.3, 0.5, 5.0)),
    ("resistive-bridge", {"sensitivity": "2 mV/V", "full_scale": "10 bar", "excitation": "5 V"},
     lambda s: 1e-8 + 0 * s),
    ("potentiometer", {"resistance": 1e4, "excitation_voltage": 3}, lambda s: 3 + 0 * s),
    ("potentiometer",
     {"resistance": 1e4, "excitation_voltage": 3, "wiper_resistance": 500, "load_resistance": 3e3,
      "load_capacitance": "100 nF"}, lambda s: 1.5 / (1 + s * 1.5e-4)),
    ("photodiode", {"responsivity": "-0.5 A/W"}, lambda s: -0.5 + 0 * s),
    ("photodiode",
     {"responsivity": 0.5, "load_resistance": 1e6, "junction_capacitance": "100 pF"},
     lambda s: 5e5 / (1 + s * 1e-4)),
    ("current-shunt", {"resistance": 1e-3}, lambda s: 1e-3 + 0 * s),
    ("current-shunt",
     {"resistance": 1e-3, "inductance": 1e-8, "filter_resistance": 1e3, "filter_capacitance": 1e-9},
     lambda s: (1e-3 + s * 1e-8) / (1 + s * 1e-6)),
    ("ac-coupled-source",
     {"source_resistance": 2e3, "capacitance": 1e-8, "load_resistance": 1e4},
     lambda s: s * 1e-4 / (1 + s * 1.2e-4)),
    ("rail-limit", {"low": "-1 V", "high": 3}, lambda s: 1 + 0 * s),
    ("slew-limit", {"slew_rate": "1 V/us"}, lambda s: 1 + 0 * s),
    ("slew-limit", {"slew_rate": 1e6, "bandwidth": F}, lambda s: 1 / (1 + s / W)),
    ("clamp", {"high": 3}, lambda s: 1 + 0 * s),
    ("clamp",
     {"low": 0, "high": 3, "resistance": 1e4, "capacitance": 1e-8, "diode_resistance": 50},
     lambda s: 1 / (1 + s * 1e-4)),
]  # fmt: skip


@pytest.mark.parametrize(
    ("kind", "values", "formula"), ROWS, ids=lambda v: v if isinstance(v, str) else ""
)
def test_response_is_the_formula(kind: str, values: dict[str, Any], formula: Formula) -> None:
    """Over eight decades, to 1e-9 of the value; at a notch's own frequency to 1e-15 of the gain."""
    stage = STAGES[kind].model_validate({"kind": kind, **values})
    f = F * DECADES
    found = chain_of([stage]).response(f)
    true = formula(2j * np.pi * f)
    atol = 1e-15 * np.max(np.abs(true)) if "notch" in values.values() else 0.0
    np.testing.assert_allclose(found, true, rtol=1e-9, atol=atol)


def _kinds_in(module: str) -> list[type[Stage]]:
    """Return the classes with a kind of their own that a module of the folder defines."""
    members = vars(import_module(f"{package.__name__}.{module}")).values()
    return [
        member
        for member in members
        if isinstance(member, type)
        and issubclass(member, Stage)
        and member.__module__.endswith(f".{module}")
        and "kind" in member.model_fields
    ]


def test_every_file_is_one_row_of_the_kind_table() -> None:
    """Each file that defines a kind defines one, is named like it, and is in the table once."""
    (folder,) = package.__path__
    found = {file.stem: _kinds_in(file.stem) for file in Path(folder).glob("*.py")}
    kinds = {module: members[0] for module, members in found.items() if members}
    assert all(len(members) <= 1 for members in found.values())
    assert kinds == {kind.replace("-", "_"): stage for kind, stage in STAGES.items()}
    assert set(found) - set(kinds) >= SHARED


def test_every_kind_has_an_example_scenario() -> None:
    """``scenarios/stages/<kind>.toml`` exists for each kind, uses it, and there is no other."""
    files = {file.stem: file for file in SCENARIOS.glob("*.toml")}
    assert set(files) == set(STAGES)
    for kind, file in files.items():
        stages = tomllib.loads(file.read_text(encoding="utf-8"))["chain"]
        assert kind in {stage["kind"] for stage in stages}


def test_every_kind_has_a_row_above() -> None:
    """No kind goes untested."""
    assert {kind for kind, _, _ in ROWS} == set(STAGES)
