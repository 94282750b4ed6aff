"""The serving file: its defaults, schedules, events and films, and what it asks of a cup."""

import json
from pathlib import Path

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from CoolProp.HumidAirProp import HAPropsSI

import cupfem
from cupfem.cup import load_cup
from cupfem.errors import InputError
from cupfem.films.evaporation import CLOSURES, DEFAULT_CLOSURE
from cupfem.fluids import LIQUIDS
from cupfem.inputs import defaults_used, resolved_toml
from cupfem.serving import (
    CORRELATIONS,
    SURFACE_CORRELATIONS,
    Drink,
    Drinking,
    FixedFilm,
    Room,
    Serving,
    Sip,
    Target,
    check,
    fill_volume,
    load_serving,
    serving_schema,
)

ROOT = Path(__file__).parents[1]
SERVINGS = sorted((ROOT / "geometries").glob("serving_*.toml"))
ONE_ATMOSPHERE = 101325.0


@pytest.fixture(scope="module")
def cup():
    return load_cup(ROOT / "geometries" / "double_wall.toml")


@pytest.mark.parametrize("path", SERVINGS, ids=lambda path: path.stem)
def test_every_serving_of_the_project_fits_the_double_wall(path, cup):
    check(cup, load_serving(path))


def test_the_default_serving_is_written_out():
    assert load_serving(ROOT / "geometries" / "serving_default.toml") == Serving()


def test_the_default_serving():
    serving = Serving()
    assert (serving.duration, serving.drink.kind, serving.drink.temperature) == (600.0, "water", 85.0)
    assert (serving.room.temperature, serving.room.humidity, serving.room.air_speed) == (22.0, 0.45, 0.1)
    assert serving.start_temperature == 22.0
    assert serving.event == ()
    assert serving.target is None
    assert {edge: getattr(serving.films, edge).correlation for edge in CORRELATIONS} == {
        edge: names[0] for edge, names in CORRELATIONS.items()
    }


def test_python_works_like_the_file():
    made = Serving(drink=Drink(temperature="185 degF"), room=Room(temperature="21 degC"), duration="10 min")
    read = Serving.from_text(
        'duration = "10 min"\n[drink]\ntemperature = "185 degF"\n[room]\ntemperature = "21 degC"\n'
    )
    assert made == read
    assert made.drink.temperature == pytest.approx(85.0, abs=1e-12)
    assert cupfem.Serving is Serving


def test_a_title_alone_is_a_serving():
    assert Serving.from_text('title = "Tea"') == Serving(title="Tea")


def test_steps_of_the_room_hold_until_the_next():
    room = Room(temperature=[["0 s", "22 degC"], ["5 min", "4 degC"], ["10 min", "30 degC"]])
    times = [0.0, 299.9, 300.0, 599.9, 600.0, 1e6]
    assert room.temperature_at(times).tolist() == [22.0, 22.0, 4.0, 4.0, 30.0, 30.0]
    assert room.steps == ((0.0, 22.0), (300.0, 4.0), (600.0, 30.0))
    assert Room(temperature="19 degC").temperature_at(np.array([[0.0], [7.0]])).tolist() == [[19.0], [19.0]]


def test_cup_starts_at_the_first_temperature_of_the_room():
    room = Room(temperature=[["0 s", "22 degC"], ["5 min", "4 degC"]])
    assert Serving(room=room).start_temperature == 22.0
    assert Serving(room=room, start={"temperature": "60 degC"}).start_temperature == 60.0


@pytest.mark.parametrize(
    ("event", "times"),
    [
        ({"first": "2 min"}, [120.0]),
        ({"first": "2 min", "every": "45 s", "count": 3}, [120.0, 165.0, 210.0]),
        ({"first": "2 min", "every": "45 s", "last": "210 s"}, [120.0, 165.0, 210.0]),
        ({"first": "2 min", "every": "45 s", "last": "209 s"}, [120.0, 165.0]),
        ({"first": "4 min", "every": "3 min"}, [240.0, 420.0, 600.0]),
    ],
)
def test_sips(event, times):
    serving = Serving(event=[{"sip": "15 ml", **event}])
    assert [time for time, _ in serving.sips()] == times
    assert [volume for _, volume in serving.sips()] == pytest.approx([15e-6] * len(times))
    assert serving.drunk() == pytest.approx(15e-6 * len(times))


def test_rounding_does_not_lose_the_last_sip():
    serving = Serving(event=[{"sip": "1 ml", "first": "0.1 s", "every": "1.1 s", "last": "3.4 s"}])
    assert len(serving.sips()) == 4


def test_steady_drinking_and_the_breaks():
    steady = Drinking(drinking="180 ml", from_="1 min")
    serving = Serving(
        event=(steady, Sip(sip="15 ml", first="2 min")),
        room=Room(temperature=[["0 s", "22 degC"], ["5 min", "4 degC"]]),
    )
    ((flow, start, end),) = serving.steady_drinking()
    assert (start, end) == (60.0, 600.0)
    assert flow == pytest.approx(180e-6 / 540.0)
    assert serving.breaks() == (60.0, 120.0, 300.0)
    assert serving.drunk() == pytest.approx(195e-6)


def test_a_fixed_film_names_its_surroundings():
    serving = Serving.from_text(
        '[films]\nwetted = { coefficient = "400 W/(m^2 K)" }\n'
        'outside = { coefficient = "11.5 W/(m^2 K)", surroundings = "20 degC" }\n'
    )
    assert serving.films.outside == FixedFilm(coefficient="11.5 W/(m^2 K)", surroundings="20 degC")
    assert serving.films.wetted.coefficient == 400.0


def test_names_of_the_closures_are_those_of_the_films():
    assert set(SURFACE_CORRELATIONS) == set(CLOSURES)
    assert SURFACE_CORRELATIONS[0] == DEFAULT_CLOSURE


@pytest.mark.parametrize("edge", list(CORRELATIONS))
def test_every_offered_name_is_accepted(edge):
    for name in CORRELATIONS[edge]:
        serving = Serving(films={edge: {"correlation": name}})
        assert getattr(serving.films, edge).correlation == name


@pytest.mark.parametrize("kind", list(LIQUIDS))
def test_every_drink_is_offered(kind):
    assert Drink(kind=kind).liquid == LIQUIDS[kind]


def test_a_drink_of_its_own():
    liquid = Drink(density="1030 kg/m^3", specific_heat="3.9 kJ/(kg K)").liquid
    assert liquid.density(80.0) == 1030.0
    assert liquid.specific_heat(80.0) == 3900.0


def test_fill(cup):
    assert fill_volume(cup, Serving()) == pytest.approx(cup.volume(0.085))
    assert fill_volume(cup, Serving(drink=Drink(level="50 mm"))) == pytest.approx(cup.volume(0.050))
    assert fill_volume(cup, Serving(drink=Drink(volume="200 ml"))) == pytest.approx(200e-6)


@pytest.mark.parametrize(
    ("serving", "message"),
    [
        (
            {"drink": {"level": "95 mm"}},
            r'^drink\.level: "95 mm": not below the brim at 95 mm; write .*"85 mm"',
        ),
        (
            {"drink": {"level": "8 mm"}},
            r'^drink\.level: "8 mm": no drink: the floor of the cup is at 8\.35 mm',
        ),
        (
            {"drink": {"volume": "1 l"}},
            r'^drink\.volume: "1000 ml": the cup is brimful with 313 ml; write less',
        ),
        (
            {"drink": {"volume": "100 ml"}, "event": [{"drinking": "101 ml"}]},
            r'^event: "101 ml": more than the 100 ml poured',
        ),
        (
            {"event": [{"sip": "20 ml", "first": "10 s", "every": "10 s"}]},
            r'^event: "1200 ml": more than the 266 ml poured',
        ),
        (
            {"target": {"wall_below": "60 degC", "between": ["40 mm", "99 mm"]}},
            r'^target\.between: "99 mm": above the brim at 95 mm; write at most "95 mm"',
        ),
    ],
)
def test_what_the_cup_cannot_take(cup, serving, message):
    with pytest.raises(InputError, match=message):
        check(cup, Serving(**serving))


@pytest.mark.parametrize(("room", "humidity"), [(22.0, 0.45), (35.0, 0.8), (5.0, 0.95)])
def test_a_drink_below_the_dew_point_is_refused(room, humidity):
    """The limit by CoolProp, humid air by the formulation of ASHRAE RP-1485; ours within 0.1 K of it."""
    dew_point = HAPropsSI("D", "T", room + 273.15, "R", humidity, "P", ONE_ATMOSPHERE) - 273.15
    around = Room(temperature=f"{room} degC", humidity=humidity)
    warmer = Serving(room=around, drink=Drink(temperature=f"{dew_point + 0.1} degC"))
    assert warmer.drink.temperature < room
    with pytest.raises(InputError, match=r"^drink\.temperature: .*below the room's dew point of "):
        Serving(room=around, drink=Drink(temperature=f"{dew_point - 0.1} degC"))


def test_every_step_of_the_room_counts_for_the_dew_point():
    steps = [["0 s", "22 degC"], ["1 min", "38 degC"]]
    assert round(HAPropsSI("D", "T", 38 + 273.15, "R", 0.45, "P", ONE_ATMOSPHERE) - 273.15) == 24
    with pytest.raises(InputError, match=r"dew point of 24(\.0\d)? degC"):
        Serving(room=Room(temperature=steps), drink=Drink(temperature="20 degC"))


def test_a_drink_that_boils_is_refused():
    boiling = PropsSI("T", "P", ONE_ATMOSPHERE, "Q", 0, "Water") - 273.15
    Serving(drink=Drink(temperature=f"{boiling - 0.1} degC"))
    with pytest.raises(InputError, match=r"^drink\.temperature: .*boils at (99\.9|100)"):
        Serving(drink=Drink(temperature=f"{boiling + 0.1} degC"))


@pytest.mark.parametrize(
    "serving",
    [
        Serving(),
        load_serving(ROOT / "geometries" / "serving_galley_tea.toml"),
        Serving(
            room=Room(temperature=[["0 s", "22 degC"], ["5 min", "4 degC"]]), start={"temperature": "30 degC"}
        ),
        Serving(drink=Drink(density="1030 kg/m^3", specific_heat="3900 J/(kg K)", volume="200 ml")),
        Serving(
            event=[{"sip": "15 ml", "first": "2 min", "every": "45 s", "count": 3}, {"drinking": "50 ml"}]
        ),
        Serving(
            title='Tea, "hot" \\ \t\x7f ☕',
            films={
                "wetted": {"coefficient": "400 W/(m^2 K)"},
                "outside": {"coefficient": "11.5 W/(m^2 K)", "surroundings": "22 degC"},
            },
            target=Target(drink_above="55 degC", until="5 min"),
        ),
    ],
)
def test_resolved_file_gives_the_same_serving(serving):
    text = resolved_toml(serving)
    assert Serving.from_text(text) == serving
    assert resolved_toml(Serving.from_text(text)) == text


def test_defaults_are_told():
    told = defaults_used(Serving.from_text('[drink]\nlevel = "70 mm"\n[room]\nhumidity = 0.3\n'))
    assert 'drink.temperature = "85 degC"' in told
    assert 'room.temperature = "22 degC"' in told
    assert "start.temperature = that of the room" in told
    assert not any(line.startswith(("drink.level", "room.humidity")) for line in told)
    assert "drink.level = 10 mm below the brim" in defaults_used(Serving())


def test_what_replaces_a_default_is_not_told_as_one():
    own = Drink(density="1030 kg/m^3", specific_heat="3900 J/(kg K)", volume="200 ml")
    told = defaults_used(Serving(drink=own))
    assert not any(line.startswith(("drink.kind", "drink.level")) for line in told)


def test_published_schema_is_up_to_date():
    published = (ROOT / "docs" / "schemas" / "serving.schema.json").read_text(encoding="utf-8")
    assert json.loads(published) == serving_schema(), "run python docs/schemas/write.py"


def test_schema_offers_names_and_defaults():
    schema = serving_schema()
    assert schema["$defs"]["Drink"]["properties"]["kind"]["enum"] == list(
        Drink.model_fields["kind"].annotation.__args__
    )
    assert schema["properties"]["duration"]["default"] == "10 min"
    assert schema["$defs"]["Room"]["properties"]["temperature"]["default"] == "22 degC"
    assert "null" not in json.dumps(schema)
