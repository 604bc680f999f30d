"""Derived scales as a table of text."""

import math

from oceanbox.constants import DAYS_PER_YEAR, SECONDS_PER_DAY
from oceanbox.experiment.assembly import Setup
from oceanbox.experiment.cost import START_AND_END, usual_years
from oceanbox.experiment.model import deepest_expected
from oceanbox.experiment.scales import Scales

__all__ = ["table"]


def _length(metres: float, cell: float) -> str:
    if not math.isfinite(metres):
        return "none"
    return f"{metres / 1e3:.1f} km = {metres / cell:.2f} cells"


def _duration(seconds: float) -> str:
    if seconds < 120.0:
        return f"{seconds:.3g} s"
    return f"{seconds / 60.0:.3g} min" if seconds < 7200.0 else f"{seconds / 3600.0:.3g} h"


def table(setup: Setup, scales: Scales, seconds_per_step: float) -> str:
    """The lines of the table; ``seconds_per_step`` [s] is the wall time of a step on this machine."""
    limits, config = scales.limits, setup.config
    year = seconds_per_step * scales.steps_per_year
    years, usual = config.equilibrium.longest_years, usual_years(config)
    evolve_years = config.evolve.duration_days / DAYS_PER_YEAR
    pace = 1e9 * seconds_per_step / scales.cells
    usually = _duration(START_AND_END + usual * year)
    rows = [
        ("grid", f"{setup.grid.nx} x {setup.grid.ny} cells of {scales.dx / 1e3:g} km x {scales.dy / 1e3:g} km"),
        ("layer at the start", f"{scales.thickness:.1f} m thick, reduced gravity up to {scales.reduced_gravity:.4f} m s-2"),
        ("wave speed sqrt(b h)", f"{scales.wave_speed:.3f} m s-1"),
        ("Kelvin wave crosses in", f"{scales.kelvin_crossing / SECONDS_PER_DAY:.1f} days"),
        ("equatorial radius sqrt(c/beta)", _length(scales.equatorial_radius, scales.dy)),
        ("deformation radius at 30 degrees", _length(scales.mid_latitude_radius, max(scales.dx, scales.dy))),
        ("Munk width (A/beta)^(1/3)", _length(scales.munk_width, scales.dx)),
        ("Stommel width r/beta", _length(scales.stommel_width, scales.dx)),
        ("limit, gravity waves and rotation", f"{limits.waves:.0f} s (layer up to {deepest_expected(setup):g} m)"),
        ("limit, viscosity", f"{limits.friction:.3g} s"),
        ("limit, lateral mixing", f"{limits.mixing:.3g} s"),
        ("limit, advection", f"{limits.flow:.3g} s"),
        ("step", f"{scales.step:.1f} s, {config.numerics.scheme}; {scales.steps_per_year:.0f} steps a year"),
        ("memory", f"{scales.memory / 2**20:.0f} MiB of fields"),
        ("cost on this machine", f"{pace:.0f} ns per cell and step, {_duration(year)} a model year"),
        ("equilibrate", f"at most {_duration(years * year)} for {years:g} years; {usual:g} years take {usually}"),
        ("evolve", f"{_duration(START_AND_END + evolve_years * year)} for {config.evolve.duration_days:g} days"),
    ]  # fmt: skip
    width = max(len(name) for name, _ in rows)
    return "\n".join(f"{name:<{width}}  {value}" for name, value in rows)
