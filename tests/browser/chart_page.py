"""A page with one chart and nothing else, written to a folder as a site would have it."""

from __future__ import annotations

import html
import shutil
from pathlib import Path
from zoneinfo import ZoneInfo

from tests.charts.plain_labels import PlainLabels

from holdsteady.charts.data import page_data
from holdsteady.charts.kinds import KindsScript
from holdsteady.charts.labels import Labels
from holdsteady.charts.static import static_chart
from holdsteady.monitor.finding import Finding

TEMPLATES = Path(__file__).parents[2] / "site-templates"
SCRIPTS = (
    "vendor/vega.min.js",
    "vendor/vega-interpreter.js",
    "js/rows.js",
    "js/reading.js",
    "js/frame.js",
    "js/app.js",
)
POLICY = "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self' data:"
STYLES = ("css/site.css", "css/chart.css")


def write(
    folder: Path,
    finding: Finding,
    kinds: KindsScript,
    *,
    zone: str = "Europe/Lisbon",
    labels: Labels | None = None,
    live: bool = True,
) -> Path:
    """Write the page of a finding and all it needs below a folder; return the page's path."""
    where = ZoneInfo(zone)
    labels = labels or PlainLabels(zone=where)
    assets = folder / "assets"
    (assets / "data").mkdir(parents=True, exist_ok=True)
    (folder / "characteristic").mkdir(exist_ok=True)
    for script in SCRIPTS:
        shutil.copy(TEMPLATES / script, assets / Path(script).name)
    for style in STYLES:
        shutil.copy(TEMPLATES / style, assets / Path(style).name)
    (assets / "kinds.js").write_bytes(kinds.script)
    (assets / "data" / "d.js").write_bytes(page_data(finding, where, labels))
    scripts = (*SCRIPTS, "kinds.js") if live else ()
    head = [f'<meta http-equiv="Content-Security-Policy" content="{POLICY}">']
    head += [f'<link rel="stylesheet" href="../assets/{Path(name).name}">' for name in STYLES]
    head += [f'<script defer src="../assets/{Path(name).name}"></script>' for name in scripts]
    title = html.escape(finding.title)
    asked = f'data-kind="{finding.chart}" data-id="{finding.slug}" data-src="../assets/data/d.js"'
    path = folder / "characteristic" / "page.html"
    path.write_text(
        '<!doctype html><html lang="en"><head><meta charset="utf-8">'
        f'<meta name="viewport" content="width=device-width,initial-scale=1"><title>{title}</title>'
        f'{"".join(head)}</head><body><h1>{title}</h1><figure class="chart" {asked}>'
        f"{static_chart(finding, where, labels)}<figcaption>Each point as it was measured.</figcaption>"
        "</figure></body></html>",
        encoding="utf-8",
    )
    return path
