"""Branches of the two-box model (Stommel 1961), whose folds are known, and of made-up systems that set traps."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from oceanbox.study.branch import TracedBranches, trace
from oceanbox.study.following import follow
from oceanbox.study.jumps import JumpRule, Nature, refine, suspected_jumps
from tests.theory.two_box import fold_in_ratio, steady_states

DELTA, RESISTANCE = 1.0 / 6.0, 0.2
WIDTH = 1e-8
# Steps that hit neither limit of the loop, R = 1 and R = 7/3.
RATIOS = [float(value) for value in np.linspace(0.55, 3.05, 26)]
# The integrator controls its error to 1e-9 of the boxes, which are of order 1; the flow is their difference over 0.2, and
# the slowest disturbance (growth rate -0.1 and faster at the steps) turns an error of the tendency into ten of the state.
FLOW_ERROR = 1e-9 / RESISTANCE * 10.0

State = tuple[float, float]


def two_boxes_at_rest(ratio: float, previous: State | None) -> tuple[State, float]:
    """Step the two boxes until they rest; salinity in units of temperature, so that R is the forcing and no part of the flow."""

    def tendency(_: float, boxes: tuple[float, float]) -> tuple[float, float]:
        warm, salt = boxes
        flow = abs(salt - warm) / RESISTANCE
        return 1.0 - warm - flow * warm, DELTA * (ratio - salt) - flow * salt

    def jacobian(_: float, boxes: tuple[float, float]) -> list[list[float]]:
        warm, salt = boxes
        flow, slope = abs(salt - warm) / RESISTANCE, math.copysign(1.0, salt - warm) / RESISTANCE
        return [[-1.0 - flow + slope * warm, -slope * warm], [slope * salt, -DELTA - flow - slope * salt]]

    # Close to a fold a disturbance takes 1/sqrt(distance) = 1e4 times to grow: 1e7 is rest.
    start = previous or (1.0, ratio)
    found = solve_ivp(tendency, (0.0, 1e7), start, method="LSODA", jac=jacobian, rtol=1e-9, atol=1e-12)
    warm, salt = (float(value) for value in found.y[:, -1])
    return (warm, salt), (salt - warm) / RESISTANCE


@pytest.fixture(scope="module")
def boxes() -> TracedBranches[State]:
    return trace(two_boxes_at_rest, RATIOS, JumpRule(), WIDTH)


def stable_flows(ratio: float) -> list[float]:
    return [state.flow for state in steady_states(ratio, DELTA, RESISTANCE) if state.growth_rate < 0.0]


def test_the_way_up_ends_at_the_fold(boxes: TracedBranches[State]) -> None:
    (jump,) = boxes.up.jumps
    fold = fold_in_ratio(DELTA, RESISTANCE)
    assert fold.parameter == pytest.approx(7.0 / 3.0, abs=1e-14)
    assert jump.nature is Nature.JUMP
    assert jump.lower < 7.0 / 3.0 < jump.upper
    assert jump.width <= WIDTH
    # Below the fold the flow is off its value there by the square root of the distance.
    assert jump.before.measure == pytest.approx(fold.flow, abs=math.sqrt(10.0 * WIDTH))


def test_the_way_down_ends_at_the_corner(boxes: TracedBranches[State]) -> None:
    (jump,) = boxes.down.jumps
    assert jump.nature is Nature.JUMP
    # The corner state itself, R = 1 with no flow, is steady to either side of round-off.
    assert jump.lower <= 1.0 + FLOW_ERROR and jump.upper >= 1.0
    assert jump.width <= WIDTH
    assert jump.before.measure == pytest.approx(0.0, abs=FLOW_ERROR + WIDTH)


def test_both_branches_are_followed(boxes: TracedBranches[State]) -> None:
    """Up on the lower stable state to its end at 7/3, down on the upper one to its end at 1."""
    up = {point.parameter: point.measure for point in boxes.up.branch.points}
    down = {point.parameter: point.measure for point in boxes.down.branch.points}
    assert list(up) == RATIOS and list(down) == RATIOS[::-1]
    assert boxes.down.branch.points[0] is boxes.up.branch.points[-1]
    assert len(boxes.down.branch.points) == len(RATIOS)
    two_states = 0
    for ratio in RATIOS:
        flows = stable_flows(ratio)
        assert up[ratio] == pytest.approx(flows[0], abs=FLOW_ERROR), ratio
        assert down[ratio] == pytest.approx(flows[-1], abs=FLOW_ERROR), ratio
        two_states += len(flows) == 2
    assert two_states == sum(1.0 < ratio < 7.0 / 3.0 for ratio in RATIOS)


def test_a_step_that_is_too_large_does_not_end_a_branch(boxes: TracedBranches[State]) -> None:
    """From 1.15 to 1.05 in one step the transient crosses to the other branch, in smaller steps it does not."""
    (provoked,) = boxes.down.provoked
    assert provoked.nature is Nature.PROVOKED
    assert provoked.after.parameter == pytest.approx(1.05)
    assert provoked.after.measure < 0.0 < provoked.probes[-1].measure


def test_the_loop_is_the_region_of_two_states(boxes: TracedBranches[State]) -> None:
    (loop,) = boxes.loops
    assert loop.least_width == pytest.approx(4.0 / 3.0, abs=2.0 * WIDTH + FLOW_ERROR)
    inside = [loop.lower.upper, *(ratio for ratio in RATIOS if 1.0 < ratio < 7.0 / 3.0), loop.upper.lower]
    gaps = [stable_flows(ratio)[-1] - stable_flows(ratio)[0] for ratio in inside[1:-1]]
    # At the ends one of the two ways is a straight line between its steps, which curves by less than 1e-2 per step.
    ends = [-stable_flows(1.0 + 1e-12)[0], stable_flows(7.0 / 3.0 - 1e-12)[-1] + 2.0 / 3.0]
    exact = float(np.trapezoid([ends[0], *gaps, ends[1]], inside))
    assert loop.area == pytest.approx(exact, abs=1e-2 * 0.1)
    assert loop.largest_gap == pytest.approx(max(*gaps, *ends), abs=1e-2)


class Relay(NamedTuple):
    """A system with two states: it goes high at 2 on the way up, low at 1 on the way down."""

    rise: float = 2.0
    fall: float = 1.0
    jump: float = 10.0
    slope: float = 0.1

    def __call__(self, parameter: float, previous: bool | None) -> tuple[bool, float]:
        high = parameter >= (self.fall if previous else self.rise)
        return high, self.jump * high + self.slope * parameter


STEPS = [0.1 + 0.3 * step for step in range(11)]


def test_without_refining_a_jump_is_bracketed_by_its_step() -> None:
    found = trace(Relay(), STEPS, JumpRule(), None)
    assert [(jump.direction, jump.nature) for jump in found.jumps] == [
        ("up", Nature.UNREFINED),
        ("down", Nature.UNREFINED),
    ]
    for jump, place in zip(found.jumps, (2.0, 1.0), strict=True):
        assert jump.lower <= place <= jump.upper
        assert jump.width == pytest.approx(0.3)
    (loop,) = found.loops
    assert loop.largest_gap == pytest.approx(10.0)


@pytest.mark.parametrize("width", [0.1, 1e-3, 1e-9])
def test_a_bracket_is_as_narrow_as_asked_for_and_no_narrower(width: float) -> None:
    found = trace(Relay(), STEPS, JumpRule(), width)
    for jump, place in zip(found.jumps, (2.0, 1.0), strict=True):
        assert jump.nature is Nature.JUMP
        assert jump.lower <= place <= jump.upper
        assert 0.5 * width < jump.width <= width
        # One halving for each factor of two, and one run more where the far end was reached by a larger step.
        assert len(jump.probes) <= math.ceil(math.log2(0.3 / width)) + 1


def test_a_jump_without_return_is_no_loop() -> None:
    found = trace(Relay(fall=-1.0), STEPS, JumpRule(), 1e-3)
    assert [jump.direction for jump in found.jumps] == ["up"]
    assert found.loops == ()


def test_jumps_that_do_not_undo_each_other_are_no_loop() -> None:
    """Up to a second state at 2, and on to a third one at 1 on the way down."""

    def onward(at: float, previous: int | None) -> tuple[int, float]:
        state = previous or 0
        state += (state == 0 and at >= 2.0) + (state == 1 and at < 1.0)
        return state, 10.0 * state + 0.1 * at

    found = trace(onward, STEPS, JumpRule(), 1e-3)
    assert [jump.direction for jump in found.jumps] == ["up", "down"]
    assert found.loops == ()


def test_a_branch_is_followed_across_a_place_where_large_steps_throw_the_system_off() -> None:
    """Two steps in a row throw it further and further; small ones never do."""

    def touchy(at: float, previous: tuple[float, int] | None) -> tuple[tuple[float, int], float]:
        before, thrown = previous or (at, 0)
        if abs(at - before) > 0.2 and 1.2 < at < 1.7:
            thrown = min(2, thrown + 1)
        return (at, thrown), (0.0, 7.0, 10.0)[thrown] + 0.1 * at

    found = trace(touchy, STEPS, JumpRule(), 1e-2)
    assert found.jumps == ()
    for way, places in ((found.up, STEPS), (found.down, STEPS[::-1])):
        assert [jump.after.parameter for jump in way.provoked] == [at for at in places if 1.2 < at < 1.7]
        assert [point.parameter for point in way.branch.points] == places
        assert [point.measure for point in way.branch.points] == pytest.approx([0.1 * at for at in places])


def test_a_smooth_branch_has_no_jump() -> None:
    found = trace(lambda at, _: (None, math.sin(at)), STEPS, JumpRule(), 1e-3)
    assert found.jumps == () and found.loops == ()


def test_a_steep_rise_is_no_jump() -> None:
    """Narrower than a step and wider than the bracket, the rise falls apart when it is refined."""
    found = trace(lambda at, _: (None, math.tanh((at - 1.47) / 0.02)), STEPS, JumpRule(), 1e-3)
    assert {jump.nature for jump in found.jumps} == {Nature.STEEP}
    assert found.loops == ()


def test_noise_below_the_least_jump_is_no_jump() -> None:
    noise = dict(zip(STEPS, np.random.default_rng(3).standard_cauchy(len(STEPS)), strict=True))

    def noisy(at: float, _: None) -> tuple[None, float]:
        return None, noise[at]

    assert suspected_jumps(follow(noisy, STEPS, "up"), JumpRule(2.0)) != []
    assert suspected_jumps(follow(noisy, STEPS, "up"), JumpRule(2.0, least=2.1 * max(map(abs, noise.values())))) == []


def test_a_jump_that_takes_two_steps_is_one() -> None:
    """A run that has not come to rest lies between the branches."""
    values = {at: 10.0 * (at > 1.4) - 6.0 * (1.4 < at < 1.7) + 0.1 * at for at in STEPS}
    (jump,) = suspected_jumps(follow(lambda at, _: (None, values[at]), STEPS, "up"), JumpRule())
    assert (jump.lower, jump.upper) == (STEPS[4], STEPS[6])


def test_a_way_goes_on_past_a_search_that_failed() -> None:
    relay = Relay()

    def fails_once(at: float, previous: bool | None) -> tuple[bool, float]:
        if at == STEPS[3]:
            return bool(previous), math.nan
        return relay(at, previous)

    found = trace(fails_once, STEPS, JumpRule(), 1e-3)
    assert not found.up.branch.points[3].found
    assert [jump.nature for jump in found.jumps] == [Nature.JUMP, Nature.JUMP]


def test_a_probe_that_fails_leaves_the_bracket_wide_and_the_nature_open() -> None:
    def fails_between(at: float, previous: bool | None) -> tuple[bool, float]:
        high, measure = Relay()(at, previous)
        return high, measure if at in STEPS else math.nan

    (jump, *_) = suspected_jumps(follow(fails_between, STEPS, "up"), JumpRule())
    refined = refine(fails_between, jump, 1e-3)
    assert refined.nature is Nature.UNREFINED
    assert refined.width == pytest.approx(0.3)


@pytest.mark.parametrize("parameters", [[1.0, 2.0], [1.0, 3.0, 2.0], [1.0, 1.0, 2.0]])
def test_parameters_that_do_not_ascend_are_refused(parameters: list[float]) -> None:
    with pytest.raises(ValueError, match="ascend"):
        trace(Relay(), parameters, JumpRule(), None)
