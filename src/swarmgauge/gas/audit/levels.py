"""Thresholds against each other, and the onset of attachment."""

from collections.abc import Iterator

import numpy as np

from ..gas import Gas
from .finding import Finding, acting, percent
from .reference import ATTACHMENT_ONSET_EV, ONSET_SOURCE

_TOPIC = "order of thresholds"
_BEAM_EV = 0.3  # spread of energies in beams by which attachment was measured
_SEEN = 0.01  # of the peak
_SAMPLES = 4000


def check_order(gas: Gas) -> Iterator[Finding]:
    """Ionization below the first excitation; excitations above the ionization energy."""
    ionizations, excitations = acting(gas, "ionization"), acting(gas, "excitation")
    if not ionizations or not excitations:
        return
    ion, first = ionizations[0], excitations[0]
    if ion.threshold_eV < first.threshold_eV:
        yield Finding(
            "error",
            _TOPIC,
            f"ionization at {ion.threshold_eV:g} eV lies below the lowest excitation, {first.id} at "
            f"{first.threshold_eV:g} eV; every atom and molecule has levels below its ionization energy.",
            "Correct the thresholds, or add the excitations that are missing.",
            ion.id,
            ion.threshold_eV,
            first.threshold_eV,
        )
    above = [p for p in excitations if p.threshold_eV > ion.threshold_eV]
    if above and ion.threshold_eV >= first.threshold_eV:
        yield Finding(
            "note",
            _TOPIC,
            f"{len(above)} excitation{'s' if len(above) > 1 else ''} ({', '.join(p.id for p in above[:3])}) above the "
            f"ionization energy of {ion.threshold_eV:g} eV.",
            "Such levels mostly ionize by themselves: make sure that ionization does not count them too.",
            above[0].id,
            above[0].threshold_eV,
            above[-1].threshold_eV,
        )


def check_attachment(gas: Gas) -> Iterator[Finding]:
    """Dissociative attachment below the energy that it needs."""
    needed = ATTACHMENT_ONSET_EV.get(gas.formula)
    if needed is None:
        return
    for process in acting(gas, "attachment"):
        energy = np.linspace(0.0, max(needed, 1.0) * 3.0, _SAMPLES)
        section = process.cross_section(energy)
        seen = energy[section > _SEEN * section.max()]
        if len(seen) and seen[0] < needed - _BEAM_EV:
            below = float(np.trapezoid(section[energy < needed], energy[energy < needed]))
            yield Finding(
                "doubt",
                "onset of attachment",
                f"attachment begins at {seen[0]:.3g} eV, but {gas.formula} at rest needs {needed:g} eV "
                f"({ONSET_SOURCE}); {percent(below / float(np.trapezoid(section, energy)))} of its area lies below.",
                "Look for a spread of beam energies or hot molecules in the measurement; else shift or cut the table.",
                process.id,
                float(seen[0]),
                needed,
            )
