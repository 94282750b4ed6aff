"""Write the JSON Schemas of the input files beside this script: ``python docs/schemas/write.py``."""

import json
from pathlib import Path

from cupfem.cup import cup_schema, sleeve_schema
from cupfem.serving import serving_schema
from cupfem.vary import plan_schema

HERE = Path(__file__).parent
SCHEMAS = {
    "cup.schema.json": cup_schema,
    "sleeve.schema.json": sleeve_schema,
    "serving.schema.json": serving_schema,
    "plan.schema.json": plan_schema,
}


def text_of(name: str) -> str:
    """The text of one schema file."""
    return json.dumps(SCHEMAS[name](), indent=2, ensure_ascii=False) + "\n"


if __name__ == "__main__":
    for name in SCHEMAS:
        (HERE / name).write_text(text_of(name), encoding="utf-8")
