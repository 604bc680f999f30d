"""Whatever is switched on and whatever state it meets, the books close, water stays, and cooling never makes heat."""

from __future__ import annotations

from typing import Any

import numpy as np
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from oceanbox.budgets.rates import BUDGETS
from oceanbox.experiment.model import Model
from tests.building import books, set_state
from tests.physics.busy_ocean import busy_ocean, round_off

Changes = dict[str, Any]

EFFICIENCIES = st.one_of(
    st.builds(lambda value: {"kind": "constant", "value": value}, st.floats(0.0, 1.0)),
    st.builds(lambda scale: {"kind": "cooling", "scale_K": scale}, st.floats(1.0, 30.0)),
)
ALTERNATIVES: dict[str, st.SearchStrategy[Any]] = {
    "numerics.scheme": st.sampled_from(["forward_backward", "runge_kutta_3"]),
    "numerics.exchange_interval_days": st.sampled_from([0.0, 0.125]),
    "numerics.thickness_flux": st.sampled_from(["centred", "upwind_biased"]),
    "basin.zonal_boundary": st.sampled_from(["walls", "periodic"]),
    "basin.side_walls": st.sampled_from(["free_slip", "no_slip"]),
    "basin.cells_x": st.integers(4, 9),
    "basin.cells_y": st.integers(10, 15),
    "water.equation_of_state": st.sampled_from(["linear", "quadratic"]),
    "motion.momentum_advection": st.booleans(),
    "motion.viscosity_acts_on": st.sampled_from(["velocity", "transport"]),
    "mixing.lateral_diffusivity_m2_per_s": st.sampled_from([0.0, 3.0e3]),
    "surface.heat.prescribed_W_per_m2": st.floats(-500.0, 200.0),
    "transformation.efficiency": EFFICIENCIES,
    "transformation.salt": st.sampled_from(["carried", "left_behind"]),
}
SECTIONS_THAT_MAY_BE_ABSENT = (
    "entrainment.upwelling",
    "entrainment.diffusive",
    "entrainment.shoaling",
    "entrainment.prescribed",
    "transformation",
    "outcrop",
    "surface.heat.restoring",
    "surface.heat.loss_band",
    "surface.fresh_water",
    "motion.sponge",
)


@st.composite
def oceans(draw: st.DrawFn) -> Model:
    """The busy ocean with anything in it exchanged or switched off, in a random state: thin beside thick, warm beside cold."""
    changes: Changes = {"basin.width_km": 300.0}
    changes |= {key: draw(choices) for key, choices in ALTERNATIVES.items()}
    for section in SECTIONS_THAT_MAY_BE_ABSENT:
        if draw(st.booleans()):
            changes = {key: value for key, value in changes.items() if not key.startswith(f"{section}.")}
            changes[section] = None
    if changes["basin.zonal_boundary"] == "periodic":
        changes["motion.sponge"] = None
    model = busy_ocean(changes)
    rng = np.random.default_rng(draw(st.integers(0, 2**32 - 1)))
    thinnest, contrast, coldest, speed = rng.uniform((1.0, 1.0, -4.0, 0.0), (100.0, 30.0, 10.0, 3.0))
    grid = model.grid
    cells = (1, grid.ny, grid.nx)
    velocity_x = rng.uniform(-speed, speed, (1, grid.ny, grid.nx + 1))
    velocity_x[..., -1] = velocity_x[..., 0] if grid.periodic_x else 0.0
    velocity_x[..., 0] = velocity_x[..., -1]
    velocity_y = rng.uniform(-speed, speed, (1, grid.ny + 1, grid.nx))
    velocity_y[:, [0, -1]] = 0.0
    set_state(
        model,
        thickness=thinnest * contrast ** rng.uniform(0.0, 1.0, cells),
        theta=coldest + rng.uniform(0.0, 20.0, cells),
        sigma=rng.uniform(-2.0, 2.0, cells),
        velocity_x=velocity_x,
        velocity_y=velocity_y,
    )
    return model


@settings(max_examples=100, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
@given(oceans())
def test_books_close_for_any_choice_of_physics_from_any_state(model: Model) -> None:
    """In cells to what roundings add up to (see `busy_ocean.round_off`), over the basin to 1e-12."""
    for _ in range(4):
        model.open_books()
        model.advance(1)
        for budget in BUDGETS:
            residual, allowed = round_off(model, budget, steps=1)
            assert (residual <= allowed).all(), f"{budget}: {(residual / allowed).max():.3g} of what round-off allows"
        assert all(closed.basin <= 1e-12 for closed in books(model).values())
    assert (model.thickness > 0.0).all()


@settings(max_examples=100, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
@given(oceans())
def test_making_abyssal_water_never_takes_more_heat_than_the_air_took(model: Model) -> None:
    """w_d Theta <= -Q/(rho0 c_p) in every cell and step, Theta that of the water destroyed (Walin 1982 sets the equality).

    The column that loses volume holds the heat it has after advection and the thickness it has after entrainment; both
    follow from the books, with the roundings of `busy_ocean.round_off`.
    """
    model.advance(model.exchange_every - 1)
    model.open_books()
    model.advance(1)
    grid, ledger = model.grid, model.ledger
    destroyed = -grid.centres(ledger.transformation)
    surface = grid.centres(ledger.heat_prescribed + ledger.heat_restoring)
    handed = -grid.centres(ledger.outcrop_volume)
    thickness = model.thickness[0] + destroyed + handed
    held = grid.centres(model.state.heat)[0] - surface - grid.centres(ledger.outcrop_heat)
    allowed = round_off(model, "heat", 1)[1] + round_off(model, "volume", 1)[1] * np.abs(held / thickness)
    assert (destroyed >= 0.0).all()
    assert (destroyed * held / thickness <= np.maximum(-surface, 0.0) + allowed).all()
