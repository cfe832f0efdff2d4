"""What all tests share."""

from __future__ import annotations

import sys
from collections.abc import Iterator

import pytest
from tests.small_project import CACHE


@pytest.fixture(scope="session", autouse=True)
def one_cache_of_compiled_charts() -> Iterator[None]:
    """Let all projects of the tests share one cache: compiling charts takes seconds and has its own tests."""
    patch = pytest.MonkeyPatch()
    if build := sys.modules.get(
        "holdsteady.build"
    ):  # where no test of this run builds, it need not be loaded
        patch.setattr(build, "CACHE", str(CACHE))  # an absolute path, so it replaces the project's own
    yield
    patch.undo()
