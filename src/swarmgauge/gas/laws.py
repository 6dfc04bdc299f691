"""How a cross section depends on energy: a table, a power law or a ramp."""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from .errors import ProcessError
from .power import strict_power

LARGEST_NUMBER = 1e30  # of an energy in eV or a cross section in m2: keeps later sums finite
_ROWS_NAMED = 5


@dataclass(frozen=True, eq=False)
class Table:
    """Linear in energy between points, zero below the first, `beyond` after the last.

    energy_eV, cross_section_m2 : ndarray, shape (n_points,); energies >= 0 and strictly rising; m5 for three bodies.
    beyond : "zero", "hold" or the exponent p of last value x (energy / last energy)^p.
    Raises ProcessError where the numbers are not a table, with all bad rows (counted from 1).
    """

    energy_eV: np.ndarray
    cross_section_m2: np.ndarray
    beyond: str | float

    def __post_init__(self) -> None:
        for name in ("energy_eV", "cross_section_m2"):
            values = np.array(getattr(self, name), dtype=np.float64)
            values.flags.writeable = False
            object.__setattr__(self, name, values)
        if isinstance(self.beyond, str):
            if self.beyond not in ("zero", "hold"):
                raise ProcessError(f'beyond = "{self.beyond}" is unknown. Use "zero", "hold" or {{ power = -0.9 }}.')
        else:
            object.__setattr__(self, "beyond", float(self.beyond))
            _check_exponent(float(self.beyond), "beyond: power")
        _check_table(self.energy_eV, self.cross_section_m2)

    def value(self, energy_eV: np.ndarray) -> np.ndarray:
        """Cross section, m2, at energies (any shape, eV); exact at the points."""
        energy = np.asarray(energy_eV, dtype=np.float64)
        values = np.interp(energy, self.energy_eV, self.cross_section_m2, left=0.0)
        after = energy > self.end_eV
        if self.beyond == "hold" or not after.any():
            return values
        if self.beyond == "zero":
            return np.where(after, 0.0, values)
        ratio = np.where(after, energy, self.end_eV) / self.end_eV
        return np.where(after, self.cross_section_m2[-1] * strict_power(ratio, float(self.beyond)), values)

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """Energies where the slope may change, eV."""
        return self.energy_eV

    @property
    def start_eV(self) -> float:
        """Energy from which the law holds, eV."""
        return float(self.energy_eV[0])

    @property
    def end_eV(self) -> float:
        """Last tabulated energy, eV."""
        return float(self.energy_eV[-1])

    @property
    def curved_from_eV(self) -> float:
        """Energy above which the law is not linear between its breakpoints, eV; infinite where it is everywhere."""
        return math.inf if isinstance(self.beyond, str) else self.end_eV


@dataclass(frozen=True)
class PowerLaw:
    """at_1_eV_m2 x (energy / 1 eV)^exponent, at all energies."""

    at_1_eV_m2: float
    exponent: float

    def __post_init__(self) -> None:
        _store_floats(self, "at_1_eV_m2", "exponent")
        _check_amount(self.at_1_eV_m2, "power_law: at_1_eV_m2")
        _check_exponent(self.exponent, "power_law: exponent")

    def value(self, energy_eV: np.ndarray) -> np.ndarray:
        """Cross section, m2, at energies (any shape, eV)."""
        if self.at_1_eV_m2 == 0.0:
            return np.zeros_like(np.asarray(energy_eV, dtype=np.float64))
        return self.at_1_eV_m2 * strict_power(energy_eV, self.exponent)

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """None: an empty array."""
        return np.empty(0)

    @property
    def start_eV(self) -> float:
        """Energy from which the law holds, eV."""
        return 0.0

    @property
    def end_eV(self) -> float:
        """A formula does not end: infinite."""
        return math.inf

    @property
    def curved_from_eV(self) -> float:
        """Energy above which the law is not linear, eV."""
        return math.inf if self.exponent in (0.0, 1.0) else 0.0


@dataclass(frozen=True)
class Ramp:
    """slope_m2_per_eV x (energy - from_eV) above from_eV, zero below."""

    from_eV: float
    slope_m2_per_eV: float

    def __post_init__(self) -> None:
        _store_floats(self, "from_eV", "slope_m2_per_eV")
        _check_amount(self.from_eV, "ramp: from_eV")
        _check_amount(self.slope_m2_per_eV, "ramp: slope_m2_per_eV")

    def value(self, energy_eV: np.ndarray) -> np.ndarray:
        """Cross section, m2, at energies (any shape, eV)."""
        return self.slope_m2_per_eV * np.maximum(np.asarray(energy_eV, dtype=np.float64) - self.from_eV, 0.0)

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """The energy where it starts to rise, shape (1,), eV."""
        return np.array([self.from_eV])

    @property
    def start_eV(self) -> float:
        """Energy from which the law holds, eV."""
        return self.from_eV

    @property
    def end_eV(self) -> float:
        """A formula does not end: infinite."""
        return math.inf

    @property
    def curved_from_eV(self) -> float:
        """Linear everywhere: infinite."""
        return math.inf


Law = Table | PowerLaw | Ramp


def _store_floats(record: object, *names: str) -> None:
    for name in names:
        object.__setattr__(record, name, float(getattr(record, name)))


def _check_exponent(value: float, what: str) -> None:
    if not -20.0 <= value <= 20.0:
        raise ProcessError(f"{what} = {value:g} is outside -20 to 20. Give the log-log slope of the cross section.")


def _check_amount(value: float, what: str) -> None:
    if not 0.0 <= value <= LARGEST_NUMBER:
        raise ProcessError(f"{what} = {value:g} is not possible. Give a finite number of 0 or more.")


def _check_table(energy: np.ndarray, section: np.ndarray) -> None:
    if energy.ndim != 1 or section.ndim != 1:
        raise ProcessError("energy_eV and cross_section_m2: give two plain lists of numbers, one number a row.")
    if len(energy) != len(section):
        raise ProcessError(
            f"energy_eV has {len(energy)} numbers and cross_section_m2 has {len(section)}. "
            "Give one cross section for each energy."
        )
    if len(energy) < 2:
        raise ProcessError(f"the table has {len(energy)} rows. Give at least two, or use power_law for a formula.")
    faults = [
        fault for values, name in ((energy, "energy"), (section, "cross section")) if (fault := _bad(values, name))
    ]
    if not faults and (fault := _not_rising(energy)):
        faults = [fault]
    if faults:
        raise ProcessError(" ".join(faults))


def _bad(values: np.ndarray, name: str) -> str:
    """What is wrong with single numbers of a column, or nothing."""
    unit = "eV" if name == "energy" else "m2"
    rows = np.flatnonzero(~((values >= 0.0) & (values <= LARGEST_NUMBER)))
    if not len(rows):
        return ""
    found = _rows(rows, lambda row: f"{name} {values[row]:g} {unit}")
    return f"{found}. Give finite numbers of 0 or more."


def _not_rising(energy: np.ndarray) -> str:
    rows = np.flatnonzero(energy[1:] <= energy[:-1]) + 1
    if not len(rows):
        return ""
    found = _rows(
        rows, lambda row: f"energy {energy[row]:g} eV does not exceed the row before it ({energy[row - 1]:g} eV)"
    )
    return f"{found}. Sort the table by energy; merge rows of equal energy."


def _rows(rows: np.ndarray, say: Callable[[int], str]) -> str:
    """The first few rows in words, the others counted."""
    named = "; ".join(f"row {row + 1}: {say(int(row))}" for row in rows[:_ROWS_NAMED])
    more = len(rows) - _ROWS_NAMED
    return f"{named}; and {more} more {'row' if more == 1 else 'rows'}" if more > 0 else named
