"""From the curves of a mixture to the kernel's tables, and the majorant of all collisions."""

import numpy as np

from swarmgauge.gas import Mixture
from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE
from swarmgauge.kernel.lookup import (
    ATTACHMENT,
    ENERGY_CELLS,
    EXCITATION,
    IONIZATION,
    SHARE_DENSITY,
    SHARE_EQUAL,
    SHARE_FIXED,
    SHARE_UNIFORM,
    SPEED_CELLS,
    Tables,
    energy_cell_edges,
    speed_edges,
)

from .angles import angle_tables, ejected_tables
from .curves import ProcessCurve, process_threshold

TOWNSEND_IN_KERNEL_UNITS = 0.05  # acceleration (E/N) / 2e-20 V m^2
NEUTRAL_REACH = 9.5  # standard deviations: the kernel's normal numbers end at 6.67 in a pair, 9.43 in three dimensions
LARGEST_TIME = 1e300
LEAST_SHARE = 1.0 / 64.0  # of the candidates of a mixture goes to every one of its gases
_KIND = {"excitation": EXCITATION, "ionization": IONIZATION, "attachment": ATTACHMENT}
_SHARING = {
    "uniform": SHARE_UNIFORM,
    "equal": SHARE_EQUAL,
    "fixed": SHARE_FIXED,
    "width": SHARE_DENSITY,
    "table": SHARE_DENSITY,
}
# Gauss points as digits, because numpy finds them by LAPACK, whose last bits depend on the processor.
# A standard normal number, 8 points (Hermite), and the sum of two squared ones, 4 points (Laguerre).
_NORMAL = (
    (-4.1445471861258945, 0.0001126145383753679),
    (-2.802485861287542, 0.009635220120788263),
    (-1.6365190424351082, 0.117239907661759),
    (-0.5390798113513752, 0.3730122576790775),
    (0.5390798113513752, 0.3730122576790775),
    (1.6365190424351082, 0.117239907661759),
    (2.802485861287542, 0.009635220120788263),
    (4.1445471861258945, 0.0001126145383753679),
)
_TWO_SQUARES = (
    (0.6450953792387848, 0.6031541043416337),
    (3.491522202316693, 0.35741869243779956),
    (9.073240593842256, 0.038887908515005405),
    (18.790141824602266, 0.0005392947055613296),
)


def build_tables(
    mixture: Mixture,
    curves: list[ProcessCurve],
    acceleration: float,
    window_scale: float = 1.0,
    target_weight: np.ndarray | None = None,
) -> Tables:
    """The kernel's tables for the acting `curves` of a mixture.

    acceleration : kernel units, >= 0. window_scale : factor on the speed windows of the majorant (results do not depend
    on it; for tests).
    """
    fractions = mixture.fractions
    gases = len(mixture.gases)
    collision = np.zeros((gases, SPEED_CELLS, 4))
    others = [curve for curve in curves if curve.process.kind != "elastic"]
    process = np.zeros((SPEED_CELLS, len(others), 2))
    for curve in curves:
        share = fractions[curve.gas]
        if curve.process.kind == "elastic":
            collision[curve.gas, :, 0] += share * curve.low
            collision[curve.gas, :, 1] += share * curve.high
    collision[:, :, 2:] = collision[:, :, :2]
    for column, curve in enumerate(others):
        share = fractions[curve.gas]
        process[:, column, 0] = share * curve.low
        process[:, column, 1] = share * curve.high
        collision[curve.gas, :, 2] += process[:, column, 0]
        collision[curve.gas, :, 3] += process[:, column, 1]
    sigma = neutral_speeds(mixture)
    majorant, window_time = majorants(collision[:, :, 2:].max(axis=2), sigma, acceleration, window_scale)
    ratio = np.array([gas.mass_ratio for gas in mixture.gases])
    ejected, ejected_at = ejected_tables(others)
    angles, mean_cosine, law = angle_tables(curves, ratio)
    elastic_law = np.zeros(gases, dtype=np.int64)
    for curve, number in zip(curves, law, strict=True):
        if curve.process.kind == "elastic":
            elastic_law[curve.gas] = number
    return Tables(
        majorant=majorant.ravel(),
        inverse_majorant=1.0 / majorant[-1],
        window_time=window_time,
        collision=collision.ravel(),
        process=process.ravel(),
        first_process=np.searchsorted([c.gas for c in others], np.arange(gases + 1)).astype(np.int64),
        kind=np.array([_KIND[c.process.kind] for c in others], dtype=np.int64),
        loss=np.array([_loss(mixture, c) for c in others], dtype=np.float64),
        sharing=np.array([_SHARING[c.process.sharing.kind] for c in others], dtype=np.int64),
        sharing_fraction=np.array([c.process.sharing.fraction for c in others], dtype=np.float64),
        ejected=ejected.ravel(),
        ejected_at=ejected_at,
        energy_edges=energy_cell_edges(),
        angles=angles.ravel(),
        mean_cosine=mean_cosine.ravel(),
        elastic_law=elastic_law,
        scattering_law=law[[c.process.kind != "elastic" for c in curves]],
        binary=np.array([c.process.ejecta == "binary" for c in others], dtype=np.int64),
        electron_part=ratio / (1.0 + ratio),
        neutral_part=1.0 / (1.0 + ratio),
        neutral_speed=sigma,
        target_weight=np.ones(ENERGY_CELLS) if target_weight is None else np.array(target_weight),
        net_frequency=net_frequency(others, fractions, sigma).ravel(),
    )


def _loss(mixture: Mixture, curve: ProcessCurve) -> float:
    threshold = process_threshold(mixture.gases[curve.gas], curve.process)
    return -threshold if curve.superelastic else threshold


def neutral_speeds(mixture: Mixture) -> np.ndarray:
    """Standard deviation of a velocity component of each gas, sqrt(eV) of the electron: sqrt(kT m / (2 M)); (G,)."""
    thermal_energy_eV = mixture.temperature_K * BOLTZMANN / E_CHARGE
    return np.sqrt([0.5 * thermal_energy_eV * gas.mass_ratio for gas in mixture.gases])


def _range_maxima(values: np.ndarray) -> list[np.ndarray]:
    """Level j holds the maxima of runs of 2^j values (last axis)."""
    levels = [values]
    while 2 ** len(levels) <= values.shape[-1]:
        step = 2 ** (len(levels) - 1)
        previous = levels[-1]
        levels.append(np.maximum(previous[..., :-step], previous[..., step:]))
    return levels


def _largest(levels: list[np.ndarray], first: np.ndarray, last: np.ndarray) -> np.ndarray:
    """Maxima over cells first..last (inclusive, arrays of equal shape) for each row; shape (rows, len(first))."""
    level = np.frexp((last - first + 1).astype(float))[1] - 1  # whole part of the binary logarithm
    result = np.empty((levels[0].shape[0], len(first)))
    for j in np.unique(level):
        at = level == j
        result[:, at] = np.maximum(levels[j][:, first[at]], levels[j][:, last[at] - 2**j + 1])
    return result


def majorants(
    highest: np.ndarray, sigma: np.ndarray, acceleration: float, window_scale: float
) -> tuple[np.ndarray, np.ndarray]:
    """Cumulated majorants (G, ENERGY_CELLS) and longest flight times (ENERGY_CELLS,).

    highest : (G, SPEED_CELLS), largest total frequency in each cell; sigma : (G,), widths of the neutrals' speeds.
    For each energy cell the speed window D is the one of a geometric series that makes the fewest flights per time:
    M / (1 - exp(-M D / a)), with exp(x) - 1 by its first three terms, so that no libm decides.
    """
    edges = speed_edges()
    energies = energy_cell_edges()
    slowest, fastest = np.sqrt(energies[:-1]), np.sqrt(energies[1:])
    levels = _range_maxima(highest)
    windows = window_scale * 2.0 ** np.arange(-10.0, 4.5, 0.5) if acceleration > 0 else np.zeros(1)
    best_cost = np.full(ENERGY_CELLS, np.inf)
    best = np.zeros((len(sigma), ENERGY_CELLS))
    time = np.full(ENERGY_CELLS, LARGEST_TIME)
    for window in windows:
        bound = np.empty_like(best)
        for row, width in enumerate(sigma):
            reach = window + NEUTRAL_REACH * width
            first = np.clip(
                np.searchsorted(edges, np.maximum(slowest - reach, 0.0), side="right") - 1, 0, SPEED_CELLS - 1
            )
            last = np.clip(np.searchsorted(edges, fastest + reach, side="right") - 1, first, SPEED_CELLS - 1)
            bound[row] = _largest([level[row : row + 1] for level in levels], first, last)[0]
        if len(sigma) > 1:  # null events of traces and minorities: without them their rates would not be seen
            bound = np.maximum(bound, LEAST_SHARE * np.cumsum(bound, axis=0)[-1])
        cumulated = np.cumsum(bound * (1.0 + 1e-12), axis=0)
        total = np.maximum(cumulated[-1], 1e-12)
        flight = window / acceleration if acceleration > 0 else LARGEST_TIME
        x = np.minimum(total, 1e6 / flight) * flight
        cost = total * (1.0 + 1.0 / (x + x * x / 2.0 + x * x * x / 6.0))
        better = cost < best_cost
        best_cost[better] = cost[better]
        best[:, better] = cumulated[:, better]
        time[better] = flight
    best[-1] = np.maximum(best[-1], 1e-12)
    return best, time


def net_frequency(others: list[ProcessCurve], fractions: np.ndarray, sigma: np.ndarray) -> np.ndarray:
    """Ionization minus attachment frequency of the mixture against the electron's speed; shape (SPEED_CELLS, 2).

    In a warm gas the average over the neutrals: g^2 = (w + u)^2 + q^2 with u normal and q^2 exponential, by
    Gauss quadrature.
    """
    edges = speed_edges()
    result = np.zeros((SPEED_CELLS, 2))
    for gas, width in enumerate(sigma):
        low, high = np.zeros(SPEED_CELLS), np.zeros(SPEED_CELLS)
        for curve in others:
            if curve.gas == gas and curve.process.kind in ("ionization", "attachment"):
                sign = 1.0 if curve.process.kind == "ionization" else -1.0
                low += sign * fractions[gas] * curve.low
                high += sign * fractions[gas] * curve.high
        if width == 0.0:
            result += np.stack([low, high], axis=1)
            continue
        for end in (0, 1):
            speed = edges[:-1] if end == 0 else edges[1:]
            for u, u_weight in _NORMAL:
                for q, q_weight in _TWO_SQUARES:
                    g = np.sqrt((speed + width * u) ** 2 + width**2 * q)
                    cell = np.clip(np.searchsorted(edges, g, side="right") - 1, 0, SPEED_CELLS - 1)
                    part = np.clip((g - edges[cell]) / (edges[cell + 1] - edges[cell]), 0.0, 1.0)
                    result[:, end] += u_weight * q_weight * (low[cell] + part * (high[cell] - low[cell]))
    return result
