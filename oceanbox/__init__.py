"""A reduced-gravity ocean model for the depth of the tropical thermocline.

``load`` reads a configuration, ``equilibrate`` and ``evolve`` run one and return its result as an xarray dataset,
``draw`` makes figures of a result.  They are imported when first used, so that importing the package costs nothing.
"""

from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"

if TYPE_CHECKING:
    from oceanbox.config import load
    from oceanbox.experiment.api import equilibrate, evolve
    from oceanbox.figures import draw

__all__ = ["__version__", "draw", "equilibrate", "evolve", "load"]

_HOMES = {
    "load": "oceanbox.config",
    "equilibrate": "oceanbox.experiment.api",
    "evolve": "oceanbox.experiment.api",
    "draw": "oceanbox.figures",
}


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module 'oceanbox' has no attribute {name!r}; it has {', '.join(__all__)}")
    import importlib

    return getattr(importlib.import_module(_HOMES[name]), name)
