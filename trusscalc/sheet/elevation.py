"""The whole truss on paper: elevation with sections, result drawing, bare truss, mechanism."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from typing import Final

from trusscalc.errors import UnstableTrussError
from trusscalc.exact import Exact, rounded
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.sheet import words
from trusscalc.sheet.board import (
    HEAVY,
    LIGHT,
    MEDIUM,
    STRUT,
    STRUT_INSIDE,
    THIN,
    TIE,
    Board,
    along,
    around,
    unit,
)
from trusscalc.sheet.inscriptions import Scale, amount, arm, decimal_text, scales
from trusscalc.sheet.lettering import Point, text_width
from trusscalc.sheet.marks import Figure, Label
from trusscalc.sheet.sections import section_line
from trusscalc.sheet.symbols import (
    SMALL_SIZE,
    VALUE_SIZE,
    Force,
    Sketch,
    draw_force,
    draw_section_line,
    draw_support,
    level_dimension,
    name_joint,
    support_directions,
)
from trusscalc.statics.cuts import Cut, structure_of
from trusscalc.statics.steps import points_backwards
from trusscalc.truss import Truss

FULL_WIDTH: Final = 170.0
HIGHEST: Final = 110.0
HIGHEST_TOWER: Final = 190.0
MOST_TRIALS: Final = 4
SMALL_JOINT: Final = 1.3
MOST_LEVELS: Final = 4
VALUE_GAP: Final = 1.2
STRUT_GAP: Final = 1.55
METRES: Final = {"m": "metres", "mm": "millimetres", "cm": "centimetres", "ft": "feet", "in": "inches"}


def elevation(check: MemberCheck, *, width: float = FULL_WIDTH) -> Figure:
    """Return the whole truss: supports, loads, reactions, sections, members checked, dimensions.

    Parameters
    ----------
    check : MemberCheck
        What to draw.
    width : float
        Width on paper in mm.
    """
    heavy = set(check.members)

    def draw(scale: Scale) -> _Elevation:
        drawing = _Elevation(check.truss, scale)
        drawing.bars(lambda name: HEAVY if name in heavy else LIGHT)
        drawing.sections(check)
        drawing.supports()
        drawing.loads(check.case)
        drawing.reactions(check)
        drawing.joints()
        drawing.dimensions()
        return drawing

    def caption(drawing: _Elevation) -> str:
        unit_words = f"lengths in {METRES[check.truss.length]}, loads and reactions in {check.truss.force}"
        text = f"Elevation {drawing.scale.text}, {unit_words}. Heavy lines: members checked here."
        if drawing.letters:
            named = ", ".join(words.section(letter) for letter in drawing.letters)
            text += f" {named}: section{'s' if len(drawing.letters) > 1 else ''}, arrows towards the part kept."
        return text

    alt = f"Elevation of the truss with {len(check.truss.members)} members; checked: {_names(check.members)}."
    return _fitted(check.truss, width, draw, caption, alt)


def result_drawing(check: MemberCheck, *, width: float = FULL_WIDTH) -> Figure:
    """Return the whole truss with the forces of the members checked.

    Parameters
    ----------
    check : MemberCheck
        What to draw.
    width : float
        Width on paper in mm.

    Notes
    -----
    Tension is a single line, compression a double one, no force a thin one; each value carries its letter and
    sign. A value that finds no room is named in the caption, never dropped in silence.
    """
    places = _places(check)

    def draw(scale: Scale) -> _Elevation:
        drawing = _Elevation(check.truss, scale)
        drawing.senses(check)
        drawing.supports()
        drawing.loads(check.case)
        drawing.reactions(check)
        drawing.joints()
        drawing.values(check, places)
        drawing.legend(check)
        return drawing

    def caption(drawing: _Elevation) -> str:
        text = f"Member forces {drawing.scale.text}, in {check.truss.force}, rounded once from the exact values."
        if len(check.members) < len(check.truss.members):
            text += " Thin lines without a value: members not checked here."
        undecided = [name for name, item in check.members.items() if item.decimal is None]
        if undecided:
            text += f" Not decided by statics, thin without a value: {_names(undecided)}."
        if drawing.without_room:
            text += f" No room in the drawing for the values of {_names(drawing.without_room)}: see the table."
        return text

    listed = [f"{words.bar(name)} {_value(item, places)}" for name, item in check.members.items() if item.exact]
    return _fitted(check.truss, width, draw, caption, f"Member forces: {words.listed(listed)}.")


def truss_figure(truss: Truss, case: LoadCase | None = None, *, width: float = FULL_WIDTH) -> Figure:
    """Return the bare truss with supports, dimensions and, if given, loads.

    Parameters
    ----------
    truss : Truss
        What to draw.
    case : LoadCase, optional
        Its loads.
    width : float
        Width on paper in mm.
    """

    def draw(scale: Scale) -> _Elevation:
        drawing = _Elevation(truss, scale)
        drawing.bars(lambda _: LIGHT)
        drawing.supports()
        if case is not None:
            drawing.loads(case)
        drawing.joints()
        drawing.dimensions()
        return drawing

    def caption(drawing: _Elevation) -> str:
        loads = f", loads in {truss.force}" if case is not None and case.loads else ""
        return f"Elevation {drawing.scale.text}, lengths in {METRES[truss.length]}{loads}."

    alt = f"Truss with {len(truss.joints)} joints and {len(truss.members)} members."
    return _fitted(truss, width, draw, caption, alt)


def mechanism_figure(truss: Truss, error: UnstableTrussError, *, width: float = FULL_WIDTH) -> Figure:
    """Return the truss with the movement it cannot resist: thin as it stands, black as it would move.

    Parameters
    ----------
    truss : Truss
        The unstable truss.
    error : UnstableTrussError
        Tells the movement of each joint.
    width : float
        Width on paper in mm.
    """

    def draw(scale: Scale) -> _Elevation:
        drawing = _Elevation(truss, scale)
        drawing.mechanism(error.mechanism)
        drawing.supports()
        drawing.joints(moving=error.mechanism)
        return drawing

    def caption(drawing: _Elevation) -> str:
        return (
            f"Movement without resistance, {drawing.scale.text}. Thin: as stated; medium: displaced. The size of the "
            "movement means nothing, only its shape."
        )

    return _fitted(truss, width, draw, caption, f"Mechanism: {_names(error.joints)} move.")


def _fitted(
    truss: Truss,
    width: float,
    draw: Callable[[Scale], _Elevation],
    caption: Callable[[_Elevation], str],
    alt: str,
) -> Figure:
    """Return the drawing at the largest scale at which it fits the width."""
    xs = [float(joint.x) for joint in truss.joints]
    ys = [float(joint.y) for joint in truss.joints]
    wide, high = max(xs) - min(xs), max(ys) - min(ys)
    limit = HIGHEST_TOWER if high > wide else HIGHEST
    trials = 0
    drawing = None
    for scale in scales(truss.length):
        if wide * scale.paper > width or high * scale.paper > limit:
            continue
        drawing = draw(scale)
        left, lower, right, upper = drawing.board.bounds
        trials += 1
        if (right - left + 2 <= width and upper - lower <= limit + 20) or trials == MOST_TRIALS:
            break
    assert drawing is not None  # noqa: S101 - the list of scales has no end in practice
    return drawing.board.figure(caption(drawing), alt, width=width)


def _names(names: Iterable[str], most: int = 12) -> str:
    listed = [words.bar(name) for name in names]
    if len(listed) > most:
        return f"{', '.join(listed[:most])} and {len(listed) - most} more"
    return words.listed(listed)


def _places(check: MemberCheck) -> int:
    """Return decimal places that leave about four figures of the largest force."""
    largest = max((abs(item.decimal) for item in check.members.values() if item.decimal), default=1.0)
    return max(0, min(3, 3 - math.floor(math.log10(largest)))) if largest < 1000 else 1 if largest < 10000 else 0  # noqa: PLR2004


def _value(item: object, places: int) -> str:
    exact: Exact | None = getattr(item, "exact", None)
    if exact is None:
        return ""
    decimal = getattr(item, "decimal", 0.0)
    sense = getattr(item, "sense", "")
    if sense == "0":
        return "0"
    if exact.symbols:
        return f"{decimal_text(rounded(_from_float(decimal), places))} {sense}"
    text = f"{rounded(exact, places):f}".replace("-", "−")
    return f"{text} {sense}"


def _from_float(value: float) -> Exact:
    from trusscalc.exact import exact

    return exact(value)


class _Elevation:
    """A whole truss being drawn at one scale."""

    def __init__(self, truss: Truss, scale: Scale) -> None:
        self.truss, self.scale = truss, scale
        self.board = Board()
        place = {joint.name: (float(joint.x) * scale.paper, float(joint.y) * scale.paper) for joint in truss.joints}
        self.sketch = Sketch(self.board, place)
        for member in truss.members:
            a, b = place[member.start], place[member.end]
            self.sketch.take(member.start, unit(a, b))
            self.sketch.take(member.end, unit(b, a))
        xs, ys = zip(*place.values(), strict=True)
        self.middle = ((min(xs) + max(xs)) / 2, (min(ys) + max(ys)) / 2)
        self.depth: dict[str, tuple[Point, float]] = {}
        self.letters: list[str] = []
        self.without_room: list[str] = []

    def ends(self, name: str) -> tuple[Point, Point]:
        """Return where a member's ends lie."""
        member = self.truss.member(name)
        return self.sketch.place[member.start], self.sketch.place[member.end]

    def bars(self, line_width: Callable[[str], float]) -> None:
        """Draw all members as single lines."""
        place = self.sketch.place
        for member in self.truss.members:
            self.board.line(place[member.start], place[member.end], width=line_width(member.name))

    def senses(self, check: MemberCheck) -> None:
        """Draw members by the sense of their force."""
        place = self.sketch.place
        for member in self.truss.members:
            ends = place[member.start], place[member.end]
            item = check.members.get(member.name)
            if item is not None and item.sense == "C":
                self.board.line(*ends, width=STRUT)
                self.board.line(*ends, width=STRUT_INSIDE, layer="inside", ink="white", room=False)
            else:
                self.board.line(*ends, width=TIE if item is not None and item.sense == "T" else THIN)

    def supports(self) -> None:
        """Draw the supports."""
        ways = support_directions(self.sketch, self.truss)
        for support in self.truss.supports:
            depth = draw_support(self.sketch, support, ways[support.joint])
            self.depth[support.joint] = (ways[support.joint][0], depth)

    def loads(self, case: LoadCase) -> None:
        """Draw the loads with their values, the way they act."""
        for load in case.loads:
            for way, size in (((1.0, 0.0), load.fx), ((0.0, 1.0), load.fy)):
                if size:
                    back = points_backwards(size)
                    direction = (-way[0], -way[1]) if back else way
                    draw_force(self.sketch, Force(load.joint, direction, amount(-size if back else size), small=True))

    def reactions(self, check: MemberCheck) -> None:
        """Draw the reactions that are not zero, with their values."""
        for link in self.truss.links:
            item = check.reactions[link.name]
            if item.exact is None or not item.exact:
                continue
            way = unit((0.0, 0.0), (float(link.dx), float(link.dy)))
            side, depth = self.depth[link.joint]
            behind = (-way[0], -way[1])
            gap = depth + 1.4 if side[0] * behind[0] + side[1] * behind[1] > 0.5 else 1.2  # noqa: PLR2004
            taken = self.sketch.taken[link.joint]
            if side in taken:
                taken.remove(side)  # the arrow stands behind the symbol, on the same side
            draw_force(self.sketch, Force(link.joint, way, amount(item.exact), reaction=True, small=True), gap=gap)
            taken.append(side)

    def joints(self, moving: Mapping[str, object] | None = None) -> None:
        """Draw the joints and write their names."""
        for name, place in self.sketch.place.items():
            self.board.joint(place, diameter=SMALL_JOINT)
        for name in self.sketch.place:
            if moving is None or name in moving:
                name_joint(self.sketch, name, self.middle)

    # --- sections -----------------------------------------------------------------------------------------

    def sections(self, check: MemberCheck) -> None:
        """Draw the section lines of the check's steps, with their letters."""
        structure = structure_of(check.truss, check.case)
        letters = words.letters_of(structure, check.steps)
        drawn: set[str] = set()
        for step in check.steps:
            for equation in step.equations:
                letter = letters.get(words.members_cut(structure, equation.cut), "")
                if equation.cut.kind == "section" and letter and letter not in drawn:
                    drawn.add(letter)
                    if self._section(equation.cut, letter):
                        self.letters.append(letter)

    def _section(self, cut: Cut, letter: str) -> bool:
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
        draw_section_line(self.board, line, letter, (sum(xs) / len(xs), sum(ys) / len(ys)))
        return True

    # --- results ------------------------------------------------------------------------------------------

    def values(self, check: MemberCheck, places: int) -> None:
        """Write the values along their members, the shortest member first."""
        listed = [(name, item) for name, item in check.members.items() if item.exact is not None]
        listed.sort(key=lambda entry: (round(math.dist(*self.ends(entry[0])), 6), *self.ends(entry[0])))
        for name, item in listed:
            gap = STRUT_GAP if item.sense == "C" else VALUE_GAP
            label = Label((0.0, 0.0), _value(item, places), SMALL_SIZE)
            if not self.board.write(self._along_member(name, label, gap), must=False, gap=0.15):
                self.without_room.append(name)

    def _along_member(self, name: str, label: Label, gap: float) -> Iterator[Label]:
        a, b = self.ends(name)
        way = unit(a, b)
        angle = math.degrees(math.atan2(way[1], way[0]))
        if angle > 90.001 or angle <= -89.999:  # noqa: PLR2004 - readable from below or from the right
            angle += 180.0 if angle < 0 else -180.0
        normal = (-way[1], way[0])
        middle = ((a[0] + b[0]) / 2, (a[1] + b[1]) / 2)
        outside = (middle[0] - self.middle[0]) * normal[0] + (middle[1] - self.middle[1]) * normal[1]
        sides = [normal, (-normal[0], -normal[1])] if outside >= 0 else [(-normal[0], -normal[1]), normal]
        turned = Label(label.place, label.text, label.size, angle=angle)
        for shift in (0.0, 0.06, -0.06, 0.12, -0.12, 0.18, -0.18):
            spot = along(middle, way, shift * math.dist(a, b))
            for side in sides:
                yield from around(spot, turned, gap - 0.35, [side])

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
            if sense == "C":
                self.board.line(*ends, width=STRUT)
                self.board.line(*ends, width=STRUT_INSIDE, layer="inside", ink="white", room=False)
            else:
                self.board.line(*ends, width=TIE if sense == "T" else THIN)
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

    # --- dimensions ---------------------------------------------------------------------------------------

    def dimensions(self) -> None:
        """Draw panel and overall dimensions below, heights at the right."""
        chain = self._lower_chain()
        if len(chain) > 1:
            self._level_chain(chain)
        self._heights()

    def _lower_chain(self) -> list[tuple[Exact, float]]:
        """Return the panel points of the lower outline, left to right: exact and on paper."""
        place = self.sketch.place
        spans = [tuple(sorted((place[member.start], place[member.end]))) for member in self.truss.members]
        found: dict[float, tuple[Exact, float]] = {}
        for joint in self.truss.joints:
            x, y = place[joint.name]
            covered = any(
                a[0] - 1e-9 <= x <= b[0] + 1e-9
                and b[0] - a[0] > 1e-9  # noqa: PLR2004
                and a[1] + (b[1] - a[1]) * (x - a[0]) / (b[0] - a[0]) < y - 0.01
                for a, b in spans
            )
            below = any(
                abs(a[0] - x) < 1e-9 and abs(b[0] - x) < 1e-9 and min(a[1], b[1]) < y - 0.01  # noqa: PLR2004
                for a, b in spans
            )
            if not covered and not below:
                found[round(x, 6)] = (joint.x, x)
        for edge in (min(place.values())[0], max(place.values())[0]):
            if round(edge, 6) not in found:
                found[round(edge, 6)] = next((j.x, edge) for j in self.truss.joints if place[j.name][0] == edge)
        return [found[x] for x in sorted(found)]

    def _level_chain(self, chain: Sequence[tuple[Exact, float]]) -> None:
        lower = self.board.bounds[1]
        level = lower - 5.0
        groups: list[list[tuple[tuple[Exact, float], tuple[Exact, float]]]] = []
        for first, second in itertools.pairwise(chain):
            if groups and groups[-1][0][1][0] - groups[-1][0][0][0] == second[0] - first[0]:
                groups[-1].append((first, second))
            else:
                groups.append([(first, second)])
        whole = arm(chain[-1][0] - chain[0][0])
        name = self.truss.length
        if len(groups) == 1:
            panels, size = len(groups[0]), arm(groups[0][0][1][0] - groups[0][0][0][0])
            text = f"{panels} panels of {size} {name}, together {whole} {name}" if panels > 1 else f"{whole} {name}"
            self._dimension(chain[0][1], chain[-1][1], level, text)
            return
        texts = [
            (group[0][0][1], group[-1][1][1], self._panel_text(len(group), arm(group[0][1][0] - group[0][0][0])))
            for group in groups
        ]
        if all(b - a > text_width(text, SMALL_SIZE) + 1.0 for a, b, text in texts):
            for a, b, text in texts:
                self._dimension(a, b, level, text)
            level -= 6.0
        self._dimension(chain[0][1], chain[-1][1], level, whole)

    @staticmethod
    def _panel_text(count: int, size: str) -> str:
        return f"{count} panels of {size}" if count > 1 else size

    def _dimension(self, start: float, end: float, level: float, text: str) -> None:
        level_dimension(self.board, (start, level + 5.0), (end, level + 5.0), level, text)

    def _heights(self) -> None:
        place = self.sketch.place
        heights = {round(place[joint.name][1], 6): joint.y for joint in self.truss.joints}
        levels = sorted(heights)
        if len(levels) < 2:  # noqa: PLR2004
            return
        if len(levels) > MOST_LEVELS or min(b - a for a, b in itertools.pairwise(levels)) < 4.0:  # noqa: PLR2004
            levels = [levels[0], levels[-1]]
        side = self.board.bounds[2] + 4.5
        for low, high in itertools.pairwise(levels):
            level_dimension(
                self.board, (side - 5.0, low), (side - 5.0, high), side, arm(heights[high] - heights[low]), upright=True
            )
