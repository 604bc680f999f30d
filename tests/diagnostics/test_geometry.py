"""Shares of rows and columns, and where the equator is."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
import xarray as xr

from oceanbox.constants import EARTH_RADIUS_M
from oceanbox.diagnostics import Geometry
from oceanbox.diagnostics.geometry import equator_of
from oceanbox.errors import UnreadableResult

EPS = np.finfo(float).eps
METRES_PER_DEGREE = np.radians(1.0) * EARTH_RADIUS_M


def basin(nx: int = 7, ny: int = 11) -> Geometry:
    return Geometry(np.linspace(0.0, 6e6, nx + 1), np.linspace(-5e6, 5e6, ny + 1))


@pytest.mark.parametrize(("nx", "ny"), [(1, 3), (7, 11), (60, 100)])
def test_a_band_covers_the_same_distance_at_every_resolution(nx: int, ny: int) -> None:
    """Shares times cell sizes add up to the width of the band, whatever the cells."""
    geometry = basin(nx, ny)
    band = geometry.rows_near_equator(2.0) @ geometry.dy
    assert band == pytest.approx(4 * METRES_PER_DEGREE, rel=ny * EPS)
    assert geometry.western_columns(1 / 8) @ geometry.dx == pytest.approx(6e6 / 8, rel=nx * EPS)
    assert geometry.eastern_columns(1 / 8) @ geometry.dx == pytest.approx(6e6 / 8, rel=8 * nx * EPS)


def test_neighbouring_bands_share_a_row_without_gap_or_overlap() -> None:
    geometry = basin()
    edges = [-np.inf, -30.0, -10.0, 10.0, 30.0, np.inf]
    total = sum(geometry.rows_between(south, north) for south, north in pairwise(edges))
    np.testing.assert_allclose(total, 1.0, rtol=0, atol=64 * EPS)


def test_the_equator_is_where_the_coriolis_parameter_vanishes() -> None:
    y = np.linspace(-4e6, 5e6, 10)
    assert equator_of(2.28e-11 * y, y) == 0.0
    assert equator_of(2.28e-11 * (y - 1.5e6), y) == pytest.approx(1.5e6, rel=100 * EPS)
    assert np.isnan(equator_of(np.full(10, 1e-4), y))
    assert equator_of(np.zeros(10), y) == 0.0


def test_a_basin_away_from_the_equator_has_no_row_near_it() -> None:
    geometry = Geometry(np.linspace(0, 6e6, 9), np.linspace(0, 3e6, 9), equator=-3e6)
    assert not geometry.rows_near_equator(2.0).any()
    assert not geometry.rows_centred_near_equator(10.0).any()


def test_an_f_plane_has_no_row_near_an_equator() -> None:
    geometry = Geometry(np.linspace(0, 6e6, 9), np.linspace(-3e6, 3e6, 9), equator=float("nan"))
    np.testing.assert_array_equal(geometry.rows_near_equator(2.0), np.zeros(8))
    assert not geometry.rows_centred_near_equator(10.0).any()


def test_faces_follow_from_evenly_spaced_centres() -> None:
    geometry = basin()
    bare = xr.DataArray(np.zeros((11, 7)), dims=("y", "x"), coords={"y": geometry.y, "x": geometry.x})
    found = Geometry.of(bare)
    np.testing.assert_allclose(found.x_face, geometry.x_face, rtol=0, atol=4 * EPS * 6e6)
    np.testing.assert_allclose(found.y_face, geometry.y_face, rtol=0, atol=4 * EPS * 5e6)


def test_unevenly_spaced_centres_without_faces_are_refused() -> None:
    uneven = xr.DataArray(np.zeros((3, 2)), dims=("y", "x"), coords={"y": [0.0, 1.0, 3.0], "x": [0.0, 1.0]})
    with pytest.raises(UnreadableResult, match=r"y: got 3 centres, unevenly spaced.*y_face"):
        Geometry.of(uneven)
    with pytest.raises(UnreadableResult, match="y: got no such coordinate"):
        Geometry.of(uneven.drop_vars("y"))


def test_faces_that_do_not_rise_are_refused() -> None:
    with pytest.raises(ValueError, match="y_face"):
        Geometry(np.array([0.0, 1.0]), np.array([1.0, 0.0]))
