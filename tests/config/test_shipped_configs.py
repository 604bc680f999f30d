"""The configurations in `configs/` load, and their cells suit their viscosity."""

from pathlib import Path

import pytest

from oceanbox import config

FOLDER = Path(__file__).parents[2] / "configs"


@pytest.mark.parametrize("path", sorted(FOLDER.glob("*.yaml")), ids=lambda path: path.stem)
def test_a_shipped_configuration_loads_under_its_own_name(path: Path) -> None:
    loaded = config.load(path).config
    assert loaded.name == path.stem
    assert loaded.description.endswith(".")


@pytest.mark.parametrize("name", ["quick", "reference"])
def test_the_western_boundary_layer_is_at_least_one_cell_wide(name: str) -> None:
    loaded = config.load(FOLDER / f"{name}.yaml").config
    munk_width_km = (loaded.motion.viscosity_m2_per_s / loaded.basin.beta_per_m_s) ** (1 / 3) / 1000.0
    assert munk_width_km >= loaded.basin.width_km / loaded.basin.cells_x


def test_quick_differs_from_reference_only_in_cells_and_viscosity() -> None:
    quick, reference = (config.load(FOLDER / f"{name}.yaml").config for name in ("quick", "reference"))
    changes = {
        "name": "quick",
        "description": quick.description,
        "basin.cells_x": 40,
        "basin.cells_y": 100,
        "motion.viscosity_m2_per_s": quick.motion.viscosity_m2_per_s,
    }
    assert reference.with_changes(changes) == quick
