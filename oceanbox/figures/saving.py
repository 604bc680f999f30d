"""Figures to files: byte for byte the same for the same result and page."""

from __future__ import annotations

from pathlib import Path
from types import MappingProxyType
from typing import TYPE_CHECKING, Final, Literal

from matplotlib import rc_context

from oceanbox.figures.caption import caption, run_name
from oceanbox.figures.drawing import compose
from oceanbox.figures.style import RC
from oceanbox.output.files import whole_file

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    import xarray as xr
    from matplotlib.figure import Figure

    from oceanbox.figures.page import Page

__all__ = ["FORMATS", "Format", "save", "write_figure"]

Format = Literal["pdf", "png", "svg"]

# What would change from one run of the program to the next is left out.
_METADATA: Final = MappingProxyType(
    {
        "pdf": {"CreationDate": None, "Creator": "oceanbox"},
        "svg": {"Date": None, "Creator": "oceanbox"},
        "png": {"Software": None},
    }
)
FORMATS: Final = tuple(_METADATA)


def save(dataset: xr.Dataset, page: Page, into: Path, formats: Sequence[Format]) -> list[Path]:
    """Write the page in each format, and its caption, into a folder that is made if need be.

    Files are named <run>_<page>.<format>, the caption <run>_<page>.txt. Returns their paths, the caption last. Raises
    ValueError for an unknown format before anything is written.
    """
    stem = f"{run_name(dataset)}_{page.name}"
    return write_figure(stem, into, formats, lambda: compose(dataset, page), lambda: caption(dataset, page))


def write_figure(
    stem: str, into: Path, formats: Sequence[Format], fresh: Callable[[], Figure], words: Callable[[], str]
) -> list[Path]:
    """Write a figure as <stem>.<format> for each format, and its caption as <stem>.txt, which is last of the paths returned.

    fresh   makes the figure, once for each file: one that is saved twice has its layout solved twice, with another result
    words   makes the caption

    The folder is made if need be. Raises ValueError for an unknown format before anything is written.
    """
    unknown = [name for name in formats if name not in FORMATS]
    if unknown or not formats:
        raise ValueError(
            f"formats: got {list(formats)}; one or more of {', '.join(FORMATS)} are allowed; choose of these"
        )
    into.mkdir(parents=True, exist_ok=True)
    written = []
    for name in dict.fromkeys(formats):
        path = into / f"{stem}.{name}"
        with rc_context(dict(RC)), whole_file(path) as part:
            fresh().savefig(part, format=name, metadata=_METADATA[name])
        written.append(path)
    text = into / f"{stem}.txt"
    with whole_file(text) as part:
        part.write_text(words(), encoding="utf-8")
    return [*written, text]
