"""The budget of zonal momentum of a steady closed basin, latitude by latitude (derived).

Integrated from wall to wall, (g'/2)(h_e^2 - h_w^2) = Int tau_x dx/rho0 + friction + advection, for the Coriolis force on a
section that no volume crosses vanishes.  On the grid the sum runs over the faces between the first and the last centre, and the
half cells beyond them keep a Coriolis term.  Everything here is computed from h, u and v alone, without the model's kernels.
"""

from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from tests.building import run_days
from tests.physics.gyre_runs import gyre_config, transport_x, transport_y

Array = NDArray[np.float64]

# A third of the width of the shipped basin, on 42 km by 94 km.
SMALL = {"basin.width_km": 2000.0, "basin.cells_x": 48, "basin.cells_y": 32, "motion.viscosity_m2_per_s": 1.0e4}
DYNAMICS: dict[str, dict[str, Any]] = {
    "transport_friction": {"motion.drag_per_day": 0.01},
    "velocity_friction": {"motion.viscosity_acts_on": "velocity", "basin.side_walls": "free_slip"},
    "advection": {
        "motion.momentum_advection": True,
        "motion.viscosity_acts_on": "velocity",
        "motion.drag_per_day": 0.01,
    },
}


def over_faces(field: Array) -> Array:
    """Mean of neighbours in x: centres (ny, nx) to the faces between them, (ny, nx-1)."""
    return 0.5 * (field[:, 1:] + field[:, :-1])


def rotation(model: Model) -> Array:
    """h times Coriolis force and vorticity flux on the faces between centres, (ny, nx-1), m2 s-2."""
    grid, h = model.grid, model.thickness[0]
    V = transport_y(model)
    f = grid.coriolis(grid.y_face)[:, np.newaxis]
    hx = over_faces(h)
    if not model.constants.momentum_advection:
        turned = f * over_faces(V)
        return 0.5 * (turned[1:] + turned[:-1])
    u, v = model.velocity_x[0], model.velocity_y[0]
    zeta = np.diff(v[1:-1], axis=1) / grid.dx - np.diff(u[:, 1:-1], axis=0) / grid.dy
    flux = np.zeros((grid.ny + 1, grid.nx - 1))  # nothing crosses the zonal walls
    flux[1:-1] = (f[1:-1] + zeta) / (0.5 * (hx[1:] + hx[:-1])) * over_faces(V)[1:-1]
    return hx * 0.5 * (flux[1:] + flux[:-1])


def kinetic_gradient(model: Model) -> Array:
    """-h K_x on the faces between centres, m2 s-2."""
    if not model.constants.momentum_advection:
        return np.zeros((model.grid.ny, model.grid.nx - 1))
    squares = over_faces(model.velocity_x[0] ** 2) + 0.5 * (
        model.velocity_y[0][1:] ** 2 + model.velocity_y[0][:-1] ** 2
    )
    return -over_faces(model.thickness[0]) * np.diff(0.5 * squares, axis=1) / model.grid.dx


def viscosity(model: Model) -> Array:
    """A lap(hu), or h A lap(u), on the faces between centres, m2 s-2."""
    constants, grid = model.constants, model.grid
    smoothed = transport_x(model) if constants.viscosity_on_transport else model.velocity_x[0]
    sign = constants.tangential_sign
    tall = np.vstack([sign * smoothed[:1], smoothed, sign * smoothed[-1:]])
    laplacian = np.diff(smoothed, 2, axis=1) / grid.dx**2 + np.diff(tall, 2, axis=0)[:, 1:-1] / grid.dy**2
    weight = 1.0 if constants.viscosity_on_transport else over_faces(model.thickness[0])
    return constants.viscosity * weight * laplacian


def zonal_momentum(model: Model) -> dict[str, Array]:
    """Every term of d/dt Int hu dx along each row, (ny,), m3 s-2."""
    grid, config = model.grid, model.setup.config
    h, b = model.thickness[0], float(model.buoyancy.mean())
    density = config.water.reference_density_kg_per_m3
    drag = config.motion.drag_per_day / 86400.0
    return {
        "pressure": -0.5 * b * (h[:, -1] ** 2 - h[:, 0] ** 2),
        "wind": model.setup.maps.wind_stress_x[:, 1:-1].sum(axis=1) / density * grid.dx,
        "rotation": rotation(model).sum(axis=1) * grid.dx,
        "kinetic": kinetic_gradient(model).sum(axis=1) * grid.dx,
        "viscosity": viscosity(model).sum(axis=1) * grid.dx,
        "drag": -drag * transport_x(model).sum(axis=1) * grid.dx,
    }


@pytest.fixture(scope="module", params=DYNAMICS)
def steady(request: pytest.FixtureRequest) -> Model:
    model = Model(assemble_setup(gyre_config("munk_gyre", SMALL | DYNAMICS[request.param])))
    run_days(model, 1800.0)
    return model


def test_zonal_momentum_closes_at_every_latitude(steady: Model) -> None:
    """To 1e-8 of the terms: what then accelerates the row is their residual, and a steady row does not accelerate."""
    terms = zonal_momentum(steady)
    size = sum(np.abs(term) for term in terms.values())
    present = {"pressure", "wind", "rotation", "viscosity"}
    present |= {"drag"} if steady.setup.config.motion.drag_per_day > 0.0 else set()
    present |= {"kinetic"} if steady.constants.momentum_advection else set()
    for name, term in terms.items():
        # Every term that is switched on matters far beyond the tolerance, or the identity would not test it.
        assert (np.abs(term) / size).max() > 1e-4 if name in present else not term.any(), name
    assert (np.abs(sum(terms.values())) < 1e-8 * size).all()


def test_no_volume_crosses_a_latitude_of_a_steady_basin(steady: Model) -> None:
    """To 1e-9 of what flows back and forth across it."""
    V = transport_y(steady)[1:-1]
    assert (np.abs(V.sum(axis=1)) < 1e-9 * np.abs(V).sum(axis=1)).all()
