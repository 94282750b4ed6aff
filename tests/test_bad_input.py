"""Files that cannot be used: one line that says where, what, why, and what to write instead."""

from pathlib import Path

import pytest

from cupfem.cup import Cup, load_cup
from cupfem.errors import CupfemError, InputError
from cupfem.serving import Drink, Serving, load_serving

GEOMETRIES = Path(__file__).parents[1] / "geometries"
DOUBLE_WALL = (GEOMETRIES / "double_wall.toml").read_text(encoding="utf-8")
GAP = 'name = "gap"\nmaterial = "air"\n'
INNER = 'name = "inner"\nmaterial = "cupstock board"\n'
OUTER = 'name = "outer"\nmaterial = "cupstock board"\n'
BASE = '[base]\nmaterial = "cupstock board"\n'


def refusal(read, *arguments) -> str:
    """The line with which something is refused."""
    with pytest.raises(InputError) as caught:
        read(*arguments)
    text = str(caught.value)
    assert "\n" not in text
    assert len(text) < 400
    return text


def changed(old: str, new: str) -> str:
    assert old in DOUBLE_WALL
    return DOUBLE_WALL.replace(old, new, 1)


CUPS = [
    # quantities
    ("0.33 mm", "0,33 mm", 'line 13: layer.inner.thickness: "0,33 mm": decimal comma; write "0.33 mm"'),
    ("0.33 mm", "0 mm", 'layer.inner.thickness: "0 mm": must be more than zero; write a value above zero'),
    ("0.33 mm", "-1 mm", 'layer.inner.thickness: "-1 mm": must be more than zero'),
    ('"0.33 mm"', "0.33", "layer.inner.thickness: 0.33: "),
    ('"0.33 mm"', "0.33", 'as in "0.33 mm"'),
    (
        "0.33 mm",
        "330 mm",
        'layer.inner.thickness: "330 mm": must be from 1 um to 50 mm; check the number and',
    ),
    ("95 mm", "9.5e300 mm", 'cup.height: "9.5e300 mm": must be from 5 mm to 1 m'),
    ("0.33 mm", "330 g", 'layer.inner.thickness: "330 g": "g" is a unit of mass, not of length'),
    ("0.33 mm", "nan mm", 'layer.inner.thickness: "nan mm": not a number'),
    ('"0.33 mm"', "2026-01-01", "layer.inner.thickness: 2026-01-01: not a text"),
    (
        "contact_fraction = 0.02",
        "contact_fraction = 2",
        "layer.gap.contact_fraction: 2: not a share from 0 to 1",
    ),
    # keys
    (
        'thickness = "0.33 mm"',
        'thicknes = "0.33 mm"',
        'layer.inner.thicknes: unknown key; did you mean "thickness"?',
    ),
    ("[base]", "[bse]", 'bse: unknown key; did you mean "base"?'),
    ("recess", "curl", "base.curl: unknown key; the keys here are material, thickness, recess"),
    ("recess", "recess_", 'base.recess_: unknown key; did you mean "recess"?'),
    ('from = "14 mm"', 'from_ = "14 mm"', 'layer.gap.from_: "14 mm": unknown key'),
    ("title", "outline = 1\ntitle", "outline: 1: unknown key"),
    ('thickness = "0.33 mm"', "", 'line 10: layer.inner.thickness: missing; write thickness = "0.35 mm"'),
    ('height = "95 mm"', "", 'cup.height: missing; write height = "95 mm"'),
    (
        'inner_top_diameter = "78 mm"',
        "",
        "cup.inner_top_diameter: missing; write inner_top_diameter or top_out",
    ),
    (
        "[cup]",
        '[cup]\nfoot_outside_diameter = "60 mm"',
        "cup.foot_outside_diameter: given together with inner_f",
    ),
    ("title", 'handle = "d"\ntitle', "handle: not axisymmetric: a handle cannot be modelled; leave it out"),
    ("title", "brim = {}\ntitle", "brim: not supported yet; leave it out"),
    ("title = ", "title = 3 # ", "title: 3: not a text; write it in quotation marks"),
    ("[cup]", "cup = 3\n[cap]", "cap: unknown key"),
    # names
    ('name = "outer"', 'name = "inner"', 'layer.inner.name: "inner": two layers have this name'),
    ('name = "outer"', 'name = "base"', 'layer.base.name: "base": a name that the cup uses itself'),
    ('name = "outer"', 'name = "out er"', 'layer.3.name: "out er": not a plain word'),
    ('name = "outer"', 'name = "out.er"', 'write "out_er"'),
    ('name = "outer"\n', "", "layer.3.name: missing"),
    # materials
    (
        OUTER,
        'name = "outer"\nmaterial = "cupstok board"\n',
        'layer.outer.material: "cupstok board": no such material.',
    ),
    (OUTER, 'name = "outer"\nmaterial = "cupstok board"\n', 'Did you mean "cupstock board"?'),
    (BASE, '[base]\nmaterial = "air"\n', 'base.material: "air": a gas cannot hold the drink; choose a solid'),
    (
        "[base]",
        '[material."x y"]\ndensity = "1 mm"\n[base]',
        'line 29: material.x y.density: "1 mm": "mm" is a unit',
    ),
    ("[base]", "[material.x]\nlike = 3\n[base]", "material.x.like: 3: not a text"),
    # heights
    ('"14 mm"', '"88 mm"', 'layer.gap.from: "88 mm": not below the layer\'s upper end at 88 mm'),
    ('"14 mm"', '"-1 mm"', 'layer.gap.from: "-1 mm": must not be negative'),
    (
        '"88 mm"',
        '"96 mm"',
        'layer.gap.to: "96 mm": above the brim at 95 mm: the layer leaves the cup; write at most',
    ),
    ('"14 mm"', '"97 mm"\nblend = "1 mm"', 'layer.gap.from: "97 mm": above the brim'),
    ('"88 mm"', '"94 mm"', 'layer.gap.blend: "3 mm": "outer" ends within this length'),
    ('"14 mm"', '"2 mm"', 'layer.gap.blend: "3 mm": "outer" ends within this length'),
    ('"0.30 mm"', '"0.30 mm"\nto = "90 mm"', 'layer.gap.blend: "3 mm": "outer" ends within'),
    ('recess = "8 mm"', 'recess = "95 mm"', 'base.recess: "95 mm": with its thickness the base reaches 95.3'),
    ('recess = "8 mm"', 'recess = "0 mm"', 'base.recess: "0 mm": must be more than zero'),
    # the section
    (INNER, 'name = "inner"\nmaterial = "air"\n', 'layer.inner: "air": from 0 mm to 14 mm it is innermost'),
    (OUTER, 'name = "outer"\nmaterial = "air"\n', 'layer.outer: "air": from 0 mm to 14 mm it is outermost'),
    ('"0.30 mm"', '"0.30 mm"\nto = "80 mm"', 'layer.gap: "air": from 80 mm to 88 mm it is outermost'),
    (
        '[[layer]]\nname = "outer"',
        '[[layer]]\nname = "film"\nmaterial = "air"\nthickness = "1 mm"\nfrom = "20 mm"\nto = "30 mm"\n'
        '[[layer]]\nname = "outer"',
        'layer.film: "air": from 20 mm to 30 mm it lies on "gap", another layer of gas',
    ),
    ("78 mm", "290 mm", "cup: the wall leans by 51"),
    ("0.33 mm", "40 mm", "cup: at the foot the wall (40.3 mm) is thicker than the inside radius (27.5 mm)"),
    # keys that nothing would use
    (
        '"0.30 mm"',
        '"0.30 mm"\ncontact_fraction = 0.1',
        "layer.outer.contact_fraction: would change nothing: only a l",
    ),
    ('"0.30 mm"', '"0.30 mm"\npressure = "1 kPa"', "layer.outer.pressure: would change nothing"),
    (
        '"0.30 mm"',
        '"0.30 mm"\nblend = "4 mm"',
        "layer.outer.blend: would change nothing: nothing outside this layer",
    ),
    ('"0.33 mm"', '"0.33 mm"\ncontact = "9 W/(m^2 K)"', "layer.inner.contact: would change nothing"),
]


@pytest.mark.parametrize(("old", "new", "message"), CUPS)
def test_cup_file(old, new, message):
    text = refusal(Cup.from_text, changed(old, new), "cup.toml")
    assert message in text
    assert text.startswith("cup.toml")


def test_wall_with_a_hole():
    text = DOUBLE_WALL
    for name in ("0.33 mm", "0.30 mm"):
        text = text.replace(f'"{name}"', f'"{name}"\nto = "50 mm"')
    text = text.replace('to = "88 mm"', 'to = "50 mm"')
    assert "layer: the wall has no layer from 50 mm to 95 mm" in refusal(Cup.from_text, text)


def test_cup_without_layers_or_base():
    outline = '[cup]\nheight = "9 cm"\ninner_top_diameter = "8 cm"\ninner_foot_diameter = "6 cm"\n'
    assert "layer: no layers" in refusal(Cup.from_text, 'layer = []\nbase = "none"\n' + outline)
    assert "layer: missing; write at least one [[layer]]" in refusal(
        Cup.from_text, 'base = "none"\n' + outline
    )
    layer = '[[layer]]\nname = "a"\nmaterial = "air"\nthickness = "1 mm"\n'
    assert 'base: missing; write a [base] table, or base = "none" above' in refusal(
        Cup.from_text, outline + layer
    )
    assert 'base: "open": the names here are "none"' in refusal(
        Cup.from_text, 'base = "open"\n' + outline + layer
    )
    assert 'layer.a: "air": from 0 mm to 90 mm it is innermost' in refusal(
        Cup.from_text, 'base = "none"\n' + outline + layer
    )


SERVINGS = [
    ("duration = 10", "line 1: duration: 10: "),
    ('duration = "0 s"', 'duration: "0 s": must be more than zero'),
    ('duration = "10 days"', 'duration: "10 days": must be from 1 s to 48 h'),
    ('duration = "10 m"', 'duration: "10 m": "m" is a unit of length, not of time'),
    ('titel = "x"', 'titel: unknown key; did you mean "title"?'),
    # the format knows these, but nothing reads them yet
    ("[grip]", "line 1: grip: not supported yet; leave it out"),
    ("handle = true", "handle: not axisymmetric"),
    # lid, refills, stirring, table, carrier, altitude
    ('altitude = "2 km"', "line 1: altitude: it belongs in [room]"),
    ('[room]\naltitude = "20 km"', 'room.altitude: "20 km": must be from 0 m to 9 km'),
    (
        '[room]\naltitude = "3 km"\n[drink]\ntemperature = "92 degC"',
        'drink.temperature: "92 degC": boils at 89.97 degC',
    ),
    ('[lid]\nsip_hole = "0 cm^2"', 'lid.sip_hole: "0 cm^2": must be more than zero'),
    ('[lid]\nhole = "1 cm^2"', 'lid.hole: unknown key; did you mean "sip_hole"?'),
    (
        '[lid]\nconductance = "8 W/(m^2 K)"\nthickness = "1 mm"',
        "lid.thickness: would change nothing: the conductance is given",
    ),
    (
        '[lid]\n[films]\nsurface = { coefficient = "60 W/(m^2 K)", surroundings = "22 degC" }',
        "lid: would change nothing: films.surface is one fixed film; leave out [lid], or films.surface",
    ),
    (
        '[lid]\n[films]\nsurface = { correlation = "Shah", freeboard_factor = 0.8 }',
        "films.surface.freeboard_factor: would change nothing: the lid is on all the time",
    ),
    ('[[event]]\nlid = "on"\nat = "1 min"', "event: there is no lid to move; write a [lid] table"),
    (
        '[lid]\n[[event]]\nlid = "on"\nat = "1 min"\n[[event]]\nlid = "on"\nat = "2 min"',
        'event.2.lid: "on": would change nothing: it is so already',
    ),
    (
        '[[event]]\nstand = "table"\nat = "1 min"',
        'event.1.stand: "table": would change nothing: it is so already',
    ),
    ('[[event]]\nrefill = "5 cl"\nat = "11 min"', 'event.1.at: "11 min": after the end of the serving'),
    (
        '[[event]]\nrefill = "5 cl"\nat = "1 min"\ntemperature = "101 degC"',
        'event.1.temperature: "101 degC": boils at 99.97 degC',
    ),
    ('[[event]]\nstir = "1 min"\nat = "570 s"', 'event.1.stir: "10.5 min": after the end of the serving'),
    (
        '[drink]\nstirred_coefficient = "2000 W/(m^2 K)"',
        "drink.stirred_coefficient: would change nothing: nothing stirs the drink",
    ),
    (
        '[drink]\nstirred = "10 s"\n[films]\nwetted = { coefficient = "400 W/(m^2 K)" }',
        "drink.stirred: would change nothing: films.wetted is a fixed film",
    ),
    ("[drink]\nfoam_factor = 0", "drink.foam_factor: 0: must be more than zero"),
    (
        '[table]\nmaterial = "wood"\nresistance = "0.1 m^2 K/W"',
        "table.material: given together with resistance; keep one of the two",
    ),
    ('[carrier]\ncoefficient = "30 W/(m^2 K)"', 'carrier.height: missing; write height = "40 mm"'),
    # drink
    ("drink = 3", "drink: 3: not a table"),
    (
        '[drink]\ntemperature = "20 C"',
        'drink.temperature: "20 C": "C" is not a unit of temperature; write "20 degC"',
    ),
    ('[drink]\nkind = "cofee"', 'drink.kind: "cofee": the names here are "water", "coffee", "milk drink"'),
    ('[drink]\nkind = "cofee"', '; did you mean "coffee"?'),
    (
        '[drink]\nlevel = "70 mm"\nvolume = "200 ml"',
        "line 3: drink.volume: given together with level; keep one",
    ),
    (
        '[drink]\ndensity = "1 kg/l"',
        "drink.specific_heat: missing: density and specific_heat belong together",
    ),
    (
        '[drink]\nkind = "water"\ndensity = "1 kg/l"\nspecific_heat = "4 kJ/(kg K)"',
        "drink.kind: would change nothing: density and specific_heat are given; leave it out",
    ),
    ('[drink]\ntemperature = "101 degC"', 'drink.temperature: "101 degC": boils at '),
    (
        '[drink]\ntemperature = "-2 degC"\n[room]\nhumidity = 0',
        'drink.temperature: "-2 degC": ice is not modelled',
    ),
    ('[drink]\ntemperature = "6 degC"', 'drink.temperature: "6 degC": below the room\'s dew point of 9.5'),
    ('[start]\ntemperature = "6 degC"', 'start.temperature: "6 degC": below the room\'s dew point of 9.5'),
    # room
    ("[room]\nhumidity = 45", "room.humidity: 45: not a share from 0 to 1"),
    ('[room]\nair_speed = "-1 m/s"', 'room.air_speed: "-1 m/s": must not be negative'),
    ('[room]\ntemperature = "70 degC"', 'room.temperature: "70 degC": not a room from -40 degC to 60 degC'),
    ("[room]\ntemperature = 22", "room.temperature: 22: "),
    ("[room]\ntemperature = []", "room.temperature: the first step is not at the pour"),
    (
        '[room]\ntemperature = [["1 s", "9 degC"]]',
        'the first step is not at the pour; begin with ["0 s", ...]',
    ),
    ('[room]\ntemperature = [["0 s", "9 degC"], ["0 s", "8 degC"]]', "the times of the steps do not rise"),
    ('[room]\ntemperature = [["0 s"]]', "room.temperature.1.2: missing"),
    (
        '[room]\ntemperature = [["0 s", "9 degC"], ["1 h", "8 degC"]]',
        'room.temperature: "60 min": after the end',
    ),
    # events
    ("event = [3]", "event.1: 3: not a table"),
    ('[[event]]\nfirst = "1 min"', 'event.1.sip: missing; write sip = "15 ml"'),
    ('[[event]]\nsip = "15 ml"', 'event.1.first: missing; write first = "2 min"'),
    (
        '[[event]]\nsip = "15 ml"\nfirst = "11 min"',
        'event.1.first: "11 min": after the end of the serving at 10 min',
    ),
    (
        '[[event]]\nsip = "15 ml"\nfirst = "1 min"\ncount = 2',
        "event.1.count: would change nothing: without every",
    ),
    (
        '[[event]]\nsip = "1 ml"\nfirst = "1 s"\nevery = "1 ms"',
        'event.1.every: "1 ms": must be from 1 s to 48 h',
    ),
    ('[[event]]\nsip = "15 ml"\nfirst = "1 min"\nlast = "2 min"', "event.1.last: would change nothing"),
    (
        '[[event]]\nsip = "15 ml"\nfirst = "1 min"\nevery = "1 min"\ncount = 2.5',
        "event.1.count: 2.5: not a whole number",
    ),
    (
        '[[event]]\nsip = "15 ml"\nfirst = "1 min"\nevery = "1 min"\ncount = 11',
        'event.1.count: "11 min": after the end of the serving at 10 min',
    ),
    (
        '[[event]]\nsip = "15 ml"\nfirst = "1 min"\nevery = "1 min"\ncount = 2\nlast = "5 min"',
        "event.1.last: given together with count; keep one of the two",
    ),
    (
        '[[event]]\nsip = "15 ml"\nfirst = "3 min"\nevery = "1 min"\nlast = "2 min"',
        'event.1.last: "120 s": before the first sip',
    ),
    (
        '[[event]]\ndrinking = "5 cl"\nfrom = "5 min"\nto = "4 min"',
        'event.1.to: "240 s": not after its start',
    ),
    ('[[event]]\ndrinking = "5 cl"\nfrom = "10 min"', "event.1.from: not before the end of the serving"),
    ('[[event]]\ndrinking = "5 cl"\nto = "11 min"', 'event.1.to: "11 min": after the end of the serving'),
    (
        '[[event]]\ndrinking = "5 cl"\nsip = "1 ml"',
        "event.1.sip: unknown key; the keys here are drinking, from, to",
    ),
    # pads
    ('[[pad]]\nwidth = "15 mm"', 'pad.1.height: missing; write height = "55 mm"'),
    ('[[pad]]\nheight = "5 cm"\nshare = 0.0', "pad.1.share: 0.0: must be more than zero"),
    ('[[pad]]\nheight = "5 cm"\nskin = "thum"', 'pad.1.skin: "thum": the names here are'),
    (
        '[[pad]]\nheight = "5 cm"\npick_up = "1 min"\nrelease = "30 s"',
        'pad.1.release: "30 s": not after the pick',
    ),
    (
        '[[pad]]\nheight = "5 cm"\npick_up = "10 min"',
        'pad.1.pick_up: "10 min": not before the end of the serving',
    ),
    (
        2 * '[[pad]]\nheight = "5 cm"\nshare = 0.6\n',
        "pad: 1.2: the pads held at 60 s cover more than the circ",
    ),
    # target
    ("[target]", "target.drink_above: nothing to meet; write drink_above, wall_below or hold"),
    ('[target]\ndrink_above = "60 degC"\nbetween = ["1 cm", "2 cm"]', "target.between: would change nothing"),
    (
        '[target]\nwall_below = "60 degC"\nbetween = ["2 cm", "1 cm"]',
        "target.between: the first height is not below",
    ),
    ('[target]\nwall_below = "60 degC"\nbetween = "2 cm"', 'target.between: "2 cm": not a list'),
    (
        '[target]\ndrink_above = "60 degC"\nuntil = "11 min"',
        'target.until: "11 min": after the end of the serving',
    ),
    # films
    (
        '[films]\noutside = { coefficient = "11 W/(m^2 K)" }',
        'films.outside.surroundings: missing; write surroundings = "',
    ),
    (
        '[films]\noutside = { correlation = "magic" }',
        'films.outside.correlation: "magic": the names here are "nat',
    ),
    ('[films]\nheel = { correlation = "insulted" }', 'did you mean "insulated"?'),
    ('[films]\nsurface = { correlation = "shah" }', 'did you mean "Shah"?'),
    ('[films]\nsides = { correlation = "insulated" }', "films.sides: unknown key"),
    ('[films]\noutside = "insulated"', 'films.outside: "insulated": not a table'),
    (
        '[films]\nwetted = { coefficient = "400 W/(m^2 K)", surroundings = "85 degC" }',
        "films.wetted.surroundings: the surroundings of this film are the drink; leave it out",
    ),
    (
        '[films]\nwetted = { coefficient = "-1 W/(m^2 K)" }',
        'films.wetted.coefficient: "-1 W/(m^2 K)": must not be neg',
    ),
]


@pytest.mark.parametrize(("text", "message"), SERVINGS)
def test_serving_file(text, message):
    line = refusal(Serving.from_text, text, "serving.toml")
    assert message in line
    assert line.startswith("serving.toml, line ")


def test_more_than_one_error_is_counted():
    line = refusal(Serving.from_text, '[room]\nhumidity = 2\nair_speed = "-1 m/s"\ntemperature = "20 C"')
    assert line.endswith("(and 2 more)")


@pytest.mark.parametrize("load", [load_cup, load_serving])
class TestFiles:
    def test_missing_file(self, load, tmp_path):
        (tmp_path / "double_wall.toml").write_text(DOUBLE_WALL, encoding="utf-8")
        line = refusal(load, tmp_path / "double_wal.toml")
        assert line.endswith('double_wal.toml: no such file. Did you mean "double_wall.toml"?')

    def test_missing_folder(self, load, tmp_path):
        assert refusal(load, tmp_path / "no" / "cup.toml").endswith("cup.toml: no such file.")

    def test_folder(self, load, tmp_path):
        assert "is a folder, not a file" in refusal(load, tmp_path)

    def test_not_toml(self, load, tmp_path):
        path = tmp_path / "cup.toml"
        path.write_text('title = "x"\n[cup\n', encoding="utf-8")
        assert "(at line 2, column 5)" in refusal(load, path)
        assert "not a TOML file" in refusal(load, path)

    @pytest.mark.parametrize("content", ["x = 1\nx = 2\n", "x = " + "9" * 5000, "x = " + "[" * 5000, "\x00"])
    def test_not_toml_either(self, load, tmp_path, content):
        path = tmp_path / "cup.toml"
        path.write_text(content, encoding="utf-8")
        assert "not a TOML file" in refusal(load, path)

    def test_empty(self, load, tmp_path):
        path = tmp_path / "cup.toml"
        path.write_text("# nothing yet\n", encoding="utf-8")
        assert "cup.toml: the file is empty; start from a file in geometries/" in refusal(load, path)

    def test_not_utf8(self, load, tmp_path):
        path = tmp_path / "cup.toml"
        path.write_bytes('title = "Café"'.encode("latin-1"))
        assert "not UTF-8 text (byte 13); save it as UTF-8" in refusal(load, path)

    def test_too_large(self, load, tmp_path):
        path = tmp_path / "cup.toml"
        path.write_bytes(b"#" * 1_000_001)
        assert "larger than 1 MB" in refusal(load, path)

    def test_name_that_no_file_can_have(self, load):
        assert "cannot be read" in refusal(load, "cup\0.toml")


def test_a_byte_order_mark_is_no_error(tmp_path):
    path = tmp_path / "cup.toml"
    path.write_bytes(b"\xef\xbb\xbf" + DOUBLE_WALL.encode())
    assert load_cup(path).height == 0.095


def test_python_is_refused_like_a_file():
    assert refusal(lambda: Serving(drink=Drink(temperature=85.0))).startswith("drink.temperature: 85.0: ")
    assert refusal(lambda: Serving(drink={"temperature": "20 C"})).startswith('drink.temperature: "20 C": ')
    assert refusal(lambda: Serving(grip=3)) == "grip: not supported yet; leave it out"
    assert refusal(lambda: Drink(sugar="two")) == (
        "drink.sugar: unknown key; "
        "the keys here are kind, density, specific_heat, temperature, level, volume, "
        "pour, stirred, stirred_coefficient, foam_factor"
    )


def test_refusals_are_errors_of_the_package():
    with pytest.raises(CupfemError, match="grip"):
        Serving(grip=3)
