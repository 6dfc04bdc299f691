"""Cross sections of a mixture on one common mesh, with exact integrals over any energy cell.

Every cross section is taken as linear in energy between the points of a mesh that holds all points of the tables and
is fine enough (0.7 % steps) for formulas. Narrow peaks are then integrated in full, however wide a cell is.
"""

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from swarmgauge.gas import Gas, Mixture, Process
from swarmgauge.gas.levels import superelastic_cross_section

TOP_EV = 1e4
_LOWEST_EV = 1e-8
_MESH_POINTS = 4000
_SIDE = 1e-9  # relative distance of the two mesh points that hold a jump


@dataclass(frozen=True, eq=False)
class Channel:
    """One process of a mixture, or the reverse of one.

    name : "<set>/<process>"; share : fraction of its set in the mixture; bodies : density of the third body, 1/m3, or
    1 for a two-body process; population : share of the molecules of its set that it can happen to; share x bodies x
    population x cross section is the process's part of the mixture. superelastic : whether it is the reverse.
    """

    name: str
    gas: Gas
    process: Process
    share: float
    bodies: float
    population: float = 1.0
    superelastic: bool = False

    @property
    def loss_eV(self) -> float:
        """Energy that the electron loses, negative where it gains; of attachment, only the onset."""
        return -self.process.threshold_eV if self.superelastic else self.process.threshold_eV

    @property
    def rate_name(self) -> str:
        """Name of its rate."""
        if self.superelastic:
            return f"superelastic_rate:{self.name}"
        return f"rate{'' if self.process.third_body is None else '3'}:{self.name}"

    def section(self, energy_eV: np.ndarray) -> np.ndarray:
        """Cross section at energies > 0, m2 (m5 for three bodies)."""
        if self.superelastic:
            return superelastic_cross_section(self.process, energy_eV, self.process.threshold_eV)
        return self.process.cross_section(energy_eV)

    @property
    def weight(self) -> float:
        """Factor on the cross section for the mixture; 0 when passive."""
        return 0.0 if self.process.passive else self.share * self.bodies * self.population

    @property
    def part_of_momentum(self) -> float:
        """Part of the momentum transfer that the electron loses to the atom; an attached one loses all of it."""
        return 1.0 if self.process.kind == "attachment" else 1.0 / (1.0 + self.gas.mass_ratio)

    @property
    def recoil(self) -> float:
        """Part of its energy that an electron loses in an elastic collision with an atom at rest, 2 m M / (m + M)^2.

        To be taken times 1 - <cos chi>.
        """
        return 2.0 * self.gas.mass_ratio / (1.0 + self.gas.mass_ratio) ** 2

    def kept_momentum(self, energy_eV: np.ndarray) -> np.ndarray:
        """Mean part of the momentum that an electron keeps in the direction of flight, <cos chi> v'/v, at energies > 0.

        After an ionization only by the angular law, as if no energy were shared; ejecta count as isotropic. A
        superelastic collision is taken to leave the speed as it is, so that its momentum transfer stays positive.
        """
        law, threshold = self.process.scattering, self.process.threshold_eV
        if self.process.kind == "attachment":
            return np.zeros_like(energy_eV)
        if self.process.kind == "elastic":
            return law.mean_cosine(energy_eV)
        if self.superelastic:
            return law.mean_cosine(energy_eV + threshold)
        return law.mean_cosine(energy_eV) * np.sqrt(np.maximum(1.0 - threshold / energy_eV, 0.0))


@dataclass(frozen=True, eq=False)
class CollisionCurves:
    """All cross sections of a mixture, piecewise linear on a mesh.

    mesh : (points,), eV, from 0 to 10 keV. sections : (channels, points), m2 (m5 for three bodies).
    transfers : likewise, cross section x part of the momentum that is lost.
    momentum : (points,), m2, sum over the acting processes of share x transfer, reduced by M / (m + M)
    except for attachment (an electron that is gone has lost all of its momentum).
    recoil : (points,), m2, sum over elastic processes of share x loss of energy x momentum transfer cross section.
    """

    channels: tuple[Channel, ...]
    mesh: np.ndarray
    sections: np.ndarray
    transfers: np.ndarray
    momentum: np.ndarray
    recoil: np.ndarray

    def integrals(self, edges: np.ndarray) -> np.ndarray:
        """Integral of energy x cross section over each cell, (channels, cells), eV^2 m^2 (eV^2 m^5)."""
        return np.diff(self._rates(edges), axis=1)

    def integrals_of(self, row: int, points: np.ndarray) -> np.ndarray:
        """Integrals of energy x one cross section between successive points, (len(points) - 1,), eV^2 m^2."""
        return np.diff(_Antiderivative(self.mesh, self.sections[row : row + 1], 1)(points)[0])

    def mean_momentum_and_recoil(self, points: np.ndarray) -> np.ndarray:
        """Means of momentum and recoil cross section between successive points, (2, len(points) - 1), m2."""
        return np.diff(self._momentum_and_recoil(points), axis=1) / np.diff(points)

    def mean_transfer(self, row: int, points: np.ndarray) -> np.ndarray:
        """Means of one momentum transfer between successive points, (len(points) - 1,)."""
        return np.diff(_Antiderivative(self.mesh, self.transfers[row : row + 1], 0)(points)[0]) / np.diff(points)

    def maxwellian_rates(self, mean_energy_eV: float) -> np.ndarray:
        """<sqrt(energy) x cross section> over the Maxwellian of a mean energy, (channels,), by two points a step."""
        theta = mean_energy_eV / 1.5
        steps = np.diff(self.mesh)
        total = np.zeros(len(self.sections))
        for part in (0.5 - math.sqrt(1.0 / 12.0), 0.5 + math.sqrt(1.0 / 12.0)):
            energy = self.mesh[:-1] + part * steps
            section = self.sections[:, :-1] + part * np.diff(self.sections, axis=1)
            total += section @ (0.5 * steps * energy * np.exp(-energy / theta))
        return total * (2.0 / math.sqrt(math.pi * theta**3))

    @cached_property
    def _rates(self) -> "_Antiderivative":
        return _Antiderivative(self.mesh, self.sections, 1)

    @cached_property
    def _momentum_and_recoil(self) -> "_Antiderivative":
        return _Antiderivative(self.mesh, np.stack([self.momentum, self.recoil]), 0)


def scaled(curves: CollisionCurves, name: str, factor: float) -> CollisionCurves:
    """The curves with the cross section of one process, <set>/<process>, times a factor; its reverse follows."""
    rows = [row for row, channel in enumerate(curves.channels) if channel.name == name]
    sections, transfers = curves.sections.copy(), curves.transfers.copy()
    momentum, recoil = curves.momentum.copy(), curves.recoil.copy()
    for row in rows:
        channel = curves.channels[row]
        change = channel.weight * (factor - 1.0) * transfers[row]
        momentum += change * channel.part_of_momentum
        if channel.process.kind == "elastic":
            recoil += change * channel.recoil
        sections[row] *= factor
        transfers[row] *= factor
    return CollisionCurves(curves.channels, curves.mesh, sections, transfers, momentum, recoil)


def collision_curves(mixture: Mixture) -> CollisionCurves:
    """Curves of all processes of a mixture that are not left out and of their reverses, in the order of its sets."""
    channels = _channels(mixture)
    mesh = _mesh(channels)
    sections = np.empty((len(channels), len(mesh)))
    transfers = np.empty_like(sections)
    momentum = np.zeros(len(mesh))
    recoil = np.zeros(len(mesh))
    for row, channel in enumerate(channels):
        sections[row, 1:] = channel.section(mesh[1:])
        sections[row, 0] = sections[row, 1]
        transfers[row, 1:] = sections[row, 1:] * (1.0 - channel.kept_momentum(mesh[1:]))
        transfers[row, 0] = transfers[row, 1]
        momentum += channel.weight * channel.part_of_momentum * transfers[row]
        if channel.process.kind == "elastic":
            recoil += channel.weight * channel.recoil * transfers[row]
    return CollisionCurves(tuple(channels), mesh, sections, transfers, momentum, recoil)


def _channels(mixture: Mixture) -> list[Channel]:
    channels = []
    for gas, share in zip(mixture.gases, mixture.fractions, strict=True):
        for process in mixture.acting(gas):
            name = f"{gas.name}/{process.id}"
            bodies = float(mixture.body_density_m3(gas, process))
            channels.append(Channel(name, gas, process, float(share), bodies, mixture.share_hit(gas, process)))
            excited = mixture.share_excited(gas, process)
            if excited > 0.0:
                channels.append(Channel(name, gas, process, float(share), bodies, excited, superelastic=True))
    return channels


def _mesh(channels: list[Channel]) -> np.ndarray:
    points = [np.geomspace(_LOWEST_EV, TOP_EV, _MESH_POINTS)]
    for channel in channels:
        inner = np.asarray(channel.process.breakpoints_eV, dtype=float)
        jumps = np.array([channel.process.threshold_eV, *inner[:1], *inner[-1:]])
        gain = channel.process.threshold_eV if channel.superelastic else 0.0
        turns = channel.process.scattering.breakpoints_eV
        points.append(turns - gain)
        points += [place - gain for place in (inner, jumps, jumps * (1.0 - _SIDE), jumps * (1.0 + _SIDE))]
    mesh = np.unique(np.concatenate(points))
    return np.concatenate([[0.0], mesh[(mesh >= _LOWEST_EV) & (mesh <= TOP_EV)]])


class _Antiderivative:
    """Integral from 0 of energy^power (0 or 1) times piecewise linear values (rows, points of the mesh)."""

    def __init__(self, mesh: np.ndarray, values: np.ndarray, power: int):
        steps = np.diff(mesh)
        self.mesh, self.values, self.power = mesh, values, power
        self.slopes = np.diff(values, axis=1) / steps
        self.knots = np.zeros_like(values)
        np.cumsum(_piece(mesh[:-1], values[:, :-1], self.slopes, steps, power), axis=1, out=self.knots[:, 1:])

    def __call__(self, at: np.ndarray) -> np.ndarray:
        """The integral up to energies `at`, (rows, len(at))."""
        below = np.clip(np.searchsorted(self.mesh, at, side="right") - 1, 0, len(self.mesh) - 2)
        start = self.mesh[below]
        last = _piece(start, self.values[:, below], self.slopes[:, below], at - start, self.power)
        return self.knots[:, below] + last


def _piece(start: np.ndarray, value: np.ndarray, slope: np.ndarray, step: np.ndarray, power: int) -> np.ndarray:
    """Integral over one piece from its start, by powers of the step so that nothing cancels."""
    if power == 0:
        return step * (value + slope * step / 2.0)
    return step * (value * start + step * ((value + slope * start) / 2.0 + step * slope / 3.0))
