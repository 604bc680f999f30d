"""By latitude: the heat budget with the transport it implies, and the exchange of warm water."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.labelled import array_of
from oceanbox.figures import fields
from oceanbox.figures.axes import label_latitude, label_y, legend_above, mark_zero, split
from oceanbox.figures.options import Exchange, HeatBudget
from oceanbox.figures.style import LINES

if TYPE_CHECKING:
    import xarray as xr
    from matplotlib.axes import Axes

__all__ = ["exchange", "heat_budget"]

_TERM_LABELS = {
    "surface_heat_flux": "surface",
    "heat_advection": "advection",
    "heat_mixing": "mixing",
    "outcrop_heat": "outcrop",
    "heat_storage": "storage",
}

_EXCHANGE_LABELS = {
    "entrainment_south_of": "made",
    "transformation_south_of": "destroyed",
    "overturning": "northward",
    "outcrop": "outcrop",
}


def heat_budget(ax: Axes, dataset: xr.Dataset, options: HeatBudget) -> Axes:
    """Zonal means of the budget terms (W m-2) above the northward heat transport (PW), found in two ways."""
    upper, lower = split(ax, (1.25, 1.0))
    place = fields.degrees_of(Geometry.of(dataset))
    mark_zero(upper)
    for term, line in zip(options.terms, LINES, strict=False):
        upper.plot(place.y, fields.zonal_mean(dataset, term), label=_TERM_LABELS[term], **line._asdict())
    label_y(upper, "Heat gain (W m⁻²)")
    legend_above(upper, frame=ax)

    mark_zero(lower)
    for name, label, line in (
        ("northward_heat_transport", "currents", LINES[0]),
        ("northward_heat_transport_from_surface", "surface flux", LINES[1]),
    ):
        lower.plot(place.y_face, array_of(dataset, name) / fields.PETA, label=label, **line._asdict())
    label_y(lower, "Northward\nheat (PW)")
    lower.legend(loc="upper left", borderaxespad=0.6)
    lower.margins(y=0.12)
    label_latitude(lower, "x", place.y_face[0], place.y_face[-1])
    return ax


def exchange(ax: Axes, dataset: xr.Dataset, options: Exchange) -> Axes:
    """Warm water made, destroyed, lost where the layer outcrops, and carried northward (Sv).

    The outcrop has a line only where there is one; what is carried is left out of the rates per degree.
    """
    place = fields.degrees_of(Geometry.of(dataset))
    rates = fields.exchange_south_of(dataset)
    per_degree = options.form == "per_degree"
    mark_zero(ax)
    for (name, label), line in zip(_EXCHANGE_LABELS.items(), LINES, strict=False):
        if name == "outcrop" and not rates[name].any():
            continue
        if not per_degree:
            ax.plot(place.y_face, rates[name], label=label, **line._asdict())
        elif name != "overturning":
            ax.plot(place.y, np.diff(rates[name]) / np.diff(place.y_face), label=label, **line._asdict())
    label_y(ax, "Warm water (Sv per degree)" if per_degree else "Warm water (Sv)")
    legend_above(ax, frame=ax)
    label_latitude(ax, "x", place.y_face[0], place.y_face[-1])
    return ax
