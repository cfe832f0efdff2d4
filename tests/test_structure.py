"""The house stays in order: imports go upwards only, files stay short, everything public explains itself."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
PACKAGE = ROOT / "builder" / "holdsteady"

# A module may import from its own part and from those above it in this list; parts side by side know nothing
# of each other.
ORDER: tuple[tuple[str, ...], ...] = (
    ("problems", "arrays", "times", "places", "lock", "manifest"),
    ("spc", "project"),
    ("intake",),
    ("monitor", "start"),
    ("charts",),
    ("site",),
    ("publish",),
    ("report",),
    ("build", "accounting"),
    ("console",),
    ("cli",),
    ("__main__",),
)
RANK = {part: rank for rank, parts in enumerate(ORDER) for part in parts}

# Who may use what; everything else may be used anywhere.
HOMES = {
    "altair": {"charts"},
    "vl_convert": {"charts"},
    "jinja2": {"site"},
    "markupsafe": {"site"},
    "pandas": {"intake", "monitor"},
    "pyarrow": {"intake", "site/tables", "site/points_table", "site/columns"},
    "pydantic": {"project"},
    "pydantic_core": {"project"},
    "rich": {"console", "cli"},
    "click": {"console", "cli"},
    "watchdog": set[str](),
    "scipy": {"spc", "monitor"},
}

FILES = sorted(PACKAGE.rglob("*.py"))


def part_of(module: str) -> str:
    """Return the part of the house that `holdsteady.spc.rules` belongs to: `spc`."""
    pieces = module.split(".")
    return pieces[1] if len(pieces) > 1 else "holdsteady"


def imports(path: Path) -> set[str]:
    """Return every module a file imports, at its top or late."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            assert node.module is not None
            found.add(node.module)
            if node.module == "holdsteady":
                found |= {f"holdsteady.{alias.name}" for alias in node.names}
    return found


def relative(path: Path) -> str:
    return path.relative_to(PACKAGE).with_suffix("").as_posix()


@pytest.mark.parametrize("path", FILES, ids=relative)
def test_imports_go_upwards_only(path: Path) -> None:
    own = relative(path).split("/")[0]
    if own == "__init__":
        assert not {name for name in imports(path) if name.startswith("holdsteady")}
        return
    assert own in RANK, f"{own} has no place in the order of the house"
    for name in imports(path):
        if not name.startswith("holdsteady."):
            continue
        part = part_of(name)
        if part in ("__version__", own):
            continue
        assert part in RANK, f"{path}: {name}"
        upwards = RANK[part] < RANK[own] or (RANK[own] == 0 == RANK[part])
        assert upwards, f"{relative(path)} imports {name}"


@pytest.mark.parametrize("path", FILES, ids=relative)
def test_libraries_stay_in_their_homes(path: Path) -> None:
    own = relative(path)
    for name in imports(path):
        homes = HOMES.get(name.split(".")[0])
        if homes is not None:
            assert own in homes or own.split("/")[0] in homes, f"{own} imports {name}"


def test_only_publishing_writes_in_the_published_folder() -> None:
    """Nothing that makes pages or tables writes files; the cache of compiled charts is the one exception."""
    for path in FILES:
        if relative(path).split("/")[0] not in ("spc", "project", "intake", "monitor", "site"):
            continue
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Attribute) and node.attr in (
                "write_bytes",
                "write_text",
                "rmtree",
                "unlink",
            ):
                assert relative(path) in ("site/assets",), f"{relative(path)}:{node.lineno} {node.attr}"


@pytest.mark.parametrize("path", FILES, ids=relative)
def test_files_stay_short(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) <= 400


@pytest.mark.parametrize("path", FILES, ids=relative)
def test_everything_public_explains_itself(path: Path) -> None:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    assert ast.get_docstring(tree), f"{relative(path)} has no docstring"
    for node in tree.body:
        if isinstance(node, (ast.FunctionDef, ast.ClassDef)) and not node.name.startswith("_"):
            if any(isinstance(d, ast.Name) and d.id == "overload" for d in node.decorator_list):
                continue
            assert ast.get_docstring(node), f"{relative(path)}: {node.name}"


def test_no_module_is_a_drawer_for_everything() -> None:
    assert not {path.stem for path in FILES} & {"utils", "util", "helpers", "common", "misc"}
