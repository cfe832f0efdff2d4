"""Set up everything the tests need, and run them: `python3 tests/run.py`.

Plain Python from 3.11 on is enough. The tests get an environment of their own in `.venv`, and a Chromium:
the one that CHROMIUM names or PATH holds, else Debian's where this may be installed. Where there is none,
the tests in a browser are named as not run; with `--require-browser`, or CI=true, that is a failure.
"""

# ruff: noqa: T201  this script speaks to a person

from __future__ import annotations

import argparse
import hashlib
import os
import shutil
import subprocess
import sys
import tempfile
import venv
import xml.etree.ElementTree as ET
from collections.abc import Sequence
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
ENVIRONMENT = ROOT / ".venv"
NAMES = ("chromium", "chromium-browser", "google-chrome", "google-chrome-stable", "chrome", "msedge")
BROWSER_TESTS = "tests.browser"


def main() -> int:
    """Set up, check, test; return 0 only where everything passed."""
    parser = argparse.ArgumentParser(description="Set up and run the tests of holdsteady.")
    parser.add_argument("--require-browser", action="store_true", help="fail unless the browser tests ran")
    parser.add_argument("pytest_arguments", nargs="*", help="handed on to pytest, after --")
    options = parser.parse_args()
    if sys.version_info < (3, 11):  # noqa: UP036  said here, before anything fails less plainly
        print("holdsteady needs Python 3.11 or newer; this is", sys.version.split()[0], file=sys.stderr)
        return 2
    python = environment()
    chromium = find_chromium()
    if chromium is None and install("chromium"):
        chromium = find_chromium()
    failed = [name for name, command in checks(python) if not passed(name, command)]
    tests, summary, missed = pytest(python, chromium, options.pytest_arguments)
    if tests != 0:
        failed.append("pytest")
    if missed:
        print(f"Not run, for want of a browser or otherwise: {missed}")
        if options.require_browser or os.environ.get("CI", "").lower() in ("1", "true"):
            failed.append("the tests in a browser, which are required here,")
    print(f"Failed: {', '.join(failed)}" if failed else "Everything passed.")
    print(summary)
    return 1 if failed else 0


def environment() -> Path:
    """Return the interpreter of the tests' own environment, made or brought up to date first."""
    python = ENVIRONMENT / ("Scripts/python.exe" if os.name == "nt" else "bin/python")
    stamp = ENVIRONMENT / "holdsteady-requirements"
    digest = hashlib.sha256((ROOT / "pyproject.toml").read_bytes() + sys.version.encode()).hexdigest()
    if python.exists() and stamp.exists() and stamp.read_text() == digest:
        return python
    say("Setting up the environment in .venv")
    if not python.exists():
        make_environment()
    command = [str(python), "-m", "pip", "install", "--quiet", "--disable-pip-version-check", "-e", ".[test]"]
    subprocess.run(command, cwd=ROOT, check=True)
    stamp.write_text(digest)
    return python


def make_environment() -> None:
    """Make `.venv`; Debian keeps what that needs in a package of its own."""
    try:
        venv.EnvBuilder(with_pip=True).create(ENVIRONMENT)
    except subprocess.CalledProcessError:
        if not install("python3-venv"):
            sys.exit("Python cannot make virtual environments here: install the package python3-venv.")
        venv.EnvBuilder(with_pip=True, clear=True).create(ENVIRONMENT)


def find_chromium() -> str | None:
    """Return the path of a Chromium."""
    named = os.environ.get("CHROMIUM")
    if named:
        return shutil.which(named)
    return next((path for name in NAMES if (path := shutil.which(name))), None)


def install(package: str) -> bool:
    """Install a package of Debian's where this may be done without asking anyone."""
    rights = [] if os.name == "posix" and os.geteuid() == 0 else ["sudo", "-n"]
    if not shutil.which("apt-get") or (rights and not shutil.which("sudo")):
        return False
    say(f"Installing {package} with apt-get")
    quiet = {**os.environ, "DEBIAN_FRONTEND": "noninteractive"}
    for arguments in (["update", "-qq"], ["install", "-y", "-qq", "--no-install-recommends", package]):
        command = [*rights, "apt-get", *arguments]
        if subprocess.run(command, env=quiet, stdout=subprocess.DEVNULL, check=False).returncode != 0:
            return False
    return True


def checks(python: Path) -> list[tuple[str, list[str | Path]]]:
    """Return what is checked beside the tests."""
    return [
        ("ruff check", [python, "-m", "ruff", "check", "."]),
        ("mypy", [python, "-m", "mypy"]),
    ]


def passed(name: str, command: Sequence[str | Path]) -> bool:
    """Run one check."""
    say(name)
    return subprocess.run(command, cwd=ROOT, check=False).returncode == 0


def pytest(python: Path, chromium: str | None, arguments: Sequence[str]) -> tuple[int, str, str]:
    """Run the tests; return the exit code, the closing line, and which browser tests did not run."""
    say("pytest")
    if chromium is None:
        print(
            "No Chromium was found: install one, or name one in CHROMIUM. The tests in a browser are skipped."
        )
    known = {**os.environ, "CHROMIUM": chromium} if chromium else dict(os.environ)
    with tempfile.TemporaryDirectory() as scratch:
        results = Path(scratch) / "results.xml"
        command: list[str | Path] = [
            python,
            "-m",
            "pytest",
            "-n",
            "2",
            "--dist",
            "worksteal",
            f"--junitxml={results}",
            *arguments,
        ]
        with subprocess.Popen(command, cwd=ROOT, env=known, stdout=subprocess.PIPE, text=True) as process:
            assert process.stdout is not None
            closing = ""
            for line in process.stdout:
                print(line, end="", flush=True)
                closing = line.strip() or closing
        return process.returncode, closing, missed_browser_tests(results, whole=not arguments)


def missed_browser_tests(results: Path, *, whole: bool) -> str:
    """Return which browser tests were skipped, in words; empty where they ran, or were not asked for."""
    if not results.exists():
        return "all of them: pytest did not finish"
    cases = [
        c for c in ET.parse(results).iter("testcase") if c.get("classname", "").startswith(BROWSER_TESTS)
    ]
    skipped = [case for case in cases if case.find("skipped") is not None]
    if whole and not cases:
        return "the browser tests, of which none was found"
    return ", ".join(sorted({f"{case.get('classname')}.{case.get('name')}" for case in skipped}))


def say(what: str) -> None:
    """Write what comes next."""
    print(f"— {what}", flush=True)


if __name__ == "__main__":
    sys.exit(main())
