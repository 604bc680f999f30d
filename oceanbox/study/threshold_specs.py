"""The parts of a study file that ask for thresholds, for the memory of the ocean, and for sensitivities."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from difflib import get_close_matches
from typing import Annotated, Any, ClassVar, Literal

from pydantic import Discriminator, Field, Tag

from oceanbox import names
from oceanbox.config.section import (
    CrossFault,
    Real,
    Section,
    Whole,
    choice,
    quantity,
    required_quantity,
)

__all__ = [
    "UNRECORDED",
    "BranchSpec",
    "Changes",
    "ElasticitiesSpec",
    "ParameterRange",
    "SensitivitySpec",
    "SobolIndicesSpec",
    "SwitchCase",
    "SwitchSpec",
    "SwitchStart",
]

Changes = dict[str, Any]
"""Dotted keys of the base configuration and the values they take."""

FEWEST_POINTS = 8
"""Points below which a three-parameter fit says little about its own uncertainty."""

UNRECORDED = (
    "entrainment_upwelling_total",
    "entrainment_diffusive_total",
    "entrainment_shoaling_total",
    "entrainment_prescribed_total",
    "exchange_imbalance",
    "sverdrup_transport",
    "gyre_transport",
    "western_boundary_transport",
    "wave_speed",
    "equatorial_radius",
)
"""Scalars of a result that a run does not record as series."""

Name = Annotated[str, Field(pattern=r"^[a-z0-9_-]+$")]


def _text(sentence: str) -> Any:
    """A required text that is not empty."""
    return Field(description=sentence, min_length=1)


def _measures(sentence: str) -> Any:
    """A list of scalars of the result file."""
    return Field(default=("thermocline_depth_equator_mean",), description=sentence, min_length=1)


def _twice(names: tuple[str, ...]) -> str | None:
    """The first name that occurs more than once."""
    return next((name for name, count in Counter(names).items() if count > 1), None)


def _measure_faults(key: str, measures: Sequence[str], excluded: Sequence[str] = ()) -> Iterator[CrossFault]:
    """Measures that are no scalars of a result, or excluded ones."""
    known = [name for name in names.in_group("scalar") if name not in excluded]
    for index, measure in enumerate(measures):
        if measure not in known:
            close = get_close_matches(measure, known, n=2, cutoff=0.5)
            yield CrossFault(
                key.format(index),
                measure,
                "must be a scalar of a result" + (" that is recorded as a series" if excluded else ""),
                f"did you mean {' or '.join(close)}?" if close else f"take one of {', '.join(known)}",
            )


class BranchSpec(Section):
    """One key moved up step by step and then down, each run started from the previous equilibrium."""

    key: str = _text("The dotted key of the base configuration that is moved.")
    long_name: str = choice("", "What the key is, in words, for tables and figures; its own sentence when empty.")
    lowest: Real = required_quantity("The value of the key where the way up starts, in the key's unit.")
    highest: Real = required_quantity("The value of the key where the way down starts, in the key's unit.")
    steps: Whole = quantity(10, "The number of equal steps from lowest to highest.", ge=2, le=1000)
    measure: str = choice(
        "thermocline_depth_equator_mean", "The scalar of the result file in which jumps are looked for."
    )
    refine_to: Real | None = quantity(
        None,
        "The width in the key's unit to which a jump is bracketed by bisection, or null to leave it at one step.",
        gt=0.0,
    )
    jump_factor: Real = quantity(
        4.0,
        "The change over one step, as a multiple of the branch's median change, that is suspected of a jump.",
        gt=1.0,
    )
    least_jump: Real = quantity(
        0.0, "The smallest change in the measure's unit that counts as a jump, more than its noise.", ge=0.0
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """The range is not empty, refining makes a step smaller, the measure exists."""
        yield from _measure_faults("measure", [self.measure])
        if self.highest <= self.lowest:
            yield CrossFault(
                "highest",
                f"{self.highest:g} with lowest {self.lowest:g}",
                "must be more than lowest",
                "swap the two; the way up always comes first",
            )
            return
        step = (self.highest - self.lowest) / self.steps
        if self.refine_to is not None and self.refine_to >= step:
            yield CrossFault(
                "refine_to",
                f"{self.refine_to:g} with steps of {step:g}",
                "must be less than one step",
                "lower refine_to, or write null to leave jumps bracketed by one step",
            )


class SwitchStart(Section):
    """The equilibrium from which all switches start."""

    changes: Changes = choice({}, "The dotted keys in which it differs from the base configuration.")


class SwitchCase(Section):
    """What is changed at time zero."""

    name: Name = Field(description="The name of the switch, of a-z, 0-9, '_' and '-'.")
    changes: Changes = Field(
        description="The dotted keys that change at time zero and their new values, at least one.", min_length=1
    )
    duration_days: Real | None = quantity(
        None, "The length of this run, or null for that of all switches.", "days", gt=0.0
    )
    series_interval_days: Real | None = quantity(
        None, "The time between points of this run's series, or null for that of all switches.", "days", gt=0.0
    )


class SwitchSpec(Section):
    """From one equilibrium, several ways of changing one thing at time zero, and the adjustment to each."""

    start: SwitchStart = Field(default_factory=SwitchStart, description="The equilibrium at time zero.")
    switches: tuple[SwitchCase, ...] = Field(description="The changes at time zero, at least one.", min_length=1)
    duration_days: Real = quantity(3650.0, "The length of each run.", "days", gt=0.0)
    series_interval_days: Real = quantity(30.0, "The time between points of the recorded series.", "days", gt=0.0)
    measures: tuple[str, ...] = _measures("The scalars whose adjustment is recorded and fitted.")
    control: Literal["run", "none"] = choice(
        "run", "Whether a run in which nothing changes shows the drift and the noise of the start."
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """Names differ, every series is long enough to be fitted, the measures are recorded."""
        yield from _measure_faults("measures.{}", self.measures, UNRECORDED)
        taken = ("start", "control")
        twice = _twice((*taken, *(case.name for case in self.switches)))
        if twice is not None:
            yield CrossFault(
                "switches",
                f"the name {twice} more than once",
                f"names must differ, also from {' and '.join(taken)}",
                "rename one of them",
            )
        for index, case in enumerate(self.switches):
            duration = case.duration_days or self.duration_days
            interval = case.series_interval_days or self.series_interval_days
            if duration < FEWEST_POINTS * interval:
                yield CrossFault(
                    f"switches.{index}.series_interval_days",
                    f"{interval:g} in a run of {duration:g} days",
                    f"must leave at least {FEWEST_POINTS} points to fit",
                    "lengthen the run or shorten the interval",
                )


class ParameterRange(Section):
    """A key and the range over which it is uncertain."""

    key: str = _text("The dotted key of the base configuration.")
    lowest: Real = required_quantity("The lower end of the range, in the key's unit.")
    highest: Real = required_quantity("The upper end of the range, in the key's unit.")
    scale: Literal["linear", "logarithmic"] = choice(
        "linear", "Whether all values or all orders of magnitude in the range are equally likely."
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """The range is not empty, and positive where its logarithm is taken."""
        if self.highest <= self.lowest:
            yield CrossFault(
                "highest", f"{self.highest:g} with lowest {self.lowest:g}", "must be more than lowest", "swap the two"
            )
        if self.scale == "logarithmic" and self.lowest <= 0.0:
            yield CrossFault(
                "lowest",
                f"{self.lowest:g} with scale logarithmic",
                "must be > 0",
                "raise it, or set scale to linear",
            )


class ElasticitiesSpec(Section):
    """The elasticities d ln(measure)/d ln(key) at the base configuration, by central differences."""

    tag: ClassVar[str] = "<elasticities>"
    kind: Literal["elasticities"] = choice("elasticities", "The word that picks this kind of sensitivity.")
    keys: tuple[str, ...] = Field(description="The dotted keys that are varied one at a time.", min_length=1)
    measures: tuple[str, ...] = _measures("The scalars whose elasticities are wanted.")
    relative_step: Real = quantity(
        0.1, "The change of ln(key) to either side; half of it is tried too, as a check.", "1", gt=0.0, le=0.5
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """No key twice; measures that exist."""
        yield from _measure_faults("measures.{}", self.measures)
        twice = _twice(self.keys)
        if twice is not None:
            yield CrossFault("keys", f"{twice} more than once", "keys must differ", "remove one of them")


class SobolIndicesSpec(Section):
    """The shares of a measure's variance due to each uncertain key, alone and with all its interactions."""

    tag: ClassVar[str] = "<sobol_indices>"
    kind: Literal["sobol_indices"] = choice("sobol_indices", "The word that picks this kind of sensitivity.")
    ranges: tuple[ParameterRange, ...] = Field(description="The uncertain keys, at least two.", min_length=2)
    measures: tuple[str, ...] = _measures("The scalars whose variance is shared out.")
    base_samples: Whole = quantity(
        32, "The number N of base points, a power of two; N (keys + 2) runs are made.", ge=2, le=65536
    )
    seed: Whole = quantity(1, "The seed of the scrambled sequence and of the bootstrap.", ge=0)
    resamples: Whole = quantity(1000, "The number of bootstrap resamples behind the intervals.", ge=100)
    confidence: Real = quantity(0.95, "The confidence level of the intervals.", "1", gt=0.0, lt=1.0)

    def cross_faults(self) -> Iterator[CrossFault]:
        """No key twice; measures that exist; a power of two, for which the sequence is balanced."""
        yield from _measure_faults("measures.{}", self.measures)
        twice = _twice(tuple(item.key for item in self.ranges))
        if twice is not None:
            yield CrossFault("ranges", f"{twice} more than once", "keys must differ", "remove one of the ranges")
        if self.base_samples & (self.base_samples - 1):
            above = 1 << self.base_samples.bit_length()
            yield CrossFault(
                "base_samples",
                f"{self.base_samples}",
                "must be a power of two, for which the sample is balanced",
                f"take {above // 2} or {above}",
            )


def _sensitivity_tag(value: Any) -> str:
    if isinstance(value, ElasticitiesSpec | SobolIndicesSpec):
        return value.tag
    return f"<{value.get('kind', '')}>" if isinstance(value, dict) else "<>"


SensitivitySpec = Annotated[
    Annotated[ElasticitiesSpec, Tag(ElasticitiesSpec.tag)] | Annotated[SobolIndicesSpec, Tag(SobolIndicesSpec.tag)],
    Discriminator(_sensitivity_tag),
]
"""Either kind of sensitivity study, told apart by `kind`."""
