"""The one place where configuration, grid, forcing and equations meet."""

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from oceanbox import forcing as fields
from oceanbox.budgets import Water
from oceanbox.config import Config
from oceanbox.config.exchange import CoolingEfficiency
from oceanbox.config.fields import FieldSpec
from oceanbox.constants import SECONDS_PER_DAY
from oceanbox.grid import Grid, build_grid, to_degrees
from oceanbox.physics.state import Constants, Forcing, State

__all__ = ["Setup", "SurfaceMaps", "assemble_setup", "expansion_at_abyss"]

Array = NDArray[np.float64]
ZONAL_STRESS = "surface.wind.zonal_stress_N_per_m2"
MERIDIONAL_STRESS = "surface.wind.meridional_stress_N_per_m2"


@dataclass(frozen=True)
class SurfaceMaps:
    """The forcing as it is reported: plain arrays in the units of the result file."""

    wind_stress_x: Array  # (ny, nx+1), Pa
    wind_stress_y: Array  # (ny+1, nx), Pa
    target_temperature: Array  # (ny, nx), degC; the abyss's where nothing restores
    restoring_coefficient: Array  # (ny, nx), W m-2 K-1
    prescribed_heat_flux: Array  # (ny, nx), W m-2
    precipitation_minus_evaporation: Array  # (ny, nx), m s-1


@dataclass(frozen=True)
class Setup:
    """Everything a model is made of."""

    config: Config
    grid: Grid
    constants: Constants
    forcing: Forcing
    maps: SurfaceMaps
    initial: State
    water: Water


class _Evaluator:
    """Field descriptions of a configuration on the points of one grid; ``key`` is the dotted key, for messages."""

    def __init__(self, grid: Grid) -> None:
        self.grid = grid
        self.walls = (float(grid.y_face[0]), float(grid.y_face[-1]))

    def _at(self, field: FieldSpec, x: Array, y: Array, unit: str, key: str) -> Array:
        return fields.evaluate(field, to_degrees(y), to_degrees(x), y, x, self.walls, unit, key)

    def centres(self, field: FieldSpec, unit: str, key: str) -> Array:
        return self._at(field, self.grid.x, self.grid.y, unit, key)

    def x_faces(self, field: FieldSpec, unit: str, key: str) -> Array:
        return self._at(field, self.grid.x_face, self.grid.y, unit, key)

    def y_faces(self, field: FieldSpec, unit: str, key: str) -> Array:
        return self._at(field, self.grid.x, self.grid.y_face, unit, key)


def expansion_at_abyss(config: Config) -> tuple[float, float]:
    """alpha at the temperature of the abyss [K-1] and its slope [K-2] of the configured equation of state."""
    water = config.water
    if water.equation_of_state == "linear":
        return water.thermal_expansion_per_K, 0.0
    slope = water.thermal_expansion_slope_per_K2
    return water.thermal_expansion_at_0degC_per_K + slope * water.abyss_temperature_degC, slope


def _salty(config: Config) -> bool:
    """Whether any salinity can ever differ from the abyss's."""
    abyss = config.water.abyss_salinity_g_per_kg
    fresh = config.surface.fresh_water is not None
    return fresh or any(layer.initial_salinity_g_per_kg != abyss for layer in config.layers)


def _constants(config: Config, grid: Grid) -> Constants:
    expansion, slope = expansion_at_abyss(config)
    motion, entrainment, outcrop = config.motion, config.entrainment, config.outcrop
    upwelling, diffusive, shoaling = entrainment.upwelling, entrainment.diffusive, entrainment.shoaling
    transformation = config.transformation
    efficiency, efficiency_scale = 0.0, math.inf
    if transformation is not None:
        rule = transformation.efficiency
        if isinstance(rule, CoolingEfficiency):
            efficiency, efficiency_scale = 1.0, rule.scale_K
        else:
            efficiency = rule.value
    floor = 0.0
    if transformation is not None:
        floor = transformation.floor_thickness_m
    elif shoaling is not None:
        floor = shoaling.minimum_thickness_m
    return Constants(
        dx=grid.dx,
        dy=grid.dy,
        periodic_x=grid.periodic_x,
        tangential_sign=-1.0 if grid.no_slip else 1.0,
        momentum_advection=motion.momentum_advection and motion.linear_about_depth_m is None,
        salty=_salty(config),
        linear_depth=motion.linear_about_depth_m or 0.0,
        upwind_thickness=config.numerics.thickness_flux == "upwind_biased",
        centred_tracers=False,
        viscosity=motion.viscosity_m2_per_s,
        viscosity_on_transport=motion.viscosity_acts_on == "transport",
        diffusivity=config.mixing.lateral_diffusivity_m2_per_s,
        wind_ramp=config.surface.wind.ramp_days * SECONDS_PER_DAY,
        gravity=config.water.gravity_m_per_s2,
        expansion_abyss=expansion,
        expansion_slope=slope,
        contraction=config.water.haline_contraction_kg_per_g,
        mixed_depth=upwelling.mixed_layer_depth_m if upwelling else 0.0,
        half_thickness=upwelling.thermocline_half_thickness_m if upwelling else 1.0,
        diapycnal_diffusivity=diffusive.diffusivity_m2_per_s if diffusive else 0.0,
        shoaling_depth=shoaling.minimum_thickness_m if shoaling else 0.0,
        shoaling_time=shoaling.time_days * SECONDS_PER_DAY if shoaling else 1.0,
        efficiency=efficiency,
        efficiency_scale=efficiency_scale,
        floor_depth=floor,
        salt_carried=transformation is None or transformation.salt == "carried",
        outcrop_margin=outcrop.margin_K if outcrop else 0.0,
        outcrop_time=outcrop.time_days * SECONDS_PER_DAY if outcrop else 1.0,
    )


def _surface_maps(config: Config, on: _Evaluator) -> SurfaceMaps:
    grid, heat, wind = on.grid, config.surface.heat, config.surface.wind
    area = np.full((grid.ny, grid.nx), grid.cell_area)
    nothing = np.zeros((grid.ny, grid.nx))
    restoring = heat.restoring
    target = nothing + config.water.abyss_temperature_degC
    coefficient = nothing
    if restoring is not None:
        key = "surface.heat.restoring"
        target = on.centres(restoring.target_temperature_degC, "degC", f"{key}.target_temperature_degC")
        coefficient = on.centres(restoring.coefficient_W_per_m2_K, "W m-2 K-1", f"{key}.coefficient_W_per_m2_K")
        fields.require_at_least(coefficient, 0.0, "W m-2 K-1", f"{key}.coefficient_W_per_m2_K")
    prescribed = nothing
    if heat.prescribed_W_per_m2 is not None:
        prescribed = on.centres(heat.prescribed_W_per_m2, "W m-2", "surface.heat.prescribed_W_per_m2")
    if heat.loss_band is not None:
        prescribed = prescribed + fields.loss_band_flux(heat.loss_band, grid.latitude, area)
    rain = nothing
    if config.surface.fresh_water is not None:
        rain = fields.fresh_water_flux(
            config.surface.fresh_water, grid.latitude, grid.longitude, grid.y, grid.x, on.walls, area
        )
    return SurfaceMaps(
        wind_stress_x=on.x_faces(wind.zonal_stress_N_per_m2, "N m-2", ZONAL_STRESS),
        wind_stress_y=on.y_faces(wind.meridional_stress_N_per_m2, "N m-2", MERIDIONAL_STRESS),
        target_temperature=target,
        restoring_coefficient=coefficient,
        prescribed_heat_flux=prescribed,
        precipitation_minus_evaporation=rain,
    )


def _shear(config: Config, on: _Evaluator) -> tuple[Array, Array]:
    """Ekman shear velocity of the mixed layer on x and y faces, m s-1; none where the closure is off.

    r_s u_s - f v_s = tau_x/(rho0 H_m), r_s v_s + f u_s = tau_y/(rho0 H_m).
    """
    grid, wind, upwelling = on.grid, config.surface.wind, config.entrainment.upwelling
    if upwelling is None:
        return np.zeros((grid.ny, grid.nx + 1)), np.zeros((grid.ny + 1, grid.nx))
    damping = upwelling.shear_damping_per_day / SECONDS_PER_DAY
    load = config.water.reference_density_kg_per_m3 * upwelling.mixed_layer_depth_m
    tau_x, tau_y = wind.zonal_stress_N_per_m2, wind.meridional_stress_N_per_m2

    f = grid.coriolis(grid.y)[:, None]
    along, across = on.x_faces(tau_x, "N m-2", ZONAL_STRESS), on.x_faces(tau_y, "N m-2", MERIDIONAL_STRESS)
    u = (damping * along + f * across) / (load * (damping**2 + f**2))
    f = grid.coriolis(grid.y_face)[:, None]
    along, across = on.y_faces(tau_y, "N m-2", MERIDIONAL_STRESS), on.y_faces(tau_x, "N m-2", ZONAL_STRESS)
    v = (damping * along - f * across) / (load * (damping**2 + f**2))
    v[[0, -1]] = 0.0
    if not grid.periodic_x:
        u[:, [0, -1]] = 0.0
    return u, v


def _drag(config: Config, grid: Grid) -> tuple[Array, Array]:
    """Linear drag rate on x and y faces, s-1: uniform, plus a sponge rising as sin^2 towards its walls."""
    motion = config.motion
    base = motion.drag_per_day / SECONDS_PER_DAY

    def rate(x: Array, y: Array) -> Array:
        total = np.full((y.size, x.size), base)
        if motion.sponge is None:
            return total
        width = 1e3 * motion.sponge.width_km
        distances = {
            "west": x[None, :] - grid.x_face[0],
            "east": grid.x_face[-1] - x[None, :],
            "south": y[:, None] - grid.y_face[0],
            "north": grid.y_face[-1] - y[:, None],
        }
        for side in motion.sponge.sides:
            inside = np.clip(1.0 - distances[side] / width, 0.0, 1.0)
            total = total + motion.sponge.rate_per_day / SECONDS_PER_DAY * np.sin(0.5 * np.pi * inside) ** 2
        return total

    return rate(grid.x_face, grid.y), rate(grid.x, grid.y_face)


def _forcing(config: Config, on: _Evaluator, maps: SurfaceMaps) -> Forcing:
    grid, water = on.grid, config.water
    heat = water.reference_density_kg_per_m3 * water.heat_capacity_J_per_kg_K
    shear_x, shear_y = _shear(config, on)
    drag_x, drag_y = _drag(config, grid)
    fresh = config.surface.fresh_water
    reference_salinity = fresh.reference_salinity_g_per_kg if fresh else 0.0
    prescribed = np.zeros((grid.ny, grid.nx))
    if config.entrainment.prescribed is not None:
        key = "entrainment.prescribed.velocity_m_per_day"
        per_day = on.centres(config.entrainment.prescribed.velocity_m_per_day, "m day-1", key)
        fields.require_at_least(per_day, 0.0, "m day-1", key)
        prescribed = per_day / SECONDS_PER_DAY
    density = water.reference_density_kg_per_m3
    return Forcing(
        wind_x=grid.embed_x_faces(maps.wind_stress_x / density),
        wind_y=grid.embed_y_faces(maps.wind_stress_y / density),
        shear_x=grid.embed_x_faces(shear_x),
        shear_y=grid.embed_y_faces(shear_y),
        prescribed_heating=grid.embed_centres(maps.prescribed_heat_flux / heat),
        restoring_velocity=grid.embed_centres(maps.restoring_coefficient / heat),
        target_anomaly=grid.embed_centres(maps.target_temperature - water.abyss_temperature_degC),
        freshening=grid.embed_centres(reference_salinity * maps.precipitation_minus_evaporation),
        prescribed_entrainment=grid.embed_centres(prescribed),
        drag_x=grid.embed_x_faces(drag_x),
        drag_y=grid.embed_y_faces(drag_y),
        coriolis=grid.coriolis_at_corners(),
    )


def _initial_state(config: Config, on: _Evaluator) -> State:
    """The layers at rest, with the configured thickness, temperature and salinity."""
    grid, water = on.grid, config.water

    def stacked(name: str, unit: str) -> Array:
        keys = [f"layers.{number}.{name}" for number in range(len(config.layers))]
        return np.stack(
            [on.centres(getattr(layer, name), unit, key) for layer, key in zip(config.layers, keys, strict=True)]
        )

    thickness = stacked("initial_thickness_m", "m")
    for number, layer in enumerate(thickness):
        fields.require_above(layer, 0.0, "m", f"layers.{number}.initial_thickness_m")
    theta = stacked("initial_temperature_degC", "degC")
    sigma = stacked("initial_salinity_g_per_kg", "g kg-1")
    theta = theta - water.abyss_temperature_degC
    sigma = sigma - water.abyss_salinity_g_per_kg
    at_rest = np.zeros((len(config.layers), *grid.shape))
    return State(
        thickness=grid.embed_centres(thickness),
        heat=grid.embed_centres(thickness * theta),
        salt=grid.embed_centres(thickness * sigma),
        velocity_x=at_rest,
        velocity_y=at_rest.copy(),
    )


def assemble_setup(config: Config) -> Setup:
    """Grid, forcing, constants and initial state of a configuration.  Raises ConfigError for a field that cannot be used."""
    grid = build_grid(config)
    on = _Evaluator(grid)
    maps = _surface_maps(config, on)
    return Setup(
        config=config,
        grid=grid,
        constants=_constants(config, grid),
        forcing=_forcing(config, on, maps),
        maps=maps,
        initial=_initial_state(config, on),
        water=Water(config.water.reference_density_kg_per_m3, config.water.heat_capacity_J_per_kg_K),
    )
