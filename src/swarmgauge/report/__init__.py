"""Figures of results and of sets: the only place where matplotlib is used."""

from .comparison import draw_comparison
from .figures import draw_figures
from .sensitivity import draw_sensitivity
from .set_figure import draw_set

__all__ = ["draw_comparison", "draw_figures", "draw_sensitivity", "draw_set"]
