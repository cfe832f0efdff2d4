"""The strip: the last sixty points on one scale, cut short far out, thick and ringed where a case is open."""

from __future__ import annotations

import re
import xml.etree.ElementTree as ET

import numpy as np

from holdsteady.charts.strip import strip

LIMITS = (-3.0, 3.0)
NONE = float("nan")


def parts(markup: str) -> dict[str, ET.Element]:
    root = ET.fromstring(markup)
    return {element.get("class", element.tag): element for element in root.iter()}


def needles(element: ET.Element) -> list[tuple[float, float, float]]:
    found = re.findall(r"M([\d.]+) ([\d.]+)V([\d.]+)", element.get("d", ""))
    return [(float(x), float(middle), float(tip)) for x, middle, tip in found]


def test_the_last_sixty_points_are_drawn_on_one_scale() -> None:
    z = np.linspace(-3.0, 3.0, 100)
    drawn = needles(
        parts(strip(z, np.zeros(100, dtype=np.bool_), limits=LIMITS, title="t", height=24))["needles"]
    )
    assert len(drawn) == 60
    # 9.5 pixels for 4.5 sigma: a point at +3 sigma ends on the upper dotted line.
    assert drawn[-1][2] == round(12 - 3 * 9.5 / 4.5, 1)
    limit = parts(strip(z, z > 9, limits=LIMITS, title="t", height=24))["limit"].get("d", "")
    assert f"M0 {drawn[-1][2]}H210" in limit


def test_far_values_are_cut_and_missing_ones_left_out() -> None:
    z = np.array([50.0, np.nan, -50.0])
    drawn = needles(
        parts(strip(z, np.zeros(3, dtype=np.bool_), limits=LIMITS, title="t", height=24))["needles"]
    )
    assert [tip for _, _, tip in drawn] == [2.5, 21.5]
    assert [x for x, _, _ in drawn] == [1.8, 8.8]  # the missing one's place stays empty


def test_an_open_case_is_thick_and_its_farthest_point_ringed() -> None:
    z = np.array([0.1, -1.0, -4.0, -2.0])
    drawn = parts(strip(z, np.array([False, True, True, True]), limits=LIMITS, title="t"))
    assert len(needles(drawn["needles open"])) == 3
    assert len(needles(drawn["needles"])) == 1
    assert float(drawn["ring"].get("cx", "0")) == needles(drawn["needles open"])[1][0]
    assert "ring" not in parts(strip(z, np.zeros(4, dtype=np.bool_), limits=LIMITS, title="t"))


def test_nothing_at_all_is_an_empty_strip_with_its_text() -> None:
    for z in (np.zeros(0), np.full(5, np.nan)):
        drawn = parts(strip(z, np.ones(len(z), dtype=np.bool_), limits=LIMITS, title="<b>Bore</b> & more"))
        assert drawn["title"].text == "<b>Bore</b> & more"
        assert needles(drawn["needles"]) == []
        assert "ring" not in drawn


def test_dotted_lines_stand_at_the_limits_and_nowhere_else() -> None:
    z, none = np.array([0.5, 2.6]), np.zeros(2, dtype=np.bool_)

    def dotted(lower: float, upper: float) -> list[float]:
        drawn = parts(strip(z, none, limits=(lower, upper), title="t", height=24)).get("limit")
        return [] if drawn is None else [float(y) for y in re.findall(r"M0 ([\d.]+)H", drawn.get("d", ""))]

    assert dotted(-2.5, 2.5) == [round(12 + 2.5 * 9.5 / 4.5, 1), round(12 - 2.5 * 9.5 / 4.5, 1)]
    assert dotted(NONE, 3.69) == [round(12 - 3.69 * 9.5 / 4.5, 1)]
    assert dotted(NONE, NONE) == []
    assert dotted(-9.0, 9.0) == [21.5, 2.5]  # beyond reach, at the edge
