"""Figures fit for a journal, drawn from result files alone: `draw(result, page, into)`.

A page is data (see `Page`); what it shows is in the file already or comes from `oceanbox.diagnostics`.
"""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from oceanbox.figures.page import Page, default_page, load_page, loads_page

if TYPE_CHECKING:
    import xarray as xr

    from oceanbox.figures.saving import Format

__all__ = ["Page", "default_page", "draw", "load_page", "loads_page"]


def draw(
    result: xr.Dataset | str | Path,
    page: Page | None = None,
    into: str | Path = ".",
    formats: Sequence[Format] = ("pdf", "png"),
) -> list[Path]:
    """Draw a page of figures of a result, with its caption.

    result   a result with its derived variables, or the path of a result file
    page     what to draw; the default page, as far as the basin can fill it, when not given
    into     the folder to write to
    formats  of pdf, png, svg

    Returns the paths written: one per format, and last the caption's. Raises FileNotFoundError or UnreadableResult for
    a file that is not there, is no result or lacks what a panel shows, ValueError for an unknown format.
    """
    from oceanbox.figures.saving import save
    from oceanbox.output.files import read_dataset

    dataset = read_dataset(Path(result)) if isinstance(result, str | Path) else result
    return save(dataset, page or default_page(dataset), Path(into), formats)
