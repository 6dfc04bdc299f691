"""Energy distributions f0 on a logarithmic axis, each field labelled on its curve."""

import textwrap
from collections.abc import Sequence

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from swarmgauge.campaign.results import Results

from .groups import Group
from .style import GREY, SEQUENCE, WIDTH_INCHES

MOST_FIELDS = 6
_DECADES = 7


def eedf_figure(results: Results, groups: Sequence[Group], note: str) -> Figure:
    """One panel per mixture with up to six of its fields, dark for the lowest.

    note : a line under the title.
    """
    columns = min(len(groups), 2)
    rows = -(-len(groups) // 2)
    figure = Figure(figsize=(WIDTH_INCHES, 1.0 + 3.4 * rows), layout="constrained")
    for axes, group in zip(figure.subplots(rows, columns, squeeze=False).flat, groups, strict=False):
        _draw(axes, results, group)
        if len(groups) > 1:
            axes.set_title(textwrap.fill(group.label, 100 // columns))
    for axes in figure.axes[len(groups) :]:
        axes.remove()
    figure.suptitle(note, x=0.01, ha="left", fontsize=8, color=GREY)
    return figure


def _draw(axes: Axes, results: Results, group: Group) -> None:
    points = _spread(group.quantity("mean_energy"))
    shades = mpl.colormaps[SEQUENCE](np.linspace(0.0, 0.85, len(points)))
    highest, reach = 0.0, 0.0
    for point, shade in zip(points, shades, strict=True):
        rows = results.eedf(point["point"])
        edges = np.append(rows["energy_low_eV"], rows["energy_high_eV"][-1:])
        axes.stairs(rows["f0"], edges, baseline=None, color=shade, label=f"{point['E_over_N_Td']:.4g}")
        low = _to_edges(rows["f0"] - rows["f0_standard_error"])
        high = _to_edges(rows["f0"] + rows["f0_standard_error"])
        axes.fill_between(edges, low, high, step="post", color=shade, alpha=0.3, linewidth=0.0)
        highest = max(highest, rows["f0"].max(initial=0.0))
        seen = rows["energy_high_eV"][rows["f0"] > highest * 10.0**-_DECADES]
        reach = max(reach, seen.max(initial=0.0))
    axes.set_xlabel(r"energy $\varepsilon$ (eV)")
    axes.set_ylabel(r"$f_0$ (eV$^{-3/2}$)")
    if highest > 0.0:
        axes.set_yscale("log")
        axes.set_ylim(highest * 10.0**-_DECADES, 2.0 * highest)
        axes.set_xlim(0.0, reach)
        axes.legend(title=r"$E/N$ (Td)", title_fontsize=7.5, loc="upper right")


def _spread(rows: np.ndarray) -> np.ndarray:
    """At most six rows, evenly over all of them, the first and the last included."""
    places = np.linspace(0, len(rows) - 1, min(len(rows), MOST_FIELDS)).round().astype(int)
    return rows[places]


def _to_edges(values: np.ndarray) -> np.ndarray:
    """Bin values at the edges where their steps begin; the last is repeated, as a step plot wants it."""
    return np.append(values, values[-1:])
