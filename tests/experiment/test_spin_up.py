"""The approach to equilibrium may be shortened, the equilibrium not changed."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np

from oceanbox.config import Config
from oceanbox.equilibrium.mixing import Mixing
from oceanbox.experiment.api import equilibrate
from tests.building import box_config

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


def test_what_extrapolation_added_is_told_and_in_no_budget(tmp_path: Path) -> None:
    """Storage equals the sum of named terms in the window, and the history says what was added before it."""
    finished = equilibrate(_basin(), tmp_path)
    result = finished.result
    assert "extrapolations added" in result.attrs["history"]
    terms = float(np.abs(result["volume_convergence"]).sum())
    assert float(np.abs(result["volume_residual"]).max()) < 1e-9 * terms


def test_a_run_may_end_within_its_spin_up(tmp_path: Path) -> None:
    """When the time allowed is over before the spin-up is, that is an outcome with a result, not a crash."""
    config = _basin(**{"equilibrium.longest_years": 3.0, "equilibrium.acceleration.cycle_years": 0.5})
    finished = equilibrate(config, tmp_path)
    assert finished.outcome.ending.value == "not in equilibrium"
    assert np.isfinite(finished.result["thickness"]).all()


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
