"""The free body of a step: the part kept, what acts on it, and the lengths its equation uses.

Every cut bar is drawn as a pull out of the body, every load the way it acts, every reaction the way it is
written. A number the equation uses stands in the figure.
"""

from __future__ import annotations

import statistics
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final, Literal

from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet import words
from trusscalc.sheet.board import MEDIUM, SOUGHT, Board, along, around, compass, unit
from trusscalc.sheet.inscriptions import Scale, amount, arm, scales, slope
from trusscalc.sheet.lettering import Point
from trusscalc.sheet.marks import Figure, Ink, Label
from trusscalc.sheet.sections import SectionLine, section_line
from trusscalc.sheet.symbols import (
    CENTRE_GAP,
    FORCE_SIZE,
    GAP,
    Force,
    Sketch,
    draw_force,
    draw_section_line,
    level_dimension,
    name_joint,
    running_dimension,
    slope_triangle,
)
from trusscalc.statics.cuts import About, Cut, Structure, structure_of
from trusscalc.statics.matrix import Bar
from trusscalc.statics.steps import Equation, Step, Term, points_backwards

FULL_WIDTH: Final = 170.0
HIGHEST: Final = 110.0
LONGEST_BAR: Final = 24.0
SHORTEST_BAR: Final = 9.0
STUB: Final = 6.0
PULL: Final = 7.5
JOINT_PULL: Final = 11.0
NEAR: Final = 28.0
"""How far off the body, mm, a moment centre is still drawn."""


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
    'Joint A, forces in kN. Open arrowhead: reaction.'
    """
    structure = structure_of(check.truss, check.case)
    found: dict[tuple[str, ...], list[Equation]] = {}
    for equation in step.equations:
        found.setdefault(equation.cut.kept, []).append(equation)
    letters = words.letters_of(structure, check.steps)
    return tuple(
        _Body(
            check, structure, step, tuple(equations), letters.get(words.members_cut(structure, equations[0].cut), "")
        ).fitted(width)
        for equations in found.values()
    )


@dataclass(frozen=True, slots=True)
class _Body:
    """One free body with its equations."""

    check: MemberCheck
    structure: Structure
    step: Step
    equations: tuple[Equation, ...]
    letter: str

    @property
    def cut(self) -> Cut:
        return self.equations[0].cut

    @property
    def is_joint(self) -> bool:
        """Whether only directions matter: one joint, and no moments."""
        return self.cut.kind == "joint" and all(equation.about.sum == "force" for equation in self.equations)

    def fitted(self, width: float) -> Figure:
        """Return the figure at the largest scale at which it fits and every label finds room."""
        if self.is_joint:
            return _Drawing(self, Scale(1.0, ""), width).figure()
        lengths = [self._length(name) for name in self._kept_bars()] or [
            float(self.structure.bars[name].length) for name in self.cut.bars
        ]
        middle = statistics.median(lengths)
        best: tuple[tuple[int, int], Figure] | None = None
        for room in dict.fromkeys((width, max(width, FULL_WIDTH))):
            for scale in scales(self.check.truss.length):
                if middle * scale.paper > LONGEST_BAR or self._extent() * scale.paper > room:
                    continue
                if middle * scale.paper < SHORTEST_BAR:
                    break
                drawing = _Drawing(self, scale, room)
                figure = drawing.figure()
                if figure.width > room + 0.1 or figure.height > HIGHEST:
                    continue
                if not drawing.board.left_out:
                    return figure
                cost = (len(drawing.board.left_out), 0)
                if best is None or cost < best[0]:
                    best = (cost, figure)
                break
        if best is not None:
            return best[1]
        return _Drawing(self, self._smallest(), max(width, FULL_WIDTH)).figure()

    def _smallest(self) -> Scale:
        """Return the largest scale at which the body's joints fit the text width."""
        listed = scales(self.check.truss.length)
        return next((scale for scale in listed if self._extent() * scale.paper <= FULL_WIDTH - 40.0), listed[-1])

    def _kept_bars(self) -> list[str]:
        inside = set(self.cut.kept)
        return [n for n, b in self.structure.bars.items() if b.start in inside and b.end in inside]

    def _length(self, name: str) -> float:
        bar = self.structure.bars[name]
        return float((float(bar.dx) ** 2 + float(bar.dy) ** 2) ** 0.5)

    def _extent(self) -> float:
        xs = [float(self.structure.joints[name].x) for name in self.cut.kept]
        return max(xs) - min(xs)


class _Drawing:
    """A free body being drawn at one scale."""

    def __init__(self, body: _Body, scale: Scale, room: float) -> None:
        self.body, self.scale, self.room = body, scale, room
        self.structure = body.structure
        self.board = Board()
        self.kept = dict.fromkeys(body.cut.kept)
        self.symbols = words.symbols_of(self.structure)
        everywhere = {
            name: (float(joint.x) * scale.paper, float(joint.y) * scale.paper)
            for name, joint in self.structure.joints.items()
        }
        self.everywhere = everywhere
        self.sketch = Sketch(self.board, {name: everywhere[name] for name in self.kept})
        self.notes: list[str] = []
        self.ring_at = {e.about.joint for e in body.equations if e.about.sum == "moment"} & set(self.kept)
        self.line: SectionLine | None = None

    # --- the parts, in drawing order ----------------------------------------------------------------------

    def figure(self) -> Figure:
        self.line = self._section_line()
        self._bars()
        self._section()
        self._forces()
        self._centres()
        for name in self.kept:
            self.board.joint(self.sketch.place[name])
        self._joint_names()
        self._pull_names()
        self._slopes()
        self._dimensions()
        return self.board.figure(self._caption(), self._alt(), width=None)

    def _bar_ends(self, bar: Bar) -> tuple[str, str]:
        """Return a cut bar's kept end and its other end."""
        return (bar.start, bar.end) if bar.start in self.kept else (bar.end, bar.start)

    def _members_cut(self) -> list[Bar]:
        return [self.structure.bars[name] for name in self.body.cut.bars if not self.structure.bars[name].is_link]

    def _section_line(self) -> SectionLine | None:
        if self.body.cut.kind != "section":
            return None
        segments = {}
        for bar in self._members_cut():
            near, far = self._bar_ends(bar)
            segments[bar.name] = (self.everywhere[near], self.everywhere[far])
        others = [
            (self.everywhere[bar.start], self.everywhere[bar.end])
            for bar in self.structure.bars.values()
            if not bar.is_link and bar.name not in segments
        ]
        return section_line(segments, others, near_kept=True)

    def _bars(self) -> None:
        place, taken = self.sketch.place, self.sketch.take
        for bar in self.structure.bars.values():
            if bar.is_link or not (bar.start in self.kept and bar.end in self.kept):
                continue
            a, b = place[bar.start], place[bar.end]
            taken(bar.start, unit(a, b))
            taken(bar.end, unit(b, a))
            self.board.line(a, b, width=MEDIUM)
        self.pulls: dict[str, tuple[Point, Point]] = {}
        for bar in self._members_cut():
            near, far = self._bar_ends(bar)
            start, way = place[near], unit(self.everywhere[near], self.everywhere[far])
            taken(near, way)
            gap = CENTRE_GAP if near in self.ring_at else 0.0
            if self.line:
                tail = self.line.crossings[bar.name]
                self.board.line(along(start, way, gap), tail, width=MEDIUM)
                tip = along(tail, way, PULL)
            elif self.body.is_joint:
                tail, tip = along(start, way, gap), along(start, way, JOINT_PULL)
            else:
                tail, tip = along(start, way, STUB), along(start, way, STUB + PULL)
                self.board.line(along(start, way, gap), tail, width=MEDIUM)
            sought = bar.name in self.body.step.solves
            self.board.arrow(tail, tip, width=SOUGHT if sought else MEDIUM, ink="accent" if sought else "black")
            self.pulls[bar.name] = (tail, tip)

    def _section(self) -> None:
        if self.line:
            middle = [self.sketch.place[name] for name in self.kept]
            centre = (sum(x for x, _ in middle) / len(middle), sum(y for _, y in middle) / len(middle))
            draw_section_line(self.board, self.line, self.body.letter, centre)
        elif self.body.cut.kind == "section":
            self.notes.append(
                "The section line is left out: it could not be drawn without crossing bars that are not cut"
            )

    def _forces(self) -> None:
        for force in self._listed_forces():
            gap = CENTRE_GAP if force.joint in self.ring_at else GAP
            draw_force(self.sketch, force, gap=gap)

    def _listed_forces(self) -> Iterator[Force]:
        for name in self.body.cut.bars:
            bar = self.structure.bars[name]
            if not bar.is_link:
                continue
            sought = name in self.body.step.solves
            ink: Ink = "accent" if sought else "black"
            value = ""
            if not sought and name in self.body.step.uses:
                value = amount(self.body.check.reactions[name].exact or ZERO)
            way = unit((0.0, 0.0), (float(bar.dx), float(bar.dy)))
            yield Force(bar.start, way, value, self._name("reaction", name), ink, reaction=True)
        axes: tuple[tuple[Literal["x", "y"], Point], ...] = (("x", (1.0, 0.0)), ("y", (0.0, 1.0)))
        for joint in self.kept:
            if joint not in self.structure.loads:
                continue
            for (axis, way), size in zip(axes, self.structure.loads[joint], strict=True):
                if not size:
                    continue
                if points_backwards(size):
                    way, size = (-way[0], -way[1]), -size  # noqa: PLW2901 - drawn the way it acts
                yield Force(joint, way, amount(size), self._name("load", joint, axis))

    def _name(self, kind: Literal["member", "reaction", "load"], name: str, axis: str = "") -> tuple[str, str]:
        symbol = self.symbols.of(Term(kind, name, axis, ZERO, ONE, ZERO))
        return symbol.base, symbol.subscript

    def _centres(self) -> None:
        for equation in self.body.equations:
            about = equation.about
            if about.sum != "moment":
                continue
            place = self._centre(about)
            if about.joint in self.kept or self._is_near(place):
                self.board.moment_centre(place)

    def _centre(self, about: About) -> Point:
        return float(about.x) * self.scale.paper, float(about.y) * self.scale.paper

    def _is_near(self, place: Point) -> bool:
        xs, ys = zip(*self.sketch.place.values(), strict=True)
        return min(xs) - NEAR <= place[0] <= max(xs) + NEAR and min(ys) - NEAR <= place[1] <= max(ys) + NEAR

    def _joint_names(self) -> None:
        xs, ys = zip(*self.sketch.place.values(), strict=True)
        middle = ((min(xs) + max(xs)) / 2, (min(ys) + max(ys)) / 2)
        for name in self.kept:
            name_joint(self.sketch, name, middle, ink="grey", distance=1.9 if name in self.ring_at else 1.1)

    def _pull_names(self) -> None:
        for name, (tail, tip) in self.pulls.items():
            base, subscript = self._name("member", name)
            ink: Ink = "accent" if name in self.body.step.solves else "black"
            label = Label(tip, base, FORCE_SIZE, subscript, ink=ink, style="italic")
            self.board.write(_at_pull(tail, tip, label))

    def _oblique_terms(self) -> Iterator[Bar]:
        for equation in self.body.equations:
            for term in equation.terms:
                if term.kind != "load" and self.structure.bars[term.name].dx and self.structure.bars[term.name].dy:
                    yield self.structure.bars[term.name]

    def _slopes(self) -> None:
        drawn = set()
        for bar in self._oblique_terms():
            ratio = abs(bar.dx / bar.dy)
            if bar.is_link or ratio in drawn:
                continue
            drawn.add(ratio)
            tail, tip = self.pulls[bar.name]
            level, upright, length = slope(bar.dx, bar.dy)
            slope_triangle(self.board, self.sketch.place[self._bar_ends(bar)[0]], unit(tail, tip), (level, upright))
            if length:
                self.notes.append(f"Slope of {words.bar(bar.name)}: {level} across, {upright} up, length {length}")

    def _dimensions(self) -> None:
        for equation in self.body.equations:
            if equation.about.sum == "moment":
                _Arms(self, equation).draw()

    # --- words --------------------------------------------------------------------------------------------

    def _caption(self) -> str:
        truss = self.body.check.truss
        moments = any(equation.about.sum == "moment" for equation in self.body.equations)
        what = self._what()
        pieces = [what[0].upper() + what[1:]]
        if not self.body.is_joint:
            pieces.append(self.scale.text)
            if moments:
                pieces.append(f"lengths in {truss.length}")
        pieces.append(f"forces in {truss.force}")
        sentences = [", ".join(pieces)]
        if moments:
            sentences.append("Ring: moment centre, arms counted from it")
        if any(self.structure.bars[name].is_link for name in self.body.cut.bars):
            sentences.append("Open arrowhead: reaction")
        return ". ".join([*sentences, *dict.fromkeys(self.notes)]) + "."

    def _what(self) -> str:
        letters = {words.members_cut(self.structure, self.body.cut): self.body.letter} if self.body.letter else {}
        return words.body(self.structure, self.body.cut, letters)

    def _alt(self) -> str:
        pulls = [words.bar(bar.name) for bar in self._members_cut()]
        links = [words.bar(name) for name in self.body.cut.bars if self.structure.bars[name].is_link]
        loads = [name for name in self.kept if name in self.structure.loads]
        text = f"Free body: {self._what()}"
        if pulls:
            text += f"; cut members {words.listed(pulls)} drawn as pulls"
        if links:
            text += f"; reactions {words.listed(links)}"
        if loads:
            text += f"; loads at {words.listed(loads)}"
        return text + "."


def _at_pull(tail: Point, tip: Point, label: Label) -> Iterator[Label]:
    """Yield places for the name of a pull: over or under a level arrow's tip, beyond an oblique one's."""
    way = unit(tail, tip)
    near_tip = along(tip, way, -2.0)
    if abs(way[1]) < 0.2:  # noqa: PLR2004 - nearly level
        yield from around(near_tip, label, 1.0, [(0.0, 1.0), (0.0, -1.0)])
        yield from around(tip, label, 0.6, [way])
    elif abs(way[0]) < 0.2:  # noqa: PLR2004 - nearly upright
        yield from around(along(tip, way, -3.0), label, 1.0, [(1.0, 0.0), (-1.0, 0.0)])
        yield from around(tip, label, 0.6, [way])
    else:
        yield from around(tip, label, 0.6, [unit((0, 0), (1.0 if way[0] > 0 else -1.0, 0.3 * way[1])), way])
    for distance in (0.8, 2.0, 3.5):
        yield from around(tip, label, distance, compass(way, 12))
    yield from around(along(tip, way, -4.0), label, 1.0, compass(way, 12))


class _Arms:
    """The lengths of one moment equation, counted from its centre."""

    def __init__(self, drawing: _Drawing, equation: Equation) -> None:
        self.drawing, self.equation = drawing, equation
        self.level: dict[float, tuple[str, float]] = {}
        self.upright: dict[float, tuple[str, float]] = {}
        for term in equation.terms:
            self._collect(term)

    def _collect(self, term: Term) -> None:
        structure, about = self.drawing.structure, self.equation.about
        if term.kind == "load":
            joint, dx, dy = term.name, term.axis == "x", term.axis == "y"
        else:
            bar = structure.bars[term.name]
            joint = bar.start if bar.start in self.drawing.kept else bar.end
            dx, dy = bool(bar.dx), bool(bar.dy)
        place = structure.joints[joint]
        if dy:
            self._note(self.level, joint, 0, place.x - about.x)
        if dx:
            self._note(self.upright, joint, 1, place.y - about.y)

    def _note(self, ticks: dict[float, tuple[str, float]], joint: str, axis: int, length: Exact) -> None:
        if length:
            spot = self.drawing.sketch.place[joint]
            ticks[round(spot[axis], 6)] = (arm(abs(length)), spot[1 - axis])

    def draw(self) -> None:
        centre = self.drawing._centre(self.equation.about)  # noqa: SLF001 - one drawing in two classes
        board = self.drawing.board
        if self.level:
            ticks = [(u, text, height) for u, (text, height) in sorted(self.level.items())]
            running_dimension(board, centre[0], ticks, board.bounds[1] - 4.5)
        if len(self.upright) == 1:
            ((v, (text, u)),) = self.upright.items()
            left, _, right, _ = board.bounds
            xs = [x for x, _ in self.drawing.sketch.place.values()]
            side = right + 5.0 if centre[0] >= (min(xs) + max(xs)) / 2 else left - 5.0
            level_dimension(board, (centre[0], centre[1]), (u, v), side, text, upright=True)
        elif self.upright:
            ticks = [(v, text, u) for v, (text, u) in sorted(self.upright.items())]
            running_dimension(board, centre[1], ticks, board.bounds[2] + 5.0, upright=True)
