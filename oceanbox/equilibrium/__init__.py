"""When a run is in equilibrium: measures on window means, and their judgement."""

from oceanbox.equilibrium.judgement import Drift, Tolerances, WindowMeans, drift_between, held

__all__ = ["Drift", "Tolerances", "WindowMeans", "drift_between", "held"]
