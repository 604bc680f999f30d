"""Made-up results for the tests of files; the numbers mean nothing, the shapes and names are those of a real result."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass

import numpy as np
import xarray as xr

from oceanbox import names
from oceanbox.output.axes import Axes
from oceanbox.output.dataset import CELL_AREA, assemble
from oceanbox.output.provenance import global_attributes

SERIES_DAYS = np.array([30.0, 60.0, 90.0])
WINDOW_DAYS = (60.0, 90.0)
CONFIG_TEXT = "name: sample\ndescription: 'non-ASCII: °'\n"


def sample_axes(nx: int = 5, ny: int = 4, layers: int = 2) -> Axes:
    x_face = np.linspace(0.0, 6.0e6, nx + 1)
    y_face = np.linspace(-4.0e6, 5.0e6, ny + 1)
    area = np.outer(np.diff(y_face), np.diff(x_face))
    x, y = 0.5 * (x_face[1:] + x_face[:-1]), 0.5 * (y_face[1:] + y_face[:-1])
    return Axes(x, y, x_face, y_face, area, periodic_x=False, layers=layers)


def sample_attributes() -> dict[str, str]:
    return global_attributes("a sample", "made for a test", CONFIG_TEXT, "0" * 64, "reached the end", "none")


@dataclass(frozen=True)
class SampleResult:
    """The arguments of `assemble`."""

    fields: Mapping[str, np.ndarray]
    scalars: Mapping[str, float]
    series: Mapping[str, np.ndarray]
    axes: Axes

    def only(self, wanted: Collection[str]) -> SampleResult:
        """The same result with the wanted variables alone."""
        fields, scalars, series = (
            {name: value for name, value in given.items() if name in wanted}
            for given in (self.fields, self.scalars, self.series)
        )
        return SampleResult(fields, scalars, series, self.axes)

    def assemble(self) -> xr.Dataset:
        return assemble(
            self.fields, self.scalars, self.series, SERIES_DAYS, self.axes, WINDOW_DAYS, sample_attributes()
        )


def full_result() -> SampleResult:
    """Every variable of the table."""
    axes = sample_axes()
    sizes = axes.sizes | {"time": len(SERIES_DAYS)}
    rng = np.random.default_rng(7)
    drawn = {name: rng.normal(size=[sizes[dim] for dim in names.lookup(name).dims]) for name in names.all_names()}
    del drawn[CELL_AREA]
    of = {group: {n: v for n, v in drawn.items() if names.lookup(n).group == group} for group in ("scalar", "series")}
    fields = {n: v for n, v in drawn.items() if n not in of["scalar"] and n not in of["series"]}
    return SampleResult(fields, {n: float(v) for n, v in of["scalar"].items()}, of["series"], axes)


SNAPSHOT_NAMES = ("thickness", "velocity_x", "velocity_y", "temperature", "surface_heat_flux", "heat_content")


def snapshot_record(axes: Axes, value: float) -> dict[str, np.ndarray]:
    return {n: np.full([axes.sizes[d] for d in names.lookup(n).dims], value) for n in SNAPSHOT_NAMES}
