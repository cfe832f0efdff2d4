"""Small project folders written for one test, and what reading them gives."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any
from zoneinfo import ZoneInfo

from holdsteady.intake.read import read
from holdsteady.intake.readings import FileAccount, Intake
from holdsteady.project.settings import Settings

AS_OF = 1_767_225_600_000_000  # 2026-01-01T00:00Z
STAMPED: dict[str, Any] = {"id": "s", "files": ("*.csv",), "time": "stamp"}
PLAIN: dict[str, Any] = {"id": "s", "files": ("*.csv",)}
ONE: dict[str, Any] = {"id": "c", "source": "s", "value": "v"}


def settings_of(*characteristics: Mapping[str, Any], source: Mapping[str, Any] = STAMPED) -> Settings:
    return Settings.model_validate({"source": (source,), "characteristic": characteristics or (ONE,)})


def write(folder: Path, files: Mapping[str, str | bytes]) -> None:
    for name, content in files.items():
        path = folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_bytes(content.encode() if isinstance(content, str) else content)


def take_in(
    folder: Path,
    files: Mapping[str, str | bytes],
    settings: Settings | None = None,
    *,
    zone: str = "UTC",
    as_of: int = AS_OF,
) -> Intake:
    write(folder, files)
    return read(folder, settings or settings_of(), as_of=as_of, zone=ZoneInfo(zone))


def outcome(account: FileAccount) -> tuple[int, int, int, int]:
    """Rows, used, filtered, set aside."""
    assert account.repeated == account.corrected == 0
    return account.rows, account.used, account.filtered, account.set_aside


def adds_up(intake: Intake) -> None:
    for one in intake.files:
        assert one.rows == one.used + one.filtered + one.repeated + one.corrected + one.set_aside, one
        assert min(one.used, one.filtered, one.set_aside) >= 0, one
