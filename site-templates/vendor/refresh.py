"""Fetch the scripts that charts run on, pinned, and check them against their digests.

`python refresh.py` checks what lies beside this file and needs no network. `python refresh.py --fetch`
takes the pinned versions from npm, rewrites the files and their digests; look at the difference before
keeping it.

The interpreter is published as a module alone, and modules do not run from `file://`: its one import and
its one export are replaced here by the names that Vega's own script already gives the page.
"""

from __future__ import annotations

import argparse
import hashlib
import re
import subprocess
import sys
import tempfile
from pathlib import Path

HERE = Path(__file__).parent
DIGESTS = HERE / "sha256.txt"
VEGA = "vega@6.4.0"
INTERPRETER = "vega-interpreter@2.3.2"
_IMPORT = re.compile(r"^import \{ ([\w, ]+) \} from 'vega-util';\n")
_EXPORT = re.compile(r"\nexport \{ expression as expressionInterpreter \};\n(//# sourceMappingURL=.*\n?)?$")


def installed(folder: Path) -> Path:
    """Return the folder of packages, with everything that Vega's script holds of others."""
    subprocess.run(  # noqa: S603  the packages are the constants above
        ["npm", "install", "--silent", "--ignore-scripts", "--no-audit", "--no-fund", VEGA, INTERPRETER],  # noqa: S607  found on PATH as any npm call is
        cwd=folder, check=True,
    )  # fmt: skip
    return folder / "node_modules"


def licences(packages: Path) -> str:
    """Return the licences of the packages that Vega's script is bundled from, each text once.

    A package without one is not published: someone has to look at it first.
    """
    named: dict[str, list[str]] = {}
    for package in _bundled(packages):
        found = sorted(package.glob("LICEN[CS]E*"))
        if not found:
            sys.exit(f"{package.name} has no licence text: find out whether its code may be passed on.")
        named.setdefault(found[0].read_text(encoding="utf-8").strip(), []).append(package.name)
    return "\n".join(f"{', '.join(names)}\n\n{text}\n\n{'-' * 78}\n" for text, names in named.items())


def _bundled(packages: Path) -> list[Path]:
    """Return the folders of packages in order, those of a scope too; descriptions of types hold no code."""
    folders = [folder for folder in sorted(packages.iterdir()) if folder.is_dir() and folder.name[0] != "."]
    scoped = [inner for folder in folders if folder.name[0] == "@" for inner in sorted(folder.iterdir())]
    plain = [folder for folder in folders if folder.name[0] != "@"]
    return plain + [folder for folder in scoped if folder.parent.name != "@types"]


def as_classic(module: str) -> str:
    """Return the interpreter's module as a classic script that adds itself to `vega`."""
    body, imports = _IMPORT.subn(lambda m: f"const {{ {m[1]} }} = vega;\n", module, count=1)
    body, exports = _EXPORT.subn("\nvega.expressionInterpreter = expression;\n", body)
    if (imports, exports) != (1, 1):
        sys.exit("The interpreter's import or export no longer reads as expected: see as_classic.")
    head = f"/* {INTERPRETER}, wrapped as a classic script; licence in LICENSE-vega.txt */\n"
    return head + '(function () {\n"use strict";\n' + body + "})();\n"


def fetch() -> None:
    """Write the pinned scripts, their licences and their digests."""
    with tempfile.TemporaryDirectory() as folder:
        packages = installed(Path(folder))
        module = (packages / "vega-interpreter/build/vega-interpreter.js").read_text(encoding="utf-8")
        files = {
            "vega.min.js": (packages / "vega/build/vega.min.js").read_bytes(),
            "vega-interpreter.js": as_classic(module).encode("utf-8"),
            "LICENSE-vega.txt": licences(packages).encode("utf-8"),
        }
    for name, content in files.items():
        (HERE / name).write_bytes(content)
    lines = [f"{hashlib.sha256(content).hexdigest()}  {name}\n" for name, content in sorted(files.items())]
    DIGESTS.write_text("".join(lines), encoding="ascii")


def differences(folder: Path = HERE) -> list[str]:
    """Return the names of files that are missing or not as their digests say."""
    wrong = []
    for line in (folder / DIGESTS.name).read_text(encoding="ascii").splitlines():
        digest, name = line.split("  ")
        path = folder / name
        if not path.is_file() or hashlib.sha256(path.read_bytes()).hexdigest() != digest:
            wrong.append(name)
    return wrong


def main() -> int:
    """Fetch when asked, then check."""
    parser = argparse.ArgumentParser(description=(__doc__ or "").splitlines()[0])
    parser.add_argument("--fetch", action="store_true", help="take the pinned versions from npm first")
    if parser.parse_args().fetch:
        fetch()
    wrong = differences()
    sys.stderr.write("".join(f"{name}: missing or changed\n" for name in wrong) or "all as pinned\n")
    return 1 if wrong else 0


if __name__ == "__main__":
    raise SystemExit(main())
