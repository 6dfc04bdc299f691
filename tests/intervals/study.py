"""Are the error bars honest? Coverage of the 68 % and 95 % intervals: python tests/intervals/study.py

Many short runs, each of 20 cohorts of its own random streams, some tenths of a second long. The truth of a case is
the value from the sums of all its runs; its error, smaller than that of one run by the root of their number, is
allowed for.
"""

import argparse
import math
import sys
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from itertools import product

import numpy as np
from scipy.special import stdtrit
from scipy.stats import binomtest

import swarmgauge as sg
from swarmgauge.swarm.cohort import run_cohort
from swarmgauge.swarm.estimate import jackknife
from swarmgauge.swarm.point_run import prepare
from swarmgauge.swarm.reduce import Reducer

COHORTS = 20
LEVELS = (0.68, 0.95)
QUANTITIES = (
    "drift_velocity_flux",
    "drift_velocity_bulk",
    "diffusion_L_times_N_flux",
    "diffusion_T_times_N_flux",
    "diffusion_L_times_N_bulk",
    "diffusion_T_times_N_bulk",
    "mean_energy",
    "collision_frequency_over_N",
)
GASES = {
    "argon-yamabe1983": {},
    "nitrogen-phelps1985": {"temperature_K": 293.0},
    "oxygen-lawton1978": {"temperature_K": 293.0, "pressure_Pa": 1e5},
    "model-ionization-f05": {},
}
FIELDS = {
    "argon-yamabe1983": (30.0, 100.0, 300.0),
    "nitrogen-phelps1985": (20.0, 100.0, 300.0),
    "oxygen-lawton1978": (20.0, 100.0, 300.0),
    "model-ionization-f05": (5.0, 10.0, 20.0),
}


@dataclass(frozen=True)
class Cell:
    """Coverage of one quantity in one case: hits at each level out of `runs`."""

    case: str
    quantity: str
    runs: int
    hits: tuple[int, int]

    def probability(self, level: int) -> float:
        """Two-sided binomial p of the hits at LEVELS[level]."""
        return float(binomtest(self.hits[level], self.runs, LEVELS[level]).pvalue)


def study(
    gas: str, field: float, runs: int, flights: float, executor, quantities=QUANTITIES, rare: tuple[str, ...] = ()
) -> list[Cell]:
    """Coverage in one case over `runs` runs of COHORTS cohorts of about `flights` flights each, split for `rare`.

    Cohorts have a quarter of their electrons, so that a run does not last longer for its memory than for its flights.
    """
    plan = prepare(sg.Mixture({gas: 1.0}, **GASES[gas]), sg.Field(field), 11, rare).plan
    assert plan is not None
    if not rare:
        plan = replace(plan, electrons=plan.electrons // 4)
    scale = 4.0 * flights / 2e6
    plan = replace(plan, measured_windows=max(2 * plan.lags, math.ceil(scale * plan.measured_windows)))
    rows = np.array([sums for sums, _ in executor.map(lambda index: run_cohort(plan, index), range(runs * COHORTS))])
    reducer = Reducer(plan)

    def chosen(sums: np.ndarray) -> np.ndarray:
        values = reducer.quantities(sums)
        return np.stack([values[name] for name in quantities], axis=1)

    truth = chosen(rows.mean(axis=0, keepdims=True))[0]
    pulls = []
    for block in rows.reshape(runs, COHORTS, -1):
        value, error, _ = jackknife(chosen, block)
        # The truth holds the run itself: the variance of the difference is that of the run less one part in `runs`.
        pulls.append(np.abs(value - truth) / (error * math.sqrt(1.0 - 1.0 / runs)))
    reach = [float(stdtrit(COHORTS - 1, 0.5 + 0.5 * level)) for level in LEVELS]
    inside = [(np.array(pulls) < limit).sum(axis=0) for limit in reach]
    return [
        Cell(f"{gas} {field:g} Td", name, runs, (int(inside[0][place]), int(inside[1][place])))
        for place, name in enumerate(quantities)
    ]


def study_split(runs: int, flights: float, executor) -> list[Cell]:
    """The same for a split swarm: ionization of nitrogen at 50 Td, which a plain swarm meets once in 1e9 collisions."""
    name = "nitrogen-phelps1985/ionization"
    quantities = ("drift_velocity_flux", "diffusion_L_times_N_flux", "mean_energy", f"rate:{name}")
    return study("nitrogen-phelps1985", 50.0, runs, flights, executor, quantities, (name,))


def pooled(cells: list[Cell], level: int) -> float:
    """Share of hits over all cells."""
    return sum(cell.hits[level] for cell in cells) / sum(cell.runs for cell in cells)


def told(cells: list[Cell]) -> list[Cell]:
    """Print a line per cell."""
    for cell in cells:
        shares = " ".join(f"{hit / cell.runs:6.3f}" for hit in cell.hits)
        chances = " ".join(f"{cell.probability(level):8.2g}" for level in (0, 1))
        print(f"{cell.case:32s} {cell.quantity:36s} {shares} p {chances}", flush=True)
    return cells


def main() -> None:
    """Print a line per cell and the verdict."""
    parser = argparse.ArgumentParser(description="Coverage of the intervals over many short runs.")
    parser.add_argument("--runs", type=int, default=200)
    parser.add_argument("--flights", type=float, default=4e5, help="of one cohort")
    parser.add_argument("--workers", type=int, default=2)
    options = parser.parse_args()
    cells: list[Cell] = []
    with ThreadPoolExecutor(options.workers) as executor:
        for gas, place in product(GASES, range(3)):
            cells += told(study(gas, FIELDS[gas][place], options.runs, options.flights, executor))
        cells += told(study_split(options.runs, options.flights, executor))
    worst = min(cell.probability(level) for cell in cells for level in (0, 1))
    print(f"pooled: {pooled(cells, 0):.4f} at 68 %, {pooled(cells, 1):.4f} at 95 %; smallest p {worst:.2g}")
    honest = abs(pooled(cells, 0) - 0.68) < 0.02 and abs(pooled(cells, 1) - 0.95) < 0.01 and worst > 1e-4
    print("honest" if honest else "NOT honest")
    sys.exit(0 if honest else 1)


if __name__ == "__main__":
    main()
