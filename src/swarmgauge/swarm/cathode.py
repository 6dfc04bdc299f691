"""Spatial relaxation: what becomes of electrons that leave a cathode plane, place by place."""

import math
import os
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

import numpy as np

from swarmgauge.gas import InputError, Mixture
from swarmgauge.gas.constants import SPEED_1_EV
from swarmgauge.kernel.cathode import compiled_emission
from swarmgauge.kernel.cohort import FULL, RUNNING, new_workspace
from swarmgauge.kernel.lookup import LAB_CELLS, LAB_COARSER
from swarmgauge.kernel.start import seed_streams
from swarmgauge.kernel.streams import cohort_start

from .bin_means import bin_weights, curve_weights
from .cohort import MOST_STEPS, serial_sum
from .curves import UNIT_CROSS_SECTION_M2
from .estimate import jackknife
from .field import Field
from .plan import RATE_UNIT, Plan, first_plan, solved
from .reduce import DIFFUSION_UNIT, lab_edges, lab_edges_eV

BATCH = 64  # electrons emitted at once
MARGIN = 6.0  # diffusion lengths D/W behind the region, over which an electron may still come back
LARGEST_MARGIN = 1.0  # of the region


@dataclass(frozen=True)
class Emission:
    """How electrons leave the plane.

    energy_eV : one energy, or the edges of a histogram, rising. share : (edges - 1,), of the electrons in each bin of
    the histogram. directions : "cosine", as from a diffusely emitting surface, or "forward", along the force.
    absorbing : whether an electron that comes back to the plane is lost; otherwise the plane is one in open gas.
    Raises InputError for what is none of these.
    """

    energy_eV: float | Sequence[float]
    share: Sequence[float] = ()
    directions: str = "cosine"
    absorbing: bool = True

    def __post_init__(self) -> None:
        edges = np.atleast_1d(np.asarray(self.energy_eV, dtype=np.float64))
        share = np.asarray(self.share if len(self.share) else [1.0], dtype=np.float64)
        if not (np.isfinite(edges).all() and (edges >= 0.0).all() and (np.diff(edges) > 0.0).all()):
            raise InputError(f"energy_eV = {self.energy_eV}: give energies of 0 or more in rising order.")
        if len(share) != max(len(edges) - 1, 1) or not ((share >= 0.0).all() and share.sum() > 0.0):
            raise InputError(f"share = {self.share}: give one number of 0 or more for each bin between energies.")
        if self.directions not in ("cosine", "forward"):
            raise InputError(f'directions = "{self.directions}": give "cosine" or "forward".')

    @property
    def histogram(self) -> tuple[np.ndarray, np.ndarray]:
        """Edges, eV, and the share of electrons below each."""
        edges = np.atleast_1d(np.asarray(self.energy_eV, dtype=np.float64))
        if len(edges) == 1:
            return np.array([edges[0], edges[0]]), np.array([0.0, 1.0])
        cumulated = np.concatenate([[0.0], np.cumsum(np.asarray(self.share, dtype=np.float64))])
        return edges, cumulated / cumulated[-1]


@dataclass(frozen=True, eq=False)
class Relaxation:
    """The steady swarm in front of a plane, in bins of N z; every array comes with its standard errors.

    Nz_edges : (bins + 1,), 1/m^2. values, standard_errors : name to (bins,):
    "flux", electrons that pass per emitted one; "density_over_flux", s/m, density over the emitted flux;
    "mean_energy", eV; "drift_velocity", m/s, <v_z>; "rate:<set>/<process>", m^3/s, per density of the target;
    "growth_over_N", m^2, (nu_ionization - nu_attachment) / <v_z> over N. energy_edges_eV : (n + 1,);
    f0 : (bins, n), eV^-3/2, normalised in every bin.
    """

    Nz_edges: np.ndarray
    values: dict[str, np.ndarray]
    standard_errors: dict[str, np.ndarray]
    energy_edges_eV: np.ndarray
    f0: np.ndarray

    @property
    def Nz(self) -> np.ndarray:
        """Middle of each bin, 1/m^2."""
        return 0.5 * (self.Nz_edges[:-1] + self.Nz_edges[1:])

    def __repr__(self) -> str:
        return f"Relaxation({len(self.f0)} bins, N z to {self.Nz_edges[-1]:.3g} 1/m^2: {', '.join(self.values)})"


def simulate_relaxation(
    mixture: Mixture,
    field: Field,
    emission: Emission,
    *,
    Nz: float,
    bins: int = 50,
    electrons: int = 20000,
    seed: int = 1,
    cohorts: int = 20,
    workers: int | None = None,
) -> Relaxation:
    """Follow electrons from a plane until they are lost or out of reach; averages over them, place by place.

    Nz : depth of the region times N, 1/m^2, cut into equal `bins`. Behind it the gas goes on for six diffusion lengths
    D / W, at most as far again; electrons that would come back from behind that are missed. electrons : emitted in
    all, in at least 20 independent cohorts, from which the errors come.
    The density is the time that an emitted electron and its descendants spend at a place, times the emitted flux (for
    a steady current the average over emission times is one over times since emission). Rates are those of electrons
    in a gas at rest; its motion changes them by a part of the order kT m/M over their energy.
    Raises InputError for impossible conditions, and where electrons cannot be followed to the end.
    """
    if not (math.isfinite(Nz) and Nz > 0.0):
        raise InputError(f"Nz = {Nz}: give a depth times gas density above 0, in 1/m^2.")
    if bins < 1 or cohorts < 20 or electrons < cohorts:
        raise InputError("give at least 1 bin, 20 cohorts, and an electron for each of them.")
    if field.E_over_N_Td == 0.0:
        raise InputError("E_over_N_Td = 0: without a force no steady current leaves the plane. Give a field.")
    two_term = solved(mixture, field)
    plan = first_plan(mixture, field, seed, two_term)
    length = Nz * UNIT_CROSS_SECTION_M2
    diffusion = two_term.values["diffusion_L_times_N_flux"] / DIFFUSION_UNIT
    margin = MARGIN * diffusion / (two_term.values["drift_velocity_flux"] / SPEED_1_EV)
    reach = length + min(margin, LARGEST_MARGIN * length)
    batches = -(-electrons // (BATCH * cohorts))

    def one(index: int) -> np.ndarray:
        return _cohort(plan, emission, index, batches, length / bins, bins, reach)

    with ThreadPoolExecutor(workers or len(os.sched_getaffinity(0))) as executor:
        rows = np.stack(list(executor.map(one, range(cohorts))))
    return _reduced(plan, rows, Nz, bins, batches * BATCH)


def _cohort(
    plan: Plan, emission: Emission, index: int, batches: int, width: float, bins: int, reach: float
) -> np.ndarray:
    """Times by place and speed, and then the integrals of v_z by place; (bins * (LAB_CELLS + 1),)."""
    lanes = plan.lanes
    work = new_workspace(lanes, 1, len(plan.mixture.gases), len(plan.tables.kind))
    seed_streams(work.rows, cohort_start(plan.seed, f"{plan.stream_key}/plane", index), lanes)
    histogram, velocity = np.zeros(bins * LAB_CELLS), np.zeros(bins)
    edges, cumulated = emission.histogram
    kernel = compiled_emission(lanes, len(plan.mixture.gases), plan.thermal, plan.angular)
    status = kernel(
        plan.tables, work, edges, cumulated, emission.directions == "forward", emission.absorbing, BATCH, batches,
        plan.acceleration, reach, width, histogram, velocity, MOST_STEPS,
    )  # fmt: skip
    if status != RUNNING:
        reason = "are born faster than they can be followed" if status == FULL else "do not leave the region"
        raise InputError(f"Nz: electrons {reason}. Give a smaller depth.")
    return np.concatenate([histogram, velocity])


def _reduced(plan: Plan, rows: np.ndarray, Nz: float, bins: int, emitted: int) -> Relaxation:
    width = Nz / bins * UNIT_CROSS_SECTION_M2
    energy_weights = bin_weights(lab_edges(), 2, 2)
    curves = plan.curves + plan.passive_curves
    weights = [curve_weights(curve.low, curve.high, 1 << LAB_COARSER) for curve in curves]
    names = [f"{curve.rate_name}{plan.mixture.gases[curve.gas].name}/{curve.process.id}" for curve in curves]

    def quantities(sums: np.ndarray) -> dict[str, np.ndarray]:
        histogram = sums[:, : bins * LAB_CELLS].reshape(len(sums), bins, LAB_CELLS)
        total, moved = serial_sum(histogram), sums[:, bins * LAB_CELLS :]
        spent = np.where(total > 0.0, total, np.nan)
        drift = moved / spent
        result = {
            "flux": moved / (emitted * width),
            "density_over_flux": total / (emitted * width * SPEED_1_EV),
            "mean_energy": serial_sum(histogram * energy_weights) / spent,
            "drift_velocity": drift * SPEED_1_EV,
        }
        net = np.zeros_like(total)
        for name, curve, weight in zip(names, curves, weights, strict=True):
            frequency = serial_sum(histogram * weight) / spent
            gas = plan.mixture.gases[curve.gas]
            result[name] = frequency * RATE_UNIT / plan.mixture.body_density_m3(gas, curve.process)
            if not curve.process.passive and curve.process.kind in ("ionization", "attachment"):
                sign = 1.0 if curve.process.kind == "ionization" else -1.0
                net = net + sign * plan.mixture.fractions[curve.gas] * frequency
        if plan.population_changes:
            result["growth_over_N"] = net / drift * UNIT_CROSS_SECTION_M2
        return result

    found = list(quantities(rows[:1]))
    value, error, _ = jackknife(lambda sums: np.concatenate(list(quantities(sums).values()), axis=1), rows)
    values, errors = value.reshape(len(found), bins), error.reshape(len(found), bins)
    times = np.cumsum(rows, axis=0)[-1][: bins * LAB_CELLS].reshape(bins, LAB_CELLS)
    filled = int(np.flatnonzero(times.any(axis=0))[-1]) + 1
    edges = lab_edges_eV()[: filled + 1]
    root = np.sqrt(edges)
    with np.errstate(invalid="ignore"):
        f0 = times[:, :filled] / serial_sum(times)[:, None] / np.diff(edges * root * (2.0 / 3.0))
    return Relaxation(
        np.linspace(0.0, Nz, bins + 1),
        dict(zip(found, values, strict=True)),
        dict(zip(found, errors, strict=True)),
        edges,
        f0,
    )
