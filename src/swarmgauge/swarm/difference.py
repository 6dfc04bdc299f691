"""Differences between two swarms at one field, by common random numbers.

Two sets, temperatures or mixtures run with the same streams, windows and start: as long as an electron meets the same
fate in both, its fluctuations cancel in the difference. Where fates part early (long memory, very different gases)
little cancels, and the stated gain is near 1.
"""

import os
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace

import numpy as np

from swarmgauge.gas import InputError, Mixture

from .cohort import run_cohort
from .estimate import Estimate, jackknife
from .field import Field
from .pilot import fly_pilot
from .plan import MOST_LAGS, Plan, first_plan, solved
from .quantities import unit_of
from .reduce import Reducer

COHORTS = 40


@dataclass(frozen=True, eq=False)
class Difference:
    """Second minus first, quantity by quantity.

    estimates : name to Estimate of the difference, for the quantities that both swarms have. gains : name to the
    variance of a difference of two independent runs over that of this one, NaN where nothing fluctuates.
    """

    estimates: dict[str, Estimate]
    gains: dict[str, float]

    def __getitem__(self, name: str) -> Estimate:
        return self.estimates[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self.estimates)

    def __repr__(self) -> str:
        lines = [f"  {name} = {estimate!r}, gain {self.gains[name]:.3g}" for name, estimate in self.estimates.items()]
        return "\n".join(["Difference(", *lines, ")"])


def simulate_difference(
    first: Mixture, second: Mixture, field: Field, *, seed: int = 1, cohorts: int = COHORTS, workers: int | None = None
) -> Difference:
    """Coefficients of `second` minus those of `first` at one field, from coupled cohorts.

    cohorts : pairs of cohorts, at least 20; errors are those of the jackknife over pairs. workers : threads.
    Raises InputError for fewer cohorts, or where one of the two has no steady swarm.
    """
    if cohorts < 20:
        raise InputError(f"cohorts = {cohorts}: errors need at least 20. Give 20 or more.")
    plans = coupled_plans(first, second, field, seed)
    count = workers or len(os.sched_getaffinity(0))
    with ThreadPoolExecutor(count) as executor:
        sides = [list(executor.map(lambda i, plan=plan: run_cohort(plan, i)[0], range(cohorts))) for plan in plans]
    reducers = [Reducer(plan) for plan in plans]
    width = len(sides[0][0])
    pairs = np.array([np.concatenate(pair) for pair in zip(*sides, strict=True)])
    known = [reducer.quantities(np.array(side[:1])) for reducer, side in zip(reducers, sides, strict=True)]
    names = [name for name in known[0] if name in known[1]]

    def everything(rows: np.ndarray) -> np.ndarray:
        """Difference, first and second side by side."""
        a = reducers[0].quantities(rows[:, :width])
        b = reducers[1].quantities(rows[:, width:])
        left, right = (np.stack([side[name] for name in names], axis=1) for side in (a, b))
        return np.concatenate([right - left, left, right], axis=1)

    values, errors, _ = jackknife(everything, pairs)
    shared, left, right = errors.reshape(3, len(names))
    with np.errstate(divide="ignore", invalid="ignore"):
        gains = (left**2 + right**2) / shared**2
    estimates = {
        name: Estimate(float(values[place]), float(shared[place]), unit_of(name), cohorts)
        for place, name in enumerate(names)
    }
    return Difference(estimates, {name: float(gain) for name, gain in zip(names, gains, strict=True)})


def coupled_plans(first: Mixture, second: Mixture, field: Field, seed: int) -> tuple[Plan, Plan]:
    """Two plans with the same streams, windows, memory and start distribution; the longer relaxation of both."""
    plans = [first_plan(mixture, field, seed, solved(mixture, field)) for mixture in (first, second)]
    window = min(plan.window_time for plan in plans)
    memory = int(np.ceil(max(plan.window_time * plan.memory for plan in plans) / window - 1e-9))
    common = replace(
        plans[0],
        window_time=window,
        lags=min(memory, MOST_LAGS),
        memory_windows=memory,
        electrons=min(plan.electrons for plan in plans),
        coupled_key=f"{plans[0].stream_key}+{plans[1].stream_key}",
    )
    flown = [fly_pilot(replace(common, mixture=mixture)) for mixture in (first, second)]
    steady = [pilot.plan for pilot in flown if pilot.plan is not None]
    if len(steady) < 2:
        outcome = next(pilot for pilot in flown if pilot.plan is None)
        raise InputError(f"no difference: one of the two has no steady swarm ({outcome.outcome}: {outcome.note}).")
    windows = max(plan.relaxation_windows for plan in steady), max(plan.measured_windows for plan in steady)
    return steady[0].with_windows(*windows), steady[1].with_windows(*windows)
