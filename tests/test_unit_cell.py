"""Flutes and struts as effective layers: exact limits, bounds, and the resolved transient of the same
wrap."""

from dataclasses import replace

import numpy as np
import pytest
from verification.bodies import film, marched, section, solid, system, uniform

import cupfem
from cupfem.conduction import Solid
from cupfem.cup import Cup, Flute, Strut
from cupfem.errors import InputError
from cupfem.inputs import resolved_toml
from cupfem.unit_cell import (
    Cell,
    Ply,
    cavity_conductivity,
    cell_of,
    conductivity_across,
    effective_layer,
    fluted,
    stack_at,
    strutted,
)

E_FLUTE = '[layer.flute]\nletter = "E"\nmedium_thickness = "0.15 mm"\n'
STRUT = '[layer.strut]\nheight = "2 mm"\npitch = "8 mm"\nthickness = "0.35 mm"\n'
CUP = """
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
[[layer]]
name = "wall"
material = "cupstock board"
thickness = "0.35 mm"
[[layer]]
name = "core"
material = "kraft liner"
from = "20 mm"
to = "80 mm"
{core}
[[layer]]
name = "liner"
material = "kraft liner"
thickness = "0.2 mm"
from = "20 mm"
to = "80 mm"
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""


def cup(core=E_FLUTE):
    return Cup.from_text(CUP.format(core=core))


def plies(conductivity):
    return {
        name: Ply(conductivity, conductivity, 1e6)
        for name in ("inner liner", "outer liner", "medium", "strut")
    }


def shares_of(cell):
    whole = cell.areas.sum()
    return {str(name): cell.areas[cell.parts == name].sum() / whole for name in np.unique(cell.parts)}


# -- exact limits --------------------------------------------------------------------------------------------


def test_laminate_attains_the_lower_bound():
    """Wiener 1912: layers in series; k .12 and .026, air .4: .04905660 (recomputed)."""
    x, y = np.linspace(0.0, 1e-3, 5), np.linspace(0.0, 1e-3, 11)
    parts = np.full((4, 10), "medium", dtype="U12")
    parts[:, 3:7] = "air"
    along = np.zeros((2, 4, 10))
    along[0] = 1.0
    cell = Cell(x, np.broadcast_to(y, (5, 11)).copy(), parts, along)
    found = conductivity_across(cell, plies(0.12), np.full(parts.shape, 0.026))
    assert found == pytest.approx(0.04905660, abs=5e-9)
    assert found == pytest.approx(1.0 / (0.6 / 0.12 + 0.4 / 0.026), rel=1e-8)


def test_struts_attain_the_upper_bound():
    """Wiener 1912: columns in parallel; struts and air share the heat by area."""
    strut = Strut(height="2 mm", pitch="8 mm", thickness="0.4 mm")
    cell = strutted(strut)
    found = conductivity_across(cell, plies(0.12), np.full(cell.parts.shape, 0.026))
    assert found == pytest.approx(0.05 * 0.12 + 0.95 * 0.026, rel=1e-8)


SIZES = [("1.2 mm", "3.4 mm"), ("2.5 mm", "6.4 mm"), ("0.6 mm", "2.4 mm")]


@pytest.mark.parametrize(("height", "pitch"), SIZES)
@pytest.mark.parametrize("radiation", [False, True])
def test_flutes_lie_between_the_bounds(height, pitch, radiation):
    """Without radiation between Wiener's bounds; with it between those formed with k_gas + h_rad d."""
    cell = fluted(Flute(height=height, pitch=pitch, medium_thickness="0.12 mm"), 0.2e-3, 0.2e-3)
    air = np.full(cell.parts.shape, 0.027)
    if radiation:
        air = np.asarray(cavity_conductivity(cell.cavity_heights(), 50.0, 0.92))
    k = np.where(cell.parts == "air", air, 0.1)
    weight = cell.areas / cell.areas.sum()
    lower, upper = 1.0 / np.sum(weight / k), np.sum(weight * k)
    found = conductivity_across(cell, plies(0.1), air)
    assert lower < found < upper
    assert found > 1.02 * lower
    assert found < 0.98 * upper


def test_cell_converges():
    flute = Flute(letter="E", medium_thickness="0.15 mm")
    cells = [fluted(flute, 0.2e-3, 0.2e-3, fineness) for fineness in (1.0, 2.0, 4.0)]
    found = [conductivity_across(cell, plies(0.1), np.full(cell.parts.shape, 0.027)) for cell in cells]
    assert abs(found[1] - found[2]) < 0.5 * abs(found[0] - found[1])
    assert found[0] == pytest.approx(found[2], rel=2e-4)


def test_a_conducting_medium_is_a_bridge():
    """Aluminium: the waves conduct along themselves, so the cell lies far above its columns in series."""
    flute = Flute(letter="E", medium_thickness="0.1 mm")
    cell = fluted(flute, 0.2e-3, 0.2e-3)
    metal = {**plies(0.1), "medium": Ply(200.0, 200.0, 1e6)}
    air = np.full(cell.parts.shape, 0.027)
    assert conductivity_across(cell, metal, air) > 1.5 * conductivity_across(cell, plies(0.1), air)


def test_take_up_of_a_sinusoid():
    """Length of a sine wave over its chord; printed for height 1.15 mm and pitch 3.4 mm: 1.25 (trade
    table)."""
    thin = Flute(height="1.15 mm", pitch="3.4 mm", medium_thickness="10 um")
    assert thin.take_up == pytest.approx(1.25, abs=0.015)  # the table leaves the medium's thickness out too
    x = np.linspace(0.0, 3.4e-3, 200001)
    y = thin.amplitude * np.cos(2 * np.pi * x / 3.4e-3)
    assert thin.take_up == pytest.approx(np.hypot(np.diff(x), np.diff(y)).sum() / 3.4e-3, rel=1e-6)
    # the cell holds as much medium as the take-up says, but for the bonds at the crests
    cell = fluted(Flute(letter="E", medium_thickness="0.1 mm"), 0.2e-3, 0.2e-3, 2.0)
    drawn = Flute(letter="E", medium_thickness="0.1 mm")
    assert cell.shares()["medium"] == pytest.approx(drawn.share, rel=0.01)


# -- on a cup ------------------------------------------------------------------------------------------------


def test_mass_follows_the_take_up():
    drawn = cup()
    core = drawn.layer[1]
    board = drawn.material("kraft liner").density.value
    flute = core.flute
    assert core.thickness == 1.2e-3
    per_area = drawn.layer_material(core).density.value * core.thickness
    assert per_area == pytest.approx(board * flute.take_up * 0.15e-3, rel=1e-12)
    found = effective_layer(drawn, core)
    heat = drawn.material("kraft liner").specific_heat.value * board * flute.share
    assert found.heat_capacity == pytest.approx(heat, rel=0.02)  # and the air's, and the bonds


def test_hand_estimate_and_cell_agree_roughly():
    """Columns in series beside each other leave out the heat that crosses from column to column: a few
    percent."""
    for core in (E_FLUTE, STRUT):
        drawn = cup(core)
        layer = drawn.layer[1]
        by_hand = drawn.layer_material(layer)
        cell = effective_layer(drawn, layer)
        assert by_hand.conductivity_through.value == pytest.approx(float(cell.through(50.0)), rel=0.15)
        assert by_hand.conductivity_along.value == pytest.approx(float(cell.along(50.0)), rel=0.02)


def test_conductivity_follows_temperature():
    found = effective_layer(cup(), cup().layer[1])
    assert found.through(80.0) > found.through(20.0)
    values = [float(found.through(t)) for t in (0.0, 50.0, 100.0)]
    assert values == pytest.approx(found.through.values)


def test_stack_under_a_crest_and_in_a_valley():
    drawn = cup()
    crest = stack_at(drawn, drawn.layer[1], 0.0)
    valley = stack_at(drawn, drawn.layer[1], 1.0)
    assert [part for part, _ in crest] == ["air", "medium"]
    assert [part for part, _ in valley] == ["medium", "air"]
    for stack in (crest, valley, stack_at(drawn, drawn.layer[1], 0.5)):
        assert sum(height for _, height in stack) == pytest.approx(1.2e-3, rel=1e-9)
    assert crest[1][1] == pytest.approx(0.15e-3, rel=0.05)
    assert [part for part, _ in stack_at(cup(STRUT), cup(STRUT).layer[1], 0.0)] == ["strut"]


def wrap_times(core):
    """Mean temperature of the outer face over time, of the resolved cell and of the effective layer.

    Plane wall: film of 400 W/(m2 K) to 85 degC inside, 11 to 22 degC outside; all at 22 degC at the pour.
    """
    drawn = cup(core)
    layer, liner, wall = drawn.layer[1], drawn.layer[2], drawn.layer[0]
    cell, given = cell_of(drawn, layer)
    air = np.asarray(cavity_conductivity(cell.cavity_heights(), 55.0, 0.92))
    mesh = cell.mesh()
    solids = {name: Solid(ply.through, ply.along, ply.heat_capacity) for name, ply in given.items()}
    solids["air"] = solid(float(air[cell.parts == "air"].mean()), 1100.0)
    solids, mesh = by_cavity(mesh, cell, air, solids)
    films = film("inside", 400.0, 85.0), film("outside", 11.0, 22.0)
    resolved = system(mesh, solids, *films, plane=True)
    found = effective_layer(drawn, layer)
    lines = {
        "wall": np.linspace(0.0, wall.thickness, 5),
        "core": wall.thickness + np.linspace(0.0, layer.thickness, 9),
        "liner": wall.thickness + layer.thickness + np.linspace(0.0, liner.thickness, 5),
    }
    effective_mesh = section(lines, [0.0, 1.0])
    board = [drawn.material(name) for name in (wall.material, liner.material)]
    ply = [
        Solid(
            b.conductivity_through.value, b.conductivity_along.value, b.density.value * b.specific_heat.value
        )
        for b in board
    ]
    core_solid = Solid(float(found.through(55.0)), float(found.along(55.0)), found.heat_capacity)
    effective = system(
        effective_mesh, {"wall": ply[0], "core": core_solid, "liner": ply[1]}, *films, plane=True
    )
    return resolved, effective


def by_cavity(mesh, cell, air, solids):
    """The resolved cell with a region of air for each conductivity."""
    values = np.round(air.ravel(), 12)
    words = cell.parts.ravel()
    regions = {name: elements for name, elements in mesh.regions.items() if name != "air"}
    given = {name: value for name, value in solids.items() if name in regions}
    for number, value in enumerate(np.unique(values[words == "air"])):
        regions[f"air{number}"] = np.flatnonzero((words == "air") & (values == value))
        given[f"air{number}"] = solid(float(value), 1100.0)
    return given, replace(mesh, regions=regions)


def outer_mean(body, times):
    mesh = body.sections[0].conduction.mesh
    facets = mesh.edges["outside"]
    length = np.hypot(*(mesh.points[:, facets[1]] - mesh.points[:, facets[0]]))
    states = marched(body, uniform(body, 22.0), times)
    mean = (states[:, facets[0]] + states[:, facets[1]] + 4.0 * states[:, facets[2]]) / 6.0
    return (mean * length).sum(axis=1) / length.sum()


@pytest.mark.parametrize(
    "core",
    [
        E_FLUTE,
        '[layer.flute]\nheight = "2.5 mm"\npitch = "6.4 mm"\nmedium_thickness = "0.15 mm"\n',
        '[layer.flute]\nheight = "0.75 mm"\npitch = "2.4 mm"\nmedium_thickness = "0.12 mm"\n',
        STRUT,
    ],
    ids=["E", "tall", "fine", "strut"],
)
def test_effective_layer_against_the_resolved_cell(core):
    """The same wrap with every wave: outer mean within 0.5 K after twice the time to 40 degC, that time
    within 5 %."""
    resolved, effective = wrap_times(core)
    times = np.linspace(0.5, 60.0, 120)
    exact, found = outer_mean(resolved, times), outer_mean(effective, times)
    reached = [float(np.interp(40.0, series, times)) for series in (exact, found)]
    late = times >= 2.0 * reached[0]
    early = np.abs(found - exact)[~late].max()
    error = np.abs(found - exact)[late].max()
    print(
        f"40 degC after {reached[0]:.3f} s, effective {reached[1]:.3f} s; {early:.2f} K, late {error:.3f} K"
    )
    assert reached[1] == pytest.approx(reached[0], rel=0.05)
    assert error < 0.5


@pytest.mark.parametrize(
    "keys",
    [
        E_FLUTE.replace("0.15 mm", "0.25 mm"),
        '[layer.flute]\nheight = "1.2 mm"\npitch = "5 mm"\nmedium_thickness = "0.15 mm"\n',
        '[layer.flute]\nheight = "1.6 mm"\npitch = "3.4 mm"\nmedium_thickness = "0.15 mm"\n',
        STRUT,
        STRUT.replace('"8 mm"', '"4 mm"'),
        STRUT.replace("0.35 mm", "0.7 mm"),
    ],
)
def test_each_key_changes_the_answer(keys):
    serving = cupfem.Serving(duration="60 s")

    def drink(core):
        return float(cupfem.pour(cup(core), serving, fineness=0.5).series.drink_temperature[-1])

    reference = STRUT if "strut" in keys and keys != STRUT else E_FLUTE
    assert abs(drink(keys) - drink(reference)) > 1e-4


def test_a_resolved_file_gives_the_same_cup():
    for core in (E_FLUTE, STRUT):
        assert Cup.from_text(resolved_toml(cup(core))) == cup(core)


@pytest.mark.parametrize(
    ("core", "message"),
    [
        (E_FLUTE + 'height = "2 mm"\n', r"flute\.height.*given together with letter"),
        ('[layer.flute]\nheight = "2 mm"\nmedium_thickness = "0.1 mm"\n', r"flute\.pitch: missing"),
        (E_FLUTE.replace('"E"', '"F"'), r"flute\.letter"),
        (E_FLUTE.replace("0.15 mm", "0.7 mm"), r"medium_thickness.*too thick"),
        (STRUT.replace('"8 mm"', '"0.3 mm"'), r"strut\.thickness.*no air"),
        ('thickness = "1 mm"\n' + STRUT, r"strut.*given together with thickness"),
    ],
)
def test_refused_cells(core, message):
    with pytest.raises(InputError, match=message) as caught:
        cup(core)
    assert "\n" not in str(caught.value)


def test_open_flutes_are_refused():
    text = CUP.format(core=E_FLUTE)
    liner = text[text.index('[[layer]]\nname = "liner"') : text.index("[base]")]
    with pytest.raises(InputError, match=r"layer\.core\.flute.*its air lies open"):
        Cup.from_text(text.replace(liner, ""))
