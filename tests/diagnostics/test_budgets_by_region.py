"""Regions add up to the basin."""

from __future__ import annotations

import numpy as np
import pytest

from oceanbox import names
from oceanbox.diagnostics.budgets_by_region import BUDGET_TERMS, by_latitude_band, by_region
from tests.synthetic import synthetic_means

EPS = np.finfo(float).eps


def test_regions_add_up_to_the_basin_for_every_term() -> None:
    means = synthetic_means()
    found = by_region(means)
    assert list(found["region"].values) == list(names.REGIONS)
    for term in BUDGET_TERMS:
        basin = means[term] * means["cell_area"]
        total = found[f"region_{term}"].sum()
        # one round-off for the sum of each row, and the rows' shares
        assert float(total) == pytest.approx(float(basin.sum()), rel=0, abs=64 * EPS * float(abs(basin).sum()))


def test_each_region_has_the_area_between_its_latitudes() -> None:
    """A term of one per square metre integrates to the area: to 10, to 30 degrees and beyond."""
    means = synthetic_means()
    means["surface_heat_flux"] = 1.0 + 0.0 * means["surface_heat_flux"]
    found = by_region(means)["region_surface_heat_flux"]
    degree = np.radians(1.0) * 6.371e6
    tropics, subtropics = 20 * degree * 6e6, 20 * degree * 6e6
    high = (5e6 - 30 * degree) * 6e6
    np.testing.assert_allclose(found, [high, subtropics, tropics, subtropics, high], rtol=1e-13)


def test_budgets_close_in_every_region() -> None:
    means = synthetic_means()
    found = by_region(means)
    parts = ("surface_heat_flux", "heat_advection", "heat_mixing", "outcrop_heat", "heat_residual")
    total = sum(found[f"region_{part}"] for part in parts)
    sizes = sum(float(abs(means[part]).sum()) * 5e10 for part in parts)
    assert float(abs(total - found["region_heat_storage"]).max()) < 16 * EPS * sizes


def test_integrals_carry_the_unit_of_the_integral() -> None:
    found = by_region(synthetic_means())
    assert found["region_transformation"].attrs["units"] == "m3 s-1"
    assert found["region_heat_advection"].attrs["units"] == "W"
    assert found["region_salt_mixing"].attrs["units"] == "kg s-1"


def test_bands_that_do_not_rise_are_refused() -> None:
    flux = synthetic_means()["surface_heat_flux"]
    assert by_latitude_band(flux, (-10.0, 0.0, 10.0)).sizes == {"latitude_band": 2}
    with pytest.raises(ValueError, match=r"edges_deg: got \(10.0, 0.0\)"):
        by_latitude_band(flux, (10.0, 0.0))
