"""The caption that goes beside a figure of a study: what it shows, of which cases, and what to be careful about."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from typing import TYPE_CHECKING

import yaml

from oceanbox import names
from oceanbox.diagnostics.theory_inputs import THEORY_INPUTS
from oceanbox.figures.shortened import SHORTENED
from oceanbox.figures.study_options import (
    Branches,
    BudgetBars,
    CaseMaps,
    CasePanelOptions,
    CaseSeries,
    EquatorialSections,
    LatitudeLines,
    ScalarAgainstScalar,
    ScalarAlongAxis,
    ScalarMap,
    SensitivityBars,
    StudyPanel,
    Switches,
)
from oceanbox.figures.study_panels.against import law_against
from oceanbox.figures.study_panels.along_axis import law_along, second_axis
from oceanbox.figures.study_panels.bars import TERM_WORDS
from oceanbox.figures.study_panels.branches import jumps_of, measure_of
from oceanbox.figures.study_panels.case_maps import cases_shown
from oceanbox.figures.study_panels.cases import StudyData
from oceanbox.figures.study_panels.laws import Law
from oceanbox.figures.study_panels.marks import axis_label, varying_number
from oceanbox.figures.study_panels.points import is_ordered
from oceanbox.figures.study_panels.sensitivity import has_indices
from oceanbox.figures.study_panels.switches import CONTROL, SOUND, record_of, shown_switches, time_words
from oceanbox.figures.study_panels.words import pretty, shown_name
from oceanbox.output.provenance import IDENTITY_ATTRIBUTE

if TYPE_CHECKING:
    from oceanbox.figures.study_page import StudyPage

__all__ = ["study_caption", "study_name", "study_sentence"]

_NOT_STATED = "not stated in the file"
_FINDINGS = ("oceanbox_branch_findings", "oceanbox_switch_findings", "oceanbox_sensitivity_findings")


def study_name(study: StudyData) -> str:
    """Name of a study from its file among the attributes, or its title; 'study' where neither states one."""
    text = study.dataset.attrs.get("oceanbox_study")
    tree = yaml.safe_load(text) if isinstance(text, str) else None
    name = tree.get("name") if isinstance(tree, dict) else None
    title = str(study.dataset.attrs.get("title", ""))
    return str(name or title.removeprefix("oceanbox study: ") or "study")


def study_caption(study: StudyData, page: StudyPage) -> str:
    """The whole caption as plain text, wrapped, one paragraph each for panels, cases and findings."""
    panels = [
        f"({letter}) {study_sentence(study, panel)}" if (letter := page.letter(index)) else study_sentence(study, panel)
        for index, panel in enumerate(page.panels)
    ]
    paragraphs = (" ".join(panels), _provenance(study), " ".join(_findings(study, page)))
    return "\n\n".join(textwrap.fill(text, 100, break_long_words=False) for text in paragraphs if text) + "\n"


def _findings(study: StudyData, page: StudyPage) -> list[str]:
    """What the study found, as sentences, without what is about scalars that the page does not show."""
    lines = "\n".join(str(study.dataset.attrs.get(name, "")) for name in _FINDINGS).splitlines()
    shown = {name for panel in page.panels for name in _scalars_of(study, panel)}
    hidden = set(names.in_group("scalar")) - shown
    kept = [line for line in lines if line and (_is_about(line, shown) or not _is_about(line, hidden))]
    return [f"{line if line.startswith('d ln ') else _sentence_case(_named(line))}." for line in kept]


def _scalars_of(study: StudyData, panel: StudyPanel) -> tuple[str, ...]:
    """The scalars whose findings belong beside a panel."""
    match panel:
        case Branches():
            return (panel.scalar or measure_of(study),)
        case Switches() | SensitivityBars():
            return (panel.scalar,)
        case _:
            return ()


def _is_about(line: str, scalars: set[str]) -> bool:
    return any(name in line.split() or f"{name}:" in line.split() or _long_name(name) in line for name in scalars)


def _named(line: str) -> str:
    """A finding whose case is called as figures call it."""
    head, colon, rest = line.partition(":")
    if head in names.in_group("scalar"):
        return f"{_long_name(head)}{colon}{rest}"
    return line if " " in head else f"{shown_name(head)}{colon}{rest}"


def study_sentence(study: StudyData, panel: StudyPanel) -> str:
    """What one panel shows."""
    match panel:
        case ScalarAlongAxis():
            text = _along(study, panel)
        case ScalarAgainstScalar():
            text = _against(study, panel)
        case ScalarMap():
            x, y = panel.x_axis or study.first_axis(0), panel.y_axis or study.first_axis(1)
            text = (
                f"{_sentence_case(_long_name(panel.scalar))}, over {_axis(study, x)} and {_axis(study, y)}. Contours are "
                "linear between the cases, which are the dots."
            )
        case EquatorialSections():
            what = "Thermocline depth" if panel.field == "thermocline_depth" else "Surface temperature"
            text = f"{what} along the equator, mean within 2° of it.{_lines(study, panel)}"
        case LatitudeLines():
            text = f"{_sentence_case(names.lookup(panel.field).long_name)}.{_lines(study, panel)}"
        case CaseMaps():
            text = _maps(study, panel)
        case BudgetBars():
            text = _bars(study, panel)
        case CaseSeries():
            text = f"{_sentence_case(_long_name(panel.scalar))}, against model time.{_lines(study, panel)}{_steps(study, panel)}"
        case Branches():
            text = _branches(study, panel)
        case Switches():
            text = _switches(study, panel)
        case _:
            text = _sensitivities(study, panel.scalar)
    return text + _places(study, panel.at)


def _along(study: StudyData, panel: ScalarAlongAxis) -> str:
    axis = panel.axis or study.first_axis()
    what = "; ".join(_long_name(name) for name in panel.scalars)
    other = second_axis(study, axis, panel.at)
    against = f", against {_axis(study, axis)}" if axis != "case_name" else ", of each case"
    colours = f"; one line for each {_axis(study, other)}" if other is not None else ""
    bars = " Bars: one standard deviation within the window." if panel.spread == "bars" else ""
    law = law_along(study, panel)
    line = "Dashed" if is_ordered(study.along(axis)) else "Black bars"
    return f"{_sentence_case(what)}{against}{colours}.{bars}{_law_words([law] if law is not None else [], [line])}"


def _against(study: StudyData, panel: ScalarAgainstScalar) -> str:
    text = f"{_sentence_case(_long_name(panel.y))}, against {_long_name(panel.x)}; a mark for each case."
    if panel.joined_along is not None:
        text += f" Lines join cases along {_axis(study, panel.joined_along)}."
    if panel.coloured_by is not None:
        text += f" Colour: {_axis(study, panel.coloured_by)}."
    if panel.spread == "bars":
        text += " Bars: one standard deviation within the window."
    return text + _law_words(law_against(study, panel))


def _law_words(laws: Sequence[Law], lines: Sequence[str] = ("Dashed", "Dotted")) -> str:
    """Each law that is drawn, by its line, and each that could not be."""
    text, before = "", ""
    for line, law in zip(lines, laws, strict=False):
        if law.label:
            text += f" {line}: {'the same' if law.formula == before else law.formula}, {law.fit}"
        else:
            text += f" There is {law.formula}: {law.fit}"
        before = law.formula
    return text


def _lines(study: StudyData, panel: CasePanelOptions) -> str:
    """What tells the lines of a panel apart."""
    cases = study.cases(panel.at, panel.cases)
    axis = varying_number(cases)
    colour = f" Colour: {_axis(study, axis)}." if axis is not None else ""
    dashed = " Dashed: not in equilibrium." if any(not case.settled for case in cases) else ""
    return f" One line for each of {len(cases)} cases.{colour}{dashed}"


def _steps(study: StudyData, panel: CasePanelOptions) -> str:
    """Why lines jump, where the way to equilibrium was shortened."""
    accelerated = [case for case in study.cases(panel.at, panel.cases) if case.accelerated]
    if not accelerated:
        return ""
    return f" {SHORTENED}"


def _maps(study: StudyData, panel: CaseMaps) -> str:
    cases, long_name = cases_shown(study, panel), names.lookup(panel.field).long_name
    axis = varying_number(cases)
    what = f"Maps of {long_name}"
    if panel.minus_case is not None:
        what += f", each minus that of the case {panel.minus_case}"
    by = f", for each {_axis(study, axis)}" if axis is not None else ""
    unsettled = [case.name for case in cases if not case.settled]
    reserved = f" Not in equilibrium: {', '.join(unsettled)}." if unsettled else ""
    sign = names.lookup(panel.field).sign
    meaning = f" {_sentence_case(sign)}." if sign is not None and panel.minus_case is None else ""
    return f"{what}{by}.{meaning}{reserved}"


def _bars(study: StudyData, panel: BudgetBars) -> str:
    cases = study.cases(panel.at, panel.cases)
    axis = varying_number(cases)
    group = names.lookup(panel.terms[0]).group.removesuffix("_budget")
    text = (
        f"Terms of the {group} budget integrated over {_and([name.replace('_', ' ') for name in panel.regions])}, positive "
        "where the warm layer gains."
    )
    if any(TERM_WORDS[term] == "storage" for term in panel.terms):
        text += " Storage is the sum of all other terms of the budget."
    text += f" Colour: {_axis(study, axis)}." if axis is not None else " A bar for each case."
    return text + (" Hatched: not in equilibrium." if any(not case.settled for case in cases) else "")


def _branches(study: StudyData, panel: Branches) -> str:
    scalar = panel.scalar or measure_of(study)
    text = (
        f"{_sentence_case(_long_name(scalar))}, against {_axis(study, 'parameter')}, on the way up and on the way down, each "
        "case started from the equilibrium before it."
    )
    if panel.spread == "bars":
        text += " Bars: one standard deviation within the window."
    if jumps := jumps_of(study):
        widths = _and([f"{jump.lower:.6g} to {jump.upper:.6g} on the way {jump.way}" for jump in jumps])
        text += f" Arrows are jumps, in bands that bracket them: {widths}."
    if f"probe_{scalar}" in study.dataset:
        text += " Small dots: cases run to bracket them."
    return text


def _switches(study: StudyData, panel: Switches) -> str:
    text = f"{_sentence_case(_long_name(panel.scalar))}, after each switch at time zero. Dots: means over intervals."
    if CONTROL in study.places("switch"):
        text += " Grey: the run in which nothing changes."
    fits = []
    for name in shown_switches(study, panel):
        record, shown = record_of(study, name, panel.scalar), shown_name(name)
        if record.trust == SOUND:
            fits.append(f"{shown}, e-folding time {time_words(record.e_folding, record.e_folding_error)}")
        else:
            fits.append(f"{shown}, {record.trust or 'no fit'}")
    return (
        f"{text} Line and diamond: exponential fit and its e-folding time, with its standard error. "
        f"{_sentence_case('; '.join(fits))}."
    )


def _sensitivities(study: StudyData, scalar: str) -> str:
    if has_indices(study, scalar):
        interval = str(study.dataset[f"sobol_total_lower_{scalar}"].attrs.get("long_name", "")).rpartition(" of its ")[
            2
        ]
        return (
            f"Sobol' indices of {_long_name(scalar)}: the share of its variance that each key causes alone (first order) and "
            f"together with its interactions (total), as estimated from the sample; error bars: {interval or 'interval'} "
            "from the bootstrap. An estimate for a key alone can come out above that with interactions, or below zero: that is "
            "sampling error."
        )
    return (
        f"Elasticities of {_long_name(scalar)}: its relative change for a small relative change of each key, by central "
        "differences. Error bars: error from the size of the step, a third of what halving it changes."
    )


def _provenance(study: StudyData) -> str:
    count = study.counts()
    parts = [f"Study {study_name(study)}: {count.cases} cases, {count.done} with a result"]
    if count.failed:
        parts.append(f"{count.failed} failed (crosses)")
    if waiting := count.cases - count.done - count.failed:
        parts.append(f"{waiting} not run")
    state = "all of these in equilibrium" if count.done else ""
    if count.unsettled:
        state = f"{count.unsettled} of those with a result did not reach equilibrium (open marks)"
    elif count.not_judged:
        state = f"an equilibrium was not looked for in {count.not_judged} of these"
    if count.probes:
        state += f", {count.probes} more run to bracket jumps"
    identity = study.dataset.attrs.get(IDENTITY_ATTRIBUTE, _NOT_STATED)
    return f"{', '.join([*parts, *([state] if state else [])])}. Base configuration identity {identity}."


def _long_name(name: str) -> str:
    return THEORY_INPUTS[name].long_name if name in THEORY_INPUTS else names.lookup(name).long_name


def _axis(study: StudyData, axis: str) -> str:
    """An axis in words, without its unit."""
    words = axis_label(study.along(axis)).rpartition(" (")[0] or axis_label(study.along(axis))
    return words[:1].lower() + words[1:]


def _places(study: StudyData, at: Sequence[str]) -> str:
    """Where the panel stays on other axes."""
    words = []
    for place in at:
        axis, _, value = place.partition("=")
        if axis == "direction":
            words.append(f"the equilibria of the way {value}")
            continue
        unit = pretty(str(study.along(axis).attrs.get("units", "")))
        words.append(f"{_axis(study, axis)} {value} {unit}".strip())
    return f" At {_and(words)}." if at else ""


def _and(words: Sequence[str]) -> str:
    return " and ".join([", ".join(words[:-1]), words[-1]] if len(words) > 1 else words)


def _sentence_case(text: str) -> str:
    return text[:1].upper() + text[1:]
