"""Passive stages in a row are told."""

from __future__ import annotations

import pytest

from frontend_sim.analog.loading import unbuffered_notes
from frontend_sim.analog.stages import Buffer, Ladder, RcHighpass, RcLowpass
from frontend_sim.analog.stages.ac_coupled_source import AcCoupledSource
from frontend_sim.analog.stages.base import Stage
from frontend_sim.analog.stages.potentiometer import Potentiometer
from frontend_sim.analog.stages.thermocouple import Thermocouple

LOW = RcLowpass(resistance=1e4, capacitance=1e-8)
HIGH = RcHighpass(resistance=1e4, capacitance=1e-6, name="coupling")
LADDER = Ladder.model_validate({"element": [{"place": "series", "resistance": 1e3}]})


def test_every_two_passive_neighbours_are_told() -> None:
    """Three in a row are two notes, with the names of the stages; a buffer between them is none."""
    notes = unbuffered_notes([LOW, HIGH, LADDER])
    assert len(notes) == 2
    assert "'1 rc-lowpass' and 'coupling' are passive" in notes[0]
    assert "'coupling' and '3 ladder' are passive" in notes[1]
    assert unbuffered_notes([LOW, Buffer(), HIGH]) == ()
    assert unbuffered_notes([LADDER]) == ()


@pytest.mark.parametrize(
    ("sensor", "cure"),
    [
        (Potentiometer(resistance=1e4, excitation_voltage=3.0), "put the 2.5 kohm of the first"),
        (Thermocouple(type="K", resistance=50.0), "put the 50 ohm of the first into the second"),
        (AcCoupledSource(capacitance=1e-6, load_resistance=4.7e4), "other: put a buffer between"),
    ],
)
def test_sensors_are_loaded_too(sensor: Stage, cure: str) -> None:
    """A resistance may be counted in the next stage, unless a capacitor lies before it."""
    (note,) = unbuffered_notes([sensor, LOW])
    assert cure in note


def test_sensors_without_a_resistance_are_not() -> None:
    """Nothing is known to be loaded, and an amplifier does not load."""
    assert unbuffered_notes([Thermocouple(type="K"), LOW]) == ()
    assert unbuffered_notes([Thermocouple(type="K", resistance=50.0), Buffer(), LOW]) == ()
