"""Ionization against the binary-encounter-Bethe formula."""

import math
from collections.abc import Iterator, Sequence

import numpy as np

from ..gas import Gas
from .finding import Finding, acting
from .reference import IONIZATION_EV, ORBITAL_SOURCE, ORBITALS, Orbital

RYDBERG_EV = 13.605693
_BOHR_M = 5.29177e-11
_FROM, _TO_EV = 4.0, 5000.0  # from that multiple of the ionization energy on the formula is good to some 10 %
_DOUBT, _ERROR = 1.3, 2.0
_BOHR2 = 2.8003e-21 / 1e-20  # bohr2 in 1e-20 m2
_NEAR = 1.15
_NONE = 1e-9  # a ratio below it counts as none


def beb_cross_section(energy_eV: np.ndarray, orbitals: Sequence[Orbital]) -> np.ndarray:
    """Ionization cross section, m2, at energies (any shape, eV), summed over orbitals.

    Y.-K. Kim and M. E. Rudd, Phys. Rev. A 50, 3954 (1994), eq. (57): with t = E/B, u = U/B and
    S = 4 pi a0^2 N (R/B)^2,

        S / (t + (u + 1)/n) [ln t / 2 (1 - 1/t^2) + 1 - 1/t - ln t / (t + 1)],
    """
    energy = np.asarray(energy_eV, dtype=np.float64)
    total = np.zeros_like(energy)
    for orbital in orbitals:
        t = np.maximum(energy / orbital.B, 1.0)
        size = 4.0 * np.pi * _BOHR_M**2 * orbital.N * (RYDBERG_EV / orbital.B) ** 2
        logarithm = np.log(t)
        shape = 0.5 * logarithm * (1.0 - 1.0 / t**2) + 1.0 - 1.0 / t - logarithm / (t + 1.0)
        total += size / (t + (orbital.U / orbital.B + 1.0) / orbital.n) * shape
    return total


def check_beb(gas: Gas) -> Iterator[Finding]:
    """The sum of all ionization against the formula, where its constants are known."""
    processes = acting(gas, "ionization")
    if not processes or gas.formula not in ORBITALS:
        return
    low = _FROM * IONIZATION_EV[gas.formula]
    high = min(_TO_EV, *(process.end_eV for process in processes))
    if high < 2.0 * low:
        return
    energy = np.geomspace(low, high, 100)
    total = np.sum([process.cross_section(energy) for process in processes], axis=0)
    ratio = total / beb_cross_section(energy, ORBITALS[gas.formula])
    off = np.abs(np.log(np.maximum(ratio, _NONE)))
    worst = int(np.argmax(off))
    if off[worst] < math.log(_DOUBT):
        return
    middle = float(np.median(ratio))
    wrong = float(np.median(off)) > math.log(_ERROR)
    yield Finding(
        "error" if wrong else "doubt",
        "binary-encounter-Bethe",
        f"the sum of ionization is {ratio[worst]:.2f} times the formula at {energy[worst]:.4g} eV, {middle:.2f} times "
        f"in the middle of {low:.0f} to {high:.0f} eV; the formula is good to some 15 % ({ORBITAL_SOURCE})."
        f"{_bohr(middle)}",
        "Check unit and source of the ionization; a smaller difference may be the formula's.",
        processes[0].id,
        float(energy[worst]),
    )


def _bohr(ratio: float) -> str:
    for factor, slip in ((_BOHR2, "1e-20 m2 converted as bohr2"), (1.0 / _BOHR2, "bohr2 taken as 1e-20 m2")):
        if 1.0 / _NEAR < ratio / factor < _NEAR:
            return f" It looks like {slip}."
    return ""
