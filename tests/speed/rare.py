"""What splitting gains for rare ionization, against a plain swarm of the same kernel: python tests/speed/rare.py

The figure of merit is 1 / (relative variance x CPU seconds). A plain swarm sees too few events to measure its own
variance; its figure is that of Poisson counting, an upper bound: expected events per CPU second.
"""

import numpy as np

import swarmgauge as sg
from swarmgauge.swarm.cohort import layout_of, run_cohort
from swarmgauge.swarm.plan import RATE_UNIT
from swarmgauge.swarm.point_run import estimates_of, prepare
from swarmgauge.swarm.reduce import Reducer

COHORTS = 40
# set, E/N in Td, conditions
CASES = [
    ("nitrogen-phelps1985", 50.0, {}),
    ("argon-yamabe1983", 10.0, {}),
    ("oxygen-lawton1978", 20.0, {"temperature_K": 293.15, "pressure_Pa": 101325.0}),
]


def swarm(mixture: sg.Mixture, field: float, rare: tuple[str, ...]) -> tuple[Reducer, np.ndarray, float]:
    """Reducer, sums and CPU seconds of COHORTS cohorts."""
    plan = prepare(mixture, sg.Field(field), 1, rare).plan
    assert plan is not None
    rows, spent = zip(*(run_cohort(plan, index) for index in range(COHORTS)), strict=True)
    return Reducer(plan), np.array(rows), sum(spent)


def main() -> None:
    """Print a line per case."""
    print("set                     Td rate (m^3/s)      error   CPU s  CPU s for 3 %  gain in merit")
    for name, field, conditions in CASES:
        mixture = sg.Mixture({name: 1.0}, **conditions)
        process = f"{name}/ionization"
        reducer, rows, cpu = swarm(mixture, field, (process,))
        rate = estimates_of(reducer, rows)[0][f"rate:{process}"]
        error = rate.standard_error / rate.value
        _, plain_rows, plain_cpu = swarm(mixture, field, ())
        plain_time = plain_rows[:, layout_of(reducer.plan).slices["time"]].sum()
        plain_merit = rate.value / RATE_UNIT * plain_time / plain_cpu
        print(
            f"{name:20s} {field:5g} {rate.value:12.3e} {100 * error:8.2f} % {cpu:7.1f} "
            f"{cpu * (error / 0.03) ** 2:14.1f} "
            f"{1 / (error**2 * cpu) / plain_merit:14.0f}",
            flush=True,
        )


if __name__ == "__main__":
    main()
