"""From points and limits to signals: which rules apply to a panel, where each is met."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from holdsteady.arrays import Bools, Ints, frozen
from holdsteady.monitor.charted import Charted
from holdsteady.monitor.finding import Direction, Panel, Signal
from holdsteady.monitor.gather import Gathered
from holdsteady.monitor.ids import case_form, signal_id
from holdsteady.monitor.kinds import ChartKind, sides
from holdsteady.project.rule_sets import ZONE_RULES
from holdsteady.project.settings import Characteristic, RuleSetting
from holdsteady.spc.result import Lines
from holdsteady.spc.rules import RULES, Rule, Stretches, find

_FEWEST_EXPECTED = 5.0
_MOST_UNEQUAL = 2.0
_DIRECTIONS: Mapping[int, Direction] = {1: "high", -1: "low", 0: "none"}
_SHAPE_RULES = ("trend", "alternating")
_EXACT_RULES = (*_SHAPE_RULES, "hugging")  # those that a value further out would not meet all the more
_USUAL = ("outside-limits", "run-one-side")


@dataclass(frozen=True, slots=True, kw_only=True)
class Judged:
    """The panels of a characteristic with the signals on them, before they are gathered into cases."""

    panels: tuple[Panel, ...]
    signals: tuple[Signal, ...]


def judge(charted: Charted, lines: Mapping[str, Lines], in_baseline: Mapping[str, Bools]) -> Judged:
    """Judge every panel of a characteristic.

    Points that are no real values, open, missing or without limits are not judged; rules run on over them.
    So is a point drawn at a limit, but where its reading is known to lie even further from the centre.
    """
    panels, signals = [], []
    for name, statistic in charted.kind.panels.items():
        drawn, value = lines[name], charted.values[name]
        has_limits = np.isfinite(drawn.sigma) & (drawn.sigma > 0)
        judged = charted.real & ~charted.points.open & ~np.isnan(value) & has_limits
        z = np.full(value.size, np.nan)
        np.divide(value - drawn.centre, drawn.sigma, out=z, where=has_limits)
        judged &= (charted.points.side == 0) | ((charted.points.side * z >= 0) & (name != "spread"))
        rules, refused = _rules_of(name, charted.kind, charted.settings)
        panel = Panel(
            name=name,
            statistic=statistic,
            value=frozen(value),
            centre=drawn.centre,
            lower=drawn.lower,
            upper=drawn.upper,
            sigma=drawn.sigma,
            z=frozen(z),
            in_baseline=in_baseline[name],
            judged=frozen(judged),
            rules=rules,
            met={},
            refused_rules=refused,
        )
        met, reasons, found = _apply(charted, panel)
        applied = tuple(rule for rule in rules if rule.name in met)
        panels.append(replace(panel, rules=applied, met=met, refused_rules={**refused, **reasons}))
        signals += found
    signals.sort(key=order_of)
    return Judged(panels=tuple(panels), signals=tuple(signals))


def order_of(signal: Signal) -> tuple[int, int, str, str, str]:
    """Signals come by when they fired; equals in an order of their own that never changes."""
    return signal.fired_index, signal.first_index, signal.panel, signal.rule, signal.direction


def _apply(charted: Charted, panel: Panel) -> tuple[dict[str, Ints], dict[str, str], list[Signal]]:
    """Return where each rule of a panel is met, which rules leave points out and why, and the signals."""
    met: dict[str, Ints] = {}
    reasons: dict[str, str] = {}
    signals: list[Signal] = []
    segment = charted.points.segment
    going_on = np.flatnonzero(panel.judged & (segment == segment[-1]))
    newest = int(going_on[-1]) if going_on.size else -1
    for rule in panel.rules:
        scope, side, reason = _scope(charted, rule, panel)
        if reason:
            reasons[rule.name] = reason
        where = np.flatnonzero(scope)
        if not where.size and np.any(panel.judged):
            continue  # it applies to no point, and `reason` says why
        found = find(
            rule,
            value=panel.value[where],
            z=panel.z[where],
            lower=panel.lower[where],
            upper=panel.upper[where],
            sigma=panel.sigma[where],
            segment=charted.points.segment[where],
            side=None if side is None else side[where],
        )
        met[rule.name] = np.zeros(panel.value.size, dtype=np.int64)
        met[rule.name][where] = found.met
        frozen(met[rule.name])
        signals += _signals(charted, panel.name, rule, found, where, newest)
    return met, reasons, signals


def _rules_of(
    panel: str, kind: ChartKind, settings: Characteristic
) -> tuple[tuple[Rule, ...], dict[str, str]]:
    """Return the rules that apply to a panel, and those asked for that do not, with the reason."""
    if settings.rules is None:
        usual = ("outside-limits",) if kind.attribute or panel != "location" else _USUAL
        asked = [RULES[name] for name in usual]
    else:
        asked = [_with_counts(RULES[s.rule], s) for s in settings.rules]
    if kind.panels[panel] == "moving-range" and not settings.chart_options.get("moving_range_signals"):
        return (), {"outside-limits": "moving ranges are drawn for information; they signal when asked to"}
    if panel == "location":
        return tuple(asked), {}
    if kind.attribute:
        allowed = [r for r in asked if r.name not in ZONE_RULES]
        reason = "zones suppose a symmetric statistic; counts are skewed"
    else:
        allowed = [r for r in asked if r.name == "outside-limits"]
        reason = "run rules suppose independent values; spread panels know the limits alone"
    return tuple(allowed), {r.name: reason for r in asked if r not in allowed}


def _with_counts(rule: Rule, asked: RuleSetting) -> Rule:
    """Return a rule with its own counts; one of consecutive points looks at as many as it needs."""
    points = asked.points or rule.points
    consecutive = rule.of == rule.points
    return replace(rule, points=points, of=asked.of or (points if consecutive else rule.of))


def _scope(charted: Charted, rule: Rule, panel: Panel) -> tuple[Bools, Ints | None, str]:
    """Return the points a rule may look at, the side each lies on, and why some are left out.

    The side is None where it is the sign of z. What is left out depends on nothing later, so that new
    points never change an earlier signal.
    """
    judged = panel.judged
    if rule.name in _EXACT_RULES:
        judged = judged & (charted.points.side == 0)
        left_out = int(panel.judged.sum() - judged.sum())
        censored = f"it needs the value itself; {left_out} known only by a limit left out"
        if rule.name not in _SHAPE_RULES:
            return judged, None, censored if left_out else ""
        equal = _sizes_alike(charted.points)
        unequal = int((judged & ~equal).sum())
        sizes = f"sizes vary more than 2 : 1; {unequal} points left out"
        reasons = [said for said, many in ((censored, left_out), (sizes, unequal)) if many]
        return judged & equal, None, "; ".join(reasons)
    if rule.name == "run-one-side":
        counted = sides(charted.kind, charted.points, panel.centre)
        if counted is not None:
            side, expected = counted
            few = judged & (expected < _FEWEST_EXPECTED)
            scope = judged if np.any(judged & ~few) else np.zeros_like(judged)
            return scope, np.where(few, 0, side), "the expected count is below 5" if np.any(few) else ""
    return judged, None, ""


def _sizes_alike(points: Gathered) -> Bools:
    """Return (N,) True up to the first point at which sizes of its era have varied more than 2 : 1."""
    alike = np.ones(points.points, dtype=np.bool_)
    for era in np.unique(points.era):
        here = np.flatnonzero(points.era == era)
        n = points.n[here]
        alike[here] = np.maximum.accumulate(n) <= _MOST_UNEQUAL * np.minimum.accumulate(n)
    return alike


def _signals(
    charted: Charted, panel: str, rule: Rule, found: Stretches, where: Ints, newest: int
) -> list[Signal]:
    seen: dict[tuple[str, str], int] = {}
    signals = []
    rows: Sequence[tuple[int, int, int, int]] = list(
        zip(
            found.direction.tolist(),
            where[found.first].tolist(),
            where[found.fired].tolist(),
            where[found.last].tolist(),
            strict=True,
        )
    )
    for sign, first, fired, last in rows:
        direction = _DIRECTIONS[sign]
        moment = _moment(charted.points, fired)
        ordinal = seen.get((direction, moment), 0)
        seen[direction, moment] = ordinal + 1
        identifier = signal_id(charted.name, panel, rule.name, direction, moment, ordinal)
        signals.append(
            Signal(
                id=identifier,
                case=case_form(identifier),
                panel=panel,
                rule=rule.name,
                direction=direction,
                first_index=first,
                fired_index=fired,
                last_index=last,
                ongoing=last == newest,
            )
        )
    return signals


def _moment(points: Gathered, index: int) -> str:
    if points.time is not None:
        return str(int(points.time[index]))
    return f"{points.files[int(points.file[index])]}:{int(points.line[index])}"
