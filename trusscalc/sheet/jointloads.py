"""Joint loads drawn on a truss, however close together: each has its arrow, and its value where there is room."""

from __future__ import annotations

import itertools
from collections.abc import Iterable, Iterator, Sequence
from typing import Final

from trusscalc.exact import ZERO, Exact
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.sheet.board import LIGHT, SMALL_SIZE, along, around
from trusscalc.sheet.inscriptions import amount
from trusscalc.sheet.lettering import Box, Point, box_of, boxes_of, text_width
from trusscalc.sheet.marks import Arrow, Label
from trusscalc.sheet.ordinates import row_style
from trusscalc.sheet.symbols import ASIDE, CLEAR_ANGLE, GAP, LOAD_LENGTH
from trusscalc.sheet.wholetruss import WholeTruss

HEIGHTS: Final = tuple(share * ASIDE for share in (1.0, 1.5, 2.0, -1.0, 2.5, 3.0, 3.5, -1.5, -2.0, -2.5, -3.0))
"""Tried for a level load that has to stand beside the bars of its joint, mm."""


def draw_joint_loads(whole: WholeTruss, case: LoadCase) -> None:
    """Draw joint loads with their values: the upright ones first, so that level ones find a place beside them."""
    upright = [load for load in case.loads if load.fy]
    rows = [[load for load in upright if _points_down(whole, load.joint) == down] for down in (False, True)]
    styles = [_style(whole, row) for row in rows]
    if any(angle for angle, _ in styles):
        for row, (_, every) in zip(rows, styles, strict=True):
            _draw_row(whole, row, every)
    else:
        plain = [JointLoad(load.joint, ZERO, load.fy) for load in upright]
        whole.loads(LoadCase(case.name, plain, symbols=case.symbols))
    level = [JointLoad(load.joint, load.fx, ZERO) for load in case.loads if load.fx]
    if level and whole.crowded:
        whole.notes.append("Level loads on joints are not drawn, all are in the table")
        level = []
    hemmed_in = [load for load in level if _has_bars_on_both_sides(whole, load.joint)]
    whole.loads(LoadCase(case.name, [load for load in level if load not in hemmed_in], symbols=case.symbols))
    whole.sketch.write_pending()
    for load in hemmed_in:
        _draw_over_bars(whole, load)


def _points_down(whole: WholeTruss, joint: str) -> bool:
    """Return whether an upright load is drawn below its joint: at a lower joint without a support."""
    return joint not in whole.depth and whole.sketch.place[joint][1] < whole.middle[1]


def _style(whole: WholeTruss, row: Sequence[JointLoad]) -> tuple[float, int]:
    places = [(whole.sketch.place[load.joint][0], text_width(_text(load), SMALL_SIZE)) for load in row]
    return row_style(places) if len({round(x, 3) for x, _ in places}) == len(places) else (0.0, 1)


def _text(load: JointLoad) -> str:
    return amount(unsigned(load.fy))


def _draw_row(whole: WholeTruss, row: Sequence[JointLoad], every: int) -> None:
    """Draw upright loads close together, their values turned; of very many, some are lettered."""
    for number, load in enumerate(sorted(row, key=lambda load: whole.sketch.place[load.joint])):
        out = (0.0, -1.0) if _points_down(whole, load.joint) else (0.0, 1.0)
        place = whole.sketch.place[load.joint]
        near, far = along(place, out, GAP), along(place, out, GAP + LOAD_LENGTH)
        back = load.fy.reads_negative() == (out[1] > 0)
        whole.board.arrow(*((far, near) if back else (near, far)), width=LIGHT, small=True)
        whole.sketch.take(load.joint, out)
        if number % every == 0:
            whole.board.write(around(far, Label(far, _text(load), SMALL_SIZE, angle=90.0), 0.7, [out]))
    if every > 1:
        whole.notes.append(f"One joint load in {every} is lettered, all are in the table")


def _has_bars_on_both_sides(whole: WholeTruss, joint: str) -> bool:
    return max(whole.sketch.clearance(joint, way) for way in ((1.0, 0.0), (-1.0, 0.0))) < CLEAR_ANGLE


def _draw_over_bars(whole: WholeTruss, load: JointLoad) -> None:
    """Draw a level load over (or under) the bars at its joint, where its arrow and its value meet least."""
    x, y = whole.sketch.place[load.joint]
    back = load.fx.reads_negative()
    best: tuple[tuple[int, int], Point, Point, Label] | None = None
    outwards = 1.0 if y >= whole.middle[1] else -1.0
    for height, side in itertools.product(HEIGHTS, (-1.0, 1.0)):
        level = y + outwards * height
        near, far = (x + side * GAP, level), (x + side * (GAP + LOAD_LENGTH), level)
        ends = (far, near) if (side < 0) != back else (near, far)
        arrow = _hits(whole, boxes_of(Arrow(*ends, LIGHT)))
        for label in _beside(near, far, Label(far, amount(unsigned(load.fx)), SMALL_SIZE)):
            lettering = _hits(whole, [box_of(label)])
            cost = (arrow[0] + lettering[0], arrow[1] + lettering[1])
            if best is None or cost < best[0]:
                best = (cost, *ends, label)
    assert best is not None  # noqa: S101 - there are always trials
    whole.board.arrow(best[1], best[2], width=LIGHT, small=True)
    whole.board.put("lettering", best[3])


def _beside(near: Point, far: Point, label: Label) -> Iterator[Label]:
    """Yield a value at the free end of a level arrow, then over and under its shaft."""
    side = 1.0 if far[0] > near[0] else -1.0
    yield from around(far, label, 0.7, [(side, 0.0)])
    yield from around(((near[0] + far[0]) / 2, far[1]), label, 0.9, [(0.0, 1.0), (0.0, -1.0)])


def _hits(whole: WholeTruss, boxes: Iterable[Box]) -> tuple[int, int]:
    """Return how many labels and how many lines some boxes meet."""
    hits = [whole.board.obstacles.hits(box, 0.3) for box in boxes]
    return sum(letters for letters, _ in hits), sum(lines for _, lines in hits)


def unsigned(number: Exact) -> Exact:
    """Return a load without its sign, which its arrows show."""
    return -number if number.reads_negative() else number
