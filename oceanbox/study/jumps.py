"""Jumps on a branch of equilibria: suspecting them, bracketing them, and telling them from what only looks like one."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import Enum
from itertools import pairwise
from statistics import median
from typing import Generic

from oceanbox.study.following import Branch, Direction, Equilibrium, Point, State, find

__all__ = ["Jump", "JumpRule", "Nature", "refine", "suspected_jumps"]

# Differences of numbers that ought to be equal: a few units in the last place of 64-bit arithmetic.
ROUND_OFF = 1e-14


class Nature(Enum):
    """What refining has shown of a change that is large for one step; each value is a phrase."""

    JUMP = "a jump"
    STEEP = "steep but continuous"
    PROVOKED = "a jump provoked by the size of the step"
    UNREFINED = "large for one step, not refined"


@dataclass(frozen=True)
class JumpRule:
    """When the change over one step is suspected of a jump.

    factor    it exceeds this multiple of the median change over one step of its branch
    least     and this, in the measure's unit: more than the noise of the measure
    """

    factor: float = 4.0
    least: float = 0.0


@dataclass(frozen=True)
class Jump(Generic[State]):
    """A change that is large for one step, bracketed.

    before, after    the last equilibrium before it and the first one after it, in the direction of the branch
    first_change     the change of the measure over the interval in which it was suspected
    probes           the equilibria found while refining, in the order of the search
    nature           what refining has shown
    """

    direction: Direction
    before: Point[State]
    after: Point[State]
    first_change: float
    probes: tuple[Point[State], ...] = ()
    nature: Nature = Nature.UNREFINED

    @property
    def lower(self) -> float:
        """The lower end of the bracket."""
        return min(self.before.parameter, self.after.parameter)

    @property
    def upper(self) -> float:
        """The upper end of the bracket."""
        return max(self.before.parameter, self.after.parameter)

    @property
    def width(self) -> float:
        """The width of the bracket."""
        return self.upper - self.lower

    @property
    def change(self) -> float:
        """The change of the measure over the bracket, in the direction of the branch."""
        return self.after.measure - self.before.measure


def suspected_jumps(branch: Branch[State], rule: JumpRule) -> list[Jump[State]]:
    """The changes between neighbouring points that are large for one step.

    Neighbouring suspects that go the same way are one jump, which took more than one step.
    """
    points = [point for point in branch.points if point.found]
    changes = [after.measure - before.measure for before, after in pairwise(points)]
    if not changes:
        return []
    scale = max(abs(point.measure) for point in points)
    bound = max(rule.factor * median(map(abs, changes)), rule.least, ROUND_OFF * scale)
    jumps: list[Jump[State]] = []
    for (before, after), change in zip(pairwise(points), changes, strict=True):
        if abs(change) <= bound:
            continue
        if jumps and jumps[-1].after is before and jumps[-1].first_change * change > 0.0:
            last = jumps.pop()
            jumps.append(Jump(branch.direction, last.before, after, last.first_change + change))
        else:
            jumps.append(Jump(branch.direction, before, after, change))
    return jumps


def refine(equilibrium: Equilibrium[State], jump: Jump[State], width: float) -> Jump[State]:
    """The jump, bracketed to at most `width` by bisection.

    Every probe starts from the last equilibrium before the jump, so that the branch that is left is followed to its end.
    The far end of the bracket may have been reached by a step larger than the bracket, which can throw a system off a
    branch that goes on; it is therefore reached once more from the near end, and if that run stays on the branch the jump
    was provoked: `before` and `after` then stand for what was found, and the last probe for the branch at `after`.

    Where a probe fails the bracket stays as wide as it is and the nature stays open.
    """
    before, after = jump.before, jump.after
    after_reached_from: Point[State] | None = None
    probes: list[Point[State]] = []
    halvings = 0
    while abs(after.parameter - before.parameter) > width:
        middle = 0.5 * (before.parameter + after.parameter)
        if middle in (before.parameter, after.parameter):
            break  # neighbouring floating-point numbers
        probe = find(equilibrium, middle, before)
        probes.append(probe)
        if not probe.found:
            return replace(jump, before=before, after=after, probes=tuple(probes))
        halvings += 1
        # Against what lay behind the jump in the beginning, since a probe just past it may not have come to rest.
        if abs(probe.measure - before.measure) <= abs(probe.measure - jump.after.measure):
            before = probe
        else:
            after, after_reached_from = probe, before
    refined = replace(jump, before=before, after=after, probes=tuple(probes))
    if halvings > 0 and after_reached_from is not before:
        return _reach_again(equilibrium, refined, halvings)
    return _judged(refined, halvings)


def _reach_again(equilibrium: Equilibrium[State], jump: Jump[State], halvings: int) -> Jump[State]:
    """Reach the far end of the bracket by a step no larger than the bracket."""
    again = find(equilibrium, jump.after.parameter, jump.before)
    probed = replace(jump, probes=(*jump.probes, again))
    if not again.found:
        return probed
    if abs(again.measure - jump.before.measure) < abs(again.measure - jump.after.measure):
        return replace(probed, nature=Nature.PROVOKED)
    return _judged(replace(probed, after=again), halvings)


def _judged(jump: Jump[State], halvings: int) -> Jump[State]:
    """A jump or not: whether the change left over the bracket is nearer to that of a step or of a straight line."""
    if halvings == 0:
        return jump
    share = abs(jump.change / jump.first_change)
    between = 0.5 * (1.0 + 0.5**halvings)
    return replace(jump, nature=Nature.JUMP if share > between else Nature.STEEP)
