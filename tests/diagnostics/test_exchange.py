"""Heat through the surface, and water made and destroyed."""

from __future__ import annotations

import numpy as np
import pytest

from oceanbox.diagnostics import Geometry
from oceanbox.diagnostics.exchange import heat_exchange, relative_imbalance, volume_exchange_of
from tests.synthetic import synthetic_means

# Rows are 10 degrees high: two within the tropics, two subtropical ones on either side, one polar one beyond.
DEGREES = np.radians(10.0) * 6.371e6
GEOMETRY = Geometry(np.array([0.0, 1e6, 2e6]), DEGREES * np.arange(-4, 5))
CELL = 1e6 * DEGREES
NOTHING = np.zeros((8, 2))


def test_gain_and_loss_are_told_apart_cell_by_cell() -> None:
    flux = np.zeros((8, 2))
    flux[3] = [50.0, -10.0]  # tropics
    flux[1] = [0.0, -25.0]  # subtropics
    flux[7] = [5.0, -30.0]  # high latitudes
    found = heat_exchange(flux, NOTHING, GEOMETRY.cell_area, GEOMETRY)
    assert found.tropical_gain == pytest.approx(40 * CELL, rel=1e-13)
    assert found.gain == pytest.approx(55 * CELL, rel=1e-13)
    assert found.loss == pytest.approx(65 * CELL, rel=1e-13)
    assert found.high_latitude_loss == pytest.approx(30 * CELL, rel=1e-13)
    assert found.imbalance == pytest.approx(10 / 120, rel=1e-13)


def test_an_imbalance_of_nothing_is_not_a_number_rather_than_zero() -> None:
    assert np.isnan(relative_imbalance(0.0, 0.0))
    assert relative_imbalance(-0.3, 2.0) == 0.15
    assert np.isnan(heat_exchange(NOTHING, NOTHING, GEOMETRY.cell_area, GEOMETRY).imbalance)


def test_heat_that_the_outcrop_hands_to_the_abyss_counts_as_lost() -> None:
    flux, outcrop = NOTHING.copy(), NOTHING.copy()
    flux[4] = [30.0, -10.0]
    outcrop[7, 0] = -20.0
    assert heat_exchange(flux, outcrop, GEOMETRY.cell_area, GEOMETRY).imbalance == pytest.approx(0.0, abs=1e-15)
    assert heat_exchange(flux, NOTHING, GEOMETRY.cell_area, GEOMETRY).imbalance == pytest.approx(0.5, rel=1e-13)


def test_total_entrainment_is_the_sum_of_its_closures() -> None:
    found = volume_exchange_of(synthetic_means())
    closures = [name for name in found if str(name).startswith("entrainment_") and name != "entrainment_total"]
    assert len(closures) == 4
    assert float(found["entrainment_total"]) == pytest.approx(sum(float(found[name]) for name in closures), rel=1e-15)


def test_what_the_outcrop_hands_over_counts_among_the_losses_of_water() -> None:
    means = synthetic_means()
    found = volume_exchange_of(means)
    made, destroyed, handed = (float(found[f"{n}_total"]) for n in ("entrainment", "transformation", "outcrop"))
    area = means["cell_area"].values
    assert handed == pytest.approx(-float((means["outcrop_volume"].values * area).sum()), rel=1e-14)
    assert float(found["exchange_imbalance"]) == pytest.approx(abs(made - destroyed - handed) / made, rel=1e-12)
