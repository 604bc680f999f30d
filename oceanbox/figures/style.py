"""How every figure looks: sizes, fonts, colours, lines."""

from __future__ import annotations

from types import MappingProxyType
from typing import Any, Final, NamedTuple

__all__ = [
    "DEEP_IS_DARK",
    "GREY",
    "INK",
    "LINES",
    "PNG_DOTS_PER_INCH",
    "RC",
    "WARM_IS_LIGHT",
    "WIDTH_MM",
    "LineStyle",
    "inches",
]

WIDTH_MM: Final = MappingProxyType({"single": 89.0, "double": 183.0})
"""Widths of one and two columns of a journal page."""

PNG_DOTS_PER_INCH: Final = 300

INK: Final = "#222222"
GREY: Final = "#8c8c8c"

DEEP_IS_DARK: Final = "viridis_r"
WARM_IS_LIGHT: Final = "cividis"


class LineStyle(NamedTuple):
    """A colour and a dash pattern that tell a line from its neighbours, on a screen and in grey print."""

    color: str
    linestyle: str | tuple[int, tuple[float, ...]]


LINES: Final = (
    LineStyle("#0072B2", "solid"),
    LineStyle("#D55E00", (0, (5, 1.5))),
    LineStyle("#009E73", (0, (5, 1.5, 1, 1.5))),
    LineStyle("#CC79A7", (0, (1, 1.2))),
    LineStyle("#000000", (0, (3, 1.2, 1, 1.2, 1, 1.2))),
    LineStyle("#E69F00", (0, (8, 2))),
)
"""Colours of Okabe and Ito (2008), Color Universal Design, each with a dash pattern of its own."""

RC: Final[Any] = MappingProxyType(
    {
        # DejaVu comes with matplotlib: the same letters on every machine.
        "font.family": "DejaVu Sans",
        "font.size": 7.0,
        "axes.labelsize": 7.0,
        "axes.titlesize": 8.0,
        "xtick.labelsize": 7.0,
        "ytick.labelsize": 7.0,
        "legend.fontsize": 6.5,
        "text.color": INK,
        "axes.labelcolor": INK,
        "axes.edgecolor": INK,
        "xtick.color": INK,
        "ytick.color": INK,
        "axes.linewidth": 0.6,
        "axes.titlepad": 3.0,
        "axes.labelpad": 2.0,
        "axes.unicode_minus": True,
        "axes.formatter.use_mathtext": True,
        "lines.linewidth": 1.1,
        "xtick.major.width": 0.6,
        "ytick.major.width": 0.6,
        "xtick.major.size": 2.5,
        "ytick.major.size": 2.5,
        "legend.frameon": False,
        "legend.borderaxespad": 0.0,
        "legend.borderpad": 0.0,
        "legend.handlelength": 1.9,
        "legend.handletextpad": 0.4,
        "legend.columnspacing": 0.9,
        "legend.labelspacing": 0.25,
        # TrueType letters: journals refuse Type 3. Text in an SVG stays text. A fixed salt keeps its ids the same.
        "pdf.fonttype": 42,
        "ps.fonttype": 42,
        "svg.fonttype": "none",
        "svg.hashsalt": "oceanbox",
        "figure.constrained_layout.use": True,
        "figure.constrained_layout.h_pad": 0.03,
        "figure.constrained_layout.w_pad": 0.03,
        "figure.constrained_layout.hspace": 0.04,
        "figure.constrained_layout.wspace": 0.04,
        "savefig.dpi": PNG_DOTS_PER_INCH,
    }
)
"""Settings in force while a figure is drawn and saved."""


def inches(millimetres: float) -> float:
    """Millimetres in the inches that figure sizes are given in."""
    return millimetres / 25.4
