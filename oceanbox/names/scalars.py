"""Single numbers."""

from __future__ import annotations

from oceanbox.names.variable import (
    DESTROYED,
    DIFFERENCE,
    INTO_THE_OCEAN,
    MADE,
    ON_SCALE,
    Attributes,
    Variable,
)

_DOWN = "positive: below the sea surface"
_LOSS = "positive: a loss"
_NO_TONGUE = "zero: no cold tongue"


def _scalar(
    name: str,
    long_name: str,
    units: str,
    sign: str | None = None,
    standard_name: str | None = None,
    attributes: Attributes = (),
) -> Variable:
    return Variable(name, long_name, units, (), "scalar", standard_name, sign, "window: mean", attributes)


SCALARS: tuple[Variable, ...] = (
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
    _scalar("thermocline_depth_equator_mean", "thermocline depth on the equator, mean over longitude", "m", _DOWN),
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
        attributes=ON_SCALE,
    ),
    _scalar(
        "surface_temperature_equator_east",
        "surface temperature on the equator, eastern eighth of the basin",
        "degC",
        standard_name="sea_surface_temperature",
        attributes=ON_SCALE,
    ),
    _scalar("cold_tongue_area", "area of the cold tongue", "m2", _NO_TONGUE),
    _scalar(
        "cold_tongue_reach",
        "westward reach of the cold tongue along the equator from the eastern wall",
        "m",
        _NO_TONGUE,
    ),
    _scalar(
        "cold_tongue_mean_deficit",
        "mean temperature of the cold tongue below the equatorial warm pool",
        "K",
        "positive: colder than the warm pool; zero: no cold tongue",
        attributes=DIFFERENCE,
    ),
    _scalar(
        "cold_tongue_peak_deficit",
        "lowest temperature of the cold tongue below the equatorial warm pool",
        "K",
        "positive: colder than the warm pool; zero: no cold tongue",
        attributes=DIFFERENCE,
    ),
    _scalar("tropical_heat_gain", "surface heat gain of the tropics", "W", INTO_THE_OCEAN),
    _scalar("total_heat_gain", "surface heat flux integrated where the ocean gains heat", "W", "never negative"),
    _scalar("total_heat_loss", "surface heat flux integrated where the ocean loses heat", "W", _LOSS),
    _scalar("applied_high_latitude_loss", "surface heat loss poleward of the subtropics as applied", "W", _LOSS),
    _scalar("heat_imbalance", "size of net surface heat flux and outcrop loss over the absolute surface flux", "1"),
    _scalar("entrainment_total", "entrainment by all closures", "m3 s-1", MADE),
    _scalar("entrainment_upwelling_total", "entrainment by upwelling through the mixed-layer base", "m3 s-1", MADE),
    _scalar("entrainment_diffusive_total", "entrainment by vertical diffusion", "m3 s-1", MADE),
    _scalar("entrainment_shoaling_total", "entrainment that keeps a shoaling layer from vanishing", "m3 s-1", MADE),
    _scalar("entrainment_prescribed_total", "prescribed entrainment", "m3 s-1", MADE),
    _scalar("transformation_total", "transformation of warm water into abyssal water", "m3 s-1", DESTROYED),
    _scalar("outcrop_total", "warm water handed to the abyss where the layer outcrops", "m3 s-1", DESTROYED),
    _scalar("exchange_imbalance", "size of entrainment minus all losses to the abyss over entrainment", "1"),
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
