"""Laws fitted to many runs: known parameters come back, noise is told as misfit, what cannot be fitted is refused."""

from __future__ import annotations

import warnings

import numpy as np
import pytest
import xarray as xr

from oceanbox.diagnostics import theory
from oceanbox.diagnostics.scales import advective_thermocline_depth, eastern_depth_log_law
from oceanbox.diagnostics.theory_inputs import THEORY_INPUTS, theory_inputs
from oceanbox.diagnostics.upwelling import lifted_water
from tests.synthetic import BETA, CONFIG, DENSITY, WIDTH, synthetic_result

CLOSURE = """
entrainment:
  upwelling: {mixed_layer_depth_m: 50.0, thermocline_half_thickness_m: 30.0, shear_damping_per_day: 0.5}
  diffusive: {diffusivity_m2_per_s: 1.0e-5}
"""
DESTROYED = np.array([20e6, 12e6, 7e6, 4e6, 2e6])
UPWELLED = np.array([40e6, 41e6, 43e6, 46e6, 50e6])


@pytest.fixture(scope="module")
def result() -> xr.Dataset:
    return synthetic_result().assign_attrs(oceanbox_config=CONFIG + CLOSURE)


def depths(offset: float = 50.0, length: float = 30.0) -> np.ndarray:
    pairs = zip(UPWELLED, DESTROYED, strict=True)
    return np.array([eastern_depth_log_law(offset, length, up, down) for up, down in pairs])


def test_the_log_law_finds_the_parameters_that_made_the_depths() -> None:
    """Depths that obey the law exactly: left over is the rounding of two numbers of about 100 m."""
    fit = theory.fit_log_law(depths(47.0, 28.0), UPWELLED, DESTROYED)
    assert fit.mixed_layer_depth == pytest.approx(47.0, rel=1e-13)
    assert fit.half_thickness == pytest.approx(28.0, rel=1e-13)
    assert fit.misfit < 1e-12
    assert fit.cases == 5
    np.testing.assert_allclose(fit.depth(UPWELLED, DESTROYED), depths(47.0, 28.0), rtol=1e-13)


def test_stated_errors_of_the_log_law_cover_the_truth_as_often_as_normal_errors_do() -> None:
    """400 draws of independent noise of 3 m: |error| < 2 standard errors for Student's t with 3 degrees of freedom in 86.1 %.

    The share found scatters about that by sqrt(0.86 x 0.14/400) = 1.7 %; four times that is allowed.
    """
    random = np.random.default_rng(11)
    offsets, lengths = [], []
    for _ in range(400):
        fit = theory.fit_log_law(depths() + random.normal(0.0, 3.0, 5), UPWELLED, DESTROYED)
        offsets.append(abs(fit.mixed_layer_depth - 50.0) < 2.0 * fit.mixed_layer_depth_error)
        lengths.append(abs(fit.half_thickness - 30.0) < 2.0 * fit.half_thickness_error)
    assert np.mean(offsets) == pytest.approx(0.861, abs=0.07)
    assert np.mean(lengths) == pytest.approx(0.861, abs=0.07)


def test_stated_errors_are_those_of_a_straight_line() -> None:
    """numpy's covariance of a line, scaled by what is left over and the degrees of freedom."""
    h = depths() + np.array([2.0, -1.0, 3.0, -4.0, 1.0])
    fit = theory.fit_log_law(h, UPWELLED, DESTROYED)
    (length, offset), covariance = np.polyfit(np.log(UPWELLED / DESTROYED), h, 1, cov=True)
    assert (fit.half_thickness, fit.mixed_layer_depth) == (pytest.approx(length), pytest.approx(offset))
    assert fit.half_thickness_error == pytest.approx(np.sqrt(covariance[0, 0]), rel=1e-10)
    assert fit.mixed_layer_depth_error == pytest.approx(np.sqrt(covariance[1, 1]), rel=1e-10)


def test_the_misfit_is_the_root_mean_square_of_what_is_left_over() -> None:
    """Depths off the line by a pattern that no line follows: for evenly spaced logarithms, (1, -2, 1)."""
    fit = theory.fit_log_law([51.0, 78.0, 111.0], np.exp([0.0, 1.0, 2.0]), np.ones(3))
    assert fit.half_thickness == pytest.approx(30.0, rel=1e-13)
    assert fit.mixed_layer_depth == pytest.approx(50.0, rel=1e-13)
    assert fit.misfit == pytest.approx(np.sqrt(2.0), rel=1e-12)


def test_runs_without_a_number_are_left_out_and_counted() -> None:
    h, up, down = depths(), UPWELLED.copy(), DESTROYED.copy()
    h[0], down[1] = np.nan, 0.0
    fit = theory.fit_log_law(h, up, down)
    assert fit.cases == 3
    assert fit.half_thickness == pytest.approx(30.0, rel=1e-13)
    assert np.isnan(fit.depth(up, down)[1])


def test_a_law_is_not_fitted_to_too_few_runs_or_to_one_ratio() -> None:
    with pytest.raises(ValueError, match="got 2 runs"):
        theory.fit_log_law(depths()[:2], UPWELLED[:2], DESTROYED[:2])
    with pytest.raises(ValueError, match="one ratio"):
        theory.fit_log_law([100.0, 101.0, 102.0], np.full(3, 2.0), np.ones(3))
    with pytest.raises(ValueError, match="got 1 runs"):
        theory.fit_scale([100.0, np.nan], [50.0, 60.0])


def test_the_law_with_given_parameters_has_a_misfit_too() -> None:
    law = theory.log_law_depth(np.full(5, 50.0), 30.0, UPWELLED / DESTROYED)
    np.testing.assert_allclose(law, depths(), rtol=1e-13)
    assert theory.misfit_of(law + np.array([3.0, -4.0, 0.0, np.nan, 0.0]), law) == pytest.approx(2.5, rel=1e-12)
    assert np.isnan(theory.log_law_depth(50.0, 30.0, -1.0))
    assert np.isnan(theory.misfit_of([np.nan], [1.0]))


def test_a_scale_is_fitted_by_its_factor() -> None:
    fit = theory.fit_scale([50.0, 100.0, 150.0, np.nan], [100.0, 200.0, 300.0, 1.0])
    assert (fit.factor, fit.cases) == (pytest.approx(0.5, rel=1e-14), 3)
    assert fit.misfit < 1e-12
    crossed = theory.fit_scale([3.0, 4.0], [4.0, -3.0])  # at right angles: nothing of one in the other
    assert crossed.factor == 0.0
    assert crossed.misfit == pytest.approx(np.sqrt(12.5), rel=1e-14)


def test_the_diffusive_scale_at_textbook_values() -> None:
    """f 1e-4, kappa 1e-5, L 5e6, beta 2e-11, g' 0.02: 107.722 m."""
    assert theory.diffusive_thermocline_depth(1e-4, 1e-5, 5e6, 2e-11, 0.02) == pytest.approx(107.722, rel=1e-5)


def test_an_adjustment_starts_at_the_first_value_and_has_done_its_share_after_one_time() -> None:
    curve = theory.adjustment([0.0, 30.0, 1e6], 150.0, 100.0, 30.0)
    assert curve[0] == 150.0
    assert curve[1] == pytest.approx(100.0 + 50.0 / np.e, rel=1e-14)
    assert curve[2] == 100.0


def test_exchange_of_a_run_adds_up(result: xr.Dataset) -> None:
    found = theory_inputs(result)
    loss = float(result["transformation_total"] + result["outcrop_total"])
    assert float(found["loss_to_abyss"]) == pytest.approx(loss, rel=1e-12)
    tropics = float(result["region_entrainment_upwelling"].sel(region="tropics"))
    assert float(found["supply_tropics"]) == pytest.approx(tropics, rel=1e-12)
    lifted = float((lifted_water(result) * result["cell_area"]).sum())
    assert float(found["upwelling_basin"]) == pytest.approx(lifted, rel=1e-12)
    assert 0.0 < found["upwelling_tropics"] < found["upwelling_basin"]
    assert (found["mixed_layer_depth"], found["half_thickness"]) == (50.0, 30.0)
    ratio = float(found["upwelling_ratio_basin"] * found["loss_to_abyss"] / found["upwelling_basin"])
    assert ratio == pytest.approx(1.0, rel=1e-14)


def test_scales_of_a_run_are_those_of_its_subtropics(result: xr.Dataset) -> None:
    """Stress A + B|y| is straight between the rows, so the drift -(A/y + B)/(rho0 beta) at 10 and 30 degrees is exact."""
    stress = (-0.06 + 1.5e-8 * np.abs(result["y"])) * xr.ones_like(result["wind_stress_x"])
    buoyancy = 0.03 * xr.ones_like(result["reduced_gravity"])
    equatorward, middle, poleward = np.radians([10.0, 20.0, 30.0]) * 6.371e6
    pumping = 0.06 * (1.0 / equatorward - 1.0 / poleward) / (DENSITY * BETA * (poleward - equatorward))
    found = theory_inputs(result.assign(wind_stress_x=stress, reduced_gravity=buoyancy))
    expected = advective_thermocline_depth(BETA * middle, pumping, WIDTH, BETA, 0.03)
    assert float(found["advective_depth"]) == pytest.approx(expected, rel=1e-12)
    expected = theory.diffusive_thermocline_depth(BETA * middle, 1e-5, WIDTH, BETA, 0.03)
    assert float(found["diffusive_depth"]) == pytest.approx(expected, rel=1e-12)


def test_buoyancy_outside_the_subtropics_has_no_part_in_their_scales(result: xr.Dataset) -> None:
    lat = np.abs(np.degrees(result["y"] / 6.371e6))
    outside = (lat < 8.0) | (lat > 32.0)  # rows are 2.25 degrees tall: none of these reaches into the band
    changed = result.assign(reduced_gravity=result["reduced_gravity"] * xr.where(outside, 7.0, 1.0))
    before, after = theory_inputs(result), theory_inputs(changed.transpose(*result["reduced_gravity"].dims, ...))
    assert float(after["advective_depth"]) == pytest.approx(float(before["advective_depth"]), rel=1e-12)
    inside = result.assign(reduced_gravity=4.0 * result["reduced_gravity"])
    assert float(theory_inputs(inside)["advective_depth"]) == pytest.approx(0.5 * float(before["advective_depth"]))


def test_what_a_run_does_not_have_is_missing(result: xr.Dataset) -> None:
    off = CONFIG + "entrainment: {upwelling: null, diffusive: null}\n"
    found = theory_inputs(result.assign_attrs(oceanbox_config=off))
    missing = {str(name) for name, value in found.items() if np.isnan(float(value))}
    ratios = {"upwelling_ratio_tropics", "upwelling_ratio_basin"}
    layer = {"mixed_layer_depth", "half_thickness"}
    assert missing == {"upwelling_tropics", "upwelling_basin", "diffusive_depth"} | ratios | layer
    assert set(found) == set(THEORY_INPUTS)
    with warnings.catch_warnings():
        warnings.simplefilter("error")  # not the root of a negative number
        upward = theory_inputs(result.assign(wind_stress_x=-result["wind_stress_x"]))
    assert np.isnan(float(upward["advective_depth"]))
