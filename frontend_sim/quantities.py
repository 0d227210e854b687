"""Text with units becomes floats in SI; the only module that knows pint.

A quantity is written as text with its unit (``"4.7 nF"``), as a bare number in SI, or, for parts,
in the RKM code of IEC 60062 (``"4k7"``, ``"4n7"``). The arithmetic is decimal until the last step,
so ``"9.1 ms"`` becomes the float nearest to 0.0091 and events meet conversion instants exactly.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from decimal import Decimal
from functools import cache
from typing import TYPE_CHECKING, Annotated, Any

from pydantic import BeforeValidator, GetJsonSchemaHandler
from pydantic_core import CoreSchema, PydanticCustomError

from frontend_sim.errors import QuantityError

if TYPE_CHECKING:
    from pint import UnitRegistry
    from pydantic.json_schema import JsonSchemaValue

_NUMBER = re.compile(r"\s*([+-]?(?:\d[\d_]*\.?[\d_]*|\.\d+)(?:[eE][+-]?\d+)?)\s*(.*?)\s*\Z", re.S)
_RKM = re.compile(r"\s*(\d*)([A-Za-zµμ])(\d*)([A-Z]?)\s*\Z")

# IEC 60062: the letter stands in place of the decimal point. From memory, the standard was not at
# hand; lower-case k is common practice.
_RKM_LETTERS: dict[str, dict[str, str]] = {
    "ohm": {
        "L": "1e-3", "R": "1", "K": "1e3", "k": "1e3", "M": "1e6", "G": "1e9", "T": "1e12",
    },
    "F": {"p": "1e-12", "n": "1e-9", "u": "1e-6", "µ": "1e-6", "μ": "1e-6", "m": "1e-3", "F": "1"},
    "H": {"n": "1e-9", "u": "1e-6", "µ": "1e-6", "μ": "1e-6", "m": "1e-3", "H": "1"},
}  # fmt: skip


@dataclass(frozen=True)
class Dimension:
    """What a key expects: its name, its SI unit, and an example for messages."""

    name: str
    unit: str
    example: str


@dataclass(frozen=True)
class Bounds:
    """The interval that a value may lie in, in the SI unit of its dimension."""

    above: float = -math.inf
    least: float = -math.inf
    below: float = math.inf
    most: float = math.inf

    def complaint(self, value: float, unit: str) -> str | None:
        """Return what is wrong with a value, or None if it lies within the bounds."""
        suffix = f" {unit}" if unit else ""
        if not value > self.above:
            return f"must be above {self.above:g}{suffix}"
        if not value >= self.least:
            return f"must be at least {self.least:g}{suffix}"
        if not value < self.below:
            return f"must be below {self.below:g}{suffix}"
        if not value <= self.most:
            return f"must be at most {self.most:g}{suffix}"
        return None


@cache
def _registry() -> UnitRegistry[Decimal]:
    import pint

    return pint.UnitRegistry(non_int_type=Decimal, autoconvert_offset_to_baseunit=False)


def _spell(unit: str) -> str:
    """Bring a unit into the spelling that pint reads."""
    unit = re.sub(r"(?<![A-Za-z])([kMGmT]?)Ohms?\b", r"\1ohm", unit)
    unit = unit.replace("Ω", "ohm").replace("Ω", "ohm").replace("²", "**2").replace("·", "*")
    unit = re.sub(r"sqrt\(([^()]*)\)|√\(?([A-Za-z]+)\)?", r"(\1\2)**0.5", unit)
    return unit.replace("^", "**").replace("‰", "permille")


_WITHOUT_DIMENSION = {"": "1", "%": "0.01", "ppm": "1e-6", "permille": "1e-3"}


@cache
def _factor(unit: str, target: str) -> Decimal:
    """Return how many ``target`` units one ``unit`` is.

    Raises QuantityError if the unit is unknown or of another dimension.
    """
    import pint

    spelled = _spell(unit)
    if target == "":
        if spelled in _WITHOUT_DIMENSION:
            return Decimal(_WITHOUT_DIMENSION[spelled])
        if spelled in ("V/V", "mV/V"):
            return Decimal(1) if spelled == "V/V" else Decimal("1e-3")
    if target == "Hz" and "rad" in spelled:
        turns = _factor(re.sub(r"\brad(ian)?\b", "Hz*s", spelled), "Hz")
        return turns / Decimal("6.283185307179586476925286766559")
    if target == "Hz" and re.search(r"rpm|rev|turn|cycle", spelled):
        raise QuantityError(f"the unit {unit!r} is ambiguous here; write it in Hz")
    try:
        parsed = _registry().parse_units(spelled)
        if parsed.dimensionless and target != "" and target != "rad":
            raise QuantityError(f"{unit!r} has no dimension")
        return Decimal(_registry().Quantity(Decimal(1), parsed).to(target or "dimensionless").m)
    except pint.DimensionalityError:
        raise QuantityError(f"{unit!r} is of another dimension") from None
    except QuantityError:
        raise
    except Exception:  # noqa: BLE001 - pint raises a dozen kinds for text that is no unit
        raise QuantityError(f"{unit!r} is not a known unit") from None


def _from_rkm(text: str, unit: str) -> float | None:
    match = _RKM.match(text)
    letters = _RKM_LETTERS.get(unit)
    if match is None or letters is None:
        return None
    whole, letter, fraction, tolerance = match.groups()
    if letter not in letters or not (whole or fraction):
        return None
    if tolerance:
        raise QuantityError(
            f"{text!r} carries the tolerance letter {tolerance!r} of IEC 60062, which is not read "
            f"here; write {text.strip()[:-1]!r}"
        )
    return float(Decimal(f"{whole or '0'}.{fraction or '0'}") * Decimal(letters[letter]))


def parse(value: object, dimension: Dimension) -> float:
    """Read one quantity into its SI unit.

    Parameters
    ----------
    value
        Text with a unit, RKM code for parts, or a bare number which is taken as SI.
    dimension
        What is expected.

    Returns
    -------
    The value in ``dimension.unit``.

    Raises
    ------
    QuantityError
        If the text is no number with a unit, the unit is unknown or of another dimension, or the
        number is not finite. The message tells what was given and what was expected.
    """
    expected = f"expected a {dimension.name}, for instance {dimension.example}"
    if isinstance(value, bool) or not isinstance(value, (int, float, str)):
        raise QuantityError(f"given {value!r}; {expected}")
    if isinstance(value, str):
        try:
            number = _parse_text(value, dimension)
        except QuantityError as error:
            raise QuantityError(f"given {value!r}: {error}; {expected}") from None
    else:
        number = float(value)
    if not math.isfinite(number):
        raise QuantityError(f"given {value!r}, which is not finite; {expected}")
    return number


def _parse_text(text: str, dimension: Dimension) -> float:
    rkm = _from_rkm(text, dimension.unit)
    if rkm is not None:
        return rkm
    match = _NUMBER.match(text)
    if match is None:
        raise QuantityError("not a number with a unit")
    number, unit = match.groups()
    if unit.startswith(",") or re.match(r"\s*,\d", unit):
        raise QuantityError("write the decimal point as '.'")
    if unit == "dB" and dimension is RATIO:
        return float(10.0 ** (float(number) / 20.0))
    if unit == "" and dimension.unit not in ("", "dB"):
        raise QuantityError(f"text needs a unit, or write the bare number in {dimension.unit}")
    if dimension.unit == "dB":
        if unit not in ("", "dB"):
            raise QuantityError(f"{unit!r} is not dB")
        return float(number)
    return float(Decimal(number.replace("_", "")) * _factor(unit, dimension.unit))


@dataclass(frozen=True)
class _Reads:
    """Pydantic marker: read the quantity, check its bounds, and describe it in the JSON Schema."""

    dimension: Dimension
    bounds: Bounds

    def read(self, value: object) -> float:
        try:
            number = parse(value, self.dimension)
        except QuantityError as error:
            raise PydanticCustomError("quantity", "{reason}", {"reason": str(error)}) from None
        complaint = self.bounds.complaint(number, self.dimension.unit)
        if complaint is not None:
            raise PydanticCustomError(
                "quantity",
                "{reason}",
                {"reason": f"given {value!r}; a {self.dimension.name} here {complaint}"},
            )
        return number

    def __get_pydantic_core_schema__(self, source: Any, handler: Any) -> CoreSchema:  # noqa: ANN401
        inner: CoreSchema = handler(Annotated[source, BeforeValidator(self.read)])
        return inner

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> JsonSchemaValue:
        result: JsonSchemaValue = {
            "type": ["string", "number"],
            "unit": self.dimension.unit or "1",
            "quantity": self.dimension.name,
            "examples": re.findall(r'"([^"]+)"', self.dimension.example),
        }
        return result


RESISTANCE = Dimension("resistance", "ohm", '"10 kohm" or "4k7"')
CAPACITANCE = Dimension("capacitance", "F", '"4.7 nF" or "4n7"')
INDUCTANCE = Dimension("inductance", "H", '"10 uH"')
VOLTAGE = Dimension("voltage", "V", '"3.3 V"')
TIME = Dimension("time", "s", '"2 ms"')
FREQUENCY = Dimension("frequency", "Hz", '"20 kHz"')
SLOPE = Dimension("slope", "V/s", '"2 V/ms"')
ANGLE = Dimension("angle", "rad", '"90 deg"')
RATIO = Dimension("ratio", "", '2, "0.1 %" or "6 dB"')
FRACTION = Dimension("fraction", "", '"0.1 %" or "50 ppm"')
DECIBEL = Dimension("level in dB", "dB", '"0.5 dB"')

_POSITIVE = Bounds(above=0.0)
_NOT_NEGATIVE = Bounds(least=0.0)

Resistance = Annotated[float, _Reads(RESISTANCE, _POSITIVE)]
Capacitance = Annotated[float, _Reads(CAPACITANCE, _POSITIVE)]
Inductance = Annotated[float, _Reads(INDUCTANCE, _POSITIVE)]
Voltage = Annotated[float, _Reads(VOLTAGE, Bounds())]
PositiveVoltage = Annotated[float, _Reads(VOLTAGE, _POSITIVE)]
NotNegativeVoltage = Annotated[float, _Reads(VOLTAGE, _NOT_NEGATIVE)]
Instant = Annotated[float, _Reads(TIME, Bounds())]
Time = Annotated[float, _Reads(TIME, _NOT_NEGATIVE)]
PositiveTime = Annotated[float, _Reads(TIME, _POSITIVE)]
Frequency = Annotated[float, _Reads(FREQUENCY, _POSITIVE)]
Slope = Annotated[float, _Reads(SLOPE, Bounds())]
Angle = Annotated[float, _Reads(ANGLE, Bounds())]
Ratio = Annotated[float, _Reads(RATIO, Bounds())]
PositiveRatio = Annotated[float, _Reads(RATIO, _POSITIVE)]
Fraction = Annotated[float, _Reads(FRACTION, Bounds())]
PositiveDecibel = Annotated[float, _Reads(DECIBEL, _POSITIVE)]
