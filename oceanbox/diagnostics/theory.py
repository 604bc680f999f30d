"""Theory beside experiment: laws for the depth of the thermocline, fitted to many runs with their misfit.

Every fit takes one number of each run, leaves out runs in which one of them is missing, and says how many were left.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

__all__ = [
    "FEWEST_CASES",
    "LogLawFit",
    "ScaleFit",
    "adjustment",
    "diffusive_thermocline_depth",
    "fit_log_law",
    "fit_scale",
    "log_law_depth",
    "misfit_of",
]

Array = NDArray[np.float64]

FEWEST_CASES = 3
"""The fewest cases that a fit of two parameters leaves a misfit for."""


@dataclass(frozen=True)
class LogLawFit:
    """Depth = H_m + l ln(W_up/W_d), fitted by least squares.

    mixed_layer_depth, half_thickness              H_m and l, m
    mixed_layer_depth_error, half_thickness_error  their standard errors if misfits of runs are independent, m
    misfit                                         root mean square of depth minus law, m
    cases                                          how many runs were used
    """

    mixed_layer_depth: float
    half_thickness: float
    mixed_layer_depth_error: float
    half_thickness_error: float
    misfit: float
    cases: int

    def depth(self, upwelled: ArrayLike, destroyed: ArrayLike) -> Array:
        """The depth that the fitted law gives, m; NaN where a rate is not positive. Rates in any common unit."""
        law: Array = self.mixed_layer_depth + self.half_thickness * _log_ratio(upwelled, destroyed)
        return law


@dataclass(frozen=True)
class ScaleFit:
    """Depth = factor times a scale, fitted by least squares.

    factor, factor_error  and its standard error if misfits of runs are independent
    misfit                root mean square of depth minus law, m
    cases                 how many runs were used
    """

    factor: float
    factor_error: float
    misfit: float
    cases: int


def fit_log_law(depth: ArrayLike, upwelled: ArrayLike, destroyed: ArrayLike) -> LogLawFit:
    """Fit H_m + l ln(W_up/W_d) to the thermocline depths of several runs.

    depth      of the equatorial thermocline, m
    upwelled   W_up, water lifted through the base of the mixed layer, m3 s-1
    destroyed  W_d, what of it must come from below the thermocline to replace what is destroyed, m3 s-1

    Arrays of one shape; runs with a missing depth, or a rate that is not positive, are left out. The law is the balance
    W_up exp(-(h - H_m)/l) = W_d (see `scales.eastern_depth_log_law`). Raises ValueError with fewer than three runs, or
    where all have one ratio.
    """
    h, ratio = np.asarray(depth, dtype=float), _log_ratio(upwelled, destroyed)
    known = np.isfinite(h) & np.isfinite(ratio)
    h, ratio = h[known], ratio[known]
    _refuse_few(h.size, "log law", FEWEST_CASES)
    spread = float(((ratio - ratio.mean()) ** 2).sum())
    if spread == 0.0:
        raise ValueError(
            f"log law: got {h.size} runs with one ratio of upwelled to destroyed water; "
            "ratios must differ; vary something that changes the destruction"
        )
    slope = float(((ratio - ratio.mean()) * (h - h.mean())).sum()) / spread
    offset = float(h.mean()) - slope * float(ratio.mean())
    left = h - (offset + slope * ratio)
    variance = float((left**2).sum()) / (h.size - 2)
    return LogLawFit(
        mixed_layer_depth=offset,
        half_thickness=slope,
        mixed_layer_depth_error=float(np.sqrt(variance * (1.0 / h.size + ratio.mean() ** 2 / spread))),
        half_thickness_error=float(np.sqrt(variance / spread)),
        misfit=_root_mean_square(left),
        cases=h.size,
    )


def fit_scale(depth: ArrayLike, scale: ArrayLike) -> ScaleFit:
    """Fit depth = factor times scale to several runs.

    depth, scale  of one shape, m; runs with a depth or a scale that is missing are left out

    Raises ValueError with fewer than two runs, or where all scales are zero.
    """
    h, s = np.asarray(depth, dtype=float), np.asarray(scale, dtype=float)
    known = np.isfinite(h) & np.isfinite(s)
    h, s = h[known], s[known]
    _refuse_few(h.size, "scale", FEWEST_CASES - 1)
    size = float((s**2).sum())
    if size == 0.0:
        raise ValueError("scale: got scales that are all zero; a depth cannot be a multiple of them; leave this out")
    factor = float((h * s).sum()) / size
    left = h - factor * s
    error = float(np.sqrt((left**2).sum() / (h.size - 1) / size))
    return ScaleFit(factor=factor, factor_error=error, misfit=_root_mean_square(left), cases=h.size)


def misfit_of(depth: ArrayLike, law: ArrayLike) -> float:
    """Root mean square of depth minus law over the runs that have both, m; NaN where none has."""
    left = np.asarray(depth, dtype=float) - np.asarray(law, dtype=float)
    left = left[np.isfinite(left)]
    return _root_mean_square(left) if left.size else float("nan")


def log_law_depth(mixed_layer_depth: ArrayLike, half_thickness: ArrayLike, ratio: ArrayLike) -> Array:
    """H_m + l ln(W_up/W_d) of several runs, m; NaN where the ratio is not positive.

    mixed_layer_depth, half_thickness  H_m and l, m;  ratio  W_up/W_d
    """
    law: Array = np.asarray(mixed_layer_depth) + np.asarray(half_thickness) * _log_ratio(ratio, 1.0)
    return law


def diffusive_thermocline_depth(
    coriolis: float, diffusivity: float, length: float, beta: float, reduced_gravity: float
) -> float:
    """Diffusive scale of the thermocline's depth, (kappa f^2 L/(beta b))^(1/3), m.

    coriolis  f, s-1;  diffusivity  kappa, m2 s-1;  length  zonal extent L, m;  beta, m-1 s-1;  b, m s-2
    """
    return float(np.cbrt(diffusivity * coriolis**2 * length / (beta * reduced_gravity)))


def adjustment(time: ArrayLike, first: float, final: float, e_folding: float) -> Array:
    """final + (first - final) exp(-time/e_folding), in the unit of `first`; time and e_folding in one unit."""
    curve: Array = final + (first - final) * np.exp(-np.asarray(time, dtype=float) / e_folding)
    return curve


def _log_ratio(upwelled: ArrayLike, destroyed: ArrayLike) -> Array:
    up, down = np.asarray(upwelled, dtype=float), np.asarray(destroyed, dtype=float)
    ratio = np.full(np.broadcast(up, down).shape, np.nan)
    np.divide(up, down, out=ratio, where=(up > 0.0) & (down > 0.0))
    return np.log(ratio)


def _root_mean_square(values: Array) -> float:
    return float(np.sqrt((values**2).mean()))


def _refuse_few(count: int, what: str, fewest: int) -> None:
    if count < fewest:
        raise ValueError(f"{what}: got {count} runs with all numbers; {fewest} or more are needed; add cases")
