"""The units that a scenario may use; the only module that knows pint.

Names are looked up here, case matters, and only what stands in the table is a unit: a library's
full list would read ``k`` as Boltzmann's constant and ``G`` as that of gravitation. Products and
powers of units are pint's work; a single unit with its prefix needs no pint, and so no time to
import it.
"""

from __future__ import annotations

import re
from decimal import Decimal
from difflib import get_close_matches
from functools import cache, lru_cache
from typing import TYPE_CHECKING, Any, NamedTuple

from frontend_sim.errors import QuantityError

if TYPE_CHECKING:
    from pint import UnitRegistry


class Unit(NamedTuple):
    """One row of the table of units: pint's definition, and how it may be written."""

    name: str
    noun: str
    definition: str
    symbols: tuple[str, ...]
    prefixed: bool = True


_TWO_PI = Decimal("6.28318530717958647692528676655900576839433879875021")
_DEGREE = "0.0174532925199432957692369076848861271344287188854173"

UNITS = (
    Unit("volt", "voltage", "[voltage]", ("V",)),
    Unit("ampere", "current", "[current]", ("A",)),
    Unit("second", "time", "[time]", ("s", "sec")),
    Unit("minute", "time", "60 * second", ("min",), prefixed=False),
    Unit("hour", "time", "3600 * second", ("h", "hr"), prefixed=False),
    Unit("day", "time", "86400 * second", ("d",), prefixed=False),
    Unit("hertz", "frequency", "1 / second", ("Hz",)),
    Unit("ohm", "resistance", "volt / ampere", ("ohm", "Ω", "Ohm", "Ohms")),
    Unit("farad", "capacitance", "ampere * second / volt", ("F",)),
    Unit("henry", "inductance", "volt * second / ampere", ("H",)),
    Unit("siemens", "conductance", "ampere / volt", ("S",)),
    Unit("coulomb", "charge", "ampere * second", ("C",)),
    Unit("watt", "power", "volt * ampere", ("W",)),
    Unit("radian", "angle", "[angle]", ("rad",)),
    Unit("degree", "angle", f"{_DEGREE} * radian", ("deg", "°"), prefixed=False),
    Unit("turn", "angle", f"{_TWO_PI} * radian", (), prefixed=False),
    Unit("kelvin", "temperature", "[temperature]", ("K",)),
    Unit("celsius", "temperature", "kelvin", ("degC", "°C"), prefixed=False),
    Unit("fahrenheit", "temperature", "5 / 9 * kelvin", ("degF", "°F"), prefixed=False),
    Unit("metre", "length", "[length]", ("m",)),
    Unit("newton", "force", "[force]", ("N",)),
    Unit("pascal", "pressure", "[pressure]", ("Pa",)),
    Unit("bar", "pressure", "100000 * pascal", ()),
    # Standard gravity; its kilo would be read as a mass.
    Unit("gravity", "acceleration", "9.80665 * metre / second ** 2", ("g", "g_n"), prefixed=False),
    Unit("milligravity", "acceleration", "gravity / 1000", ("mg",), prefixed=False),
    Unit("microgravity", "acceleration", "gravity / 1000000", ("ug",), prefixed=False),
)

ZEROS = {
    "celsius": (Decimal("273.15"), Decimal(1), Decimal(1)),
    "fahrenheit": (Decimal("459.67"), Decimal(5), Decimal(9)),
}
"""Units that count temperatures from a zero of their own: (t + zero) · n / d is in kelvin."""

PREFIXES = {
    "f": ("femto", Decimal("1e-15")),
    "p": ("pico", Decimal("1e-12")),
    "n": ("nano", Decimal("1e-9")),
    "u": ("micro", Decimal("1e-6")),
    "m": ("milli", Decimal("1e-3")),
    "k": ("kilo", Decimal("1e3")),
    "M": ("mega", Decimal("1e6")),
    "G": ("giga", Decimal("1e9")),
    "T": ("tera", Decimal("1e12")),
}
SHARES = {"": "1", "%": "0.01", "‰": "0.001", "permille": "0.001", "ppm": "1e-6", "ppb": "1e-9"}
"""Units of a bare number."""


class Symbol(NamedTuple):
    """What a written unit stands for: a row of the table, its prefix, and the prefix's power."""

    unit: Unit
    prefix: str
    power: Decimal

    @property
    def long(self) -> str:
        """The name in full, as pint reads it."""
        return self.prefix + self.unit.name


@cache
def symbols() -> dict[str, Symbol]:
    """Return every way to write a single unit."""
    found: dict[str, Symbol] = {}
    for unit in UNITS:
        plain = (*unit.symbols, unit.name, f"{unit.name}s")
        found.update({text: Symbol(unit, "", Decimal(1)) for text in plain})
        if unit.prefixed:
            for letter, (prefix, power) in PREFIXES.items():
                short = [letter + text for text in (*unit.symbols, *plain[-2:])]
                written = [*short, prefix + unit.name, f"{prefix}{unit.name}s"]
                found.update({text: Symbol(unit, prefix, power) for text in written})
        elif unit.name == "turn":
            found.update(dict.fromkeys(("rev", "revolution"), Symbol(unit, "", Decimal(1))))
    return found


@cache
def _registry() -> UnitRegistry[Decimal]:
    import pint

    registry: UnitRegistry[Decimal] = pint.UnitRegistry(None, non_int_type=Decimal)
    for prefix, power in PREFIXES.values():
        registry.define(f"{prefix}- = {power}")
    for unit in UNITS:
        registry.define(f"{unit.name} = {unit.definition}")
    return registry


_NAME = r"[A-Za-zΩ°]+(?:_n)?"
_POWER = r"\s*\*\*\s*(?:0\.5|-?[0-9]{1,2})(?![0-9.])"
_SUPERSCRIPTS = str.maketrans("⁻⁰¹²³⁴", "-01234")


def spell(unit: str) -> str:
    """Bring the signs of a unit into one spelling; names stay as they are."""
    unit = unit.translate(str.maketrans("\u2126\u00b5\u03bc·⋅×", "Ωuu***")).replace("^", "**")
    unit = re.sub("[⁻⁰¹²³⁴]+", lambda match: "**" + match.group().translate(_SUPERSCRIPTS), unit)
    unit = re.sub(rf"(?:\b(?:sqrt|rt)\s*\(|√\(?)\s*({_NAME})\s*\)?", r"\1**0.5", unit)
    return re.sub(r"\brt(?=[kM]?Hz\b)([kM]?Hz)", r"\1**0.5", unit)


def _in_full(spelled: str) -> str | None:
    """Return a product of units with every name in full, or None if it is no such product.

    Nothing else reaches pint, which would work out ``9**9**9**9``.
    """
    known = symbols()
    rest = re.sub(rf"{_NAME}(?:{_POWER})?", "x", spelled)
    if not re.fullmatch(r"(?:1\s*/\s*)?[x*/()\s]+", rest) or "**" in rest or len(spelled) > 60:
        return None
    if any(name not in known for name in re.findall(_NAME, spelled)):
        return None
    return re.sub(_NAME, lambda match: known[match.group()].long, spelled)


def noun_of(unit: str) -> str:
    """Return what a unit measures, ``pressure``; empty for a product of units or an unknown one."""
    symbol = symbols().get(spell(unit))
    return "" if symbol is None else symbol.unit.noun


def zero_of(unit: str) -> tuple[Decimal, Decimal, Decimal] | None:
    """Return how a temperature in this unit becomes one in kelvin, see ``ZEROS``; else None."""
    symbol = symbols().get(spell(unit))
    return None if symbol is None else ZEROS.get(symbol.unit.name)


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
            return _decimal(quantity.to("radian/second").m) / _TWO_PI
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


def suggestion(spelled: str, target: str) -> str:
    """Return ``; did you mean 'MHz' (mega) or 'mHz' (milli)?`` for what was written, or nothing."""
    if re.fullmatch(r"[kKMG]?(?:SPS|[Ss]ps|Sa?/s|samples?/s(?:ec)?)", spelled) and target == "Hz":
        return "; write samples per second in Hz"
    known = symbols()
    if target == "K" and spelled in ("C", "c", "F", "f", "°"):
        return f"; did you mean {'degF' if spelled in 'Ff' else 'degC'!r}?"
    if target not in known:
        return f"; the unit here is {target}, with SI prefixes" if target else ""
    noun = known[target].unit.noun
    fitting = {text: symbol for text, symbol in known.items() if symbol.unit.noun == noun}
    close = _close(spelled, target, fitting)
    if not close:
        units = dict.fromkeys(known[text].unit.name for text in fitting)
        short = ", ".join(next(t for t in fitting if fitting[t].unit.name == u) for u in units)
        return f"; units of {noun} are {short}, with SI prefixes"
    told = [
        f"{text!r} ({fitting[text].prefix})" if fitting[text].prefix else repr(text)
        for text in close[:3]
    ]
    return f"; did you mean {' or '.join(told)}?"


def _close(spelled: str, target: str, fitting: dict[str, Symbol]) -> list[str]:
    """Return the units of a dimension that were probably meant, the likeliest first."""
    by_case = {fitting[text]: text for text in reversed(fitting) if _same_but_case(text, spelled)}
    if by_case:
        return sorted(by_case.values(), key=lambda text: -_agreement(text, spelled))
    letters = [letter for letter in PREFIXES if letter == spelled] or [
        letter for letter in PREFIXES if _same_but_case(letter, spelled)
    ]
    if letters:
        minutes = ["min"] if spelled == "m" and "min" in fitting else []
        return [letter + target for letter in letters] + minutes
    return get_close_matches(spelled, fitting, n=1, cutoff=0.6)


def _same_but_case(one: str, other: str) -> bool:
    return one.casefold() == other.casefold()


def _agreement(one: str, other: str) -> int:
    return sum(a == b for a, b in zip(one, other, strict=False))
