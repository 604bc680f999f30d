"""Reaching the neighbourhood of equilibrium without waiting for the ocean.

The map is ``cycle`` model time of the unaltered model; `equilibrium.mixing` extrapolates it towards its fixed point.  What an
extrapolation adds to or takes from the books is recorded and never enters a window that is judged: afterwards the run goes on
plainly through the full criteria.  An extrapolation that a column cannot hold, or that makes the residual grow, is taken back;
after the second the run goes on plainly and says so.
"""

from collections.abc import Mapping
from dataclasses import asdict, dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from oceanbox.equilibrium.mixing import Mixing
from oceanbox.experiment.model import Model
from oceanbox.grid import HALO

__all__ = ["SpinUp", "SpinUpCounts"]

Array = NDArray[np.float64]
# Kelvins that weigh as much as the whole layer's thickness changing by one metre: a typical T - T_a.
TYPICAL_ANOMALY = 20.0
# An extrapolation may change the volume or the heat content by at most this share: larger ones can leave the branch.
LARGEST_CHANGE = 0.06
GROWTH_REFUSED = 2.0
REFUSALS_BORNE = 2
# When spin-up ends, in units of the drift per decade that still counts as equilibrium.
SMALL_DRIFT = 0.5
FAIR_DRIFT = 1.2
IDLE_JUMP = 0.1
RECENT = 3


@dataclass
class SpinUpCounts:
    """Where the acceleration is; part of a checkpoint."""

    cycles: int = 0
    refusals: int = 0
    ended: bool = False
    smallest_residual: float = float("inf")
    recent_jumps: list[float] = field(default_factory=list)  # relative sizes of the last extrapolations
    volume_added: float = 0.0  # m3
    heat_added: float = 0.0  # J


class SpinUp:
    """The acceleration of one model, told when a cycle has ended."""

    def __init__(self, model: Model, memory: int) -> None:
        self.model = model
        self.counts = SpinUpCounts()
        self.mixing = Mixing(memory, self._weights())
        self.argument = self._vector()
        self.drift = float("inf")

    def _weights(self) -> Array:
        """Interior thickness in metres and heat in metres of typical anomaly; velocities follow them within weeks."""
        state = self.model.state
        scales = {"thickness": 1.0, "heat": 1.0 / TYPICAL_ANOMALY}
        parts = []
        for name, content in state._asdict().items():
            weight = np.zeros_like(content)
            weight[..., HALO:-HALO, HALO:-HALO] = scales.get(name, 0.0)
            parts.append(weight.ravel())
        return np.concatenate(parts)

    def _vector(self) -> Array:
        return np.concatenate([content.ravel() for content in self.model.state])

    def _put(self, vector: Array) -> None:
        start = 0
        for content in self.model.state:
            content[...] = vector[start : start + content.size].reshape(content.shape)
            start += content.size
        # The multi-step scheme has no history of the new state.
        self.model.change_step(self.model.clock.dt)

    def _integrals(self) -> tuple[float, float]:
        grid, state = self.model.grid, self.model.state
        return float(grid.centres(state.thickness).sum()), float(grid.centres(state.heat).sum())

    def start(self) -> None:
        """The cycle begins at the present state."""
        self.argument = self._vector()
        self._before = self._integrals()

    def end_cycle(self, decades: float) -> str:
        """A cycle of ``decades`` ended: measure its drift and extrapolate.  Returns what to tell the person, or ''."""
        counts = self.counts
        counts.cycles += 1
        if counts.cycles == 1:
            # The lead: waves from the start have left, the first cycle begins.
            self.start()
            return ""
        volume, heat = self._integrals()
        self.drift = (
            max(abs(volume - self._before[0]) / self._before[0], abs(heat - self._before[1]) / abs(self._before[1]))
            / decades
        )
        image = self._vector()
        residual = self.mixing.residual_norm(self.argument, image)
        told = ""
        if residual > GROWTH_REFUSED * counts.smallest_residual:
            told = self._refuse("the change in a cycle grew")
        counts.smallest_residual = min(counts.smallest_residual, residual)
        if not counts.ended:
            told = self._extrapolate(image, volume, heat) or told
        self.start()
        return told

    def _extrapolate(self, image: Array, volume: float, heat: float) -> str:
        model = self.model
        self._put(self.mixing.next(self.argument, image))
        new_volume, new_heat = self._integrals()
        change = max(abs(new_volume - volume) / volume, abs(new_heat - heat) / abs(heat))
        if change > LARGEST_CHANGE:
            # Part of the way along the same direction: affine combinations of states stay within what all of them keep.
            share = LARGEST_CHANGE / change
            self._put(image + share * (self._vector() - image))
            new_volume, new_heat = self._integrals()
        floor = 0.5 * max(model.constants.floor_depth, 1.0)
        if float(model.thickness.min()) < floor or float(model.grid.centres(model.state.heat).min()) < 0.0:
            self._put(image)
            return self._refuse("a column could not hold it")
        water, area = model.setup.water, model.grid.cell_area
        self.counts.recent_jumps = [*self.counts.recent_jumps[1 - RECENT :], abs(new_volume - volume) / volume]
        self.counts.volume_added += (new_volume - volume) * area
        self.counts.heat_added += (new_heat - heat) * area * water.heat
        return ""

    def is_near(self, tolerance: float) -> bool:
        """Whether the windows that are judged may begin; ``tolerance`` is the relative drift per decade they allow.

        Either the drift is well inside it, or about there and the extrapolations no longer find anything to add.
        """
        jumps = self.counts.recent_jumps
        idle = len(jumps) == RECENT and sum(jumps) / RECENT < IDLE_JUMP * tolerance
        return self.drift < SMALL_DRIFT * tolerance or (idle and self.drift < FAIR_DRIFT * tolerance)

    def _refuse(self, reason: str) -> str:
        self.counts.refusals += 1
        self.counts.smallest_residual = float("inf")
        self.mixing.forget()
        if self.counts.refusals >= REFUSALS_BORNE:
            self.counts.ended = True
            return f"extrapolation does not help ({reason}): going on plainly"
        return f"an extrapolation was taken back ({reason})"

    def arrays(self) -> dict[str, Array]:
        """Everything a restart needs, by name."""
        saved = {f"spinup__image__{n}": image for n, image in enumerate(self.mixing.images)}
        saved |= {f"spinup__residual__{n}": residual for n, residual in enumerate(self.mixing.residuals)}
        saved["spinup__argument"] = self.argument
        saved["spinup__before"] = np.asarray(self._before)
        return saved

    def restore(self, arrays: Mapping[str, Array], counts: Mapping[str, Any]) -> None:
        """Take over the acceleration of a restart."""
        self.counts = SpinUpCounts(**counts)
        if self.counts.ended:
            return
        self.mixing.forget()
        for n in range(sum(name.startswith("spinup__image__") for name in arrays)):
            self.mixing.images.append(arrays[f"spinup__image__{n}"])
            self.mixing.residuals.append(arrays[f"spinup__residual__{n}"])
        self.argument = arrays["spinup__argument"]
        self._before = (float(arrays["spinup__before"][0]), float(arrays["spinup__before"][1]))

    def record(self) -> dict[str, Any]:
        """The counts, for a checkpoint."""
        return asdict(self.counts)

    _before: tuple[float, float] = (1.0, 1.0)
