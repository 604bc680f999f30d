"""Fitted e-folding times: exact where the data are, and as uncertain as they say where they are not."""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.study.fitting import Trust, crossing_time, fit_relaxation, relaxation

Array = NDArray[np.float64]

E_FOLDING, FIRST, FINAL = 90.0, 120.0, 100.0
DAYS = np.arange(1, 301) * 3.0
TRIALS = 200
# Standard deviation of a standard deviation from TRIALS draws, as a share of it; three of them.
SCATTER_SHARE = 3.0 / math.sqrt(2.0 * TRIALS)


def autoregressive(correlation: float, size: float, generator: np.random.Generator) -> Array:
    """Noise of a given standard deviation whose neighbours are correlated."""
    shocks = generator.normal(0.0, size * math.sqrt(1.0 - correlation**2), len(DAYS))
    noise = np.empty(len(DAYS))
    noise[0] = generator.normal(0.0, size)
    for index in range(1, len(DAYS)):
        noise[index] = correlation * noise[index - 1] + shocks[index]
    return noise


@pytest.mark.parametrize("interval", [0.0, 3.0, 90.0])
@pytest.mark.parametrize("unit", [1.0, 1e-12, 1e18])
def test_an_exponential_is_found_exactly_in_any_unit(interval: float, unit: float) -> None:
    values = relaxation(DAYS, E_FOLDING, unit * FIRST, unit * FINAL, interval)
    fit = fit_relaxation(DAYS, values, unit * FIRST, interval)
    assert fit.trust is Trust.SOUND
    # The search ends when a step changes squares, slopes or parameters by less than 1e-8; the last steps converge quadratically.
    assert fit.e_folding == pytest.approx(E_FOLDING, rel=1e-6)
    assert fit.final == pytest.approx(unit * FINAL, rel=1e-8)


def test_averages_over_intervals_are_those_of_the_exponential() -> None:
    interval = 50.0
    ends = np.array([50.0, 100.0, 400.0])
    inside = (np.arange(1000) + 0.5) / 1000.0 * interval
    means = [relaxation(end - interval + inside, E_FOLDING, FIRST, FINAL).mean() for end in ends]
    # midpoint rule: (FIRST - FINAL)/24 (interval/1000/E_FOLDING)^2 = 2.6e-7
    assert relaxation(ends, E_FOLDING, FIRST, FINAL, interval) == pytest.approx(means, abs=3e-7)


@pytest.mark.parametrize("correlation", [0.0, 0.6])
def test_the_stated_error_is_the_scatter_of_the_fits(correlation: float) -> None:
    generator = np.random.default_rng(11)
    clean = relaxation(DAYS, E_FOLDING, FIRST, FINAL)
    fits = [fit_relaxation(DAYS, clean + autoregressive(correlation, 0.5, generator), FIRST) for _ in range(TRIALS)]
    for estimate, error in (("e_folding", "e_folding_error"), ("final", "final_error")):
        scatter = np.std([getattr(fit, estimate) for fit in fits])
        stated = np.mean([getattr(fit, error) for fit in fits])
        assert stated == pytest.approx(scatter, rel=SCATTER_SHARE), estimate
    # Three standard errors of the mean of the estimates: the fit is not biased.
    times = np.array([fit.e_folding for fit in fits])
    assert abs(times.mean() - E_FOLDING) < 3.0 * times.std() / math.sqrt(TRIALS)


def test_the_best_fit_is_found_though_the_series_overshoots_first() -> None:
    """A fast fall below the end and back: the sum of squares has more than one minimum."""
    series = relaxation(DAYS, 40.0, 10.0, 5.0) - 8.0 * np.exp(-DAYS / 6.0) * (DAYS / 6.0)
    fit = fit_relaxation(DAYS, series, 10.0)

    def left(e_folding: float) -> float:
        grown = 1.0 - np.exp(-DAYS / e_folding)
        change = float(grown @ (series - 10.0) / (grown @ grown))
        return float(((series - 10.0 - change * grown) ** 2).sum())

    best = min(left(float(time)) for time in np.geomspace(0.3, 1e4, 2000))
    assert left(fit.e_folding) <= best * (1.0 + 1e-6)


def test_noise_alone_is_no_change() -> None:
    """Nearly always: a change is believed from three standard errors on, and a slow drift may be a longer adjustment."""
    generator = np.random.default_rng(5)
    trusts = [fit_relaxation(DAYS, FIRST + autoregressive(0.0, 0.3, generator), FIRST).trust for _ in range(50)]
    # Of normal numbers 0.3 % lie beyond three standard errors; the e-folding time is the best of many, hence 2 of 50.
    assert sum(trust not in (Trust.NO_CHANGE, Trust.TOO_SHORT) for trust in trusts) <= 2
    assert fit_relaxation(DAYS, np.full(len(DAYS), FIRST), FIRST).trust is Trust.NO_CHANGE


def test_a_record_shorter_than_the_adjustment_says_so() -> None:
    values = relaxation(DAYS, 5.0 * DAYS[-1], FIRST, FINAL)
    assert fit_relaxation(DAYS, values, FIRST).trust is Trust.TOO_SHORT


def test_an_adjustment_within_the_first_interval_says_so() -> None:
    values = relaxation(DAYS, 1.0, FIRST, FINAL) + autoregressive(0.0, 0.1, np.random.default_rng(2))
    fit = fit_relaxation(DAYS, values, FIRST)
    assert fit.trust is Trust.TOO_FAST
    assert fit.final == pytest.approx(FINAL, abs=5.0 * 0.1 / math.sqrt(len(DAYS)))


def test_the_crossing_time_of_an_exponential_is_its_e_folding_time() -> None:
    values = relaxation(DAYS, E_FOLDING, FIRST, FINAL)
    # A straight line over a spacing d is off by d^2/8 y'' at most, in time by that over y': d^2/(8 e-folding).
    tolerance = 3.0**2 / (8.0 * E_FOLDING)
    assert crossing_time(DAYS, values, FIRST, FINAL) == pytest.approx(E_FOLDING, abs=1.1 * tolerance)
    assert math.isnan(crossing_time(DAYS[:20], values[:20], FIRST, FINAL))


@pytest.mark.parametrize(("times", "values"), [([1.0, 2.0], [1.0, 2.0]), ([1.0, 2.0, 3.0], [1.0, 2.0])])
def test_series_that_cannot_be_fitted_are_refused(times: list[float], values: list[float]) -> None:
    with pytest.raises(ValueError, match="points are needed"):
        fit_relaxation(times, values, 0.0)
