"""Plain arrays go into compute arrays and come out again; the ghost cells hold what walls or a channel ask for."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.grid import HALO, Grid
from oceanbox.grid.edges import fill_centre_edges, fill_x_face_edges, fill_y_face_edges
from tests.grid.places import CHANNEL, GRIDS, WALLS, any_centres, any_x_faces, any_y_faces

Array = NDArray[np.float64]
on_both = pytest.mark.parametrize("grid", GRIDS.values(), ids=GRIDS.keys())


@on_both
def test_what_goes_in_comes_out(grid: Grid) -> None:
    centres, x_faces, y_faces = any_centres(grid), any_x_faces(grid), any_y_faces(grid)
    assert np.array_equal(grid.centres(grid.embed_centres(centres)), centres)
    assert np.array_equal(grid.x_faces(grid.embed_x_faces(x_faces)), x_faces)
    assert np.array_equal(grid.y_faces(grid.embed_y_faces(y_faces)), y_faces)


@on_both
def test_compute_arrays_of_all_places_have_one_shape(grid: Grid) -> None:
    wide = (2, grid.ny + 2 * HALO, grid.nx + 2 * HALO)
    assert grid.embed_centres(any_centres(grid)).shape == wide
    assert grid.embed_x_faces(any_x_faces(grid)).shape == wide
    assert grid.embed_y_faces(any_y_faces(grid)).shape == wide


@on_both
def test_index_j_i_holds_the_west_and_the_south_face_of_cell_j_i(grid: Grid) -> None:
    x_faces, y_faces = any_x_faces(grid), any_y_faces(grid)
    assert np.array_equal(grid.embed_x_faces(x_faces)[0, HALO + 1, HALO : HALO + grid.nx], x_faces[0, 1, :-1])
    assert np.array_equal(grid.embed_y_faces(y_faces)[0, HALO : HALO + grid.ny, HALO + 1], y_faces[0, :-1, 1])


@on_both
def test_what_comes_out_is_a_copy(grid: Grid) -> None:
    """Changing a field taken from the model does not change the model."""
    wide = grid.embed_centres(any_centres(grid))
    grid.centres(wide)[...] = -1.0
    assert wide.min() > 0.0


@on_both
def test_embedded_centres_have_their_edges_filled(grid: Grid) -> None:
    """Filling them again changes nothing: no gradient across a wall, a channel wrapped."""
    wide = grid.embed_centres(any_centres(grid))[0]
    filled = wide.copy()
    fill_centre_edges(HALO, len(filled) - HALO, filled, grid.periodic_x)
    assert np.array_equal(filled, wide)


def test_a_wall_repeats_its_neighbour_twice() -> None:
    wide = WALLS.embed_centres(any_centres(WALLS))[0]
    inside = wide[HALO:-HALO, HALO:-HALO]
    for ghost in (0, 1):
        assert np.array_equal(wide[HALO:-HALO, ghost], inside[:, 0])
        assert np.array_equal(wide[HALO:-HALO, -1 - ghost], inside[:, -1])
        assert np.array_equal(wide[ghost, HALO:-HALO], inside[0])
        assert np.array_equal(wide[-1 - ghost, HALO:-HALO], inside[-1])


def test_a_channel_goes_on_at_its_other_end() -> None:
    """Every row of the wide array is a stretch of the endlessly repeated row."""
    wide = CHANNEL.embed_centres(any_centres(CHANNEL))[0]
    for row in wide:
        assert np.array_equal(row, np.resize(np.roll(row[HALO:-HALO], HALO), row.size))


Filler = Callable[[int, int, Array, bool, float], None]


def filled(filler: Filler, wide: Array, grid: Grid, tangential_sign: float) -> Array:
    """The first layer of ``wide`` with its edges filled from values that are certainly wrong."""
    field = wide[0].copy()
    field[:HALO], field[:, :HALO] = np.nan, np.nan
    filler(HALO, len(field) - HALO, field, grid.periodic_x, tangential_sign)
    return field


@pytest.mark.parametrize("sign", [1.0, -1.0], ids=["free slip", "no slip"])
def test_the_flow_along_a_wall_repeats_or_changes_sign_beyond_it(sign: float) -> None:
    """Free slip leaves no shear at the wall; no slip makes the mean of both sides of the wall zero."""
    u = filled(fill_x_face_edges, WALLS.embed_x_faces(any_x_faces(WALLS)), WALLS, sign)
    v = filled(fill_y_face_edges, WALLS.embed_y_faces(any_y_faces(WALLS)), WALLS, sign)
    inner_u = slice(HALO + 1, HALO + WALLS.nx)
    inner_v = slice(HALO + 1, HALO + WALLS.ny)
    for ghost in (0, 1):
        assert np.array_equal(u[ghost, inner_u], sign * u[HALO, inner_u])
        assert np.array_equal(u[-1 - ghost, inner_u], sign * u[-1 - HALO, inner_u])
        assert np.array_equal(v[inner_v, ghost], sign * v[inner_v, HALO])
        assert np.array_equal(v[inner_v, -1 - ghost], sign * v[inner_v, -1 - HALO])


@pytest.mark.parametrize("sign", [1.0, -1.0], ids=["free slip", "no slip"])
def test_nothing_flows_through_a_wall(sign: float) -> None:
    """Even where the array held something on the wall."""
    through_x, through_y = np.ones((1, 4, 6)), np.ones((1, 5, 5))
    u = filled(fill_x_face_edges, WALLS.embed_x_faces(through_x), WALLS, sign)
    v = filled(fill_y_face_edges, WALLS.embed_y_faces(through_y), WALLS, sign)
    assert not WALLS.x_faces(u)[:, [0, -1]].any()
    assert not WALLS.y_faces(v)[[0, -1]].any()
    assert WALLS.x_faces(u)[:, 1:-1].all() and WALLS.y_faces(v)[1:-1].all()


def test_velocities_of_a_channel_go_on_at_its_other_end() -> None:
    """The seam is one face: its eastern copy is made equal to the western one."""
    seam_apart = any_x_faces(CHANNEL)
    seam_apart[..., -1] = -7.0
    u = filled(fill_x_face_edges, CHANNEL.embed_x_faces(seam_apart), CHANNEL, 1.0)
    v = filled(fill_y_face_edges, CHANNEL.embed_y_faces(any_y_faces(CHANNEL)), CHANNEL, 1.0)
    period = slice(HALO, HALO + CHANNEL.nx)
    for field, rows in ((u, slice(HALO, HALO + CHANNEL.ny)), (v, slice(HALO + 1, HALO + CHANNEL.ny))):
        for row in field[rows]:
            assert np.array_equal(row, np.resize(np.roll(row[period], HALO), row.size))
