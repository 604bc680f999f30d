"""Figures of a study as data, and the call that draws them: `draw_study(collected, folder, pages, into)`."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

from oceanbox.config.loading import Source
from oceanbox.config.section import choice
from oceanbox.config.validating import validate
from oceanbox.config.yaml_tree import plain, read_tree
from oceanbox.errors import ConfigError, Fault
from oceanbox.figures.layout import Layout, PageName
from oceanbox.figures.study_options import StudyPanel

if TYPE_CHECKING:
    import xarray as xr

    from oceanbox.figures.saving import Format

__all__ = ["StudyPage", "axis_faults", "draw_study", "load_study_page", "study_pages"]


class StudyPage(Layout[StudyPanel]):
    """A figure of a study, laid out as the page of a single run is: panels in reading order, filled row by row."""

    name: PageName = choice("study", "The name of the page, part of file names.")


def study_pages(entries: Sequence[Mapping[str, Any] | str], folder: Path) -> tuple[StudyPage, ...]:
    """Check the pages that a study asks for.

    entries  each a page written out, or the path of the YAML file of one
    folder   where relative paths start

    Raises ConfigError with every fault of every page. Keys of pages written out begin with `pages.<number>`, their faults
    have no location; faults in files have.
    """
    pages: list[StudyPage] = []
    faults: list[Fault] = []
    for index, entry in enumerate(entries):
        try:
            pages.append(
                load_study_page(folder / entry) if isinstance(entry, str) else validate(StudyPage, dict(entry))
            )
        except ConfigError as error:
            inside = "" if isinstance(entry, str) else f"pages.{index}"
            faults += [_within(fault, inside, index) for fault in error.faults]
    for name, count in Counter(page.name for page in pages).items():
        if count > 1:
            faults.append(
                Fault("", "pages", f"the name {name} {count} times", "names of pages must differ", "rename one of them")
            )
    if faults:
        raise ConfigError(faults)
    return tuple(pages)


def axis_faults(pages: Sequence[StudyPage], axes: Sequence[str]) -> list[Fault]:
    """A fault for each axis that a panel names and the study does not have, found before anything runs.

    axes  names of the axes of the study, and of the numbers that vary where it has none
    """
    found: list[Fault] = []
    for page_number, page in enumerate(pages):
        for number, panel in enumerate(page.panels):
            for key, axis in _named_axes(panel):
                if axis not in (*axes, "case_name"):
                    place = f"pages.{page_number}.panels.{number}.{key}"
                    rule = f"must be an axis of the study: {', '.join(axes)}"
                    found.append(Fault("", place, axis, rule, "name one of these"))
    return found


def load_study_page(path: str | Path) -> StudyPage:
    """Read and check the YAML file of a page of a study. Raises ConfigError with one located fault for each thing wrong."""
    faults: list[Fault] = []
    try:
        text = Path(path).read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as error:
        reason = getattr(error, "strerror", None) or "it is not UTF-8 text"
        rule = f"the file of a page must be readable ({reason})"
        raise ConfigError([Fault("", "", str(path), rule, "mend the path")]) from None
    tree = read_tree(text, str(path), faults)
    if tree is None or faults:
        raise ConfigError(faults)
    try:
        return validate(StudyPage, plain(tree))
    except ConfigError as error:
        raise error.located(Source(tree).locate) from None


def draw_study(
    collected: xr.Dataset | Path,
    folder: Path,
    pages: tuple[StudyPage, ...],
    into: Path,
    formats: Sequence[Format] = ("pdf", "png"),
) -> list[Path]:
    """Draw the pages of a study, each with its caption.

    collected  the collected dataset of the study, or the path of its file
    folder     of the study, from which the paths of its result files start
    pages      what to draw
    into       the folder to write to
    formats    of pdf, png, svg

    Returns the paths written, page by page: one per format, then the caption's. Raises FileNotFoundError or
    UnreadableResult for a file that is not there or lacks what a panel shows, ValueError for an unknown format.
    """
    from oceanbox.figures.study_panels.cases import open_study
    from oceanbox.figures.study_panels.saving import save_study_page

    study = open_study(collected, folder)
    return [path for page in pages for path in save_study_page(study, page, into, formats)]


def _named_axes(panel: StudyPanel) -> Iterator[tuple[str, str]]:
    """The axes that a panel names, with the keys that do."""
    for key in ("axis", "x_axis", "y_axis", "coloured_by", "joined_along"):
        axis = getattr(panel, key, None)
        if axis is not None:
            yield key, axis
    for index, place in enumerate(panel.at):
        yield f"at.{index}", place.partition("=")[0]


def _within(fault: Fault, inside: str, index: int) -> Fault:
    if not inside:
        return fault if fault.key or fault.location else replace(fault, key=f"pages.{index}")
    return replace(fault, key=f"{inside}.{fault.key}" if fault.key else inside)
