"""Units of columns: a unit, or a number and a unit, as 1e-16cm2."""

import re
from collections.abc import Mapping
from decimal import Decimal

import numpy as np

from ..constants import BOLTZMANN, E_CHARGE
from ..errors import ColumnError, printable, suggestion

# CODATA 2018: Rydberg energy, hc and Bohr radius; the rest by definition.
_RYDBERG_EV, _HC_EV_CM, _BOHR_M = 13.605693122994, 1.239841984e-4, 5.29177210903e-11
ENERGY_EV = {
    "eV": 1.0,
    "meV": 1e-3,
    "keV": 1e3,
    "J": 1.0 / E_CHARGE,
    "kJ/mol": 1e3 / (6.02214076e23 * E_CHARGE),
    "K": BOLTZMANN / E_CHARGE,
    "1/cm": _HC_EV_CM,
    "Ry": _RYDBERG_EV,
    "hartree": 2.0 * _RYDBERG_EV,
}
AREA_M2 = {
    "m2": 1.0,
    "cm2": 1e-4,
    "angstrom2": 1e-20,
    "barn": 1e-28,
    "Mb": 1e-22,
    "bohr2": _BOHR_M**2,
    "pi_bohr2": np.pi * _BOHR_M**2,
}
THREE_BODY_M5 = {"m5": 1.0, "cm5": 1e-10}


def factor(unit: str, known: Mapping[str, float]) -> float:
    """What a number in `unit` is multiplied by; raises ColumnError with the known units."""
    text = unit.strip().replace("^", "")
    if text in known:
        return known[text]
    match = re.fullmatch(r"([0-9.]+(?:[eE][+-]?[0-9]+)?)\s*(\S+)", text)
    if match and match[2] in known and float(match[1]) > 0.0:
        return float(Decimal(match[1]) * Decimal(repr(known[match[2]])))
    raise ColumnError(
        f"unit = {printable(unit)} is unknown.{suggestion(unit, known)} Known units: {', '.join(known)}, each alone or "
        "with a number before it, as 1e-16cm2."
    )


def converted(values: np.ndarray, unit: str, known: Mapping[str, float]) -> list[float]:
    """The values in the base unit, with the decimals that they would have on paper: 2.5 in 1e-20 m2 is 2.5e-20 m2."""
    scale = Decimal(repr(factor(unit, known)))
    return [float(Decimal(repr(value)) * scale) for value in values.tolist()]
