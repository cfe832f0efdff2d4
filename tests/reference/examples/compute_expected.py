"""Writes `expected.json`: what is published of each worked example, and what its data give exactly.

Run as `python tests/reference/examples/compute_expected.py`; a test holds the file to what this writes.
The exact figures come from loops over the raw data and from numerical integration of the definitions, on
purpose not from the package. Status words: `published-seen` (seen in print), `from-memory` (recalled from
the publication and kept because the raw data give the same). Sample numbers count from 1.

Where a publication rounds its factors or intermediate figures, `tolerance` says how far its figure may lie
from the exact one and `why` says the reason; elsewhere a published figure holds to half a unit of its last
digit. Raw data are held to the published totals and means, which a slip in a single value would miss.
"""

from __future__ import annotations

import csv
import json
import math
import statistics
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path
from typing import Any

from scipy.integrate import dblquad, quad
from scipy.special import gammaln, ndtr

HERE = Path(__file__).resolve().parent
Row = dict[str, str]
Lines = dict[str, float | list[float | None] | None]

HANDBOOK = "NIST/SEMATECH e-Handbook of Statistical Methods"
MONTGOMERY = "Montgomery, Introduction to Statistical Quality Control"


def density(x: float) -> float:
    """The standard normal density."""
    return math.exp(-x * x / 2) / math.sqrt(2 * math.pi)


def d2(n: int) -> float:
    """Mean range of n standard normal values (Tippett 1925)."""
    return quad(lambda x: 1 - ndtr(x) ** n - ndtr(-x) ** n, -12, 12, epsabs=1e-13, limit=400)[0]


def d3(n: int) -> float:
    """Standard deviation of the range of n standard normal values, from its second moment."""

    def tail(low: float, high: float) -> float:
        inner = ndtr(high) - ndtr(low)
        return float(1 - ndtr(high) ** n - ndtr(-low) ** n + inner**n)

    second = 2 * dblquad(tail, -9, 9, -9, lambda high: high, epsabs=1e-12, epsrel=1e-12)[0]
    return math.sqrt(second - d2(n) ** 2)


def c4(n: int) -> float:
    """Mean standard deviation of n standard normal values."""
    return math.sqrt(2 / (n - 1)) * math.exp(gammaln(n / 2) - gammaln((n - 1) / 2))


def median_error(n: int) -> float:
    """Standard error of the median of an odd number of standard normal values (order statistics)."""
    k = (n - 1) // 2
    constant = math.exp(gammaln(n + 1) - 2 * gammaln(k + 1))
    return math.sqrt(
        quad(lambda x: x * x * constant * (ndtr(x) * ndtr(-x)) ** k * density(x), -12, 12, epsabs=1e-14)[0]
    )


def read(name: str) -> list[Row]:
    """The raw data of an example."""
    with (HERE / f"{name}.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def column(rows: list[Row], name: str) -> list[float]:
    """One column as numbers."""
    return [float(row[name]) for row in rows]


def band(centre: float, half: float, *, floor: float | None = None) -> Lines:
    """Lines about a centre; a lower limit that is not above the floor is none."""
    lower = centre - half
    return {
        "centre": centre,
        "lower": None if floor is not None and lower <= floor else lower,
        "upper": centre + half,
    }


def individuals(rows: list[Row]) -> dict[str, Lines]:
    """Limits from the mean moving range, and the customary limit of the moving ranges themselves."""
    x = column(rows, "value")
    mean_range = statistics.fmean(abs(b - a) for a, b in pairwise(x))
    sigma = mean_range / d2(2)
    location = band(statistics.fmean(x), 3 * sigma) | {"sigma": sigma}
    return {
        "location": location,
        "spread": {"centre": mean_range, "lower": None, "upper": mean_range + 3 * d3(2) * sigma},
    }


def subgroups(rows: list[Row]) -> list[list[float]]:
    """Wide rows, or long ones gathered by their first column."""
    first, *others = rows[0]
    if len(others) > 1:
        return [[float(v) for v in row.values()] for row in rows]
    groups: dict[str, list[float]] = {}
    for row in rows:
        groups.setdefault(row[first], []).append(float(row[others[0]]))
    return list(groups.values())


def mean_range(rows: list[Row]) -> dict[str, Lines]:
    """Means and ranges of equal subgroups."""
    groups = subgroups(rows)
    n = len(groups[0])
    rbar = statistics.fmean(max(g) - min(g) for g in groups)
    sigma = rbar / d2(n)
    location = band(statistics.fmean(map(statistics.fmean, groups)), 3 * sigma / math.sqrt(n)) | {
        "sigma": sigma
    }
    return {"location": location, "spread": band(rbar, 3 * d3(n) * sigma, floor=0)}


def median_range(rows: list[Row]) -> dict[str, Lines]:
    """Medians of equal subgroups about the mean of the medians."""
    groups = subgroups(rows)
    n = len(groups[0])
    rbar = statistics.fmean(max(g) - min(g) for g in groups)
    sigma = rbar / d2(n)
    location = band(statistics.fmean(map(statistics.median, groups)), 3 * sigma * median_error(n)) | {
        "sigma": sigma
    }
    return {"location": location, "spread": band(rbar, 3 * d3(n) * sigma, floor=0)}


def mean_s(rows: list[Row]) -> dict[str, Lines]:
    """Means and standard deviations of equal subgroups, sigma from the mean standard deviation."""
    groups = subgroups(rows)
    n = len(groups[0])
    sbar = statistics.fmean(map(statistics.stdev, groups))
    sigma = sbar / c4(n)
    location = band(statistics.fmean(map(statistics.fmean, groups)), 3 * sigma / math.sqrt(n)) | {
        "sigma": sigma
    }
    return {"location": location, "spread": band(sbar, 3 * sigma * math.sqrt(1 - c4(n) ** 2), floor=0)}


def pooled(rows: list[Row]) -> dict[str, Lines]:
    """Means and standard deviations of subgroups of any size, sigma from the pooled variance."""
    groups = subgroups(rows)
    degrees = sum(len(g) - 1 for g in groups)
    root = math.sqrt(sum((len(g) - 1) * statistics.variance(g) for g in groups) / degrees)
    sigma = root / c4(degrees + 1)
    centre = sum(map(sum, groups)) / sum(map(len, groups))
    means = [band(centre, 3 * sigma / math.sqrt(len(g))) for g in groups]
    spreads = [band(c4(len(g)) * sigma, 3 * sigma * math.sqrt(1 - c4(len(g)) ** 2), floor=0) for g in groups]
    return {"location": together(means) | {"sigma": sigma, "pooled s": root}, "spread": together(spreads)}


def together(bands: list[Lines]) -> Lines:
    """One line where all points agree, else a value for each point."""
    result: Lines = {}
    for line in bands[0]:
        values = [b[line] for b in bands]
        result[line] = values[0] if all(v == values[0] for v in values) else values  # type: ignore[assignment]
    return result


def proportion(count: str, size: str) -> Callable[[list[Row]], dict[str, Lines]]:
    """Fractions with limits for each point's own size."""

    def compute(rows: list[Row]) -> dict[str, Lines]:
        x, n = column(rows, count), column(rows, size)
        p = sum(x) / sum(n)
        return {"single": together([band(p, 3 * math.sqrt(p * (1 - p) / k), floor=0) for k in n])}

    return compute


def number(count: str, size: float) -> Callable[[list[Row]], dict[str, Lines]]:
    """Numbers of pieces among a constant number."""

    def compute(rows: list[Row]) -> dict[str, Lines]:
        centre = statistics.fmean(column(rows, count))
        return {"single": band(centre, 3 * math.sqrt(centre * (1 - centre / size)), floor=0)}

    return compute


def counts(count: str) -> Callable[[list[Row]], dict[str, Lines]]:
    """Counts over a constant opportunity."""

    def compute(rows: list[Row]) -> dict[str, Lines]:
        centre = statistics.fmean(column(rows, count))
        return {"single": band(centre, 3 * math.sqrt(centre), floor=0)}

    return compute


def rates(count: str, size: str) -> Callable[[list[Row]], dict[str, Lines]]:
    """Counts for each unit of opportunity."""

    def compute(rows: list[Row]) -> dict[str, Lines]:
        x, n = column(rows, count), column(rows, size)
        u = sum(x) / sum(n)
        return {"single": together([band(u, 3 * math.sqrt(u / k), floor=0) for k in n])}

    return compute


def figure(
    panel: str, line: str, printed: str, status: str = "from-memory", **more: object
) -> dict[str, Any]:
    """A published figure as it is printed; `point` names the sample it belongs to, where it varies."""
    return {"panel": panel, "line": line, "printed": printed, "status": status, **more}


FACTORS = "limits printed from factors rounded to three decimals"
CUSTOMARY = {"moving_range_limit": "three-sigma"}
FIVE = ["a", "b", "c", "d", "e"]

EXAMPLES: list[dict[str, Any]] = [
    {
        "id": "nist-flow-rate", "data": "nist_flow_rate", "data_status": "from-memory",
        "source": f"{HANDBOOK}, 6.3.2.2 Individuals control charts (public domain)",
        "settings": {"value": "value", "chart": "individuals", "chart_options": CUSTOMARY},
        "compute": individuals, "outside": {"location": [], "spread": []},
        "published": [
            figure("location", "centre", "50.81"),
            figure("spread", "centre", "1.8778"),
            figure("location", "upper", "55.8041", tolerance=0.0018, why="d2 rounded to 1.128"),
            figure("location", "lower", "45.8159", tolerance=0.0018, why="d2 rounded to 1.128"),
        ],
    },
    {
        "id": "loan-costs", "data": "montgomery_loan_costs", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, ch. 6, mortgage loan processing costs",
        "settings": {"value": "value", "chart": "individuals", "chart_options": CUSTOMARY},
        "compute": individuals, "outside": {"location": [], "spread": []},
        "published": [
            figure("location", "centre", "300.5"),
            figure("spread", "centre", "7.79"),
            figure("location", "upper", "321.22", tolerance=0.0115, why="d2 rounded to 1.128"),
            figure("location", "lower", "279.78", tolerance=0.0115, why="d2 rounded to 1.128"),
            figure("spread", "upper", "25.45", tolerance=0.0106, why="printed from 3.267 and 7.79"),
        ],
    },
    {
        "id": "flow-width-range", "data": "montgomery_flow_width", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, Table 6.1, hard-bake flow width, 25 samples of 5",
        "settings": {"values": FIVE, "chart": "mean-range"},
        "compute": mean_range, "outside": {"location": [], "spread": []},
        "published": [
            figure("location", "centre", "1.5056"),
            figure("spread", "centre", "0.32521"),
            figure("location", "upper", "1.69325", tolerance=0.00017, why=f"A2 = 0.577: {FACTORS}"),
            figure("location", "lower", "1.31795", tolerance=0.00017, why=f"A2 = 0.577: {FACTORS}"),
            figure("spread", "upper", "0.68749", tolerance=0.00017, why=f"D4 = 2.114: {FACTORS}"),
            figure("location", "sigma", "0.1398"),
        ],
    },
    {
        "id": "flow-width-s", "data": "montgomery_flow_width", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, Table 6.1, hard-bake flow width, 25 samples of 5; no published chart of s",
        "settings": {"values": FIVE, "chart": "mean-sd", "estimator": "mean-s"},
        "compute": mean_s, "outside": {"location": [], "spread": []}, "published": [],
    },
    {
        "id": "flow-width-pooled", "data": "montgomery_flow_width", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, Table 6.1, hard-bake flow width, 25 samples of 5; no published chart of s",
        "settings": {"values": FIVE, "chart": "mean-sd"},
        "compute": pooled, "outside": {"location": [], "spread": []}, "published": [],
    },
    {
        "id": "flow-width-median", "data": "montgomery_flow_width", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, Table 6.1, hard-bake flow width, 25 samples of 5; tabled factor of medians",
        "settings": {"values": FIVE, "chart": "median-range"},
        "compute": median_range, "outside": {"location": [], "spread": []},
        "published": [
            figure("location", "upper", "1.71725", tolerance=0.00017, why=f"A6 = 0.691: {FACTORS}"),
            figure("location", "lower", "1.26781", tolerance=0.00017, why=f"A6 = 0.691: {FACTORS}"),
        ],
    },
    {
        "id": "piston-rings-range", "data": "montgomery_piston_rings", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, piston ring inside diameters, 25 samples of 5",
        "settings": {"values": FIVE, "chart": "mean-range"},
        "compute": mean_range, "outside": {"location": [], "spread": []},
        "published": [
            figure("location", "centre", "74.001"),
            figure("spread", "centre", "0.023"),
            figure("location", "upper", "74.014", tolerance=0.001, why="printed from 74.001 and 0.023"),
            figure("location", "lower", "73.988", tolerance=0.001, why="printed from 74.001 and 0.023"),
            figure("spread", "upper", "0.049"),
        ],
    },
    {
        "id": "piston-rings-s", "data": "montgomery_piston_rings", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, piston ring inside diameters, 25 samples of 5",
        "settings": {"values": FIVE, "chart": "mean-sd", "estimator": "mean-s"},
        "compute": mean_s, "outside": {"location": [], "spread": []},
        "published": [
            figure("location", "centre", "74.001"),
            figure("spread", "centre", "0.0094"),
            figure("location", "upper", "74.014", tolerance=0.001, why="printed from 74.001 and 0.0094"),
            figure("location", "lower", "73.988", tolerance=0.001, why="printed from 74.001 and 0.0094"),
            figure("spread", "upper", "0.0196"),
        ],
    },
    {
        # The book takes sigma at each point as pooled s / c4(n) and so prints slightly wider limits (74.016
        # and 73.986 for n = 5). The pooled s divided once by c4 of its degrees of freedom is unbiased, so
        # those limits differ by convention and are not compared.
        "id": "piston-rings-unequal", "data": "montgomery_piston_rings_unequal", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, piston ring inside diameters with samples of 3 to 5, 113 rings",
        "settings": {"value": "diameter", "subgroup": {"column": "sample"}, "chart": "mean-sd"},
        "compute": pooled, "outside": {"location": [], "spread": []},
        "published": [figure("location", "centre", "74.001"), figure("location", "pooled s", "0.0103")],
    },
    {
        "id": "wafer-chips-p", "data": "nist_wafer_chips", "data_status": "from-memory",
        "source": f"{HANDBOOK}, 6.3.3.2 Proportions control charts (public domain); 50 times its fractions",
        "settings": {"count": "nonconforming", "size": "n", "chart": "p"},
        "compute": proportion("nonconforming", "n"), "outside": {"single": [15, 23]},
        "published": [
            figure("single", "centre", "0.2313", "published-seen"),
            figure("single", "upper", "0.4102"),
            figure("single", "lower", "0.0524"),
        ],
    },
    {
        "id": "wafer-chips-np", "data": "nist_wafer_chips", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, ch. 7, the same 30 samples of 50 as orange juice cans, np chart",
        "settings": {"count": "nonconforming", "size": 50, "chart": "np"},
        "compute": number("nonconforming", 50), "outside": {"single": [15, 23]},
        "published": [
            figure("single", "upper", "20.510", tolerance=0.0025, why="printed from p = 0.2313"),
            figure("single", "lower", "2.620", tolerance=0.0025, why="printed from p = 0.2313"),
        ],
    },
    {
        "id": "purchase-orders", "data": "montgomery_purchase_orders", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, ch. 7, purchase orders, p chart with varying sample size",
        "settings": {"count": "nonconforming", "size": "orders", "chart": "p"},
        "compute": proportion("nonconforming", "orders"), "outside": {"single": [11]},
        "published": [figure("single", "centre", "0.096")],
    },
    {
        # Sample 3 lies exactly on the upper limit: on the limit is inside.
        "id": "wafer-defects", "data": "nist_wafer_defects", "data_status": "from-memory",
        "source": f"{HANDBOOK}, 6.3.3.1 Counts control charts (public domain)",
        "settings": {"count": "count", "chart": "c"},
        "compute": counts("count"), "outside": {"single": [24]},
        "published": [
            figure("single", "centre", "16"),
            figure("single", "upper", "28"),
            figure("single", "lower", "4"),
        ],
    },
    {
        "id": "circuit-boards", "data": "montgomery_circuit_boards", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, ch. 7, nonconformities on 26 samples of 100 printed circuit boards",
        "settings": {"count": "nonconformities", "chart": "c"},
        "compute": counts("nonconformities"), "outside": {"single": [6, 20]},
        "published": [
            figure("single", "centre", "19.85"),
            figure("single", "upper", "33.22", tolerance=0.0105, why="printed from 19.85"),
            figure("single", "lower", "6.48"),
        ],
    },
    {
        "id": "shipments", "data": "montgomery_shipments", "data_status": "from-memory",
        "source": f"{MONTGOMERY}, ch. 7, errors in 20 weeks of 50 shipments",
        "settings": {"count": "errors", "size": "shipments", "chart": "u"},
        "compute": rates("errors", "shipments"), "outside": {"single": []},
        "published": [figure("single", "centre", "0.0740"), figure("single", "upper", "0.1894")],
    },
    {
        "id": "overdispersed-plain", "data": "made_up_overdispersed", "data_status": "made up",
        "source": "counts more dispersed than binomial, made up for this set; plain p chart",
        "settings": {"count": "nonconforming", "size": "n", "chart": "p"},
        "compute": proportion("nonconforming", "n"), "outside": {"single": [5, 7, 12]}, "published": [],
    },
]  # fmt: skip


def expected() -> list[dict[str, Any]]:
    """Every example with its computed lines."""
    return [
        {key: value for key, value in example.items() if key != "compute"}
        | {"rows": len(subgroups_or_rows(example)), "computed": example["compute"](read(example["data"]))}
        for example in EXAMPLES
    ]


def subgroups_or_rows(example: dict[str, Any]) -> list[Any]:
    """What becomes a point: a row, or a subgroup of a long file."""
    rows = read(example["data"])
    return subgroups(rows) if "subgroup" in example["settings"] else list(rows)


def main() -> None:
    """Write the file."""
    text = json.dumps(expected(), indent=1, ensure_ascii=False)
    (HERE / "expected.json").write_text(text + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
