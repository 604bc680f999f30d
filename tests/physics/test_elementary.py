"""The exponential and the logarithm that are written out agree with those of the C library and of NumPy in extended precision."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.physics.elementary import decay, log_of_one_plus, mean_of_decay, mean_of_dilution

EPS = float(np.finfo(float).eps)
# Rounding of the last few operations of each: a product and a sum for a series whose first term is the largest, a quotient more
# for the means; the argument of the series is exact to half a unit of a number below 0.35.
ROUNDOFF = 4.0 * EPS

Extended = NDArray[np.longdouble]
REFERENCES: dict[str, tuple[Callable[[float], float], Callable[[Extended], Extended]]] = {
    "exp(-x)": (decay, lambda x: np.exp(-x)),
    "ln(1 + x)": (log_of_one_plus, np.log1p),
    "(1 - exp(-x))/x": (mean_of_decay, lambda x: -np.expm1(-x) / x),
    "ln(1 + x)/x": (mean_of_dilution, lambda x: np.log1p(x) / x),
}


def arguments() -> NDArray[np.float64]:
    """From 1e-15 to 700, dense where one way of working it out gives way to another."""
    rng = np.random.default_rng(1)
    turns = [0.001, 0.35, 0.41421356, 0.5, 0.6931471805599453, 1.0]
    near = np.concatenate([turn * (1.0 + 1e-3 * rng.uniform(-1.0, 1.0, 500)) for turn in turns])
    return np.concatenate([10.0 ** rng.uniform(-15.0, 2.84, 20000), near])


@pytest.mark.parametrize("name", list(REFERENCES))
def test_agrees_with_the_library_to_round_off(name: str) -> None:
    """Relative error over the whole range, against NumPy in extended precision."""
    function, reference = REFERENCES[name]
    x = arguments()
    found = np.array([function(value) for value in x])
    expected = reference(x.astype(np.longdouble))
    assert float(np.abs(found / expected - 1.0).max()) <= ROUNDOFF


@pytest.mark.parametrize(
    ("function", "at_zero"), [(decay, 1.0), (log_of_one_plus, 0.0), (mean_of_decay, 1.0), (mean_of_dilution, 1.0)]
)
def test_at_zero_it_is_exact(function: Callable[[float], float], at_zero: float) -> None:
    assert function(0.0) == at_zero


def test_what_is_not_a_number_stays_so() -> None:
    """A run that has broken must not look sound."""
    assert np.isnan(decay(np.nan))
    assert np.isnan(log_of_one_plus(np.nan))
