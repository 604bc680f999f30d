"""Models of the configurations in ``configs/checks``, which hold published solutions."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from oceanbox.config import Config, load
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model
from oceanbox.stepping.runge_kutta import STRONG_3, Tableau

FOLDER = Path(__file__).parents[2] / "configs" / "checks"


def check_config(name: str, changes: dict[str, Any] | None = None) -> Config:
    """The configuration ``name`` of ``configs/checks`` with dotted keys changed."""
    config = load(FOLDER / f"{name}.yaml").config
    return config.with_changes(changes) if changes else config


def check_model(name: str, changes: dict[str, Any] | None = None, tableau: Tableau = STRONG_3) -> Model:
    """A model of that configuration at its initial state."""
    return Model(assemble_setup(check_config(name, changes)), tableau)
