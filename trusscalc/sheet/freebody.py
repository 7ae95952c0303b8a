"""The free body of a step: the part kept, what acts on it, and the lengths its equation uses.

Every cut bar is drawn as a pull out of the body, every load the way it acts, every reaction the way it is
written. A number the equation uses stands in the figure.
"""

from __future__ import annotations

import math
import statistics
from dataclasses import dataclass
from typing import Final

from trusscalc.membercheck import MemberCheck
from trusscalc.sheet import words
from trusscalc.sheet.board import (
    FULL_WIDTH,
    HIGHEST,
)
from trusscalc.sheet.bodydrawing import Body, BodyDrawing
from trusscalc.sheet.folding import Fold, collected, folded
from trusscalc.sheet.inscriptions import Scale, scales
from trusscalc.sheet.marks import Figure
from trusscalc.statics.cuts import structure_of
from trusscalc.statics.steps import Equation, Step

END: Final = 1.4
"""Panels drawn at the ends of a body too long for the paper."""
LONGEST_BAR: Final = 24.0
SHORTEST_BAR: Final = 9.0
VERY_LONG_BAR: Final = 45.0
FOLDED_BARS: Final = (18.0, 13.0, 9.0)
MOST_TRIALS: Final = 2
"""Scales tried in one width."""
NARROW_FRAME: Final = 8.0
FRAME: Final = 14.0
"""Width, and height, that forces and dimensions take at least, mm."""


def free_body(check: MemberCheck, step: Step, *, width: float = 80.0) -> tuple[Figure, ...]:
    """Return one figure for each different body of a step.

    Parameters
    ----------
    check : MemberCheck
        What the step belongs to.
    step : Step
        The step.
    width : float
        Width on paper in mm. A body that cannot be drawn legibly in it comes up to 170 mm wide.

    Examples
    --------
    >>> from trusscalc.loads import LoadCase
    >>> from trusscalc.membercheck import check_members
    >>> from trusscalc.truss import Truss
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> check = check_members(truss, LoadCase("dead", {"C": (0, -2)}), ["A-C"])
    >>> free_body(check, check.steps[-1])[0].caption
    'Joint A, forces in kN. Open arrowhead: reaction. Slope of A–C: 2 across, 1 up, length √5.'
    """
    structure = structure_of(check.truss, check.case)
    found: dict[tuple[str, ...], list[Equation]] = {}
    for equation in step.equations:
        found.setdefault(equation.cut.kept, []).append(equation)
    letters = words.letters_of(structure, check.steps)
    return tuple(
        _Fitting(
            check, structure, step, tuple(equations), letters.get(words.members_cut(structure, equations[0].cut), "")
        ).fitted(width)
        for equations in found.values()
    )


@dataclass(frozen=True, slots=True)
class _Fitting(Body):
    """Chooses the scale of a free body, and what is left out of a long one."""

    def fitted(self, width: float) -> Figure:
        """Return the figure at the largest scale at which it fits and every label finds room."""
        if self.is_joint:
            return BodyDrawing(self, Scale(1.0, "")).figure()
        return self._unfolded(width) or self._folded(max(width, FULL_WIDTH))

    def _unfolded(self, width: float) -> Figure | None:
        """Return the whole body at the scale at which labels stand freest; None when no scale fits."""
        drawn: dict[str, tuple[BodyDrawing, Figure]] = {}
        best: tuple[tuple[int, int, int], Figure] | None = None
        for widest, room in enumerate(dict.fromkeys((width, max(width, FULL_WIDTH)))):
            for scale in self._scales(room):
                if scale.text not in drawn:
                    drawing = BodyDrawing(self, scale)
                    drawn[scale.text] = drawing, drawing.figure()
                drawing, figure = drawn[scale.text]
                if figure.width > room + 0.1 or figure.height > HIGHEST:
                    continue
                cost = (len(drawing.board.left_out), len(drawing.board.forced), widest)
                if best is None or cost < best[0]:
                    best = (cost, figure)
                if cost[:2] == (0, 0):
                    return figure
        return best[1] if best else None

    def _folded(self, width: float) -> Figure:
        """Return a body too long for the paper with stretches left out."""
        for longest in FOLDED_BARS:
            scale = self._by_bars(longest)
            figure = BodyDrawing(self, scale, self._fold(scale)).figure()
            if figure.width <= width and figure.height <= HIGHEST:
                break
        return figure

    def _scales(self, room: float) -> list[Scale]:
        """Return scales worth trying: bars of a good length first, then longer ones."""
        middle, (wide, high) = self._middle(), self._extent()
        across, up = room - NARROW_FRAME, HIGHEST - FRAME
        listed = scales(self.check.truss.length)
        fitting = [s for s in listed if wide * s.paper <= across and high * s.paper <= up]
        good = [s for s in fitting if SHORTEST_BAR <= middle * s.paper <= LONGEST_BAR]
        longer = [s for s in reversed(fitting) if LONGEST_BAR < middle * s.paper <= VERY_LONG_BAR]
        return (good + longer)[:MOST_TRIALS]

    def _by_bars(self, longest: float) -> Scale:
        """Return the scale that suits the bars, whatever the length of the body."""
        listed = scales(self.check.truss.length)
        return next((s for s in listed if self._middle() * s.paper <= longest), listed[-1])

    def _middle(self) -> float:
        """Return the median length of the body's bars."""
        names = self._kept_bars() or list(self.cut.bars)
        return statistics.median(
            math.hypot(float(self.structure.bars[n].dx), float(self.structure.bars[n].dy)) for n in names
        )

    def _fold(self, scale: Scale) -> Fold:
        """Return what to leave out of a body too long for the paper: everything far from cut, reactions and centre."""
        joints = {n: (float(j.x) * scale.paper, float(j.y) * scale.paper) for n, j in self.structure.joints.items()}
        spans = [
            max(joints[n][axis] for n in self.cut.kept) - min(joints[n][axis] for n in self.cut.kept) for axis in (0, 1)
        ]
        axis = 0 if spans[0] >= spans[1] else 1
        panel = self._middle() * scale.paper
        inside = set(self.cut.kept)
        along_it = [joints[name][axis] for name in inside]
        wanted = [(min(along_it), min(along_it) + END * panel), (max(along_it) - END * panel, max(along_it))]

        def want(joint: str, panels: float) -> None:
            wanted.append((joints[joint][axis] - panels * panel, joints[joint][axis] + panels * panel))

        for name in self.cut.bars:
            bar = self.structure.bars[name]
            want(bar.start if bar.start in inside else bar.end, 0.6 if bar.is_link else 1.6)
        for equation in self.equations:
            if equation.about.joint in inside:
                want(equation.about.joint, 0.6)
            if not collected(equation):
                for term in equation.terms:
                    if term.kind == "load":
                        want(term.name, 0.6)
        return folded(axis, wanted, (min(along_it), max(along_it)))

    def _kept_bars(self) -> list[str]:
        inside = set(self.cut.kept)
        return [n for n, b in self.structure.bars.items() if b.start in inside and b.end in inside]

    def _extent(self) -> tuple[float, float]:
        """Return width and height of the body's joints, in the truss's unit."""
        xs, ys = zip(
            *((float(self.structure.joints[n].x), float(self.structure.joints[n].y)) for n in self.cut.kept),
            strict=True,
        )
        return max(xs) - min(xs), max(ys) - min(ys)
