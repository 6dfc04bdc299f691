"""Measured data with the computed curves, and below each panel what lies between them."""

import re
import textwrap
from collections.abc import Sequence
from pathlib import Path

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.ticker import LogLocator

from swarmgauge.gauge.comparing import Comparison
from swarmgauge.gauge.comparison import Compared, computed_curve

from .coefficients import scale_log
from .figures import save
from .style import COLOURS, DASHES, GREY, MARKERS, RC, WIDTH_INCHES

_MAIN, _BELOW = 2.4, 1.3  # heights of a panel and of the deviations below it
_MOST_SETS = len(COLOURS)
_LEAST_SPREAD = 10.0  # per cent about zero that is shown
_BESIDE = 1.06  # sets stand side by side at one field
_SOURCE_WIDTH = 110
_SYMBOLS = (*MARKERS, "<", ">", "p", "h", "P", "X")
_KEY = (
    "Symbols: measured, one standard error. Lines: computed. "
    "Below: computed over measured value, less one, with both errors."
)
_AXES = {
    "drift_velocity_bulk": r"drift velocity, bulk (m/s)",
    "drift_velocity_flux": r"drift velocity, flux (m/s)",
    "characteristic_energy_T_bulk": r"$D_T/\mu$, bulk (eV)",
    "characteristic_energy_T_flux": r"$D_T/\mu$, flux (eV)",
    "characteristic_energy_L_bulk": r"$D_L/\mu$, bulk (eV)",
    "characteristic_energy_L_flux": r"$D_L/\mu$, flux (eV)",
    "townsend_alpha_over_N": r"$\alpha/N$, steady stream (m$^2$)",
    "townsend_eta_over_N": r"$\eta/N$, steady stream (m$^2$)",
    "townsend_effective_over_N": r"$(\alpha-\eta)/N$, steady stream (m$^2$)",
}


def draw_comparison(comparison: Comparison) -> list[Path]:
    """Draw one figure for every gas with compared data into figures/ of the folder; returns the paths.

    Only the first five sets of a gas are drawn. Raises OSError where they cannot be written.
    """
    gases: dict[str, list[Compared]] = {}
    for pair in comparison.compared:
        if pair.state is not None and pair.computed is not None:
            gases.setdefault(pair.state.gas, []).append(pair)
    where = comparison.folder / "figures"
    where.mkdir(exist_ok=True)
    for old in where.glob("comparison-*"):  # of other data
        old.unlink()
    paths = []
    with mpl.rc_context():
        mpl.rcdefaults()  # a user's own style must not change the bytes
        mpl.rcParams.update(RC)
        for gas, pairs in gases.items():
            slug = re.sub(r"[^A-Za-z0-9.]+", "-", gas)
            paths += save(_figure(comparison, gas, pairs), where / f"comparison-{slug}")
    return paths


def _figure(comparison: Comparison, gas: str, pairs: Sequence[Compared]) -> Figure:
    quantities = list(dict.fromkeys(pair.datum.quantity for pair in pairs))
    sets = list(dict.fromkeys(str(pair.state) for pair in pairs))
    sources = list(dict.fromkeys(pair.datum.source for pair in pairs))
    rows, columns = -(-len(quantities) // 2), min(len(quantities), 2)
    height = 1.3 + 0.14 * len(sources) + (_MAIN + _BELOW) * rows
    figure = Figure(figsize=(WIDTH_INCHES, height), layout="constrained")
    grid = figure.subplots(
        2 * rows,
        columns,
        sharex="col" if rows == 1 else False,
        squeeze=False,
        gridspec_kw={"height_ratios": [_MAIN, _BELOW] * rows},
    )
    for place, quantity in enumerate(quantities):
        row, column = 2 * (place // 2), place % 2
        here = [pair for pair in pairs if pair.datum.quantity == quantity]
        _draw(grid[row, column], comparison, here, sets, sources)
        _draw_deviations(grid[row + 1, column], here, sets, sources)
        grid[row, column].set_ylabel(_AXES.get(quantity, quantity.replace("_", " ")))
        grid[row + 1, column].set_xlim(grid[row, column].get_xlim())
    for axes in grid.flat:
        if not axes.has_data():
            axes.remove()
    more = len(sets) - _MOST_SETS
    data = len({(pair.datum.place, pair.datum.E_over_N_Td) for pair in pairs})
    note = f"{gas}: {data} measured values" + (f"; {more} of {len(sets)} sets not drawn" if more > 0 else "")
    figure.suptitle(f"{note}\n{_KEY}", x=0.01, ha="left", fontsize=8, color=GREY)
    handles = [Line2D([], [], color=COLOURS[k], linestyle=DASHES[k]) for k in range(min(len(sets), _MOST_SETS))]
    handles += [_symbol(k) for k in range(len(sources))]
    names = [textwrap.shorten(source, _SOURCE_WIDTH, placeholder=" ...") for source in sources]
    figure.legend(handles, [*sets[:_MOST_SETS], *names], loc="outside lower left")
    return figure


def _symbol(number: int) -> Line2D:
    return Line2D(
        [], [], color=GREY, linestyle="none", marker=_SYMBOLS[number % len(_SYMBOLS)], markerfacecolor="white"
    )


def _draw(
    axes: Axes, comparison: Comparison, pairs: Sequence[Compared], sets: Sequence[str], sources: Sequence[str]
) -> None:
    data = list({(pair.datum.place, pair.datum.E_over_N_Td): pair.datum for pair in pairs}.values())
    fields = np.array([datum.E_over_N_Td for datum in data])
    low, high = 0.7 * fields.min(), 1.4 * fields.max()
    values = [datum.value + sign * datum.standard_error for datum in data for sign in (-1, 1)]
    for number, name in enumerate(sets[:_MOST_SETS]):
        state = next((pair.state for pair in pairs if str(pair.state) == name), None)
        curve = None if state is None else computed_curve(comparison.results, state, pairs[0].datum.quantity)
        if curve is not None:
            first, last = np.searchsorted(curve[0], low), np.searchsorted(curve[0], high)
            near = slice(max(first - 1, 0), last + 1)  # one point more on either side: lines end at the frame
            axes.plot(curve[0][near], curve[1][near], color=COLOURS[number], linestyle=DASHES[number], marker=".")
            values += curve[1][first:last].tolist()
    for datum in data:
        marker = _SYMBOLS[sources.index(datum.source) % len(_SYMBOLS)]
        axes.errorbar(
            datum.E_over_N_Td,
            datum.value,
            datum.standard_error,
            color=GREY,
            fmt=marker,
            markerfacecolor="white",
            zorder=3,
        )
    if low > 0.0:
        axes.set_xscale("log")
        axes.set_xlim(low, high)
        axes.xaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        axes.xaxis.set_major_formatter("{x:g}")
    if min(values) > 0.0:
        scale_log(axes, min(values), max(values))


def _draw_deviations(axes: Axes, pairs: Sequence[Compared], sets: Sequence[str], sources: Sequence[str]) -> None:
    spread = [_LEAST_SPREAD]
    drawn = min(len(sets), _MOST_SETS)
    for pair in pairs:
        number = sets.index(str(pair.state))
        if number >= _MOST_SETS or np.isnan(pair.deviation):
            continue
        error = 100.0 * np.hypot(pair.datum.standard_error, pair.computed_error) / pair.datum.value
        marker = _SYMBOLS[sources.index(pair.datum.source) % len(_SYMBOLS)]
        field = pair.datum.E_over_N_Td * _BESIDE ** (number - 0.5 * (drawn - 1))
        axes.errorbar(field, 100.0 * pair.deviation, error, color=COLOURS[number], fmt=marker, elinewidth=0.8)
        spread.append(abs(100.0 * pair.deviation) + error)
    axes.axhline(0.0, color=GREY, linewidth=0.6)
    axes.set_ylim(-1.1 * max(spread), 1.1 * max(spread))
    if pairs[0].datum.E_over_N_Td > 0.0:
        axes.set_xscale("log")
        axes.xaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        axes.xaxis.set_major_formatter("{x:g}")
    axes.set_ylabel("deviation (%)")
    axes.set_xlabel(r"$E/N$ (Td)")
