"""Lines to rows: most of them all together, those with quotes or other trouble one by one."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from holdsteady.arrays import Bools, Ints
from holdsteady.intake.columns import flags, strings
from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import Layout
from holdsteady.intake.lines import QUOTE, Quoting, split_cells

MOST_JOINED = 200  # lines of one row
_LONGEST_JOINED = 1 << 20
_MOST_SURPLUS = 1_000
_DIGITS = str.maketrans("123456789", "000000000")


@dataclass(frozen=True, slots=True, kw_only=True)
class Rows:
    """R rows that have all their fields, in the order of their lines, and those that do not.

    `line`, (R,), counts from 1; `text` is each row as it is written, `columns` its trimmed cells, `last`
    its last cell. `faults` are line, text and reason. `ends_in_row` tells whether the last line belongs
    to a row that has all its fields.
    """

    line: Ints
    text: pa.StringArray
    columns: dict[str, pa.StringArray]
    last: pa.StringArray
    faults: list[tuple[int, str, str]]
    ends_in_row: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class _Row:
    cells: list[str]
    text: str
    taken: int  # physical lines
    reason: str = ""


@dataclass(slots=True, kw_only=True)
class _Batch:
    """Rows taken together, kept until those of the whole piece are put in order."""

    line: list[Ints] = field(default_factory=list)
    text: list[pa.StringArray] = field(default_factory=list)
    columns: dict[str, list[pa.StringArray]] = field(default_factory=dict)
    last: list[pa.StringArray] = field(default_factory=list)


@dataclass(frozen=True, slots=True, kw_only=True)
class Splitter:
    """Splits the lines of one file into rows."""

    layout: Layout
    demand: Demand

    @property
    def wanted(self) -> dict[str, int]:
        """The columns that are wanted and there, and where they stand."""
        return self.layout.position

    def split(self, lines: pa.StringArray, stop: int, before: int) -> tuple[Rows, int]:
        """Return the rows that begin in the first `stop` lines, and how many lines they take.

        That is more than `stop` where a row of several lines runs on. `before` is the number of lines
        above the first.
        """
        bare = self._unquoted(lines)
        odd = flags(pc.or_(pc.match_substring(bare, QUOTE), pc.match_substring(bare, "\0")))
        done = np.zeros(len(lines), dtype=np.bool_)
        single, last_start = [], stop - 1
        if odd.any():
            texts = lines.to_pylist()
            for at in np.flatnonzero(odd[:stop]).tolist():
                if done[at]:
                    continue
                row = self._row(texts, at)
                done[at : at + row.taken] = True
                single.append((at, row))
                if at + row.taken >= stop:
                    last_start = at
        taken = max([stop, *(at + row.taken for at, row in single[-1:])])
        batch, faults = _Batch(), list[tuple[int, str, str]]()
        self._together(lines, bare, np.flatnonzero(~done[:stop]), batch, faults)
        self._one_by_one(single, batch, faults)
        return self._ordered(batch, faults, before, last_start), taken

    def _unquoted(self, lines: pa.StringArray) -> pa.StringArray:
        """Return the lines without quotes around cells that hold neither a delimiter nor a quote."""
        quoted = pc.match_substring(lines, QUOTE)
        if not pc.any(quoted).as_py():
            return lines
        mark = re.escape(self.layout.delimiter)
        cell = f'(?: *"[^"{mark}]*" *|[^"{mark}]*)'
        simple = pc.match_substring_regex(lines, f"^{cell}(?:{mark}{cell})*$")
        return pc.if_else(pc.and_(quoted, simple), pc.replace_substring(lines, QUOTE, ""), lines)

    def _together(
        self,
        lines: pa.StringArray,
        bare: pa.StringArray,
        at: Ints,
        batch: _Batch,
        faults: list[tuple[int, str, str]],
    ) -> None:
        """Take lines without NUL and quotes that matter, all of one number of fields in one go."""
        if at.size == 0:
            return
        if at.size < len(lines):
            lines, bare = lines.take(pa.array(at)), bare.take(pa.array(at))
        counts = np.from_dlpack(pc.count_substring(bare, self.layout.delimiter)) + 1
        fits = (counts >= self.layout.width) & (counts <= len(self.layout.names) + _MOST_SURPLUS)
        for count in np.unique(counts[fits]).tolist():
            of = counts == count
            whole = lines if of.all() else lines.filter(pa.array(of))
            cells = bare if of.all() else bare.filter(pa.array(of))
            faults += self._same_width(whole, cells, at[of], count, batch)
        if not fits.all():
            wrong = pa.array(~fits)
            self._other_widths(
                lines.filter(wrong).to_pylist(), bare.filter(wrong).to_pylist(), at[~fits], batch, faults
            )

    def _other_widths(
        self,
        lines: Sequence[str],
        bare: Sequence[str],
        at: Ints,
        batch: _Batch,
        faults: list[tuple[int, str, str]],
    ) -> None:
        """Take lines with too few fields or far too many, which may be blank, or empty where they surpass."""
        names = len(self.layout.names)
        for line, text, plain in zip(at.tolist(), lines, bare, strict=True):
            if self._is_blank(plain):
                continue
            cells = plain.split(self.layout.delimiter, names)
            if len(cells) > names and self._is_blank(cells[-1]):
                self._one_by_one([(line, _Row(cells=cells[:names], text=text, taken=1))], batch, faults)
            else:
                faults.append((line, text, self._too_many_or_few(plain.count(self.layout.delimiter) + 1)))

    def _is_blank(self, text: str) -> bool:
        return not text.replace(self.layout.delimiter, " ").strip()

    def _same_width(
        self, lines: pa.StringArray, bare: pa.StringArray, at: Ints, count: int, batch: _Batch
    ) -> list[tuple[int, str, str]]:
        """Take lines of `count` fields each; return those that are at fault."""
        cells = pc.split_pattern(bare, self.layout.delimiter).flatten()
        first = np.arange(at.size) * count

        def column(place: int) -> pa.StringArray:
            return pc.utf8_trim_whitespace(cells.take(pa.array(first + place)))

        columns = {name: column(place) for name, place in self.wanted.items()}
        looked_at, surplus = self._to_look_at(columns, at.size), np.zeros(at.size, dtype=np.bool_)
        if count != len(self.layout.names):
            for place in range(self.layout.width, count):
                surplus |= flags(pc.not_equal(column(place), ""))
        keep = ~surplus
        faults = [
            (line, text, self._too_many_or_few(count))
            for line, text in zip(
                at[surplus].tolist(), lines.filter(pa.array(surplus)).to_pylist(), strict=True
            )
        ]
        for index in np.flatnonzero(looked_at & keep).tolist():
            text = lines[index].as_py()
            fields = [cell.strip() for cell in bare[index].as_py().split(self.layout.delimiter)]
            if not any(fields):
                keep[index] = False
            elif self._is_header(fields):
                keep[index] = False
                faults.append((int(at[index]), text, "the header again"))
        mask = pa.array(keep)
        batch.line.append(at[keep])
        batch.text.append(lines.filter(mask))
        batch.last.append(cells.take(pa.array(first[keep] + count - 1)))
        for name, values in columns.items():
            batch.columns.setdefault(name, []).append(values.filter(mask))
        return faults

    def _to_look_at(self, columns: dict[str, pa.StringArray], count: int) -> Bools:
        """Return rows that may be blank or the header again, going by the columns that are wanted."""
        empty = np.ones(count, dtype=np.bool_)
        header = np.ones(count, dtype=np.bool_)
        for name, values in columns.items():
            empty &= flags(pc.equal(values, ""))
            header &= flags(pc.equal(values, name))
        return empty | header

    def _one_by_one(
        self, single: Sequence[tuple[int, _Row]], batch: _Batch, faults: list[tuple[int, str, str]]
    ) -> None:
        kept = []
        for at, row in single:
            if not row.reason and not any(cell.strip() for cell in row.cells):
                continue
            reason = row.reason or self._fault(row)
            if reason:
                faults.append((at, row.text, reason))
            else:
                kept.append((at, row))
        if not kept:
            return
        batch.line.append(np.array([at for at, _ in kept], dtype=np.int64))
        batch.text.append(strings([row.text for _, row in kept]))
        batch.last.append(strings([row.cells[-1] for _, row in kept]))
        for name, place in self.wanted.items():
            cells = strings([row.cells[place].strip() for _, row in kept])
            batch.columns.setdefault(name, []).append(cells)

    def _ordered(
        self, batch: _Batch, faults: list[tuple[int, str, str]], before: int, last_start: int
    ) -> Rows:
        line = np.concatenate([np.zeros(0, dtype=np.int64), *batch.line])
        order = None if bool((np.diff(line) > 0).all()) else pa.array(np.argsort(line, kind="stable"))

        def whole(chunks: list[pa.StringArray]) -> pa.StringArray:
            joined = pa.concat_arrays(chunks) if chunks else strings(())
            return joined if order is None else joined.take(order)

        line = np.sort(line)
        return Rows(
            line=line + (before + 1),
            text=whole(batch.text),
            columns={name: whole(batch.columns.get(name, [])) for name in self.wanted},
            last=whole(batch.last),
            faults=[(at + before + 1, text, reason) for at, text, reason in sorted(faults)],
            ends_in_row=bool(line.size) and int(line[-1]) == last_start,
        )

    def _row(self, lines: Sequence[str], at: int) -> _Row:
        """Return the row that begins at a line."""
        line = lines[at]
        if QUOTE not in line:
            return _Row(cells=line.split(self.layout.delimiter), text=line, taken=1)
        cells, quoting = split_cells(line, self.layout.delimiter)
        if quoting is Quoting.FINE:
            return _Row(cells=cells, text=line, taken=1)
        if quoting is Quoting.OPEN:
            joined = self._joined(lines, at)
            if joined is not None:
                return joined
        return _Row(cells=[], text=line, taken=1, reason=quoting.value)

    def _joined(self, lines: Sequence[str], at: int) -> _Row | None:
        """Return a row with line ends inside quotes; None where a quote merely was not closed."""
        width = self.layout.width
        text = lines[at]
        for taken in range(2, min(MOST_JOINED, len(lines) - at) + 1):
            line = lines[at + taken - 1]
            text = f"{text}\n{line}"
            if len(text) > _LONGEST_JOINED:
                return None
            if QUOTE not in line:
                continue
            cells, quoting = split_cells(text, self.layout.delimiter)
            if quoting is Quoting.OPEN:
                continue
            swallowed = lines[at + 1 : at + taken]
            fits = quoting is Quoting.FINE and len(cells) >= width
            if fits and not any(self._is_row(line, cells) for line in swallowed):
                return _Row(cells=cells, text=text, taken=taken)
            return None
        return None

    def _is_row(self, line: str, like: list[str]) -> bool:
        """Whether a line by itself is a row such as the one that would swallow it."""
        cells = line.split(self.layout.delimiter)
        if len(cells) != self.layout.width or len(cells) < 2:
            return False
        stamps = [name for name in self.demand.stamps if name in self.wanted]
        timed = len(stamps) == len(self.demand.stamps) > 0
        column = (
            stamps[0] if timed else next((one for one in self.demand.numbers if one in self.wanted), None)
        )
        if column is None:
            return True
        place = self.wanted[column]
        shape, other = (one[place].strip().strip(QUOTE).translate(_DIGITS) for one in (cells, like))
        return "0" in shape and (shape == other or not timed)

    def _fault(self, row: _Row) -> str:
        if "\0" in row.text:
            return "holds NUL bytes"
        count, width = len(row.cells), self.layout.width
        surplus = count != len(self.layout.names) and any(cell.strip() for cell in row.cells[width:])
        if count < width or surplus:
            return self._too_many_or_few(count)
        return "the header again" if self._is_header([cell.strip() for cell in row.cells]) else ""

    def _is_header(self, fields: Sequence[str]) -> bool:
        width = self.layout.width
        return list(fields[:width]) == list(self.layout.names[:width])

    def _too_many_or_few(self, count: int) -> str:
        return f"{count} field{'s'[: count != 1]} where the header has {self.layout.width}"
