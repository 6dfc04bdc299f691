"""One collision process: what an electron does to an atom or molecule, and how often."""

import math
from dataclasses import dataclass, field, fields
from typing import Any, Literal

import numpy as np

from .errors import ProcessError, suggestion
from .laws import Law, Table
from .scattering import Forward, Isotropic, Scattering
from .sharing import Sharing

Kind = Literal["elastic", "excitation", "ionization", "attachment"]
EJECTA = ("isotropic", "binary")
KINDS = ("elastic", "excitation", "ionization", "attachment")
_NAME_SIGNS = frozenset("abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789._+-=()'")


@dataclass(frozen=True, eq=False)
class Process:
    """One collision process.

    id : name within its set. kind : "elastic", "excitation", "ionization" or "attachment". threshold_eV : energy loss;
    for attachment only the onset, which neither cuts nor costs energy. law : the cross section against energy.
    sharing : of an ionization; ejecta : directions of its two electrons, "isotropic" or "binary" (as two free
    electrons would part). degeneracy_lower, degeneracy_upper : statistical weights; lower : id of the lower level,
    None for the ground state; vibrational : whether the upper level follows a vibrational temperature. third_body :
    None for two bodies; else the cross section is in m5, per m-3 of the third body: "self", "any", or formula to
    efficiency. passive : averaged over the swarm, without acting on it.
    relative_uncertainty : one standard deviation, None where not stated. scattering : angular law; where it converts,
    the law of the cross section is the momentum transfer.
    Raises ProcessError where these contradict each other.
    """

    id: str
    kind: Kind
    threshold_eV: float
    law: Law
    label: str = ""
    source: str = ""
    sharing: Sharing = field(default_factory=Sharing)
    scattering: Scattering = field(default_factory=Isotropic)
    ejecta: str = "isotropic"
    degeneracy_lower: float | None = None
    degeneracy_upper: float | None = None
    lower: str | None = None
    vibrational: bool = False
    third_body: Any = None
    passive: bool = False
    relative_uncertainty: float | None = None

    def __post_init__(self) -> None:
        object.__setattr__(self, "threshold_eV", float(self.threshold_eV))
        if isinstance(self.third_body, dict):
            bodies = {formula: float(efficiency) for formula, efficiency in sorted(self.third_body.items())}
            object.__setattr__(self, "third_body", bodies)
        check_name(self.id, "id")
        if self.kind not in KINDS:
            raise ProcessError(
                f'kind = "{self.kind}" is unknown. Use one of {", ".join(KINDS)}.{suggestion(self.kind, KINDS)}'
            )
        _check_threshold(self)
        _check_options(self)

    def cross_section(self, energy_eV: np.ndarray) -> np.ndarray:
        """Cross section at energies (any shape, eV >= 0), in m2, or m5 for three bodies.

        Zero below the threshold of an excitation or ionization and below the first point of a table; elastic keeps the
        first value below it.
        """
        energy = np.asarray(energy_eV, dtype=np.float64)
        if self.kind == "elastic":
            values = self.law.value(np.maximum(energy, self.law.start_eV))
            return values / (1.0 - self.scattering.mean_cosine(energy)) if self.scattering.convert else values
        values = self.law.value(energy)
        return np.where(energy >= self.threshold_eV, values, 0.0) if self.cut else values

    @property
    def cut(self) -> bool:
        """Whether the cross section is zero below the threshold."""
        return self.kind in ("excitation", "ionization")

    @property
    def is_level(self) -> bool:
        """Whether the process leads up to a level that can be populated, so that its reverse exists."""
        return self.degeneracy_upper is not None and not self.passive

    @property
    def degeneracy_ratio(self) -> float:
        """Statistical weight of the lower level over that of the upper one; 1 where not stated."""
        return (self.degeneracy_lower or 1.0) / (self.degeneracy_upper or 1.0)

    @property
    def from_level(self) -> bool:
        """Whether only molecules in the lower level are hit; other processes happen to all molecules alike."""
        return self.degeneracy_upper is not None or self.lower is not None

    @property
    def breakpoints_eV(self) -> np.ndarray:
        """Threshold and points of the tables, rising, eV: where the cross section may bend or jump."""
        turns = self.scattering.breakpoints_eV if self.scattering.convert else np.empty(0)
        return np.unique(np.concatenate([self.law.breakpoints_eV, turns, [self.threshold_eV]]))

    @property
    def end_eV(self) -> float:
        """Last tabulated energy, eV; infinite for formulas."""
        return self.law.end_eV

    def canonical(self) -> dict[str, Any]:
        """All that acts on a swarm, as plain numbers and names that JSON can hold; equal physics gives equal ones."""
        return {
            "id": self.id,
            "kind": self.kind,
            "threshold_eV": self.threshold_eV,
            "law": type(self.law).__name__,
            **{f.name: _plain(getattr(self.law, f.name)) for f in fields(self.law)},
            "sharing": self.sharing.canonical() if self.kind == "ionization" else None,
            "scattering": self.scattering.canonical(),
            **({} if self.ejecta == "isotropic" else {"ejecta": self.ejecta}),
            "degeneracies": [self.degeneracy_lower, self.degeneracy_upper],
            "lower": self.lower,
            "third_body": self.third_body,
            "passive": self.passive,
        }

    def __repr__(self) -> str:
        law = f"{len(self.law.energy_eV)} points" if isinstance(self.law, Table) else repr(self.law)
        return f"Process({self.id}: {self.kind}, {self.threshold_eV:g} eV, {law})"


def _plain(value: Any) -> Any:
    return value.tolist() if isinstance(value, np.ndarray) else value


def check_name(name: str, key: str) -> None:
    """Refuse names that would not survive in `rate:<set>/<process>` or as a file name."""
    if not name or not set(name) <= _NAME_SIGNS or name[0] in "._-":
        raise ProcessError(
            f"{key} = {name!r} cannot be a name. Use letters, digits and . _ + - = ( ) ' and begin with none of . _ -"
        )


def _check_threshold(process: Process) -> None:
    threshold = process.threshold_eV
    if not 0.0 <= threshold < math.inf:
        raise ProcessError(f"threshold_eV = {threshold:g} is not possible. Give a finite number of 0 or more.")
    if process.kind == "elastic" and threshold != 0.0:
        raise ProcessError(f"threshold_eV = {threshold:g} for an elastic process. Set it to 0.")
    if threshold > process.end_eV:
        raise ProcessError(
            f"threshold_eV = {threshold:g} lies above the end of the table ({process.end_eV:g} eV). "
            "Correct the threshold or the energies (eV)."
        )


def _check_options(process: Process) -> None:
    if process.sharing != Sharing() and process.kind != "ionization":
        raise ProcessError(f"sharing is given for an {process.kind} process. Remove it; only ionization shares energy.")
    if process.third_body is not None and process.kind != "attachment":
        raise ProcessError(
            f"third_body is given for an {process.kind} process. Remove it; only attachment can need one."
        )
    _check_scattering(process)
    _check_third_body(process.third_body)
    for name in ("degeneracy_lower", "degeneracy_upper", "lower", "vibrational"):
        if getattr(process, name) not in (None, False) and process.kind != "excitation":
            raise ProcessError(
                f"{name} is given for an {process.kind} process. Remove it; only excitations have levels."
            )
    for name, largest in (("degeneracy_lower", 1e6), ("degeneracy_upper", 1e6), ("relative_uncertainty", 1e300)):
        value = getattr(process, name)
        if value is not None and not 0.0 < value <= largest:
            raise ProcessError(f"{name} = {value:g} is not possible. Give a number above 0, at most {largest:g}.")
    if (process.degeneracy_lower is None) is not (process.degeneracy_upper is None):
        given = "degeneracy_lower" if process.degeneracy_upper is None else "degeneracy_upper"
        raise ProcessError(f"{given} is given alone. Give degeneracy_lower and degeneracy_upper, or neither.")


def _check_scattering(process: Process) -> None:
    law = process.scattering
    if not isinstance(law, Scattering):
        raise ProcessError(
            f"scattering = {law!r} is not an angular law. Use Isotropic(), Forward(), Screened and so on."
        )
    if process.ejecta not in EJECTA:
        raise ProcessError(f'ejecta = "{process.ejecta}" is unknown. Use "isotropic" or "binary".')
    if process.ejecta != "isotropic" and process.kind != "ionization":
        raise ProcessError(
            f"ejecta is given for an {process.kind} process. Remove it; only ionization ejects electrons."
        )
    if isinstance(law, Isotropic):
        return
    if process.kind == "attachment":
        raise ProcessError("scattering is given for an attachment process. Remove it; no electron is left.")
    if isinstance(law, Forward) and process.kind == "elastic":
        raise ProcessError('scattering = "forward" for an elastic process: it would do nothing. Give another law.')
    if process.ejecta == "binary":
        raise ProcessError('scattering is given beside ejecta = "binary", which fixes both directions. Remove one.')
    if law.convert and process.kind != "elastic":
        raise ProcessError(
            f"scattering: convert is given for an {process.kind} process. Remove it; only an elastic momentum transfer "
            "can be converted."
        )


def _check_third_body(body: Any) -> None:
    if body is None or body in ("self", "any"):
        return
    if not isinstance(body, dict) or not body:
        raise ProcessError(
            f'third_body = {body!r} is unknown. Use "self", "any" or formulas with efficiencies, as {{ O2 = 1.0 }}.'
        )
    for formula, efficiency in body.items():
        if not 0.0 <= efficiency < math.inf:
            raise ProcessError(
                f"third_body: {formula} = {efficiency:g} is not possible. Give a finite efficiency of 0 or more."
            )
