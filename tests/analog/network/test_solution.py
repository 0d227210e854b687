"""Circuits solved whole: degenerate ones, unstable ones, and what cancels exactly."""

from __future__ import annotations

import numpy as np
import pytest

from frontend_sim.analog.network import (
    GROUND,
    SIGNAL,
    Amplifier,
    Capacitor,
    Circuit,
    Held,
    Inductor,
    Injected,
    OpenLoop,
    Part,
    Resistor,
    solve,
)
from frontend_sim.errors import ModelError

SOURCE = Held("in", SIGNAL)


def _solve(*parts: Part) -> np.ndarray[tuple[int], np.dtype[np.complex128]]:
    return np.asarray(solve(Circuit((SOURCE, *parts), "out")).block.poles)


def test_a_divider_has_no_states() -> None:
    """1 kohm over 3 kohm: exactly three quarters, and the noise of both resistors unfiltered."""
    solution = solve(
        Circuit((SOURCE, Resistor("a", "in", "out", 1e3), Resistor("b", "out", GROUND, 3e3)), "out")
    )
    assert (solution.block.order, solution.block.d) == (0, 0.75)
    assert solution.columns["a"][1] == -0.75
    assert solution.columns["b"][1] == 0.25
    assert solution.levels[SIGNAL] == 0.75


def test_redundant_states_do_not_count() -> None:
    """Parallel capacitors, one straight across the source, inductors in series: one state each."""
    r, c = Resistor("r", "in", "out", 1e3), Capacitor("out", GROUND, 1e-6)
    np.testing.assert_allclose(_solve(r, c, c, Capacitor("in", GROUND, 1.0)), [-500.0], rtol=1e-15)
    np.testing.assert_allclose(
        _solve(
            Inductor("in", "a", 1.0),
            Inductor("a", "out", 3.0),
            Resistor("r", "out", GROUND, 8.0),
        ),
        [-2.0],
        rtol=1e-15,
    )


def test_what_nobody_sees_or_drives_is_taken_out() -> None:
    """A loop that hangs on the source, and a node between two capacitors: no poles of theirs."""
    r, c = Resistor("r", "in", "out", 1e3), Capacitor("out", GROUND, 1e-6)
    aside = (Resistor("x", "in", "b", 1e3), Capacitor("b", GROUND, 1e-3))
    np.testing.assert_allclose(_solve(r, c, *aside), [-1e3], rtol=1e-15)
    poles = _solve(
        Capacitor("in", "a", 2e-6), Capacitor("a", "out", 2e-6), Resistor("r", "out", GROUND, 1e3)
    )
    np.testing.assert_allclose(poles, [-1e3], rtol=1e-15)


def test_an_integrator_keeps_its_pole_at_the_origin() -> None:
    """An ideal amplifier with a capacitor: exactly -1/(s R C), and no level at rest."""
    solution = solve(
        Circuit(
            (
                SOURCE,
                Resistor("r", "in", "minus", 1e3),
                Capacitor("minus", "out", 1e-6),
                Amplifier("amplifier", (("minus", -1.0),), "out", OpenLoop()),
            ),
            "out",
        )
    )
    np.testing.assert_array_equal(solution.block.poles, [0.0])
    assert solution.block.c[0] * solution.block.b[0] == pytest.approx(-1e3, rel=1e-15)
    assert solution.levels[SIGNAL] is None


def test_a_differentiator_is_refused() -> None:
    """A capacitor into an ideal amplifier has a gain without bound; a bandwidth bounds it."""
    parts = (SOURCE, Capacitor("in", "minus", 1e-6), Resistor("r", "minus", "out", 1e3))
    ideal = Amplifier("amplifier", (("minus", -1.0),), "out", OpenLoop())
    with pytest.raises(ModelError, match=r"grows without bound.*gain_bandwidth"):
        solve(Circuit((*parts, ideal), "out"))
    real = Amplifier("amplifier", (("minus", -1.0),), "out", OpenLoop(gain_bandwidth=1e6))
    assert solve(Circuit((*parts, real), "out")).block.order == 2


def test_positive_feedback_is_refused() -> None:
    """An amplifier that senses its output with the wrong sign has a pole on the right."""
    wrong = Amplifier("amplifier", (("in", 1.0), ("out", 1.0)), "out", OpenLoop(None, 1e6))
    with pytest.raises(ModelError, match=r"unstable: it has a pole at 6.283e\+06 rad/s"):
        solve(Circuit((SOURCE, wrong), "out"))


@pytest.mark.parametrize(
    "parts",
    [
        (Resistor("r", "in", "a", 1e3),),
        (Held("out", SIGNAL), Held("in", "other"), Amplifier("x", (), "in", OpenLoop())),
        (Resistor("r", "in", "out", 1.0), Amplifier("x", (("in", 1.0),), "out", OpenLoop())),
    ],
    ids=["output tied to nothing", "source against amplifier", "nothing fed back"],
)
def test_circuits_without_an_answer_are_refused(parts: tuple[Part, ...]) -> None:
    """A node that hangs in the air, two sources on one node, an ideal amplifier without a loop."""
    with pytest.raises(ModelError, match="no unique answer"):
        solve(Circuit((SOURCE, *parts), "out"))


def test_a_current_becomes_a_voltage() -> None:
    """1 A into 50 ohm beside 1 uF: 50 V at rest, pole -1/(R C)."""
    solution = solve(
        Circuit(
            (
                Injected("out", SIGNAL),
                Resistor("r", "out", GROUND, 50.0),
                Capacitor("out", GROUND, 1e-6),
            ),
            "out",
        )
    )
    assert solution.levels[SIGNAL] == 50.0
    np.testing.assert_allclose(solution.block.poles, [-2e4], rtol=1e-15)


def test_the_same_circuit_is_solved_once() -> None:
    """Solutions are remembered by the values of the parts."""
    circuit = Circuit(
        (SOURCE, Resistor("r", "in", "out", 1e3), Capacitor("out", GROUND, 1.0)), "out"
    )
    again = Circuit(tuple(circuit.parts), "out")
    assert solve(circuit) is solve(again)
