"""How readings become points: a chart for each of what, which rows, which subgroups."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints
from holdsteady.start import words
from holdsteady.start.draft import Confidence, Guess
from holdsteady.start.facts import Facts, Table
from holdsteady.start.guess_subgroups import Grouping, guess_grouping
from holdsteady.start.structure import combine, in_order, is_once_in_each, runs_of, separation

_MOST_MEMBERS = 60
_MOST_KINDS = 12  # of a label that is not named as a machine
_MOST_FEATURES = 200
_FEWEST = 8
_APART = 1.0  # standard deviations of a single reading
_FEATURES_APART = 10.0
_DOMINANT = 0.9
_FAR = 3.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Points:
    """How the readings of a source are told apart and put together.

    `kept`, (R,), are the rows that `where` leaves; `member`, (R,), numbers the charts of `each`; `ends`
    are the rows that end a point, in the order of time within each member. `split` is a label with a
    characteristic of its own for each of its texts.
    """

    guesses: tuple[Guess, ...]
    notes: tuple[str, ...]
    kept: Bools
    member: Ints
    ends: Ints
    split: str | None = None


def guess_points(
    table: Table,
    labels: Sequence[str],
    values: Sequence[Floats],
    time: Ints,
    *,
    one_a_row: bool,
    counts: bool,
) -> Points:
    """Decide on `where`, `each` and `subgroup` of the characteristics of a source.

    Parameters
    ----------
    values: the measured columns, each (R,), NaN where there is nothing.
    one_a_row: whether a row is a subgroup already. counts: whether things are counted.
    """
    search = _Search(
        table=table,
        labels=[table.facts[name] for name in labels if len(table.facts[name].kinds) > 1],
        values=values,
        time=time,
        kept=np.any([np.isfinite(one) for one in values], axis=0) & ~table.units,
    )
    search.find_features()
    search.find_streams()
    search.find_exceptions()
    if not counts:
        search.find_levels()
    grouping = None
    if not one_a_row and not counts:
        grouping = search.group()
    elif search.places:
        search.each += search.places
    return search.result(grouping)


@dataclass(slots=True, kw_only=True)
class _Search:
    """The state of the search; `each` and `places` hold labels with confidence and evidence."""

    table: Table
    labels: list[Facts]
    values: Sequence[Floats]
    time: Ints
    kept: Bools
    split: Facts | None = None
    each: list[tuple[Facts, Confidence, str]] = field(default_factory=list)
    places: list[tuple[Facts, Confidence, str]] = field(default_factory=list)
    guesses: list[Guess] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)

    @property
    def member(self) -> Ints:
        """The chart that each row belongs to, (R,)."""
        of = [one.code for one, _, _ in self.each] + ([self.split.code] if self.split else [])
        return combine(of, self.table.rows.count)

    def apart(self, label: Ints) -> float:
        """Return how far the levels of a label lie apart, in the column where they do the most."""
        kept, member = self.kept, self.member
        return max(separation(one[kept], label[kept], member[kept]) for one in self.values)

    def chosen(self, one: Facts) -> bool:
        """Whether a label has its use already."""
        return one is self.split or any(one is other for other, _, _ in (*self.each, *self.places))

    def find_features(self) -> None:
        """Find a label that names what was measured: the long form of a table."""
        for one in self.labels:
            named = words.ends_in(one.name, words.FEATURE) and len(one.kinds) <= _MOST_FEATURES
            if named and len(self.values) == 1 and self.apart(one.code) >= _FEATURES_APART:
                self.split = one
                return

    def find_streams(self) -> None:
        """Find labels that name machines, lines, cavities, or stay the same throughout each file."""
        for one in self.labels:
            kinds = len(one.kinds)
            if self.chosen(one) or not 2 <= kinds <= _MOST_MEMBERS or self._readings_each(one) < _FEWEST:
                continue
            named = words.ends_in(one.name, words.STREAM | words.PLACE)
            by_file = self._same_throughout(one)
            if not (named or by_file) or words.ends_in(one.name, words.WHO):
                continue
            if any(self._same_partition(one, other) for other, _, _ in self.each):
                self.notes.append(
                    f"{one.name} goes with {self.each[0][0].name}: one of the two is enough for each"
                )
                continue
            why = f"{kinds} values ({_some(one)})"
            why += ", named as a machine or place is" if named else ""
            why += ", the same throughout each file" if by_file else ""
            entry: tuple[Facts, Confidence, str] = (one, "sure" if named and by_file else "likely", why)
            (self.places if words.ends_in(one.name, words.PLACE) else self.each).append(entry)

    def find_exceptions(self) -> None:
        """Find a label with one text nearly everywhere, whose other rows lie far off: trials, set-ups."""
        for one in self.labels:
            if self.chosen(one) or not 2 <= len(one.kinds) <= _MOST_KINDS:
                continue
            counts = np.bincount(one.code[self.kept], minlength=len(one.texts))
            top = int(np.argmax(counts))
            if not _DOMINANT <= counts[top] / max(counts.sum(), 1) < 1 or not one.texts[top]:
                continue
            far = self._far_off(one.code != top)
            if far < _FAR:
                continue
            others = int(counts.sum() - counts[top])
            why = (
                f"{others} of {counts.sum()} rows have another {one.name}, {far:.0f} standard deviations off"
            )
            odd = np.flatnonzero(self.kept & (one.code != top))
            self.guesses.append(
                Guess(
                    key="where",
                    value={one.name: one.texts[top]},
                    confidence="likely",
                    why=why,
                    rows=self._two(odd),
                )
            )
            self.kept = self.kept & (one.code == top)

    def find_levels(self) -> None:
        """Find labels that alternate while the level goes with them: rows of two kinds in one table."""
        for one in self.labels:
            if (
                self.chosen(one)
                or not 2 <= len(one.kinds) <= _MOST_KINDS
                or self._readings_each(one) < _FEWEST
            ):
                continue
            kept = self.kept
            runs = runs_of(one.code[kept], self.member[kept], self.time[kept])
            members = max(1, np.unique(self.member[kept]).size)
            if runs.sizes.size < 3 * members * len(one.kinds):
                continue
            apart = self.apart(one.code)
            said = f"{one.name} ({_some(one)}): levels {apart:.1f} standard deviations apart"
            if words.names_one_of(one.name, words.WHO):
                self.notes += [f"{said}; who measured is no reason for a chart of its own"] * (
                    apart >= _APART
                )
            elif apart >= _APART and len(np.unique(self.member)) * len(one.kinds) <= _MOST_MEMBERS:
                self.each.append(
                    (one, "likely", f"{_some(one)} alternate, levels {apart:.1f} standard deviations apart")
                )
            elif words.ends_in(one.name, words.STREAM):
                self.notes.append(said)

    def group(self) -> Grouping | None:
        """Decide on subgroups, and whether places are members of them or have charts of their own."""
        grouping = self._grouping()
        for entry in self.places:
            one, _, why = entry
            kept = self.kept
            once = grouping is not None and is_once_in_each(one.code[kept], grouping.runs)
            apart = self.apart(one.code)
            if once and apart < _APART:
                said = (
                    f"each subgroup holds every {one.name} once, levels {apart:.1f} standard deviations apart"
                )
                self.notes.append(f"{said}: taken together, not a chart for each")
                continue
            self.each.append((one, "likely", f"{why}, levels {apart:.1f} standard deviations apart"))
            grouping = self._grouping()
        return grouping

    def result(self, grouping: Grouping | None) -> Points:
        """Return what was found."""
        kept, member = self.kept, self.member
        order = in_order(member, self.time)
        order = order[kept[order]]
        ends = order
        guesses = list(self.guesses)
        if self.each:
            facts = [one for one, _, _ in self.each]
            worst = max((confidence for _, confidence, _ in self.each), key=("sure", "likely", "guess").index)
            why = "; ".join(f"{one.name}: {text}" if len(facts) > 1 else text for one, _, text in self.each)
            first = facts[0].code
            rows = [int(np.flatnonzero(kept & (first == code))[0]) for code in np.unique(first[kept])[:2]]
            value = tuple(one.name for one in facts)
            guesses.append(
                Guess(key="each", value=value, confidence=worst, why=why, rows=self._two(np.array(rows)))
            )
        if grouping is not None:
            places = np.flatnonzero(kept)
            inside = places[grouping.runs.run == grouping.typical]
            guesses.append(
                Guess(
                    key="subgroup",
                    value=grouping.value,
                    confidence=grouping.confidence,
                    why=grouping.why,
                    rows=self._two(inside),
                )
            )
            run = np.full(self.table.rows.count, -1, dtype=np.int64)
            run[places] = grouping.runs.run
            ends = order[np.append(np.diff(run[order]) != 0, True)] if order.size else order
        return Points(
            guesses=tuple(guesses),
            notes=tuple(self.notes),
            kept=kept,
            member=member,
            ends=ends,
            split=self.split.name if self.split else None,
        )

    def _grouping(self) -> Grouping | None:
        free = [
            one for one in self.labels if not self.chosen(one) and not words.names_one_of(one.name, words.WHO)
        ]
        kept = self.kept
        return guess_grouping(
            {one.name: one.code[kept] for one in free},
            self.member[kept],
            self.time[kept],
            self.table.rows.block[kept],
        )

    def _readings_each(self, one: Facts) -> float:
        counts = np.bincount(one.code[self.kept], minlength=len(one.texts))
        return float(np.median(counts[counts > 0])) if counts.any() else 0.0

    def _same_throughout(self, one: Facts) -> bool:
        file = self.table.rows.file[self.kept]
        pairs = np.unique(np.column_stack((file, one.code[self.kept])), axis=0)
        files = np.unique(file).size
        return files > 1 and len(pairs) == files and file.size >= 4 * files

    def _same_partition(self, one: Facts, other: Facts) -> bool:
        pairs = np.unique(np.column_stack((one.code[self.kept], other.code[self.kept])), axis=0)
        return len(pairs) == np.unique(one.code[self.kept]).size

    def _far_off(self, odd: Bools) -> float:
        """Return how far the odd rows' median lies off the others', in standard deviations of a reading."""
        found = [0.0]
        for values in self.values:
            known = self.kept & np.isfinite(values)
            usual, rest = values[known & ~odd], values[known & odd]
            if usual.size < _FEWEST or rest.size < 3:
                continue
            middle = np.median(usual)
            sigma = 1.4826 * float(np.median(np.abs(usual - middle)))
            found.append(abs(float(np.median(rest) - middle)) / sigma if sigma > 0 else 0.0)
        return max(found)

    def _two(self, at: Ints) -> tuple[str, ...]:
        return tuple(self.table.rows.shown(row) for row in at[:2].tolist())


def _some(one: Facts) -> str:
    kinds = [kind if len(kind) <= 24 else kind[:24] + "…" for kind in one.kinds]
    return ", ".join(kinds[:4]) + (" …" if len(kinds) > 4 else "")
