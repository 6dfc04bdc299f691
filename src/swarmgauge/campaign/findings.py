"""What the audit of a set found, as text of 80 columns or for JSON."""

from collections.abc import Iterator, Sequence
from itertools import groupby

from swarmgauge.gas.audit.finding import GRADES, Finding

from .console import wrapped

_INDENT = "    "


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
