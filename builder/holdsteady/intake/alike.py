"""Files of a source that begin alike: what one of them showed holds for the others."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

from holdsteady.intake.demand import Demand
from holdsteady.intake.dialect import DELIMITERS, Layout, detect
from holdsteady.intake.lines import split_cells
from holdsteady.intake.numbers import MarkEvidence, evidence
from holdsteady.intake.scale import scale_of

_MOST_KNOWN = 8
_LONGEST_HEAD = 16_384
_SAMPLE = 65_536
_ROWS_FOR_MARK = (2, 20, 200)  # more of them while they prove nothing


@dataclass(slots=True)
class Layouts:
    """Finds how files are laid out, looking closely only at the first of those that begin alike."""

    demand: Demand
    _known: dict[bytes, Layout] = field(default_factory=dict)
    _scales: dict[str, float | None] = field(init=False)

    def __post_init__(self) -> None:
        self._scales = {name: scale_of(name, self.demand) for name in self.demand.numbers}

    def of(self, data: bytes) -> Layout | None:
        """Return the layout of a file's text; None where there is no line with text."""
        for head, layout in tuple(self._known.items()):
            if data.startswith(head):
                return replace(layout, marks=self._marks(data, layout))
        found = detect(data, self.demand)
        if found is not None and len(self._known) < _MOST_KNOWN and self._is_settled(data, found):
            self._known[data[: found.offset]] = found
        return found

    def _is_settled(self, data: bytes, layout: Layout) -> bool:
        """Whether nothing below the header had a say in what was found."""
        head = data[: layout.offset]
        others = [one for one in DELIMITERS if one != layout.delimiter]
        return (
            len(head) <= _LONGEST_HEAD
            and head.endswith((b"\n", b"\r\n"))
            and not layout.missing
            and not layout.twice
            and len(self.demand.columns) > 1
            and not any(one.encode() in head for one in others)
            and (layout.header_line == 1 or b'"' not in head)
        )

    def _marks(self, data: bytes, layout: Layout) -> MarkEvidence:
        found = MarkEvidence()
        start, seen = layout.offset, 0
        stop = min(len(data), start + _SAMPLE)
        for most in _ROWS_FOR_MARK:
            rows = []
            while seen < most and start < stop:
                end = data.find(b"\n", start)
                end = len(data) if end < 0 else end
                line = data[start:end].decode("utf-8", "replace").rstrip("\r")
                rows.append(split_cells(line, layout.delimiter)[0])
                start, seen = end + 1, seen + 1
            for name, scale in self._scales.items():
                place = layout.position[name]
                found += evidence((row[place].strip() for row in rows if place < len(row)), scale)
                if found.dot or found.comma:
                    return found
        return found
