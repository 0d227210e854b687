"""The units that a scenario may use, and how they may be written.

Names are looked up here, case matters, and only what stands in the table is a unit: a library's
full list would read ``k`` as Boltzmann's constant and ``G`` as that of gravitation. Products and
powers of units are pint's work, see ``unit_factor``; a single unit with its prefix needs no pint,
and so no time to import it.
"""

from __future__ import annotations

import re
from decimal import Decimal
from functools import cache
from typing import NamedTuple


class Unit(NamedTuple):
    """One row of the table of units: pint's definition, and how it may be written."""

    name: str
    noun: str
    definition: str
    symbols: tuple[str, ...]
    prefixed: bool = True


TWO_PI = Decimal("6.28318530717958647692528676655900576839433879875021")
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
    Unit("turn", "angle", f"{TWO_PI} * radian", (), prefixed=False),
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


NAME = r"[A-Za-zΩ°]+(?:_n)?"
"""Pattern of the name of a single unit."""

_SUPERSCRIPTS = str.maketrans("⁻⁰¹²³⁴", "-01234")


def spell(unit: str) -> str:
    """Bring the signs of a unit into one spelling; names stay as they are."""
    unit = unit.translate(str.maketrans("\u2126\u00b5\u03bc·⋅×", "Ωuu***")).replace("^", "**")
    unit = re.sub("[⁻⁰¹²³⁴]+", lambda match: "**" + match.group().translate(_SUPERSCRIPTS), unit)
    unit = re.sub(rf"(?:\b(?:sqrt|rt)\s*\(|√\(?)\s*({NAME})\s*\)?", r"\1**0.5", unit)
    return re.sub(r"\brt(?=[kM]?Hz\b)([kM]?Hz)", r"\1**0.5", unit)


def noun_of(unit: str) -> str:
    """Return what a unit measures, ``pressure``; empty for a product of units or an unknown one."""
    symbol = symbols().get(spell(unit))
    return "" if symbol is None else symbol.unit.noun


def zero_of(unit: str) -> tuple[Decimal, Decimal, Decimal] | None:
    """Return how a temperature in this unit becomes one in kelvin, see ``ZEROS``; else None."""
    symbol = symbols().get(spell(unit))
    return None if symbol is None else ZEROS.get(symbol.unit.name)
