"""The entry of the table of variables, with the places on the grid and the phrases that entries share."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Group = Literal[
    "coordinate",
    "state",  # window means of the model state, and their standard deviations
    "forcing",  # what the run was given; constant in the file
    "volume_budget",
    "heat_budget",
    "salt_budget",
    "heat_transport",  # through cell faces
    "latitude",  # functions of the northward face coordinate
    "scalar",
    "series",
    "region",
]

CENTRE = ("y", "x")
X_FACE = ("y", "x_face")
Y_FACE = ("y_face", "x")
LAYER_CENTRE = ("layer", *CENTRE)
LAYER_X_FACE = ("layer", *X_FACE)
LAYER_Y_FACE = ("layer", *Y_FACE)

Attributes = tuple[tuple[str, str], ...]
ON_SCALE: Attributes = (("units_metadata", "temperature: on_scale"),)
DIFFERENCE: Attributes = (("units_metadata", "temperature: difference"),)

EASTWARD = "positive: eastward"
NORTHWARD = "positive: northward"
INTO_THE_OCEAN = "positive: into the ocean"
GAIN = "positive: the warm layer gains"
MADE = "positive: warm water is made"
DESTROYED = "positive: warm water is destroyed"


@dataclass(frozen=True)
class Variable:
    """What a file says about one variable.

    units       '' for text
    dims        () for a single number
    sign        what a positive number means, or which sign occurs; one phrase, written into `comment`
    attributes  further CF attributes as (name, text) pairs, such as `units_metadata`
    """

    name: str
    long_name: str
    units: str
    dims: tuple[str, ...]
    group: Group
    standard_name: str | None = None
    sign: str | None = None
    cell_methods: str | None = None
    attributes: Attributes = ()

    def cf_attributes(self) -> dict[str, str]:
        """The attributes of this variable in a file, apart from those that depend on the file's other variables."""
        stated = {
            "long_name": self.long_name,
            "standard_name": self.standard_name,
            "units": self.units,
            "comment": self.sign,
            "cell_methods": self.cell_methods,
            **dict(self.attributes),
        }
        return {key: text for key, text in stated.items() if text}


def mean_over_cell_and_window(dims: tuple[str, ...]) -> str:
    """Cell methods of a window mean: over the area of a cell, or along the face it is given on."""
    if "x_face" in dims:
        return "window: mean y: mean"
    if "y_face" in dims:
        return "window: mean x: mean"
    return "window: mean area: mean"
