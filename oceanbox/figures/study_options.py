"""What can stand on a page of a study: one model of options for each kind of panel."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from difflib import get_close_matches
from typing import Annotated, Any, ClassVar, Literal

from pydantic import Discriminator, Field, Tag

from oceanbox import names
from oceanbox.config.section import CrossFault, Real, Section, Whole, choice, quantity
from oceanbox.diagnostics.theory_inputs import THEORY_INPUTS
from oceanbox.figures.options import PanelOptions

__all__ = [
    "Branches",
    "BudgetBars",
    "CaseMaps",
    "CaseSeries",
    "EquatorialSections",
    "KeyLabel",
    "LatitudeLines",
    "ScalarAgainstScalar",
    "ScalarAlongAxis",
    "ScalarMap",
    "SensitivityBars",
    "StudyPanel",
    "StudyPanelOptions",
    "Switches",
]

AxisScale = Literal["linear", "logarithmic"]
Balance = Literal["tropics", "basin"]
Place = Annotated[str, Field(pattern=r"^[A-Za-z][A-Za-z0-9_]*=.+$")]
Parameters = Literal["fitted", "configured"]
BUDGETS = ("volume_budget", "heat_budget", "salt_budget")
DEPTH = "thermocline_depth"


class StudyPanelOptions(PanelOptions):
    """What every panel of a study has."""

    at: tuple[Place, ...] = choice(
        (), "The places on axes of the study at which the panel stays, each as axis=value, like names of cases."
    )


class KeyLabel(Section):
    """Words for a key of the configuration."""

    key: str = Field(description="The dotted key.")
    label: str = Field(description="The words that stand for it in a figure.")


class CasePanelOptions(StudyPanelOptions):
    """What every panel has that draws one thing for each of several cases."""

    cases: tuple[str, ...] = choice((), "The names of the cases that are drawn, or none for all of them.")


class ScalarAlongAxis(StudyPanelOptions):
    """Scalars against an axis of the study, one line for each place on a second axis."""

    tag: ClassVar[str] = "<scalar_along_axis>"
    kind: Literal["scalar_along_axis"] = choice("scalar_along_axis", "The word that picks this panel.")
    scalars: Annotated[tuple[str, ...], Field(min_length=1, max_length=6)] = choice(
        ("thermocline_depth_equator_mean",), "The scalars that are drawn, all of one unit."
    )
    axis: str | None = choice(None, "The axis of the study along the panel, or null for its first one.")
    axis_scale: AxisScale = choice("linear", "The scale of that axis.")
    spread: Literal["bars", "none"] = choice("bars", "Whether bars show the standard deviation within the window.")
    theory: Literal["none", "log_law", "advective_depth", "diffusive_depth"] = choice(
        "none", "The law drawn beside a thermocline depth."
    )
    balance: Balance = choice("tropics", "Whether the log law balances the tropics by themselves or the whole basin.")
    parameters: Parameters = choice("fitted", "Whether the log law has fitted or configured parameters.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """Scalars exist and share a unit; a law is about one depth."""
        yield from _scalar_faults("scalars.{}", self.scalars)
        units = {_units_of(name) for name in self.scalars} - {""}
        if len(units) > 1:
            yield CrossFault("scalars", " and ".join(sorted(units)), "must have one unit", "draw a panel for each unit")
        if self.theory != "none" and not (len(self.scalars) == 1 and self.scalars[0].startswith(DEPTH)):
            yield _not_a_depth("theory", self.theory, "one scalar, a thermocline depth")


class ScalarAgainstScalar(StudyPanelOptions):
    """One scalar against another, a mark for each case."""

    tag: ClassVar[str] = "<scalar_against_scalar>"
    kind: Literal["scalar_against_scalar"] = choice("scalar_against_scalar", "The word that picks this panel.")
    x: str = choice("applied_high_latitude_loss", "The scalar along the panel.")
    y: str = choice("thermocline_depth_equator_mean", "The scalar up the panel.")
    x_scale: AxisScale = choice("linear", "The scale of the axis along the panel.")
    y_scale: AxisScale = choice("linear", "The scale of the axis up the panel.")
    coloured_by: str | None = choice(None, "The axis of the study that colours the marks, or null for one colour.")
    joined_along: str | None = choice(None, "The axis of the study along which marks are joined, or null for none.")
    spread: Literal["bars", "none"] = choice("bars", "Whether bars show the standard deviations within the window.")
    theory: Literal["none", "log_law"] = choice(
        "none", "The law drawn beside a thermocline depth against the ratio of upwelled to destroyed water."
    )
    parameters: Literal["fitted", "configured", "both"] = choice("fitted", "The parameters with which it is drawn.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """Scalars exist; the log law needs its own two axes."""
        yield from _scalar_faults("{}", (self.x, self.y), ("x", "y"))
        ratios = ("upwelling_ratio_tropics", "upwelling_ratio_basin")
        if self.theory == "log_law" and not (self.x in ratios and self.y.startswith(DEPTH)):
            yield _not_a_depth("theory", self.theory, f"x one of {' | '.join(ratios)} and y a thermocline depth")


class ScalarMap(StudyPanelOptions):
    """Contours of a scalar over two axes of the study."""

    tag: ClassVar[str] = "<scalar_map>"
    kind: Literal["scalar_map"] = choice("scalar_map", "The word that picks this panel.")
    scalar: str = choice("thermocline_depth_equator_mean", "The scalar that is contoured.")
    x_axis: str | None = choice(None, "The axis of the study along the panel, or null for its first one.")
    y_axis: str | None = choice(None, "The axis of the study up the panel, or null for its second one.")
    x_scale: AxisScale = choice("linear", "The scale of the axis along the panel.")
    y_scale: AxisScale = choice("linear", "The scale of the axis up the panel.")
    lowest: Real | None = choice(None, "The lower end of the colour scale in the unit drawn, or null to fit.")
    highest: Real | None = choice(None, "The upper end of the colour scale in the unit drawn, or null to fit.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """The scalar exists; a colour scale rises; two axes differ."""
        yield from _scalar_faults("scalar", (self.scalar,))
        yield from _rising(self.lowest, self.highest)
        if self.x_axis is not None and self.x_axis == self.y_axis:
            yield CrossFault("y_axis", self.x_axis, "must differ from x_axis", "name another axis")


class EquatorialSections(CasePanelOptions):
    """Thermocline depth or surface temperature along the equator, a line for each case."""

    tag: ClassVar[str] = "<equatorial_sections>"
    kind: Literal["equatorial_sections"] = choice("equatorial_sections", "The word that picks this panel.")
    field: Literal["thermocline_depth", "temperature"] = choice("thermocline_depth", "The field that is drawn.")


class LatitudeLines(CasePanelOptions):
    """A function of latitude, a line for each case."""

    tag: ClassVar[str] = "<latitude_lines>"
    kind: Literal["latitude_lines"] = choice("latitude_lines", "The word that picks this panel.")
    field: Literal["northward_heat_transport", "entrainment_south_of", "transformation_south_of", "overturning"] = (
        choice("northward_heat_transport", "The function of latitude that is drawn.")
    )


class CaseMaps(CasePanelOptions):
    """Maps of one field side by side, one for each case, with one colour scale."""

    tag: ClassVar[str] = "<case_maps>"
    kind: Literal["case_maps"] = choice("case_maps", "The word that picks this panel.")
    field: str = choice("thermocline_depth", "The field of the result files that is drawn, that of the top layer.")
    minus_case: str | None = choice(None, "The name of the case that is taken off the others, or null for none.")
    maps_across: Whole | None = quantity(None, "The number of maps side by side, or null for all in one row.", ge=1)
    lowest: Real | None = choice(None, "The lower end of the colour scale in the unit drawn, or null to fit.")
    highest: Real | None = choice(None, "The upper end of the colour scale in the unit drawn, or null to fit.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """The field is a map; a colour scale rises."""
        known = [name for name in names.all_names() if names.lookup(name).dims in (("y", "x"), ("layer", "y", "x"))]
        yield from _unknown("field", self.field, known, "a map at cell centres")
        yield from _rising(self.lowest, self.highest)


class BudgetBars(CasePanelOptions):
    """Terms of a budget integrated over regions, a bar for each case."""

    tag: ClassVar[str] = "<budget_bars>"
    kind: Literal["budget_bars"] = choice("budget_bars", "The word that picks this panel.")
    regions: Annotated[tuple[str, ...], Field(min_length=1)] = choice(
        ("tropics",), "The regions, each with axes of its own, from top to bottom."
    )
    terms: Annotated[tuple[str, ...], Field(min_length=1)] = choice(
        ("surface_heat_flux", "heat_advection", "heat_mixing", "outcrop_heat", "heat_storage"),
        "The terms of one budget.",
    )

    def cross_faults(self) -> Iterator[CrossFault]:
        """Regions and terms exist; terms are of one budget."""
        for index, region in enumerate(self.regions):
            yield from _unknown(f"regions.{index}", region, names.REGIONS, "a region")
        known = {name: group for group in BUDGETS for name in names.in_group(group)}  # type: ignore[arg-type]
        for index, term in enumerate(self.terms):
            yield from _unknown(f"terms.{index}", term, tuple(known), "a term of a budget")
        groups = {known[term] for term in self.terms if term in known}
        if len(groups) > 1:
            yield CrossFault("terms", " and ".join(sorted(groups)), "must be of one budget", "draw a panel for each")


class CaseSeries(CasePanelOptions):
    """A scalar against model time, a line for each case."""

    tag: ClassVar[str] = "<case_series>"
    kind: Literal["case_series"] = choice("case_series", "The word that picks this panel.")
    scalar: str = choice("thermocline_depth_equator_mean", "The scalar that is drawn.")
    from_year: Real = quantity(0.0, "The model time at which the axis begins.", "years", ge=0.0)
    to_year: Real | None = quantity(None, "The model time at which the axis ends, or null for all.", "years", gt=0.0)

    def cross_faults(self) -> Iterator[CrossFault]:
        """The scalar is one that a run may sample; time goes on."""
        yield from _unknown("scalar", self.scalar, names.in_group("scalar"), "a scalar of a result")
        if self.to_year is not None and self.to_year <= self.from_year:
            yield CrossFault("to_year", f"{self.to_year:g}", "must be greater than from_year", "swap the two")


class Branches(StudyPanelOptions):
    """A scalar on the way up and on the way down, with the intervals that bracket its jumps."""

    tag: ClassVar[str] = "<branches>"
    kind: Literal["branches"] = choice("branches", "The word that picks this panel.")
    scalar: str | None = choice(None, "The scalar that is drawn, or null for the one in which jumps were looked for.")
    spread: Literal["bars", "none"] = choice("bars", "Whether bars show the standard deviation within the window.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """The scalar exists."""
        if self.scalar is not None:
            yield from _scalar_faults("scalar", (self.scalar,))


class Switches(StudyPanelOptions):
    """The adjustment of a scalar to each of several switches, side by side, with the fitted exponential."""

    tag: ClassVar[str] = "<switches>"
    kind: Literal["switches"] = choice("switches", "The word that picks this panel.")
    scalar: str = choice("thermocline_depth_equator_mean", "The scalar that is drawn.")
    switches: tuple[str, ...] = choice((), "The names of the switches from left to right, or none for all of them.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """The scalar is one that a run may sample."""
        yield from _unknown("scalar", self.scalar, names.in_group("scalar"), "a scalar of a result")


class SensitivityBars(StudyPanelOptions):
    """Sobol' indices or elasticities of a scalar, bars for each key."""

    tag: ClassVar[str] = "<sensitivity_bars>"
    kind: Literal["sensitivity_bars"] = choice("sensitivity_bars", "The word that picks this panel.")
    scalar: str = choice("thermocline_depth_equator_mean", "The scalar whose sensitivities are drawn.")
    order: Literal["by_size", "as_given"] = choice("by_size", "The order of the keys from top to bottom.")
    labels: tuple[KeyLabel, ...] = choice((), "The words for keys; others are named by their last parts.")

    def cross_faults(self) -> Iterator[CrossFault]:
        """The scalar exists."""
        yield from _unknown("scalar", self.scalar, names.in_group("scalar"), "a scalar of a result")


def _panel_tag(value: Any) -> str:
    if isinstance(value, PanelOptions):
        return value.tag
    return f"<{value.get('kind', '')}>" if isinstance(value, dict) else "<>"


StudyPanel = Annotated[
    Annotated[ScalarAlongAxis, Tag(ScalarAlongAxis.tag)]
    | Annotated[ScalarAgainstScalar, Tag(ScalarAgainstScalar.tag)]
    | Annotated[ScalarMap, Tag(ScalarMap.tag)]
    | Annotated[EquatorialSections, Tag(EquatorialSections.tag)]
    | Annotated[LatitudeLines, Tag(LatitudeLines.tag)]
    | Annotated[CaseMaps, Tag(CaseMaps.tag)]
    | Annotated[BudgetBars, Tag(BudgetBars.tag)]
    | Annotated[CaseSeries, Tag(CaseSeries.tag)]
    | Annotated[Branches, Tag(Branches.tag)]
    | Annotated[Switches, Tag(Switches.tag)]
    | Annotated[SensitivityBars, Tag(SensitivityBars.tag)],
    Discriminator(_panel_tag),
]
"""Any panel of a study; its `kind` tells which."""


def _units_of(name: str) -> str:
    """Unit of a scalar or of an input of theory, '' if it is neither."""
    if name in THEORY_INPUTS:
        return THEORY_INPUTS[name].units
    return names.lookup(name).units if name in names.in_group("scalar") else ""


def _scalar_faults(key: str, scalars: Sequence[str], keys: Sequence[str] = ()) -> Iterator[CrossFault]:
    known = (*names.in_group("scalar"), *THEORY_INPUTS)
    for index, name in enumerate(scalars):
        place = keys[index] if keys else key.format(index)
        yield from _unknown(place, name, known, "a scalar of a result, or a number that a law needs")


def _unknown(key: str, name: str, known: Sequence[str], what: str) -> Iterator[CrossFault]:
    if name not in known:
        near = get_close_matches(name, known, n=3, cutoff=0.5)
        remedy = f"did you mean {' or '.join(near)}?" if near else f"take one of {', '.join(known)}"
        yield CrossFault(key, name, f"must be {what}", remedy)


def _not_a_depth(key: str, law: str, needed: str) -> CrossFault:
    return CrossFault(key, law, f"needs {needed}", "change what is drawn, or set theory to none")


def _rising(low: float | None, high: float | None) -> Iterator[CrossFault]:
    if low is not None and high is not None and low >= high:
        yield CrossFault("highest", f"{high:g} with lowest {low:g}", "must be greater than lowest", "swap the two")
