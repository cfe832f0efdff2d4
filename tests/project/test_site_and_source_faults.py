"""Each fault of the site, the sources and the defaults by its message, remedy, key path and line."""

from __future__ import annotations

import pytest
from tests.project.settings_text import START, said

SPAN = "must be a span of time: a number above 0 and one of s, m, h, d, w, as in '8h'"
FORM = "Write it in this form, or leave the key out."


@pytest.mark.parametrize(
    ("text", "where", "line", "what", "remedy"),
    [
        (
            "[site]\ntimezone = 'Europe/Lisbonn'\n",
            "site.timezone",
            2,
            "there is no time zone 'Europe/Lisbonn'",
            "Did you mean 'Europe/Lisbon'?",
        ),
        (
            "[site]\ntimezone = '/etc/x'\n",
            "site.timezone",
            2,
            "there is no time zone '/etc/x'",
            "Give one as in 'Europe/Lisbon'.",
        ),
        (
            "[site]\noutput = '.'\n",
            "site.output",
            2,
            "the site would be put among the project's own files",
            "Name a folder of its own, as in 'site'.",
        ),
        (
            "[site]\noutput = ''\n",
            "site.output",
            2,
            "the site would be put among the project's own files",
            "Name a folder of its own, as in 'site'.",
        ),
        (
            "[site]\noutput = '..'\n",
            "site.output",
            2,
            "the output folder holds the project",
            "Name a folder below the project, as in 'site'.",
        ),
        (
            "[site]\noutput = 'press'\n",
            "site.output",
            2,
            "the output folder holds the files of source 'press'",
            "Name a folder that holds no measurement files.",
        ),
        ("[site]\nattention = 14\n", "site.attention", 2, f"{SPAN}, not 14", FORM),
        (
            "[site]\npoints = 'recnt'\n",
            "site.points",
            2,
            "must be 'all' or 'recent', not 'recnt'",
            "Did you mean 'recent'?",
        ),
        (
            "[site]\nas_of = 0001-01-01\n",
            "site.as_of",
            2,
            "must lie between the years 1900 and 9998, not 0001-01-01",
            FORM,
        ),
        (
            "[site]\nas_of = 14:10:00\n",
            "site.as_of",
            2,
            "must be a date, or a date and time, without quotes, as in 2026-03-01T06:00:00, not 14:10:00",
            FORM,
        ),
        ("[sight]\nx = 1\n", "sight", 1, "unknown key `sight`", "Did you mean `site`?"),
        ("site = 5\n", "site", 1, "must be a table", "Write [site] above its keys."),
        (
            "[defaults]\nid = 'x'\n",
            "defaults.id",
            2,
            "`id` belongs to a single characteristic",
            "Take it out of [defaults].",
        ),
        ("[defaults]\nunits = 'mm'\n", "defaults.units", 2, "unknown key `units`", "Did you mean `unit`?"),
        (
            "[defaults]\nplausible = { lower = 2, upper = 1 }\n",
            "defaults.plausible.lower",
            2,
            "must be below `upper`: 2 is not below 1",
            "Give the smaller as `lower`, the larger as `upper`.",
        ),
    ],
)
def test_site_and_defaults(text: str, where: str, line: int, what: str, remedy: str) -> None:
    assert said(text + START) == [(where, line, what, remedy)]


PATTERN = "Give a pattern below the project folder, as in 'press/*.csv'."


@pytest.mark.parametrize(
    ("keys", "where", "what", "remedy"),
    [
        ("files = []", "files", "must hold at least one item", "Name something, or leave the key out."),
        ("files = ['/data/*.csv']", "files.1", "'/data/*.csv' starts outside the project folder", PATTERN),
        (
            "files = ['C:/data/*.csv']",
            "files.1",
            "'C:/data/*.csv' starts outside the project folder",
            PATTERN,
        ),
        ("files = ['a.csv', '../b.csv']", "files.2", "'../b.csv' leads out of the project folder", PATTERN),
        (
            "files = ['press\\*.csv']",
            "files.1",
            "'press\\*.csv' holds a backslash; folders are separated by /",
            PATTERN,
        ),
        ("", "files", "`files` is missing", "Add `files`; it cannot be left out here."),
        (
            "files = ['a']\ndelimiter = 'tab'",
            "delimiter",
            "must be a single character, not 'tab'",
            'Write it as in ";" or, for a tab, "\\t".',
        ),
        (
            "files = ['a']\ndelimiter = ','\ndecimal = ','",
            "decimal",
            "delimiter and decimal mark are both ','",
            "Leave out the one that is not sure.",
        ),
        (
            "files = ['a']\ntime = 't'\ntime_format = 'DD.MM.YYYY'",
            "time_format",
            "'DD.MM.YYYY' is no form of a date and time",
            "Write it as in '%d.%m.%Y %H:%M:%S'.",
        ),
        (
            "files = ['a']\ntime_format = '%Y-%m-%d'",
            "time_format",
            "goes with `time`, which is not given",
            "Add `time`.",
        ),
    ],
)
def test_sources(keys: str, where: str, what: str, remedy: str) -> None:
    text = f"[[source]]\nid = 'kiln'\n{keys}\n"
    key = where.split(".", maxsplit=1)[0]
    line = next((i for i, row in enumerate(text.splitlines(), 1) if row.startswith(key)), 1)
    assert said(text + START) == [(f"source.kiln.{where}", line, what, remedy)]
