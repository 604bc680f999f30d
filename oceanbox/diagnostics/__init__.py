"""Quantities derived from model fields: pure functions that read nothing, write nothing and know no model.

Each quantity exists twice: a bare form on numpy arrays that trusts its input, for the run loop, and a checked
door on labelled data that calls it.
"""

from oceanbox.diagnostics.geometry import Geometry
from oceanbox.diagnostics.probe import Probe, SampledScalars
from oceanbox.diagnostics.reference import Reference
from oceanbox.diagnostics.summary import summarise

__all__ = ["Geometry", "Probe", "Reference", "SampledScalars", "summarise"]
