"""What the pages say of the project as a whole, beside its findings."""

from __future__ import annotations

from dataclasses import dataclass, field
from zoneinfo import ZoneInfo

from holdsteady.monitor.arrivals import Arrivals
from holdsteady.problems import Problem
from holdsteady.project.logbook import LogbookEntry
from holdsteady.project.settings import Site


@dataclass(frozen=True, slots=True, kw_only=True)
class SiteView:
    """The project as its pages show it.

    Attributes
    ----------
    settings: `[site]` of the settings.
    as_of: the moment the build stands at, microseconds UTC.
    data_until: time of the newest reading, microseconds UTC; None where no source has times.
    problems: everything that was found wrong and did not stop the build.
    register_check: the newest `check` of the limits register, "" without one.
    unmatched: logbook lines that match no characteristic, gauge or case.
    ahead: logbook lines entered after `as_of`, which have no effect yet, where the clock decides.
    arrivals: members of `each` that are new or have gone, and what is late.
    """

    settings: Site
    as_of: int
    data_until: int | None
    problems: tuple[Problem, ...] = ()
    register_check: str = ""
    unmatched: tuple[LogbookEntry, ...] = ()
    ahead: tuple[LogbookEntry, ...] = ()
    arrivals: Arrivals = field(default_factory=Arrivals)

    @property
    def zone(self) -> ZoneInfo:
        """The zone in which every time on the pages is written."""
        return ZoneInfo(self.settings.timezone)
