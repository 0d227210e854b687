"""How many of one unit another one is; the only module that knows pint."""

from __future__ import annotations

import re
from decimal import Decimal
from functools import cache, lru_cache
from typing import TYPE_CHECKING, Any

from frontend_sim.errors import QuantityError
from frontend_sim.quantities.unit_suggestion import suggestion
from frontend_sim.quantities.units import NAME, PREFIXES, SHARES, TWO_PI, UNITS, spell, symbols

if TYPE_CHECKING:
    from pint import UnitRegistry

_POWER = r"\s*\*\*\s*(?:0\.5|-?[0-9]{1,2})(?![0-9.])"


@lru_cache(maxsize=1024)
def factor(unit: str, target: str) -> Decimal:
    """Return how many ``target`` units one ``unit`` is.

    Raises
    ------
    QuantityError
        If the unit is unknown, ambiguous or of another dimension; the message names the nearest.
    """
    spelled = spell(unit)
    if unit == target or (target == "" and spelled in SHARES):
        return Decimal(SHARES.get(spelled, 1))
    share = re.fullmatch(r"(\D+?)\s*/\s*(.+)", spelled) if target.startswith("1/") else None
    if share is not None and share[1] in SHARES:  # ppm/K
        return Decimal(SHARES[share[1]]) * factor(f"1/{share[2]}", target)
    known = symbols()
    if spelled in known and target in known and known[spelled].unit is known[target].unit:
        return known[spelled].power / known[target].power
    full, wanted = _in_full(spelled), _in_full(spell(target)) or ""
    if full is None:
        raise QuantityError(f"{unit!r} is not a known unit{suggestion(spelled, target)}")
    converted = _converted(full, wanted)
    if converted is None:
        noun = known[spelled].unit.noun if spelled in known else ""
        what = f"is a unit of {noun}" if noun else "is of another dimension"
        raise QuantityError(f"{unit!r} {what}{suggestion(spelled, target)}")
    return converted


def _converted(full: str, wanted: str) -> Decimal | None:
    """Return the factor between two products of units, None where their dimensions differ.

    An angle per time is a frequency by its turns: 2 pi rad/s is 1 Hz.
    """
    import pint

    registry = _registry()
    try:
        quantity = registry.Quantity(Decimal(1), registry.parse_units(full))
        if wanted == "hertz" and quantity.check("[angle]/[time]"):
            return _decimal(quantity.to("radian/second").m) / TWO_PI
        converted = _decimal(quantity.to(wanted or "dimensionless").m)
    except pint.DimensionalityError:
        return None
    except Exception:  # noqa: BLE001 - pint raises a dozen kinds, for instance at a lone bracket
        raise QuantityError("the unit cannot be read") from None
    if wanted == "hertz" and "hertz" not in full:
        raise QuantityError("the unit is ambiguous here; write Hz, or rad/s")
    return converted


def _decimal(value: Any) -> Decimal:
    return value if isinstance(value, Decimal) else Decimal(str(value))


def _in_full(spelled: str) -> str | None:
    """Return a product of units with every name in full, or None if it is no such product.

    Nothing else reaches pint, which would work out ``9**9**9**9``.
    """
    known = symbols()
    rest = re.sub(rf"{NAME}(?:{_POWER})?", "x", spelled)
    if not re.fullmatch(r"(?:1\s*/\s*)?[x*/()\s]+", rest) or "**" in rest or len(spelled) > 60:
        return None
    if any(name not in known for name in re.findall(NAME, spelled)):
        return None
    return re.sub(NAME, lambda match: known[match.group()].long, spelled)


@cache
def _registry() -> UnitRegistry[Decimal]:
    import pint

    registry: UnitRegistry[Decimal] = pint.UnitRegistry(None, non_int_type=Decimal)
    for prefix, power in PREFIXES.values():
        registry.define(f"{prefix}- = {power}")
    for unit in UNITS:
        registry.define(f"{unit.name} = {unit.definition}")
    return registry
