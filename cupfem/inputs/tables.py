"""The base classes of the input models: a table of a file, and a whole file."""

from __future__ import annotations

import json
import re
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Annotated, Any, ClassVar, Self

from pydantic import AfterValidator, BaseModel, ConfigDict, Discriminator, ValidationError, model_validator
from pydantic.fields import FieldInfo

from cupfem.errors import InputError
from cupfem.inputs import toml
from cupfem.inputs.messages import did_you_mean, one_line, refused
from cupfem.quantities import DIMENSIONS, parse_quantity

_NAME = re.compile(r"[A-Za-z][A-Za-z0-9_-]*")


class Table(BaseModel):
    """A table of an input file. In Python a key that is a reserved word has an underscore: `from_`."""

    model_config = ConfigDict(
        extra="forbid",
        frozen=True,
        validate_by_name=True,
        validate_by_alias=True,
    )

    place: ClassVar[str] = ""
    """Path of the table in its file, for the messages about one that is made in Python."""
    not_yet: ClassVar[tuple[str, ...]] = ()
    """Keys of the file format that nothing implements yet."""
    never: ClassVar[Mapping[str, str]] = {}
    """Keys that people may try, with the reason why they cannot be."""
    wanted: ClassVar[Mapping[str, str]] = {}
    """What to write for a needed key that is missing, where one value does not tell."""
    left_out: ClassVar[Mapping[str, str]] = {}
    """What it means to leave out a key that has no value then."""

    def __init__(self, **values: Any) -> None:
        try:
            super().__init__(**values)
        except ValidationError as error:
            raise one_line(error, values, self.place) from None

    # pydantic's own mark of an initialiser that only passes on to the base: nested tables are then
    # validated in one go, and an error keeps its whole path
    __init__.__pydantic_base_init__ = True  # type: ignore[attr-defined]

    @model_validator(mode="before")
    @classmethod
    def _known_keys(cls, data: object) -> object:
        if isinstance(data, Mapping):
            fields = {field.alias or name: field for name, field in cls.model_fields.items()}
            for key in data:
                if key not in fields and key not in cls.model_fields:
                    raise cls._unknown(str(key), list(fields))
            for (key, field), name in zip(fields.items(), cls.model_fields, strict=True):
                if field.is_required() and key not in data and name not in data:
                    raise refused("missing", cls.wanted.get(key, f"write {key} = {_example(field)}"), key)
        return data

    @classmethod
    def _unknown(cls, key: str, keys: list[str]) -> Exception:
        if key in cls.never:
            return refused(cls.never[key], "leave it out", key)
        if key in cls.not_yet:
            return refused("not supported yet", "leave it out", key)
        return refused("unknown key", did_you_mean(key, keys) or f"the keys here are {', '.join(keys)}", key)


class InputFile(Table):
    """A whole file."""

    @classmethod
    def load(cls, path: str | Path) -> Self:
        """Read a file; InputError for anything that cannot be used."""
        return cls.from_text(toml.read_text(path), str(path))

    @classmethod
    def from_text(cls, text: str, source: str = "text") -> Self:
        """Read TOML text; `source` is what messages call it."""
        data = cls.prepared(toml.parse(text, source), Path(source).parent)
        try:
            return cls.from_data(data)
        except InputError as error:
            line = toml.line_of(error.what, toml.lines_of(text, data))
            where = f"{source}, line {line}" if line else source
            raise InputError(f"{where}: {error.what}", error.value, error.why, error.instead) from None

    @classmethod
    def prepared(cls, data: dict[str, Any], folder: Path) -> dict[str, Any]:
        """The tables of a file before they are validated; `folder` is where it lies."""
        return data

    @classmethod
    def from_data(cls, data: Mapping[str, Any]) -> Self:
        """Validate the tables of a file, keys as the file writes them."""
        try:
            return cls.model_validate(data, by_alias=True, by_name=False)
        except ValidationError as error:
            raise one_line(error, data) from None

    def idle(self) -> dict[str, str]:
        """Keys that would change nothing here, by their path, each with the reason."""
        return {}

    def refuse_idle(self) -> None:
        """Refuse an idle key that was given: a key is used or refused."""
        for path, reason in self.idle().items():
            *tables, key = path.split(".")
            table: Any = self
            for name in tables:
                table = _inner(table, name)
            field = next(n for n, f in type(table).model_fields.items() if (f.alias or n) == key)
            if field in table.model_fields_set and getattr(table, field) is not None:
                raise refused(f"would change nothing: {reason}", "leave it out", path)


def _inner(table: Any, name: str) -> Any:
    if isinstance(table, tuple):
        named = [item for item in table if getattr(item, "name", None) == name]
        return named[0] if named else table[int(name) - 1]
    return getattr(table, name)


def _example(field: FieldInfo) -> str:
    """A value that a field takes, as TOML writes it."""
    if field.examples:
        return f'"{field.examples[0]}"'
    for mark in field.metadata:
        if getattr(mark, "dimension", None) in DIMENSIONS:
            return f'"{DIMENSIONS[mark.dimension].examples[0]}"'
    return '"..."'


def tag(choose: Callable[[Any], str]) -> Discriminator:
    """Tell the kinds of a value apart before they are validated, so that only the meant one complains."""
    return Discriminator(choose)


def within(low: str, high: str, dimension: str) -> AfterValidator:
    """Refuse what is no cup, such as a wall of 5 m, and what the solver could not work through."""
    lowest, highest = parse_quantity(low, dimension), parse_quantity(high, dimension)

    def check(value: float) -> float:
        if not lowest <= value <= highest:
            raise refused(f"must be from {low} to {high}", "check the number and its unit")
        return value

    return AfterValidator(check)


def _positive(value: float) -> float:
    if value <= 0.0:
        raise refused("must be more than zero", "write a value above zero")
    return value


def _not_negative(value: float) -> float:
    if value < 0.0:
        raise refused("must not be negative", "write zero or more")
    return value


def _plain_word(value: str) -> str:
    if not _NAME.fullmatch(value):
        raise refused(
            "not a plain word (letters, digits, _ and -, a letter first)",
            f"write {json.dumps(re.sub(r'[^A-Za-z0-9_-]+', '_', value).strip('_') or 'wall')}",
        )
    return value


Positive = AfterValidator(_positive)
NotNegative = AfterValidator(_not_negative)
Name = Annotated[str, AfterValidator(_plain_word)]
