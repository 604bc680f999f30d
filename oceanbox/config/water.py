"""The water: equation of state, the abyss, and the state each layer starts from."""

# ruff: noqa: N815  (attributes are the keys of the YAML file, whose ending is the unit)

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from oceanbox.config.fields import FieldSpec, field
from oceanbox.config.section import CrossFault, Real, Section, choice, quantity


class Water(Section):
    """Equation of state and the properties of the abyss.

    The quadratic coefficients are the least-squares line through the surface thermal expansion of TEOS-10 at 35 g/kg
    and conservative temperatures from 0 to 30 degC (IOC, SCOR and IAPSO 2010, Manual and Guides 56; the 75-term
    polynomial of Roquet et al. 2015, Ocean Modelling 90, 29-43). Largest error of the thermal expansion: 1.6e-5 K-1,
    at 0 degC, and 1.2e-5 K-1 above 2 degC; of the buoyancy over an abyss of 5 degC: 7.9e-4 m s-2, at 23 degC.
    """

    equation_of_state: Literal["linear", "quadratic"] = choice(
        "quadratic", "Whether thermal expansion is a constant or grows linearly with temperature."
    )
    abyss_temperature_degC: Real = quantity(5.0, "The temperature of the abyss.", "degC", ge=-2.0, le=40.0)
    abyss_salinity_g_per_kg: Real = quantity(35.0, "The salinity of the abyss.", "g kg-1", ge=0.0, le=50.0)
    thermal_expansion_per_K: Real = quantity(
        2.0e-4, "The thermal expansion of the linear equation of state.", "K-1", gt=0.0
    )
    thermal_expansion_at_0degC_per_K: Real = quantity(
        6.86e-5, "The thermal expansion at 0 degC in the quadratic equation of state.", "K-1"
    )
    thermal_expansion_slope_per_K2: Real = quantity(
        9.23e-6,
        "The growth of thermal expansion per kelvin in the quadratic equation of state.",
        "K-2",
        ge=0.0,
    )
    haline_contraction_kg_per_g: Real = quantity(
        7.5e-4, "The haline contraction, in both equations of state.", "kg g-1", ge=0.0
    )
    reference_density_kg_per_m3: Real = quantity(1025.0, "The reference density of sea water.", "kg m-3", gt=0.0)
    heat_capacity_J_per_kg_K: Real = quantity(
        3991.868, "The specific heat of sea water (TEOS-10 cp0 to seven digits).", "J kg-1 K-1", gt=0.0
    )
    gravity_m_per_s2: Real = quantity(9.81, "The acceleration of gravity.", "m s-2", gt=0.0)

    def cross_faults(self) -> Iterator[CrossFault]:
        """Warming must lighten water of the abyss's temperature, or the warm layer would sink."""
        at_abyss = (
            self.thermal_expansion_at_0degC_per_K + self.thermal_expansion_slope_per_K2 * self.abyss_temperature_degC
        )
        if self.equation_of_state == "quadratic" and at_abyss <= 0.0:
            yield CrossFault(
                "thermal_expansion_at_0degC_per_K",
                f"{self.thermal_expansion_at_0degC_per_K:g}, hence {at_abyss:g} K-1 "
                f"at the abyss's {self.abyss_temperature_degC:g} degC",
                "thermal expansion must be > 0 at the temperature of the abyss",
                "raise this value or abyss_temperature_degC",
            )


class Layer(Section):
    """The state a moving layer starts from."""

    initial_thickness_m: FieldSpec = field(150.0, "The thickness at the start, everywhere more than 0.", "m")
    initial_temperature_degC: FieldSpec = field(20.0, "The temperature at the start.", "degC")
    initial_salinity_g_per_kg: FieldSpec = field(35.0, "The salinity at the start.", "g kg-1")

    def cross_faults(self) -> Iterator[CrossFault]:
        """A uniform thickness is positive, a uniform salinity not negative; maps are checked on the grid."""
        if isinstance(self.initial_thickness_m, float) and self.initial_thickness_m <= 0.0:
            yield CrossFault(
                "initial_thickness_m",
                f"{self.initial_thickness_m!r}",
                "must be > 0 m",
                "give the thickness of the warm layer at the start",
            )
        if isinstance(self.initial_salinity_g_per_kg, float) and self.initial_salinity_g_per_kg < 0.0:
            yield CrossFault(
                "initial_salinity_g_per_kg",
                f"{self.initial_salinity_g_per_kg!r}",
                "must be >= 0 g kg-1",
                "give the salinity of the warm layer at the start",
            )
