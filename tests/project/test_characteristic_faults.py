"""Each fault of a characteristic by its message, remedy, key path and line."""

from __future__ import annotations

import pytest
from tests.project.settings_text import BORE, HEAD, START, said

SPAN = "must be a span of time: a number above 0 and one of s, m, h, d, w, as in '8h'"
FORM = "Write it in this form, or leave the key out."


@pytest.mark.parametrize(
    ("more", "where", "what", "remedy"),
    [
        ("basline = { points = 25 }", "basline", "unknown key `basline`", "Did you mean `baseline`?"),
        ("baseline = { point = 25 }", "baseline.point", "unknown key `point`", "Did you mean `points`?"),
        ("class_ = 'safety'", "class_", "unknown key `class_`", "Did you mean `class`?"),
        ("plausible = { low = 1 }", "plausible.low", "unknown key `low`", "Did you mean `lower`?"),
        ("plausible = { zzz = 1 }", "plausible.zzz", "unknown key `zzz`", "Known here: lower, upper."),
        (
            "decimals = '3'",
            "decimals",
            "must be a whole number, not '3'",
            "Write a whole number, without quotes.",
        ),
        (
            "decimals = 2.5",
            "decimals",
            "must be a whole number, not 2.5",
            "Write a whole number, without quotes.",
        ),
        (
            "decimals = true",
            "decimals",
            "must be a whole number, not true",
            "Write a whole number, without quotes.",
        ),
        ("width = 'wide'", "width", "must be a number, not 'wide'", "Write a number, without quotes."),
        ("width = 0", "width", "must be above 0, not 0", "Give a larger number."),
        ("width = nan", "width", "must be a finite number, not nan", "Write a number, or leave the key out."),
        ("title = 5", "title", "must be text, not 5", "Write it in quotes."),
        (
            "each = 'press'",
            "each",
            "must be a list, not 'press'",
            'Write it in square brackets, as in ["a", "b"].',
        ),
        ("each = ['a', 'b', 'a']", "each.3", "names column 'a' twice", "Name each column once."),
        ("where = 'B2'", "where", "must be a table, not 'B2'", "Write it in braces, as in { key = value }."),
        (
            "where = { day = 2026-01-01 }",
            "where.day",
            "must be text, a number, true or false, not 2026-01-01",
            FORM,
        ),
        ("cadence = '8 hours'", "cadence", f"{SPAN}, not '8 hours'", FORM),
        ("gap = 3", "gap", f"{SPAN}, not 3", FORM),
        ("subgroup = { every = '0h' }", "subgroup.every", f"{SPAN}, not '0h'", FORM),
        ("subgroup = 5", "subgroup", "must be a table, not 5", "Write it in braces, as in { key = value }."),
        (
            "subgroup = { size = 5, column = 'c' }",
            "subgroup",
            "needs exactly one of `column`, `size` and `every`, not `column` and `size`",
            "Keep the one that is meant.",
        ),
        (
            "subgroup = { }",
            "subgroup",
            "needs exactly one of `column`, `size` and `every`, not nothing",
            "Keep the one that is meant.",
        ),
        (
            "subgroup = { column = '' }",
            "subgroup.column",
            "must not be empty",
            "Name something, or leave the key out.",
        ),
        ("subgroup = { size = 1 }", "subgroup.size", "must be at least 2, not 1", "Give a larger number."),
        (
            "better = 'hihger'",
            "better",
            "must be 'higher' or 'lower', not 'hihger'",
            "Did you mean 'higher'?",
        ),
        (
            "baseline = { points = 5 }",
            "baseline.points",
            "must be at least 8, not 5",
            "Give a larger number.",
        ),
        (
            "baseline = { points = 20, from = 2026-01-01, to = 2026-02-01 }",
            "baseline",
            "gives both a number of `points` and a span of time",
            "Keep `points`, or `from` and `to`.",
        ),
        (
            "baseline = { from = 2026-01-01 }",
            "baseline",
            "lacks `to`",
            "Give both `from` and `to`; `to` is not included.",
        ),
        (
            "baseline = { from = 2026-02-01, to = 2026-01-01 }",
            "baseline.from",
            "`from` must be before `to`: 2026-02-01 is not before 2026-01-01",
            "Give the earlier as `from`; `to` is not included.",
        ),
        (
            "baseline = { from = '2026-02-01', to = 2026-03-01 }",
            "baseline.from",
            "must be a date, or a date and time, without quotes, as in 2026-03-01T06:00:00, not '2026-02-01'",
            FORM,
        ),
        (
            "specification = { lower = 12.05, upper = 11.95 }",
            "specification.lower",
            "must be below `upper`: 12.05 is not below 11.95",
            "Give the smaller as `lower`, the larger as `upper`.",
        ),
        (
            "specification = { lower = 1, target = 3, upper = 2 }",
            "specification.target",
            "3 lies above `upper` 2",
            "Give a target between the two, or leave it out.",
        ),
        (
            "specification = [{ upper = 2 }, { from = 2026-01-01, target = 0, lower = 1 }]",
            "specification.2.target",
            "0 lies below `lower` 1",
            "Give a target between the two, or leave it out.",
        ),
        (
            "specification = { }",
            "specification",
            "is empty",
            "Give `lower`, `target` or `upper`, or leave it out.",
        ),
        ("specification = { lowr = 2 }", "specification.lowr", "unknown key `lowr`", "Did you mean `lower`?"),
        (
            "specification = [{ lower = 'x' }]",
            "specification.1.lower",
            "must be a number, not 'x'",
            "Write a number, without quotes.",
        ),
        (
            "specification = [{ upper = 2 }, { upper = 3 }]",
            "specification.2",
            "has no `from`, nor has another",
            "Give each its own `from`; only the first may do without.",
        ),
        (
            "limits = [{ from = 2026-01-01, centre = 2, sigma = 1 }, { from = 2026-01-01T00:00:00, centre = 3, sigma = 1 }]",  # noqa: E501
            "limits.2",
            "begins when another does",
            "Give each its own `from`; only the first may do without.",
        ),
        (
            "limits = { sigma = 0.1 }",
            "limits.centre",
            "`centre` is missing",
            "Add `centre`; it cannot be left out here.",
        ),
        (
            "limits = { centre = 0.1 }",
            "limits",
            "`limits` need a `sigma` here",
            "Add the sigma of a single reading.",
        ),
        (
            "limits = { centre = 1, sigma = 0 }",
            "limits.sigma",
            "must be above 0, not 0",
            "Give a larger number.",
        ),
        (
            "plausible = { lower = 20, upper = 5 }",
            "plausible.lower",
            "must be below `upper`: 20 is not below 5",
            "Give the smaller as `lower`, the larger as `upper`.",
        ),
        (
            "calendar = 'mon 6-14'",
            "calendar",
            "'6-14' cannot be read as days and hours",
            "Write it as in 'mon-fri 06:00-22:00; sat 06:00-14:00'.",
        ),
        (
            "chart = 'mean-range'",
            "chart",
            "chart 'mean-range' needs `values`, or `value` with `subgroup`",
            "Add them, or leave `chart` out to let the data decide.",
        ),
        (
            "chart = 'p'",
            "chart",
            "chart 'p' needs `count` and `size`",
            "Add them, or use chart 'c' for plain counts.",
        ),
        (
            "size = 50",
            "size",
            "`size` goes with `count` alone",
            "Take `size` out; how many readings make a point is `subgroup = { size = 5 }`.",
        ),
        (
            "count = 'rejects'",
            "count",
            "`value` and `count` exclude each other",
            "Keep the one that is meant.",
        ),
        (
            "values = ['a', 'b']",
            "values",
            "`value` and `values` exclude each other",
            "Keep the one that is meant.",
        ),
        (
            "estimator = 'pooled'",
            "estimator",
            "estimator 'pooled' does not go with single values",
            "Use one of mean-moving-range, median-moving-range, or leave it out.",
        ),
        (
            "chart_options = { moving_range_limits = 'three-sigma' }",
            "chart_options.moving_range_limits",
            "this chart has no option `moving_range_limits`",
            "Did you mean `moving_range_limit`?",
        ),
        (
            "chart_options = { moving_range_signals = 'yes' }",
            "chart_options.moving_range_signals",
            "must be true or false, not 'yes'",
            "Use one of these.",
        ),
        (
            "rules = []",
            "rules",
            "names no rule, so that the chart could never signal",
            "Leave the key out for the chart's own rules.",
        ),
        ("rules = 3", "rules", "must be a list, not 3", 'Write rules as in ["outside-limits"].'),
        ("rules = 'nelsen'", "rules", "there is no rule 'nelsen'", "Did you mean 'nelson'?"),
        ("rules = ['trend', 'tend']", "rules.2", "there is no rule 'tend'", "Did you mean 'trend'?"),
        ("rules = ['trend', 'trend']", "rules.2", "'trend' is named twice", "Keep one of the two."),
        (
            "rules = [{ rule = 'two-of-three', points = 4 }]",
            "rules.1.points",
            "'two-of-three' cannot be met: 4 points of the last 3",
            "Give `points` and `of`, the first no larger than the second.",
        ),
        (
            "rules = [{ rule = 'four-of-five', of = 3 }]",
            "rules.1.of",
            "'four-of-five' cannot be met: 4 points of the last 3",
            "Give `points` and `of`, the first no larger than the second.",
        ),
        (
            "rules = [{ rule = 'run-one-side', points = 9, of = 10 }]",
            "rules.1.of",
            "'run-one-side' needs its points in a row and knows no `of`",
            "Leave `of` out.",
        ),
        (
            "rules = [{ rule = 'outside-limits', points = 2 }]",
            "rules.1.points",
            "'outside-limits' needs one point",
            "Leave `points` out.",
        ),
        (
            "rules = [{ rule = 'trend', points = 2 }]",
            "rules.1.points",
            "'trend' means nothing with fewer than 3 points",
            "Leave `points` out; the usual count is 6.",
        ),
        (
            "rules = [{ rule = 'trend', point = 2 }]",
            "rules.1.point",
            "unknown key `point`",
            "A rule knows `rule`, `points` and `of`.",
        ),
    ],
)
def test_one_fault(more: str, where: str, what: str, remedy: str) -> None:
    assert said(START + more) == [(f"characteristic.bore.{where}", 9, what, remedy)]


@pytest.mark.parametrize(
    ("data", "where", "what", "remedy"),
    [
        (
            "",
            "",
            "names no column to read: exactly one of `value`, `values` and `count` is needed",
            "Add one of the three.",
        ),
        ("values = ['a']", ".values", "names a single column", "Name at least two, or use `value`."),
        ("values = ['a', 'a']", ".values.2", "names column 'a' twice", "Name each column once."),
        (
            "values = ['a', 'b']\nsubgroup = { size = 5 }",
            ".subgroup",
            "`values` are subgroups already, one a row",
            "Take `subgroup` out, or use `value`.",
        ),
        (
            "values = ['a', 'b']\nchart = 'individuals'",
            ".chart",
            "chart 'individuals' needs `value` without `subgroup`",
            "Change the data, or leave `chart` out to let them decide.",
        ),
        (
            "values = ['a', 'b']\nestimator = 'mean-moving-range'",
            ".estimator",
            "estimator 'mean-moving-range' does not go with subgroups",
            "Use one of mean-range, mean-s, pooled, weighted, or leave it out.",
        ),
        (
            "values = ['a', 'b']\nchart = 'mean-sd'\nchart_options = { moving_range_signals = true }",
            ".chart_options.moving_range_signals",
            "chart 'mean-sd' has no option `moving_range_signals`",
            "Take it out.",
        ),
        (
            "count = 'x'\nchart = 'u'",
            ".chart",
            "chart 'u' needs `count` and `size`",
            "Add them, or use chart 'c' for plain counts.",
        ),
        (
            "count = 'x'\nsize = 'n'\nchart = 'c'",
            ".chart",
            "chart 'c' needs `count` without `size`",
            "Use chart 'u', or 'p' where the count is a part of the size.",
        ),
        ("count = 'x'\nsize = 0", ".size", "must be above 0, not 0", "Give how many are looked at."),
        ("count = 'x'\nsize = true", ".size", "must be the name of a column, or a number, not true", FORM),
        (
            "count = 'x'\nlimits = { centre = 1, sigma = 1 }",
            ".limits.sigma",
            "`limits` with a `sigma` do not go with counts: it follows from the centre",
            "Give `centre` alone.",
        ),
        (
            "count = 'x'\nestimator = 'pooled'",
            ".estimator",
            "estimator 'pooled' does not go with counts: their sigma follows from the centre",
            "Take `estimator` out.",
        ),
        (
            "count = 'x'\nrules = 'western-electric'",
            ".rules",
            "two-of-three, four-of-five cannot be used on counts: zones of one sigma suppose a symmetric statistic",  # noqa: E501
            "Use outside-limits and run-one-side.",
        ),
    ],
)
def test_data_and_chart(data: str, where: str, what: str, remedy: str) -> None:
    lines = (HEAD + BORE + data).splitlines()
    key = where.split(".")[1] if where else "[[characteristic]]"
    line = next(i for i, text in enumerate(lines, 1) if text.startswith(key))
    assert said("\n".join(lines)) == [(f"characteristic.bore{where}", line, what, remedy)]
