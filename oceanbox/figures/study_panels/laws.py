"""Theory beside the cases of a study: the law at each case, and what is said of how well it fits."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Literal, NamedTuple

import numpy as np

from oceanbox.diagnostics.theory import (
    FEWEST_CASES,
    fit_log_law,
    fit_scale,
    log_law_depth,
    misfit_of,
)
from oceanbox.figures.study_panels.cases import StudyData

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["Law", "configured_log_law", "fitted_log_law", "scale_law"]

Balance = Literal["tropics", "basin"]

_SMALLEST = 0.01  # m; closer is as good as exact

_BALANCES = {
    "tropics": ("upwelling_tropics", "supply_tropics"),
    "basin": ("upwelling_basin", "loss_to_abyss"),
}
_RATES = {
    "tropics": (
        "W_up all water lifted through the mixed-layer base within 10° of the equator and W_d the part of it that comes "
        "from below the thermocline"
    ),
    "basin": (
        "W_up all water lifted through the mixed-layer base of the basin and W_d all warm water destroyed or handed to the "
        "abyss"
    ),
}


class Law(NamedTuple):
    """A law at each case.

    depth    the depth it gives, m; NaN where it cannot be had
    label    for a legend, '' where there is nothing to draw
    formula  for a caption: the law and what stands in it
    fit      for a caption: its parameters and its misfit
    """

    depth: xr.DataArray
    label: str
    formula: str
    fit: str


def fitted_log_law(study: StudyData, depth: str, balance: Balance, at: Sequence[str]) -> Law:
    """H_m + l ln(W_up/W_d) fitted to the cases in equilibrium at some places."""
    up, down = (study.select(study.scalar(name), at) for name in _BALANCES[balance])
    h = _in_equilibrium(study, depth, at)
    ratios = (up / down).values[np.isfinite(h.values) & (up.values > 0.0) & (down.values > 0.0)]
    if ratios.size < FEWEST_CASES or np.unique(ratios).size < 2:
        return _unfitted(up, "log law", FEWEST_CASES)
    fit = fit_log_law(h, up, down)
    words = (
        f"fitted to the {fit.cases} cases in equilibrium: "
        f"H_m = {_number(fit.mixed_layer_depth, fit.mixed_layer_depth_error)} m, "
        f"l = {_number(fit.half_thickness, fit.half_thickness_error)} m (standard errors), "
        f"root-mean-square misfit {_metres(fit.misfit)} m. {_configured_words(study, at)}"
    )
    return Law(_like(up, fit.depth(up, down)), _label("log law, fitted", fit.misfit), _formula(balance), words.strip())


def configured_log_law(study: StudyData, depth: str, balance: Balance, at: Sequence[str]) -> Law:
    """H_m + l ln(W_up/W_d) with the parameters of each case's own configuration; nothing is fitted."""
    up, down = (study.select(study.scalar(name), at) for name in _BALANCES[balance])
    offset, length = (study.select(study.scalar(name), at) for name in ("mixed_layer_depth", "half_thickness"))
    law = _like(up, log_law_depth(offset, length, up / down.where(down > 0.0)))
    misfit = misfit_of(_in_equilibrium(study, depth, at), law)
    words = (
        f"with H_m and l as configured and nothing fitted: "
        f"root-mean-square misfit {_metres(misfit)} m over the cases in equilibrium."
    )
    return Law(law, _label("log law, configured", misfit), _formula(balance), words)


def scale_law(study: StudyData, depth: str, scale: str, at: Sequence[str]) -> Law:
    """A depth scale times one factor, fitted to the cases in equilibrium."""
    values, h = study.select(study.scalar(scale), at), _in_equilibrium(study, depth, at)
    if int((np.isfinite(values) & np.isfinite(h)).sum()) < FEWEST_CASES - 1:
        return _unfitted(values, scale.replace("_", " "), FEWEST_CASES - 1)
    fit = fit_scale(h, values)
    formula = {"advective_depth": "(f² W L/(β b))^½", "diffusive_depth": "(κ f² L/(β b))^⅓"}[scale]
    name = scale.removesuffix("_depth")
    meaning = (
        f"the {name} scale {formula} of the subtropics (f and β at 20°, b and pumping W means over 10° to 30°, L the width "
        f"of the basin)"
    )
    words = (
        f"times a factor fitted to the {fit.cases} cases in equilibrium: "
        f"{_number(fit.factor, fit.factor_error)} (standard error), root-mean-square misfit {_metres(fit.misfit)} m."
    )
    return Law(values * fit.factor, _label(f"{name} scale × {fit.factor:.2g}", fit.misfit), meaning, words)


def _in_equilibrium(study: StudyData, depth: str, at: Sequence[str]) -> xr.DataArray:
    """Depths of the cases that may be fitted, NaN for the others."""
    return study.select(study.scalar(depth).where(study.done & study.settled), at)


def _configured_words(study: StudyData, at: Sequence[str]) -> str:
    found = [study.select(study.scalar(name), at).values for name in ("mixed_layer_depth", "half_thickness")]
    values = [np.unique(item[np.isfinite(item)]) for item in found]
    if any(item.size != 1 for item in values):
        return ""
    return f"The runs themselves have H_m = {values[0][0]:g} m and l = {values[1][0]:g} m."


def _unfitted(like: xr.DataArray, law: str, fewest: int) -> Law:
    words = f"fewer than {fewest} cases in equilibrium have all it needs, or they do not differ."
    return Law(like.copy(data=np.full(like.shape, np.nan)), "", f"no {law}", words)


def _like(array: xr.DataArray, values: np.ndarray) -> xr.DataArray:
    return array.copy(data=np.asarray(values, dtype=float))


def _formula(balance: Balance) -> str:
    return f"the log law H_m + l ln(W_up/W_d), with {_RATES[balance]}"


def _label(name: str, misfit: float) -> str:
    return f"{name} (misfit {_metres(misfit)} m)"


def _metres(misfit: float) -> str:
    return f"{misfit:.2g}" if misfit >= _SMALLEST else f"< {_SMALLEST:g}"


def _number(value: float, error: float) -> str:
    """A value to the decimals that its error allows, three at most: '52.8 ± 0.1'."""
    size = max(error, _SMALLEST)
    decimals = max(0, 1 - int(np.floor(np.log10(size))) - (1 if f"{size:.0e}"[0] > "3" else 0))
    return f"{value:.{decimals}f} ± {error:.{decimals}f}"
