"""One table of the settings: what it may hold, read into its model, with everything that is wrong in it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Generic, TypeVar

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from holdsteady.project.faults import Fault, nearest, shown
from holdsteady.project.not_yet import NOT_YET, refused
from holdsteady.project.rule_sets import read_rules
from holdsteady.project.settings import (
    Baseline,
    GivenLimits,
    Model,
    Plausible,
    Specification,
    Subgroup,
)
from holdsteady.project.toml_lines import KeyPath

AnyModel = TypeVar("AnyModel", bound=Model)

_NESTED: Mapping[str, type[Model]] = {
    "specification": Specification, "limits": GivenLimits, "baseline": Baseline, "subgroup": Subgroup,
    "plausible": Plausible,
}  # fmt: skip
_HISTORIES = ("specification", "limits")  # one table, or a list of them, each with `from`

_NUMBER = ("must be a number", "Write a number, without quotes.")
_WHOLE = ("must be a whole number", "Write a whole number, without quotes.")
_TABLE = ("must be a table", "Write it in braces, as in { key = value }.")
# What pydantic found, in our words: what is allowed, and what to do.
_SAID: Mapping[str, tuple[str, str]] = {
    "string_type": ("must be text", "Write it in quotes."),
    "int_type": _WHOLE,
    "int_from_float": _WHOLE,
    "float_type": _NUMBER,
    "finite_number": ("must be a finite number", "Write a number, or leave the key out."),
    "bool_type": ("must be true or false", "Write true or false, without quotes."),
    "tuple_type": ("must be a list", 'Write it in square brackets, as in ["a", "b"].'),
    "model_type": _TABLE,
    "dict_type": _TABLE,
    "greater_than": ("must be above {gt:g}", "Give a larger number."),
    "greater_than_equal": ("must be at least {ge:g}", "Give a larger number."),
    "less_than_equal": ("must be at most {le:g}", "Give a smaller number."),
    "string_pattern_mismatch": (
        "may hold letters, digits, - and _ alone",
        "Choose another name; a `title` may hold anything.",
    ),
    "string_too_short": ("must not be empty", "Name something, or leave the key out."),
    "too_short": ("must hold at least one item", "Name something, or leave the key out."),
}
_EMPTY = ("string_too_short", "too_short")


@dataclass(frozen=True, slots=True, kw_only=True)
class ReadTable(Generic[AnyModel]):
    """A table as far as it could be read.

    `raw` holds the keys that could be used, ready for the model; `failed` those that could not, or are
    missing; `model` is made from `raw`, with stand-ins for what is missing.
    """

    model: AnyModel
    raw: Mapping[str, Any]
    failed: frozenset[str]
    faults: tuple[Fault, ...]


def known_keys(model: type[Model]) -> tuple[str, ...]:
    """Return the keys of a table as they are written."""
    return tuple(field.alias or name for name, field in model.model_fields.items())


def read_table(
    table: str, raw: Mapping[str, Any], model: type[AnyModel], stand_ins: Mapping[str, Any]
) -> ReadTable[AnyModel]:
    """Read a table of the settings into its model.

    Parameters
    ----------
    table: `site`, `source` or `characteristic`.
    stand_ins: values for the keys that cannot be left out, used where they are missing or bad.
    """
    faults = [_not_yet(key, what) for key, what in refused(table, raw)]
    faults += _unknown(table, raw, model)
    good = {key: value for key, value in raw.items() if not any(f.concerns([key]) for f in faults)}
    if "rules" in good and model.model_fields.get("rules"):
        good["rules"], wrong = read_rules(good["rules"])
        faults += wrong
    for key in _HISTORIES:
        if isinstance(good.get(key), dict):
            good[key] = [good[key]]
    try:
        model.model_validate(_frozen(good), strict=True)
    except ValidationError as error:
        faults += [_said(details, raw) for details in error.errors(include_url=False)]
    failed = frozenset(str(path[0]) for fault in faults for path in fault.keys)
    good = {key: _frozen(value) for key, value in good.items() if key not in failed}
    filled = {**stand_ins, **good}
    return ReadTable(
        model=model.model_validate(filled, strict=True), raw=good, failed=failed, faults=tuple(faults)
    )


def _not_yet(key: str, what: str) -> Fault:
    return Fault(keys=((key,),), what=what, remedy="Take it out for now.")


def _unknown(table: str, raw: Mapping[str, Any], model: type[Model]) -> list[Fault]:
    known = (*known_keys(model), *(entry.key for entry in NOT_YET if entry.table == table))
    faults = _unknown_in((), raw, known)
    for key, nested in _NESTED.items():
        if key not in known_keys(model):
            continue
        value = raw.get(key)
        if isinstance(value, dict):
            faults += _unknown_in((key,), value, known_keys(nested))
        elif isinstance(value, list):
            for index, item in enumerate(value):
                if isinstance(item, dict):
                    faults += _unknown_in((key, index), item, known_keys(nested))
    return faults


def _unknown_in(place: KeyPath, raw: Mapping[str, Any], known: tuple[str, ...]) -> list[Fault]:
    return [unknown_key((*place, key), known) for key in raw if key not in known]


def unknown_key(path: KeyPath, known: tuple[str, ...]) -> Fault:
    """Say that a key is not known, and which one may be meant."""
    key = str(path[-1])
    guess = nearest(key, known)
    remedy = f"Did you mean `{guess}`?" if guess else f"Known here: {', '.join(sorted(set(known)))}."
    return Fault(keys=(path,), what=f"unknown key `{key}`", remedy=remedy)


def _frozen(value: Any) -> Any:
    """Turn lists into tuples: they are what frozen models hold, and strict reading refuses the others."""
    if isinstance(value, dict):
        return {key: _frozen(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return tuple(_frozen(item) for item in value)
    return value


def _said(error: ErrorDetails, raw: Mapping[str, Any]) -> Fault:
    path: KeyPath = error["loc"]
    if path[0] in _HISTORIES and isinstance(raw.get(str(path[0])), dict):
        path = (path[0], *path[2:])
    context = error.get("ctx", {})
    kind = error["type"]
    if kind == "missing":
        key = path[-1]
        return Fault(
            keys=(path,), what=f"`{key}` is missing", remedy=f"Add `{key}`; it cannot be left out here."
        )
    if kind == "literal_error":
        allowed = str(context["expected"])
        guess = nearest(error["input"], _quoted(allowed)) if isinstance(error["input"], str) else None
        what = f"must be {allowed}, not {shown(error['input'])}"
        return Fault(
            keys=(path,), what=what, remedy=f"Did you mean '{guess}'?" if guess else "Use one of these."
        )
    remedy = "Write it in this form, or leave the key out."
    if kind == "value_error":
        what = str(context["error"])
    elif kind in _SAID:
        what, remedy = _SAID[kind]
        what = what.format(**context)
    else:
        what = error["msg"]
    instead = "" if kind in _EMPTY else f", not {shown(error['input'])}"
    return Fault(keys=(path,), what=what + instead, remedy=remedy)


def _quoted(text: str) -> list[str]:
    return text.split("'")[1::2]
