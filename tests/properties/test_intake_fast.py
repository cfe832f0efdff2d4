"""What the quick way takes for granted, held against the strict reading of text and a plain loop."""

from __future__ import annotations

import datetime as dt
from itertools import pairwise
from unittest.mock import patch

import numpy as np
import pyarrow as pa
import pyarrow.csv as pa_csv
from hypothesis import given, settings
from hypothesis import strategies as st

from holdsteady.intake import ground as ground_module
from holdsteady.intake import groups as groups_module
from holdsteady.intake import selection as selection_module
from holdsteady.intake.columns import integers, strings
from holdsteady.intake.ground import Ground
from holdsteady.intake.groups import group, identified
from holdsteady.intake.selection import select
from holdsteady.intake.times_text import NO_TIME, Family, parse

WALLS = st.datetimes(dt.datetime(1600, 1, 1), dt.datetime(2250, 1, 1))  # noqa: DTZ001
FORMS = st.sampled_from(
    [
        "%Y-%m-%d",
        "%Y-%m-%d %H",
        "%Y-%m-%dT%H:%M",
        "%Y-%m-%d %H:%M:%S",
        "%Y-%m-%dT%H:%M:%S.%f",
        "%Y-%m-%d %H:%M%%",
    ]
)
ZONES = st.sampled_from(["", "", "Z", "+01:00", "-0930", "+05", "z", " Z", "+0", "+24:00", "+01:60", "UTC"])
EDITS = st.lists(
    st.tuples(
        st.integers(0, 30), st.integers(0, 2), st.sampled_from(["", "0", "9", " ", "T", ":", "-", "."])
    ),
    max_size=2,
)


@st.composite
def stamps(draw: st.DrawFn) -> str:
    text = draw(WALLS).strftime(draw(FORMS)).replace("%", "") + draw(ZONES)
    for place, length, inserted in draw(EDITS):
        at = place % (len(text) + 1)
        text = text[:at] + inserted + text[at + length :]
    return text


@settings(max_examples=400, deadline=None)
@given(stamps(), st.booleans())
def test_what_the_parser_of_iso_times_accepts_the_strict_reading_accepts_too(text: str, zoned: bool) -> None:  # noqa: FBT001
    kind = pa.timestamp("us", "UTC") if zoned else pa.timestamp("us")
    options = pa_csv.ConvertOptions(column_types={"t": kind}, null_values=[""])
    try:
        table = pa_csv.read_csv(pa.py_buffer(f"t,v\n{text},1\n".encode()), convert_options=options)
    except pa.ArrowInvalid:
        return
    column = table.column("t").combine_chunks()
    if column.null_count:
        assert text == ""
        return
    strict = parse(strings([text]))
    year_zero = text.startswith("0000")  # far before 1900 in either reading
    assert year_zero or strict.first.tolist() == integers(column).tolist()
    assert year_zero or (strict.family[0], strict.zoned[0]) == (Family.ISO, zoned)
    assert year_zero or strict.first[0] != NO_TIME


@settings(max_examples=150, deadline=None)
@given(st.data(), st.lists(st.integers(0, 12), min_size=1, max_size=5), st.booleans(), st.booleans())
def test_a_selection_is_what_a_plain_sort_gives(
    data: st.DataObject,
    sizes: list[int],
    gaps: bool,  # noqa: FBT001
    all_rows: bool,  # noqa: FBT001
) -> None:
    count = sum(sizes)
    starts = np.concatenate(([0], np.cumsum(sizes)))
    lines = [np.arange(size) * (2 if gaps else 1) + 2 for size in sizes]
    draw = data.draw(st.lists(st.integers(0, 9), min_size=count, max_size=count))
    times = np.array(draw, dtype=np.int64)
    codes = np.array(data.draw(st.lists(st.integers(-1, 2), min_size=count, max_size=count)), dtype=np.int16)
    picked = data.draw(st.lists(st.booleans(), min_size=count, max_size=count))
    rows = np.arange(count) if all_rows else np.flatnonzero(np.array(picked, dtype=np.bool_))
    pieces = [times[a:b].astype(np.float64) for a, b in pairwise(starts)]
    with (
        patch.object(ground_module, "_TOGETHER", data.draw(st.integers(1, 20))),
        patch.object(selection_module, "_FEWEST_IN_FILE", data.draw(st.sampled_from([0, 10**9]))),
        patch.object(selection_module, "_FEWEST_IN_STEP", data.draw(st.sampled_from([0, 10**9]))),
    ):
        ground = Ground(
            starts=starts,
            lines=lines,
            times=[times[a:b] for a, b in pairwise(starts)],
        )
        groups = group([codes[rows]]) if data.draw(st.booleans()) else None
        each = [{}] if groups is None else [{"c": str(key)} for key in groups.keys[:, 0]]
        found = select(rows, each, groups, ground)
        member = np.zeros(rows.size) if groups is None else codes[rows]
        expected = rows[np.lexsort((rows, times[rows], member))]
        assert found.rows.tolist() == expected.tolist()
        assert found.time is not None
        assert found.time.tolist() == times[expected].tolist()
        assert found.file.tolist() == ground.file[expected].tolist()
        assert found.line.tolist() == ground.line[expected].tolist()
        assert found.of(codes).tolist() == codes[expected].tolist()
        joined = found.of_pieces(pieces)
        assert joined is None or joined.tolist() == times[expected].tolist()
        bounds = [0] if groups is None else [int((member == key).sum()) for key in groups.keys[:, 0]]
        assert found.starts.tolist() == ([0, rows.size] if groups is None else [0, *np.cumsum(bounds)])


@settings(max_examples=100, deadline=None)
@given(
    st.lists(st.tuples(st.integers(-3, 3), st.integers(-(2**40), 2**40)), max_size=30),
    st.integers(1, 2**15),
    st.integers(1, 40),
)
def test_rows_are_grouped_by_all_their_codes(pairs: list[tuple[int, int]], spread: int, block: int) -> None:
    first = np.array([one * spread for one, _ in pairs], dtype=np.int32)
    second = np.array([two % 7 for _, two in pairs], dtype=np.int16)
    with patch.object(groups_module, "_LONGEST_BLOCK", block), patch.object(groups_module, "_FEWEST", 0):
        found = group([first, second])
    seen = [(tuple(key), found.rows(index).tolist()) for index, key in enumerate(found.keys.tolist())]
    expected: dict[tuple[int, int], list[int]] = {}
    for row, key in enumerate(zip(first.tolist(), second.tolist(), strict=True)):
        expected.setdefault(key, []).append(row)
    assert dict(seen) == expected
    assert len(seen) == len(expected)
    wide = np.array([two for _, two in pairs], dtype=np.int64)
    numbers = identified([first, wide])
    same = {(one * spread, two) for one, two in pairs}
    assert len({*zip(numbers.tolist(), first.tolist(), wide.tolist(), strict=True)}) == len(same)
    assert len(set(numbers.tolist())) == len(same)
