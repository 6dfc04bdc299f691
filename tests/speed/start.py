"""What the two-term start saves: python tests/speed/start.py

Cohorts of argon at 1 Td from three starts, each followed until its mean energy first comes within 3 % of the steady
one, some three times what noise is left: a Maxwellian at the temperature of the gas, a Maxwellian of the steady mean
energy, and the two-term solution.
"""

from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace

import numpy as np
from scipy.stats import gamma

import swarmgauge as sg
from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE
from swarmgauge.kernel.cohort import SERIES_ENERGY, SERIES_TIME
from swarmgauge.swarm.cohort import CohortRun
from swarmgauge.swarm.plan import RATE_UNIT, Plan, first_plan, solved

ROOM_K, COHORTS, WINDOWS, NEAR = 293.15, 12, 40, 0.03


def maxwellian(plan: Plan, thermal_eV: float) -> Plan:
    """The plan with a Maxwellian start."""
    return replace(plan, start_cumulated=gamma(1.5, scale=thermal_eV).cdf(plan.start_edges_eV))


def mean_energies(plan: Plan, executor) -> np.ndarray:
    """Mean energy of each window over all cohorts, eV."""

    def one(index: int) -> np.ndarray:
        return CohortRun(plan, index).windows(WINDOWS, False)

    series = np.sum(list(executor.map(one, range(COHORTS))), axis=0)
    return series[:, SERIES_ENERGY] / series[:, SERIES_TIME]


def main() -> None:
    """Print the windows and collisions to the steady state for each start."""
    mixture, field = sg.Mixture({"argon-yamabe1983": 1.0}, temperature_K=ROOM_K), sg.Field(1.0)
    two_term = solved(mixture, field)
    plan = first_plan(mixture, field, 1, two_term)
    collisions = plan.window_time * two_term.values["collision_frequency_over_N"] / RATE_UNIT
    steady_eV = two_term.values["mean_energy"]
    starts = {
        "gas temperature": maxwellian(plan, BOLTZMANN * ROOM_K / E_CHARGE),
        "Maxwellian of the mean energy": maxwellian(plan, steady_eV / 1.5),
        "two-term": plan,
    }
    with ThreadPoolExecutor(2) as executor:
        energies = {name: mean_energies(start, executor) for name, start in starts.items()}
    end = np.mean([energy[-WINDOWS // 2 :] for energy in energies.values()])
    print(f"argon at 1 Td: a window is {collisions:.3g} collisions; steady mean energy {end:.4g} eV")
    for name, energy in energies.items():
        windows = int(np.argmax(np.abs(energy / end - 1.0) < NEAR))
        print(f"{name:32s} first window {energy[0]:.4g} eV; within 3 % after {windows * collisions:.3g} collisions")


if __name__ == "__main__":
    main()
