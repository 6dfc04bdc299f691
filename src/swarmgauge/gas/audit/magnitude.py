"""Units that slipped: cross sections of a size that no atom or molecule has."""

from collections.abc import Iterator

import numpy as np

from ..gas import Gas
from ..process import Process
from .finding import Finding, tables_of

_TOPIC = "unit"
_ENERGY_EV = np.geomspace(1.0, 100.0, 60)
# Elastic cross sections of atoms and molecules between 1 and 100 eV, deep minima included, as commonly found.
_ELASTIC_M2 = (1e-21, 2e-18)
_LARGEST_M2 = 3e-18  # of any other process from 1 eV on; resonances and dipole losses stay below
_LARGEST_M5 = 1e-42  # of a three-body process
_UNITS = {"1e-20 m2": 1e-20, "1e-16 cm2": 1e-20, "bohr2": 2.8003e-21, "cm2": 1e-4, "1e-18 cm2": 1e-22}


def check_magnitude(gas: Gas) -> Iterator[Finding]:
    """Largest cross sections from 1 to 100 eV against what occurs in nature."""
    for process, _ in tables_of(gas):
        largest = float(process.cross_section(_ENERGY_EV).max())
        if process.third_body is not None:
            peak = float(process.law.cross_section_m2.max())  # type: ignore[union-attr]
            if peak > _LARGEST_M5:
                yield _slip(process, peak, "m5", f"three-body cross sections stay below {_LARGEST_M5:g} m5", 1e-47)
        elif largest == 0.0:
            continue
        elif process.kind == "elastic" and not _ELASTIC_M2[0] < largest < _ELASTIC_M2[1]:
            low, high = _ELASTIC_M2
            yield _slip(process, largest, "m2", f"elastic cross sections reach {low:g} to {high:g} m2 there", 1e-19)
        elif largest > _LARGEST_M2:
            yield _slip(process, largest, "m2", f"others than elastic stay below {_LARGEST_M2:g} m2", 1e-20)


def _slip(process: Process, found: float, unit: str, known: str, usual: float) -> Finding:
    """usual : a middling size of such a cross section, by which the unit that was meant is guessed at."""
    where = "" if unit == "m5" else " between 1 and 100 eV"
    factors = {name: factor for name, factor in _UNITS.items() if 0.03 < found * factor / usual < 30.0}
    meant = f" They look like {' or '.join(factors)} taken as m2." if factors and unit == "m2" else ""
    return Finding(
        "error",
        _TOPIC,
        f"reaches {found:.2g} {unit}{where}, but {known}.{meant}",
        f"Check the unit of the source and convert the table to {unit}.",
        process.id,
    )
