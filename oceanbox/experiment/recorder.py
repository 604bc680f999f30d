"""What is recorded while a model runs: window moments of the fields, and the time series."""

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.probe import Probe
from oceanbox.experiment.integrals import Exchanged, contents, exchange_series, exchanged
from oceanbox.experiment.model import Model
from oceanbox.experiment.sampling import Moments, sample_fields

__all__ = ["Recorder"]

Array = NDArray[np.float64]


class Recorder:
    """Samples a model; knows nothing of why it runs.

    ``fields`` and ``scalars`` are moments over the present window, ``series`` the recorded points so far, each the mean over
    its interval, ``times`` [days] the ends of those intervals.
    """

    def __init__(self, model: Model) -> None:
        self.model = model
        grid = model.grid
        equator = -grid.coriolis_origin / grid.beta if grid.beta != 0.0 else float("nan")
        self.geometry = Geometry(grid.x_face, grid.y_face, equator)
        self.probe = Probe(self.geometry, model.setup.config.output.cold_tongue_contrast_K)
        self.fields = Moments()
        self.scalars = Moments()
        self.interval = Moments()
        self.series: dict[str, list[float]] = {}
        self.times: list[float] = []
        self._mark = Exchanged(*(np.zeros(grid.shape) for _ in Exchanged._fields))
        self._marked_at = model.clock.seconds

    def sample(self) -> None:
        """Take the present state into the moments of the window and of the series interval."""
        fields = sample_fields(self.model)
        scalars = self.probe(fields["thickness"], fields["temperature"])._asdict() | contents(self.model)
        self.fields.add(fields)
        self.scalars.add(scalars)
        self.interval.add(scalars)

    def close_interval(self) -> None:
        """Append a point to the series: interval means of what was sampled, and what the ledger booked meanwhile."""
        model = self.model
        seconds = model.clock.seconds - self._marked_at
        booked = Exchanged(*(now - then for now, then in zip(exchanged(model.ledger), self._mark, strict=True)))
        point = exchange_series(model, self.geometry, booked, seconds)
        point |= {name: float(value) for name, value in self.interval.mean.items()}
        for name, value in point.items():
            self.series.setdefault(name, []).append(value)
        self.times.append(model.clock.days)
        for mark, now in zip(self._mark, exchanged(model.ledger), strict=True):
            mark[...] = now
        self._marked_at = model.clock.seconds
        self.interval = Moments()

    def open_window(self) -> None:
        """Start a new window: empty moments, empty books, the running series interval kept."""
        for mark, now in zip(self._mark, exchanged(self.model.ledger), strict=True):
            mark -= now
        self.model.open_books()
        self.fields = Moments()
        self.scalars = Moments()

    def arrays(self) -> dict[str, Array]:
        """Everything a restart needs, by name."""
        saved = self.fields.arrays("fields") | self.scalars.arrays("scalars") | self.interval.arrays("interval")
        saved |= {f"mark__{name}": value for name, value in self._mark._asdict().items()}
        saved |= {f"series__{name}": np.asarray(values) for name, values in self.series.items()}
        saved["series_times"] = np.asarray(self.times)
        saved["marked_at"] = np.asarray(self._marked_at)
        return saved

    def restore(self, arrays: Mapping[str, Array]) -> None:
        """Take over the records of a restart."""
        self.fields = Moments.restored(arrays, "fields")
        self.scalars = Moments.restored(arrays, "scalars")
        self.interval = Moments.restored(arrays, "interval")
        for name, mark in self._mark._asdict().items():
            mark[...] = arrays[f"mark__{name}"]
        self.series = {
            name.removeprefix("series__"): [float(value) for value in values]
            for name, values in arrays.items()
            if name.startswith("series__")
        }
        self.times = [float(time) for time in arrays["series_times"]]
        self._marked_at = float(arrays["marked_at"])
