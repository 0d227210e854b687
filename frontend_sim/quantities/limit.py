"""Limits of checks: a voltage, a number of LSB, or a share, kept as it was given."""

from __future__ import annotations

import re
from dataclasses import dataclass
from decimal import Decimal
from typing import TYPE_CHECKING

from pydantic import GetJsonSchemaHandler
from pydantic_core import CoreSchema

from frontend_sim.errors import QuantityError
from frontend_sim.quantities.dimension import FRACTION, LSB, VOLTAGE, Dimension
from frontend_sim.quantities.marker import Reads
from frontend_sim.quantities.reading import parse, shown
from frontend_sim.quantities.units import SHARES
from frontend_sim.quantities.writing import as_share, as_text

if TYPE_CHECKING:
    from pydantic.json_schema import JsonSchemaValue

SHARE = "1"
"""Unit of a limit that is a share of something: of a step, of the range."""

LIMIT = Dimension("limit", "V, LSB or share", '"0.5 LSB", "1 mV" or "0.1 %"')

_IN = {"V": VOLTAGE, "LSB": LSB, SHARE: FRACTION}


class Limit(float):
    """A limit on a voltage, in the unit that it was given in.

    Parameters
    ----------
    value : in ``unit``
    unit : "V", "LSB", or "1" for a share
    """

    __slots__ = ("unit",)
    unit: str

    def __new__(cls, value: float, unit: str) -> Limit:
        """Make a limit from its value and unit."""
        limit = super().__new__(cls, value)
        limit.unit = unit
        return limit

    def scale(self, lsb: float, whole: float) -> float:
        """Return the voltage that is 1 in the limit's unit [V].

        Parameters
        ----------
        lsb : width of a code [V]
        whole : what a share is a share of [V]
        """
        return {"V": 1.0, "LSB": lsb, SHARE: whole}[self.unit]

    def text(self) -> str:
        """Return the limit with its unit, as a file has it; it reads back as the same limit."""
        return as_share(self) if self.unit == SHARE else as_text(self, _IN[self.unit])

    def _key(self) -> tuple[float, str]:
        return (float(self), self.unit)

    def __eq__(self, other: object) -> bool:
        """Return whether value and unit are the same."""
        return isinstance(other, Limit) and self._key() == other._key()

    def __ne__(self, other: object) -> bool:
        """Return whether value or unit differ; float would compare the values alone."""
        return not self == other

    def __hash__(self) -> int:
        """Return the hash of value and unit."""
        return hash(self._key())

    def __repr__(self) -> str:
        """Return ``Limit(0.5, 'LSB')``."""
        return f"Limit({float(self)!r}, {self.unit!r})"

    def __reduce__(self) -> tuple[type[Limit], tuple[float, str]]:
        """Return what makes the limit again, for copies and other processes."""
        return Limit, self._key()


def parse_limit(value: object) -> Limit:
    """Read a limit: text with a unit of voltage, with ``LSB``, or with ``%``, ``ppm`` or ``ppb``.

    A bare number is refused: it could be any of the three.

    Raises
    ------
    QuantityError
        If it is no number with one of these units.
    """
    if isinstance(value, Limit):
        return value
    if not isinstance(value, str):
        number = isinstance(value, (int, float)) and not isinstance(value, bool)
        why = ", which could be in V, in LSB or a share: add the unit" if number else ""
        raise QuantityError(f"given {shown(value)}{why}; expected {LIMIT.expected}")
    written = re.search(r"[^\d\s.+-][^\d]*$", value.strip())
    unit = written.group().strip() if written else ""
    if not unit:
        raise QuantityError(f"given {shown(value)}: no unit; expected {LIMIT.expected}")
    if unit in SHARES and unit:
        return Limit(parse(value, FRACTION), SHARE)
    if unit.casefold() == "lsb":
        return Limit(parse(value[: value.rindex(unit)] + "LSB", LSB), "LSB")
    try:
        return Limit(parse(value, VOLTAGE), "V")
    except QuantityError as error:
        told = str(error).replace(f"expected {VOLTAGE.expected}", f"expected {LIMIT.expected}")
        told = told.replace(f"Expected {VOLTAGE.expected}", f"Expected {LIMIT.expected}")
        raise QuantityError(told) from None


@dataclass(frozen=True)
class ReadsLimit(Reads):
    """Pydantic marker for a limit in volts, LSB or as a share, which keeps its unit."""

    def _parsed(self, value: object) -> float:
        limit = parse_limit(value)
        complaint = self.bounds.complaint(float(limit), "")
        if complaint is not None:
            told = value.text() if isinstance(value, Limit) else shown(value)
            raise QuantityError(f"given {told}; a limit here {complaint}")
        return limit

    def plain(self, value: float) -> str:
        """Return a limit as text, which alone tells its unit."""
        return value.text() if isinstance(value, Limit) else f"{Decimal(repr(float(value)))} V"

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> JsonSchemaValue:
        """Return text with a unit; a bare number is no limit."""
        return {**super().__get_pydantic_json_schema__(schema, handler), "type": "string"}
