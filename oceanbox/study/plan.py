"""From a study to its cases: each a complete configuration with a fingerprint of everything its result depends on."""

from __future__ import annotations

import hashlib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from itertools import product
from pathlib import Path
from typing import Any, Literal, NamedTuple

import numpy as np

from oceanbox.config import Config, identity
from oceanbox.errors import ConfigError, Fault
from oceanbox.study.schema import Axis, ExplicitCase, Sample, Study
from oceanbox.study.threshold_specs import ParameterRange

__all__ = ["AxisPoint", "Case", "axis_points", "cases_of", "folder_of", "sample_points"]

Command = Literal["equilibrate", "evolve"]
Coordinate = float | str
FOLDER_LETTERS = 16


@dataclass(frozen=True)
class Case:
    """One run of a study.

    number         place in the study, from 0
    name           for people: what is special about it
    coordinates    its place on each axis, or the value of each sampled key
    changes        dotted keys in which its configuration differs from that of the study
    config         the complete configuration
    command        what is done with it
    start          the case from whose end it starts, None for the initial state of its configuration
    warm_start     'nearest': from the end of the nearest case that is finished by then, if there is one
    """

    number: int
    name: str
    coordinates: Mapping[str, Coordinate]
    changes: Mapping[str, Any]
    config: Config
    command: Command = "equilibrate"
    start: Case | None = None
    warm_start: Literal["none", "nearest"] = "none"

    @cached_property
    def identity(self) -> str:
        """SHA-256 (hex) of what the result depends on: command, configuration, and where it starts from.

        Number, name and description of a case have no part in it, so that a study may be reordered and extended.
        """
        start = self.start.identity if self.start is not None else self.warm_start
        return hashlib.sha256(f"{self.command} {identity(self.config)} {start}".encode()).hexdigest()


def folder_of(case: Case, into: Path) -> Path:
    """The folder of a case below the folder of its study."""
    return into / "cases" / case.identity[:FOLDER_LETTERS]


class AxisPoint(NamedTuple):
    """A value of an axis: its place, and what each key becomes."""

    position: Coordinate
    changes: dict[str, Any]


def axis_points(axis: Axis) -> list[AxisPoint]:
    """The values of an axis in the order in which they are written."""
    values = _values(axis)
    points = []
    for index, value in enumerate(values):
        each = value if len(axis.all_keys) > 1 and isinstance(value, list | tuple) else [value] * len(axis.all_keys)
        place = axis.positions[index] if axis.positions is not None else each[0]
        position = place if isinstance(place, str) else float(place)
        points.append(AxisPoint(position, dict(zip(axis.all_keys, each, strict=True))))
    return points


def _values(axis: Axis) -> list[Any]:
    if axis.linear is not None:
        span = axis.linear
        return [float(value) for value in np.linspace(span.first, span.last, span.count)]
    if axis.logarithmic is not None:
        span = axis.logarithmic
        return [float(value) for value in np.geomspace(span.first, span.last, span.count)]
    return list(axis.values or ())


def sample_points(sample: Sample) -> list[dict[str, float]]:
    """The value of each key at each point of the sample.

    Latin hypercube: McKay, Beckman and Conover (1979), Technometrics 21, 239.  Scrambled Sobol' sequence: Sobol' (1967),
    USSR Comput. Math. Math. Phys. 7, 86; Owen (1998), J. Complexity 14, 466.
    """
    from scipy.stats import qmc

    size = len(sample.ranges)
    if sample.method == "sobol":
        unit = qmc.Sobol(size, scramble=True, rng=sample.seed).random(sample.count)
    else:
        unit = qmc.LatinHypercube(size, rng=sample.seed).random(sample.count)
    return [
        {item.key: in_range(item, float(share)) for item, share in zip(sample.ranges, row, strict=True)} for row in unit
    ]


def in_range(item: ParameterRange, share: float) -> float:
    """The value at a share (0 to 1) of a range, of its logarithm where the scale is logarithmic."""
    if item.scale == "logarithmic":
        return float(item.lowest * (item.highest / item.lowest) ** share)
    return item.lowest + share * (item.highest - item.lowest)


class _Draft(NamedTuple):
    """A case before its configuration is built."""

    name: str
    coordinates: dict[str, Coordinate]
    changes: dict[str, Any]


def cases_of(study: Study, base: Config) -> list[Case]:
    """The cases of a study with axes, a sample or explicit cases, in their order; the last axis runs fastest.

    base    the configuration that `study.base` names, with `study.changes`

    Raises ConfigError with the faults of all cases; each fault names the first case that has it, its key is a key of the
    configuration.
    """
    found: list[Case] = []
    faults: dict[tuple[str, str, str], Fault] = {}
    counts: dict[tuple[str, str, str], int] = {}
    for number, draft in enumerate(_drafts(study)):
        try:
            config = case_config(study, base, draft.name, draft.changes)
        except ConfigError as error:
            for fault in error.faults:
                same = (fault.key, fault.allowed, fault.remedy)
                counts[same] = counts.get(same, 0) + 1
                faults.setdefault(same, Fault("", fault.key, f"{fault.value} in case {draft.name}", *same[1:]))
            continue
        found.append(
            Case(
                number,
                draft.name,
                draft.coordinates,
                draft.changes,
                config,
                command=study.command,
                warm_start=study.warm_start,
            )
        )
    if faults:
        raise ConfigError(
            Fault("", fault.key, _and_others(fault.value, counts[same]), fault.allowed, fault.remedy)
            for same, fault in faults.items()
        )
    return found


def _and_others(value: str, count: int) -> str:
    return value if count == 1 else f"{value} and {count - 1} more"


def case_config(study: Study, base: Config, name: str, changes: Mapping[str, Any]) -> Config:
    """The complete configuration of a case; it carries the name of the study.  Raises ConfigError."""
    described = {"name": study.name, "description": f"Case {name} of the study {study.name}."}
    return base.with_changes({**described, **changes})


def _drafts(study: Study) -> Iterator[_Draft]:
    if study.axes is not None:
        yield from _product(study.axes)
    elif study.sample is not None:
        digits = len(str(study.sample.count - 1))
        for number, point in enumerate(sample_points(study.sample)):
            yield _Draft(f"{number:0{digits}d}", dict(point), dict(point))
    else:
        for item in study.cases or ():
            yield _explicit(item)


def _product(axes: tuple[Axis, ...]) -> Iterator[_Draft]:
    for points in product(*(axis_points(axis) for axis in axes)):
        coordinates = {axis.name: point.position for axis, point in zip(axes, points, strict=True)}
        changes = {key: value for point in points for key, value in point.changes.items()}
        name = " ".join(f"{axis}={_shown(place)}" for axis, place in coordinates.items())
        yield _Draft(name, coordinates, changes)


def _shown(place: Coordinate) -> str:
    return place if isinstance(place, str) else f"{place:g}"


def _explicit(item: ExplicitCase) -> _Draft:
    return _Draft(item.name, {}, dict(item.changes))
