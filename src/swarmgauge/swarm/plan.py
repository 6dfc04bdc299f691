"""The plan of a point: everything that a cohort needs, fixed before the first one runs."""

import hashlib
import json
import math
from dataclasses import dataclass, replace
from functools import cached_property
from pathlib import Path
from typing import Any

import numpy as np

from swarmgauge.gas import Mixture
from swarmgauge.gas.constants import SPEED_1_EV
from swarmgauge.kernel.build import kernel_digest
from swarmgauge.kernel.cohort import COMBED, COUPLED, SPLIT
from swarmgauge.kernel.lanes import lane_count
from swarmgauge.kernel.lookup import Tables

from .angles import has_angular_law
from .curves import UNIT_CROSS_SECTION_M2, ProcessCurve, process_curves
from .field import Field
from .rare import target_weights
from .tables import TOWNSEND_IN_KERNEL_UNITS, build_tables
from .two_term import TwoTerm, solve_two_term

RATE_UNIT = UNIT_CROSS_SECTION_M2 * SPEED_1_EV  # m^3/s of one kernel frequency unit
ELECTRONS = 1024
ELECTRONS_OF_LONG_MEMORY = 256
ELECTRONS_TO_SPLIT = 512  # weight of a cohort whose electrons are split
SPLIT_ELECTRONS = 2736  # electrons that it may have then
LONG_MEMORY_FLIGHTS = 2e4  # collisions of one electron within the memory, above which cohorts are small
MEMORY = 8.0  # displacement histories reach back this many relaxation times: exp(-8) of a diffusion is cut off
WINDOWS_PER_RELAXATION = 2.0
LEAST_FLIGHTS_PER_WINDOW = 40.0  # below these the work at the end of a window would outweigh the flights
START_BITS = 16  # of the start distribution: its last bits differ between processors, and must not flip a rounding
LARGEST_CHANGE = 0.15  # population change in a window, by ionization or by attachment
LARGEST_LOSS = 1.2  # of e-foldings by attachment in a window, where memories are long
MOST_LAGS = 80
LEAST_FLIGHTS = 2e6  # flights measured in a cohort

# Modules that shape the sums of a cohort, besides those of `gas` and `kernel`: a change makes old points of no use.
_SOURCES = (
    *("plan", "rare", "curves", "tables", "angles", "cohort", "recoil", "pilot", "spatial", "reduce", "bin_means"),
    *("two_term", "two_term_curves", "two_term_modes", "two_term_operator"),
)


@dataclass(frozen=True)
class SpatialGrowth:
    """The trial of a steady-state Townsend swarm, kernel units.

    alpha : spatial growth, near its root. lever : 1 / alpha, by which values at alpha are moved to the root along the
    line from alpha = 0; 0 where alpha itself is near 0.
    """

    alpha: float
    lever: float


@dataclass(frozen=True, eq=False)
class Plan:
    """What a cohort is a function of, with its index.

    mixture, field, seed : the point. electrons : number in a cohort. lags : windows in a displacement history;
    memory_windows : windows that the swarm remembers, more than `lags` where attachment forces very short windows.
    window_time : kernel units. start_edges_eV, start_cumulated : (n + 1,), start distribution.
    relaxation_windows, measured_windows : dropped and used windows of a cohort.
    rare, target_weight : processes for which electrons are split, and the weights, (ENERGY_CELLS,); () and None else.
    coupled_key : key of the random streams that coupled plans share; empty for a plan that stands alone.
    spatial : where steady-state Townsend quantities are wanted; cohorts then have a tilted twin. tilted, alpha :
    whether this is the plan of that twin, and its weight exp(-alpha z).
    """

    mixture: Mixture
    field: Field
    seed: int
    electrons: int
    lags: int
    window_time: float
    start_edges_eV: np.ndarray
    start_cumulated: np.ndarray
    relaxation_windows: int = 0
    measured_windows: int = 0
    window_scale: float = 1.0
    rare: tuple[str, ...] = ()
    target_weight: np.ndarray | None = None
    coupled_key: str = ""
    memory_windows: int = 0
    spatial: SpatialGrowth | None = None
    tilted: bool = False
    alpha: float = 0.0

    @property
    def memory(self) -> int:
        """Windows after which a swarm has forgotten its start."""
        return max(self.lags, self.memory_windows)

    @property
    def follows_memory(self) -> bool:
        """Whether displacement histories reach back over the whole memory: else they give no diffusion."""
        return self.lags >= self.memory_windows

    @property
    def acceleration(self) -> float:
        """Acceleration in kernel units."""
        return TOWNSEND_IN_KERNEL_UNITS * self.field.E_over_N_Td

    @property
    def lanes(self) -> int:
        """Lanes of the kernel; small cohorts use the kernel of large ones."""
        return lane_count(max(self.electrons, ELECTRONS) if self.target_weight is None else SPLIT_ELECTRONS)

    @cached_property
    def curves(self) -> list[ProcessCurve]:
        """Frequencies of the acting processes."""
        return process_curves(self.mixture, passive=False)

    @cached_property
    def passive_curves(self) -> list[ProcessCurve]:
        """Frequencies of the processes whose rate is computed but which do not act."""
        return process_curves(self.mixture, passive=True)

    @cached_property
    def tables(self) -> Tables:
        """Tables of the kernel."""
        return build_tables(self.mixture, self.curves, self.acceleration, self.window_scale, self.target_weight)

    @property
    def upkeep(self) -> int:
        """How the kernel keeps the size of the population."""
        if self.coupled_key:
            return COUPLED
        return COMBED if self.target_weight is None else SPLIT

    @property
    def thermal(self) -> bool:
        """Whether the kernel draws neutrals; coupled runs always do, so that both take the same random numbers."""
        return self.mixture.temperature_K > 0.0 or bool(self.coupled_key)

    @property
    def population_changes(self) -> bool:
        """Whether electrons are born or lost."""
        return any(curve.process.kind in ("ionization", "attachment") for curve in self.curves)

    @property
    def angular(self) -> bool:
        """Whether any acting process scatters, or ejects electrons, other than isotropically."""
        return any(has_angular_law(curve) for curve in self.curves)

    @cached_property
    def stream_key(self) -> str:
        """What the random streams start from, besides seed and cohort: hash of the conditions, or the coupled key."""
        if self.coupled_key:
            return self.coupled_key
        return _hash({"mixture": self.mixture.canonical(), "field": _field(self.field)})

    def with_windows(self, relaxation: int, measured: int) -> "Plan":
        """The same with a relaxation cut and a length; keeps what has been computed."""
        return self._with(relaxation_windows=relaxation, measured_windows=measured)

    def with_spatial(self, spatial: SpatialGrowth | None) -> "Plan":
        """The same with a tilted twin."""
        return self._with(spatial=spatial)

    def tilted_by(self, alpha: float) -> "Plan":
        """The plan of a cohort whose electrons weigh exp(-alpha z)."""
        return self._with(spatial=None, tilted=True, alpha=alpha)

    @cached_property
    def tilted_plan(self) -> "Plan":
        """The plan of the tilted twin."""
        assert self.spatial is not None
        return self.tilted_by(self.spatial.alpha)

    def _with(self, **changes: Any) -> "Plan":
        """A changed copy that keeps what has been computed and does not depend on the changes."""
        plan = replace(self, **changes)
        plan.__dict__.update(
            {k: v for k, v in self.__dict__.items() if k in ("curves", "passive_curves", "tables", "stream_key")}
        )
        return plan


def first_plan(
    mixture: Mixture,
    field: Field,
    seed: int,
    two_term: TwoTerm,
    *,
    electrons: int | None = None,
    window_scale: float = 1.0,
    rare: tuple[str, ...] = (),
) -> Plan:
    """A plan from the two-term solution; windows are still to be set by a pilot.

    A window is half a relaxation time or 40 collisions, whichever is longer, but no more than what changes the
    population by 15 %; where attachment would make histories of more than 80 windows necessary, no more than what takes
    70 % of it. Numbers that come from linear algebra are rounded (window to 2 digits, start distribution to 16
    bits), so that the last bits, which depend on the processor, do not reach the swarm.
    """
    values = two_term.values
    collisions = values["collision_frequency_over_N"] / RATE_UNIT
    relaxation = min(two_term.relaxation_frequency_over_N / RATE_UNIT, collisions)
    gain, loss = (abs(values.get(f"{k}_frequency_over_N", 0.0)) / RATE_UNIT for k in ("ionization", "attachment"))
    window = max(1.0 / (WINDOWS_PER_RELAXATION * relaxation), LEAST_FLIGHTS_PER_WINDOW / collisions)
    if max(gain, loss) > 0.0:
        shortest = min(LARGEST_CHANGE / gain if gain > 0.0 else math.inf, LARGEST_LOSS / loss if loss > 0.0 else window)
        needed = min(shortest, MEMORY / (relaxation * (MOST_LAGS - 5)))  # rounding may take 5 %
        window = min(window, max(LARGEST_CHANGE / max(gain, loss), needed))
    window = float(f"{window:.2g}")
    memory = max(math.ceil(MEMORY / (relaxation * window) - 0.5), 2)
    if electrons is None:
        long_memory = MEMORY * collisions / relaxation > LONG_MEMORY_FLIGHTS and memory <= MOST_LAGS
        electrons = ELECTRONS_OF_LONG_MEMORY if long_memory else ELECTRONS
    weights = None
    if rare:
        electrons = min(electrons, ELECTRONS_TO_SPLIT)
        weights = target_weights(mixture, two_term, rare, electrons)
    edges, cumulated = start_distribution(two_term)
    return Plan(
        mixture,
        field,
        seed,
        electrons,
        min(memory, MOST_LAGS),
        window,
        edges,
        cumulated,
        window_scale=window_scale,
        rare=rare,
        target_weight=weights,
        memory_windows=memory,
    )


def start_distribution(two_term: TwoTerm) -> tuple[np.ndarray, np.ndarray]:
    """Energy edges (eV) and share of electrons below each, rounded."""
    edges = two_term.energy_edges_eV
    share = np.maximum(two_term.f0, 0.0) * np.diff(edges**1.5)
    cumulated = np.concatenate([[0.0], np.cumsum(share)])
    rounded = np.round(cumulated / cumulated[-1] * 2.0**START_BITS) / 2.0**START_BITS
    mantissa, exponent = np.frexp(edges)
    return np.ldexp(np.round(mantissa * 2.0**START_BITS) / 2.0**START_BITS, exponent), rounded


def plan_key(mixture: Mixture, field: Field, seed: int, rare: tuple[str, ...] = (), spatial: bool = False) -> str:
    """Hash of tables, conditions, seed, split processes, numerical parameters and kernel version: 32 hex digits.

    spatial : whether cohorts have a tilted twin.
    """
    folder = Path(__file__).parent
    sources = [*sorted((folder.parent / "gas").glob("*.py")), *(folder / f"{name}.py" for name in _SOURCES)]
    method = hashlib.sha256(b"".join(path.read_bytes() for path in sources)).hexdigest()
    return _hash(
        {
            "mixture": mixture.canonical(),
            "field": _field(field),
            "seed": seed,
            "rare": list(rare),
            "spatial": spatial,
            "method": method,
            "kernel": kernel_digest(),
        }
    )[:32]


def solved(mixture: Mixture, field: Field) -> TwoTerm:
    """The two-term solution of a point."""
    return solve_two_term(mixture, field.E_over_N_Td)


def _field(field: Field) -> list[str]:
    return [repr(v) for v in (field.E_over_N_Td, field.B_over_N_Hx, field.B_angle_deg, field.angular_frequency_over_N)]


def _hash(content: dict) -> str:
    return hashlib.sha256(json.dumps(content, sort_keys=True).encode()).hexdigest()
