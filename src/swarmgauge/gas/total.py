"""The elastic part of a total momentum transfer cross section: what is left after all other losses."""

import math
from dataclasses import dataclass, replace

import numpy as np

from .errors import ProcessError
from .laws import Table
from .process import Process

_RATIO = 1.005  # of neighbouring points where a law is curved: linear interpolation is within 1e-5 there
_LOWEST_CURVED_EV = 1e-4


@dataclass(frozen=True)
class Clipping:
    """Where the other processes exceed the total, so that the elastic part was set to zero.

    area_eV_m2 : integral of the excess over energy; share : that over the integral of the total; low_eV, high_eV : ends
    of the range in which it happens; peak_m2 : the largest excess and at_eV where it is.
    """

    area_eV_m2: float
    share: float
    low_eV: float
    high_eV: float
    peak_m2: float
    at_eV: float

    def __str__(self) -> str:
        return (
            f"the other processes exceed the total momentum transfer between {self.low_eV:g} and {self.high_eV:g} eV, "
            f"by up to {self.peak_m2:.2g} m2 at {self.at_eV:g} eV; the elastic part is 0 there "
            f"(clipped area {self.area_eV_m2:.2g} eV m2, {100 * self.share:.2g} % of the total)"
        )


def subtract_from_total(total: Process, others: tuple[Process, ...]) -> tuple[Process, Clipping | None]:
    """The elastic process of a set whose elastic table is the total momentum transfer.

    total : elastic process with a Table. others : all other processes of the set; excitation, ionization and two-body
    attachment are subtracted, unless passive. The result is a table on the points of all tables up to the end of the
    total, so that it is exact where they are linear; zeros are points of it; two neighbouring numbers hold a jump.
    After its end it follows the `beyond` rule of the total.

    Returns the process and what had to be clipped. Raises ProcessError where the total is not a table.
    """
    if not isinstance(total.law, Table):
        raise ProcessError(
            'elastic_is = "total_momentum_transfer" needs a table for the elastic process. '
            'Give energy_eV and cross_section_m2, or use "momentum_transfer".'
        )
    taken = [other for other in others if other.third_body is None and not other.passive]
    energy = _union_of_points(total.law, taken)
    sums = np.zeros_like(energy)
    for other in taken:
        sums += other.cross_section(energy)
    whole = total.cross_section(energy)
    energy, rest, whole = _with_zeros(energy, whole - sums, whole)
    law = Table(energy, np.maximum(rest, 0.0), total.law.beyond)
    return replace(total, law=law), _clipping(energy, rest, whole)


def _union_of_points(total: Table, others: list[Process]) -> np.ndarray:
    """All energies (eV) up to the end of the total where the difference may bend or jump, rising."""
    points = [
        total.energy_eV,
        _ladder(min((other.law.curved_from_eV for other in others), default=math.inf), total.end_eV),
    ]
    for other in others:
        jumps = np.array([other.threshold_eV, other.law.start_eV])
        jumps = jumps[other.cross_section(jumps) > 0.0]
        points += [other.breakpoints_eV, np.nextafter(jumps, 0.0)]
        if other.end_eV < math.inf:
            points.append(np.nextafter([other.end_eV], math.inf))
    union = np.unique(np.concatenate(points))
    return union[union <= total.end_eV]


def _ladder(low: float, high: float) -> np.ndarray:
    """Energies in equal ratios from `low` to less than `high`, by multiplication alone (the same bits everywhere)."""
    low = max(low, _LOWEST_CURVED_EV)
    if low >= high:
        return np.empty(0)
    count = math.ceil(math.log(high / low) / math.log(_RATIO)) + 1
    steps = low * np.cumprod(np.full(count, _RATIO))
    return steps[steps < high]


def _with_zeros(energy: np.ndarray, rest: np.ndarray, whole: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """The same curves with points where `rest` crosses zero between two points."""
    before = np.flatnonzero(((rest[:-1] > 0.0) & (rest[1:] < 0.0)) | ((rest[:-1] < 0.0) & (rest[1:] > 0.0)))
    part = rest[before] / (rest[before] - rest[before + 1])
    crossing = energy[before] + part * (energy[before + 1] - energy[before])
    between = (crossing > energy[before]) & (crossing < energy[before + 1])
    before, part, crossing = before[between], part[between], crossing[between]
    total_there = whole[before] + part * (whole[before + 1] - whole[before])
    return (
        np.insert(energy, before + 1, crossing),
        np.insert(rest, before + 1, 0.0),
        np.insert(whole, before + 1, total_there),
    )


def _area(energy: np.ndarray, values: np.ndarray) -> float:
    return float(math.fsum(0.5 * (values[1:] + values[:-1]) * np.diff(energy)))


def _clipping(energy: np.ndarray, rest: np.ndarray, whole: np.ndarray) -> Clipping | None:
    excess = np.maximum(-rest, 0.0)
    # Rounding where the parts add up to the total exactly is not worth a word.
    at = np.flatnonzero(excess > 1e-12 * whole.max())
    if not len(at):
        return None
    peak = int(np.argmax(excess))
    area = _area(energy, excess)
    return Clipping(
        area_eV_m2=area,
        share=area / _area(energy, whole) if whole.any() else math.inf,
        low_eV=float(energy[at[0]]),
        high_eV=float(energy[at[-1]]),
        peak_m2=float(excess[peak]),
        at_eV=float(energy[peak]),
    )
