"""How figures look: colours that differ in hue for the colour-blind and in lightness in grey; thin lines."""

from typing import Any

# Each colour is lighter than the one before it, so that a grey print keeps them apart. The hues follow those that
# M. Okabe and K. Ito (Color Universal Design, 2008) found distinguishable with any kind of colour vision.
COLOURS = ("#000000", "#0072B2", "#D55E00", "#CC79A7", "#F0B030")
MARKERS = ("o", "s", "^", "D", "v")
DASHES: tuple[Any, ...] = ("-", (0, (5, 2)), (0, (1.5, 1.5)), (0, (6, 2, 1.5, 2)), (0, (9, 3)))
SEQUENCE = "cividis"
GREY = "#555555"
WIDTH_INCHES = 7.5

RC: Any = {
    "axes.axisbelow": True,
    "axes.grid": True,
    "axes.labelsize": 8.5,
    "axes.linewidth": 0.6,
    "axes.spines.right": False,
    "axes.spines.top": False,
    "axes.titlesize": 9,
    "axes.titlelocation": "left",
    "figure.dpi": 100,
    "font.family": "DejaVu Sans",
    "font.size": 8.5,
    "grid.color": "#dddddd",
    "grid.linewidth": 0.5,
    "legend.fontsize": 7.5,
    "legend.frameon": False,
    "legend.handlelength": 2.2,
    "lines.linewidth": 1.0,
    "lines.markersize": 3.6,
    "mathtext.default": "regular",
    "savefig.dpi": 160,
    "svg.hashsalt": "swarmgauge",  # ids in the file are hashes: fixed, so that equal results give equal bytes
    "xtick.labelsize": 7.5,
    "xtick.major.width": 0.6,
    "ytick.labelsize": 7.5,
    "ytick.major.width": 0.6,
}
