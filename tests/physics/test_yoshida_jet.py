"""The equatorial jet under a uniform eastward wind: Yoshida 1959, J. Oceanogr. Soc. Jpn. 15, 159 (from memory)."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from numpy.typing import NDArray

from oceanbox.constants import SECONDS_PER_DAY
from tests.physics.check_ocean import check_model
from tests.theory.yoshida_jet import YoshidaRates, yoshida_rates, yoshida_rates_on_c_grid

Array = NDArray[np.float64]
STRESS, DEPTH, GRAVITY, BETA = 0.05, 150.0, 0.04, 2.28e-11
JET = 1e6  # m from the equator


# The rise of the wind over T = 10 days sets off waves that ring on, sin(omega T/2)/(omega T/2) of what a sudden wind would: a
# ninth for the slowest, omega = sqrt(3 beta c).  A mean with weights sin^2 over N = 7 of its periods keeps 1/N^3 of that.
RINGING = 0.11 / 7.0**3


@cache
def growing(cells: int, scheme: str) -> tuple[Array, Array, YoshidaRates]:
    """(y, y_face, rates) fitted over days 20 to 60 with weights sin^2: a straight line through u and h, the mean of v."""
    model = check_model("yoshida_jet", {"basin.cells_y": cells, "numerics.scheme": scheme})
    grid = model.grid
    steps = round(0.5 * SECONDS_PER_DAY / model.clock.dt)
    model.advance(40 * steps)
    times, u, h, v = [], [], [], []
    for _ in range(80):
        model.advance(steps)
        times.append(model.clock.seconds)
        u.append(model.velocity_x[0][:, 0])
        h.append(model.thickness[0][:, 0])
        v.append(model.velocity_y[0][:, 0])
    # polyfit weighs residuals before it squares them.
    weights = np.sin(np.pi * (np.arange(80) + 0.5) / 80)
    acceleration = np.polyfit(times, np.array(u), 1, w=weights)[0]
    deepening = np.polyfit(times, np.array(h), 1, w=weights)[0]
    return grid.y, grid.y_face, YoshidaRates(acceleration, deepening, np.average(v, axis=0, weights=weights**2))


def check_near_the_equator(y: Array, y_face: Array, rates: YoshidaRates, expected: YoshidaRates, share: float) -> None:
    """All three rates within ``share`` of the largest of their kind, up to 1000 km from the equator."""
    near, near_face = np.abs(y) < JET, np.abs(y_face) < JET
    for got, exact, where in zip(rates, expected, (near, near, near_face), strict=True):
        assert got[where] == pytest.approx(exact[where], rel=0, abs=share * float(np.abs(exact).max()))


@pytest.mark.parametrize("scheme", ["forward_backward", "runge_kutta_3"])
@pytest.mark.parametrize("cells", [80, 160])
def test_the_jet_grows_as_it_must_on_the_grid(cells: int, scheme: str) -> None:
    """Against the exact growth on a C-grid with these walls (derived)."""
    y, y_face, rates = growing(cells, scheme)
    check_near_the_equator(y, y_face, rates, yoshida_rates_on_c_grid(y_face, STRESS, DEPTH, GRAVITY, BETA), RINGING)


@pytest.mark.parametrize(("cells", "share"), [(80, 0.02), (160, 0.005)])
def test_the_jet_grows_as_yoshida_found(cells: int, share: float) -> None:
    """u = F t (1 + y V), h = -(F c/g') t V', v = F Te V with V the solution of V'' - y^2 V = y.

    The Coriolis average slows the growth by (dy/Le)^2/8 taken twice, 2.3 % on 100 km cells and 0.6 % on 50 km ones at most.
    """
    y, y_face, rates = growing(cells, "runge_kutta_3")
    check_near_the_equator(
        y,
        y_face,
        rates,
        YoshidaRates(
            yoshida_rates(y, STRESS, DEPTH, GRAVITY, BETA).acceleration,
            yoshida_rates(y, STRESS, DEPTH, GRAVITY, BETA).deepening,
            yoshida_rates(y_face, STRESS, DEPTH, GRAVITY, BETA).velocity_y,
        ),
        share,
    )


def test_the_jet_has_the_rates_worked_out_by_hand() -> None:
    """On the equator 0.0280976 m s-1 and 1.03077 m per day; inflow of 0.0221567 m s-1 at 485 km, within 0.5 %."""
    y, y_face, rates = growing(160, "runge_kutta_3")
    middle = y.size // 2
    # The two rows beside the equator lie 0.08 radii from it; even functions, extrapolated to fourth order.
    equator = [(9.0 * rate[middle] - rate[middle + 1]) / 8.0 * SECONDS_PER_DAY for rate in rates[:2]]
    assert equator == pytest.approx([0.0280976, 1.03077], rel=0.005)
    assert rates.velocity_y.min() == pytest.approx(-0.0221567, rel=0.005)
    assert y_face[rates.velocity_y.argmin()] == pytest.approx(485e3, abs=25e3)
