"""Angular laws and densities of ejected energies as tables of the kernel."""

import numpy as np

from swarmgauge.gas.scattering import Isotropic
from swarmgauge.kernel.lookup import ENERGY_CELLS, PARTS, angle_row_edges, energy_cell_edges

from .curves import ProcessCurve


def has_angular_law(curve: ProcessCurve) -> bool:
    """Whether a process scatters, or ejects electrons, other than isotropically."""
    process = curve.process
    return not isinstance(process.scattering, Isotropic) or process.ejecta != "isotropic"


def angle_tables(curves: list[ProcessCurve], mass_ratios: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Laws (n, ANGLE_ROWS, PARTS, 2), their mean cosines (n, ANGLE_ROWS), and the law of each curve (len(curves),).

    Law 0 is the isotropic one. A superelastic collision scatters as its forward process does at the energy that
    it leads to. Without any angular law the tables are empty: the kernel does not read them.
    """
    at = np.zeros(len(curves), dtype=np.int64)
    if not any(has_angular_law(curve) for curve in curves):
        return np.zeros((0, 0, PARTS, 2)), np.zeros((0, 0)), at
    energy = angle_row_edges() ** 2
    parts, means = [Isotropic().parts(energy, PARTS)], [np.zeros(len(energy))]
    for place, curve in enumerate(curves):
        law = curve.process.scattering
        if isinstance(law, Isotropic):
            continue
        shift = curve.process.threshold_eV * (1.0 + mass_ratios[curve.gas]) if curve.superelastic else 0.0
        at[place] = len(parts)
        parts.append(law.parts(energy + shift, PARTS))
        means.append(law.mean_cosine(energy + shift))
    return np.stack(parts), np.stack(means), at


def ejected_tables(others: list[ProcessCurve]) -> tuple[np.ndarray, np.ndarray]:
    """Cumulated densities of ejected energies (n, ENERGY_CELLS + 1), and where that of each process begins, (P,)."""
    edges = energy_cell_edges()
    tables: list[np.ndarray] = []
    at = np.zeros(len(others), dtype=np.int64)
    for place, curve in enumerate(others):
        if curve.process.kind == "ionization" and curve.process.sharing.has_density:
            at[place] = len(tables) * (ENERGY_CELLS + 1)
            tables.append(curve.process.sharing.cumulated(edges))
    return np.array(tables).reshape(-1, ENERGY_CELLS + 1), at
