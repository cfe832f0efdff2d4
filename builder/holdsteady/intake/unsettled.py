"""What the files of a source leave open: said once for all of them, with the key that settles it."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from holdsteady.intake.block import Judgement
from holdsteady.intake.file import Opened
from holdsteady.intake.numbers import choose_mark, is_unproven
from holdsteady.intake.times_text import AMBIGUOUS
from holdsteady.problems import Problem, Severity
from holdsteady.project.settings import Source


def unsettled(files: Iterable[Opened], judgement: Judgement, source: Source) -> list[Problem]:
    """Return a problem for each thing that could be read in two ways."""
    files = tuple(files)
    return [*_marks(files, judgement, source), *_days(files, judgement, source)]


def _marks(files: Sequence[Opened], judgement: Judgement, source: Source) -> list[Problem]:
    if source.decimal is not None:
        return []
    unclear, unproven = [], []
    for one in files:
        if one.layout is None:
            continue
        if choose_mark(one.marks, judgement.marks, one.layout.delimiter) is None:
            unclear.append(one.found.name)
        elif is_unproven(one.marks, judgement.marks, one.layout.delimiter):
            unproven.append(one.found.name)
    remedy = f"set `decimal` of source '{source.id}'"
    return [
        *_problem(
            unclear, "no number was read, because decimal and thousands mark cannot be told apart", remedy
        ),
        *_problem(unproven, "the mark before three digits was taken for the decimal mark", remedy),
    ]


def _days(files: Sequence[Opened], judgement: Judgement, source: Source) -> list[Problem]:
    if source.time_format is not None or judgement.day_first is not None:
        return []
    found = []
    for one in files:
        reading = one.table or one.records
        if reading is not None and reading.stamps is not None and reading.stamps.main_family() in AMBIGUOUS:
            found.append(one.found.name)
    example = "'%d/%m/%Y %H:%M:%S' or '%m/%d/%Y %H:%M:%S'"
    remedy = f"set `time_format` of source '{source.id}', as in {example}"
    return _problem(found, "no time was read, because day and month cannot be told apart", remedy)


def _problem(files: Sequence[str], what: str, remedy: str) -> list[Problem]:
    if not files:
        return []
    others = f" (and in {len(files) - 1} more)" if len(files) > 1 else ""
    return [Problem(severity=Severity.WARNING, where=files[0], what=what + others, remedy=remedy)]
