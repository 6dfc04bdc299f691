"""What a comparison comes to: per quantity and decade of E/N, in numbers and in words."""

import math
import statistics
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import groupby

from .comparison import Compared, State
from .statistics import chi_squared_probability, one_sign_probability, runs_of, runs_probability

ALL = "all"
_DOUBTFUL, _DISAGREES = 0.05, 0.001  # probabilities of chi-squared
_TREND = 0.05
_ENOUGH_FOR_TREND = 5
_ENOUGH_FOR_OFFSET = 3
_LARGEST_OFFSET = 2.0  # stated standard errors


@dataclass(frozen=True)
class Verdict:
    """One quantity of one gas, all data or those of one decade.

    decade : "10 to 100", or "all". chi_squared, probability : of so much or more by chance. deviation : computed over
    measured value less one, mean weighted as in chi-squared. runs, runs_probability : NaN where there are too few data.
    trend : "none", "high", "low" (throughout), "turns" or "few". words : the verdict.
    """

    state: State
    quantity: str
    decade: str
    count: int
    chi_squared: float
    probability: float
    deviation: float
    runs: int
    runs_probability: float
    trend: str
    words: str

    @property
    def reduced(self) -> float:
        """Chi-squared per datum: nothing was fitted."""
        return self.chi_squared / self.count


def verdicts(compared: Iterable[Compared]) -> list[Verdict]:
    """For every state and quantity, in the order they come: all data, then decade by decade."""
    groups: dict[tuple[State, str], list[Compared]] = {}
    for pair in compared:
        if pair.state is not None and pair.computed is not None:
            groups.setdefault((pair.state, pair.datum.quantity), []).append(pair)
    found = []
    for (state, quantity), pairs in groups.items():
        pairs.sort(key=lambda pair: (pair.datum.E_over_N_Td, pair.datum.place))
        found.append(judge(state, quantity, ALL, pairs))
        for decade, part in groupby(pairs, key=lambda pair: _decade(pair.datum.E_over_N_Td)):
            found.append(judge(state, quantity, decade, list(part)))
    return found


def judge(state: State, quantity: str, decade: str, pairs: Sequence[Compared]) -> Verdict:
    """The verdict on data sorted by field."""
    chi_squared = math.fsum(pair.pull**2 for pair in pairs)
    probability = chi_squared_probability(chi_squared, len(pairs))
    signs = [pair.pull > 0.0 for pair in pairs]
    runs, above = runs_of(signs), sum(signs)
    enough = len(pairs) >= _ENOUGH_FOR_TREND
    by_chance = runs_probability(runs, above, len(pairs) - above) if enough and runs > 1 else math.nan
    trend = _trend(signs, by_chance) if enough else "few"
    return Verdict(
        state=state,
        quantity=quantity,
        decade=decade,
        count=len(pairs),
        chi_squared=chi_squared,
        probability=probability,
        deviation=mean_deviation(pairs),
        runs=runs,
        runs_probability=by_chance,
        trend=trend,
        words=_words(pairs, probability, trend),
    )


def mean_deviation(pairs: Sequence[Compared]) -> float:
    """Mean of computed over measured value less one, by the weights of chi-squared; NaN where none is above zero."""
    weighted = []
    for pair in pairs:
        if not math.isnan(pair.deviation):
            error = math.hypot(pair.datum.standard_error, pair.computed_error) / pair.datum.value
            weighted.append((pair.deviation, error**-2))
    total = math.fsum(weight for _, weight in weighted)
    return math.fsum(deviation * weight for deviation, weight in weighted) / total if weighted else math.nan


def _trend(signs: Sequence[bool], by_chance: float) -> str:
    if runs_of(signs) == 1:
        seldom = one_sign_probability(len(signs)) < _TREND
        return ("high" if signs[0] else "low") if seldom else "none"
    return "turns" if by_chance < _TREND else "none"


def _words(pairs: Sequence[Compared], probability: float, trend: str) -> str:
    worst = max(pairs, key=lambda pair: abs(pair.pull))
    if sum(pair.computed_error > pair.datum.standard_error for pair in pairs) > len(pairs) / 2:
        return "undecided: the computed errors exceed those of the measurement. Ask for more accuracy"
    if probability < _DOUBTFUL and (common := _common_offset(pairs)):
        return common
    if probability < _DOUBTFUL:
        grade = "disagrees" if probability < _DISAGREES else "doubtful"
        return f"{grade}{_course(pairs, trend)}; worst at {worst.datum.E_over_N_Td:.4g} Td: {_size(worst)}"
    if trend in ("high", "low", "turns"):
        return f"agrees within its errors, but{_course(pairs, trend)}"
    where = "on average" if len(pairs) > 1 else f"at {worst.datum.E_over_N_Td:.4g} Td"
    return f"agrees ({_per_cent(mean_deviation(pairs))} {where})"


def _common_offset(pairs: Sequence[Compared]) -> str:
    """Words for data all on one side that scatter as they should about an offset below two of their errors, or "".

    Errors of measured series are often common to all data: then such an offset is no disagreement.
    """
    known = [pair for pair in pairs if not math.isnan(pair.deviation)]
    if len(known) < _ENOUGH_FOR_OFFSET or len({pair.deviation > 0.0 for pair in known}) > 1:
        return ""
    offset = mean_deviation(known)
    stated = statistics.median(pair.datum.standard_error / pair.datum.value for pair in known)
    errors = [math.hypot(pair.datum.standard_error, pair.computed_error) / pair.datum.value for pair in known]
    about = math.fsum(((pair.deviation - offset) / error) ** 2 for pair, error in zip(known, errors, strict=True))
    if abs(offset) > _LARGEST_OFFSET * stated or chi_squared_probability(about, len(known) - 1) < _DOUBTFUL:
        return ""
    return (
        f"doubtful: {_per_cent(offset)} throughout, {abs(offset) / stated:.1f} standard errors; agrees if these are "
        "common to all data"
    )


def _course(pairs: Sequence[Compared], trend: str) -> str:
    """How the deviations go with the field."""
    if trend in ("high", "low"):
        return f" {_per_cent(mean_deviation(pairs))} throughout"
    if trend != "turns":
        return ""
    half = len(pairs) // 2
    split = pairs[half].datum.E_over_N_Td
    low, high = _per_cent(mean_deviation(pairs[:half])), _per_cent(mean_deviation(pairs[half:]))
    return f" {low} below {split:.3g} Td, {high} from there on"


def _size(pair: Compared) -> str:
    return f"{_per_cent(pair.deviation)}, {abs(pair.pull):.1f} standard errors"


def _per_cent(deviation: float) -> str:
    return "no per cent" if math.isnan(deviation) else f"{100.0 * deviation:+.2g} %"


def _decade(field: float) -> str:
    if field <= 0.0:
        return "0"
    low = 10.0 ** math.floor(math.log10(field))
    return f"{low:g} to {10.0 * low:g}"
