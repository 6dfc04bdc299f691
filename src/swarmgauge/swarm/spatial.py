"""Steady-state Townsend: growth in space, and the swarm as it is at any place of a steady discharge gap.

A tilted cohort (`kernel.tilt`) flies at a trial alpha_0 of the spatial growth. Its own growth in time,

    lambda(alpha) = <R> - alpha <v_z>,   R = nu_ionization - nu_attachment,

averages over the tilted swarm, vanishes at the alpha that a steady swarm has: lambda is the growth exponent
R - W alpha + D_L alpha^2 - ... of the bulk coefficients (K. Kumar, H. R. Skullerud and R. E. Robson, Aust. J. Phys. 33,
343 (1980)), and its slope is near 2 D_L alpha - W. Pilot cohorts bring alpha_0 within about a per cent of the root;
what is left is taken out by one Newton step, of alpha and, along the line from the time-of-flight swarm (alpha = 0) to
the trial, of all other values. The neglected rest is of second order in that per cent.

Then alpha = <nu_ionization> / <v_z>, eta = <nu_attachment> / <v_z> and their difference is the growth.
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from fnmatch import fnmatchcase

import numpy as np

from swarmgauge.gas import Mixture
from swarmgauge.gas.constants import SPEED_1_EV

from .cohort import run_cohort, serial_sum
from .field import Field
from .pilot import PILOT_INDEX
from .plan import RATE_UNIT, Plan, SpatialGrowth
from .quantities import KNOWN_PATTERNS, is_spatial
from .reduce import DIFFUSION_UNIT, Reducer
from .targets import Target

PILOTS = 4  # cohorts for each trial
MOST_TRIALS = 8
CLOSE = 0.01  # of alpha, or of NEAR_BALANCE, between the last two trials
FLAT = 1e-4  # of W / D: trials so close give the same swarm; near the balance pilots cannot tell alpha to CLOSE
NEAR_BALANCE = 0.1  # of (nu_i + nu_a) / W: below it alpha is "near 0"
LEAST_SLOPE = 0.1  # of W: an exponent flatter than that has no root, or one that a trial cannot find
_GROWTHS = {
    "ionization": "townsend_alpha_over_N",
    "attachment": "townsend_eta_over_N",
    "net": "townsend_effective_over_N",
}
NOT_FOUND = f"its spatial growth was not found in {MOST_TRIALS} trials"
NO_ROOT = "its growth exponent has no root: there is no steady-state Townsend swarm"


@dataclass(frozen=True)
class Exponent:
    """Growth exponent R - W alpha + D alpha^2 by two-term coefficients, kernel units; change : nu_i + nu_a."""

    rate: float
    change: float
    drift: float
    diffusion: float

    @classmethod
    def of(cls, values: Mapping[str, float]) -> "Exponent":
        """From two-term values."""
        gain, loss = (values.get(f"{kind}_frequency_over_N", 0.0) / RATE_UNIT for kind in ("ionization", "attachment"))
        drift = values["drift_velocity_bulk"] / SPEED_1_EV
        return cls(gain - loss, gain + loss, drift, values["diffusion_L_times_N_bulk"] / DIFFUSION_UNIT)

    def slope(self, alpha: float) -> float:
        """Fall of the exponent with alpha."""
        return self.drift - 2.0 * self.diffusion * alpha

    @property
    def root(self) -> float:
        """The smaller root; where there is none, the place of the minimum short of LEAST_SLOPE."""
        square = self.drift**2 - 4.0 * self.rate * self.diffusion
        steep = (2.0 * LEAST_SLOPE * self.drift) ** 2
        return 2.0 * self.rate / (self.drift + math.sqrt(max(square, steep)))


def spatial_asked(mixture: Mixture, field: Field, targets: tuple[Target, ...]) -> bool:
    """Whether targets ask for a steady-state Townsend quantity, and electrons are born or lost in a field."""
    changes = any(
        process.kind in ("ionization", "attachment") and not process.passive
        for gas in mixture.gases
        for process in mixture.acting(gas)
    )
    names = [name for name in KNOWN_PATTERNS if is_spatial(name)]
    wanted = any(
        target.from_Td <= field.E_over_N_Td <= target.to_Td
        and (is_spatial(target.pattern) or any(fnmatchcase(name, target.pattern) for name in names))
        for target in targets
    )
    return field.E_over_N_Td > 0.0 and changes and wanted


def find_growth(plan: Plan, values: Mapping[str, float]) -> tuple[SpatialGrowth | None, str]:
    """The trial for a plan with its windows set, and a note on how it was found; None if there is no root.

    values : two-term values, the start. Raises CohortFailure as a cohort does.
    """
    exponent = Exponent.of(values)
    near = NEAR_BALANCE * exponent.change / exponent.drift
    flat = FLAT * exponent.drift / exponent.diffusion
    alpha = float(f"{exponent.root:.3g}")  # last bits of linear algebra must not reach the swarm
    for trial in range(MOST_TRIALS):
        slope = exponent.slope(alpha)
        if slope < LEAST_SLOPE * exponent.drift:
            return None, NO_ROOT
        before, alpha = alpha, float(f"{alpha + measured_exponent(plan, alpha, trial) / slope:.4g}")
        if abs(alpha - before) <= max(CLOSE * max(abs(alpha), near), flat):
            lever = 1.0 / alpha if abs(alpha) > max(near, flat) else 0.0
            return SpatialGrowth(alpha, lever), f"spatial growth found in {trial + 1} trials"
    return None, NOT_FOUND


def measured_exponent(plan: Plan, alpha: float, trial: int) -> float:
    """lambda(alpha) from pilot cohorts, which are not used in the result."""
    tilted = plan.tilted_by(alpha)
    first = PILOT_INDEX - 1 - trial * PILOTS
    rows = np.stack([run_cohort(tilted, first - place)[0] for place in range(PILOTS)])
    values = local_values(Reducer(tilted), serial_sum(rows.T)[None, :])
    return float(exponent_of(values, alpha)[0])


def local_values(reducer: Reducer, rows: np.ndarray) -> dict[str, np.ndarray]:
    """Mean energy, drift, frequencies and rates of a tilted swarm, (rows,) each, from its own sums."""
    energy, drift = reducer.local_moments(rows)
    return {"mean_energy": energy, "drift_velocity_flux": drift * SPEED_1_EV, **reducer.rates(rows)}


def exponent_of(values: Mapping[str, np.ndarray], alpha: float) -> np.ndarray:
    """lambda(alpha) in kernel units from the values of a swarm tilted by alpha."""
    return values["net_frequency_over_N"] / RATE_UNIT - alpha * values["drift_velocity_flux"] / SPEED_1_EV


def all_quantities(reducer: Reducer, rows: np.ndarray) -> dict[str, np.ndarray]:
    """Quantity name to values, one per row of sums, the steady-state Townsend ones among them where they are wanted."""
    known = reducer.quantities(rows)
    return known if reducer.plan.spatial is None else known | spatial_quantities(reducer, rows, known)


def tilted_part(reducer: Reducer, rows: np.ndarray) -> tuple[Reducer, np.ndarray]:
    """Reducer and sums of the tilted twins."""
    return Reducer(reducer.plan.tilted_plan), rows[:, reducer.layout.columns :]


def spatial_quantities(reducer: Reducer, rows: np.ndarray, known: Mapping[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Steady-state Townsend quantities, name to (rows,); known : the time-of-flight quantities of the same rows."""
    spatial = reducer.plan.spatial
    assert spatial is not None
    values = local_values(*tilted_part(reducer, rows))
    slope = values["drift_velocity_flux"] / SPEED_1_EV
    if reducer.plan.follows_memory:
        diffusion = known["diffusion_L_times_N_bulk"] / DIFFUSION_UNIT
        slope = known["drift_velocity_bulk"] / SPEED_1_EV - 2.0 * diffusion * spatial.alpha
    step = exponent_of(values, spatial.alpha) / slope * spatial.lever
    kinds = [kind for kind in _GROWTHS if f"{kind}_frequency_over_N" in values]
    moved = {name: value + (value - known[name]) * step for name, value in values.items()}
    drift = moved["drift_velocity_flux"]
    growths = {name: moved[f"{kind}_frequency_over_N"] / drift for kind, name in _GROWTHS.items() if kind in kinds}
    result = growths | {"sst_mean_energy": moved["mean_energy"], "sst_drift_velocity": drift}
    return result | {f"sst_{name}": value for name, value in moved.items() if ":" in name}


def all_bounds(
    reducer: Reducer, rows: np.ndarray, known: Mapping[str, float], errors: Mapping[str, float]
) -> dict[str, float]:
    """95 % upper bounds of what was never seen or too seldom, by name; known, errors : of every quantity."""
    bounds = reducer.upper_bounds(rows, known, errors)
    if reducer.plan.spatial is None:
        return bounds
    tilted, tilted_rows = tilted_part(reducer, rows)
    drift = known["sst_drift_velocity"]
    local = []  # names, values and errors as the tilted swarm has them for itself
    for given in (known, errors):
        own = {name.removeprefix("sst_"): value for name, value in given.items() if name.startswith("sst_")}
        grown = {f"{kind}_frequency_over_N": given[name] * drift for kind, name in _GROWTHS.items() if name in given}
        local.append(own | grown)
    for name, bound in tilted.upper_bounds(tilted_rows, *local).items():
        if ":" in name:
            bounds[f"sst_{name}"] = bound
        else:
            bounds[_GROWTHS[name.split("_")[0]]] = bound / drift
    return bounds
