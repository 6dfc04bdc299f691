"""The energy balance of the isotropic part of the electron distribution, in finite volumes.

Unknown is f (eV^-3/2) in each energy cell. With e the energy in eV, E the field over N (V m^2), s the momentum-transfer
cross section including the growth term, r the recoil cross section and frequencies divided by N sqrt(2e/m), the steady
balance of a swarm that grows as exp(nu t) is

    d/de J[f] + nu sqrt(e) f = collisions[f],    J[f] = -(E^2 e / (3 s)) df/de - r e^2 (f + kT df/de),

J being the flux of electrons in energy (field, then elastic collisions with a gas at temperature T). J between two cell
centres is that of the exact solution for constant coefficients (D. L. Scharfetter and H. K. Gummel, IEEE Trans.
Electron Devices 16, 64 (1969), who used it for charge carriers), so that a Maxwellian is reproduced exactly at E = 0.
Cell centres are centroids of sqrt(e): number and energy of a cell are weight x f and weight x centre x f, and every
transfer by a collision is shared between two neighbouring cells so that both are conserved.

The balance of one cell, the `joint` near the mean energy, stays open, to be closed by the growth rate; those of the
other cells are solved by LU decomposition. In them everything but the diagonal has one sign, so that elimination from
the lowest cell up hardly ever subtracts large numbers, and f keeps its digits over all the decades that it falls.

Transfers by an excitation that has a reverse are found for pieces of energy that lie in one cell before and in one
after, so that every low cell, however narrow, is fed as it is drained, and the reverse goes the same ways back. Within
a cell f is taken to fall there as an estimate of it does, so that a Maxwellian stays in balance.
"""

from collections.abc import Callable
from functools import cached_property

import numpy as np
from scipy.linalg import lu_factor, lu_solve

from .two_term_curves import TOP_EV, Channel, CollisionCurves

_LEAST_MOMENTUM_SHARE = 0.1  # where attachment outruns collisions, s would go through zero: keep this part of it
_LEAST_SECTION_M2 = 1e-27  # stands for zero
_QUANTILES = 64  # of a density of ejected energies
_LEAST_EJECTED_EV, _EJECTED_POINTS = 1e-4, 1000


class Grid:
    """Energy cells.

    edges : (n + 1,), eV, from 0. weight : (n,), integral of sqrt(e). centre : (n,), centroids of sqrt(e), eV.
    step, middle : (n - 1,), distance and middle of neighbouring centres.
    """

    def __init__(self, edges: np.ndarray):
        self.edges = edges
        root = np.sqrt(edges)
        a, b = root[:-1], root[1:]
        square = a * a + a * b + b * b
        self.weight = (b - a) * square / 1.5
        self.centre = 0.6 * (a**4 + a**3 * b + a * a * b * b + a * b**3 + b**4) / square
        self.step = np.diff(self.centre)
        self.middle = 0.5 * (self.centre[1:] + self.centre[:-1])


class EnergyOperator:
    """Collisions and field on a grid, all but the growth rate.

    field : E/N in V m^2, > 0; thermal_eV : kT of the gas, eV, >= 0; joint : cell whose balance stays open;
    log_f : gives ln of an estimate of f at energies in eV.
    events : (channels, n), integral of energy x cross section in each cell, per density of the target: events . f is
    the rate over sqrt(2e/m). Of a process with a threshold, what lies in a cell below the first edge above the
    threshold is carried into the next cell, since no electron at the cell's centre could pay for it. A superelastic
    collision that would lift an electron above the grid is left out.
    spent : (channels, n), energy that electrons of each cell lose by them, likewise; negative where they gain.
    exchanges : row of an excitation with a reverse to what goes from cell j to cell i by it, and by its reverse.
    net : (n,), ionization minus attachment of the mixture, likewise.
    """

    def __init__(
        self,
        curves: CollisionCurves,
        grid: Grid,
        field: float,
        thermal_eV: float,
        joint: int,
        log_f: Callable[[np.ndarray], np.ndarray] = np.zeros_like,
    ):
        self.curves, self.grid, self.field, self.thermal_eV, self.joint = curves, grid, field, thermal_eV, joint
        self.events = _payable(curves, grid)
        self.spent = self.events * np.array([channel.loss_eV for channel in curves.channels])[:, None]
        self.exchanges = self._settle_reversible(log_f)
        self.weights = np.array([channel.weight for channel in curves.channels])
        kinds = np.array([channel.process.kind for channel in curves.channels])
        self.gain = np.where(kinds == "ionization", self.weights, 0.0) @ self.events
        self.loss = np.where(kinds == "attachment", self.weights, 0.0) @ self.events
        self.spent[kinds == "attachment"] = self.events[kinds == "attachment"] * grid.centre
        self.net = self.gain - self.loss
        momentum, recoil = curves.mean_momentum_and_recoil(grid.centre)
        self.momentum = np.maximum(momentum, _LEAST_SECTION_M2)
        self.friction = recoil * grid.middle**2

    def friction_share(self, row: int) -> np.ndarray:
        """Part of the friction that comes from the elastic process in a row of the curves, (n - 1,)."""
        channel = self.curves.channels[row]
        own = channel.weight * channel.recoil * self.curves.mean_transfer(row, self.grid.centre) * self.grid.middle**2
        return np.divide(own, self.friction, out=np.zeros_like(own), where=self.friction > 0.0)

    def _settle_reversible(self, log_f: Callable[[np.ndarray], np.ndarray]) -> dict[int, np.ndarray]:
        """Exchanges of the excitations with a reverse; sets their events and what is spent in them to match."""
        exchanges = {}
        drop = self.grid.centre[None, :] - self.grid.centre[:, None]
        for reverse, channel in enumerate(self.curves.channels):
            if channel.superelastic:
                pair = _exchange(self.curves, reverse - 1, self.grid, log_f)
                for row, exchange in zip((reverse - 1, reverse), pair, strict=True):
                    exchanges[row] = exchange
                    self.events[row] = exchange.sum(axis=0)
                    self.spent[row] = (exchange * drop).sum(axis=0)
        return exchanges

    @cached_property
    def transfers(self) -> np.ndarray:
        """(n, n): change of the number in cell i by inelastic collisions, per f of cell j."""
        result = _transfers(self.curves, self.grid, self.events)
        for row, exchange in self.exchanges.items():
            result += self.weights[row] * exchange
        return result

    def at_growth(self, growth: float) -> "Balance":
        """The balance of a swarm with a given growth rate (over N sqrt(2e/m))."""
        return Balance(self, growth)


class Balance:
    """The linear balance at a given growth rate.

    conductance : (n - 1,), e / s between centres. outrun : (n - 1,), where s is held because attachment removes
    electrons about as fast as collisions turn them.
    """

    def __init__(self, operator: EnergyOperator, growth: float):
        self.operator, self.growth = operator, growth
        grid = operator.grid
        least = _LEAST_MOMENTUM_SHARE * operator.momentum
        effective = operator.momentum + growth / np.sqrt(grid.middle)
        self.outrun = effective < least
        self.conductance = grid.middle / np.maximum(effective, least)
        self.heating = operator.field**2 / 3.0 * self.conductance
        diffusion = self.heating + operator.thermal_eV * operator.friction
        drift = operator.friction * grid.step / diffusion
        self.down = diffusion / grid.step * _bernoulli(-drift)  # per f of the upper cell
        self.up = np.maximum(diffusion / grid.step * _bernoulli(drift), np.finfo(float).tiny)  # per f of the lower cell
        self._from_joint, self._factors = self._closed_balances()

    def _closed_balances(self) -> tuple[np.ndarray, tuple]:
        """Balances of all cells but the joint: coefficients of the joint, and factors for the others."""
        operator = self.operator
        system = -operator.transfers
        cells = np.arange(len(system))
        system[cells, cells] += self.growth * operator.grid.weight
        system[cells[:-1], cells[:-1]] += self.up
        system[cells[1:], cells[1:]] += self.down
        system[cells[1:], cells[:-1]] -= self.up
        system[cells[:-1], cells[1:]] -= self.down
        closed = np.delete(system, operator.joint, axis=0)
        others = np.delete(closed, operator.joint, axis=1)
        return closed[:, operator.joint], lu_factor(others, overwrite_a=True, check_finite=False)

    def field_flux(self, f: np.ndarray) -> np.ndarray:
        """The field's part of the energy flux between centres, (n - 1,)."""
        return -self.heating * np.diff(f) / self.operator.grid.step

    def elastic_flux(self, f: np.ndarray) -> np.ndarray:
        """The elastic collisions' part of the energy flux between centres, (n - 1,)."""
        return self.up * f[:-1] - self.down * f[1:] - self.field_flux(f)

    def homogeneous(self) -> np.ndarray:
        """The f with number 1 that solves all balances but the open one, (n,); not finite if it exceeds all numbers."""
        f = self._solve(-self._from_joint, 1.0)
        f /= f.max()
        return f / (self.operator.grid.weight @ f)

    def forced(self, sources: np.ndarray, fluxes: np.ndarray) -> np.ndarray:
        """The f that are zero in the joint and solve all balances but the open one, (n, k).

        sources : (n, k), in each cell; fluxes : (n - 1, k), given parts of J between centres.
        """
        balances = sources - np.diff(fluxes, axis=0, prepend=0.0, append=0.0)
        return self._solve(np.delete(balances, self.operator.joint, axis=0), 0.0)

    def _solve(self, balances: np.ndarray, at_joint: float) -> np.ndarray:
        return np.insert(lu_solve(self._factors, balances, check_finite=False), self.operator.joint, at_joint, axis=0)


def _bernoulli(x: np.ndarray) -> np.ndarray:
    """x / (exp(x) - 1)."""
    safe = np.where(np.abs(x) < 1e-8, 1.0, np.clip(x, -700.0, 700.0))
    return np.where(np.abs(x) < 1e-8, 1.0 - 0.5 * x, safe / np.expm1(safe))


def _payable(curves: CollisionCurves, grid: Grid) -> np.ndarray:
    events = curves.integrals(grid.edges)
    for row, channel in enumerate(curves.channels):
        if channel.process.kind in ("excitation", "ionization") and not channel.superelastic:
            first = int(np.searchsorted(grid.edges, channel.process.threshold_eV))
            if 0 < first < len(grid.centre):
                events[row, first] += events[row, first - 1]
            events[row, :first] = 0.0
    return events


def _exchange(
    curves: CollisionCurves, row: int, grid: Grid, log_f: Callable[[np.ndarray], np.ndarray]
) -> tuple[np.ndarray, np.ndarray]:
    """What goes from cell j to cell i by the excitation in a row of the curves and by its reverse, per f of cell j.

    Pieces of energy come from one cell and go into one cell. Those of a cell are moved together so that their mean
    energy is that of its centre, and shared by two cells after the collision; so number and energy are kept. The
    reverse takes every piece back. Two arrays, (n, n).
    """
    size = len(grid.centre)
    process = curves.channels[row].process
    threshold = process.threshold_eV
    first = int(np.searchsorted(grid.edges, threshold))
    points = np.unique(np.concatenate([grid.edges, grid.edges + threshold]))
    points = points[(points >= threshold) & (points <= grid.edges[-1])]
    if first >= size or len(points) < 2:
        return np.zeros((size, size)), np.zeros((size, size))
    middle = 0.5 * (points[1:] + points[:-1])
    events = curves.integrals_of(row, points)
    height = log_f(grid.centre)
    origin = np.maximum(np.searchsorted(grid.edges, middle) - 1, first)
    amount = events * np.exp(log_f(middle) - height[origin])
    total = np.bincount(origin, weights=amount, minlength=size)
    mean = np.bincount(origin, weights=amount * middle, minlength=size) / np.where(total > 0.0, total, 1.0)
    landing = np.maximum(middle + (grid.centre - mean)[origin] - threshold, grid.centre[0])
    place, down = _landing(grid, landing, amount, origin)
    _, up = _landing(grid, landing, events * np.exp(log_f(middle - threshold)), origin)
    target, source = np.divmod(place, size)
    up *= process.degeneracy_ratio * np.exp(-height[target])
    return _matrix(size, place, down), _matrix(size, source * size + target, up)


def _matrix(size: int, places: np.ndarray, amounts: np.ndarray) -> np.ndarray:
    return np.bincount(places, weights=amounts, minlength=size * size).reshape(size, size)


def _transfers(curves: CollisionCurves, grid: Grid, events: np.ndarray) -> np.ndarray:
    """(n, n): change of the number in cell i by inelastic collisions, per f of cell j; of reversible ones the loss."""
    size = len(grid.centre)
    result = np.zeros((size, size))
    landings = [(np.zeros(0, dtype=np.int64), np.zeros(0))]
    reverses = [row for row, channel in enumerate(curves.channels) if channel.superelastic]
    reversible = {*reverses, *(row - 1 for row in reverses)}
    for row, (channel, event) in enumerate(zip(curves.channels, events, strict=True)):
        origin = np.flatnonzero(event)
        if channel.process.kind == "elastic" or channel.weight == 0.0 or len(origin) == 0:
            continue
        amount = channel.weight * event[origin]
        result[origin, origin] -= amount
        if row in reversible:
            continue
        left = grid.centre[origin] - channel.loss_eV
        for share, number in _products(channel):
            landings.append(_landing(grid, share * left, number * amount, origin))
        for ejected in _ejected_quantiles(channel, left):
            landings.append(_landing(grid, ejected, amount / _QUANTILES, origin))
            landings.append(_landing(grid, left - ejected, amount / _QUANTILES, origin))
        if channel.process.kind == "ionization" and channel.process.sharing.kind == "uniform":
            result[:, origin] += _uniform_pair(grid, left, amount)
    place, amount = (np.concatenate(parts) for parts in zip(*landings, strict=True))
    return result + _matrix(size, place, amount)


def _products(channel: Channel) -> list[tuple[float, float]]:
    """(share of the energy left, number) of electrons that come out of a collision with a sharp energy."""
    process = channel.process
    if process.kind == "excitation":
        return [(1.0, 1.0)]
    if process.kind == "attachment" or process.sharing.kind == "uniform" or process.sharing.has_density:
        return []
    if process.sharing.kind == "equal":
        return [(0.5, 2.0)]
    return [(process.sharing.fraction, 1.0), (1.0 - process.sharing.fraction, 1.0)]


def _ejected_quantiles(channel: Channel, left: np.ndarray) -> list[np.ndarray]:
    """Energies of the ejected electron at the middles of parts of equal probability, where sharing has a density."""
    sharing = channel.process.sharing
    if channel.process.kind != "ionization" or not sharing.has_density:
        return []
    fine = np.concatenate([[0.0], np.geomspace(_LEAST_EJECTED_EV, TOP_EV, _EJECTED_POINTS)])
    below = sharing.cumulated(fine)
    limit = np.interp(0.5 * left, fine, below)
    shares = (np.arange(_QUANTILES) + 0.5) / _QUANTILES
    return [np.minimum(np.interp(share * limit, below, fine), 0.5 * left) for share in shares]


def _landing(grid: Grid, energy: np.ndarray, amount: np.ndarray, origin: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Flat places (row x n + column) and amounts; shared by two cells so that number and energy are kept."""
    size = len(grid.centre)
    lower = np.clip(np.searchsorted(grid.centre, energy) - 1, 0, size - 2)
    upper_share = (energy - grid.centre[lower]) / grid.step[lower]
    places = np.concatenate([lower, lower + 1]) * size + np.tile(origin, 2)
    return places, np.concatenate([(1.0 - upper_share) * amount, upper_share * amount])


def _uniform_pair(grid: Grid, left: np.ndarray, amount: np.ndarray) -> np.ndarray:
    """(n, len(left)): two electrons, each anywhere between 0 and `left` with equal probability.

    The share of cell k is the mean over that range of the function that is 1 at centre k, 0 at the others and linear
    between them (and on down to zero energy): that keeps number and energy.
    """
    centre, step = grid.centre, grid.step
    start = np.concatenate([[0.0], centre[1:-1]])  # of the pieces between centres, the first from zero energy
    width = centre[1:] - start
    falling = width * (centre[1:] - 0.5 * (start + centre[1:])) / step  # integral of the lower centre's function
    rising = width - falling
    whole = np.append(falling, 0.0) + np.append(0.0, rising)
    piece = np.clip(np.searchsorted(centre, left) - 1, 0, len(step) - 1)
    part = left - start[piece]
    part_rising = part * (0.5 * (start[piece] + left) - centre[piece]) / step[piece]
    factor = 2.0 * amount / left
    result = np.where(np.arange(len(centre))[:, None] < piece, whole[:, None] * factor, 0.0)
    columns = np.arange(len(left))
    before = np.where(piece > 0, np.append(0.0, rising)[piece], 0.0)
    result[piece, columns] += factor * (before + part - part_rising)
    result[piece + 1, columns] += factor * part_rising
    return result
