"""A page of panels as data: which panels, how large, in how many columns."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Literal

from pydantic import Field

from oceanbox.config.loading import Source
from oceanbox.config.section import Real, Section, Whole, choice, quantity
from oceanbox.config.validating import validate
from oceanbox.config.yaml_tree import plain, read_tree
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.thermocline import EQUATOR_WITHIN_DEG
from oceanbox.errors import ConfigError, Fault
from oceanbox.figures.options import (
    Approach,
    EquatorialSection,
    Exchange,
    HeatBudget,
    Panel,
    TemperatureMap,
    ThermoclineMap,
)
from oceanbox.figures.style import WIDTH_MM

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["Page", "default_page", "load_page", "loads_page"]

_ROW_MM = 62.0


class Page(Section):
    """A figure: panels in reading order, filled row by row."""

    name: Annotated[str, Field(pattern=r"^[a-z0-9_-]+$")] = choice(
        "overview", "The name of the page, part of file names."
    )
    width: Literal["single", "double"] = choice("double", "The width in columns of a journal page, 89 or 183 mm.")
    width_mm: Real | None = quantity(None, "The width instead of a column width, or null.", "mm", gt=20.0, le=600.0)
    height_mm: Real | None = quantity(
        None, "The height, or null to give each row of relative height one 62 mm.", "mm", gt=20.0, le=900.0
    )
    columns: Whole = quantity(2, "The number of columns of panels.", ge=1, le=4)
    letters: Literal["lower", "upper", "none"] = choice("lower", "The letters that panels are known by.")
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

    def size_mm(self) -> tuple[float, float]:
        """Width and height of the figure, mm."""
        width = WIDTH_MM[self.width] if self.width_mm is None else self.width_mm
        height = _ROW_MM * sum(self.row_heights()) if self.height_mm is None else self.height_mm
        return width, height

    def rows(self) -> tuple[tuple[int, ...], ...]:
        """The indices of the panels in each row; a panel that does not fit opens the next row."""
        rows: list[list[int]] = [[]]
        used = 0
        for index in range(len(self.panels)):
            span = self.span(index)
            if used + span > self.columns:
                rows.append([])
                used = 0
            rows[-1].append(index)
            used += span
        return tuple(tuple(row) for row in rows)

    def row_heights(self) -> tuple[float, ...]:
        """Relative height of each row, that of its tallest panel."""
        return tuple(max(self.panels[index].relative_height for index in row) for row in self.rows())

    def span(self, index: int) -> int:
        """Columns that a panel takes: what it asks for, at most the whole width of the page."""
        return min(self.panels[index].span_columns, self.columns)

    def letter(self, index: int) -> str:
        """Letter of a panel, '' where panels have none."""
        small = chr(ord("a") + index % 26) * (1 + index // 26)
        return {"lower": small, "upper": small.upper(), "none": ""}[self.letters]


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
