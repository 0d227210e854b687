"""How far two runs may differ before it matters, as a user writes it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from frontend_sim.errors import InputError, QuantityError
from frontend_sim.quantities import (
    FRACTION,
    FREQUENCY,
    RESISTANCE,
    SLOPE,
    TIME,
    VOLTAGE,
    Limit,
    parse,
    shown,
)
from frontend_sim.quantities.limit import parse_limit

_DIMENSIONS = {
    dimension.unit: dimension for dimension in (TIME, VOLTAGE, FREQUENCY, RESISTANCE, SLOPE)
}
"""Units of results that take prefixes."""

HOW = (
    '"0.1 LSB", "1 mV" for pin, codes and waveforms, "2 %" for every measure, or '
    '"NAME=0.5 dB" for one measure or check'
)


@dataclass(frozen=True)
class Tolerances:
    """What may differ.

    Parameters
    ----------
    signal : for pin, codes and waveforms; None is none
    every : share of its value by which every measure may differ; None is none
    named : name of a measure or check -> text with a unit, or with %
    """

    signal: Limit | None = None
    every: float | None = None
    named: Mapping[str, str] = field(default_factory=dict)

    @property
    def given(self) -> bool:
        """Whether there is any."""
        return self.signal is not None or self.every is not None or bool(self.named)

    def of_signal(self, unit: str, lsb: float, whole: float) -> float:
        """Return the tolerance of a signal in a unit, V or LSB.

        Parameters
        ----------
        lsb : width of a code [V];  whole : width of the range [V]
        """
        if self.signal is None:
            return 0.0
        return self.signal * self.signal.scale(lsb, whole) / (lsb if unit == "LSB" else 1.0)

    def of_result(self, name: str, unit: str, value: float) -> float:
        """Return the tolerance of a result, in its unit.

        Parameters
        ----------
        value : what the first run has, which a share is a share of

        Raises
        ------
        InputError
            If the tolerance has another unit than the result.
        """
        text = self.named.get(name)
        if text is None:
            return 0.0 if self.every is None else self.every * abs(value)
        try:
            return _read(text, unit, value)
        except (QuantityError, ValueError):
            raise InputError(
                f"the tolerance {name}={text} does not fit: {name} is measured in "
                f"{'plain numbers' if unit in ('', '1') else unit}; give such a value, or a share "
                "such as 2 %"
            ) from None

    def refuse_unknown(self, names: Iterable[str]) -> None:
        """Raise InputError if a tolerance names no result."""
        known = list(dict.fromkeys(names))
        for name in self.named:
            if name not in known:
                from frontend_sim.errors import nearest

                raise InputError(
                    f"the tolerance {name}={self.named[name]} names no measure or check of these "
                    f"runs{nearest(name, known)}"
                )


def parse_tolerances(texts: Iterable[str]) -> Tolerances:
    """Read tolerances as a user writes them.

    Raises
    ------
    InputError
        If one of them is none.
    """
    signal: Limit | None = None
    every: float | None = None
    named: dict[str, str] = {}
    for text in texts:
        name, separator, value = text.rpartition("=")
        if separator:
            named[name.strip()] = value.strip()
            continue
        try:
            if text.strip().endswith("%"):
                every = parse(text, FRACTION)
            else:
                signal = parse_limit(text)
            lowest = every if text.strip().endswith("%") else signal
        except QuantityError:
            raise InputError(f"{shown(text)} is no tolerance; write {HOW}") from None
        if lowest is None or lowest < 0.0:
            raise InputError(f"{shown(text)} is no tolerance: it is below zero; write {HOW}")
    return Tolerances(signal, every, named)


def _read(text: str, unit: str, value: float) -> float:
    if text.endswith("%"):
        found = float(text[:-1]) / 100.0 * abs(value)
    elif unit in _DIMENSIONS:
        found = parse(text, _DIMENSIONS[unit])
    else:
        plain = unit in ("", "1")
        bare = text if plain or text == text.removesuffix(unit) else text.removesuffix(unit)
        found = float(bare)
    if not found >= 0.0:
        raise ValueError(text)
    return found
