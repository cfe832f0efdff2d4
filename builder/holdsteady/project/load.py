"""A whole project folder, read: settings, logbook and limits register."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from zoneinfo import ZoneInfo

from holdsteady.problems import Problem, SettingsError, Severity
from holdsteady.project.faults import SETTINGS_FILE
from holdsteady.project.logbook import Logbook, read_logbook
from holdsteady.project.read_settings import read_settings
from holdsteady.project.register import Register, read_register
from holdsteady.project.settings import Settings

LOGBOOK_FILE = "logbook.csv"
REGISTER_FILE = "limits.csv"


@dataclass(frozen=True, slots=True, kw_only=True)
class Project:
    """What the user wrote. `problems` are those that stop nothing: lines that could not be read."""

    folder: Path
    settings: Settings
    logbook: Logbook
    register: Register
    zone: ZoneInfo
    problems: tuple[Problem, ...]

    @property
    def output(self) -> Path:
        """The folder that the site is published to, when nothing else is asked for."""
        return self.folder / self.settings.site.output


def load_project(folder: Path) -> Project:
    """Read a project folder.

    Raises
    ------
    SettingsError
        with every problem of the settings, in the order of the file.
    """
    settings = read_settings(_text(folder), folder)
    zone = ZoneInfo(settings.site.timezone)
    logbook = read_logbook(folder / LOGBOOK_FILE, zone)
    register = read_register(folder / REGISTER_FILE, zone)
    return Project(
        folder=folder,
        settings=settings,
        logbook=logbook,
        register=register,
        zone=zone,
        problems=(*logbook.problems, *register.problems),
    )


def _text(folder: Path) -> str:
    path = folder / SETTINGS_FILE
    try:
        data = path.read_bytes()
    except FileNotFoundError:
        what = f"there is no {SETTINGS_FILE} in {folder}"
        raise _unreadable(what, f"Name a folder that has one, or run `holdsteady start {folder}`.") from None
    except OSError as error:
        raise _unreadable(f"cannot be read: {error.strerror}", "Give the right to read it.") from None
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise _unreadable("is not UTF-8", "Save the file as UTF-8.", line) from None


def _unreadable(what: str, remedy: str, line: int | None = None) -> SettingsError:
    return SettingsError(
        Problem(severity=Severity.ERROR, where=SETTINGS_FILE, what=what, remedy=remedy, line=line)
    )
