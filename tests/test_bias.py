"""The cuts that make a swarm finite leave no bias: a thinned form of the study in bias/study.py."""

import math
from concurrent.futures import ThreadPoolExecutor

import pytest
from bias.study import CONSTANT, QUANTITIES, exact_moments, measured, plan_of
from swarm.swarms import swarm

from swarmgauge.gas import Mixture

# The closed forms: G. H. Wannier, Bell Syst. Tech. J. 32, 170 (1953), extended in swarm/test_exact.py.
LIMITS = {"mean_energy": 6e-4, "drift_velocity": 3e-4, "diffusion": 2.5e-3}


@pytest.mark.parametrize("electrons", [64, pytest.param(1024, marks=pytest.mark.slow)])
def test_a_finite_cohort_has_no_bias(electrons):
    # Without weights for past growth, 64 electrons give an energy 0.55 % too high and a drift 0.23 % too high.
    flights = 7e5 if electrons == 64 else 1.5e7
    with ThreadPoolExecutor(2) as executor:
        values = measured(plan_of(CONSTANT, electrons), flights, executor)
    for name, exact in exact_moments().items():
        limit = next(limit for start, limit in LIMITS.items() if name.startswith(start))
        assert values[name].standard_error < limit * exact.value * (1.7 if electrons == 64 else 0.4)
        assert abs(values[name].value - exact.value) < 3.5 * values[name].standard_error, name


@pytest.mark.parametrize("field", [300.0])
def test_small_and_large_cohorts_agree(seed, field):
    # Ionization at 2 % of the collisions; bulk coefficients too. 512 electrons carry the work of 4096 in eight cohorts.
    mixture = Mixture({"argon-yamabe1983": 1.0})
    small, _ = swarm(mixture, field, seed, 40, electrons=512)
    large, _ = swarm(mixture, field, seed, 12, electrons=4096)
    for name in ("mean_energy", "ionization_frequency_over_N", *QUANTITIES, "diffusion_L_times_N_flux"):
        a, b = small[name], large[name]
        limit = next((limit for start, limit in LIMITS.items() if name.startswith(start)), 1e-3)
        assert a.standard_error < 7 * limit * a.value
        assert abs(a.value - b.value) < 3.5 * math.hypot(a.standard_error, b.standard_error), name
