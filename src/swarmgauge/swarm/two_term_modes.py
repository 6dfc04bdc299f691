"""Steady distribution, density-gradient corrections and relaxation of the two-term balance."""

import math
from dataclasses import dataclass

import numpy as np
from scipy.sparse.linalg import ArpackError, LinearOperator, eigs

from .two_term_operator import Balance, EnergyOperator

_TOLERANCE = 1e-13
_LARGEST_STEPS = 100


def steady(operator: EnergyOperator, guess: float = 0.0) -> tuple[Balance, np.ndarray]:
    """The balance at the growth rate of the steady distribution, and that distribution, (n,) with number 1.

    At a given growth rate nu, the solution of all balances but that of the joint leaves q = nu - net . f electrons per
    electron to be put in there. Where f > 0 everywhere and q >= 0, nu is at or above the largest eigenvalue, that of
    the only positive steady distribution (L. Collatz, Math. Z. 48, 221 (1942)); elsewhere it is below. The root of q
    is found by secants between these bounds.
    """
    if not operator.net.any():
        balance = operator.at_growth(0.0)
        return balance, balance.homogeneous()
    rates = operator.net / operator.grid.weight
    low, high = float(rates.min()), float(rates.max())
    growth = min(max(guess, low), high)
    previous = None
    for _ in range(_LARGEST_STEPS):
        balance = operator.at_growth(growth)
        f = balance.homogeneous()
        if not np.isfinite(f).all():
            break
        missing = growth - operator.net @ f
        positive = bool((f > 0.0).all())
        if positive and abs(missing) <= _TOLERANCE * ((operator.gain + operator.loss) @ f):
            break
        if positive and missing > 0.0:
            high = growth
        else:
            low = growth
        if high - low <= _TOLERANCE * max(abs(high), abs(low)):
            break
        proposal = math.nan
        if positive:
            proposal = growth - missing
            if previous is not None and previous[1] != missing:
                proposal = growth - missing * (growth - previous[0]) / (missing - previous[1])
            previous = (growth, missing)
        growth = proposal if low < proposal < high else 0.5 * (low + high)
    return balance, f


def _with_free_rate(
    balance: Balance, f: np.ndarray, sources: np.ndarray, fluxes: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Solve balance[x] = source - rate x sqrt(e) f with number[x] = 0 for x and the rate.

    f : (n,), the steady distribution; sources : (n, k); fluxes : (n - 1, k). Returns x (n, k) and the rates (k,).
    """
    grid = balance.operator.grid
    decay = -(grid.weight * f)[:, None]
    columns = balance.forced(np.hstack([sources, decay]), np.hstack([fluxes, np.zeros((len(fluxes), 1))]))
    open_balance = balance.growth * grid.weight - balance.operator.net
    particular, unit = columns[:, :-1], columns[:, -1]
    rate = (sources.sum(axis=0) - open_balance @ particular) / (1.0 + open_balance @ unit)
    x = particular + np.outer(unit, rate)
    return x - np.outer(f, grid.weight @ x), rate


@dataclass(frozen=True, eq=False)
class Transport:
    """Drift velocities, sqrt(eV), and diffusion x N, sqrt(eV)/m2, over sqrt(2e/m). f1_flux : (n - 1,), e x f1."""

    f1_flux: np.ndarray
    drift_flux: float
    drift_bulk: float
    diffusion_L_flux: float
    diffusion_T_flux: float
    diffusion_L_bulk: float
    diffusion_T_bulk: float


def transport(balance: Balance, f: np.ndarray) -> Transport:
    """Flux and bulk drift velocity and diffusion by the density-gradient expansion to second order.

    The distribution is F = n f - (dn/dz) g / N + (d2n/dz2) h_L / N^2 + (d2n/dx2 + d2n/dy2) h_T / N^2 with number[g] =
    number[h] = 0. In the order of each derivative of n, with L the operator of the steady balance, s the effective
    momentum-transfer cross section, and velocities over sqrt(2e/m):

        L f = 0                                            f1 = -E f' / s
        L g = e f1 / 3 - W sqrt(e) f                       g1 = (f - E g') / s
        L h_L = e g1 / 3 - W sqrt(e) g - D_L sqrt(e) f     h1 = (g - E h') / s
        L h_T = e f / (3 s) - D_T sqrt(e) f

    (the parts of g1 and h1 without a derivative go to the right side as given fluxes in energy). The number balance of
    each line gives the bulk coefficient: W = W_flux + net[g], D N = D_flux N + net[h], with W_flux = int e f1 / 3,
    D_L,flux N = int e g1 / 3 and D_T,flux N = int e f / (3 s). As is usual, the anisotropic part follows the isotropic
    one at once, but for the growth term in s.

    References: J. H. Parker and J. J. Lowke, Phys. Rev. 181, 290 (1969); K. Kumar, H. R. Skullerud and R. E. Robson,
    Aust. J. Phys. 33, 343 (1980); R. E. Robson, Aust. J. Phys. 44, 685 (1991).
    """
    grid, field = balance.operator.grid, balance.operator.field
    conductance = balance.conductance

    def spread(flux: np.ndarray) -> np.ndarray:
        """A third of the integral of a quantity given between centres, in each cell."""
        inner = grid.edges[1:-1]
        cells = np.zeros(len(grid.weight))
        cells[:-1] += flux * (inner - grid.centre[:-1]) / 3.0
        cells[1:] += flux * (grid.centre[1:] - inner) / 3.0
        return cells

    def between(x: np.ndarray) -> np.ndarray:
        return 0.5 * (x[1:] + x[:-1])

    # The logarithmic mean of f keeps Einstein's relation to the last digit in a Maxwellian.
    ratio = np.log(f[:-1] / f[1:])
    level = np.abs(ratio) < 1e-6
    f_between = np.where(level, between(f), (f[:-1] - f[1:]) / np.where(level, 1.0, ratio))

    f1_flux = -field * conductance * np.diff(f) / grid.step
    free = conductance * f_between
    g, (drift_bulk,) = _with_free_rate(balance, f, spread(f1_flux)[:, None], (field / 3.0 * free)[:, None])
    g = g[:, 0]
    g_free = conductance * between(g)
    g1_flux = free - field * conductance * np.diff(g) / grid.step
    second = np.stack([spread(g1_flux) - drift_bulk * grid.weight * g, spread(free)], axis=1)
    given = np.stack([field / 3.0 * g_free, np.zeros(len(free))], axis=1)
    _, (longitudinal, transverse) = _with_free_rate(balance, f, second, given)
    return Transport(
        f1_flux=f1_flux,
        drift_flux=float(f1_flux @ grid.step) / 3.0,
        drift_bulk=float(drift_bulk),
        diffusion_L_flux=float(g1_flux @ grid.step) / 3.0,
        diffusion_T_flux=float(free @ grid.step) / 3.0,
        diffusion_L_bulk=float(longitudinal),
        diffusion_T_bulk=float(transverse),
    )


def relaxation(balance: Balance, f: np.ndarray) -> float:
    """Rate (over N sqrt(2e/m)) at which the slowest disturbance of the steady distribution f dies out.

    1 / rate is the largest eigenvalue of the inverse of the balance on what is orthogonal to the steady distribution,
    found by Arnoldi iteration; where that does not converge, a few steps of power iteration give an estimate.
    """
    grid = balance.operator.grid
    none = np.zeros((len(grid.step), 1))

    def respond(x: np.ndarray) -> np.ndarray:
        scaled = f * np.ravel(x)
        response, _ = _with_free_rate(balance, f, (grid.weight * scaled)[:, None], none)
        return response[:, 0] / f

    start = grid.centre / (grid.weight @ (grid.centre * f)) - 1.0
    shape = (len(f), len(f))
    try:
        slowest = eigs(
            LinearOperator(shape, matvec=respond),
            k=2,
            v0=start,
            tol=1e-5,
            ncv=12,
            maxiter=30,
            return_eigenvectors=False,
        )
        return float(min((1.0 / slowest).real))
    except ArpackError:
        for _ in range(10):
            following = respond(start)
            rate = float(np.linalg.norm(start) / np.linalg.norm(following))
            start = following
        return rate
