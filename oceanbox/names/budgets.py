"""Terms of the volume, heat and salt budgets, and transports by face and by latitude."""

from __future__ import annotations

from typing import Literal

from oceanbox.names.variable import (
    CENTRE,
    DESTROYED,
    EASTWARD,
    GAIN,
    MADE,
    NORTHWARD,
    X_FACE,
    Y_FACE,
    Variable,
    mean_over_cell_and_window,
)

BudgetGroup = Literal["volume_budget", "heat_budget", "salt_budget"]

_UNITS: dict[BudgetGroup, str] = {
    "volume_budget": "m s-1",
    "heat_budget": "W m-2",
    "salt_budget": "kg m-2 s-1",
}
INTEGRAL_UNITS: dict[str, str] = {"volume_budget": "m3 s-1", "heat_budget": "W", "salt_budget": "kg s-1"}
"""Units of a budget map integrated over an area, by group."""


def _term(
    group: BudgetGroup, name: str, long_name: str, standard_name: str | None = None, sign: str = GAIN
) -> Variable:
    methods = mean_over_cell_and_window(CENTRE)
    return Variable(name, long_name, _UNITS[group], CENTRE, group, standard_name, sign, methods)


def _volume(name: str, long_name: str, sign: str = GAIN) -> Variable:
    return _term("volume_budget", name, long_name, sign=sign)


def _heat(name: str, long_name: str, standard_name: str | None = None) -> Variable:
    return _term("heat_budget", name, long_name, standard_name)


def _salt(name: str, long_name: str, standard_name: str | None = None) -> Variable:
    return _term("salt_budget", name, long_name, standard_name)


def _face_flux(name: str, long_name: str, dims: tuple[str, ...], sign: str) -> Variable:
    methods = mean_over_cell_and_window(dims)
    return Variable(name, long_name, "W m-1", dims, "heat_transport", None, sign, methods)


def _latitude(name: str, long_name: str, units: str, sign: str, standard_name: str | None = None) -> Variable:
    return Variable(name, long_name, units, ("y_face",), "latitude", standard_name, sign, "window: mean")


VOLUME_BUDGET: tuple[Variable, ...] = (
    _volume("volume_convergence", "convergence of the layer's volume transport"),
    _volume("entrainment_upwelling", "entrainment by upwelling through the mixed-layer base"),
    _volume("entrainment_diffusive", "entrainment by vertical diffusion"),
    _volume("entrainment_shoaling", "entrainment that keeps a shoaling layer from vanishing"),
    _volume("entrainment_prescribed", "prescribed entrainment"),
    _volume(
        "transformation",
        "warm water turned into abyssal water by surface buoyancy loss",
        sign="never positive: the warm layer loses",
    ),
    _volume("outcrop_volume", "volume handed to the abyss where the layer outcrops"),
    _volume("volume_storage", "rate of change of layer volume"),
    _volume("volume_residual", "volume storage minus the sum of all other volume terms"),
)

HEAT_BUDGET: tuple[Variable, ...] = (
    _heat("heat_flux_prescribed", "prescribed surface heat flux as applied"),
    _heat(
        "heat_flux_restoring",
        "restoring surface heat flux as applied",
        "heat_flux_into_sea_water_due_to_newtonian_relaxation",
    ),
    _heat("surface_heat_flux", "net surface heat flux as applied", "surface_downward_heat_flux_in_sea_water"),
    _heat("heat_advection", "convergence of advective heat transport relative to the abyss"),
    _heat("heat_mixing", "convergence of diffusive heat transport"),
    _heat("outcrop_heat", "heat handed to the abyss where the layer outcrops"),
    _heat("heat_storage", "rate of change of heat content relative to the abyss"),
    _heat("heat_residual", "heat storage minus the sum of all other heat terms"),
)

SALT_BUDGET: tuple[Variable, ...] = (
    _salt(
        "virtual_salt_flux",
        "virtual salt flux of precipitation minus evaporation",
        "virtual_salt_flux_into_sea_water",
    ),
    _salt("salt_advection", "convergence of advective salt transport relative to the abyss"),
    _salt("salt_mixing", "convergence of diffusive salt transport"),
    _salt("transformation_salt", "salt carried into the abyss by transformed water"),
    _salt("outcrop_salt", "salt handed to the abyss where the layer outcrops"),
    _salt("salt_storage", "rate of change of salt content relative to the abyss"),
    _salt("salt_residual", "salt storage minus the sum of all other salt terms"),
)

HEAT_TRANSPORT: tuple[Variable, ...] = (
    _face_flux(
        "heat_transport_x",
        "eastward advective heat transport per unit width, relative to the abyss",
        X_FACE,
        EASTWARD,
    ),
    _face_flux(
        "heat_transport_y",
        "northward advective heat transport per unit width, relative to the abyss",
        Y_FACE,
        NORTHWARD,
    ),
    _face_flux("heat_diffusion_x", "eastward diffusive heat transport per unit width", X_FACE, EASTWARD),
    _face_flux("heat_diffusion_y", "northward diffusive heat transport per unit width", Y_FACE, NORTHWARD),
)

BY_LATITUDE: tuple[Variable, ...] = (
    _latitude(
        "northward_heat_transport",
        "northward heat transport across the latitude, from the face fluxes",
        "W",
        NORTHWARD,
        "northward_ocean_heat_transport",
    ),
    _latitude(
        "northward_heat_transport_from_surface",
        "northward heat transport implied by surface flux, outcrop and storage south of the latitude",
        "W",
        NORTHWARD,
    ),
    _latitude(
        "entrainment_south_of",
        "entrainment by all closures, integrated from the southern wall",
        "m3 s-1",
        MADE,
    ),
    _latitude(
        "transformation_south_of",
        "transformation into abyssal water, integrated from the southern wall",
        "m3 s-1",
        DESTROYED,
    ),
    _latitude(
        "overturning",
        "northward volume transport of the warm water across the latitude",
        "m3 s-1",
        NORTHWARD,
        "ocean_volume_y_transport",
    ),
)
