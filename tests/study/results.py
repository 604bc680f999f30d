"""Comparing the results of two runs of a study."""

from __future__ import annotations

from pathlib import Path

import xarray as xr

from oceanbox.output.files import read_dataset

# What may differ between two runs of the same case: when it was run, and from which state of a checkout.
MOMENTS = ("history", "date_created", "oceanbox_commit")


def results_in(into: Path) -> dict[str, xr.Dataset]:
    """Every result below the folder of a study by the folder of its case, without what says when it was made."""
    found = {path.parent.name: read_dataset(path) for path in sorted(into.glob("cases/*/result.nc"))}
    for result in found.values():
        for name in MOMENTS:
            result.attrs.pop(name)
    return found


def assert_same_results(one: Path, other: Path, count: int) -> None:
    """Both folders hold the results of the same `count` cases, equal to the last bit."""
    first, second = results_in(one), results_in(other)
    assert len(first) == count and set(first) == set(second)
    for folder, result in first.items():
        xr.testing.assert_identical(result, second[folder])
