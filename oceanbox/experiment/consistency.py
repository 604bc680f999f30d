"""What a schema cannot see: whether a configuration makes physical and numerical sense on its grid.

Each rule looks at one thing and yields findings.  A *fault* would give a wrong or meaningless run and is refused; a
*warning* is merely unwise.  All are reported together.
"""

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from oceanbox.errors import ConfigError, Fault
from oceanbox.experiment.assembly import Setup
from oceanbox.experiment.scales import Scales, derive_scales

__all__ = ["Findings", "examine", "require_consistent"]


@dataclass(frozen=True)
class Findings:
    """Faults, which are refused, and warnings, which are told."""

    faults: tuple[Fault, ...]
    warnings: tuple[Fault, ...]


@dataclass(frozen=True)
class Finding:
    """One thing found; ``refused`` if a run would be meaningless."""

    refused: bool
    key: str
    value: str
    allowed: str
    remedy: str


def _km(metres: float) -> str:
    return f"{metres / 1e3:.3g} km"


def boundary_layer(setup: Setup, scales: Scales) -> Iterator[Finding]:
    """A wind with curl drives a western boundary current, which friction must make wide enough for the grid."""
    grid = setup.grid
    if grid.periodic_x or grid.beta == 0.0 or not scales.wind_has_curl:
        return
    width = scales.boundary_layer
    # The Stommel layer needs dx < 2 r/beta, the Munk layer about one cell to be stable and two to be accurate.
    refused = width < grid.dx and scales.stommel_width < 0.5 * grid.dx
    if refused or width < 2.0 * grid.dx:
        needed = grid.beta * (2.0 * grid.dx) ** 3
        yield Finding(
            refused,
            "motion.viscosity_m2_per_s",
            f"{setup.constants.viscosity:g} (boundary layer {_km(width)} wide, cells {_km(grid.dx)})",
            "the western boundary layer must be wider than a cell, better two",
            f"raise it towards {needed:.2g}, or use more cells in x",
        )


def deformation_radius(setup: Setup, scales: Scales) -> Iterator[Finding]:
    """Equatorial waves live within a radius of the equator."""
    grid = setup.grid
    spacing = max(grid.dx, grid.dy)
    if scales.equator_inside and scales.equatorial_radius < 2.0 * grid.dy:
        yield Finding(
            scales.equatorial_radius < grid.dy,
            "basin.cells_y",
            f"{grid.ny} (cells {_km(grid.dy)}, equatorial radius {_km(scales.equatorial_radius)})",
            "the equatorial radius must span a cell, better two",
            f"use at least {math.ceil(2.0 * grid.ny * grid.dy / scales.equatorial_radius)} cells",
        )
    reaches = float(np.abs(grid.latitude).max()) > 30.0
    if reaches and scales.mid_latitude_radius < 0.5 * spacing and setup.constants.linear_depth == 0.0:
        yield Finding(
            False,
            "basin.cells_x",
            f"{grid.nx} (cells {_km(spacing)}, radius at 30 degrees {_km(scales.mid_latitude_radius)})",
            "mid-latitude eddies need cells smaller than the deformation radius",
            "read the result as that of a laminar ocean, or refine the grid",
        )


def mixed_layer(setup: Setup, scales: Scales) -> Iterator[Finding]:
    """The mixed layer lies inside the warm layer, also where that is thinnest."""
    config = setup.config
    if config.entrainment.upwelling is None:
        return
    depth = config.entrainment.upwelling.mixed_layer_depth_m
    floors = {}
    if config.transformation is not None:
        floors["transformation.floor_thickness_m"] = config.transformation.floor_thickness_m
    if config.entrainment.shoaling is not None:
        floors["entrainment.shoaling.minimum_thickness_m"] = config.entrainment.shoaling.minimum_thickness_m
    for key, floor in floors.items():
        if floor < depth:
            yield Finding(
                True,
                key,
                f"{floor:g}",
                f"must be at least the mixed layer's depth, {depth:g} m",
                "raise it, or lower entrainment.upwelling.mixed_layer_depth_m",
            )
    thinnest = float(setup.grid.centres(setup.initial.thickness).min())
    if thinnest < depth:
        yield Finding(
            False,
            "layers.0.initial_thickness_m",
            f"{thinnest:g} at its thinnest",
            f"is better at least the mixed layer's depth, {depth:g} m",
            "start from a thicker layer",
        )


def warm_enough(setup: Setup, scales: Scales) -> Iterator[Finding]:
    """A layer is warm only if something makes it warmer than the abyss."""
    water, grid = setup.config.water, setup.grid
    restores = setup.maps.restoring_coefficient > 0.0
    target = setup.maps.target_temperature
    key = "surface.heat.restoring.target_temperature_degC"
    if restores.any():
        warmest = float(target[restores].max())
        if warmest <= water.abyss_temperature_degC:
            yield Finding(
                True,
                key,
                f"at most {warmest:g}",
                f"must exceed the abyss's {water.abyss_temperature_degC:g} degC somewhere",
                "raise it, or lower water.abyss_temperature_degC",
            )
        coldest = float(target[restores].min())
        if coldest < water.abyss_temperature_degC and setup.config.outcrop is None:
            yield Finding(
                True,
                key,
                f"down to {coldest:g} with outcrop null",
                f"a target below the abyss's {water.abyss_temperature_degC:g} degC needs the outcrop rule",
                "give an outcrop section, or raise the target",
            )
    start = float((grid.centres(setup.initial.heat) / grid.centres(setup.initial.thickness)).max())
    if start <= 0.0:
        yield Finding(
            True,
            "layers.0.initial_temperature_degC",
            f"at most {start + water.abyss_temperature_degC:g}",
            f"must exceed the abyss's {water.abyss_temperature_degC:g} degC somewhere",
            "start from a warm layer",
        )


def wind_holds_the_layer(setup: Setup, scales: Scales) -> Iterator[Finding]:
    """A uniform zonal wind tilts a closed layer until it outcrops when h < (2/3) sqrt(2 |tau| L/(rho0 b))."""
    grid, config = setup.grid, setup.config
    if grid.periodic_x or setup.constants.linear_depth > 0.0:
        return
    stress = float(np.abs(setup.maps.wind_stress_x.mean(axis=1)).max())
    load = config.water.reference_density_kg_per_m3 * scales.reduced_gravity
    needed = 2.0 / 3.0 * math.sqrt(2.0 * stress * grid.nx * grid.dx / load)
    if scales.thickness < needed:
        yield Finding(
            True,
            "surface.wind.zonal_stress_N_per_m2",
            f"{stress:.3g} at its strongest, over a layer of {scales.thickness:.3g} m",
            f"such a wind needs a layer of at least {needed:.3g} m not to lay the basin bare",
            "lower the stress or raise layers.0.initial_thickness_m",
        )


def wind_has_a_brake(setup: Setup, scales: Scales) -> Iterator[Finding]:
    """In a channel nothing but friction stops a zonal wind."""
    motion = setup.config.motion
    mean = float(np.abs(setup.maps.wind_stress_x.mean()))
    frictionless = motion.drag_per_day == 0.0 and (motion.viscosity_m2_per_s == 0.0 or not setup.grid.no_slip)
    if setup.grid.periodic_x and mean > 0.0 and frictionless and motion.sponge is None:
        yield Finding(
            False,
            "motion.drag_per_day",
            "0 in a periodic channel under a zonal wind",
            "the flow speeds up for ever",
            "give it a drag, or zonal_boundary: walls",
        )


def stable_step(setup: Setup, scales: Scales) -> Iterator[Finding]:
    """A named step must be stable."""
    named, limit = setup.config.numerics.step_s, scales.limits.smallest
    if named is not None and named > limit:
        yield Finding(
            True,
            "numerics.step_s",
            f"{named:g}",
            f"must be at most {limit:.0f} s, the limit set by {scales.limits.cause}",
            "lower it, or write null to have it chosen",
        )


def linear_dynamics(setup: Setup, scales: Scales) -> Iterator[Finding]:
    """Linear dynamics move a perturbation about a rest depth: one buoyancy, no exchange of volume."""
    if setup.constants.linear_depth == 0.0:
        return
    config, grid = setup.config, setup.grid
    key = "motion.linear_about_depth_m"
    value = f"{setup.constants.linear_depth:g}"
    theta = grid.centres(setup.initial.heat) / grid.centres(setup.initial.thickness)
    if float(np.ptp(theta)) > 1e-12 * max(float(np.abs(theta).max()), 1.0):
        yield Finding(
            True, key, value, "linear dynamics need one temperature everywhere", "make the initial temperature uniform"
        )
    switched_on = {
        "entrainment.upwelling": config.entrainment.upwelling,
        "entrainment.shoaling": config.entrainment.shoaling,
        "entrainment.diffusive": config.entrainment.diffusive,
        "transformation": config.transformation,
        "surface.heat.restoring": config.surface.heat.restoring,
    }
    present = [name for name, section in switched_on.items() if section is not None]
    if present:
        yield Finding(
            True,
            key,
            value,
            f"linear dynamics exchange nothing, so {', '.join(present)} must be null",
            "set them to null",
        )


RULES: tuple[Callable[[Setup, Scales], Iterator[Finding]], ...] = (
    boundary_layer,
    deformation_radius,
    mixed_layer,
    warm_enough,
    wind_holds_the_layer,
    wind_has_a_brake,
    stable_step,
    linear_dynamics,
)


def examine(setup: Setup, locate: Callable[[str], str] = lambda key: "") -> Findings:
    """Everything the rules find; ``locate`` gives the place of a dotted key in the file it came from."""
    scales = derive_scales(setup)
    found = [finding for rule in RULES for finding in rule(setup, scales)]

    def as_faults(refused: bool) -> tuple[Fault, ...]:
        return tuple(Fault(locate(f.key), f.key, f.value, f.allowed, f.remedy) for f in found if f.refused is refused)

    return Findings(as_faults(True), as_faults(False))


def require_consistent(setup: Setup, locate: Callable[[str], str] = lambda key: "") -> tuple[Fault, ...]:
    """The warnings; raises ConfigError with all faults if there is one."""
    findings = examine(setup, locate)
    if findings.faults:
        raise ConfigError(findings.faults)
    return findings.warnings
