"""Cross sections to collision frequencies on the kernel's speed cells.

In each speed cell a frequency is linear in speed, chosen so that its integral and its first moment over the cell are
those of the exact curve: rate integrals then differ from the file's by less than 1e-4, however narrow a structure is.
A process starts at the first cell edge above its threshold; what lies between is carried into that cell, so that no
event happens below the threshold and none is lost. Where the distribution falls steeply there (a tail that drops by e
within a few cells, 0.4 % of the energy each), the carried part is met less often: up to 0.5 % of such a rate.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from swarmgauge.gas import Gas, Mixture, Process
from swarmgauge.gas.constants import GAUSS_LEGENDRE
from swarmgauge.gas.levels import superelastic_cross_section
from swarmgauge.kernel.lookup import SPEED_CELLS, speed_edges

UNIT_CROSS_SECTION_M2 = 1e-20  # the kernel's unit
NEAR_REST = 32  # speed cells, up to 2.4e-4 eV


@dataclass(frozen=True, eq=False)
class ProcessCurve:
    """Frequency of one process per density of its gas on the speed cells, kernel units.

    low, high : (SPEED_CELLS,); at the lower and upper end of each cell. superelastic : whether it is the reverse of the
    process.
    """

    gas: int
    process: Process
    low: np.ndarray
    high: np.ndarray
    superelastic: bool = False

    @property
    def rate_name(self) -> str:
        """First part of the name of its rate, up to the colon."""
        if self.superelastic:
            return "superelastic_rate:"
        return "rate:" if self.process.third_body is None else "rate3:"


def process_threshold(gas: Gas, process: Process) -> float:
    """Least squared relative speed, eV, at which a process can happen: threshold x (m + M) / M, or 0."""
    if process.kind in ("excitation", "ionization"):
        return process.threshold_eV * (1.0 + gas.mass_ratio)
    return 0.0


def frequency_on_cells(
    process: Process, threshold: float, scale: float, *, superelastic: bool = False
) -> tuple[np.ndarray, np.ndarray]:
    """Values at the lower and upper end of every speed cell; integral and first moment over the cell are kept.

    threshold : squared speed below which the process is off, eV; scale : factor on the cross section (density of a
    third body, share of the molecules hit); superelastic : for the reverse process, which raises the squared speed by
    the threshold. Both returned arrays have shape (SPEED_CELLS,), are not negative and are in kernel units.
    """

    def frequency(speed: np.ndarray) -> np.ndarray:
        energy = speed * speed
        section = superelastic_cross_section(process, energy, gain) if superelastic else process.cross_section(energy)
        return speed * section * (scale / UNIT_CROSS_SECTION_M2)

    edges = speed_edges()
    gain = threshold if superelastic else 0.0
    start = 0.0 if superelastic else np.sqrt(threshold)
    breaks = np.sqrt(np.maximum(process.breakpoints_eV - gain, 0.0))
    points = np.unique(np.concatenate([edges, breaks[(breaks > 0) & (breaks < edges[-1])], [start]]))
    points = points[points >= start]
    lower, upper = points[:-1], points[1:]
    middle, half = 0.5 * (lower + upper), 0.5 * (upper - lower)
    cell = np.searchsorted(edges, middle) - 1
    first = int(np.searchsorted(edges, start))  # the first cell that starts at or above the threshold
    cell = np.maximum(cell, first)
    width = edges[cell + 1] - edges[cell]
    mean = np.zeros(len(middle))
    moment = np.zeros(len(middle))
    for x, weight in GAUSS_LEGENDRE:
        speed = middle + half * x
        value = frequency(speed)
        mean += weight * half * value / width
        moment += weight * half * value / width * ((speed - edges[cell]) / width)
    integral = np.bincount(cell, weights=mean, minlength=SPEED_CELLS)
    first_moment = np.bincount(cell, weights=moment, minlength=SPEED_CELLS)
    high = 6.0 * first_moment - 2.0 * integral
    low = 2.0 * integral - high
    high = np.where(low < 0.0, 2.0 * integral, np.where(high < 0.0, 0.0, high))
    low = np.maximum(2.0 * integral - high, 0.0)
    if superelastic and process.cross_section(np.array(gain)) > 0.0:
        line = _tamed_pole(frequency, points[points <= edges[NEAR_REST]], edges[: NEAR_REST + 1])
        low[:NEAR_REST], high[:NEAR_REST] = line[:-1], line[1:]
    return low, high


def _tamed_pole(frequency: Callable[[np.ndarray], np.ndarray], points: np.ndarray, edges: np.ndarray) -> np.ndarray:
    """A straight line in place of a frequency that goes as 1/w near rest; values at `edges`, the first of them 0.

    A superelastic frequency goes so where the cross section jumps at its threshold. The line has the same integrals
    with w^2 and w^3, the volume in velocity: the same rate for a distribution that is smooth near rest. Slow electrons
    would else need a majorant a hundred times as high. points : between which the frequency is smooth.
    """
    middle, half = 0.5 * (points[1:] + points[:-1]), 0.5 * (points[1:] - points[:-1])
    second = third = 0.0
    for x, weight in GAUSS_LEGENDRE:
        part = (middle + half * x) / edges[-1]
        value = weight * half / edges[-1] * frequency(middle + half * x) * part**2
        second += math.fsum(value)
        third += math.fsum(value * part)
    low, high = 48.0 * second - 60.0 * third, 20.0 * third - 12.0 * second
    line = low + (high - low) * edges / edges[-1]
    return np.maximum(line, 0.0)


def process_curves(mixture: Mixture, *, passive: bool) -> list[ProcessCurve]:
    """Curves of all passive or all acting processes of a mixture, in the order of its gases and sets.

    Reverse processes stand behind their own; where the upper level is empty there is none.
    """
    curves = []
    for index, gas in enumerate(mixture.gases):
        for process in mixture.acting(gas):
            if process.passive is passive:
                threshold = process_threshold(gas, process)
                scale = mixture.body_density_m3(gas, process) * mixture.share_hit(gas, process)
                low, high = frequency_on_cells(process, threshold, scale)
                curves.append(ProcessCurve(index, process, low, high))
                excited = mixture.share_excited(gas, process)
                if excited > 0.0:
                    low, high = frequency_on_cells(process, threshold, excited, superelastic=True)
                    curves.append(ProcessCurve(index, process, low, high, superelastic=True))
    return curves
