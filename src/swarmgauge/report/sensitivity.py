"""Maps of what coefficients hang on: processes against fields."""

from itertools import groupby
from pathlib import Path

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from swarmgauge.campaign.console import describe, field_text
from swarmgauge.gauge.sensitivity import PointSensitivity, Sensitivity

from .figures import save
from .style import RC, WIDTH_INCHES

_PANELS = {
    "drift_velocity_flux": "drift velocity, flux",
    "mean_energy": "mean energy",
    "diffusion_T_times_N_flux": "transverse diffusion, flux",
    "net_frequency_over_N": "net frequency",
}
_MOST_PROCESSES = 12
_LEAST = 0.02  # of a derivative that is worth a row
_ROW_INCHES = 0.2
_SHADES = "PuOr"  # orange to violet through white: both ends dark in grey, the sign stands in the cell
_LARGEST = 1.0


def draw_sensitivity(sensitivity: Sensitivity) -> list[Path]:
    """Draw one figure for every mixture into figures/ of the folder; returns the paths."""
    where = sensitivity.folder / "figures"
    where.mkdir(exist_ok=True)
    for old in where.glob("sensitivity-*"):  # of other mixtures
        old.unlink()
    paths = []
    with mpl.rc_context():
        mpl.rcdefaults()  # a user's own style must not change the bytes
        mpl.rcParams.update(RC)
        groups = groupby(sensitivity.points, key=lambda point: id(point.conditions.mixture))
        for number, (_, points) in enumerate(groups, start=1):
            paths += save(sensitivity_figure(list(points)), where / f"sensitivity-{number}")
    return paths


def sensitivity_figure(points: list[PointSensitivity]) -> Figure:
    """One panel for each coefficient: strongest processes in rows, fields in columns, derivatives in the cells."""
    rows = {name: chosen for name in _PANELS if (chosen := _processes(points, name))}
    heights = [len(chosen) + 3 for chosen in rows.values()]
    figure = Figure(figsize=(WIDTH_INCHES, _ROW_INCHES * sum(heights) + 0.6), layout="constrained")
    panels = figure.subplots(len(rows), 1, squeeze=False, gridspec_kw={"height_ratios": heights})[:, 0]
    for axes, (name, chosen) in zip(panels, rows.items(), strict=True):
        _draw(axes, points, name, chosen)
    panels[-1].set_xlabel("E/N (Td)")
    figure.suptitle(
        f"{describe(points[0].conditions.mixture)}\nd ln(coefficient) / d ln(cross section), two-term, in per cent of "
        "change for one per cent",
        x=0.01,
        ha="left",
        fontsize=9,
    )
    return figure


def _processes(points: list[PointSensitivity], quantity: str) -> list[str]:
    """Those with the largest derivative at any field, largest first."""
    largest = {
        process: max(abs(point.values[process].get(quantity, 0.0)) for point in points if process in point.values)
        for process in dict.fromkeys(name for point in points for name in point.values)
    }
    wanted = [process for process, value in largest.items() if value >= _LEAST]
    return sorted(wanted, key=lambda process: -largest[process])[:_MOST_PROCESSES]


def _draw(axes: Axes, points: list[PointSensitivity], quantity: str, chosen: list[str]) -> None:
    values = np.array([[point.values.get(process, {}).get(quantity, np.nan) for point in points] for process in chosen])
    axes.imshow(values, cmap=_SHADES, vmin=-_LARGEST, vmax=_LARGEST, aspect="auto")
    for (row, column), value in np.ndenumerate(values):
        if np.isfinite(value) and abs(value) >= 0.005:
            dark = abs(value) > 0.6 * _LARGEST
            axes.text(
                column, row, f"{value:+.2f}", ha="center", va="center", fontsize=5.5, color="white" if dark else "black"
            )
    axes.set_yticks(range(len(chosen)), chosen, fontsize=5.5)
    axes.set_xticks(range(len(points)), [field_text(point.conditions.field) for point in points], fontsize=6)
    axes.grid(False)
    axes.tick_params(length=0)
    axes.set_title(_PANELS[quantity])
