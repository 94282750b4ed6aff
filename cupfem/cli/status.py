"""Errors as one line on standard error, and the status that the process ends with."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence

import typer

from cupfem.cli.app import app
from cupfem.errors import ConvergenceError, CupfemError

REFUSED, NOT_CONVERGED, STOPPED = 2, 3, 130
"""Input that cannot be used; a march that cannot go on; Ctrl-C (128 + SIGINT, POSIX shell)."""


def main(arguments: Sequence[str] | None = None) -> None:
    """Run the command line and end the process: 0, or the status of what went wrong."""
    given = sys.argv[1:] if arguments is None else list(arguments)
    try:
        status = _status(given or ["--help"])
        sys.stdout.flush()
    except BrokenPipeError:
        status = 0
        _give_up_output()
    except OSError as error:  # files are told of by name where they are written: this is the terminal's
        status = _told(f"standard output: {(error.strerror or str(error)).lower()}", REFUSED)
        _give_up_output()
    sys.exit(status)


def _give_up_output() -> None:
    """Let the interpreter flush what is left into nothing."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def _status(arguments: Sequence[str]) -> int:
    try:
        answer = app(arguments, prog_name="cupfem", standalone_mode=False)
    except typer.TyperException as error:
        return _told(f"{error.format_message().rstrip('.')}; see cupfem --help", error.exit_code)
    except ConvergenceError as error:
        return _told(str(error), NOT_CONVERGED)
    except CupfemError as error:
        return _told(str(error), REFUSED)
    except KeyboardInterrupt:
        answer = STOPPED
    return _told("stopped", STOPPED) if answer == STOPPED else int(answer or 0)


def _told(text: str, status: int) -> int:
    print(f"cupfem: {' '.join(text.split())}", file=sys.stderr)
    return status
