"""Drawings on one sheet: the largest scale at which they fit, and several below each other on one upright axis."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Final, TypeVar

from trusscalc.sheet.board import FULL_WIDTH, MARGIN, Board, moved
from trusscalc.sheet.inscriptions import Scale, scales
from trusscalc.sheet.marks import Figure, Mark
from trusscalc.truss import Truss

MOST_TRIALS: Final = 6

Drawing = TypeVar("Drawing")


def largest(
    truss: Truss,
    draw: Callable[[Scale], Drawing],
    boards: Callable[[Drawing], Sequence[Board]],
    *,
    width: float = FULL_WIDTH,
    highest: float,
) -> Drawing:
    """Return a drawing at the largest usual scale at which it fits the paper; at the smallest tried if it never does.

    Parameters
    ----------
    truss : Truss
        What is drawn.
    draw : callable
        Makes the drawing at a scale.
    boards : callable
        Returns the boards of a drawing, which stand below each other.
    width, highest : float
        Room on paper, mm: the width for all, the height for the truss alone.
    """
    xs = [float(joint.x) for joint in truss.joints]
    ys = [float(joint.y) for joint in truss.joints]
    wide, high = max(xs) - min(xs), max(ys) - min(ys)
    listed = scales(truss.length)
    fitting = [scale for scale in listed if wide * scale.paper <= width and high * scale.paper <= highest]
    drawing = draw((fitting or listed[-1:])[0])
    for scale in fitting[1:MOST_TRIALS]:
        left, right = _sides(boards(drawing))
        if right - left + 2 * MARGIN <= width:
            break
        drawing = draw(scale)
    return drawing


def aligned(boards: Sequence[Board], caption: str, alt: str, *, width: float = FULL_WIDTH) -> Figure:
    """Return several boards as one figure, one below the other, each abscissa straight below its like.

    Parameters
    ----------
    boards : sequence of Board
        From the top down, all with the same abscissas.
    caption, alt : str
        See ``Figure``.
    width : float
        The figure's width when what is drawn is narrower (it is then centred).
    """
    left, right = _sides(boards)
    full = max(right - left + 2 * MARGIN, width)
    margin = (full - (right - left)) / 2 - MARGIN
    figures = [board.figure("", "") for board in boards]
    marks: list[Mark] = []
    top = height = sum(figure.height for figure in figures)
    for board, figure in zip(boards, figures, strict=True):
        top -= figure.height
        aside = board.bounds[0] - left + margin
        marks += [moved(mark, aside, top) for mark in figure.marks]
    return Figure(round(full, 2), round(height, 2), tuple(marks), caption, alt)


def _sides(boards: Sequence[Board]) -> tuple[float, float]:
    bounds = [board.bounds for board in boards]
    return min(left for left, _, _, _ in bounds), max(right for _, _, right, _ in bounds)
