"""Write the pages about the keys of the files from their schemas: ``python docs/reference/write.py``."""

import re
from pathlib import Path
from typing import Any

from cupfem.cup import cup_schema, sleeve_schema
from cupfem.serving import serving_schema
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


def file_page(title: str, howto: str, schema: dict[str, Any]) -> str:
    """The page of a file whose tables are told by the titles of its models."""
    parts = [
        f"# {title}",
        f"How to write one: {{doc}}`../howto/{howto}`. JSON Schema: `docs/schemas`.",
        table(schema),
    ]
    for name, told in sorted(schema["$defs"].items(), key=lambda item: place(item[0], schema)):
        if told.get("properties"):
            words = " ".join(told.get("description", "").split())
            parts += [f"## {heading(name, schema)}", words, table(told)]
    return "\n\n".join(part for part in parts if part) + "\n"


def uses(name: str, schema: dict[str, Any]) -> list[tuple[str, str, bool]]:
    """Where a table is used: owner (empty: the file), key, and whether as one of a list."""
    found = []
    for owner, told in [("", schema), *schema["$defs"].items()]:
        for key, kind in told.get("properties", {}).items():
            if f"'#/$defs/{name}'" in str(kind):
                found.append((owner, key, "array" in str(kind.get("type", "")) or "items" in kind))
    return found


def place(name: str, schema: dict[str, Any]) -> tuple[int, int]:
    """Order of the tables: that of the keys of the file, those within another after it."""
    keys = list(schema["properties"])
    for owner, key, _ in uses(name, schema):
        if not owner:
            return keys.index(key), 0
        return place(owner, schema)[0], 1
    return len(keys), 0


def heading(name: str, schema: dict[str, Any]) -> str:
    """The table as the file writes it, and the kind of one where there are several."""
    used = uses(name, schema)
    words = re.sub(r"(?<!^)(?=[A-Z])", " ", name).lower()
    if not used:
        return words
    owner, key, listed = used[0]
    if owner:
        above = uses(owner, schema)[0][1]
        if name.startswith("NamedFilm"):  # the model of a list of names has no name of its own
            return f"[{above}]: a correlation for {', '.join(dict.fromkeys(key for _, key, _ in used))}"
        return f"[{above}]: {words}" if above == "films" else f"[{above}.{key}]"
    return f"[[{key}]]" + ("" if words == key else f": {words}") if listed else f"[{key}]"


PAGES = {
    "cup_file": lambda: file_page("The cup file", "cup_file", cup_schema()),
    "sleeve_file": lambda: file_page("The sleeve file", "sleeve", sleeve_schema()),
    "serving_file": lambda: file_page("The serving file", "serving_file", serving_schema()),
    "plan_file": page,
}


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
    for name, text in PAGES.items():
        (HERE / f"{name}.md").write_text(text(), encoding="utf-8")
