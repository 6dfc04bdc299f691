"""Running swarms for the tests, and judging what comes of them."""

from concurrent.futures import ThreadPoolExecutor

import numpy as np

from swarmgauge.swarm.cohort import run_cohort
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.pilot import fly_pilot
from swarmgauge.swarm.plan import first_plan, solved
from swarmgauge.swarm.point_run import estimates_of
from swarmgauge.swarm.reduce import Reducer


def cohorts(mixture, E_over_N_Td, seed, count, **options):
    """Reducer and sums, (count, columns), of cohorts with options of `first_plan`, such as electrons."""
    field = Field(E_over_N_Td)
    plan = fly_pilot(first_plan(mixture, field, seed, solved(mixture, field), **options)).plan
    assert plan is not None
    with ThreadPoolExecutor(2) as executor:
        rows = list(executor.map(lambda index: run_cohort(plan, index)[0], range(count)))
    return Reducer(plan), np.array(rows)


def swarm(mixture, E_over_N_Td, seed, count, **options):
    """Estimates and energy distribution of so many cohorts."""
    return estimates_of(*cohorts(mixture, E_over_N_Td, seed, count, **options))[:2]


def assert_exact(estimates, exact, precision, sigmas=3.5, theory=0.0):
    """Every estimate within `sigmas` of its standard errors of the exact value, and these as small as `precision` says.

    precision : quantity name, or its beginning, to the largest relative standard error allowed; a long error bar would
    pass any value. theory : relative error of the exact values.
    """
    for name, value in exact.items():
        estimate = estimates[name]
        allowed = next(error for start, error in precision.items() if name.startswith(start))
        off = abs(estimate.value - value)
        assert estimate.standard_error < allowed * abs(value), f"{name}: {estimate!r} is too rough to compare"
        assert estimate.standard_error > 0.0
        assert off < sigmas * estimate.standard_error + theory * abs(value), f"{name}: {estimate!r}, exact {value:.6g}"
