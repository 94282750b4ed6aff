"""A `.pvd` file and the `.vtu` files that it lists, in a folder of the same name beside it."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from pathlib import Path

from cupfem.errors import InputError
from cupfem.exchange.files import explained
from cupfem.exchange.vtu import pvd_text

Moments = Iterable[tuple[float, str]]
"""Times [s], each with the content of its `.vtu` file."""


def write_pvd(path: str | Path, parts: Mapping[str, Moments]) -> Path:
    """Write one `.pvd` file for each part, whose key is added to the name; returns that of the part "".

    A `.pvd` file is written after the files that it names. Those of an earlier writing are removed first, and
    all of this one if it fails.
    """
    path = Path(path)
    if path.suffix != ".pvd":
        raise InputError("fields", str(path), "the name must end in .pvd", 'write "fields.pvd"')
    folder = path.with_suffix("")
    with explained(path):
        folder.mkdir(exist_ok=True)
        _clear(path, folder)
        try:
            for part, moments in parts.items():
                _write_part(path.with_name(f"{path.stem}{part}.pvd"), folder, moments)
        except BaseException:
            _clear(path, folder)
            if not any(folder.iterdir()):
                folder.rmdir()
            raise
    return path


def _clear(path: Path, folder: Path) -> None:
    """Remove the files of an earlier writing, which may have had more pads or moments; nothing else."""
    stem = re.escape(path.stem)
    lists, files = rf"{stem}(_pad\d+)?\.pvd", rf"{stem}(_pad\d+)?_\d{{4,}}\.vtu"
    for place, name in ((path.parent, lists), (folder, files)):
        for file in place.iterdir():
            if re.fullmatch(name, file.name):
                file.unlink()


def _write_part(path: Path, folder: Path, moments: Moments) -> None:
    files = []
    for index, (time, text) in enumerate(moments):
        file = folder / f"{path.stem}_{index:04d}.vtu"
        file.write_text(text, encoding="utf-8")
        files.append((time, f"{folder.name}/{file.name}"))
    path.write_text(pvd_text(files), encoding="utf-8")
