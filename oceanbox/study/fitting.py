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

# Three parameters are fitted.
PARAMETERS = 3
# A change smaller than this many of its own standard errors may be noise.
SIGNIFICANT = 3.0


class Trust(Enum):
    """What a fitted e-folding time is worth; each value is a phrase."""

    SOUND = "fitted"
    NO_CHANGE = "no change beyond the noise"
    TOO_SHORT = "the record ends before the adjustment does"
    NOT_EXPONENTIAL = "no exponential fits"


@dataclass(frozen=True)
class Relaxation:
    """A fitted adjustment final + (first - final) exp(-t/e_folding), each number with its standard error.

    noise            standard deviation of what the fit leaves over, in the unit of the values
    autocorrelation  of what is left over, from one point to the next; errors allow for it where it is positive
    """

    trust: Trust
    e_folding: float
    e_folding_error: float
    first: float
    first_error: float
    final: float
    final_error: float
    noise: float
    autocorrelation: float


def relaxation(times: ArrayLike, e_folding: float, first: float, final: float, interval: float = 0.0) -> Array:
    """final + (first - final) exp(-t/e_folding), averaged over the interval that ends at each time.

    times        (n,) in any unit, that of `e_folding` and `interval`
    interval     length of the averages, 0 for values at the times themselves
    """
    ends = np.asarray(times, dtype=np.float64)
    # the mean of exp over an interval is its value at the middle times sinh(s)/s, s half the interval in e-foldings
    half = 0.5 * interval / e_folding
    mean = math.sinh(half) / half if half > 0.0 else 1.0
    return np.asarray(final + (first - final) * mean * np.exp(-(ends - 0.5 * interval) / e_folding))


def fit_relaxation(times: ArrayLike, values: ArrayLike, interval: float = 0.0) -> Relaxation:
    """Fit an exponential adjustment that begins at time zero by least squares.

    times, values    (n,), finite, times ascending, in any units
    interval         length of the averages that end at the times, 0 for values at the times themselves

    Standard errors are those of least squares, widened by sqrt((1 + r)/(1 - r)) for the autocorrelation r > 0 of what is left
    over: neighbouring points of a drifting or eddying ocean are no independent witnesses (effective number of observations
    of a first-order autoregressive series; von Storch and Zwiers 1999, Statistical Analysis in Climate Research, 17.1).

    Raises ValueError if there are not more points than parameters or the shapes differ.
    """
    t, y = np.asarray(times, dtype=np.float64), np.asarray(values, dtype=np.float64)
    if t.shape != y.shape or t.ndim != 1 or len(t) <= PARAMETERS:
        raise ValueError(
            f"times and values: got shapes {t.shape} and {y.shape}; one dimension and more than {PARAMETERS} points "
            "are needed; record a longer series or a denser one"
        )
    if np.ptp(y) == 0.0:
        return _without_fit(Trust.NO_CHANGE, y)
    fitted = _least_squares(t, y, interval)
    if fitted is None:
        return _without_fit(Trust.NOT_EXPONENTIAL, y)
    (log_time, first, final), covariance = fitted
    left = y - relaxation(t, math.exp(log_time), first, final, interval)
    correlation = _autocorrelation(left)
    widening = math.sqrt((1.0 + correlation) / (1.0 - correlation)) if correlation > 0.0 else 1.0
    errors = widening * np.sqrt(np.diag(covariance))
    change_error = widening * math.sqrt(max(0.0, covariance[1, 1] + covariance[2, 2] - 2.0 * covariance[1, 2]))
    e_folding = math.exp(log_time)
    return Relaxation(
        trust=_trust(e_folding, float(errors[0]), abs(final - first), change_error, float(t[-1])),
        e_folding=e_folding,
        e_folding_error=e_folding * float(errors[0]),
        first=first,
        first_error=float(errors[1]),
        final=final,
        final_error=float(errors[2]),
        noise=float(np.sqrt((left**2).sum() / (len(t) - PARAMETERS))),
        autocorrelation=correlation,
    )


def crossing_time(times: ArrayLike, values: ArrayLike, first: float, final: float) -> float:
    """When the share 1 - 1/e of the change from `first` to `final` has happened for the first time, by straight lines.

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


def _least_squares(t: Array, y: Array, interval: float) -> tuple[tuple[float, float, float], Array] | None:
    """Logarithm of the e-folding time, first and final value, and their covariance; None if nothing fits."""
    from scipy.optimize import OptimizeWarning, curve_fit

    def model(at: Array, log_time: float, first: float, final: float) -> Array:
        return relaxation(at, math.exp(log_time), first, final, interval)

    # The logarithm keeps the time positive and makes its error nearly symmetric.
    tail = float(y[-max(1, len(y) // 5) :].mean())
    guess = crossing_time(t, y, float(y[0]), tail) if tail != y[0] else math.nan
    if not 0.0 < guess < math.inf:
        guess = float(t[-1]) / 3.0
    shortest, longest = math.log(1e-3 * float(np.diff(t, prepend=0.0).min())), math.log(1e3 * float(t[-1]))
    bounds = ([shortest, -np.inf, -np.inf], [longest, np.inf, np.inf])
    start = (min(max(math.log(guess), shortest), longest), float(y[0]), tail)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("error", OptimizeWarning)  # no covariance: the data do not determine the parameters
            found, covariance = curve_fit(model, t, y, p0=start, bounds=bounds)
    except (RuntimeError, OptimizeWarning, OverflowError):
        return None
    return (float(found[0]), float(found[1]), float(found[2])), np.asarray(covariance, dtype=np.float64)


def _autocorrelation(left: Array) -> float:
    """Correlation of neighbouring residuals; 0 where there is nothing left over."""
    total = float((left**2).sum())
    if total == 0.0:
        return 0.0
    return min(float((left[1:] * left[:-1]).sum()) / total, 1.0 - 1.0 / len(left))


def _trust(e_folding: float, log_error: float, change: float, change_error: float, longest: float) -> Trust:
    if change < SIGNIFICANT * change_error and e_folding < longest:
        return Trust.NO_CHANGE
    # Beyond its record an exponential is an extrapolation, and its error is no longer small against it.
    if e_folding > longest or SIGNIFICANT * log_error > 1.0:
        return Trust.TOO_SHORT
    return Trust.SOUND


def _without_fit(trust: Trust, values: Array) -> Relaxation:
    nan = math.nan
    return Relaxation(trust, nan, nan, float(values[0]), nan, float(values[-1]), nan, float(values.std()), nan)
