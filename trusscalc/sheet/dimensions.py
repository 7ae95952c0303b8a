"""Dimensions: between two points, counted from a moment centre, and as slope triangles."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from typing import Final

from trusscalc.sheet.board import MEDIUM, SLOPE_SIZE, SMALL_SIZE, THIN, Board, along, around
from trusscalc.sheet.lettering import Point, box_of, touch
from trusscalc.sheet.marks import Label, Ring

STROKE_LENGTH: Final = 2.3


def tick(board: Board, place: Point) -> None:
    """Draw the oblique stroke that ends a dimension."""
    half = STROKE_LENGTH / 2 * 0.7071
    board.line((place[0] - half, place[1] - half), (place[0] + half, place[1] + half), width=MEDIUM, layer="dimension")


def level_dimension(board: Board, start: Point, end: Point, level: float, text: str, *, upright: bool = False) -> None:
    """Draw a dimension between two points: on a level line at a height, or on an upright line at a distance."""

    def turned(u: float, v: float) -> Point:
        return (v, u) if upright else (u, v)

    axis = 1 if upright else 0
    u0, u1 = sorted((start[axis], end[axis]))
    for point in (start, end):
        side = 1.0 if level > point[1 - axis] else -1.0
        reach = min(4.0, max(0.0, abs(level - point[1 - axis]) - 2.0))
        first = turned(point[axis], level - side * reach)
        board.line(
            first, turned(point[axis], level + side * 1.2), width=THIN, layer="dimension", ink="grey", room=False
        )
    board.line(turned(u0, level), turned(u1, level), width=THIN, layer="dimension")
    tick(board, turned(u0, level))
    tick(board, turned(u1, level))
    middle = turned((u0 + u1) / 2, level)
    label = Label(middle, text, SMALL_SIZE, angle=90.0 if upright else 0.0)
    out = [(-1.0, 0.0), (1.0, 0.0)] if upright else [(0.0, 1.0), (0.0, -1.0)]
    board.write([*around(middle, label, 0.7, out), *_outside(turned, u0, u1, level, label)])


def _outside(
    turned: Callable[[float, float], Point], u0: float, u1: float, level: float, label: Label
) -> Iterable[Label]:
    """Yield places of a dimension's text beyond its ends, for a dimension shorter than its text."""
    along_it = turned(1.0, 0.0)
    yield from around(turned(u1, level), label, 1.8, [along_it])
    yield from around(turned(u0, level), label, 1.8, [(-along_it[0], -along_it[1])])


def running_dimension(
    board: Board,
    origin: float | None,
    ticks: Sequence[tuple[float, str, float]],
    level: float,
    *,
    towards: float,
    upright: bool = False,
) -> None:
    """Draw distances counted from a moment centre.

    Parameters
    ----------
    board : Board
        Where to draw.
    origin : float or None
        The centre's coordinate along the line; None when it lies off the paper.
    ticks : sequence of (coordinate, text, height)
        Where a distance ends, how it reads, and how far back its extension line starts.
    level : float
        The line's own place across.
    towards : float
        Coordinate of the centre, for the arrow that points to it when it is off the paper.
    upright : bool
        Whether the line stands upright.
    """

    def turned(u: float, v: float) -> Point:
        return (v, u) if upright else (u, v)

    places = sorted({u for u, _, _ in ticks} | ({origin} if origin is not None else set()))
    if origin is None:  # the line ends in an arrow that points at the centre
        last = max(places) if towards > max(places) else min(places)
        sign = 1.0 if towards > last else -1.0
        board.arrow(turned(last, level), turned(last + sign * 9.0, level), width=THIN, small=True)
    if len(places) > 1:
        board.line(turned(places[0], level), turned(places[-1], level), width=THIN, layer="dimension")
    for u, _, height in ticks:
        side = 1.0 if height > level else -1.0
        if abs(height - level) > 2.0:  # noqa: PLR2004 - no room for an extension line
            ends = turned(u, level + side * 4.2), turned(u, level - side * 1.2)
            board.line(*ends, width=THIN, layer="dimension", ink="grey")
        tick(board, turned(u, level))
    texts = [(u, text) for u, text, _ in ticks]
    if origin is not None:
        board.put("joint", Ring(turned(origin, level), JOINT_MARK, MEDIUM, "accent"))
        texts.insert(0, (origin, "0"))
    _distances(board, [Label(turned(u, level), text, SMALL_SIZE) for u, text in texts], upright=upright)


def _distances(board: Board, labels: Sequence[Label], *, upright: bool) -> None:
    """Write the distances at their ticks, turned upright where they would crowd each other."""
    out = (1.0, 0.0) if upright else (0.0, -1.0)
    back = (-out[0], -out[1])
    boxes = [box_of(next(iter(around(label.place, label, 1.5, [out])))) for label in labels]
    crowded = any(touch(a, b, 0.4) for place, a in enumerate(boxes) for b in boxes[place + 1 :])
    for label in labels:
        turned_label = Label(label.place, label.text, label.size, angle=90.0)
        first, second = (turned_label, label) if crowded and not upright else (label, turned_label)
        board.write(
            [
                *around(label.place, first, 1.5, [out]),
                *around(label.place, second, 1.5, [out]),
                *around(label.place, first, 1.5, [back]),
                *around(label.place, first, 4.8, [out]),
            ]
        )


JOINT_MARK: Final = 1.5


def slope_triangle(board: Board, start: Point, direction: Point, legs: tuple[str, str]) -> None:
    """Draw a slope triangle on a line from a point on: legs level and upright, lettered, on the freer side."""
    ux, uy = direction
    size = max(4.0, min(9.0, 1.8 / max(min(abs(ux), abs(uy)), 0.01)))  # the short leg has to carry a number
    trials = []
    for shift in (2.6, 4.0, 1.4, 5.5):
        a = along(start, direction, shift)
        level, upright = size * ux, size * uy
        longest = max(abs(level), abs(upright))
        level, upright = level * size / longest, upright * size / longest
        b = (a[0] + level, a[1] + upright)
        trials += [(a, b, corner) for corner in ((b[0], a[1]), (a[0], b[1]))]
    best = None
    for a, b, corner in trials:
        below = corner[1] == a[1]
        beside_x = b[0] if below else a[0]
        level_side = (0.0, -1.0 if (b[1] > a[1]) == below else 1.0)
        upright_side = (1.0 if (b[0] > a[0]) == below else -1.0, 0.0)
        level_middle = ((a[0] + b[0]) / 2, corner[1])
        upright_middle = (beside_x, (a[1] + b[1]) / 2)
        texts = [
            next(iter(around(level_middle, Label(level_middle, legs[0], SLOPE_SIZE), 0.4, [level_side]))),
            next(iter(around(upright_middle, Label(upright_middle, legs[1], SLOPE_SIZE), 0.5, [upright_side]))),
        ]
        hits = [board.obstacles.hits(box_of(text), 0.15) for text in texts]
        cost = (sum(hit[0] for hit in hits), sum(hit[1] for hit in hits))
        if best is None or cost < best[0]:
            best = (cost, a, corner, b, texts)
    assert best is not None  # noqa: S101 - there are always trials
    _, a, corner, b, texts = best
    board.line(a, corner, b, width=THIN, layer="dimension")
    for text in texts:
        board.put("lettering", text)
