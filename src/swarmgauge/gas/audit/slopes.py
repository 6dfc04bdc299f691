"""How cross sections fall at high energy, against the Bethe-Born approximation."""

import math
from collections.abc import Iterator, Sequence

import numpy as np

from ..gas import Gas
from ..laws import Table
from ..process import Process
from .finding import Finding, acting, percent, tables_of

_TOPIC = "high-energy slope"
_FAR = 8.0  # thresholds: from there on the approximation begins to hold
_ELECTRONIC_EV = 5.0  # resonances of vibration fall as they like
_WIDTH = 1.5  # the slope is taken over a factor of energy, or what the table has
_AFTER = 3.0  # and after the end over this one
# Of -1 + 1/ln(E/T): the constant in the logarithm varies from one transition to the next.
_SLACK = 0.15
# Exchange, which reverses a spin, falls as E^-3, allowed dipole transitions as ln(E)/E, the others as 1/E.
_STEEPEST = -3.3
_LEFT = 0.03  # of the peak


def check_ends(gas: Gas) -> Iterator[Finding]:
    """What follows the last point of an inelastic table: no drop from much to zero, no value kept for ever."""
    for process, table in tables_of(gas):
        share = float(table.cross_section_m2[-1] / table.cross_section_m2.max())
        if process.kind not in ("excitation", "ionization") or share < _LEFT:
            continue
        if table.beyond == "zero":
            reason = f'the table ends with {percent(share)} of its peak, and beyond = "zero" drops the rest.'
        elif table.beyond == "hold":
            reason = f'beyond = "hold" keeps {percent(share)} of the peak for ever; such processes fall with energy.'
        else:
            continue
        yield Finding(
            "doubt",
            "end of table",
            reason,
            "Add points, or give a power: about -0.8 (allowed, ionization), -1, or -3 (spin exchange).",
            process.id,
            table.end_eV,
            row=len(table.energy_eV),
        )


def check_slopes(gas: Gas) -> Iterator[Finding]:
    """The log-log slope of electronic excitations and of the sum of ionization, at the end of the tables and after it.

    H. Bethe, Ann. Phys. 397, 325 (1930); M. Inokuti, Rev. Mod. Phys. 43, 297 (1971): far above the threshold a dipole
    transition goes as ln(4 c E/R)/E, whose log-log slope is -1 + 1/ln(4 c E/R); ionization always has a dipole part.
    4 c/R is about one over the threshold T.
    """
    groups = [[process] for process in acting(gas, "excitation")]
    for group in (*groups, acting(gas, "ionization")):
        if group and all(isinstance(process.law, Table) for process in group):
            yield from _fall(group)


def dipole_slope(ratio: float) -> float:
    """Slope of ln(E/T)/E at E = ratio T: about what an allowed transition of threshold T has."""
    return -1.0 + 1.0 / math.log(ratio)


def slope_between(group: Sequence[Process], low_eV: float, high_eV: float) -> float:
    """Log-log slope of the sum of processes between two energies; NaN where it is zero at one of them."""
    low, high = np.sum([process.cross_section(np.array([low_eV, high_eV])) for process in group], axis=0)
    return float(np.log(high / low) / np.log(high_eV / low_eV)) if low > 0.0 and high > 0.0 else math.nan


def _fall(group: Sequence[Process]) -> Iterator[Finding]:
    threshold = group[0].threshold_eV
    first, last = min(process.end_eV for process in group), max(process.end_eV for process in group)
    if threshold < _ELECTRONIC_EV or first < _FAR * threshold:
        return
    points = np.unique(np.concatenate([process.breakpoints_eV for process in group]))
    before = points[points <= first / _WIDTH]
    found = list(_judged(group, slope_between(group, before[-1], first), first, "at the end of the table"))
    yield from found or _judged(group, slope_between(group, last, _AFTER * last), last, "after the end of the table")


def _judged(group: Sequence[Process], slope: float, at_eV: float, where: str) -> Iterator[Finding]:
    process = group[0]
    what = "the sum of ionization" if len(group) > 1 else process.kind
    dipole = dipole_slope(at_eV / process.threshold_eV)
    if slope > dipole + _SLACK:
        known = f"the slowest possible fall, ln(E)/E, is about E^{dipole:.2f} there"
    elif process.kind == "ionization" and slope < 0.5 * (dipole - 1.0):
        known = f"its dipole part goes as ln(E)/E, which is about E^{dipole:.2f} there"
    elif slope < _STEEPEST:
        known = "even spin exchange falls no faster than E^-3"
    else:
        return
    yield Finding(
        "doubt",
        _TOPIC,
        f"{what} falls as E^{slope:.2f} {where}; {known}.",
        "Compare with a source for high energies, or give another power in beyond.",
        process.id,
        at_eV,
    )
