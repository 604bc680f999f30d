"""Heat and salt are carried without new extrema, and no cell runs dry.

Flux-limited advection: Sweby 1984, SIAM J. Num. Anal. 21, 995; Koren 1993 (both from memory).  Written out for a cell that loses
the share s_k of its water through outflow face k, the new value is a weighted mean of the cell and its four neighbours as long
as sum_k s_k (2 - s_k) <= 1, for which sum_k s_k <= 1/2 is enough; without Courant correction sum_k 2 s_k <= 1 (derived).
"""

from typing import Any, NamedTuple

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as hnp
from numpy.typing import NDArray

from oceanbox.experiment.model import Model
from oceanbox.grid import HALO, Grid
from oceanbox.physics.continuity import limit_outflow, outflow_share
from oceanbox.physics.limiter import limited_face_value
from oceanbox.physics.state import Constants
from oceanbox.physics.tracers import concentration, tracer_flux, transport_step
from tests.building import box, run_days, set_state

Array = NDArray[np.float64]
EPS = float(np.finfo(float).eps)
NY, NX = 5, 4
STEP = 3600.0
EXAMPLES = settings(max_examples=150, deadline=None)


class Flow(NamedTuple):
    """Thickness and transports of one step, compute arrays."""

    grid: Grid
    constants: Constants
    thickness: Array
    transport_x: Array
    transport_y: Array

    def outflow_shares(self) -> Array:
        """Shares of its water that each cell loses through its four faces in a step, (4, ny, nx)."""
        out_x, out_y = STEP / self.grid.dx, STEP / self.grid.dy
        U, V = self.grid.x_faces(self.transport_x), self.grid.y_faces(self.transport_y)
        eastward, westward = out_x * np.maximum(U[:, 1:], 0.0), out_x * np.maximum(-U[:, :-1], 0.0)
        northward, southward = out_y * np.maximum(V[1:], 0.0), out_y * np.maximum(-V[:-1], 0.0)
        return np.stack([eastward, westward, northward, southward]) / self.grid.centres(self.thickness)

    def outflow_share(self) -> Array:
        """Share of its water that each cell loses in a step, (ny, nx)."""
        return np.asarray(self.outflow_shares().sum(axis=0))

    def scaled(self, factor: float) -> "Flow":
        return self._replace(transport_x=factor * self.transport_x, transport_y=factor * self.transport_y)

    def at_the_limit(self, courant_step: float) -> "Flow":
        """The flow scaled until sum_k s_k (2 - s_k), or sum_k 2 s_k without Courant correction, is 0.99 in the worst cell."""
        shares = self.outflow_shares()
        once, squared = shares.sum(axis=0), (shares**2).sum(axis=0)
        moving = once > EPS
        if not moving.any():
            return self
        once, squared = once[moving], squared[moving] * (courant_step > 0.0)
        # The smaller root k of 2 k once - k^2 squared = 0.99, written without cancellation.
        return self.scaled(float((0.99 / (once + np.sqrt(once**2 - 0.99 * squared))).min()))

    def limited(self) -> "Flow":
        """The flow after the limiter of outflow."""
        U, V, share = self.transport_x.copy(), self.transport_y.copy(), np.zeros_like(self.transport_x)
        rows = len(U)
        outflow_share(2, rows - 2, 1.0 / self.thickness, U, V, STEP, self.constants, share)
        limit_outflow(2, rows - 1, rows, U, V, share)
        return self._replace(transport_x=U, transport_y=V)

    def thickness_after(self) -> Array:
        """h after the step, (ny, nx)."""
        h = self.thickness.copy()
        transport_step(2, len(h) - 2, h, self.transport_x, self.transport_y, STEP, self.constants)
        return self.grid.centres(h)

    def carry(self, values: Array, courant_step: float = STEP) -> Array:
        """A concentration (ny, nx) after the step; ``courant_step`` 0 leaves out the Courant correction."""
        h, rows = self.thickness, len(self.thickness)
        content = h * self.grid.embed_centres(values)
        per_h, c, fx, fy, *books = (np.zeros_like(content) for _ in range(8))
        concentration(0, rows, h, content, per_h, c)
        tracer_flux(
            2,
            rows - 1,
            h,
            1.0 / h,
            c,
            self.transport_x,
            self.transport_y,
            courant_step,
            STEP,
            self.constants,
            *books,
            fx,
            fy,
        )
        transport_step(2, rows - 2, content, fx, fy, STEP, self.constants)
        return self.grid.centres(content) / self.thickness_after()


# Two oceans for all examples, cells of 20 km by 12 km.
SMALL = {
    "basin.width_km": 80.0,
    "basin.north_km": 60.0,
    "basin.south_km": 0.0,
    "basin.cells_x": NX,
    "basin.cells_y": NY,
}
SETUPS = {kind: box(SMALL | {"basin.zonal_boundary": kind}).setup for kind in ("walls", "periodic")}


def numbers(*shape: int) -> st.SearchStrategy[Array]:
    return hnp.arrays(np.float64, shape, elements=st.floats(-1.0, 1.0, allow_subnormal=False))


@st.composite
def flows(draw: st.DrawFn) -> Flow:
    """Layers from 1 m to 100 m, thin beside thick, and any transport, divergent as it may be."""
    setup = SETUPS[draw(st.sampled_from(["walls", "periodic"]))]
    grid = setup.grid
    h = 10.0 * 10.0 ** draw(numbers(NY, NX))
    U, V = draw(numbers(NY, NX + 1)), draw(numbers(NY + 1, NX))
    U[:, -1] = U[:, 0] if grid.periodic_x else 0.0
    U[:, 0] = U[:, -1]
    V[[0, -1]] = 0.0
    size = 10.0 ** draw(st.floats(0.0, 3.0))
    constants = setup.constants._replace(centred_tracers=draw(st.booleans()))
    return Flow(grid, constants, grid.embed_centres(h), grid.embed_x_faces(size * U), grid.embed_y_faces(size * V))


@pytest.mark.parametrize("ahead", [1.0, -3.0])
@pytest.mark.parametrize("courant", [0.0, 0.4])
def test_limiter_is_korens_and_lies_in_swebys_region(courant: float, ahead: float) -> None:
    """phi(r) = max(0, min(2 r, (1 + 2 r)/3, 2)), hence 0 <= phi <= min(2 r, 2); from memory.

    Round-off: r is known to eps of the values up to 3000 that make it.
    """
    ratios = np.concatenate([-np.logspace(-3, 3, 40), [0.0], np.logspace(-3, 3, 200)])
    faces = np.array([limited_face_value(1.0 - r * ahead, 1.0, 1.0 + ahead, courant) for r in ratios])
    phi = (faces - 1.0) / (0.5 * (1.0 - courant) * ahead)
    expected = np.maximum(0.0, np.minimum(np.minimum(2.0 * ratios, (1.0 + 2.0 * ratios) / 3.0), 2.0))
    assert np.abs(phi - expected).max() < 1e4 * EPS
    assert (phi >= 0.0).all()
    assert (phi <= np.minimum(2.0 * np.maximum(ratios, 0.0), 2.0) + 1e4 * EPS).all()


@EXAMPLES
@given(flows(), st.floats(0.1, 40.0), st.sampled_from([0.0, STEP]))
def test_a_uniform_value_stays_uniform_in_any_flow(flow: Flow, value: float, courant_step: float) -> None:
    """To 200 eps: six roundings of all the water that a cell saw, at most 19 times what it keeps.

    (A cell of thickness h that gains I keeps at least I + h/10, for the limiter leaves a tenth; it saw I + h + 0.9 h.)
    """
    after = flow.limited().carry(np.full((NY, NX), value), courant_step)
    assert np.abs(after - value).max() <= 200 * EPS * value


@EXAMPLES
@given(flows(), numbers(NY, NX), st.sampled_from([0.0, STEP]))
def test_limited_advection_makes_no_new_extremum(flow: Flow, values: Array, courant_step: float) -> None:
    """As long as sum_k s_k (2 - s_k) <= 1: cell by cell, within the range of the cell and its four neighbours.

    Round-off as above: at that limit, too, at least a tenth of the water stays.
    """
    flow = flow.at_the_limit(courant_step)
    flow = flow._replace(constants=flow.constants._replace(centred_tracers=False))
    wide = flow.grid.embed_centres(values)
    shifts = [(0, 0), (0, 1), (0, -1), (1, 0), (-1, 0)]
    inside = slice(HALO, -HALO)
    around = np.stack([np.roll(wide, shift, axis=(0, 1))[inside, inside] for shift in shifts])
    after = flow.carry(values, courant_step)
    assert (after <= around.max(axis=0) + 200 * EPS).all()
    assert (after >= around.min(axis=0) - 200 * EPS).all()


@EXAMPLES
@given(flows())
def test_no_flow_empties_a_cell(flow: Flow) -> None:
    """A tenth stays, to the round-off of what the cell saw; the total stays, too, and flows that take less are left alone."""
    limited = flow.limited()
    before, after = flow.grid.centres(flow.thickness), limited.thickness_after()
    seen = before * (1.0 + flow.outflow_share()) + np.abs(after)
    assert (after >= 0.1 * before - 10 * EPS * seen).all()
    assert after.sum() == pytest.approx(before.sum(), rel=100 * EPS)
    gentle = flow.outflow_share() <= 0.9
    U, V = flow.grid.x_faces(flow.transport_x), flow.grid.y_faces(flow.transport_y)
    U_after, V_after = flow.grid.x_faces(limited.transport_x), flow.grid.y_faces(limited.transport_y)
    for changed in (U_after[:, 1:] - U[:, 1:]) * (U[:, 1:] > 0.0), (U_after[:, :-1] - U[:, :-1]) * (U[:, :-1] < 0.0):
        assert not changed[gentle].any()
    for changed in (V_after[1:] - V[1:]) * (V[1:] > 0.0), (V_after[:-1] - V[:-1]) * (V[:-1] < 0.0):
        assert not changed[gentle].any()


def collapsing(scheme: str, dry: float, changes: dict[str, Any] | None = None) -> Model:
    """100 m of warm, salty water in the west about to run over ``dry`` m of cool water, astride the equator."""
    model = box(
        {
            "numerics.scheme": scheme,
            "layers": [
                {"initial_thickness_m": 100.0, "initial_temperature_degC": 25.0, "initial_salinity_g_per_kg": 36.0}
            ],
        }
        | (changes or {})
    )
    west = model.grid.x < 0.5 * model.grid.nx * model.grid.dx
    cells = np.ones((1, model.grid.ny, 1))
    set_state(
        model,
        thickness=cells * np.where(west, 100.0, dry),
        theta=cells * np.where(west, 20.0, 12.0),
        sigma=cells * np.where(west, 1.0, -0.5),
    )
    return model


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
def test_temperature_and_salinity_keep_their_range_as_a_front_collapses(scheme: str) -> None:
    """Five days of a bore over 30 m of water; round-off of a division for each step, times the largest value."""
    model = collapsing(scheme, dry=30.0)
    run_days(model, 5.0)
    round_off = 4 * EPS * model.total_steps
    sigma = model.salinity - model.setup.config.water.abyss_salinity_g_per_kg
    between = (model.theta > 12.5) & (model.theta < 19.5)
    assert between.mean() > 0.1, "the front has hardly moved: nothing is tested"
    assert 12.0 - 20.0 * round_off <= model.theta.min()
    assert model.theta.max() <= 20.0 * (1.0 + round_off)
    # Salinity itself, near 35, is known to its own round-off only.
    assert -0.5 - 36.0 * round_off <= sigma.min()
    assert sigma.max() <= 1.0 + 36.0 * round_off


@pytest.mark.parametrize("thickness_flux", ["centred", "upwind_biased"])
@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
def test_a_layer_that_runs_over_a_nearly_dry_bed_stays_positive(scheme: str, thickness_flux: str) -> None:
    """100 m beside 0.1 m sloshing for twenty days, every step looked at; no water is made or lost."""
    model = collapsing(
        scheme,
        0.1,
        {"numerics.step_s": 1800.0, "numerics.thickness_flux": thickness_flux, "motion.viscosity_m2_per_s": 8e3},
    )
    volume = model.thickness.sum()
    for _ in range(960):
        model.advance(1)
        assert (model.thickness > 0.0).all()
    assert np.abs(model.velocity_x).max() > 0.5
    assert model.thickness.sum() == pytest.approx(volume, rel=1e-13)
    if thickness_flux == "centred":
        assert model.ledger.limited_faces[0] > 0, "the limiter of outflow had nothing to do: nothing is tested"
