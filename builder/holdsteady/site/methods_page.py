"""The methods page: every formula and rule as this site applies it, with its source and its limits."""

from __future__ import annotations

from dataclasses import dataclass

from holdsteady.site.references import REFERENCES
from holdsteady.site.words import (
    CASE_STATES,
    CASE_STATES_EXPLAINED,
    CHARTS,
    FLAGS,
    STATE_ORDER,
    STATES,
    STATES_EXPLAINED,
)  # fmt: skip
from holdsteady.spc.constants import c4, d2, d3, median_error

_SIZES = range(2, 11)


@dataclass(frozen=True, slots=True, kw_only=True)
class ChartMethod:
    """How one kind of chart is made."""

    id: str
    name: str
    plots: str
    formulas: tuple[tuple[str, str], ...]
    notes: tuple[str, ...]
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class RuleMethod:
    """One rule."""

    id: str
    said: str
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class MethodsPage:
    """What the methods page shows."""

    charts: tuple[ChartMethod, ...]
    rules: tuple[RuleMethod, ...]
    constants: tuple[tuple[str, ...], ...]
    states: tuple[tuple[str, str], ...]
    case_states: tuple[tuple[str, str], ...]
    flags: tuple[str, ...]
    estimators: tuple[tuple[str, str, str], ...]  # name in the settings, formula, source
    references: tuple[str, ...]
    chart_sources: str
    licence: str


def methods_page(chart_sources: str, licence: str) -> MethodsPage:
    """Gather the methods page; it links to the charts' specifications and to the licence of their scripts."""
    return MethodsPage(
        charts=tuple(_chart(id_, *method) for id_, method in _CHARTS.items()),
        rules=tuple(RuleMethod(id=id_, said=said, source=source) for id_, said, source in _RULES),
        constants=tuple(
            (str(n), f"{d2(n):.4f}", f"{d3(n):.4f}", f"{c4(n):.4f}", f"{median_error(n):.4f}") for n in _SIZES
        ),
        states=tuple((STATES[state], STATES_EXPLAINED[state]) for state in STATE_ORDER),
        case_states=tuple((said, CASE_STATES_EXPLAINED[state]) for state, said in CASE_STATES.items()),
        flags=tuple(f"{flag}." for flag in FLAGS.values()), estimators=_ESTIMATORS,
        references=tuple(REFERENCES.values()), chart_sources=chart_sources, licence=licence,
    )  # fmt: skip


def _chart(
    id_: str, plots: str, formulas: tuple[tuple[str, str], ...], notes: tuple[str, ...], source: str
) -> ChartMethod:
    return ChartMethod(id=id_, name=CHARTS[id_], plots=plots, formulas=formulas, notes=notes, source=source)


_ISO = "ISO 7870-2:2013"
_THREE_SIGMA = "the idea of three-sigma limits: Shewhart 1931"
_RANGES = "d2, d3: Tippett 1925; unequal sizes: Burr 1969"
_COUNTS = f"{_ISO}; {_THREE_SIGMA}"
_SIGMA_Z = "sigma_z says how much more the points vary than their sizes alone explain (Laney 2002)."
# chart -> (what it plots, formulas, notes, source)
_CHARTS: dict[str, tuple[str, tuple[tuple[str, str], ...], tuple[str, ...], str]] = {
    "individuals": (
        "Single values, and the moving range between each and the one before.",
        (
            ("sigma", "mean moving range · √π / 2; as an option median moving range ÷ 0.9539"),
            ("limits of the values", "mean ± width × sigma"),
            ("upper limit of moving ranges", "3 · √2 · sigma, which 0.27 % of ranges pass; or 3.686 sigma"),
        ),
        (
            "No moving range reaches across the start of an era, a long pause or a measurement fault.",
            (
                "Moving ranges overlap, so no run rules are applied to them (Roes, Does & Schurink 1993; "
                "Rigdon, Cruthis & Champ 1994); they signal only where the settings ask for it."
            ),
            "Overall standard deviation ÷ sigma is shown: above 1 leans to drift, below 1 to alternation.",
        ),
        (
            f"{_ISO}; moving ranges: Roes, Does & Schurink 1993; their median: Bryce, Gaudard & Joiner 1997; "
            f"{_THREE_SIGMA}"
        ),
    ),
    "mean-range": (
        "The mean and the range of each sample.",
        (
            ("sigma", "mean range ÷ d2(n)"),
            ("limits of the mean", "grand mean ± width × sigma / √n"),
            ("limits of the range", "d2(n) sigma ± width × d3(n) sigma; none below that is not above zero"),
        ),
        ("Where sample sizes differ, ranges are weighted by d2² / d3² (Burr 1969).",),
        f"{_ISO}; {_RANGES}; {_THREE_SIGMA}",
    ),
    "mean-sd": (
        "The mean and the standard deviation of each sample.",
        (
            ("sigma", "pooled standard deviation ÷ c4(ν + 1), with ν = Σ(n − 1)"),
            ("limits of the mean", "mean weighted by n ± width × sigma / √n, per sample"),
            ("limits of the standard deviation", "c4(n) sigma ± width × sigma √(1 − c4(n)²), per sample"),
        ),
        ("A sample of one is judged on its mean alone.",),
        (
            f"{_ISO}; pooled over unequal sizes: Burr 1969; Mahmoud, Henderson, Epprecht & Woodall 2010; "
            f"{_THREE_SIGMA}"
        ),
    ),
    "median-range": (
        "The median and the range of each sample.",
        (
            ("sigma", "mean range ÷ d2(n)"),
            (
                "limits of the median",
                "mean of medians ± width × sigma × exact standard deviation of the median of n",
            ),
            ("limits of the range", "as for means and ranges"),
        ),
        (),
        f"{_ISO}; standard error of the median: David & Nagaraja 2003; {_RANGES}; {_THREE_SIGMA}",
    ),
    "p": (
        "The fraction of each sample that has the property counted.",
        (
            ("centre", "Σ count ÷ Σ size"),
            ("limits", "centre ± width × √(centre (1 − centre) / size), per point"),
        ),
        (
            "A lower limit not above 0, or an upper one not below 1, is left out: one point cannot show it.",
            _SIGMA_Z,
        ),
        f"{_COUNTS}; sigma_z: Laney 2002",
    ),
    "np": (
        "The number with the property counted, in samples of one size.",
        (("centre", "mean count"), ("limits", "n p ± width × √(n p (1 − p))")),
        (),
        _COUNTS,
    ),
    "c": (
        "The count in an unchanging area of opportunity.",
        (("centre", "mean count c"), ("limits", "c ± width × √c")),
        ("Limits that are whole numbers are taken as exactly whole.",),
        _COUNTS,
    ),
    "u": (
        "The count for each unit inspected, the number of units differing from point to point.",
        (("centre", "Σ count ÷ Σ size"), ("limits", "centre ± width × √(centre / size), per point")),
        (_SIGMA_Z,),
        f"{_COUNTS}; sigma_z: Laney 2002",
    ),
}
_ESTIMATORS = (
    (
        "mean-range",
        "mean of range ÷ d2(n), weighted by d2² / d3² where sizes differ",
        "Tippett 1925; Burr 1969",
    ),
    ("mean-s", "plain mean of s ÷ c4(n)", _ISO),
    (
        "pooled",
        "√(Σ(n − 1) s² / ν) ÷ c4(ν + 1), with ν = Σ(n − 1)",
        "Burr 1969; Mahmoud, Henderson, Epprecht & Woodall 2010",
    ),
    ("weighted", "mean of s ÷ c4(n), weighted by c4² / (1 − c4²)", "Burr 1969"),
    ("mean-moving-range", "mean moving range · √π / 2", "Roes, Does & Schurink 1993"),
    ("median-moving-range", "median moving range ÷ 0.9539", "Bryce, Gaudard & Joiner 1997"),
)
_WESTERN = "Western Electric 1956"
_NELSON = "Nelson 1984"
_BOTH = f"{_WESTERN}; {_NELSON}"
_UNEQUAL = "Not applied once sizes in an era have differed by more than 2 : 1."
_ZONES = "Not applied to counts."
_RULES = (
    ("outside-limits", "One point strictly outside the limits. A point on the limit is inside.", _BOTH),
    ("two-of-three", f"Two of three points beyond 2 sigma on the same side. {_ZONES}", _BOTH),
    ("four-of-five", f"Four of five points beyond 1 sigma on the same side. {_ZONES}", _BOTH),
    (
        "run-one-side",
        (
            "Nine points in a row on one side of the centre line; eight in the handbook. One on it breaks "
            "it. Counts lie above or below the median of their binomial or Poisson distribution instead; a "
            "point of which fewer than 5 are expected (or, of a fraction, fewer than 5 of the others) breaks "
            "the run."
        ),
        _BOTH,
    ),
    ("trend", f"Six points in a row steadily rising or falling; a tie breaks it. {_UNEQUAL}", _NELSON),
    (
        "alternating",
        f"Fourteen points in a row going up and down in turn; a tie breaks it. {_UNEQUAL}",
        _NELSON,
    ),
    ("hugging", f"Fifteen points in a row within 1 sigma of the centre line. {_ZONES}", _NELSON),
    (
        "avoiding-centre",
        f"Eight points in a row beyond 1 sigma, whether or not both sides appear. {_ZONES}",
        _NELSON,
    ),
)  # fmt: skip
