"""JSON Schema of a file, for editors that complete and check it while it is written."""

from __future__ import annotations

import ast
import inspect
import textwrap
from itertools import pairwise
from typing import Any

from pydantic.json_schema import GenerateJsonSchema, JsonSchemaValue
from pydantic_core import CoreSchema, core_schema

from cupfem.inputs.tables import InputFile, Table


class _Generator(GenerateJsonSchema):
    """pydantic's generator with defaults as the file writes them, and without null, which is not in TOML."""

    def nullable_schema(self, schema: core_schema.NullableSchema) -> JsonSchemaValue:
        return self.generate_inner(schema["schema"])

    def default_schema(self, schema: core_schema.WithDefaultSchema) -> JsonSchemaValue:
        inner = self.generate_inner(schema["schema"])
        default = schema.get("default")
        if default is None or default in ((), {}):
            return inner
        return {**inner, "default": self.encode_default(_written(default, schema["schema"]))}

    def model_schema(self, schema: core_schema.ModelSchema) -> JsonSchemaValue:
        """With the docstrings of the fields as their descriptions."""
        told = super().model_schema(schema)
        fields, properties = schema["cls"].model_fields, told.get("properties", {})
        for name, text in _docstrings(schema["cls"]).items():
            key = (fields[name].alias or name) if name in fields else None
            if key in properties:
                properties[key]["description"] = text
        return told

    def field_title_should_be_set(self, schema: Any) -> bool:
        return False


def _docstrings(model: type) -> dict[str, str]:
    """Attribute -> the text below it, of a model and its bases.

    pydantic can read them as it makes a class, but then it parses every source at every start of the program.
    """
    found: dict[str, str] = {}
    for each in reversed([base for base in model.__mro__ if issubclass(base, InputFile | Table)]):
        if "[" in each.__name__:  # a generic with its parameters: its origin has the source
            continue
        (tree,) = ast.parse(textwrap.dedent(inspect.getsource(each))).body
        assert isinstance(tree, ast.ClassDef)
        for field, after in pairwise(tree.body):
            if not (isinstance(field, ast.AnnAssign) and isinstance(field.target, ast.Name)):
                continue
            found.pop(field.target.id, None)
            if isinstance(after, ast.Expr) and isinstance(after.value, ast.Constant):
                found[field.target.id] = inspect.cleandoc(str(after.value.value))
    return found


def json_schema(model: type[InputFile], title: str) -> dict[str, Any]:
    """JSON Schema of a file, draft 2020-12."""
    schema = model.model_json_schema(by_alias=True, schema_generator=_Generator)
    return {"$schema": _Generator.schema_dialect, **schema, "title": title}


def _written(default: object, schema: CoreSchema) -> object:
    """A default as its field serialises it; the serialiser may lie below validators and kinds of value."""
    inner: Any = schema
    while "serialization" not in inner:
        inner = inner.get("schema") or inner.get("choices", {}).get("<constant>")
        if inner is None:
            return default
    return inner["serialization"]["function"](default)
