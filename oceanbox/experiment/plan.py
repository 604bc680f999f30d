"""When things happen in a run, in model seconds from its start; nothing here runs a model."""

import math
from dataclasses import dataclass

from oceanbox.config import Config
from oceanbox.constants import DAYS_PER_YEAR, SECONDS_PER_DAY

__all__ = ["Plan", "equilibrium_plan", "evolution_plan"]

SECONDS_PER_YEAR = DAYS_PER_YEAR * SECONDS_PER_DAY


@dataclass(frozen=True)
class Plan:
    """Intervals and ends, s.

    ``windows_repeat``: windows of length ``window`` follow one another from the start and each is judged; otherwise one
    window ends with the run.  ``accelerated_until``: latest end of an accelerated approach before the first window, which
    leaves time for the windows that equilibrium takes; 0 for none.
    """

    end: float
    window: float
    windows_repeat: bool
    sample: float
    series: float
    snapshot: float = math.inf
    accelerated_until: float = 0.0

    def window_start(self) -> float:
        """Start of the window of a run with one window, s."""
        return max(0.0, self.end - self.window)


def equilibrium_plan(config: Config) -> Plan:
    """Windows one after another until equilibrium or ``equilibrium.longest_years``, a whole number of windows."""
    window = config.equilibrium.window_years * SECONDS_PER_YEAR
    longest = config.equilibrium.longest_years * SECONDS_PER_YEAR
    end = window * max(1, math.floor(longest / window + 1e-9))
    acceleration = config.equilibrium.acceleration
    latest = end - (config.equilibrium.windows_in_a_row + 1) * window
    return Plan(
        end=end,
        window=window,
        windows_repeat=True,
        accelerated_until=min(acceleration.longest_years * SECONDS_PER_YEAR, latest) if acceleration else 0.0,
        sample=config.output.sample_interval_days * SECONDS_PER_DAY,
        series=config.output.series_interval_days * SECONDS_PER_DAY,
    )


def evolution_plan(config: Config) -> Plan:
    """A fixed time, reported over the last ``equilibrium.window_years`` of it or the whole if that is shorter."""
    end = config.evolve.duration_days * SECONDS_PER_DAY
    snapshot = config.evolve.snapshot_interval_days
    return Plan(
        end=end,
        window=min(config.equilibrium.window_years * SECONDS_PER_YEAR, end),
        windows_repeat=False,
        sample=config.output.sample_interval_days * SECONDS_PER_DAY,
        series=config.output.series_interval_days * SECONDS_PER_DAY,
        snapshot=snapshot * SECONDS_PER_DAY if snapshot else math.inf,
    )
