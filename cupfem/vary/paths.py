"""Paths such as "layer.gap.thickness": which value of a cup or serving they name, and setting it.

A path that begins with "serving" is in the serving file, any other in the cup file; "cup" and "serving" alone
stand for the whole file. Items of a list go by their name, or by their number from 1.
"""

from __future__ import annotations

import copy
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Literal, get_args, get_origin

from pydantic.fields import FieldInfo

from cupfem.errors import InputError
from cupfem.inputs import InputFile, Table
from cupfem.inputs.messages import did_you_mean, quoted
from cupfem.materials import DIMENSION_OF
from cupfem.quantities.fields import Quantity, Share

Data = dict[str, Any]
_PART = re.compile(r'"([^"]*)"|([^."]+)')


@dataclass(frozen=True)
class Slot:
    """The place of a value.

    `file` is "cup" or "serving", `parts` the keys below it (none: the whole file). `kind` is a dimension of
    `quantities`, or "number", "integer" or "word".
    """

    key: str
    file: str
    parts: tuple[str, ...]
    kind: str


def find_slot(key: str, files: Mapping[str, tuple[type[InputFile], Data]]) -> Slot:
    """The value that a path names.

    Parameters
    ----------
    files:
        "cup" and "serving" -> the model and the tables of the file, from which items of lists are known.

    Raises
    ------
    InputError
        If there is no such value; it names the nearest key.
    """
    parts = tuple(first or second for first, second in _PART.findall(key))
    if not parts or ".".join(quoted(part) for part in parts) != key:
        why = "not a path of keys"
        raise InputError(
            "vary.key", key, why, 'write it as in "layer.gap.thickness"; quote names with spaces'
        )
    if parts in (("cup",), ("serving",)):
        return Slot(key, parts[0], (), "word")
    if parts == ("sleeve",):
        return Slot(key, "cup", parts, "word")
    file, inner = ("serving", parts[1:]) if parts[0] == "serving" else ("cup", parts)
    model, data = files[file]
    return Slot(key, file, inner, _kind(key, inner, [model], data))


def value_at(data: Any, parts: tuple[str, ...]) -> Any:
    """The value at a place, None if the file does not have it."""
    for part in parts:
        data = _item(data, part) if isinstance(data, list) else (data or {}).get(part)
    return data


def with_value(data: Data, parts: tuple[str, ...], value: object) -> Data:
    """The tables of a file with one value replaced; `data` stays as it is.

    Raises InputError where an item of a list is missing.
    """
    changed = copy.deepcopy(data)
    inner: Any = changed
    for part in parts[:-1]:
        inner = _item(inner, part) if isinstance(inner, list) else inner.setdefault(part, {})
        if not isinstance(inner, dict | list):
            path = ".".join(map(quoted, parts))
            raise InputError(path, None, "not in this file", "leave the key or the file out")
    inner[parts[-1]] = value
    return changed


def _kind(key: str, parts: tuple[str, ...], tables: list[type[Table]], data: Any) -> str:
    """Walk the models of the tables and the tables themselves together."""
    part, rest = parts[0], parts[1:]
    fields = [field for table in tables for name, field in _fields(table) if name == part]
    if not fields:
        raise _unknown(key, part, [name for table in tables for name, _ in _fields(table)])
    data = data.get(part) if isinstance(data, Mapping) else None
    inner = [table for field in fields for table in _tables(field.annotation)]
    if part == "material" and not inner and len(rest) > 0:
        return _material_kind(key, rest)
    if inner and isinstance(data, list):
        return _item_kind(key, rest, inner, data)
    if inner and rest:
        return _kind(key, rest, inner, data)
    if rest or (inner and not any(_marks(field) for field in fields)):
        raise InputError("vary.key", key, "not a single value" if inner else "the path goes on too far", "")
    return _kind_of(fields)


def _item_kind(key: str, rest: tuple[str, ...], inner: list[type[Table]], data: list[Any]) -> str:
    if len(rest) < 2:
        why, example = "a list, not a single value", _names(data)[0]
        raise InputError("vary.key", key, why, f'go on to one of its values, as in "{key}.{example}..."')
    item = _item(data, rest[0])
    if item is None:
        raise _unknown(key, rest[0], _names(data))
    return _kind(key, rest[1:], inner, item)


def _material_kind(key: str, rest: tuple[str, ...]) -> str:
    """Of a [material."name"] table, which also changes a library material of that name."""
    if len(rest) != 2 or rest[1] not in DIMENSION_OF:
        raise _unknown(key, rest[-1], list(DIMENSION_OF))
    return "number" if rest[1] == "cost_per_kg" else DIMENSION_OF[rest[1]]


def _fields(table: type[Table]) -> Iterator[tuple[str, FieldInfo]]:
    return ((field.alias or name, field) for name, field in table.model_fields.items())


def _tables(annotation: Any) -> list[type[Table]]:
    """All tables inside an annotation, however it is wrapped."""
    if isinstance(annotation, type) and get_origin(annotation) is None:
        return [annotation] if issubclass(annotation, Table) else []
    if get_origin(annotation) is Literal:
        return []
    return [table for inner in get_args(annotation) for table in _tables(inner)]


def _marks(field: FieldInfo) -> list[Quantity | Share]:
    """The quantities that a field can be."""
    return [*_marks_in(field.metadata), *_marks_in([field.annotation])]


def _marks_in(things: Any) -> list[Quantity | Share]:
    found: list[Quantity | Share] = []
    for thing in things:
        if isinstance(thing, Quantity | Share):
            found.append(thing)
        elif get_origin(thing) is not Literal:
            found += _marks_in([*get_args(thing), *getattr(thing, "__metadata__", ())])
    return found


def _kind_of(fields: list[FieldInfo]) -> str:
    for field in fields:
        for mark in _marks(field):
            return mark.dimension if isinstance(mark, Quantity) else "fraction"
    plain = [kind for field in fields for kind in (field.annotation, *get_args(field.annotation))]
    flat = [*plain, *(inner for kind in plain for inner in get_args(kind))]
    return "integer" if int in flat else "number" if float in flat else "word"


def _item(items: list[Any], part: str) -> Any:
    for item in items:
        if isinstance(item, Mapping) and item.get("name") == part:
            return item
    return items[int(part) - 1] if part.isdecimal() and 0 < int(part) <= len(items) else None


def _names(items: list[Any]) -> list[str]:
    named = [item.get("name") if isinstance(item, Mapping) else None for item in items]
    return [str(name or number) for number, name in enumerate(named, 1)] or ["1"]


def _unknown(key: str, part: str, choices: list[str]) -> InputError:
    instead = did_you_mean(part, choices) or f"what stands there is {', '.join(sorted(set(choices)))}"
    return InputError("vary.key", key, f'"{part}" is not in the file format here', instead)
