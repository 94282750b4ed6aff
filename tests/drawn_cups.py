"""Random cup files: valid ones of every family, and broken ones with one fault each."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from copy import deepcopy
from typing import Any

import numpy as np

Table = dict[str, Any]
Random = np.random.Generator

BOARDS = (
    "cupstock board",
    "kraft liner",
    "polypropylene",
    "moulded pulp",
    "stainless steel",
    "soda-lime glass",
)
COATINGS = ("LDPE coating", "PLA coating", "dispersion barrier")


def mm(value: float) -> str:
    return f"{value:.4f} mm"


class Drawing:
    """A random cup as the tables of a file, with the values that were drawn, by key."""

    def __init__(self, random: Random):
        self.random = random
        self.drawn: dict[str, list[float]] = {}
        self.keys: Counter[str] = Counter()
        self.number = 0
        self.height = self.draw("cup.height", 60.0, 160.0)
        self.data: Table = {"title": "Random cup"}
        self.layers: list[Table] = []
        self.even: tuple[float, float] | None = None
        self.has_hollows = False

    def draw(self, key: str, low: float, high: float) -> float:
        value = round(float(self.random.uniform(low, high)), 4)
        self.drawn.setdefault(key, []).append(value)
        return value

    def chance(self, share: float) -> bool:
        return bool(self.random.random() < share)

    def pick(self, words: tuple[str, ...]) -> str:
        return str(self.random.choice(words))

    def layer(self, name: str, **keys: Any) -> Table:
        self.number += 1
        table = {"name": f"{name}{self.number}", **keys}
        self.layers.append(table)
        return table

    # -- parts -----------------------------------------------------------------------------------------------

    def outline(self) -> None:
        foot, top = self.draw("cup.inner_foot_diameter", 45, 70), self.draw("cup.inner_top_diameter", 60, 95)
        table: Table = {"height": mm(self.height)}
        if self.chance(0.3):
            count = int(self.random.integers(2, 5))
            heights = np.linspace(0.0, self.height, count + 2)
            radii = np.linspace(foot, top, count + 2) + self.random.uniform(-1.5, 1.5, count + 2)
            pairs = zip([0.0, *heights[1:-1], self.height], radii, strict=True)
            table["inner_profile"] = [[mm(z), mm(r)] for z, r in pairs]
            if self.chance(0.5):
                table["inner_curve"] = "spline"
        else:
            outside = self.chance(0.3)
            table["top_outside_diameter" if outside else "inner_top_diameter"] = mm(top + 8 * outside)
            outside = self.chance(0.3)
            table["foot_outside_diameter" if outside else "inner_foot_diameter"] = mm(foot + 8 * outside)
        self.data["cup"] = table

    def base(self) -> None:
        if self.chance(0.15):
            self.data["base"] = "none"
            return
        self.data["base"] = {
            "material": self.pick(BOARDS),
            "thickness": mm(self.draw("base.thickness", 0.2, 3.0)),
            "recess": mm(self.draw("base.recess", 1.0, 10.0)),
        }

    def inner(self) -> None:
        if self.chance(0.4):
            self.layer(
                "coat", material=self.pick(COATINGS), thickness=f"{self.draw('coating um', 15, 60)} um"
            )
        self.solid("wall", 0.25, 2.0)

    def solid(self, name: str, low: float, high: float, **keys: Any) -> Table:
        thickness = self.draw("layer.thickness", low, high)
        kind = self.random.integers(4)
        if kind == 0 and "from" not in keys:
            other = thickness * self.draw("thickness ratio", 0.5, 1.5)
            along = [["0 mm", mm(thickness)], [mm(self.height), mm(other)]]
            return self.layer(name, material=self.pick(BOARDS), thickness_along=along, **keys)
        if kind == 1:
            grams = f"{self.draw('layer.grammage', 150, 400)} g/m^2"
            return self.layer(name, material="cupstock board", grammage=grams, **keys)
        return self.layer(name, material=self.pick(BOARDS), thickness=mm(thickness), **keys)

    def span(self) -> tuple[float, float]:
        """Ends of a layer; over a gap it stops before the wall moves in."""
        low, high = self.even or (0.2 * self.height, 0.88 * self.height)
        first = self.draw("layer.from", low, low + 0.15 * self.height)
        return first, self.draw("layer.to", high - 0.13 * self.height, high)

    def gap(self) -> None:
        low, high = self.span()
        self.even = low, high
        width = self.draw("gap.thickness", 0.3, 3.0)
        keys: Table = {"material": "air", "from": mm(low), "to": mm(high)}
        if self.chance(0.3):
            other = self.draw("gap, upper end", 0.3, 3.0)
            keys["thickness_along"] = [[mm(low), mm(width)], [mm(high), mm(other)]]
        else:
            keys["thickness"] = mm(width)
        keys["blend"] = mm(max(self.draw("layer.blend", 2.0, 6.0), 2.0 * width))
        for key, value in (
            ("contact_fraction", round(float(self.random.uniform(0, 0.1)), 3)),
            ("contact_conductance", f"{self.draw('contact_conductance', 50, 300)} W/(m^2 K)"),
            ("pressure", f"{self.draw('pressure Pa', 0, 1000)} Pa"),
            ("contact", f"{self.draw('contact', 50, 500)} W/(m^2 K)"),
        ):
            if self.chance(0.35):
                keys[key] = value
        if "blend" in keys and keys.get("thickness_along"):
            keys["blend"] = mm(6.0)
        self.layer("gap", **keys)
        skin = self.solid("skin", 0.2, 0.6)
        if self.chance(0.3):
            skin["inner_emissivity"] = 0.1
        if self.chance(0.2):
            skin["outer_emissivity"] = 0.8

    def embossed(self) -> None:
        self.has_hollows = True
        height = self.draw("hollow.height", 0.3, 1.0)
        ridge = {
            "height": mm(height),
            "crest_width": mm(self.draw("hollow.crest_width", 2.0, 4.0)),
            "flank_angle": f"{self.draw('hollow.flank_angle', 45, 60)} deg",
            "first": mm(0.4 * self.height),
            "pitch": mm(self.draw("hollow.pitch", 9.0, 11.0)),
            "count": int(self.random.integers(1, 4)),
        }
        self.layer("hollow", material="air", ridge=ridge)
        self.layer("skin", material="kraft liner", thickness=mm(self.draw("skin", 0.15, 0.3)))

    def fluted(self) -> None:
        low, high = self.span()
        ends = {"from": mm(low), "to": mm(high)}
        if self.chance(0.5):
            cell: Table = {"flute": {"letter": "E", "medium_thickness": mm(self.draw("medium", 0.1, 0.2))}}
            if self.chance(0.5):
                height = self.draw("flute.height", 0.8, 2.5)
                pitch = mm(2.6 * height)
                cell = {"flute": {"height": mm(height), "pitch": pitch, "medium_thickness": mm(0.1 * height)}}
        else:
            cell = {
                "strut": {
                    "height": mm(self.draw("strut.height", 0.8, 3.0)),
                    "pitch": mm(self.draw("strut.pitch", 4.0, 12.0)),
                    "thickness": mm(self.draw("strut.thickness", 0.2, 0.6)),
                }
            }
        self.layer("core", material="kraft liner", **ends, **cell)
        self.layer("liner", material="kraft liner", thickness=mm(self.draw("liner", 0.15, 0.3)), **ends)

    def ridges(self) -> None:
        ridge: Table = {
            "height": mm(self.draw("ridge.height", 0.5, 3.0)),
            "crest_width": mm(self.draw("ridge.crest_width", 0.4, 1.0)),
            "flank_angle": f"{self.draw('ridge.flank_angle', 0, 40)} deg",
        }
        if self.chance(0.5):
            ridge["crest"] = "rounded"
        if self.chance(0.5):
            ridge["at"] = [mm(0.44 * self.height), mm(0.44 * self.height + 0.12 * self.height)]
        else:
            ridge |= {
                "first": mm(0.42 * self.height),
                "pitch": mm(9.0),
                "count": int(self.random.integers(1, 4)),
            }
        self.layer("rib", material=self.pick(("polypropylene", "silicone rubber")), ridge=ridge)

    def loose(self) -> None:
        low, high = self.span()
        keys: Table = {"fit": f"{self.draw('layer.fit', 50, 800)} W/(m^2 K)", "from": mm(low), "to": mm(high)}
        if self.chance(0.4):
            keys["fit_gap"] = ["0 mm", mm(self.draw("fit_gap", 0.0, 0.8))]
        self.solid("band", 0.5, 3.0, **keys)

    def sleeve(self) -> None:
        low, high = self.even or (0.2 * self.height, 0.8 * self.height)
        bottom = self.draw("sleeve.bottom", low, low + 0.1 * self.height)
        height = self.draw("sleeve.height", 0.5 * (high - bottom), 0.99 * (high - bottom))
        table: Table = {
            "height": mm(height),
            "bottom": mm(bottom),
            "layer": [
                {"name": "felt", "material": "wool felt", "thickness": mm(self.draw("felt", 1.0, 3.0))}
            ],
        }
        if self.chance(0.7):
            table["fit"] = f"{self.draw('sleeve.fit', 50, 800)} W/(m^2 K)"
        self.data["sleeve"] = table

    def file(self) -> Table:
        """The tables of the file."""
        self.outline()
        self.base()
        self.inner()
        for part in (self.gap, self.embossed):
            if self.chance(0.45):
                part()
        parts: list[Callable[[], None]] = [self.fluted, self.loose, self.sleeve, self.ridges]
        number = int(self.random.integers(5))
        if number < (0 if self.has_hollows else 3 if "inner_profile" in self.data["cup"] else 4):
            parts[number]()
        self.data["layer"] = self.layers
        _count(self.data, "", self.keys)
        return self.data


def _count(value: Any, path: str, keys: Counter[str]) -> None:
    if isinstance(value, dict):
        for key, inner in value.items():
            here = f"{path}.{key}" if path else key
            keys[here] += 1
            _count(inner, here, keys)
    elif isinstance(value, list) and value and isinstance(value[0], dict):
        for item in value:
            _count(item, path, keys)


def valid(seed: int) -> Drawing:
    """A random valid cup; the same for the same seed."""
    drawing = Drawing(np.random.default_rng(seed))
    drawing.file()
    return drawing


# -- faults --------------------------------------------------------------------------------------------------


def _first(data: Table) -> Table:
    first: Table = data["layer"][0]
    for key in ("thickness", "grammage", "thickness_along"):
        first.pop(key, None)
    first["thickness"] = "0.5 mm"
    return first


FAULTS: dict[str, Callable[[Table], object]] = {
    "negative thickness": lambda d: _first(d).update(thickness="-0.3 mm"),
    "no thickness": lambda d: _first(d).pop("thickness"),
    "zero thickness": lambda d: _first(d).update(thickness="0 mm"),
    "bare number": lambda d: _first(d).update(thickness=0.35),
    "decimal comma": lambda d: _first(d).update(thickness="0,35 mm"),
    "wrong unit": lambda d: _first(d).update(thickness="0.35 degC"),
    "wall of a metre": lambda d: _first(d).update(thickness="0.9 m"),
    "two thicknesses": lambda d: _first(d).update(grammage="200 g/m^2"),
    "unknown key": lambda d: _first(d).update(thicknes="0.3 mm"),
    "unknown material": lambda d: _first(d).update(material="cupstok board"),
    "gas inside": lambda d: _first(d).update(material="air"),
    "loose inside": lambda d: _first(d).update(fit="300 W/(m^2 K)"),
    "name with a space": lambda d: _first(d).update(name="my wall"),
    "name of the base": lambda d: _first(d).update(name="base"),
    "ends before it begins": lambda d: _first(d).update({"from": "40 mm", "to": "30 mm"}),
    "above the brim": lambda d: _first(d).update(to="400 mm"),
    "a wall with a hole": lambda d: [la.update({"from": "20 mm"}) for la in d["layer"]],
    "no layers": lambda d: d.update(layer=[]),
    "no cup": lambda d: d.pop("cup"),
    "no base": lambda d: d.pop("base"),
    "low cup": lambda d: d["cup"].update(height="1 mm"),
    "height without unit": lambda d: d["cup"].update(height="95"),
    "handle": lambda d: d.update(handle={"width": "10 mm"}),
    "two feet": lambda d: d["cup"].update(
        {"inner_foot_diameter": "50 mm", "foot_outside_diameter": "52 mm", "inner_top_diameter": "70 mm"}
    ),
    "gas outermost": lambda d: d["layer"].append({"name": "open", "material": "air", "thickness": "1 mm"}),
    "ring above the brim": lambda d: d["layer"].append(_ring(at=["300 mm"])),
    "rings that meet": lambda d: d["layer"].append(_ring(first="30 mm", pitch="1 mm", count=4)),
    "ring without a place": lambda d: d["layer"].append(_ring()),
    "flank too flat": lambda d: d["layer"].append(_ring(at=["40 mm"], flank_angle="80 deg")),
    "open flutes": lambda d: d["layer"].append(
        {"name": "open", "material": "kraft liner", "flute": {"letter": "E", "medium_thickness": "0.1 mm"}}
    ),
    "letter": lambda d: d["layer"].append(
        {"name": "open", "material": "kraft liner", "flute": {"letter": "B", "medium_thickness": "0.1 mm"}}
    ),
    "long sleeve": lambda d: d.update(sleeve=_sleeve(height="300 mm")),
    "sleeve without place": lambda d: d.update(sleeve=_sleeve(bottom=None)),
    "tight sleeve": lambda d: d.update(
        sleeve=_sleeve(bottom_inside_diameter="30 mm", top_inside_diameter="31 mm", fit="300 W/(m^2 K)")
    ),
    "missing sleeve": lambda d: d.update(sleeve="nowhere/sleeve.toml"),
}


def _ring(**keys: Any) -> Table:
    ridge = {"height": "1 mm", "crest_width": "1 mm", "flank_angle": "10 deg", **keys}
    return {"name": "ring", "material": "silicone rubber", "ridge": ridge}


def _sleeve(**keys: Any) -> Table:
    layer = {"name": "felt", "material": "wool felt", "thickness": "2 mm"}
    table = {"height": "30 mm", "bottom": "20 mm", "layer": [layer], **keys}
    return {key: value for key, value in table.items() if value is not None}


def broken(seed: int) -> tuple[str, Table]:
    """A random cup with one fault, and the fault's name."""
    name = list(FAULTS)[seed % len(FAULTS)]
    data = deepcopy(valid(seed).data)
    FAULTS[name](data)
    return name, data
