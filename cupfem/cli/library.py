"""The material library on the terminal."""

from __future__ import annotations

from collections.abc import Iterable

from rich.console import Console
from rich.markup import escape
from rich.table import Table

from cupfem.errors import InputError, nearest
from cupfem.materials import Material, library, sources_table
from cupfem.quantities import Units

HEADS = ("property", "value, range", "mark: source")


def print_materials(name: str | None, units: Units) -> None:
    """Print one material in full or all of them; InputError for a name that is none."""
    console = Console(highlight=False)
    known = library()
    if name is None:
        console.print(materials_table(known.values(), units))
        console.print("A material of your own is a table of the cup file; its keys are those above.")
        return
    if name not in known:
        hint = nearest(name, known)
        why = f"not in the library.{hint}" if hint else "not in the library"
        raise InputError("material", name, why, "cupfem materials lists them")
    material = known[name]
    console.print(materials_table([material], units))
    console.print(f"kind: {material.kind}; surface, for the contact of a finger: {material.surface_class}")
    if material.notes:
        console.print(escape(material.notes))


def materials_table(materials: Iterable[Material], units: Units) -> Table:
    """Three columns, so that sources stay readable at 80 characters."""
    table = Table(*HEADS, box=None, pad_edge=False)
    table.columns[0].no_wrap = table.columns[1].no_wrap = True
    for material in materials:
        table.add_row(f"[bold]{escape(material.name)}[/bold]", "", escape(material.title))
        for row in sources_table([material], units):
            spread = f"\n{row.range}" if row.range else ""
            source = f"[italic]{row.mark}[/italic]: {escape(row.source)}"
            table.add_row(f"  {row.property}", escape(row.value + spread), source)
    return table
