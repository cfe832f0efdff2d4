"""Whether the keys of a characteristic agree with each other and with its source."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator, Mapping

from holdsteady.project.faults import Fault, nearest, shown
from holdsteady.project.rule_sets import ZONE_RULES
from holdsteady.project.settings import Characteristic, Source
from holdsteady.project.toml_lines import KeyPath

_SUBGROUPED = ("mean-range", "mean-sd", "median-range")
_SIZED = ("p", "np", "u")
_WITHIN_SUBGROUPS = ("mean-range", "mean-s", "pooled", "weighted")
_MOVING_RANGES = ("mean-moving-range", "median-moving-range")
_DATA: tuple[KeyPath, ...] = (("value",), ("values",), ("count",), ("variables",))
_SHAPE: tuple[KeyPath, ...] = (*_DATA, ("size",), ("subgroup",))
_OPTIONS: Mapping[str, Mapping[str, tuple[Callable[[object], bool], str]]] = {
    "individuals": {
        "moving_range_limit": (
            lambda value: value in ("probability", "three-sigma"),
            "must be 'probability' or 'three-sigma'",
        ),
        "moving_range_signals": (lambda value: isinstance(value, bool), "must be true or false"),
    },
}


def cross_faults(
    settings: Characteristic, sources: Mapping[str, Source], own: Collection[str]
) -> Iterator[Fault]:
    """Find where keys contradict each other; `own` are the keys the characteristic itself gives.

    Rules, specifications, cadences and gaps that come from the defaults are laid over characteristics of all
    kinds: where they cannot apply they are no fault; rules that are left out are said on the page.
    """
    yield from _source(settings, sources, own)
    yield from _data(settings)
    yield from _chart(settings)
    yield from _estimator(settings)
    yield from _limits(settings)
    if "specification" in own:
        yield from _specification(settings)
    yield from _options(settings)
    if "rules" in own:
        yield from _rules(settings)


def _kind(settings: Characteristic) -> str:
    """Return `attribute`, `individuals` or `subgroups`: what the data are, whatever chart is asked for."""
    if settings.count is not None:
        return "attribute"
    return "subgroups" if settings.values is not None or settings.subgroup is not None else "individuals"


def _source(settings: Characteristic, sources: Mapping[str, Source], own: Collection[str]) -> Iterator[Fault]:
    source = sources.get(settings.source)
    if source is None:
        guess = nearest(settings.source, sources)
        known = f"Sources are {', '.join(sources)}." if sources else "Add a [[source]] with this id."
        remedy = f"Did you mean '{guess}'?" if guess else known
        yield Fault(keys=(("source",),), what=f"there is no source {shown(settings.source)}", remedy=remedy)
        return
    if source.time is not None:
        return
    remedy = f"Set `time` of source '{source.id}'"
    if settings.subgroup is not None and settings.subgroup.every is not None:
        what = f"a `subgroup` by time needs times, and source '{source.id}' has none"
        yield Fault(keys=(("subgroup", "every"), ("source",)), what=what, remedy=f"{remedy}, or use `size`.")
    if settings.baseline.from_ is not None:
        what = f"a `baseline` by dates needs times, and source '{source.id}' has none"
        yield Fault(keys=(("baseline", "from"), ("source",)), what=what, remedy=f"{remedy}, or use `points`.")
    for key in ("cadence", "calendar", "gap"):
        if key in own:
            what = f"`{key}` needs times, and source '{source.id}' has none"
            yield Fault(keys=((key,), ("source",)), what=what, remedy=f"{remedy}, or take `{key}` out.")
    for key in ("limits", "specification"):
        dated = getattr(settings, key)
        for index, one in enumerate(dated):
            if key in own and one.from_ is not None:
                place: KeyPath = (key, index) if len(dated) > 1 else (key,)
                what = f"a `{key}` with `from` needs times, and source '{source.id}' has none"
                keys = ((*place, "from"), (key,), ("source",))
                yield Fault(keys=keys, what=what, remedy=f"{remedy}, or take `from` out.")


def _data(settings: Characteristic) -> Iterator[Fault]:
    given = [key for key in ("value", "values", "count") if getattr(settings, key) is not None]
    if not given:
        what = "names no column to read: exactly one of `value`, `values` and `count` is needed"
        yield Fault(keys=((), *_DATA), what=what, remedy="Add one of the three.")
    elif len(given) > 1:
        what = f"{' and '.join(f'`{key}`' for key in given)} exclude each other"
        keys: tuple[KeyPath, ...] = tuple((key,) for key in reversed(given))
        yield Fault(keys=keys, what=what, remedy="Keep the one that is meant.")
    elif settings.size is not None and settings.count is None:
        remedy = "Take `size` out; how many readings make a point is `subgroup = { size = 5 }`."
        yield Fault(keys=(("size",), *_DATA), what="`size` goes with `count` alone", remedy=remedy)
    if settings.values is not None and settings.subgroup is not None:
        what = "`values` are subgroups already, one a row"
        yield Fault(keys=(("subgroup",), *_DATA), what=what, remedy="Take `subgroup` out, or use `value`.")


def _chart(settings: Characteristic) -> Iterator[Fault]:
    chart, kind = settings.chart, _kind(settings)
    if chart is None:
        return
    need, remedy = "", ""
    if chart in _SUBGROUPED and kind != "subgroups":
        need, remedy = (
            "`values`, or `value` with `subgroup`",
            "Add them, or leave `chart` out to let the data decide.",
        )
    elif chart == "individuals" and kind != "individuals":
        need, remedy = (
            "`value` without `subgroup`",
            "Change the data, or leave `chart` out to let them decide.",
        )
    elif chart in _SIZED and (kind != "attribute" or settings.size is None):
        need, remedy = "`count` and `size`", "Add them, or use chart 'c' for plain counts."
    elif chart == "c" and kind != "attribute":
        need, remedy = "`count`", "Add it, or leave `chart` out to let the data decide."
    elif chart == "c" and settings.size is not None:
        need, remedy = (
            "`count` without `size`",
            "Use chart 'u', or 'p' where the count is a part of the size.",
        )
    if need:
        yield Fault(keys=(("chart",), *_SHAPE), what=f"chart '{chart}' needs {need}", remedy=remedy)


def _estimator(settings: Characteristic) -> Iterator[Fault]:
    allowed = {"attribute": (), "subgroups": _WITHIN_SUBGROUPS, "individuals": _MOVING_RANGES}[
        _kind(settings)
    ]
    if settings.estimator is None or settings.estimator in allowed:
        return
    keys = (("estimator",), ("chart",), *_SHAPE)
    if not allowed:
        what = (
            f"estimator '{settings.estimator}' does not go with counts: their sigma follows from the centre"
        )
        yield Fault(keys=keys, what=what, remedy="Take `estimator` out.")
    else:
        which = "subgroups" if _kind(settings) == "subgroups" else "single values"
        what = f"estimator '{settings.estimator}' does not go with {which}"
        yield Fault(keys=keys, what=what, remedy=f"Use one of {', '.join(allowed)}, or leave it out.")


def _limits(settings: Characteristic) -> Iterator[Fault]:
    attribute = _kind(settings) == "attribute"
    for index, limits in enumerate(settings.limits):
        place: KeyPath = ("limits", index) if len(settings.limits) > 1 else ("limits",)
        if attribute and limits.sigma is not None:
            what = "`limits` with a `sigma` do not go with counts: it follows from the centre"
            yield Fault(keys=((*place, "sigma"), *_SHAPE), what=what, remedy="Give `centre` alone.")
        if not attribute and limits.sigma is None:
            what = "`limits` need a `sigma` here"
            yield Fault(keys=(place, *_SHAPE), what=what, remedy="Add the sigma of a single reading.")
        if attribute:
            highest = _highest_centre(settings)
            if limits.centre <= 0 or (highest is not None and limits.centre >= highest):
                span = "above 0" if highest is None else f"above 0 and below {highest:g}"
                what = f"a centre of {limits.centre:g} cannot be: it must lie {span}"
                yield Fault(keys=((*place, "centre"), *_SHAPE), what=what, remedy="Correct `centre`.")


def _highest_centre(settings: Characteristic) -> float | None:
    """Return what the centre of a chart of counts must stay below; None where nothing is too high."""
    if settings.chart == "np":
        return float(settings.size) if isinstance(settings.size, int | float) else None
    is_fraction = settings.chart == "p" or (settings.chart is None and settings.size is not None)
    return 1.0 if is_fraction else None


def _specification(settings: Characteristic) -> Iterator[Fault]:
    if settings.specification and _kind(settings) == "attribute":
        what = "a `specification` is for measured values; counts are not judged against one"
        remedy = "Take it out; what is wanted of counts can stand in `reaction`."
        yield Fault(keys=(("specification",), *_DATA), what=what, remedy=remedy)


def _options(settings: Characteristic) -> Iterator[Fault]:
    # Without `chart` only single values decide it here; subgroups and counts have charts without options.
    chart = settings.chart or _kind(settings)
    known = _OPTIONS.get(chart, {})
    concerned = (("chart",), *_SHAPE)
    for key, value in settings.chart_options.items():
        keys: tuple[KeyPath, ...] = (("chart_options", key), *concerned)
        if key in known:
            allowed, form = known[key]
            if not allowed(value):
                yield Fault(keys=keys, what=f"{form}, not {shown(value)}", remedy="Use one of these.")
            continue
        guess = nearest(key, known)
        named = f"chart '{settings.chart}'" if settings.chart else "this chart"
        options = f"It knows {' and '.join(f'`{name}`' for name in known)}." if known else "Take it out."
        yield Fault(
            keys=keys,
            what=f"{named} has no option `{key}`",
            remedy=f"Did you mean `{guess}`?" if guess else options,
        )


def _rules(settings: Characteristic) -> Iterator[Fault]:
    if _kind(settings) != "attribute":
        return
    zones = [rule.rule for rule in settings.rules or () if rule.rule in ZONE_RULES]
    if zones:
        what = (
            f"{', '.join(zones)} cannot be used on counts: zones of one sigma suppose a symmetric statistic"
        )
        remedy = "Use outside-limits and run-one-side."
        yield Fault(keys=(("rules",), ("chart",), *_DATA), what=what, remedy=remedy)
