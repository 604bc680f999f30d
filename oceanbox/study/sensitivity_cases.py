"""The cases of a sensitivity study, and the sensitivities from their results."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import xarray as xr
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.config import Config
from oceanbox.config.showing import show
from oceanbox.errors import ConfigError, Fault
from oceanbox.study.keys import describe, value_at
from oceanbox.study.plan import Case, case_config, in_range
from oceanbox.study.schema import Study
from oceanbox.study.sensitivity import (
    FACTORS,
    Elasticity,
    SobolDesign,
    SobolIndices,
    elasticity,
    elasticity_factors,
    sobol_design,
    sobol_indices,
)
from oceanbox.study.threshold_specs import ElasticitiesSpec, SobolIndicesSpec

__all__ = ["sensitivity_cases", "sensitivity_dataset"]

Array = NDArray[np.float64]

SETTLED = 0.1
"""The error from the size of the step, as a share of the elasticity, above which a warning is given."""
ON_SCALE_UNITS = ("degC",)
"""Units whose zero is a convention: a ratio of such values means nothing."""


def sensitivity_cases(study: Study, base: Config) -> list[Case]:
    """The runs that a sensitivity study needs, in the order in which `sensitivity_dataset` expects them.

    base    the configuration that `study.base` names, with `study.changes`

    Raises ConfigError with what is wrong with any of them; for elasticities also where a key has no logarithm.
    """
    spec = study.sensitivity
    if spec is None:
        raise ValueError(f"study {study.name}: got a {study.plan} study; this is for sensitivity studies")
    drafts = _elasticity_drafts(spec, base) if isinstance(spec, ElasticitiesSpec) else _sobol_drafts(spec)
    cases: list[Case] = []
    faults: list[Fault] = []
    for number, (name, changes) in enumerate(drafts):
        try:
            config = case_config(study, base, name, changes)
        except ConfigError as error:
            faults += error.faults
            continue
        cases.append(Case(number, name, {}, changes, config, command=study.command))
    if faults:
        raise ConfigError({(fault.key, fault.allowed): fault for fault in faults}.values())
    return cases


Draft = tuple[str, dict[str, Any]]


def _elasticity_drafts(spec: ElasticitiesSpec, base: Config) -> list[Draft]:
    """The base, then four runs for each key."""
    faults = [fault for key in spec.keys if (fault := _no_logarithm(base, key)) is not None]
    if faults:
        raise ConfigError(faults)
    drafts: list[Draft] = [("base", {})]
    for key in spec.keys:
        value = float(value_at(base, key))
        drafts += [
            (f"{key} x {factor:.6g}", {key: value * factor}) for factor in elasticity_factors(spec.relative_step)
        ]
    return drafts


def _no_logarithm(base: Config, key: str) -> Fault | None:
    """Why there is no elasticity with respect to a key, None if there is one."""
    value = value_at(base, key)
    if not isinstance(value, int | float) or isinstance(value, bool) or value == 0.0:
        rule = "an elasticity needs a number other than 0 in the base"
        return Fault("", key, show(value), rule, "give it a value there, or leave it out")
    unit = describe(base, key).unit
    if unit in ON_SCALE_UNITS:
        rule = "an elasticity compares ratios, and the zero of this scale is a convention"
        return Fault("", key, f"{show(value)} {unit}", rule, "vary it on an axis, or with kind sobol_indices")
    return None


def _sobol_drafts(spec: SobolIndicesSpec) -> list[Draft]:
    """The points of the design."""
    points = _design(spec).stacked()
    digits = len(str(len(points) - 1))
    return [
        (
            f"{number:0{digits}d}",
            {item.key: in_range(item, float(share)) for item, share in zip(spec.ranges, point, strict=True)},
        )
        for number, point in enumerate(points)
    ]


def _design(spec: SobolIndicesSpec) -> SobolDesign:
    return sobol_design(len(spec.ranges), spec.base_samples, spec.seed)


def sensitivity_dataset(study: Study, base: Config, collected: xr.Dataset) -> xr.Dataset:
    """The sensitivities over `key`, and in words as an attribute.

    collected    the scalars of the `sensitivity_cases` over `case`, in their order; NaN where one failed
    """
    spec = study.sensitivity
    if isinstance(spec, ElasticitiesSpec):
        return _elasticities(spec, base, collected)
    if isinstance(spec, SobolIndicesSpec):
        return _indices(spec, base, collected)
    raise ValueError(f"study {study.name}: got a {study.plan} study; this is for sensitivity studies")


def _elasticities(spec: ElasticitiesSpec, base: Config, collected: xr.Dataset) -> xr.Dataset:
    variables: dict[str, xr.Variable] = {}
    lines = []
    for measure in spec.measures:
        runs = _values(collected, measure)[1:].reshape(len(spec.keys), FACTORS)
        spreads = _values(collected, f"{measure}_std")[1:].reshape(len(spec.keys), FACTORS)
        found = [elasticity(values, spec.relative_step) for values in runs]
        # Relative standard deviations of the two runs of the half step, as an error of the logarithm of their ratio.
        noise = np.sqrt(((spreads[:, 2:] / runs[:, 2:]) ** 2).sum(axis=1)) / spec.relative_step
        columns = {
            "elasticity": ("elasticity", [item.value for item in found]),
            "elasticity_step_error": (
                "error of the elasticity from the size of the step",
                [x.step_error for x in found],
            ),
            "elasticity_spread": ("error of the elasticity if window means were as uncertain as single times", noise),
        }
        variables |= _columns(measure, columns)
        lines += [_elasticity_line(key, measure, item) for key, item in zip(spec.keys, found, strict=True)]
    attributes = {"oceanbox_sensitivity_findings": "\n".join(lines)}
    return xr.Dataset(variables, _key_coordinates(spec.keys, base), attributes)


def _elasticity_line(key: str, measure: str, item: Elasticity) -> str:
    line = f"d ln {measure} / d ln {key} = {item.value:.3g}, error from the size of the step {item.step_error:.1g}"
    if np.isnan(item.value):
        return f"d ln {measure} / d ln {key}: not found: a run failed, or the measure changes sign"
    return line if item.settled(SETTLED) else f"{line}: the step is too large to trust it, or the runs too noisy"


def _indices(spec: SobolIndicesSpec, base: Config, collected: xr.Dataset) -> xr.Dataset:
    variables: dict[str, xr.Variable] = {}
    lines = []
    count, keys = spec.base_samples, [item.key for item in spec.ranges]
    for measure in spec.measures:
        values = _values(collected, measure).reshape(len(keys) + 2, count)
        found = sobol_indices(values[0], values[1], values[2:], spec.confidence, spec.resamples, spec.seed)
        interval = f"{100.0 * spec.confidence:g} % interval"
        columns: dict[str, tuple[str, Sequence[float] | Array]] = {
            "sobol_first": ("first-order Sobol' index", found.first),
            "sobol_first_lower": (f"first-order Sobol' index, lower end of its {interval}", found.first_lower),
            "sobol_first_upper": (f"first-order Sobol' index, upper end of its {interval}", found.first_upper),
            "sobol_total": ("total Sobol' index", found.total),
            "sobol_total_lower": (f"total Sobol' index, lower end of its {interval}", found.total_lower),
            "sobol_total_upper": (f"total Sobol' index, upper end of its {interval}", found.total_upper),
        }
        variables |= _columns(measure, columns)
        lines += _index_lines(measure, keys, found, count)
    attributes = {"oceanbox_sensitivity_findings": "\n".join(lines)}
    return xr.Dataset(variables, _key_coordinates(keys, base), attributes)


def _index_lines(measure: str, keys: Sequence[str], found: SobolIndices, count: int) -> list[str]:
    entry = names.lookup(measure)
    unit = "" if entry.units == "1" else f" {entry.units}"
    lines = [
        f"{measure}: mean {found.mean:.4g}{unit}, standard deviation {found.variance**0.5:.3g}{unit} "
        f"over {found.used} of {count} base points" + (", the others have a failed run" if found.used < count else "")
    ]
    for index in np.argsort(-found.total):
        lines.append(
            f"{measure}: {keys[index]}: alone {found.first[index]:.2f} "
            f"({found.first_lower[index]:.2f} to {found.first_upper[index]:.2f}), with interactions "
            f"{found.total[index]:.2f} ({found.total_lower[index]:.2f} to {found.total_upper[index]:.2f})"
        )
    return lines


def _values(collected: xr.Dataset, name: str) -> Array:
    """A scalar of all cases; NaN where no run has it."""
    if name not in collected:
        return np.full(collected.sizes["case"], np.nan)
    return np.asarray(collected[name].to_numpy(), dtype=np.float64)


def _columns(measure: str, columns: Mapping[str, tuple[str, Sequence[float] | Array]]) -> dict[str, xr.Variable]:
    long_name = names.lookup(measure).long_name
    return {
        f"{name}_{measure}": xr.Variable(
            "key", np.asarray(values, dtype=np.float64), {"long_name": f"{long_name}: {words}", "units": "1"}
        )
        for name, (words, values) in columns.items()
    }


def _key_coordinates(keys: Sequence[str], base: Config) -> dict[str, xr.Variable]:
    words = [describe(base, key) for key in keys]
    numbers = [value if isinstance(value := value_at(base, key), int | float) else np.nan for key in keys]

    def texts(values: Sequence[str], long_name: str) -> xr.Variable:
        return xr.Variable("key", np.array(values, dtype=object), {"long_name": long_name})

    return {
        "key": texts(list(keys), "key that is varied"),
        "key_sentence": texts([item.sentence for item in words], "what the key is"),
        "key_units": texts([item.unit for item in words], "unit of the key"),
        "key_value": xr.Variable("key", np.array(numbers, dtype=np.float64), {"long_name": "value in the base"}),
    }
