"""Commands and their options. Nothing heavy is imported here, so that ``--help`` is quick."""

from __future__ import annotations

import sys
from typing import Annotated, Literal

import typer

EXAMPLE = "cupfem pour geometries/double_wall.toml geometries/serving_galley_tea.toml --out tea --units us"
WORDS = {
    "cup file": "the drawing: outline, layers from inside to outside, base",
    "serving file": "what happens to the cup: drink, room, sips, target",
    "level": "height of the drink's surface above the table",
    "layer, gap, sleeve": "one ply of the wall; a layer of air; a layer around a part of the height",
    "recess, heel": "underside of the base above the table; what the wall stands on",
    "film coefficient": "heat flux through the air or the drink at a surface, per kelvin",
    "station": "a height at which a series in time is kept",
    "free wall": "the outer wall where no finger touches it: its temperature is not a hold time",
    "hold time": "how long a finger pad can stay until pain, or the published limit for its surface",
    "grip band": "where a cup is gripped: between the target's heights, or the middle of the wall",
    "pick-up": "moment after the pour at which the finger touches",
}
GLOSSARY = "\n\n".join(
    ["[bold]Words[/bold]", *(f"[bold]{word}[/bold]: {meaning}" for word, meaning in WORDS.items())]
)

CupFile = Annotated[str, typer.Argument(metavar="CUP", help="Cup file, such as geometries/double_wall.toml.")]
Out = Annotated[
    str | None,
    typer.Option(metavar="DIR", help="Folder to write; left out: a new numbered one in the current folder."),
]
Force = Annotated[bool, typer.Option("--force", help="Replace the folder of an earlier run.")]
Quiet = Annotated[bool, typer.Option("--quiet", help="Print nothing but the name of the folder.")]
Fineness = Annotated[
    float, typer.Option(metavar="NUMBER", help="Cells per length relative to the default, 0.25 to 16.")
]
ServingFile = Annotated[
    str | None, typer.Argument(metavar="SERVING", help="Serving file; left out: the default serving.")
]
Duration = Annotated[
    str | None, typer.Option(metavar="TIME", help='Instead of the serving\'s, such as "5 min".')
]
Report = Annotated[bool, typer.Option("--report", help="Add report.html, one page that can be handed on.")]
Against = Annotated[
    list[str] | None,
    typer.Option(metavar="CUP", help="A further cup to set beside, in the same serving; up to five times."),
]
Accuracy = Annotated[
    str | None,
    typer.Option(
        metavar="DIFFERENCE",
        help='Refine mesh and steps until the temperatures are this exact numerically, such as "0.1 K".',
    ),
]
Log = Annotated[
    str | None,
    typer.Option(
        metavar="FILE", help="A measured log as CSV, drawn over the run: time_s and drink_temperature_degC."
    ),
]
UnitSystem = Annotated[
    Literal["si", "us"], typer.Option(help="us: degF, inches, fluid ounces in tables and pictures.")
]

app = typer.Typer(
    name="cupfem",
    help="From a cup's drawing: how long it can be held, how warm the drink stays, where the heat goes.",
    epilog=f"{GLOSSARY}\n\n[bold]Example[/bold]: {EXAMPLE}",
    add_completion=False,
    rich_markup_mode="rich",
    pretty_exceptions_enable=False,
)


def _version(wanted: bool) -> None:
    if wanted:
        package = sys.modules[__name__.partition(".")[0]]
        typer.echo(f"cupfem {package.__version__}")
        raise typer.Exit


@app.callback()
def common(
    version: Annotated[
        bool, typer.Option("--version", callback=_version, is_eager=True, help="Print the version.")
    ] = False,
) -> None:
    """Take options that stand before the command."""


@app.command(epilog="Example: cupfem draw geometries/double_wall.toml")
def draw(
    cup: CupFile,
    out: Out = None,
    force: Force = False,
    quiet: Quiet = False,
    fineness: Fineness = 1.0,
    units: UnitSystem = "si",
) -> None:
    """Check a cup file: picture of the section, capacity, board mass, layer volumes, mesh quality."""
    from cupfem.cli.jobs import draw_cup

    draw_cup(cup, out, force=force, quiet=quiet, fineness=fineness, units=units)


@app.command(epilog='Example: cupfem pour geometries/double_wall.toml --duration "5 min"')
def pour(
    cup: CupFile,
    serving: ServingFile = None,
    out: Out = None,
    force: Force = False,
    quiet: Quiet = False,
    duration: Duration = None,
    fineness: Fineness = 1.0,
    accuracy: Accuracy = None,
    units: UnitSystem = "si",
    report: Report = False,
    against: Against = None,
    log: Log = None,
) -> None:
    """Run a serving: verdict, table, pictures, series and fields, in one folder."""
    from cupfem.cli.jobs import pour_cup

    pour_cup(
        cup,
        serving,
        out,
        force=force,
        quiet=quiet,
        duration=duration,
        fineness=fineness,
        accuracy=accuracy,
        units=units,
        report=report,
        against=against or (),
        log_path=log,
    )


@app.command(epilog="Example: cupfem hold geometries/double_wall.toml --against geometries/single_board.toml")
def hold(
    cup: CupFile,
    serving: ServingFile = None,
    out: Out = None,
    force: Force = False,
    quiet: Quiet = False,
    asked: Annotated[
        str | None,
        typer.Option(metavar="TIME", help="Hold time to judge by; left out: the target's, or 30 s."),
    ] = None,
    longest: Annotated[str, typer.Option(metavar="TIME", help="Longest hold that is tried.")] = "5 min",
    duration: Duration = None,
    fineness: Fineness = 1.0,
    units: UnitSystem = "si",
    report: Report = False,
    against: Against = None,
) -> None:
    """Where and how long it can be held: hold time against height and pick-up, and what cannot be held."""
    from cupfem.cli.jobs import hold_cup

    hold_cup(
        cup,
        serving,
        out,
        force=force,
        quiet=quiet,
        asked=asked,
        longest=longest,
        duration=duration,
        fineness=fineness,
        units=units,
        report=report,
        against=against or (),
    )


@app.command(epilog='Example: cupfem materials "cupstock board"')
def materials(
    name: Annotated[
        str | None, typer.Argument(metavar="NAME", help="One material in full; left out: all of them.")
    ] = None,
    units: UnitSystem = "si",
) -> None:
    """Print the material library: each value with its range, its mark and its source."""
    from cupfem.cli.library import print_materials

    print_materials(name, units)
