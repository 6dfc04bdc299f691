"""How coefficients follow the cross sections: logarithmic derivatives by the two-term solution."""

import math

from swarmgauge.gas import Mixture

from .two_term import setting_of
from .two_term_curves import scaled

STEP = 0.02  # of ln(cross section), to either side: the error of the difference is of second order, some 1e-4
CELLS = 400
QUANTITIES = (
    "drift_velocity_flux",
    "drift_velocity_bulk",
    "diffusion_L_times_N_flux",
    "diffusion_T_times_N_flux",
    "diffusion_L_times_N_bulk",
    "diffusion_T_times_N_bulk",
    "characteristic_energy_T_flux",
    "mean_energy",
    "ionization_frequency_over_N",
    "attachment_frequency_over_N",
    "net_frequency_over_N",
)


def two_term_sensitivities(mixture: Mixture, E_over_N_Td: float) -> dict[str, dict[str, float]]:
    """d ln(quantity) / d ln(cross section): process <set>/<process> to quantity to value.

    The cross section of each acting process, with its reverse where there is one, is scaled as a whole by exp(+-0.02),
    the others kept, of a total momentum transfer too: central differences on one grid. A quantity that is 0 is left
    out, and so are processes of a trace. Raises InputError as `solve_two_term` does.

    Two identities hold (dimensions: E/N enters by E over cross section alone): over all two-body processes, the
    derivatives of a velocity or an energy sum up to minus that by ln(E/N), those of a rate to 1 less.
    """
    setting = setting_of(mixture, E_over_N_Td, CELLS)
    here = setting.values(setting.curves)
    names = [name for name in QUANTITIES if here.get(name, 0.0) != 0.0]
    result = {}
    for process in dict.fromkeys(channel.name for channel in setting.curves.channels if channel.weight > 0.0):
        above, below = (setting.values(scaled(setting.curves, process, math.exp(sign * STEP))) for sign in (1.0, -1.0))
        result[process] = {name: (above[name] - below[name]) / (2.0 * STEP * here[name]) for name in names}
    return result
