"""The last points of a chart as needles from the centre, on a scale that all charts share."""

from __future__ import annotations

from html import escape
from typing import Final

import numpy as np

from holdsteady.arrays import Bools, Floats

POINTS: Final = 60
_REACH: Final = 4.5  # sigmas at which a needle is cut short
_MARGIN: Final = 2.5  # pixels that keep the ring of a longest needle inside


def strip(
    z: Floats,
    in_open_case: Bools,
    *,
    limits: tuple[float, float],
    title: str,
    width: int = 210,
    height: int = 24,
) -> str:
    """Return the strip as inline SVG, themed by classes alone.

    Parameters
    ----------
    z : (N,) array
        Distance from the centre in sigmas of the plotted statistic, oldest first; NaN where there is none.
        Of more than 60 points the last 60 are drawn, of fewer the rest stays empty on the right.
    in_open_case : (N,) array
        Which points are part of an open case: drawn thick, the farthest of them ringed.
    limits : (lower, upper)
        Where the dotted lines stand, in sigmas from the centre; NaN for none.
    title : str
        What a reader who cannot see it is told; escaped here.
    width, height : int
        In pixels; charts drawn at one height share one scale.
    """
    shown = z[-POINTS:]
    open_part = in_open_case[-POINTS:]
    middle = height / 2
    unit = (middle - _MARGIN) / _REACH
    x: Floats = (np.arange(shown.size, dtype=np.float64) + 0.5) * (width / POINTS)
    tip = np.asarray(middle - np.clip(shown, -_REACH, _REACH) * unit, dtype=np.float64)
    real = ~np.isnan(shown)
    lines = (middle - min(max(limit, -_REACH), _REACH) * unit for limit in limits if not np.isnan(limit))
    dotted = "".join(f"M0 {line:.1f}H{width}" for line in lines)
    parts = (
        f'<path class="limit" d="{dotted}"/>' if dotted else "",
        f'<path class="centre" d="M0 {middle:.1f}H{width}"/>',
        f'<path class="needles" d="{_needles(x, tip, middle, real & ~open_part)}"/>',
        f'<path class="needles open" d="{_needles(x, tip, middle, real & open_part)}"/>',
        _ring(x, tip, np.abs(shown), real & open_part),
    )
    size = f'width="{width}" height="{height}" viewBox="0 0 {width} {height}"'
    return f'<svg class="strip" {size} role="img"><title>{escape(title)}</title>{"".join(parts)}</svg>'


def _needles(x: Floats, tip: Floats, middle: float, part: Bools) -> str:
    return "".join(
        f"M{a:.1f} {middle:.1f}V{b:.1f}" for a, b in zip(x[part].tolist(), tip[part].tolist(), strict=True)
    )


def _ring(x: Floats, tip: Floats, distance: Floats, part: Bools) -> str:
    if not part.any():
        return ""
    farthest = int(np.argmax(np.where(part, distance, -1.0)))
    return f'<circle class="ring" cx="{x[farthest]:.1f}" cy="{tip[farthest]:.1f}" r="2.5"/>'
