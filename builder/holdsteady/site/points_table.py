"""`tables/points/<slug>.csv`: a row for each point of each panel, made without a loop over points."""

from __future__ import annotations

from collections.abc import Sequence
from zoneinfo import ZoneInfo

import numpy as np
import pyarrow as pa

from holdsteady.arrays import Bools, Ints
from holdsteady.monitor.finding import Finding, Panel, Points, Signal
from holdsteady.site import columns

HEADER = "panel,order,time,label,n,value,centre,lower,upper,sigma,era,in_baseline,excluded,rules,signals"
RECENT = 1_000


def points_table(finding: Finding, *, zone: ZoneInfo, recent: bool) -> bytes:
    """Return the table of one characteristic; `recent` keeps baselines and each panel's last 1,000."""
    if finding.points is None or not finding.panels:
        return columns.csv(HEADER)
    shared = _shared(finding.points, zone)
    parts = [_rows(panel, shared, finding.signals, recent=recent) for panel in finding.panels]
    return columns.csv(HEADER, [pa.concat_arrays(column) for column in zip(*parts, strict=True)])


def _shared(points: Points, zone: ZoneInfo) -> dict[str, pa.Array]:
    """Return the columns that are the same on every panel."""
    rows = len(points.n)
    labelled = any(points.label)
    return {
        "order": columns.integers(np.arange(1, rows + 1, dtype=np.int64)),
        "time": columns.empty(rows) if points.time is None else columns.moments(points.time, zone),
        "label": columns.text(points.label) if labelled else columns.empty(rows),
        "n": columns.floats(points.n),
        "era": columns.integers(points.era),
        "excluded": columns.flags(points.excluded),
    }


def _rows(
    panel: Panel, shared: dict[str, pa.Array], signals: Sequence[Signal], *, recent: bool
) -> list[pa.Array]:
    rows = len(panel.value)
    result = [
        columns.constant(panel.name, rows), shared["order"], shared["time"], shared["label"], shared["n"],
        columns.floats(panel.value), columns.floats(panel.centre), columns.floats(panel.lower),
        columns.floats(panel.upper), columns.floats(panel.sigma), shared["era"],
        columns.flags(panel.in_baseline), shared["excluded"], _rules_met(panel),
        _signals_over([signal for signal in signals if signal.panel == panel.name], rows),
    ]  # fmt: skip
    if not recent or rows <= RECENT:
        return result
    kept = pa.array(_kept(panel.in_baseline))
    return [column.filter(kept) for column in result]


def _kept(in_baseline: Bools) -> Bools:
    kept = in_baseline.copy()
    kept[-RECENT:] = True
    return kept


def _rules_met(panel: Panel) -> pa.Array:
    """Return the names of the rules met at each point, joined by a blank."""
    rules = [rule.name for rule in panel.rules if rule.name in panel.met]
    codes = np.zeros(len(panel.value), dtype=np.int64)
    for bit, rule in enumerate(rules):
        codes |= (panel.met[rule] != 0).astype(np.int64) << bit
    present, code = np.unique(codes, return_inverse=True)
    words = [" ".join(rule for bit, rule in enumerate(rules) if mask >> bit & 1) for mask in present.tolist()]
    return columns.coded(code.reshape(-1), words)


def _signals_over(signals: Sequence[Signal], rows: int) -> pa.Array:
    """Return the ids of the signals whose [first, last] covers each point, joined by a blank."""
    edges = {0, rows} | {signal.first_index for signal in signals}
    edges |= {signal.last_index + 1 for signal in signals}
    # Between two neighbouring edges the same signals cover every point.
    starts: Ints = np.array(sorted(edges), dtype=np.int64)
    words = [
        " ".join(s.id for s in signals if s.first_index <= start <= s.last_index)
        for start in starts[:-1].tolist()
    ]
    return columns.coded(np.repeat(np.arange(len(words)), np.diff(starts)), words)
