"""The equilibria of a system up and down one parameter: both ways, their jumps, and the hysteresis loops they make."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Generic

import numpy as np
from numpy.typing import NDArray

from oceanbox.study.following import Branch, Direction, Equilibrium, Point, State, follow
from oceanbox.study.jumps import Jump, JumpRule, Nature, refine, suspected_jumps

__all__ = ["HysteresisLoop", "TracedBranches", "Way", "trace"]

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Way(Generic[State]):
    """One way along the parameter.

    branch      an equilibrium at each parameter
    jumps       the changes on it that are large for one step, refined if that was asked for
    provoked    jumps that smaller steps did not confirm, replaced on the branch by what smaller steps found
    """

    branch: Branch[State]
    jumps: tuple[Jump[State], ...]
    provoked: tuple[Jump[State], ...] = ()


@dataclass(frozen=True)
class HysteresisLoop(Generic[State]):
    """An interval of the parameter in which the way up and the way down stay on different branches.

    lower          the jump on the way down, where the loop begins
    upper          the jump on the way up, where it ends
    area           the integral of |up - down| between the inner ends of the two brackets, by trapezoids
    largest_gap    the largest |up - down| there, at the parameter `widest_at`
    """

    lower: Jump[State]
    upper: Jump[State]
    area: float
    largest_gap: float
    widest_at: float

    @property
    def least_width(self) -> float:
        """The width between the inner ends of the brackets; the true one is at most both brackets more."""
        return self.upper.lower - self.lower.upper


@dataclass(frozen=True)
class TracedBranches(Generic[State]):
    """The way up, the way down, and the loops between them."""

    up: Way[State]
    down: Way[State]
    loops: tuple[HysteresisLoop[State], ...]

    @property
    def jumps(self) -> tuple[Jump[State], ...]:
        """The jumps of both ways in the order in which they were met."""
        return self.up.jumps + self.down.jumps


def trace(
    equilibrium: Equilibrium[State],
    parameters: Sequence[float],
    rule: JumpRule,
    refine_to: float | None,
) -> TracedBranches[State]:
    """Follow the equilibria up the ascending `parameters` and down again, and bracket the jumps of both ways.

    The two ways share their point at the top.  `refine_to` is the greatest width of a bracket, None for that of one step.
    Raises ValueError if fewer than three parameters are given or they do not ascend.
    """
    if len(parameters) < 3 or any(after <= before for before, after in pairwise(parameters)):
        raise ValueError(f"parameters: got {list(parameters)}; three or more must ascend; sort them")
    up = _way(equilibrium, parameters, "up", (), rule, refine_to)
    top = up.branch.points[-1]
    down = _way(equilibrium, parameters[-2::-1], "down", (top,), rule, refine_to)
    return TracedBranches(up, down, tuple(_loops(up, down)))


def _way(
    equilibrium: Equilibrium[State],
    parameters: Sequence[float],
    direction: Direction,
    known: Sequence[Point[State]],
    rule: JumpRule,
    refine_to: float | None,
) -> Way[State]:
    """Follow one way; refine its jumps in their order, and follow the rest anew after one that was provoked."""
    branch = follow(equilibrium, parameters, direction, known)
    jumps = suspected_jumps(branch, rule)
    if refine_to is None:
        return Way(branch, tuple(jumps))
    refined: list[Jump[State]] = []
    provoked: list[Jump[State]] = []
    done: set[float] = set()  # parameters before which a jump has been refined
    while fresh := [jump for jump in jumps if jump.before.parameter not in done]:
        first = fresh[0]
        done.add(first.before.parameter)
        jump = refine(equilibrium, first, refine_to)
        crossed = _crossed(branch, first, jump)
        if crossed is None:
            refined.append(jump)
            continue
        provoked.append(jump)
        rest = [point.parameter for point in branch.points[len(crossed) :]]
        branch = follow(equilibrium, rest, direction, crossed)
        jumps = suspected_jumps(branch, rule)
    return Way(branch, tuple(refined), tuple(provoked))


def _crossed(branch: Branch[State], suspected: Jump[State], refined: Jump[State]) -> list[Point[State]] | None:
    """The points up to and across a jump that was provoked, the last one found by small steps; None for any other jump."""
    places = [point.parameter for point in branch.points]
    known = list(branch.points[: places.index(suspected.before.parameter) + 1])
    across = places[len(known)]
    if refined.nature is not Nature.PROVOKED or refined.probes[-1].parameter != across:
        return None
    return [*known, refined.probes[-1]]


def _loops(up: Way[State], down: Way[State]) -> list[HysteresisLoop[State]]:
    """Pair each jump of the way up with the nearest jump below it on the way down that undoes it."""
    loops = []
    for upper in _real(up):
        below = [
            lower
            for lower in _real(down)
            if lower.upper <= upper.lower and lower.first_change * upper.first_change < 0.0
        ]
        if below:
            loops.append(_loop(up, down, max(below, key=lambda jump: jump.upper), upper))
    return loops


def _real(way: Way[State]) -> list[Jump[State]]:
    return [jump for jump in way.jumps if jump.nature is not Nature.STEEP]


def _loop(up: Way[State], down: Way[State], lower: Jump[State], upper: Jump[State]) -> HysteresisLoop[State]:
    """The gap between the branches from the lower jump to the upper one."""
    # Refining has followed each way beyond its last step, to the last point before its jump.
    up_at, up_measures = _ascending([*up.branch.points, upper.before])
    down_at, down_measures = _ascending([*down.branch.points, lower.before])
    inside = np.union1d(up_at, down_at)
    inside = inside[(inside >= lower.upper) & (inside <= upper.lower)]
    gaps = np.abs(np.interp(inside, up_at, up_measures) - np.interp(inside, down_at, down_measures))
    widest = int(gaps.argmax())
    return HysteresisLoop(lower, upper, float(np.trapezoid(gaps, inside)), float(gaps[widest]), float(inside[widest]))


def _ascending(points: Sequence[Point[State]]) -> tuple[Array, Array]:
    """Parameters in ascending order and the measures there, each once, failed searches left out."""
    measures = {point.parameter: point.measure for point in points if point.found}
    parameters = np.array(sorted(measures))
    return parameters, np.array([measures[parameter] for parameter in parameters])
