"""Register lines that serve nothing are named."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from tests.made_readings import START, adopted, find

from holdsteady.monitor.register_use import unused

QUIET = [10.0, 11.0, 9.0, 10.0, 11.0, 9.0, 10.0, 12.0, 9.0, 10.0]


@pytest.mark.parametrize(
    ("given", "said"),
    [
        ({"characteristic": "bor"}, "these limits serve nothing: there is no characteristic 'bor'"),
        ({"chart": "mean-sd"}, "these limits of bore are for chart mean-sd; it is on individuals now"),
        ({"panel": "single"}, "these limits of bore are for a panel 'single', which its chart has not"),
        ({"era_from": START}, "these limits of bore are for an era that the logbook does not begin"),
        ({"sigma": 0.0}, "these limits of bore have no sigma above 0"),
    ],
)  # fmt: skip
def test_a_line_that_serves_nothing_is_named(given: dict[str, Any], said: str) -> None:
    line = replace(adopted(START, 10.0, 1.0, line=7), **given)
    (problem,) = unused([find(QUIET)], [line], "limits.csv")
    assert (problem.what, problem.where, problem.line) == (said, "limits.csv", 7)
    assert problem.remedy


def test_a_line_that_serves_is_not() -> None:
    assert list(unused([find(QUIET)], [adopted(START, 10.0, 1.0)], "limits.csv")) == []
