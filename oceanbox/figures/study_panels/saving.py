"""Figures of a study to files: byte for byte the same for the same study and page."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from types import MappingProxyType
from typing import TYPE_CHECKING, Final

from matplotlib import rc_context

from oceanbox.figures.saving import FORMATS, Format
from oceanbox.figures.study_panels.caption import study_caption, study_name
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.drawing import compose_study
from oceanbox.figures.style import RC
from oceanbox.output.files import whole_file

if TYPE_CHECKING:
    from oceanbox.figures.study_page import StudyPage

__all__ = ["save_study_page"]

# What would change from one run of the program to the next is left out.
_METADATA: Final = MappingProxyType(
    {
        "pdf": {"CreationDate": None, "Creator": "oceanbox"},
        "svg": {"Date": None, "Creator": "oceanbox"},
        "png": {"Software": None},
    }
)


def save_study_page(study: StudyData, page: StudyPage, into: Path, formats: Sequence[Format]) -> list[Path]:
    """Write the page in each format, and its caption, into a folder that is made if need be.

    Files are named <study>_<page>.<format>, the caption <study>_<page>.txt. Returns their paths, the caption last. Raises
    ValueError for an unknown format before anything is written.
    """
    unknown = [name for name in formats if name not in FORMATS]
    if unknown or not formats:
        raise ValueError(
            f"formats: got {list(formats)}; one or more of {', '.join(FORMATS)} are allowed; choose of these"
        )
    into.mkdir(parents=True, exist_ok=True)
    stem = f"{study_name(study)}_{page.name}"
    written = []
    for name in dict.fromkeys(formats):
        path = into / f"{stem}.{name}"
        with rc_context(dict(RC)), whole_file(path) as part:
            # A figure saved twice has its layout solved twice, with another result: a fresh one for each file.
            compose_study(study, page).savefig(part, format=name, metadata=_METADATA[name])
        written.append(path)
    text = into / f"{stem}.txt"
    with whole_file(text) as part:
        part.write_text(study_caption(study, page), encoding="utf-8")
    return [*written, text]
