"""All checks of a set in one place."""

from collections.abc import Callable, Iterator

import numpy as np

from ..gas import Gas
from .beb import check_beb
from .curves import check_duplicates, check_gaps, check_jumps
from .facts import check_first_levels, check_ionization_energy, check_mass
from .finding import GRADES, Finding
from .grid import check_grid
from .levels import check_attachment, check_order
from .magnitude import check_magnitude
from .slopes import check_ends, check_slopes
from .sums import check_elastic, check_totals
from .thresholds import check_thresholds

CHECKS: tuple[Callable[[Gas], Iterator[Finding]], ...] = (
    check_magnitude,
    check_mass,
    check_ionization_energy,
    check_first_levels,
    check_order,
    check_thresholds,
    check_attachment,
    check_elastic,
    check_totals,
    check_beb,
    check_ends,
    check_slopes,
    check_gaps,
    check_jumps,
    check_duplicates,
    check_grid,
)


def check_set(gas: Gas) -> tuple[Finding, ...]:
    """Everything found about a set: errors first, then doubts, then notes."""
    with np.errstate(all="ignore"):  # absurd numbers are what is looked for
        found = [finding for check in CHECKS for finding in check(gas)]
    return tuple(sorted(found, key=lambda finding: GRADES.index(finding.grade)))
