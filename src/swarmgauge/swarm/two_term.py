"""Two-term solution of the electron Boltzmann equation for a uniform steady field: coefficients in milliseconds.

The electron distribution is cut after its second Legendre term, f0 + f1 cos(theta), and grows or decays as a whole in
time (pulsed Townsend). It gives the start distribution of the Monte Carlo swarm and stands beside its results.
Angular laws enter by the momentum that an electron keeps on average, at its energy before the collision (ejecta of
ionization count as isotropic); elastic collisions are taken to first order in the mass ratio, with a gas at its
temperature; the cross sections of other processes are those of the electron's own energy.

References: J. H. Parker and J. J. Lowke, Phys. Rev. 181, 290 (1969); H. R. Skullerud, Aust. J. Phys. 27, 195 (1974);
K. Kumar, H. R. Skullerud and R. E. Robson, Aust. J. Phys. 33, 343 (1980). Numerics: two_term_operator, two_term_modes.
"""

import math
from dataclasses import dataclass

import numpy as np

from swarmgauge.gas import InputError, Mixture
from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE, SPEED_1_EV, TOWNSEND

from .quantities import in_order
from .two_term_curves import TOP_EV, CollisionCurves, collision_curves
from .two_term_modes import Transport, relaxation, steady, transport
from .two_term_operator import Balance, EnergyOperator, Grid

CELLS = 600
_ROUGH_CELLS = 150
# ln(f0 at the top / largest f0): searched for between the first two, then placed at the last.
_SMALLEST_FALL, _LARGEST_FALL, _WANTED_FALL = -30.0, -60.0, -33.0
_ENOUGH_FALL = -27.0
_MOST_TOPS = 60
_LARGEST_OUTRUN = 0.001  # share of electrons
_SHARE_OF_TAIL = 0.35  # part of the cells that follow the fall of ln f0; the others are equal in speed
_WEAK_FIELD_HEATING = 1e-10  # of the diffusion in energy by a warm gas: stands for E = 0


@dataclass(frozen=True, eq=False)
class TwoTerm:
    """A two-term solution.

    energy_edges_eV : (n + 1,). f0, f1 : (n,), eV^-3/2, cell means with int f0 sqrt(e) de = 1. values : quantity name to
    value, in the order and units of `quantities`. relaxation_frequency_over_N : m3/s, rate at which the slowest
    disturbance of the steady f0 dies out. top_of_grid_share : electrons in the highest tenth of the energy range.
    converged : False where f0 has not fallen far enough at the largest energy, 10 keV (the swarm may run away), or
    where attachment removes a noticeable part of the electrons before collisions turn them: two-term theory ends there.
    """

    energy_edges_eV: np.ndarray
    f0: np.ndarray
    f1: np.ndarray
    values: dict[str, float]
    relaxation_frequency_over_N: float
    top_of_grid_share: float
    converged: bool

    def __post_init__(self) -> None:
        for array in (self.energy_edges_eV, self.f0, self.f1):
            array.flags.writeable = False

    def __repr__(self) -> str:
        values = self.values
        state = "" if self.converged else ", not converged"
        return (
            f"TwoTerm(mean_energy = {values['mean_energy']:.4g} eV, "
            f"drift_velocity_flux = {values['drift_velocity_flux']:.4g} m/s{state})"
        )


def solve_two_term(mixture: Mixture, E_over_N_Td: float, *, cells: int = CELLS) -> TwoTerm:
    """Solve for a mixture (its temperature, and its pressure where three bodies meet) at a reduced field, Td.

    cells : energy cells. With the default, coefficients are within some 2e-4 of their limit for many cells (largest
    seen for shipped sets: 6e-4), rates that live in the far tail within 6e-3; the error falls as 1 / cells^2.
    Raises InputError for a field that is negative or not finite, and for no field in a cold gas.
    """
    setting = setting_of(mixture, E_over_N_Td, cells)
    grid = setting.grid
    balance, f = setting.steady(setting.curves)
    if not np.isfinite(f).all():
        raise _no_distribution(setting.field)
    positive = bool((f > 0.0).all())
    f = np.maximum(f, np.finfo(float).tiny)
    coefficients = transport(balance, f)
    tenth = grid.edges[:-1] >= 0.9 * grid.edges[-1]
    outrun = grid.weight[:-1] @ (f[:-1] * balance.outrun)
    return TwoTerm(
        energy_edges_eV=grid.edges,
        f0=f,
        f1=_first_harmonic(grid, coefficients.f1_flux) if E_over_N_Td > 0.0 else np.zeros(cells),
        values=_values(balance, f, coefficients, E_over_N_Td),
        relaxation_frequency_over_N=SPEED_1_EV * relaxation(balance, f),
        top_of_grid_share=float(grid.weight[tenth] @ f[tenth]),
        converged=bool(positive and f[-1] < f.max() * math.exp(_ENOUGH_FALL) and outrun < _LARGEST_OUTRUN),
    )


def setting_of(mixture: Mixture, E_over_N_Td: float, cells: int = CELLS) -> "Setting":
    """What a solution starts from; raises InputError as `solve_two_term` does."""
    if not math.isfinite(E_over_N_Td) or E_over_N_Td < 0.0:
        raise InputError(f"E_over_N_Td = {E_over_N_Td:g}: give a finite reduced field of 0 Td or more.")
    thermal_eV = BOLTZMANN * mixture.temperature_K / E_CHARGE
    if E_over_N_Td == 0.0 and thermal_eV == 0.0:
        raise InputError("E_over_N_Td = 0 at temperature_K = 0: electrons come to rest. Give a field or a temperature.")
    curves = collision_curves(mixture)
    field = E_over_N_Td * TOWNSEND or _weak_field(curves, thermal_eV)
    rough = _rough_solution(curves, field, thermal_eV)
    grid = _fitted_grid(rough, cells)
    joint = max(1, int(np.searchsorted(grid.centre, (rough.grid.weight * rough.grid.centre) @ rough.f)))
    return Setting(curves, E_over_N_Td, field, thermal_eV, grid, joint, rough)


def _no_distribution(field: float) -> InputError:
    return InputError(
        f"E_over_N_Td = {field / TOWNSEND:g}: no steady distribution of energies found. "
        "Check that the sets have cross sections at low energy."
    )


def _weak_field(curves: CollisionCurves, thermal_eV: float) -> float:
    """A field (V m^2) too weak to matter, for coefficients in the limit of no field."""
    near = (curves.mesh > 0.1 * thermal_eV) & (curves.mesh < 10.0 * thermal_eV)
    product = curves.mesh[near] * curves.recoil[near] * curves.momentum[near]
    return math.sqrt(3.0 * _WEAK_FIELD_HEATING * thermal_eV * max(product.min(), 1e-6 * product.max()))


@dataclass(frozen=True, eq=False)
class _Estimate:
    grid: Grid
    balance: Balance
    f: np.ndarray

    def log_f(self, energy_eV: np.ndarray) -> np.ndarray:
        """ln f at energies, going on evenly above the grid."""
        slope = math.log(self.f[-1] / self.f[-2]) / self.grid.step[-1]
        inside = np.interp(energy_eV, self.grid.centre, np.log(self.f))
        return inside + slope * np.maximum(energy_eV - self.grid.centre[-1], 0.0)


@dataclass(frozen=True, eq=False)
class Setting:
    """A mixture in a field on a grid fitted to it; slightly changed cross sections may be solved on the same grid.

    field : V m^2. joint : cell whose balance stays open. rough : a first solution.
    """

    curves: CollisionCurves
    E_over_N_Td: float
    field: float
    thermal_eV: float
    grid: Grid
    joint: int
    rough: _Estimate

    def steady(self, curves: CollisionCurves) -> tuple[Balance, np.ndarray]:
        """Balance and f0, (cells,), for these cross sections."""
        estimate = self.rough
        for _ in range(2 if any(channel.superelastic for channel in curves.channels) else 1):
            operator = EnergyOperator(curves, self.grid, self.field, self.thermal_eV, self.joint, estimate.log_f)
            balance, f = steady(operator, guess=estimate.balance.growth)
            estimate = _Estimate(self.grid, balance, np.maximum(f, np.finfo(float).tiny))
        return balance, f

    def values(self, curves: CollisionCurves) -> dict[str, float]:
        """All quantities of two-term theory for these cross sections."""
        balance, f = self.steady(curves)
        f = np.maximum(f, np.finfo(float).tiny)
        return _values(balance, f, transport(balance, f), self.E_over_N_Td)


def _rough_solution(curves: CollisionCurves, field: float, thermal_eV: float) -> _Estimate:
    """A solution on few cells, on a range of energy over which f0 falls by the wanted amount or somewhat more."""
    low, high = 0.0, math.inf
    top = min(max(4.0 * (field / TOWNSEND) ** 0.75, 40.0 * thermal_eV), TOP_EV)  # a fair guess for most gases
    best: _Estimate | None = None
    for _ in range(_MOST_TOPS):
        grid = Grid(top * np.linspace(0.0, 1.0, _ROUGH_CELLS + 1) ** 2)
        with np.errstate(all="ignore"):
            operator = EnergyOperator(
                curves, grid, field, thermal_eV, _ROUGH_CELLS // 4, best.log_f if best else np.zeros_like
            )
            balance, f = steady(operator, guess=best.balance.growth if best else 0.0)
            fall = np.log(f[-1] / f.max()) if (f > 0.0).all() and np.isfinite(f).all() else -math.inf
        if fall > _LARGEST_FALL:
            best = _Estimate(grid, balance, f)
        if fall < _LARGEST_FALL:
            high = top
            top = max(0.25 * top, math.sqrt(low * high))
        elif fall > _SMALLEST_FALL and top < TOP_EV:
            low = top
            stretch = min((_WANTED_FALL / min(fall, -1.0)) ** 0.75, 4.0)
            top = min(stretch * top, TOP_EV, math.sqrt(low * high))
        else:
            break
    if best is None:
        raise _no_distribution(field)
    return best


def _fitted_grid(rough: _Estimate, cells: int) -> Grid:
    """Cells up to the wanted fall of f0, part of them equal in speed, part equal in the fall of ln f0."""
    logarithm = np.log(rough.f / rough.f.max())
    speed = np.sqrt(rough.grid.centre)
    fallen = np.flatnonzero(logarithm < _WANTED_FALL)
    last = int(fallen[0]) if len(fallen) else len(speed) - 1
    knots = np.concatenate([[0.0], speed[:last], [speed[last] if len(fallen) else np.sqrt(rough.grid.edges[-1])]])
    fall = np.concatenate([[0.0], np.cumsum(np.abs(np.diff(logarithm, prepend=logarithm[0])))[: last + 1]])
    place = (1.0 - _SHARE_OF_TAIL) * knots / knots[-1] + _SHARE_OF_TAIL * fall / fall[-1]
    return Grid(np.interp(np.linspace(0.0, 1.0, cells + 1), place, knots) ** 2)


def _first_harmonic(grid: Grid, flux: np.ndarray) -> np.ndarray:
    """Cell means of f1 from e x f1 between centres (n - 1,); int e f1 de is kept."""
    inner = grid.edges[1:-1]
    cells = np.zeros(len(grid.centre))
    cells[:-1] += flux * (inner - grid.centre[:-1])
    cells[1:] += flux * (grid.centre[1:] - inner)
    return cells / (0.5 * np.diff(grid.edges**2))


def _values(balance: Balance, f: np.ndarray, coefficients: Transport, E_over_N_Td: float) -> dict[str, float]:
    """All quantities of two-term theory by name, SI and eV."""
    operator, grid = balance.operator, balance.operator.grid
    mean_energy = float((grid.weight * grid.centre) @ f)
    values = {"mean_energy": mean_energy}
    for kind in ("flux", "bulk"):
        drift = SPEED_1_EV * getattr(coefficients, f"drift_{kind}")
        mobility = drift / operator.field
        values[f"drift_velocity_{kind}"] = drift if E_over_N_Td > 0.0 else 0.0
        values[f"mobility_times_N_{kind}"] = mobility
        for axis in ("L", "T"):
            diffusion = SPEED_1_EV * getattr(coefficients, f"diffusion_{axis}_{kind}")
            values[f"diffusion_{axis}_times_N_{kind}"] = diffusion
            values[f"characteristic_energy_{axis}_{kind}"] = diffusion / mobility
    per_target = SPEED_1_EV * (operator.events @ f)
    frequency = dict.fromkeys(("elastic", "excitation", "ionization", "attachment"), 0.0)
    for channel, rate in zip(operator.curves.channels, per_target.tolist(), strict=True):
        values[channel.rate_name] = channel.population * rate
        frequency[channel.process.kind] += channel.weight * rate
    for channel, rate in zip(operator.curves.channels, operator.curves.maxwellian_rates(mean_energy), strict=True):
        values[f"maxwellian_{channel.rate_name}"] = channel.population * SPEED_1_EV * float(rate)
    values["ionization_frequency_over_N"] = frequency["ionization"]
    values["attachment_frequency_over_N"] = frequency["attachment"]
    values["net_frequency_over_N"] = frequency["ionization"] - frequency["attachment"]
    values["collision_frequency_over_N"] = sum(frequency.values())
    mean_speed = SPEED_1_EV * float(0.5 * np.diff(grid.edges**2) @ f)
    values["mean_free_path_times_N"] = mean_speed / values["collision_frequency_over_N"]
    values.update(_power_balance(balance, f, values["drift_velocity_flux"]))
    return {name: values[name] for name in in_order(values)}


def _power_balance(balance: Balance, f: np.ndarray, drift: float) -> dict[str, float]:
    """Heating by the field, the share of it that every process takes, and what is left over; NaN without a field."""
    operator, grid = balance.operator, balance.operator.grid
    heating_eV = drift * operator.field
    if heating_eV == 0.0:
        heating_eV = math.nan
    elastic = -SPEED_1_EV * balance.elastic_flux(f) * grid.step
    losses, gains = {}, {}
    for row, channel in enumerate(operator.curves.channels):
        if channel.process.passive:
            continue
        if channel.process.kind == "elastic":
            loss = float(elastic @ operator.friction_share(row))
        else:
            loss = channel.weight * SPEED_1_EV * float(operator.spent[row] @ f)
        if channel.superelastic:
            gains[f"gain_fraction:{channel.name}"] = -loss / heating_eV
        else:
            losses[f"loss_fraction:{channel.name}"] = loss / heating_eV
    growth_loss = SPEED_1_EV * balance.growth * float((grid.weight * grid.centre) @ f)
    losses["loss_fraction:population_change"] = growth_loss / heating_eV
    return {
        "field_heating_over_N": E_CHARGE * heating_eV if drift else 0.0,
        # Bits of linear algebra, below 1e-12, differ between processors; + 0.0 turns -0.0 into 0.0.
        "energy_balance_residual": round(1.0 - math.fsum([*losses.values(), *(-gain for gain in gains.values())]), 8)
        + 0.0,
        **losses,
        **gains,
    }
