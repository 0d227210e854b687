"""Passive stages in a row are told."""

from __future__ import annotations

from frontend_sim.analog.loading import unbuffered_notes
from frontend_sim.analog.stages import Buffer, Ladder, RcHighpass, RcLowpass

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
