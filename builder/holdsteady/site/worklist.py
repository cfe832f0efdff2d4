"""Who needs someone first: the order of open cases in visible tiers, and of characteristics."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from holdsteady.monitor.finding import Case, Finding
from holdsteady.site.numbers import counted, spelled
from holdsteady.site.sentences import open_cases
from holdsteady.site.words import STATE_ORDER

_CAUTIOUS = ("safety", "regulatory")
_ATTENTION = ("signalling", "not-computed")


@dataclass(frozen=True, slots=True)
class Work:
    """A characteristic with an open case, the most urgent one, and its further open cases in that order."""

    finding: Finding
    case: Case
    further: tuple[Case, ...] = ()


@dataclass(frozen=True, slots=True)
class Tier:
    """Characteristics that stand together, and the words that say why."""

    title: str
    work: tuple[Work, ...]


def tiers(findings: Sequence[Finding]) -> tuple[Tier, ...]:
    """Sort what has an open case into tiers, the most urgent first; those of the good way come last, apart.

    A characteristic stands once, where its most urgent case does.
    """
    titles = {
        0: "First: ongoing, with safety, a regulation or the specification concerned",
        1: "Ongoing",
        2: "Over again, still without a reason",
        3: "The good way: worth keeping, if someone finds out why",
    }
    everything = [Work(f, c[0], c[1:]) for f in findings if (c := by_urgency(f))]
    sorted_work = sorted(everything, key=_urgency)
    groups = {number: tuple(w for w in sorted_work if _tier(w) == number) for number in titles}
    return tuple(Tier(titles[number], work) for number, work in groups.items() if work)


def by_urgency(finding: Finding) -> tuple[Case, ...]:
    """Return a characteristic's open cases, the most urgent first."""

    def key(case: Case) -> tuple[int, bool, float, int, str]:
        size = abs(case.shift_sigma or 0)
        tier = _tier(Work(finding, case))
        return tier, not case.outside_specification, -size, -case.fired_index, case.id

    return tuple(sorted(open_cases(finding), key=key))


def why(work: Work) -> str:
    """Return why a case stands where it does: 'Class safety. Ongoing, 18 points.'."""
    finding, case = work.finding, work.case
    said = [f"Class {finding.settings.class_}."] if finding.settings.class_ else []
    count = len(case.signals)
    points = case.last_index - case.first_index + 1
    span = "one point" if points == 1 else f"{spelled(points)} points"
    said.append(f"Ongoing, {span}." if case.ongoing else f"Over again; {span}.")
    if case.outside_specification:
        said.append(
            f"{case.outside_specification} of {counted(case.readings, 'reading')} outside specification."
        )
    elif case.outside_specification == 0:
        said.append("No reading outside specification.")
    if count > 1:
        said.append(f"{spelled(count).capitalize()} signals.")
    if case.state == "open" and case.gross and _in_baseline(work):
        said.append("Inside the baseline of its own limits, but gross.")
    return " ".join(said)


def cautious(finding: Finding) -> bool:
    """Whether the characteristic's class brings the caution onto its page."""
    return finding.settings.class_.strip().lower() in _CAUTIOUS


def by_attention(findings: Sequence[Finding]) -> list[tuple[str, list[Finding]]]:
    """Group characteristics by area: areas that need someone first, then within each by state and title."""
    rank = {state: position for position, state in enumerate(STATE_ORDER)}
    areas: dict[str, list[Finding]] = {}
    for finding in sorted(findings, key=lambda f: (rank[f.state], _good_way(f), f.title.casefold(), f.name)):
        areas.setdefault(finding.settings.area, []).append(finding)
    return sorted(
        areas.items(), key=lambda item: (_need(item[1]), item[0] == "", item[0].casefold(), item[0])
    )


def _need(findings: Sequence[Finding]) -> int:
    wanting = [_ATTENTION.index(f.state) for f in findings if f.state in _ATTENTION and not _good_way(f)]
    return min(wanting, default=len(_ATTENTION))


def _good_way(finding: Finding) -> bool:
    cases = open_cases(finding)
    return bool(cases) and all(case.good_way for case in cases)


def _tier(work: Work) -> int:
    if work.case.good_way:
        return 3
    if not work.case.ongoing:
        return 2
    return 0 if cautious(work.finding) or work.case.outside_specification else 1


def _urgency(work: Work) -> tuple[bool, bool, float, str, str, str]:
    case = work.case
    return (
        not cautious(work.finding), not case.outside_specification, -abs(case.shift_sigma or 0),
        work.finding.title.casefold(), work.finding.name, case.id,
    )  # fmt: skip


def _in_baseline(work: Work) -> bool:
    panel = next(p for p in work.finding.panels if p.name == work.case.panel)
    span = slice(work.case.first_index, work.case.last_index + 1)
    return bool(panel.in_baseline[span].all())
