"""The entry kernel: one compilation, majorants that do not matter, and plain Python that gives the same bits."""

import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from kernel.model_gases import HELIUM_U, model, power_law
from swarmgauge.gas import Mixture
from swarmgauge.kernel.cohort import COMBED, compiled_windows
from swarmgauge.kernel.lanes import CUT, NULL, lane_count
from swarmgauge.kernel.lookup import LAB_CELLS
from swarmgauge.swarm.cohort import CohortRun, layout_of, run_cohort
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.pilot import fly_pilot
from swarmgauge.swarm.plan import first_plan, solved
from swarmgauge.swarm.reduce import Reducer


def cohorts(mixture, field, seed, count, **options):
    """Sums of `count` cohorts and the reducer of their plan."""
    field = Field(field)
    plan = fly_pilot(first_plan(mixture, field, seed, solved(mixture, field), **options)).plan
    return Reducer(plan), np.array([run_cohort(plan, index)[0] for index in range(count)])


def test_one_compilation_serves_all_gases():
    for name, field in (("model-ramp", 24.0), ("argon-yamabe1983", 100.0), ("model-attachment", 10.0)):
        mixture = Mixture({name: 1.0})
        field = Field(field)
        plan = first_plan(mixture, field, 1, solved(mixture, field), electrons=64)
        CohortRun(plan, 0).windows(1, True)
        CohortRun(plan, 0).windows(2, False)
    kernel = compiled_windows(lane_count(1024), 1, False, COMBED, False, False)
    assert len(kernel.signatures) == 1


@pytest.mark.parametrize(
    ("name", "field", "temperature"),
    [("model-ramp", 24.0, 0.0), ("argon-yamabe1983", 100.0, 0.0), ("model-ramp", 1.0, 293.15)],
)
def test_sum_of_inverse_majorants_is_the_time(seed, name, field, temperature):
    # Candidates occur at rate M: the sum of weight / M over them estimates the total time without bias.
    reducer, rows = cohorts(Mixture({name: 1.0}, temperature_K=temperature), field, seed, 20)
    at = reducer.layout.slices
    lab = rows[:, at["lab"]].reshape(len(rows), LAB_CELLS, 2)[:, :, 0].sum(axis=1)
    ratio = lab / rows[:, at["time"]][:, 0]
    error = ratio.std(ddof=1) / len(rows) ** 0.5
    assert error < 3e-4
    assert abs(ratio.mean() - 1.0) < 3.5 * error
    # with independent exponential flights the error is known: one over the root of the candidates, or less
    candidates = rows[:, at["flights"]][:, 1:].sum()
    assert 0.5 < error * candidates**0.5 < 1.6


@pytest.mark.parametrize(("name", "field", "wide"), [("model-ramp", 24.0, 500.0), ("argon-yamabe1983", 300.0, 5000.0)])
def test_windows_of_the_majorant_do_not_matter(seed, name, field, wide):
    results = []
    # The best of a geometric series of windows is taken, 0.001 to 16 times the scale: these force others upon it.
    for scale, own_seed in ((1.0, seed), (0.003, seed + 1), (wide, seed + 2)):
        reducer, rows = cohorts(Mixture({name: 1.0}), field, own_seed, 24, window_scale=scale)
        values = reducer.quantities(rows)
        flights = rows[:, reducer.layout.slices["flights"]].sum(axis=0)
        means = {q: (v.mean(), v.std(ddof=1) / len(v) ** 0.5) for q, v in values.items()}
        results.append((means, flights / flights.sum()))
    assert results[1][1][CUT] > 1.5 * results[0][1][CUT]
    assert results[2][1][NULL] > 1.3 * results[0][1][NULL]
    first = results[0][0]
    for means, _ in results[1:]:
        for quantity, (value, error) in means.items():
            both = np.hypot(error, first[quantity][1])
            assert abs(value - first[quantity][0]) <= 4.2 * both, quantity  # some 15 quantities, two comparisons
    for quantity in ("drift_velocity_flux", "mean_energy", "collision_frequency_over_N"):
        assert first[quantity][1] < 2e-3 * first[quantity][0]


SMALL_RUN = """
import hashlib, sys
import numpy as np
from swarmgauge.gas import Mixture
from swarmgauge.kernel import cohort
from swarmgauge.swarm.cohort import CohortRun, reduced
from swarmgauge.swarm.plan import Plan
from swarmgauge.swarm.field import Field
np.seterr(over="ignore")  # uint64 arithmetic wraps by design
name, field, temperature = sys.argv[1], float(sys.argv[2]), float(sys.argv[3])
mixture = Mixture({name: 1.0}, temperature_K=temperature)
plan = Plan(mixture, Field(field), 5, 24, 3, 2.0, np.linspace(0.0, 16.0, 33), np.linspace(0, 1, 33), 0, 3)
run = CohortRun(plan, 0)
series = run.windows(3, True)
arrays = (*run.work, series, reduced(plan, run.work, series))
digest = hashlib.sha256(b"".join(array.tobytes() for array in arrays))
print(int(run.work.counts.sum()), run.work.events.sum(), digest.hexdigest())
"""


def small_run(plain, *arguments):
    environment = os.environ | {"NUMBA_DISABLE_JIT": "1" if plain else "0"}
    done = subprocess.run(
        [sys.executable, "-W", "ignore:overflow encountered", "-c", SMALL_RUN, *map(str, arguments)],
        capture_output=True, text=True, env=environment, cwd=Path(__file__).parent, timeout=300,
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    return done.stdout.split()


@pytest.mark.parametrize(
    ("name", "field", "temperature"),
    [("model-constant-growth", 30.0, 0.0), ("nitrogen-phelps1985", 300.0, 0.0), ("model-ionization-f05", 40.0, 293.15)],
)
def test_plain_python_gives_the_same_bits(name, field, temperature):
    compiled, plain = (small_run(flag, name, field, temperature) for flag in (False, True))
    assert int(compiled[0]) > 500  # flights
    assert int(compiled[1]) > 5  # non-elastic events
    assert compiled == plain


def test_a_cohort_is_a_pure_function(seed):
    mixture = model(HELIUM_U, power_law("elastic", 6e-20), power_law("excitation", 1e-20, threshold_eV=2.0))
    field = Field(20.0)
    plan = first_plan(mixture, field, seed, solved(mixture, field), electrons=64).with_windows(2, 4)
    first, _ = run_cohort(plan, 3)
    other, _ = run_cohort(plan, 4)
    again, _ = run_cohort(plan, 3)
    assert (first == again).all()
    assert (first != other).any()
    assert first[layout_of(plan).slices["time"]] == pytest.approx(64 * 4 * plan.window_time, rel=1e-9)
