"""Synthetic studies, made once for all tests of figures."""

from __future__ import annotations

import pytest

from oceanbox.figures.study_panels.cases import StudyData, open_study
from tests.synthetic_study import axes_study, branch_study, sensitivity_study, switch_study


@pytest.fixture(scope="session")
def one_axis(tmp_path_factory: pytest.TempPathFactory) -> StudyData:
    folder = tmp_path_factory.mktemp("one_axis")
    return open_study(axes_study(folder, 1), folder)


@pytest.fixture(scope="session")
def two_axes(tmp_path_factory: pytest.TempPathFactory) -> StudyData:
    folder = tmp_path_factory.mktemp("two_axes")
    return open_study(axes_study(folder, 2), folder)


@pytest.fixture(scope="session")
def branch() -> StudyData:
    return open_study(branch_study(), ".")


@pytest.fixture(scope="session")
def switch() -> StudyData:
    return open_study(switch_study(), ".")


@pytest.fixture(scope="session")
def indices() -> StudyData:
    return open_study(sensitivity_study("sobol_indices"), ".")


@pytest.fixture(scope="session")
def elasticities() -> StudyData:
    return open_study(sensitivity_study("elasticities"), ".")
