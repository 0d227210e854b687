"""Which unit was meant by one that is none, or one of something else."""

from __future__ import annotations

import re
from difflib import get_close_matches

from frontend_sim.quantities.units import PREFIXES, Symbol, symbols


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
