"""The films of a serving: per edge one fixed film or one named correlation."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, ClassVar, Generic, Literal, TypeVar, get_args

from pydantic import Field, Tag

from cupfem.films import FREEBOARD_FACTOR
from cupfem.inputs import NotNegative, Positive, Table, tag
from cupfem.quantities import FilmCoefficient, Fraction, Temperature

Wetted = Literal["natural convection in the drink"]
Wall = Literal["natural convection and radiation"]
Outside = Literal["natural convection and radiation", "local natural convection and radiation"]
Surface = Literal[
    "Shah", "Chilton-Colburn", "Chilton-Colburn with Stefan flow", "Bower-Saylor", "Ryan-Harleman"
]
Underside = Literal["recess air and table"]
Heel = Literal["insulated", "contact with the table"]
End = Literal["insulated"]

SURFACE_CORRELATIONS: tuple[str, ...] = get_args(Surface)
"""Closures of evaporation; convection and radiation of the surface go with each."""
CORRELATIONS: Mapping[str, tuple[str, ...]] = {
    "wetted": get_args(Wetted),
    "dry": get_args(Wall),
    "surface": SURFACE_CORRELATIONS,
    "outside": get_args(Outside),
    "underside": get_args(Underside),
    "heel": get_args(Heel),
    "brim": get_args(End),
}
"""Names that are offered for each edge, the default first."""

Name = TypeVar("Name", bound=str)


class DrinkFilm(Table):
    """A fixed film to the drink."""

    never: ClassVar[Mapping[str, str]] = {"surroundings": "the surroundings of this film are the drink"}

    coefficient: Annotated[FilmCoefficient, NotNegative]
    """Heat flux over surface minus drink temperature."""


class FixedFilm(Table):
    """A fixed film to surroundings of one temperature."""

    coefficient: Annotated[FilmCoefficient, NotNegative]
    """Heat flux over surface minus surroundings temperature."""
    surroundings: Temperature = Field(examples=["22 degC"])
    """What the film exchanges heat with."""


class NamedFilm(Table, Generic[Name]):
    """A film by the name of its correlation."""

    correlation: Name
    """One of the names that are offered for the edge."""


class SurfaceFilm(NamedFilm[Surface]):
    """The closure of a surface below a rim."""

    freeboard_factor: Annotated[Fraction, Positive] = FREEBOARD_FACTOR
    """Share of the closure's fluxes that a surface below the brim gives off, without a lid."""


def _is_named(value: Any) -> str:
    named = isinstance(value, NamedFilm) or (isinstance(value, Mapping) and "correlation" in value)
    return "<named>" if named else "<fixed>"


_Fixed = Annotated[FixedFilm, Tag("<fixed>")]
_FixedToDrink = Annotated[DrinkFilm, Tag("<fixed>")]
_named, _by_key = Tag("<named>"), tag(_is_named)


class Films(Table):
    """The `[films]` table."""

    place: ClassVar[str] = "films"

    wetted: Annotated[_FixedToDrink | Annotated[NamedFilm[Wetted], _named], _by_key] = NamedFilm[Wetted](
        correlation="natural convection in the drink"
    )
    """Inside of wall and base below the level."""
    dry: Annotated[_Fixed | Annotated[NamedFilm[Wall], _named], _by_key] = NamedFilm[Wall](
        correlation="natural convection and radiation"
    )
    """Inside of the wall above the level."""
    surface: Annotated[_Fixed | Annotated[SurfaceFilm, _named], _by_key] = SurfaceFilm(correlation="Shah")
    """The drink's surface: a name is the closure of its evaporation, with convection and radiation beside it;
    a fixed film replaces all three."""
    outside: Annotated[_Fixed | Annotated[NamedFilm[Outside], _named], _by_key] = NamedFilm[Outside](
        correlation="natural convection and radiation"
    )
    """Outside of the wall: the mean coefficient of the height everywhere, or the local one."""
    underside: Annotated[_Fixed | Annotated[NamedFilm[Underside], _named], _by_key] = NamedFilm[Underside](
        correlation="recess air and table"
    )
    """Below the base."""
    heel: Annotated[_Fixed | Annotated[NamedFilm[Heel], _named], _by_key] = NamedFilm[Heel](
        correlation="insulated"
    )
    """Where the wall stands on the table."""
    brim: Annotated[_Fixed | Annotated[NamedFilm[End], _named], _by_key] = NamedFilm[End](
        correlation="insulated"
    )
    """The wall's upper end."""
