"""The line reported for a key is the one it stands on, however the file is written."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass, field

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from holdsteady.project.toml_lines import KeyPath, TomlLines

_TRAPS = ["a = 1", "[table]", "# no comment", "x = [", "}", "]]", "''", "it's", ", y = 2", ""]
keys = st.one_of(
    st.from_regex(r"[A-Za-z0-9_-]{1,6}", fullmatch=True),
    st.text(st.sampled_from("ab.#=[]{} ,é"), min_size=1, max_size=5),
)
scalars = st.one_of(
    st.integers(-99, 99).map(str),
    st.sampled_from(["1.5", "true", "2026-01-05", "2026-03-17 14:10:00", "1e3", '""', "''"]),
    st.sampled_from(_TRAPS).map(lambda text: f'"{text}\\""'),
    st.lists(st.sampled_from(_TRAPS), max_size=3).map(lambda ls: '"""' + "\n".join(ls) + '\\\\""""'),
    st.lists(st.sampled_from(_TRAPS), max_size=3).map(lambda ls: "'''" + "\n".join(ls) + "'''"),
)
filling = st.sampled_from(["", " ", "\n", " # a = 1, ]\n", "\n\n  "])


@dataclass
class Written:
    """A text that grows, and the line of each key put into it."""

    text: str = ""
    lines: dict[KeyPath, int] = field(default_factory=dict)

    def key(self, path: KeyPath) -> None:
        name = str(path[-1])
        self.lines[path] = self.text.count("\n") + 1
        bare = all(c.isascii() and (c.isalnum() or c in "_-") for c in name)
        self.text += name if bare else f'"{name}"'


def write_value(draw: st.DrawFn, out: Written, path: KeyPath, depth: int) -> None:
    kind = draw(st.sampled_from(["scalar", "scalar", "array", "table"] if depth else ["scalar"]))
    if kind == "scalar":
        out.text += draw(scalars)
    elif kind == "array":
        out.text += "["
        for index in range(draw(st.integers(0, 3))):
            out.text += draw(filling)
            out.lines[(*path, index)] = out.text.count("\n") + 1
            write_value(draw, out, (*path, index), depth - 1)
            out.text += draw(filling) + ","
        out.text += draw(filling) + "]"
    else:
        out.text += "{"
        for index, name in enumerate(draw(st.lists(keys, max_size=3, unique=True))):
            out.text += ", " if index else " "
            write_pair(draw, out, path, name, depth - 1)
        out.text += " }"


def write_pair(draw: st.DrawFn, out: Written, table: KeyPath, name: str, depth: int) -> None:
    path: KeyPath = (*table, name)
    out.key(path)
    if draw(st.booleans()):
        out.text += draw(st.sampled_from([".", " . "]))
        path = (*path, draw(keys))
        out.key(path)
    out.text += draw(st.sampled_from(["=", " = ", "\t= "]))
    write_value(draw, out, path, depth)


@st.composite
def documents(draw: st.DrawFn) -> Written:
    out = Written()
    names = draw(st.lists(keys, min_size=2, max_size=8, unique=True))
    split = draw(st.integers(0, len(names)))

    def body(table: KeyPath) -> None:
        for name in draw(st.lists(keys, max_size=3, unique=True)):
            write_pair(draw, out, table, name, 2)
            out.text += draw(st.sampled_from(["\n", " # [x]\n", "\n\n"]))

    for name in names[:split]:
        write_pair(draw, out, (), name, 2)
        out.text += "\n"
    for name in names[split:]:
        if draw(st.booleans()):
            out.text += "["
            out.key((name,))
            out.text += "]\n"
            body((name,))
            continue
        for index in range(draw(st.integers(1, 3))):
            out.text += "[["
            line = out.lines.get((name,))
            out.key((name,))
            out.lines[name, index] = out.lines[(name,)]
            out.lines[(name,)] = line or out.lines[(name,)]
            out.text += "]] # item\n"
            body((name, index))
            if draw(st.booleans()) and not any(p[:3] == (name, index, "sub") for p in out.lines):
                out.text += "["
                first = out.lines[(name,)]
                out.key((name,))
                out.lines[(name,)] = first
                out.text += "."
                out.key((name, index, "sub"))
                out.text += "]\n"
                body((name, index, "sub"))
    return out


@given(documents(), st.booleans())
@settings(max_examples=200, deadline=None)
def test_each_key_is_found_on_its_line(written: Written, windows: bool) -> None:  # noqa: FBT001
    text = written.text.replace("\n", "\r\n") if windows else written.text
    tomllib.loads(text)
    lines = TomlLines(text)
    split = text.split("\n")
    for path, line in written.lines.items():
        assert lines.line(path) == line, path
        if isinstance(path[-1], str):
            assert path[-1] in split[line - 1]


@pytest.mark.parametrize(
    ("path", "line"),
    [
        (("site", "title"), 2),
        (("site", "missing"), 1),
        (("characteristic", 0, "id"), 6),
        (("characteristic", 0, "baseline", "points"), 8),
        (("characteristic", 0, "missing", "deep"), 5),
        (("characteristic", 1, "rules", 1), 14),
        (("characteristic", 1, "rules", 1, "points"), 14),
        (("characteristic", 1), 9),
        (("nowhere",), None),
    ],
)
def test_a_settings_file(path: KeyPath, line: int | None) -> None:
    text = '''[site]
title = """two
lines"""

[[characteristic]]
id = "bore"
  [characteristic.baseline]
  points = 25
[[characteristic]]
id = "wall"
rules = [
  # the usual
  "outside-limits",
  { rule = "run-one-side", points = 8 },
]
'''
    assert TomlLines(text).line(path) == line
