"""From a study file to a study whose every case can be run, with every fault at its file and line."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from difflib import get_close_matches
from pathlib import Path

from oceanbox import names
from oceanbox.config import Config, LoadedConfig, Source
from oceanbox.config import load as load_config
from oceanbox.config.validating import validate
from oceanbox.config.yaml_tree import Node, plain, read_tree
from oceanbox.errors import ConfigError, Fault
from oceanbox.figures.study_page import StudyPage, axis_faults, study_pages
from oceanbox.study.places import place_of_cases
from oceanbox.study.plan import Case, cases_of
from oceanbox.study.schema import PLANS, Study, overlap
from oceanbox.study.threshold_plans import THRESHOLD_PLANS, planned_cases

__all__ = ["LoadedStudy", "StudySource", "check_cases", "load_study"]

COLLECTABLE = (
    "state",
    "forcing",
    "volume_budget",
    "heat_budget",
    "salt_budget",
    "heat_transport",
    "latitude",
    "region",
)


@dataclass(frozen=True)
class StudySource:
    """Where the values of a study were written."""

    tree: Node

    def locate(self, key: str) -> str:
        """The 'file:line' of a dotted key, or of what lies above it; dotted keys inside `changes` count as one part."""
        node, rest = self.tree, key
        while rest:
            part, child = _first_part(node, rest)
            if child is None:
                break
            node, rest = child, rest[len(part) + 1 :]
        return node.location


def _first_part(node: Node, key: str) -> tuple[str, Node | None]:
    """The child of a node that a dotted key begins with, the longest name first."""
    parts = key.split(".")
    for count in range(len(parts), 0, -1):
        part = ".".join(parts[:count])
        if isinstance(node.value, dict) and part in node.value:
            return part, node.value[part]
        if isinstance(node.value, list) and part.isdecimal() and int(part) < len(node.value):
            return part, node.value[int(part)]
    return "", None


@dataclass(frozen=True)
class LoadedStudy:
    """A checked study.

    base      the configuration that is varied, with `study.changes`, and where its values were written
    cases     those that are known before anything runs; a branch study may add some to refine its jumps
    pages     the figures that are wanted
    """

    study: Study
    path: Path
    source: StudySource
    base: Config
    base_source: Source
    cases: tuple[Case, ...]
    pages: tuple[StudyPage, ...]

    def relocated(self, error: ConfigError) -> ConfigError:
        """Faults about keys of a configuration, told of the place in the study file that sets the key."""
        return ConfigError(
            dict.fromkeys(_relocated(self.study, self.source, self.base_source, fault) for fault in error.faults)
        )


def load_study(path: str | Path) -> LoadedStudy:
    """Read a study file and build its cases.

    Raises ConfigError with one located fault for each thing wrong: with the file, with the base configuration, or with
    what a case makes of it.  Rules about the whole of a configuration are left to `check_cases`.
    """
    path = Path(path)
    source = StudySource(_read(path))
    try:
        study = validate(Study, plain(source.tree))
    except ConfigError as error:
        raise _sorted(error.located(source.locate).faults) from None
    loaded = _base(study, path, source)
    base = loaded.config
    faults = [replace(fault, location=source.locate(fault.key)) for fault in _field_faults(study)]
    cases: list[Case] = []
    try:
        base = base.with_changes(study.changes)
        cases = planned_cases(study, base) if study.plan in THRESHOLD_PLANS else cases_of(study, base)
    except ConfigError as error:
        faults += [_relocated(study, source, loaded.source, fault) for fault in error.faults]
    pages, page_faults = _pages(study, path.parent, cases)
    for fault in (*_grid_faults(study, cases), *page_faults):
        faults.append(fault if fault.location else replace(fault, location=source.locate(fault.key)))
    if faults:
        raise _sorted(faults)
    return LoadedStudy(study, path, source, base, loaded.source, tuple(cases), pages)


def check_cases(loaded: LoadedStudy, cases: Iterable[Case]) -> list[str]:
    """Examine whole configurations, as `experiment.api.check` does for one run; the warnings, each once.

    Raises ConfigError with the faults of all cases, each once, named by the first case that has it.
    """
    from oceanbox.experiment.api import check

    faults: dict[tuple[str, str], Fault] = {}
    warnings: dict[tuple[str, str], list[tuple[str, Fault]]] = {}
    cases = list(cases)
    for case in cases:
        try:
            found = check(case.config).warnings
        except ConfigError as error:
            for fault in error.faults:
                named = replace(fault, value=f"{fault.value} in case {case.name}")
                faults.setdefault(
                    (fault.key, fault.allowed), _relocated(loaded.study, loaded.source, loaded.base_source, named)
                )
            continue
        for warning in found:
            warnings.setdefault((warning.key, warning.allowed), []).append((case.name, warning))
    if faults:
        raise _sorted(faults.values())
    return [_warning(found, len(cases)) for found in warnings.values()]


def _warning(found: Sequence[tuple[str, Fault]], total: int) -> str:
    """One warning for all the cases that have it."""
    name, first = found[0]
    which = "all cases" if len(found) == total else f"{len(found)} of {total} cases, first {name}"
    return f"{which}: {first}"


def _read(path: Path) -> Node:
    faults: list[Fault] = []
    try:
        text = path.read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as error:
        reason = getattr(error, "strerror", None) or "it is not UTF-8 text"
        fault = Fault("", "", str(path), f"a study file must be readable ({reason})", "mend the path")
        raise ConfigError([fault]) from None
    tree = read_tree(text, str(path), faults)
    if tree is None or faults:
        raise _sorted(faults)
    return tree


def _base(study: Study, path: Path, source: StudySource) -> LoadedConfig:
    """The configuration that the study varies."""
    file = path.parent / study.base
    if not file.is_file():
        beside = sorted(item.name for item in file.parent.glob("*.y*ml")) if file.parent.is_dir() else []
        close = get_close_matches(file.name, beside, n=1, cutoff=0.6)
        remedy = f"did you mean '{close[0]}'?" if close else "give a path that starts at the folder of the study file"
        raise ConfigError(
            [
                Fault(
                    source.locate("base"),
                    "base",
                    repr(study.base),
                    f"there is no file {file.name} in {file.parent}",
                    remedy,
                )
            ]
        )
    return load_config(file)


def _field_faults(study: Study) -> list[Fault]:
    """Fields to collect that are no fields of a result file."""
    known = [name for group in COLLECTABLE for name in names.in_group(group)]  # type: ignore[arg-type]
    faults = []
    for index, name in enumerate(study.fields):
        if name.removesuffix("_std") not in known:
            close = get_close_matches(name, known, n=3, cutoff=0.5)
            remedy = f"did you mean {' or '.join(close)}?" if close else "take a name from a result file"
            faults.append(Fault("", f"fields.{index}", name, "must be a field of a result file", remedy))
    return faults


def _pages(study: Study, folder: Path, cases: Sequence[Case]) -> tuple[tuple[StudyPage, ...], list[Fault]]:
    """The pages of a study, and what is wrong with them; `cases` is empty where they could not be built."""
    try:
        pages = study_pages(study.pages, folder)
    except ConfigError as error:
        return (), list(error.faults)
    if not cases or study.plan not in ("axes", "sample", "cases"):
        return pages, []
    return pages, axis_faults(pages, list(place_of_cases(study, cases).coordinates))


def _grid_faults(study: Study, cases: Sequence[Case]) -> list[Fault]:
    """Fields of different grids cannot stand in one variable."""
    grids = {
        (basin.width_km, basin.south_km, basin.north_km, basin.cells_x, basin.cells_y)
        for basin in (case.config.basin for case in cases)
    }
    if not study.fields or len(grids) < 2:
        return []
    remedy = "remove fields, or keep the basin and its cells the same in all cases"
    return [Fault("", "fields", "cases on different grids", "fields are collected from one grid only", remedy)]


def _relocated(study: Study, source: StudySource, base_source: Source, fault: Fault) -> Fault:
    """The fault at the line of the study that sets its key; of the base configuration where the study does not."""
    if fault.location:
        return fault
    if fault.key.partition(".")[0] in PLANS:
        return replace(fault, location=source.locate(fault.key))
    place = _place(study, fault)
    return replace(fault, location=source.locate(place) if place else base_source.locate(fault.key))


def _place(study: Study, fault: Fault) -> str:
    """Where in the study file the key of a fault is set, '' if it is not."""
    places = study.varied_keys()
    for index, case in enumerate(study.cases or ()):
        if fault.value.endswith(f"in case {case.name}") or f"in case {case.name} and " in fault.value:
            places = [(f"cases.{index}.changes.{key}", key) for key in case.changes] + places
    for index, switch in enumerate(study.switch.switches if study.switch is not None else ()):
        places += [(f"switch.switches.{index}.changes.{key}", key) for key in switch.changes]
    touched = [place for place, key in places if fault.key and overlap(key, fault.key)]
    return touched[0] if touched else ""


def _sorted(faults: Iterable[Fault]) -> ConfigError:
    """The faults in the order of their lines; of those that differ in the value alone, the first."""
    first: dict[tuple[str, ...], Fault] = {}
    for fault in faults:
        first.setdefault((fault.location, fault.key, fault.allowed, fault.remedy), fault)

    def line(fault: Fault) -> tuple[str, int]:
        file, _, number = fault.location.rpartition(":")
        return file, int(number) if number.isdecimal() else 0

    return ConfigError(sorted(first.values(), key=line))
