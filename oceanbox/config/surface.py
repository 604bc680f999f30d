"""Surface fluxes: heat, fresh water and wind."""

# ruff: noqa: N815  (attributes are the keys of the YAML file, whose ending is the unit)

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import Field

from oceanbox.config.fields import Band, FieldSpec, Gaussian, LatitudeBand, SumOfFields, TropicsToPole, field
from oceanbox.config.section import CrossFault, Real, Section, choice, optional_subsection, quantity, subsection

BandEdge = Annotated[Real, Field(ge=0.0, le=90.0)]


def _default_target() -> TropicsToPole:
    return TropicsToPole(tropical=28.0, polar=6.0, flat_to_deg=8.0, pole_deg=45.0)


def _default_zonal_stress() -> SumOfFields:
    trades = Gaussian(peak=-0.06, centre_deg=0.0, width_deg=18.0)
    westerlies = Band(peak=0.08, from_deg=25.0, to_deg=45.0)
    return SumOfFields(sum=(trades, westerlies))


class Restoring(Section):
    """A heat flux towards a target temperature, coefficient times (target - temperature)."""

    coefficient_W_per_m2_K: FieldSpec = field(
        35.0, "The heat flux per kelvin of departure from the target, nowhere negative.", "W m-2 K-1"
    )
    target_temperature_degC: FieldSpec = field(
        _default_target(), "The temperature the surface would reach without ocean heat transport.", "degC"
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """A uniform coefficient is not negative; maps are checked on the grid."""
        if isinstance(self.coefficient_W_per_m2_K, float) and self.coefficient_W_per_m2_K < 0.0:
            yield CrossFault(
                "coefficient_W_per_m2_K",
                f"{self.coefficient_W_per_m2_K!r}",
                "must be >= 0 W m-2 K-1",
                "give a damping rate of 25 to 50, or set restoring to null",
            )


class LossBand(LatitudeBand):
    """A heat loss in a band of latitude, a sin^2 bump given by its peak or by its total."""

    peak_W_per_m2: Real | None = quantity(
        None,
        "The loss in the middle of the band, a positive number, null when total_PW is given.",
        "W m-2",
        ge=0.0,
    )
    total_PW: Real | None = quantity(
        None,
        "The loss summed over the band, a positive number, null when peak_W_per_m2 is given.",
        "PW",
        ge=0.0,
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """The edges are in order and exactly one of peak and total says how strong the loss is."""
        yield from super().cross_faults()
        if self.peak_W_per_m2 is None and self.total_PW is None:
            yield CrossFault(
                "peak_W_per_m2",
                "neither peak_W_per_m2 nor total_PW",
                "exactly one of them says how strong the loss is",
                "give one of the two",
            )
        if self.peak_W_per_m2 is not None and self.total_PW is not None:
            yield CrossFault(
                "total_PW",
                f"{self.total_PW:g} beside peak_W_per_m2 {self.peak_W_per_m2:g}",
                "exactly one of them says how strong the loss is",
                "remove one of the two, or set it to null where a file it extends has it",
            )


class Heat(Section):
    """The surface heat flux, positive into the ocean: the sum of the parts that are not null."""

    restoring: Restoring | None = subsection(Restoring, "The flux towards a target temperature, or null.")
    prescribed_W_per_m2: FieldSpec | None = field(None, "The given heat flux into the ocean, or null.", "W m-2")
    loss_band: LossBand | None = optional_subsection("The given heat loss in a band of latitude, or null.")


class FreshWater(Section):
    """Precipitation minus evaporation, applied as a virtual salt flux."""

    precipitation_minus_evaporation_m_per_year: FieldSpec = field(
        0.0, "The fresh water gained at the surface.", "m year-1"
    )
    balance: Literal["refuse", "uniform", "band"] = choice(
        "refuse",
        "What happens to a net flux, which would change the salinity for ever: refuse it, take it out of the whole "
        "basin, or take it out of a band.",
    )
    balance_band_deg: tuple[BandEdge, BandEdge] = Field(
        default=(10.0, 30.0),
        description="The two distances from the equator between which balance: band puts the compensation.",
        json_schema_extra={"unit": "degree"},
    )
    reference_salinity_g_per_kg: Real = quantity(
        35.0, "The constant salinity that turns a fresh-water flux into a salt flux.", "g kg-1", gt=0.0
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """The edges of the balance band are in order."""
        first, last = self.balance_band_deg
        if last <= first:
            yield CrossFault(
                "balance_band_deg",
                f"[{first:g}, {last:g}]",
                "the second must be more than the first",
                "write the equatorward edge first (both are distances from the equator)",
            )


class Wind(Section):
    """The wind stress on the ocean."""

    zonal_stress_N_per_m2: FieldSpec = field(_default_zonal_stress(), "The eastward wind stress.", "N m-2")
    meridional_stress_N_per_m2: FieldSpec = field(0.0, "The northward wind stress.", "N m-2")
    ramp_days: Real = quantity(0.0, "The time over which the wind rises from nothing at the start.", "days", ge=0.0)


class Surface(Section):
    """Everything the atmosphere does to the ocean."""

    heat: Heat = subsection(Heat, "The surface heat flux.")
    fresh_water: FreshWater | None = optional_subsection("The surface fresh-water flux, or null for none.")
    wind: Wind = subsection(Wind, "The wind stress.")
