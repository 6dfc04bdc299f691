"""Energy that electrons give up in collisions besides the threshold: recoil of the atoms, summed over a histogram.

Two-body kinematics with a neutral at rest: a = m / (m + M), b = M / (m + M); of the electron's squared speed g^2 the
collision leaves |a g + b g' n|^2 with g'^2 = g^2 - threshold / b, on the average over directions with <cos chi> = c

    a^2 g^2 + b^2 g'^2 + 2 a b c g g',

so that beyond the threshold a [2 b g^2 - threshold - 2 b c g g'] is lost; elastic: 2 a b g^2 (1 - c). After an
ionization each of the two electrons has a g of the centre of mass: a^2 g^2 less is lost, and g' c is the sum over both,
all of g' for binary ejecta, and the law's part of it for the first electron, however the two share.

In a warm gas this holds for inelastic collisions with the relative speed, up to terms of the order kT m/M; elastic
recoil is then scored by the kernel.
"""

import numpy as np

from swarmgauge.kernel.lookup import speed_edges

from .curves import ProcessCurve, process_threshold
from .plan import Plan


def recoil_on_cells(plan: Plan, curve: ProcessCurve, lower: np.ndarray, upper: np.ndarray) -> np.ndarray:
    """Recoil in all collisions of an acting process on every speed cell, kernel units, (SPEED_CELLS,).

    lower, upper : (SPEED_CELLS,), sums of weight / M that fall to the ends of the cell. Exact for a frequency linear in
    speed but for the energies, taken at the ends. Nothing for attachment: the electron is gone.
    """
    if curve.process.kind == "attachment":
        return np.zeros(len(lower))
    recoil = recoil_at(plan, curve, speed_edges() ** 2)
    visits = recoil[:-1] * curve.low * lower + recoil[1:] * curve.high * upper
    return plan.mixture.fractions[curve.gas] * visits


def recoil_at(plan: Plan, curve: ProcessCurve, energy: np.ndarray) -> np.ndarray:
    """Mean recoil of one collision, eV, at squared relative speeds `energy`."""
    gas, process = plan.mixture.gases[curve.gas], curve.process
    a, b = gas.mass_ratio / (1.0 + gas.mass_ratio), 1.0 / (1.0 + gas.mass_ratio)
    loss = process_threshold(gas, process)
    gain = loss if curve.superelastic else 0.0
    loss -= 2.0 * gain
    forward = 1.0 if process.ejecta == "binary" else process.scattering.mean_cosine(energy + gain)
    after = np.sqrt(np.maximum(energy - loss, 0.0))
    recoil = a * (2.0 * b * energy - b * loss - 2.0 * b * forward * np.sqrt(energy) * after)
    return recoil - a * a * energy if process.kind == "ionization" else recoil
