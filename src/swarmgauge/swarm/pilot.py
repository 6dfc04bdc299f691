"""The pilot cohort: how long a swarm relaxes, and whether it has a steady state at all."""

import math
from dataclasses import dataclass, replace

import numpy as np

from swarmgauge.kernel.cohort import SERIES_ENERGY, SERIES_TIME
from swarmgauge.kernel.lookup import LAB_CELLS, LAB_COARSER, speed_edges

from .cohort import CohortFailure, CohortRun
from .plan import LEAST_FLIGHTS, MEMORY, MOST_LAGS, Plan
from .two_term import TwoTerm

PILOT_INDEX = -1  # its stream belongs to no cohort of the result
MOST_STRETCHES = 12
AGREEMENT = 3.0  # standard errors between two stretches that count as equal
TOP_SPEED = 100.0  # sqrt(eV): 10 keV
LARGEST_TOP_SHARE = 1e-3
MOST_TRIES = 5
MOST_MEMORY = 5000  # windows; a swarm that loses electrons in each of so many is of no use to anybody


@dataclass(frozen=True, eq=False)
class Pilot:
    """What the pilot found.

    plan : with its windows set, or None where there is no steady swarm; outcome : "steady", "runaway" or "extinct".
    stretch_energies : (n,), eV, mean energy of successive stretches of one memory each. note : how the cut was decided.
    two_term : the solution that the plan was made from, where it is at hand. cpu_seconds : what it took.
    spatial_note : how the spatial growth was found, or why not; empty where it is not wanted.
    """

    plan: Plan | None
    outcome: str
    stretch_energies: np.ndarray
    note: str
    two_term: TwoTerm | None = None
    cpu_seconds: float = 0.0
    spatial_note: str = ""


def fly_pilot(plan: Plan, failures: int = 0) -> Pilot:
    """Fly one cohort from the start distribution until two successive stretches have the same mean energy.

    failures : how often a cohort of this point failed after a pilot: windows are a quarter as long for each.

    A stretch is one memory. All before the second of the two is cut; at least one stretch, since
    displacement histories must be full. A swarm that has not come to rest after 12 stretches and still gains energy, or
    that spends more than 0.1 % of its time above 10 keV, runs away. A swarm that dies out within a window, or outgrows
    its lanes, gets shorter windows. One that dies out thousands of times within a memory counts as extinct.
    """
    if failures:
        plan = _shorter(plan, 4**failures)
    for _ in range(MOST_TRIES):
        if plan.memory > MOST_MEMORY:
            return Pilot(
                None, "extinct", np.zeros(0), "attachment takes the electrons long before their energies settle"
            )
        try:
            return _fly(plan)
        except CohortFailure as failure:
            died_out = str(failure) == "extinct"
            plan = _shorter(plan, 4 if died_out else 2)
    if died_out:
        return Pilot(None, "extinct", np.zeros(0), "attachment took all electrons within the shortest window tried")
    return Pilot(None, "runaway", np.zeros(0), "the population grew by half within the shortest window tried")


def _shorter(plan: Plan, factor: int) -> Plan:
    """The plan with windows shorter by a factor, and the same memory."""
    memory = factor * plan.memory
    return replace(plan, window_time=plan.window_time / factor, lags=min(memory, MOST_LAGS), memory_windows=memory)


def _fly(plan: Plan) -> Pilot:
    run = CohortRun(plan, PILOT_INDEX)
    means: list[float] = []
    errors: list[float] = []
    for stretch in range(MOST_STRETCHES):
        series = run.windows(plan.memory, True)
        window_means = series[:, SERIES_ENERGY] / series[:, SERIES_TIME]
        means.append(float(series[:, SERIES_ENERGY].sum() / series[:, SERIES_TIME].sum()))
        errors.append(_stretch_error(window_means, plan.memory / MEMORY))
        if _top_share(run) > LARGEST_TOP_SHARE:
            return Pilot(None, "runaway", np.array(means), "more than 0.1 % of the time is spent above 10 keV")
        if stretch > 0:
            step = means[-1] - means[-2]
            if abs(step) < AGREEMENT * math.hypot(errors[-1], errors[-2]):
                note = f"mean energy of stretches {stretch} and {stretch + 1} of {plan.memory} windows agrees"
                return Pilot(_with_windows(plan, run, stretch), "steady", np.array(means), note)
    if means[-1] > means[-3] > means[-5]:
        return Pilot(None, "runaway", np.array(means), "the mean energy still rises after twelve memories")
    note = f"no two of {MOST_STRETCHES} stretches agree; all are cut"
    return Pilot(_with_windows(plan, run, MOST_STRETCHES), "steady", np.array(means), note)


def _stretch_error(window_means: np.ndarray, correlated: float) -> float:
    """Standard error of the mean of windows, correlated over so many of them, and over two at least."""
    if len(window_means) < 2:
        return math.inf
    return math.sqrt(max(5.0, 1.0 + 2.0 * correlated) * float(window_means.var(ddof=1)) / len(window_means))


def _top_share(run: CohortRun) -> float:
    """Share of the time spent above 10 keV."""
    times = run.work.lab_histogram.reshape(LAB_CELLS, 2)[:, 0]
    top = speed_edges()[:-1][:: 1 << LAB_COARSER] >= TOP_SPEED
    total = float(times.sum())
    return float(times[top].sum()) / total if total > 0.0 else 0.0


def _with_windows(plan: Plan, run: CohortRun, cut_stretches: int) -> Plan:
    """The plan with its cut, and as many measured windows as make relaxation a third of the work and enough flights."""
    relaxation = cut_stretches * plan.memory
    flown = min(cut_stretches + 1, MOST_STRETCHES) * plan.memory
    flights_per_window = max(int(run.work.counts.sum()) / flown, 1.0)
    measured = max(2 * relaxation, math.ceil(LEAST_FLIGHTS / flights_per_window))
    return plan.with_windows(relaxation, measured)
