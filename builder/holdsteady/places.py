"""Where the files lie that travel with the code: beside it when installed, in the checkout otherwise."""

from __future__ import annotations

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent


def templates() -> Path:
    """Return the folder of page templates, styles and scripts."""
    return _locate("site_templates", "site-templates")


def sample_project() -> Path:
    """Return the folder of the sample project."""
    return _locate("sample_project", "sample-project")


def _locate(packaged: str, checkout: str) -> Path:
    for candidate in (_PACKAGE / packaged, _PACKAGE.parent.parent / checkout):
        if candidate.is_dir():
            return candidate
    raise FileNotFoundError(f"{checkout} is missing from this installation; install holdsteady again")
