"""A methods section in plain text: what was computed, with what, how, ready to be edited into a paper."""

from __future__ import annotations

import platform
import textwrap
from collections import Counter
from collections.abc import Mapping, Sequence
from importlib.metadata import version
from math import degrees
from pathlib import Path
from typing import Any

import oceanbox
from oceanbox.config import Config, identity
from oceanbox.config.showing import show
from oceanbox.constants import EARTH_RADIUS_M
from oceanbox.errors import ConfigError
from oceanbox.experiment.results import REFERENCES
from oceanbox.output.files import whole_file
from oceanbox.output.provenance import source_commit
from oceanbox.study.field_words import FIELDS, field_words, spoken
from oceanbox.study.keys import describe, value_at
from oceanbox.study.plan import axis_points
from oceanbox.study.schema import Axis, Study
from oceanbox.study.status import CaseStatus, State
from oceanbox.study.threshold_specs import ElasticitiesSpec, ParameterRange, SobolIndicesSpec

__all__ = ["methods_text", "write_methods"]

METHODS = "methods.txt"
LIBRARIES = ("numpy", "numba", "scipy", "xarray", "netCDF4")
_WIDTH = 100


def write_methods(study: Study, base: Config, statuses: Sequence[CaseStatus], into: Path) -> Path:
    """Write `methods.txt` into the folder of the study; its path."""
    path = into / METHODS
    with whole_file(path) as part:
        part.write_text(methods_text(study, base, statuses), encoding="utf-8")
    return path


def methods_text(study: Study, base: Config, statuses: Sequence[CaseStatus]) -> str:
    """The whole section, one paragraph for each subject.

    base        the configuration that the study varies
    statuses    of all cases
    """
    paragraphs = {
        "Model": _model(base),
        "Making and destroying warm water": _exchange(base),
        "Domain and numerics": _numerics(base),
        "Forcing": _forcing(base),
        "Length of the runs": _ending(study, base),
        "What was varied": _varied(study, base),
        "What became of the cases": _outcomes(statuses),
        "Versions": _versions(base, statuses),
        "References": f"{REFERENCES}.",
    }
    blocks = [f"Methods of the study {study.name}", textwrap.fill(study.description.strip(), _WIDTH)]
    for heading, text in paragraphs.items():
        blocks.append(textwrap.fill(f"{heading}. {' '.join(text.split())}", _WIDTH, break_long_words=False))
    return "\n\n".join(block for block in blocks if block) + "\n"


def _model(base: Config) -> str:
    water, motion = base.water, base.motion
    if water.equation_of_state == "linear":
        state = f"linear with thermal expansion {spoken(water.thermal_expansion_per_K, 'K-1')}"
    else:
        state = (
            f"quadratic in temperature, with thermal expansion {water.thermal_expansion_at_0degC_per_K:g} K-1 at 0 degC rising "
            f"by {water.thermal_expansion_slope_per_K2:g} K-1 per K, a fit to TEOS-10"
        )
    dynamics = (
        "the full equations, with advection of momentum" if motion.momentum_advection else "no momentum advection"
    )
    if motion.linear_about_depth_m is not None:
        dynamics = f"linear dynamics about a depth of {motion.linear_about_depth_m:g} m"
    return f"""
    The upper ocean is one layer of warm water of variable thickness, temperature and salinity over an abyss at rest, of
    {water.abyss_temperature_degC:g} degC and {water.abyss_salinity_g_per_kg:g} g kg-1, whose properties never change
    (layer equations with horizontally varying buoyancy: Ripa 1993), on a beta-plane with beta =
    {base.basin.beta_per_m_s:g} m-1 s-1 and {dynamics}.  The equation of state is {state}, and haline contraction is
    {water.haline_contraction_kg_per_g:g} kg g-1; reference density {water.reference_density_kg_per_m3:g} kg m-3, specific
    heat {water.heat_capacity_J_per_kg_K:g} J kg-1 K-1, gravity {water.gravity_m_per_s2:g} m s-2.  Lateral viscosity is
    {motion.viscosity_m2_per_s:g} m2 s-1, acting on {motion.viscosity_acts_on}, lateral diffusivity of temperature and salinity
    {base.mixing.lateral_diffusivity_m2_per_s:g} m2 s-1, linear drag {motion.drag_per_day:g} per day.
    {"A sponge damps the flow near the walls in the " + ", ".join(motion.sponge.sides) + "." if motion.sponge else ""}
    """


def _exchange(base: Config) -> str:
    made, parts = base.entrainment, []
    if made.upwelling is not None:
        up = made.upwelling
        parts.append(
            f"by upwelling through the base of a mixed layer of {up.mixed_layer_depth_m:g} m with Ekman shear damped at "
            f"{up.shear_damping_per_day:g} per day, the share of water from below the thermocline falling with its distance "
            f"from the mixed layer over {up.thermocline_half_thickness_m:g} m"
        )
    if made.diffusive is not None:
        parts.append(f"by a vertical diffusivity of {made.diffusive.diffusivity_m2_per_s:g} m2 s-1 over the thickness")
    if made.shoaling is not None:
        parts.append(
            f"where the layer is thinner than {made.shoaling.minimum_thickness_m:g} m, within {made.shoaling.time_days:g} days"
        )
    if made.prescribed is not None:
        parts.append(f"at a given rate, {field_words(made.prescribed.velocity_m_per_day, 'm day-1')}")
    text = f"Cold water is entrained {'; '.join(parts)}." if parts else "No water is entrained."
    lost = base.transformation
    if lost is None:
        return f"{text} Surface cooling destroys no warm water. {_outcrop(base)}"
    rule = (
        f"a constant share of {lost.efficiency.value:g}"
        if lost.efficiency.kind == "constant"
        else f"the share exp(-Theta/{lost.efficiency.scale_K:g} K), Theta the temperature above the abyss's,"
    )
    salt = "carries its salinity into the abyss" if lost.salt == "carried" else "leaves its salinity behind"
    return (
        f"{text} Surface buoyancy loss turns warm water into abyssal water (water-mass transformation: Walin 1982): {rule} of "
        f"the loss destroys volume and the rest cools the layer, down to a thickness of {lost.floor_thickness_m:g} m; destroyed "
        f"water {salt}. {_outcrop(base)}"
    )


def _outcrop(base: Config) -> str:
    rule = base.outcrop
    if rule is None:
        return ""
    return (
        f"Where the layer is within {rule.margin_K:g} K of the abyss it hands its volume to it within {rule.time_days:g} days, "
        "and further loss is switched off."
    )


def _numerics(base: Config) -> str:
    basin, numerics = base.basin, base.numerics
    dx = basin.width_km / basin.cells_x
    dy = (basin.north_km - basin.south_km) / basin.cells_y
    south, north = (f"{abs(_degrees(y)):.3g} {'S' if y < 0 else 'N'}" for y in (basin.south_km, basin.north_km))
    sides = "closed by walls" if basin.zonal_boundary == "walls" else "periodic in longitude"
    step = f"of {numerics.step_s:g} s" if numerics.step_s is not None else "chosen from the stability limits"
    return f"""
    The basin is {basin.width_km:g} km wide and reaches from {south} to {north} (y from {basin.south_km:g} to
    {basin.north_km:g} km), {sides}, with {basin.side_walls.replace("_", "-")} side walls.  The equations are solved on an
    Arakawa C grid of {basin.cells_x} x {basin.cells_y} cells of {dx:.4g} km x {dy:.4g} km in an energy-conserving form
    (Sadourny 1975), stepped by a {numerics.scheme.replace("_", "-")} scheme with a step {step}; temperature and salinity are
    advected conservatively with a flux limiter (Koren 1993).  Volume, heat and salt budgets close to round-off.
    """


def _degrees(y_km: float) -> float:
    return degrees(y_km * 1000.0 / EARTH_RADIUS_M)


def _forcing(base: Config) -> str:
    heat, wind, fresh = base.surface.heat, base.surface.wind, base.surface.fresh_water
    parts = [f"The zonal wind stress is {field_words(wind.zonal_stress_N_per_m2, 'N m-2')}"]
    if wind.meridional_stress_N_per_m2 != 0.0:
        parts.append(f"the meridional wind stress is {field_words(wind.meridional_stress_N_per_m2, 'N m-2')}")
    if wind.ramp_days:
        parts.append(f"the wind rises over {wind.ramp_days:g} days")
    if heat.restoring is not None:
        restoring = heat.restoring
        parts.append(
            f"surface temperature is restored (Haney 1971) with {field_words(restoring.coefficient_W_per_m2_K, 'W m-2 K-1')} "
            f"towards a target of {field_words(restoring.target_temperature_degC, 'degC')}"
        )
    if heat.prescribed_W_per_m2 is not None:
        parts.append(f"a heat flux is prescribed, {field_words(heat.prescribed_W_per_m2, 'W m-2')}")
    if heat.loss_band is not None:
        band = heat.loss_band
        size = (
            f"{band.total_PW:g} PW in all" if band.total_PW is not None else f"{band.peak_W_per_m2:g} W m-2 at its peak"
        )
        parts.append(f"heat is lost between {band.from_deg:g} and {band.to_deg:g} degrees ({band.hemispheres}), {size}")
    if fresh is not None:
        parts.append(
            "precipitation minus evaporation, applied as a virtual salt flux, is "
            f"{field_words(fresh.precipitation_minus_evaporation_m_per_year, 'm year-1')} (net flux: {fresh.balance})"
        )
    return "; ".join(parts) + "."


def _ending(study: Study, base: Config) -> str:
    ask = base.equilibrium
    if study.command == "evolve" or study.switch is not None:
        days = study.switch.duration_days if study.switch is not None else base.evolve.duration_days
        others = [case for case in (study.switch.switches if study.switch is not None else ()) if case.duration_days]
        told = f" ({', '.join(f'{case.name} for {case.duration_days:g} days' for case in others)})" if others else ""
        return (
            f"Each case ran for {days:g} days{told}; window means are over its last {ask.window_years:g} years at most."
        )
    which = "approach to the first equilibrium alone" if study.branch is not None else "approach"
    spin_up = (
        f" The {which} was shortened by extrapolation (Anderson 1965), which ends before the first window that is judged."
        if ask.acceleration is not None
        else ""
    )
    return f"""
    A case counts as in equilibrium when, in {ask.windows_in_a_row} successive windows of {ask.window_years:g} years, the drift
    of warm-water volume is below {100 * ask.volume_drift_per_decade:g} % and that of heat content below
    {100 * ask.heat_drift_per_decade:g} % per decade, the net surface heat flux is below {100 * ask.heat_imbalance:g} % of the
    sum of its gains and losses, and entrainment and losses to the abyss differ by less than
    {100 * ask.exchange_imbalance:g} % of the entrainment; the search is given up after {ask.longest_years:g} years.{spin_up}
    Results are means over the last window; their spread is the standard deviation within it.
    """


def _varied(study: Study, base: Config) -> str:
    if study.axes is not None:
        text = "; ".join(_axis_words(axis, base) for axis in study.axes)
        text = f"All combinations of {text}." if len(study.axes) > 1 else f"{text[0].upper()}{text[1:]}."
    elif study.sample is not None:
        kind = "Latin hypercube" if study.sample.method == "latin_hypercube" else "scrambled Sobol' sequence"
        ranges = _ranges(study.sample.ranges, base)
        text = f"{study.sample.count} cases of a {kind} (seed {study.sample.seed}) over {ranges}."
    elif study.cases is not None:
        text = "Cases were: " + "; ".join(
            f"{case.name} ({', '.join(f'{key} = {value}' for key, value in case.changes.items()) or 'the base'})"
            for case in study.cases
        )
        text += "."
    else:
        text = f"A {study.plan} study: {_plan_words(study, base)}."
    if study.warm_start == "nearest":
        text += (
            " Each case started from the end of the nearest one then finished, which can hide that there is more than one "
            "equilibrium."
        )
    return text


def _plan_words(study: Study, base: Config) -> str:
    if study.branch is not None:
        spec = study.branch
        return (
            f"{spec.key} (now {value_at(base, spec.key)}) was moved from {spec.lowest:g} to "
            f"{spoken(spec.highest, describe(base, spec.key).unit)} in {spec.steps} steps and back, each case started from the "
            "equilibrium before it"
        )
    if study.switch is not None:
        names = ", ".join(case.name for case in study.switch.switches)
        return f"from one equilibrium, one thing was changed at time zero: {names}"
    return _sensitivity_words(study, base)


def _sensitivity_words(study: Study, base: Config) -> str:
    spec = study.sensitivity
    if isinstance(spec, SobolIndicesSpec):
        return (
            f"Sobol' indices of {', '.join(spec.measures)} by the estimators of Saltelli et al. (2010, first order) and Jansen "
            f"(1999, total) from {spec.base_samples} base points of a scrambled Sobol' sequence (seed {spec.seed}), with "
            f"{100 * spec.confidence:g} % intervals from {spec.resamples} bootstrap resamples, over "
            f"{_ranges(spec.ranges, base)}"
        )
    if isinstance(spec, ElasticitiesSpec):
        return (
            f"elasticities of {', '.join(spec.measures)} by central differences of {spec.relative_step:g} in the logarithm of "
            f"{', '.join(spec.keys)}, and of half that step as a check"
        )
    return ""


def _ranges(ranges: Sequence[ParameterRange], base: Config) -> str:
    return "; ".join(
        f"{item.key} from {item.lowest:g} to {spoken(item.highest, describe(base, item.key).unit)} ({item.scale})"
        for item in ranges
    )


def _axis_words(axis: Axis, base: Config) -> str:
    unit = axis.unit if axis.unit is not None else describe(base, axis.all_keys[0]).unit
    if all(isinstance(item, str) for item in axis.positions or (0.0,)):
        unit = ""  # names have none
    values = ", ".join(
        (item.position if isinstance(item.position, str) else f"{item.position:.6g}")
        + (f" ({_value_words(base, item.changes)})" if axis.positions is not None else "")
        for item in axis_points(axis)
    )
    return f"{axis.long_name or axis.name} ({', '.join(axis.all_keys)}) of {values} {unit}".rstrip()


def _value_words(base: Config, changes: Mapping[str, Any]) -> str:
    """What the first key of a place on an axis becomes there."""
    key, value = next(iter(changes.items()))
    try:
        found = value_at(base.with_changes(dict(changes)), key)
    except ConfigError:  # the keys of other axes are needed beside it
        return show(value)
    unit = describe(base, key).unit
    if isinstance(found, FIELDS):
        return field_words(found, unit)
    return spoken(found, unit) if isinstance(found, int | float) and not isinstance(found, bool) else show(value)


def _outcomes(statuses: Sequence[CaseStatus]) -> str:
    states = Counter(status.state for status in statuses)
    endings = Counter(status.ending for status in statuses if status.state is State.DONE)
    parts = [f"{count} ended with '{ending}'" for ending, count in sorted(endings.items())]
    parts += [
        f"{states[state]} {state.value}" for state in (State.FAILED, State.RUNNING, State.WAITING) if states[state]
    ]
    reasons = sorted({" ".join(status.reason.split()) for status in statuses if status.state is State.FAILED})
    told = f" Reasons of failure: {' | '.join(reasons)}." if reasons else ""
    return f"Of {len(statuses)} cases, {', '.join(parts) or 'none has run'}.{told}"


def _versions(base: Config, statuses: Sequence[CaseStatus]) -> str:
    programs = sorted({status.version for status in statuses} | {oceanbox.__version__})
    libraries = ", ".join(f"{name} {version(name)}" for name in LIBRARIES)
    commit = source_commit(Path(oceanbox.__file__).resolve().parent)
    return (
        f"oceanbox {', '.join(programs)} (commit {commit}), Python {platform.python_version()}, {libraries}. "
        f"Identity of the base configuration: {identity(base)}; the whole of it is in the attributes of collected.nc."
    )
