"""The cuts that make a swarm finite leave no bias: a thinned form of the study in bias/study.py."""

from concurrent.futures import ThreadPoolExecutor

import pytest
from bias.study import CONSTANT, exact_moments, measured, plan_of

# The closed forms: G. H. Wannier, Bell Syst. Tech. J. 32, 170 (1953), extended in swarm/test_exact.py.
LIMITS = {"mean_energy": 6e-4, "drift_velocity": 3e-4, "diffusion": 2.5e-3}


@pytest.mark.parametrize("electrons", [64, pytest.param(1024, marks=pytest.mark.slow)])
def test_a_finite_cohort_has_no_bias(electrons):
    # Without weights for past growth, 64 electrons give an energy 0.55 % too high and a drift 0.23 % too high.
    flights = 2e6 if electrons == 64 else 1.5e7
    with ThreadPoolExecutor(2) as executor:
        values = measured(plan_of(CONSTANT, electrons), flights, executor)
    for name, exact in exact_moments().items():
        limit = next(limit for start, limit in LIMITS.items() if name.startswith(start))
        assert values[name].standard_error < limit * exact.value * (1.0 if electrons == 64 else 0.4)
        assert abs(values[name].value - exact.value) < 3.5 * values[name].standard_error, name
