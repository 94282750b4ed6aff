"""TOML text: reading with the place of each key, and writing tables of plain values."""

from __future__ import annotations

import json
import re
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from cupfem.errors import InputError, nearest
from cupfem.inputs.messages import quoted, readable

_LARGEST = 1_000_000  # bytes; a cup file has a few hundred
_ARRAY_HEADER = re.compile(r"\s*\[\[(.+)\]\]\s*(#.*)?$")
_HEADER = re.compile(r"\s*\[(.+)\]\s*(#.*)?$")
_KEY = re.compile(
    r"""\s*((?:"[^"]*"|'[^']*'|[A-Za-z0-9_-]+)(?:\s*\.\s*(?:"[^"]*"|'[^']*'|[A-Za-z0-9_-]+))*)\s*="""
)
_KEY_PART = re.compile(r""""([^"]*)"|'([^']*)'|([A-Za-z0-9_-]+)""")


def read_text(path: str | Path) -> str:
    """Read a file of UTF-8 text; InputError if it is missing, not a file, too large or not text."""
    place = Path(path)
    try:
        if place.is_dir():
            raise InputError(str(path), None, "is a folder, not a file", "give the file's name")
        if place.stat().st_size > _LARGEST:
            raise InputError(str(path), None, "is larger than 1 MB, so not a cup or serving file")
        return place.read_bytes().decode("utf-8-sig")
    except FileNotFoundError:
        raise InputError(str(path), None, "no such file." + _neighbour(place)) from None
    except UnicodeDecodeError as error:
        raise InputError(
            str(path), None, f"not UTF-8 text (byte {error.start + 1})", "save it as UTF-8"
        ) from None
    except (OSError, ValueError) as error:
        raise InputError(
            str(path), None, f"cannot be read ({getattr(error, 'strerror', None) or error})"
        ) from None


def parse(text: str, source: str) -> dict[str, Any]:
    """Parse TOML; InputError with line and column if it is not TOML or holds nothing."""
    try:
        data = tomllib.loads(text)
    except (ValueError, RecursionError) as error:
        why = f"not a TOML file: {str(error)[:1].lower()}{str(error)[1:]}"
        raise InputError(source, None, why, 'write lines such as thickness = "0.35 mm"') from None
    if not data:
        raise InputError(source, None, "the file is empty", "start from a file in geometries/")
    return data


def lines_of(text: str, data: Mapping[str, Any]) -> dict[str, int]:
    """Line of each table and key of a TOML text, by the readable path without quotation marks."""
    places: dict[str, int] = {}
    header: tuple[str | int, ...] = ()
    counts: dict[tuple[str, ...], int] = {}
    for number, line in enumerate(text.splitlines(), 1):
        key: tuple[str, ...] = ()
        if match := _ARRAY_HEADER.match(line):
            name = _parts(match[1])
            places.setdefault(readable(name, data), number)
            header = (*name, counts.setdefault(name, 0))
            counts[name] += 1
        elif match := _HEADER.match(line):
            header = _parts(match[1])
        elif match := _KEY.match(line):
            key = _parts(match[1])
        else:
            continue
        places.setdefault(readable((*header, *key), data).replace('"', ""), number)
    return places


def line_of(path: str, places: Mapping[str, int]) -> int | None:
    """Line of a path, or of the innermost table around it that stands in the text."""
    path = path.replace('"', "")
    while path:
        if path in places:
            return places[path]
        path = path.rpartition(".")[0]
    return None


def write(table: Mapping[str, Any], path: tuple[str, ...] = ()) -> str:
    """Write a table of texts, numbers, lists and tables as TOML."""
    values = {key: value for key, value in table.items() if not _is_table(value) and not _is_array(value)}
    blocks = ["".join(f"{quoted(key)} = {plain(value)}\n" for key, value in values.items())]
    for key, value in table.items():
        inner = (*path, key)
        header = ".".join(quoted(part) for part in inner)
        if _is_table(value):
            blocks.append(f"[{header}]\n{write(value, inner)}")
        elif _is_array(value):
            blocks.extend(f"[[{header}]]\n{write(item, inner)}" for item in value)
    return "\n".join(block for block in blocks if block)


def plain(value: object) -> str:
    """A text, number, truth value or list of them as TOML writes it."""
    # a JSON text, number, truth value or list of them is a TOML one, but for the delete character
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")


def _is_table(value: object) -> bool:
    return isinstance(value, Mapping)


def _is_array(value: object) -> bool:
    return isinstance(value, list) and bool(value) and all(isinstance(item, Mapping) for item in value)


def _parts(dotted: str) -> tuple[str, ...]:
    return tuple("".join(groups) for groups in _KEY_PART.findall(dotted))


def _neighbour(place: Path) -> str:
    try:
        return nearest(place.name, [path.name for path in place.parent.iterdir()])
    except OSError:
        return ""
