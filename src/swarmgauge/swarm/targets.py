"""Accuracy targets: what standard error is asked for, and whether an estimate meets it."""

import difflib
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from fnmatch import fnmatchcase
from typing import Any

from swarmgauge.gas import InputError, Mixture
from swarmgauge.gas.errors import suggestion

from .estimate import Estimate
from .quantities import KNOWN_PATTERNS

DEFAULT_ACCURACY: dict[str, Any] = {
    "drift_velocity_*": 0.005,
    "mean_energy": 0.005,
    "diffusion_*": 0.02,
    "net_frequency_over_N": {"rel": 0.03, "abs": 1e-23},
}
LARGEST_RELATIVE = 0.2
_KEYS = ("rel", "abs", "from_Td", "to_Td")


@dataclass(frozen=True)
class Target:
    """A wanted standard error: met when the relative or the absolute one is, between two fields."""

    pattern: str
    rel: float = 0.0
    abs: float = 0.0
    from_Td: float = 0.0
    to_Td: float = math.inf

    def applies(self, quantity: str, E_over_N_Td: float) -> bool:
        """Whether this target speaks of a quantity at a field."""
        return self.from_Td <= E_over_N_Td <= self.to_Td and fnmatchcase(quantity, self.pattern)

    def excess(self, estimate: Estimate) -> float:
        """Error over what is wanted: at most 1 when the target is met; exact zeros are never judged."""
        if not math.isnan(estimate.upper_bound):
            return estimate.upper_bound / self.abs if self.abs > 0.0 else math.inf
        if estimate.standard_error == 0.0:
            return 0.0
        wanted = max(self.rel * abs(estimate.value), self.abs)
        return estimate.standard_error / wanted if wanted > 0.0 else math.inf

    def __str__(self) -> str:
        parts = []
        if self.rel > 0.0:
            parts.append(f"{100 * self.rel:g} %")
        if self.abs > 0.0:
            parts.append(f"{self.abs:g}")
        return " or ".join(parts)


def parse_accuracy(accuracy: Mapping[str, Any] | None) -> tuple[Target, ...]:
    """Targets from a mapping of quantity name (with *) to a relative error or to {rel, abs, from_Td, to_Td}.

    Nothing, or an empty mapping, gives the defaults. Raises InputError naming the key, what was found and what to do.
    """
    return tuple(_target(name, wanted) for name, wanted in (accuracy or DEFAULT_ACCURACY).items())


def refuse_unknown_processes(targets: Iterable[Target], mixtures: Iterable[Mixture]) -> None:
    """Raise InputError for a target on <quantity>:<set>/<process> that none of the mixtures has."""
    known = {
        f"{gas.name}/{process.id}" for mixture in mixtures for gas in mixture.gases for process in mixture.acting(gas)
    }
    for pattern in (target.pattern for target in targets if ":" in target.pattern):
        process = pattern.split(":", 1)[1]
        if not any(fnmatchcase(name, process) for name in (*known, "population_change")):
            raise InputError(
                f'accuracy "{pattern}": no mixture here has a process {process}.{suggestion(process, sorted(known))} '
                "Write <set>/<process>; * stands for anything."
            )


def _target(name: str, wanted: Any) -> Target:
    if not any(fnmatchcase(known, name) or fnmatchcase(name, known) for known in KNOWN_PATTERNS):
        longer = [known for known in KNOWN_PATTERNS if known.startswith(name)]
        near = longer or difflib.get_close_matches(name, KNOWN_PATTERNS, n=1, cutoff=0.0)
        raise InputError(f'accuracy "{name}": no such quantity. The nearest is "{near[0]}".')
    fields = dict(wanted) if isinstance(wanted, Mapping) else {"rel": wanted}
    unknown = [key for key in fields if key not in _KEYS]
    if unknown:
        raise InputError(f'accuracy "{name}": unknown key "{unknown[0]}". Known keys: {", ".join(_KEYS)}.')
    for key, value in fields.items():
        if isinstance(value, bool) or not isinstance(value, int | float) or not value >= 0:
            raise InputError(f'accuracy "{name}": {key} = {value!r} is not a number of 0 or more. Give a number.')
    target = Target(name, **{key: float(value) for key, value in fields.items()})
    if target.rel > LARGEST_RELATIVE:
        raise InputError(
            f'accuracy "{name}": a relative error of {target.rel:g} is {100 * target.rel:g} %. '
            "If per cent was meant, divide by 100."
        )
    if target.rel == 0.0 and target.abs == 0.0:
        raise InputError(f'accuracy "{name}": neither rel nor abs is above 0. Give at least one of them.')
    if target.from_Td > target.to_Td:
        raise InputError(
            f'accuracy "{name}": from_Td = {target.from_Td:g} is above to_Td = {target.to_Td:g}. Swap them.'
        )
    return target


def worst(
    targets: tuple[Target, ...], estimates: Mapping[str, Estimate], E_over_N_Td: float
) -> dict[str, tuple[Target, float]]:
    """For each judged quantity its target and the excess of its error; the first target that applies counts."""
    judged = {}
    for name, estimate in estimates.items():
        for target in targets:
            if target.applies(name, E_over_N_Td):
                judged[name] = (target, target.excess(estimate))
                break
    return judged
