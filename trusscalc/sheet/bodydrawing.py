"""A free body drawn at one scale: bars, pulls, loads, reactions, centre, names, lengths."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Final, Literal

from trusscalc.exact import ONE, ZERO
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet import words
from trusscalc.sheet.arms import draw_arms, point_to_centre
from trusscalc.sheet.board import (
    CENTRE_GAP,
    FORCE_SIZE,
    MEDIUM,
    SOUGHT,
    THIN,
    Board,
    along,
    unit,
)
from trusscalc.sheet.dimensions import slope_triangle
from trusscalc.sheet.folding import Fold, Resultant, break_line, collected, resultant_of
from trusscalc.sheet.inscriptions import Scale, amount, slope
from trusscalc.sheet.lettering import Point, line_box
from trusscalc.sheet.marks import Figure, Ink, Label
from trusscalc.sheet.sections import SectionLine, section_line
from trusscalc.sheet.symbols import (
    GAP,
    Force,
    Sketch,
    draw_force,
    draw_section_line,
    name_joint,
    places_at_pull,
)
from trusscalc.statics.cuts import About, Cut, Structure
from trusscalc.statics.matrix import Bar
from trusscalc.statics.steps import Equation, Step, Term

STUB: Final = 6.0
PULL: Final = 7.5
SHORTEST_PULL: Final = 4.0
JOINT_PULL: Final = 11.0
NEAR: Final = 40.0
"""How far off the body, mm, a moment centre is still drawn."""
FLATTEST: Final = 0.14
"""Slopes flatter (or steeper) than this are told in words only."""
MOST_NAMES: Final = 12
AXES: Final[tuple[Literal["x", "y"], ...]] = ("x", "y")


@dataclass(frozen=True, slots=True)
class Body:
    """One free body of a step with its equations, and the letter of its section."""

    check: MemberCheck
    structure: Structure
    step: Step
    equations: tuple[Equation, ...]
    letter: str

    @property
    def cut(self) -> Cut:
        """The cut that frees the body."""
        return self.equations[0].cut

    @property
    def is_joint(self) -> bool:
        """Whether only directions matter: one joint, and no moments."""
        return self.cut.kind == "joint" and all(equation.about.sum == "force" for equation in self.equations)


class BodyDrawing:
    """A free body being drawn at one scale."""

    def __init__(self, body: Body, scale: Scale, fold: Fold | None = None) -> None:
        self.body, self.scale = body, scale
        self.fold = fold or Fold(0)
        self.structure = body.structure
        self.board = Board()
        self.kept: dict[str, None] = dict.fromkeys(body.cut.kept)
        self.symbols = words.symbols_of(self.structure)
        everywhere = {
            name: (float(joint.x) * scale.paper, float(joint.y) * scale.paper)
            for name, joint in self.structure.joints.items()
        }
        shown = {name for name in self.kept if self.fold.holds(everywhere[name][self.fold.axis])}
        self.flat = everywhere
        self.everywhere = {name: self.fold.place(place) for name, place in everywhere.items()}
        self.sketch = Sketch(self.board, {name: self.everywhere[name] for name in self.kept if name in shown})
        self.sought = (*body.step.solves, *body.step.solves_in)
        self.notes: list[str] = []
        self.centres = {e.about.joint for e in body.equations if e.about.sum == "moment"}
        self.ring_at = self.centres & set(self.kept)
        self.line: SectionLine | None = None

    # --- the parts, in drawing order ----------------------------------------------------------------------

    def figure(self) -> Figure:
        """Draw everything and return the figure."""
        self.line = self._section_line()
        self._bars()
        self._breaks()
        self._resultants()
        self._forces()
        self._section()
        self.sketch.write_pending()
        self._centres()
        for place in self.sketch.place.values():
            self.board.joint(place)
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
            a, b = self.flat[bar.start], self.flat[bar.end]
            taken(bar.start, unit(a, b))
            taken(bar.end, unit(b, a))
            for start, end in self.fold.pieces(a, b):
                self.board.line(start, end, width=MEDIUM)
        self.pulls: dict[str, tuple[Point, Point]] = {}
        for bar in self._members_cut():
            near, far = self._bar_ends(bar)
            start, way = place[near], unit(self.everywhere[near], self.everywhere[far])
            taken(near, way)
            gap = CENTRE_GAP if near in self.ring_at else 0.0
            if self.line:
                tail = self.line.crossings[bar.name]
                self.board.line(along(start, way, gap), tail, width=MEDIUM)
                tip = along(tail, way, self._pull(far, tail))
            elif self.body.is_joint:
                tail, tip = along(start, way, gap), along(start, way, JOINT_PULL)
            else:
                tail, tip = along(start, way, STUB), along(start, way, STUB + PULL)
                self.board.line(along(start, way, gap), tail, width=MEDIUM)
            sought = bar.name in self.sought
            self.board.arrow(tail, tip, width=SOUGHT if sought else MEDIUM, ink="accent" if sought else "black")
            self.pulls[bar.name] = (tail, tip)

    def _pull(self, far: str, tail: Point) -> float:
        """Return the length of an arrow; it stops short of a moment centre drawn at the bar's other end."""
        if far not in self.centres:
            return PULL
        free = math.dist(tail, self.everywhere[far]) - CENTRE_GAP - 0.2
        return min(PULL, free) if free >= SHORTEST_PULL else PULL

    def _section(self) -> None:
        if self.line:
            middle = list(self.sketch.place.values())
            centre = (sum(x for x, _ in middle) / len(middle), sum(y for _, y in middle) / len(middle))
            draw_section_line(self.sketch, self.line, self.body.letter, centre)
        elif self.body.cut.kind == "section":
            self.notes.append(
                "The section line is left out: it could not be drawn without crossing bars that are not cut"
            )

    def _forces(self) -> None:
        for force in self._listed_forces():
            gap = CENTRE_GAP if force.joint in self.ring_at else GAP
            draw_force(self.sketch, force, gap=gap)

    def _breaks(self) -> None:
        """Draw break lines at the gaps, and the loads left out there as their resultant."""
        across = [place[1 - self.fold.axis] for name, place in self.flat.items() if name in self.kept]
        for gap in self.fold.gaps:
            for edge in gap:
                break_line(self.board, self.fold.axis, self.fold.at(edge), min(across) - 2.5, max(across) + 2.5)
        if self.fold.gaps:
            self.notes.append("Between break lines a length is left out; distances are true")

    def _sums(self) -> Iterator[tuple[Resultant, tuple[str, str], Equation | None]]:
        """Yield the loads drawn as a resultant, with its name and the equation that has its arm."""
        gone: set[tuple[str, str]] = set()
        for equation in self.body.equations:
            joints = [(term.name, term.axis) for term in collected(equation) if (term.name, term.axis) not in gone]
            gone |= set(joints)
            for axis in AXES:
                listed = [name for name, its_axis in joints if its_axis == axis]
                if listed:
                    yield resultant_of(self.structure, listed, axis), ("ΣP", axis), equation
        for gap in self.fold.gaps:
            axis_along = self.fold.axis
            hidden = [n for n in self.kept if n in self.structure.loads and gap[0] < self.flat[n][axis_along] < gap[1]]
            for place, axis in enumerate(AXES):
                listed = [n for n in hidden if self.structure.loads[n][place] and (n, axis) not in gone]
                if listed:
                    name = ("P", f"{len(listed)} loads")
                    if len(listed) == 1:
                        name = self._name("load", listed[0], axis)
                    yield resultant_of(self.structure, listed, axis), name, None
                gone |= {(n, axis) for n in listed}
        self.summed = gone

    def _resultants(self) -> None:
        """Draw the resultants, each hung on its line of action, and say which loads they stand for."""
        xs, ys = zip(*self.sketch.place.values(), strict=True)
        middle = ((min(xs) + max(xs)) / 2, (min(ys) + max(ys)) / 2)
        self.arms: list[tuple[Resultant, Equation]] = []
        for item, name, equation in self._sums():
            count, first, last = len(item.joints), words.bar(item.joints[0]), words.bar(item.joints[-1])
            which = f"the {count} loads in {item.axis} from {first} to {last}" if count > 1 else f"the load at {first}"
            if not item.size:
                self.notes.append(f"Not drawn: {which}, whose sum is zero")
                continue
            place = self.fold.place((float(item.x) * self.scale.paper, float(item.y) * self.scale.paper))
            spot = Sketch(self.board, {"": place}, pending=self.sketch.pending)
            inwards = middle[1] - place[1] if item.axis == "y" else middle[0] - place[0]
            turn = 1.0 if inwards > 0 else -1.0
            inside = (0.0, turn) if item.axis == "y" else (turn, 0.0)
            spot.take("", inside)
            outside = along(place, inside, -4.0)
            if self.board.obstacles.hits(line_box(along(place, inside, -1.0), outside, 0.5))[1]:
                spot.take("", (-inside[0], -inside[1]))  # a bar runs there: the arrow is put beside it
            draw_force(spot, Force("", item.direction, amount(item.size), name))
            if name[0] == "ΣP":
                self.notes.append(f"ΣP in {item.axis}: resultant of {which}")
            elif count > 1:
                self.notes.append(f"Left out between break lines: {which}, drawn as their resultant")
            if equation is not None:
                self.arms.append((item, equation))

    def _listed_forces(self) -> Iterator[Force]:
        terms = [term for equation in self.body.equations for term in equation.terms]
        known = {term.name: term.force for term in terms if term.kind == "reaction"}
        for name in self.body.cut.bars:
            bar = self.structure.bars[name]
            if not bar.is_link:
                continue
            sought = name in self.sought
            ink: Ink = "accent" if sought else "black"
            value = "" if sought or name not in known else amount(known[name])
            way = unit((0.0, 0.0), (float(bar.dx), float(bar.dy)))
            yield Force(bar.start, way, value, self._name("reaction", name), ink, reaction=True)
        axes: tuple[tuple[Literal["x", "y"], Point], ...] = (("x", (1.0, 0.0)), ("y", (0.0, 1.0)))
        for joint in self.sketch.place:
            if joint not in self.structure.loads:
                continue
            for (axis, way), size in zip(axes, self.structure.loads[joint], strict=True):
                if not size or (joint, axis) in self.summed:
                    continue
                if size.reads_negative():
                    way, size = (-way[0], -way[1]), -size  # noqa: PLW2901 - drawn the way it acts
                yield Force(joint, way, amount(size), self._name("load", joint, axis))

    def _name(self, kind: Literal["member", "reaction", "load"], name: str, axis: str = "") -> tuple[str, str]:
        symbol = self.symbols.of(Term(kind, name, axis, ZERO, ONE, ZERO))
        return symbol.base, symbol.subscript

    def _centres(self) -> None:
        """Draw each moment centre, or say where it lies when that is off the paper."""
        for equation in self.body.equations:
            about = equation.about
            if about.sum != "moment":
                continue
            place = self.centre(about)
            if self.is_near(about):
                self.board.moment_centre(place)
                self._lines_to(place, equation)
            else:
                point_to_centre(self.board, place, about)

    def centre(self, about: About) -> Point:
        """Return where a moment centre lies on paper."""
        return self.fold.place((float(about.x) * self.scale.paper, float(about.y) * self.scale.paper))

    def is_near(self, about: About) -> bool:
        """Return whether a moment centre is drawn."""
        place = self.centre(about)
        xs, ys = zip(*self.sketch.place.values(), strict=True)
        near = min(xs) - NEAR <= place[0] <= max(xs) + NEAR and min(ys) - NEAR <= place[1] <= max(ys) + NEAR
        return about.joint in self.kept or near

    def _lines_to(self, place: Point, equation: Equation) -> None:
        """Show that cut bars without an arm point at a centre off the body."""
        for name in equation.dropped:
            if name not in self.pulls:
                continue
            tail, tip = self.pulls[name]
            way = unit(tail, tip)
            ahead = (place[0] - tip[0]) * way[0] + (place[1] - tip[1]) * way[1]
            start = tip if ahead > 0 else self.everywhere[self._bar_ends(self.structure.bars[name])[0]]
            end = along(place, unit(place, start), CENTRE_GAP)
            if (
                math.dist(start, place) > CENTRE_GAP + 2.0
                and self._bar_ends(self.structure.bars[name])[0] not in self.ring_at
            ):
                self.board.line(start, end, width=THIN, layer="dimension", ink="grey", dash="dashed")

    def _joint_names(self) -> None:
        xs, ys = zip(*self.sketch.place.values(), strict=True)
        middle = ((min(xs) + max(xs)) / 2, (min(ys) + max(ys)) / 2)
        for name in self.sketch.place:
            name_joint(self.sketch, name, middle, ink="grey", distance=1.9 if name in self.ring_at else 1.1)

    def _pull_names(self) -> None:
        for name, (tail, tip) in self.pulls.items():
            base, subscript = self._name("member", name)
            ink: Ink = "accent" if name in self.sought else "black"
            label = Label(tip, base, FORCE_SIZE, subscript, ink=ink, style="italic")
            far = self._bar_ends(self.structure.bars[name])[1]
            beyond = self.everywhere[far] if far in self.centres else None
            self.board.write(places_at_pull(tail, tip, label, beyond))

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
            if FLATTEST < float(ratio) < 1 / FLATTEST:
                start = self.sketch.place[self._bar_ends(bar)[0]]
                slope_triangle(self.board, start, unit(tail, tip), (level, upright))
            if length:
                self.notes.append(f"Slope of {words.bar(bar.name)}: {level} across, {upright} up, length {length}")

    def _dimensions(self) -> None:
        for equation in self.body.equations:
            if equation.about.sum == "moment":
                draw_arms(self, equation)

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
            near = all(self.is_near(e.about) for e in self.body.equations if e.about.sum == "moment")
            sentences.append(
                "Ring: moment centre, arms counted from it" if near else "Arms counted from the moment centre"
            )
        if any(self.structure.bars[name].is_link for name in self.body.cut.bars):
            sentences.append("Open arrowhead: reaction")
        sentences += dict.fromkeys(self.notes)
        numbered = [f"({self.symbols.numbers[n]}) {words.bar(n)}" for n in self._named() if n in self.symbols.numbers]
        if numbered:
            sentences.append(f"Numbered: {', '.join(numbered)}")
        return ". ".join(sentences) + "."

    def _named(self) -> Iterator[str]:
        """Yield what the forces in the figure are called after."""
        yield from self.body.cut.bars
        yield from (name for name in self.sketch.place if name in self.structure.loads)

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
            shown = loads[:MOST_NAMES] + ([f"{len(loads) - MOST_NAMES} more"] if len(loads) > MOST_NAMES else [])
            text += f"; loads at {words.listed(shown)}"
        return text + "."
