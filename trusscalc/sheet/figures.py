"""The figures of a calculation sheet, as data: what callers import.

``elevation`` and ``result_drawing`` show the whole truss, ``free_body`` a step's bodies, ``truss_figure`` a truss
before any check, ``cut_figure`` a cut of the engineer's own, ``mechanism_figure`` why a truss is unstable.
"""

from __future__ import annotations

from trusscalc.sheet.elevation import cut_figure, elevation, mechanism_figure, result_drawing, truss_figure
from trusscalc.sheet.freebody import free_body
from trusscalc.sheet.lettering import overlaps
from trusscalc.sheet.marks import Figure

__all__ = [
    "Figure",
    "cut_figure",
    "elevation",
    "free_body",
    "mechanism_figure",
    "overlaps",
    "result_drawing",
    "truss_figure",
]
