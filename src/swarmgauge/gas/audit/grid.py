"""Tables too coarse for their curves: what interpolation does to rates."""

from collections.abc import Iterator

import numpy as np
from scipy.interpolate import PchipInterpolator

from ..gas import Gas
from ..laws import Table
from ..process import Process
from .finding import Finding, percent, tables_of

_TOPIC = "grid"
_TEMPERATURES_EV = np.geomspace(0.02, 10.0, 36)  # 2/3 of the mean energy
_SEEN = 1e-3  # of its largest value: a rate below that is not worth a word
_NOTE, _DOUBT = 0.03, 0.06
_PARTS = 8  # of every interval, with 2 Gauss points each
_GAUSS = (0.21132486540518713, 0.7886751345948129)  # Legendre on (0, 1)
_LEAST_ROWS = 4


def check_grid(gas: Gas) -> Iterator[Finding]:
    """Rates of Maxwellian electrons with the table read linearly and by a monotone cubic through the same points.

    The cubic of F. N. Fritsch and R. E. Carlson, SIAM J. Numer. Anal. 17, 238 (1980), makes no new extrema. Where the
    two differ, the points do not fix the curve well enough for that rate. On thinned copies of dense tables the true
    error is one to four times the difference.
    """
    for process, table in tables_of(gas):
        if len(table.energy_eV) >= _LEAST_ROWS:
            yield from _coarse(process, table)


def rate_differences(process: Process, table: Table) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """How the rate changes when cubic pieces take the place of linear ones.

    Returns temperatures (n,), eV, at which the rate is worth a word, the relative change at each (n,), and the part
    that every interval of the table has in it (n, rows - 1).
    """
    temperature = _TEMPERATURES_EV
    energy, weight = _nodes(table.energy_eV)
    linear = np.interp(energy, table.energy_eV, table.cross_section_m2)
    cubic = PchipInterpolator(table.energy_eV, table.cross_section_m2)(energy)
    if process.cut:
        linear, cubic = (np.where(energy >= process.threshold_eV, values, 0.0) for values in (linear, cubic))
    tail = np.exp(-energy / temperature[:, None, None]) * energy * weight / temperature[:, None, None] ** 1.5
    rate = (linear * tail).sum(axis=(1, 2))
    seen = rate > _SEEN * rate.max()
    parts = ((cubic - linear) * tail).sum(axis=2)[seen] / rate[seen, None]
    return temperature[seen], parts.sum(axis=1), parts


def _nodes(edges: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Energies and weights of a quadrature, each (intervals, nodes)."""
    step = np.diff(edges)[:, None]
    place = (np.arange(_PARTS)[:, None] + np.array(_GAUSS)).ravel() / _PARTS
    energy = edges[:-1, None] + place * step
    return energy, np.broadcast_to(step / len(place), energy.shape)


def _coarse(process: Process, table: Table) -> Iterator[Finding]:
    temperature, change, parts = rate_differences(process, table)
    if not len(temperature):  # nothing is left of it above its threshold, or all lies far above the temperatures
        return
    worst = int(np.argmax(np.abs(change)))
    if abs(change[worst]) < _NOTE:
        return
    row = int(np.argmax(np.abs(parts[worst])))
    yield Finding(
        "doubt" if abs(change[worst]) > _DOUBT else "note",
        _TOPIC,
        f"a cubic through the {len(table.energy_eV)} points instead of straight lines changes the rate by "
        f"{percent(abs(change[worst]))} at a mean energy of {1.5 * temperature[worst]:.2g} eV (Maxwellian); "
        "the true error may be a few times that.",
        "Add points there if the source has them; otherwise count this as an uncertainty.",
        process.id,
        float(table.energy_eV[row]),
        float(table.energy_eV[row + 1]),
        row + 1,
    )
