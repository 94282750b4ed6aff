"""Units: factors against pint, and each way in which unit text goes wrong when it is trusted."""

import math
import re
import subprocess
import sys
import time

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import BaseModel, ConfigDict, Field, ValidationError

from cupfem.errors import ConvergenceError, CupfemError, InputError, nearest
from cupfem.quantities import (
    DIMENSIONS,
    FilmCoefficient,
    Fraction,
    Length,
    Temperature,
    TemperatureDifference,
    format_quantity,
    parse_quantity,
)

# spellings of the table that pint reads differently or not at all -> the same unit in pint
PINT_NAMES = {
    "mil": "thou",  # the "mil" of pint is an angle
    "fl_oz": "fluid_ounce",
    "fl oz": "fluid_ounce",
    "gsm": "g/m^2",
    "lb/3000 ft^2": "lb/(3000 ft^2)",
    "lb/1000 ft^2": "lb/(1000 ft^2)",
    "": "dimensionless",
    "%": "percent",
}
SI_BASE = {"[length]": "m", "[mass]": "kg", "[time]": "s", "[temperature]": "K"}
REGISTRY = pint.UnitRegistry()


def in_pint(unit: str) -> "pint.Quantity":
    name = PINT_NAMES.get(unit, unit).replace("fl_oz", "fluid_ounce")
    name = re.sub(r"\b(delta_)?(deg[CF])\b", r"delta_\2", name)
    return REGISTRY.parse_expression(name.replace("Btu", "Btu_it")) * REGISTRY.Quantity(1.0)


@pytest.mark.parametrize(
    ("dimension", "unit"), [(name, unit) for name, kind in DIMENSIONS.items() for unit in kind.units]
)
def test_table_agrees_with_pint(dimension: str, unit: str) -> None:
    expected = in_pint(unit)
    si = math.prod(
        (REGISTRY.Unit(SI_BASE[base]) ** power for base, power in expected.dimensionality.items()),
        start=REGISTRY.Unit("rad" if dimension == "angle" else ""),
    )
    assert DIMENSIONS[dimension].units[unit] == pytest.approx(expected.to(si).magnitude, rel=1e-12)


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("0.35 mm", "length", 3.5e-4),
        ("0.35mm", "length", 3.5e-4),
        (" 350 µm ", "length", 3.5e-4),  # micro sign
        ("350 μm", "length", 3.5e-4),  # Greek mu
        ("18 mil", "length", 18 * 2.54e-5),
        ("1e2 mm", "length", 0.1),
        ("3 furlong", "length", 3 * 201.168402),  # outside the table: pint's US survey furlong
        ("1.2 cm^2", "area", 1.2e-4),
        ("1.2 cm2", "area", 1.2e-4),
        ("1.2 cm²", "area", 1.2e-4),
        ("1.2 cm**2", "area", 1.2e-4),
        ("8 fl oz", "volume", 8 * 29.5735295625e-6),  # NIST SP 811, app. B.8
        ("12 fl_oz", "volume", 12 * 29.5735295625e-6),
        ("85 degC", "temperature", 85.0),
        ("85 °C", "temperature", 85.0),
        ("-10°C", "temperature", -10.0),
        ("\u221210 °C", "temperature", -10.0),  # typographic minus
        ("185 degF", "temperature", 85.0),
        ("185 °F", "temperature", 85.0),
        ("300 K", "temperature", 26.85),
        ("3 K", "temperature_difference", 3.0),
        ("3 delta_degC", "temperature_difference", 3.0),
        ("9 delta_degF", "temperature_difference", 5.0),
        ("0.2 W/(m K)", "conductivity", 0.2),
        ("0.2 W/m/K", "conductivity", 0.2),
        ("0.2 W/(m*K)", "conductivity", 0.2),
        ("0.2 W/(m·K)", "conductivity", 0.2),
        ("0.2 W m^-1 K^-1", "conductivity", 0.2),
        ("0.2 W/m/degC", "conductivity", 0.2),  # pint with autoconverted offsets: 0.00073
        ("0.2 W/(m °C)", "conductivity", 0.2),
        ("1 Btu/(h ft degF)", "conductivity", 1.730734666),  # NIST SP 811, app. B.8: 1.730735
        ("1 Btu/(lb degF)", "specific_heat", 4186.8),  # NIST SP 811, app. B.8
        ("1 cal/(g degC)", "specific_heat", 4184.0),  # thermochemical calorie, by pint
        ("1 Btu/(h ft^2 degF)", "film_coefficient", 5.678263341),  # NIST SP 811: 5.678263
        ("300 g/m^2", "grammage", 0.3),
        ("300 g/m2", "grammage", 0.3),
        ("300 gsm", "grammage", 0.3),
        ("100 lb/3000 ft^2", "grammage", 45.359237 / 278.70912),  # kg per pound, m^2 per ream
        ("1 atm", "pressure", 101325.0),
        ("20 %", "fraction", 0.2),
        ("7 deg", "angle", math.radians(7)),
    ],
)
def test_reads(text: str, dimension: str, value: float) -> None:
    assert parse_quantity(text, dimension) == pytest.approx(value, rel=1e-8, abs=1e-12)


@pytest.mark.parametrize(
    ("text", "dimension", "message"),
    [
        ("0,5 mm", "length", 'length: "0,5 mm": decimal comma; write "0.5 mm"'),
        ("9**9**9", "length", '"**9**9" is not a unit of length; write it as in "0.35 mm"'),
        ("1 m^9^9", "length", '"m^9^9" is not a unit of length'),
        ("1 m^99", "length", '"m^99" is not a unit of length'),
        ("20 C", "temperature", 'temperature: "20 C": "C" is not a unit of temperature; write "20 degC"'),
        ("68 F", "temperature", 'write "68 degF"'),
        ("20 c", "temperature", 'write "20 degC"'),
        ("0.2 W/(m C)", "conductivity", 'write "0.2 W/(m degC)"'),
        ("3 degC", "temperature_difference", 'of temperature, not of temperature difference; write "3 K"'),
        ("5 degF", "temperature_difference", 'write "5 delta_degF"'),
        ("12 oz", "volume", '"oz" is a unit of mass, not of volume; write "12 fl_oz"'),
        ("18 pt", "length", 'write "18 mil"'),
        ("5 mil", "angle", '"mil" is a unit of length, not of angle'),
        ("3 m2", "length", '"m2" is a unit of area, not of length; write it as in "0.35 mm"'),
        ("400 W/m2K", "film_coefficient", 'more than one unit after / needs brackets; write "400 W/(m^2 K)"'),
        ("400 W/m^2 K", "film_coefficient", 'write "400 W/(m^2 K)"'),
        ("0.2 W/m K", "conductivity", 'write "0.2 W/(m K)"'),
        ("5 MM", "length", 'write "5 mm"'),
        ("3", "length", 'no unit; write the unit too, as in "3 mm"'),
        ("85", "temperature", 'no unit; write the unit too, as in "85 degC"'),
        ("nan mm", "length", "not a number followed by a unit"),
        ("inf mm", "length", "not a number followed by a unit"),
        ("-inf mm", "length", "not a number followed by a unit"),
        ("1e400 mm", "length", "not a number that can be stored"),
        ("1e-400 mm", "length", "not a number that can be stored"),
        ("", "length", "not a number followed by a unit"),
        ("mm", "length", "not a number followed by a unit"),
        ("1 000 mm", "length", "not a number followed by a unit"),
        ("1_000 mm", "length", "is not a unit of length"),
        ("1.2.3 mm", "length", "not a number followed by a unit"),
        ("0x10 mm", "length", "is not a unit of length"),
        ("٣ mm", "length", "not a number followed by a unit"),  # Arabic-Indic digit
        ("1 mm; import os", "length", "is not a unit of length"),
        ("1 mm\n2 mm", "length", "is not a unit of length"),
        ("1 " + "m " * 500, "length", "not a number followed by a unit"),
        ("-300 degC", "temperature", "below absolute zero"),
        ("-1 K", "temperature", "below absolute zero"),
        ("1 (m", "length", "is not a unit of length"),
        ("5 lambda", "time", "is not a unit of time"),
    ],
)
def test_refuses(text: str, dimension: str, message: str) -> None:
    with pytest.raises(InputError) as caught:
        parse_quantity(text, dimension)
    assert message in str(caught.value)
    assert "\n" not in str(caught.value)


def test_power_tower_is_not_evaluated() -> None:
    start = time.perf_counter()
    with pytest.raises(InputError):
        parse_quantity("1 m**9**9**9", "length")
    assert time.perf_counter() - start < 2.0


@given(st.text(max_size=30))
def test_any_text_gives_a_finite_number_or_one_line(text: str) -> None:
    try:
        assert math.isfinite(parse_quantity(text, "length"))
    except InputError as error:
        assert "\n" not in str(error)


@given(st.text(alphabet="mkgsWKCFJ/^()2 -_%°.,", max_size=14), st.sampled_from(sorted(DIMENSIONS)))
def test_any_unit_gives_a_finite_number_or_one_line(unit: str, dimension: str) -> None:
    try:
        assert math.isfinite(parse_quantity(f"1 {unit}", dimension))
    except InputError as error:
        assert "\n" not in str(error)


def test_unknown_dimension_is_a_programming_error() -> None:
    with pytest.raises(ValueError, match='Did you mean "length"'):
        parse_quantity("1 mm", "lenght")


@pytest.mark.parametrize(
    ("value", "dimension", "units", "text"),
    [
        (3.5e-4, "length", "si", "0.35 mm"),
        (1.5e-5, "length", "si", "15 um"),
        (0.095, "length", "si", "95 mm"),
        (0.095, "length", "us", "3.74 in"),
        (0.0, "length", "si", "0 mm"),
        (85.0, "temperature", "us", "185 degF"),
        (61.24, "temperature", "si", "61.2 degC"),
        (5.0, "temperature_difference", "us", "9 delta_degF"),
        (2.5e-4, "volume", "si", "250 ml"),
        (2.5e-4, "volume", "us", "8.45 fl_oz"),
        (0.3, "grammage", "us", "184 lb/3000 ft^2"),
        (1200.0, "time", "si", "20 min"),
        (0.02, "fraction", "si", "2 %"),
        (1234.5, "heat_flux", "si", "1234 W/m^2"),
    ],
)
def test_formats(value: float, dimension: str, units: str, text: str) -> None:
    assert format_quantity(value, dimension, units) == text


class Wall(BaseModel):
    model_config = ConfigDict(frozen=True, extra="forbid")
    thickness: Length = Field(gt=0)
    fill: Temperature = 85.0
    film: FilmCoefficient = 400.0
    step: TemperatureDifference = 1.0
    share: Fraction = 0.0


def test_field_holds_si() -> None:
    wall = Wall(thickness="0.35 mm", fill="185 degF", share="20 %")
    assert (wall.thickness, wall.fill, wall.share) == (pytest.approx(3.5e-4), 85.0, 0.2)


@given(st.floats(1e-9, 1e3), st.floats(-200, 2000), st.floats(0, 1))
def test_field_round_trip(thickness: float, fill: float, share: float) -> None:
    wall = Wall.model_construct(thickness=thickness, fill=fill, share=share)
    back = Wall.model_validate(wall.model_dump())
    assert back.thickness == pytest.approx(thickness, rel=1e-12)
    assert back.fill == pytest.approx(fill, rel=1e-12)
    assert back.share == share
    assert Wall.model_validate_json(wall.model_dump_json()) == back


@pytest.mark.parametrize(
    ("table", "message"),
    [
        ({"thickness": 3}, 'not a text with a unit; write it as in "3 mm"'),
        ({"thickness": True}, "not a text with a unit"),
        ({"thickness": None}, "not a text with a unit"),
        ({"thickness": "0 mm"}, "greater than 0"),
        ({"thickness": "1 mm", "fill": 85.0}, 'as in "85.0 degC"'),
        ({"thickness": "1 mm", "share": 20}, 'not a share from 0 to 1; write 0.2 or "20 %"'),
        ({"thickness": "1 mm", "share": True}, "not a text with a unit"),
        ({"thickness": "1 mm", "share": math.nan}, "not a share from 0 to 1"),
    ],
)
def test_field_refuses(table: dict[str, object], message: str) -> None:
    with pytest.raises(ValidationError) as caught:
        Wall.model_validate(table)
    assert message in caught.value.errors()[0]["msg"]


def test_schema_is_text_with_examples() -> None:
    properties = Wall.model_json_schema()["properties"]
    assert properties["film"]["type"] == "string"
    assert properties["film"]["examples"] == ["400 W/(m^2 K)"]
    assert properties["share"]["anyOf"][0] == {"type": "number", "minimum": 0, "maximum": 1}
    for name, dimension in DIMENSIONS.items():
        for example in dimension.examples:
            assert math.isfinite(parse_quantity(example, name))


def test_usual_units_do_not_load_pint() -> None:
    use = "from cupfem.quantities import parse_quantity as parse; parse('0.2 W/(m K)', 'conductivity')"
    code = f"import sys; {use}; sys.exit('pint' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0


def test_error_text() -> None:
    error = InputError("layer.gap.thickness", "0,5 mm", "decimal comma", '"0.5 mm"')
    assert str(error) == 'layer.gap.thickness: "0,5 mm": decimal comma; write "0.5 mm"'
    assert isinstance(error, CupfemError)
    assert str(InputError("cup.toml", why="no such file")) == "cup.toml: no such file"
    assert str(InputError("levels", [1, 2], "too many", "give one")) == "levels: [1, 2]: too many; give one"
    assert len(str(InputError("x", "y" * 500))) < 80
    assert str(ConvergenceError("at 3 s:\n step too small")) == "at 3 s: step too small"


def test_nearest_name() -> None:
    assert nearest("thicknes", ["thickness", "material"]) == ' Did you mean "thickness"?'
    assert nearest("Film", ["film", "gap"]) == ' Did you mean "film"?'
    assert nearest("zzz", ["thickness"]) == ""
