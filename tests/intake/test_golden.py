"""Hostile files, one trait each: the account of every row, the values, and what is listed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from tests.intake.folders import ONE, PLAIN, STAMPED, adds_up, outcome, settings_of, take_in

from holdsteady.intake.readings import Intake
from holdsteady.times import iso

DAY = "2025-03-03"


@dataclass(frozen=True, kw_only=True)
class Case:
    files: Mapping[str, str | bytes]
    accounts: Mapping[str, tuple[int, int, int, int]]  # rows, used, filtered, set aside
    values: Mapping[str, list[Any]] = field(default_factory=dict)
    lines: Mapping[str, list[int]] = field(default_factory=dict)
    times: Mapping[str, list[str]] = field(default_factory=dict)
    aside: tuple[tuple[str, int | None, str, str], ...] = ()  # file, line, column, part of the reason
    source: Mapping[str, Any] = field(default_factory=lambda: STAMPED)
    characteristics: tuple[Mapping[str, Any], ...] = (ONE,)
    zone: str = "UTC"
    told: Mapping[str, str] = field(default_factory=dict)  # what the account of every file says


def rows(*values: str, clock: str = "2025-03-03T10:{:02d}", delimiter: str = ",") -> str:
    return "".join(f"{clock.format(i)}{delimiter}{value}\n" for i, value in enumerate(values))


CASES: dict[str, Case] = {
    "clean": Case(
        files={"a.csv": "stamp,v\n" + rows("1.5", "2.5")},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1.5, 2.5]},
        lines={"c": [2, 3]},
        times={"c": ["2025-03-03T10:00:00+00:00", "2025-03-03T10:01:00+00:00"]},
        told={"encoding": "utf-8", "delimiter": ",", "decimal": ".", "time_format": "ISO 8601"},
    ),
    "byte order mark": Case(
        files={"a.csv": "\ufeffstamp,v\n" + rows("1", "2")},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1, 2]},
        lines={"c": [2, 3]},
    ),
    "semicolon, decimal comma, dotted days": Case(
        files={"a.csv": "stamp;v\n03.12.2025 08:00;1,25\n31.12.2025 08:00;1.250,5\n"},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1.25, 1250.5]},
        times={"c": ["2025-12-03T08:00:00+00:00", "2025-12-31T08:00:00+00:00"]},
        told={"delimiter": ";", "decimal": ",", "time_format": "day.month.year"},
    ),
    "tab": Case(
        files={"a.csv": "stamp\tv\n" + rows("1", "2", delimiter="\t")},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1, 2]},
        told={"delimiter": "tab"},
    ),
    "preamble above the header": Case(
        files={"a.csv": "sep=|\nGauge 7; stamp of calibration\n\nstamp|v\n" + rows("1", "2", delimiter="|")},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1, 2]},
        lines={"c": [5, 6]},
        told={"delimiter": "|"},
    ),
    "repeated header, units, footer": Case(
        files={"a.csv": f"stamp,v\nh:min,mm\n{DAY} 10:00,1\nstamp,v\n{DAY} 10:01,2\nend of file\n"},
        accounts={"a.csv": (5, 2, 0, 3)},
        values={"c": [1, 2]},
        lines={"c": [3, 5]},
        aside=(
            ("a.csv", 2, "", "units"),
            ("a.csv", 4, "", "the header again"),
            ("a.csv", 6, "", "1 field where the header has 2"),
        ),
    ),
    "units without a time": Case(
        files={"a.csv": "v,w\nmm,°C\n1,20\n2,21\n"},
        accounts={"a.csv": (3, 2, 0, 1)},
        values={"c": [1, 2]},
        source=PLAIN,
        aside=(("a.csv", 2, "", "units"),),
    ),
    "blank lines and lines of delimiters are no rows": Case(
        files={"a.csv": "stamp,v\n\n" + rows("1") + "  \n,\n" + rows("2") + "\n\n"},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1, 2]},
        lines={"c": [3, 6]},
    ),
    "ragged rows": Case(
        files={"a.csv": f"stamp,v,w\n{DAY}T10:00,1,x\n{DAY}T10:01\n{DAY}T10:02,3,x,y\n{DAY}T10:03,4,x,,\n"},
        accounts={"a.csv": (4, 2, 0, 2)},
        values={"c": [1, 4]},
        lines={"c": [2, 5]},
        aside=(("a.csv", 3, "", "1 field where"), ("a.csv", 4, "", "4 fields where")),
    ),
    "header ends in a delimiter": Case(
        files={"a.csv": f"stamp;v;\n{DAY}T10:00;1,5;\n{DAY}T10:01;2,5\n"},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1.5, 2.5]},
    ),
    "quoted delimiters, quotes and line ends": Case(
        files={"a.csv": f'stamp,note,v\n{DAY}T10:00,"a,b ""c""\nd",1\n{DAY}T10:01,5" pipe,2\n'},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1, 2]},
        lines={"c": [2, 4]},
    ),
    "unclosed quote costs its own line": Case(
        files={"a.csv": f'stamp,v,note\n{DAY}T10:00,1,"open\n{DAY}T10:01,2,x\n{DAY}T10:02,3,"y"\n'},
        accounts={"a.csv": (3, 2, 0, 1)},
        values={"c": [2, 3]},
        lines={"c": [3, 4]},
        aside=(("a.csv", 2, "", "a quote is opened"),),
    ),
    "unclosed quote in the last line": Case(
        files={
            "a.csv": f'stamp,v,lot\n{DAY}T10:00,1,a\n{DAY}T10:01,2,"b\n',
            "b.csv": f'stamp,v,lot\n{DAY}T10:00,3,a\n{DAY}T10:01,4,"b',
        },
        accounts={"a.csv": (2, 1, 0, 1), "b.csv": (2, 1, 0, 1)},
        values={"c": [1, 3]},
        characteristics=({**ONE, "subgroup": {"column": "lot"}},),
        aside=(("a.csv", 3, "", "a quote is opened"), ("b.csv", 3, "", "a quote is opened")),
    ),
    "unclosed quote that a later one would close": Case(
        files={"a.csv": f'stamp,v,note\n{DAY}T10:00,1,"open\n{DAY}T10:01,2,x\n{DAY}T10:02,3,y"\n'},
        accounts={"a.csv": (3, 2, 0, 1)},
        values={"c": [2, 3]},
        aside=(("a.csv", 2, "", "a quote is opened"),),
    ),
    "text after a closing quote": Case(
        files={"a.csv": f'stamp,v\n{DAY}T10:00,"1"2\n{DAY}T10:01,"3"\n'},
        accounts={"a.csv": (2, 1, 0, 1)},
        values={"c": [3]},
        aside=(("a.csv", 2, "", "text follows"),),
    ),
    "lone CR ends a line": Case(
        files={"a.csv": f"stamp,v\r{DAY}T10:00,1\r{DAY}T10:01,2\r"},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1, 2]},
        lines={"c": [2, 3]},
    ),
    "mixed line ends": Case(
        files={"a.csv": f"stamp,v\r\n{DAY}T10:00,1\n{DAY}T10:01,2\r\n{DAY}T10:02,3\r{DAY}T10:03,4"},
        accounts={"a.csv": (4, 4, 0, 0)},
        values={"c": [1, 2, 3, 4]},
        lines={"c": [2, 3, 4, 5]},
    ),
    "a day that is not in the calendar": Case(
        files={"a.csv": "stamp,v\n28.02.2025 10:00,1\n31.02.2025 10:00,2\n"},
        accounts={"a.csv": (2, 1, 0, 1)},
        values={"c": [1]},
        aside=(("a.csv", 3, "stamp", "no time in this file's format"),),
    ),
    "what is no number": Case(
        files={
            "a.csv": "stamp,v\n"
            + rows("12.3 g", "inf", "NaN", "1e400", "0x1F", "1_0", "--1", "٣", "+1.5e1", "1'234.5", "")
        },
        accounts={"a.csv": (11, 2, 1, 8)},
        values={"c": [15.0, 1234.5]},
        aside=tuple(("a.csv", line, "v", "not a number") for line in range(2, 10)),
    ),
    "thousands only in threes": Case(
        files={"a.csv": "stamp;v\n" + rows("1,234.5", "1,23.5", "12,345,678.0", "0,123", delimiter=";")},
        accounts={"a.csv": (4, 2, 0, 2)},
        values={"c": [1234.5, 12345678.0]},
        aside=(("a.csv", 3, "v", "not a number"), ("a.csv", 5, "v", "not a number")),
    ),
    "censored": Case(
        files={"a.csv": "stamp,v\n" + rows("<0.05", "0.07", "> 100")},
        accounts={"a.csv": (3, 1, 0, 2)},
        values={"c": [0.07]},
        aside=(("a.csv", 2, "v", "censored"), ("a.csv", 4, "v", "censored")),
    ),
    "not plausible": Case(
        files={"a.csv": "stamp,v\n" + rows("5", "4.999", "20.001", "20")},
        accounts={"a.csv": (4, 2, 0, 2)},
        values={"c": [5, 20]},
        characteristics=({**ONE, "plausible": {"lower": 5, "upper": 20}},),
        aside=(("a.csv", 3, "v", "not plausible"), ("a.csv", 4, "v", "not plausible")),
    ),
    "missing codes": Case(
        files={"a.csv": "stamp,v\n" + rows("-999", "1", "n/a", "-999.00", "2")},
        accounts={"a.csv": (5, 2, 3, 0)},
        values={"c": [1, 2]},
        source={**STAMPED, "missing": ("-999", "n/a")},
    ),
    "month first, proved": Case(
        files={"a.csv": "stamp,v\n1/2/2025 10:00 AM,1\n12/13/25 1:05 PM,2\n12/14/2025 1:05 PM,3\n"},
        accounts={"a.csv": (3, 2, 0, 1)},
        values={"c": [1, 3]},
        times={"c": ["2025-01-02T10:00:00+00:00", "2025-12-14T13:05:00+00:00"]},
        aside=(("a.csv", 3, "stamp", "(month/day/year)"),),
        told={"time_format": "month/day/year"},
    ),
    "day first, proved in another file": Case(
        files={"a.csv": "stamp,v\n01/02/2025,1\n", "b.csv": "stamp,v\n13/02/2025,2\n"},
        accounts={"a.csv": (1, 1, 0, 0), "b.csv": (1, 1, 0, 0)},
        values={"c": [1, 2]},
        times={"c": ["2025-02-01T00:00:00+00:00", "2025-02-13T00:00:00+00:00"]},
        told={"time_format": "day/month/year"},
    ),
    "day or month, unproved": Case(
        files={"a.csv": "stamp,v\n01/02/2025,1\n03/04/2025,2\n"},
        accounts={"a.csv": (2, 0, 0, 2)},
        aside=(("a.csv", 2, "stamp", "set `time_format`"), ("a.csv", 3, "stamp", "set `time_format`")),
    ),
    "day and month, proof against proof": Case(
        files={"a.csv": "stamp,v\n13/02/2025,1\n", "b.csv": "stamp,v\n02/13/2025,2\n"},
        accounts={"a.csv": (1, 0, 0, 1), "b.csv": (1, 0, 0, 1)},
        aside=(("a.csv", 2, "stamp", "set `time_format`"), ("b.csv", 2, "stamp", "set `time_format`")),
    ),
    "format prescribed": Case(
        files={"a.csv": "stamp,v\n01/02/2025 07h30,1\n31/02/2025 07h30,2\n"},
        accounts={"a.csv": (2, 1, 0, 1)},
        values={"c": [1]},
        times={"c": ["2025-02-01T07:30:00+00:00"]},
        source={**STAMPED, "time_format": "%d/%m/%Y %Hh%M"},
        aside=(("a.csv", 3, "stamp", "%d/%m/%Y %Hh%M"),),
    ),
    "two-digit years": Case(
        files={"a.csv": "stamp,v\n01.02.69,1\n31.12.25,2\n"},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1, 2]},
        times={"c": ["1969-02-01T00:00:00+00:00", "2025-12-31T00:00:00+00:00"]},
    ),
    "seconds since 1970": Case(
        files={"a.csv": "stamp,v\n1700000000,1\n1700000001,2\n"},
        accounts={"a.csv": (2, 2, 0, 0)},
        times={"c": ["2023-11-14T22:13:20+00:00", "2023-11-14T22:13:21+00:00"]},
        told={"time_format": "seconds since 1970"},
    ),
    "milliseconds since 1970": Case(
        files={"a.csv": "stamp,v\n1700000000250,1\n"},
        accounts={"a.csv": (1, 1, 0, 0)},
        times={"c": ["2023-11-14T22:13:20.250000+00:00"]},
    ),
    "variants of ISO 8601 are one format": Case(
        files={
            "a.csv": "stamp,v\n2025-03-03,0\n2025-03-03 10:00,1\n2025-03-03T10:00:01Z,2\n"
            "2025-03-03T11:00:02.5+01:00,3\n20250303T100003,4\n03.03.2025 10:00,5\n"
        },
        accounts={"a.csv": (6, 5, 0, 1)},
        values={"c": [0, 1, 2, 3, 4]},
        aside=(("a.csv", 7, "stamp", "no time in this file's format (ISO 8601)"),),
    ),
    "before 1900, after the moment, no time": Case(
        files={"a.csv": "stamp,v\n1899-12-31,1\n1900-01-01,2\n2026-01-02,3\n2026-01-02T00:00:01,4\n,5\n"},
        accounts={"a.csv": (5, 2, 0, 3)},
        values={"c": [2, 3]},
        aside=(
            ("a.csv", 2, "stamp", "before 1900"),
            ("a.csv", 5, "stamp", "after the moment"),
            ("a.csv", 6, "stamp", "no time"),
        ),
    ),
    "the hour that is skipped and the hour that comes twice": Case(
        # Lisbon: 2025-03-30 01:00 WET to 02:00 WEST; 2025-10-26 02:00 WEST to 01:00 WET (IANA tz database).
        files={
            "a.csv": "stamp,v\n2025-03-30 00:30,0\n2025-03-30 01:30,1\n2025-10-26 00:30,2\n"
            "2025-10-26 01:10,3\n2025-10-26 01:50,4\n"
            "2025-10-26 01:05,5\n2025-10-26 01:55,6\n2025-10-26 02:00,7\n"
        },
        accounts={"a.csv": (8, 8, 0, 0)},
        zone="Europe/Lisbon",
        times={
            "c": [
                "2025-03-30T00:30:00+00:00",
                "2025-03-30T01:30:00+00:00",
                "2025-10-25T23:30:00+00:00",
                "2025-10-26T00:10:00+00:00",
                "2025-10-26T00:50:00+00:00",
                "2025-10-26T01:05:00+00:00",
                "2025-10-26T01:55:00+00:00",
                "2025-10-26T02:00:00+00:00",
            ]
        },
    ),
    "last line cut within its number": Case(
        files={"a.csv": f"stamp,v\n{DAY}T10:00,300.1\n{DAY}T10:01,299.9\n{DAY}T10:02,299"},
        accounts={"a.csv": (3, 2, 0, 1)},
        values={"c": [300.1, 299.9]},
        aside=(("a.csv", 4, "", "cut off"),),
    ),
    "last line without an end but whole": Case(
        files={"a.csv": f"stamp,v\n{DAY}T10:00,300.1\n{DAY}T10:01,299\n{DAY}T10:02,299"},
        accounts={"a.csv": (3, 3, 0, 0)},
        values={"c": [300.1, 299, 299]},
    ),
    "last line cut before its number": Case(
        files={"a.csv": f"stamp,v\n{DAY}T10:00,300\n{DAY}T10:01,"},
        accounts={"a.csv": (2, 1, 0, 1)},
        values={"c": [300]},
        aside=(("a.csv", 3, "", "cut off"),),
    ),
    "last line cut within its time": Case(
        files={"a.csv": f"v,stamp\n1,{DAY}T10:00:05\n2,{DAY}T10:01"},
        accounts={"a.csv": (2, 1, 0, 1)},
        values={"c": [1]},
        aside=(("a.csv", 3, "", "cut off"),),
    ),
    "a character cut in two at the end": Case(
        files={"a.csv": f"stamp,v,who\n{DAY}T10:00,1,Zoé\n{DAY}T10:01,2,Zo".encode() + b"\xc3"},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1, 2]},
    ),
    "where, by text, number and truth": Case(
        files={
            "a.csv": f"stamp,st,n,ok,v\n{DAY}T10:00,B2,2,true,1\n{DAY}T10:01,B2,2.0,TRUE,2\n"
            f"{DAY}T10:02,B2,3,true,3\n{DAY}T10:03,B1,2,true,bad\n{DAY}T10:04,B2,2,false,5\n"
        },
        accounts={"a.csv": (5, 2, 3, 0)},
        values={"c": [1, 2]},
        characteristics=({**ONE, "where": {"st": "B2", "n": 2, "ok": True}},),
    ),
    "labels stay text": Case(
        files={"a.csv": "stamp,lot,who,v\n" + rows("00012,NA,1", "12,,2", " 00012 ,NA,3")},
        accounts={"a.csv": (3, 3, 0, 0)},
        values={"c[lot=00012,who=NA]": [1, 3], "c[lot=12,who=]": [2]},
        characteristics=({**ONE, "each": ("lot", "who")},),
    ),
    "several values a row": Case(
        files={"a.csv": "stamp,a,b\n" + rows("1,2", "3,x", ",", ",4", "y,z")},
        accounts={"a.csv": (5, 3, 1, 1)},
        values={"c": [[1, 2], [3, None], [None, 4]]},
        characteristics=({"id": "c", "source": "s", "values": ("a", "b")},),
        aside=(
            ("a.csv", 3, "b", "not a number"),
            ("a.csv", 6, "a", "not a number"),
            ("a.csv", 6, "b", "not a number"),
        ),
    ),
    "counts and sizes": Case(
        files={
            "a.csv": "stamp,x,n\n"
            + rows(*["1,10", "3.0,10", "-1,10", "1.5,10", "11,10", "1,0", "1,2.5", "1,"])
        },
        accounts={"a.csv": (8, 2, 1, 5)},
        values={"c": [1, 3]},
        characteristics=({"id": "c", "source": "s", "count": "x", "size": "n", "chart": "p"},),
        aside=(
            ("a.csv", 4, "x", "below zero"),
            ("a.csv", 5, "x", "whole"),
            ("a.csv", 6, "x", "above its size"),
            ("a.csv", 7, "n", "not above zero"),
            ("a.csv", 8, "n", "whole"),
        ),
    ),
    "a column that one characteristic lacks": Case(
        files={"a.csv": f"stamp,v\n{DAY}T10:00,1\n{DAY}T10:01,\n", "b.csv": f"stamp,v,w\n{DAY}T10:02,2,7\n"},
        accounts={"a.csv": (2, 1, 0, 1), "b.csv": (1, 1, 0, 0)},
        values={"c": [1, 2], "d": [7]},
        characteristics=(ONE, {**ONE, "id": "d", "value": "w"}),
        aside=(("a.csv", None, "w", "no column 'w'"), ("a.csv", 3, "w", "no column 'w'")),
    ),
    "the time column is not there": Case(
        files={"a.csv": "when,v\n2025-01-01,1\n2025-01-02,2\n", "b.csv": "stamp,v\n2025-01-03,3\n"},
        accounts={"a.csv": (2, 0, 0, 2), "b.csv": (1, 1, 0, 0)},
        values={"c": [3]},
        aside=(("a.csv", 2, "stamp", "no column"), ("a.csv", 3, "stamp", "no column")),
    ),
    "a column twice": Case(
        files={"a.csv": "stamp,v,v\n2025-01-01,1,2\n"},
        accounts={"a.csv": (1, 0, 0, 1)},
        aside=(("a.csv", None, "v", "stands twice"), ("a.csv", 2, "v", "stands twice")),
    ),
    "empty and header-only files are no fault": Case(
        files={
            "a.csv": "",
            "b.csv": "stamp,v\n",
            "c.csv": "stamp,v",
            "d.csv": "\n\n",
            "e.csv": "stamp,v\n2025-01-01,1\n",
        },
        accounts=dict.fromkeys(("a.csv", "b.csv", "c.csv", "d.csv"), (0, 0, 0, 0)) | {"e.csv": (1, 1, 0, 0)},
        values={"c": [1]},
    ),
    "whole files in trouble": Case(
        files={
            "d.csv": b"PK\x03\x04xxxx",
            "e.csv": b"\x89PNG\r\n\x1a\n",
            "f.csv": b"\0" * 100,
            "g.csv": "stamp,v\n2025-01-01,1\n",
            "h.csv/inner.csv": "a folder by the name of a file",
        },
        accounts={f"{name}.csv": (0, 0, 0, 0) for name in "def"} | {"g.csv": (1, 1, 0, 0)},
        values={"c": [1]},
        aside=(
            ("d.csv", None, "", "spreadsheet"),
            ("e.csv", None, "", "picture"),
            ("f.csv", None, "", "NUL"),
        ),
    ),
    "NUL bytes in a row": Case(
        files={"a.csv": "stamp,v\n2025-01-01,1\n2025-01-02,\0\0\0\n2025-01-03,3\n"},
        accounts={"a.csv": (3, 2, 0, 1)},
        values={"c": [1, 3]},
        aside=(("a.csv", 3, "", "NUL"),),
    ),
    "one column of decimal commas": Case(
        files={"a.csv": "v\n1,5\n2,5\n"},
        accounts={"a.csv": (2, 2, 0, 0)},
        values={"c": [1.5, 2.5]},
        source=PLAIN,
    ),
    "no line holds any column": Case(
        files={"a.csv": "x,y\n1,2\n", "b.csv": "v\n4\n"},
        accounts={"a.csv": (1, 0, 0, 1), "b.csv": (1, 1, 0, 0)},
        values={"c": [4]},
        source=PLAIN,
        aside=(("a.csv", None, "v", "no column"), ("a.csv", 2, "v", "no column")),
    ),
    "order is time, then path, then line": Case(
        files={
            "b.csv": "stamp,v\n2025-01-02,3\n2025-01-01,1\n",
            "a.csv": "stamp,v\n2025-01-02,2\n2025-01-03,4\n",
        },
        accounts={"a.csv": (2, 2, 0, 0), "b.csv": (2, 2, 0, 0)},
        values={"c": [1, 2, 3, 4]},
        lines={"c": [3, 2, 2, 3]},
    ),
    "a row used by one and unreadable to another": Case(
        files={"a.csv": "stamp,v,w\n" + rows("1,x", "x,x", "x,2", ",")},
        accounts={"a.csv": (4, 2, 1, 1)},
        values={"c": [1], "d": [2]},
        characteristics=(ONE, {**ONE, "id": "d", "value": "w"}),
        aside=tuple(("a.csv", *place, "not a number") for place in ((2, "w"), (3, "v"), (3, "w"), (4, "v"))),
    ),
}


@pytest.mark.parametrize("case", CASES.values(), ids=CASES.keys())
def test_case(case: Case, tmp_path: Path) -> None:
    intake = take_in(
        tmp_path, case.files, settings_of(*case.characteristics, source=case.source), zone=case.zone
    )
    adds_up(intake)
    assert {one.file: outcome(one) for one in intake.files} == case.accounts
    members = {one.name: one for several in intake.readings.values() for one in several}
    for name, expected in case.values.items():
        values = np.array(expected, dtype=np.float64).reshape(len(expected), -1)
        np.testing.assert_array_equal(members[name].values, values)
    if not case.values and not case.times:
        assert not members
    for name, lines in case.lines.items():
        assert members[name].line.tolist() == lines
    for name, times in case.times.items():
        moments = members[name].time
        assert moments is not None
        assert iso(moments, ZoneInfo("UTC")) == times
    _compare_listed(intake, case)
    for key, words in case.told.items():
        assert {getattr(one, key) for one in intake.files} == {words}


def _compare_listed(intake: Intake, case: Case) -> None:
    listed = [(one.file, one.line, one.column, one.reason) for one in intake.set_aside]
    assert [one[:3] for one in listed] == [one[:3] for one in case.aside], listed
    for (*_, reason), (*_, part) in zip(listed, case.aside, strict=True):
        assert part in reason
