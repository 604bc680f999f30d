"""How panels fill a page: which stand in which row, how large the page is, what letters they have."""

from __future__ import annotations

from typing import Annotated, Generic, Literal, TypeVar

from pydantic import Field

from oceanbox.config.section import Real, Section, Whole, choice, quantity
from oceanbox.figures.options import PanelOptions
from oceanbox.figures.style import WIDTH_MM

__all__ = ["Layout", "PageName"]

PageName = Annotated[str, Field(pattern=r"^[a-z0-9_-]+$")]

_ROW_MM = 62.0

AnyPanel = TypeVar("AnyPanel", bound=PanelOptions)


class Layout(Section, Generic[AnyPanel]):
    """Panels in reading order, filled row by row; a kind of page says which panels there are, and its usual name."""

    width: Literal["single", "double"] = choice("double", "The width in columns of a journal page, 89 or 183 mm.")
    width_mm: Real | None = quantity(None, "The width instead of a column width, or null.", "mm", gt=20.0, le=600.0)
    height_mm: Real | None = quantity(
        None, "The height, or null to give each row of relative height one 62 mm.", "mm", gt=20.0, le=900.0
    )
    columns: Whole = quantity(2, "The number of columns of panels.", ge=1, le=4)
    letters: Literal["lower", "upper", "none"] = choice("lower", "The letters that panels are known by.")
    panels: Annotated[tuple[AnyPanel, ...], Field(min_length=1)] = Field(description="The panels in reading order.")

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
