"""Figures of results: the only place where matplotlib is used."""

from .figures import draw_figures

__all__ = ["draw_figures"]
