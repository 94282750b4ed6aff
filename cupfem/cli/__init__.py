"""The command line: parse, call, print. Whatever is heavy is imported by the command that needs it."""

from cupfem.cli import slab as _slab  # adds its command to the app
from cupfem.cli import vary as _vary  # adds its command to the app
from cupfem.cli.app import app
from cupfem.cli.status import main

__all__ = ["app", "main"]

del _slab, _vary
