"""A reduced-gravity ocean model for the depth of the tropical thermocline."""

__version__ = "0.1.0"
