"""Spans of time as people write them: `30m`, `8h`, `14d`, `2w`."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any, Self

from pydantic import GetCoreSchemaHandler
from pydantic_core import core_schema

_UNITS = {"s": 1, "m": 60, "h": 3_600, "d": 86_400, "w": 604_800}
_FORM = re.compile(r"([0-9]+(?:\.[0-9]+)?)\s*([smhdw])")
_ALLOWED = "must be a span of time: a number above 0 and one of s, m, h, d, w, as in '8h'"


@dataclass(frozen=True, slots=True)
class Duration:
    """A span of time, kept as it was written. A day is 24 hours."""

    text: str

    def __post_init__(self) -> None:
        match = _FORM.fullmatch(self.text.strip())
        if match is None or float(match[1]) == 0:
            raise ValueError(_ALLOWED)

    @property
    def microseconds(self) -> int:
        """The span in microseconds."""
        text = self.text.strip()
        return round(float(text[:-1]) * _UNITS[text[-1]] * 1_000_000)

    @classmethod
    def __get_pydantic_core_schema__(
        cls, source: type[Any], handler: GetCoreSchemaHandler
    ) -> core_schema.CoreSchema:
        """Let pydantic build one from the text in the settings."""
        return core_schema.no_info_plain_validator_function(cls._from_settings)

    @classmethod
    def _from_settings(cls, value: object) -> Self:
        if isinstance(value, cls):
            return value
        if isinstance(value, str):
            return cls(value)
        raise ValueError(_ALLOWED)
