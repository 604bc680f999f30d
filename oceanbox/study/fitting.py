"""E-folding times of adjustments, with their uncertainty."""

from __future__ import annotations

import math
import warnings
from dataclasses import dataclass
from enum import Enum

import numpy as np
from numpy.typing import ArrayLike, NDArray

__all__ = ["Relaxation", "Trust", "crossing_time", "fit_relaxation", "relaxation"]

Array = NDArray[np.float64]

PARAMETERS = 2
"""What is fitted: the e-folding time and the value in the end."""
SIGNIFICANT = 3.0
"""A change smaller than this many of its own standard errors may be noise."""
LONGEST = 1e3
"""The longest e-folding time that is tried, in lengths of the record: a straight line."""
TRIALS = 200


class Trust(Enum):
    """What a fitted e-folding time is worth; each value is a phrase."""

    SOUND = "fitted"
    NO_CHANGE = "no change beyond the noise"
    TOO_FAST = "faster than the series resolves"
    TOO_SHORT = "the record ends before the adjustment does"
    NOT_EXPONENTIAL = "no exponential fits"


@dataclass(frozen=True)
class Relaxation:
    """A fitted adjustment final + (first - final) exp(-t/e_folding), with standard errors; `first` is given, not fitted.

    noise            standard deviation of what the fit leaves over, in the unit of the values
    autocorrelation  of what is left over, from one point to the next; errors allow for it where it is positive
    """

    trust: Trust
    first: float
    e_folding: float
    e_folding_error: float
    final: float
    final_error: float
    noise: float
    autocorrelation: float


def relaxation(times: ArrayLike, e_folding: float, first: float, final: float, interval: float = 0.0) -> Array:
    """final + (first - final) exp(-t/e_folding), averaged over the interval that ends at each time.

    times        (n,) in any unit, that of `e_folding` and `interval`
    interval     length of the averages, 0 for values at the times themselves
    """
    return np.asarray(final + (first - final) * _decay(np.asarray(times, dtype=np.float64), e_folding, interval))


def _decay(ends: Array, e_folding: float, interval: float) -> Array:
    """The mean of exp(-t/e_folding) over the intervals that end at `ends`."""
    if interval == 0.0:
        return np.asarray(np.exp(-ends / e_folding))
    return np.asarray((np.exp(-(ends - interval) / e_folding) - np.exp(-ends / e_folding)) * (e_folding / interval))


def fit_relaxation(times: ArrayLike, values: ArrayLike, first: float, interval: float = 0.0) -> Relaxation:
    """Fit an exponential adjustment that begins at time zero by least squares.

    times, values    (n,), finite, times ascending from above zero, in any units
    first            the value at time zero
    interval         length of the averages that end at the times, 0 for values at the times themselves

    Standard errors are those of least squares, widened by sqrt((1 + r)/(1 - r)) for the autocorrelation r > 0 of what is left
    over: neighbouring points of a drifting or eddying ocean are no independent witnesses (effective number of observations
    of a first-order autoregressive series; von Storch and Zwiers 1999, Statistical Analysis in Climate Research, 17.1).
    An adjustment that is no exponential has such residuals too, so its errors are wide.

    Raises ValueError if there are not more points than parameters or the shapes differ.
    """
    t, y = np.asarray(times, dtype=np.float64), np.asarray(values, dtype=np.float64)
    if t.shape != y.shape or t.ndim != 1 or len(t) <= PARAMETERS:
        raise ValueError(
            f"times and values: got shapes {t.shape} and {y.shape}; one dimension and more than {PARAMETERS} points "
            "are needed; record a longer series or a denser one"
        )
    # In units of itself, because the search looks at absolute sizes.
    scale = float(np.abs(y - first).max())
    if scale == 0.0:
        return _without_fit(Trust.NO_CHANGE, y, first)
    fitted = _least_squares(t, (y - first) / scale, interval)
    if fitted is None:
        return _without_fit(Trust.NOT_EXPONENTIAL, y, first)
    e_folding, change, covariance = fitted
    final = first + scale * change
    left = y - relaxation(t, e_folding, first, final, interval)
    correlation = _autocorrelation(left)
    widening = math.sqrt((1.0 + correlation) / (1.0 - correlation)) if correlation > 0.0 else 1.0
    log_error, change_error = (widening * float(error) for error in np.sqrt(np.diag(covariance)))
    return Relaxation(
        trust=_trust(t, e_folding, log_error, abs(change), change_error),
        first=first,
        e_folding=e_folding,
        e_folding_error=e_folding * log_error,
        final=final,
        final_error=scale * change_error,
        noise=math.sqrt(float((left**2).sum()) / (len(t) - PARAMETERS)),
        autocorrelation=correlation,
    )


def crossing_time(times: ArrayLike, values: ArrayLike, first: float, final: float) -> float:
    """When the share 1 - 1/e of the change from `first` to `final` has happened for the first time, by straight lines.

    times, values    (n,), times ascending from above zero, where the value is `first`

    The e-folding time of an exponential, without assuming one; NaN if it does not happen within the series.
    """
    t = np.concatenate([[0.0], np.asarray(times, dtype=np.float64)])
    done = (np.concatenate([[first], np.asarray(values, dtype=np.float64)]) - first) / (final - first)
    share = 1.0 - math.exp(-1.0)
    passed = np.flatnonzero(done >= share)
    if len(passed) == 0:
        return math.nan
    after = int(passed[0])
    return float(np.interp(share, done[after - 1 : after + 1], t[after - 1 : after + 1]))


def _least_squares(t: Array, y: Array, interval: float) -> tuple[float, float, Array] | None:
    """E-folding time, final value, covariance of the logarithm of the one and of the other; None if nothing fits.

    y    the change since time zero, at most 1 in size
    """
    from scipy.optimize import OptimizeWarning, curve_fit

    def model(at: Array, log_time: float, final: float) -> Array:
        return relaxation(at, math.exp(log_time), 0.0, final, interval)

    # The logarithm keeps the time positive and makes its error nearly symmetric.
    logs = np.linspace(math.log(0.1 * _spacing(t)), math.log(LONGEST * t[-1]), TRIALS)
    start = min((_best_final(t, y, float(log), interval) for log in logs), key=lambda trial: trial[2])
    bounds = ([logs[0], -np.inf], [logs[-1], np.inf])
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("error", OptimizeWarning)  # no covariance: the series does not tell the two apart
            found, covariance = curve_fit(model, t, y, p0=start[:2], bounds=bounds)
    except (RuntimeError, OptimizeWarning):
        return None
    return math.exp(float(found[0])), float(found[1]), np.asarray(covariance, dtype=np.float64)


def _best_final(t: Array, y: Array, log_time: float, interval: float) -> tuple[float, float, float]:
    """For one e-folding time the final value, in which the model is linear, and the sum of squares that is left."""
    grown = relaxation(t, math.exp(log_time), 0.0, 1.0, interval)
    final = float(grown @ y) / float(grown @ grown)
    left = y - final * grown
    return log_time, final, float(left @ left)


def _spacing(t: Array) -> float:
    return float(np.median(np.diff(t, prepend=0.0)))


def _autocorrelation(left: Array) -> float:
    """Correlation of neighbouring residuals; 0 where there is nothing left over."""
    total = float(left @ left)
    if total == 0.0:
        return 0.0
    return min(float(left[1:] @ left[:-1]) / total, 1.0 - 1.0 / len(left))


def _trust(t: Array, e_folding: float, log_error: float, change: float, change_error: float) -> Trust:
    # Beyond its record an exponential is an extrapolation; before its first points it is a guess.
    if e_folding > t[-1]:
        return Trust.TOO_SHORT
    if change < SIGNIFICANT * change_error:
        return Trust.NO_CHANGE
    if e_folding < _spacing(t):
        return Trust.TOO_FAST
    return Trust.NOT_EXPONENTIAL if SIGNIFICANT * log_error > 1.0 else Trust.SOUND


def _without_fit(trust: Trust, values: Array, first: float) -> Relaxation:
    nan = math.nan
    return Relaxation(trust, first, nan, nan, float(values[-1]), nan, float(values.std()), nan)
