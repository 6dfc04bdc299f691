"""Coefficients against the reduced field: points with error bars, and the two-term solution as a line."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.ticker import LogFormatterSciNotation, LogLocator, NullFormatter

from swarmgauge.campaign.results import ratio_to_two_term

from .groups import Group
from .style import COLOURS, DASHES, GREY, MARKERS, WIDTH_INCHES


@dataclass(frozen=True)
class Panel:
    """One small plot: its axis label, and quantity to label."""

    axis: str
    quantities: dict[str, str]


PANELS = (
    Panel(
        r"drift velocity $W$ (m/s)",
        {"drift_velocity_flux": "flux", "drift_velocity_bulk": "bulk"},
    ),
    Panel(r"mean energy $\langle\varepsilon\rangle$ (eV)", {"mean_energy": ""}),
    Panel(
        r"flux diffusion $DN$ (1/(m s))",
        {"diffusion_L_times_N_flux": r"$D_L$", "diffusion_T_times_N_flux": r"$D_T$"},
    ),
    Panel(
        r"characteristic energy $D/\mu$, flux (eV)",
        {"characteristic_energy_L_flux": r"$D_L/\mu$", "characteristic_energy_T_flux": r"$D_T/\mu$"},
    ),
    Panel(
        r"frequency $\nu/N$ (m$^3$/s)",
        {"ionization_frequency_over_N": "ionization", "attachment_frequency_over_N": "attachment"},
    ),
    Panel(r"net frequency $(\nu_i-\nu_a)/N$ (m$^3$/s)", {"net_frequency_over_N": ""}),
)
_PLAIN = (1e-3, 1e4)  # numbers in between are labelled without a power of ten
_MAIN, _RATIO = 3.0, 1.0  # heights of a panel and of the ratios below it
_SMALLEST_SPREAD, _LARGEST_SPREAD = 0.02, 0.5  # of the ratios about 1 that are shown
_DECADES_AROUND_ZERO = 4  # a signed axis is linear below this part of its largest value


def coefficients_figure(groups: Sequence[Group], note: str) -> Figure:
    """A page of panels; colour tells the mixture, or the quantity where there is one mixture only.

    note : a line under the title.
    """
    figure = Figure(figsize=(WIDTH_INCHES, 10.2), layout="constrained")
    heights = [_MAIN, _RATIO] * (len(PANELS) // 2)
    rows = figure.subplots(len(PANELS), 2, sharex="col", gridspec_kw={"height_ratios": heights})
    for place, panel in enumerate(PANELS):
        row, column = 2 * (place // 2), place % 2
        _draw(rows[row, column], panel, groups)
        _draw_ratio(rows[row + 1, column], panel, groups)
    figure.suptitle(note, x=0.01, ha="left", fontsize=8, color=GREY)
    if len(groups) > 1:
        lines = [Line2D([], [], color=COLOURS[number], linewidth=2.0) for number in range(len(groups))]
        figure.legend(lines, [group.label for group in groups], loc="outside lower left")
    return figure


def _draw(axes: Axes, panel: Panel, groups: Sequence[Group]) -> None:
    for kind, quantity in enumerate(panel.quantities):
        for number, group in enumerate(groups):
            _curve(axes, group.quantity(quantity), COLOURS[number if len(groups) > 1 else kind], kind)
    axes.set_ylabel(panel.axis)
    _scale(axes, [group.quantity(quantity) for group in groups for quantity in panel.quantities])
    if len(panel.quantities) > 1:
        handles = [_sample(COLOURS[0 if len(groups) > 1 else kind], kind) for kind in range(len(panel.quantities))]
        axes.legend(handles, panel.quantities.values())


def _draw_ratio(axes: Axes, panel: Panel, groups: Sequence[Group]) -> None:
    """Monte Carlo over two-term value, with the error of the former."""
    spread = [_SMALLEST_SPREAD]
    for kind, quantity in enumerate(panel.quantities):
        for number, group in enumerate(groups):
            rows = group.quantity(quantity)
            ratio, error = ratio_to_two_term(rows)
            shade = COLOURS[number if len(groups) > 1 else kind]
            face = shade if kind == 0 else "white"
            axes.errorbar(rows["E_over_N_Td"], ratio, error, color=shade, fmt=MARKERS[kind], markerfacecolor=face)
            spread += np.abs(ratio - 1.0)[np.isfinite(ratio)].tolist()
    reach = 1.15 * min(max(spread), _LARGEST_SPREAD)  # a ratio near a zero of the value would hide all others
    axes.set_ylim(1.0 - reach, 1.0 + reach)
    axes.axhline(1.0, color=GREY, linewidth=0.6)
    axes.set_ylabel("ratio")
    axes.set_xlabel(r"$E/N$ (Td)")


def _sample(shade: str, kind: int) -> Line2D:
    """What a curve looks like, for a legend."""
    face = shade if kind == 0 else "white"
    return Line2D([], [], color=shade, linestyle=DASHES[kind], marker=MARKERS[kind], markerfacecolor=face)


def _curve(axes: Axes, rows: np.ndarray, shade: str, kind: int) -> None:
    """Points with error bars; an arrow at the upper bound of what was never seen; the two-term line."""
    axes.plot(rows["E_over_N_Td"], rows["two_term"], color=shade, linestyle=DASHES[kind], zorder=1)
    bounded = ~np.isnan(rows["upper_bound"])
    seen, never = rows[~bounded], rows[bounded]
    axes.errorbar(
        seen["E_over_N_Td"],
        seen["value"],
        seen["standard_error"],
        color=shade,
        fmt=MARKERS[kind],
        markerfacecolor=shade if kind == 0 else "white",
        markeredgewidth=0.9,
        elinewidth=0.9,
        zorder=2,
    )
    axes.plot(never["E_over_N_Td"], never["upper_bound"], color=shade, marker=r"$\downarrow$", linestyle="none")


def _scale(axes: Axes, curves: Sequence[np.ndarray]) -> None:
    """Logarithmic where all is above zero, signed logarithmic where signs change; the points fill the panel."""
    rows = np.concatenate(curves)
    if rows["E_over_N_Td"].min(initial=0.0 if rows.size == 0 else np.inf) > 0.0:
        axes.set_xscale("log")
        axes.xaxis.set_major_locator(LogLocator(subs=(1.0, 3.0)))
        axes.xaxis.set_major_formatter("{x:g}")
    values = np.where(np.isnan(rows["upper_bound"]), rows["value"], rows["upper_bound"])
    values = np.concatenate([values, rows["two_term"][np.isnan(rows["upper_bound"])]])
    values = values[np.isfinite(values) & (values != 0.0)]
    if values.size == 0:
        return
    if values.min() > 0.0:
        scale_log(axes, values.min(), values.max())
    else:
        largest = np.abs(values).max()
        axes.set_yscale("symlog", linthresh=10.0 ** (np.floor(np.log10(largest)) - _DECADES_AROUND_ZERO + 1))
        axes.axhline(0.0, color=GREY, linewidth=0.6)


def scale_log(axes: Axes, low: float, high: float) -> None:
    """A logarithmic axis that the values fill, labelled within its decades where there are few."""
    axes.set_yscale("log")
    margin = (high / low) ** 0.06 * 1.05
    axes.set_ylim(low / margin, high * margin)
    if high / low < 100.0:
        axes.yaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        axes.yaxis.set_minor_formatter(NullFormatter())
        if low > _PLAIN[0] and high < _PLAIN[1]:
            axes.yaxis.set_major_formatter("{x:g}")
        else:
            axes.yaxis.set_major_formatter(LogFormatterSciNotation(minor_thresholds=(np.inf, np.inf)))
