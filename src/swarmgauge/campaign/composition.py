"""The gas of a measurement, and whether a mixture is that gas."""

import re
from collections.abc import Mapping
from dataclasses import dataclass

from swarmgauge.gas import InputError, Mixture
from swarmgauge.gas.errors import printable

AIR = "air"
# Dry air has 20.95 % of O2 and 0.93 % of Ar by number (common practice); models often leave the argon out.
_OXYGEN_IN_AIR, _ARGON_IN_AIR = (0.195, 0.215), 0.012
_PART = re.compile(r"(?:(\d*\.?\d+(?:[eE]-?\d+)?)\s+)?([A-Z][A-Za-z0-9]*)")
_TOLERANCE = 5e-4  # of a fraction printed to three digits


class CompositionError(InputError):
    """A gas that is not understood."""


@dataclass(frozen=True)
class Composition:
    """Formula to fraction, sorted, as pairs; none for air, which every mixture of that kind is."""

    parts: tuple[tuple[str, float], ...]

    @classmethod
    def parse(cls, text: str) -> "Composition":
        """From N2, 0.8 N2 + 0.2 O2, or air; raises CompositionError."""
        if text.lower() in (AIR, "dry air"):
            return cls(())
        found: dict[str, float] = {}
        terms = [_PART.fullmatch(term.strip()) for term in text.split("+")]
        for term in terms:
            if term is None or (term[1] is None and len(terms) > 1) or term[2] in found:
                raise CompositionError(
                    f'"{printable(text)}" is not understood. Give a formula such as N2, parts such as 0.8 N2 + 0.2 O2, '
                    "or air."
                )
            found[term[2]] = float(term[1] or 1.0)
        if abs(sum(found.values()) - 1.0) > 1e-3:
            raise CompositionError(f'the fractions of "{printable(text)}" have the sum {sum(found.values()):g}, not 1.')
        return cls(tuple(sorted((formula, part) for formula, part in found.items() if part > 0.0)))

    def is_that_of(self, there: Mapping[str, float]) -> bool:
        """Whether a mixture, as formula to fraction, has these molecules in these parts."""
        if not self.parts:
            low, high = _OXYGEN_IN_AIR
            return (
                set(there) <= {"N2", "O2", "Ar"}
                and low <= there.get("O2", 0.0) <= high
                and there.get("Ar", 0.0) <= _ARGON_IN_AIR
            )
        wanted = dict(self.parts)
        names = wanted.keys() | there.keys()
        return all(abs(wanted.get(name, 0.0) - there.get(name, 0.0)) <= _TOLERANCE for name in names)

    def __str__(self) -> str:
        if not self.parts:
            return AIR
        return self.parts[0][0] if len(self.parts) == 1 else " + ".join(f"{x:g} {name}" for name, x in self.parts)


def parts_of(mixture: Mixture) -> dict[str, float]:
    """Formula to fraction of the gases of a mixture that act; several sets of one formula add up."""
    parts: dict[str, float] = {}
    for gas, fraction in zip(mixture.gases, mixture.fractions.tolist(), strict=True):
        if fraction > 0.0:
            parts[gas.formula] = parts.get(gas.formula, 0.0) + fraction
    return parts
