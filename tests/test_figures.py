"""Pictures show the run's own numbers, in the units they name. No pixels are compared."""

from pathlib import Path

import matplotlib
import numpy as np
import pytest
from matplotlib.collections import TriMesh
from matplotlib.contour import ContourSet
from matplotlib.patches import PathPatch
from matplotlib.text import Text

from cupfem import figures
from cupfem.cup import load_cup
from cupfem.drawing import survey
from cupfem.figures import outline, style
from cupfem.figures.heat import grouped_flows, grouped_heats
from cupfem.pour import pour
from cupfem.serving import Serving

GEOMETRIES = Path(__file__).parents[1] / "geometries"
SERVING = """
title = "Half a minute on the mess table"
duration = "30 s"
[drink]
temperature = "85 degC"
volume = "200 ml"
[room]
temperature = "21 degC"
[[event]]
sip = "20 ml"
first = "15 s"
"""
LID = """
[[event]]
refill = "30 ml"
at = "20 s"
[lid]
sip_hole = "1.2 cm^2"
"""


@pytest.fixture(scope="module")
def run():
    cup = load_cup(GEOMETRIES / "double_wall.toml")
    return pour(cup, Serving.from_text(SERVING), fineness=0.5, companion=False)


@pytest.fixture(scope="module")
def lidded():
    cup = load_cup(GEOMETRIES / "double_wall.toml")
    return pour(cup, Serving.from_text(SERVING + LID), fineness=0.5, companion=False)


def texts(figure) -> list[str]:
    return [artist.get_text() for artist in figure.findobj(Text) if artist.get_text()]


def lines(axes) -> list[tuple[np.ndarray, np.ndarray]]:
    return [line.get_data() for line in axes.get_lines()]


def holds(axes, x, y) -> bool:
    """Whether one line of the axes holds exactly these data."""
    return any(
        len(x) == len(px) and np.allclose(px, x, rtol=1e-12) and np.allclose(py, y, rtol=1e-12)
        for px, py in lines(axes)
    )


def fahrenheit(celsius):
    return np.asarray(celsius) * 9 / 5 + 32


class TestWallHistory:
    def test_curves_are_the_run_at_the_stations(self, run):
        (axes,) = figures.wall_history(run, heights=[0.030, 0.060]).axes
        for height in (0.030, 0.060):
            assert holds(axes, run.time, run.outer_temperature_at(height))

    def test_us_units(self, run):
        figure = figures.wall_history(run, heights=[0.0254], units="us")
        assert holds(figure.axes[0], run.time, fahrenheit(run.outer_temperature_at(0.0254)))
        assert "free outer wall [°F]" in texts(figure)
        assert "at 1 in" in texts(figure)

    def test_the_comfort_line_is_there_and_named(self, run):
        for units, limit, label in (("si", 40.0, "40 °C"), ("us", 104.0, "104 °F")):
            figure = figures.wall_history(run, units=units)
            (line,) = (line for line in figure.axes[0].get_lines() if line.get_gid() == "limit")
            assert line.get_ydata() == pytest.approx([limit, limit])
            assert any(text.strip() == label for text in texts(figure))

    def test_the_first_minute_is_seen(self, run):
        axes = figures.wall_history(run).axes[0]
        assert axes.get_xscale() == "log"
        assert axes.get_xlim() == pytest.approx((0.5, 30.0))
        assert "10 s" in [label.get_text() for label in axes.get_xticklabels()]

    def test_the_hottest_place_is_a_station(self, run):
        height = 1e-3 * run.figures()["outer_max_height_mm"]
        figure = figures.wall_history(run)
        assert f"at {1e3 * round(height, 3):.3g} mm" in texts(figure)

    def test_it_says_what_it_is_not(self, run):
        for picture in (figures.wall_history, figures.wall_profile, figures.wall_map):
            assert "free-wall figures, not a hold time" in texts(picture(run))


def test_wall_profile(run):
    figure = figures.wall_profile(run, times=[10.0, 30.0])
    axes = figure.axes[0]
    index = int(np.flatnonzero(run.time == 10.0)[0])
    assert holds(axes, run.series.outer_temperature[index], 1e3 * run.faces.outer_height)
    assert holds(axes, run.series.outer_temperature[-1], 1e3 * run.faces.outer_height)
    marks = [line.get_ydata()[0] for line in axes.get_lines() if line.get_gid() == "level"]
    assert marks == pytest.approx([1e3 * run.series.drink_level[index], 1e3 * run.series.drink_level[-1]])
    assert {"10 s", "30 s", "40 °C", "free outer wall [°C]"} <= set(texts(figure))


def test_wall_map(run):
    figure = figures.wall_map(run)
    axes = figure.axes[0]
    assert holds(axes, run.time, 1e3 * run.series.drink_level)
    levels = [list(found.levels) for found in axes.findobj(ContourSet)]
    assert [40.0] in levels


class TestField:
    def test_colours_are_the_field(self, run):
        (whole,) = figures.field_figure(run, times=[10.0]).axes[0].findobj(TriMesh)
        assert np.array_equal(np.asarray(whole.get_array()), run.snapshot(10.0))

    def test_us_colours(self, run):
        (whole,) = figures.field_figure(run, times=[10.0], units="us").axes[0].findobj(TriMesh)
        assert np.asarray(whole.get_array()) == pytest.approx(fahrenheit(run.snapshot(10.0)))

    def test_triangles_fill_the_section(self, run):
        """Shoelace area of all triangles against that of the cells."""
        mesh = run.mesh
        found = outline.triangles(mesh, np.arange(mesh.element_dofs.shape[1]))
        fine = sum(area(mesh.points[:, three].T) for three in found)
        whole = sum(area(mesh.grid.p[:, cell].T) for cell in mesh.grid.t.T)
        assert fine == pytest.approx(whole, rel=1e-9)

    def test_proportion_is_true(self, run):
        for units in ("si", "us"):
            figure = figures.field_figure(run, units=units)
            axes = figure.axes[0]
            width, height = figure.get_size_inches()
            box = axes.get_position()
            (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
            across, along = box.width * width / (right - left), box.height * height / (top - bottom)
            assert across == pytest.approx(along, rel=1e-9)

    def test_strip_has_the_isotherm_of_forty_degrees(self, run):
        for units, limit in (("si", 40.0), ("us", 104.0)):
            strip = figures.field_figure(run, times=[10.0], units=units).axes[1]
            assert [limit] in [list(found.levels) for found in strip.findobj(ContourSet)]

    def test_one_colour_bar_with_its_unit(self, run):
        for units, sign in (("si", "°C"), ("us", "°F")):
            figure = figures.field_figure(run, units=units)
            assert [axes.get_title() for axes in figure.axes].count(sign) == 1
            assert f"drink\n{style.shown(np.interp(10, run.time, run.series.drink_temperature), 'temperature', units):.1f} {sign}" in texts(figure)  # fmt: skip  # noqa: E501

    def test_bands_hold_the_whole_field(self, run):
        edges, _, _ = style.bands(run.snapshots.min(), 85.0, "si")
        assert edges[0] <= run.snapshots.min()
        assert edges[-1] >= 85.0
        assert np.diff(edges) == pytest.approx(5.0)

    def test_times_are_stored_ones(self, run):
        assert figures.field_times(run) == [10.0, 30.0]
        assert figures.field_times(run, [0.9, 22.0]) == [1.0, 20.0, 30.0]

    def test_colour_map_is_monotone_in_grey(self):
        """Luma of ITU-R BT.601 rises along the map, so that a grey print keeps the order."""
        colours = matplotlib.colormaps[style.FIELD_MAP](np.linspace(0, 1, 64))[:, :3]
        assert np.all(np.diff(colours @ [0.299, 0.587, 0.114]) > 0)


def area(corners: np.ndarray) -> float:
    """Shoelace formula."""
    x, y = corners.T
    return 0.5 * abs(float(x @ np.roll(y, -1) - y @ np.roll(x, -1)))


class TestSection:
    @pytest.mark.parametrize("name", ["double_wall", "double_wall_sleeve", "stoneware_mug", "foam"])
    def test_dimensions_of_a_drawing(self, name):
        cup = load_cup(GEOMETRIES / f"{name}.toml")
        found = texts(figures.section_figure(survey(cup)))
        assert f"{1e3 * cup.height:.3g} mm" in found
        assert f"Ø {2e3 * cup.inner_radius(cup.height):.3g} mm inside" in found
        for layer in cup.layer:
            assert f"{layer.name}  {1e3 * layer.thickness:.3g} mm" in found
        assert cup.title in found

    def test_level_of_a_run_is_the_serving_s(self, run):
        figure = figures.section_figure(run)
        assert "level, 200 ml" in texts(figure)
        level = 1e3 * run.series.drink_level[0]
        assert any(np.allclose(y, level) and x[0] == 0 for x, y in lines(figure.axes[0]))

    def test_us_units(self, run):
        found = texts(figures.section_figure(run, "us"))
        assert "3.74 in" in found
        assert "inner  13 mil" in found
        assert "level, 6.76 fl oz" in found
        assert not any("mm" in text for text in found)

    def test_every_region_is_filled_and_outlined(self, run):
        """Area of the filled paths by the shoelace formula; corners of the outline meet 2, 3 or 4 lines."""
        axes = figures.section_figure(run).axes[0]
        paths = {patch.get_fill(): patch.get_path() for patch in axes.findobj(PathPatch)}
        filled = [patch.get_path() for patch in axes.findobj(PathPatch) if patch.get_fill()]
        assert len(filled) == len(run.mesh.regions)
        total = sum(area(cell[:4]) for path in filled for cell in path.vertices.reshape(-1, 5, 2))
        grid = run.mesh.grid
        assert total == pytest.approx(1e6 * sum(area(grid.p[:, cell].T) for cell in grid.t.T), rel=1e-9)
        ends = np.round(paths[False].vertices, 6)
        assert set(np.unique(ends, axis=0, return_counts=True)[1]) <= {2, 3, 4}


class TestHeat:
    def test_flows_are_those_to_the_room(self, run, lidded):
        for one in (run, lidded):
            flows = grouped_flows(one)
            told = [power for name, power in one.series.powers.items() if name in one.ledger.out]
            liquid = [one.series.powers[name] for name in ("sips", "refills") if name in one.series.powers]
            assert sum(flows.values()) == pytest.approx(sum(told) - sum(liquid))
        axes = figures.heat_figure(run).axes[0]
        late = run.time >= 1.0
        assert holds(axes, run.time[late], run.series.powers["vapour"][late])

    def test_flows_inside_a_lidded_cup_are_no_loss(self, lidded):
        assert "condensation on dry wall" in lidded.series.powers
        assert "condensation on dry wall" not in grouped_flows(lidded)
        assert {"lid: convection", "air through the lid"} <= set(grouped_flows(lidded))

    def test_heats_add_up_to_what_the_drink_lost_by_cooling(self, run, lidded):
        for one in (run, lidded):
            heats = grouped_heats(one)
            lost = -one.ledger.drink - one.ledger.out["sips"] - one.ledger.out.get("refills", 0.0)
            assert sum(heats.values()) == pytest.approx(lost, abs=2 * abs(one.ledger.residual) + 1e-6)
            assert list(heats.values()) == sorted(heats.values(), reverse=True)

    def test_bars_and_units(self, run):
        for units, unit, joules in (("si", "kJ", 1000.0), ("us", "Btu", 1055.05585262)):
            figure = figures.heat_figure(run, units)
            widths = [bar.get_width() for bar in figure.axes[1].patches]
            assert widths == pytest.approx([heat / joules for heat in grouped_heats(run).values()])
            assert f"heat over the run [{unit}]" in texts(figure)

    def test_what_was_drunk_and_refilled_is_told_apart(self, run, lidded):
        for one, words in ((run, ["sips"]), (lidded, ["sips", "refills"])):
            (note,) = (text for text in texts(figures.heat_figure(one)) if "(counted from" in text)
            for name in words:
                assert f"{abs(one.ledger.out[name]) / 1e3:.3g} kJ" in note


def test_drink(run):
    upper, lower = figures.drink_figure(run).axes
    assert holds(upper, run.time, run.series.drink_temperature)
    assert holds(lower, run.time, 1e3 * run.series.drink_level)
    assert upper.get_ylabel() == "drink [°C]"


def test_labels_that_would_overlap_are_moved_apart():
    places = style.spread([1.0, 1.1, 5.0], 0.5, 0.0, 10.0)
    assert places == pytest.approx([0.8, 1.3, 5.0])
    assert style.spread([0.0, 0.1], 1.0, 0.0, 10.0) == pytest.approx([0.0, 1.0])


def test_files_are_the_same_bytes_twice(run, tmp_path):
    first = figures.write_figures(run, tmp_path)
    bytes_of = {path.name: path.read_bytes() for path in first.values()}
    assert set(first) == {"section", "field", "wall_history", "wall_profile", "wall_map", "drink", "heat"}
    assert all(path.stem == name for name, path in first.items())
    assert all(content.startswith(b"\x89PNG") for content in bytes_of.values())
    assert {
        path.name: path.read_bytes() for path in figures.write_figures(run, tmp_path).values()
    } == bytes_of


def test_nothing_global_is_touched(run):
    before = dict(matplotlib.rcParams)
    figures.wall_history(run)
    assert dict(matplotlib.rcParams) == before
