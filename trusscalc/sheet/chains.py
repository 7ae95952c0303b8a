"""The overall dimensions of a truss: panels below, heights beside."""

from __future__ import annotations

import itertools
from collections.abc import Mapping, Sequence
from typing import Final

from trusscalc.exact import Exact
from trusscalc.sheet.board import SMALL_SIZE, Board
from trusscalc.sheet.dimensions import level_dimension
from trusscalc.sheet.inscriptions import arm
from trusscalc.sheet.lettering import Point, text_width
from trusscalc.truss import Truss

MOST_LEVELS: Final = 4
CLOSEST_LEVELS: Final = 4.0
NEAR: Final = 1e-9


def draw_dimensions(board: Board, truss: Truss, place: Mapping[str, Point]) -> None:
    """Draw panel and overall dimensions below a truss, its heights at the right."""
    chain = _lower_chain(truss, place)
    if len(chain) > 1:
        _level_chain(board, chain, truss.length)
    _heights(board, truss, place)


def _lower_chain(truss: Truss, place: Mapping[str, Point]) -> list[tuple[Exact, float]]:
    """Return the panel points of the lower outline, left to right: exact and on paper."""
    spans = [tuple(sorted((place[member.start], place[member.end]))) for member in truss.members]
    found: dict[float, tuple[Exact, float]] = {}
    flat = [(a, b) for a, b in spans if b[0] - a[0] > NEAR]
    upright = [(a, b) for a, b in spans if b[0] - a[0] <= NEAR]
    for joint in truss.joints:
        x, y = place[joint.name]
        covered = any(
            a[0] - NEAR <= x <= b[0] + NEAR and a[1] + (b[1] - a[1]) * (x - a[0]) / (b[0] - a[0]) < y - 0.01
            for a, b in flat
        )
        below = any(abs(a[0] - x) < NEAR and a[1] < y - 0.01 for a, b in upright)
        if not covered and not below:
            found[round(x, 6)] = (joint.x, x)
    for edge in (min(place.values())[0], max(place.values())[0]):
        if round(edge, 6) not in found:
            found[round(edge, 6)] = next((j.x, edge) for j in truss.joints if place[j.name][0] == edge)
    return [found[x] for x in sorted(found)]


def _level_chain(board: Board, chain: Sequence[tuple[Exact, float]], name: str) -> None:
    lower = board.bounds[1]
    level = lower - 5.0
    groups: list[list[tuple[tuple[Exact, float], tuple[Exact, float]]]] = []
    for first, second in itertools.pairwise(chain):
        if groups and groups[-1][0][1][0] - groups[-1][0][0][0] == second[0] - first[0]:
            groups[-1].append((first, second))
        else:
            groups.append([(first, second)])
    whole = arm(chain[-1][0] - chain[0][0])
    if len(groups) == 1:
        panels, size = len(groups[0]), arm(groups[0][0][1][0] - groups[0][0][0][0])
        text = f"{panels} panels of {size} {name}, together {whole} {name}" if panels > 1 else f"{whole} {name}"
        _dimension(board, chain[0][1], chain[-1][1], level, text)
        return
    texts = [
        (group[0][0][1], group[-1][1][1], _panel_text(len(group), arm(group[0][1][0] - group[0][0][0])))
        for group in groups
    ]
    if all(b - a > text_width(text, SMALL_SIZE) + 1.0 for a, b, text in texts):
        for a, b, text in texts:
            _dimension(board, a, b, level, text)
        level -= 6.0
    _dimension(board, chain[0][1], chain[-1][1], level, whole)


def _panel_text(count: int, size: str) -> str:
    return f"{count} panels of {size}" if count > 1 else size


def _dimension(board: Board, start: float, end: float, level: float, text: str) -> None:
    level_dimension(board, (start, level + 5.0), (end, level + 5.0), level, text)


def _heights(board: Board, truss: Truss, place: Mapping[str, Point]) -> None:
    heights = {round(place[joint.name][1], 6): joint.y for joint in truss.joints}
    levels = sorted(heights)
    if len(levels) < 2:  # noqa: PLR2004
        return
    side = board.bounds[2] + 4.5
    steps = {heights[high] - heights[low] for low, high in itertools.pairwise(levels)}
    if len(levels) > MOST_LEVELS and len(steps) == 1:
        whole, name = arm(heights[levels[-1]] - heights[levels[0]]), truss.length
        text = f"{len(levels) - 1} panels of {arm(steps.pop())} {name}, together {whole} {name}"
        level_dimension(board, (side - 5.0, levels[0]), (side - 5.0, levels[-1]), side, text, upright=True)
        return
    if len(levels) > MOST_LEVELS or min(b - a for a, b in itertools.pairwise(levels)) < CLOSEST_LEVELS:
        levels = [levels[0], levels[-1]]
    for low, high in itertools.pairwise(levels):
        level_dimension(
            board, (side - 5.0, low), (side - 5.0, high), side, arm(heights[high] - heights[low]), upright=True
        )
