"""What a key of a characteristic must hold by itself, whatever stands beside it."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from itertools import pairwise
from zoneinfo import ZoneInfo

from holdsteady.project.calendar import parse_calendar
from holdsteady.project.faults import Fault, shown
from holdsteady.project.settings import Characteristic, GivenLimits, Specification
from holdsteady.times import to_microseconds


def key_faults(settings: Characteristic, zone: ZoneInfo) -> Iterator[Fault]:
    """Find what is wrong within single keys. Moments without a zone are taken in `zone`."""
    for check in _CHECKS:
        yield from check(settings, zone)


def in_order(
    history: Sequence[Specification] | Sequence[GivenLimits], zone: ZoneInfo
) -> list[tuple[int | None, int]]:
    """Return (moment, index) of tables with `from`, sorted by moment; the one without comes first."""
    moments = [None if item.from_ is None else to_microseconds(item.from_, zone) for item in history]
    return sorted(
        ((moment, index) for index, moment in enumerate(moments)),
        key=lambda pair: (pair[0] is not None, pair[0] or 0, pair[1]),
    )


def _columns(settings: Characteristic, zone: ZoneInfo) -> Iterator[Fault]:  # noqa: ARG001
    for key, columns in (("values", settings.values or ()), ("each", settings.each)):
        for index, column in enumerate(columns):
            if column in columns[:index]:
                yield _fault((key, index), f"names column {shown(column)} twice", "Name each column once.")
    if settings.values is not None and len(settings.values) == 1:
        yield _fault(("values",), "names a single column", "Name at least two, or use `value`.")
    if isinstance(settings.size, float) and settings.size <= 0:
        yield _fault(("size",), f"must be above 0, not {settings.size:g}", "Give how many are looked at.")


def _subgroup(settings: Characteristic, zone: ZoneInfo) -> Iterator[Fault]:  # noqa: ARG001
    if settings.subgroup is None:
        return
    given = [key for key in ("column", "size", "every") if getattr(settings.subgroup, key) is not None]
    if len(given) != 1:
        found = " and ".join(f"`{key}`" for key in given) or "nothing"
        yield _fault(
            ("subgroup",),
            f"needs exactly one of `column`, `size` and `every`, not {found}",
            "Keep the one that is meant.",
        )


def _specification(settings: Characteristic, zone: ZoneInfo) -> Iterator[Fault]:
    yield from _history("specification", settings.specification, zone)
    for index, specification in enumerate(settings.specification):
        place = ("specification", index) if len(settings.specification) > 1 else ("specification",)
        low, target, high = specification.lower, specification.target, specification.upper
        if low is None and target is None and high is None and specification.from_ is None:
            yield _fault(place, "is empty", "Give `lower`, `target` or `upper`, or leave it out.")
        if low is not None and high is not None and low >= high:
            yield _fault(
                (*place, "lower"),
                f"must be below `upper`: {low:g} is not below {high:g}",
                "Give the smaller as `lower`, the larger as `upper`.",
            )
        elif target is not None and low is not None and target < low:
            yield _outside((*place, "target"), target, f"below `lower` {low:g}")
        elif target is not None and high is not None and target > high:
            yield _outside((*place, "target"), target, f"above `upper` {high:g}")


def _outside(place: tuple[str | int, ...], target: float, how: str) -> Fault:
    return _fault(place, f"{target:g} lies {how}", "Give a target between the two, or leave it out.")


def _limits(settings: Characteristic, zone: ZoneInfo) -> Iterator[Fault]:
    yield from _history("limits", settings.limits, zone)


def _history(
    key: str, history: Sequence[Specification] | Sequence[GivenLimits], zone: ZoneInfo
) -> Iterator[Fault]:
    ordered = in_order(history, zone)
    for (before, _), (moment, index) in pairwise(ordered):
        if before == moment:
            what = "begins when another does" if moment is not None else "has no `from`, nor has another"
            yield _fault((key, index), what, "Give each its own `from`; only the first may do without.")


def _plausible(settings: Characteristic, zone: ZoneInfo) -> Iterator[Fault]:  # noqa: ARG001
    if settings.plausible is None:
        return
    low, high = settings.plausible.lower, settings.plausible.upper
    if low is None and high is None:
        yield _fault(("plausible",), "is empty", "Give `lower`, `upper` or both, or leave it out.")
    if low is not None and high is not None and low >= high:
        yield _fault(
            ("plausible", "lower"),
            f"must be below `upper`: {low:g} is not below {high:g}",
            "Give the smaller as `lower`, the larger as `upper`.",
        )


def _baseline(settings: Characteristic, zone: ZoneInfo) -> Iterator[Fault]:
    baseline = settings.baseline
    begin, end = baseline.from_, baseline.to
    if begin is None and end is None:
        return
    if "points" in baseline.model_fields_set:
        remedy = "Keep `points`, or `from` and `to`."
        yield _fault(("baseline",), "gives both a number of `points` and a span of time", remedy)
    if begin is None or end is None:
        missing = "from" if begin is None else "to"
        yield _fault(("baseline",), f"lacks `{missing}`", "Give both `from` and `to`; `to` is not included.")
    elif to_microseconds(begin, zone) >= to_microseconds(end, zone):
        what = f"`from` must be before `to`: {begin} is not before {end}"
        yield _fault(("baseline", "from"), what, "Give the earlier as `from`; `to` is not included.")


def _calendar(settings: Characteristic, zone: ZoneInfo) -> Iterator[Fault]:  # noqa: ARG001
    try:
        parse_calendar(settings.calendar)
    except ValueError as error:
        yield _fault(("calendar",), str(error), "Write it as in 'mon-fri 06:00-22:00; sat 06:00-14:00'.")


def _fault(path: tuple[str | int, ...], what: str, remedy: str) -> Fault:
    return Fault(keys=(path,), what=what, remedy=remedy)


_CHECKS: tuple[Callable[[Characteristic, ZoneInfo], Iterator[Fault]], ...] = (
    _columns, _subgroup, _specification, _limits, _plausible, _baseline, _calendar,
)  # fmt: skip
