"""From a finished run to the dataset of its result: window means, budgets, series, derived quantities, provenance."""

from collections.abc import Mapping

import numpy as np
import xarray as xr
from numpy.typing import NDArray

from oceanbox.budgets import budget_maps, face_fluxes
from oceanbox.config import Config, identity, resolved_yaml
from oceanbox.constants import SECONDS_PER_DAY
from oceanbox.diagnostics.summary import summarise
from oceanbox.experiment.assembly import Setup
from oceanbox.experiment.outcome import Outcome
from oceanbox.experiment.running import Run
from oceanbox.names import all_names, lookup
from oceanbox.output.axes import Axes
from oceanbox.output.dataset import assemble, data_variable
from oceanbox.output.provenance import global_attributes

__all__ = ["axes_of", "forcing_maps", "provenance_of", "result_dataset"]

Array = NDArray[np.float64]

REFERENCES = (
    "Ripa (1993), Geophys. Astrophys. Fluid Dyn. 70, 85: layers with horizontally varying buoyancy; "
    "Sadourny (1975), J. Atmos. Sci. 32, 680: energy-conserving C-grid form; "
    "Walin (1982), Tellus 34, 187: water-mass transformation; "
    "Haney (1971), J. Phys. Oceanogr. 1, 241: restoring heat flux; "
    "Shchepetkin and McWilliams (2005), Ocean Modelling 9, 347: time stepping"
)


def axes_of(setup: Setup) -> Axes:
    """The coordinates of the result file."""
    grid = setup.grid
    return Axes(
        x=grid.x,
        y=grid.y,
        x_face=grid.x_face,
        y_face=grid.y_face,
        cell_area=np.full((grid.ny, grid.nx), grid.cell_area),
        periodic_x=grid.periodic_x,
        layers=setup.initial.thickness.shape[0],
    )


def forcing_maps(setup: Setup) -> dict[str, Array]:
    """The forcing as the run used it, and f on rows of centres."""
    maps = setup.maps
    return {
        "wind_stress_x": maps.wind_stress_x,
        "wind_stress_y": maps.wind_stress_y,
        "target_temperature": maps.target_temperature,
        "restoring_coefficient": maps.restoring_coefficient,
        "prescribed_heat_flux": maps.prescribed_heat_flux,
        "precipitation_minus_evaporation": maps.precipitation_minus_evaporation,
        "coriolis": setup.grid.coriolis(setup.grid.y),
    }


def provenance_of(config: Config, outcome: str, notes: list[str]) -> dict[str, str]:
    """Global attributes: how the file was made, so that it can be made again."""
    attributes = global_attributes(
        title=f"oceanbox result: {config.name}",
        summary=config.description or "Equilibrium or evolution of a warm layer over a resting abyss.",
        config_text=resolved_yaml(config),
        config_identity=identity(config),
        outcome=outcome,
        references=REFERENCES,
    )
    if notes:
        attributes["history"] = "\n".join([attributes["history"], *notes])
    return attributes


def _with_spread(dataset: xr.Dataset, spread: Mapping[str, Array]) -> xr.Dataset:
    """The dataset with ``<scalar>_std`` variables, written by the table's rule."""
    known = set(all_names())
    found = {
        f"{name}_std": data_variable(lookup(f"{name}_std"), value, {})
        for name, value in spread.items()
        if f"{name}_std" in known
    }
    return dataset.assign(found)


def result_dataset(run: Run, outcome: Outcome, provenance: Mapping[str, str]) -> xr.Dataset:
    """Everything the result file of ``run`` holds."""
    model, recorder = run.model, run.recorder
    setup, grid = model.setup, model.grid
    seconds = model.clock.seconds - model.opened_at
    known = set(all_names())
    fields: dict[str, Array] = dict(recorder.fields.mean)
    fields |= {
        f"{name}_std": recorder.fields.deviation(name) for name in recorder.fields.mean if f"{name}_std" in known
    }
    fields |= budget_maps(grid, model.ledger, model.opening, model.state, seconds, setup.water)
    fields |= face_fluxes(grid, model.ledger, seconds, setup.water)
    fields |= forcing_maps(setup)
    dataset = assemble(
        fields=fields,
        scalars={},
        series={f"series_{name}": values for name, values in recorder.series.items()},
        series_time_days=recorder.times,
        axes=axes_of(setup),
        window_days=(model.opened_at / SECONDS_PER_DAY, model.clock.days),
        attributes=provenance,
    )
    dataset = summarise(dataset)
    sizes = {str(name): size for name, size in dataset.sizes.items()}
    dataset = dataset.assign(
        {
            name: data_variable(lookup(str(name)), dataset[name].values, sizes)
            for name in dataset.data_vars
            if "coordinates" not in dataset[name].encoding
        }
    )
    spread = {name: recorder.scalars.deviation(name) for name in recorder.scalars.mean}
    return _with_spread(dataset, spread)
