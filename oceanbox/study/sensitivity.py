"""Sensitivities: elasticities by central differences, and Sobol' indices of a sample with bootstrap intervals."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

__all__ = [
    "FACTORS",
    "Elasticity",
    "SobolDesign",
    "SobolIndices",
    "elasticity",
    "elasticity_factors",
    "sobol_design",
    "sobol_indices",
]

Array = NDArray[np.float64]

FACTORS = 4
"""Runs for one elasticity: down and up by the whole step, down and up by half of it."""


@dataclass(frozen=True)
class Elasticity:
    """d ln(measure) / d ln(parameter).

    value        from the half step
    step_error   its error from the size of the step, estimated as a third of what halving the step changed: the error of a
                 central difference is quadratic in the step
    """

    value: float
    step_error: float

    def settled(self, share: float) -> bool:
        """Whether the error from the size of the step is at most this share of the value."""
        return self.step_error <= share * abs(self.value)


def elasticity_factors(step: float) -> tuple[float, float, float, float]:
    """What the parameter is multiplied with: exp(-step), exp(step), exp(-step/2), exp(step/2)."""
    return math.exp(-step), math.exp(step), math.exp(-0.5 * step), math.exp(0.5 * step)


def elasticity(values: ArrayLike, step: float) -> Elasticity:
    """The elasticity from the measure at the four `elasticity_factors`; exact for a power of the parameter.

    NaN where the measures do not all have one sign, since then there is no logarithm.
    """
    down, up, half_down, half_up = (float(value) for value in np.asarray(values, dtype=np.float64))
    ratios = (up / down if down else math.nan, half_up / half_down if half_down else math.nan)
    if not all(ratio > 0.0 for ratio in (*ratios, half_up / up if up else math.nan)):
        return Elasticity(math.nan, math.nan)
    whole, half = math.log(ratios[0]) / (2.0 * step), math.log(ratios[1]) / step
    return Elasticity(half, abs(whole - half) / 3.0)


@dataclass(frozen=True)
class SobolDesign:
    """Where to evaluate, in the unit cube: two independent samples and, for each parameter, a mixture of them.

    a, b     (n, k)
    mixed    (k, n, k): `a` with column i taken from `b`
    """

    a: Array
    b: Array
    mixed: Array

    def stacked(self) -> Array:
        """All points in the order a, b, mixed[0], mixed[1], ...: (n (k + 2), k)."""
        return np.concatenate([self.a, self.b, *self.mixed])


def sobol_design(parameters: int, base_samples: int, seed: int) -> SobolDesign:
    """The design of Saltelli et al. (2010), Comput. Phys. Commun. 181, 259, on a scrambled Sobol' sequence (Owen 1998).

    One sequence in twice the dimensions gives both samples.  `base_samples` is a power of two, for which it is balanced.
    """
    from scipy.stats import qmc

    points = qmc.Sobol(2 * parameters, scramble=True, rng=seed).random(base_samples)
    a, b = points[:, :parameters], points[:, parameters:]
    mixed = np.repeat(a[np.newaxis], parameters, axis=0)
    for column in range(parameters):
        mixed[column, :, column] = b[:, column]
    return SobolDesign(a, b, mixed)


@dataclass(frozen=True)
class SobolIndices:
    """Shares of the variance due to each parameter, (k,), with the ends of their bootstrap intervals.

    first    alone: what the variance would fall by if the parameter were known
    total    with all its interactions: what would be left of the variance if all others were known
    used     base samples that had a value everywhere
    """

    first: Array
    first_lower: Array
    first_upper: Array
    total: Array
    total_lower: Array
    total_upper: Array
    mean: float
    variance: float
    used: int


def sobol_indices(
    at_a: ArrayLike, at_b: ArrayLike, at_mixed: ArrayLike, confidence: float, resamples: int, seed: int
) -> SobolIndices:
    """First-order indices by the estimator of Saltelli et al. (2010), total ones by that of Jansen (1999).

    at_a, at_b    (n,) the measure at the points of a `SobolDesign`
    at_mixed      (k, n)

    Rows with a value that is not finite are left out as a whole.  Intervals are percentiles over resampled rows; they take
    the rows as independent draws, so for the evener Sobol' points they are on the wide side.
    All are NaN with fewer than two rows, or if the measure does not vary.
    """
    f_a, f_b, f_mixed = (np.asarray(values, dtype=np.float64) for values in (at_a, at_b, at_mixed))
    whole = np.isfinite(f_a) & np.isfinite(f_b) & np.isfinite(f_mixed).all(axis=0)
    f_a, f_b, f_mixed = f_a[whole], f_b[whole], f_mixed[:, whole]
    rows = len(f_a)
    if rows < 2:
        nothing = np.full(len(f_mixed), math.nan)
        return SobolIndices(nothing, nothing, nothing, nothing, nothing, nothing, math.nan, math.nan, rows)
    both = np.concatenate([f_a, f_b])
    first, total = _estimates(f_a, f_b, f_mixed)
    generator = np.random.default_rng(seed)
    samples = np.array(
        [
            _estimates(f_a[draw], f_b[draw], f_mixed[:, draw])
            for draw in generator.integers(rows, size=(resamples, rows))
        ]
    )
    tail = 50.0 * (1.0 - confidence)
    lower, upper = np.percentile(samples, [tail, 100.0 - tail], axis=0)
    return SobolIndices(
        first, lower[0], upper[0], total, lower[1], upper[1], float(both.mean()), float(both.var()), rows
    )


def _estimates(f_a: Array, f_b: Array, f_mixed: Array) -> tuple[Array, Array]:
    """First and total indices, (k,) each; the mean is taken off first, which changes no expectation but less noise is left."""
    both = np.concatenate([f_a, f_b])
    variance = float(both.var())
    if variance == 0.0:
        nothing = np.full(len(f_mixed), math.nan)
        return nothing, nothing
    difference = f_mixed - f_a
    first = ((f_b - both.mean()) * difference).mean(axis=1) / variance
    total = 0.5 * (difference**2).mean(axis=1) / variance
    return first, total
