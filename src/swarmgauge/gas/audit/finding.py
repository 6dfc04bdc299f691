"""What an audit finds: a grade, a place, the reason with its numbers, and what to do."""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any, Literal

from ..gas import Gas
from ..laws import Table
from ..process import Process

Grade = Literal["error", "doubt", "note"]
GRADES: tuple[Grade, ...] = ("error", "doubt", "note")


@dataclass(frozen=True)
class Finding:
    """One finding about a set.

    grade : "error" (cannot be right), "doubt" (look at it before you rely on it) or "note" (worth knowing). topic :
    what was examined. reason : what was found, with the numbers. remedy : what to do. process : id, empty for the whole
    set. low_eV, high_eV : where it is, None where energies do not matter. row : of the table, counted from 1.
    """

    grade: Grade
    topic: str
    reason: str
    remedy: str
    process: str = ""
    low_eV: float | None = None
    high_eV: float | None = None
    row: int | None = None

    @property
    def place(self) -> str:
        """Process, row and energies in words; "set" where it is about all of it."""
        parts = [self.process or "set"]
        if self.row is not None:
            parts.append(f"row {self.row}")
        if self.low_eV is not None and self.high_eV is not None and self.high_eV > self.low_eV:
            parts.append(f"{self.low_eV:.5g} to {self.high_eV:.5g} eV")
        elif self.low_eV is not None:
            parts.append(f"{self.low_eV:.5g} eV")
        return ", ".join(parts)

    def as_json(self) -> dict[str, Any]:
        """All of it as plain values, energies with six digits."""
        return {
            "grade": self.grade,
            "topic": self.topic,
            "process": self.process,
            "row": self.row,
            "low_eV": _rounded(self.low_eV),
            "high_eV": _rounded(self.high_eV),
            "reason": self.reason,
            "remedy": self.remedy,
        }


def _rounded(value: float | None) -> float | None:
    return None if value is None else float(f"{value:.6g}")


def tables_of(gas: Gas) -> Iterator[tuple[Process, Table]]:
    """The tabulated processes of a set as published, with their tables; formulas have nothing to be looked at."""
    for process in gas.published:
        if isinstance(process.law, Table) and process.law.cross_section_m2.any():
            yield process, process.law


def acting(gas: Gas, kind: str) -> list[Process]:
    """The acting two-body processes of a kind, by rising threshold."""
    return [p for p in gas.processes if p.kind == kind and not p.passive and p.third_body is None]


def percent(share: float) -> str:
    """A share as per cent, two digits."""
    return f"{100.0 * share:.0f} %" if share >= 0.995 else f"{100.0 * share:.2g} %"
