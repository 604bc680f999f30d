"""What a branch study has found, in sentences with their numbers and reservations."""

from __future__ import annotations

import numpy as np

from oceanbox import names
from oceanbox.study.branch import HysteresisLoop, TracedBranches, Way
from oceanbox.study.following import Point
from oceanbox.study.jumps import Jump
from oceanbox.study.visits import Visit

__all__ = ["branch_findings", "branch_probes", "branch_visits"]


def branch_findings(traced: TracedBranches[Visit], measure: str, unit: str) -> list[str]:
    """Each jump, each loop, the largest distance of the two ways, and what weakens these findings.

    measure    the scalar in which jumps were looked for
    unit       of the key that was moved; '' or '1' for none
    """
    entry, unit = names.lookup(measure), _shown(unit)
    lines = [_jump_sentence(jump, entry, unit) for jump in traced.jumps]
    for way in (traced.up, traced.down):
        lines += [_provoked_sentence(jump, way, unit) for jump in way.provoked]
    lines += [_loop_sentence(loop, entry, unit) for loop in traced.loops]
    if not traced.jumps:
        lines.append("no jump: no change over one step stands out on either way")
    lines.append(_apart_sentence(traced, entry, unit))
    return lines + _reservations(branch_visits(traced))


def branch_probes(traced: TracedBranches[Visit]) -> list[tuple[str, Point[Visit]]]:
    """The points found while refining, each with the way that it belongs to."""
    refined = (*traced.up.provoked, *traced.up.jumps, *traced.down.provoked, *traced.down.jumps)
    return [(jump.direction, probe) for jump in refined for probe in jump.probes]


def branch_visits(traced: TracedBranches[Visit]) -> list[Visit]:
    """Every case that the findings rest on, once."""
    points = [*traced.up.branch.points, *traced.down.branch.points, *(probe for _, probe in branch_probes(traced))]
    return list({point.state.result_path: point.state for point in points}.values())


def _jump_sentence(jump: Jump[Visit], entry: names.Variable, unit: str) -> str:
    spread = max(point.state.scalar(f"{entry.name}_std") for point in (jump.before, jump.after))
    return (
        f"{jump.direction}: {jump.nature.value} between {jump.lower:.8g} and {jump.upper:.8g}{unit}: {entry.long_name} "
        f"from {jump.before.measure:.5g} to {jump.after.measure:.5g}{_shown(entry.units)} "
        f"(standard deviation within a window {spread:.2g})"
    )


def _provoked_sentence(jump: Jump[Visit], way: Way[Visit], unit: str) -> str:
    one, two = (point.parameter for point in way.branch.points[:2])
    return (
        f"{jump.direction}: at {jump.after.parameter:.8g}{unit} a step of {abs(two - one):.4g} throws the ocean off a branch "
        f"that goes on for steps of {jump.width:.2g}; it was followed on"
    )


def _loop_sentence(loop: HysteresisLoop[Visit], entry: names.Variable, unit: str) -> str:
    return (
        f"hysteresis: two states at least between {loop.lower.upper:.8g} and {loop.upper.lower:.8g}{unit}, "
        f"{entry.long_name} up to {loop.largest_gap:.4g}{_shown(entry.units)} apart, at {loop.widest_at:.8g}{unit}"
    )


def _apart_sentence(traced: TracedBranches[Visit], entry: names.Variable, unit: str) -> str:
    up, down = traced.up.branch.points, tuple(reversed(traced.down.branch.points))
    gaps = np.array([abs(one.measure - two.measure) for one, two in zip(up, down, strict=True)])
    if np.isnan(gaps).all():
        return "no step was found on both ways"
    widest = int(np.nanargmax(gaps))
    return (
        f"at the steps the two ways are up to {gaps[widest]:.4g}{_shown(entry.units)} apart in {entry.long_name}, "
        f"at {up[widest].parameter:.8g}{unit}"
    )


def _reservations(visits: list[Visit]) -> list[str]:
    lines = []
    unsettled, failed = sum(visit.unsettled for visit in visits), sum(visit.failed for visit in visits)
    if unsettled:
        lines.append(
            f"{unsettled} of {len(visits)} cases did not reach equilibrium: the two ways may be apart, and jumps displaced, "
            "for lack of time alone"
        )
    if failed:
        lines.append(f"{failed} of {len(visits)} cases failed; the way went on from the last one before that did not")
    return lines


def _shown(unit: str) -> str:
    """A unit as it follows a number."""
    return "" if unit in ("", "1") else f" {unit}"
