"""A case: its inputs, what a worker needs to run it, and the key under which its figures are kept."""

from __future__ import annotations

import hashlib
import json
import tomllib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path
from typing import Any, Protocol

import cupfem.errors
from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.inputs import InputFile, resolved_toml, toml
from cupfem.inputs.messages import quoted
from cupfem.serving import Serving
from cupfem.vary.paths import Data, Slot, find_slot, value_at, with_value
from cupfem.vary.plan import Plan
from cupfem.vary.values import Change, Setting, Value

Figures = Mapping[str, float | None]
Evaluate = Callable[[Any], Figures]
"""What a worker runs; a function of a module, so that it can be sent."""

PICTURES = ("figures", "report", "cli")
"""Parts of the package that do not change what a case gives."""


@dataclass(frozen=True)
class Case:
    """One case.

    Attributes
    ----------
    inputs:
        Path -> value, for all that varies.
    key:
        Digest of everything that its figures depend on; empty if it cannot be run.
    payload:
        What `evaluate` gets.
    text:
        All inputs, as text.
    error:
        Why it cannot be run.
    """

    inputs: Mapping[str, Value]
    key: str = ""
    payload: Any = field(default=None, repr=False)
    text: str = field(default="", repr=False)
    error: str = ""


class Model(Protocol):
    """What a plan varies: the cup and serving, or a function of plain numbers."""

    @property
    def evaluate(self) -> Evaluate:
        """What runs a case, given its payload."""

    def slot(self, key: str) -> Slot:
        """The place of a value; InputError if there is none."""

    def case(self, settings: Mapping[Slot, Setting]) -> Case:
        """The case with these settings; what is refused becomes its error."""


@dataclass(frozen=True)
class CupModel:
    """Cups and servings, made from the tables of their files, so that every check applies to every case."""

    cup: Data
    serving: Data
    folder: Path
    recorded: tuple[str, ...]
    fineness: float
    evaluate: Evaluate

    def slot(self, key: str) -> Slot:
        """The place of a value; InputError with the nearest key if there is none."""
        return find_slot(key, {"cup": (Cup, self.cup), "serving": (Serving, self.serving)})

    def case(self, settings: Mapping[Slot, Setting]) -> Case:
        """The case with these settings."""
        inputs: dict[str, Value] = {}
        try:
            tables = self._tables(settings, inputs)
            cup, serving = Cup.from_data(tables["cup"]), Serving.from_data(tables["serving"])
        except InputError as error:
            return Case(inputs, error=str(error))
        resolved = resolved_toml(cup)
        text = f"{resolved}\n[serving]\n{_nested(resolved_toml(serving))}"
        # a cup as resolved names no other files, which a worker may not have
        job = CupJob(tomllib.loads(resolved), tables["serving"], self.recorded, self.fineness)
        return Case(inputs, self._key(text), job, text)

    def _tables(self, settings: Mapping[Slot, Setting], inputs: dict[str, Value]) -> dict[str, Data]:
        tables = {"cup": self.cup, "serving": self.serving}
        for slot in sorted(settings, key=_turn):
            setting = settings[slot]
            if not slot.parts:
                inputs[slot.key] = str(setting)
                tables[slot.file] = read_data(self.folder / str(setting), slot.file)
                continue
            if isinstance(setting, Change):
                setting = setting.of(slot.key, _present(slot, tables[slot.file]), slot.kind)
            inputs[slot.key] = setting
            if slot.parts == ("sleeve",):  # names a file, from the folder of the plan
                setting = str(self.folder / str(setting))
            tables[slot.file] = with_value(tables[slot.file], slot.parts, setting)
        return tables

    def _key(self, text: str) -> str:
        return digest([text, list(self.recorded), self.fineness, code_version()])


@dataclass(frozen=True)
class CupJob:
    """What a worker needs to run a case: the tables of the files, which can be sent to another process."""

    cup: Data
    serving: Data
    recorded: tuple[str, ...]
    fineness: float


@dataclass(frozen=True)
class FunctionModel:
    """A function of plain numbers by their names, and of words; it must be a function of a module."""

    evaluate: Evaluate
    names: tuple[str, ...]
    words: tuple[str, ...] = ()

    def slot(self, key: str) -> Slot:
        """The place of a number; InputError if the function has none of this name."""
        known = (*self.names, *self.words)
        if key not in known:
            raise InputError("vary.key", key, f"the function takes {', '.join(known)}")
        return Slot(key, "function", (key,), "word" if key in self.words else "number")

    def case(self, settings: Mapping[Slot, Setting]) -> Case:
        """The case with these settings."""
        inputs: dict[str, Value] = {}
        for slot, setting in settings.items():
            if isinstance(setting, Change):
                return Case(inputs, error=f"{slot.key}: a function has no value that could be changed")
            inputs[slot.key] = setting
        text = json.dumps(inputs, sort_keys=True)
        return Case(inputs, digest([self.evaluate.__qualname__, text]), inputs, text)


def cup_model(plan: Plan, folder: Path, evaluate: Evaluate) -> CupModel:
    """The cup and serving of a plan, from files in a folder; InputError if they cannot be used."""
    first = {varied.keys[0]: varied.list[0] for varied in plan.vary if hasattr(varied, "list")}
    cup, serving = first.get("cup", plan.cup), first.get("serving", plan.serving)
    if cup is None:
        raise InputError("cup", None, "missing", 'write cup = "double_wall.toml", a file beside the plan')
    data: dict[str, Data] = {"cup": read_data(folder / str(cup), "cup"), "serving": {}}
    Cup.load(folder / str(cup))  # for its message, which tells the line
    if serving is not None:
        data["serving"] = read_data(folder / str(serving), "serving")
        Serving.load(folder / str(serving))
    return CupModel(data["cup"], data["serving"], folder, plan.recorded, plan.fineness, evaluate)


@cache
def read_data(path: Path, file: str) -> Data:
    """The tables of a cup or serving file, and of a sleeve that a cup names; InputError if not to be read."""
    model: type[InputFile] = Cup if file == "cup" else Serving
    data = model.prepared(toml.parse(toml.read_text(path), str(path)), path.parent)
    if isinstance(data.get("sleeve"), str):
        worn = toml.parse(toml.read_text(data["sleeve"]), data["sleeve"])
        return data if "cup" in worn else {**data, "sleeve": worn}
    return data


def digest(parts: list[Any]) -> str:
    """A short text that differs whenever the parts do."""
    return hashlib.sha256(json.dumps(parts, sort_keys=True).encode()).hexdigest()[:40]


@cache
def code_version() -> str:
    """The version of the package, with a digest of those of its files that a result depends on."""
    package = Path(cupfem.errors.__file__).parent
    total = hashlib.sha256()
    for path in sorted([*package.rglob("*.py"), *package.rglob("*.toml")]):
        inside = path.relative_to(package)
        if inside.parts[0].removesuffix(".py") not in PICTURES:
            total.update(str(inside.as_posix()).encode() + b"\0" + path.read_bytes())
    return total.hexdigest()[:16]


def all_inputs(text: str) -> dict[str, Value]:
    """Path -> value of everything in the text of a case."""
    data = tomllib.loads(text)
    return dict(_leaves(data, ""))


def _leaves(data: Any, path: str) -> list[tuple[str, Value]]:
    if isinstance(data, dict):
        named = [(quoted(key), item) for key, item in data.items()]
    elif isinstance(data, list) and data and isinstance(data[0], dict):
        named = [(str(item.get("name", number)), item) for number, item in enumerate(data, 1)]
    else:
        return [(path, json.dumps(data) if isinstance(data, list) else data)]
    return [leaf for name, item in named for leaf in _leaves(item, f"{path}.{name}" if path else name)]


def _turn(slot: Slot) -> tuple[bool, bool]:
    """Whole files are put in first, then a sleeve, then single values."""
    return bool(slot.parts), slot.parts != ("sleeve",)


def _present(slot: Slot, data: Data) -> object:
    """What a file has at a place, defaults included."""
    given = value_at(data, slot.parts)
    if given is not None:
        return given
    model: type[InputFile] = Cup if slot.file == "cup" else Serving
    dumped = model.from_data(data).model_dump(mode="json", by_alias=True)
    found = value_at(dumped, slot.parts)
    return _library_value(slot, model.from_data(data)) if found is None else found


def _library_value(slot: Slot, model: InputFile) -> object:
    """Of a material of the library, whose table the cup file need not have."""
    if slot.parts[0] != "material" or not isinstance(model, Cup):
        return None
    value = model.material(slot.parts[1]).values().get(slot.parts[2])
    from cupfem.vary.values import written

    return None if value is None else written(value.value, slot.kind)


def _nested(text: str) -> str:
    """Tables of a text moved into the table "serving"."""
    moved = []
    for line in text.splitlines():
        if line.startswith("[["):
            line = "[[serving." + line[2:]
        elif line.startswith("["):
            line = "[serving." + line[1:]
        moved.append(line)
    return "\n".join(moved) + "\n"
