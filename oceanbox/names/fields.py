"""State and forcing on the grid."""

from __future__ import annotations

from oceanbox.names.variable import (
    CENTRE,
    DIFFERENCE,
    EASTWARD,
    INTO_THE_OCEAN,
    LAYER_CENTRE,
    LAYER_X_FACE,
    LAYER_Y_FACE,
    NORTHWARD,
    ON_SCALE,
    X_FACE,
    Y_FACE,
    Attributes,
    Variable,
    mean_over_cell_and_window,
)


def _state(
    name: str,
    long_name: str,
    units: str,
    dims: tuple[str, ...],
    standard_name: str | None = None,
    sign: str | None = None,
    attributes: Attributes = (),
) -> Variable:
    methods = mean_over_cell_and_window(dims)
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


STATE: tuple[Variable, ...] = (
    _state("thickness", "thickness of the layer", "m", LAYER_CENTRE, "cell_thickness"),
    _state(
        "temperature",
        "layer-mean Conservative Temperature",
        "degC",
        LAYER_CENTRE,
        "sea_water_conservative_temperature",
        attributes=ON_SCALE,
    ),
    _state("salinity", "layer-mean Absolute Salinity", "g kg-1", LAYER_CENTRE, "sea_water_absolute_salinity"),
    _state(
        "reduced_gravity",
        "buoyancy of the layer relative to the abyss",
        "m s-2",
        LAYER_CENTRE,
        sign="positive: lighter than the abyss",
    ),
    _state("velocity_x", "eastward layer-mean velocity", "m s-1", LAYER_X_FACE, "sea_water_x_velocity", EASTWARD),
    _state(
        "velocity_y",
        "northward layer-mean velocity",
        "m s-1",
        LAYER_Y_FACE,
        "sea_water_y_velocity",
        NORTHWARD,
    ),
    _state(
        "transport_x",
        "eastward volume transport of the layer per unit width",
        "m2 s-1",
        LAYER_X_FACE,
        sign=EASTWARD,
    ),
    _state(
        "transport_y",
        "northward volume transport of the layer per unit width",
        "m2 s-1",
        LAYER_Y_FACE,
        sign=NORTHWARD,
    ),
    _state(
        "thermocline_depth",
        "depth of the base of the warm water",
        "m",
        CENTRE,
        sign="positive: below the sea surface",
    ),
)

FORCING: tuple[Variable, ...] = (
    _forcing(
        "wind_stress_x",
        "eastward wind stress on the sea surface",
        "N m-2",
        X_FACE,
        "surface_downward_x_stress",
        EASTWARD,
    ),
    _forcing(
        "wind_stress_y",
        "northward wind stress on the sea surface",
        "N m-2",
        Y_FACE,
        "surface_downward_y_stress",
        NORTHWARD,
    ),
    _forcing(
        "target_temperature",
        "temperature towards which the surface heat flux restores",
        "degC",
        CENTRE,
        attributes=ON_SCALE,
    ),
    _forcing(
        "restoring_coefficient",
        "restoring heat flux per degree below the target temperature",
        "W m-2 K-1",
        CENTRE,
        attributes=DIFFERENCE,
    ),
    _forcing(
        "prescribed_heat_flux",
        "surface heat flux asked for, before any limit where the layer outcrops",
        "W m-2",
        CENTRE,
        sign=INTO_THE_OCEAN,
    ),
    _forcing(
        "precipitation_minus_evaporation",
        "precipitation minus evaporation",
        "m s-1",
        CENTRE,
        sign=INTO_THE_OCEAN,
    ),
    _forcing("coriolis", "Coriolis parameter at cell centres", "s-1", CENTRE[:1], "coriolis_parameter"),
    _forcing("cell_area", "area of the cell", "m2", CENTRE, "cell_area"),
)
