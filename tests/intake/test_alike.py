"""Files that begin alike are looked at closely once; what differs below the header is still seen."""

from __future__ import annotations

from pathlib import Path
from unittest.mock import patch

import pytest
from tests.intake.folders import STAMPED, adds_up, settings_of, take_in

from holdsteady.intake import alike
from holdsteady.intake import read as stage
from holdsteady.intake.alike import Layouts
from holdsteady.intake.demand import demand_of
from holdsteady.intake.dialect import detect

SETTINGS = settings_of()
DEMAND = demand_of(SETTINGS.source[0], SETTINGS)


def looks(*texts: str) -> int:
    layouts = Layouts(DEMAND)
    with patch.object(alike, "detect", wraps=detect) as closely:
        for text in texts:
            found, expected = layouts.of(text.encode()), detect(text.encode(), DEMAND)
            assert found is not None
            assert expected is not None
            same = ("delimiter", "header_line", "offset", "names", "position", "missing", "twice")
            assert [getattr(found, name) for name in same] == [getattr(expected, name) for name in same]
            for mark in ("dot", "comma"):
                assert bool(getattr(found.marks, mark)) == bool(getattr(expected.marks, mark))
    return closely.call_count


def test_the_second_of_two_is_known() -> None:
    assert looks("stamp,v\n2025-01-01,1.5\n", "stamp,v\n2025-01-02,2.25\n") == 1
    assert looks("stamp,v\r\n2025-01-01,1.5\r\n", "stamp,v\n2025-01-02,2.25\n") == 2
    assert looks("stamp,v,w\n2025-01-01,1.5,1\n", "stamp,w,v\n2025-01-02,2,2.25\n") == 2
    assert looks("Bench 4\nstamp,v\n2025-01-01,1.5\n", "Bench 4\nstamp,v\n2025-01-02,2.25\n") == 1


@pytest.mark.parametrize(
    "head",
    ["stamp,v;x\n", "v\n", "stamp,w\n", "stamp,v,v\n", 'Bench "4\nstamp,v\n', "stamp,v"],
    ids=["two delimiters", "one column", "missing", "twice", "quote above", "no end"],
)
def test_a_header_that_does_not_settle_everything_is_looked_at_each_time(head: str) -> None:
    assert looks(head + "2025-01-01,1.5\n" * head.endswith("\n"), head) == 2


def test_marks_are_those_of_each_file() -> None:
    head = "stamp;v\n"
    rows = "2025-01-01;1\n" * 30
    assert looks(head + "2025-01-01;1,5\n", head + "2025-01-01;1.5\n", head + rows + "2025-01-01;2,5\n") == 1


def test_many_files_read_as_each_alone(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Several at a time, some in trouble, some with other marks, give what one after the other gives."""
    wanted = settings_of(
        {"id": "c", "source": "s", "value": "v", "each": ("lot",)},
        {"id": "d", "source": "s", "values": ("v", "w"), "where": {"lot": "b"}},
        source=STAMPED,
    )
    files = {}
    for index in range(40):
        mark, delimiter = (",", ";") if index % 5 == 0 else (".", ",")
        rows = [
            delimiter.join(
                (f"2025-01-{1 + row:02d} {index % 24:02d}:00", "ab"[row % 2], f"{row}{mark}5", "1")
            )
            for row in range(20)
        ]
        if index % 7 == 0:
            rows[3] = rows[3] + delimiter + "more"
        files[f"{index:02d}.csv"] = "\n".join([delimiter.join(("stamp", "lot", "v", "w")), *rows]) + "\n"
    several = take_in(tmp_path, files, wanted)
    adds_up(several)
    monkeypatch.setattr(stage, "_FEW", 1_000)
    alone = take_in(tmp_path, {}, wanted)
    monkeypatch.setattr(stage, "_MANY", 0)
    threads = take_in(tmp_path, {}, wanted)
    for one in (alone, threads):
        assert (one.files, one.set_aside) == (several.files, several.set_aside)
        for name, members in several.readings.items():
            for left, right in zip(members, one.readings[name], strict=True):
                assert left.name == right.name
                assert left.values.tolist() == right.values.tolist()
                assert (left.file.tolist(), left.line.tolist()) == (right.file.tolist(), right.line.tolist())
