"""Upper bounds of what a swarm never saw.

A rate is summed over the candidates that a process could have had, and electrons come to where it can happen in
excursions that last for many candidates: unseen excursions are what is counted, not unseen candidates. Excursions begin
at random, lambda per electron and time, and last tau on the average, exponentially distributed; candidates come at rate
M in them. One is seen with the probability M tau / (1 + M tau), and the frequency of the process, nu during an
excursion, is lambda nu tau. With no excursion seen in the time T, lambda M tau / (1 + M tau) < 3 / T at 95 %
(-ln 0.05 = 3.00, Poisson), hence

    frequency < (3 / T) (nu / M + nu tau).

The swarm's relaxation frequency, below the rate at which any excursion ends, and the energy losses that end one make
1 / tau: a generous bound where only elastic collisions cool. A process that takes its
electron below the onset, or away, happens once in an excursion at most: its bound is 3 / T.

A rate that rests on a few excursions has no error bar that could be trusted: most runs see less than the truth and
scatter little. It is given a bound too, for the excursions that its scatter tells of.
"""

import math

import numpy as np

from swarmgauge.kernel.lookup import SPEED_CELLS, speed_edges

from .curves import ProcessCurve, process_threshold
from .plan import MEMORY, RATE_UNIT, Plan
from .tables import LEAST_SHARE

UNSEEN_EVENTS = 2.9957322735539909  # -ln 0.05: 95 % upper bound on the expected number of events where none was seen
# The same where 1, 2, ... were seen (Poisson: half the 95 % point of chi-squared with 2 n + 2 degrees of freedom).
SEEN_EVENTS = (
    *(4.7439, 6.2958, 7.7537, 9.1535, 10.5130, 11.8424, 13.1481, 14.4346),
    *(15.7052, 16.9622, 18.2075, 19.4426, 20.6686, 21.8865, 23.0971, 24.3012),
)
FEW = 0.25  # relative standard error of a rate above which its visits were too few, under 17, for an error bar
REACH = 2.0  # onsets up to which an excursion is followed: few electrons that come from below get further


def upper_bounds(plan: Plan, electron_time: float, names: dict[int, str]) -> dict[str, float]:
    """95 % upper bounds, SI, of rates and of the frequencies of the mixture as if nothing had been seen of them.

    electron_time : kernel units, over which the electrons of all cohorts were watched. names : number of a curve,
    acting and then passive, to the name of its rate. What cannot happen, its rate being exactly 0, is left out. The
    bound of the net frequency is one of its amount.
    """
    per_time = UNSEEN_EVENTS / electron_time * RATE_UNIT
    bounds: dict[str, float] = {}
    curves = plan.curves + plan.passive_curves
    for number, name in names.items():
        curve = curves[number]
        if curve.high.any():
            density = plan.mixture.body_density_m3(plan.mixture.gases[curve.gas], curve.process)
            bounds[name] = per_time * excursion_events(plan, curve) / density
    for kind in ("ionization", "attachment", "net"):
        bounds[f"{kind}_frequency_over_N"] = per_time
    return bounds


def bound_of_few(unseen_bound: float, relative_error: float) -> float:
    """The bound of a rate that comes from a few excursions, from that of one never seen.

    n independent excursions of equal weight scatter by 1 / sqrt(n); of unequal weight there were more, and those that
    count are fewer still.
    """
    seen = min(max(math.ceil(1.0 / relative_error**2), 1), len(SEEN_EVENTS))
    return unseen_bound * SEEN_EVENTS[seen - 1] / UNSEEN_EVENTS


def excursion_events(plan: Plan, curve: ProcessCurve) -> float:
    """Most events of a process, per density of its gas, that an excursion has for each that is seen."""
    mixture = plan.mixture
    edges = speed_edges()
    lower, energy = edges[:-1] ** 2, edges[1:] ** 2
    onset = lower[np.argmax(curve.high > 0.0)]
    within = (curve.high > 0.0) & (energy <= (REACH * onset if onset > 0.0 else np.inf))
    if not within.any():
        within = curve.high > 0.0
    leaving = np.full(SPEED_CELLS, MEMORY / (plan.memory * plan.window_time))
    for other in plan.curves:
        if other.process.kind == "elastic" or other.superelastic:
            continue
        taken = process_threshold(mixture.gases[other.gas], other.process) or np.inf  # attachment: the whole electron
        leaving += np.where(energy - taken < onset, mixture.fractions[other.gas] * other.low, 0.0)
    collision = plan.tables.collision.reshape(len(mixture.gases), SPEED_CELLS, 4)[:, :, 2:].min(axis=2)
    all_collisions = np.cumsum(collision, axis=0)[-1]
    candidates = np.maximum(collision[curve.gas], LEAST_SHARE * all_collisions)
    tiny = np.finfo(float).tiny
    events = float(np.max((curve.high / np.maximum(candidates, tiny) + curve.high / leaving)[within]))
    share = float(mixture.fractions[curve.gas])
    ends = curve.process.kind != "elastic" and not curve.superelastic and not curve.process.passive
    return min(events, 1.0 / share) if ends and share > 0.0 else events
