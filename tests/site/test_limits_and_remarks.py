"""Limits and remarks in words, for every way in which limits come about."""

from __future__ import annotations

from dataclasses import replace
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from tests.made_findings import AS_OF, HOUR, finding

from holdsteady.monitor.finding import Finding
from holdsteady.project.settings import Specification
from holdsteady.site.limits_lines import current_limits, limits_table
from holdsteady.site.moments import Clock
from holdsteady.site.point_rows import headings
from holdsteady.site.remarks import legend, remarks, wanted
from holdsteady.site.words import flag_short
from holdsteady.site.worklist import Work, why
from holdsteady.spc.doubt import compare

CLOCK = Clock(zone=ZoneInfo("Europe/Lisbon"), now=AS_OF)
BORE = finding("bore", title="Bore diameter")


def limits(**change: Any) -> dict[str, str]:
    made = replace(BORE, limits=(replace(BORE.limits[0], **change),))
    return dict(current_limits(made, CLOCK))


def test_adopted_limits_name_who_when_why_and_from_what() -> None:
    assert limits() == {
        "Mean of 5": "11.989 – 12.000 – 12.011 mm",
        "Origin": "adopted by A. R. on 13 Mar: 25 quiet samples",
        "From": "25 points, 10 Mar to 12 Mar; 1 left out by the logbook",
        "Sigma": "0.00804 mm of a single reading, from the mean range",
        "In force since": "Fri 13 Mar 2026, 10:10",
    }


def test_given_and_provisional_limits_say_so() -> None:
    given = limits(kind="given", estimator="", points=None, reason="", by="", adopted_at=None)
    assert given["Origin"] == "given in the settings, not estimated"
    assert given["Sigma"] == "0.00804 mm of a single reading"
    assert "From" not in given
    assert limits(kind="provisional")["Origin"] == "provisional: nobody has adopted them"


@pytest.mark.parametrize(
    ("change", "said"),
    [
        ({"lower": None}, "centre 12.000 mm, upper limit 12.011 mm; no lower limit"),
        ({"upper": None}, "lower limit 11.989 mm, centre 12.000 mm; no upper limit"),
        (
            {"lower": None, "upper": None, "estimator": "median", "note": "too few points"},
            "median 12.000 mm; no limits (too few points)",
        ),
        (
            {"lower": None, "upper": None, "note": "no variation in the baseline"},
            "centre 12.000 mm; no limits (no variation in the baseline)",
        ),
        (
            {"lower": None, "upper": None, "varies": True},
            "11.989 – 12.000 – 12.011 mm, at the newest point; they vary with the size of each",
        ),
        ({"lower": None, "upper": None, "centre": None, "note": "no points"}, "none (no points)"),
    ],
)
def test_what_is_missing_is_said(change: dict[str, Any], said: str) -> None:
    assert limits(**change)["Mean of 5"] == said


def test_an_origin_that_panels_share_is_told_once() -> None:
    names = [name for name, _ in current_limits(BORE, CLOCK)]
    assert names == ["Mean of 5", "Range of 5", "Origin", "From", "Sigma", "In force since"]


def test_the_table_of_limits_is_newest_first() -> None:
    early = replace(BORE.limits[0], stop_index=40, kind="provisional", in_force_from=AS_OF - 178 * HOUR)
    late = replace(BORE.limits[0], start_index=40)
    rows = limits_table(replace(BORE, limits=(early, late)), CLOCK)
    assert [(row.since, row.kind) for row in rows] == [
        ("Fri 13 Mar 2026, 10:10", "adopted"),
        ("Tue 10 Mar 2026, 04:10", "provisional"),
    ]


def test_remarks_name_flags_dispersion_and_what_the_logbook_left_out() -> None:
    made: Finding = replace(
        BORE,
        flags=("outside-specification", "doubtful-limits"),
        sigma_ratio=1.234,
        censored=1,
        overdispersion=1.1,
    )
    said = remarks(made)
    assert said[0] == "A reading lies outside specification, lately."
    assert said[1].startswith("The limits are doubtful")
    assert "The points vary 1.10 times as much as their sizes alone explain (sigma_z)" in said[2]
    assert said[3].startswith("Overall standard deviation ÷ sigma from moving ranges is 1.23;")
    assert "The smallest step between readings is 0.001 mm." in said
    assert "1 reading beyond what the gauge can read was set aside." in said
    assert said[-1] == "1 point was left out of the limits, yet drawn."


def test_an_attribute_chart_without_a_lower_limit_cannot_show_an_improvement() -> None:
    said = "There is no lower limit: one point alone cannot show an improvement."
    stops = finding("stops", chart="c", unit="")  # 4 - 3 * 2 is below zero
    assert said in remarks(stops)
    assert said not in remarks(finding("rejects", chart="p", unit=""))
    assert said not in remarks(BORE)
    # Without any limits nothing can be shown at all, and that is said elsewhere.
    assert said not in remarks(finding("stops", chart="c", unit="", state="gathering"))
    # Where more is better, low is the bad way.
    passed = remarks(finding("stops", chart="c", unit="", better="higher"))
    assert said not in passed
    assert "There is no lower limit: one point alone cannot show that it got worse." in passed


def test_a_fraction_without_an_upper_limit_says_what_that_hides() -> None:
    def of(better: str | None) -> tuple[str, ...]:
        made = finding("passes", chart="p", unit="", better=better)
        panel = replace(made.panels[0], upper=np.full(90, np.nan))
        return remarks(replace(made, panels=(panel,), limits=(replace(made.limits[0], upper=None),)))

    assert "There is no upper limit: one point alone cannot show an improvement." in of("higher")
    assert "There is no upper limit: one point alone cannot show that it got worse." in of(None)


def test_limits_that_vary_are_asked_at_the_newest_complete_point() -> None:
    made = finding("rejects", chart="p", unit="")
    lower = made.panels[0].lower.copy()
    lower[-2] = np.nan
    made = replace(
        made,
        panels=(replace(made.panels[0], lower=lower),),
        limits=(replace(made.limits[0], lower=None, upper=None, varies=True, at_index=88),),
    )
    said = "There is no lower limit: one point alone cannot show an improvement."
    assert said in remarks(made)
    assert said not in remarks(replace(made, limits=(replace(made.limits[0], at_index=89),)))


def test_doubtful_limits_say_in_what() -> None:
    rng = np.random.default_rng(3)
    found = compare(rng.normal(size=25), 3 + 5 * rng.normal(size=200))
    assert len(found.reasons) == 2
    made = replace(BORE, flags=("doubtful-limits",), doubts=found.reasons)
    assert remarks(made)[0] == (
        "The limits are doubtful: the process has not run as it did in their baseline: "
        "the level differs from the baseline's and the spread differs from the baseline's."
    )
    assert flag_short(made, "doubtful-limits") == "limits doubtful: level and spread"
    related = compare(rng.normal(size=40), np.cumsum(rng.normal(size=400)))
    assert any("autocorrelation" in reason for reason in related.reasons)
    short = flag_short(replace(made, doubts=related.reasons), "doubtful-limits")
    assert short.endswith("autocorrelation")
    assert "differs" not in short


@pytest.mark.parametrize(
    ("specification", "said"),
    [
        (Specification(lower=11.95, upper=12.05), "11.950 to 12.050 mm"),
        (Specification(lower=11.95, target=12.0), "at least 11.950 mm, target 12.000 mm"),
        (Specification(upper=12.05), "at most 12.050 mm"),
        (Specification(target=12.0), "target 12.000 mm"),
    ],
)
def test_what_is_wanted(specification: Specification, said: str) -> None:
    assert wanted(replace(BORE, specification=(specification,)), CLOCK)[0] == ("Wanted", said)


def test_what_was_seen_is_counted_and_nothing_is_predicted() -> None:
    lines = dict(wanted(BORE, CLOCK))
    assert lines["Seen"] == "none of 450 readings outside so far"
    some = replace(BORE, summaries=(replace(BORE.summaries[0], outside_observed=3),))
    assert dict(wanted(some, CLOCK))["Seen"] == "3 of 450 readings outside so far"
    assert wanted(replace(BORE, specification=()), CLOCK) == ()


def test_a_chart_without_limits_promises_no_band() -> None:
    few = finding("few", state="gathering", n=25)
    assert "Band" not in legend(few)
    assert legend(few).startswith("Line: the centre; there are no limits, so nothing can signal.")
    assert legend(BORE).startswith("Band:")


def test_fractions_have_one_scale_and_their_sign() -> None:
    made = finding("rejects", chart="p", unit="")
    panel = replace(made.panels[0], upper=np.full(90, np.nan))
    made = replace(made, panels=(panel,), limits=(replace(made.limits[0], lower=0.0104, upper=None),))
    said = dict(current_limits(made, CLOCK))["Fraction"]
    assert said == "lower limit 1.040\u202f%, centre 2.200\u202f%; no upper limit"
    assert headings(made) == (("Fraction, %", "Limits, %"),)
    assert headings(BORE) == (("Mean of 5, mm", "Limits, mm"), ("Range of 5, mm", "Limits, mm"))
    assert headings(finding("stops", chart="c", unit="")) == (("Count", "Limits"),)


def test_the_legend_names_only_what_is_drawn() -> None:
    assert "Ringed" not in legend(BORE)
    assert "Ringed" in legend(finding("x", shift=2.0, state="signalling"))
    assert "Hollow" in legend(BORE)
    assert "Crossed" in legend(BORE)
    single = finding("peak", chart="individuals")
    assert legend(single).endswith("Bracket in the margin: what is wanted of single pieces.")
    assert "Bracket" not in legend(finding("stops", chart="c"))


def test_a_gross_case_inside_its_own_baseline_says_why_it_is_open() -> None:
    made = finding("bore", shift=2.0, state="signalling")
    panel = made.panels[0]
    z = panel.z.copy()
    z[80] = 6.2
    case = replace(made.cases[0], first_index=80, fired_index=80, last_index=80, gross=True)
    inside = replace(panel, z=z, in_baseline=np.ones_like(panel.in_baseline))
    said = why(Work(replace(made, panels=(inside, made.panels[1])), case))
    assert said.endswith("Inside the baseline of its own limits, but gross.")
    outside = replace(panel, z=z)
    assert "baseline" not in why(Work(replace(made, panels=(outside, made.panels[1])), case))
    # Which points are gross is the monitor's to say.
    assert "gross" not in why(
        Work(replace(made, panels=(inside, made.panels[1])), replace(case, gross=False))
    )
