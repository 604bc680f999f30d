"""Figures of a study to files: byte for byte the same for the same study and page."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from oceanbox.figures.saving import Format, write_figure
from oceanbox.figures.study_panels.caption import study_caption, study_name
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.drawing import compose_study

if TYPE_CHECKING:
    from oceanbox.figures.study_page import StudyPage

__all__ = ["save_study_page"]


def save_study_page(study: StudyData, page: StudyPage, into: Path, formats: Sequence[Format]) -> list[Path]:
    """Write the page in each format, and its caption, into a folder that is made if need be.

    Files are named <study>_<page>.<format>, the caption <study>_<page>.txt. Returns their paths, the caption last. Raises
    ValueError for an unknown format before anything is written.
    """
    stem = f"{study_name(study)}_{page.name}"
    return write_figure(stem, into, formats, lambda: compose_study(study, page), lambda: study_caption(study, page))
