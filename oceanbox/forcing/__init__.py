"""Surface forcing and initial states as maps, each from its part of the configuration."""

from oceanbox.forcing.fields import evaluate, require_above, require_at_least
from oceanbox.forcing.fresh_water import balanced, fresh_water_flux
from oceanbox.forcing.heat_loss import loss_band_flux

__all__ = [
    "balanced",
    "evaluate",
    "fresh_water_flux",
    "loss_band_flux",
    "require_above",
    "require_at_least",
]
