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

Summed over all cells above an edge the balance says: flux through the edge = what falls through it + growth above it.
No process lifts an electron, so above a chosen cell, the `joint` near the mean energy, these sums form an upper
triangular system, solved from the top down without subtracting large numbers. Below the joint, where f may fall towards
zero energy if attachment is strong, the plain balances of the cells are solved by LU decomposition. The balance of the
joint itself stays open, to be closed by the growth rate. (A superelastic process would be one more transfer, with a
negative loss; the sums then have entries below the diagonal, and all cells want the LU decomposition, with f in units
of an estimate so that the tail keeps its digits.)
"""

from functools import cached_property

import numpy as np
from scipy.linalg import lu_factor, lu_solve, solve_triangular

from .two_term_curves import CollisionCurves

_LEAST_MOMENTUM_SHARE = 0.1  # where attachment outruns collisions, s would go through zero: keep this part of it
_LEAST_SECTION_M2 = 1e-27  # stands for zero


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

    field : E/N in V m^2, > 0; thermal_eV : kT of the gas, eV, >= 0; joint : cell whose balance stays open.
    events : (channels, n), integral of energy x cross section in each cell, per density of the target: events . f is
    the rate over sqrt(2e/m). Of a process with a threshold, what lies in a cell below the first edge above the
    threshold is carried into the next cell, since no electron at the cell's centre could pay for it.
    net : (n,), ionization minus attachment of the mixture, likewise.
    """

    def __init__(self, curves: CollisionCurves, grid: Grid, field: float, thermal_eV: float, joint: int):
        self.curves, self.grid, self.field, self.thermal_eV, self.joint = curves, grid, field, thermal_eV, joint
        self.events = _payable(curves, grid)
        self.weights = np.array([channel.weight for channel in curves.channels])
        kinds = np.array([channel.process.kind for channel in curves.channels])
        self.gain = np.where(kinds == "ionization", self.weights, 0.0) @ self.events
        self.loss = np.where(kinds == "attachment", self.weights, 0.0) @ self.events
        self.net = self.gain - self.loss
        momentum, recoil = curves.mean_momentum_and_recoil(grid.centre)
        self.momentum = np.maximum(momentum, _LEAST_SECTION_M2)
        self.friction = recoil * grid.middle**2

    def friction_share(self, row: int) -> np.ndarray:
        """Part of the friction that comes from the elastic process in a row of the curves, (n - 1,)."""
        channel = self.curves.channels[row]
        own = channel.weight * channel.recoil * self.curves.mean_section(row, self.grid.centre) * self.grid.middle**2
        return np.divide(own, self.friction, out=np.zeros_like(own), where=self.friction > 0.0)

    @cached_property
    def transfers(self) -> np.ndarray:
        """(n, n): change of the number in cell i by inelastic collisions, per f of cell j."""
        return _transfers(self.curves, self.grid, self.events)

    @cached_property
    def falling(self) -> np.ndarray:
        """(n - 1 - joint, n - joint): number falling through the edges above the joint, per f of cells from it on."""
        above = np.cumsum(self.transfers[: self.joint : -1, self.joint :], axis=0)[::-1]
        return np.asfortranarray(-above)

    @cached_property
    def number_above(self) -> np.ndarray:
        """Number above the same edges, per f of the same cells."""
        return np.asfortranarray(np.triu(np.broadcast_to(self.grid.weight[self.joint :], self.falling.shape), 1))

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
        self._upper = self._edge_balances()
        self._lower_by_joint_on, self._lower = self._cell_balances()

    def _edge_balances(self) -> np.ndarray:
        """Balances of what is above the edges above the joint, upper triangular but for the last column."""
        operator, joint = self.operator, self.operator.joint
        system = operator.falling + self.growth * operator.number_above
        edges = np.arange(len(system))
        system[edges, edges] -= self.up[joint:]
        system[edges, edges + 1] += self.down[joint:]
        return system

    def _cell_balances(self) -> tuple[np.ndarray, tuple]:
        """Balances of the cells below the joint: coefficients of the cells from it on, and factors for those below."""
        operator, joint = self.operator, self.operator.joint
        system = -operator.transfers[:joint]
        cells = np.arange(joint)
        system[cells, cells] += self.growth * operator.grid.weight[:joint] + self.up[:joint]
        system[cells[1:], cells[1:]] += self.down[: joint - 1]
        system[cells[1:], cells[:-1]] -= self.up[: joint - 1]
        system[cells, cells + 1] -= self.down[:joint]
        return system[:, joint:], lu_factor(system[:, :joint], check_finite=False)

    def field_flux(self, f: np.ndarray) -> np.ndarray:
        """The field's part of the energy flux between centres, (n - 1,)."""
        return -self.heating * np.diff(f) / self.operator.grid.step

    def elastic_flux(self, f: np.ndarray) -> np.ndarray:
        """The elastic collisions' part of the energy flux between centres, (n - 1,)."""
        return self.up * f[:-1] - self.down * f[1:] - self.field_flux(f)

    def homogeneous(self) -> np.ndarray:
        """The f with number 1 that solves all balances but the open one, (n,); not finite if it exceeds all numbers."""
        f = self._solve(-self._upper[:, -1:], np.zeros((self.operator.joint, 1)), 1.0)[:, 0]
        f /= f.max()
        return f / (self.operator.grid.weight @ f)

    def forced(self, sources: np.ndarray, fluxes: np.ndarray) -> np.ndarray:
        """The f that are zero in the highest cell and solve all balances but the open one, (n, k).

        sources : (n, k), in each cell; fluxes : (n - 1, k), given parts of J between centres.
        """
        joint = self.operator.joint
        above = np.cumsum(sources[:joint:-1], axis=0)[::-1] + fluxes[joint:]
        return self._solve(above, sources[:joint] - np.diff(fluxes[:joint], axis=0, prepend=0.0), 0.0)

    def _solve(self, above: np.ndarray, cells: np.ndarray, highest: float) -> np.ndarray:
        last = np.full((1, above.shape[1]), highest)
        high = np.concatenate([solve_triangular(self._upper[:, :-1], above, check_finite=False), last])
        if not np.isfinite(high).all():
            return np.full((len(cells) + len(high), high.shape[1]), np.nan)
        low = lu_solve(self._lower, cells - self._lower_by_joint_on @ high, check_finite=False)
        return np.concatenate([low, high])


def _bernoulli(x: np.ndarray) -> np.ndarray:
    """x / (exp(x) - 1)."""
    safe = np.where(np.abs(x) < 1e-8, 1.0, np.clip(x, -700.0, 700.0))
    return np.where(np.abs(x) < 1e-8, 1.0 - 0.5 * x, safe / np.expm1(safe))


def _payable(curves: CollisionCurves, grid: Grid) -> np.ndarray:
    events = curves.integrals(grid.edges)
    for row, channel in enumerate(curves.channels):
        if channel.process.kind in ("excitation", "ionization"):
            first = int(np.searchsorted(grid.edges, channel.process.threshold_eV))
            if 0 < first < len(grid.centre):
                events[row, first] += events[row, first - 1]
            events[row, :first] = 0.0
    return events


def _transfers(curves: CollisionCurves, grid: Grid, events: np.ndarray) -> np.ndarray:
    """(n, n): change of the number in cell i by inelastic collisions, per f of cell j."""
    size = len(grid.centre)
    result = np.zeros((size, size))
    landings = [(np.zeros(0, dtype=np.int64), np.zeros(0))]
    for channel, event in zip(curves.channels, events, strict=True):
        origin = np.flatnonzero(event)
        if channel.process.kind == "elastic" or channel.weight == 0.0 or len(origin) == 0:
            continue
        amount = channel.weight * event[origin]
        result[origin, origin] -= amount
        left = grid.centre[origin] - channel.process.threshold_eV
        for share, number in _products(channel):
            landings.append(_landing(grid, share * left, number * amount, origin))
        if channel.process.kind == "ionization" and channel.process.sharing.kind == "uniform":
            result[:, origin] += _uniform_pair(grid, left, amount)
    place, amount = (np.concatenate(parts) for parts in zip(*landings, strict=True))
    return result + np.bincount(place, weights=amount, minlength=size * size).reshape(size, size)


def _products(channel) -> list[tuple[float, float]]:
    """(share of the energy left, number) of electrons that come out of a collision with a sharp energy."""
    process = channel.process
    if process.kind == "excitation":
        return [(1.0, 1.0)]
    if process.kind == "attachment" or process.sharing.kind == "uniform":
        return []
    if process.sharing.kind == "equal":
        return [(0.5, 2.0)]
    return [(process.sharing.fraction, 1.0), (1.0 - process.sharing.fraction, 1.0)]


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
