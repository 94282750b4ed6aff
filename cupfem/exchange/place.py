"""Folders that appear whole or not at all.

A folder is written under a hidden name beside its place and renamed once. A rename within one folder is a
single step of the file system (POSIX rename), so a run that is killed leaves at most the hidden folder.
"""

from __future__ import annotations

import ctypes
import errno
import itertools
import os
import shutil
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

from cupfem.errors import InputError
from cupfem.exchange.files import explained, shown

_HERE, _RENAME_EXCHANGE = -100, 2
"""AT_FDCWD (fcntl.h) and the flag of renameat2(2)."""
INCOMPLETE = "-incomplete"
WHAT = "run folder"
MARKS = ("summary.json", "incomplete.txt")
"""Files by which a folder is known as written by cupfem; no other folder is ever replaced."""


def check_place(folder: str | Path, force: bool = False) -> Path:
    """Where a folder will stand; refuses at once what could not be written after a long run.

    Raises
    ------
    InputError
        If the place is taken (with `force`: by anything but a run folder), lies in no folder, or may not be
        written to.
    """
    place = Path(os.path.realpath(folder))
    with explained(Path(folder), WHAT):
        if place.exists():
            _check_taken(place, force)
        _check_parent(place.parent)
    return place


def _check_parent(parent: Path) -> None:
    if not parent.is_dir():
        raise OSError(errno.ENOTDIR if parent.exists() else errno.ENOENT, "no folder")
    if not os.access(parent, os.W_OK | os.X_OK, effective_ids=os.access in os.supports_effective_ids):
        raise OSError(errno.EACCES, "closed")


def _check_taken(place: Path, force: bool) -> None:
    if not place.is_dir():
        raise InputError(WHAT, shown(place), "a file of that name exists", "choose another name")
    if not force:
        raise InputError(
            WHAT, shown(place), "it exists already", "name another folder, or add --force to replace it"
        )
    if any(place.iterdir()) and not any((place / mark).is_file() for mark in MARKS):
        raise InputError(
            WHAT, shown(place), "it holds no run, and only a run is replaced", "name another folder"
        )


def write_whole(folder: Path, fill: Callable[[Path], None], *, force: bool = False) -> Path:
    """Fill a hidden folder and rename it to its place; without `force` the place must be free.

    With `force` old and new exchange their names in one step where the system can (Linux), and the old one is
    deleted last. Elsewhere the old folder is renamed to a hidden name first. Those are two steps: killed
    between them, the place is empty and both folders, old and new, stand beside it under their hidden names;
    an error or Ctrl-C there puts the old folder back.
    """
    place = check_place(folder, force)
    with explained(folder, WHAT), _hidden(place) as hidden:
        fill(hidden)
        _move_in(hidden, place, force)
    return folder


def write_numbered(parent: Path, name: str, fill: Callable[[Path], None], suffix: str = "") -> Path:
    """Fill a hidden folder and rename it to the first free `<name>-001`, `<name>-002`, ... in a folder.

    A number counts as taken by a folder with or without "-incomplete". Runs that end at the same moment get
    different numbers: the rename of a later one fails and takes the next.
    """
    first = parent / f"{name}-001{suffix}"
    with explained(first, WHAT):
        _check_parent(parent)
    with explained(first, WHAT), _hidden(first) as hidden:
        fill(hidden)
        for number in itertools.count(1):
            stem = f"{name}-{number:03d}"
            if any((parent / other).exists() for other in (stem, stem + INCOMPLETE)):
                continue
            if _renamed(hidden, parent / (stem + suffix)):
                return parent / (stem + suffix)
    raise AssertionError("there is always a next number")


@contextmanager
def _hidden(place: Path) -> Iterator[Path]:
    """A new hidden folder beside a place; whatever of it is left at the end is removed, on Ctrl-C too."""
    hidden = _make_beside(place, "tmp")
    try:
        yield hidden
    finally:
        shutil.rmtree(hidden, ignore_errors=True)


def _make_beside(place: Path, kind: str) -> Path:
    """Make `.<name>-<kind>-<pid>`, with a further number where an earlier process left one behind."""
    for number in itertools.count():
        folder = place.with_name(f".{place.name}-{kind}-{os.getpid()}" + (f"-{number}" if number else ""))
        try:
            folder.mkdir()
        except FileExistsError:
            continue
        return folder
    raise AssertionError("there is always a next number")


def _move_in(hidden: Path, place: Path, force: bool) -> None:
    if not (force and place.exists()):
        os.rename(hidden, place)
    elif not _exchanged(hidden, place):
        _put_aside(hidden, place)


def _exchanged(first: Path, second: Path) -> bool:
    """Let two folders exchange their names in one step; False where the system cannot.

    Linux only: renameat2(2), flag RENAME_EXCHANGE; some file systems refuse it.
    """
    if sys.platform != "linux":
        return False
    call = getattr(ctypes.CDLL(None), "renameat2", None)
    paths = os.fsencode(first), os.fsencode(second)
    return call is not None and call(_HERE, paths[0], _HERE, paths[1], _RENAME_EXCHANGE) == 0


def _put_aside(hidden: Path, place: Path) -> None:
    old = _make_beside(place, "old")
    try:
        os.rename(place, old)  # a rename may take the place of an empty folder
        os.rename(hidden, place)
    finally:
        if not place.exists():
            os.rename(old, place)
        shutil.rmtree(old, ignore_errors=True)


def _renamed(hidden: Path, place: Path) -> bool:
    try:
        os.rename(hidden, place)
    except OSError as error:
        if error.errno in (errno.EEXIST, errno.ENOTEMPTY, errno.ENOTDIR):
            return False
        raise
    return True
