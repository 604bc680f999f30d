"""Reaching the neighbourhood of equilibrium without waiting for the ocean.

Before the first window that is judged the model is stepped at paces which differ from place to place and leave its steady
states as they are (`stepping.hastened`), and `equilibrium.mixing` extrapolates what ``cycle`` of such steps do.  What either
adds to or takes from the contents is recorded and never enters a window that is judged: afterwards the run goes on truly through
the full criteria.  An extrapolation that a column cannot hold, or after which the change in a cycle grows, is taken back; if that
does not help, or hastened steps break down, the run goes back to its start, goes on plainly and says so.
"""

from collections.abc import Mapping
from dataclasses import asdict, dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from oceanbox.equilibrium import Tolerances, drift_between
from oceanbox.equilibrium.mixing import Mixing
from oceanbox.experiment.integrals import added_contents, window_means
from oceanbox.experiment.model import Model
from oceanbox.grid import HALO

__all__ = ["SpinUp", "SpinUpCounts"]

Array = NDArray[np.float64]
# Kelvins that weigh as much as the whole layer's thickness changing by one metre: a typical T - T_a.
TYPICAL_ANOMALY = 20.0
# An extrapolation may change the volume or the heat content by at most this share: larger ones can leave the branch.
LARGEST_CHANGE = 0.06
GROWTH_REFUSED = 2.0
REFUSALS_BORNE = 3
# How far currents may be from geostrophy while they are slowed (`stepping.hastened.set_pace`), and after a breakdown.
ROSSBY = 0.5
CAUTION = 0.3
# Spin-up ends when true drift and imbalances are this share of those that count as equilibrium, and the change in a cycle is
# this share of it: hastened cycles leave from a half to a tenth of what is missing, so a few of them are still missing.
SMALL_DRIFT = 0.5
SMALL_CHANGE = 0.2
# Spin-up also ends when the change in a cycle has not fallen for so many cycles.  What it has reached is kept if change and true
# drift have fallen to these shares of the first ones; a drift that counts as equilibrium is small enough in any case.
PATIENCE = 8
FALLING = 0.9
QUIET = 0.5
SLOW = 0.1


@dataclass
class SpinUpCounts:
    """Where the acceleration is; part of a checkpoint."""

    cycles: int = 0
    refusals: int = 0
    ended: bool = False
    rossby: float = ROSSBY
    changes: list[float] = field(
        default_factory=list
    )  # root mean square change of each cycle, m, since the last refusal
    first_change: float = float("inf")  # m, and the true drift of that cycle, per decade
    first_drift: float = float("inf")
    drift: float = float("inf")  # of the last cycle, per decade, as true steps would have it
    volume_added: float = 0.0  # m3, beyond what the ledger of true steps books
    heat_added: float = 0.0  # J
    salt_added: float = 0.0  # kg


def may_be_hastened(model: Model) -> bool:
    """Whether exchange with air and abyss decides how much water, heat and salt the basin holds in the end.

    Hastened steps keep none of these.  Where nothing restores one of them each amount has an equilibrium of its own, and only
    true steps, and extrapolations with weights that sum to one, stay with the amount they started from.
    """
    constants = model.constants
    water = constants.efficiency > 0.0 or constants.outcrop_margin > 0.0
    heat = bool((model.setup.forcing.restoring_velocity > 0.0).any())
    salt = constants.salt_carried or not (constants.salty or model.state.salt.any())
    return constants.linear_depth == 0.0 and water and heat and salt


class SpinUp:
    """The acceleration of one model, told when a cycle has ended."""

    def __init__(self, model: Model, memory: int, pace_limit: float, tolerances: Tolerances) -> None:
        """``tolerances`` say what counts as equilibrium; for the rest see the configuration."""
        self.model = model
        self.tolerances = tolerances
        self.tolerance = min(tolerances.volume_per_decade, tolerances.heat_per_decade)
        self.pace_limit = pace_limit if may_be_hastened(model) else 1.0
        self.counts = SpinUpCounts()
        self.mixing = Mixing(memory, self._weights())
        self.beginning = self._vector()
        self.argument = self.beginning
        self._hasten()

    def _hasten(self) -> None:
        if self.pace_limit > 1.0:
            self.model.hasten(self.pace_limit, self.counts.rossby)

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

    def _integrals(self) -> Array:
        """Volume per area, heat and salt summed over the cells, (3,), in m, K m and g kg-1 m."""
        grid, state = self.model.grid, self.model.state
        return np.array([float(grid.centres(field).sum()) for field in (state.thickness, state.heat, state.salt)])

    def end_cycle(self, decades: float) -> str:
        """A cycle of ``decades`` ended: judge it, and extrapolate or end.

        The books must have been opened when it began.  Returns what to tell the person, or ''.
        """
        counts, model = self.counts, self.model
        counts.cycles += 1
        before = np.array([float(model.grid.centres(content).sum()) for content in model.opening[:3]])
        after, added = self._integrals(), added_contents(model)
        self._record_added(added)
        if counts.cycles == 1:
            # The lead: waves from the start have left, the first cycle begins.
            self.argument = self._vector()
            return ""
        self.counts.drift = float(np.abs((after - before - added)[:2] / before[:2]).max()) / decades
        image = self._vector()
        change = self.mixing.residual_norm(self.argument, image)
        if counts.cycles == 2:
            counts.first_change, counts.first_drift = change, self.counts.drift
        told = ""
        if counts.changes and change > GROWTH_REFUSED * min(counts.changes):
            told = self._refuse("the change in a cycle grew")
        counts.changes.append(change)
        if counts.ended:
            return told
        depth = float(model.thickness.sum(axis=0).mean())
        near = self.counts.drift < SMALL_DRIFT * self.tolerance and change < SMALL_CHANGE * self.tolerance * depth
        if near and self._is_balanced():
            counts.ended = True
            return told
        recent = counts.changes[-PATIENCE:]
        if len(counts.changes) > PATIENCE and min(recent) > FALLING * min(counts.changes[:-PATIENCE]):
            return self._give_up("the change in a cycle does not fall any more")
        return self._extrapolate(image, after) or told

    def _is_balanced(self) -> bool:
        """Whether gains and losses of the cycle, as booked, agree to a share of what equilibrium asks for."""
        seconds = self.model.clock.seconds - self.model.opened_at
        means = window_means(self.model, seconds, 1.0, 1.0)
        found, asked = drift_between(means, means, 1.0), self.tolerances
        return (
            found.heat_imbalance < SMALL_DRIFT * asked.heat_imbalance
            and found.exchange_imbalance < SMALL_DRIFT * asked.exchange_imbalance
        )

    def _record_added(self, contents: Array) -> None:
        """Enter (3,) sums over the cells into the counts."""
        area, water = self.model.grid.cell_area, self.model.setup.water
        self.counts.volume_added += float(contents[0]) * area
        self.counts.heat_added += float(contents[1]) * area * water.heat
        self.counts.salt_added += float(contents[2]) * area * water.salt

    def _extrapolate(self, image: Array, contents: Array) -> str:
        """Go on from the extrapolated state, or part of the way to it; ``contents`` are those of ``image``."""
        model = self.model
        self._put(self.mixing.next(self.argument, image))
        change = float(np.abs(self._integrals()[:2] / contents[:2] - 1.0).max())
        if change > LARGEST_CHANGE:
            # Part of the way along the same direction: affine combinations of states stay within what all of them keep.
            self._put(image + LARGEST_CHANGE / change * (self._vector() - image))
        floor = 0.5 * max(model.constants.floor_depth, 1.0)
        told = ""
        if float(model.thickness.min()) < floor or float(model.grid.centres(model.state.heat).min()) < 0.0:
            self._put(image)
            told = self._refuse("a column could not hold it")
        self._record_added(self._integrals() - contents)
        self.argument = self._vector()
        return told

    def _refuse(self, reason: str) -> str:
        """Forget what extrapolations are made of; the second time with more caution; the third time give up."""
        self.counts.refusals += 1
        self.counts.changes = []
        self.mixing.forget()
        if self.counts.refusals >= REFUSALS_BORNE:
            return self._give_up(reason)
        if self.counts.refusals == REFUSALS_BORNE - 1:
            self.counts.rossby *= CAUTION
            self._hasten()
        return f"an extrapolation was taken back ({reason})"

    def _give_up(self, reason: str) -> str:
        """End; keep the present state if the ocean has come a good part of the way to rest, else go back to the start."""
        counts = self.counts
        counts.ended = True
        quiet = bool(counts.changes) and min(counts.changes) < QUIET * counts.first_change
        slow = self.counts.drift < max(SLOW * counts.first_drift, self.tolerance)
        if self.pace_limit <= 1.0 or (quiet and slow):
            return f"acceleration helps no further ({reason}): going on plainly"
        self._go_back(self.beginning)
        return f"acceleration does not help ({reason}): going on plainly from the start"

    def run_out(self) -> str:
        """The time for spin-up is over.  Returns what to tell the person, or ''."""
        return "" if self.counts.ended else self._give_up("its time is over")

    def _go_back(self, vector: Array) -> None:
        before = self._integrals()
        self._put(vector)
        self._record_added(self._integrals() - before)

    def survive(self) -> str:
        """Hastened steps broke down: try with more caution from where the cycle began, at last go back to the start.

        The model must have been rewound to its last sound state.  Returns what to tell the person, or '' if the model broke down
        with true steps, which is no matter of spin-up.
        """
        if self.counts.ended or self.pace_limit <= 1.0:
            return ""
        self.mixing.forget()
        self.counts.changes = []
        if self.counts.rossby < ROSSBY:
            self.counts.ended = True
            self._go_back(self.beginning)
            return "acceleration broke down again: going on plainly from the start"
        self.counts.rossby *= CAUTION
        self._go_back(self.argument)
        self._hasten()
        return "acceleration broke down: going on with more caution"

    def arrays(self) -> dict[str, Array]:
        """Everything a restart needs, by name."""
        saved = {f"spinup__image__{n}": image for n, image in enumerate(self.mixing.images)}
        saved |= {f"spinup__residual__{n}": residual for n, residual in enumerate(self.mixing.residuals)}
        return saved | {"spinup__argument": self.argument, "spinup__beginning": self.beginning}

    def restore(self, arrays: Mapping[str, Array], counts: Mapping[str, Any]) -> None:
        """Take over the acceleration of a restart; the model has been restored."""
        self.counts = SpinUpCounts(**counts)
        if self.counts.ended:
            self.model.step_truly()
            return
        self.mixing.forget()
        for n in range(sum(name.startswith("spinup__image__") for name in arrays)):
            self.mixing.images.append(arrays[f"spinup__image__{n}"])
            self.mixing.residuals.append(arrays[f"spinup__residual__{n}"])
        self.argument, self.beginning = arrays["spinup__argument"], arrays["spinup__beginning"]
        self._hasten()

    def record(self) -> dict[str, Any]:
        """The counts, for a checkpoint."""
        return asdict(self.counts)
