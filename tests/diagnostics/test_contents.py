"""What the warm layer holds."""

from __future__ import annotations

import numpy as np
import pytest

from oceanbox.diagnostics.contents import contents_of, excess_content, kinetic_energy
from oceanbox.diagnostics.reference import Reference
from tests.synthetic import synthetic_means


def test_water_of_the_abyss_holds_no_heat() -> None:
    thickness, area = np.full((1, 3, 4), 100.0), np.full((3, 4), 1e10)
    assert excess_content(thickness, np.full((1, 3, 4), 5.0), 5.0, area) == 0.0
    assert excess_content(thickness, np.full((1, 3, 4), 7.0), 5.0, area) == pytest.approx(2.4e13, rel=1e-14)


def test_kinetic_energy_of_a_uniform_current() -> None:
    """rho0 V (u^2 + v^2)/2."""
    thickness, area = np.full((1, 3, 4), 100.0), np.full((3, 4), 1e10)
    u, v = np.full((1, 3, 5), 0.3), np.full((1, 4, 4), -0.4)
    expected = 1025.0 * 12 * 1e12 * 0.25 / 2
    assert kinetic_energy(thickness, u, v, area, 1025.0) == pytest.approx(expected, rel=1e-14)


def test_both_faces_of_a_cell_give_it_kinetic_energy() -> None:
    """A current through one face only has half the mean square of a uniform one."""
    thickness, area = np.ones((1, 1, 1)), np.ones((1, 1))
    at_rest = np.zeros((1, 1, 2))
    for face in (0, 1):
        one = np.zeros(2)
        one[face] = 2.0
        along_x, along_y = one.reshape(1, 1, 2), one.reshape(1, 2, 1)
        assert kinetic_energy(thickness, along_x, at_rest.reshape(1, 2, 1), area, 1.0) == 1.0
        assert kinetic_energy(thickness, at_rest, along_y, area, 1.0) == 1.0


def test_contents_follow_density_and_heat_capacity() -> None:
    means = synthetic_means()
    base = contents_of(means, Reference(1000.0, 4000.0, 5.0, 35.0, 2.0, "walls"))
    double = contents_of(means, Reference(1000.0, 8000.0, 5.0, 35.0, 2.0, "walls"))
    assert float(double["heat_content"]) == pytest.approx(2 * float(base["heat_content"]), rel=1e-15)
    assert float(double["salt_content"]) == float(base["salt_content"])
    assert float(base["warm_water_volume"]) == pytest.approx(float(means["thickness"].sum()) * 5e10, rel=1e-12)
