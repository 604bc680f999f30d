"""The one table of variables: short name, long name, CF standard name or none, unit, place on the grid, sign.

Every writer, budget, diagnostic and figure looks a name up here, so a unit or a sign is stated once.
`lookup` also knows three rules that derive an entry from another one:

    <name>_std      standard deviation within the window, of a state field or a scalar
    series_<name>   a scalar as a function of time (mean over the interval that ends at each time)
    region_<name>   a budget map integrated over each region

Units are UDUNITS strings. Standard names are from the CF standard-name table, version 93; where that table has no
name for a quantity there is none here either.
"""

from __future__ import annotations

import difflib
from collections.abc import Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import Literal

Group = Literal[
    "state",  # window means of the model state
    "forcing",  # what the run was given; constant in the file
    "volume_budget",
    "heat_budget",
    "salt_budget",
    "heat_transport",  # through cell faces
    "latitude",  # functions of the northward face coordinate
    "scalar",
    "series",
    "region",
]

STD_SUFFIX = "_std"
SERIES_PREFIX = "series_"
REGION_PREFIX = "region_"

CENTRE = ("y", "x")
X_FACE = ("y", "x_face")
Y_FACE = ("y_face", "x")
LAYER_CENTRE = ("layer", *CENTRE)
LAYER_X_FACE = ("layer", *X_FACE)
LAYER_Y_FACE = ("layer", *Y_FACE)

REGIONS = (
    "southern_high_latitudes",
    "southern_subtropics",
    "tropics",
    "northern_subtropics",
    "northern_high_latitudes",
)

Attributes = tuple[tuple[str, str], ...]
_ON_SCALE: Attributes = (("units_metadata", "temperature: on_scale"),)
_DIFFERENCE: Attributes = (("units_metadata", "temperature: difference"),)


@dataclass(frozen=True)
class Variable:
    """What a file says about one variable.

    sign        what a positive number means, or which sign occurs; one phrase, written into `comment`
    attributes  further CF attributes as (name, text) pairs, such as `units_metadata`
    """

    name: str
    long_name: str
    units: str
    dims: tuple[str, ...]
    group: Group
    standard_name: str | None = None
    sign: str | None = None
    cell_methods: str | None = None
    attributes: Attributes = ()


class UnknownVariableError(KeyError):
    """A name that the table of variables does not hold."""

    def __init__(self, name: str) -> None:
        super().__init__(name)
        self.name = name
        self.near = tuple(difflib.get_close_matches(name, all_names(), n=4, cutoff=0.5))

    def __str__(self) -> str:
        nearest = f"nearest names: {', '.join(self.near)}" if self.near else "no name is near it"
        return f"unknown variable: got {self.name!r}; {nearest}; the table is oceanbox/names.py"


def _state(
    name: str,
    long_name: str,
    units: str,
    dims: tuple[str, ...],
    standard_name: str | None = None,
    sign: str | None = None,
    attributes: Attributes = (),
) -> Variable:
    cells = {"x_face": "y: mean", "y_face": "x: mean"}
    over = next((cells[dim] for dim in dims if dim in cells), "area: mean")
    methods = f"window: mean {over}"
    return Variable(name, long_name, units, dims, "state", standard_name, sign, methods, attributes)


def _forcing(
    name: str,
    long_name: str,
    units: str,
    dims: tuple[str, ...],
    standard_name: str | None = None,
    sign: str | None = None,
    attributes: Attributes = (),
) -> Variable:
    return Variable(name, long_name, units, dims, "forcing", standard_name, sign, None, attributes)


_BUDGET_UNITS: dict[str, tuple[str, str]] = {  # group: (map, integral over an area)
    "volume_budget": ("m s-1", "m3 s-1"),
    "heat_budget": ("W m-2", "W"),
    "salt_budget": ("kg m-2 s-1", "kg s-1"),
}


def _term(
    group: Literal["volume_budget", "heat_budget", "salt_budget"],
    name: str,
    long_name: str,
    standard_name: str | None = None,
    sign: str = "positive: the warm layer gains",
) -> Variable:
    units, _ = _BUDGET_UNITS[group]
    return Variable(name, long_name, units, CENTRE, group, standard_name, sign, "window: mean area: mean")


def _face_flux(name: str, long_name: str, dims: tuple[str, ...], sign: str) -> Variable:
    over = "y: mean" if "x_face" in dims else "x: mean"
    return Variable(name, long_name, "W m-1", dims, "heat_transport", None, sign, f"window: mean {over}")


def _latitude(name: str, long_name: str, units: str, sign: str, standard_name: str | None = None) -> Variable:
    return Variable(name, long_name, units, ("y_face",), "latitude", standard_name, sign, "window: mean")


def _scalar(
    name: str,
    long_name: str,
    units: str,
    sign: str | None = None,
    standard_name: str | None = None,
    attributes: Attributes = (),
) -> Variable:
    return Variable(name, long_name, units, (), "scalar", standard_name, sign, "window: mean", attributes)


_DOWN = "positive: below the sea surface"
_EAST = "positive: eastward"
_NORTH = "positive: northward"
_DOWNWARD = "positive: into the ocean"
_DESTROYED = "positive: warm water destroyed"
_MADE = "positive: warm water made"

_ENTRIES: tuple[Variable, ...] = (
    # State, window means
    _state("thickness", "thickness of the layer", "m", LAYER_CENTRE, "cell_thickness"),
    _state(
        "temperature",
        "layer-mean Conservative Temperature",
        "degC",
        LAYER_CENTRE,
        "sea_water_conservative_temperature",
        attributes=_ON_SCALE,
    ),
    _state("salinity", "layer-mean Absolute Salinity", "g kg-1", LAYER_CENTRE, "sea_water_absolute_salinity"),
    _state(
        "reduced_gravity",
        "buoyancy of the layer relative to the abyss",
        "m s-2",
        LAYER_CENTRE,
        sign="positive: lighter than the abyss",
    ),
    _state(
        "velocity_x", "eastward layer-mean velocity", "m s-1", LAYER_X_FACE, "sea_water_x_velocity", _EAST
    ),
    _state(
        "velocity_y", "northward layer-mean velocity", "m s-1", LAYER_Y_FACE, "sea_water_y_velocity", _NORTH
    ),
    _state(
        "transport_x",
        "eastward volume transport of the layer per unit width",
        "m2 s-1",
        LAYER_X_FACE,
        sign=_EAST,
    ),
    _state(
        "transport_y",
        "northward volume transport of the layer per unit width",
        "m2 s-1",
        LAYER_Y_FACE,
        sign=_NORTH,
    ),
    _state("thermocline_depth", "depth of the base of the warm water", "m", CENTRE, sign=_DOWN),
    # Forcing
    _forcing(
        "wind_stress_x",
        "eastward wind stress on the sea surface",
        "N m-2",
        X_FACE,
        "surface_downward_x_stress",
        _EAST,
    ),
    _forcing(
        "wind_stress_y",
        "northward wind stress on the sea surface",
        "N m-2",
        Y_FACE,
        "surface_downward_y_stress",
        _NORTH,
    ),
    _forcing(
        "target_temperature",
        "temperature towards which the surface heat flux restores",
        "degC",
        CENTRE,
        attributes=_ON_SCALE,
    ),
    _forcing(
        "restoring_coefficient",
        "restoring heat flux per degree below the target temperature",
        "W m-2 K-1",
        CENTRE,
        attributes=_DIFFERENCE,
    ),
    _forcing(
        "prescribed_heat_flux",
        "surface heat flux asked for, before any limit where the layer outcrops",
        "W m-2",
        CENTRE,
        sign=_DOWNWARD,
    ),
    _forcing(
        "precipitation_minus_evaporation", "precipitation minus evaporation", "m s-1", CENTRE, sign=_DOWNWARD
    ),
    _forcing("coriolis", "Coriolis parameter at cell centres", "s-1", CENTRE[:1], "coriolis_parameter"),
    _forcing("cell_area", "area of the cell", "m2", CENTRE, "cell_area"),
    # Volume budget
    _term("volume_budget", "volume_convergence", "convergence of the layer's volume transport"),
    _term("volume_budget", "entrainment_upwelling", "entrainment by upwelling through the mixed-layer base"),
    _term("volume_budget", "entrainment_diffusive", "entrainment by vertical diffusion"),
    _term("volume_budget", "entrainment_shoaling", "entrainment that keeps a shoaling layer from vanishing"),
    _term("volume_budget", "entrainment_prescribed", "prescribed entrainment"),
    _term(
        "volume_budget",
        "transformation",
        "warm water turned into abyssal water by surface buoyancy loss",
        sign="never positive: the warm layer loses",
    ),
    _term("volume_budget", "outcrop_volume", "volume handed to the abyss where the layer outcrops"),
    _term("volume_budget", "volume_storage", "rate of change of layer volume"),
    _term("volume_budget", "volume_residual", "volume storage minus the sum of all other volume terms"),
    # Heat budget
    _term("heat_budget", "heat_flux_prescribed", "prescribed surface heat flux as applied"),
    _term(
        "heat_budget",
        "heat_flux_restoring",
        "restoring surface heat flux as applied",
        "heat_flux_into_sea_water_due_to_newtonian_relaxation",
    ),
    _term(
        "heat_budget",
        "surface_heat_flux",
        "net surface heat flux as applied",
        "surface_downward_heat_flux_in_sea_water",
    ),
    _term("heat_budget", "heat_advection", "convergence of advective heat transport relative to the abyss"),
    _term("heat_budget", "heat_mixing", "convergence of diffusive heat transport"),
    _term("heat_budget", "outcrop_heat", "heat handed to the abyss where the layer outcrops"),
    _term("heat_budget", "heat_storage", "rate of change of heat content relative to the abyss"),
    _term("heat_budget", "heat_residual", "heat storage minus the sum of all other heat terms"),
    # Salt budget
    _term(
        "salt_budget",
        "virtual_salt_flux",
        "virtual salt flux of precipitation minus evaporation",
        "virtual_salt_flux_into_sea_water",
    ),
    _term("salt_budget", "salt_advection", "convergence of advective salt transport relative to the abyss"),
    _term("salt_budget", "salt_mixing", "convergence of diffusive salt transport"),
    _term("salt_budget", "transformation_salt", "salt carried into the abyss by transformed water"),
    _term("salt_budget", "outcrop_salt", "salt handed to the abyss where the layer outcrops"),
    _term("salt_budget", "salt_storage", "rate of change of salt content relative to the abyss"),
    _term("salt_budget", "salt_residual", "salt storage minus the sum of all other salt terms"),
    # Heat transport through faces
    _face_flux(
        "heat_transport_x",
        "eastward advective heat transport per unit width, relative to the abyss",
        X_FACE,
        _EAST,
    ),
    _face_flux(
        "heat_transport_y",
        "northward advective heat transport per unit width, relative to the abyss",
        Y_FACE,
        _NORTH,
    ),
    _face_flux("heat_diffusion_x", "eastward diffusive heat transport per unit width", X_FACE, _EAST),
    _face_flux("heat_diffusion_y", "northward diffusive heat transport per unit width", Y_FACE, _NORTH),
    # By latitude
    _latitude(
        "northward_heat_transport",
        "northward heat transport across the latitude, from the face fluxes",
        "W",
        _NORTH,
        "northward_ocean_heat_transport",
    ),
    _latitude(
        "northward_heat_transport_from_surface",
        "northward heat transport implied by surface flux, outcrop and storage south of the latitude",
        "W",
        _NORTH,
    ),
    _latitude(
        "entrainment_south_of",
        "entrainment by all closures, integrated from the southern wall",
        "m3 s-1",
        _MADE,
    ),
    _latitude(
        "transformation_south_of",
        "transformation into abyssal water, integrated from the southern wall",
        "m3 s-1",
        _DESTROYED,
    ),
    _latitude(
        "overturning",
        "northward volume transport of the warm water across the latitude",
        "m3 s-1",
        _NORTH,
        "ocean_volume_y_transport",
    ),
    # Scalars
    _scalar(
        "thermocline_depth_equator_west",
        "thermocline depth on the equator, western eighth of the basin",
        "m",
        _DOWN,
    ),
    _scalar(
        "thermocline_depth_equator_east",
        "thermocline depth on the equator, eastern eighth of the basin",
        "m",
        _DOWN,
    ),
    _scalar(
        "thermocline_depth_equator_mean", "thermocline depth on the equator, mean over longitude", "m", _DOWN
    ),
    _scalar(
        "equatorial_tilt",
        "western minus eastern thermocline depth on the equator",
        "m",
        "positive: deeper in the west",
    ),
    _scalar("thermocline_depth_basin_mean", "thermocline depth, mean over the basin", "m", _DOWN),
    _scalar(
        "surface_temperature_equator_west",
        "surface temperature on the equator, western eighth of the basin",
        "degC",
        standard_name="sea_surface_temperature",
        attributes=_ON_SCALE,
    ),
    _scalar(
        "surface_temperature_equator_east",
        "surface temperature on the equator, eastern eighth of the basin",
        "degC",
        standard_name="sea_surface_temperature",
        attributes=_ON_SCALE,
    ),
    _scalar("cold_tongue_area", "area of the cold tongue", "m2", "zero: no cold tongue"),
    _scalar(
        "cold_tongue_reach",
        "westward reach of the cold tongue along the equator from the eastern wall",
        "m",
        "zero: no cold tongue",
    ),
    _scalar(
        "cold_tongue_mean_deficit",
        "mean temperature of the cold tongue below the equatorial warm pool",
        "K",
        "positive: colder than the warm pool; zero: no cold tongue",
        attributes=_DIFFERENCE,
    ),
    _scalar(
        "cold_tongue_peak_deficit",
        "lowest temperature of the cold tongue below the equatorial warm pool",
        "K",
        "positive: colder than the warm pool; zero: no cold tongue",
        attributes=_DIFFERENCE,
    ),
    _scalar("tropical_heat_gain", "surface heat gain of the tropics", "W", _DOWNWARD),
    _scalar(
        "total_heat_gain", "surface heat flux integrated where the ocean gains heat", "W", "never negative"
    ),
    _scalar(
        "total_heat_loss", "surface heat flux integrated where the ocean loses heat", "W", "positive: a loss"
    ),
    _scalar(
        "applied_high_latitude_loss",
        "surface heat loss poleward of the subtropics as applied",
        "W",
        "positive: a loss",
    ),
    _scalar("heat_imbalance", "size of the net surface heat flux over that of its absolute value", "1"),
    _scalar("entrainment_total", "entrainment by all closures", "m3 s-1", _MADE),
    _scalar(
        "entrainment_upwelling_total",
        "entrainment by upwelling through the mixed-layer base",
        "m3 s-1",
        _MADE,
    ),
    _scalar("entrainment_diffusive_total", "entrainment by vertical diffusion", "m3 s-1", _MADE),
    _scalar(
        "entrainment_shoaling_total",
        "entrainment that keeps a shoaling layer from vanishing",
        "m3 s-1",
        _MADE,
    ),
    _scalar("entrainment_prescribed_total", "prescribed entrainment", "m3 s-1", _MADE),
    _scalar("transformation_total", "transformation of warm water into abyssal water", "m3 s-1", _DESTROYED),
    _scalar("exchange_imbalance", "size of entrainment minus transformation over entrainment", "1"),
    _scalar("warm_water_volume", "volume of the warm water", "m3"),
    _scalar("heat_content", "heat content of the warm water relative to the abyss", "J"),
    _scalar("salt_content", "salt content of the warm water relative to the abyss", "kg"),
    _scalar("sverdrup_transport", "largest Sverdrup transport of the wind stress curl", "m3 s-1"),
    _scalar("gyre_transport", "largest transport of the circulation at its gyre centres", "m3 s-1"),
    _scalar("western_boundary_transport", "largest transport of the western boundary current", "m3 s-1"),
    _scalar("kinetic_energy", "kinetic energy of the warm water", "J"),
    _scalar("wave_speed", "speed of long internal gravity waves", "m s-1"),
    _scalar("equatorial_radius", "equatorial radius of deformation", "m"),
)

VARIABLES: Mapping[str, Variable] = MappingProxyType({entry.name: entry for entry in _ENTRIES})

_WITH_STD = ("thickness", "temperature", "salinity", "velocity_x", "velocity_y", "thermocline_depth")


def _std(base: Variable) -> Variable:
    """Standard deviation within the window; of a temperature it is a difference, in K."""
    on_scale = base.attributes == _ON_SCALE
    return replace(
        base,
        name=base.name + STD_SUFFIX,
        long_name=f"{base.long_name}: standard deviation within the window",
        units="K" if on_scale else base.units,
        sign=None,
        cell_methods="window: standard_deviation",
        attributes=_DIFFERENCE if on_scale else base.attributes,
    )


def _series(base: Variable) -> Variable:
    name = SERIES_PREFIX + base.name
    return replace(base, name=name, dims=("time",), group="series", cell_methods="time: mean")


def _region(base: Variable) -> Variable:
    return replace(
        base,
        name=REGION_PREFIX + base.name,
        long_name=f"{base.long_name}, integrated over the region",
        units=_BUDGET_UNITS[base.group][1],
        dims=("region",),
        group="region",
        standard_name=None,
        cell_methods="window: mean",
    )


_ALL: Mapping[str, Variable] = MappingProxyType(
    dict(VARIABLES)
    | {v.name: v for v in (_std(VARIABLES[name]) for name in _WITH_STD)}
    | {v.name: v for base in _ENTRIES if base.group == "scalar" for v in (_std(base), _series(base))}
    | {v.name: v for v in (_region(base) for base in _ENTRIES if base.group in _BUDGET_UNITS)}
)


def all_names() -> tuple[str, ...]:
    """Every name a file may hold, base entries first, then the derived ones."""
    return tuple(_ALL)


def in_group(group: Group) -> tuple[str, ...]:
    """Names of one group in table order, without their `_std` companions."""
    return tuple(name for name, v in _ALL.items() if v.group == group and not name.endswith(STD_SUFFIX))


def lookup(name: str) -> Variable:
    """The entry of `name`, whether it stands in the table or is derived by a rule.

    Raises `UnknownVariableError`, a KeyError that lists the nearest names.
    """
    try:
        return _ALL[name]
    except KeyError:
        raise UnknownVariableError(name) from None
