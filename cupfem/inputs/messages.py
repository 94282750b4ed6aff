"""A failed validation as one line: where, the value, why it cannot be used, what to write instead."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails, PydanticCustomError

from cupfem.errors import InputError, nearest

_BARE = re.compile(r"[A-Za-z0-9_-]+")
# type of a pydantic error -> why, and what to write instead
_PLAIN_WORDS = {
    "missing": ("missing", "write as many values as belong here"),
    "extra_forbidden": ("unknown key", "leave it out"),
    "string_type": ("not a text", "write it in quotation marks"),
    "model_type": ("not a table", "write a table of keys"),
    "dict_type": ("not a table", "write a table of keys"),
    "tuple_type": ("not a list", "write it in square brackets"),
    "int_type": ("not a whole number", "write a whole number without quotation marks"),
}


def refused(why: str, instead: str = "", key: str = "", value: object = None) -> PydanticCustomError:
    """The error for a validator to raise; `key` is the path from the validated table to what is refused."""
    return PydanticCustomError(
        "refused", "{why}", {"why": why, "instead": instead, "key": key, "value": value}
    )


def one_line(error: ValidationError, data: object, start: str = "") -> InputError:
    """Convert a failed validation of `data`: its first error, and how many more there are."""
    first, *more = error.errors(include_url=False)
    context = first.get("ctx", {})
    why, instead = _words(first) if "why" not in context else (context["why"], context["instead"])
    where = ".".join(part for part in (start, readable(first["loc"], data), context.get("key", "")) if part)
    value = context["value"] if context.get("key") else first["input"]
    shown = (
        None if first["type"] == "missing" or isinstance(value, Mapping | list | tuple | BaseModel) else value
    )
    rest = f" (and {len(more)} more)" if more else ""
    return InputError(
        where or "input", shown, why + (rest if not instead else ""), instead + (rest if instead else "")
    )


def did_you_mean(word: str, choices: Iterable[str]) -> str:
    """A question with the nearest choice, or an empty string."""
    question = nearest(word, choices).strip()
    return question[:1].lower() + question[1:]


def readable(location: Sequence[str | int], data: object) -> str:
    """A path for people: ("layer", 1, "thickness") is "layer.gap.thickness", nameless "layer.2.thickness".

    Parts such as "<steps>", which tell the kind of a value, are left out.
    """
    words: list[str] = []
    for part in location:
        if isinstance(part, str) and part.startswith("<"):
            continue
        data = _inside(data, part)
        words.append(_word(part, data))
    return ".".join(words)


def quoted(key: str) -> str:
    """A key as TOML writes it: in quotation marks unless it is a plain word."""
    return key if _BARE.fullmatch(key) else '"' + key.replace('"', '\\"') + '"'


def _inside(data: object, part: str | int) -> object:
    if isinstance(data, Mapping):
        return data.get(part)
    if (
        isinstance(data, Sequence)
        and not isinstance(data, str)
        and isinstance(part, int)
        and part < len(data)
    ):
        return data[part]
    return None


def _word(part: str | int, data: object) -> str:
    if isinstance(part, str):
        return quoted(part)
    name = data.get("name") if isinstance(data, Mapping) else getattr(data, "name", None)
    return name if isinstance(name, str) and _BARE.fullmatch(name) else str(part + 1)


def _words(error: ErrorDetails) -> tuple[str, str]:
    if error["type"] == "literal_error":
        return _choice(error["input"], re.findall(r"'([^']*)'", error["ctx"]["expected"]))
    return _PLAIN_WORDS.get(error["type"], (_without_capital(error["msg"]), ""))


def _choice(value: Any, choices: list[str]) -> tuple[str, str]:
    listed = ", ".join(f'"{choice}"' for choice in choices)
    guess = did_you_mean(value, choices) if isinstance(value, str) else ""
    return f"the names here are {listed}", guess or f'write "{choices[0]}"'


def _without_capital(text: str) -> str:
    return text[:1].lower() + text[1:]
