"""What panels plot: the numbers on the axes, not the pixels."""

from __future__ import annotations

import numpy as np
import pytest
import xarray as xr
from matplotlib.axes import Axes
from matplotlib.collections import PolyCollection, QuadMesh
from matplotlib.figure import Figure
from matplotlib.quiver import Quiver

from oceanbox.diagnostics import summarise
from oceanbox.errors import UnreadableResult
from oceanbox.figures import loads_page
from oceanbox.figures.drawing import draw_panel
from oceanbox.figures.fields import arrows
from oceanbox.figures.panels.maps import tongue_edge
from tests.synthetic import synthetic_means, synthetic_result

ROUND_OFF = 1e-12


@pytest.fixture(scope="module")
def result() -> xr.Dataset:
    return synthetic_result()


def drawn(result: xr.Dataset, options: str) -> Axes:
    panel = loads_page(f"panels: [{{{options}}}]").panels[0]
    return draw_panel(Figure().add_subplot(), result, panel)


def mesh_of(ax: Axes) -> QuadMesh:
    return next(item for item in ax.collections if isinstance(item, QuadMesh))


def y_of(ax: Axes, label: str) -> np.ndarray:
    return np.asarray(next(line for line in ax.lines if line.get_label() == label).get_ydata())


def test_the_depth_map_shows_every_cell_between_its_faces(result: xr.Dataset) -> None:
    ax = drawn(result, "kind: thermocline_map")
    mesh = mesh_of(ax)
    np.testing.assert_array_equal(mesh.get_array(), result["thermocline_depth"])
    corners = mesh.get_coordinates()
    assert corners.shape == (41, 31, 2)
    np.testing.assert_allclose(corners[0, :, 0], np.degrees(result["x_face"] / 6.371e6), rtol=ROUND_OFF)
    np.testing.assert_allclose(corners[:, 0, 1], np.degrees(result["y_face"] / 6.371e6), rtol=ROUND_OFF)
    assert mesh.get_rasterized()


def test_colours_cover_the_field_unless_a_scale_is_given(result: xr.Dataset) -> None:
    fitted = mesh_of(drawn(result, "kind: thermocline_map")).norm
    assert fitted.vmin <= result["thermocline_depth"].min()
    assert fitted.vmax >= result["thermocline_depth"].max()
    given = mesh_of(drawn(result, "kind: thermocline_map, shallowest_m: 100, deepest_m: 200")).norm
    assert (given.vmin, given.vmax, given.extend) == (100.0, 200.0, "both")


def test_numbers_of_a_colour_bar_are_round_multiples(result: xr.Dataset) -> None:
    ax = drawn(result, "kind: temperature_map, coldest_degC: 5, warmest_degC: 28")
    bar = mesh_of(ax).colorbar
    assert bar is not None
    assert list(bar.get_ticks()) == [6, 8, 10, 12, 14, 16, 18, 20, 22, 24, 26, 28]


def test_arrows_point_along_the_mean_current_with_the_root_of_its_speed(result: xr.Dataset) -> None:
    ax = drawn(result, "kind: thermocline_map, arrows_across: 10")
    quiver = next(item for item in ax.collections if isinstance(item, Quiver))
    current = arrows(result, 10)
    speed = np.hypot(current.eastward, current.northward)
    shown = ~np.asarray(quiver.Umask)
    assert 0.5 < shown.mean() < 1.0
    np.testing.assert_allclose((quiver.U**2 + quiver.V**2)[shown], speed.ravel()[shown], rtol=1e-9)
    np.testing.assert_allclose(
        (quiver.U * current.northward.ravel())[shown], (quiver.V * current.eastward.ravel())[shown], atol=1e-12
    )
    assert speed.ravel()[~shown].max() < speed.ravel()[shown].min()


def test_an_arrow_is_the_mean_over_its_block_of_cells(result: xr.Dataset) -> None:
    found = arrows(result, 10)  # 30 columns: three to a block; cells are 200 km by 250 km: two rows
    u = result["velocity_x"].values[0]
    centred = 0.5 * (u[:, 1:] + u[:, :-1])
    assert found.eastward.shape == (20, 10)
    assert found.eastward[3, 4] == pytest.approx(centred[6:8, 12:15].mean(), rel=ROUND_OFF)
    assert found.longitude[4] == pytest.approx(np.degrees(13.5 * 2e5 / 6.371e6), rel=ROUND_OFF)
    assert found.latitude[3] == pytest.approx(np.degrees((-5e6 + 7 * 2.5e5) / 6.371e6), rel=ROUND_OFF)


def test_arrows_can_be_left_out(result: xr.Dataset) -> None:
    ax = drawn(result, "kind: thermocline_map, arrows: none")
    assert not any(isinstance(item, Quiver) for item in ax.collections)


def test_the_temperature_map_outlines_the_cold_tongue(result: xr.Dataset) -> None:
    ax = drawn(result, "kind: temperature_map")
    np.testing.assert_array_equal(mesh_of(ax).get_array(), result["temperature"][0])
    edge = tongue_edge(result)
    assert 25.0 < edge < 26.0
    outlines = [item for item in ax.collections if hasattr(item, "levels")]
    assert [float(item.levels[0]) for item in outlines] == [edge, edge]
    corners = np.concatenate([path.vertices for path in outlines[0].get_paths()])
    assert np.abs(corners[:, 1]).max() <= 10.0
    assert corners[:, 0].max() == pytest.approx(np.degrees(6e6 / 6.371e6))  # drawn to the wall itself


def test_a_uniform_temperature_has_no_outline() -> None:
    means = synthetic_means()
    warm = summarise(means.assign(temperature=0 * means["temperature"] + 25.0))
    assert not [item for item in drawn(warm, "kind: temperature_map").collections if hasattr(item, "levels")]


def test_the_equatorial_section_plots_means_over_two_degrees_with_their_spread(result: xr.Dataset) -> None:
    upper, lower = drawn(result, "kind: equatorial_section").child_axes
    depth = np.asarray(lower.lines[0].get_ydata())
    # 2 degrees are 222 km: of rows 250 km high only the two at the equator count
    np.testing.assert_allclose(depth, result["thermocline_depth"][19:21].mean("y"), rtol=ROUND_OFF)
    np.testing.assert_allclose(upper.lines[0].get_ydata(), result["temperature"][0, 19:21].mean("y"), rtol=ROUND_OFF)
    assert lower.yaxis_inverted()
    shade = next(item for item in lower.collections if isinstance(item, PolyCollection))
    edges = shade.get_paths()[0].vertices[:, 1]
    assert edges.max() == pytest.approx(depth.max() + 4.0)
    assert edges.min() == pytest.approx(depth.min() - 4.0)
    bare = drawn(result, "kind: equatorial_section, spread: none").child_axes[1]
    assert not bare.collections


def test_the_section_of_a_basin_without_an_equator_is_refused() -> None:
    means = synthetic_means()
    f_plane = means.assign(coriolis=0 * means["coriolis"] + 1e-4)
    with pytest.raises(UnreadableResult, match="leave this panel out"):
        drawn(f_plane, "kind: equatorial_section")


def test_the_heat_budget_plots_zonal_means_and_both_transports(result: xr.Dataset) -> None:
    upper, lower = drawn(result, "kind: heat_budget, terms: [surface_heat_flux, heat_mixing]").child_axes
    np.testing.assert_allclose(y_of(upper, "surface"), result["surface_heat_flux"].mean("x"), rtol=1e-9)
    np.testing.assert_allclose(y_of(upper, "mixing"), result["heat_mixing"].mean("x"), rtol=1e-9)
    np.testing.assert_allclose(y_of(lower, "currents"), result["northward_heat_transport"] / 1e15, rtol=ROUND_OFF)
    np.testing.assert_allclose(
        y_of(lower, "surface flux"), result["northward_heat_transport_from_surface"] / 1e15, rtol=ROUND_OFF
    )


def test_exchange_is_plotted_in_sverdrups(result: xr.Dataset) -> None:
    ax = drawn(result, "kind: exchange")
    assert y_of(ax, "made")[-1] == pytest.approx(float(result["entrainment_total"]) / 1e6, rel=ROUND_OFF)
    assert y_of(ax, "destroyed")[-1] == pytest.approx(float(result["transformation_total"]) / 1e6, rel=ROUND_OFF)
    np.testing.assert_allclose(y_of(ax, "northward"), result["overturning"] / 1e6, rtol=ROUND_OFF)


def test_an_outcrop_has_a_line_where_there_is_one(result: xr.Dataset) -> None:
    lost = y_of(drawn(result, "kind: exchange"), "outcrop")
    assert lost[-1] == pytest.approx(-float((result["outcrop_volume"] * result["cell_area"]).sum()) / 1e6, rel=1e-12)
    without = result.assign(outcrop_volume=0 * result["outcrop_volume"])
    labels = [line.get_label() for line in drawn(without, "kind: exchange").lines]
    assert "outcrop" not in labels
    assert "made" in labels


def test_exchange_per_degree_sums_to_the_total(result: xr.Dataset) -> None:
    ax = drawn(result, "kind: exchange, form: per_degree")
    height = np.degrees(2.5e5 / 6.371e6)
    assert y_of(ax, "made").sum() * height == pytest.approx(float(result["entrainment_total"]) / 1e6, rel=1e-10)
    assert y_of(ax, "made").shape == (40,)


def test_the_approach_is_plotted_against_years_with_the_window_shaded(result: xr.Dataset) -> None:
    frame = drawn(result, "kind: approach, from_year: 10")
    depth, volume, imbalance = frame.child_axes
    years = np.asarray(depth.lines[0].get_xdata())
    kept = result["time"].values / 365.25 >= 10
    np.testing.assert_allclose(years, result["time"].values[kept] / 365.25, rtol=ROUND_OFF)
    np.testing.assert_array_equal(y_of(depth, "west"), result["series_thermocline_depth_equator_west"][kept])
    np.testing.assert_allclose(
        volume.lines[0].get_ydata(), result["series_warm_water_volume"][kept] / 1e15, rtol=ROUND_OFF
    )
    np.testing.assert_allclose(
        imbalance.lines[0].get_ydata(), 100 * result["series_heat_imbalance"][kept], rtol=ROUND_OFF
    )
    assert depth.yaxis_inverted()
    shade = depth.patches[0].get_extents().transformed(depth.transData.inverted())
    assert (shade.x0, shade.x1) == pytest.approx((58.0, 60.0))


def test_without_an_equator_the_approach_shows_the_basin_mean(result: xr.Dataset) -> None:
    name = "series_thermocline_depth_equator_mean"
    depth = drawn(result.assign({name: result[name] * np.nan}), "kind: approach").child_axes[0]
    assert [line.get_label() for line in depth.lines] == ["basin mean"]


@pytest.mark.parametrize(
    ("kind", "missing"),
    [
        ("thermocline_map", "thermocline_depth"),
        ("heat_budget", "northward_heat_transport"),
        ("exchange", "overturning"),
        ("approach", "series_heat_imbalance"),
    ],
)
def test_a_panel_names_the_variable_that_is_missing(result: xr.Dataset, kind: str, missing: str) -> None:
    with pytest.raises(UnreadableResult, match=f"{missing}: got a dataset without it"):
        drawn(result.drop_vars(missing), f"kind: {kind}")


def test_every_axis_states_its_unit(result: xr.Dataset) -> None:
    """Latitudes and longitudes carry the degree in their numbers; all else has a unit in brackets."""
    for kind in ("thermocline_map", "equatorial_section", "heat_budget", "exchange", "approach"):
        frame = drawn(result, f"kind: {kind}")
        for ax in frame.child_axes or [frame]:
            label = ax.get_ylabel()
            assert label == "Latitude" or ("(" in label and label.endswith(")"))
