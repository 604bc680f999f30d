"""The time-stepping schemes have the known limits."""

import numpy as np
import pytest

from tests.theory.printed import rounds_to
from tests.theory.stability import (
    adams_bashforth_factors,
    c_grid_gravity_wave_frequency,
    decay_limit,
    forward_backward_factors,
    generalised_forward_backward_factors,
    highest_gravity_wave_frequency,
    largest_factor,
    leapfrog_factors,
    oscillation_limit,
    runge_kutta_factors,
    stability_limit,
)


def test_oscillation_limits() -> None:
    # Durran 1991 for the Adams-Bashforth schemes; classical for the others (from memory); roots derived.
    assert oscillation_limit(leapfrog_factors) == pytest.approx(1.0, abs=1e-8)
    assert oscillation_limit(lambda z: adams_bashforth_factors(z, 2)) == 0.0
    assert rounds_to(oscillation_limit(lambda z: adams_bashforth_factors(z, 3)), "0.723627")
    assert rounds_to(oscillation_limit(lambda z: adams_bashforth_factors(z, 4)), "0.42999")
    assert oscillation_limit(lambda z: runge_kutta_factors(z, 3)) == pytest.approx(np.sqrt(3.0), abs=1e-8)
    assert oscillation_limit(lambda z: runge_kutta_factors(z, 4)) == pytest.approx(np.sqrt(8.0), abs=1e-8)


def test_decay_limits() -> None:
    # Classical (from memory); roots derived.
    assert rounds_to(decay_limit(lambda z: adams_bashforth_factors(z, 3)), "0.545455")
    assert rounds_to(decay_limit(lambda z: runge_kutta_factors(z, 3)), "2.51275")
    assert rounds_to(decay_limit(lambda z: runge_kutta_factors(z, 4)), "2.78529")


def test_growth_of_the_second_order_adams_bashforth_scheme() -> None:
    # Derived: about w^4/4 per step.
    for w, growth in ((0.1, "2.55e-5"), (0.2, "4.34e-4")):
        assert rounds_to(largest_factor(adams_bashforth_factors(1j * w, 2)) - 1.0, growth)


@pytest.mark.parametrize(("order", "power", "divisor"), [(3, 4, 24.0), (4, 6, 144.0)])
def test_damping_of_runge_kutta_schemes(order: int, power: int, divisor: float) -> None:
    """1 - |G| = w^m / d + O(w^(m+2)): at w = 0.05 the next term is within 1 % of the first."""
    w = 0.05
    damping = 1.0 - largest_factor(runge_kutta_factors(1j * w, order))
    assert damping == pytest.approx(w**power / divisor, rel=0.01)


def test_forward_backward_limits() -> None:
    assert stability_limit(forward_backward_factors) == pytest.approx(2.0, abs=1e-8)
    # Shchepetkin and McWilliams 2005 (from memory) for the coefficients; limit derived. 1.7802 is often quoted, but
    # coefficients rounded to these digits give 1.7801.
    limit = stability_limit(generalised_forward_backward_factors)
    assert rounds_to(limit, "1.7801")
    assert limit == pytest.approx(1.0 / np.sqrt(2.0 * (0.088 + 0.013) * (1.0 + 2.0 * 0.281105)), abs=1e-8)


def test_generalised_scheme_without_its_weights_is_second_order() -> None:
    """With every weight zero it is AB2 for eta and the trapezoidal rule for u, whose phase error is of order w^2."""
    for w in (0.02, 0.01):
        exact = np.exp(-1j * w)
        for weights in ((0.0, 0.0, 0.0), (0.281105, 0.088, 0.013)):
            factors = generalised_forward_backward_factors(w, *weights)
            assert np.abs(factors - exact).min() < w**3


def test_highest_gravity_wave_of_the_c_grid() -> None:
    # Derived; c = 2.5 m/s, cells of 25 km.
    omega = highest_gravity_wave_frequency(2.5, 25e3, 25e3)
    assert rounds_to(omega, "2.82843e-4")
    for limit, step in (
        (oscillation_limit(lambda z: runge_kutta_factors(z, 3)), "6123.72"),
        (stability_limit(forward_backward_factors), "7071.07"),
        (oscillation_limit(lambda z: runge_kutta_factors(z, 4)), "10000.0"),
        (oscillation_limit(lambda z: adams_bashforth_factors(z, 3)), "2558.4"),
    ):
        assert rounds_to(limit / omega, step)
    checkerboard = c_grid_gravity_wave_frequency(np.pi / 25e3, np.pi / 40e3, 2.5, 25e3, 40e3)
    assert float(checkerboard) == pytest.approx(highest_gravity_wave_frequency(2.5, 25e3, 40e3), rel=1e-14)


def test_long_gravity_waves_of_the_c_grid_are_not_dispersive() -> None:
    """Short by (k dx)^2/24 at most."""
    k, l_wave = 1e-7, 2e-7
    omega = float(c_grid_gravity_wave_frequency(k, l_wave, 2.5, 25e3, 40e3))
    assert omega == pytest.approx(2.5 * np.hypot(k, l_wave), rel=(2e-7 * 40e3) ** 2 / 24.0)
