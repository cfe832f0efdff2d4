"""Rules as people write them: names, tables with counts, and the two published sets."""

from __future__ import annotations

from collections.abc import Mapping
from typing import get_args

from holdsteady.project.faults import Fault, nearest, shown
from holdsteady.project.settings import RuleName, RuleSetting

RULE_SETS: Mapping[str, tuple[RuleSetting, ...]] = {
    # Western Electric, Statistical Quality Control Handbook, 1956: the four zone rules, runs of 8.
    "western-electric": (
        RuleSetting(rule="outside-limits"),
        RuleSetting(rule="two-of-three"),
        RuleSetting(rule="four-of-five"),
        RuleSetting(rule="run-one-side", points=8),
    ),
    # Nelson, Journal of Quality Technology 16 (1984): the eight tests, in his order.
    "nelson": (
        RuleSetting(rule="outside-limits"),
        RuleSetting(rule="run-one-side", points=9),
        RuleSetting(rule="trend"),
        RuleSetting(rule="alternating"),
        RuleSetting(rule="two-of-three"),
        RuleSetting(rule="four-of-five"),
        RuleSetting(rule="hugging"),
        RuleSetting(rule="avoiding-centre"),
    ),
}
ZONE_RULES = frozenset({"two-of-three", "four-of-five", "hugging", "avoiding-centre"})

_NAMES: tuple[str, ...] = get_args(RuleName)
# What each rule needs when the settings do not say, and the fewest points that leave it a meaning.
_COUNTS: Mapping[str, tuple[int, int]] = {
    "outside-limits": (1, 1), "two-of-three": (2, 1), "four-of-five": (4, 1), "run-one-side": (9, 2),
    "trend": (6, 3), "alternating": (14, 4), "hugging": (15, 2), "avoiding-centre": (8, 2),
}  # fmt: skip
_WINDOWS: Mapping[str, int] = {"two-of-three": 3, "four-of-five": 5}


def read_rules(raw: object) -> tuple[tuple[RuleSetting, ...], list[Fault]]:
    """Read the value of `rules`: a list of names and tables, a set by its name, or sets among a list.

    A rule that is written beside a set takes the place of the set's own.
    """
    items = [raw] if isinstance(raw, str) else raw
    if not isinstance(items, list):
        return (), [_fault((), f"must be a list, not {shown(raw)}", 'Write rules as in ["outside-limits"].')]
    if not items:
        remedy = "Leave the key out for the chart's own rules."
        return (), [_fault((), "names no rule, so that the chart could never signal", remedy)]
    rules: dict[str, RuleSetting] = {}
    written: set[str] = set()
    faults: list[Fault] = []
    for index, item in enumerate(items):
        place = () if isinstance(raw, str) else (index,)
        if isinstance(item, str) and item in RULE_SETS:
            for rule in RULE_SETS[item]:
                rules.setdefault(rule.rule, rule)
            continue
        found = _read_rule(item, place)
        if isinstance(found, Fault):
            faults.append(found)
        elif found.rule in written:
            faults.append(_fault(place, f"'{found.rule}' is named twice", "Keep one of the two."))
        else:
            rules[found.rule] = found
            written.add(found.rule)
    return tuple(rules.values()), faults


def _read_rule(item: object, place: tuple[int | str, ...]) -> RuleSetting | Fault:
    table = {"rule": item} if isinstance(item, str) else item
    if not isinstance(table, dict):
        return _fault(place, f"must be a rule, not {shown(item)}", _as_table())
    unknown = next((key for key in table if key not in ("rule", "points", "of")), None)
    if unknown is not None:
        return _fault(
            (*place, unknown), f"unknown key `{unknown}`", "A rule knows `rule`, `points` and `of`."
        )
    name = table.get("rule")
    if name not in _NAMES:
        what = "`rule` is missing" if name is None else f"there is no rule {shown(name)}"
        guess = nearest(name, (*_NAMES, *RULE_SETS)) if isinstance(name, str) else None
        known = f"Rules are {', '.join(_NAMES)}; sets are {', '.join(RULE_SETS)}."
        return _fault(place, what, f"Did you mean '{guess}'?" if guess else known)
    for key in ("points", "of"):
        if key in table and (type(table[key]) is not int or table[key] < 1):
            what = f"must be a whole number from 1 on, not {shown(table[key])}"
            return _fault((*place, key), what, _as_table())
    rule = RuleSetting(rule=name, points=table.get("points"), of=table.get("of"))
    return _count_fault(rule, place) or rule


def _count_fault(rule: RuleSetting, place: tuple[int | str, ...]) -> Fault | None:
    usual, fewest = _COUNTS[rule.rule]
    points = usual if rule.points is None else rule.points
    window = _WINDOWS.get(rule.rule)
    if rule.rule == "outside-limits" and points != 1:
        return _fault((*place, "points"), "'outside-limits' needs one point", "Leave `points` out.")
    if points < fewest:
        what = f"'{rule.rule}' means nothing with fewer than {fewest} points"
        return _fault((*place, "points"), what, f"Leave `points` out; the usual count is {usual}.")
    if window is None:
        if rule.of is not None:
            what = f"'{rule.rule}' needs its points in a row and knows no `of`"
            return _fault((*place, "of"), what, "Leave `of` out.")
        return None
    if points > (rule.of or window):
        key = "points" if rule.points is not None else "of"
        what = f"'{rule.rule}' cannot be met: {points} points of the last {rule.of or window}"
        return _fault((*place, key), what, "Give `points` and `of`, the first no larger than the second.")
    return None


def _fault(place: tuple[int | str, ...], what: str, remedy: str) -> Fault:
    return Fault(keys=(("rules", *place),), what=what, remedy=remedy)


def _as_table() -> str:
    return 'Write a rule by its name, or as in { rule = "run-one-side", points = 8 }.'
