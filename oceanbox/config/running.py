"""How a run goes: when it is in equilibrium, how long it lasts, what it records, how it steps."""

# ruff: noqa: N815  (attributes are the keys of the YAML file, whose ending is the unit)

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from oceanbox.config.section import CrossFault, Real, Section, Whole, choice, quantity, subsection


class Acceleration(Section):
    """A way to equilibrium that need not be true, before the windows that are judged."""

    pace_limit: Real = quantity(
        20.0,
        "The factor by which the calmest water may be hastened on the way to equilibrium, 1 for true steps.",
        "1",
        ge=1.0,
        le=100.0,
    )
    lead_years: Real = quantity(0.5, "The model time before the first extrapolation.", "year", gt=0.0)
    cycle_years: Real = quantity(0.25, "The model time between extrapolations.", "year", gt=0.0)
    memory: Whole = quantity(8, "The number of earlier cycles an extrapolation uses.", "1", ge=1, le=30)
    longest_years: Real = quantity(8.0, "The model time after which the run goes on plainly.", "year", gt=0.0)


class Equilibrium(Section):
    """When the windowed means of a run count as steady."""

    window_years: Real = quantity(2.0, "The length of the averaging window.", "year", gt=0.0)
    longest_years: Real = quantity(200.0, "The model time after which the search is given up.", "year", gt=0.0)
    volume_drift_per_decade: Real = quantity(
        0.01, "The largest relative drift of the warm-water volume in ten years.", "1", gt=0.0
    )
    heat_drift_per_decade: Real = quantity(
        0.01, "The largest relative drift of the heat content in ten years.", "1", gt=0.0
    )
    heat_imbalance: Real = quantity(
        0.02,
        "The largest net surface heat flux as a share of its absolute value, both summed over the basin.",
        "1",
        gt=0.0,
    )
    exchange_imbalance: Real = quantity(
        0.05,
        "The largest difference of entrainment and transformation as a share of the entrainment.",
        "1",
        gt=0.0,
    )
    windows_in_a_row: Whole = quantity(2, "The number of windows in a row for which all this must hold.", "1", ge=1)

    acceleration: Acceleration | None = subsection(
        Acceleration, "How the approach to equilibrium is shortened, or null for plain stepping."
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """The search is long enough to hold the windows it asks for."""
        needed = self.window_years * self.windows_in_a_row
        if self.longest_years < needed:
            yield CrossFault(
                "longest_years",
                f"{self.longest_years:g}",
                f"must hold {self.windows_in_a_row} windows of {self.window_years:g} years: >= {needed:g}",
                "raise longest_years, or lower window_years or windows_in_a_row",
            )


class Evolve(Section):
    """A run of fixed length."""

    duration_days: Real = quantity(3650.0, "The length of the run.", "days", gt=0.0)
    snapshot_interval_days: Real | None = quantity(
        None, "The time between stored snapshots of the fields, or null for none.", "days", gt=0.0
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """At least one snapshot falls inside the run."""
        if self.snapshot_interval_days is not None and self.snapshot_interval_days > self.duration_days:
            yield CrossFault(
                "snapshot_interval_days",
                f"{self.snapshot_interval_days:g}",
                f"must be at most duration_days, {self.duration_days:g}",
                "shorten the interval, lengthen the run, or write null for no snapshots",
            )


class Output(Section):
    """What is recorded during a run."""

    series_interval_days: Real = quantity(30.0, "The time between points of the recorded series.", "days", gt=0.0)
    sample_interval_days: Real = quantity(
        5.0, "The time between samples of the window's standard deviations.", "days", gt=0.0
    )
    cold_tongue_contrast_K: Real = quantity(
        2.0,
        "The temperature below the equatorial warm pool at which a cell belongs to the cold tongue.",
        "K",
        gt=0.0,
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """A series point is made of samples, so samples are at least as frequent."""
        if self.sample_interval_days > self.series_interval_days:
            yield CrossFault(
                "sample_interval_days",
                f"{self.sample_interval_days:g}",
                f"must be at most series_interval_days, {self.series_interval_days:g}",
                "sample more often or lengthen series_interval_days",
            )


class Numerics(Section):
    """Time stepping and the discretisation that can be chosen."""

    scheme: Literal["forward_backward", "runge_kutta_3"] = choice("forward_backward", "The time-stepping scheme.")
    step_s: Real | None = quantity(None, "The time step, or null to take it from the stability limits.", "s", gt=0.0)
    step_safety: Real = quantity(0.85, "The share of the stability limit that is used.", "1", gt=0.0, le=1.0)
    exchange_interval_days: Real = quantity(
        0.25,
        "The longest time between exchanges of a column with air and abyss, 0 for every step.",
        "days",
        ge=0.0,
        le=2.0,
    )
    deepest_layer_m: Real | None = quantity(
        None, "The thickness whose wave speed sets the step, or null for twice the greatest at the start.", "m", gt=0.0
    )
    thickness_flux: Literal["centred", "upwind_biased"] = choice(
        "centred", "How the thickness on a face is made from its neighbours."
    )
