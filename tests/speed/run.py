"""Speed of the swarm against the naive scalar twin, in one run: python tests/speed/run.py [--short]

The figure of merit is 1 / (relative variance of the drift velocity x CPU seconds), with all estimators of the kernel on
and relaxation included on both sides. The machine's noise hits both, so the ratio is what counts.
"""

import argparse
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))
from twin import Twin

import swarmgauge as sg
from swarmgauge.kernel.bits import vector_width
from swarmgauge.kernel.lanes import CUT, ELASTIC, NULL, RARE
from swarmgauge.swarm.cohort import layout_of, run_cohort
from swarmgauge.swarm.point_run import prepare
from swarmgauge.swarm.reduce import Reducer, lab_edges_eV

# set, E/N in Td, ceiling of the twin's flat majorant: the energy exceeded 1e-6 of the time, window of the twin
CASES = [("model-ramp", 24.0), ("argon-yamabe1983", 100.0), ("nitrogen-phelps1985", 100.0)]


def ceiling_eV(reducer: Reducer, rows: np.ndarray) -> float:
    """Energy exceeded during 1e-6 of the time."""
    lab = rows[:, reducer.layout.slices["lab"]].sum(axis=0)[0::2]
    above = np.cumsum(lab[::-1])[::-1] / lab.sum()
    return float(lab_edges_eV()[1:][np.flatnonzero(above > 1e-6)[-1]])


def measure(name: str, field: float, seconds: float) -> str:
    """One line of the table."""
    mixture = sg.Mixture({name: 1.0})
    plan = prepare(mixture, sg.Field(field), 1).plan
    assert plan is not None
    run_cohort(plan, 10_000)  # compiled and warm
    rows, cpu = [], 0.0
    while cpu < seconds or len(rows) < 20:
        sums, spent = run_cohort(plan, len(rows))
        rows.append(sums)
        cpu += spent
    table = np.array(rows)
    reducer = Reducer(plan)
    flights = table[:, layout_of(plan).slices["flights"]].sum(axis=0)
    share = 1.0 + plan.relaxation_windows / plan.measured_windows
    drift = reducer.quantities(table)["drift_velocity_flux"]
    ours = drift.mean() ** 2 / (drift.var(ddof=1) / len(rows)) / cpu

    twin = Twin(mixture, field, ceiling_eV(reducer, table), plan.window_time)
    twin.batch(1, 2, 1, 0)
    begin = time.process_time()
    windows = max(2 * plan.lags, 60)
    batches = []
    while time.process_time() - begin < 2 * seconds or len(batches) < 20:
        batches.append(twin.batch(len(batches) + 1, 100, windows, plan.lags))
    twin_cpu = time.process_time() - begin
    sums = np.array(batches)
    twin_drift = sums[:, 1] / sums[:, 0]
    theirs = twin_drift.mean() ** 2 / (twin_drift.var(ddof=1) / len(batches)) / twin_cpu
    ours_ns = 1e9 * cpu / share
    theirs_ns = 1e9 * twin_cpu / (1.0 + plan.lags / windows)
    return (
        f"{name:20s} {field:5g} {ours_ns / flights.sum():9.1f} {ours_ns / flights[NULL:].sum():7.1f} "
        f"{ours_ns / (flights[ELASTIC] + flights[RARE]):8.1f} {flights[NULL] / flights[NULL:].sum():6.2f} "
        f"{flights[CUT] / flights.sum():6.2f} {theirs_ns / sums[:, 7].sum():9.0f} {ours / theirs:14.1f}"
    )


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description="Speed against the naive twin.")
    parser.add_argument(
        "--seconds", type=float, default=5.0, help="CPU seconds per case (default 5; the twin takes twice)"
    )
    seconds = parser.parse_args().seconds
    print(f"vector width in use: {vector_width()} doubles")
    print("set                     Td ns/flight ns/cand  ns/real   null    cut twin/real gain in merit")
    for name, field in CASES:
        print(measure(name, field, seconds), flush=True)


if __name__ == "__main__":
    main()
