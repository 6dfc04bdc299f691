"""What biases the coefficients, and by how much: python tests/bias/study.py

Three cuts could: the finite cohort, whose comb lets electrons share ancestors; the relaxation dropped at its start; the
memory of the displacement histories and the windows they are cut into. Each is varied alone, in two gases of the
electron's mass with a large turnover of the population: constant frequencies of elastic collisions, ionization and
attachment, whose coefficients have closed forms; and an attachment frequency proportional to energy, where flux and
bulk differ, against a large cohort with a long memory.
"""

import argparse
import math
import sys
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parent.parent))

from kernel.model_gases import ELECTRON_U, constant_frequency, model, power_law
from swarm.test_exact import constant_frequency_moments

from swarmgauge.gas.process import Sharing
from swarmgauge.swarm.cohort import run_cohort
from swarmgauge.swarm.estimate import Estimate, jackknife
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.pilot import fly_pilot
from swarmgauge.swarm.plan import ELECTRONS, RATE_UNIT, Plan, first_plan, solved
from swarmgauge.swarm.reduce import Reducer

NU, GAIN, LOSS = 1e-13, 1e-14, 3e-14  # frequencies over N: elastic, ionization, attachment; m3/s
FIELD_TD = 300.0
COHORTS = 40
QUANTITIES = (
    "mean_energy",
    "drift_velocity_flux",
    "drift_velocity_bulk",
    "diffusion_T_times_N_bulk",
    "diffusion_L_times_N_bulk",
)
CONSTANT = model(
    ELECTRON_U,
    constant_frequency("elastic", NU),
    constant_frequency("ionization", GAIN, sharing=Sharing("equal")),
    constant_frequency("attachment", LOSS),
)
BY_ENERGY = model(ELECTRON_U, constant_frequency("elastic", NU), power_law("attachment", 4e-21, 0.5))


def plan_of(mixture, electrons: int) -> Plan:
    """The plan that a point would get, but for the number of electrons."""
    field = Field(FIELD_TD)
    plan = fly_pilot(first_plan(mixture, field, 1, solved(mixture, field), electrons=electrons)).plan
    assert plan is not None
    return plan


def measured(plan: Plan, flights: float, executor) -> dict[str, Estimate]:
    """Values of QUANTITIES from COHORTS cohorts of about `flights` flights each."""
    per_window = plan.electrons * plan.window_time * (NU + GAIN + LOSS) / RATE_UNIT
    plan = replace(plan, measured_windows=max(int(flights / per_window), plan.lags))
    rows = np.array(list(executor.map(lambda index: run_cohort(plan, index)[0], range(COHORTS))))
    reducer = Reducer(plan)

    def chosen(sums: np.ndarray) -> np.ndarray:
        values = reducer.quantities(sums)
        return np.stack([values[name] for name in QUANTITIES], axis=1)

    values, errors, _ = jackknife(chosen, rows)
    return {
        name: Estimate(float(value), float(error), "", COHORTS)
        for name, value, error in zip(QUANTITIES, values, errors, strict=True)
    }


def variations(mixture) -> Iterator[tuple[str, Plan]]:
    """What is varied, and the plan: the number of electrons; the relaxation dropped; the memory; the windows."""
    for electrons in (16, 64, 256):
        yield f"{electrons} electrons", plan_of(mixture, electrons)
    plan = plan_of(mixture, ELECTRONS)
    yield f"as it is: {ELECTRONS} electrons", plan
    for part in (0, 0.25):
        yield (
            f"relaxation x {part:g}, short cohorts",
            replace(plan, relaxation_windows=int(part * plan.relaxation_windows), measured_windows=1),
        )
    for part in (0.25, 0.5):
        yield f"memory x {part:g}", replace(plan, lags=int(part * plan.lags))
    yield "windows x 0.5", replace(plan, window_time=0.5 * plan.window_time, lags=2 * plan.lags)


def told(name: str, values: dict[str, Estimate], truth: dict[str, Estimate]) -> float:
    """Print the relative deviations in 1e-4 with their errors; returns the largest one in its errors."""
    cells, largest = [], 0.0
    for quantity in QUANTITIES:
        value, true = values[quantity], truth[quantity]
        off = value.value / true.value - 1.0
        error = math.hypot(value.standard_error, true.standard_error) / true.value
        cells.append(f"{1e4 * off:8.1f} +-{1e4 * error:4.1f}")
        largest = max(largest, abs(off) / error)
    print(f"{name:36s}" + " ".join(cells), flush=True)
    return largest


def main() -> None:
    """Print a row per variation, and whether the plan as it is has no bias beyond its errors."""
    parser = argparse.ArgumentParser(description="Bias of the coefficients by what is cut off, in 1e-4.")
    parser.add_argument("--flights", type=float, default=1e7, help="of one cohort")
    parser.add_argument("--workers", type=int, default=2)
    options = parser.parse_args()
    worst = 0.0
    print(" " * 36 + "    energy       W flux       W bulk      D_T bulk     D_L bulk     (1e-4)")
    with ThreadPoolExecutor(options.workers) as executor:
        for gas, mixture in (("constant frequencies", CONSTANT), ("attachment by energy", BY_ENERGY)):
            print(gas)
            truth = exact_moments() if mixture is CONSTANT else reference(mixture, options.flights, executor)
            for name, plan in variations(mixture):
                flights = 0.0 if plan.measured_windows == 1 else options.flights
                off = told(name, measured(plan, flights, executor), truth)
                if name.startswith("as it is"):
                    worst = max(worst, off)
    print(f"as it is: largest deviation {worst:.1f} standard errors")
    sys.exit(0 if worst < 4.0 else 1)


def exact_moments() -> dict[str, Estimate]:
    """Closed forms of the gas of constant frequencies."""
    exact = constant_frequency_moments(ELECTRON_U, FIELD_TD, 0.0, GAIN)
    return {name: Estimate(exact[name], 0.0, "", 0) for name in QUANTITIES}


def reference(mixture, flights: float, executor) -> dict[str, Estimate]:
    """A large cohort with a long memory, four times as long."""
    plan = plan_of(mixture, 4 * ELECTRONS)
    longer = replace(plan, lags=plan.lags * 3 // 2, relaxation_windows=2 * plan.relaxation_windows)
    return measured(longer, 4 * flights, executor)


if __name__ == "__main__":
    main()
