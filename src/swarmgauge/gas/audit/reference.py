"""Published numbers of atoms and molecules that a set is held against, each table with its source."""

import re
from typing import NamedTuple

# Standard atomic weights, abridged: T. Prohaska et al., Pure Appl. Chem. 94, 573 (2022); deuterium: the mass of 2H.
ATOMIC_WEIGHT = {
    "H": 1.008,
    "D": 2.0141,
    "He": 4.0026,
    "Li": 6.94,
    "Be": 9.0122,
    "B": 10.81,
    "C": 12.011,
    "N": 14.007,
    "O": 15.999,
    "F": 18.998,
    "Ne": 20.180,
    "Na": 22.990,
    "Mg": 24.305,
    "Al": 26.982,
    "Si": 28.085,
    "P": 30.974,
    "S": 32.06,
    "Cl": 35.45,
    "Ar": 39.95,
    "K": 39.098,
    "Ti": 47.867,
    "Fe": 55.845,
    "Cu": 63.546,
    "Zn": 65.38,
    "Ge": 72.630,
    "As": 74.922,
    "Se": 78.971,
    "Br": 79.904,
    "Kr": 83.798,
    "Rb": 85.468,
    "Sr": 87.62,
    "Sn": 118.71,
    "I": 126.90,
    "Xe": 131.29,
    "Cs": 132.91,
    "Ba": 137.33,
    "W": 183.84,
    "Hg": 200.59,
    "Pb": 207.2,
}

IONIZATION_SOURCE = "NIST ionization energies"
# Atoms: NIST Atomic Spectra Database. Molecules: evaluated adiabatic values of the NIST Chemistry WebBook, from memory.
IONIZATION_EV = {
    "H": 13.5984,
    "He": 24.5874,
    "Li": 5.3917,
    "N": 14.5341,
    "O": 13.6181,
    "Ne": 21.5645,
    "Na": 5.1391,
    "Ar": 15.7596,
    "K": 4.3407,
    "Kr": 13.9996,
    "Xe": 12.1298,
    "Cs": 3.8939,
    "Hg": 10.4375,
    "H2": 15.4259,
    "D2": 15.467,
    "N2": 15.581,
    "O2": 12.0697,
    "O3": 12.43,
    "F2": 15.697,
    "Cl2": 11.481,
    "CO": 14.014,
    "NO": 9.2642,
    "HCl": 12.744,
    "CO2": 13.777,
    "N2O": 12.889,
    "NO2": 9.586,
    "SO2": 12.349,
    "H2O": 12.621,
    "NH3": 10.07,
    "CH4": 12.61,
    "SiH4": 11.0,
    "C2H2": 11.40,
    "C2H4": 10.5138,
    "C2H6": 11.52,
    "SF6": 15.32,
}

LEVEL_SOURCE = "NIST Atomic Spectra Database, lowest excited level"
# From memory.
ATOMIC_LEVEL_EV = {
    "H": 10.1988,
    "He": 19.8196,
    "Ne": 16.6191,
    "Ar": 11.5484,
    "Kr": 9.9152,
    "Xe": 8.3153,
    "Na": 2.1023,
    "Cs": 1.3859,
    "Hg": 4.6674,
}

VIBRATION_SOURCE = "T. Shimanouchi (1972); K. P. Huber and G. Herzberg (1979)"
# Lowest fundamental, v = 0 to 1; from wave numbers, from memory.
VIBRATION_EV = {
    "H2": 0.5159,
    "N2": 0.28887,
    "O2": 0.19297,
    "CO": 0.26573,
    "NO": 0.23260,
    "HCl": 0.35782,
    "CO2": 0.08275,
    "N2O": 0.07300,
    "H2O": 0.19772,
    "CH4": 0.1619,
}

ELECTRONIC_SOURCE = "K. P. Huber and G. Herzberg (1979)"
# T0 of the lowest electronic level above the ground state: A3Sigma of N2, a1Delta of O2, a3Pi of CO; from memory.
ELECTRONIC_EV = {"N2": 6.169, "O2": 0.9773, "CO": 6.010}

ONSET_SOURCE = "dissociation energy less electron affinity"
# Least energy for which dissociative attachment can form any negative ion: D0 - EA of the lowest channel, with D0 of
# K. P. Huber and G. Herzberg (1979) or of NIST and EA(O) 1.461, EA(H) 0.754, EA(Cl) 3.613 eV, from memory. 0: any.
ATTACHMENT_ONSET_EV = {
    "H2": 3.72,
    "O2": 3.66,
    "CO": 9.65,
    "NO": 5.04,
    "HCl": 0.82,
    "CO2": 3.99,
    "N2O": 0.22,
    "H2O": 3.57,
    "CH4": 3.72,
    "SF6": 0.0,
}


class Orbital(NamedTuple):
    """An orbital: binding energy B and mean kinetic energy U of its electrons, eV, their number N, and the principal
    quantum number n that divides U + B where it is above 2 (W. Hwang and others), else 1."""

    B: float
    U: float
    N: int
    n: int = 1


ORBITAL_SOURCE = "orbital constants of Y.-K. Kim and M. E. Rudd (1994) and W. Hwang, Y.-K. Kim and M. E. Rudd (1996)"
# Y.-K. Kim and M. E. Rudd, Phys. Rev. A 50, 3954 (1994): H, H2, He. W. Hwang, Y.-K. Kim and M. E. Rudd, J. Chem. Phys.
# 104, 2956 (1996): molecules. Argon: Y.-K. Kim, NIST, orbitals 3p and 3s. All from memory; valence orbitals only.
ORBITALS = {
    "H": (Orbital(13.6057, 13.6057, 1),),
    "He": (Orbital(24.587, 39.51, 2),),
    "Ar": (Orbital(34.76, 103.5, 2, 3), Orbital(15.82, 78.07, 6, 3)),
    "H2": (Orbital(15.43, 15.98, 2),),
    "N2": (Orbital(41.72, 71.13, 2), Orbital(21.00, 63.18, 2), Orbital(17.07, 44.30, 4), Orbital(15.58, 54.91, 2)),
    "O2": (
        Orbital(46.19, 79.73, 2),
        Orbital(29.82, 90.92, 2),
        Orbital(19.64, 59.89, 4),
        Orbital(19.79, 71.84, 2),
        Orbital(12.07, 84.88, 2),
    ),
    "CO": (Orbital(41.92, 79.63, 2), Orbital(21.92, 73.18, 2), Orbital(17.66, 54.30, 4), Orbital(14.01, 42.26, 2)),
    "CO2": (
        Orbital(42.04, 75.72, 2),
        Orbital(40.60, 78.38, 2),
        Orbital(21.62, 75.73, 2),
        Orbital(20.27, 73.60, 2),
        Orbital(19.70, 49.97, 4),
        Orbital(13.77, 64.43, 4),
    ),
    "H2O": (Orbital(36.88, 70.71, 2), Orbital(19.83, 48.36, 2), Orbital(15.57, 59.52, 2), Orbital(12.61, 61.91, 2)),
    "CH4": (Orbital(25.73, 33.05, 2), Orbital(14.25, 25.96, 6)),
}


def elements(formula: str) -> dict[str, int] | None:
    """How many atoms of each element, as {"C": 1, "O": 2}; None where a formula is not made of known elements."""
    if not re.fullmatch(r"(?:[A-Z][a-z]?[0-9]*)+", formula):
        return None
    counts: dict[str, int] = {}
    for element, number in re.findall(r"([A-Z][a-z]?)([0-9]*)", formula):
        counts[element] = counts.get(element, 0) + int(number or 1)
    return counts if set(counts) <= set(ATOMIC_WEIGHT) else None


def molar_mass(formula: str) -> float | None:
    """Molar mass, g/mol, from the standard atomic weights; None for an unknown formula."""
    counts = elements(formula)
    if counts is None:
        return None
    return sum(number * ATOMIC_WEIGHT[element] for element, number in counts.items())
