"""Force polygons and Maxwell's diagram: known diagrams, closing, drawing, and what happens to a wrong force."""

from __future__ import annotations

import dataclasses
import math
from functools import cache

import drawn_trusses
import pytest

from trusscalc.exact import Exact, rational
from trusscalc.exacttext import parse
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.sheet.forcescale import Extent, force_scale
from trusscalc.sheet.lettering import SMALLEST, boxes_of, overlaps, subscript_size
from trusscalc.sheet.marks import Arrow, Figure, Label, Stroke
from trusscalc.sheet.planar import crossing_members
from trusscalc.sheet.polygons import bow_names, force_polygon, maxwell_diagram, why_no_maxwell
from trusscalc.sheet.reciprocal import reciprocal
from trusscalc.statics.cuts import structure_of
from trusscalc.truss import Truss

PLANAR = [name for name in drawn_trusses.ORDINARY if name != "crossing"]


@cache
def checked(name: str) -> MemberCheck:
    """Return the check of a named truss for all its members."""
    truss, case, _ = drawn_trusses.ORDINARY[name]()
    return check_members(truss, case, "all")


def king_post() -> MemberCheck:
    """Return a king-post truss: span 8, rise 3, 10 at the apex, 6 at the foot of the post; all slopes 3 : 4 : 5."""
    joints = {"A": (0, 0), "B": (4, 3), "C": (8, 0), "D": (4, 0)}
    truss = Truss(joints, ["A-B", "B-C", "A-D", "D-C", "B-D"], {"A": "pin", "C": "roller"})
    return check_members(truss, LoadCase("dead", {"B": (0, -10), "D": (0, -6)}), "all")


def with_force(check: MemberCheck, name: str, force: Exact) -> MemberCheck:
    """Return a check that states another force for one member, in its results and in its steps."""
    members = dict(check.members) | {name: dataclasses.replace(check.members[name], exact=force)}
    return dataclasses.replace(check, members=members)


def labels(figure: Figure) -> list[Label]:
    """Return a figure's lettering."""
    return [mark for mark in figure.marks if isinstance(mark, Label)]


def pair(x: object, y: object) -> tuple[Exact, Exact]:
    """Return two exact numbers."""
    return parse(str(x)), parse(str(y))


# --- known diagrams ---------------------------------------------------------------------------------------


def test_the_diagram_of_a_king_post_by_hand() -> None:
    """Worked by hand: both reactions are 8, rafters 8 · 5/3 = 40/3 C, ties 8 · 4/3 = 32/3 T, post 6 T.

    Outside from the left support over the truss: A left of the apex load, B right of it, C and D below. From a, the
    load at the apex leads 10 down to b, the right reaction 8 up to c, the load at the foot 6 down to d, the left
    reaction 8 up to a again. The left panel is reached from d along the level tie, and from a along the rafter.
    """
    diagram = reciprocal(king_post())
    assert diagram is not None
    assert diagram.points == {
        "A": pair(0, 0),
        "B": pair(0, -10),
        "C": pair(0, -2),
        "D": pair(0, -8),
        "E": pair("-32/3", -8),
        "F": pair("-32/3", -2),
    }
    assert bow_names(king_post()) == {"A-B": "A–E", "B-C": "B–F", "A-D": "E–D", "D-C": "F–C", "B-D": "F–E"}
    assert diagram.closes


def test_the_diagram_of_a_warren_truss_of_sixty_degrees_by_hand() -> None:
    """Two panels of 2 under one load of 2 in the middle of the tie: every web carries 2/√3, the top chord the same."""
    joints = {"L0": (0, 0), "L1": (2, 0), "L2": (4, 0), "U0": (1, "sqrt(3)"), "U1": (3, "sqrt(3)")}
    members = ["L0-L1", "L1-L2", "L0-U0", "U0-L1", "L1-U1", "U1-L2", "U0-U1"]
    truss = Truss(joints, members, {"L0": "pin", "L2": "roller"})
    diagram = reciprocal(check_members(truss, LoadCase("one", {"L1": (0, -2)}), "all"))
    assert diagram is not None
    third = "sqrt(3)/3"
    assert diagram.points == {
        "A": pair(0, 0),
        "B": pair(0, 1),
        "C": pair(0, -1),
        "D": pair(f"-{third}", -1),
        "E": pair(f"-2*{third}", 0),
        "F": pair(f"-{third}", 1),
    }


# --- what every diagram keeps -----------------------------------------------------------------------------


@pytest.mark.parametrize("name", PLANAR)
def test_lines_of_the_diagram_are_the_forces(name: str) -> None:
    """Exactly: between its two points a member's force, as long as it is large, parallel to the member."""
    check = checked(name)
    diagram = reciprocal(check)
    assert diagram is not None
    structure = structure_of(check.truss, check.case)
    assert {between.force.name for between in diagram.notation.members} == {m.name for m in check.truss.members}
    for between in diagram.notation.members:
        (x1, y1), (x2, y2) = diagram.points[between.before], diagram.points[between.after]
        dx, dy = x2 - x1, y2 - y1
        bar = structure.bars[between.force.name]
        assert not dx * bar.dy - dy * bar.dx
        force = check.value(check.members[bar.name].exact or rational(0))
        assert dx * dx + dy * dy == force * force
        assert (dx * bar.dx + dy * bar.dy).sign() == force.sign()
    for between in diagram.notation.outside:
        (x1, y1), (x2, y2) = diagram.points[between.before], diagram.points[between.after]
        assert (x2 - x1, y2 - y1) == (between.force.x, between.force.y)


@pytest.mark.parametrize("name", PLANAR)
def test_spaces_are_as_many_as_euler_says(name: str) -> None:
    """Panels: members - joints + 1 for a truss in one piece; outside one space for every load and reaction."""
    check = checked(name)
    diagram = reciprocal(check)
    assert diagram is not None
    spaces = diagram.notation.spaces
    panels = [space for space in spaces if not space.outside]
    assert len(panels) == len(check.truss.members) - len(check.truss.joints) + 1
    assert len(spaces) - len(panels) == len(diagram.notation.outside)
    assert len({space.name for space in spaces}) == len(spaces)


@pytest.mark.parametrize("name", PLANAR)
def test_lines_on_paper_are_to_scale(name: str) -> None:
    """Every member's force is drawn: a line of |force| times the stated scale, parallel to the member."""
    check = checked(name)
    figure = maxwell_diagram(check)
    assert figure is not None
    scale = stated_scale(figure, check.truss.force)
    structure = structure_of(check.truss.at_values(), check.case)
    drawn = [mark.points for mark in figure.marks if isinstance(mark, Stroke) and len(mark.points) == 2]
    for member, item in check.members.items():
        if not item.decimal:
            continue
        bar = structure.bars[member]
        long = math.hypot(float(bar.dx), float(bar.dy))
        size = abs(item.decimal) * scale / long
        wanted = float(bar.dx) * size, float(bar.dy) * size
        found = [
            (b, a)
            for a, b in drawn
            if any(
                math.dist((sign * (b[0] - a[0]), sign * (b[1] - a[1])), wanted) < 0.003  # thousandths of mm, rounded
                for sign in (1, -1)
            )
        ]
        assert found, member


def stated_scale(figure: Figure, force: str) -> float:
    """Return millimetres for one unit of force, as the caption states it."""
    words = figure.caption.split(f" {force}")[0].split()
    size, name = words[-1], words[-3]
    return {"cm": 10.0, "in": 25.4}[name] / float(size)


def figures_of(name: str) -> list[Figure]:
    """Return Maxwell's diagram and the force polygons of a truss."""
    check = checked(name)
    found = [maxwell_diagram(check), *(force_polygon(check, step) for step in check.steps)]
    return [figure for figure in found if figure is not None]


@pytest.mark.parametrize("name", list(drawn_trusses.ORDINARY))
def test_figures_are_legible(name: str) -> None:
    """No label on another, none under 7 points, nothing beyond the edge, none wider than the text; nothing left out."""
    figures = figures_of(name)
    assert len(figures) > 3
    for figure in figures:
        assert overlaps(figure) == ()
        assert figure.width <= 170.001
        assert figure.caption.endswith(".")
        assert "Closing error, from the exact values: 0" in figure.caption
        assert "No room" not in figure.caption
        assert figure.alt.endswith("it closes.")
        for label in labels(figure):
            assert label.size >= SMALLEST
            assert not label.subscript or subscript_size(label.size) >= SMALLEST
        for mark in figure.marks:
            for box in boxes_of(mark):
                left, lower, right, upper = box.bounds
                assert min(left, lower) >= -0.01
                assert right <= figure.width + 0.01
                assert upper <= figure.height + 0.01


@pytest.mark.parametrize("name", PLANAR)
def test_every_space_is_lettered_in_both_drawings(name: str) -> None:
    """A capital for the space, the same letter, small, for its point (numbers the same)."""
    check = checked(name)
    diagram, figure = reciprocal(check), maxwell_diagram(check)
    assert diagram is not None
    assert figure is not None
    names = [space.name for space in diagram.notation.spaces]
    written = [part for label in labels(figure) for part in label.text.split(", ")]
    assert sorted(written) == sorted([*names, *(name.lower() for name in names)])


# --- force polygons ---------------------------------------------------------------------------------------


def test_a_polygon_is_drawn_tip_to_tail_and_closes() -> None:
    """Joint A of the king post: reaction 8 up, rafter 40/3 C, tie 32/3 T; a triangle of sides 3 : 4 : 5."""
    check = king_post()
    step = next(step for step in check.steps if step.cut.kept == ("A",))
    figure = force_polygon(check, step)
    assert figure is not None
    arrows = [mark for mark in figure.marks if isinstance(mark, Arrow)]
    for arrow, following in zip(arrows, (*arrows[1:], arrows[0]), strict=True):
        assert math.dist(arrow.tip, following.tail) < 0.003
    scale = stated_scale(figure, "kN")
    sizes = sorted(math.dist(arrow.tail, arrow.tip) / scale for arrow in arrows)
    assert sizes == pytest.approx([8, 32 / 3, 40 / 3], abs=0.003)
    texts = {(label.text, label.subscript) for label in labels(figure)}
    assert {("N", "A–B"), ("N", "A–D"), ("R", "A,y"), ("8", ""), ("−13.333 C", ""), ("10.667 T", "")} <= texts
    # clockwise round A from below: the reaction, then the rafter, then the tie; the rafter pushes at A
    turns = [(b.tip[0] - b.tail[0], b.tip[1] - b.tail[1]) for b in arrows]
    after_reaction = turns[(next(n for n, (x, y) in enumerate(turns) if abs(x) < 0.01 and y > 0) + 1) % 3]
    assert after_reaction[0] < 0
    assert after_reaction[1] < 0


def test_no_polygon_without_every_force() -> None:
    """A section whose other members are not on the sheet is not drawn, and no value is fetched from elsewhere."""
    truss, case, members = drawn_trusses.k_truss()
    check = check_members(truss, case, [members[0]])
    step = check.steps[-1]
    assert step.kind == "section"
    assert force_polygon(check, step) is None


# --- a wrong force ----------------------------------------------------------------------------------------


def test_a_wrong_force_does_not_close_and_the_figures_say_so() -> None:
    """One member off by 1: both its joints are told with the error, exactly; the polygon shows its gap."""
    check = with_force(king_post(), "A-D", rational(35, 3))
    diagram = reciprocal(check)
    assert diagram is not None
    assert not diagram.closes
    assert diagram.joint_errors == {"A": pair(1, 0), "D": pair(-1, 0)}
    figure = maxwell_diagram(check)
    assert figure is not None
    assert "DOES NOT CLOSE: joint A by (1, 0) kN; joint D by (−1, 0) kN." in figure.caption
    assert figure.alt.endswith("it does not close.")
    step = next(step for step in check.steps if step.cut.kept == ("A",))
    polygon = force_polygon(check, step)
    assert polygon is not None
    assert "DOES NOT CLOSE: the forces add up to (1, 0) kN instead of 0" in polygon.caption
    assert any(isinstance(mark, Stroke) and mark.dash == "dashed" for mark in polygon.marks)


def test_a_wrong_reaction_leaves_the_outer_polygon_open() -> None:
    """The line of loads and reactions misses its start by what the reaction is wrong."""
    check = king_post()
    wrong = dataclasses.replace(check.reactions["C.y"], exact=rational(9))
    check = dataclasses.replace(check, reactions=dict(check.reactions) | {"C.y": wrong})
    diagram, figure = reciprocal(check), maxwell_diagram(check)
    assert diagram is not None
    assert diagram.outer_error == pair(0, 1)
    assert figure is not None
    assert "DOES NOT CLOSE: loads and reactions by (0, 1) kN; joint C by (0, 1) kN." in figure.caption


# --- where there is none ----------------------------------------------------------------------------------


def why(joints: dict[str, object], members: list[str], supports: dict[str, object], loads: dict[str, object]) -> str:
    """Return why a truss has no diagram, and hold that then there is none."""
    truss = Truss(joints, members, supports)  # type: ignore[arg-type]
    check = check_members(truss, LoadCase("w", loads), "all")  # type: ignore[arg-type]
    reason = why_no_maxwell(check)
    assert (maxwell_diagram(check) is None) == bool(reason)
    assert bool(bow_names(check)) != bool(reason)
    return reason


def test_each_reason_in_plain_words() -> None:
    """Members not asked for, crossing, several pieces, a load inside, nothing acting, indeterminate."""
    truss, case, _ = drawn_trusses.pratt()
    assert "it needs the forces of all members" in why_no_maxwell(check_members(truss, case, ["L0-L1"]))
    assert "members A–D and B–C cross" in why_no_maxwell(checked("crossing"))
    fan: dict[str, object] = {"A": (0, 0), "B": (6, 0), "C": (3, 5), "M": (3, 2)}
    webs = ["A-B", "B-C", "A-C", "A-M", "C-M"]
    held: dict[str, object] = {"A": "pin", "B": "roller"}
    inside = why(fan, webs, held, {"C": (0, -1), "M": (0, 0)})
    assert inside == ""
    pressed = why(fan, webs, held, {"C": (0, -1), "M": (1, 0)})
    assert "acts at joint M, inside the truss" in pressed
    assert "no loads act" in why(fan, webs, held, {})
    masts: dict[str, object] = {"A": (0, 0), "B": (1, 2), "C": (2, 0), "P": (5, 0), "Q": (6, 2), "R": (7, 0)}
    pinned: dict[str, object] = dict.fromkeys("ACPR", "pin")
    assert "several pieces" in why(masts, ["A-B", "B-C", "P-Q", "Q-R"], pinned, {"B": (1, 0)})
    square: dict[str, object] = {"A": (0, 0), "B": (2, 0), "C": (1, 2), "D": (1, 1)}
    webs = ["A-B", "B-C", "A-C", "A-D", "B-D", "C-D"]
    assert "statically indeterminate" in why(square, webs, held, {"C": (1, 0)})


def test_members_are_found_to_cross_exactly() -> None:
    """A touch in one point, a member along another, and a near miss of a billionth."""

    def met(*spots: tuple[object, object]) -> bool:
        joints = dict(zip("ABCD", spots, strict=True))
        truss = Truss(joints, ["A-B", "C-D"], {"A": "pin", "B": "pin", "C": "pin", "D": "pin"})
        return crossing_members(structure_of(truss, LoadCase("", {}))) is not None

    assert met((0, 0), (4, 4), (0, 4), (4, 0))
    assert not met((0, 0), (4, 4), (0, 1), (3, 4))
    assert not met((0, 0), (4, 0), (2, "1/1000000000"), (2, 3))
    assert not met((0, 0), (4, 0), (5, 0), (7, 0))
    with pytest.warns(match="runs through"):
        assert met((0, 0), (4, 0), (2, 0), (2, 3))
    with pytest.warns(match="runs through"):
        assert met((0, 0), (4, 0), (2, 0), (7, 0))


def test_the_scale_of_forces() -> None:
    """The largest of 1, 2, 2.5, 5 at which the diagram fits; inches for forces in pounds."""
    assert force_scale("kN", Extent(560, 10, 56, 50)).text == "1 cm = 100 kN"
    assert force_scale("kN", Extent(561, 10, 56, 50)).text == "1 cm = 200 kN"
    assert force_scale("MN", Extent(0.13, 0, 56, 50)).text == "1 cm = 0.025 MN"
    assert force_scale("N", Extent(140, 0, 56, 50)).text == "1 cm = 25 N"
    assert force_scale("lbf", Extent(0, 9000, 56, 50)).text == "1 in = 5000 lbf"
