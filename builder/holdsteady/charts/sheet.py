"""Putting marks on a static picture: places to text, names to classes, nothing to style attributes."""

from __future__ import annotations

from dataclasses import dataclass, field
from html import escape
from typing import Final, Literal

import numpy as np

from holdsteady.arrays import Bools, Floats, Ints

_LETTER: Final = 6.4  # pixels, a generous mean of a letter at 12 pixels; no font is at hand to ask
_ALL_DRAWN: Final = 2_000
Anchor = Literal["start", "end"]


def text_width(text: str) -> float:
    """Return about how wide a text is at 12 pixels."""
    return _LETTER * len(text)


def fitted(text: str, room: float) -> str:
    """Return the text, cut to a room in pixels, or '' where not even a word would fit."""
    letters = int(room / _LETTER)
    if len(text) <= letters:
        return text
    return f"{text[: letters - 1].rstrip()}…" if letters > 5 else ""


@dataclass(slots=True)
class Sheet:
    """An SVG picture being drawn, in pixels from its upper left corner."""

    width: float
    parts: list[str] = field(default_factory=list)

    def line(self, kind: str, x1: float, y1: float, x2: float, y2: float) -> None:
        """Draw a straight line."""
        self.parts.append(f'<path class="{kind}" d="M{x1:.1f} {y1:.1f}L{x2:.1f} {y2:.1f}"/>')

    def rectangle(self, kind: str, x1: float, y1: float, x2: float, y2: float) -> None:
        """Draw a filled rectangle between two corners."""
        corner = f'x="{min(x1, x2):.1f}" y="{min(y1, y2):.1f}"'
        size = f'width="{abs(x2 - x1):.1f}" height="{abs(y2 - y1):.1f}"'
        self.parts.append(f'<rect class="{kind}" {corner} {size}/>')

    def path(self, kind: str, pieces: list[tuple[Floats, Floats]], *, closed: bool = False) -> None:
        """Draw lines through points, one for each piece of (x, y)."""
        end = "Z" if closed else ""
        drawn = "".join(f"M{'L'.join(_pairs(x, y))}{end}" for x, y in pieces if len(x))
        if drawn:
            self.parts.append(f'<path class="{kind}" d="{drawn}"/>')

    def dots(self, kind: str, x: Floats, y: Floats) -> None:
        """Draw round dots as one path of strokes without length."""
        if len(x):
            drawn = "".join(f"M{pair}h0" for pair in _pairs(x, y))
            self.parts.append(f'<path class="{kind}" d="{drawn}"/>')

    def circles(self, kind: str, x: Floats, y: Floats, radius: float) -> None:
        """Draw circles one by one."""
        self.parts += [
            f'<circle class="{kind}" cx="{a:.1f}" cy="{b:.1f}" r="{radius}"/>'
            for a, b in zip(x.tolist(), y.tolist(), strict=True)
        ]

    def words(self, kind: str, x: float, y: float, text: str, *, anchor: Anchor = "start") -> None:
        """Write a text, its middle at y; it may hold anything."""
        if text:
            end = "" if anchor == "start" else ' text-anchor="end"'
            self.parts.append(f'<text class="{kind}" x="{x:.1f}" y="{y + 4:.1f}"{end}>{escape(text)}</text>')

    def svg(self, height: float) -> str:
        """Return the finished picture; what it shows is told by the page around it."""
        size = f'viewBox="0 0 {self.width:.0f} {height:.0f}" width="{self.width:.0f}" height="{height:.0f}"'
        return f'<svg class="chart-static" {size} aria-hidden="true">{"".join(self.parts)}</svg>'


def thinned(x: Floats, y: Floats, keep: Bools) -> Ints:
    """Return the indices to draw: all of up to 2,000, else first, last, lowest, highest of each two pixels.

    `x` is in pixels, rising; every point of `keep` stays. Points without a value (NaN) are not drawn.
    """
    real = np.flatnonzero(~np.isnan(y))
    if real.size <= _ALL_DRAWN:
        return real
    bucket = (x[real] // 2).astype(np.int64)
    starts = np.flatnonzero(np.append(True, np.diff(bucket) != 0))
    ends = np.append(starts[1:], real.size) - 1
    by_height = np.lexsort((y[real], bucket))
    chosen = np.concatenate([starts, ends, by_height[starts], by_height[ends], np.flatnonzero(keep[real])])
    kept: Ints = real[np.unique(chosen)]
    return kept


def _pairs(x: Floats, y: Floats) -> list[str]:
    return [f"{a:.1f} {b:.1f}" for a, b in zip(x.tolist(), y.tolist(), strict=True)]
