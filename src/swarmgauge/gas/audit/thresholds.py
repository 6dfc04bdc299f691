"""Thresholds against the cross sections that they belong to."""

from collections.abc import Iterator

import numpy as np

from ..gas import Gas
from ..laws import Table
from ..process import Process
from .finding import Finding, Grade, percent, tables_of

_TOPIC = "threshold"
_MUCH = 0.01  # of the peak: more than that below a threshold is no slip of rounding
_VIBRATIONAL_EV = 2.0  # below it resonances set in far above the threshold, as in nitrogen
_LATE, _VERY_LATE, _FAR = 0.1, 0.2, 5.0  # of the threshold, from there to the begin of the cross section
_LEAST_GAP_EV = 0.05
_STEP = 0.3  # of the peak


def check_thresholds(gas: Gas) -> Iterator[Finding]:
    """Cross sections that are not zero below the threshold, begin far above it, or jump there."""
    for process, table in tables_of(gas):
        if process.kind != "elastic":
            yield from _below(process, table)
            yield from _late(process, table)
            yield from _step(process, table)


def _below(process: Process, table: Table) -> Iterator[Finding]:
    rows = np.flatnonzero((table.energy_eV < process.threshold_eV) & (table.cross_section_m2 > 0.0))
    if not len(rows):
        return
    section = table.cross_section_m2
    worst = int(rows[np.argmax(section[rows])])
    share = section[worst] / section.max()
    cut = "is cut off there" if process.cut else "acts there all the same"
    yield Finding(
        "error" if share > _MUCH and process.cut else "doubt",
        _TOPIC,
        f"below the threshold of {process.threshold_eV:g} eV the cross section is not zero in {len(rows)} row"
        f"{'s' if len(rows) > 1 else ''}: up to {section[worst]:.3g} m2, {percent(share)} of its peak; it {cut}.",
        "Correct threshold_eV, or the energies of the table.",
        process.id,
        float(table.energy_eV[rows[0]]),
        float(table.energy_eV[rows[-1]]),
        worst + 1,
    )


def begin_eV(table: Table) -> float:
    """Energy where a table leaves zero, eV: its last zero before the first value, or its first point."""
    first = int(np.flatnonzero(table.cross_section_m2 > 0.0)[0])
    return float(table.energy_eV[max(first - 1, 0)])


def _late(process: Process, table: Table) -> Iterator[Finding]:
    threshold, begin = process.threshold_eV, begin_eV(table)
    gap = begin - threshold
    if process.kind == "attachment" or gap < max(_LATE * threshold, _LEAST_GAP_EV):
        return
    resonant = threshold < _VIBRATIONAL_EV and begin < _FAR * threshold
    grade: Grade = "error" if process.kind == "ionization" and gap > threshold else "doubt"
    if process.kind == "excitation" and (resonant or gap < _VERY_LATE * threshold):
        grade = "note"
    yield Finding(
        grade,
        _TOPIC,
        f"the cross section begins at {begin:.4g} eV, {percent(gap / threshold) if threshold else 'far'} above the "
        f"threshold, yet an electron loses only {threshold:g} eV in such a collision.",
        "Right where a resonance or the shape of the molecule holds the process back; else correct threshold_eV.",
        process.id,
        threshold,
        begin,
    )


def _step(process: Process, table: Table) -> Iterator[Finding]:
    if not process.cut:
        return
    edge = max(process.threshold_eV, table.start_eV)
    share = float(process.cross_section(np.array([edge]))[0]) / table.cross_section_m2.max()
    if share > _STEP:
        yield Finding(
            "note" if process.kind == "excitation" else "doubt",
            _TOPIC,
            f"the cross section jumps from 0 to {percent(share)} of its peak at {edge:.4g} eV.",
            "Give the threshold as the first row, with a cross section of 0.",
            process.id,
            edge,
        )
