"""The check of sets: the audit of each and, at a field, the energies that its swarm probes."""

from collections.abc import Iterator, Sequence
from dataclasses import asdict, dataclass
from typing import Any

from swarmgauge.campaign.console import wrapped
from swarmgauge.campaign.findings import counted, finding_lines
from swarmgauge.gas import Gas, InputError, load_named_or_path
from swarmgauge.gas.audit.audit import check_set
from swarmgauge.gas.audit.finding import Finding

from .probe import Probe, probe, probe_lines


@dataclass(frozen=True, eq=False)
class Checked:
    """A set with what was found.

    given : how the user named it. probe : None where no field was given, or where there is no swarm because of
    `no_swarm`. findings : of the audit, then of the probe.
    """

    given: str
    gas: Gas
    findings: tuple[Finding, ...]
    probe: Probe | None = None
    no_swarm: str = ""

    @property
    def wrong(self) -> bool:
        """Whether an error was found."""
        return any(finding.grade == "error" for finding in self.findings)


def check(given: Sequence[str], E_over_N_Td: float | None = None) -> list[Checked]:
    """Check sets, by name in gases/ or by path; all are loaded before the first is checked. Raises SetFileError."""
    return [_checked(name, gas, E_over_N_Td) for name, gas in [(name, load_named_or_path(name)) for name in given]]


def _checked(given: str, gas: Gas, E_over_N_Td: float | None) -> Checked:
    findings = check_set(gas)
    if E_over_N_Td is None:
        return Checked(given, gas, findings)
    try:
        probed = probe(gas, E_over_N_Td)
    except InputError as error:
        return Checked(given, gas, findings, no_swarm=str(error))
    return Checked(given, gas, findings + probed.findings, probed)


def checked_lines(checked: Sequence[Checked]) -> Iterator[str]:
    """A block for each set, with an empty line between two."""
    for place, one in enumerate(checked):
        if place:
            yield ""
        where = "" if one.given == one.gas.name else f" ({one.given})"
        count = len(one.gas.processes)
        yield from wrapped(
            f"{one.gas.name}{where}: {one.gas.formula}, {count} process{'es' if count > 1 else ''}; "
            f"{counted(one.findings)}"
        )
        yield from finding_lines(one.findings)
        if one.probe is not None:
            yield from probe_lines(one.probe)
        elif one.no_swarm:
            yield from wrapped(f"no energies probed: {one.no_swarm}")


def checked_json(checked: Sequence[Checked]) -> list[dict[str, Any]]:
    """The same for programs."""
    return [
        {
            "set": one.gas.name,
            "given": one.given,
            "findings": [finding.as_json() for finding in one.findings],
            "probe": None if one.probe is None else _probe_json(one.probe),
            "no_swarm": one.no_swarm,
        }
        for one in checked
    ]


def _probe_json(probe: Probe) -> dict[str, Any]:
    return {
        "E_over_N_Td": probe.E_over_N_Td,
        "mean_energy_eV": probe.mean_energy_eV,
        "processes": [
            {key: None if value != value else value for key, value in asdict(one).items()} for one in probe.processes
        ],
    }
