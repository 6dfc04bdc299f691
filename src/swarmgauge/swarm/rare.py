"""Which processes are rare at a field, and the target weights that let a swarm see them.

In the tail, where the two-term distribution falls from one energy cell to the next, target weights follow it, so that
every cell holds about the same number of electrons up to the energies at which the rare processes happen.
"""

import numpy as np

from swarmgauge.gas import Gas, Mixture, Process
from swarmgauge.kernel.lookup import energy_cell_edges

from .field import Field
from .targets import Target
from .two_term import TwoTerm, solve_two_term

RARE_SHARE = 2.5e-5  # of all collisions: some tens of events in a plain cohort
ELECTRONS_PER_CELL = 10.0  # of energy, 3 % wide, in the tail
COVERED = 0.98  # of a rare rate lies below the energy up to which weights still fall
SMALLEST_WEIGHT = 2.0**-60


def rare_asked(mixture: Mixture, field: Field, targets: tuple[Target, ...]) -> tuple[str, ...]:
    """Names of the rare processes that targets ask for at a field; solves the two-term equations only if any may be."""
    asked = [names for *_, names in _rate_quantities(mixture)]
    if not any(t.applies(name, field.E_over_N_Td) for names in asked for name in names for t in targets):
        return ()
    return rare_processes(mixture, solve_two_term(mixture, field.E_over_N_Td), targets, field.E_over_N_Td)


def rare_processes(
    mixture: Mixture, two_term: TwoTerm, targets: tuple[Target, ...], E_over_N_Td: float
) -> tuple[str, ...]:
    """Names <set>/<process> of the processes whose rate a target asks for and that a plain swarm hardly meets.

    A target on the ionization or attachment frequency asks for all processes of that kind together.
    """
    values = two_term.values
    names = []
    for gas, process, asked in _rate_quantities(mixture):
        share = values[asked[0]] * float(mixture.fractions[mixture.gases.index(gas)])
        if process.third_body is not None:
            share *= mixture.body_density_m3(gas, process)
        wanted = any(target.applies(name, E_over_N_Td) for target in targets for name in asked)
        if wanted and 0.0 < share < RARE_SHARE * values["collision_frequency_over_N"]:
            names.append(f"{gas.name}/{process.id}")
    return tuple(sorted(names))


_TOWNSEND = {"ionization": ("townsend_alpha_over_N",), "attachment": ("townsend_eta_over_N",)}


def _rate_quantities(mixture: Mixture) -> list[tuple[Gas, Process, tuple[str, ...]]]:
    """Every process with the quantities that hang on it: its rate, and frequency and growth of its kind."""
    return [
        (
            gas,
            process,
            (
                f"rate{'' if process.third_body is None else '3'}:{gas.name}/{process.id}",
                f"{process.kind}_frequency_over_N",
                *_TOWNSEND.get(process.kind, ()),
            ),
        )
        for gas in mixture.gases
        for process in mixture.acting(gas)
    ]


def target_weights(mixture: Mixture, two_term: TwoTerm, names: tuple[str, ...], electrons: int) -> np.ndarray:
    """Target weight of each energy cell of the kernel, (ENERGY_CELLS,): powers of 2, from 1 down the tail.

    Rounding to powers of 2 keeps the last bits of linear algebra out of the swarm.
    """
    edges = energy_cell_edges()
    middle = 0.5 * (edges[1:] + edges[:-1])
    grid = 0.5 * (two_term.energy_edges_eV[1:] + two_term.energy_edges_eV[:-1])
    logarithm = np.log(np.maximum(two_term.f0, 1e-300))
    density = np.exp(np.interp(middle, grid, logarithm)) * np.sqrt(middle) * np.diff(edges)
    density[middle > grid[-1]] = 0.0
    wanted = density * electrons / ELECTRONS_PER_CELL
    falling = np.arange(len(middle)) >= int(np.argmax(density))
    weights = np.where(falling, np.clip(wanted, SMALLEST_WEIGHT, 1.0), 1.0)
    weights = np.minimum.accumulate(weights)
    top = _top_energy(mixture, names, middle, density)
    weights[middle > top] = weights[np.searchsorted(middle, top)]
    return np.ldexp(1.0, np.frexp(weights)[1] - 1)


def _top_energy(mixture: Mixture, names: tuple[str, ...], middle: np.ndarray, density: np.ndarray) -> float:
    """Energy, eV, below which COVERED of each rare rate lies."""
    top = 0.0
    for gas, process, _ in _rate_quantities(mixture):
        if f"{gas.name}/{process.id}" in names:
            rate = np.cumsum(density * np.sqrt(middle) * process.cross_section(middle))
            if rate[-1] > 0.0:
                top = max(top, float(middle[np.searchsorted(rate, COVERED * rate[-1])]))
    return top
