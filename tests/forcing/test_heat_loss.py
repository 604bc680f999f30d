"""A heat loss in a band of latitude has the peak, or the total, that it was given."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from oceanbox.config.surface import LossBand
from oceanbox.errors import ConfigError
from oceanbox.forcing import loss_band_flux
from tests.forcing.places import areas, centres

EPS = float(np.finfo(float).eps)


@given(
    total=st.floats(1.0e-3, 10.0),
    ny=st.integers(10, 60),  # rows at most 8.1 degrees apart: one lies in every band
    edges=st.tuples(st.floats(0.0, 20.0), st.floats(30.0, 45.0)),
    hemispheres=st.sampled_from(["both", "north", "south"]),
)
def test_a_total_is_met_to_round_off_on_every_grid(
    total: float, ny: int, edges: tuple[float, float], hemispheres: str
) -> None:
    places = centres(ny=ny)
    area = areas(places)
    band = LossBand(from_deg=edges[0], to_deg=edges[1], hemispheres=hemispheres, total_PW=total)  # type: ignore[arg-type]
    flux = loss_band_flux(band, places.latitude, area)
    # two sums of n terms of one sign, each wrong by at most n eps relative, and four roundings per term
    assert np.sum(flux * area) == pytest.approx(-total * 1.0e15, rel=(2 * flux.size + 4) * EPS)
    assert np.all(flux <= 0.0)


def test_a_peak_is_the_loss_in_the_middle_of_the_band() -> None:
    places = centres(ny=9000)  # a row every kilometre
    flux = loss_band_flux(LossBand(from_deg=20.0, to_deg=40.0, peak_W_per_m2=150.0), places.latitude, areas(places))
    # nearest row to the middle at most 0.5 km = 0.0045 degrees away: sin^2 falls by (pi 0.0045/20)^2 = 5e-7
    assert flux.min() == pytest.approx(-150.0, rel=5e-7)
    assert abs(places.latitude[np.argmin(flux[:, 0])]) == pytest.approx(30.0, abs=0.0045)


@pytest.mark.parametrize(("hemispheres", "north", "south"), [("both", 1, 1), ("north", 1, 0), ("south", 0, 1)])
def test_only_the_chosen_hemispheres_lose_heat(hemispheres: str, north: int, south: int) -> None:
    places = centres()
    band = LossBand(from_deg=20.0, to_deg=35.0, hemispheres=hemispheres, peak_W_per_m2=1.0)  # type: ignore[arg-type]
    loses = np.any(loss_band_flux(band, places.latitude, areas(places)) < 0.0, axis=1)
    assert np.any(loses[places.latitude > 0.0]) == north
    assert np.any(loses[places.latitude < 0.0]) == south
    distance = np.abs(places.latitude[loses])
    assert distance.min() > 20.0 and distance.max() < 35.0


@pytest.mark.parametrize("strength", [{"peak_W_per_m2": 1.0}, {"total_PW": 1.0}])
def test_a_band_that_no_cell_lies_in_is_refused(strength: dict[str, float]) -> None:
    places = centres()
    with pytest.raises(ConfigError) as caught:
        loss_band_flux(LossBand(from_deg=60.0, to_deg=70.0, **strength), places.latitude, areas(places))  # type: ignore[arg-type]
    assert str(caught.value) == (
        "surface.heat.loss_band.from_deg: got 60 to 70 degrees (both), with no cell centre inside; "
        "the band must reach into the basin, whose rows lie between -34.62 and 43.62 degrees; "
        "move or widen the band, or use more cells in y"
    )
