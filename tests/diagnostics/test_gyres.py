"""Streamfunctions and the transports read from them."""

from __future__ import annotations

import numpy as np
import pytest

from oceanbox.diagnostics import Geometry, Reference
from oceanbox.diagnostics.gyres import (
    beta_of,
    circulation,
    largest_size,
    streamfunction,
    sverdrup_streamfunction,
    western_boundary_currents,
)
from tests.synthetic import synthetic_means

BETA, DENSITY = 2.0e-11, 1025.0
WIDTH, LENGTH = 6.0e6, 3.0e6


def gyre_basin(nx: int, ny: int) -> Geometry:
    return Geometry(np.linspace(0.0, WIDTH, nx + 1), np.linspace(0.0, LENGTH, ny + 1))


def sverdrup_of_cosine_wind(ny: int) -> float:
    """Largest Sverdrup transport for tau_x = -tau0 cos(pi y/B), tau0 = 0.1 N m-2."""
    geometry = gyre_basin(20, ny)
    stress_x = np.repeat(-0.1 * np.cos(np.pi * geometry.y / LENGTH)[:, None], 21, axis=1)
    psi = sverdrup_streamfunction(stress_x, np.zeros((ny + 1, 20)), geometry, BETA, DENSITY)
    return largest_size(psi)


def test_sverdrup_transport_of_a_cosine_wind_converges_at_second_order() -> None:
    """pi tau0 L/(rho0 beta B) = 30.6497 Sv; centred differences of a cosine err by (pi dy/B)^2/24."""
    exact = np.pi * 0.1 * WIDTH / (DENSITY * BETA * LENGTH)
    assert exact == pytest.approx(30.6497e6, rel=1e-5)
    for ny in (20, 40):
        error = sverdrup_of_cosine_wind(ny) / exact - 1
        assert error == pytest.approx(-((np.pi / ny) ** 2) / 24, rel=0.01)


def test_a_wind_without_curl_asks_for_no_transport() -> None:
    """tau is the gradient of x y: exactly curl-free between cells away from the outer columns."""
    geometry = gyre_basin(8, 6)
    stress_x = np.repeat(1e-8 * geometry.y[:, None], 9, axis=1)
    stress_y = np.repeat(1e-8 * geometry.x[None, :], 7, axis=0)
    psi = sverdrup_streamfunction(stress_x, stress_y, geometry, BETA, DENSITY)
    half_column = 0.5e-8 * geometry.dx[0] / (DENSITY * BETA)  # stress taken as constant beyond the last centre
    np.testing.assert_allclose(psi[:, 1:-1], half_column, rtol=1e-9)


def test_an_anticyclonic_northern_gyre_is_positive() -> None:
    geometry = gyre_basin(20, 20)
    stress_x = np.repeat(-0.1 * np.cos(np.pi * geometry.y / LENGTH)[:, None], 21, axis=1)
    psi = sverdrup_streamfunction(stress_x, np.zeros((21, 20)), geometry, BETA, DENSITY)
    assert (psi[:, :-1] > 0).all()
    np.testing.assert_array_equal(psi[:, -1], 0.0)


def test_a_streamfunction_is_recovered_from_its_own_transport() -> None:
    geometry = gyre_basin(12, 9)
    psi = np.zeros((10, 13))
    psi[1:-1, 1:-1] = np.random.default_rng(3).normal(size=(8, 11)) * 1e6
    found = streamfunction(np.diff(psi, axis=1) / geometry.dx, geometry.dx)
    np.testing.assert_allclose(found, psi, rtol=0, atol=1e-8)


def test_a_western_boundary_current_ends_where_the_flow_turns_round() -> None:
    geometry = gyre_basin(12, 1)
    transport = np.zeros((2, 12))
    transport[0] = [4, -1, 3, 5, 5, 5, 5, 5, 5, 5, 5, 5]
    transport[1] = -2.0  # never turns: cut off at a quarter of the width, three columns
    dx = WIDTH / 12
    np.testing.assert_allclose(western_boundary_currents(transport, geometry), [4 * dx, -6 * dx], rtol=1e-15)


def test_beta_is_the_slope_of_the_coriolis_parameter() -> None:
    y = np.linspace(-1e6, 2e6, 7)
    assert beta_of(6e-5 + 2e-11 * y, y) == pytest.approx(2e-11, rel=1e-13)
    assert beta_of(np.array([1e-4]), np.array([0.0])) == 0.0


def test_a_channel_and_an_f_plane_have_no_sverdrup_transport() -> None:
    means = synthetic_means()
    walls = Reference(1025.0, 3992.0, 5.0, 35.0, 2.0, "walls")
    channel = Reference(1025.0, 3992.0, 5.0, 35.0, 2.0, "periodic")
    assert np.isnan(float(circulation(means, channel)["gyre_transport"]))
    f_plane = means.assign(coriolis=0 * means["coriolis"] + 1e-4)
    found = circulation(f_plane, walls)
    assert np.isnan(float(found["sverdrup_transport"]))
    assert float(found["gyre_transport"]) > 0
