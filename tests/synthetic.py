"""A result that no model ran: smooth formulas, closed budgets, the shape of a true result file.

The numbers are plausible, not physical. Whatever the transports converge, surface flux and storage are chosen
to balance, so every residual is round-off.
"""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime

import numpy as np
import xarray as xr
from numpy.typing import NDArray

from oceanbox import names
from oceanbox.diagnostics import Geometry, summarise
from oceanbox.output.axes import Axes
from oceanbox.output.dataset import assemble
from oceanbox.output.provenance import (
    CAUTION,
    CONFIG_ATTRIBUTE,
    IDENTITY_ATTRIBUTE,
    OUTCOME_ATTRIBUTE,
)

Array = NDArray[np.float64]

NX, NY = 30, 40
WIDTH, SOUTH, NORTH = 6.0e6, -5.0e6, 5.0e6
BETA = 2.28e-11
DENSITY, HEAT_CAPACITY, GRAVITY = 1025.0, 3991.868, 9.81
ABYSS_TEMPERATURE, ABYSS_SALINITY = 5.0, 35.0
DIFFUSIVITY = 500.0
WINDOW_DAYS = (60 * 365.25 - 730.5, 60 * 365.25)

CONFIG = f"""\
name: synthetic
basin: {{zonal_boundary: walls}}
water:
  reference_density_kg_per_m3: {DENSITY}
  heat_capacity_J_per_kg_K: {HEAT_CAPACITY}
  abyss_temperature_degC: {ABYSS_TEMPERATURE}
  abyss_salinity_g_per_kg: {ABYSS_SALINITY}
output: {{cold_tongue_contrast_K: 2.0}}
"""


@dataclass(frozen=True)
class Places:
    """The grid, and coordinates that broadcast to its fields: x (nx,) and degrees north (ny, 1)."""

    geometry: Geometry
    west_to_east: Array
    latitude: Array
    area: Array

    @classmethod
    def build(cls) -> Places:
        geometry = Geometry(np.linspace(0.0, WIDTH, NX + 1), np.linspace(SOUTH, NORTH, NY + 1))
        latitude = np.degrees(geometry.y / 6.371e6)[:, None]
        return cls(geometry, geometry.x[None, :] / WIDTH, latitude, geometry.cell_area)


@dataclass(frozen=True)
class Layer:
    """The state at centres, (ny, nx)."""

    thickness: Array
    temperature: Array
    salinity: Array
    reduced_gravity: Array


@dataclass(frozen=True)
class Flow:
    """Transports on faces, m2 s-1, and the exchange they were made to match, m s-1."""

    x: Array
    y: Array
    exchange: dict[str, Array]


def synthetic_result() -> xr.Dataset:
    """A whole result, with everything that `summarise` adds."""
    return summarise(synthetic_means())


def synthetic_means() -> xr.Dataset:
    """Fields, forcing, budgets, fluxes and series; nothing derived."""
    places = Places.build()
    layer = _layer(places)
    flow = _flow(places)
    fields = _state(layer, flow) | _wind(places) | flow.exchange
    fields |= _heat(places, layer, flow) | _salt(places, layer, flow)
    geometry = places.geometry
    axes = Axes(geometry.x, geometry.y, geometry.x_face, geometry.y_face, places.area, periodic_x=False)
    days: Array = np.arange(1, 366) * np.float64(60.0)
    days = days[days <= WINDOW_DAYS[1]]
    return assemble(fields, {}, _series(days), days, axes, WINDOW_DAYS, _attributes())


def _attributes() -> dict[str, str]:
    return {
        "Conventions": "CF-1.11, ACDD-1.3",
        "title": "synthetic",
        "comment": CAUTION,
        "date_created": datetime(2001, 1, 1, tzinfo=UTC).isoformat(),
        IDENTITY_ATTRIBUTE: "0123456789abcdef" * 4,
        OUTCOME_ATTRIBUTE: "equilibrium held for two windows in a row",
        CONFIG_ATTRIBUTE: CONFIG,
    }


def _bump(latitude: Array, centre: float, width: float) -> Array:
    return np.exp(-(((latitude - centre) / width) ** 2))


def _both(latitude: Array, centre: float, width: float) -> Array:
    return _bump(latitude, centre, width) + _bump(latitude, -centre, width)


def _layer(places: Places) -> Layer:
    e, lat = places.west_to_east, places.latitude
    thickness = 130 - 70 * (e - 0.5) * _bump(lat, 0, 12) + 120 * _both(lat, 24, 10) * (1 - 0.6 * e)
    poleward = np.clip((np.abs(lat) - 8) / 37, 0, 1)
    temperature = 27.5 - 21 * 0.5 * (1 - np.cos(np.pi * poleward)) + 1.5 * (1 - e) * _both(lat, 30, 12)
    temperature = temperature - 5.0 * np.exp(-(((1 - e) / 0.4) ** 2)) * _bump(lat, 0, 4.5)
    salinity = 35.0 + 0.8 * _both(lat, 22, 10) + 0.2 * _bump(lat, 0, 6) * e
    excess = temperature - ABYSS_TEMPERATURE
    expansion = 5.6e-5 * excess + 0.5 * 9.7e-6 * (temperature**2 - ABYSS_TEMPERATURE**2)
    gravity = GRAVITY * (expansion - 7.5e-4 * (salinity - ABYSS_SALINITY))
    return Layer(thickness, temperature, salinity, gravity)


def _flow(places: Places) -> Flow:
    exchange = _exchange(places)
    storage = exchange["volume_storage"]
    gained = sum(exchange.values()) - storage
    source = gained - storage
    dx, dy = places.geometry.dx, places.geometry.dy
    # Uniform in x northward, then eastward whatever is left: the walls stay closed as sources sum to zero.
    northward = np.concatenate(([0.0], np.cumsum((source * places.area).sum(axis=1)))) / WIDTH
    y = np.repeat(northward[:, None], NX, axis=1)
    x = np.zeros((NY, NX + 1))
    x[:, 1:] = np.cumsum((source - (y[1:] - y[:-1]) / dy[:, None]) * dx, axis=1)
    x[:, -1] = 0.0

    corner_x, corner_y = places.geometry.x_face[None, :] / WIDTH, places.geometry.y_face[:, None]
    swirl = 9.0e6 * np.sin(np.pi * corner_y / 3.3e6) * (1 - (corner_y / NORTH) ** 4)
    psi = swirl * (1 - corner_x) * (1 - np.exp(-corner_x / 0.07))
    y = y + np.diff(psi, axis=1) / dx
    x = x - np.diff(psi, axis=0) / dy[:, None]
    y[[0, -1]] = 0.0
    x[:, [0, -1]] = 0.0
    convergence = _convergence(x, y, places)
    residual = storage - (convergence + gained)
    return Flow(x, y, exchange | {"volume_convergence": convergence, "volume_residual": residual})


def _exchange(places: Places) -> dict[str, Array]:
    e, lat = places.west_to_east, places.latitude
    made = {
        "entrainment_upwelling": 3.2e-6 * _bump(lat, 0, 3.5) * (0.3 + 0.9 * e),
        "entrainment_diffusive": 5e-8 * (1 + 0 * e) * (1 + _bump(lat, 0, 15)),
        "entrainment_shoaling": 2e-8 * _bump(lat, 44, 3) * e,
        "entrainment_prescribed": np.zeros((NY, NX)),
    }
    outcrop = -3e-8 * _both(lat, 45, 2) * (1 + 0 * e)
    shape = (1.1 * _bump(lat, 36, 5) + 0.9 * _bump(lat, -36, 5)) * np.exp(-2 * e)
    total = float(sum((term * places.area).sum() for term in made.values()))
    destroyed = 0.97 * total / float((shape * places.area).sum()) * shape
    net = total + float(((outcrop - destroyed) * places.area).sum())
    storage = np.full((NY, NX), net / float(places.area.sum()))
    return made | {"transformation": -destroyed, "outcrop_volume": outcrop, "volume_storage": storage}


def _convergence(x: Array, y: Array, places: Places) -> Array:
    dx, dy = places.geometry.dx[None, :], places.geometry.dy[:, None]
    return -(np.diff(x, axis=1) / dx + np.diff(y, axis=0) / dy)


def _to_x_faces(field: Array) -> Array:
    wide = np.pad(field, ((0, 0), (1, 1)), mode="edge")
    return 0.5 * (wide[:, 1:] + wide[:, :-1])


def _to_y_faces(field: Array) -> Array:
    return _to_x_faces(field.T).T


def _state(layer: Layer, flow: Flow) -> dict[str, Array]:
    u = flow.x / _to_x_faces(layer.thickness)
    v = flow.y / _to_y_faces(layer.thickness)
    fields = {
        "thickness": layer.thickness,
        "temperature": layer.temperature,
        "salinity": layer.salinity,
        "reduced_gravity": layer.reduced_gravity,
        "velocity_x": u,
        "velocity_y": v,
        "transport_x": flow.x,
        "transport_y": flow.y,
    }
    spread = {"thickness": 4.0, "temperature": 0.3, "salinity": 0.02, "velocity_x": 0.02, "velocity_y": 0.02}
    deviations = {f"{name}_std": size * np.ones_like(fields[name]) for name, size in spread.items()}
    layered = {name: field[None] for name, field in (fields | deviations).items()}
    depth = {
        "thermocline_depth": layer.thickness,
        "thermocline_depth_std": deviations["thickness_std"],
    }
    return layered | depth


def _wind(places: Places) -> dict[str, Array]:
    lat = places.latitude
    zonal = -0.06 * _bump(lat, 0, 18) + 0.08 * _both(lat, 40, 10)
    return {
        "wind_stress_x": np.repeat(zonal, NX + 1, axis=1),
        "wind_stress_y": np.zeros((NY + 1, NX)),
        "coriolis": BETA * places.geometry.y,
    }


def _carried(tracer: Array, layer: Layer, flow: Flow, places: Places) -> tuple[Array, Array, Array, Array]:
    """Advective and diffusive transports of h tracer through x and y faces."""
    diffusion_x, diffusion_y = np.zeros((NY, NX + 1)), np.zeros((NY + 1, NX))
    h_x, h_y = _to_x_faces(layer.thickness), _to_y_faces(layer.thickness)
    dx, dy = places.geometry.dx[0], places.geometry.dy[0]
    diffusion_x[:, 1:-1] = -DIFFUSIVITY * h_x[:, 1:-1] * np.diff(tracer, axis=1) / dx
    diffusion_y[1:-1] = -DIFFUSIVITY * h_y[1:-1] * np.diff(tracer, axis=0) / dy
    return flow.x * _to_x_faces(tracer), flow.y * _to_y_faces(tracer), diffusion_x, diffusion_y


def _heat(places: Places, layer: Layer, flow: Flow) -> dict[str, Array]:
    per_volume = DENSITY * HEAT_CAPACITY
    excess = layer.temperature - ABYSS_TEMPERATURE
    x, y, diffusion_x, diffusion_y = (per_volume * flux for flux in _carried(excess, layer, flow, places))
    terms = {
        "heat_advection": _convergence(x, y, places),
        "heat_mixing": _convergence(diffusion_x, diffusion_y, places),
        "outcrop_heat": per_volume * flow.exchange["outcrop_volume"] * excess,
    }
    storage = 0.2 * np.cos(np.radians(4 * places.latitude)) * np.ones((NY, NX))
    surface = storage - sum(terms.values())
    prescribed = -25.0 * _both(places.latitude, 38, 4) * np.ones((NY, NX))
    restoring = surface - prescribed
    return terms | {
        "surface_heat_flux": surface,
        "heat_flux_prescribed": prescribed,
        "heat_flux_restoring": restoring,
        "heat_storage": storage,
        "heat_residual": storage - (sum(terms.values()) + surface),
        "heat_transport_x": x,
        "heat_transport_y": y,
        "heat_diffusion_x": diffusion_x,
        "heat_diffusion_y": diffusion_y,
        "prescribed_heat_flux": prescribed,
        "restoring_coefficient": np.full((NY, NX), 35.0),
        "target_temperature": layer.temperature + restoring / 35.0,
    }


def _salt(places: Places, layer: Layer, flow: Flow) -> dict[str, Array]:
    per_volume = 1e-3 * DENSITY
    excess = layer.salinity - ABYSS_SALINITY
    x, y, diffusion_x, diffusion_y = (per_volume * flux for flux in _carried(excess, layer, flow, places))
    terms = {
        "salt_advection": _convergence(x, y, places),
        "salt_mixing": _convergence(diffusion_x, diffusion_y, places),
        "transformation_salt": per_volume * flow.exchange["transformation"] * excess,
        "outcrop_salt": per_volume * flow.exchange["outcrop_volume"] * excess,
    }
    storage = np.zeros((NY, NX))
    virtual = storage - sum(terms.values())
    return terms | {
        "virtual_salt_flux": virtual,
        "salt_storage": storage,
        "salt_residual": storage - (sum(terms.values()) + virtual),
        "precipitation_minus_evaporation": -virtual / (per_volume * 35.0),
    }


def _series(days: Array) -> dict[str, Array]:
    years = days / 365.25
    settling = np.exp(-years / 12.0)
    eddies = np.sin(2 * np.pi * years / 1.7) + 0.6 * np.sin(2 * np.pi * years / 0.61)
    ends = {  # start, end, size of the eddies' mark
        "thermocline_depth_equator_west": (150.0, 164.0, 1.2),
        "thermocline_depth_equator_east": (150.0, 96.0, 1.5),
        "thermocline_depth_equator_mean": (150.0, 131.0, 0.8),
        "equatorial_tilt": (0.0, 68.0, 1.5),
        "thermocline_depth_basin_mean": (150.0, 172.0, 0.3),
        "surface_temperature_equator_east": (20.0, 23.5, 0.2),
        "warm_water_volume": (9.0e15, 1.03e16, 1.0e13),
        "heat_content": (5.5e23, 6.4e23, 1e21),
        "entrainment_total": (40e6, 21e6, 0.8e6),
        "transformation_total": (2e6, 20.5e6, 0.6e6),
    }
    series = {name: end + (start - end) * settling + size * eddies for name, (start, end, size) in ends.items()}
    series["heat_imbalance"] = np.abs(0.55 * settling + 0.012 * eddies)
    return {names.SERIES_PREFIX + name: values for name, values in series.items()}
