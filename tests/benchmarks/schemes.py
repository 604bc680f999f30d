"""Cost to a given accuracy of the time-stepping schemes on the reference basin: ``python -m tests.benchmarks.schemes STATE``.

From a spun-up state of ``configs/reference.yaml`` (its ``state.nc``) the trades drop to half, and sixty days are stepped by each
scheme at several steps.  Errors are root mean squares against the three-stage method at an eighth of its limit; cost is
processor time, best of two stretches because other work on the machine can only slow one down.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

import numpy as np

from oceanbox.config import load
from oceanbox.experiment.assembly import assemble_setup
from oceanbox.experiment.model import Model, choose_step, limits_for
from oceanbox.output.checkpoint import load_checkpoint

DAYS = 60.0
TRADES = "surface.wind.zonal_stress_N_per_m2.sum.0.peak"


def _model(state: Path, scheme: str, share: float) -> Model:
    """The reference basin with half the trades, at the state, stepping at ``share`` of the scheme's limit."""
    config = load(Path("configs/reference.yaml")).config.with_changes({TRADES: -0.03, "numerics.scheme": scheme})
    setup = assemble_setup(config)
    step = choose_step(limits_for(setup).smallest, share)
    model = Model(assemble_setup(config.with_changes({"numerics.step_s": step})))
    arrays, _ = load_checkpoint(state)
    for name, field in model.state._asdict().items():
        field[...] = arrays[f"state__{name}"]
    model.open_books()
    return model


def _run(state: Path, scheme: str, share: float) -> tuple[Model, float]:
    """The model after sixty days, and processor seconds of a model year."""
    model = _model(state, scheme, share)
    steps = round(0.5 * DAYS * 86400.0 / model.clock.dt)
    spent = []
    for _ in range(2):
        start = time.thread_time()
        model.advance(steps)
        spent.append(time.thread_time() - start)
    return model, min(spent) / (0.5 * DAYS) * 365.25


def _rms(a: np.ndarray, b: np.ndarray) -> float:
    return float(np.sqrt(np.mean((a - b) ** 2)))


def main(state: Path) -> None:
    """Print the table in Markdown."""
    truth, _ = _run(state, "runge_kutta_3", 0.125)
    print("| scheme | step (s) | share of its limit | error of thickness (m) | error of u (mm/s) | s per model year |")
    print("|---|---|---|---|---|---|")
    for scheme, share in (
        ("forward_backward", 0.85),
        ("forward_backward", 0.45),
        ("forward_backward", 0.22),
        ("runge_kutta_3", 0.85),
        ("runge_kutta_3", 0.45),
    ):
        model, cost = _run(state, scheme, share)
        depth = _rms(model.thickness, truth.thickness)
        speed = 1e3 * _rms(model.velocity_x, truth.velocity_x)
        print(f"| {scheme} | {model.clock.dt:.0f} | {share} | {depth:.3f} | {speed:.2f} | {cost:.1f} |", flush=True)


if __name__ == "__main__":
    main(Path(sys.argv[1]))
