"""Stommel's gyre (Stommel 1948, Trans. Am. Geophys. Union 29, 202, from memory); its thickness derived.

The coarse gyres run in the default tests have cells of 100 km and a boundary layer r/beta of 50 km.  What that does to the
solution is known exactly (tests/theory/gyre_on_grid.py), and was measured beforehand with another steady solver of the same
grid: psi 3.08 % too strong, h 509.918 m in mid-basin, 529.639 m at its deepest, 484.825 m in the last column of mid-basin.
"""

import numpy as np
import pytest

from oceanbox.constants import DAYS_PER_YEAR
from tests.physics.gyre_runs import SVERDRUP, SteadyGyre, at, gyre_config, quickened, run_gyre
from tests.theory.stommel_gyre import StommelGyre, StommelThickness

COARSE = {"basin.cells_x": 60, "basin.cells_y": 30}
LENGTH, WIDTH, DRAG = 6e6, 3e6, 1e-6


@pytest.fixture(scope="module")
def coarse() -> SteadyGyre:
    """The shipped gyre on 100 km, stress and g' ten times larger: 5 years do what would take 50."""
    return run_gyre(quickened(gyre_config("stommel_gyre", COARSE), 10.0), years=5.0)


def exact_thickness(gyre: SteadyGyre) -> StommelThickness:
    return StommelThickness(StommelGyre(gyre.basin, DRAG), gyre.model.grid.coriolis_origin, gyre.gravity, 500.0)


def test_transport_is_stommels(coarse: SteadyGyre) -> None:
    """Strength with the bias of the grid to its last digit."""
    exact, _ = StommelGyre(coarse.basin, DRAG).maximum()
    psi = coarse.streamfunction
    left = coarse.left_psi / exact
    assert left < 1e-4
    assert 100.0 * (psi.max() / exact - 1.0) == pytest.approx(3.08, abs=0.005 + 100.0 * left)


def test_streamfunction_solves_the_difference_equations_everywhere(coarse: SteadyGyre) -> None:
    expected = coarse.on_grid.streamfunction
    assert coarse.left_psi < 1e-4 * expected.max()
    assert np.abs(coarse.streamfunction - expected).max() < coarse.left_psi


def test_thickness_follows_from_the_streamfunction_everywhere(coarse: SteadyGyre) -> None:
    """The test of pressure, Coriolis force, wind, drag and conservation of volume together."""
    expected = coarse.on_grid.thickness(6e-5, coarse.gravity, 500.0)
    assert np.ptp(expected) > 50.0
    assert coarse.left_thickness < 0.005
    assert np.abs(coarse.thickness - expected).max() < coarse.left_thickness


def test_thickness_at_named_points(coarse: SteadyGyre) -> None:
    """Biased values to half their last digit; the exact mid-basin value, which the grid hardly touches, to 0.01 m."""
    middle, h, left = (0.5 * LENGTH, 0.5 * WIDTH), coarse.thickness, coarse.left_thickness
    assert at(h, coarse.model, *middle) == pytest.approx(509.918, abs=5e-4 + left)
    assert h.max() == pytest.approx(529.639, abs=5e-4 + left)
    assert h[14:16, -1].mean() == pytest.approx(484.825, abs=5e-4 + left)
    exact = float(exact_thickness(coarse).thickness(*middle))
    assert at(h, coarse.model, *middle) == pytest.approx(exact, abs=0.01 + left)


def test_transport_depends_neither_on_thickness_nor_on_f(coarse: SteadyGyre) -> None:
    """A thinner layer with the equator on its southern wall carries the same transport."""
    thinner = {
        "basin.coriolis_at_origin_per_s": 0.0,
        "layers": [{"initial_thickness_m": 350.0, "initial_temperature_degC": 15.0}],
    }
    other = run_gyre(quickened(gyre_config("stommel_gyre", COARSE | thinner), 10.0), years=1.5)
    assert np.abs(other.thickness - coarse.thickness).min() > 100.0
    left = coarse.left_psi + other.left_psi
    assert left < 2e-4 * coarse.streamfunction.max()
    assert np.abs(other.streamfunction - coarse.streamfunction).max() < left


@pytest.mark.slow
def test_the_shipped_configuration_reaches_the_published_gyre_from_rest() -> None:
    """50 km; 0.5 % of psi and 0.5 m of h; with the bias of the grid, to the digits it was measured to.

    The spin-up may leave a fifth of that tolerance.
    """
    config = gyre_config("stommel_gyre")
    gyre = run_gyre(config, years=config.evolve.duration_days / DAYS_PER_YEAR)
    field = exact_thickness(gyre)
    left = gyre.left_thickness
    assert left < 0.1
    assert gyre.streamfunction.max() / SVERDRUP == pytest.approx(4.99233, rel=0.005)
    exact, _ = field.gyre.maximum()
    assert 100.0 * (gyre.streamfunction.max() / exact - 1.0) == pytest.approx(
        0.37, abs=0.005 + 100.0 * gyre.left_psi / exact
    )
    middle = (0.5 * LENGTH, 0.5 * WIDTH)
    h = gyre.thickness
    assert at(h, gyre.model, *middle) == pytest.approx(float(field.thickness(*middle)), abs=0.5)
    assert at(h, gyre.model, *middle) == pytest.approx(509.922, abs=5e-4 + left)
    assert h.max() == pytest.approx(528.755, abs=0.5)
    assert h.max() == pytest.approx(528.848, abs=5e-4 + left)
    # Along the eastern wall 484.3 to 484.5 m, half a cell away from it 0.2 m more.
    assert h[29:31, -1].mean() == pytest.approx(484.408, abs=0.5)
    assert h[29:31, -1].mean() == pytest.approx(484.630, abs=5e-4 + left)
    assert np.abs(h - gyre.on_grid.thickness(6e-5, gyre.gravity, 500.0)).max() < left
