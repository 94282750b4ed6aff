"""What the operating system refuses, said in one line."""

from __future__ import annotations

import errno
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from cupfem.errors import LONGEST_VALUE, InputError

_FULL = ("the disk is full", "free some space or name a place on another disk")
_CLOSED = ("it may not be written to", "name a place that you may write to")
_TAKEN = ("it exists already", "name another place, or ask for it to be replaced")
_REASONS = {
    errno.ENOSPC: _FULL,
    errno.EDQUOT: ("the disk quota is used up", _FULL[1]),
    errno.EFBIG: ("a file grew beyond what is allowed here", _FULL[1]),
    errno.EACCES: _CLOSED,
    errno.EPERM: _CLOSED,
    errno.EROFS: ("it lies on a disk that is read-only", _CLOSED[1]),
    errno.ENOENT: ("the folder that it should lie in does not exist", "make that folder first"),
    errno.ENOTDIR: ("a part of the path is a file", "name a folder"),
    errno.EISDIR: ("a folder of that name exists", "choose another name"),
    errno.ENAMETOOLONG: ("the name is too long", "choose a shorter one"),
    errno.EEXIST: _TAKEN,
    errno.ENOTEMPTY: _TAKEN,
}


@contextmanager
def explained(place: Path, what: str = "output") -> Iterator[None]:
    """Turn what the operating system refuses inside the block into an InputError about a place.

    Blocks may lie within each other; the message then names the outermost place.
    """
    try:
        yield
    except OSError as error:
        raise _told(error, place, what) from error
    except InputError as error:
        if not isinstance(error.__cause__, OSError):
            raise
        raise _told(error.__cause__, place, what) from error.__cause__


def _told(error: OSError, place: Path, what: str) -> InputError:
    why, instead = _REASONS.get(error.errno or 0, (error.strerror or str(error), "name another place"))
    return InputError(what, shown(place), why, instead)


def shown(place: Path) -> str:
    """A path for a message; a long one keeps its end."""
    text, longest = str(place), LONGEST_VALUE - 2
    return text if len(text) <= longest else f"...{text[3 - longest :]}"
