"""A gas: the cross-section set of one kind of atom or molecule, with where it comes from."""

import math
from dataclasses import dataclass, field
from typing import Any, Literal

from .constants import ATOMIC_MASS, E_MASS
from .errors import ProcessError, suggestion
from .levels import check_ladder
from .process import Process, check_name
from .scattering import Isotropic
from .total import Clipping, subtract_from_total

ElasticIs = Literal["momentum_transfer", "total_momentum_transfer", "integral"]
ELASTIC_IS = ("momentum_transfer", "total_momentum_transfer", "integral")


@dataclass(frozen=True, eq=False)
class Gas:
    """A cross-section set.

    name : of the set, as in `rate:<name>/<process>`. formula : of the atom or molecule. molar_mass_g_per_mol : > 0.
    elastic_is : what the published elastic cross section contains. published : processes as in the set file.
    trusted_E_over_N_Td : (lowest, highest) field for which the set is recommended; table_temperature_K : the gas
    temperature that the set stands for; both None where not stated.

    Made from these:
    processes : the same sorted by threshold; of a total momentum transfer the elastic part.
    clipped : what had to be cut off in doing so, or None. warnings : what a user of the set should be told.
    Raises ProcessError where the set contradicts itself.
    """

    name: str
    formula: str
    molar_mass_g_per_mol: float
    elastic_is: ElasticIs
    published: tuple[Process, ...]
    source: str = ""
    rights: str = ""
    note: str = ""
    trusted_E_over_N_Td: tuple[float, float] | None = None
    table_temperature_K: float | None = None
    processes: tuple[Process, ...] = field(init=False)
    clipped: Clipping | None = field(init=False)
    warnings: tuple[str, ...] = field(init=False)

    def __post_init__(self) -> None:
        check_name(self.name, "name")
        _check_top(self)
        published = tuple(sorted(self.published, key=lambda process: process.threshold_eV))
        _check_processes(published)
        _check_angles(published, self.elastic_is)
        object.__setattr__(self, "published", published)
        processes, clipped = _acting_elastic(published, self.elastic_is)
        object.__setattr__(self, "processes", processes)
        object.__setattr__(self, "clipped", clipped)
        object.__setattr__(self, "warnings", _warnings(self))

    @property
    def mass_kg(self) -> float:
        """Mass of one atom or molecule, kg."""
        return self.molar_mass_g_per_mol * ATOMIC_MASS

    @property
    def mass_ratio(self) -> float:
        """Electron mass over mass of the atom or molecule."""
        return E_MASS / self.mass_kg

    def process(self, process_id: str) -> Process:
        """One process by its id; raises KeyError."""
        for process in self.processes:
            if process.id == process_id:
                return process
        raise KeyError(process_id)

    def canonical(self) -> dict[str, Any]:
        """All that acts on a swarm, as plain numbers and names that JSON can hold."""
        return {
            "name": self.name,
            "formula": self.formula,
            "molar_mass_g_per_mol": self.molar_mass_g_per_mol,
            "processes": [process.canonical() for process in self.processes],
        }

    def __repr__(self) -> str:
        return f"Gas({self.name}: {self.formula}, {len(self.processes)} processes)"


def _check_top(gas: Gas) -> None:
    object.__setattr__(gas, "molar_mass_g_per_mol", float(gas.molar_mass_g_per_mol))
    mass = gas.molar_mass_g_per_mol
    if not gas.formula or not gas.formula.isprintable() or " " in gas.formula:
        raise ProcessError(f"formula = {gas.formula!r} cannot be a formula. Write it without spaces, as CO2.")
    if not 0.0 < mass <= 1e12:
        raise ProcessError(f"molar_mass_g_per_mol = {mass:g} is not possible. Give a finite number above 0.")
    if gas.elastic_is not in ELASTIC_IS:
        raise ProcessError(
            f'elastic_is = "{gas.elastic_is}" is unknown. Use one of {", ".join(ELASTIC_IS)}.'
            f"{suggestion(gas.elastic_is, ELASTIC_IS)}"
        )
    if gas.trusted_E_over_N_Td is not None:
        low, high = (float(value) for value in gas.trusted_E_over_N_Td)
        if not 0.0 <= low < high < math.inf:
            raise ProcessError(
                f"trusted_E_over_N_Td = [{low:g}, {high:g}] is not a range. Give the lowest and highest field, Td."
            )
        object.__setattr__(gas, "trusted_E_over_N_Td", (low, high))
    if gas.table_temperature_K is not None:
        object.__setattr__(gas, "table_temperature_K", float(gas.table_temperature_K))
        if not 0.0 <= gas.table_temperature_K < math.inf:
            raise ProcessError(
                f"table_temperature_K = {gas.table_temperature_K:g} is not possible. Give a finite number of 0 or more."
            )


def _check_processes(processes: tuple[Process, ...]) -> None:
    if not processes:
        raise ProcessError("there is no process. Add at least one [[process]].")
    ids = [process.id for process in processes]
    twice = sorted({name for name in ids if ids.count(name) > 1})
    if twice:
        raise ProcessError(f"process {', '.join(twice)}: the id is used more than once. Give each process its own id.")
    elastic = [process.id for process in processes if process.kind == "elastic" and not process.passive]
    if len(elastic) > 1:
        raise ProcessError(
            f"process {', '.join(elastic)}: more than one elastic process would count collisions twice. "
            "Keep one, or mark the others passive = true."
        )
    check_ladder(processes)


def _check_angles(processes: tuple[Process, ...], elastic_is: ElasticIs) -> None:
    """An angular law and a momentum transfer cross section must not both count the same angles."""
    for process in processes:
        if isinstance(process.scattering, Isotropic) or process.passive:
            continue
        if elastic_is == "total_momentum_transfer":
            raise ProcessError(
                f'process {process.id}: scattering is not isotropic, but elastic_is = "total_momentum_transfer" stands '
                "for isotropic scattering of all processes. Remove the law, or give cross sections of their own."
            )
        if process.kind != "elastic":
            continue
        if elastic_is == "momentum_transfer" and not process.scattering.convert:
            raise ProcessError(
                f'process {process.id}: scattering is not isotropic, but elastic_is = "momentum_transfer" counts the '
                'angles already. Give the integral cross section and elastic_is = "integral", or add convert = true to '
                "the law: the cross section is then divided by 1 - <cos chi>."
            )
        if elastic_is == "integral" and process.scattering.convert:
            raise ProcessError(
                f"process {process.id}: scattering: convert is for a momentum transfer cross section, and elastic_is = "
                '"integral". Remove convert.'
            )


def _acting_elastic(
    published: tuple[Process, ...], elastic_is: ElasticIs
) -> tuple[tuple[Process, ...], Clipping | None]:
    """The processes with the elastic one reduced to its own part where it is a total."""
    total = next((process for process in published if process.kind == "elastic" and not process.passive), None)
    if elastic_is != "total_momentum_transfer" or total is None:
        return published, None
    others = tuple(process for process in published if process.kind != "elastic")
    elastic, clipped = subtract_from_total(total, others)
    return tuple(elastic if process is total else process for process in published), clipped


def _warnings(gas: Gas) -> tuple[str, ...]:
    warnings = []
    elastic = [p for p in gas.processes if p.kind == "elastic" and not p.passive]
    if gas.elastic_is == "integral" and any(isinstance(p.scattering, Isotropic) for p in elastic):
        warnings.append(
            f"{gas.name}: its elastic cross section is the integral one, but scattering is isotropic here, so momentum "
            "transfer is too large where scattering is forward. Give it an angular law (scattering), or use a momentum "
            "transfer set."
        )
    if gas.clipped is not None:
        warnings.append(f"{gas.name}: {gas.clipped}.")
    return tuple(warnings)
