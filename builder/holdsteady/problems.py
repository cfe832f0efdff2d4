"""What can go wrong, said so that a person can act on it: one line of problem, one of remedy."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Severity(StrEnum):
    """How far a problem reaches."""

    ERROR = "error"  # nothing can be published
    WARNING = "warning"  # something is left out, the rest stands
    NOTE = "note"  # worth knowing


@dataclass(frozen=True, slots=True, kw_only=True)
class Problem:
    """One thing that is wrong, where, and what to do about it.

    `where` is a file below the project folder or a key path of the settings; `line` counts from 1.
    """

    severity: Severity
    where: str
    what: str
    remedy: str
    line: int | None = None

    def __str__(self) -> str:
        place = self.where if self.line is None else f"{self.where}:{self.line}"
        return f"{place}: {self.what}"


class HoldsteadyError(Exception):
    """Root of every error raised on purpose; carries all problems found, not only the first."""

    exit_code = 2

    def __init__(self, *problems: Problem) -> None:
        super().__init__("\n".join(str(p) for p in problems))
        self.problems = problems


class SettingsError(HoldsteadyError):
    """The settings cannot be used; nothing was published."""


class RefusedFolderError(HoldsteadyError):
    """The output folder holds files that no build of ours published."""


class SiteBusyError(HoldsteadyError):
    """Another build holds the site."""

    exit_code = 4


class PublishError(HoldsteadyError):
    """The site could not be written; the one before still stands."""

    exit_code = 5
