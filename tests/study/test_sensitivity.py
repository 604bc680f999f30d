"""Elasticities of known functions; Sobol' indices of the Ishigami and g-functions and beside another implementation."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
import scipy.stats
from numpy.typing import NDArray

from oceanbox.study.sensitivity import (
    SobolIndices,
    elasticity,
    elasticity_factors,
    sobol_design,
    sobol_indices,
)

Array = NDArray[np.float64]
Function = Callable[[Array], Array]

# Of S and S_T.  Independent draws scatter by 0.0085 at this N (their sums have a standard deviation of 1.1 variances); 30 seeds
# of the scrambled Sobol' sequence were all within 0.0026, against 0.012 at half this N.
TOLERANCE = 0.01
N = 2**14


def ishigami(unit: Array) -> Array:
    """sin x1 + 7 sin^2 x2 + 0.1 x3^4 sin x1, x from -pi to pi (Ishigami and Homma 1990)."""
    x1, x2, x3 = (math.pi * (2.0 * unit - 1.0)).T
    return np.asarray(np.sin(x1) + 7.0 * np.sin(x2) ** 2 + 0.1 * x3**4 * np.sin(x1))


WEIGHTS = np.array([0.0, 1.0, 4.5, 9.0, 99.0, 99.0, 99.0, 99.0])


def g_function(unit: Array) -> Array:
    """Product of (|4 x - 2| + a)/(1 + a) (Saltelli and Sobol' 1995)."""
    return np.asarray(((np.abs(4.0 * unit - 2.0) + WEIGHTS) / (1.0 + WEIGHTS)).prod(axis=1))


def evaluated(function: Function, parameters: int, count: int, seed: int) -> tuple[Array, Array, Array]:
    design = sobol_design(parameters, count, seed)
    values = function(design.stacked()).reshape(parameters + 2, count)
    return values[0], values[1], values[2:]


def indices_of(function: Function, parameters: int) -> SobolIndices:
    return sobol_indices(*evaluated(function, parameters, N, 1), confidence=0.95, resamples=100, seed=1)


def test_indices_of_the_ishigami_function() -> None:
    found = indices_of(ishigami, 3)
    assert found.first == pytest.approx([0.313905, 0.442411, 0.0], abs=TOLERANCE)
    assert found.total == pytest.approx([0.557589, 0.442411, 0.243684], abs=TOLERANCE)
    assert found.mean == pytest.approx(3.5, abs=TOLERANCE * math.sqrt(13.8446))
    assert found.variance == pytest.approx(13.8446, rel=TOLERANCE)


def test_indices_of_the_g_function() -> None:
    found = indices_of(g_function, 8)
    partial = 1.0 / (3.0 * (1.0 + WEIGHTS) ** 2)
    variance = (1.0 + partial).prod() - 1.0
    total = partial * (1.0 + variance) / (1.0 + partial) / variance
    assert (partial / variance)[:4] == pytest.approx([0.716192, 0.179048, 0.0236758, 0.00716192], rel=1e-5)
    assert (variance, total[0]) == pytest.approx((0.465424, 0.787144), rel=1e-5)
    assert found.first == pytest.approx(partial / variance, abs=TOLERANCE)
    assert found.total == pytest.approx(total, abs=TOLERANCE)
    assert found.variance == pytest.approx(variance, rel=TOLERANCE)


@pytest.mark.parametrize(("function", "parameters"), [(ishigami, 3), (g_function, 8)])
def test_estimates_equal_those_of_another_implementation(function: Function, parameters: int) -> None:
    at_a, at_b, at_mixed = evaluated(function, parameters, 256, 3)
    found = sobol_indices(at_a, at_b, at_mixed, confidence=0.95, resamples=100, seed=1)
    values = {"f_A": at_a[np.newaxis], "f_B": at_b[np.newaxis], "f_AB": at_mixed[:, np.newaxis]}
    other = scipy.stats.sobol_indices(func=values, n=256)
    # Sums of 256 numbers of order one: round-off.
    assert found.first == pytest.approx(other.first_order, abs=1e-12)
    assert found.total == pytest.approx(other.total_order, abs=1e-12)


def test_the_design_changes_one_parameter_at_a_time() -> None:
    design = sobol_design(3, 16, 0)
    assert design.stacked().shape == (16 * 5, 3)
    for column in range(3):
        others = [other for other in range(3) if other != column]
        assert np.array_equal(design.mixed[column][:, column], design.b[:, column])
        assert np.array_equal(design.mixed[column][:, others], design.a[:, others])


def test_every_parameter_of_both_samples_is_spread_evenly() -> None:
    """A scrambled Sobol' sequence of 2^m points has one in each of 2^m equal intervals; different seeds differ."""
    design = sobol_design(4, 64, 7)
    for points in (design.a, design.b):
        assert np.array_equal(np.sort(np.floor(points * 64.0), axis=0), np.tile(np.arange(64.0)[:, None], 4))
    assert not np.array_equal(design.a, sobol_design(4, 64, 8).a)
    assert np.array_equal(design.a, sobol_design(4, 64, 7).a)


def test_intervals_are_as_wide_as_the_estimates_scatter() -> None:
    """Over independent samples: a 95 % interval is 2 x 1.96 standard deviations wide and holds the truth as often."""
    trials, count = 80, 512
    generator = np.random.default_rng(4)
    exact = np.array([0.313905, 0.442411, 0.0])
    estimates, widths, hits = [], [], 0
    for seed in range(trials):
        a, b = generator.random((count, 3)), generator.random((count, 3))
        mixed = [np.where(np.arange(3) == column, b, a) for column in range(3)]
        at_mixed = np.array([ishigami(points) for points in mixed])
        found = sobol_indices(ishigami(a), ishigami(b), at_mixed, confidence=0.95, resamples=200, seed=seed)
        estimates.append(found.first)
        widths.append(found.first_upper - found.first_lower)
        hits += int(((found.first_lower <= exact) & (exact <= found.first_upper)).sum())
    scatter = np.std(estimates, axis=0)
    # Three standard deviations of a standard deviation from 80 draws.
    assert np.mean(widths, axis=0) / (2.0 * 1.96) == pytest.approx(scatter, rel=3.0 / math.sqrt(2.0 * trials))
    assert hits / (3 * trials) > 0.95 - 3.0 * math.sqrt(0.95 * 0.05 / trials)


def test_a_wider_confidence_gives_a_wider_interval_around_the_estimate() -> None:
    values = evaluated(ishigami, 3, 256, 1)
    narrow = sobol_indices(*values, confidence=0.5, resamples=500, seed=2)
    wide = sobol_indices(*values, confidence=0.99, resamples=500, seed=2)
    assert (wide.total_lower < narrow.total_lower).all() and (narrow.total_lower < narrow.total).all()
    assert (wide.total_upper > narrow.total_upper).all() and (narrow.total_upper > narrow.total).all()


def test_rows_without_a_value_are_left_out_as_a_whole() -> None:
    at_a, at_b, at_mixed = evaluated(ishigami, 3, 64, 1)
    kept = np.ones(64, dtype=bool)
    kept[[3, 10, 20]] = False
    whole = sobol_indices(at_a[kept], at_b[kept], at_mixed[:, kept], confidence=0.9, resamples=100, seed=1)
    at_a[3] = at_b[10] = at_mixed[1, 20] = np.nan
    holed = sobol_indices(at_a, at_b, at_mixed, confidence=0.9, resamples=100, seed=1)
    assert holed.used == 61
    assert np.array_equal(holed.first, whole.first) and np.array_equal(holed.total_upper, whole.total_upper)


def test_a_measure_that_does_not_vary_has_no_indices() -> None:
    found = sobol_indices(np.ones(8), np.ones(8), np.ones((2, 8)), confidence=0.9, resamples=100, seed=1)
    assert np.isnan(found.first).all() and np.isnan(found.total).all()
    assert found.variance == 0.0


@pytest.mark.parametrize("power", [-2.0, 0.0, 0.5, 3.0])
@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_the_elasticity_of_a_power_is_its_exponent_for_any_step(power: float, sign: float) -> None:
    found = elasticity([sign * 7.0 * (3.0 * factor) ** power for factor in elasticity_factors(0.3)], 0.3)
    # Logarithms of numbers of order one over a step of 0.3.
    assert found.value == pytest.approx(power, abs=1e-14)
    assert found.step_error < 1e-14


def test_the_stated_step_error_is_the_error() -> None:
    """y = 1 + 2 p^3 at p = 1 has elasticity 2; the error is quadratic in the step, its estimate right to that order."""
    errors = []
    for step in (0.2, 0.1):
        found = elasticity([1.0 + 2.0 * factor**3 for factor in elasticity_factors(step)], step)
        errors.append(abs(found.value - 2.0))
        assert found.step_error == pytest.approx(errors[-1], rel=(3.0 * step) ** 2)
    assert errors[0] / errors[1] == pytest.approx(4.0, rel=(3.0 * 0.2) ** 2)


def test_a_step_that_is_too_large_is_not_settled() -> None:
    def at(step: float) -> bool:
        return elasticity(
            [math.exp(-((factor - 0.8) ** 2) / 0.02) for factor in elasticity_factors(step)], step
        ).settled(0.1)

    assert at(0.02) and not at(0.5)


@pytest.mark.parametrize(
    "values", [[1.0, 2.0, -1.0, 1.0], [-1.0, -1.0, 1.0, 1.0], [0.0, 1.0, 1.0, 1.0], [math.nan] * 4]
)
def test_a_measure_that_changes_sign_has_no_elasticity(values: list[float]) -> None:
    assert math.isnan(elasticity(values, 0.1).value)
