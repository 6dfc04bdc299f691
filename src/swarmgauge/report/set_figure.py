"""A figure of a set: cross sections in small panels by kind, every curve labelled on its line."""

import textwrap
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.colors import to_rgb
from matplotlib.figure import Figure
from matplotlib.ticker import LogLocator, NullFormatter
from matplotlib.transforms import Bbox

from swarmgauge.campaign.findings import counted
from swarmgauge.gas import Gas
from swarmgauge.gas.audit.beb import beb_cross_section
from swarmgauge.gas.audit.reference import ORBITALS
from swarmgauge.gas.process import Process
from swarmgauge.gauge.checking import Checked
from swarmgauge.gauge.probe import Probed

from .figures import save
from .style import COLOURS, DASHES, GREY, RC, WIDTH_INCHES

_SLOW_EV = 4.0  # thresholds of vibration and rotation lie below
_DECADES = 4.5  # below the largest value of a panel
_MOST_EV, _LEAST_EV = 1e4, 1e-2
_POINTS = 1200
_PLACES = 40  # along a curve where its label may stand
_LABEL = 6.0  # font size
_DARKER = 0.75  # letters are thinner than they look: the colour of the line times this
_HALO = {"boxstyle": "square,pad=0.05", "facecolor": "white", "edgecolor": "none", "alpha": 0.75}
Panels = dict[str, list[Process]]


def draw_set(checked: Checked, folder: str | Path) -> list[Path]:
    """Draw a checked set as <name>.png and <name>.svg into a folder, which is made; returns the paths.

    Raises OSError where they cannot be written.
    """
    Path(folder).mkdir(parents=True, exist_ok=True)
    with mpl.rc_context():
        mpl.rcdefaults()  # a user's own style must not change the bytes
        mpl.rcParams.update(RC)
        return save(_figure(checked), Path(folder) / checked.gas.name)


def _figure(checked: Checked) -> Figure:
    panels = _panels(checked.gas)
    rows = -(-len(panels) // 2)
    figure = Figure(figsize=(WIDTH_INCHES, 0.9 + 3.3 * rows), layout="constrained")
    grid = figure.subplots(rows, min(len(panels), 2), squeeze=False)
    figure.suptitle(_title(checked), x=0.01, ha="left", fontsize=8, color=GREY)
    for axes, (title, processes) in zip(grid.flat, panels.items(), strict=False):
        _draw(axes, title, processes, checked)
    for axes in grid.flat[len(panels) :]:
        axes.remove()
    figure.draw_without_rendering()  # labels need the final size of the panels
    figure.set_layout_engine("none")
    for axes, processes in zip(grid.flat, panels.values(), strict=False):
        _label(axes, processes)
    return figure


def _panels(gas: Gas) -> Panels:
    """Processes by kind, excitation in two panels where it has both slow and fast losses; no empty ones."""
    slow, fast = f"excitation below {_SLOW_EV:g} eV", f"excitation from {_SLOW_EV:g} eV"
    three_body = "attachment by three bodies (m$^5$)"
    panels: Panels = {title: [] for title in ("elastic", slow, fast, "ionization", "attachment", three_body)}
    for process in gas.processes:
        title: str = process.kind
        if process.third_body is not None:
            title = three_body
        elif process.kind == "excitation":
            title = slow if process.threshold_eV < _SLOW_EV else fast
        panels[title].append(process)
    return {title: processes for title, processes in panels.items() if processes}


def _title(checked: Checked) -> str:
    gas = checked.gas
    parts = [f"{gas.name}: {gas.formula}, cross sections in m$^2$; {counted(checked.findings)}."]
    if any(finding.grade != "note" and finding.process for finding in checked.findings):
        parts.append("Rings: errors and doubts.")
    if checked.probe is not None:
        parts.append(f"Thick: where 99 % of the rate comes from at {checked.probe.E_over_N_Td:g} Td.")
    if gas.elastic_is == "total_momentum_transfer":
        parts.append("Grey: total momentum transfer as published.")
    if gas.formula in ORBITALS:
        parts.append("Grey beside ionization: binary-encounter-Bethe.")
    return textwrap.fill(" ".join(parts), 125)


def _draw(axes: Axes, title: str, processes: Sequence[Process], checked: Checked) -> None:
    gas = checked.gas
    energy = _energies(processes)
    axes.set_title(title)
    probed = {one.process: one for one in checked.probe.processes} if checked.probe else {}
    highest = max(float(process.cross_section(energy).max()) for process in processes)
    if title == "elastic" and gas.elastic_is == "total_momentum_transfer":
        total = next(process for process in gas.published if process.id == processes[0].id)
        axes.plot(energy, total.cross_section(energy), color=GREY, linewidth=0.7, linestyle=DASHES[2])
    if title == "ionization" and gas.formula in ORBITALS:
        axes.plot(energy, _positive(beb_cross_section(energy, ORBITALS[gas.formula])), color=GREY, linewidth=0.7)
    for number, process in enumerate(processes):
        colour, dashes = _look(number)
        axes.plot(energy, _positive(process.cross_section(energy)), color=colour, linestyle=dashes)
        _thick(axes, process, colour, probed.get(process.id))
        _rings(axes, process, colour, checked)
    axes.set_xscale("log")
    axes.set_yscale("log")
    axes.set_xlim(energy[0], energy[-1])
    axes.set_ylim(highest * 10.0**-_DECADES, highest * 3.0)
    axes.set_xlabel("energy (eV)")
    axes.xaxis.set_major_locator(LogLocator(subs=(1.0,) if energy[-1] > 200.0 * energy[0] else (1.0, 2.0, 5.0)))
    axes.xaxis.set_major_formatter("{x:g}")
    axes.xaxis.set_minor_formatter(NullFormatter())


def _look(number: int) -> tuple[str, Any]:
    """Colour and dashes of the curve of this number: 25 pairs before one comes back."""
    return COLOURS[number % len(COLOURS)], DASHES[(number // len(COLOURS)) % len(DASHES)]


def _energies(processes: Sequence[Process]) -> np.ndarray:
    """Energies from below the lowest threshold to the end of the tables, with all their points."""
    low = min(process.threshold_eV for process in processes)
    ends = [process.end_eV for process in processes if np.isfinite(process.end_eV)]
    high = min(1.3 * max(ends), _MOST_EV) if ends else _MOST_EV
    low = min(max(0.9 * low, _LEAST_EV), 0.1 * high)
    points = np.concatenate([process.breakpoints_eV for process in processes])
    return np.unique(np.concatenate([np.geomspace(low, high, _POINTS), points[(points > low) & (points < high)]]))


def _positive(values: np.ndarray) -> np.ndarray:
    return np.where(values > 0.0, values, np.nan)


def _thick(axes: Axes, process: Process, colour: str, probed: Probed | None) -> None:
    if probed is None or not probed.rate > 0.0:
        return
    energy = np.geomspace(max(probed.low_eV, _LEAST_EV), probed.high_eV, 200)
    values = _positive(process.cross_section(energy))
    axes.plot(energy, values, color=colour, linewidth=4.0, alpha=0.3, solid_capstyle="butt")


def _rings(axes: Axes, process: Process, colour: str, checked: Checked) -> None:
    for finding in checked.findings:
        if finding.grade == "note" or finding.process != process.id or finding.low_eV is None:
            continue
        energy = np.array([finding.low_eV if finding.high_eV is None else finding.high_eV])
        value = process.cross_section(energy)
        if value[0] > 0.0:
            axes.plot(energy, value, "o", color=colour, markersize=7.0, markerfacecolor="none", clip_on=False)


def _label(axes: Axes, processes: Sequence[Process]) -> None:
    """Write each name along its curve, where it hides least; names without room are listed under the title."""
    energy = np.geomspace(*axes.get_xlim(), _PLACES + 2)[1:-1]
    low, high = axes.get_ylim()
    curves = [_in_pixels(axes, energy, process.cross_section(energy)) for process in processes]
    shown = [
        (process.cross_section(energy) > 1.5 * low) & (process.cross_section(energy) < 0.8 * high)
        for process in processes
    ]
    taken: list[Bbox] = []
    left_over = []
    for number, process in enumerate(processes):
        box = _best(axes, process.id, curves, number, np.flatnonzero(shown[number]), taken)
        if box is None:
            left_over.append(process.id)
            continue
        taken.append(box)
        x, y = axes.transData.inverted().transform([0.5 * (box.x0 + box.x1), 0.5 * (box.y0 + box.y1)]).tolist()
        colour = tuple(_DARKER * part for part in to_rgb(_look(number)[0]))
        axes.text(x, y, process.id, color=colour, fontsize=_LABEL, ha="center", va="center", bbox=_HALO, zorder=5)
    if left_over:
        text = textwrap.fill("no room for: " + ", ".join(left_over), 70)
        axes.text(0.01, 0.99, text, transform=axes.transAxes, fontsize=_LABEL - 1.0, color=GREY, va="top")


def _in_pixels(axes: Axes, energy: np.ndarray, values: np.ndarray) -> np.ndarray:
    return axes.transData.transform(np.column_stack([energy, np.maximum(values, 1e-300)]))


def _best(
    axes: Axes, text: str, curves: list[np.ndarray], own: int, places: np.ndarray, taken: list[Bbox]
) -> Bbox | None:
    """The box of a label just above its curve, pixels, that covers no other label and the fewest points of curves.

    Among equals the highest. None where other labels are everywhere.
    """
    dots = axes.figure.dpi / 72.0
    width, height = 0.62 * _LABEL * dots * (len(text) + 1), 1.3 * _LABEL * dots
    inside = axes.bbox
    points = np.concatenate(curves)
    best, least = None, (np.inf, np.inf)
    for place in places:
        x, y = curves[own][place]
        left = float(np.clip(x - 0.5 * width, inside.x0, inside.x1 - width))
        box = Bbox.from_bounds(left, y + 0.2 * height, width, height)
        if any(box.overlaps(other) for other in taken):
            continue
        hidden = int(((points > box.min) & (points < box.max)).all(axis=1).sum())
        if (hidden, -y) < least:
            best, least = box, (hidden, -y)
    return best
