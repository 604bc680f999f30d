"""The methods section states what was run: every number in it is that of the configuration."""

from __future__ import annotations

from pathlib import Path

import pytest

from oceanbox.config import identity, loads
from oceanbox.study.methods import methods_text
from oceanbox.study.status import CaseStatus, State
from tests.study.oceans import TARGET, TARGETS, WIND, study_of

DONE = CaseStatus(State.DONE, ending="completed")


def flat(text: str) -> str:
    return " ".join(text.split())


def test_model_domain_forcing_and_criteria_are_stated(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"command": "equilibrate", "axes": [TARGETS], "description": "A trial."})
    text = flat(methods_text(loaded.study, loaded.base, [DONE]))
    for words in (
        "A trial.",
        "12 x 16 cells of 100 km x 100 km",
        "from 7.19 S to 7.19 N",
        "viscosity is 80000 m2 s-1",
        "zonal wind stress is -0.03 N m-2 everywhere",
        "35 W m-2 K-1 everywhere towards a target of 20 degC everywhere",
        "in 2 successive windows of 2 years",
        "below 1 % and that of heat content below 1 % per decade",
        f"Target ({TARGET}) of 15, 20, 25 degC",
        "numba",
        identity(loaded.base),
        "Walin (1982)",
    ):
        assert words in text, words


@pytest.mark.parametrize(
    ("key", "value", "words"),
    [
        ("transformation", None, "Surface cooling destroys no warm water"),
        ("transformation.efficiency", {"kind": "constant", "value": 0.25}, "a constant share of 0.25"),
        ("entrainment.diffusive", {"diffusivity_m2_per_s": 3.0e-5}, "by a vertical diffusivity of 3e-05 m2 s-1"),
        ("water.equation_of_state", "linear", "linear with thermal expansion 0.0002 K-1"),
        ("basin.zonal_boundary", "periodic", "periodic in longitude"),
        ("numerics.step_s", 1234.0, "with a step of 1234 s"),
        ("surface.heat.loss_band", {"total_PW": 0.5}, "heat is lost between 30 and 45 degrees (both), 0.5 PW in all"),
        (WIND, {"shape": "band", "peak": 0.08}, "a sin2 bump with peak 0.08 N m-2 between 30 and 45 degrees in both hemispheres"),
        (WIND, {"points": [[-5.0, 0.0], [5.0, 0.1]]}, "linear between points of latitude (0 at -5, 0.1 at 5 degrees; N m-2)"),
    ],
)  # fmt: skip
def test_what_is_changed_is_stated_as_changed(tmp_path: Path, key: str, value: object, words: str) -> None:
    loaded = study_of(tmp_path, {"cases": [{"name": "a"}]})
    before = flat(methods_text(loaded.study, loaded.base, [DONE]))
    after = flat(methods_text(loaded.study, loaded.base.with_changes({key: value}), [DONE]))
    assert words not in before and words in after


def test_what_became_of_the_cases_is_counted_and_failures_give_their_reason(tmp_path: Path) -> None:
    loaded = study_of(tmp_path, {"axes": [TARGETS]})
    failed = CaseStatus(State.FAILED, reason="the step was too long", failure="UnstableRun")
    text = flat(methods_text(loaded.study, loaded.base, [DONE, DONE, failed]))
    assert "Of 3 cases, 2 ended with 'completed', 1 failed. Reasons of failure: the step was too long." in text


def test_a_sample_and_a_warm_start_are_stated(tmp_path: Path) -> None:
    sample = {"count": 4, "seed": 9, "ranges": [{"key": TARGET, "lowest": 15.0, "highest": 25.0}]}
    loaded = study_of(tmp_path, {"sample": sample, "warm_start": "nearest"})
    text = flat(methods_text(loaded.study, loaded.base, []))
    assert f"4 cases of a Latin hypercube (seed 9) over {TARGET} from 15 to 25 degC (linear)" in text
    assert "can hide that there is more than one equilibrium" in text


def test_what_a_threshold_or_sensitivity_study_does_is_stated(tmp_path: Path) -> None:
    """Extrapolation ends where a branch begins; runs of other lengths are named; ranges and steps are told."""
    branch = {"key": WIND, "lowest": -0.05, "highest": -0.03}
    text = flat(_text(tmp_path, {"command": "equilibrate", "branch": branch}))
    assert "The approach to the first equilibrium alone was shortened by extrapolation" in text
    switches = [{"name": "a", "changes": {WIND: -0.02}, "duration_days": 50.0}, {"name": "b", "changes": {WIND: -0.01}}]
    switch = {"switches": switches, "duration_days": 100.0, "series_interval_days": 1.0}
    text = flat(_text(tmp_path, {"command": "equilibrate", "switch": switch}))
    assert "Each case ran for 100 days (a for 50 days)" in text
    ranges = [
        {"key": key, "lowest": 0.5, "highest": 2.0} for key in (TARGET, "entrainment.upwelling.shear_damping_per_day")
    ]
    text = flat(_text(tmp_path, {"sensitivity": {"kind": "sobol_indices", "ranges": ranges, "base_samples": 4}}))
    assert "from 4 base points" in text and f"{TARGET} from 0.5 to 2 degC (linear)" in text
    spec = {"kind": "elasticities", "keys": ["motion.viscosity_m2_per_s"], "relative_step": 0.2}
    text = flat(_text(tmp_path, {"sensitivity": spec}))
    assert "central differences of 0.2 in the logarithm of motion.viscosity_m2_per_s" in text


def test_named_places_on_an_axis_are_told_with_what_the_key_becomes_there(tmp_path: Path) -> None:
    values = [-0.05, {"points": [[-5.0, 0.0], [5.0, 0.1]]}]
    axis = {"name": "wind", "key": WIND, "values": values, "positions": ["steady", "sheared"]}
    text = flat(_text(tmp_path, {"axes": [axis]}))
    assert (
        f"Wind ({WIND}) of steady (-0.05 N m-2), sheared (linear between points of latitude (0 at -5, 0.1 at 5 degrees; N m-2))."
        in text
    )


def _text(folder: Path, plan: dict[str, object]) -> str:
    loaded = study_of(folder, plan)
    return methods_text(loaded.study, loaded.base, [DONE])


def test_every_shipped_configuration_has_a_methods_section() -> None:
    from oceanbox.config import load
    from oceanbox.study.schema import Study

    study = Study.model_validate({"name": "a", "base": "b", "cases": [{"name": "c"}]})
    shipped = sorted((Path(__file__).parents[2] / "configs").rglob("*.yaml"))
    assert shipped
    for path in shipped:
        text = methods_text(study, load(path).config, [])
        assert "None" not in text and "Section" not in text, path
    assert "None" not in methods_text(study, loads("name: plain"), [])
