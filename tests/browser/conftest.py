"""One browser for all tests that open pages; they are skipped, and say so, where there is none."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from tests.browser.browser import Browser, Page, find_chromium


@pytest.fixture(scope="session")
def browser() -> Iterator[Browser]:
    chromium = find_chromium()
    if chromium is None:
        pytest.skip("no Chromium: set CHROMIUM or put one on PATH")
    with Browser(chromium) as running:
        yield running


@pytest.fixture
def page(browser: Browser) -> Iterator[Page]:
    opened = browser.page()
    yield opened
    opened.close()
