"""The study file: a base configuration, what is varied, and what is wanted of the results."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from typing import Annotated, Any, Literal

from pydantic import Field

from oceanbox.config.section import CrossFault, Real, Section, Whole, choice, optional_subsection, quantity
from oceanbox.config.showing import show
from oceanbox.study.threshold_specs import (
    BranchSpec,
    Changes,
    ElasticitiesSpec,
    ParameterRange,
    SensitivitySpec,
    SobolIndicesSpec,
    SwitchSpec,
)

__all__ = ["PLANS", "Axis", "ExplicitCase", "Logarithmic", "Sample", "Span", "Study"]

Name = Annotated[str, Field(pattern=r"^[a-z][a-z0-9_]*$")]
PLANS = ("axes", "sample", "cases", "branch", "switch", "sensitivity")
"""The keys of a study that say what is varied; a study has exactly one of them."""

# Names that a collected dataset uses for other things than an axis.
_TAKEN = ("case", "case_name", "status", "reason", "outcome", "years", "wall_seconds", "result_path", "time", "x", "y")
_TAKEN_TOO = ("layer", "region", "bounds", "x_face", "y_face", "lat", "lon", "started_from")


def _required(sentence: str) -> Any:
    return Field(description=sentence)


class Span(Section):
    """Values from first to last in equal steps."""

    first: Real = _required("The first value, in the key's unit.")
    last: Real = _required("The last value, in the key's unit.")
    count: Whole = Field(description="The number of values, both ends included.", ge=2, le=10000)

    def cross_faults(self) -> Iterator[CrossFault]:
        """There is something to span."""
        if self.first == self.last:
            yield CrossFault("last", f"{self.last:g}", "must differ from first", "give two different ends")


class Logarithmic(Span):
    """Values from first to last in equal ratios."""

    def cross_faults(self) -> Iterator[CrossFault]:
        """Ratios need numbers of one sign, here positive."""
        yield from super().cross_faults()
        for key, value in (("first", self.first), ("last", self.last)):
            if value <= 0.0:
                yield CrossFault(key, f"{value:g}", "must be > 0 for equal ratios", "raise it, or use linear")


class Axis(Section):
    """One direction in which the study varies its base: a key, or several that move together."""

    name: Name = _required("The name of the axis and of its dimension in the collected dataset.")
    key: str | None = choice(None, "The dotted key that is varied, where it is one.")
    keys: tuple[str, ...] = choice((), "The dotted keys that move together, where they are several.")
    long_name: str = choice("", "What the axis is, in words, for tables and figures; its name when empty.")
    unit: str | None = choice(None, "The unit of the positions (UDUNITS), or null to take that of the first key.")
    values: tuple[Any, ...] | None = choice(
        None, "The values; with several keys, each is one for all of them, or a list with one for each."
    )
    linear: Span | None = optional_subsection("The values in equal steps.")
    logarithmic: Logarithmic | None = optional_subsection("The values in equal ratios.")
    positions: tuple[Any, ...] | None = choice(
        None, "The places of the values on the axis: numbers or names, or null where the first key's values tell them."
    )

    @property
    def all_keys(self) -> tuple[str, ...]:
        """The keys that move."""
        return (self.key,) if self.key is not None else self.keys

    def cross_faults(self) -> Iterator[CrossFault]:
        """The axis says once what moves and once where to."""
        if (self.key is None) == (not self.keys):
            got = "neither" if self.key is None else "both"
            yield CrossFault("key", got, "exactly one of key and keys says what moves", "keep one of the two")
        ways = [way for way in ("values", "linear", "logarithmic") if getattr(self, way) is not None]
        if len(ways) != 1:
            yield CrossFault(
                ways[-1] if ways else "values",
                " and ".join(ways) or "nothing",
                "exactly one of values, linear and logarithmic gives the values",
                "keep one of the three",
            )
        if self.name in (*_TAKEN, *_TAKEN_TOO):
            yield CrossFault("name", self.name, "is taken by the collected dataset", "choose another name")
        yield from self._position_faults()
        yield from self._value_faults()

    def _position_faults(self) -> Iterator[CrossFault]:
        if self.positions is None:
            return
        numbers = all(_is_number(item) for item in self.positions)
        if not numbers and not all(isinstance(item, str) for item in self.positions):
            yield CrossFault("positions", show(self.positions), "must be all numbers or all names", "mend the list")
        elif len(self.positions) != self.count():
            yield CrossFault(
                "positions",
                f"{len(self.positions)} positions for {self.count()} values",
                "must be as many as the values",
                "give one position for each value",
            )
        elif len(set(self.positions)) < len(self.positions):
            yield CrossFault("positions", show(self.positions), "must differ from one another", "mend the list")

    def _value_faults(self) -> Iterator[CrossFault]:
        for key, count in Counter(self.keys).items():
            if count > 1:
                yield CrossFault("keys", f"{key} {count} times", "each key once", "remove one of them")
        if self.values is None:
            return
        if not self.values:
            yield CrossFault("values", "no value", "must be one value or more", "list the values")
        for index, value in enumerate(self.values):
            if value in self.values[:index]:
                yield CrossFault(f"values.{index}", f"{show(value)} again", "each value once", "remove one of them")
            if len(self.keys) > 1 and isinstance(value, list | tuple) and len(value) != len(self.keys):
                yield CrossFault(
                    f"values.{index}",
                    f"{len(value)} values for {len(self.keys)} keys",
                    "one value for all keys, or a list with one for each",
                    f"list {len(self.keys)} values",
                )
        first = [first_of(value, self.all_keys) for value in self.values]
        plain = all(_is_number(value) for value in first) or all(isinstance(value, str) for value in first)
        if self.positions is None and (not plain or any(value in first[:i] for i, value in enumerate(first))):
            yield CrossFault(
                "values",
                "values that cannot be their own places on the axis",
                "need positions unless the first key's values are different numbers, or different words",
                "add positions, one for each value",
            )

    def count(self) -> int:
        """The number of values."""
        span = self.linear or self.logarithmic
        return span.count if span is not None else len(self.values or ())


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def first_of(value: Any, keys: Sequence[str]) -> Any:
    """What the first of several keys gets of a value, which is for all of them or a list with one for each."""
    shared = len(keys) == 1 or not isinstance(value, list | tuple)
    return value if shared or not value else value[0]


class Sample(Section):
    """Cases spread evenly through a box of ranges."""

    method: Literal["latin_hypercube", "sobol"] = choice("latin_hypercube", "How the cases are spread.")
    count: Whole = quantity(16, "The number of cases; for sobol a power of two.", ge=2, le=65536)
    seed: Whole = quantity(1, "The seed of the sample.", ge=0)
    ranges: tuple[ParameterRange, ...] = Field(description="The keys that vary and how far.", min_length=1)

    def cross_faults(self) -> Iterator[CrossFault]:
        """A power of two, for which the Sobol' sequence is balanced (Sobol' 1967); no key twice."""
        if self.method == "sobol" and self.count & (self.count - 1):
            above = 1 << self.count.bit_length()
            yield CrossFault(
                "count", f"{self.count}", "must be a power of two with sobol", f"take {above // 2} or {above}"
            )
        for key, count in Counter(item.key for item in self.ranges).items():
            if count > 1:
                yield CrossFault("ranges", f"{key} {count} times", "each key once", "remove one of the ranges")


class ExplicitCase(Section):
    """One case written down."""

    name: Annotated[str, Field(min_length=1)] = _required("The name of the case.")
    changes: Changes = choice({}, "The dotted keys in which it differs from the base, and their values.")


class Study(Section):
    """Many runs from one base configuration."""

    name: Annotated[str, Field(pattern=r"^[a-z0-9_-]+$")] = _required(
        "The name of the study and of its folder, of a-z, 0-9, '_' and '-'."
    )
    description: str = choice("", "The study in a sentence or two.")
    base: Annotated[str, Field(min_length=1)] = _required(
        "The configuration that is varied, a path that starts at the folder of the study file."
    )
    changes: Changes = choice({}, "The dotted keys in which all cases differ from the base, and their values.")
    command: Literal["equilibrate", "evolve"] = choice("equilibrate", "What is done with each case.")
    axes: tuple[Axis, ...] | None = choice(None, "The axes whose product is the study.")
    sample: Sample | None = optional_subsection("Cases spread through a box.")
    cases: tuple[ExplicitCase, ...] | None = choice(None, "Cases written down one by one.")
    branch: BranchSpec | None = optional_subsection("One key up and down, each case from the previous equilibrium.")
    switch: SwitchSpec | None = optional_subsection("Changes at time zero from one equilibrium.")
    sensitivity: SensitivitySpec | None = optional_subsection("Elasticities or Sobol' indices.")
    warm_start: Literal["none", "nearest"] = choice(
        "none",
        "Whether a case starts from its own initial state or from the end of the nearest finished case, "
        "which is quicker and can hide that there is more than one equilibrium.",
    )
    fields: tuple[str, ...] = choice((), "The fields of the result files that are collected beside the scalars.")
    pages: tuple[dict[str, Any] | str, ...] = choice(
        (), "The figure pages, each written out or the path of its file, which starts at the folder of the study file."
    )

    @property
    def plan(self) -> str:
        """Which of `PLANS` this study has."""
        return next(name for name in PLANS if getattr(self, name) is not None)

    def cross_faults(self) -> Iterator[CrossFault]:
        """One plan; names that can be told apart; no key varied in two places."""
        given = [name for name in PLANS if getattr(self, name) is not None]
        if len(given) != 1:
            yield CrossFault(
                given[-1] if given else "axes",
                " and ".join(given) or "nothing that varies",
                f"a study has exactly one of {', '.join(PLANS)}",
                "keep one of them" if given else "add one of them",
            )
            return
        if self.plan not in ("axes", "sample", "cases") and self.warm_start != "none":
            yield CrossFault(
                "warm_start", self.warm_start, f"a {self.plan} study says itself what starts from where", "remove it"
            )
        yield from self._count_faults()
        yield from self._overlaps()

    def _count_faults(self) -> Iterator[CrossFault]:
        for plan in ("axes", "cases"):
            items = getattr(self, plan)
            if items is not None and not items:
                yield CrossFault(plan, "an empty list", "must have one item or more", "list what is varied")
            for name, count in Counter(item.name for item in items or ()).items():
                if count > 1:
                    yield CrossFault(plan, f"the name {name} {count} times", "names must differ", "rename one")

    def varied_keys(self) -> list[tuple[str, str]]:
        """Every key that the study varies or sets for all its cases, as (place in the study file, dotted key)."""
        found = [(f"changes.{key}", key) for key in self.changes]
        for index, axis in enumerate(self.axes or ()):
            found += [(f"axes.{index}.{'key' if axis.key else 'keys'}", key) for key in axis.all_keys]
        for index, item in enumerate(self.sample.ranges if self.sample else ()):
            found.append((f"sample.ranges.{index}.key", item.key))
        return found + list(self._keys_of_other_plans())

    def _keys_of_other_plans(self) -> Iterator[tuple[str, str]]:
        if self.branch is not None:
            yield "branch.key", self.branch.key
        if self.switch is not None:
            for key in self.switch.start.changes:
                yield f"switch.start.changes.{key}", key
        if isinstance(self.sensitivity, ElasticitiesSpec):
            for index, key in enumerate(self.sensitivity.keys):
                yield f"sensitivity.keys.{index}", key
        if isinstance(self.sensitivity, SobolIndicesSpec):
            for index, item in enumerate(self.sensitivity.ranges):
                yield f"sensitivity.ranges.{index}.key", item.key

    def _overlaps(self) -> Iterator[CrossFault]:
        found = self.varied_keys()
        for index, (place, key) in enumerate(found):
            for other_place, other in found[:index]:
                if overlap(key, other):
                    what = f"{key}" if key == other else f"{key} beside {other}"
                    yield CrossFault(
                        place,
                        what,
                        f"is set already in {other_place.removesuffix('.' + other)}",
                        "vary each key in one place only",
                    )
        for index, case in enumerate(self.cases or ()):
            for key in case.changes:
                for other in (*self.changes, *(mine for mine in case.changes if mine < key)):
                    if overlap(key, other):
                        yield CrossFault(
                            f"cases.{index}.changes",
                            f"{key} beside {other}",
                            "a key, or one that holds it, may be set only once",
                            "vary each key in one place only",
                        )


def overlap(one: str, other: str) -> bool:
    """Whether two dotted keys name the same value, or one of them a part of the other."""
    return one == other or one.startswith(f"{other}.") or other.startswith(f"{one}.")
