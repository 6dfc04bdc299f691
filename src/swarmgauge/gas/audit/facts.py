"""Masses, ionization energies and first levels against published values."""

from collections.abc import Iterator, Sequence

from ..gas import Gas
from ..process import Process
from .finding import Finding, acting, percent
from .reference import (
    ATOMIC_LEVEL_EV,
    ELECTRONIC_EV,
    ELECTRONIC_SOURCE,
    IONIZATION_EV,
    IONIZATION_SOURCE,
    LEVEL_SOURCE,
    VIBRATION_EV,
    VIBRATION_SOURCE,
    elements,
    molar_mass,
)

_MASS_DOUBT, _MASS_ERROR = 5e-4, 0.01
_IONIZATION_DOUBT, _IONIZATION_ERROR = 0.01, 0.1
_LEVEL_DOUBT, _LEVEL_ERROR = 0.01, 0.1
_NEAR, _NEAREST = 0.02, 0.1  # a level further off than that from all excitations is missing or lumped
_LOWEST_ION_EV, _HIGHEST_ION_EV = 3.89, 24.6  # caesium and helium


def check_mass(gas: Gas) -> Iterator[Finding]:
    """The molar mass against the sum of standard atomic weights."""
    mass = molar_mass(gas.formula)
    if mass is None:
        yield Finding(
            "note",
            "reference values",
            f'formula = "{gas.formula}" is not made of known elements, so nothing was held against published values.',
            "Nothing for a model; else write the formula as CO2.",
        )
        return
    off = abs(gas.molar_mass_g_per_mol / mass - 1.0)
    if off > _MASS_DOUBT:
        yield Finding(
            "error" if off > _MASS_ERROR else "doubt",
            "molar mass",
            f"molar_mass_g_per_mol = {gas.molar_mass_g_per_mol:g}, but {gas.formula} has {mass:.6g} g/mol (sum of "
            f"IUPAC standard atomic weights); {percent(off)} off.",
            "Correct it, or the formula. Energy loss in elastic collisions goes as 1/mass.",
        )


def check_ionization_energy(gas: Gas) -> Iterator[Finding]:
    """The lowest ionization threshold against the ionization energy."""
    processes = acting(gas, "ionization")
    if not processes or elements(gas.formula) is None:
        return
    lowest = processes[0]
    known = IONIZATION_EV.get(gas.formula)
    if known is not None:
        yield from _compared(
            gas, lowest.id, lowest.threshold_eV, known, IONIZATION_SOURCE, (_IONIZATION_DOUBT, _IONIZATION_ERROR)
        )
    elif not _LOWEST_ION_EV < lowest.threshold_eV < _HIGHEST_ION_EV:
        yield Finding(
            "error",
            "ionization energy",
            f"threshold {lowest.threshold_eV:g} eV; all neutral atoms and molecules lie between {_LOWEST_ION_EV:g} eV "
            f"(caesium) and {_HIGHEST_ION_EV:g} eV (helium).",
            "Check the unit of the threshold: it must be eV.",
            lowest.id,
            lowest.threshold_eV,
        )


def check_first_levels(gas: Gas) -> Iterator[Finding]:
    """Lowest excitation of an atom; vibrational quantum and first electronic level of a molecule."""
    excitations = acting(gas, "excitation")
    if not excitations:
        return
    if gas.formula in ATOMIC_LEVEL_EV:
        first = excitations[0]
        known = ATOMIC_LEVEL_EV[gas.formula]
        yield from _compared(gas, first.id, first.threshold_eV, known, LEVEL_SOURCE, (_LEVEL_DOUBT, _LEVEL_ERROR))
    for levels, what, source in (
        (VIBRATION_EV, "vibrational quantum", VIBRATION_SOURCE),
        (ELECTRONIC_EV, "first electronic level", ELECTRONIC_SOURCE),
    ):
        if gas.formula in levels:
            yield from _near(excitations, levels[gas.formula], what, source)


def _near(excitations: Sequence[Process], known: float, what: str, source: str) -> Iterator[Finding]:
    """Whether a published level, eV, is among the excitations of a molecule."""
    nearest = min(excitations, key=lambda process: abs(process.threshold_eV - known))
    off = abs(nearest.threshold_eV / known - 1.0)
    if off > _NEAREST:
        yield Finding(
            "doubt",
            what,
            f"none near {known:.4g} eV ({source}); nearest is {nearest.id} at {nearest.threshold_eV:g} eV.",
            "Add the process if it is missing; right if it is lumped into another.",
            low_eV=known,
        )
    elif off > _NEAR:
        yield Finding(
            "note",
            what,
            f"{nearest.threshold_eV:g} eV, published: {known:.4g} eV ({source}); {percent(off)} off.",
            "Correct the threshold unless the process stands for several levels.",
            nearest.id,
            nearest.threshold_eV,
        )


def _compared(
    gas: Gas, process: str, found: float, known: float, source: str, limits: tuple[float, float]
) -> Iterator[Finding]:
    """A threshold against a published value; limits : relative, from which on it is a doubt and an error."""
    off = abs(found / known - 1.0)
    if off > limits[0]:
        kind = "ionization energy" if source == IONIZATION_SOURCE else "first level"
        yield Finding(
            "error" if off > limits[1] else "doubt",
            kind,
            f"threshold {found:g} eV, but {gas.formula} has {known:.6g} eV ({source}); {percent(off)} off.",
            "Correct threshold_eV; check that it is in eV and that the lowest state is in the set.",
            process,
            found,
        )
