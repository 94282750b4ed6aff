"""Random cup and serving files, good and broken, from a seed; sizes and materials are invented.

Half are drawn from nothing, with extremes; half are a shipped file with something changed. About a third of
all are then broken: a wrong unit, a lost key, a number out of all bounds, a damaged byte.
"""

from __future__ import annotations

import random
import tomllib
from collections.abc import Callable
from typing import Any

from shipped import CUPS, SERVINGS

from cupfem.inputs import toml

Data = dict[str, Any]

BROKEN = 0.33
"""Share of the files that are broken on purpose."""
LONGEST = 1800.0
"""Longest duration [s] of a serving that was drawn: a march of a day is long, not hung."""
LIBRARY = (
    "cupstock board", "clay-coated board", "corrugated board", "moulded pulp", "wood", "cork",
    "LDPE coating", "expanded polystyrene", "polypropylene", "silicone rubber", "porcelain",
    "stoneware", "soda-lime glass", "stainless steel", "aluminium foil",
)  # fmt: skip
THICKNESSES = (15e-3, 50e-3, 0.3, 0.35, 0.5, 1.0, 2.0, 4.0, 15.0)  # mm
WRONG_VALUES = (
    "", "nan mm", "inf mm", "-1 mm", "0 mm", "1e400 mm", "1e-300 mm", "0,5 mm", "9**9**9", "20 C", "12 oz",
    "5 kg", "none", "1 m", "1 nm", "1000 degC", "-300 degC", "\u0000", "ü" * 300, "cupstok board", "air",
    -1, 0, 1, 1e308, 10**400, True, [], {}, [[]], [["0 s", "20 degC"]], ["1 mm", "2 mm"],
    {"coefficient": "1 W"},
)  # fmt: skip
WRONG_KEYS = ("", "handle", "thickness", "temperature", "ü", "a.b", "layer", "material", "from", "cup", "lid")


def draw_whole(choose: random.Random) -> tuple[str, str]:
    """The texts of a cup file and of a serving file, none of them broken and without fingers."""
    cup, serving = _pair(choose)
    serving.pop("pad", None)
    return toml.write(cup), toml.write(serving)


def draw(choose: random.Random) -> tuple[str, str]:
    """The texts of a cup file and of a serving file."""
    cup, serving = _pair(choose)
    texts = [toml.write(cup), toml.write(serving)]
    if choose.random() < BROKEN:
        which = choose.randrange(2)
        texts[which] = _broken(choose, (cup, serving)[which])
    return texts[0], texts[1]


def _pair(choose: random.Random) -> tuple[Data, Data]:
    cup = (
        _random_cup(choose) if choose.random() < 0.5 else _changed(choose, _shipped(choose, CUPS), _vary_cup)
    )
    serving = (
        _random_serving(choose, _height(cup))
        if choose.random() < 0.6
        else _changed(choose, _shipped(choose, SERVINGS), _vary_serving)
    )
    return cup, serving


def _shipped(choose: random.Random, paths: list[Any]) -> Data:
    return tomllib.loads(choose.choice(paths).read_text(encoding="utf-8"))


def _height(cup: Data) -> float:
    """Height of a cup [mm]; all drawn and shipped ones tell it in millimetres."""
    return float(cup["cup"]["height"].split()[0])


def _mm(value: float) -> str:
    return f"{value:.6g} mm"


# -- cups ----------------------------------------------------------------------------------------------------


def _random_cup(choose: random.Random) -> Data:
    """A tapered cup of 20 ml to 20 l with one to five layers, gaps between them now and then."""
    volume = 10.0 ** choose.uniform(1.3, 4.3)  # ml
    slender = choose.uniform(0.6, 2.5)  # height over diameter
    top = 10.0 * (volume / (0.785 * slender)) ** (1.0 / 3.0) * choose.uniform(1.0, 1.15)
    height = top * slender
    materials = {"trial": _own_material(choose)}
    layers = _random_layers(choose, height)
    cup: Data = {
        "title": "Drawn at random",
        "cup": {
            "height": _mm(height),
            "inner_top_diameter": _mm(top),
            "inner_foot_diameter": _mm(top * choose.choice([1.0, choose.uniform(0.7, 1.0)])),
        },
        "layer": layers,
        "material": materials,
    }
    if choose.random() < 0.15:
        return {"title": cup["title"], "base": "none"} | cup
    thickness, recess = choose.choice(THICKNESSES[1:]), choose.choice([0.5, 3.0, 8.0])
    return cup | {"base": {"material": _solid(choose), "thickness": _mm(thickness), "recess": _mm(recess)}}


def _own_material(choose: random.Random) -> Data:
    """A solid between foam and silver: k from 1e-4 to 400 W/(m K), emissivity 0 and 1 among others."""
    k = 10.0 ** choose.uniform(-4.0, 2.602)
    return {
        "conductivity_through": f"{k:.4g} W/(m K)",
        "conductivity_along": f"{min(400.0, k * 10.0 ** choose.uniform(0.0, 1.0)):.4g} W/(m K)",
        "density": f"{10.0 ** choose.uniform(1.0, 4.0):.4g} kg/m^3",
        "specific_heat": f"{choose.uniform(200.0, 3000.0):.4g} J/(kg K)",
        "emissivity": choose.choice(["0", "1", "0.5", "0.9"]),
        "surface_class": choose.choice(["board", "plastic", "glazed", "metal"]),
    }


def _solid(choose: random.Random) -> str:
    return "trial" if choose.random() < 0.3 else choose.choice(LIBRARY)


def _random_layers(choose: random.Random, height: float) -> list[Data]:
    count = choose.choice([1, 1, 2, 2, 3, 4])
    layers: list[Data] = []
    for number in range(count):
        if number and choose.random() < 0.5:
            layers.append(_random_gap(choose, number, height))
        thickness = _mm(choose.choice(THICKNESSES))
        layers.append({"name": f"ply{number}", "material": _solid(choose), "thickness": thickness})
    if choose.random() < 0.2:
        low, high = sorted(choose.uniform(0.1, 0.9) * height for _ in range(2))
        layers.append({"name": "band", "material": _solid(choose), "thickness": "1.5 mm",
                       "from": _mm(low), "to": _mm(high)})  # fmt: skip
    return layers


def _random_gap(choose: random.Random, number: int, height: float) -> Data:
    gap: Data = {"name": f"gap{number}", "material": "air", "thickness": _mm(choose.choice([0.1, 1.0, 5.0]))}
    if choose.random() < 0.7:
        gap |= {"from": _mm(choose.uniform(0.1, 0.3) * height), "to": _mm(choose.uniform(0.7, 0.9) * height)}
    if choose.random() < 0.3:
        gap["contact_fraction"] = choose.choice([0.0, 0.02, 0.5, 1.0])
    if choose.random() < 0.2:
        gap["pressure"] = choose.choice(["0 Pa", "1 Pa", "1000 Pa"])
    if choose.random() < 0.3:
        gap |= {"inner_emissivity": choose.choice([0.0, 1.0]), "outer_emissivity": choose.choice([0.0, 1.0])}
    return gap


def _vary_cup(choose: random.Random, cup: Data) -> None:
    layer = choose.choice(cup["layer"])
    changes: list[Callable[[], object]] = [
        lambda: layer.update(thickness=_mm(choose.choice(THICKNESSES))),
        lambda: layer.update(material=choose.choice([*LIBRARY, "air"])),
        lambda: cup["cup"].update(inner_top_diameter=_mm(choose.uniform(40.0, 160.0))),
        lambda: cup["cup"].update(height=_mm(choose.uniform(15.0, 400.0))),
        lambda: cup.update(base="none"),
        lambda: layer.update({"from": _mm(choose.uniform(0.0, 90.0))}),
    ]
    choose.choice(changes)()


# -- servings ------------------------------------------------------------------------------------------------


def _random_serving(choose: random.Random, height: float) -> Data:
    """A serving with extremes: a degree above the room, 99.9 degC, a cup that is drunk empty."""
    room = choose.choice([22.0, 22.0, -30.0, 5.0, 45.0])
    hot = choose.choice([85.0, 99.9, room + 1.0, choose.uniform(room + 1.0, 99.0)])
    duration = choose.choice([5.0, 30.0, 60.0, 120.0, 600.0])
    serving: Data = {
        "title": "Drawn at random",
        "duration": f"{duration:g} s",
        "drink": {"temperature": f"{hot:.6g} degC", **_fill(choose, height)},
        "room": {"temperature": f"{room:g} degC", "humidity": choose.choice([0.0, 0.45, 0.05]),
                 "air_speed": choose.choice(["0 m/s", "0.1 m/s", "3 m/s"])},
    }  # fmt: skip
    if choose.random() < 0.25:
        serving["lid"] = choose.choice([{}, {"sip_hole": "1.2 cm^2"}, {"conductance": "0 W/(m^2 K)"}])
    if choose.random() < 0.5:
        serving["event"] = _events(choose, duration)
    if choose.random() < 0.15:
        share, pick_up = choose.choice([0.01, 0.25, 1.0]), f"{0.3 * duration:g} s"
        pad = {"height": _mm(0.5 * height), "width": "10 mm", "share": share, "pick_up": pick_up}
        serving["pad"] = [pad]
    return serving | ({"films": _films(choose)} if choose.random() < 0.2 else {})


def _fill(choose: random.Random, height: float) -> Data:
    kinds: list[Data] = [
        {},
        {"kind": "thick soup"},
        {"density": "1000 kg/m^3", "specific_heat": "4180 J/(kg K)"},
    ]
    levels: list[Data] = [{}, {"level": _mm(choose.uniform(0.1, 0.99) * height)}, {"volume": "15 ml"}]
    return choose.choice(kinds) | choose.choice(levels) | choose.choice([{}, {}, {"pour": "4 s"}])


def _events(choose: random.Random, duration: float) -> list[Data]:
    def at(share: float) -> str:
        return f"{share * duration:g} s"

    sip, every = f"{10.0 ** choose.uniform(-1.0, 3.0):.4g} ml", f"{max(1.0, 0.1 * duration):g} s"
    kinds: list[Data] = [
        {"sip": sip, "first": at(0.2)},
        {"sip": sip, "first": at(0.1), "every": every, "count": choose.randint(1, 8)},
        {"drinking": sip, "from": at(0.1), "to": at(0.9)},
        {"refill": sip, "at": at(0.6), "temperature": choose.choice(["10 degC", "95 degC"])},
        {"stir": at(0.2), "at": at(0.3)},
        {"lid": "off", "at": at(0.5)},
        {"stand": "air", "at": at(0.5)},
    ]
    return choose.sample(kinds, choose.randint(1, 3))


def _films(choose: random.Random) -> Data:
    fixed = {"coefficient": choose.choice(["0 W/(m^2 K)", "10 W/(m^2 K)", "5000 W/(m^2 K)"]),
             "surroundings": choose.choice(["0 degC", "22 degC", "60 degC"])}  # fmt: skip
    edge = choose.choice(["dry", "outside", "surface", "underside", "heel", "brim", "wetted"])
    return {edge: {"coefficient": "1e5 W/(m^2 K)"} if edge == "wetted" else fixed}


def _vary_serving(choose: random.Random, serving: Data) -> None:
    drink, room = serving.setdefault("drink", {}), serving.setdefault("room", {})
    changes: list[Callable[[], object]] = [
        lambda: drink.update(temperature=choose.choice(["23 degC", "99.9 degC", "60 degC"])),
        lambda: drink.update(kind=choose.choice(["coffee", "milk drink", "broth", "thick soup"])),
        lambda: room.update(temperature=choose.choice(["-20 degC", "0 degC", "40 degC"])),
        lambda: room.update(humidity=choose.choice([0.0, 0.2, 1.0])),
        lambda: room.update(altitude="4 km"),
        lambda: room.update(temperature=[["0 s", "22 degC"], ["30 s", "-10 degC"]]),
        lambda: serving.update(lid={"sip_hole": "1 cm^2"}),
        lambda: serving.update(event=[{"sip": "50 ml", "first": "20 s", "every": "30 s"}]),
    ]
    choose.choice(changes)()


# -- changes -------------------------------------------------------------------------------------------------


def _changed(choose: random.Random, data: Data, change: Callable[[random.Random, Data], None]) -> Data:
    for _ in range(choose.randint(0, 2)):
        change(choose, data)
    return data


def _broken(choose: random.Random, data: Data) -> str:
    """A file of these tables with one or two faults."""
    for _ in range(choose.randint(1, 2)):
        table, key = choose.choice(list(_places(data)))
        fault = choose.randrange(4)
        if fault == 0:
            table.pop(key, None)
        elif fault == 1:
            table[key] = choose.choice(WRONG_VALUES)
        elif fault == 2:
            table[choose.choice(WRONG_KEYS)] = table.pop(key, "1 mm")
        else:
            table[choose.choice(WRONG_KEYS)] = choose.choice(WRONG_VALUES)
    text = toml.write(data)
    return _damaged(choose, text) if choose.random() < 0.3 else text


def _places(data: Data) -> list[tuple[Data, str]]:
    """Every key of every table, as (table, key)."""
    found = [(data, key) for key in data]
    for value in data.values():
        for table in value if isinstance(value, list) else [value]:
            if isinstance(table, dict):
                found += _places(table)
    return found


def _damaged(choose: random.Random, text: str) -> str:
    """The text with a line lost or doubled, or one character changed."""
    lines = text.splitlines(keepends=True) or ["\n"]
    place, kind = choose.randrange(len(lines)), choose.randrange(3)
    if kind < 2:
        return "".join(lines[:place] + lines[place : place + 1] * (2 * kind) + lines[place + 1 :])
    where = choose.randrange(max(len(text), 1))
    return text[:where] + chr(choose.choice([0, 7, 34, 46, 48, 91, 0x2212, 0x1F375])) + text[where + 1 :]
