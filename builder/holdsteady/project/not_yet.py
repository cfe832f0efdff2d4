"""Keys and values that have their name and meaning, but whose feature is not there yet.

They are refused, never ignored. When a feature comes, its entry goes.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class NotYet:
    """A key of a table that is refused: always, for some values, or for all texts but one."""

    table: str
    key: str
    values: tuple[str, ...] = ()
    other_than: str = ""

    def refuses(self, value: object) -> bool:
        """Tell whether this value of the key is refused; of a list, whether any of its items is."""
        if self.values:
            return value in self.values
        if self.other_than:
            return isinstance(value, str) and value != self.other_than
        return True


NOT_YET = (
    NotYet(table="", key="study"),
    NotYet(table="site", key="language", other_than="en"),
    NotYet(table="site", key="logo"),
    NotYet(table="site", key="accent"),
    NotYet(table="site", key="watch"),
    NotYet(table="site", key="show_people"),
    NotYet(table="source", key="settle"),
    NotYet(table="characteristic", key="variables"),
    NotYet(
        table="characteristic",
        key="chart",
        values=(
            "p-overdispersed", "u-overdispersed", "g", "t", "ewma", "cusum", "moving-average", "three-way",
            "short-run", "trended", "residuals", "t2", "mewma",
        ),
    ),
    NotYet(table="characteristic", key="limits_by", values=("probability",)),
    NotYet(table="characteristic", key="false_alarm"),
    NotYet(table="characteristic", key="width", values=("guaranteed",)),
    NotYet(table="characteristic", key="capability"),
    NotYet(table="characteristic", key="natural_limit"),
    NotYet(table="characteristic", key="strata"),
)  # fmt: skip


def refused(table: str, raw: Mapping[str, object]) -> list[tuple[str, str]]:
    """Return the keys of a table that cannot be used yet, each with what is said about it."""
    found = []
    for entry in NOT_YET:
        if entry.table != table or entry.key not in raw or not entry.refuses(raw[entry.key]):
            continue
        value = raw[entry.key]
        if entry.values or entry.other_than:
            what = f"`{entry.key}` = '{value}' is not supported yet"
        else:
            what = f"`{entry.key}` is not supported yet"
        found.append((entry.key, what))
    return found
