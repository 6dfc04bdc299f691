"""The figures of a results folder, each as PNG and SVG."""

import io
from pathlib import Path

import matplotlib as mpl
from matplotlib.figure import Figure

from swarmgauge.campaign.results import open_results
from swarmgauge.gas.files import write_atomically

from .coefficients import coefficients_figure
from .eedf import eedf_figure
from .groups import Group, groups_of
from .style import COLOURS, RC

MOST_GROUPS = len(COLOURS)
_KEY = (
    "Points: Monte Carlo with one standard error. Lines: two-term solution; ratio: Monte Carlo to it. "
    "Arrows: 95 % upper bounds."
)


def draw_figures(folder: str | Path) -> list[Path]:
    """Draw the figures of a results folder into its figures/ and return their paths.

    Only the first five mixtures (or temperatures, or pressures) are drawn; the figure says how many are not.
    Raises ResultsError where the folder cannot be read.
    """
    results = open_results(folder)
    where = results.path / "figures"
    groups = groups_of(results)
    if not groups:  # no point has a steady swarm
        return []
    where.mkdir(exist_ok=True)
    title = _title(groups)
    with mpl.rc_context():
        mpl.rcdefaults()  # a user's own style must not change the bytes
        mpl.rcParams.update(RC)
        figures = {
            "coefficients": coefficients_figure(groups[:MOST_GROUPS], f"{title}\n{_KEY}"),
            "eedf": eedf_figure(results, groups[:MOST_GROUPS], f"{title}\nBands: one standard error."),
        }
        return [path for name, figure in figures.items() for path in save(figure, where / name)]


def _title(groups: list[Group]) -> str:
    more = len(groups) - MOST_GROUPS
    gas = groups[0].state if len(groups) == 1 else f"{len(groups)} gases or states"
    return f"{gas}; {more} of them not drawn" if more > 0 else gas


def save(figure: Figure, path: Path) -> list[Path]:
    """Write a figure in both forms, without date or version inside."""
    figure.draw_without_rendering()  # lays the panels out, which takes a second
    figure.set_layout_engine("none")  # and need not be done again for the second form
    saved = []
    for form, metadata in (("png", {"Software": None}), ("svg", {"Date": None, "Creator": None})):
        content = io.BytesIO()
        figure.savefig(content, format=form, metadata=metadata)
        saved.append(path.with_suffix(f".{form}"))
        write_atomically(saved[-1], content.getvalue())
    return saved
