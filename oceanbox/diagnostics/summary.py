"""Everything a result reports beyond its window-mean fields and budget maps, in one call."""

from __future__ import annotations

from typing import TYPE_CHECKING

from oceanbox.diagnostics.budgets_by_region import by_region
from oceanbox.diagnostics.contents import contents_of
from oceanbox.diagnostics.exchange import heat_exchange_of, volume_exchange_of
from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.gyres import circulation
from oceanbox.diagnostics.labelled import array_of, scalars
from oceanbox.diagnostics.probe import Probe
from oceanbox.diagnostics.reference import Reference
from oceanbox.diagnostics.scales import equatorial_scales
from oceanbox.diagnostics.transports import exchange_by_latitude, heat_transport_by_latitude

if TYPE_CHECKING:
    import xarray as xr

__all__ = ["sampled_from_means", "summarise"]


def sampled_from_means(dataset: xr.Dataset, contrast_K: float) -> xr.Dataset:
    """The scalars a probe samples, here of the mean state, as 0-d variables.

    Depths and temperatures are linear, so they are the means of the samples; the cold tongue is that of the
    mean temperature. Raises UnreadableResult if thickness or temperature is missing or not finite.
    """
    probe = Probe(Geometry.of(dataset), contrast_K)
    sampled = probe(array_of(dataset, "thickness"), array_of(dataset, "temperature"))
    return scalars(sampled._asdict())


def summarise(dataset: xr.Dataset, reference: Reference | None = None) -> xr.Dataset:
    """The dataset with every derived function of latitude, region integral and scalar added.

    dataset    window-mean fields, forcing maps, budget maps and face fluxes of a result
    reference  density, heat capacity, abyss and the like; read from the file's configuration when not given

    Variables of the same name are replaced; nothing else changes, and the input is left alone. Raises
    UnreadableResult if a variable or a reference value is missing, or a field is not finite.
    """
    against = reference or Reference.from_attributes(dataset.attrs)
    regions = by_region(dataset)
    parts = (
        sampled_from_means(dataset, against.cold_tongue_contrast_K),
        heat_exchange_of(dataset),
        volume_exchange_of(dataset),
        contents_of(dataset, against),
        circulation(dataset, against),
        equatorial_scales(dataset),
        heat_transport_by_latitude(dataset),
        exchange_by_latitude(dataset),
        regions,
    )
    complete = dataset if "region" in dataset.coords else dataset.assign_coords(region=regions["region"])
    # Variables, not data arrays: the coordinates are the dataset's own already.
    return complete.assign({name: part[name].variable for part in parts for name in part.data_vars})
