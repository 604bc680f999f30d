"""A study as panels see it: numbers of all cases over its axes, what became of each case, and its result file."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
import xarray as xr
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.diagnostics.theory_inputs import THEORY_INPUTS, theory_inputs
from oceanbox.errors import UnreadableResult
from oceanbox.figures.shortened import was_shortened
from oceanbox.output.files import read_dataset

__all__ = ["CaseView", "Counts", "Place", "StudyData", "open_study"]

Array = NDArray[np.float64]
Place = float | str
Dims = tuple[str, ...]

DONE, FAILED = "done", "failed"
NOT_IN_EQUILIBRIUM, COMPLETED = "not in equilibrium", "completed"


# Results kept at hand: every panel of every page asks for the same ones, and reading was half the time of drawing.
KEPT_RESULTS = 32


@lru_cache(maxsize=KEPT_RESULTS)
def _kept(path: Path, modified: int) -> xr.Dataset:
    """The result file as it was at the time ``modified`` [ns]."""
    del modified
    return read_dataset(path)


@dataclass(frozen=True)
class CaseView:
    """One case that has a result.

    places   where it lies on each axis, or the numbers that vary where the study has no axes
    settled  False where an equilibrium was looked for and not reached
    result   its result file
    """

    name: str
    places: Mapping[str, Place]
    settled: bool
    result: Path

    def read(self) -> xr.Dataset:
        """Its result, with times as numbers of days, not to be changed. Raises FileNotFoundError or UnreadableResult."""
        if not self.result.exists():
            return read_dataset(self.result)
        return _kept(self.result, self.result.stat().st_mtime_ns)

    @property
    def accelerated(self) -> bool:
        """Whether the way to its equilibrium was shortened, by the configuration in its result."""
        return was_shortened(self.read().attrs)


class Counts(NamedTuple):
    """Numbers of cases: all, with a result, failed, not in equilibrium, for which none was looked for, between steps."""

    cases: int
    done: int
    failed: int
    unsettled: int
    not_judged: int
    probes: int


@dataclass(frozen=True)
class StudyData:
    """A collected dataset and the folder that its result files lie in."""

    dataset: xr.Dataset
    folder: Path

    @property
    def dims(self) -> Dims:
        """The dimensions that the cases lie over."""
        return tuple(str(dim) for dim in self._variable("status").dims)

    @cached_property
    def done(self) -> xr.DataArray:
        """Whether each case has a result."""
        return self._variable("status") == DONE

    @cached_property
    def failed(self) -> xr.DataArray:
        """Whether each case has failed."""
        return self._variable("status") == FAILED

    @cached_property
    def settled(self) -> xr.DataArray:
        """False where an equilibrium was looked for and not reached."""
        if "ending" in self.dataset:
            return self.dataset["ending"] != NOT_IN_EQUILIBRIUM
        outcomes = self._variable("outcome")
        begins = [str(text).startswith(NOT_IN_EQUILIBRIUM) for text in outcomes.values.ravel()]
        return outcomes.copy(data=~np.array(begins, dtype=bool).reshape(outcomes.shape))

    def counts(self) -> Counts:
        """How many cases there are, and what became of them; the top of a branch belongs to both ways and counts once."""
        done, failed, settled = self.done, self.failed, self.settled
        once = xr.ones_like(done, dtype=bool)
        if self.dims == ("direction", "parameter"):
            once[{"direction": -1, "parameter": -1}] = False
        judged = self.dataset["ending"] != COMPLETED if "ending" in self.dataset else xr.ones_like(done, dtype=bool)
        return Counts(
            cases=int(once.sum()),
            done=int((done & once).sum()),
            failed=int((failed & once).sum()),
            unsettled=int((done & ~settled & once).sum()),
            not_judged=int((done & ~judged & once).sum()),
            probes=self.dataset.sizes.get("probe", 0),
        )

    def scalar(self, name: str) -> xr.DataArray:
        """A scalar of all cases, or a number that a law needs, in its unit; NaN where a case has none."""
        if name in THEORY_INPUTS:
            return self._theory[name]
        return self._variable(name)

    def spread(self, name: str) -> xr.DataArray:
        """The standard deviation of a scalar within the window; NaN where it was not sampled."""
        found = self.dataset.get(name + names.STD_SUFFIX)
        return found if found is not None else xr.full_like(self.scalar(name), np.nan, dtype=float)

    def select(self, array: xr.DataArray, at: Sequence[str]) -> xr.DataArray:
        """The part of an array over cases that lies at the given places, each written as axis=value."""
        for place in at:
            axis, _, text = place.partition("=")
            if axis not in array.dims or axis not in array.coords:
                raise UnreadableResult(
                    f"at {place}: got no axis {axis}; the study has {', '.join(map(str, array.dims))}; name one of these"
                )
            array = array.isel({axis: self._position(axis, text)})
        return array

    def along(self, axis: str) -> xr.DataArray:
        """Where the cases lie on an axis, or the numbers that vary where the study has no axes, or names of cases."""
        if axis in self.dataset.coords or axis == "case_name":
            return self._variable(axis)
        known = [str(name) for name, item in self.dataset.coords.items() if set(item.dims) <= set(self.dims)]
        raise UnreadableResult(f"axis {axis}: got a study without it; it has {', '.join(known)}; name one of these")

    def places(self, axis: str) -> list[Place]:
        """The numbers or names along an axis, in its order."""
        return [_plain(value) for value in self.along(axis).values.ravel()]

    def first_axis(self, number: int = 0) -> str:
        """Name of an axis of the study; names of cases where it has none."""
        if self.dims == ("case",):
            return "case_name"
        if number >= len(self.dims):
            raise UnreadableResult(
                f"axes: got a study over {', '.join(self.dims)}; {number + 1} are needed here; leave this panel out"
            )
        return self.dims[number]

    def cases(self, at: Sequence[str] = (), only: Sequence[str] = ()) -> list[CaseView]:
        """The cases that have results, in the order of the study, at some places, or only those of the given names.

        Raises UnreadableResult where there is none, or a name is unknown.
        """
        every = list(self._views(at))
        known = {str(name) for name in self._variable("case_name").values.ravel()}
        strangers = [name for name in only if name not in known]
        if strangers:
            raise UnreadableResult(
                f"case {strangers[0]}: got no case of that name; the study has {', '.join(sorted(known))}; name these"
            )
        order = {name: place for place, name in enumerate(only)}
        found = sorted((case for case in every if case.name in order), key=lambda case: order[case.name])
        found = found if only else every
        if not found:
            raise UnreadableResult(
                "cases: got none with a result among those asked for; run the study, or ask for others"
            )
        return found

    def _views(self, at: Sequence[str]) -> Iterator[CaseView]:
        chosen = {name: self.select(self._variable(name), at) for name in ("case_name", "result_path")}
        done, settled = self.select(self.done, at), self.select(self.settled, at)
        for index in np.ndindex(*done.shape):
            if not done.values[index]:
                continue
            one = done[index]
            places = {str(name): _plain(item.values) for name, item in one.coords.items() if item.ndim == 0}
            places.pop("case_name", None)
            yield CaseView(
                name=str(chosen["case_name"].values[index]),
                places=places,
                settled=bool(settled.values[index]),
                result=self.folder / str(chosen["result_path"].values[index]),
            )

    @cached_property
    def _theory(self) -> xr.Dataset:
        """The numbers that laws need, from the result file of each case."""
        shape = self.done.shape
        columns = {name: np.full(shape, np.nan) for name in THEORY_INPUTS}
        paths = self._variable("result_path").values
        for index in np.ndindex(*shape):
            if self.done.values[index]:
                for name, value in theory_inputs(read_dataset(self.folder / str(paths[index]))).items():
                    columns[str(name)][index] = float(value)
        return xr.Dataset({name: self.done.copy(data=values) for name, values in columns.items()})

    def _position(self, axis: str, text: str) -> int:
        along = self.dataset[axis].values
        if along.dtype.kind in "fiu":
            try:
                same = np.flatnonzero(np.isclose(along, float(text), rtol=1e-6, atol=0.0))
            except ValueError:
                same = np.array([], dtype=int)
        else:
            same = np.flatnonzero(along.astype(str) == text)
        if same.size == 0:
            values = ", ".join(f"{value:g}" if along.dtype.kind in "fiu" else str(value) for value in along)
            raise UnreadableResult(f"at {axis}={text}: got no such place; {axis} has {values}; take one of these")
        return int(same[0])

    def _variable(self, name: str) -> xr.DataArray:
        if name not in self.dataset:
            raise UnreadableResult(
                f"{name}: got a collected dataset without it; it is needed here; collect the study again, or leave this out"
            )
        return self.dataset[name]


def open_study(collected: xr.Dataset | str | Path, folder: str | Path) -> StudyData:
    """A study from its collected dataset, or the path of that, and the folder its result files lie in.

    Raises FileNotFoundError or UnreadableResult for a file that is not there or cannot be read.
    """
    dataset = collected if isinstance(collected, xr.Dataset) else read_dataset(Path(collected))
    return StudyData(dataset, Path(folder))


def _plain(value: Any) -> Place:
    item = value.item() if isinstance(value, np.ndarray | np.generic) else value
    return float(item) if isinstance(item, int | float) else str(item)
