"""A comparison as tables of the results folder, as lines of a terminal, and for JSON."""

import math
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import groupby
from pathlib import Path
from typing import Any

from swarmgauge.campaign.console import wrapped
from swarmgauge.campaign.measured import Datum, read_measured
from swarmgauge.campaign.results import MEASURED, Results, ResultsError, csv_text, open_results
from swarmgauge.campaign.store import ResultsFolder

from .comparison import Compared, compare
from .ranking import Ranked, ranking
from .verdict import ALL, Verdict, verdicts

COMPARISON, VERDICTS, RANKING = "comparison.csv", "verdicts.csv", "ranking.csv"
COMPARISON_COLUMNS = (
    "mixture",
    "temperature_K",
    "pressure_Pa",
    "quantity",
    "E_over_N_Td",
    "measured",
    "measured_standard_error",
    "computed",
    "computed_standard_error",
    "interpolation_error",
    "unit",
    "deviation",
    "pull",
    "not_compared_because",
    "gas",
    "measured_temperature_K",
    "measured_pressure_Pa",
    "method",
    "source",
)
VERDICT_COLUMNS = (
    "mixture",
    "temperature_K",
    "pressure_Pa",
    "quantity",
    "decade_Td",
    "count",
    "chi_squared",
    "chi_squared_per_datum",
    "probability",
    "mean_deviation",
    "runs",
    "runs_probability",
    "trend",
    "verdict",
)
RANKING_COLUMNS = (
    "gas",
    "place",
    "mixture",
    "count",
    "chi_squared",
    "chi_squared_per_datum",
    "probability",
    "told_apart_from_best",
    "differs_most_in",
    "differs_most_at_Td",
    "value",
    "value_of_best",
    "unit",
)
_MOST_REASONS = 8


@dataclass(frozen=True, eq=False)
class Comparison:
    """A results folder against measured data.

    results : what was compared. compared : each datum with each mixture of its gas. verdicts, ranking : what it comes
    to.
    """

    results: Results
    compared: list[Compared]
    verdicts: list[Verdict]
    ranking: list[Ranked]

    @property
    def folder(self) -> Path:
        """The results folder, where the comparison is written too."""
        return self.results.path

    def __repr__(self) -> str:
        count = sum(pair.computed is not None for pair in self.compared)
        return f"Comparison({self.folder}: {count} of {len(self.compared)} data compared)"


def compare_folder(folder: str | Path, files: Sequence[Path] = ()) -> Comparison:
    """Compare a results folder with the measurements that its run kept there, or with those of other files; write it.

    Raises ResultsError where the folder cannot be read or has no data, MeasuredError for a file, FolderError where a
    run is at work on it.
    """
    results = open_results(folder)
    data = _data(results, files)
    compared = compare(results, data)
    comparison = Comparison(results, compared, verdicts(compared), ranking(compared))
    store = ResultsFolder(results.path)
    with store.lock():
        store.write(COMPARISON, csv_text(COMPARISON_COLUMNS, map(_comparison_row, compared)))
        store.write(VERDICTS, csv_text(VERDICT_COLUMNS, map(_verdict_row, comparison.verdicts)))
        store.write(RANKING, csv_text(RANKING_COLUMNS, map(_ranking_row, comparison.ranking)))
    return comparison


def _data(results: Results, files: Sequence[Path]) -> list[Datum]:
    if files:
        return [datum for path in files for datum in read_measured(path)]
    kept = results.path / MEASURED
    if not kept.is_file():
        raise ResultsError(
            f"{results.path}: its run had no section [measured]. Add one to the run file and run again (the points are "
            "kept), or name files with --measured."
        )
    return read_measured(kept)


def comparison_lines(comparison: Comparison) -> Iterator[str]:
    """One line per measured quantity and mixture, then the ranking, then what was not compared and why."""
    whole = [verdict for verdict in comparison.verdicts if verdict.decade == ALL]
    for _, block in groupby(whole, key=lambda verdict: str(verdict.state)):
        found = list(block)
        yield from wrapped(f"measured in {found[0].state.gas}, against {found[0].state}:")
        yield f"{'quantity':<29}{'n':>4} chi2/n trend verdict"
        for verdict in found:
            start = f"{verdict.quantity:<29}{verdict.count:>4} {verdict.reduced:>6.2f} {verdict.trend:<5}"
            yield from wrapped(f"{start} {verdict.words}", " " * 4)
    for _, places in groupby(comparison.ranking, key=lambda ranked: ranked.gas):
        yield from _ranking_lines(list(places))
    yield from _reasons(comparison.compared)


def _ranking_lines(ranked: Sequence[Ranked]) -> Iterator[str]:
    yield from wrapped(f"sets of {ranked[0].gas}, ranked by {ranked[0].count} data that all can meet:")
    for one in ranked:
        text = f"    {one.place}. {one.mixture}: chi2/n {one.reduced:.2f}"
        if one.apart is not None:
            apart = one.apart
            text += "" if one.told_apart else ", not told apart from the best"
            text += (
                f"; differs most in {apart.quantity} at {apart.E_over_N_Td:.4g} Td: {apart.value:.3g} against "
                f"{apart.best:.3g} {apart.unit} ({100.0 * apart.ratio:+.2g} %)"
            )
        yield from wrapped(text, " " * 7)


def _reasons(compared: Iterable[Compared]) -> Iterator[str]:
    kinds: dict[tuple[str, str], set[str]] = {}
    for pair in compared:
        if pair.why_not is not None:
            what = f"{pair.datum.quantity} in {pair.datum.gas}"
            kinds.setdefault((what, pair.why_not), set()).add(pair.datum.place)
    for (what, why), places in list(kinds.items())[:_MOST_REASONS]:
        yield from wrapped(f"not compared: {len(places)} of {what}, because {why}")
    if len(kinds) > _MOST_REASONS:
        yield f"not compared: more for {len(kinds) - _MOST_REASONS} other reasons, in {COMPARISON}"


def comparison_json(comparison: Comparison) -> dict[str, Any]:
    """The tables as JSON; null where a number is none."""
    tables = {
        "comparison": (COMPARISON_COLUMNS, map(_comparison_row, comparison.compared)),
        "verdicts": (VERDICT_COLUMNS, map(_verdict_row, comparison.verdicts)),
        "ranking": (RANKING_COLUMNS, map(_ranking_row, comparison.ranking)),
    }
    return {
        "folder": str(comparison.folder),
        **{name: [dict(zip(columns, row, strict=True)) for row in rows] for name, (columns, rows) in tables.items()},
    }


def _comparison_row(pair: Compared) -> list[Any]:
    datum, state, found = pair.datum, pair.state, pair.computed
    computed: list[Any] = [None, None, None]
    off: list[Any] = [None, None]
    if found is not None:
        computed = [_digits(x) for x in (found.value, found.standard_error, found.interpolation_error)]
        off = [_digits(pair.deviation), _digits(pair.pull)]
    return [
        *_state_cells(state),
        datum.quantity,
        datum.E_over_N_Td,
        datum.value,
        datum.standard_error,
        *computed,
        datum.unit,
        *off,
        pair.why_not,
        str(datum.gas),
        datum.temperature_K,
        datum.pressure_Pa,
        datum.method,
        datum.source,
    ]


def _verdict_row(verdict: Verdict) -> list[Any]:
    numbers = (verdict.chi_squared, verdict.reduced, verdict.probability, verdict.deviation)
    return [
        *_state_cells(verdict.state),
        verdict.quantity,
        verdict.decade,
        verdict.count,
        *map(_digits, numbers),
        verdict.runs,
        _digits(verdict.runs_probability),
        verdict.trend,
        verdict.words,
    ]


def _ranking_row(ranked: Ranked) -> list[Any]:
    apart = ranked.apart
    where: list[Any] = [None] * 5
    if apart is not None:
        where = [apart.quantity, apart.E_over_N_Td, _digits(apart.value), _digits(apart.best), apart.unit]
    numbers = (ranked.chi_squared, ranked.reduced, ranked.probability)
    told = None if apart is None else "yes" if ranked.told_apart else "no"
    return [ranked.gas, ranked.place, ranked.mixture, ranked.count, *map(_digits, numbers), told, *where]


def _state_cells(state: Any) -> list[Any]:
    if state is None:
        return [None, None, None]
    return [state.mixture, state.temperature_K, None if math.isnan(state.pressure_Pa) else state.pressure_Pa]


def _digits(value: float) -> float | None:
    """Six digits: special functions differ in their last bits between processors."""
    return float(f"{value:.6g}") if math.isfinite(value) else None
