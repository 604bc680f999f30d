"""Scales against numbers worked out by hand."""

from __future__ import annotations

import numpy as np
import pytest

from oceanbox.diagnostics import scales
from tests.synthetic import synthetic_means


def test_wave_speed_and_equatorial_radius_of_a_warm_layer() -> None:
    """g' = 0.04, H = 150: c = 2.44949 m/s, radius 327771 m."""
    speed = scales.wave_speed(0.04, 150.0)
    assert speed == pytest.approx(2.44949, rel=1e-6)
    assert scales.equatorial_radius(speed, 2.28e-11) == pytest.approx(327771, rel=2e-6)


def test_a_layer_split_in_two_carries_the_same_fastest_wave() -> None:
    split = scales.fastest_wave_speed(np.array([60.0, 90.0]), np.array([0.04, 0.04]))
    assert split == pytest.approx(scales.wave_speed(0.04, 150.0), rel=1e-14)


def test_two_layers_carry_the_faster_of_two_known_modes() -> None:
    """c^2 solves (b1 h1 - c2)(b2 h2 - c2) = b2^2 h1 h2."""
    h1, h2, b1, b2 = 50.0, 200.0, 0.05, 0.02
    mean, product = (b1 * h1 + b2 * h2) / 2, b1 * h1 * b2 * h2 - b2**2 * h1 * h2
    expected = np.sqrt(mean + np.sqrt(mean**2 - product))
    found = scales.fastest_wave_speed(np.array([h1, h2]), np.array([b1, b2]))
    assert found == pytest.approx(expected, rel=1e-14)


def test_water_heavier_than_the_abyss_carries_no_wave() -> None:
    with pytest.raises(ValueError, match="lighter than the abyss"):
        scales.wave_speed(-0.01, 100.0)


def test_deformation_radius_at_thirty_degrees() -> None:
    """c = 3.16228 m/s: 43365.7 m; no bound at the equator."""
    coriolis = np.array([2 * 7.292115e-5 * np.sin(np.radians(30.0)), 0.0])
    found = scales.deformation_radius(np.array([500.0]), np.array([0.02]), coriolis)
    assert found[0] == pytest.approx(43365.7, rel=2e-6)
    assert np.isinf(found[1])


def test_boundary_layer_widths() -> None:
    """A = 5000, beta = 2e-11: 62996.1 m; r = 1e-6: 50 km."""
    assert scales.munk_width(5000.0, 2e-11) == pytest.approx(62996.1, rel=1e-6)
    assert scales.stommel_width(1e-6, 2e-11) == pytest.approx(5e4, rel=1e-14)
    assert scales.width_in_cells(62996.1, 31498.05) == pytest.approx(2.0, rel=1e-14)


def test_advective_thermocline_depth() -> None:
    """f 1e-4, W 1e-6, L 5e6, beta 2e-11, g' 0.02: 353.553 m."""
    assert scales.advective_thermocline_depth(1e-4, 1e-6, 5e6, 2e-11, 0.02) == pytest.approx(353.553, rel=2e-6)


def test_the_log_law_makes_entrainment_equal_destruction() -> None:
    depth = scales.eastern_depth_log_law(50.0, 30.0, 40e6, 10e6)
    assert 40e6 * np.exp(-(depth - 50.0) / 30.0) == pytest.approx(10e6, rel=1e-14)
    assert scales.eastern_depth_log_law(50.0, 30.0, 10e6, 10e6) == 50.0
    with pytest.raises(ValueError, match="W_d <= W_up"):
        scales.eastern_depth_log_law(50.0, 30.0, 10e6, 20e6)


def test_equatorial_scales_of_a_file_use_the_equator_where_there_is_one() -> None:
    means = synthetic_means()
    means["thickness"] = 0 * means["thickness"] + 150.0
    means["reduced_gravity"] = 0 * means["reduced_gravity"] + 0.04
    found = scales.equatorial_scales(means)
    assert float(found["wave_speed"]) == pytest.approx(2.44949, rel=1e-6)
    assert float(found["equatorial_radius"]) == pytest.approx(327771, rel=2e-6)
    away = scales.equatorial_scales(means.assign(coriolis=means["coriolis"] + 3e-4))
    assert float(away["wave_speed"]) == pytest.approx(2.44949, rel=1e-6)
    assert np.isnan(float(away["equatorial_radius"]))
