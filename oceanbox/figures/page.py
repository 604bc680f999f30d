"""A page of panels as data: which panels, how large, in how many columns."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

from pydantic import Field

from oceanbox.config.loading import Source
from oceanbox.config.section import choice
from oceanbox.config.validating import validate
from oceanbox.config.yaml_tree import plain, read_tree
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.thermocline import EQUATOR_WITHIN_DEG
from oceanbox.errors import ConfigError, Fault
from oceanbox.figures.layout import Layout, PageName
from oceanbox.figures.options import (
    Approach,
    EquatorialSection,
    Exchange,
    HeatBudget,
    Panel,
    TemperatureMap,
    ThermoclineMap,
)

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["Page", "default_page", "load_page", "loads_page"]


class Page(Layout[Panel]):
    """A figure: panels in reading order, filled row by row."""

    name: PageName = choice("overview", "The name of the page, part of file names.")
    panels: Annotated[tuple[Panel, ...], Field(min_length=1)] = choice(
        (
            ThermoclineMap(relative_height=1.15),
            TemperatureMap(relative_height=1.15),
            EquatorialSection(),
            HeatBudget(),
            Exchange(),
            Approach(),
        ),
        "The panels in reading order.",
    )


def default_page(dataset: xr.Dataset) -> Page:
    """The default page, without the section along the equator where the basin holds none."""
    page = Page()
    if Geometry.of(dataset).rows_near_equator(EQUATOR_WITHIN_DEG).any():
        return page
    kept = tuple(panel for panel in page.panels if not isinstance(panel, EquatorialSection))
    return Page(panels=kept)


def load_page(path: str | Path) -> Page:
    """Read and check the YAML file of a page.

    Raises ConfigError with one located fault for each thing wrong; an unknown kind of panel is answered with the list
    of those there are.
    """
    file = Path(path)
    try:
        text = file.read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as error:
        raise ConfigError(
            [Fault("", "", str(path), f"the file of a page must be readable UTF-8 text ({error})", "mend the path")]
        ) from error
    return _checked(text, str(path))


def loads_page(text: str) -> Page:
    """Check the YAML text of a page. Raises ConfigError as `load_page` does; locations begin with 'text'."""
    return _checked(text, "text")


def _checked(text: str, name: str) -> Page:
    faults: list[Fault] = []
    tree = read_tree(text, name, faults)
    if tree is None or faults:
        raise ConfigError(faults)
    try:
        return validate(Page, plain(tree))
    except ConfigError as error:
        raise error.located(Source(tree).locate) from None
