"""Settings: what is accepted, what is not there yet, and where faults are told."""

from __future__ import annotations

import datetime as dt

import pytest
from tests.project.settings_text import BORE, HEAD, START, bore, problems, read, said

from holdsteady.project.not_yet import NOT_YET
from holdsteady.project.settings import RuleSetting

WHOLE = """
[site]
title = "Osmire Filterworks"
output = "site"
timezone = "Europe/Lisbon"
watch_from = 2026-01-05
attention = "14d"
as_of = 2026-03-17T14:10:00
points = "all"
language = "en"
footer = "Quality, ext. 14"

[defaults]
baseline = { points = 25 }

[[source]]
id = "press"
files = ["press/*.csv"]
time = "stamp"
encoding = "utf-8"
delimiter = ";"
decimal = ","
time_format = "%d.%m.%Y %H:%M:%S"
missing = ["-999", "n/a"]
key = ["stamp", "serial"]
newest = "modified"

[[characteristic]]
id = "bore"
title = "Bore diameter"
area = "Pressing"
source = "press"
value = "bore_mm"
where = { station = "B2" }
each = ["press"]
subgroup = { column = "sample" }
chart = "mean-range"
chart_options = { }
unit = "mm"
decimals = 3
specification = { lower = 11.95, target = 12.00, upper = 12.05 }
plausible = { lower = 5, upper = 20 }
baseline = { points = 25 }
limits = { centre = 12.0, sigma = 0.011 }
limits_by = "sigma"
width = 3.0
estimator = "pooled"
censored = "set-aside"
rules = ["outside-limits", "run-one-side"]
cadence = "8h"
calendar = "mon-fri 06:00-22:00"
gap = "3d"
gauge = "CMM-2"
class = "safety"
reaction = "Stop the press, quarantine the last box, call the setter."
owner = "Pressing cell"
better = "higher"
"""


def test_every_key_is_accepted() -> None:
    settings = read(WHOLE)
    written = {line.split(" = ")[0] for line in WHOLE.splitlines() if " = " in line}
    models = (settings.site, settings.source[0], settings.characteristic[0])
    given = {name.rstrip("_") for model in models for name in model.model_fields_set} | {"class"}
    assert written == given
    assert settings.characteristic[0].class_ == "safety"
    assert settings.site.watch_from == dt.date(2026, 1, 5)


def test_every_key_of_the_models_stands_in_the_example() -> None:
    settings = read(WHOLE)
    other_data = {"values", "count", "size"}  # a characteristic reads one kind of data
    for model in (settings.site, settings.source[0], settings.characteristic[0]):
        assert set(type(model).model_fields) - model.model_fields_set - other_data == set()


def test_a_few_lines_are_enough() -> None:
    characteristic = read(START).characteristic[0]
    assert characteristic.chart is None
    assert characteristic.rules is None
    assert characteristic.baseline.points == 25


def test_defaults_are_laid_under_key_by_key() -> None:
    text = '[defaults]\nsource = "press"\nunit = "mm"\nbaseline = { points = 30 }\n' + HEAD
    text += '[[characteristic]]\nid = "a"\nvalue = "v"\nunit = "µm"\n'
    text += "[[characteristic]]\nid = 'b'\nvalue = 'v'\nbaseline = { from = 2026-01-01, to = 2026-02-01 }\n"
    a, b = read(text).characteristic
    assert (a.unit, a.baseline.points, b.unit) == ("µm", 30, "mm")
    assert b.baseline.from_ == dt.date(2026, 1, 1)
    assert "points" not in b.baseline.model_fields_set


def test_histories_are_sorted_by_their_moment() -> None:
    later = "[{ from = 2026-03-01, upper = 2 }, { upper = 3 }, { from = 2026-02-01T06:00:00, upper = 1 }]"
    assert [s.upper for s in bore(f"specification = {later}").specification] == [3, 1, 2]
    given = "[{ from = 2026-03-01, centre = 2, sigma = 1 }, { centre = 3, sigma = 1 }]"
    assert [g.centre for g in bore(f"limits = {given}").limits] == [3, 2]


WESTERN = (
    RuleSetting(rule="outside-limits"),
    RuleSetting(rule="two-of-three"),
    RuleSetting(rule="four-of-five"),
    RuleSetting(rule="run-one-side", points=8),
)


@pytest.mark.parametrize(
    ("written", "rules"),
    [
        ('"western-electric"', WESTERN),
        ('["western-electric"]', WESTERN),
        (
            '["western-electric", "trend", { rule = "run-one-side", points = 9 }]',
            (*WESTERN[:3], RuleSetting(rule="run-one-side", points=9), RuleSetting(rule="trend")),
        ),
        (
            '{ rule = "two-of-three", points = 3, of = 4 }',
            (RuleSetting(rule="two-of-three", points=3, of=4),),
        ),
        ('["hugging"]', (RuleSetting(rule="hugging"),)),
    ],
)
def test_rules(written: str, rules: tuple[RuleSetting, ...]) -> None:
    written = f"[{written}]" if written.startswith("{") else written
    assert bore(f"rules = {written}").rules == rules


def test_the_eight_tests() -> None:
    rules = bore('rules = "nelson"').rules
    assert rules is not None
    assert len({rule.rule for rule in rules}) == 8


@pytest.mark.parametrize(
    "data",
    [
        "value = 'v'\nchart = 'individuals'\nestimator = 'median-moving-range'\nchart_options = { moving_range_limit = 'three-sigma' }",  # noqa: E501
        "value = 'v'\nsubgroup = { every = '1h' }\nchart = 'median-range'",
        "values = ['a', 'b']\nchart = 'mean-sd'\nestimator = 'weighted'",
        "count = 'x'\nsize = 50\nchart = 'np'\nlimits = { centre = 0.02 }\nrules = ['outside-limits', 'run-one-side']",  # noqa: E501
        "count = 'x'\nsize = 'n'\nchart = 'u'",
        "count = 'x'\nchart = 'c'\nsubgroup = { size = 4 }",
        "count = 'x'\nsize = 'n'\nsubgroup = { every = '1d' }",
        "value = 'v'\nspecification = { lower = 0, target = 0 }",
        "value = 'v'\nspecification = [{ upper = 2 }, { from = 2026-01-01 }]",
    ],
)
def test_allowed_together(data: str) -> None:
    assert read(HEAD + BORE + data).characteristic[0].id == "bore"


def test_zone_rules_from_the_defaults_are_no_fault_of_counts() -> None:
    text = "[defaults]\nrules = 'nelson'\n" + HEAD + BORE + "count = 'x'"
    rules = read(text).characteristic[0].rules
    assert rules is not None
    assert len(rules) == 8


def test_references_and_ids() -> None:
    text = START + HEAD + BORE.replace("bore", "Bore").replace("press", "prss") + "value = 'v'\n"
    text += (
        BORE + "subgroup = { every = '1h' }\nvalue = 'v'\n[[characteristic]]\nsource = 'press'\nvalue = 'v'\n"
    )
    assert said(text) == [
        ("source.press.id", 10, "id 'press' is taken by the source on line 2", "Give each its own id."),
        (
            "characteristic.Bore.id",
            14,
            "id 'Bore' differs only in case from 'bore' on line 6",
            "Give each its own id.",
        ),
        ("characteristic.Bore.source", 15, "there is no source 'prss'", "Did you mean 'press'?"),
        (
            "characteristic.bore.id",
            18,
            "id 'bore' is taken by the characteristic on line 6",
            "Give each its own id.",
        ),
        ("characteristic.4.id", 22, "`id` is missing", "Add `id`; it cannot be left out here."),
    ]


def test_times_are_needed_for_what_speaks_of_time() -> None:
    text = HEAD.replace('time = "stamp"\n', "") + BORE + "value = 'v'\nsubgroup = { every = '1h' }\n"
    text += "baseline = { from = 2026-01-01, to = 2026-02-01 }\n"
    assert said(text) == [
        (
            "characteristic.bore.subgroup.every",
            8,
            "a `subgroup` by time needs times, and source 'press' has none",
            "Set `time` of source 'press', or use `size`.",
        ),
        (
            "characteristic.bore.baseline.from",
            9,
            "a `baseline` by dates needs times, and source 'press' has none",
            "Set `time` of source 'press', or use `points`.",
        ),
    ]


def test_all_problems_at_once_in_the_order_of_the_file() -> None:
    text = (
        "[site]\nzone = 'UTC'\nattention = 14\n"
        + START
        + "decimals = 'x'\nwidth = -1\nchart = 'q'\nlogo = 1\n"
    )
    text += "[[characteristic]]\nid = 'wall'\nsource = 'pres'\n"
    assert [(p.where, p.line) for p in problems(text)] == [
        ("site.zone", 2),
        ("site.attention", 3),
        ("characteristic.bore.decimals", 12),
        ("characteristic.bore.width", 13),
        ("characteristic.bore.chart", 14),
        ("characteristic.bore.logo", 15),
        ("characteristic.wall", 16),
        ("characteristic.wall.source", 18),
    ]


def test_a_fault_of_the_defaults_is_reported_once() -> None:
    text = "[defaults]\ncadence = '8'\nvalue = 5\nestimator = 'pooled'\n" + HEAD
    text += "".join(f"[[characteristic]]\nid = 'c{i}'\nsource = 'press'\n" for i in range(3))
    assert [(p.where, p.line) for p in problems(text)] == [("defaults.cadence", 2), ("defaults.value", 3)]
    text = text.replace("value = 5", "value = 'v'").replace("'8'", "'8h'")
    assert [(p.where, p.line) for p in problems(text)] == [("defaults.estimator", 4)]


def test_a_fault_between_a_key_and_the_defaults_is_told_at_the_key() -> None:
    text = "[defaults]\nchart = 'mean-range'\n" + START
    assert [(p.where, p.line, p.what) for p in problems(text)] == [
        ("characteristic.bore.value", 10, "chart 'mean-range' needs `values`, or `value` with `subgroup`")
    ]


def test_no_characteristic_is_a_fault() -> None:
    assert said(HEAD) == [
        ("characteristic", 1, "there is no characteristic", "Add a [[characteristic]] to watch.")
    ]


def test_broken_toml_is_one_problem_with_its_line() -> None:
    found = said(START + "decimals = \n")
    assert found == [
        (
            "holdsteady.toml",
            9,
            "is not valid TOML: invalid value",
            "Correct this line; the settings could not be read any further.",
        )
    ]


SAMPLES = {
    "study": "[[study]]\nid = 'cmm'\n",
    "language": "language = 'pt'",
    "logo": "logo = 'logo.svg'",
    "accent": "accent = '#1f5f95'",
    "watch": "watch = 'poll'",
    "show_people": "show_people = false",
    "settle": "settle = '2s'",
    "variables": "variables = ['a', 'b']",
    "limits_by": "limits_by = 'probability'",
    "false_alarm": "false_alarm = 0.0027",
    "width": "width = 'guaranteed'",
    "capability": "capability = { model = 'lognormal' }",
    "natural_limit": "natural_limit = 0",
    "strata": "strata = ['operator']",
}
CASES = [
    (entry.table, entry.key, sample)
    for entry in NOT_YET
    for sample in ([f"chart = '{v}'" for v in entry.values] if entry.key == "chart" else [SAMPLES[entry.key]])
]


@pytest.mark.parametrize(("table", "key", "sample"), CASES)
@pytest.mark.parametrize("in_defaults", [False, True])
def test_what_is_not_there_yet_is_refused(table: str, key: str, sample: str, in_defaults: bool) -> None:  # noqa: FBT001  # noqa: E501
    data = "" if key == "variables" else "value = 'v'\n"
    source = HEAD.replace('time = "stamp"\n', "")
    if table == "characteristic" and in_defaults:
        text = f"[defaults]\n{sample}\n{source}{BORE}{data}"
    elif table == "characteristic":
        text = f"{source}{BORE}{data}{sample}\n"
    elif table == "source":
        text = f"{source}{sample}\n{BORE}{data}"
    else:
        text = (f"[site]\n{sample}\n" if table else sample) + source + BORE + data
    (problem,) = problems(text)
    assert problem.what.endswith(" not supported yet")
    assert key in problem.what
    assert problem.where.split(".")[-1] == key
    assert problem.remedy == "Take it out for now."
    assert problem.line is not None
    assert key in text.splitlines()[problem.line - 1]
