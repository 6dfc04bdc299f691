"""Angular laws: how a collision turns the direction of relative motion.

chi is the angle between the relative velocities before and after, in the frame of the centre of mass. A law depends on
the energy of relative motion before the collision; between tabulated energies it is interpolated, beyond the first and
last it stays as it is there. For the kernel each law is cut into parts of equal probability (`parts`).
"""

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np

from .errors import ProcessError
from .power import strict_cosine, strict_log

_SERIES_BELOW = 0.25  # |xi|: the closed form of the mean cosine loses digits to cancellation there
_SERIES_TERMS = 14
_BISECTIONS = 60
_FINE_DEG = 0.25  # cells of a tabulated law, at most


@dataclass(frozen=True)
class Isotropic:
    """All directions alike."""

    convert: bool = False

    def mean_cosine(self, energy_eV: np.ndarray) -> np.ndarray:
        """<cos chi> = 0 at energies (any shape)."""
        return np.zeros(np.shape(energy_eV))

    def parts(self, energy_eV: np.ndarray, count: int) -> np.ndarray:
        """Parts of equal probability as ranges of cos chi, from backward to forward; (n, count, 2)."""
        edges = np.linspace(-1.0, 1.0, count + 1)
        return np.broadcast_to(np.stack([edges[:-1], edges[1:]], axis=-1), (len(energy_eV), count, 2))

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """Energies where the mean cosine may bend, eV: none."""
        return np.empty(0)

    def canonical(self) -> Any:
        """The law as JSON can hold it."""
        return "isotropic"

    def __str__(self) -> str:
        return "isotropic"


@dataclass(frozen=True)
class Forward:
    """The direction is kept, only energy is lost: distant, dipole-like collisions."""

    convert: bool = False

    def mean_cosine(self, energy_eV: np.ndarray) -> np.ndarray:
        """<cos chi> = 1 at energies (any shape)."""
        return np.ones(np.shape(energy_eV))

    def parts(self, energy_eV: np.ndarray, count: int) -> np.ndarray:
        """See Isotropic.parts."""
        return np.ones((len(energy_eV), count, 2))

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """None."""
        return np.empty(0)

    def canonical(self) -> Any:
        """The law as JSON can hold it."""
        return "forward"

    def __str__(self) -> str:
        return "the forward law"


@dataclass(frozen=True, eq=False)
class Screened:
    """Screened Coulomb form: differential cross section proportional to 1 / (1 - xi cos chi)^2, -1 < xi < 1.

    cos chi = 1 - 2 r (1 - xi) / (1 + xi (1 - 2 r)) with r uniform (A. Okhrimovskyy, A. Bogaerts and R. Gijbels, Phys.
    Rev. E 65, 037402 (2002)). xi = 0 is isotropic, near 1 forward, below 0 backward.

    energy_eV, parameter : (n,); xi, linear in energy between points. convert : a momentum transfer cross section is
    turned into the integral one. Raises ProcessError.
    """

    energy_eV: np.ndarray
    parameter: np.ndarray
    convert: bool = False

    def __post_init__(self) -> None:
        _freeze(self, "energy_eV", "parameter")
        _check_columns("screened", self.energy_eV, self.parameter, "parameter")
        _check_rows("screened: parameter", self.parameter, np.abs(self.parameter) < 1.0, "is not between -1 and 1")

    def xi(self, energy_eV: np.ndarray) -> np.ndarray:
        """The parameter at energies (any shape)."""
        return np.interp(energy_eV, self.energy_eV, self.parameter)

    def mean_cosine(self, energy_eV: np.ndarray) -> np.ndarray:
        """<cos chi> at energies (any shape)."""
        return screened_mean_cosine(self.xi(energy_eV))

    def parts(self, energy_eV: np.ndarray, count: int) -> np.ndarray:
        """See Isotropic.parts."""
        return screened_parts(self.xi(energy_eV), count)

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """Energies where the mean cosine may bend, eV."""
        return self.energy_eV

    def canonical(self) -> Any:
        """The law as JSON can hold it."""
        return {"screened": [self.energy_eV.tolist(), self.parameter.tolist()], "convert": self.convert}

    def __str__(self) -> str:
        low, high = float(self.parameter.min()), float(self.parameter.max())
        return f"the screened Coulomb form, xi = {low:g}" + (f" to {high:g}" if high > low else "")


@dataclass(frozen=True, eq=False)
class ScreenedToRatio:
    """Screened Coulomb form with xi found so that momentum transfer over integral cross section is a given ratio.

    energy_eV, ratio : (n,); the ratio, 1 - <cos chi>, is linear in energy between points; above 1 scattering is
    backward. xi solves the closed form of `screened_mean_cosine`. convert : as in Screened. Raises ProcessError.
    """

    energy_eV: np.ndarray
    ratio: np.ndarray
    convert: bool = False

    def __post_init__(self) -> None:
        _freeze(self, "energy_eV", "ratio")
        _check_columns("momentum_transfer_ratio", self.energy_eV, self.ratio, "ratio")
        good = (self.ratio >= 0.01) & (self.ratio <= 1.99)  # <cos chi> of what can be: xi rounds to 1 further on
        _check_rows("momentum_transfer_ratio: ratio", self.ratio, good, "is not between 0.01 and 1.99")

    def mean_cosine(self, energy_eV: np.ndarray) -> np.ndarray:
        """<cos chi> at energies (any shape)."""
        return 1.0 - np.interp(energy_eV, self.energy_eV, self.ratio)

    def parts(self, energy_eV: np.ndarray, count: int) -> np.ndarray:
        """See Isotropic.parts."""
        return screened_parts(screened_parameter(self.mean_cosine(energy_eV)), count)

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """Energies where the mean cosine may bend, eV."""
        return self.energy_eV

    def canonical(self) -> Any:
        """The law as JSON can hold it."""
        return {"momentum_transfer_ratio": [self.energy_eV.tolist(), self.ratio.tolist()], "convert": self.convert}

    def __str__(self) -> str:
        return f"the screened Coulomb form, momentum transfer ratio {self.ratio.min():g} to {self.ratio.max():g}"


@dataclass(frozen=True, eq=False)
class AngleTable:
    """Tabulated differential cross sections; only their shape counts, each energy is normalised by itself.

    angles_deg : (angles,), from 0 to 180, rising; energy_eV : (n,), rising; shape : (n, angles), per solid angle, in
    any unit, linear in angle between points. Normalised shapes are linear in energy between points, and so is the mean
    cosine. convert : as in Screened. Raises ProcessError.
    """

    angles_deg: np.ndarray
    energy_eV: np.ndarray
    shape: np.ndarray
    convert: bool = False

    def __post_init__(self) -> None:
        if len({len(row) for row in self.shape}) > 1:
            raise ProcessError("scattering: rows of shape differ in length. Give one number per angle in every row.")
        _freeze(self, "angles_deg", "energy_eV", "shape")
        _check_angle_table(self)
        cells, cosines = _fine_cells(self.angles_deg, self.shape)
        totals = np.cumsum(cells, axis=1)[:, -1:]
        faults = np.flatnonzero(~(totals[:, 0] > 0.0))
        if len(faults):
            raise ProcessError(f"scattering: shape is zero in row {faults[0] + 1}. Give a positive number somewhere.")
        middle = 0.5 * (cosines[1:] + cosines[:-1])
        object.__setattr__(self, "_cells", cells / totals)
        object.__setattr__(self, "_cosines", cosines)
        object.__setattr__(self, "_means", np.cumsum(self._cells * middle, axis=1)[:, -1])  # type: ignore[attr-defined]

    def mean_cosine(self, energy_eV: np.ndarray) -> np.ndarray:
        """<cos chi> at energies (any shape)."""
        return np.interp(energy_eV, self.energy_eV, self._means)  # type: ignore[attr-defined]

    def parts(self, energy_eV: np.ndarray, count: int) -> np.ndarray:
        """See Isotropic.parts."""
        place = np.interp(energy_eV, self.energy_eV, np.arange(len(self.energy_eV), dtype=float))
        lower = np.minimum(place.astype(int), max(len(self.energy_eV) - 2, 0))
        upper = np.minimum(lower + 1, len(self.energy_eV) - 1)
        share = (place - lower)[:, None]
        cells = self._cells[lower] * (1.0 - share) + self._cells[upper] * share  # type: ignore[attr-defined]
        return np.stack([_equal_parts(self._cosines, row, count) for row in cells])  # type: ignore[attr-defined]

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """Energies where the mean cosine may bend, eV."""
        return self.energy_eV

    def canonical(self) -> Any:
        """The law as JSON can hold it."""
        table = [self.angles_deg.tolist(), self.energy_eV.tolist(), self.shape.tolist()]
        return {"table": table, "convert": self.convert}

    def __str__(self) -> str:
        return f"a table of {len(self.energy_eV)} energies and {len(self.angles_deg)} angles"


Scattering = Isotropic | Forward | Screened | ScreenedToRatio | AngleTable


def screened_mean_cosine(xi: np.ndarray) -> np.ndarray:
    """<cos chi> = 1/xi - (1 - xi^2)/(2 xi^2) ln((1 + xi)/(1 - xi)) of the screened Coulomb form.

    It is the sum over odd n of 2 xi^n / (n (n + 2)) where xi is small. xi : any shape, -1 to 1 exclusive.
    """
    xi = np.asarray(xi, dtype=np.float64)
    square = xi * xi
    series = np.zeros_like(xi)
    for term in reversed(range(_SERIES_TERMS)):
        series = series * square + 2.0 / ((2 * term + 1) * (2 * term + 3))
    large = np.abs(xi) >= _SERIES_BELOW
    safe = np.where(large, xi, 0.5)
    closed = 1.0 / safe - (1.0 - safe * safe) / (2.0 * safe * safe) * strict_log((1.0 + safe) / (1.0 - safe))
    return np.where(large, closed, xi * series)


def screened_parameter(mean_cosine: np.ndarray) -> np.ndarray:
    """xi of a mean cosine, -0.99 to 0.99, by bisection; any shape."""
    wanted = np.asarray(mean_cosine, dtype=np.float64)
    low, high = np.full_like(wanted, -1.0 + 1e-12), np.full_like(wanted, 1.0 - 1e-12)
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        above = screened_mean_cosine(middle) > wanted
        low, high = np.where(above, low, middle), np.where(above, middle, high)
    return 0.5 * (low + high)


def screened_parts(xi: np.ndarray, count: int) -> np.ndarray:
    """Parts of equal probability of the screened Coulomb form, xi : (n,); see Isotropic.parts.

    With t = 1 + xi - 2 xi r, cos chi = (1 - (1 - xi^2)/t)/xi, and r uniform makes t uniform: mean and variance over a
    part are means of 1/t and 1/t^2.
    """
    r = np.linspace(1.0, 0.0, count + 1)
    xi = np.asarray(xi, dtype=np.float64)[:, None]
    edges = 1.0 - 2.0 * r * (1.0 - xi) / (1.0 + xi * (1.0 - 2.0 * r))
    t = 1.0 + xi - 2.0 * xi * r
    a, b = t[:, :-1], t[:, 1:]
    s = (b - a) / (a + b)
    wide = np.abs(s) > 0.02
    safe = np.where(wide, s, 0.5)
    square = s * s
    inverse = np.where(wide, 0.5 * strict_log((1.0 + safe) / (1.0 - safe)) / safe, _atanh_series(square))
    spread = np.where(wide, 1.0 / (1.0 - square) - inverse * inverse, square * (1.0 / 3.0 + square * (22.0 / 45.0)))
    curved = np.abs(xi) > 1e-4  # else 1 - 1/t cancels, and parts are even
    divisor = np.where(curved, xi, 1.0)
    mean = np.where(
        curved,
        (1.0 - (1.0 - xi * xi) * 2.0 / (a + b) * inverse) / divisor,
        0.5 * (edges[:, 1:] + edges[:, :-1]),
    )
    half = np.where(
        curved,
        np.sqrt(3.0 * spread) * (1.0 - xi * xi) * 2.0 / (a + b) / np.abs(divisor),
        0.5 * (edges[:, 1:] - edges[:, :-1]),
    )
    return _even_parts(mean, half)


def _atanh_series(square: np.ndarray) -> np.ndarray:
    return 1.0 + square * (1.0 / 3.0 + square * (1.0 / 5.0 + square * (1.0 / 7.0 + square / 9.0)))


def _even_parts(mean: np.ndarray, half: np.ndarray) -> np.ndarray:
    """Ranges about `mean` in which cos chi is even, cut so that they stay within -1 to 1; the mean is kept."""
    half = np.minimum(half, np.maximum(1.0 - np.abs(mean), 0.0))
    return np.stack([mean - half, mean + half], axis=-1)


def _fine_cells(angles_deg: np.ndarray, shape: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Weights of fine cells, (n, cells), and the cosines of their edges, (cells + 1,), from 180 to 0 degrees."""
    pieces = [
        np.linspace(low, high, math.ceil((high - low) / _FINE_DEG - 1e-9), endpoint=False)
        for low, high in pairwise(angles_deg.tolist())
    ]
    edges = np.append(np.concatenate(pieces), 180.0)[::-1]
    cosines = strict_cosine(edges)
    middle = 0.5 * (edges[1:] + edges[:-1])
    values = np.stack([np.interp(middle, angles_deg, row) for row in shape])
    return values * np.diff(cosines), cosines


def _equal_parts(cosines: np.ndarray, weights: np.ndarray, count: int) -> np.ndarray:
    """(count, 2): parts of equal probability of a density that is even in each cell between `cosines`, weights sum 1.

    Each part is even between two cosines with the same mean and variance.
    """
    below = np.concatenate([[0.0], np.cumsum(weights)])
    below = below / below[-1]
    inner = np.linspace(0.0, 1.0, count + 1)[1:-1]
    shares = np.concatenate([below, inner])
    order = np.argsort(shares, kind="stable")
    shares = shares[order]
    places = np.concatenate([cosines, np.interp(inner, below, cosines)])[order]
    low, high, weight = places[:-1], places[1:], np.diff(shares)
    part = np.minimum((0.5 * (shares[1:] + shares[:-1]) * count).astype(int), count - 1)
    mean = np.bincount(part, weights=weight * 0.5 * (low + high), minlength=count) * count
    off_low, off_high = low - mean[part], high - mean[part]
    square = weight * (off_low * off_low + off_low * off_high + off_high * off_high) / 3.0
    variance = np.bincount(part, weights=square, minlength=count) * count
    return _even_parts(mean, np.sqrt(3.0 * variance))


def _freeze(law: object, *names: str) -> None:
    for name in names:
        values = np.array(getattr(law, name), dtype=np.float64)
        values.flags.writeable = False
        object.__setattr__(law, name, values)


def _check_columns(what: str, energy: np.ndarray, values: np.ndarray, name: str) -> None:
    if energy.ndim != 1 or values.shape != energy.shape or not len(energy):
        raise ProcessError(
            f"scattering: {what}: energy_eV has {energy.size} and {name} {values.size} entries. Give as many of each."
        )
    _check_energies(f"{what}: ", energy)


def _check_energies(what: str, energy: np.ndarray) -> None:
    bad = ~(np.isfinite(energy) & (energy >= 0.0)) | (np.diff(energy, prepend=-1.0) <= 0.0)
    if bad.any():
        row = int(np.flatnonzero(bad)[0])
        raise ProcessError(
            f"scattering: {what}energy_eV, row {row + 1}: {energy[row]:g} is not a rising energy of 0 or more. "
            "Sort the rows by energy, eV."
        )


def _check_rows(what: str, values: np.ndarray, good: np.ndarray, fault: str) -> None:
    if not good.all():
        row = int(np.flatnonzero(~good)[0])
        raise ProcessError(f"scattering: {what}, row {row + 1}: {values[row]:g} {fault}. Correct it.")


def _check_angle_table(law: AngleTable) -> None:
    angles = law.angles_deg
    if len(angles) < 2 or angles[0] != 0.0 or angles[-1] != 180.0 or not (np.diff(angles) > 0.0).all():
        raise ProcessError("scattering: angles_deg does not rise from 0 to 180. Give the angles in degrees, with both.")
    _check_energies("", law.energy_eV)
    if law.shape.shape != (len(law.energy_eV), len(angles)):
        found = " x ".join(str(size) for size in law.shape.shape)
        raise ProcessError(
            f"scattering: shape has {found} numbers for {len(law.energy_eV)} energies and {len(angles)} angles. "
            "Give a row for each energy, with a number for each angle."
        )
    bad = np.argwhere(~(np.isfinite(law.shape) & (law.shape >= 0.0)))
    if len(bad):
        row, column = bad[0]
        raise ProcessError(
            f"scattering: shape, row {row + 1}, angle {angles[column]:g}: {law.shape[row, column]:g} is not possible. "
            "Give finite numbers of 0 or more."
        )
