"""Following equilibria along a parameter, each found from the state of the one before.

The system is a callable, ``equilibrium(parameter, previous_state) -> (state, measure)``: it is brought to rest at a parameter,
starting from the state in which it came to rest before (None for the first).  Only stable equilibria can be found this way.
A measure that is not a number says that the search failed there; the way then goes on from the state that is returned.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Generic, Literal, TypeVar

__all__ = ["Branch", "Direction", "Equilibrium", "Point", "State", "find", "follow"]

State = TypeVar("State")
Direction = Literal["up", "down"]
Equilibrium = Callable[[float, State | None], tuple[State, float]]


@dataclass(frozen=True)
class Point(Generic[State]):
    """An equilibrium: where, what is measured there, and the state from which the next one starts."""

    parameter: float
    measure: float
    state: State

    @property
    def found(self) -> bool:
        """Whether there is a measure."""
        return math.isfinite(self.measure)


@dataclass(frozen=True)
class Branch(Generic[State]):
    """Equilibria in the order in which they were followed."""

    direction: Direction
    points: tuple[Point[State], ...]


def find(equilibrium: Equilibrium[State], parameter: float, start: Point[State] | None) -> Point[State]:
    """The equilibrium at a parameter, from the state of another one or, for None, from the system's own start."""
    state, measure = equilibrium(parameter, start.state if start is not None else None)
    return Point(parameter, measure, state)


def follow(
    equilibrium: Equilibrium[State],
    parameters: Sequence[float],
    direction: Direction,
    known: Sequence[Point[State]] = (),
) -> Branch[State]:
    """The branch of the `known` points, prolonged through the `parameters` one after another."""
    points = list(known)
    for parameter in parameters:
        points.append(find(equilibrium, parameter, points[-1] if points else None))
    return Branch(direction, tuple(points))
