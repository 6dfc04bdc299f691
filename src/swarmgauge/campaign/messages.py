"""What a run says in words, before and after its table."""

import math
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path

from swarmgauge.gas import Mixture
from swarmgauge.swarm.point import Point
from swarmgauge.swarm.targets import Target

from .campaign import Outcome
from .console import field_text, missed_target, table, wrapped
from .findings import run_lines
from .laws import special_laws
from .runfile import RunFile
from .trust import outside

MOST_REMEDIES = 8
MOST_WARNINGS = 12


def opening(run_file: RunFile, folder: Path, max_minutes: float | None = None) -> Iterator[str]:
    """The folder, targets, limits, third bodies that act, laws that are not the default, findings about sets."""
    targets = ", ".join(f"{target.pattern} {target}{_reach(target)}" for target in run_file.targets)
    yield from wrapped(f"{folder}: standard errors asked for: {targets}")
    limit = max_minutes or run_file.max_minutes
    whole = f", {limit:g} min in all" if limit else ""
    count = len(run_file.points)
    yield from wrapped(
        f"{run_file.title or run_file.name}: {count} point{'s' if count > 1 else ''}, seed {run_file.seed}, "
        f"at most {run_file.max_minutes_per_point:g} min a point{whole}"
    )
    mixtures = [point.mixture for point in run_file.points]
    lines = [line for mixture in mixtures for line in (*_third_bodies(mixture), *special_laws(mixture))]
    for line in dict.fromkeys(lines):
        yield from wrapped(line)
    yield from run_lines(run_file.gases)


def closing(run_file: RunFile, outcome: Outcome, measured: Sequence[str] = ()) -> Iterator[str]:
    """The table, what was missed, what to beware of, how to go on, and the folder.

    measured : lines about measured data, which follow the table.
    """
    points = list(outcome.points.values())
    yield from table(points)
    yield from measured
    if not outcome.interrupted:
        yield from remedies(points, run_file.max_minutes_per_point)
    yield from warnings(points)
    for text in outcome.set_aside:
        yield from wrapped(f"~ {text}; set aside as *.damaged and computed anew")
    if outcome.interrupted:
        finished = sum(point.status != "interrupted" for point in points)
        yield from wrapped(
            f"interrupted: {finished} of {outcome.asked} points are finished; "
            "what there is of the others is kept too. Give the same command again to go on from here."
        )
    elif len(points) < outcome.asked:
        yield from wrapped(
            f"! time was over with {outcome.asked - len(points)} of {outcome.asked} points not reached. "
            "Give the same command again, with more minutes, to go on from here."
        )
    reused = f", {outcome.reused} of them from before" if outcome.reused else ""
    compared = "comparison.csv, verdicts.csv, ranking.csv, " if measured else ""
    figures = "" if outcome.interrupted else ", figures/"
    yield from wrapped(
        f"{len(points)} points{reused}, {_duration(outcome.wall_seconds)}. Written: coefficients.csv, "
        f"distributions.csv, {compared}provenance.json{figures}"
    )
    yield f"{outcome.folder}"


def remedies(points: Sequence[Point], max_minutes: float) -> Iterator[str]:
    """A line for each point that missed a target: what is lacking and what would help.

    max_minutes : wall clock that a point may take, as the run file says.
    """
    missed = [point for point in points if missed_target(point)]
    for point in missed[:MOST_REMEDIES]:
        yield from wrapped(f"! {field_text(point.conditions.field)} Td: {_remedy(point, max_minutes)}")
    if len(missed) > MOST_REMEDIES:
        yield f"! and {len(missed) - MOST_REMEDIES} more points (column `reached` in coefficients.csv)"


def warnings(points: Sequence[Point]) -> Iterator[str]:
    """Each kind of warning once, with the fields that it holds for; a kind is what stands before a colon."""
    kinds: dict[str, list[tuple[str, str]]] = {}
    for point in points:
        conditions = point.conditions
        for text in (*point.warnings, *outside(conditions.mixture, conditions.field)):
            kinds.setdefault(text.partition(":")[0], []).append((field_text(point.conditions.field), text))
    found = list(kinds.values())
    for kind in found[:MOST_WARNINGS]:
        fields, texts = zip(*kind, strict=True)
        one = len(set(texts)) == 1
        place = f"~ {_range(fields)} Td" if one else f"~ {_range(fields)} Td, here for {fields[-1]} Td"
        yield from wrapped(f"{place}: {texts[-1]}" + ("" if one else " (all in provenance.json)"))
    if len(found) > MOST_WARNINGS:
        yield f"~ and {len(found) - MOST_WARNINGS} more kinds of warnings in provenance.json"


def _reach(target: Target) -> str:
    if target.from_Td == 0.0 and math.isinf(target.to_Td):
        return ""
    if math.isinf(target.to_Td):
        return f" from {target.from_Td:g} Td"
    return f" from {target.from_Td:g} to {target.to_Td:g} Td"


def _third_bodies(mixture: Mixture) -> Iterator[str]:
    for gas in mixture.gases:
        for process in mixture.acting(gas):
            if process.third_body is not None:
                bodies = mixture.third_bodies(gas, process)
                named = ", ".join(f"{efficiency:g} x {name}" for name, efficiency in bodies.items()) or "none"
                yield f"{gas.name}/{process.id}: third bodies that act: {named}"


def _remedy(point: Point, max_minutes: float) -> str:
    if point.status not in ("target missed", "interrupted"):
        return f"{point.status}: no steady swarm, so no target can be met."
    name, excess = point.worst
    if excess <= 1.0:
        return "a quantity with a target was not found; the reason follows."
    status = point.targets.get(name)
    asked = f" of {status.target}" if status is not None else ""
    if not math.isfinite(excess):
        return f'{name} was seen too seldom or never. Raise max_minutes_per_point, or give its target an "abs".'
    spent = point.wall_seconds / 60.0
    needed = 1.2 * spent * excess**2
    raised = f"max_minutes_per_point to about {math.ceil(needed)}"
    if spent < max_minutes:  # the campaign's limit came first
        raised = f"max_minutes by about {max(needed - spent, 0.1):.1g}"
    return (
        f"{name} has {excess:.2g} times the error{asked} asked for after {spent:.2g} min of its own. "
        f"Raise {raised}, or ask for less."
    )


def _range(fields: Iterable[str]) -> str:
    fields = list(dict.fromkeys(fields))
    return fields[0] if len(fields) == 1 else f"{fields[0]} to {fields[-1]}" if len(fields) > 3 else ", ".join(fields)


def _duration(seconds: float) -> str:
    return f"{seconds:.0f} s" if seconds < 120 else f"{seconds / 60:.0f} min"
