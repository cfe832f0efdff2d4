"""Lines of the limits register that no characteristic can use, so that none vanishes without a word."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from holdsteady.monitor.finding import Finding
from holdsteady.problems import Problem, Severity
from holdsteady.project.register import RegisterLine


def unused(findings: Sequence[Finding], register: Sequence[RegisterLine], file: str) -> Iterator[Problem]:
    """Yield a problem for each line that matches no characteristic, chart, panel or era, with the remedy.

    Nothing is said of characteristics that are not computed: their lines wait for them.
    """
    by_name = {finding.name: finding for finding in findings}
    waiting = {finding.settings.id for finding in findings if finding.points is None}
    for line in register:
        finding = by_name.get(line.characteristic)
        if finding is None and line.characteristic.partition("[")[0] in waiting:
            continue
        fault = _fault(line, finding)
        if fault is not None:
            what, remedy = fault
            yield Problem(severity=Severity.WARNING, where=file, line=line.line, what=what, remedy=remedy)


def _fault(line: RegisterLine, finding: Finding | None) -> tuple[str, str] | None:
    if finding is None:
        what = f"these limits serve nothing: there is no characteristic {line.characteristic!r}"
        return what, "Where it was renamed, adopt limits for the new name."
    if finding.points is None:
        return None
    what, remedy = f"these limits of {line.characteristic}", "Adopt its limits anew."
    if line.chart != finding.chart:
        what = f"{what} are for chart {line.chart}; it is on {finding.chart} now"
        remedy = "Adopt limits for the new chart, or set `chart` back."
    elif line.panel not in {panel.name for panel in finding.panels}:
        what = f"{what} are for a panel {line.panel!r}, which its chart has not"
    elif line.panel != "single" and not (line.sigma and line.sigma > 0):
        what = f"{what} have no sigma above 0"
    elif line.era_from not in {era.from_time for era in finding.eras}:
        what = f"{what} are for an era that the logbook does not begin"
        remedy = "Write the process change with its old moment into the logbook, or adopt limits anew."
    else:
        return None
    return what, remedy
