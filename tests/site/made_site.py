"""A whole site made from findings by hand, and a reader of its pages."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field
from html.parser import HTMLParser

from tests.made_findings import AS_OF, ENTRY, HOUR, all_findings
from tests.small_project import CACHE

from holdsteady.intake.readings import FileAccount, Intake, SetAside
from holdsteady.monitor.finding import Finding
from holdsteady.problems import Problem, Severity
from holdsteady.project.settings import Site
from holdsteady.site.render import render
from holdsteady.site.view import SiteView

HOSTILE = "</script><img src=x onerror=alert(1)>\"' onmouseover='alert(2)"
_APART = {"dt", "dd", "td", "th", "p", "li", "h1", "h2", "h3", "div", "figcaption", "code"}
_VOID = {
    "meta", "link", "br", "col", "img", "input", "hr", "path", "circle", "rect", "line", "use", "polyline",
}  # fmt: skip


def file_account(file: str, *, source: str = "press", set_aside: int = 0) -> FileAccount:
    """One file of 450 rows."""
    return FileAccount(
        file=file,
        source=source,
        bytes=9_000,
        rows=450,
        used=450 - set_aside,
        filtered=0,
        repeated=0,
        corrected=0,
        set_aside=set_aside,
        encoding="utf-8",
        delimiter=";",
        decimal=",",
        time_format="%d.%m.%Y %H:%M:%S",
        first_time=AS_OF - 180 * HOUR,
        last_time=AS_OF,
    )


def made_intake(*, files: int = 3) -> Intake:
    """Some files, one with rows set aside, whose text and name try to break out."""
    accounts = [file_account(f"press/p{i:03d}.csv") for i in range(files - 1)]
    accounts.append(file_account(f"press/{HOSTILE}.csv", set_aside=2))
    return Intake(
        readings={},
        files=tuple(accounts),
        set_aside=tuple(
            SetAside(
                file=f"press/{HOSTILE}.csv", line=line, column="bore_mm", reason="not a number", text=HOSTILE
            )
            for line in (12, 13)
        ),
        problems=(
            Problem(
                severity=Severity.WARNING, where="press/p0.csv", line=3, what=HOSTILE, remedy="Look at it."
            ),
        ),
        censored={},
    )


def made_view(**extra: object) -> SiteView:
    """The view of a site in Lisbon, as of the end of its data."""
    given: dict[str, object] = {
        "settings": Site(title="Osmire Filterworks", timezone="Europe/Lisbon", footer=f"Quality {HOSTILE}"),
        "as_of": AS_OF,
        "data_until": AS_OF,
        "register_check": "ab" * 32,
        "unmatched": (ENTRY,),
    }
    return SiteView(**(given | extra))  # type: ignore[arg-type]


def made_site(findings: Sequence[Finding] | None = None, **extra: object) -> dict[str, bytes]:
    """Render everything."""
    return render(
        all_findings() if findings is None else findings, made_intake(), made_view(**extra), cache=CACHE
    )


@dataclass
class Element:
    """One element with its attributes and all text below it."""

    tag: str
    attributes: dict[str, str]
    parts: list[str] = field(default_factory=list)

    @property
    def text(self) -> str:
        """The text as a reader sees it, blanks folded."""
        return re.sub(r"[ \n]+", " ", "".join(self.parts)).strip()


class Reader(HTMLParser):
    """Reads a page into a flat list of elements."""

    def __init__(self, content: bytes) -> None:
        super().__init__(convert_charrefs=True)
        self.elements: list[Element] = []
        self._open: list[Element] = []
        self.feed(content.decode("utf-8"))
        assert not self._open, f"never closed: {[e.tag for e in self._open]}"

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        element = Element(tag, {name: value or "" for name, value in attrs})
        self.elements.append(element)
        if tag not in _VOID:
            self._open.append(element)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append(Element(tag, {name: value or "" for name, value in attrs}))

    def handle_endtag(self, tag: str) -> None:
        if tag not in _VOID:
            assert self._open[-1].tag == tag, f"<{self._open[-1].tag}> closed by </{tag}>"
            self._open.pop()
            if tag in _APART:
                self.handle_data(" ")

    def handle_data(self, data: str) -> None:
        for element in self._open:
            element.parts.append(data)

    def all(self, tag: str, **attributes: str) -> list[Element]:
        """Every element of a tag with these attributes; `class_` asks for one of several classes."""
        wanted = {name.rstrip("_").replace("_", "-"): value for name, value in attributes.items()}

        def fits(element: Element) -> bool:
            return all(
                value in element.attributes.get(name, "").split()
                if name == "class"
                else element.attributes.get(name) == value
                for name, value in wanted.items()
            )

        return [element for element in self.elements if element.tag == tag and fits(element)]

    def one(self, tag: str, **attributes: str) -> Element:
        """The only such element."""
        (element,) = self.all(tag, **attributes)
        return element
