"""The result of one point."""

from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np

from swarmgauge.gas import Mixture

from .estimate import Estimate
from .field import Field


@dataclass(frozen=True)
class Conditions:
    """What a point was computed for."""

    mixture: Mixture
    field: Field
    seed: int


@dataclass(frozen=True)
class TargetStatus:
    """A target as asked, whether it was reached, and the error reached over the one asked for."""

    target: str
    reached: bool
    relative_miss: float


@dataclass(frozen=True, eq=False)
class EnergyDistribution:
    """Electron energy distribution, f(v) proportional to f0 + f1 cos(theta), int f0 sqrt(e) de = 1.

    energy_edges_eV : (n + 1,); f0, f1 and their standard errors : (n,), eV^-3/2, bin means.
    """

    energy_edges_eV: np.ndarray
    f0: np.ndarray
    f0_standard_error: np.ndarray
    f1: np.ndarray
    f1_standard_error: np.ndarray

    @property
    def energy_eV(self) -> np.ndarray:
        """Middle of each bin, eV."""
        return 0.5 * (self.energy_edges_eV[:-1] + self.energy_edges_eV[1:])

    @property
    def standard_error(self) -> np.ndarray:
        """Standard error of f0."""
        return self.f0_standard_error

    def __repr__(self) -> str:
        return f"EnergyDistribution({len(self.f0)} bins, 0 to {self.energy_edges_eV[-1]:.4g} eV)"


@dataclass(frozen=True, eq=False)
class Point:
    """Coefficients and energy distribution of one point.

    estimates : quantity name to Estimate, in the order of output. two_term : name to two-term value. targets : name to
    TargetStatus of the judged quantities. above_tables : process to share of time above its last tabulated energy.
    warnings : sentences. status : "done", "target missed", "runaway", "extinct" or "interrupted". cohorts : how many.
    worst : judged quantity furthest from its target and its error over the target.
    relaxation : what was cut off each cohort and how that was decided. deviations : (cohorts, quantities), jackknife
    deviations in the order of the estimates; sums of their products over cohorts are covariances.
    ancestors, effective_size : electrons of one memory ago from which those of a cohort descend, and their effective
    number W^2 / sum W_a^2; means over the cohorts. The bias of a finite cohort is of the order of its inverse.
    sst_eedf : energy distribution of the steady-state Townsend swarm, where it was asked for.
    """

    conditions: Conditions
    estimates: dict[str, Estimate]
    eedf: EnergyDistribution
    two_term: dict[str, float]
    targets: dict[str, TargetStatus]
    warnings: tuple[str, ...]
    status: str
    cohorts: int
    worst: tuple[str, float]
    wall_seconds: float
    cpu_seconds: float
    relaxation: str = ""
    deviations: np.ndarray = field(default_factory=lambda: np.zeros((0, 0)))
    ancestors: float = float("nan")
    effective_size: float = float("nan")
    above_tables: dict[str, float] = field(default_factory=dict)
    sst_eedf: EnergyDistribution | None = None

    def __getitem__(self, name: str) -> Estimate:
        return self.estimates[name]

    def correlation(self, first: str, second: str) -> float:
        """Correlation of the errors of two quantities; NaN where one of them has no error."""
        names = list(self.estimates)
        a, b = (self.deviations[:, names.index(name)] for name in (first, second))
        size = float(np.sqrt((a @ a) * (b @ b)))
        return float(a @ b) / size if size > 0.0 else float("nan")

    def __iter__(self) -> Iterator[str]:
        return iter(self.estimates)

    def __repr__(self) -> str:
        lines = [
            f"Point({self.conditions.mixture.describe()}, {self.conditions.field.E_over_N_Td:g} Td, {self.status})"
        ]
        lines += [f"  {name} = {estimate!r}" for name, estimate in self.estimates.items()]
        return "\n".join(lines)
