"""JSON Schema of a file, for editors that complete and check it while it is written."""

from __future__ import annotations

from typing import Any

from pydantic.json_schema import GenerateJsonSchema, JsonSchemaValue
from pydantic_core import CoreSchema, core_schema

from cupfem.inputs.tables import InputFile


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

    def field_title_should_be_set(self, schema: Any) -> bool:
        return False


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
