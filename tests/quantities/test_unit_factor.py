"""How many of one unit another one is, against pint and its own definitions."""

from __future__ import annotations

from decimal import Decimal

import pytest

from frontend_sim.quantities.unit_factor import factor
from frontend_sim.quantities.units import PREFIXES, UNITS, Unit


@pytest.mark.parametrize("unit", [unit for unit in UNITS if unit.prefixed], ids=lambda u: u.name)
def test_prefixes_agree_with_pint(unit: Unit) -> None:
    """The short way for one unit gives what pint computes from the same definitions."""
    from frontend_sim.quantities.unit_factor import _registry

    registry, name = _registry(), unit.name
    for letter, (prefix, _) in PREFIXES.items():
        quantity = registry.Quantity(Decimal(1), registry.parse_units(prefix + name))
        written = letter + (unit.symbols or (name,))[0]
        assert factor(written, name) == quantity.to(name).m


def test_definitions_agree_with_pints_own() -> None:
    """Units and products have the same size as in the definitions that pint ships."""
    import pint

    theirs = pint.UnitRegistry()
    for ours, target in [
        ("min", "s"),
        ("h", "s"),
        ("d", "s"),
        ("V/A", "ohm"),
        ("A*s/V", "F"),
        ("V*s/A", "H"),
        ("deg", "rad"),
        ("turn", "rad"),
        ("bar", "Pa"),
        ("A/V", "S"),
        ("V*A", "W"),
        ("A*s", "C"),
    ]:
        expected = float(theirs.Quantity(1.0, ours).to(target).m)
        assert float(factor(ours, target)) == pytest.approx(expected, rel=1e-15, abs=0)
