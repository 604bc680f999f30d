"""The caption that goes beside a figure: what it shows, of which run, and what to be careful about."""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING

import numpy as np
import yaml

from oceanbox.constants import DAYS_PER_YEAR
from oceanbox.diagnostics.cold_tongue import TONGUE_WITHIN_DEG
from oceanbox.diagnostics.reference import CONFIG_ATTRIBUTE, Reference
from oceanbox.diagnostics.thermocline import EQUATOR_WITHIN_DEG
from oceanbox.figures.options import (
    Approach,
    EquatorialSection,
    Exchange,
    HeatBudget,
    Panel,
    TemperatureMap,
    ThermoclineMap,
)
from oceanbox.figures.shortened import SHORTENED, was_shortened
from oceanbox.output.provenance import IDENTITY_ATTRIBUTE, OUTCOME_ATTRIBUTE

if TYPE_CHECKING:
    import xarray as xr

    from oceanbox.figures.page import Page

__all__ = ["caption", "run_name", "sentence"]

_NOT_STATED = "not stated in the file"
_EXCHANGE = (
    "Warm water made by entrainment, destroyed by surface cooling and, if there is such a line, handed to the abyss "
    "where the layer outcrops"
)
_EXACT = (
    "It is computed twice, from the currents and from the surface flux less storage; the lines fall on one another "
    "where the budget closes."
)


def run_name(dataset: xr.Dataset) -> str:
    """Name of the run that wrote a result, from its configuration; 'result' where it states none."""
    text = dataset.attrs.get(CONFIG_ATTRIBUTE)
    config = yaml.safe_load(text) if isinstance(text, str) else None
    name = config.get("name") if isinstance(config, dict) else None
    return str(name) if name else "result"


def caption(dataset: xr.Dataset, page: Page) -> str:
    """The whole caption as plain text, wrapped, one paragraph each for panels, run and cautions."""
    panels = [
        f"({letter}) {sentence(dataset, panel)}" if (letter := page.letter(index)) else sentence(dataset, panel)
        for index, panel in enumerate(page.panels)
    ]
    provenance = (
        f"Run {run_name(dataset)}, mean over {_window(dataset)}. "
        f"Configuration identity {dataset.attrs.get(IDENTITY_ATTRIBUTE, _NOT_STATED)}."
    )
    outcome = str(dataset.attrs.get(OUTCOME_ATTRIBUTE, _NOT_STATED)).rstrip(".")
    cautions = (
        f"How the run ended: {outcome}. {dataset.attrs.get('comment', '')} "
        "The cold tongue is that of the mean temperature, not the mean of the cold tongues."
    )
    paragraphs = (" ".join(panels), provenance, " ".join(cautions.split()))
    return "\n\n".join(textwrap.fill(paragraph, 100, break_long_words=False) for paragraph in paragraphs) + "\n"


def sentence(dataset: xr.Dataset, panel: Panel) -> str:
    """What one panel shows."""
    match panel:
        case ThermoclineMap():
            arrows = " Arrows: mean current of the top layer; their length is proportional to the square root of speed."
            return "Thermocline depth." + (arrows if panel.arrows == "current" else "")
        case TemperatureMap():
            return "Surface temperature." + (_edge(dataset) if panel.outline == "cold_tongue" else "")
        case EquatorialSection():
            spread = " Shading: one standard deviation within the window." if panel.spread == "shaded" else ""
            return (
                f"Surface temperature and thermocline depth within {EQUATOR_WITHIN_DEG:g}° of the equator; the dotted "
                f"line is {_contrast(dataset)} below the warm pool.{spread}"
            )
        case HeatBudget():
            return f"Zonal mean of the terms of the heat budget, and northward heat transport. {_EXACT}"
        case Exchange():
            if panel.form == "per_degree":
                return f"{_EXCHANGE}, per degree of latitude."
            return f"{_EXCHANGE}, south of each latitude, and carried northward across it."
        case Approach():
            return (
                "Approach to equilibrium: thermocline depth on the equator (western eighth, mean, eastern eighth; the "
                "basin mean where there is no equator), warm-water volume, and net surface heat flux relative to the sum of "
                "its gains and losses. Shading: the averaging window."
            ) + (f" {SHORTENED}" if was_shortened(dataset.attrs) else "")


def _edge(dataset: xr.Dataset) -> str:
    """What is said of the outline of the cold tongue, which not every basin has."""
    area = float(dataset["cold_tongue_area"]) if "cold_tongue_area" in dataset else float("nan")
    if area == 0.0:
        return f" Nowhere near the equator is it {_contrast(dataset)} colder than the warm pool: no cold tongue."
    if not area > 0.0:
        return ""
    return (
        f" Line: edge of the cold tongue, {_contrast(dataset)} colder than the equatorial warm pool, "
        f"within {TONGUE_WITHIN_DEG:g}° of the equator."
    )


def _contrast(dataset: xr.Dataset) -> str:
    return f"{Reference.from_attributes(dataset.attrs).cold_tongue_contrast_K:g} K"


def _window(dataset: xr.Dataset) -> str:
    bounds = dataset.coords.get("window_bounds")
    if bounds is None:
        return f"a window {_NOT_STATED}"
    start, end = np.asarray(bounds, dtype=float) / DAYS_PER_YEAR
    return f"model years {start:.4g} to {end:.4g}"
