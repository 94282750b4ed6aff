"""The plan file: a cup and a serving, what varies and how, what to record, and the limits."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Annotated, Any, ClassVar, Literal, Self

from pydantic import AfterValidator, Field, Tag, WithJsonSchema, model_validator

from cupfem.inputs import InputFile, Table, json_schema, refused, tag
from cupfem.quantities import Fraction

Combine = Literal[
    "grid", "zip", "one at a time", "latin hypercube", "sobol", "random", "sobol indices", "best"
]
COUNTED: tuple[str, ...] = ("grid", "zip")
"""Designs that take the listed values, of a range as many as it counts."""
SAMPLED: tuple[str, ...] = ("latin hypercube", "sobol", "random", "sobol indices")
"""Designs that draw `samples` points."""
DEFAULT_RECORD = ("board_mass_g", "drink_end_degC", "outer_max_degC", "hold_time_s")


def _scalar(value: Any) -> Any:
    if not isinstance(value, str | int | float | bool):
        raise refused("not a single value", 'write it as in "0.35 mm"')
    return value


_SCALAR_SCHEMA = WithJsonSchema({"type": ["string", "number", "boolean"], "examples": ["0.35 mm", 0.2]})
Scalar = Annotated[Any, AfterValidator(_scalar), _SCALAR_SCHEMA]
Key = Annotated[
    Annotated[str, Tag("<one>")] | Annotated[tuple[str, ...], Tag("<some>")],
    tag(lambda value: "<some>" if isinstance(value, list | tuple) else "<one>"),
]
"""Path of a value; or several paths, which all get the same value (or the same change)."""


class _Varied(Table):
    place: ClassVar[str] = "vary"

    key: Key
    """Path of what varies, such as layer.gap.thickness or serving.room.humidity; or a list of paths."""

    @property
    def keys(self) -> tuple[str, ...]:
        """The paths."""
        return (self.key,) if isinstance(self.key, str) else self.key


class Listed(_Varied):
    """Values to try, one by one."""

    list: tuple[Scalar, ...]
    """The values, as the file would have them; for the keys "cup" and "serving" names of files."""

    @model_validator(mode="after")
    def _some(self) -> Self:
        if not self.list:
            raise refused("no values", 'write list = ["0.5 mm", "1 mm"]', "list")
        return self


class Range(_Varied):
    """Even steps between two values, or any value between them."""

    left_out: ClassVar[Mapping[str, str]] = {"count": "any value between the two"}

    from_: Scalar = Field(alias="from")
    """Lowest value."""
    to: Scalar
    """Highest value."""
    count: Annotated[int, Field(ge=2, le=10_000)] | None = None
    """How many values, both ends included; needed in a grid."""


class Normal(_Varied):
    """A normal distribution."""

    left_out: ClassVar[Mapping[str, str]] = {"mean": "the value in the file"}

    distribution: Literal["normal"]
    """Its name."""
    mean: Scalar | None = None
    """Left out: the value in the file."""
    deviation: Scalar = Field(examples=["3 %"])
    """Standard deviation, with the unit of the value, or as a share of it."""


class Uniform(_Varied):
    """A uniform distribution about the value in the file."""

    distribution: Literal["uniform"]
    """Its name; between two given values write from and to instead."""
    plus_minus: Scalar = Field(examples=["1.5 K"])
    """Half of its width, with the unit of the value, or as a share of it."""


class Lognormal(_Varied):
    """A lognormal distribution."""

    left_out: ClassVar[Mapping[str, str]] = {"median": "the value in the file"}

    distribution: Literal["lognormal"]
    """Its name."""
    median: Scalar | None = None
    """Left out: the value in the file."""
    spread: Fraction
    """Standard deviation of the natural logarithm."""


class Beta(_Varied):
    """A beta distribution between two values; its mean lies at alpha / (alpha + beta) of the way."""

    distribution: Literal["beta"]
    """Its name."""
    alpha: Annotated[float, Field(gt=0)]
    """First shape parameter."""
    beta: Annotated[float, Field(gt=0)]
    """Second shape parameter."""
    from_: Scalar = Field(alias="from")
    """Lowest value."""
    to: Scalar
    """Highest value."""


DISTRIBUTIONS = {"normal": Normal, "uniform": Uniform, "lognormal": Lognormal, "beta": Beta}


def _way(value: Any) -> str:
    if isinstance(value, _Varied):
        return f"<{type(value).__name__.lower()}>"
    given = value if isinstance(value, Mapping) else {}
    if "distribution" in given:
        name = given["distribution"]
        return f"<{name}>" if name in DISTRIBUTIONS else "<normal>"
    return "<range>" if "from" in given or "to" in given else "<listed>"


Vary = Annotated[
    Annotated[Listed, Tag("<listed>")]
    | Annotated[Range, Tag("<range>")]
    | Annotated[Normal, Tag("<normal>")]
    | Annotated[Uniform, Tag("<uniform>")]
    | Annotated[Lognormal, Tag("<lognormal>")]
    | Annotated[Beta, Tag("<beta>")],
    tag(_way),
]


class Limit(Table):
    """What a recorded figure has to keep to."""

    place: ClassVar[str] = "limits"

    at_least: Scalar | None = None
    """Lowest value that is good, with the unit of the figure."""
    at_most: Scalar | None = None
    """Highest value that is good, with the unit of the figure."""

    @model_validator(mode="after")
    def _some(self) -> Self:
        if self.at_least is None and self.at_most is None:
            raise refused("nothing to keep to", "write at_least or at_most", "at_least")
        return self


class Best(Table):
    """The `[best]` table: what the best design has least or most of, within the limits."""

    place: ClassVar[str] = "best"

    least: str | None = Field(default=None, examples=["board_mass_g"])
    """Figure to make small."""
    most: str | None = None
    """Figure to make large, instead of least."""
    generations: Annotated[int, Field(ge=1, le=10_000)] = 30
    """Of the search at the most; each tries about 5 designs per varied value."""
    polish: Annotated[int, Field(ge=0, le=10_000)] = 40
    """Further designs close to the best at the most; zero: none."""

    @property
    def aim(self) -> tuple[str, Literal["least", "most"]]:
        """The figure, and which of it is good."""
        return (self.least, "least") if self.least is not None else (self.most or "", "most")

    @model_validator(mode="after")
    def _one(self) -> Self:
        if (self.least is None) == (self.most is None):
            raise refused("one of least and most belongs here", 'write least = "board_mass_g"', "least")
        return self


class Plan(InputFile):
    """A set of cases."""

    wanted: ClassVar[Mapping[str, str]] = {"vary": "write at least one [[vary]] table"}
    left_out: ClassVar[Mapping[str, str]] = {
        "serving": "the default serving",
        "limits": "the serving's [target]",
    }

    title: str = "Plan"
    """What reports call the plan."""
    cup: str | None = Field(default=None, examples=["double_wall.toml"])
    """Cup file, from the folder of the plan."""
    serving: str | None = None
    """Serving file, from the folder of the plan; left out: the default serving."""
    fineness: Annotated[float, Field(ge=0.25, le=4.0)] = 1.0
    """Cells per length relative to the default."""
    combine: Combine = "grid"
    """How the values of several keys go together."""
    samples: Annotated[int, Field(ge=2, le=1_000_000)] | None = None
    """How many points are drawn; for "sobol indices" each stands for as many cases as keys vary, and two."""
    seed: Annotated[int, Field(ge=0)] = 1
    """Of what is drawn: the same seed gives the same cases."""
    vary: tuple[Vary, ...]
    """What varies."""
    record: tuple[str, ...] = DEFAULT_RECORD
    """Figures to keep: keys of a run's summary, board_mass_g, mass_g, cost."""
    limits: dict[str, Limit] = Field(default_factory=dict)
    """Recorded figure -> what it has to keep to; left out: the serving's [target]."""
    best: Best | None = None
    """The search for the best design, for combine = "best"."""

    def idle(self) -> dict[str, str]:
        """Keys that would change nothing."""
        reasons = {}
        if self.combine not in SAMPLED:
            reasons["samples"] = f'combine = "{self.combine}" draws nothing'
        if self.combine not in (*SAMPLED, "best"):
            reasons["seed"] = f'combine = "{self.combine}" draws nothing'
        if self.combine != "best":
            reasons["best"] = f'combine is "{self.combine}", not "best"'
        return reasons

    @property
    def recorded(self) -> tuple[str, ...]:
        """Figures to keep, with those that limits and the search need."""
        goal = [] if self.best is None else [self.best.aim[0]]
        return tuple(dict.fromkeys([*self.record, *self.limits, *goal]))

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        if not self.vary:
            raise refused("nothing varies", "write at least one [[vary]] table", "vary")
        keys = [key for varied in self.vary for key in varied.keys]
        for number, key in enumerate(keys):
            if key in keys[:number]:
                raise refused("varied twice", "keep one of the two", "vary", key)
        self.refuse_idle()
        if self.combine in SAMPLED and self.samples is None:
            raise refused("missing", "write samples = 256", "samples")
        if self.combine in ("sobol", "sobol indices") and (self.samples or 1).bit_count() != 1:
            why = "Sobol points are even only in a number that is a power of two"
            raise refused(why, f"write {2 ** (self.samples or 1).bit_length()}", "samples", self.samples)
        if self.combine == "best" and self.best is None:
            raise refused("missing", 'write a [best] table with least = "board_mass_g"', "best")
        for number, varied in enumerate(self.vary, 1):
            _check_way(self.combine, varied, f"vary.{number}")
        return self


def _check_way(combine: str, varied: _Varied, path: str) -> None:
    """Each way to vary goes with some of the designs only."""
    if isinstance(varied, Range):
        if combine in COUNTED and varied.count is None:
            raise refused(f'missing: "{combine}" takes listed values', "write count = 5", f"{path}.count")
        if combine not in COUNTED and varied.count is not None:
            why = f'would change nothing: "{combine}" takes any value between the two'
            raise refused(why, "leave it out", f"{path}.count")
    elif not isinstance(varied, Listed) and combine in (*COUNTED, "best"):
        why = f'"{combine}" cannot draw from a distribution'
        raise refused(why, 'write combine = "latin hypercube", or from and to', f"{path}.distribution")


def load_plan(path: str | Path) -> Plan:
    """Read a plan file; InputError, in one line, for anything that cannot be used."""
    return Plan.load(path)


def plan_schema() -> dict[str, Any]:
    """JSON Schema of a plan file."""
    return json_schema(Plan, "cupfem plan file")
