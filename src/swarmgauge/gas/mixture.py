"""A mixture of gases at a temperature, and which of their processes act."""

import math
from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np

from .constants import BOLTZMANN
from .errors import MixtureError, suggestion
from .gas import Gas
from .levels import LEAST_POPULATION, Populations, check_level_fractions, populations
from .library import load_named_or_path
from .process import Process

_SUM_TOLERANCE = 1e-6
_DENSEST = 1e30  # 1/m3; a hundred times that of a solid


class Mixture:
    """Gases with their fractions, the temperature and, where bodies collide in threes, the pressure.

    Parameters
    ----------
    fractions : set to fraction (>= 0, sum 1 within 1e-6; used as they are). A set is a name in gases/, a path of a set
        file, or a Gas. A set with fraction 0 is a trace: its rates are averaged and it does not act.
    temperature_K : >= 0; 0 is the cold gas.
    pressure_Pa : > 0; needed where three-body attachment takes part. N = p / kT.
    leave_out : "<set>/<process>" of processes that shall not exist here; their levels stay populated.
    vibrational_temperature_K : of the levels that sets mark as vibrational; None for the gas temperature.
    level_fractions : "<set>/<process>" to the fraction of the set's molecules in the level to which the process leads;
        the other levels share the rest as at their temperatures.

    Attributes
    ----------
    gases : tuple of Gas, sorted by name. fractions : ndarray, shape (n_gases,), in that order.
    density_m3 : number density N, 1/m3, or None without pressure.

    Raises MixtureError where these make no mixture, SetFileError where a set cannot be loaded.
    """

    def __init__(
        self,
        fractions: Mapping[str, float] | Mapping[Gas, float] | Mapping[str | Gas, float],
        temperature_K: float = 0.0,
        pressure_Pa: float | None = None,
        leave_out: Iterable[str] = (),
        vibrational_temperature_K: float | None = None,
        level_fractions: Mapping[str, float] | None = None,
    ) -> None:
        pairs = [(key if isinstance(key, Gas) else load_named_or_path(key), x) for key, x in fractions.items()]
        pairs.sort(key=lambda pair: pair[0].name)
        self.gases = tuple(gas for gas, _ in pairs)
        self.fractions = _checked_fractions({gas.name: x for gas, x in pairs}, len(pairs))
        self.temperature_K = _checked_temperature(temperature_K)
        self.pressure_Pa = _checked_pressure(pressure_Pa, self.temperature_K)
        self.leave_out = tuple(sorted(set([leave_out] if isinstance(leave_out, str) else leave_out)))
        _check_left_out(self.leave_out, self.gases)
        self._acting = {
            gas.name: tuple(p for p in gas.processes if f"{gas.name}/{p.id}" not in self.leave_out)
            for gas in self.gases
        }
        self._check_elastic()
        self._check_third_bodies()
        self.vibrational_temperature_K = self._checked_vibrational_temperature(vibrational_temperature_K)
        self.level_fractions = self._checked_level_fractions(level_fractions or {})
        self._populations = {gas.name: self._populations_of(gas) for gas in self.gases}

    @property
    def density_m3(self) -> float | None:
        """Number density of all gases together, 1/m3; None without a pressure."""
        return None if self.pressure_Pa is None else self.pressure_Pa / (BOLTZMANN * self.temperature_K)

    def acting(self, gas: Gas) -> tuple[Process, ...]:
        """The processes of one of the gases that are not left out, passive ones too, by threshold."""
        return self._acting[gas.name]

    def populations(self, gas: Gas) -> Populations:
        """Share of the molecules of one of the gases in each of its levels, by process id; None is the ground state."""
        return dict(self._populations[gas.name])

    def share_hit(self, gas: Gas, process: Process) -> float:
        """Share of the gas's molecules that a process can happen to: those in its lower level, or all."""
        return self._populations[gas.name][process.lower] if process.from_level else 1.0

    def share_excited(self, gas: Gas, process: Process) -> float:
        """Share of the gas's molecules that can undergo the reverse of a process; 0 where that is not worth a table."""
        share = self._populations[gas.name][process.id] if process.is_level else 0.0
        return share if share >= LEAST_POPULATION else 0.0

    def third_bodies(self, gas: Gas, process: Process) -> dict[str, float]:
        """Set name to efficiency of the gases in this mixture that can be the third body of a process of `gas`."""
        body = process.third_body
        if body is None:
            return {}
        if body == "any":
            efficiency = {other.formula: 1.0 for other in self.gases}
        else:
            efficiency = {gas.formula: 1.0} if body == "self" else body
        return {other.name: efficiency[other.formula] for other in self.gases if other.formula in efficiency}

    def body_density_m3(self, gas: Gas, process: Process) -> float:
        """Density of third bodies weighted by their efficiency, 1/m3; 1 for a two-body process."""
        if process.third_body is None:
            return 1.0
        bodies = self.third_bodies(gas, process)
        shares = [bodies.get(other.name, 0.0) * x for other, x in zip(self.gases, self.fractions, strict=True)]
        assert self.density_m3 is not None  # checked at construction
        return math.fsum(shares) * self.density_m3

    def describe(self) -> str:
        """The gases with their fractions, as "0.8 nitrogen-phelps1985 + 0.2 oxygen-lawton1978", and given levels."""
        levels = [f"{x:.6g} in {name}" for name, x in self.level_fractions.items()]
        if self.vibrational_temperature_K is not None:
            levels.insert(0, f"vibration {self.vibrational_temperature_K:g} K")
        gases = " + ".join(f"{x:.6g} {gas.name}" for gas, x in zip(self.gases, self.fractions, strict=True))
        return f"{gases} ({'; '.join(levels)})" if levels else gases

    def canonical(self) -> dict[str, Any]:
        """All that acts on a swarm, as plain numbers and names that JSON can hold; equal physics gives equal ones."""
        gases = [
            {
                **gas.canonical(),
                "fraction": float(x),
                "processes": [process.canonical() for process in self.acting(gas)],
            }
            for gas, x in zip(self.gases, self.fractions, strict=True)
        ]
        return {
            "temperature_K": self.temperature_K,
            "pressure_Pa": self.pressure_Pa,
            "gases": gases,
            **self._canonical_levels(),
        }

    def _canonical_levels(self) -> dict[str, Any]:
        """The populations, of the gases that are not all in the ground state."""
        excited = {
            name: {level or "": share for level, share in shares.items()}
            for name, shares in self._populations.items()
            if shares[None] != 1.0
        }
        return {"populations": excited} if excited else {}

    def __repr__(self) -> str:
        pressure = "" if self.pressure_Pa is None else f", {self.pressure_Pa:g} Pa"
        return f"Mixture({self.describe()}, {self.temperature_K:g} K{pressure})"

    def _check_elastic(self) -> None:
        for gas in self.gases:
            if not any(process.kind == "elastic" and not process.passive for process in self.acting(gas)):
                ids = ", ".join(process.id for process in self.acting(gas)) or "none"
                raise MixtureError(
                    f"set {gas.name} has no elastic process that acts (it has: {ids}): it is not for swarms, only for "
                    "its processes alone. Use a complete set, or do not leave out the elastic process."
                )

    def _populations_of(self, gas: Gas) -> Populations:
        given = {p.id: self.level_fractions.get(f"{gas.name}/{p.id}") for p in gas.processes}
        return populations(
            gas.processes,
            self.temperature_K,
            self.vibrational_temperature_K,
            {level: fraction for level, fraction in given.items() if fraction is not None},
        )

    def _checked_level_fractions(self, given: Mapping[str, Any]) -> dict[str, float]:
        fractions = {n: _number(x, f"level_fractions: fraction of {n}") for n, x in sorted(given.items())}
        check_level_fractions(fractions, {gas.name: gas.processes for gas in self.gases})
        return fractions

    def _checked_vibrational_temperature(self, value: Any) -> float | None:
        if value is None:
            return None
        if not any(process.is_level and process.vibrational for gas in self.gases for process in gas.processes):
            raise MixtureError(
                f"vibrational_temperature_K = {value!r}: no set of this mixture has a level marked as vibrational. "
                "Leave it out, or add vibrational = true (and degeneracies) to the processes of a set."
            )
        return _checked_temperature(value, "vibrational_temperature_K")

    def _check_third_bodies(self) -> None:
        if self.pressure_Pa is not None:
            return
        for gas in self.gases:
            for process in self.acting(gas):
                if process.third_body is not None:
                    name = f"{gas.name}/{process.id}"
                    raise MixtureError(
                        f"process {name} needs a third body, so its rate depends on the density, and no pressure is "
                        f'given. Give pressure_Pa (and a temperature), or leave_out = ["{name}"].'
                    )


def _number(value: Any, what: str) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float | np.integer | np.floating):
        raise MixtureError(f"{what} = {value!r} is not a number. Write a number.")
    return float(value)


def _checked_fractions(fractions: dict[str, Any], count: int) -> np.ndarray:
    if count == 0:
        raise MixtureError('fractions is empty. Give at least one set, as { "argon-yamabe1983" = 1.0 }.')
    if len(fractions) < count:
        raise MixtureError(f"fractions: two sets have the same name (of {', '.join(fractions)}). Give each set once.")
    values = []
    for name, given in fractions.items():
        value = _number(given, f"fraction of {name}")
        if not 0.0 <= value <= 1.0 + _SUM_TOLERANCE:
            raise MixtureError(f"fraction of {name} = {value:g} is outside 0 to 1. Give its part of all particles.")
        values.append(value)
    total = math.fsum(values)
    if abs(total - 1.0) > _SUM_TOLERANCE:
        raise MixtureError(
            f"fractions of {', '.join(fractions)} sum to {total:.8g}, not to 1 within 1e-6. "
            "Correct them; they are never renormalised."
        )
    array = np.array(values)
    array.flags.writeable = False
    return array


def _checked_temperature(value: Any, what: str = "temperature_K") -> float:
    temperature = _number(value, what)
    if not 0.0 <= temperature <= 1e6:
        raise MixtureError(f"{what} = {temperature:g} is not possible. Give 0 (cold gas) to 1e6.")
    return temperature


def _checked_pressure(value: Any, temperature: float) -> float | None:
    if value is None:
        return None
    pressure = _number(value, "pressure_Pa")
    if not 0.0 < pressure < math.inf:
        raise MixtureError(f"pressure_Pa = {pressure:g} is not possible. Give a finite number above 0.")
    if temperature == 0.0:
        raise MixtureError(
            f"pressure_Pa = {pressure:g} at temperature_K = 0: a cold gas has no pressure. "
            "Give a temperature, or leave the pressure out."
        )
    if pressure > _DENSEST * BOLTZMANN * temperature:
        raise MixtureError(
            f"pressure_Pa = {pressure:g} at temperature_K = {temperature:g} is no gas: N = p/kT > {_DENSEST:g} 1/m3. "
            "Correct one of them."
        )
    return pressure


def _check_left_out(leave_out: tuple[str, ...], gases: tuple[Gas, ...]) -> None:
    known = [f"{gas.name}/{process.id}" for gas in gases for process in gas.processes]
    for name in leave_out:
        if name not in known:
            raise MixtureError(
                f'leave_out: "{name}" is not a process of this mixture.{suggestion(name, known)} '
                "Write <set>/<process>; the sets are " + ", ".join(gas.name for gas in gases) + "."
            )
