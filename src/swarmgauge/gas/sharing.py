"""How the two electrons after an ionization share what is left of the energy."""

from dataclasses import dataclass
from typing import Any, Literal

import numpy as np

from .constants import GAUSS_LEGENDRE
from .errors import ProcessError
from .power import strict_power

OPAL_EXPONENT = 2.1
KINDS = ("uniform", "equal", "fixed", "width", "table")


@dataclass(frozen=True, eq=False)
class Sharing:
    """A law of energy sharing; the ejected electron is the slower one where a law has a density.

    kind : "uniform" (the ejected electron takes any part with equal probability), "equal" (half each), "fixed" (the
    ejected electron takes the `fraction`, 0 to 1, of it), "width" or "table" (its energy has a density, up to half of
    what is left).
    width_eV : of the density 1 / (1 + (energy / width)^2.1) (C. B. Opal, W. K. Peterson and E. C. Beaty, J. Chem. Phys.
    55, 4100 (1971)). ejected_eV, density : (n,); a table in its place, linear between points, zero outside; any unit.
    Raises ProcessError.
    """

    kind: Literal["uniform", "equal", "fixed", "width", "table"] = "uniform"
    fraction: float = 0.5
    width_eV: float = 0.0
    ejected_eV: np.ndarray = ()  # type: ignore[assignment]
    density: np.ndarray = ()  # type: ignore[assignment]

    def __post_init__(self) -> None:
        for name in ("fraction", "width_eV"):
            object.__setattr__(self, name, float(getattr(self, name)))
        for name in ("ejected_eV", "density"):
            values = np.array(getattr(self, name), dtype=np.float64)
            values.flags.writeable = False
            object.__setattr__(self, name, values)
        _check(self)

    @property
    def has_density(self) -> bool:
        """Whether the energy of the ejected electron has a density that does not depend on what is left."""
        return self.kind in ("width", "table")

    def cumulated(self, edges_eV: np.ndarray) -> np.ndarray:
        """Integral of the density from 0 to each of the edges, which rise from 0; up to a factor; shape (n,)."""
        result = np.zeros(len(edges_eV))
        if self.has_density:
            low, width = edges_eV[:-1], np.diff(edges_eV)
            pieces = np.zeros(len(low))
            for x, weight in GAUSS_LEGENDRE:
                pieces += 0.5 * weight * width * self._density_at(low + 0.5 * (1.0 + x) * width)
            result[1:] = np.cumsum(pieces)
        return result

    def _density_at(self, energy_eV: np.ndarray) -> np.ndarray:
        if self.kind == "width":
            return 1.0 / (1.0 + strict_power(energy_eV / self.width_eV, OPAL_EXPONENT))
        return np.interp(energy_eV, self.ejected_eV, self.density, left=0.0, right=0.0)

    def canonical(self) -> list[Any]:
        """The law as JSON can hold it."""
        return {
            "width": [self.kind, self.width_eV],
            "table": [self.kind, self.ejected_eV.tolist(), self.density.tolist()],
        }.get(self.kind, [self.kind, self.fraction])

    def __str__(self) -> str:
        return {
            "fixed": f"with {self.fraction:g} for the ejected electron",
            "width": f"by the published form of width {self.width_eV:g} eV",
            "table": f"by a table of {self.ejected_eV.size} energies",
        }.get(self.kind, f"by the {self.kind} law")

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Sharing) and self.canonical() == other.canonical()

    def __hash__(self) -> int:
        return hash(str(self.canonical()))


def _check(sharing: Sharing) -> None:
    if sharing.kind not in KINDS:
        raise ProcessError(
            f'sharing "{sharing.kind}" is unknown. Use "uniform", "equal", {{ fraction = 0.3 }}, {{ width_eV = 13 }} '
            "or a table of ejected_eV and density."
        )
    if not 0.0 <= sharing.fraction <= 1.0:
        raise ProcessError(
            f"sharing: fraction = {sharing.fraction:g} is outside 0 to 1. "
            "Give the part of the energy left that the ejected electron takes."
        )
    if sharing.kind == "width" and not 1e-3 <= sharing.width_eV <= 1e6:
        raise ProcessError(f"sharing: width_eV = {sharing.width_eV:g} is not possible. Give 0.001 to 1e6 eV.")
    if sharing.kind == "table":
        _check_table(sharing.ejected_eV, sharing.density)


def _check_table(energy: np.ndarray, density: np.ndarray) -> None:
    if energy.ndim != 1 or energy.shape != density.shape or len(energy) < 2:
        raise ProcessError(
            f"sharing: ejected_eV has {energy.size} and density {density.size} entries. Give as many, 2 or more."
        )
    if not np.isfinite(energy).all() or energy[0] != 0.0 or not (np.diff(energy) > 0.0).all():
        raise ProcessError("sharing: ejected_eV does not rise from 0. Give the energies of the ejected electron, eV.")
    if not (np.isfinite(density) & (density >= 0.0)).all() or not density[0] > 0.0:
        raise ProcessError(
            "sharing: density must be finite, 0 or more, and above 0 at ejected_eV = 0, so that little energy can be "
            "shared too. Correct it."
        )
