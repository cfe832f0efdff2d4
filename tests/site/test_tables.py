"""The published tables: columns as promised, full precision, nothing that another program could mistake."""

from __future__ import annotations

import csv
import datetime as dt
import io
import json
import math
from dataclasses import replace
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.made_findings import AS_OF, HOUR, all_findings, finding

from holdsteady.intake.readings import FileAccount, Intake, SetAside
from holdsteady.project.settings import Specification
from holdsteady.site import columns
from holdsteady.site.tables import build_json, tables
from holdsteady.times import iso

LISBON = ZoneInfo("Europe/Lisbon")
INTAKE = Intake(
    readings={},
    files=(
        FileAccount(
            file="press/=1.csv", source="press", bytes=120, rows=9, used=4, filtered=2, repeated=0,
            corrected=0, set_aside=3, encoding="utf-8", delimiter=";", decimal=",",
            time_format="%d.%m.%Y", first_time=AS_OF, last_time=None,
        ),
    ),
    set_aside=(
        SetAside(file="press/=1.csv", line=7, column="bore", reason="not a number", text='12,3 "g"\n'),
        SetAside(file="a.csv", line=None, column="", reason="not text", text="=cmd|' /C calc'!A0"),
    ),
    problems=(), censored={},
)  # fmt: skip

# Written out once more from the promise, so that a slip in the module shows.
PROMISED = dict(
    line.split(": ")
    for line in """
characteristics: characteristic slug title area chart unit state flags points readings first_time
    last_time open_cases cases signals
signals: id case characteristic panel rule direction first_time fired_time last_time first_order
    fired_order last_order ongoing
cases: case characteristic state direction first_time fired_time last_time ongoing signals
    answered_by likely_start likely_start_low likely_start_high shift shift_sigma
limits: characteristic era era_from era_to in_force_from panel kind centre sigma lower upper n
    points baseline_from baseline_to excluded estimator
capability: characteristic era n lower_spec target upper_spec mean sigma_within sigma_total cp cpk
    pp ppk cpm cpk_low cpk_high ppk_low ppk_high fraction_outside outside_observed outside_high
    model in_control resolution model_parameters
trust: characteristic era panel rules run_length run_length_low run_length_high delay_half_sigma
    delay_one_sigma delay_two_sigma points_in_span expected_cases seen_cases expected_low
    expected_high
advice: characteristic finding figure threshold suggestion source
files: file source bytes rows used filtered repeated corrected set_aside encoding delimiter decimal
    first_time last_time
set-aside: file line column reason text
changes: what characteristic id before after why
studies: study gauge quantity value low high unit method
points/bore-press-2: panel order time label n value centre lower upper sigma era in_baseline
    excluded rules signals
""".strip()
    .replace("\n    ", " ")
    .split("\n")
)

FILES = tables(all_findings(), INTAKE, zone=LISBON)


def rows(name: str, files: dict[str, bytes] = FILES) -> list[dict[str, str]]:
    text = files[f"tables/{name}.csv"].decode("utf-8")
    return list(csv.DictReader(io.StringIO(text, newline=""), strict=True))


@pytest.mark.parametrize("name", PROMISED)
def test_columns_are_those_promised(name: str) -> None:
    assert FILES[f"tables/{name}.csv"].split(b"\n")[0].decode() == PROMISED[name].replace(" ", ",")


def test_there_is_a_points_table_for_every_characteristic_and_nothing_unexpected() -> None:
    expected = {f"tables/{name}.csv" for name in PROMISED if "/" not in name}
    assert set(FILES) == expected | {f"tables/points/{f.slug}.csv" for f in all_findings()}


def test_lines_end_in_lf_and_no_cell_says_nan() -> None:
    for path, content in FILES.items():
        assert b"\r" not in content, path
        assert content.endswith(b"\n"), path
        for row in csv.DictReader(io.StringIO(content.decode())):
            cells = {
                cell.lower()
                for name, cell in row.items()
                if name not in ("characteristic", "slug", "direction")
            }
            assert not cells & {"nan", "inf", "-inf", "none", "nat", "true", "false"}, path


class TestPoints:
    def test_a_row_for_each_point_of_each_panel_reads_back_exactly(self) -> None:
        made = finding("bore[press=2]", state="signalling", shift=-1.9, seed=2)
        table = rows("points/bore-press-2")
        assert made.points is not None
        assert made.points.time is not None
        times = iso(made.points.time, LISBON)
        read = iter(table)
        for panel in made.panels:
            for i in range(len(panel.value)):
                row = next(read)
                assert (row["panel"], row["order"], row["label"], row["n"]) == (
                    panel.name,
                    str(i + 1),
                    f"S{i}",
                    "5",
                )
                assert row["time"] == times[i]
                assert float(row["value"]) == panel.value[i]
                for column, array in (
                    ("centre", panel.centre),
                    ("lower", panel.lower),
                    ("upper", panel.upper),
                    ("sigma", panel.sigma),
                ):
                    assert (row[column] == "") == math.isnan(array[i])
                    assert row[column] == "" or float(row[column]) == array[i]
                assert row["in_baseline"] == "01"[i < 25]
                assert row["excluded"] == "01"[i == 30]
                assert row["era"] == "1"
                run = panel.name == "location" and i >= 80
                assert row["rules"] == ("run-one-side" if run else "")
                assert row["signals"] == ("s-bore[press=2]1" if panel.name == "location" and i >= 72 else "")
        assert next(read, None) is None

    def test_rules_and_signals_that_overlap_are_joined_by_a_blank(self) -> None:
        made = finding("bore", shift=2.0)
        panel = made.panels[0]
        met = {"outside-limits": np.zeros(90, dtype=np.int64), "run-one-side": panel.met["run-one-side"]}
        met["outside-limits"][85] = 1
        more = replace(
            made.signals[0],
            id="s-other",
            rule="outside-limits",
            first_index=85,
            fired_index=85,
            last_index=85,
        )
        elsewhere = replace(more, id="s-spread", panel="spread")
        made = replace(
            made, panels=(replace(panel, met=met), made.panels[1]), signals=(*made.signals, more, elsewhere)
        )
        table = rows("points/bore", tables([made], INTAKE, zone=LISBON))
        assert table[85]["rules"] == "outside-limits run-one-side"
        assert table[85]["signals"] == "s-bore1 s-other"
        assert table[84]["rules"] == "run-one-side"
        assert [row["order"] for row in table[90:] if row["signals"]] == ["86"]

    def test_recent_keeps_the_baseline_and_the_last_thousand(self) -> None:
        made = finding("bore", n=1500)
        kept = rows("points/bore", tables([made], INTAKE, zone=LISBON, recent=True))
        orders = [int(row["order"]) for row in kept if row["panel"] == "spread"]
        assert orders == [*range(1, 26), *range(501, 1501)]
        assert len(rows("points/bore", tables([made], INTAKE, zone=LISBON))) == 3000

    def test_without_times_the_order_stands_alone(self) -> None:
        table = rows("points/glaze")
        assert {row["time"] for row in table} == {""}
        assert [row["order"] for row in table] == [str(i + 1) for i in range(5)]

    def test_a_characteristic_without_data_has_the_header_alone(self) -> None:
        assert rows("points/none") == []


class TestOtherTables:
    def test_characteristics(self) -> None:
        table = {row["characteristic"]: row for row in rows("characteristics")}
        assert list(table) == [f.name for f in all_findings()]
        bore = table["bore[press=2]"]
        assert (bore["slug"], bore["state"], bore["points"], bore["readings"]) == (
            "bore-press-2",
            "signalling",
            "90",
            "450",
        )
        assert (bore["open_cases"], bore["cases"], bore["signals"]) == ("1", "1", "1")
        assert bore["last_time"] == "2026-03-17T14:10:00+00:00"
        assert table["none"]["points"] == "0"
        assert table["none"]["first_time"] == ""
        assert table["glaze"]["last_time"] == ""
        assert table["glaze"]["flags"] == "provisional-limits"

    def test_signals_and_cases_name_times_and_orders(self) -> None:
        signal = next(row for row in rows("signals") if row["characteristic"] == "burst")
        assert (signal["first_order"], signal["fired_order"], signal["last_order"], signal["ongoing"]) == (
            "73",
            "81",
            "90",
            "1",
        )
        assert signal["fired_time"] == iso(np.array([AS_OF - 9 * 2 * HOUR]), LISBON)[0]
        case = next(row for row in rows("cases") if row["characteristic"] == "stops")
        assert (case["state"], case["direction"], case["answered_by"], case["signals"]) == (
            "answered",
            "high",
            "4",
            "s-stops1",
        )
        assert case["likely_start_low"] == iso(np.array([AS_OF - 19 * 2 * HOUR]), LISBON)[0]
        assert float(case["shift_sigma"]) == 1.8

    def test_limits(self) -> None:
        table = [row for row in rows("limits") if row["characteristic"] == "bore[press=1]"]
        assert [row["panel"] for row in table] == ["location", "spread"]
        assert (table[0]["kind"], table[0]["centre"], table[0]["n"], table[0]["points"]) == (
            "adopted",
            "12",
            "5",
            "25",
        )
        assert table[1]["lower"] == ""
        assert table[0]["era_from"] == table[0]["era_to"] == ""

    def test_an_era_ends_where_the_next_begins(self) -> None:
        made = finding("bore")
        second = replace(made.eras[0], number=2, start_index=40, from_time=AS_OF - 100 * HOUR)
        made = replace(
            made,
            eras=(replace(made.eras[0], stop_index=40), second),
            limits=tuple(replace(row, era=era) for era in (1, 2) for row in made.limits[:1]),
        )
        first, last = rows("limits", tables([made], INTAKE, zone=LISBON))
        assert first["era_from"] == last["era_to"] == ""
        assert first["era_to"] == last["era_from"] == iso(np.array([AS_OF - 100 * HOUR]), LISBON)[0]

    def test_capability_says_level_and_specification_and_claims_no_index(self) -> None:
        made = finding("bore")
        made = replace(
            made,
            specification=(Specification(lower=1.0), Specification(lower=2.0, from_=dt.date(2099, 1, 1))),
        )
        row = rows("capability", tables([made], INTAKE, zone=LISBON))[0]
        assert (row["n"], row["mean"], row["sigma_total"], row["lower_spec"]) == ("450", "12", "0.008", "1")
        assert (row["outside_observed"], row["resolution"]) == ("0", "0.001")
        assert {row[name] for name in row if name.startswith(("c", "pp", "fraction", "model"))} - {
            "bore"
        } == {""}

    def test_files_and_what_was_set_aside(self) -> None:
        file = rows("files")[0]
        assert file["file"] == "press/=1.csv"
        assert int(file["rows"]) == sum(
            int(file[k]) for k in ("used", "filtered", "repeated", "corrected", "set_aside")
        )
        assert (file["delimiter"], file["decimal"], file["last_time"]) == (";", ",", "")
        cell, whole = rows("set-aside")
        assert cell == {
            "file": "press/=1.csv",
            "line": "7",
            "column": "bore",
            "reason": "not a number",
            "text": '12,3 "g"\n',
        }
        assert (whole["line"], whole["text"]) == ("", "'=cmd|' /C calc'!A0")

    def test_text_that_tries_to_break_out_stays_in_its_cell(self) -> None:
        row = next(row for row in rows("characteristics") if row["characteristic"] == "none")
        assert row["title"] == "</script><img src=x onerror=alert(1)>\"'"

    def test_build_json(self) -> None:
        assert json.loads(build_json({"version": "0", "counts": {"files": 2}})) == {
            "version": "0",
            "counts": {"files": 2},
        }
        with pytest.raises(ValueError, match="not JSON compliant"):
            build_json({"seconds": math.nan})


class TestColumns:
    @pytest.mark.parametrize(
        "cell", ["=1+1", "+a", "-a", "@a", "\ta", "\ra", "-", "+", "-1-1", "=", "+1 mm", "1e5\n-1"]
    )
    def test_formulas_get_an_apostrophe(self, cell: str) -> None:
        got = read_cell(cell)
        assert got == ("'" if cell[0] in "=+-@\t\r" else "") + cell

    @pytest.mark.parametrize("cell", ["-1", "+1.5", "-.5", "-1e-7", "-1.", "a-b", "1", "", "'x", "ä=", " =1"])
    def test_numbers_and_plain_words_do_not(self, cell: str) -> None:
        assert read_cell(cell) == cell

    def test_names_that_are_no_utf8_are_written_out(self) -> None:
        assert read_cell("caf\udce9.csv") == "caf\\udce9.csv"
        assert read_cell("a\0b") == "a\\x00b"

    @given(st.lists(st.floats(), max_size=30))
    @settings(max_examples=60, deadline=None)
    def test_floats_read_back_as_the_same_double(self, values: list[float]) -> None:
        array = np.array(values * 3 + [values[0]] * 40 if values else [], dtype=np.float64)
        for value, cell in zip(array, columns.floats(array).to_pylist(), strict=True):
            assert (cell is None) == (not math.isfinite(value))
            assert cell is None or float(cell) == value

    @given(
        st.lists(st.integers(-(10**15), 4 * 10**15), max_size=20),
        st.booleans(),
        st.sampled_from(["UTC", "Europe/Lisbon", "Asia/Kathmandu", "America/St_Johns"]),
    )
    @settings(max_examples=60, deadline=None)
    def test_moments_are_those_of_the_pages(self, values: list[int], whole: bool, zone: str) -> None:  # noqa: FBT001
        array = np.array(values, dtype=np.int64)
        if whole:
            array -= array % 1_000_000
        assert columns.moments(array, ZoneInfo(zone)).to_pylist() == iso(array, ZoneInfo(zone))

    @given(
        st.lists(
            st.tuples(
                st.text(st.characters(exclude_characters="\0", exclude_categories=["Cs"])),
                st.text('",;\n\r\t =-a', min_size=1),
            ),
            min_size=1,
            max_size=8,
        )
    )
    @settings(max_examples=100, deadline=None)
    def test_any_text_reads_back(self, cells: list[tuple[str, str]]) -> None:
        made = columns.csv("a,b", [columns.text(column) for column in zip(*cells, strict=True)])
        read = list(csv.reader(io.StringIO(made.decode(), newline=""), strict=True))[1:]
        for (a, b), row in zip(cells, read, strict=True):
            assert row[0] in (a, "'" + a)
            assert row[1] in (b, "'" + b)

    def test_a_table_must_have_a_column_for_each_name(self) -> None:
        with pytest.raises(ValueError, match="1 columns for 2 names"):
            columns.csv("a,b", [columns.text(["x"])])


def read_cell(cell: str) -> str:
    made = columns.csv("a,b", [columns.text([cell]), columns.text(["end"])])
    return list(csv.reader(io.StringIO(made.decode(), newline=""), strict=True))[1][0]
