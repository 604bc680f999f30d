r"""Water-mass transformation by surface fluxes."""

SEAWATER_HEAT_CAPACITY = 3991.868  # J kg-1 K-1, TEOS-10 (IOC, SCOR and IAPSO 2010), rounded


def transformation_by_heat_loss(
    heat_loss: float, cooling: float, density: float = 1025.0, heat_capacity: float = SEAWATER_HEAT_CAPACITY
) -> float:
    """V = Q / (rho0 c_p dT) [m3 s-1], the volume that loses Q [W] while it cools by dT [K].

    Source: Walin (1982), Tellus 34, 187-195.
    """
    return heat_loss / (density * heat_capacity * cooling)


def heat_transport(
    volume_transport: float,
    temperature_difference: float,
    density: float = 1025.0,
    heat_capacity: float = SEAWATER_HEAT_CAPACITY,
) -> float:
    """rho0 c_p V dT [W] carried by V [m3 s-1] out and back at temperatures dT [K] apart."""
    return density * heat_capacity * volume_transport * temperature_difference


def surface_density_flux(
    heat_flux: float,
    thermal_expansion: float,
    heat_capacity: float,
    net_evaporation: float = 0.0,
    haline_contraction: float = 0.0,
    salinity: float = 0.0,
    density: float = 1025.0,
) -> float:
    """f = -alpha Q / c_p + rho beta_S S (E - P) [kg m-2 s-1], the gain of density at the surface.

    Q [W m-2] into the ocean, alpha [K-1], beta_S [kg g-1] with S [g kg-1], E - P [m s-1].
    Source: extension of Walin (1982) to density, derived.
    """
    thermal = -thermal_expansion * heat_flux / heat_capacity
    return thermal + density * haline_contraction * salinity * net_evaporation


def transformation_by_density(
    density_flux: float, width: float, density: float, thermal_expansion: float, temperature_slope: float
) -> float:
    """F = f L_x / |d rho/dy| [m3 s-1] across an isopycnal where density varies with temperature in y only.

    f [kg m-2 s-1] from surface_density_flux, L_x [m], d rho/dy = rho alpha dT/dy with dT/dy [K m-1]; alpha cancels.
    Source: F(rho) = Int f delta(rho(x, y) - rho) dA, as Walin (1982), derived.
    """
    return density_flux * width / (density * thermal_expansion * abs(temperature_slope))
