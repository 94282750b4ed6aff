"""What a model holds beyond its file: the defaults it used, and the whole of it as a file again."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from cupfem.inputs import toml
from cupfem.inputs.messages import quoted
from cupfem.inputs.tables import InputFile, Table


def defaults_used(model: InputFile) -> list[str]:
    """The keys that were left out and what was taken for them, as "room.humidity = 0.45"."""
    idle, dumped = model.idle(), model.model_dump(mode="json", by_alias=True)
    return [f"{path} = {text}" for path, text in _left_out(model, dumped, "") if path not in idle]


def resolved_toml(model: InputFile) -> str:
    """The model with all its defaults as the text of a file; reading it gives an equal model."""
    dumped = model.model_dump(mode="json", by_alias=True, exclude_none=True)
    return toml.write(_used(dumped, "", set(model.idle())))


def _left_out(table: Table, dumped: dict[str, Any], path: str) -> Iterator[tuple[str, str]]:
    for name, field in type(table).model_fields.items():
        key = field.alias or name
        here, value = path + key, getattr(table, name)
        if isinstance(value, Table):
            yield from _left_out(value, dumped[key], f"{here}.")
        elif isinstance(value, tuple) and value and isinstance(value[0], Table):
            for index, item in enumerate(value):
                yield from _left_out(item, dumped[key][index], f"{here}.{_item(item, index)}.")
        elif name not in table.model_fields_set and value is not None and value != () and value != {}:
            yield here, toml.plain(dumped[key])
        elif value is None and key in table.left_out:
            yield here, table.left_out[key]


def _item(item: Table, index: int) -> str:
    return str(getattr(item, "name", index + 1))


def _used(value: Any, path: str, idle: set[str]) -> Any:
    """Copy without the idle keys and without empty tables."""
    if isinstance(value, list):
        return [_used(item, f"{path}{_key(item, index)}.", idle) for index, item in enumerate(value)]
    if not isinstance(value, dict):
        return value
    kept = {
        key: _used(item, f"{path}{quoted(key)}.", idle)
        for key, item in value.items()
        if path + key not in idle
    }
    return {key: item for key, item in kept.items() if item not in ({}, [])}


def _key(item: Any, index: int) -> str:
    return str(item["name"]) if isinstance(item, dict) and "name" in item else str(index + 1)
