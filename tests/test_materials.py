"""The library: complete, inside physical bounds and published tables; the user's own materials."""

import pytest
from CoolProp.CoolProp import PropsSI

from cupfem.errors import InputError
from cupfem.materials import Material, Value, get_material, library, material_from_table, sources_table

SOLIDS = [material for material in library().values() if material.kind == "solid"]
FIBRE = ["cupstock board", "bulky-fibre board", "kraft liner", "moulded pulp", "thermoformed fibre"]
OWN = {
    "conductivity_through": "0.08 W/(m K)",
    "density": "600 kg/m^3",
    "specific_heat": "1400 J/(kg K)",
    "emissivity": 0.9,
    "surface_class": "board",
}


def test_library_has_the_materials_of_cups() -> None:
    usual = {
        "cupstock board",
        "corrugated board",
        "LDPE coating",
        "expanded polystyrene",
        "cork",
        "porcelain",
    }
    assert usual < set(library())
    assert [name for name, material in library().items() if material.kind == "gas"] == ["air"]


@pytest.mark.parametrize("material", library().values(), ids=lambda material: material.name)
def test_every_value_has_source_mark_and_range_around_it(material: Material) -> None:
    assert material.title
    for value in material.values().values():
        assert value.source
        assert value.mark in ("confirmed", "from memory, not re-checked", "derived")
        assert (value.low or value.value) <= value.value <= (value.high or value.value)


def test_marks_fit_their_sources() -> None:
    for row in sources_table(library().values()):
        if row.mark == "from memory, not re-checked":
            assert "memory" in row.source, row
        if row.mark == "confirmed":  # says where: a standard, a guide, or what kind of page
            assert any(word in row.source for word in ("EN ISO", "CIBSE", "page", "public", "table")), row


@pytest.mark.parametrize(
    ("name", "density", "conductivity"),
    [
        # EN ISO 10077-2:2003, table of thermal conductivities
        ("LDPE coating", 920.0, 0.33),
        ("polypropylene", 910.0, 0.22),
        ("stainless steel", 7900.0, 17.0),
        ("soda-lime glass", 2500.0, 1.0),
        # CIBSE Guide A, table 3.36, "ceramic, glazed"
        ("stoneware", 2500.0, 1.4),
        # T. L. Bergman et al., Fundamentals of Heat and Mass Transfer, 7th ed., 2011, table A.1, AISI 304
        ("stainless steel", 7900.0, 14.9),
    ],
)
def test_ranges_hold_published_values(name: str, density: float, conductivity: float) -> None:
    material = library()[name]
    for value, published in ((material.density, density), (material.conductivity_through, conductivity)):
        assert (value.low or value.value) <= published <= (value.high or value.value)


def test_board_lies_in_the_published_band_of_paper() -> None:
    # M. F. Ashby, Materials Selection in Mechanical Design, paper and cardboard (as copied on a public
    # page): density 480-860 kg/m3, conductivity 0.06-0.17 W/(m K), specific heat 1340-1400 J/(kg K)
    for name in ("cupstock board", "clay-coated board", "kraft liner"):
        board = library()[name]
        assert 480 <= board.density.value <= 860
        assert 0.06 <= board.conductivity_through.value <= 0.17
        assert 1340 <= board.specific_heat.value <= 1400


@pytest.mark.parametrize("name", FIBRE)
def test_fibre_lies_between_the_bounds_of_wiener(name: str) -> None:
    # O. Wiener 1912: a mixture conducts better than its parts in series, worse than in parallel. Cell wall of
    # 1500 kg/m3, 0.157 to 0.25 W/(m K) across and up to 1 along the fibre (from memory, not re-checked)
    material, air = library()[name], 0.026
    solid = material.density.value / 1500.0
    series = 1.0 / (solid / 0.157 + (1.0 - solid) / air)
    parallel_across, parallel_along = (solid * wall + (1.0 - solid) * air for wall in (0.25, 1.0))
    assert series < material.conductivity_through.value < parallel_across
    assert series < material.conductivity_along.value < parallel_along


@pytest.mark.parametrize("material", SOLIDS, ids=lambda material: material.name)
def test_solids_are_physical(material: Material) -> None:
    assert 0.02 < material.conductivity_through.value <= material.conductivity_along.value < 400.0
    assert 0.0 < material.emissivity.value < 1.0
    # Dulong and Petit bound the heat capacity per volume of any solid from above: 3 k_B per atom
    assert 5e4 < material.density.value * material.specific_heat.value < 5e6


def test_air_agrees_with_its_reference() -> None:
    # E. W. Lemmon, R. T. Jacobsen 2004 and E. W. Lemmon et al. 2000, by CoolProp
    air, state = library()["air"], ("T", 293.15, "P", 101325.0, "Air")
    assert air.conductivity_through.value == pytest.approx(PropsSI("L", *state), rel=1e-3)
    assert air.density.value == pytest.approx(PropsSI("D", *state), rel=1e-3)
    assert air.specific_heat.value == pytest.approx(PropsSI("C", *state), rel=1e-3)


def test_own_material_in_full() -> None:
    own = material_from_table("trial board", OWN)
    assert own.conductivity_through == Value(0.08, "given by the user", "user")
    assert (own.conductivity_along.value, own.conductivity_along.mark) == (0.08, "derived")
    assert get_material("trial board", {"trial board": own}) is own
    assert material_from_table("trial board", {**OWN, "cost_per_kg": 1.1}).cost_per_kg.value == 1.1


def test_own_material_like_another() -> None:
    own = material_from_table("trial board", {"like": "cupstock board", "density": "700 kg/m^3"})
    library_board = library()["cupstock board"]
    assert own.name == "trial board"
    assert own.density.value == 700.0
    assert own.conductivity_along is library_board.conductivity_along
    assert own.surface_class == "board"


def test_own_values_for_a_material_of_the_library() -> None:
    own = material_from_table("silicone rubber", {"conductivity_through": "0.3 W/(m K)"})
    assert own.conductivity_through.value == 0.3
    assert own.conductivity_along.value == 0.3  # isotropic in the library, so it stays isotropic
    assert own.density is library()["silicone rubber"].density
    assert get_material("silicone rubber", {own.name: own}) is own


def test_own_value_with_source_and_range() -> None:
    entry = {"value": "0.08 W/(m K)", "low": "0.07 W/(m K)", "high": "0.09 W/(m K)"}
    entry |= {"source": "hot plate", "mark": "confirmed"}
    own = material_from_table("x", {**OWN, "conductivity_through": entry})
    assert own.conductivity_through == Value(0.08, "hot plate", "confirmed", 0.07, 0.09)


@pytest.mark.parametrize(
    ("changed", "message"),
    [
        ({"conductivity_through": "0,08 W/(m K)"}, 'x.conductivity_through: "0,08 W/(m K)": decimal comma'),
        ({"conductivity_through": 0.08}, 'not a text with a unit; write it as in "0.08 W/(m K)"'),
        ({"density": "0 kg/m^3"}, 'material.x.density: "0 kg/m^3": must be positive'),
        ({"density": "600 mm"}, '"mm" is a unit of length, not of density'),
        ({"emissivity": 92}, "material.x.emissivity: 92: not a share from 0 to 1"),
        ({"emissivity": True}, "material.x.emissivity: True: not a text with a unit"),
        ({"conductivty_along": "1 W/(m K)"}, 'unknown key. Did you mean "conductivity_along"?'),
        ({"surface_class": "paper"}, 'x.surface_class: "paper": no such choice; use one of board, '),
        ({"like": "cupstok board"}, 'not in the library. Did you mean "cupstock board"?'),
        ({"like": "air"}, 'material.x.like: "air": a gas, and own materials are solids'),
        ({"kind": "gas"}, 'material.x.kind: "gas": own materials are solids'),
        ({"title": 3}, "material.x.title: 3: not a text"),
        ({"cost_per_kg": "1 EUR"}, 'material.x.cost_per_kg: "1 EUR": not a number'),
        ({"cost_per_kg": -1.0}, "material.x.cost_per_kg: -1.0: must be positive"),
        ({"density": {"low": "1 kg/m^3"}}, 'material.x.density: no value; write value = "620 kg/m^3"'),
        ({"density": {"value": "1 kg/m^3", "low": "2 kg/m^3"}}, "x.density: the value lies outside low"),
        ({"density": {"value": "1 kg/m^3", "mark": "sure"}}, 'x.density.mark: "sure": no such choice'),
        (
            {"density": {"value": "1 kg/m^3", "valeu": 1}},
            'x.density.valeu: unknown key. Did you mean "value"?',
        ),
    ],
)
def test_bad_materials_are_refused(changed: dict[str, object], message: str) -> None:
    with pytest.raises(InputError) as caught:
        material_from_table("x", {**OWN, **changed})
    assert message in str(caught.value)


def test_material_without_data_is_refused() -> None:
    message = "trial board: no density, specific_heat, emissivity, surface_class; give them, or write like ="
    with pytest.raises(InputError, match=message):
        material_from_table("trial board", {"conductivity_through": "0.08 W/(m K)"})
    with pytest.raises(InputError, match="own materials are solids"):
        material_from_table("air", {"density": "1 kg/m^3"})


def test_unknown_name_gets_its_nearest() -> None:
    with pytest.raises(
        InputError, match=r'"cupstock bord": no such material\. Did you mean "cupstock board"\?'
    ):
        get_material("cupstock bord")


def test_table_of_sources() -> None:
    rows = sources_table([library()["cupstock board"]], "us")
    assert rows[1][:4] == ("cupstock board", "density", "38.7 lb/ft^3", "35.9 to 49.9 lb/ft^3")
    assert rows[3][:4] == ("cupstock board", "emissivity", "0.92", "0.88 to 0.95")
    assert len(sources_table(library().values())) == 5 * len(library())
