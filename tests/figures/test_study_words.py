"""What captions and lines of studies owe to a reader: signs, sources of steps, laws between the cases."""

from __future__ import annotations

from pathlib import Path

import netCDF4
import numpy as np
import pytest

from oceanbox.figures.study_options import CaseMaps, CaseSeries, SensitivityBars
from oceanbox.figures.study_panels.against import _smooth
from oceanbox.figures.study_panels.caption import study_sentence
from oceanbox.figures.study_panels.cases import StudyData, open_study
from tests.synthetic_study import axes_study

STEPS = "extrapolations towards equilibrium"


def with_attributes(study: StudyData, **attributes: str) -> StudyData:
    """The study after writing global attributes into all its results."""
    for case in study.cases():
        with netCDF4.Dataset(case.result, "a") as file:
            file.setncatts(attributes)
    return study


@pytest.fixture
def study(tmp_path: Path) -> StudyData:
    return open_study(axes_study(tmp_path, 1), tmp_path)


def test_steps_of_an_accelerated_approach_are_explained_and_only_those(study: StudyData) -> None:
    accelerated = "equilibrium: {acceleration: {cycle_years: 0.5}}"
    assert STEPS not in study_sentence(study, CaseSeries())
    assert STEPS not in study_sentence(
        with_attributes(study, oceanbox_config="equilibrium: {acceleration: null}", oceanbox_command="equilibrate"),
        CaseSeries(),
    )
    assert STEPS not in study_sentence(
        with_attributes(study, oceanbox_config=accelerated, oceanbox_command="evolve"), CaseSeries()
    )
    assert STEPS in study_sentence(with_attributes(study, oceanbox_command="equilibrate"), CaseSeries())


def test_a_map_of_a_flux_says_which_way_is_positive(study: StudyData) -> None:
    assert "Positive: the warm layer gains." in study_sentence(study, CaseMaps(field="surface_heat_flux"))


def test_the_log_law_is_drawn_as_a_logarithm_between_the_cases() -> None:
    ratio = np.array([30.0, 2.0, np.nan, 500.0])
    fine, depth = _smooth(ratio, 50.0 + 30.0 * np.log(ratio))
    assert (fine[0], fine[-1]) == pytest.approx((2.0, 500.0))
    np.testing.assert_allclose(depth, 50.0 + 30.0 * np.log(fine), rtol=1e-12)


def test_the_error_bars_of_elasticities_are_explained(elasticities: StudyData) -> None:
    assert "a third of what halving it changes" in study_sentence(elasticities, SensitivityBars())
