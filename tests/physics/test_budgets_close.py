"""Volume, heat and salt are booked by the very amounts that moved them, so every budget closes to round-off.

Two measures: in each cell the residual stays below what the roundings of a step can add up to (`busy_ocean.round_off`);
over the basin it stays below 1e-12 of the sum of the absolute terms, the figure a closed budget is held to.
"""

from __future__ import annotations

import pytest

from oceanbox.budgets.rates import BUDGETS
from oceanbox.experiment.model import Model
from oceanbox.physics.state import Ledger
from tests.building import books
from tests.physics.busy_ocean import busy_ocean, round_off

SCHEMES = ("forward_backward", "runge_kutta_3")
SMALLEST_BASIN_RESIDUAL = 1e-12


def assert_books_close(model: Model, steps: int) -> None:
    for budget in BUDGETS:
        residual, allowed = round_off(model, budget, steps)
        assert (residual <= allowed).all(), f"{budget}: {(residual / allowed).max():.3g} of what round-off allows"
    for budget, closed in books(model).items():
        assert closed.basin <= SMALLEST_BASIN_RESIDUAL, f"{budget}: {closed.basin:.3g} of the sum of absolute terms"


@pytest.mark.parametrize("exchange_interval_days", [0.0, 0.25])
@pytest.mark.parametrize("scheme", SCHEMES)
def test_every_budget_closes_in_every_single_step_of_the_full_physics(
    scheme: str, exchange_interval_days: float
) -> None:
    model = busy_ocean({"numerics.scheme": scheme, "numerics.exchange_interval_days": exchange_interval_days})
    for _ in range(60):
        model.open_books()
        model.advance(1)
        assert_books_close(model, steps=1)


@pytest.mark.parametrize("scheme", SCHEMES)
@pytest.mark.parametrize(
    "changes",
    [
        pytest.param({}, id="as it is"),
        pytest.param({"basin.zonal_boundary": "periodic", "motion.sponge": None}, id="channel"),
        pytest.param({"basin.side_walls": "no_slip", "motion.viscosity_acts_on": "transport"}, id="no slip"),
        pytest.param(
            {"transformation.salt": "left_behind", "water.equation_of_state": "linear"}, id="salt left behind"
        ),
        pytest.param({"numerics.thickness_flux": "upwind_biased"}, id="upwind thickness"),
    ],
)
def test_every_budget_closes_over_a_window_of_many_steps(scheme: str, changes: dict[str, object]) -> None:
    model = busy_ocean(changes | {"numerics.scheme": scheme})
    model.advance(20)
    model.open_books()
    model.advance(300)
    assert_books_close(model, steps=300)


@pytest.mark.parametrize("scheme", SCHEMES)
def test_the_busy_ocean_uses_every_term_of_every_budget(scheme: str) -> None:
    """Or the closure of its budgets would say nothing of the term that is missing."""
    model = busy_ocean({"numerics.scheme": scheme})
    model.advance(40)
    unused = {name for name, entry in model.ledger._asdict().items() if not entry.any()}
    assert unused == {"limited_faces"}


@pytest.mark.parametrize("scheme", SCHEMES)
def test_nothing_passes_a_wall(scheme: str) -> None:
    model = busy_ocean({"numerics.scheme": scheme})
    model.advance(40)
    for name in Ledger._fields:
        entry = getattr(model.ledger, name)
        if name.endswith("_x"):
            assert not model.grid.x_faces(entry)[..., [0, -1]].any(), name
        if name.endswith("_y"):
            assert not model.grid.y_faces(entry)[..., [0, -1], :].any(), name


@pytest.mark.parametrize("scheme", SCHEMES)
def test_surface_heating_and_the_outcrop_are_all_that_changes_the_heat_of_a_closed_basin(scheme: str) -> None:
    """d/dt Int h Theta dA = Int Q/(rho0 c_p) dA + outcrop: destroying water at the surface takes no further heat.

    Summed over n cells, face fluxes cancel but for one rounding of each, so the bound is that of a cell, summed.
    """
    model = busy_ocean({"numerics.scheme": scheme})
    model.advance(200)
    centres, ledger = model.grid.centres, model.ledger
    gained = centres(model.state.heat).sum() - centres(model.opening.heat).sum()
    booked = sum(centres(entry).sum() for entry in (ledger.heat_prescribed, ledger.heat_restoring, ledger.outcrop_heat))
    allowed = round_off(model, "heat", 200)[1].sum()
    assert abs(gained - booked) <= allowed
    assert abs(centres(ledger.heat_restoring)).sum() > 1e9 * allowed
