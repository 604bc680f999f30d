"""Every configuration that is shipped loads, has no fault on its grid, and takes two steps."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
import yaml

from oceanbox.config import load
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.consistency import examine
from oceanbox.experiment.model import Model

TOP = Path(__file__).parents[1]


def is_configuration(path: Path) -> bool:
    """What has a ``base`` is a study, which varies a configuration that is looked at by itself."""
    return "base" not in yaml.safe_load(path.read_text(encoding="utf-8"))


FOUND = sorted(path for folder in ("configs", "scenarios") for path in (TOP / folder).rglob("*.yaml"))
SHIPPED = [path for path in FOUND if is_configuration(path)]


def test_there_are_configurations_to_look_at() -> None:
    assert {path.stem for path in SHIPPED} >= {"quick", "reference"}


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: str(path.relative_to(TOP)))
def test_a_shipped_configuration_takes_two_steps(path: Path) -> None:
    loaded = load(path)
    setup = assemble_setup(loaded.config)
    assert examine(setup, loaded.source.locate).faults == ()
    model = Model(setup)
    model.advance(2)
    for name, field in model.state._asdict().items():
        assert np.isfinite(field).all(), name
    assert (model.thickness > 0.0).all()
