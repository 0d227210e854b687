"""Units, and how else they are written."""

from __future__ import annotations

from frontend_sim.quantities.units import UNITS, symbols


def test_no_two_units_are_written_alike() -> None:
    """Every way to write a unit stands for one unit only."""
    written = [text for unit in UNITS for text in {*unit.symbols, unit.name}]
    assert len(written) == len(set(written))
    for unit in UNITS:
        for text in (*unit.symbols, unit.name):
            assert symbols()[text].unit is unit
    assert symbols()["min"].long == "minute"
    assert symbols()["mm"].long == "millimetre"
