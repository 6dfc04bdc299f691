"""What the audit of sets found: as text of 80 columns, and for the sets of a run."""

from collections.abc import Iterator, Sequence
from functools import lru_cache
from itertools import groupby

from swarmgauge.gas import Gas
from swarmgauge.gas.audit.audit import check_set
from swarmgauge.gas.audit.finding import GRADES, Finding

from .console import wrapped

_INDENT = "    "


@lru_cache(maxsize=64)
def findings_of(gas: Gas) -> tuple[Finding, ...]:
    """What the audit finds in a set; a run asks at its start, at its end and for its record."""
    return check_set(gas)


def run_lines(gases: Sequence[Gas]) -> Iterator[str]:
    """One line for a run: how many findings each of its sets has; and one for each set with an error."""
    counts = "; ".join(f"{gas.name} {counted(findings_of(gas))}" for gas in gases)
    yield from wrapped(f"check: {counts} (provenance.json; in words: swarmgauge check SET)")
    for gas in gases:
        for finding in findings_of(gas):
            if finding.grade == "error":
                yield from wrapped(f"! {gas.name}, {finding.place}: {finding.reason} {finding.remedy}")


def any_error(gases: Sequence[Gas]) -> bool:
    """Whether the audit finds an error in one of the sets."""
    return any(finding.grade == "error" for gas in gases for finding in findings_of(gas))


def counted(findings: Sequence[Finding]) -> str:
    """How many of each grade, as "1 error, 2 doubts"; "nothing to object" where there is none."""
    counts = {grade: sum(finding.grade == grade for finding in findings) for grade in GRADES}
    parts = [f"{count} {grade}{'s' if count > 1 else ''}" for grade, count in counts.items() if count]
    return ", ".join(parts) or "nothing to object"


def finding_lines(findings: Sequence[Finding]) -> Iterator[str]:
    """Every finding: grade and topic once for those that share them, place and reason, and what to do about them."""
    for (grade, topic), group in groupby(findings, key=lambda finding: (finding.grade, finding.topic)):
        same = list(group)
        yield f"{grade}: {topic}"
        for place, finding in enumerate(same):
            yield from _block(f"{finding.place}: {finding.reason}")
            if place + 1 == len(same) or same[place + 1].remedy != finding.remedy:
                yield from _block(f"-> {finding.remedy}")


def _block(text: str) -> list[str]:
    return wrapped(_INDENT + text, _INDENT + "  ")
