"""Means and standard deviations of the state over a window, by Welford's recurrence (1962, Technometrics 4, 419)."""

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from oceanbox.experiment.model import Model

__all__ = ["SAMPLED_FIELDS", "Moments"]

Array = NDArray[np.float64]
SAMPLED_FIELDS = (
    "thickness",
    "temperature",
    "salinity",
    "reduced_gravity",
    "velocity_x",
    "velocity_y",
    "thermocline_depth",
)


def sample_fields(model: Model) -> dict[str, Array]:
    """The sampled fields of the present state, interior points."""
    thickness = model.thickness
    return {
        "thickness": thickness,
        "temperature": model.temperature,
        "salinity": model.salinity,
        "reduced_gravity": model.buoyancy,
        "velocity_x": model.velocity_x,
        "velocity_y": model.velocity_y,
        "thermocline_depth": thickness.sum(axis=0),
    }


class Moments:
    """Running mean and sum of squared departures of some named quantities."""

    def __init__(self) -> None:
        self.count = 0
        self.mean: dict[str, Array] = {}
        self.squares: dict[str, Array] = {}

    def add(self, values: Mapping[str, Array | float]) -> None:
        """Take in one sample."""
        self.count += 1
        for name, value in values.items():
            now = np.asarray(value, dtype=np.float64)
            if self.count == 1:
                self.mean[name] = now.copy()
                self.squares[name] = np.zeros_like(now)
                continue
            departure = now - self.mean[name]
            # asarray: numpy turns the sum of 0-d arrays into a bare number.
            self.mean[name] = np.asarray(self.mean[name] + departure / self.count)
            self.squares[name] = np.asarray(self.squares[name] + departure * (now - self.mean[name]))

    def deviation(self, name: str) -> Array:
        """Standard deviation over the samples (divisor: their number)."""
        return np.sqrt(self.squares[name] / self.count)

    def arrays(self, label: str) -> dict[str, Array]:
        """All moments by name, for a restart."""
        saved = {f"{label}__mean__{name}": value for name, value in self.mean.items()}
        saved |= {f"{label}__squares__{name}": value for name, value in self.squares.items()}
        saved[f"{label}__count"] = np.asarray(float(self.count))
        return saved

    @classmethod
    def restored(cls, arrays: Mapping[str, Array], label: str) -> "Moments":
        """The moments of a restart."""
        moments = cls()
        moments.count = int(arrays[f"{label}__count"])
        for kind, into in (("mean", moments.mean), ("squares", moments.squares)):
            start = f"{label}__{kind}__"
            for name, value in arrays.items():
                if name.startswith(start):
                    into[name.removeprefix(start)] = np.asarray(value, dtype=np.float64).copy()
        return moments
