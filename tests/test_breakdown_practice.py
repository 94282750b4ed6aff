"""Facts of the trade about hand estimates: common practice, no source. Each names its wall, films and cup and
prints cupfem's own figure beside (run pytest with -s). Cups and the serving are the shipped ones: water at
85 degC to 10 mm below the brim, a room of 22 degC at 0.1 m/s, correlations on all edges. And the closed forms
of flutes and struts between the bounds of any mixture, beside the unit cell.
"""

import numpy as np
import pytest
from shipped import GEOMETRIES

import cupfem
from cupfem.cup.cells import TEMPERATURE, stand_in
from cupfem.estimates import (
    ONE_TERM_FOURIER,
    effective,
    lumped_drink,
    slab_estimate,
    station,
    steady,
    time_scales,
    transient,
    wiener_bounds,
)
from cupfem.serving import Serving
from cupfem.unit_cell import cavity_conductivity, effective_layer

COMFORT = 40.0
WALLS = {
    "double_wall": ("three materials: board 0.33 / air 1.0 / board 0.30 mm, 95 mm tall", 0.0475),
    "strut_wall": ("struts: board 0.33 / chambers 1.5 mm / board 0.30 mm, 95 mm tall", 0.0475),
    "double_wall_sleeve": ("the double wall, fit 0.1 mm, corrugated sleeve 1.5 mm, 95 mm tall", 0.0475),
    "fluted_wrap": ("flutes: board 0.33 / E flute 1.2 mm / liner 0.18 mm, 95 mm tall", 0.0475),
}


def cup(name):
    return cupfem.load_cup(GEOMETRIES / f"{name}.toml")


def slab_of(name, serving=None):
    """The series of the wall at mid-height, its inner face held at the drink's temperature."""
    return slab_estimate(station(cup(name), serving or Serving(), WALLS[name][1]))


@pytest.mark.parametrize("name", WALLS)
def test_board_walls_have_time_scales_of_tens_of_seconds_and_reach_40_degrees_within_them(name):
    """The trade's fact is tens of seconds for both; without a sleeve these walls reach 40 degC sooner."""
    slab = slab_of(name)
    reached = slab.time_to(COMFORT)
    print(f"{WALLS[name][0]}: L2/alpha {slab.wall.time_scale:.1f} s, 40 degC outside after {reached:.1f} s")
    assert 10.0 < slab.wall.time_scale < 100.0
    assert 1.0 < reached < 0.5 * slab.wall.time_scale


@pytest.mark.parametrize("name", WALLS)
def test_one_term_needs_a_fourier_number_of_a_fifth(name):
    slab = slab_of(name)
    early, late = slab.wall.time_scale * np.array([0.25, 1.0]) * ONE_TERM_FOURIER
    off = [float(np.abs(slab.outside(at, 1) - slab.outside(at))) for at in (early, late)]
    print(f"{WALLS[name][0]}: one term off by {off[0]:.1f} K at Fo 0.05, {off[1]:.2f} K at Fo 0.2")
    assert off[0] > 3.0
    assert off[1] < 0.02 * (85.0 - 22.0)


def test_a_constant_drink_is_sound_only_while_the_wall_is_much_faster_than_the_drink():
    """Radial estimate behind a constant and behind a lumped drink, after the wall's own time scale.

    Single-wall board, stoneware mug, double wall of board in a felt sleeve, each with the default serving.
    """
    off, ratio = {}, {}
    for name in ("single_board", "stoneware_mug", "felt_sleeved"):
        drawn = cup(name)
        place, scales = station(drawn, Serving(), 0.047), time_scales(drawn, Serving())
        held, lumped = (
            transient(place, scales.wall, drink) for drink in (85.0, lumped_drink(drawn, Serving()))
        )
        off[name], ratio[name] = float(held.outside(scales.wall) - lumped.outside(scales.wall)), scales.ratio
        print(f"{name}: wall {scales.wall:.1f} s, {scales.ratio:.2%} of the drink's; a constant drink makes "
              f"the wall {off[name]:.2f} K too hot after that time")  # fmt: skip
    assert ratio["single_board"] < 0.002 and off["single_board"] < 0.5
    assert 0.02 < ratio["felt_sleeved"] < 0.1 and off["felt_sleeved"] > 1.0
    assert off["stoneware_mug"] > off["felt_sleeved"]  # its wall takes up heat of the drink too


def test_radiation_may_not_be_dropped_in_a_cold_room():
    """The double wall in a room of 5 degC, still air: steady network with and without radiation outside."""
    serving = Serving(room={"temperature": "5 degC", "air_speed": "0 m/s"})
    place = station(cup("double_wall"), serving, 0.0475)
    whole = steady(place)
    films = {name: film for name, film in place.outer.films.items() if "radiation" not in name}
    without = steady(type(place)(**{**vars(place), "outer": type(place.outer)(films, 5.0)}))
    surface = float(whole.temperature[-1])
    radiated = place.outer.films["outside radiation"].heat_flux(surface, 5.0, place.height, 0.0)
    share = float(radiated) / whole.outer_heat_flux
    rise = float(without.temperature[-1]) - surface
    print(f"radiation is {share:.0%} of the heat outside; without it the wall is {rise:.1f} K hotter")
    assert 0.3 < share < 0.7
    assert rise > 5.0


@pytest.mark.parametrize(("name", "layer"), [("strut_wall", "chambers"), ("fluted_wrap", "waves")])
def test_closed_forms_of_cells_lie_between_the_bounds_and_beside_the_unit_cell(name, layer):
    """Bounds: O. Wiener, 1912 (series, parallel), from the cell's shares of board and of air with radiation.

    The closed form takes heat straight through the cell; the cell itself lets it spread.
    """
    drawn = cup(name)
    found = next(each for each in drawn.layer if each.name == layer)
    board, cell = drawn.material(found.material), found.strut or found.flute
    closed = stand_in(board, cell).conductivity_through.value
    air = float(cavity_conductivity(found.thickness, TEMPERATURE, board.emissivity.value))
    still = float(cavity_conductivity(0.0, TEMPERATURE, board.emissivity.value))
    best = max(board.conductivity_along.value, board.conductivity_through.value)
    low, _ = wiener_bounds([cell.share, 1.0 - cell.share], [board.conductivity_through.value, still])
    _, high = wiener_bounds([cell.share, 1.0 - cell.share], [best, air])
    solved = float(effective_layer(drawn, found).through(np.array([TEMPERATURE]))[0])
    print(
        f"{name}: closed form {closed:.4f}, unit cell {solved:.4f}, bounds {low:.4f} and {high:.4f} W/(m K)"
    )
    assert low < closed <= high * (1.0 + 1e-9)
    assert low < solved < high
    assert closed == pytest.approx(solved, rel=0.15)


def test_an_effective_slab_of_a_cell_wall_is_slower_than_its_boards_alone():
    slab, place = slab_of("strut_wall"), station(cup("strut_wall"), Serving(), 0.0475)
    boards = [layer for layer in place.layers if layer.name != "chambers"]
    alone = sum(layer.thickness for layer in boards) ** 2 * boards[0].heat_capacity / boards[0].conductivity
    whole = effective(place, steady(place).temperature.tolist())
    assert whole.time_scale == pytest.approx(slab.wall.time_scale, rel=0.02)
    assert whole.time_scale > 3.0 * alone
