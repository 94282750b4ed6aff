"""Under a lid: condensation, holes, and the balances of the headspace."""

from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem import edges
from cupfem.drink import Headspace
from cupfem.films import HeadspaceConvection, Hole, HorizontalPlate, NaturalConvectionPlate, condensed
from cupfem.films.headspace import positive_part
from cupfem.fluids import water_saturation_pressure
from cupfem.problem import build
from cupfem.serving import Serving

ROOT = Path(__file__).parents[1]
PRESSURE = 101325.0
LIDDED = 'duration = "5 min"\n[drink]\ntemperature = "80 degC"\n[lid]\nsip_hole = "1.2 cm^2"\n'
DETECTABLE = 1e-3


@pytest.fixture(scope="module")
def cup():
    return cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")


def poured(cup, text):
    return cupfem.pour(cup, Serving.from_text(text), fineness=0.5, tolerance=0.02, companion=False)


# -- films ---------------------------------------------------------------------------------------------------


def test_transfer_velocity_of_the_analogy():
    """h = 10.33519 W/(m2 K) between 60 and 20 degC in air gives h_m = 1.003676e-2 m/s: recomputed from
    Chilton and Colburn with CoolProp's air and D_v = 2.178e-5 (T/273.15)^1.81 m2/s."""
    vapour = water_saturation_pressure(60.0)
    mass = condensed(10.33519, 20.0, 60.0, vapour, PRESSURE)
    drive = (vapour - water_saturation_pressure(20.0)) / (461.523 * 313.15)
    assert mass / drive == pytest.approx(1.003676e-2, rel=5e-3)


def test_condensation_is_one_sided():
    """A wall warmer than the dew point gives nothing off: exactly zero."""
    vapour = water_saturation_pressure(50.0)
    walls = np.array([80.0, 51.0, 50.0, 49.0, 20.0])
    mass = condensed(8.0, walls, 60.0, vapour, PRESSURE)
    assert mass[:3].tolist() == [0.0, 0.0, 0.0]
    assert np.all(np.diff(mass[2:]) > 0.0)


def test_positive_part_has_no_kink():
    x = np.linspace(-2.0, 4.0, 6001)
    slope = np.gradient(positive_part(x, 1.0), x)
    assert np.max(np.abs(np.diff(slope))) < 2e-3
    assert positive_part(4.0, 1.0) == 3.5


def test_dry_headspace_convects_like_the_plates():
    """Without vapour the moist densities are those of air, whose expansion is 1/T."""
    for mine, plate in (
        (HeadspaceConvection(0.02, 0.0, PRESSURE), NaturalConvectionPlate(0.02)),
        (HeadspaceConvection(0.02, 0.0, PRESSURE, "lid"), HorizontalPlate(0.02, "down")),
    ):
        assert mine.coefficient(30.0, 60.0) == pytest.approx(plate.coefficient(30.0, 60.0), rel=2e-3)


def test_vapour_keeps_the_gas_moving_where_nothing_is_warmer():
    gas = HeadspaceConvection(0.02, water_saturation_pressure(75.0), PRESSURE, "lid")
    assert gas.coefficient(60.0, 60.0) > 2.0 * HeadspaceConvection(0.02, 0.0, PRESSURE, "lid").coefficient(
        60.0, 60.0
    )


def test_hole_by_hand():
    """Epstein: 0.055 (g' D^5)^(1/2) with densities 1.1928 and 0.7875 kg/m3 (moist air by ideal gases), and
    D_v D."""
    hole = Hole(1.2e-4)
    diameter = 2.0 * np.sqrt(1.2e-4 / np.pi)
    above = (101325.0 - 1191.0) / (287.047 * 295.15) + 1191.0 / (461.523 * 295.15)
    below = (101325.0 - 31200.0) / (287.047 * 343.15) + 31200.0 / (461.523 * 343.15)
    reduced = 9.80665 * 2.0 * (above - below) / (above + below)
    by_hand = 0.055 * np.sqrt(reduced * diameter**5) + 2.178e-5 * (319.15 / 273.15) ** 1.81 * diameter
    assert hole.volume_flow(70.0, 31200.0, 22.0, 1191.0, PRESSURE) == pytest.approx(by_hand, rel=3e-3)


def test_stable_air_leaves_diffusion_alone():
    hole = Hole(1e-4)
    diffusion = 2.178e-5 * (288.15 / 273.15) ** 1.81 * hole.diameter
    assert hole.volume_flow(5.0, 800.0, 25.0, 800.0, PRESSURE) == pytest.approx(diffusion, rel=1e-9)


# -- balances ------------------------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def run(cup):
    return poured(cup, LIDDED)


def test_a_lid_more_than_halves_what_an_open_cup_loses_by_its_surface(cup, run):
    """Scoping estimate: the drop in ten minutes is 8 K under a lid, 19 K without."""
    free = poured(cup, LIDDED[: LIDDED.index("[lid]")])
    surface = ("vapour", "surface convection", "surface radiation")
    lid = ("vapour", "air through the lid", "lid convection", "lid radiation")
    lost = sum(free.ledger.out[name] for name in surface)
    assert sum(run.ledger.out[name] for name in lid) < 0.5 * lost


def test_the_hole_leaks_a_few_per_cent_of_open_evaporation(cup, run):
    """Trade estimate: 2 % (1 to 10 %) of the evaporation of an open cup."""
    free = poured(cup, LIDDED[: LIDDED.index("[lid]")])
    assert 0.01 < run.ledger.out["vapour"] / free.ledger.out["vapour"] < 0.10


def test_unknowns_stand_between_room_and_drink(cup, run):
    *_, gas, vapour, lid = run.final_state
    drink = run.series.drink_temperature[-1]
    assert 22.0 < lid < gas < drink
    assert water_saturation_pressure(lid) < vapour < water_saturation_pressure(drink)


def test_the_wall_above_the_level_is_hot_under_a_lid(cup, run):
    """Hot band does not follow the level unless the lid is off."""
    free = poured(cup, LIDDED[: LIDDED.index("[lid]")])
    assert run.inner_temperature_at(0.091)[-1] > free.inner_temperature_at(0.091)[-1] + 8.0


def test_ledger_closes_under_a_lid(run):
    assert abs(run.ledger.relative_residual) < 1e-6


def test_a_sign_flipped_on_one_side_breaks_the_ledger(cup, monkeypatch):
    """Condensate that the wall receives and the drink loses: planted, and noticed."""
    right = Headspace.feeds

    def wrong(self, fluxes, surface, drink):
        out = right(self, fluxes, surface, drink)
        mass = out[0].copy()
        out[0] -= 2.0 * mass
        out[1] -= 2.0 * mass * self.liquid.enthalpy(surface)
        return out

    monkeypatch.setattr(Headspace, "feeds", wrong)
    assert abs(poured(cup, LIDDED).ledger.relative_residual) > DETECTABLE


def test_a_lost_latent_heat_breaks_the_ledger(cup, monkeypatch):
    """The wall left out as a receiver of the condensate's latent heat."""
    films = edges.lidded_films

    def without(*arguments):
        found = dict(films(*arguments))
        carrier = found[edges.CONDENSATE].carrier
        found[edges.CONDENSATE] = Halved(carrier)
        return found

    class Halved(edges.Condensation):
        def heat_flux(self, surface, surroundings, height, time):
            return 0.5 * super().heat_flux(surface, surroundings, height, time)

    right = Headspace.feeds

    def full(self, fluxes, surface, drink):
        if edges.CONDENSATE in fluxes:
            fluxes = {**fluxes, edges.CONDENSATE: 2.0 * fluxes[edges.CONDENSATE]}
        return right(self, fluxes, surface, drink)

    monkeypatch.setattr(edges, "lidded_films", without)
    monkeypatch.setattr(Headspace, "feeds", full)
    assert abs(poured(cup, LIDDED).ledger.relative_residual) > DETECTABLE


def test_a_start_satisfies_the_balances(cup):
    """Drink and walls are given; gas, vapour and lid follow from them at once."""
    problem = build(cup, Serving.from_text(LIDDED), 0.5)
    residual = problem.system.drink_state(problem.system.loads(problem.start, 0.0)[0])[2:]
    assert np.max(np.abs(residual)) < 1e-6  # W


@pytest.mark.parametrize(
    "lid", ['conductance = "0.1 W/(m^2 K)"', 'material = "cork"\nthickness = "10 mm"', ""]
)
@pytest.mark.parametrize("drink", ["1 degC", "23 degC", "60 degC", "99.9 degC"])
def test_every_start_settles(cup, lid, drink):
    text = f'[drink]\ntemperature = "{drink}"\n[room]\nhumidity = 0.0\n[lid]\n{lid}\n'
    problem = build(cup, Serving.from_text(text), 0.5)
    residual = problem.system.drink_state(problem.system.loads(problem.start, 0.0)[0])[2:]
    assert np.max(np.abs(residual)) < 1e-6


@pytest.mark.parametrize("room", ["22 degC", "-30 degC"])
def test_a_lid_that_nothing_drives_is_solved(room):
    """No heat through the lid, none into the dry wall, dry air: the headspace has an unknown left over."""
    serving = cupfem.Serving.from_data(
        {
            "duration": "60 s",
            "room": {"temperature": room, "humidity": 0.0},
            "lid": {"conductance": "0 W/(m^2 K)"},
            "films": {"dry": {"coefficient": "0 W/(m^2 K)", "surroundings": "22 degC"}},
        }
    )
    run = cupfem.pour(cupfem.load_cup(ROOT / "geometries" / "single_board.toml"), serving, companion=False)
    assert abs(run.ledger.relative_residual) < 1e-6
