"""What panels of studies plot: the numbers on the axes, not the pixels."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
import xarray as xr
from matplotlib.axes import Axes
from matplotlib.collections import QuadMesh
from matplotlib.container import BarContainer
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from oceanbox.diagnostics.theory_inputs import theory_inputs
from oceanbox.errors import UnreadableResult
from oceanbox.figures import fields
from oceanbox.figures.study_panels.cases import StudyData, open_study
from oceanbox.figures.study_panels.drawing import draw_study_panel
from oceanbox.figures.study_panels.laws import fitted_log_law
from oceanbox.figures.study_panels.marks import extend_of
from tests.figures.test_study_page import page_of
from tests.synthetic_study import HALF_THICKNESS, JUMP_DOWN, JUMP_UP, MEASURE, MIXED_LAYER, POWERS, TARGETS

ROUND_OFF = 1e-12


def drawn(study: StudyData, kind: str, **options: Any) -> Axes:
    panel = page_of({"kind": kind, **options}).panels[0]
    return draw_study_panel(Figure(figsize=(4, 3)).add_subplot(), study, panel)


def lines_of(ax: Axes, count: int) -> list[Line2D]:
    """The lines with so many points."""
    return [line for line in ax.lines if len(np.asarray(line.get_xdata())) == count]


def y_of(line: Line2D) -> np.ndarray:
    return np.asarray(line.get_ydata(), dtype=float)


def marks_of(ax: Axes) -> list[Line2D]:
    """The filled marks of cases; those of cases that are not in equilibrium have an open one over them."""
    return [line for line in ax.lines if line.get_marker() in "osD^vP<>" and not is_open(line)]


def is_open(line: Line2D) -> bool:
    return line.get_markerfacecolor() == "white"


def test_a_scalar_stands_over_its_place_on_the_axis_and_depth_points_down(one_axis: StudyData) -> None:
    ax = drawn(one_axis, "scalar_along_axis")
    (line,) = marks_of(ax)  # none for the failed case
    np.testing.assert_array_equal(line.get_xdata(), TARGETS[:3])
    np.testing.assert_array_equal(y_of(line), one_axis.dataset[MEASURE].values[:3])
    assert ax.yaxis.get_inverted()
    assert ax.get_xlabel() == "Polar target temperature (°C)"
    assert ax.get_ylabel() == "Equatorial thermocline depth (m)"


def test_marks_of_cases_that_are_not_in_equilibrium_are_open_and_only_theirs(one_axis: StudyData) -> None:
    opened = [line for line in drawn(one_axis, "scalar_along_axis").lines if is_open(line)]
    assert [list(line.get_xdata()) for line in opened] == [[TARGETS[2]]]


def test_a_failed_case_is_a_cross_at_the_foot(one_axis: StudyData) -> None:
    ax = drawn(one_axis, "scalar_along_axis")
    crosses = [line for line in ax.lines if line.get_marker() == "x"]
    assert [list(line.get_xdata()) for line in crosses] == [[TARGETS[3]]]
    assert crosses[0].get_transform() == ax.get_xaxis_transform()


def test_bars_are_the_standard_deviation_within_the_window(one_axis: StudyData) -> None:
    (bars,) = drawn(one_axis, "scalar_along_axis").containers
    segments = bars.lines[2][0].get_segments()
    half = [0.5 * abs(segment[1, 1] - segment[0, 1]) for segment in segments]
    np.testing.assert_allclose(half, one_axis.dataset[f"{MEASURE}_std"].values[:3], rtol=ROUND_OFF)
    assert not drawn(one_axis, "scalar_along_axis", spread="none").containers


def test_numbers_are_in_the_unit_of_the_label(one_axis: StudyData) -> None:
    ax = drawn(one_axis, "scalar_along_axis", scalars=["tropical_heat_gain"])
    assert ax.get_ylabel() == "Tropical heat gain (PW)"
    expected = one_axis.dataset["tropical_heat_gain"].values[:3] / 1e15
    np.testing.assert_allclose(y_of(marks_of(ax)[0]), expected, rtol=ROUND_OFF)


def test_a_second_axis_gives_a_line_for_each_of_its_places(two_axes: StudyData) -> None:
    ax = drawn(two_axes, "scalar_along_axis", axis="target")
    found = [y_of(line) for line in ax.lines if line.get_marker() == "o" and not is_open(line)]
    depth = two_axes.dataset[MEASURE].transpose("wind", "target").values
    np.testing.assert_array_equal(found[0], depth[0])
    np.testing.assert_array_equal(found[1], depth[1, :2])
    fixed = drawn(two_axes, "scalar_along_axis", axis="target", at=["wind=-0.03"])
    np.testing.assert_array_equal(y_of(marks_of(fixed)[0]), depth[0])


def test_the_log_law_finds_what_the_depths_obey_and_is_drawn_at_every_case(two_axes: StudyData) -> None:
    law = fitted_log_law(two_axes, MEASURE, "tropics", ())
    assert f"H_m = {MIXED_LAYER:.3f} ± 0.000 m, l = {HALF_THICKNESS:.3f} ± 0.000 m" in law.fit
    assert "fitted to the 5 cases in equilibrium" in law.fit
    assert "The runs themselves have H_m = 50 m and l = 30 m." in law.fit
    depth = two_axes.dataset[MEASURE]
    np.testing.assert_allclose(law.depth, depth, rtol=1e-11)  # NaN where the case failed, in both
    ax = drawn(two_axes, "scalar_along_axis", axis="target", theory="log_law")
    dashed = [y_of(line) for line in lines_of(ax, 3) if line.get_linestyle() == "--" and line.get_marker() == "None"]
    np.testing.assert_allclose(dashed[0], depth.sel(wind=-0.03), rtol=1e-11)


def test_cases_that_are_not_in_equilibrium_are_not_fitted(one_axis: StudyData) -> None:
    """Two of three are left: too few for a misfit, so there is no law and the panel says so."""
    law = fitted_log_law(one_axis, MEASURE, "tropics", ())
    assert law.label == ""
    assert "fewer than 3 cases in equilibrium" in law.fit
    assert not [line for line in drawn(one_axis, "scalar_along_axis", theory="log_law").lines if not line.get_marker()]


def test_the_configured_law_is_that_of_each_run(two_axes: StudyData) -> None:
    ax = drawn(
        two_axes, "scalar_along_axis", axis="target", at=["wind=-0.03"], theory="log_law", parameters="configured"
    )
    (law,) = [line for line in lines_of(ax, 3) if line.get_marker() == "None"]
    ratio = two_axes.scalar("upwelling_ratio_tropics").sel(wind=-0.03)
    np.testing.assert_allclose(y_of(law), 50.0 + 30.0 * np.log(ratio), rtol=ROUND_OFF)


def test_inputs_of_laws_are_those_of_each_result_file(one_axis: StudyData) -> None:
    case = one_axis.cases()[1]
    expected = theory_inputs(case.read())
    for name in ("upwelling_tropics", "loss_to_abyss", "advective_depth"):
        assert float(one_axis.scalar(name)[1]) == float(expected[name])
        assert np.isnan(float(one_axis.scalar(name)[3]))


def test_a_scalar_against_another_joins_cases_along_an_axis(two_axes: StudyData) -> None:
    options = {"x": "tropical_heat_gain", "coloured_by": "wind", "joined_along": "target"}
    ax = drawn(two_axes, "scalar_against_scalar", **options)
    joined = [
        line for line in ax.lines if line.get_linestyle() == "-" and not is_open(line) and line.get_marker() == "o"
    ]
    assert [len(y_of(line)) for line in joined] == [3, 2]
    assert len({line.get_color() for line in joined}) == 2
    gain = two_axes.dataset["tropical_heat_gain"].sel(wind=-0.03) / 1e15
    np.testing.assert_allclose(joined[0].get_xdata(), gain, rtol=ROUND_OFF)


def test_contours_take_every_case_and_leave_a_gap_at_a_failed_one(two_axes: StudyData) -> None:
    ax = drawn(two_axes, "scalar_map")
    dots = {line.get_marker(): line for line in ax.lines}
    assert len(y_of(dots["o"])) == 5
    assert list(dots["x"].get_xdata()) == [TARGETS[2]]
    low, high = float(two_axes.dataset[MEASURE].min()), float(two_axes.dataset[MEASURE].max())
    filled = ax.collections[0]
    assert filled.norm.vmin <= low and filled.norm.vmax >= high
    # Of the two triangles of the cell with the failed corner, half at most is filled.
    corner = [path for path in filled.get_paths() if path.contains_point((9.9, -0.059))]
    assert not corner
    assert [path for path in filled.get_paths() if path.contains_point((5.0, -0.045))]


def test_axes_of_names_cannot_be_contoured(branch: StudyData, one_axis: StudyData) -> None:
    with pytest.raises(UnreadableResult, match="names, or a sample"):
        drawn(branch, "scalar_map")
    with pytest.raises(UnreadableResult, match="2 are needed here"):
        drawn(one_axis, "scalar_map")


def test_sections_of_all_cases_stand_on_one_panel(one_axis: StudyData) -> None:
    ax = drawn(one_axis, "equatorial_sections")
    expected = [fields.equatorial_section(case.read()).depth for case in one_axis.cases()]
    for line, depth in zip(ax.lines, expected, strict=True):
        np.testing.assert_array_equal(y_of(line), depth)
    assert [line.get_linestyle() for line in ax.lines] == ["-", "-", "--"]  # the third is not in equilibrium
    assert len({line.get_color() for line in ax.lines}) == 3


def test_cases_are_drawn_in_the_order_in_which_they_are_named(one_axis: StudyData) -> None:
    named = one_axis.cases(only=("target=6", "target=2"))
    assert [case.places["target"] for case in named] == [6.0, 2.0]
    with pytest.raises(UnreadableResult, match="target=3: got no case of that name"):
        one_axis.cases(only=("target=3",))
    with pytest.raises(UnreadableResult, match="got none with a result"):
        one_axis.cases(only=("target=14",))  # it failed


def test_a_place_that_is_not_on_the_axis_is_refused_with_those_that_are(two_axes: StudyData) -> None:
    for place in ("wind=-0.05", "wind=calm"):
        with pytest.raises(UnreadableResult, match=r"wind has -0.03, -0.06"):
            drawn(two_axes, "scalar_along_axis", at=[place])
    with pytest.raises(UnreadableResult, match="no axis sun"):
        drawn(two_axes, "scalar_along_axis", at=["sun=1"])


def test_maps_share_one_scale_that_covers_all(one_axis: StudyData) -> None:
    ax = drawn(one_axis, "case_maps")
    meshes = [item for inner in ax.child_axes for item in inner.collections if isinstance(item, QuadMesh)]
    depths = [case.read()["thermocline_depth"].values for case in one_axis.cases()]
    for mesh, depth in zip(meshes, depths, strict=True):
        np.testing.assert_array_equal(mesh.get_array(), depth)
        assert mesh.norm.vmin <= np.min(depths) and mesh.norm.vmax >= np.max(depths)
    assert len({id(mesh.norm) for mesh in meshes}) == 1
    assert [inner.get_title(loc="right") for inner in ax.child_axes] == ["2 °C", "6 °C", "10 °C"]


def test_a_scale_is_open_at_the_ends_that_numbers_lie_beyond() -> None:
    levels = np.array([0.0, 1.0, 2.0])
    found = [
        extend_of(np.array(values), levels) for values in ([0.0, 2.0], [-1.0, 1.0], [1.0, np.nan, 3.0], [-1.0, 3.0])
    ]
    assert found == ["neither", "min", "max", "both"]


def test_differences_are_from_the_named_case_with_white_at_zero(one_axis: StudyData) -> None:
    ax = drawn(one_axis, "case_maps", minus_case="target=2")
    meshes = [item for inner in ax.child_axes for item in inner.collections if isinstance(item, QuadMesh)]
    depths = [case.read()["thermocline_depth"].values for case in one_axis.cases()]
    np.testing.assert_array_equal(meshes[1].get_array(), depths[2] - depths[0])
    assert len(meshes) == 2
    assert meshes[0].norm.vmin == -meshes[0].norm.vmax


def test_bars_are_the_integrals_of_the_terms_in_each_region(one_axis: StudyData) -> None:
    regions, terms = ("tropics", "southern_subtropics"), ("surface_heat_flux", "heat_advection")
    ax = drawn(one_axis, "budget_bars", regions=list(regions), terms=list(terms))
    for inner, region in zip(ax.child_axes, regions, strict=True):
        bars = [item for item in inner.containers if isinstance(item, BarContainer)]
        for container, case in zip(bars, one_axis.cases(), strict=True):
            result = case.read()
            expected = [float(result[f"region_{term}"].sel(region=region)) / 1e15 for term in terms]
            np.testing.assert_allclose([bar.get_height() for bar in container], expected, rtol=ROUND_OFF)
            assert {bar.get_hatch() for bar in container} == ({""} if case.settled else {"////"})


def test_series_of_cases_run_in_years(one_axis: StudyData) -> None:
    ax = drawn(one_axis, "case_series", from_year=10.0, to_year=20.0)
    result = one_axis.cases()[0].read()
    time = result["time"].values / 365.25
    shown = (time >= 10.0) & (time <= 20.0)
    np.testing.assert_allclose(ax.lines[0].get_xdata(), time[shown], rtol=ROUND_OFF)
    np.testing.assert_array_equal(y_of(ax.lines[0]), result[f"series_{MEASURE}"].values[shown])
    assert ax.get_xlim() == (10.0, 20.0)


def test_lines_by_latitude_are_those_of_the_files(one_axis: StudyData) -> None:
    ax = drawn(one_axis, "latitude_lines", field="overturning")
    found = [y_of(line) for line in ax.lines if len(y_of(line)) == 41]
    for values, case in zip(found, one_axis.cases(), strict=True):
        np.testing.assert_allclose(values, case.read()["overturning"] / 1e6, rtol=ROUND_OFF)


def test_both_ways_are_drawn_and_broken_where_they_jump(branch: StudyData) -> None:
    ax = drawn(branch, "branches")
    ways = [line for line in ax.lines if np.isnan(y_of(line)).any()]
    for line, jump in zip(ways, (JUMP_UP, JUMP_DOWN), strict=True):
        x, gap = np.asarray(line.get_xdata(), dtype=float), int(np.flatnonzero(np.isnan(y_of(line)))[0])
        assert x[gap - 1] <= jump <= x[gap + 1]
        assert x[gap + 1] - x[gap - 1] <= 0.02  # the stated width of the bracket
        assert np.all(np.diff(x) >= 0.0)
        assert np.abs(np.diff(y_of(line))[[gap - 2, gap + 1]]).max() < 5.0
    steps = {line.get_marker(): y_of(line) for line in ax.lines if len(y_of(line)) == 9}
    np.testing.assert_array_equal(steps[">"], branch.dataset[MEASURE].sel(direction="up"))
    np.testing.assert_array_equal(steps["<"], branch.dataset[MEASURE].sel(direction="down"))


def test_bands_bracket_the_jumps(branch: StudyData) -> None:
    bands = sorted(
        (patch.get_x(), patch.get_x() + patch.get_width()) for patch in drawn(branch, "branches").patches[:2]
    )
    for (low, high), jump in zip(bands, (JUMP_DOWN, JUMP_UP), strict=True):
        assert low <= jump <= high
        assert high - low <= 0.02 * (1.0 + 1e-9)


def test_adjustments_stand_side_by_side_with_their_own_times(switch: StudyData) -> None:
    ax = drawn(switch, "switches")
    slack, off = ax.child_axes
    assert (slack.get_xlabel(), off.get_xlabel()) == ("Time (days)", "Time (years)")
    assert slack.get_ylim() == off.get_ylim()
    dots = next(line for line in slack.lines if line.get_marker() == ".")
    series = switch.dataset[f"series_{MEASURE}"].sel(switch="wind_slack").dropna("time")
    np.testing.assert_array_equal(y_of(dots), series)
    # Means over ten days stand at the middle of the ten days, the start at zero.
    np.testing.assert_allclose(dots.get_xdata(), [0.0, *(series["time"].values[1:] - 5.0)], rtol=ROUND_OFF)


def test_the_fit_passes_through_its_mark_at_the_fitted_time(switch: StudyData) -> None:
    slack = drawn(switch, "switches").child_axes[0]
    diamond = next(line for line in slack.lines if line.get_marker() == "D")
    time = float(switch.dataset[f"e_folding_{MEASURE}"].sel(switch="wind_slack"))
    final = float(switch.dataset[f"final_{MEASURE}"].sel(switch="wind_slack"))
    assert float(np.asarray(diamond.get_xdata())[0]) == time
    assert float(y_of(diamond)[0]) == pytest.approx(final + (140.0 - final) / np.e, rel=ROUND_OFF)
    curve = lines_of(slack, 300)[0]
    assert float(np.interp(time, curve.get_xdata(), y_of(curve))) == pytest.approx(y_of(diamond)[0], rel=1e-4)


def test_a_fit_that_is_worth_nothing_is_not_drawn(switch: StudyData) -> None:
    trust = switch.dataset[f"trust_{MEASURE}"].copy(data=np.array(["no exponential fits"] * 3, dtype=object))
    bare = open_study(switch.dataset.assign({f"trust_{MEASURE}": trust}), ".")
    slack = drawn(bare, "switches").child_axes[0]
    assert not lines_of(slack, 300)
    assert slack.get_title(loc="right") == "wind slack"


def test_indices_are_bars_with_their_intervals_largest_first(indices: StudyData) -> None:
    ax = drawn(indices, "sensitivity_bars")
    first, total = (item for item in ax.containers if isinstance(item, BarContainer))
    order = np.argsort(-indices.dataset[f"sobol_total_{MEASURE}"].values)
    np.testing.assert_array_equal([bar.get_width() for bar in first], indices.dataset[f"sobol_first_{MEASURE}"][order])
    np.testing.assert_array_equal([bar.get_width() for bar in total], indices.dataset[f"sobol_total_{MEASURE}"][order])
    assert [text.get_text() for text in ax.get_yticklabels()] == [
        "thermocline half thickness",
        "shear damping",
        "viscosity",
    ]
    segments = ax.containers[1].lines[2][0].get_segments()
    ends = indices.dataset[[f"sobol_first_lower_{MEASURE}", f"sobol_first_upper_{MEASURE}"]].isel(key=order)
    np.testing.assert_allclose([segment[:, 0] for segment in segments], ends.to_array().values.T, atol=ROUND_OFF)


def test_elasticities_are_the_powers_that_made_the_depth(elasticities: StudyData) -> None:
    ax = drawn(
        elasticities, "sensitivity_bars", order="as_given", labels=[{"key": "motion.viscosity_m2_per_s", "label": "A"}]
    )
    (bars,) = (item for item in ax.containers if isinstance(item, BarContainer))
    np.testing.assert_allclose([bar.get_width() for bar in bars], list(POWERS.values()), rtol=1e-9)
    assert ax.get_yticklabels()[1].get_text() == "A"


@pytest.mark.parametrize(
    ("kind", "missing"),
    [
        ("branches", "oceanbox_branch_measure"),
        ("switches", "axis switch"),
        ("sensitivity_bars", "sensitivities of"),
        ("scalar_along_axis", "axis sun"),
    ],
)
def test_a_panel_says_what_the_study_lacks(one_axis: StudyData, kind: str, missing: str) -> None:
    options = {"axis": "sun"} if kind == "scalar_along_axis" else {}
    with pytest.raises(UnreadableResult, match=missing):
        drawn(one_axis, kind, **options)


def test_a_result_file_that_has_gone_is_named(one_axis: StudyData) -> None:
    moved = StudyData(one_axis.dataset, one_axis.folder / "elsewhere")
    with pytest.raises(FileNotFoundError, match=r"elsewhere/cases/.*/result\.nc"):
        drawn(moved, "equatorial_sections")


def test_cases_of_a_sample_have_marks_and_no_line(two_axes: StudyData) -> None:
    flat = two_axes.dataset.stack(case=("target", "wind")).reset_index("case")
    sample = StudyData(flat, two_axes.folder)
    ax = drawn(sample, "scalar_along_axis", axis="target")
    (marks,) = marks_of(ax)
    assert len(y_of(marks)) == 5
    assert marks.get_linestyle() == "None"
    names = drawn(sample, "scalar_along_axis")
    assert next(text.get_text() for text in names.get_xticklabels()) == "target=2 wind=-0.03"


def test_every_axis_states_its_unit(one_axis: StudyData) -> None:
    kinds = ("scalar_along_axis", "scalar_against_scalar", "equatorial_sections", "latitude_lines", "case_series")
    for kind in kinds:
        ax = drawn(one_axis, kind)
        assert ax.get_ylabel().endswith(")"), kind
        assert ax.get_xlabel().endswith((")", "wall", "Latitude")), kind


def test_a_study_reads_the_same_from_its_file(one_axis: StudyData, tmp_path: Any) -> None:
    from oceanbox.study.collecting import write_collected

    read = open_study(write_collected(one_axis.dataset, tmp_path), one_axis.folder)
    xr.testing.assert_equal(read.scalar(MEASURE), one_axis.scalar(MEASURE))
    assert read.counts() == one_axis.counts()
    assert [case.result for case in read.cases()] == [case.result for case in one_axis.cases()]
