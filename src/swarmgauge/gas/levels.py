"""The ladder of levels of a gas: how many molecules are in each, and how electrons take energy back from them.

A level is the upper level of an excitation that states degeneracies; its id is that of the process. Its lower level is
the ground state or the level named by `lower`. Against its lower level it holds

    n_upper / n_lower = (g_upper / g_lower) exp(-threshold / kT),

T the gas temperature, or the vibrational one for levels marked as vibrational; or its fraction is given.
"""

import math
from collections.abc import Iterable, Mapping

import numpy as np

from .constants import BOLTZMANN, E_CHARGE
from .errors import MixtureError, ProcessError, suggestion
from .power import strict_exp
from .process import Process

LEAST_POPULATION = 1e-12  # a level that holds less of its gas gives nothing back that could be noticed
_SUM_TOLERANCE = 1e-6

Populations = dict[str | None, float]
"""Share of the molecules of a gas in each level, by the id of the process that leads up to it; None is the ground."""


def superelastic_cross_section(process: Process, energy_eV: np.ndarray, gain_eV: float) -> np.ndarray:
    """Cross section of the reverse of an excitation, per molecule in the upper level, m2.

    (g_lower / g_upper) (e + gain) / e x cross section(e + gain): O. Klein and S. Rosseland, Z. Phys. 4, 46 (1921).

    energy_eV : ndarray of any shape, > 0. gain_eV : the threshold, in the measure of the energies: for energies
    m g^2/2 of relative motion it is threshold x (m + M) / M.
    """
    before = energy_eV + gain_eV
    return process.degeneracy_ratio * before / energy_eV * process.cross_section(before)


def check_ladder(processes: Iterable[Process]) -> None:
    """Raise ProcessError where a lower level is no level of these processes, or stands above itself."""
    excitations = [process.id for process in processes if process.kind == "excitation"]
    levels = {process.id: process for process in processes if process.is_level}
    for process in processes:
        if process.lower is None:
            continue
        if process.lower not in excitations or process.lower == process.id:
            raise ProcessError(
                f'process {process.id}: lower = "{process.lower}" is not another excitation of this set. '
                f"Use the id of one, or leave it out for the ground state.{suggestion(process.lower, excitations)}"
            )
        if process.lower not in levels:
            raise ProcessError(
                f'process {process.id}: lower = "{process.lower}" is no level that can be populated. '
                f"Give degeneracy_lower and degeneracy_upper to {process.lower}, which must not be passive."
            )
        below: str | None = process.lower
        steps = 0
        while below is not None:
            below, steps = levels[below].lower, steps + 1
            if below == process.id or steps > len(levels):
                raise ProcessError(
                    f'process {process.id}: lower = "{process.lower}" leads back to itself and never to the ground '
                    "state. Leave lower out where the ground state is the lower level."
                )


def populations(
    processes: Iterable[Process],
    temperature_K: float,
    vibrational_temperature_K: float | None,
    given: Mapping[str, float],
) -> Populations:
    """Population of every level of a checked ladder; they sum to 1.

    given : level to its fraction; the other levels share what is left in the ratios of the whole ladder.
    """
    levels = [process for process in processes if process.is_level]
    weights: dict[str | None, float] = {None: 1.0}
    while len(weights) <= len(levels):  # a lower level may have a higher threshold, so in passes
        for level in levels:
            if level.id not in weights and level.lower in weights:
                warm = vibrational_temperature_K if level.vibrational else None
                ratio = _boltzmann_ratio(level, temperature_K if warm is None else warm)
                weights[level.id] = weights[level.lower] * ratio
    rest = max(1.0 - math.fsum(given.values()), 0.0)
    total = math.fsum(weight for level, weight in weights.items() if level not in given)
    return {level: given.get(level or "", rest * weight / total) for level, weight in weights.items()}


def check_level_fractions(given: Mapping[str, float], processes: Mapping[str, Iterable[Process]]) -> None:
    """Raise MixtureError where given fractions, "<set>/<process>" to number, are impossible.

    processes : of every set of the mixture, by its name.
    """
    known = {f"{name}/{process.id}": process for name, members in processes.items() for process in members}
    levels = [name for name, process in known.items() if process.is_level]
    listed = ", ".join(levels) or "none"
    for name, fraction in given.items():
        if name not in known:
            raise MixtureError(
                f'level_fractions: "{name}" is not a process of this mixture.{suggestion(name, levels)} '
                f"Write <set>/<process>; the levels are {listed}."
            )
        if name not in levels:
            raise MixtureError(
                f'level_fractions: "{name}" leads to no level that can be populated: its process states no '
                f"degeneracies, or is passive. The levels are {listed}."
            )
        if not 0.0 <= fraction <= 1.0:
            raise MixtureError(
                f"level_fractions: fraction of {name} = {fraction:g} is outside 0 to 1. "
                "Give its part of the molecules of its set."
            )
    for name in processes:
        total = math.fsum(fraction for level, fraction in given.items() if level.startswith(f"{name}/"))
        if total > 1.0 + _SUM_TOLERANCE:
            raise MixtureError(
                f"level_fractions of {name} sum to {total:.8g}, more than 1. Give parts of the molecules of the set."
            )


def _boltzmann_ratio(level: Process, temperature_K: float) -> float:
    if temperature_K == 0.0:
        return 0.0
    exponent = -level.threshold_eV * (E_CHARGE / BOLTZMANN) / temperature_K
    return float(strict_exp(np.array(exponent))) / level.degeneracy_ratio
