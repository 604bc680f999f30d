"""The scaling plot: cost of a cell-step against the number of cells."""

from __future__ import annotations

from pathlib import Path

__all__ = ["draw_scaling"]

STYLE = {"NumPy": ("s", "#999999"), "C": ("^", "#D55E00"), "compiled step": ("o", "#0072B2")}


def draw_scaling(costs: dict[str, list[tuple[int, float]]], processor: str, folder: Path) -> list[Path]:
    """Draw ``costs``, (cells, ns per cell-step) by kind of step, as PNG and PDF into ``folder``; the files."""
    import matplotlib

    matplotlib.use("Agg")
    import matplotlib.pyplot as plt

    figure, ax = plt.subplots(figsize=(5.2, 3.6), layout="constrained")
    for kind, points in costs.items():
        marker, colour = STYLE[kind]
        ax.plot(*zip(*sorted(points), strict=True), marker=marker, color=colour, label=kind)
    ax.set(xscale="log", yscale="log", xlabel="Cells", ylabel="Processor time per cell and step (ns)")
    ticks = [5, 10, 20, 50, 100, 200]
    ax.set_yticks(ticks, [str(tick) for tick in ticks])
    ax.minorticks_off()
    ax.grid(alpha=0.3, linewidth=0.5)
    ax.legend(frameon=False)
    ax.set_title(f"One thread, {processor}", fontsize="small")
    folder.mkdir(parents=True, exist_ok=True)
    files = [folder / f"step_cost.{kind}" for kind in ("png", "pdf")]
    for file in files:
        figure.savefig(file, dpi=200)
    plt.close(figure)
    return files
