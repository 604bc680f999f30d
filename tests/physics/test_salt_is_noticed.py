"""Salt that a state brings along is carried, whatever the configuration started with."""

from __future__ import annotations

import numpy as np

from tests.building import box, run_days, set_state


def test_a_uniform_salinity_that_a_state_brings_stays_uniform_in_any_flow() -> None:
    """The quiet box starts at the abyss's salinity, where salt need not be carried; its state is then given 1 g/kg more.

    Water converges and diverges under a wind, so salt left in place would show at once.  Bound: round-off of some hundred
    steps, each a few eps of the content.
    """
    model = box({"surface.wind.zonal_stress_N_per_m2": 0.05, "numerics.step_s": 3600.0})
    set_state(model, sigma=np.ones_like(model.thickness))
    run_days(model, 20.0)
    assert float(np.ptp(model.thickness)) > 1.0
    steps = 20 * 24
    np.testing.assert_allclose(model.salinity - 35.0, 1.0, rtol=0.0, atol=10 * steps * np.finfo(float).eps * 36.0)
