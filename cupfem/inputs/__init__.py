"""Input files: tables as frozen models, TOML in and out, and every refusal as one line.

`tables` holds the base classes, `messages` turns a failed validation into one InputError, `toml` reads and
writes the text, `resolved` tells which defaults a model used and writes it as a file that gives it again,
`schema` publishes the format.
"""

from cupfem.inputs.messages import refused
from cupfem.inputs.resolved import defaults_used, resolved_toml
from cupfem.inputs.schema import json_schema
from cupfem.inputs.tables import InputFile, Name, NotNegative, Positive, Table, tag, within

__all__ = [
    "InputFile",
    "Name",
    "NotNegative",
    "Positive",
    "Table",
    "defaults_used",
    "json_schema",
    "refused",
    "resolved_toml",
    "tag",
    "within",
]
