"""Write the page about the keys of the plan file from its schema: ``python docs/reference/write.py``."""

from pathlib import Path
from typing import Any

from cupfem.vary import plan_schema

HERE = Path(__file__).parent
ORDER = ("Listed", "Range", "Normal", "Uniform", "Lognormal", "Beta", "Limit", "Best")
TITLES = {
    "Listed": "[[vary]]: a list", "Range": "[[vary]]: a range", "Normal": "[[vary]]: a normal distribution",
    "Uniform": "[[vary]]: a uniform distribution", "Lognormal": "[[vary]]: a lognormal distribution",
    "Beta": "[[vary]]: a beta distribution", "Limit": "[limits]: each figure", "Best": "[best]",
}  # fmt: skip


def page() -> str:
    """The page."""
    schema = plan_schema()
    parts = ["# The plan file", "How to write one: {doc}`../howto/vary`.", table(schema)]
    for name in ORDER:
        parts += [f"## {TITLES[name]}", schema["$defs"][name]["description"], table(schema["$defs"][name])]
    return "\n\n".join(parts) + "\n"


def table(schema: dict[str, Any]) -> str:
    """Key, what it takes, its default, and what it is."""
    needed = schema.get("required", [])
    rows = ["| key | takes | left out | |", "|---|---|---|---|"]
    for key, told in schema["properties"].items():
        default = "needed" if key in needed else shown(told.get("default", ""))
        rows.append(
            f"| `{key}` | {takes(told)} | {default} | {' '.join(told.get('description', '').split())} |"
        )
    return "\n".join(rows)


def takes(told: dict[str, Any]) -> str:
    """The kind of value of a key."""
    if "enum" in told:
        return ", ".join(f'`"{word}"`' for word in told["enum"])
    if "const" in told:
        return f'`"{told["const"]}"`'
    if "oneOf" in told or "anyOf" in told:
        kinds = [takes(one) for one in told.get("oneOf", told.get("anyOf", []))]
        return " or ".join(dict.fromkeys(kinds))
    kinds = told.get("type", "table")
    kinds = [kinds] if isinstance(kinds, str) else kinds
    words = {"string": "text", "number": "number", "integer": "whole number", "boolean": "true or false",
             "array": "list", "object": "table"}  # fmt: skip
    return ", ".join(words.get(kind, kind) for kind in kinds)


def shown(default: Any) -> str:
    """A default as the file writes it."""
    if default == "":
        return ""
    text = ", ".join(f'"{item}"' for item in default) if isinstance(default, list) else repr(default)
    return f"`[{text}]`" if isinstance(default, list) else f"`{text}`".replace("'", '"')


if __name__ == "__main__":
    (HERE / "plan_file.md").write_text(page(), encoding="utf-8")
