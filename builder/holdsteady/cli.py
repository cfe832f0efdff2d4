"""The commands: parse, call the use case, print, and leave with an exit code."""

from __future__ import annotations

import contextlib
import datetime as dt
import sys
from collections.abc import Callable, Sequence
from typing import Any, TypeVar

import click

from holdsteady import __version__

UNEXPECTED = 5  # a fault of ours before anything was put in place: the site before still stands
INTERRUPTED = 130

_Command = TypeVar("_Command", bound=Callable[..., Any])


class Invocation:
    """What one call of the command has found out about itself."""

    def __init__(self) -> None:
        self.debug = False


def _moment(
    _context: click.Context, _parameter: click.Parameter, text: str | None
) -> dt.datetime | dt.date | None:
    """Return a date or a datetime; without a zone it is in the project's."""
    if text is None:
        return None
    for read in (dt.date.fromisoformat, dt.datetime.fromisoformat):
        with contextlib.suppress(ValueError):
            return read(text.strip())
    raise click.BadParameter(f"{text!r} is no moment; write 2026-03-17 or 2026-03-17T14:10")


def _remember_debug(context: click.Context, _parameter: click.Parameter, value: bool) -> None:  # noqa: FBT001
    if value:
        context.ensure_object(Invocation).debug = True


def _debug(command: _Command) -> _Command:
    return click.option(
        "--debug",
        is_flag=True,
        expose_value=False,
        callback=_remember_debug,
        help="Show the traceback when something fails.",
    )(command)


_project = click.argument("project", type=click.Path(file_okay=False), default=".", required=False)
_as_of = click.option(
    "--as-of",
    callback=_moment,
    metavar="TIME",
    help="Stand at this moment, and look at nothing later.  [default: as_of in the settings, else now]",
)


@click.group(context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="holdsteady", message="%(prog)s %(version)s")
@_debug
def commands() -> None:
    """Turn a folder of measurement files into a site that tells which processes signal."""


@commands.command()
@click.argument("folder", type=click.Path())
@_debug
def start(folder: str) -> int:
    """Look through FOLDER and write a `holdsteady.toml` that builds as it is, with a comment for each guess.

    Prints what was seen, what was guessed from it and how sure that is. Nothing is ever overwritten.
    """
    from pathlib import Path  # noqa: PLC0415  `--help` need not wait for these

    from holdsteady import console  # noqa: PLC0415
    from holdsteady.start.start import start as run  # noqa: PLC0415

    with console.progress() as progress:
        started = run(Path(folder), progress=progress)
    console.print_started(started)
    return 0


@commands.command()
@_project
@click.option(
    "--out",
    type=click.Path(),
    metavar="DIR",
    help="Publish here.  [default: output in the settings, `site` below the project]",
)
@_as_of
@click.option(
    "--fail-on",
    type=click.Choice(["signalling"]),
    help="Exit with 1 when a characteristic is in this state.",
)
@_debug
def build(project: str, out: str | None, as_of: dt.datetime | dt.date | None, fail_on: str | None) -> int:
    """Read the files of PROJECT, compute its charts, publish the site.

    PROJECT is a folder with a `holdsteady.toml`; the current folder when left out.
    """
    from pathlib import Path  # noqa: PLC0415  `--help` need not wait for these

    from holdsteady import console  # noqa: PLC0415
    from holdsteady.build import build as run  # noqa: PLC0415

    with console.progress() as progress:
        report = run(Path(project), out=None if out is None else Path(out), as_of=as_of, progress=progress)
    console.print_problems(report.problems)
    console.print_summary(report)
    return report.exit_code(fail_on_signalling=fail_on == "signalling")


@commands.command()
@_project
@_as_of
@_debug
def check(project: str, as_of: dt.datetime | dt.date | None) -> int:
    """Do everything `build` does except publishing, and print what became of every row.

    PROJECT is a folder with a `holdsteady.toml`; the current folder when left out.
    """
    from pathlib import Path  # noqa: PLC0415

    from holdsteady import console  # noqa: PLC0415
    from holdsteady.build import check as run  # noqa: PLC0415

    with console.progress() as progress:
        report = run(Path(project), as_of=as_of, progress=progress)
    console.print_accounting(report)
    console.print_all(report.problems)
    console.print_summary(report)
    return report.exit_code()


def main(arguments: Sequence[str] | None = None) -> None:
    """Run one command and exit; every message is a line of problem and a line of remedy."""
    sys.exit(run(arguments))


def run(arguments: Sequence[str] | None = None) -> int:
    """Run one command and return its exit code."""
    invocation = Invocation()
    try:
        code = commands.main(
            args=None if arguments is None else list(arguments),
            prog_name="holdsteady",
            standalone_mode=False,
            obj=invocation,
        )
    except click.ClickException as error:
        error.show()
        return error.exit_code
    except (click.Abort, KeyboardInterrupt):
        click.echo("Stopped; the site before still stands.", err=True)
        return INTERRUPTED
    except Exception as error:
        if invocation.debug:
            raise
        return _explain(error)
    return code if isinstance(code, int) else 0


def _explain(error: Exception) -> int:
    """Say what went wrong and what to do about it; return the exit code."""
    from holdsteady import console  # noqa: PLC0415
    from holdsteady.problems import HoldsteadyError  # noqa: PLC0415

    if isinstance(error, HoldsteadyError):
        console.print_errors(error)
        return error.exit_code
    console.print_fault(error)
    return UNEXPECTED
