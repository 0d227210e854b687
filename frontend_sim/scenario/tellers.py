"""The sentences that tell of one fault, by what is wrong."""

from __future__ import annotations

from collections.abc import Callable
from difflib import get_close_matches
from typing import Any

from frontend_sim.quantities import shown
from frontend_sim.quantities.counting import counted
from frontend_sim.scenario.closest import closest
from frontend_sim.scenario.expectation import example, expected, outline
from frontend_sim.scenario.fault import MISSING, Fault
from frontend_sim.scenario.tables import homes, is_array, keys, kinds, members, tables


def _own_message(fault: Fault) -> str:
    return str(fault.context.get("error", fault.message))


def meant(fault: Fault) -> str | None:
    """Return the key of the same table that an unknown key was probably meant to be."""
    known = list(keys(fault.spot.table)) if fault.spot.table else []
    key = str(fault.path[-1])
    if homes(key):  # a key of another table is rather misplaced than misspelt
        close = get_close_matches(key, known, n=1, cutoff=0.8)
        return close[0] if close else None
    free = [name for name in known if name not in fault.above]
    return closest(key, free) or closest(key, known)


def _unknown_key(fault: Fault) -> str:
    key = str(fault.path[-1])
    if fault.path in (("stimulus",), ("chain",)):  # of a scan, else the key would be known
        return (
            "stands at the top of a file with [[channel]] tables or [scan]; every channel has its "
            f"own: move it into a [[channel]], as {_OF_CHANNEL[key]}"
        )
    likely = meant(fault)
    places = list(dict.fromkeys(table.place for table in homes(key)))
    text = "unknown table" if _is_table(fault.given) else "unknown key"
    if places:
        more = f" and {len(places) - 3} more" if len(places) > 3 else ""
        text += f" here; it belongs {', '.join(places[:3])}{more}"
    if likely is not None:
        return f"{text}; did you mean {likely!r}?"
    known = sorted(keys(fault.spot.table)) if fault.spot.table else []
    if not known or (places and "kind" not in known):
        return text
    here = "known here are" if places else "known are"
    return f"{text}; {here} {', '.join(known)}"


_OF_CHANNEL = {"stimulus": "[channel.stimulus]", "chain": "[[channel.chain]]"}


def _is_table(value: Any) -> bool:
    return isinstance(value, dict) or (
        isinstance(value, list) and value != [] and isinstance(value[0], dict)
    )


def _missing(fault: Fault) -> str:
    field, name = fault.spot.field, str(fault.path[-1])
    if field is None:
        return "missing"
    if members(field.annotation):
        header = ".".join(step for step in fault.path if isinstance(step, str))
        brackets = f"[[{header}]]" if is_array(field.annotation) else f"[{header}]"
        return f"missing; add the table {brackets} with {outline(field.annotation)}"
    given = example(name, field)
    add = f"add for instance {given}" if given else f"add {name}, {_expected_of(fault)}"
    return f"missing; {add} ({field.description})" if field.description else f"missing; {add}"


def _expected_of(fault: Fault) -> str:
    """Return what the models expect at the place of a fault, in plain words."""
    field = fault.spot.field
    whole = field is not None and not isinstance(fault.path[-1], int)
    return expected(fault.spot.annotation, field.metadata if field and whole else ())


def wrong_kind(fault: Fault) -> str:
    """Tell of a table whose kind is missing or unknown."""
    by_kind = kinds(members(fault.spot.annotation))
    known = ", ".join(by_kind)
    given = fault.given.get("kind", MISSING)
    if given is MISSING:
        return f'the kind is missing; add kind = "...", one of {known}'
    if not isinstance(given, str):
        return f"given {shown(given)}; expected text in quotes, one of {known}"
    likely = closest(given, by_kind)
    guess = f"; did you mean {likely!r}?" if likely else ""
    elsewhere = [table.header for table in tables() if table.kind == given]
    if elsewhere:
        guess = f"; it is a kind of {elsewhere[0]}"
    stop = " Known" if guess.endswith("?") else "; known"
    return f"unknown kind {shown(given)}{guess}{stop} are {known}"


def _wrong_table(fault: Fault) -> str:
    name = ".".join(step for step in fault.path if isinstance(step, str))
    if isinstance(fault.given, list) and not isinstance(fault.path[-1], int):
        return f"given as an array; there is one {name}: write [{name}] with single brackets"
    if isinstance(fault.path[-1], int):
        return f"given {shown(fault.given)}; expected a table, [[{name}]]"
    return f"given {shown(fault.given)}; expected a table, [{name}]"


def _wrong_array(fault: Fault) -> str:
    if members(fault.spot.annotation):
        name = ".".join(step for step in fault.path if isinstance(step, str))
        what = "one table" if isinstance(fault.given, dict) else shown(fault.given)
        return f"given {what}; write [[{name}]] with double brackets, once for each"
    text = f"given {shown(fault.given)}; expected {_expected_of(fault)}"
    plain = isinstance(fault.given, (str, int, float)) and not isinstance(fault.path[-1], int)
    return f"{text}; write [{shown(fault.given)}]" if plain else text


def _wrong_count(fault: Fault) -> str:
    least, most = fault.context.get("min_length"), fault.context.get("max_length")
    if isinstance(fault.path[-1], int):
        return f"given {shown(fault.given)}; expected {_expected_of(fault)}"
    limit = f"at least {least}" if least is not None else f"at most {most}"
    return f"given {counted(len(fault.given), 'item')}; expected {limit}"


def _too_long_text(fault: Fault) -> str:
    most = fault.context.get("max_length")
    return f"given a text of {len(fault.given)} characters; at most {most} are read"


def _empty_text(fault: Fault) -> str:
    return "given an empty text; write something, or leave the key out"


_LIMITS = {
    "greater_than": ("gt", "above"),
    "greater_than_equal": ("ge", "at least"),
    "less_than": ("lt", "below"),
    "less_than_equal": ("le", "at most"),
}


def _beyond_limit(fault: Fault) -> str:
    if "whole number" in _expected_of(fault):
        return wrong_value(fault)
    name, words = _LIMITS[fault.type]
    return f"given {shown(fault.given)}; must be {words} {fault.context[name]:g}"


def wrong_value(fault: Fault) -> str:
    """Tell what was given and what was expected, whatever is wrong with it."""
    wanted = _expected_of(fault)
    return f"given {shown(fault.given)}; expected {wanted}{_remedy(fault.given, wanted)}"


def _remedy(given: Any, wanted: str) -> str:
    if isinstance(given, str) and "number" in wanted and _is_number(given):
        return f"; write {given.strip()} without quotes"
    if isinstance(given, float) and given.is_integer() and "whole" in wanted:
        return f"; write {int(given)}"
    if isinstance(given, (int, float)) and not isinstance(given, bool) and "quotes" in wanted:
        return f'; write "{given}"'
    return ""


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


TELLERS: dict[str, Callable[[Fault], str]] = {
    "value_error": _own_message,
    "assertion_error": _own_message,
    "missing": _missing,
    "extra_forbidden": _unknown_key,
    "model_type": _wrong_table,
    "model_attributes_type": _wrong_table,
    "dict_type": _wrong_table,
    "tuple_type": _wrong_array,
    "too_short": _wrong_count,
    "too_long": _wrong_count,
    "string_too_long": _too_long_text,
    "string_too_short": _empty_text,
    **dict.fromkeys(_LIMITS, _beyond_limit),
}
"""Pydantic's word for what is wrong -> the function that tells of it; ``wrong_value`` tells of the
others."""
