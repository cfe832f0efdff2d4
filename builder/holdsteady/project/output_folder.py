"""Where a site may be published to: never where it could touch the project's own files."""

from __future__ import annotations

import os
from collections.abc import Iterable
from pathlib import Path, PurePosixPath

from holdsteady.project.settings import Source

OWN = ".holdsteady"  # in the project folder: kept between builds, and deleted without a thought


def output_fault(folder: Path, sources: Iterable[Source], output: Path) -> tuple[str, str] | None:
    """Return what is wrong with an output folder, and the remedy; None when nothing is.

    The site must not lie where publishing it could touch the project: not in the project folder itself,
    nor in one that holds it or its measurement files, nor among what builds keep for themselves.
    """
    home, target = folder.resolve(), output.resolve()
    if target == home:
        return (
            "the site would be put among the project's own files",
            "Name a folder of its own, as in 'site'.",
        )
    if target.is_relative_to(os.path.realpath(home / OWN)):
        return (
            f"the output folder lies in {OWN}, which holds what need not be computed twice",
            "Name a folder of its own, as in 'site'.",
        )
    if target in home.parents:
        return "the output folder holds the project", "Name a folder below the project, as in 'site'."
    for source in sources:
        for pattern in source.files:
            inputs = Path(os.path.realpath(home / _fixed_part(pattern)))  # links may lead in a circle
            if inputs == target or target in inputs.parents:
                return (
                    f"the output folder holds the files of source '{source.id}'",
                    "Name a folder that holds no measurement files.",
                )
    return None


def _fixed_part(pattern: str) -> PurePosixPath:
    """Return the folder below which a pattern finds its files: what comes before its first wildcard."""
    folders = PurePosixPath(pattern).parts[:-1]
    wild = next((i for i, part in enumerate(folders) if any(mark in part for mark in "*?[")), len(folders))
    return PurePosixPath(*folders[:wild])
