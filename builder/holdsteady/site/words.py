"""The vocabulary of the pages: states, flags, statistics, rules and signals in plain words."""

from __future__ import annotations

from holdsteady.monitor.finding import CaseState, Finding, Panel, Signal
from holdsteady.site import decimals
from holdsteady.site.numbers import Scale, listed, spelled
from holdsteady.spc.rules import Rule

CAUTION = (
    "A chart says whether a process performs as it has; it is no release decision. "
    "Where people can be hurt, the applicable standard and a qualified person decide."
)
CLASS_CAUTION = (
    "This characteristic is marked as concerning {kind}. What stands here defers to the applicable standard "
    "and to a qualified person: follow their procedure first."
)
CLASSES = {"safety": "safety", "regulatory": "a regulation"}

STATES = {
    "signalling": "signalling",
    "not-computed": "not computed",
    "silent": "silent",
    "gathering": "gathering",
    "answered": "answered",
    "steady": "steady",
}
# The order in which states ask for attention, on the first page and between neighbours.
STATE_ORDER = tuple(STATES)
STATES_EXPLAINED = {
    "signalling": "A case is open: ongoing, or ended so lately that it still asks for an answer.",
    "not-computed": "Its data or its settings allow no chart; the page says why and what to do.",
    "silent": "No reading for more than two of its cadences of calendar time.",
    "gathering": "Too few points for limits, or a baseline that allows none: no variation, no events.",
    "answered": "There were cases lately, each with a recorded reason. It does not say that they are fixed.",
    "steady": "None of the above: no signal that asks for anyone.",
}
CASE_STATES: dict[CaseState, str] = {
    "open": "open",
    "answered": "answered",
    "baseline": "in the baseline",
    "ended": "ended",
    "historical": "historical",
    "withdrawn": "withdrawn",
}
CASE_STATES_EXPLAINED: dict[CaseState, str] = {
    "open": "Ongoing, or ended so lately that it still asks for an answer; no reason is recorded.",
    "answered": "A reason is recorded in the logbook; nothing says it is fixed.",
    "baseline": "Inside the points that set the limits. A gross one, beyond 5 sigma, is open instead.",
    "ended": "Over, unanswered, and older than the time in which a case asks for an answer.",
    "historical": "Over before the day from which this site is watched.",
    "withdrawn": "Shown at the publication before; corrected or late data removed it.",
}
FLAGS = {
    "outside-specification": "A reading lies outside specification, lately",
    "provisional-limits": "The limits are provisional: nobody has adopted them",
    "doubtful-limits": "The limits are doubtful: the process has not run as it did in their baseline",
    "doubtful-capability": "Capability is withheld, or given with conditions",
    "doubtful-gauge": "The gauge is doubtful: its step is coarse, or a fault was recorded lately",
}
# On the first page's rows, beside the state; the others wait on the characteristic's own page.
FLAGS_SHORT = {
    "outside-specification": "a reading outside specification",
    "doubtful-limits": "limits doubtful",
    "doubtful-gauge": "gauge doubtful",
}
_DOUBTS_SHORT = {
    "the level differs from the baseline's": "level",
    "the spread differs from the baseline's": "spread",
    "the autocorrelation differs from the baseline's": "autocorrelation",
}
LIMITS_KINDS = {"provisional": "provisional", "adopted": "adopted", "given": "given"}
KINDS = {
    "cause": "cause",
    "process-change": "process change",
    "measurement-fault": "measurement fault",
    "note": "note",
}
CHARTS = {
    "individuals": "Individuals and moving ranges",
    "mean-range": "Means and ranges",
    "mean-sd": "Means and standard deviations",
    "median-range": "Medians and ranges",
    "p": "Fraction (p)",
    "np": "Number in equal samples (np)",
    "c": "Count (c)",
    "u": "Count per unit (u)",
}
# statistic -> (axis name, name in a sentence)
_STATISTICS = {
    "value": ("Value", "single value"),
    "mean": ("Mean", "sample mean"),
    "median": ("Median", "sample median"),
    "range": ("Range", "sample range"),
    "s": ("Standard deviation", "sample standard deviation"),
    "moving-range": ("Moving range", "moving range"),
    "fraction": ("Fraction", "fraction"),
    "count": ("Count", "count"),
    "rate": ("Rate", "rate"),
}
_TAKEN_FROM_SUBGROUPS = {"mean", "median", "range", "s"}
SPREADS = {"range", "s", "moving-range"}
_ESTIMATORS = {
    "mean-range": "the mean range",
    "mean-s": "the mean standard deviation",
    "pooled": "the pooled standard deviation",
    "weighted": "the weighted standard deviations",
    "mean-moving-range": "the mean moving range",
    "median-moving-range": "the median moving range",
}
_METHODS = {
    "mean-range": "sigma from the mean range",
    "mean-s": "sigma from the mean standard deviation",
    "pooled": "sigma from the pooled standard deviation",
    "weighted": "sigma from the weighted standard deviations",
    "mean-moving-range": "sigma = mean moving range · √π / 2",
    "median-moving-range": "sigma = median moving range ÷ 0.9539",
    "": "the centre alone; sigma follows from it at each point",
}
RULES = {
    "outside-limits": "outside the limits",
    "two-of-three": "two of three beyond 2 sigma",
    "four-of-five": "four of five beyond 1 sigma",
    "run-one-side": "run on one side",
    "trend": "trend",
    "alternating": "alternating",
    "hugging": "hugging the centre line",
    "avoiding-centre": "avoiding the centre line",
}


def statistic_name(panel: Panel, common_n: float | None) -> str:
    """Return what a panel draws, as its axis says: 'Mean of 5', 'Moving range'."""
    name = _STATISTICS.get(panel.statistic, (panel.statistic.capitalize(), ""))[0]
    if panel.statistic in _TAKEN_FROM_SUBGROUPS and common_n is not None and common_n == round(common_n):
        return f"{name} of {common_n:.0f}"
    return name


def statistic_said(panel: Panel) -> str:
    """Return the plotted statistic in a sentence: 'sample mean'."""
    return _STATISTICS.get(panel.statistic, ("", panel.statistic))[1]


def estimator_said(estimator: str) -> str:
    """Return an estimator in words: 'the mean range'."""
    return _ESTIMATORS.get(estimator, estimator)


def method_said(method: str) -> str:
    """Return a method of calculation in words."""
    return _METHODS.get(method, method)


def panel_named(finding: Finding, name: str) -> Panel:
    """Return the panel of that name."""
    return next(panel for panel in finding.panels if panel.name == name)


def scale(finding: Finding, panel: Panel) -> Scale:
    """Return how values of a panel are written."""
    return Scale(
        statistic=panel.statistic,
        unit=finding.settings.unit,
        decimals=decimals.of_panel(finding, panel),
    )


def flag_short(finding: Finding, flag: str) -> str:
    """Return a flag for a row of the first page, '' for one that waits on the characteristic's own page."""
    said = FLAGS_SHORT.get(flag, "")
    if flag == "doubtful-limits" and finding.doubts:
        return f"{said}: {listed([_DOUBTS_SHORT.get(doubt, doubt) for doubt in finding.doubts])}"
    return said


def flag_said(flag: str) -> str:
    """Return a flag in words."""
    return FLAGS.get(flag, flag.replace("-", " "))


def _middle(panel: Panel) -> str:
    """Return the line that sides are told from: of counts it is the median, for their centre is skewed."""
    return "median" if panel.name == "single" else "centre line"


def rule_said(rule: Rule, panel: Panel) -> str:
    """Return a rule of a panel with its counts, as the chart's page lists it."""
    points = spelled(rule.points)
    return {
        "outside-limits": "one point outside the limits",
        "two-of-three": f"{points} of {spelled(rule.of)} points beyond 2 sigma on one side",
        "four-of-five": f"{points} of {spelled(rule.of)} points beyond 1 sigma on one side",
        "run-one-side": f"{points} points in a row on one side of the {_middle(panel)}",
        "trend": f"{points} points in a row steadily rising or falling",
        "alternating": f"{points} points in a row going up and down in turn",
        "hugging": f"{points} points in a row within 1 sigma of the centre line",
        "avoiding-centre": f"{points} points in a row beyond 1 sigma, on either side",
    }.get(rule.name, rule.name)


def signal_said(finding: Finding, signal: Signal) -> str:
    """Return one signal in words: 'nine points in a row below the centre line'."""
    panel = panel_named(finding, signal.panel)
    rule = next((r for r in panel.rules if r.name == signal.rule), None)
    length = int(panel.judged[signal.first_index : signal.last_index + 1].sum()) or 1
    high = signal.direction == "high"
    side, limit, way = ("above", "upper", "rising") if high else ("below", "lower", "falling")
    row = f"{spelled(length)} points in a row"
    zone = f"{spelled(rule.points)} of {spelled(rule.of)}" if rule else "most"
    longer = f", over {spelled(length)} points" if rule and length > rule.of else ""
    subject = "" if panel.name in {"location", "single"} else f"{statistic_said(panel)}: "
    one = "one point" if length == 1 else row
    said = {
        "outside-limits": f"{one} {side} the {limit} limit",
        "two-of-three": f"{zone} points more than 2 sigma {side} the centre line{longer}",
        "four-of-five": f"{zone} points more than 1 sigma {side} the centre line{longer}",
        "run-one-side": f"{row} {side} the {_middle(panel)}",
        "trend": f"{row} steadily {way}",
        "alternating": f"{row} going up and down in turn",
        "hugging": f"{row} within 1 sigma of the centre line",
        "avoiding-centre": f"{row} beyond 1 sigma, on either side",
    }.get(signal.rule, signal.rule)
    return subject + said
