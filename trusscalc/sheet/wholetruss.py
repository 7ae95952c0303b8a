"""A whole truss drawn at one scale: bars, supports, loads, reactions, sections, values."""

from __future__ import annotations

import itertools
import math
import statistics
from collections.abc import Callable, Collection, Iterable, Iterator, Mapping, Sequence
from typing import Final

from trusscalc.decimals import rounded
from trusscalc.loads import LoadCase
from trusscalc.membercheck import ForceCheck, MemberCheck
from trusscalc.sheet import words
from trusscalc.sheet.board import (
    LIGHT,
    MEDIUM,
    SMALL_SIZE,
    THIN,
    VALUE_SIZE,
    Board,
    along_line,
    around,
    unit,
)
from trusscalc.sheet.folding import Fold, break_line
from trusscalc.sheet.inscriptions import MINUS, Scale, amount
from trusscalc.sheet.lettering import Point, text_width
from trusscalc.sheet.marks import Label, Ring
from trusscalc.sheet.sections import section_line
from trusscalc.sheet.symbols import (
    Force,
    Sketch,
    draw_force,
    draw_section_line,
    draw_support,
    name_joint,
    support_directions,
)
from trusscalc.statics.cuts import Cut, structure_of
from trusscalc.truss import Truss

SMALL_JOINT: Final = 1.3
MARKED_JOINT: Final = 1.9
MOST_SECTIONS: Final = 8
MOST_NAMED: Final = 24
MOST_TOLD: Final = 12
CROWDED: Final = 7.0
"""Median length of bars on paper, mm, below which only joints of interest are named."""
CLOSEST_LOADS: Final = 2.5
EDGE: Final = 0.01
IN_LINE: Final = 0.5
"""Cosine above which a reaction's arrow stands behind its support's symbol."""
VALUE_GAP: Final = 1.2
STRUT_GAP: Final = 1.55


class WholeTruss:
    """A whole truss, or a stretch of one, being drawn at one scale.

    Parameters
    ----------
    truss : Truss
        What to draw.
    scale : Scale
        Its scale.
    span : (float, float), optional
        Where along x the stretch begins and ends, in the truss's unit; None for all of it.
    """

    def __init__(self, truss: Truss, scale: Scale, span: tuple[float, float] | None = None) -> None:
        self.truss, self.scale = truss, scale
        self.board = Board()
        place = {joint.name: (float(joint.x) * scale.paper, float(joint.y) * scale.paper) for joint in truss.joints}
        self.flat = place
        self.span = (span[0] * scale.paper, span[1] * scale.paper) if span else None
        self.stretch = Fold(0, (self.span,) if self.span else ())
        shown = {name: spot for name, spot in place.items() if span is None or self._holds(spot[0])}
        self.sketch = Sketch(self.board, shown)
        for member in truss.members:
            a, b = place[member.start], place[member.end]
            self.sketch.take(member.start, unit(a, b))
            self.sketch.take(member.end, unit(b, a))
        xs, ys = zip(*place.values(), strict=True)
        self.middle = ((min(xs) + max(xs)) / 2, (min(ys) + max(ys)) / 2)
        self.members = {member.name: member for member in truss.members}
        lengths = [math.dist(place[member.start], place[member.end]) for member in truss.members]
        self.crowded = statistics.median(lengths) < CROWDED
        self.notes: list[str] = []
        self.depth: dict[str, tuple[list[Point], float]] = {}
        self.letters: list[str] = []
        self.without_room: list[str] = []
        self.value_texts: set[str] = set()

    def _holds(self, x: float) -> bool:
        return self.span is None or self.span[0] - EDGE <= x <= self.span[1] + EDGE

    def ends(self, name: str) -> tuple[Point, Point]:
        """Return where a member's ends lie."""
        member = self.members[name]
        return self.flat[member.start], self.flat[member.end]

    def pieces(self, name: str) -> list[tuple[Point, Point]]:
        """Return what is drawn of a member."""
        return [(a, b) for a, b in self.stretch.pieces(*self.ends(name)) if math.dist(a, b) > EDGE]

    def bars(self, line_width: Callable[[str], float]) -> None:
        """Draw all members as single lines."""
        for member in self.truss.members:
            for start, end in self.pieces(member.name):
                self.board.line(start, end, width=line_width(member.name))

    def senses(self, check: MemberCheck) -> None:
        """Draw members by the sense of their force."""
        for member in self.truss.members:
            item = check.members.get(member.name)
            sense = item.sense if item is not None else None
            for start, end in self.pieces(member.name):
                self.board.sense_line(start, end, sense)

    def supports(self) -> None:
        """Draw the supports."""
        ways = support_directions(self.sketch, self.truss)
        for support in self.truss.supports:
            if support.joint not in ways:
                continue
            depth = draw_support(self.sketch, support, ways[support.joint])
            self.depth[support.joint] = (ways[support.joint], depth)

    def remarks(self) -> str:
        """Return what the drawing leaves out, for the caption."""
        left_out = [label.text for label in self.board.left_out if label.text not in self.value_texts]
        notes = [*self.notes]
        if left_out:
            told = ", ".join(dict.fromkeys(left_out[:MOST_TOLD]))
            notes.append(f"No room for: {told}{' and others' if len(left_out) > MOST_TOLD else ''}")
        return "".join(f" {note}." for note in dict.fromkeys(notes))

    def loads(self, case: LoadCase, *, without: Collection[str] = ()) -> None:
        """Draw the loads with their values, the way they act; of many close together, some."""
        shown = self.sketch.place.keys() - set(without)
        loads = [load for load in case.loads if load.joint in shown and (load.fx or load.fy)]
        every = self._every(sorted(self.sketch.place[load.joint] for load in loads))
        if every > 1:
            loads = sorted(loads, key=lambda load: self.sketch.place[load.joint])[::every]
            self.notes.append(
                f"Loads lie too close to be drawn one by one: one in {every} is shown, all are in the table"
            )
        for load in loads:
            for way, size in (((1.0, 0.0), load.fx), ((0.0, 1.0), load.fy)):
                if size:
                    back = size.reads_negative()
                    direction = (-way[0], -way[1]) if back else way
                    draw_force(self.sketch, Force(load.joint, direction, amount(-size if back else size), small=True))

    @staticmethod
    def _every(places: Sequence[Point]) -> int:
        """Return of how many loads one is drawn, so that arrows stay apart."""
        if len(places) < 3:  # noqa: PLR2004
            return 1
        spacing = statistics.median(math.dist(a, b) for a, b in itertools.pairwise(places))
        return 1 if spacing >= CLOSEST_LOADS else math.ceil(8.0 / max(spacing, 0.01))

    def reactions(self, check: MemberCheck) -> None:
        """Draw the reactions that are not zero, with their values."""
        for link in self.truss.links:
            item = check.reactions[link.name]
            if item.exact is not None and item.exact and link.joint in self.sketch.place:
                way = unit((0.0, 0.0), (float(link.dx), float(link.dy)))
                self.reaction(link.joint, way, amount(item.exact))

    def reaction(self, joint: str, way: Point, value: str) -> None:
        """Draw the arrow of a reaction at a supported joint, behind the support's symbol if it stands in its line."""
        sides, depth = self.depth[joint]
        behind = (-way[0], -way[1])
        side = next((side for side in sides if side[0] * behind[0] + side[1] * behind[1] > IN_LINE), None)
        taken = self.sketch.taken[joint]
        if side in taken:
            taken.remove(side)  # the arrow stands behind the symbol, on the same side
        gap = depth + 1.4 if side else 1.2
        draw_force(self.sketch, Force(joint, way, value, reaction=True, small=True), gap=gap)
        taken += [side] if side else []

    def joints(self, *, named: Iterable[str] = (), marked: Collection[str] = ()) -> None:
        """Draw the joints, marked ones black, and write their names; on a crowded drawing only those of members named.

        Marked joints are named on a crowded drawing too, as long as they are few.
        """
        wanted = set(self.sketch.place)
        if self.crowded:
            ends = {end for name in named for end in (self.members[name].start, self.members[name].end)}
            wanted &= ends if len(ends) <= MOST_NAMED else set()
            wanted |= set(marked) if len(marked) <= MOST_NAMED else set()
            wanted |= {support.joint for support in self.truss.supports}
            self.notes.append("Only some joints are named")
        for name, place in self.sketch.place.items():
            if name in marked:
                self.board.put("joint", Ring(place, MARKED_JOINT, LIGHT, fill="black"))
            elif not self.crowded:
                self.board.joint(place, diameter=SMALL_JOINT)
        for name in self.sketch.place:
            if name in wanted:
                name_joint(self.sketch, name, self.middle)

    # --- sections -----------------------------------------------------------------------------------------

    def sections(self, check: MemberCheck) -> None:
        """Draw the section lines of the check's steps, with their letters."""
        structure = structure_of(check.truss, check.case)
        letters = words.letters_of(structure, check.steps)
        drawn: set[str] = set()
        if len(set(letters.values())) > MOST_SECTIONS:
            self.notes.append("The sections, too many for this drawing, are shown with their free bodies")
            return
        for step in check.steps:
            for equation in step.equations:
                letter = letters.get(words.members_cut(structure, equation.cut), "")
                if equation.cut.kind == "section" and letter and letter not in drawn:
                    drawn.add(letter)
                    if not self.section(equation.cut, letter):
                        self.notes.append(f"Section {words.section(letter)} is shown with its free body")

    def section(self, cut: Cut, letter: str) -> bool:
        """Draw one section line with its letter; False when no line goes through the members cut alone."""
        place, kept = self.sketch.place, set(cut.kept)
        segments, others = {}, []
        for member in self.truss.members:
            a, b = member.start, member.end
            if (a in kept) == (b in kept):
                others.append((place[a], place[b]))
            else:
                near, far = (a, b) if a in kept else (b, a)
                segments[member.name] = (place[near], place[far])
        line = section_line(segments, others, near_kept=False, share=(0.5, 0.38, 0.62)[len(self.letters) % 3])
        if line is None:
            return False
        xs, ys = zip(*(place[name] for name in kept), strict=True)
        draw_section_line(self.sketch, line, letter, (sum(xs) / len(xs), sum(ys) / len(ys)))
        self.letters.append(letter)
        return True

    def continued(self) -> None:
        """Mark the ends of a stretch where the truss goes on: break lines if bars are cut, and a word."""
        if self.span is None:
            return
        xs, ys = zip(*self.flat.values(), strict=True)
        _, lower, _, upper = self.board.bounds
        for edge in self.span:
            if min(xs) + EDGE < edge < max(xs) - EDGE:
                broken = any(min(a, b) < edge - EDGE and max(a, b) > edge + EDGE for a, b in self._level_spans())
                if broken:
                    break_line(self.board, 0, edge, min(ys) - 2.5, max(ys) + 2.5)
                label = Label((edge, upper), "continued", 7.0, ink="grey")
                spots = [(edge, max(ys) + 1.0), (edge, upper), (edge, lower)]
                ways = [(0.0, 1.0), (0.0, 1.0), (0.0, -1.0)]
                self.board.write(
                    place for spot, way in zip(spots, ways, strict=True) for place in around(spot, label, 2.6, [way])
                )

    def _level_spans(self) -> Iterator[tuple[float, float]]:
        for name in self.members:
            a, b = self.ends(name)
            yield a[0], b[0]

    # --- results ------------------------------------------------------------------------------------------

    def values(self, check: MemberCheck, places: int) -> None:
        """Write the values along their members, the shortest member first."""
        listed = [
            (name, item) for name, item in check.members.items() if item.exact is not None and self._is_labelled(name)
        ]
        listed.sort(key=lambda entry: (round(math.dist(*self.ends(entry[0])), 6), *self.ends(entry[0])))
        for name, item in listed:
            gap = STRUT_GAP if item.sense == "C" else VALUE_GAP
            label = Label((0.0, 0.0), value_text(check.case, item, places), SMALL_SIZE)
            self.value_texts.add(label.text)
            if math.dist(*self.ends(name)) < text_width(label.text, label.size):
                self.without_room.append(name)
                continue
            if not self.board.write(along_line(*self.ends(name), label, gap - 0.35, self.middle), must=False, gap=0.15):
                self.without_room.append(name)

    def _is_labelled(self, name: str) -> bool:
        """Return whether a member's value belongs on this stretch: the one that holds its middle."""
        a, b = self.ends(name)
        middle = (a[0] + b[0]) / 2
        if self.span is None:
            return True
        low, high = self.span
        last = high >= max(x for x, _ in self.flat.values()) - EDGE
        return low - EDGE <= middle < high - EDGE or (last and abs(middle - high) <= EDGE)

    def legend(self, check: MemberCheck) -> None:
        """Draw what the line styles mean, below everything."""
        senses = {item.sense for item in check.members.values()}
        left, lower, right, _ = self.board.bounds
        level = lower - 6.0
        entries = [
            (sense, text)
            for sense, text in (
                ("T", "T, tension: single line"),
                ("C", "C, compression: double line"),
                ("0", "0, no force: thin line"),
            )
            if sense in senses
        ]
        size = 13.0
        lengths = [size + 2.0 + text_width(text, VALUE_SIZE) for _, text in entries]
        space = max(6.0, (right - left - sum(lengths)) / max(1, len(entries) - 1)) if len(entries) > 1 else 6.0
        space = min(space, 16.0)
        x = (left + right) / 2 - (sum(lengths) + space * (len(entries) - 1)) / 2
        for (sense, text), length in zip(entries, lengths, strict=True):
            ends = (x, level), (x + size, level)
            self.board.sense_line(*ends, sense)
            self.board.put("lettering", Label((x + size + 2.0, level), text, VALUE_SIZE, anchor="left"))
            x += length + space

    def mechanism(self, moves: Mapping[str, tuple[float, float]]) -> None:
        """Draw the truss thin, its displaced form, and an arrow for every joint that moves."""
        place = self.sketch.place
        xs, ys = zip(*place.values(), strict=True)
        size = 0.09 * max(max(xs) - min(xs), max(ys) - min(ys), 30.0)
        longest = max((math.hypot(*move) for move in moves.values()), default=1.0) or 1.0
        new = {
            name: (x + size * moves[name][0] / longest, y + size * moves[name][1] / longest)
            if name in moves
            else (x, y)
            for name, (x, y) in place.items()
        }
        for member in self.truss.members:
            self.board.line(place[member.start], place[member.end], width=THIN)
            if member.start in moves or member.end in moves:
                self.board.line(new[member.start], new[member.end], width=MEDIUM)
        for name in moves:
            self.board.joint(new[name], diameter=SMALL_JOINT)
            if math.dist(place[name], new[name]) > 0.5:  # noqa: PLR2004 - too short for an arrow
                self.board.arrow(place[name], new[name], width=LIGHT, ink="accent", small=True)


def value_text(case: LoadCase, item: ForceCheck, places: int) -> str:
    """Return a force with its letter, rounded once; symbols at their values."""
    if item.exact is None or item.decimal is None:
        return ""
    if item.sense == "0":
        return "0"
    text = f"{rounded(case.value(item.exact), places):f}".replace("-", MINUS)
    return f"{text} {item.sense}"
