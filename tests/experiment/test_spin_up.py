"""The approach to equilibrium may be shortened, the equilibrium not changed."""

from __future__ import annotations

import time
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.budgets.rates import BUDGETS, budget_maps
from oceanbox.config import Config, load
from oceanbox.constants import SECONDS_PER_DAY
from oceanbox.equilibrium import Tolerances
from oceanbox.equilibrium.mixing import Mixing
from oceanbox.experiment.api import equilibrate
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.integrals import contents
from oceanbox.experiment.model import Model
from oceanbox.experiment.spinup import ROSSBY, SpinUp
from oceanbox.physics.state import State
from tests.building import box_config

CONFIGS = Path(__file__).resolve().parents[2] / "configs"

# A basin small enough to be in equilibrium within seconds of computing, strict enough to compare states.
SMALL_BASIN: dict[str, Any] = {
    "basin.width_km": 3000.0,
    "basin.south_km": -3000.0,
    "basin.north_km": 3000.0,
    "basin.cells_x": 15,
    "basin.cells_y": 30,
    "layers.0.initial_temperature_degC": 20.0,
    "motion.viscosity_m2_per_s": 2.0e5,
    "mixing.lateral_diffusivity_m2_per_s": 2000.0,
    "entrainment.upwelling.mixed_layer_depth_m": 50.0,
    "entrainment.shoaling.minimum_thickness_m": 50.0,
    "transformation.efficiency": {"kind": "constant", "value": 0.5},
    "surface.heat.restoring.target_temperature_degC": {
        "shape": "tropics_to_pole",
        "tropical": 28.0,
        "polar": 12.0,
        "flat_to_deg": 5.0,
        "pole_deg": 27.0,
    },
    "surface.wind.zonal_stress_N_per_m2": {"shape": "gaussian", "peak": -0.05, "width_deg": 12.0},
    "equilibrium.longest_years": 200.0,
    "equilibrium.window_years": 1.0,
    "equilibrium.volume_drift_per_decade": 1e-7,
    "equilibrium.heat_drift_per_decade": 1e-7,
    "equilibrium.heat_imbalance": 1e-6,
    "equilibrium.exchange_imbalance": 1e-6,
}


def _basin(**changes: Any) -> Config:
    return box_config(SMALL_BASIN | changes)


def test_an_accelerated_run_ends_in_the_equilibrium_of_the_plain_one(tmp_path: Path) -> None:
    """Laminar basin, both under criteria of 1e-7 per decade: thickness within 1 mm, temperature within 1 mK everywhere.

    A drift of 1e-7 per decade of a 100 m layer is 1e-5 m; left to decay over decades it stays below a tenth of the bound.
    """
    plain = equilibrate(_basin(**{"equilibrium.acceleration": None}), tmp_path / "plain")
    quick = equilibrate(_basin(), tmp_path / "accelerated")
    assert plain.outcome.ending.value == quick.outcome.ending.value == "equilibrium"
    np.testing.assert_allclose(quick.result["thickness"], plain.result["thickness"], rtol=0.0, atol=1e-3)
    np.testing.assert_allclose(quick.result["temperature"], plain.result["temperature"], rtol=0.0, atol=1e-3)
    assert float(quick.result["time"][-1]) < float(plain.result["time"][-1])


def test_what_acceleration_added_is_told_and_in_no_budget(tmp_path: Path) -> None:
    """Storage equals the sum of named terms in the window, and the history says what was added before it."""
    finished = equilibrate(_basin(), tmp_path)
    result = finished.result
    assert "outside every window that is judged" in result.attrs["history"]
    terms = float(np.abs(result["volume_convergence"]).sum())
    assert float(np.abs(result["volume_residual"]).max()) < 1e-9 * terms


def test_what_acceleration_added_accounts_for_every_cubic_metre(tmp_path: Path) -> None:
    """Contents after some cycles = contents at the start + what the books of true steps say + what is recorded as added."""
    model = Model(assemble_setup(_basin()))
    spin_up = SpinUp(model, memory=4, pace_limit=20.0, tolerances=Tolerances(0.0, 0.0, 0.0, 0.0))
    steps = round(20.0 * SECONDS_PER_DAY / model.clock.dt)
    start = contents(model)
    booked = {"warm_water_volume": 0.0, "heat_content": 0.0}
    water = model.setup.water
    for _ in range(6):
        model.open_books()
        model.advance(steps)
        maps = budget_maps(model.grid, model.ledger, model.opening, model.state, 1.0, water)
        for name, budget in (("warm_water_volume", "volume"), ("heat_content", "heat")):
            terms, _, _ = BUDGETS[budget]
            booked[name] += sum(float(maps[term].sum()) for term in terms) * model.grid.cell_area
        spin_up.end_cycle(20.0 / 3652.5)
    added = {"warm_water_volume": spin_up.counts.volume_added, "heat_content": spin_up.counts.heat_added}
    now = contents(model)
    for name, more in added.items():
        assert now[name] == pytest.approx(start[name] + booked[name] + more, rel=1e-11)
        assert abs(more) > 1e-4 * start[name]


def test_acceleration_leaves_time_for_the_windows_that_are_judged(tmp_path: Path) -> None:
    """A search that is given up is given up in a window of true steps, whose budget closes."""
    config = _basin(**{"equilibrium.longest_years": 4.0, "equilibrium.acceleration.cycle_years": 0.3})
    finished = equilibrate(config, tmp_path)
    assert finished.outcome.ending.value == "not in equilibrium"
    assert "spin-up ended" in finished.result.attrs["history"]
    terms = float(np.abs(finished.result["volume_convergence"]).sum())
    assert float(np.abs(finished.result["volume_residual"]).max()) < 1e-9 * terms


def test_without_time_for_more_than_its_windows_a_run_is_plain(tmp_path: Path) -> None:
    """Three windows of a year in three years: bit for bit what it would be without acceleration."""
    short = {"equilibrium.longest_years": 3.0}
    asked = equilibrate(_basin(**short), tmp_path / "asked")
    plain = equilibrate(_basin(**short, **{"equilibrium.acceleration": None}), tmp_path / "plain")
    assert np.array_equal(asked.result["thickness"], plain.result["thickness"])


def test_a_run_whose_acceleration_breaks_down_goes_on_plainly_from_its_start_and_says_so(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Hastened steps that end in NaN, twice: the result is that of plain stepping, bit for bit."""

    def breaking(state: State, *_: object) -> None:
        state.thickness[...] = np.nan

    short = {"equilibrium.longest_years": 4.0}
    plain = equilibrate(_basin(**short, **{"equilibrium.acceleration": None}), tmp_path / "plain")
    monkeypatch.setattr("oceanbox.experiment.model.advance_hastened", breaking)
    broken = equilibrate(_basin(**short), tmp_path / "broken")
    assert "acceleration broke down again: going on plainly from the start" in broken.result.attrs["history"]
    for name in ("thickness", "temperature", "velocity_x"):
        assert np.array_equal(broken.result[name], plain.result[name])


def test_acceleration_that_does_not_help_is_given_up_and_says_so(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Hastened steps that swing the ocean for ever never come to rest; the run goes back to its start and then on plainly."""
    swing = iter(range(10**6))

    def swinging(state: State, *_: object) -> None:
        factor = 1.02 if next(swing) // 20 % 2 else 1.0 / 1.02
        state.thickness[...] *= factor
        state.heat[...] *= factor

    monkeypatch.setattr("oceanbox.experiment.model.advance_hastened", swinging)
    config = _basin(**{"equilibrium.longest_years": 20.0, "output.sample_interval_days": 30.0})
    finished = equilibrate(config, tmp_path)
    history = finished.result.attrs["history"]
    assert "acceleration does not help" in history and "going on plainly from the start" in history


def _vector_of(model: Model) -> NDArray[np.float64]:
    return np.concatenate([content.ravel() for content in model.state])


def test_breakdowns_lead_back_to_the_cycle_and_then_to_the_start() -> None:
    """The first to the state the cycle began with, with more caution; the second to that of the run, and true steps follow."""
    model = Model(assemble_setup(_basin()))
    start = _vector_of(model)
    spin_up = SpinUp(model, memory=4, pace_limit=20.0, tolerances=Tolerances(0.0, 0.0, 0.0, 0.0))
    model.advance(10)
    spin_up.end_cycle(0.05)
    cycle = _vector_of(model)
    model.advance(10)
    assert "more caution" in spin_up.survive()
    assert np.array_equal(_vector_of(model), cycle) and not np.array_equal(cycle, start)
    assert spin_up.counts.rossby < ROSSBY and not spin_up.counts.ended
    model.advance(10)
    assert "from the start" in spin_up.survive()
    assert np.array_equal(_vector_of(model), start)
    assert spin_up.counts.ended and spin_up.survive() == ""


def test_giving_up_far_from_rest_leads_back_to_the_start() -> None:
    """When the time is over after a first cycle, in which nothing has fallen, the run starts again where it was."""
    model = Model(assemble_setup(_basin()))
    start = _vector_of(model)
    spin_up = SpinUp(model, memory=4, pace_limit=20.0, tolerances=Tolerances(0.0, 0.0, 0.0, 0.0))
    for _ in range(2):
        model.open_books()
        model.advance(40)
        spin_up.end_cycle(0.05)
    assert not np.array_equal(_vector_of(model), start)
    assert "does not help" in spin_up.run_out()
    assert np.array_equal(_vector_of(model), start)


@pytest.mark.parametrize("depth", [100.0, 150.0])
def test_where_every_amount_of_water_has_its_equilibrium_each_run_keeps_its_own(depth: float, tmp_path: Path) -> None:
    """Nothing makes or destroys water: equilibria for every volume, and acceleration stays with the one it starts from."""
    closed = {
        "entrainment": {"upwelling": None, "shoaling": None},
        "transformation": None,
        "outcrop": None,
        "layers.0.initial_thickness_m": depth,
        "equilibrium.volume_drift_per_decade": 1e-3,
        "equilibrium.heat_drift_per_decade": 1e-3,
        "equilibrium.heat_imbalance": 1e-3,
    }
    finished = equilibrate(_basin(**closed), tmp_path)
    assert "spin-up ended" in finished.result.attrs["history"]
    assert float(finished.result["thickness"].mean()) == pytest.approx(depth, rel=1e-10)


def _seconds_of(config: Config, folder: Path) -> float:
    """Processor seconds to equilibrium of a configuration that is in the end in it."""
    start = time.process_time()
    finished = equilibrate(config, folder)
    assert finished.outcome.ending.value == "equilibrium"
    return time.process_time() - start


@pytest.mark.slow
@pytest.mark.parametrize("name", ["quick", "fresh_water", "prescribed_loss", "reference"])
def test_acceleration_never_costs_more_than_three_tenths_of_plain_stepping(name: str, tmp_path: Path) -> None:
    """Every shipped configuration, to equilibrium from its default start."""
    config = load(CONFIGS / f"{name}.yaml").config
    equilibrate(config.with_changes({"equilibrium.longest_years": 6.5}), tmp_path / "compile")
    plain = _seconds_of(config.with_changes({"equilibrium.acceleration": None}), tmp_path / "plain")
    assert _seconds_of(config, tmp_path / "accelerated") < 1.3 * plain


@pytest.mark.slow
def test_an_ocean_that_never_rests_is_left_to_plain_stepping(tmp_path: Path) -> None:
    """Constant efficiency 1 oscillates for ever: the run says so and goes on from its start as if nothing had been tried."""
    changes = {
        "transformation.efficiency": {"kind": "constant", "value": 1.0},
        "equilibrium.longest_years": 30.0,
    }
    config = load(CONFIGS / "quick.yaml").config.with_changes(changes)
    finished = equilibrate(config, tmp_path)
    assert finished.outcome.ending.value == "not in equilibrium"
    assert "going on plainly from the start" in finished.result.attrs["history"]


@pytest.mark.parametrize("branch", [1.0, -1.0])
def test_mixing_started_on_either_branch_stays_on_it(branch: float) -> None:
    """x -> x + r x (1 - x^2) has stable fixed points at 1 and -1, an unstable one at 0; the slow one of 24 twins has r = 0.02."""
    rates = np.geomspace(0.02, 0.5, 24)
    mixing = Mixing(8, np.ones(24))
    x = branch * np.linspace(0.6, 1.4, 24)
    for _ in range(40):
        image = x + rates * x * (1.0 - x**2)
        x = mixing.next(x, image)
    assert np.abs(x - branch).max() < 1e-3


def test_mixing_with_full_memory_solves_a_linear_map_in_as_many_steps_as_it_has_dimensions() -> None:
    """Walker and Ni (2011): on a linear map Anderson mixing is GMRES in essence; six dimensions need six extrapolations."""
    rates = np.diag(np.linspace(0.2, 0.99, 6))
    turn = np.linalg.qr(np.random.default_rng(1).normal(size=(6, 6)))[0]
    matrix, fixed = turn @ rates @ turn.T, np.arange(1.0, 7.0)
    mixing = Mixing(6, np.ones(6))
    x = np.zeros(6)
    for _ in range(8):
        x = mixing.next(x, fixed + matrix @ (x - fixed))
    # The smallest direction kept is 1e-6 of the largest: the error is that share of the start, squared by the last two steps.
    assert np.abs(x - fixed).max() < 1e-6 * np.abs(fixed).max()
    plain = np.zeros(6)
    for _ in range(8):
        plain = fixed + matrix @ (plain - fixed)
    assert np.abs(plain - fixed).max() > 1.0
