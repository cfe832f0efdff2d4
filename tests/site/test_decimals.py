"""How finely values are written where the settings do not say."""

from __future__ import annotations

from dataclasses import replace
from zoneinfo import ZoneInfo

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from tests.made_findings import AS_OF, finding

from holdsteady.charts.data import page_data
from holdsteady.monitor.finding import Finding
from holdsteady.project.settings import Specification
from holdsteady.site import decimals
from holdsteady.site.case_lines import case_row
from holdsteady.site.characteristic_page import characteristic_page
from holdsteady.site.labels import SiteLabels
from holdsteady.site.limits_lines import current_limits
from holdsteady.site.moments import Clock
from holdsteady.site.numbers import Scale
from holdsteady.site.remarks import wanted
from holdsteady.site.words import scale

LISBON = ZoneInfo("Europe/Lisbon")
CLOCK = Clock(zone=LISBON, now=AS_OF)


def unsaid(  # a finding whose settings name no decimals
    *, chart: str = "individuals", centre: float, sigma: float, resolution: float | None
) -> Finding:
    made = finding("x", chart=chart, title="Pressure", unit="Pa", shift=2.0, state="signalling")
    settings = made.settings.model_copy(update={"decimals": None, "specification": ()})
    location = made.panels[0]
    location = replace(
        location,
        value=centre + sigma * location.z,
        centre=np.full(90, centre),
        lower=np.full(90, centre - 3 * sigma),
        upper=np.full(90, centre + 3 * sigma),
        sigma=np.full(90, sigma),
    )
    row = replace(made.limits[0], centre=centre, lower=centre - 3 * sigma, upper=centre + 3 * sigma)
    return replace(
        made,
        settings=settings,
        resolution=resolution,
        panels=(location, *made.panels[1:]),
        limits=(row, *made.limits[1:]),
        specification=(),
    )


@pytest.mark.parametrize(
    ("step", "said"),
    [
        (1, 0),
        (0.001, 3),
        (0.25, 2),
        (0.125, 3),
        (50, 0),
        (1 / 25.4, 4),
        (0.1 + 0.2, 1),
        (2e-5, 5),
        (1e-15, 12),
    ],
)
def test_a_step_needs_so_many_decimals(step: float, said: int) -> None:
    assert decimals.of_step(step) == said


@pytest.mark.parametrize(
    ("chart", "sigma", "resolution", "said"),
    [
        ("individuals", 0.008, 0.001, 3),
        ("mean-range", 0.0036, 0.001, 4),  # a mean falls between the steps
        ("mean-sd", 0.0036, 0.001, 4),
        ("individuals", 0.8, None, 2),  # two digits of sigma
        ("individuals", 40.0, None, 0),
        ("individuals", 0.8, 1e-11, 3),  # noise of the conversion: no more than three digits of sigma
        ("individuals", 0.03, 1.0, 2),  # a gauge so coarse that its step would hide the limits
    ],
)
def test_measured_values_are_written_as_finely_as_they_are_read(
    chart: str, sigma: float, resolution: float | None, said: int
) -> None:
    made = unsaid(chart=chart, centre=12.0, sigma=sigma, resolution=resolution)
    assert decimals.of_panel(made, made.panels[0]) == said


@pytest.mark.parametrize("chart", ["c", "np", "p", "u"])
def test_what_is_counted_keeps_to_its_own_way(chart: str) -> None:
    made = finding("x", chart=chart, unit="")
    assert decimals.of_panel(made, made.panels[0]) is None
    assert Scale(statistic="count", decimals=decimals.of_panel(made, made.panels[0])).bare(7.0) == "7"


def test_settings_that_name_decimals_are_followed() -> None:
    made = finding("x", chart="mean-range")
    made = replace(made, settings=made.settings.model_copy(update={"decimals": 1}))
    assert decimals.of_panel(made, made.panels[0]) == decimals.of_reading(made) == 1


def test_large_numbers_do_not_read_alike() -> None:
    made = unsaid(centre=101_325.0, sigma=0.15, resolution=0.1)
    assert dict(current_limits(made, CLOCK))["Value"] == (
        "101\u202f324.6 – 101\u202f325.0 – 101\u202f325.4 Pa"
    )  # 101 324.55 and 101 325.45 as the nearest double lies
    value, limit = scale(made, made.panels[0]).apart(101_325.5, 101_325.46)
    assert (value, limit) == ("101\u202f325.50 Pa", "101\u202f325.46 Pa")


def test_numbers_of_four_digits_are_told_apart_too() -> None:
    rate = Scale(statistic="rate")
    assert rate.apart(101_325.4, 101_325.3) == ("101\u202f325.4", "101\u202f325.3")
    fraction = Scale(statistic="fraction")
    assert fraction.apart(0.220001, 0.219999) == ("22.0001\u202f%", "21.9999\u202f%")


@given(
    st.floats(-1e6, 1e6, allow_nan=False),
    st.floats(1e-4, 1e3),
    st.sampled_from([None, 0.001, 0.01, 0.5, 1.0, 25.0]),
    st.floats(0.001, 4),
)
def test_a_point_outside_never_reads_as_its_limit(
    centre: float, sigma: float, resolution: float | None, beyond: float
) -> None:
    made = unsaid(centre=centre, sigma=sigma, resolution=resolution)
    limit = centre + 3 * sigma
    value, said = scale(made, made.panels[0]).apart(limit + beyond * sigma, limit)
    assert value != said
    low, middle, high = (
        scale(made, made.panels[0]).bare(v) for v in (limit - 6 * sigma, limit - 3 * sigma, limit)
    )
    assert len({low, middle, high}) == 3


def test_the_live_chart_reads_with_the_same_decimals() -> None:
    made = unsaid(chart="mean-range", centre=12.0, sigma=0.0036, resolution=0.001)
    labels = SiteLabels(clock=CLOCK)
    script = page_data(made, LISBON, labels).decode()
    assert '"decimals":4' in script
    assert labels.number(made, made.panels[0], 12.00361) == "12.0036"
    assert '"upper":"12.0108"' in script


def test_what_is_wanted_is_written_as_it_was_set() -> None:
    assert decimals.of_wanted(Specification(upper=101_330.25), 1) == 2
    assert decimals.of_wanted(Specification(target=0.0, upper=0.1 + 0.2), 0) == 1
    made = unsaid(centre=10.0, sigma=0.3, resolution=0.1)
    asked = Specification(lower=9.25, target=10, upper=10.75)
    made = replace(made, specification=(asked,))
    assert wanted(made, CLOCK)[0] == ("Wanted", "9.25 to 10.75 Pa, target 10.00 Pa")
    assert SiteLabels(clock=CLOCK).wanted(made, made.panels[0], asked)[-1] == "9.25 to 10.75"


def test_a_whole_page_tells_a_point_from_its_limit() -> None:
    made = unsaid(centre=101_325.0, sigma=0.15, resolution=None)
    page = characteristic_page(made, None, (None, None), CLOCK)
    assert case_row(made, made.cases[0], CLOCK, root="").said == page.sentence.text
    assert dict(page.limits)["Value"] == "101\u202f324.55 – 101\u202f325.00 – 101\u202f325.45 Pa"
