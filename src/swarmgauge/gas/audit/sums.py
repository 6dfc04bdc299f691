"""Totals against the sums of their parts."""

from collections.abc import Iterator

import numpy as np

from ..gas import Gas
from ..process import Process
from .finding import Finding, acting, percent

_CLIPPED_NOTE = 1e-6  # of the area of the total
_CLIPPED_MUCH, _SWARMS_EV = 0.1, 500.0  # of the total, at energies that swarms have
_EXCESS, _SHORT = 0.05, 0.05
_WORTH = 0.05  # of the peak: below it, relative differences are of no account


def check_elastic(gas: Gas) -> Iterator[Finding]:
    """Whether elastic collisions are there, and what was left of them after subtraction."""
    elastic = acting(gas, "elastic")
    if not elastic:
        yield Finding(
            "note",
            "elastic",
            "there is no elastic process.",
            "Without one the set serves for single processes, not for swarms.",
        )
        return
    clipped = gas.clipped
    if clipped is None or clipped.share < _CLIPPED_NOTE:
        return
    total = next(process for process in gas.published if process.id == elastic[0].id)
    there = float(total.cross_section(np.array([clipped.at_eV]))[0])
    yield Finding(
        "error" if clipped.peak_m2 > _CLIPPED_MUCH * there and clipped.at_eV < _SWARMS_EV else "doubt",
        "elastic part of the total",
        f"{clipped}.",
        "Too large losses or too small a total: compare both with their sources there.",
        elastic[0].id,
        clipped.low_eV,
        clipped.high_eV,
    )


def check_totals(gas: Gas) -> Iterator[Finding]:
    """Passive processes beside acting ones of their kind: no part, and no total, can differ at will from the sum.

    A passive total equals the sum; a passive part (of ionization, say) stays below it.
    """
    for process in gas.published:
        parts = [p for p in acting(gas, process.kind) if p.id != process.id]
        if process.passive and process.third_body is None and process.kind != "elastic" and parts:
            yield from _against(process, parts)


def _against(total: Process, parts: list[Process]) -> Iterator[Finding]:
    energy = np.unique(np.concatenate([process.breakpoints_eV for process in (total, *parts)]))
    energy = energy[energy <= min(process.end_eV for process in (total, *parts))]
    whole = total.cross_section(energy)
    summed = np.sum([process.cross_section(energy) for process in parts], axis=0)
    seen = whole > _WORTH * whole.max(initial=0.0)
    if not seen.any():
        return
    ratio = summed[seen] / whole[seen]
    place = energy[seen]
    like_total = float(np.median(ratio)) < 1.0 + 2.0 * _SHORT and total.threshold_eV <= parts[0].threshold_eV
    worst = int(np.argmin(ratio)) if ratio.min() < 1.0 - _SHORT else int(np.argmax(ratio))
    if ratio[worst] < 1.0 - _EXCESS:
        reason = f"exceeds the sum of the acting {total.kind} processes, which reach {percent(ratio[worst])} of it"
    elif like_total and ratio[worst] > 1.0 + _SHORT:
        reason = (
            f"looks like the total of the acting {total.kind} processes, yet their sum is {ratio[worst]:.3g} times it"
        )
    else:
        return
    yield Finding(
        "doubt",
        "total and sum",
        f"passive, it {reason} at {place[worst]:.4g} eV.",
        "Scale the parts, or add what is missing among them.",
        total.id,
        float(place[worst]),
    )
