"""Figures: nothing collides, nothing is cut off, and what is drawn is what the equations say."""

import itertools
import math
import os
import subprocess
import sys
import time
from collections.abc import Iterator
from dataclasses import replace
from functools import lru_cache

import drawn_trusses
import pytest

from trusscalc.errors import UnstableTrussError
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.sheet import words
from trusscalc.sheet.figures import (
    elevation,
    free_body,
    mechanism_figure,
    overlaps,
    result_drawing,
    truss_figure,
)
from trusscalc.sheet.inscriptions import amount, arm, scales, slope
from trusscalc.sheet.lettering import SMALLEST, Box, box_of, boxes_of, line_box, subscript_size, touch
from trusscalc.sheet.marks import Arrow, Figure, Label, Ring, Stroke
from trusscalc.sheet.sections import section_line
from trusscalc.statics import matrix
from trusscalc.statics.cuts import About, about_joint, cut_of, meeting_point, structure_of
from trusscalc.statics.steps import Equation, Step, write_step
from trusscalc.truss import Truss

TRUSSES = sorted(drawn_trusses.ORDINARY)


@lru_cache
def checked(name: str, members: str = "") -> MemberCheck:
    """Return the check of a truss by name; all members when asked for."""
    truss, case, wanted = drawn_trusses.ORDINARY[name]()
    return check_members(truss, case, "all" if members == "all" else wanted)


@lru_cache
def bodies(name: str) -> list[tuple[Step, tuple[Figure, ...]]]:
    """Return all steps of a check with their free bodies."""
    check = checked(name)
    return [(step, free_body(check, step)) for step in check.steps]


def figures_of(name: str) -> Iterator[Figure]:
    """Yield every figure of a check."""
    yield elevation(checked(name))
    yield result_drawing(checked(name))
    yield result_drawing(checked(name, "all"))
    yield truss_figure(checked(name).truss, checked(name).case)
    for _, figures in bodies(name):
        yield from figures


def labels(figure: Figure) -> list[Label]:
    """Return a figure's lettering."""
    return [mark for mark in figure.marks if isinstance(mark, Label)]


def texts(figure: Figure) -> list[str]:
    """Return what is written in a figure."""
    return [label.text for label in labels(figure)]


def arrows(figure: Figure) -> list[Arrow]:
    """Return a figure's arrows."""
    return [mark for mark in figure.marks if isinstance(mark, Arrow)]


# --- what every figure keeps ------------------------------------------------------------------------------


@pytest.mark.parametrize("name", TRUSSES)
def test_no_label_lies_on_another(name: str) -> None:
    """Separating axes find no two labels that overlap, in any figure."""
    for figure in figures_of(name):
        assert overlaps(figure) == ()


@pytest.mark.parametrize("name", TRUSSES)
def test_nothing_is_cut_off_and_nothing_is_too_small(name: str) -> None:
    """Every mark lies on the figure, no figure is wider than the text, no letter is under 7 points."""
    for figure in figures_of(name):
        assert figure.width <= 170.001
        assert figure.height % 5 == pytest.approx(0)
        for mark in figure.marks:
            for box in boxes_of(mark):
                left, lower, right, upper = box.bounds
                assert left >= -0.01
                assert lower >= -0.01
                assert right <= figure.width + 0.01
                assert upper <= figure.height + 0.01
        for label in labels(figure):
            assert label.size >= SMALLEST
            assert not label.subscript or subscript_size(label.size) >= SMALLEST


def crossed(figure: Figure) -> list[Label]:
    """Return labels that a heavier line or an arrow runs through (thin extension lines are not counted)."""
    lines: list[Box] = []
    for mark in figure.marks:
        if isinstance(mark, Arrow) or (isinstance(mark, Stroke) and mark.width > 0.2 and mark.ink != "white"):
            lines += boxes_of(mark)
    return [label for label in labels(figure) if any(touch(box_of(label), line) for line in lines)]


@pytest.mark.parametrize("name", ["k", "pratt", "warren", "cantilever", "curved", "fink"])
def test_results_and_elevations_have_no_label_on_a_line(name: str) -> None:
    """In ordinary trusses every label of the drawings of the whole truss stands free of bars and arrows."""
    for figure in (result_drawing(checked(name, "all")), truss_figure(checked(name).truss, checked(name).case)):
        assert [label.text for label in crossed(figure)] == []


def test_free_bodies_of_the_footbridge_have_no_label_on_a_line() -> None:
    """The K truss's free bodies keep every label off bars, arrows and the section line."""
    for step, figures in bodies("k"):
        for figure in figures:
            assert (step.number, [label.text + label.subscript for label in crossed(figure)]) == (step.number, [])


@pytest.mark.parametrize("name", TRUSSES)
def test_captions_and_words_for_those_who_cannot_see(name: str) -> None:
    """Every figure has a caption ending in a full stop and a description."""
    for figure in figures_of(name):
        assert figure.caption.endswith(".")
        assert figure.alt.endswith(".")


# --- free bodies ------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", TRUSSES)
def test_cut_bars_are_drawn_as_pulls_out_of_the_body(name: str) -> None:
    """For every cut member one filled arrow points from its kept joint towards the joint cut away."""
    check = checked(name)
    structure = structure_of(check.truss, check.case)
    for step, figures in bodies(name):
        kinds = dict.fromkeys(equation.cut.kept for equation in step.equations)
        for kept, figure in zip(kinds, figures, strict=True):
            loads = [n for n in kept if n in structure.loads]
            filled = [arrow for arrow in arrows(figure) if not arrow.open_head and arrow.width >= 0.35]
            cut = cut_of(structure, kept)
            members = [structure.bars[n] for n in cut.bars if not structure.bars[n].is_link]
            components = sum(bool(part) for n in loads for part in structure.loads[n])
            assert len(filled) == len(members) + components
            for bar in members:
                sign = 1.0 if bar.start in kept else -1.0
                angle = math.atan2(sign * float(bar.dy), sign * float(bar.dx))
                assert any(
                    math.cos(angle - math.atan2(a.tip[1] - a.tail[1], a.tip[0] - a.tail[0])) > 0.9999 for a in filled
                )
            sought = [n for n in step.solves if n in cut.bars and not structure.bars[n].is_link]
            strong = [a for a in filled if a.ink == "accent"]
            assert len(strong) == len(sought)
            assert all(a.width == 0.5 for a in strong)


@pytest.mark.parametrize("name", TRUSSES)
def test_every_force_of_the_equation_is_named_in_the_figure(name: str) -> None:
    """Each term's symbol stands in the figure, base and subscript alike; loads and known reactions with values."""
    check = checked(name)
    symbols = words.symbols_of(structure_of(check.truss, check.case))
    for step, figures in bodies(name):
        written = {(label.text, label.subscript) for figure in figures for label in labels(figure)}
        for equation in step.equations:
            for term in equation.terms:
                symbol = symbols.of(term)
                assert (symbol.base, symbol.subscript) in written
                if term.kind == "load" or (term.kind == "reaction" and term.name not in step.solves):
                    assert (amount(term.force), "") in written


def expected_arms(check: MemberCheck, equation: Equation) -> set[str]:
    """Return the arms of an equation that have to be in its figure: loads, and bars along an axis."""
    structure = structure_of(check.truss, check.case)
    found: set[str] = set()
    for term in equation.terms:
        bar = structure.bars.get(term.name) if term.kind != "load" else None
        if bar is None or not bar.dx or not bar.dy:
            found.add(arm(abs(term.coefficient)))
    return found


@pytest.mark.parametrize("name", TRUSSES)
def test_dimensions_are_the_arms_of_the_equation(name: str) -> None:
    """Every arm of a load or of a bar along an axis is lettered; every distance lettered belongs to the equation."""
    check = checked(name)
    structure = structure_of(check.truss, check.case)
    for step, figures in bodies(name):
        for equation in step.equations:
            if equation.about.sum != "moment":
                continue
            figure = next(
                f
                for f in figures
                if any(isinstance(m, Ring) and m.ink == "accent" for m in f.marks)
                or "from the moment centre" in f.caption
            )
            written = {label.text for label in labels(figure) if label.size == 7.5 and label.ink == "black"}
            assert expected_arms(check, equation) <= written
            joints = {t.name for t in equation.terms if t.kind == "load"}
            for term in equation.terms:
                if term.kind != "load":
                    bar = structure.bars[term.name]
                    joints.add(bar.start if bar.start in equation.cut.kept else bar.end)
            allowed = {"0"} | {
                arm(abs(length))
                for joint in joints
                for length in (
                    structure.joints[joint].x - equation.about.x,
                    structure.joints[joint].y - equation.about.y,
                )
            }
            assert written <= allowed


def crossings(
    first: tuple[float, ...], second: tuple[float, ...], third: tuple[float, ...], fourth: tuple[float, ...]
) -> bool:
    """Return whether two segments cross, by orientation (written apart from the module under test)."""

    def turn(a: tuple[float, ...], b: tuple[float, ...], c: tuple[float, ...]) -> float:
        return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])

    return turn(first, second, third) * turn(first, second, fourth) < 0 and (
        turn(third, fourth, first) * turn(third, fourth, second) < 0
    )


@pytest.mark.parametrize("near_kept", [True, False])
@pytest.mark.parametrize("name", TRUSSES)
def test_a_section_line_crosses_exactly_the_cut_bars(name: str, near_kept: bool) -> None:
    """For every section of every check the line meets each cut member once and no other member."""
    check = checked(name, "all")
    structure = structure_of(check.truss, check.case)
    place = {n: (5.0 * float(j.x), 5.0 * float(j.y)) for n, j in structure.joints.items()}
    sections = {e.cut.kept: e.cut for step in check.steps for e in step.equations if e.cut.kind == "section"}
    drawn = 0
    for kept, cut in sections.items():
        bars = [bar for bar in structure.bars.values() if not bar.is_link]
        segments = {}
        for bar in bars:
            if bar.name in cut.bars:
                near, far = (bar.start, bar.end) if bar.start in kept else (bar.end, bar.start)
                segments[bar.name] = (place[near], place[far])
        others = [(place[bar.start], place[bar.end]) for bar in bars if bar.name not in cut.bars]
        line = section_line(segments, others, near_kept=near_kept)
        if line is None:
            continue
        drawn += 1
        points = [*line.points, line.points[0]] if line.closed else list(line.points)
        for bar in bars:
            ends = place[bar.start], place[bar.end]
            count = sum(crossings(a, b, *ends) for a, b in itertools.pairwise(points))
            assert count == (1 if bar.name in cut.bars else 0), (kept, bar.name)
    assert drawn >= 0.8 * len(sections)


@pytest.mark.parametrize("name", ["k", "pratt", "curved", "tower"])
def test_section_steps_show_their_line_and_letter(name: str) -> None:
    """A section's free body has one chain line, its letter at both ends, arrows towards the kept part."""
    check = checked(name)
    letters = words.letters_of(structure_of(check.truss, check.case), check.steps)
    for step, figures in bodies(name):
        for equation, figure in zip(step.equations, figures, strict=False):
            if equation.cut.kind != "section":
                continue
            chain = [m for m in figure.marks if isinstance(m, Stroke) and m.dash == "section"]
            assert len(chain) == 1
            letter = letters[words.members_cut(structure_of(check.truss, check.case), equation.cut)]
            assert sum(label.text == letter and label.style == "bold italic" for label in labels(figure)) == 2


def test_a_cut_round_a_joint_is_drawn_with_soft_steps() -> None:
    """The footbridge cut that goes round joint M3 is one line with steps, straight at both ends."""
    truss, case, _ = drawn_trusses.k_truss()
    check = checked("k")
    structure = structure_of(truss, case)
    kept = [n for n in structure.joints if n[0] in "LUM" and int(n[1:]) <= 3 and n != "M3"]
    tensions = matrix.solve(truss, case).tensions
    bodies_of_step = ((cut_of(structure, kept), about_joint(structure, "L3")),)
    step, _ = write_step(structure, 1, bodies_of_step, ("U3-U4",), dict(tensions), letter="a")
    (figure,) = free_body(replace(check, steps=(step,)), step)
    (line,) = [m for m in figure.marks if isinstance(m, Stroke) and m.dash == "section"]
    assert len(line.points) > 10
    assert line.points[0][0] == line.points[1][0]
    assert line.points[-1][0] == line.points[-2][0]
    assert {"12", "8", "4", "0", "6", "420", "120"} <= set(texts(figure))
    assert overlaps(figure) == ()
    assert crossed(figure) == []


def test_a_body_inside_the_truss_is_cut_by_a_closed_line() -> None:
    """A body inside the truss gets a closed line; where other bars are in every way there is none."""
    joints = {"A": (0, 0), "B": (8, 0), "C": (8, 8), "D": (0, 8), "P": (3, 3), "Q": (5, 5)}
    members = ["A-B", "B-C", "C-D", "A-D", "P-B", "P-D", "P-Q", "Q-C", "A-P"]
    truss = Truss(joints, members, {"A": "pin", "B": "roller"})
    case = LoadCase("c", {"Q": (0, -1)})
    structure = structure_of(truss, case)
    cut = cut_of(structure, ["P", "Q"])
    place = {n: (5.0 * float(j.x), 5.0 * float(j.y)) for n, j in structure.joints.items()}
    segments = {}
    for name in cut.bars:
        bar = structure.bars[name]
        near, far = (bar.start, bar.end) if bar.start in cut.kept else (bar.end, bar.start)
        segments[name] = (place[near], place[far])
    others = [
        (place[b.start], place[b.end]) for b in structure.bars.values() if not b.is_link and b.name not in segments
    ]
    line = section_line(segments, others, near_kept=True)
    assert line is not None
    assert line.closed
    assert (
        section_line(segments, [*others, ((0.0, 15.0), (40.0, 15.5)), ((0.0, 25.0), (40.0, 25.5))], near_kept=True)
        is None
    )


def test_a_section_line_that_would_meet_other_bars_is_left_out() -> None:
    """A kept bar crossed by a bar of the other part leaves no room for the line: the caption says so."""
    truss, case, _ = drawn_trusses.crossing()
    structure = structure_of(truss, case)
    tensions = matrix.solve(truss, case).tensions
    body = ((cut_of(structure, ["A", "D"]), about_joint(structure, "B")),)
    step, _ = write_step(structure, 1, body, ("C-D",), dict(tensions), letter="a")
    (figure,) = free_body(replace(checked("crossing"), steps=(step,)), step)
    assert not [m for m in figure.marks if isinstance(m, Stroke) and m.dash == "section"]
    assert "The section line is left out" in figure.caption


def test_a_negative_reaction_keeps_its_written_direction() -> None:
    """The uplift of the truss with an overhang is an arrow upwards with a negative value."""
    check = checked("crossing")
    assert check.reactions["A.y"].exact == -30
    figure = elevation(check)
    (label,) = [label for label in labels(figure) if label.text == "−30"]
    up = [a for a in arrows(figure) if a.open_head and abs(a.tail[0] - label.place[0]) < 0.1]
    assert len(up) == 1
    assert up[0].tip[1] > up[0].tail[1]


def test_symbols_stay_symbols() -> None:
    """Loads with symbols are lettered as stated, the product with a root not to be misread."""
    written = texts(elevation(checked("warren")))
    assert {"P", "2P", "P/2"} <= set(written)
    assert not any("√" in text and "/1" in text and "·√" not in text for text in written)


def test_a_centre_off_the_paper_is_told() -> None:
    """A moment centre far away is named with its coordinates, and distances still count from it."""
    joints = {"L0": (0, 0), "L1": (4, 0), "L2": (8, 0), "L3": (12, 0), "U0": (0, 3), "U1": (4, "3.2"), "U2": (8, "3.4")}
    joints |= {"U3": (12, "3.6")}
    members = ["L0-L1", "L1-L2", "L2-L3", "U0-U1", "U1-U2", "U2-U3", "L0-U0", "L1-U1", "L2-U2", "L3-U3"]
    members += ["L0-U1", "L1-U2", "L2-U3"]
    truss = Truss(joints, members, {"L0": "pin", "L3": "roller"})
    case = LoadCase("c", {"U1": (0, -10), "U2": (0, -10)})
    structure = structure_of(truss, case)
    point = meeting_point(structure, structure.bars["U1-U2"], structure.bars["L1-L2"])
    assert point is not None
    x, y = point
    assert (x, y) == (-60, 0)
    tensions = matrix.solve(truss, case).tensions
    cut = cut_of(structure, ["L0", "L1", "U0", "U1"])
    step, _ = write_step(structure, 1, ((cut, About("moment", x, y)),), ("L1-U2",), dict(tensions), letter="a")
    check = replace(check_members(truss, case, ["L1-U2"]), steps=(step,))
    (figure,) = free_body(check, step)
    assert "moment centre at (−60, 0)" in texts(figure)
    assert {"60", "64"} <= set(texts(figure))
    assert overlaps(figure) == ()


# --- whole truss ------------------------------------------------------------------------------------------


def test_line_styles_tell_tension_from_compression() -> None:
    """Result drawing: as many white inner lines as members in compression (and one in the legend)."""
    check = checked("k", "all")
    figure = result_drawing(check)
    senses = [item.sense for item in check.members.values()]
    inner = [m for m in figure.marks if isinstance(m, Stroke) and m.ink == "white"]
    single = [m for m in figure.marks if isinstance(m, Stroke) and m.width == 0.45]
    assert len(inner) == senses.count("C") + 1
    assert len(single) == senses.count("T") + 1
    first_white = min(figure.marks.index(m) for m in inner)
    assert all(figure.marks.index(m) < first_white for m in figure.marks if isinstance(m, Stroke) and m.width == 1.15)
    assert texts(figure).count("−600.0 C") == 2
    assert texts(figure).count("0") == senses.count("0")


def test_long_trusses_are_drawn_in_rows_with_every_value() -> None:
    """A twelve-panel truss gets a second row, and then every member's value is there once."""
    truss, case, _ = drawn_trusses.pratt(12)
    check = check_members(truss, case, "all")
    figure = result_drawing(check)
    assert "rows" in figure.caption
    assert "No room" not in figure.caption
    values = [text for text in texts(figure) if text == "0" or text.endswith((" T", " C"))]
    assert len(values) == len(truss.members)
    assert overlaps(figure) == ()


def test_values_without_room_are_named() -> None:
    """Members whose value finds no room are listed in the caption, not dropped in silence."""
    truss, case, _ = drawn_trusses.pratt(60)
    figure = result_drawing(check_members(truss, case, ["L1-L2", "U29-U30"]), width=60)
    assert "see the summary" in figure.caption or len([t for t in texts(figure) if t.endswith((" T", " C"))]) == 2


@pytest.mark.parametrize(("name", "text"), [("k", "8 panels of 4 m, together 32 m"), ("arch", "2 panels of 4")])
def test_panels_are_dimensioned(name: str, text: str) -> None:
    """Equal panels are told in one dimension, unequal ones in a chain."""
    assert text in texts(elevation(checked(name)))


def test_members_checked_are_heavy() -> None:
    """The elevation draws as many heavy bars as members were checked."""
    check = checked("k")
    bars = [m for m in elevation(check).marks if isinstance(m, Stroke) and m.width == 0.7]
    section_ends = 2 * len(words.letters_of(structure_of(check.truss, check.case), check.steps))
    assert len(bars) == len(check.members) + section_ends


def test_hostile_names_are_lettered_as_they_are() -> None:
    """Names that read as markup come through unchanged; forces named after them are numbered and listed."""
    assert {"$x$", "B<i>", "\\frac", "north end post"} <= set(texts(elevation(checked("hostile"))))
    captions = " ".join(figure.caption for _, figures in bodies("hostile") for figure in figures)
    assert "Numbered: (" in captions


def test_a_mechanism_shows_where_it_moves() -> None:
    """Each joint that moves has an arrow along its movement."""
    joints = {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3)}
    truss = Truss(joints, ["A-B", "B-C", "C-D", "A-D"], {"A": "pin", "B": "roller"})
    with pytest.raises(UnstableTrussError, match="can move") as caught:
        matrix.solve(truss, LoadCase("c", {"C": (1, 0)}))
    figure = mechanism_figure(truss, caught.value)
    moving = [a for a in arrows(figure) if a.ink == "accent"]
    assert len(moving) == len(caught.value.mechanism)
    assert all(abs(a.tip[1] - a.tail[1]) < 0.01 < abs(a.tip[0] - a.tail[0]) for a in moving)


# --- long, quick, repeatable ------------------------------------------------------------------------------


@pytest.mark.slow
def test_four_hundred_panels_are_legible_and_quick() -> None:
    """A very long truss is folded at break lines; loads out of sight are their resultant with its arm."""
    truss, case, wanted = drawn_trusses.pratt(400)
    check = check_members(truss, case, wanted)
    for step in check.steps:
        start = time.perf_counter()
        (figure,) = free_body(check, step)
        assert time.perf_counter() - start < 5
        assert figure.width <= 170.001
        assert overlaps(figure) == ()
        assert min(label.size for label in labels(figure)) >= SMALLEST
    folded = free_body(check, check.steps[1])[0]
    assert "Between break lines" in folded.caption
    assert ("ΣP", "y") in {(label.text, label.subscript) for label in labels(folded)}


def test_many_loads_become_their_resultant() -> None:
    """More than eight loads in an equation are drawn as one force with the arm that moments give it."""
    truss, case, _ = drawn_trusses.k_truss(12)
    check = check_members(truss, case, ["U5-U6"])
    step = next(s for s in check.steps if s.equations[0].about.sum == "moment" and s.cut.kind == "whole")
    (figure,) = free_body(check, step)
    assert "1320" in texts(figure)  # eleven loads of 120
    assert "24" in texts(figure)  # half of twelve panels of 4 m
    assert "ΣP in y: resultant of the 11 loads" in figure.caption


def test_ordinary_figures_are_quick() -> None:
    """A figure's marks take a small part of a second (measured some 20 to 80 ms on a busy machine)."""
    check = checked("k")
    spent = []
    for _ in range(3):
        start = time.perf_counter()
        free_body(check, check.steps[-1])
        spent.append(time.perf_counter() - start)
    assert min(spent) < 0.25


def test_same_input_same_marks_in_any_process() -> None:
    """Two processes with different hash seeds draw the same marks."""
    program = (
        "import sys; sys.path.insert(0, sys.argv[1]); import test_figures as t, hashlib;"
        "print(hashlib.sha256(repr([list(t.figures_of(n)) for n in ('k', 'fink')]).encode()).hexdigest())"
    )
    found = set()
    for seed in ("1", "2"):
        here = os.path.dirname(__file__)  # noqa: PTH120 - handed to another process as text
        command = [sys.executable, "-c", program, here]
        result = subprocess.run(command, env={**os.environ, "PYTHONHASHSEED": seed}, capture_output=True, check=True)
        found.add(result.stdout)
    assert len(found) == 1


# --- parts ------------------------------------------------------------------------------------------------


def test_scales_are_the_drawing_office_s() -> None:
    """Metric scales are the round ones; in feet an inch stands for a round number of feet."""
    assert {"1:50", "1:100", "1:200", "1:250", "1:500"} <= {scale.text for scale in scales("m")}
    paper = {scale.text: scale.paper for scale in scales("m")}
    assert paper["1:200"] == 5.0
    assert {scale.text: scale.paper for scale in scales("ft")}["1 in = 10 ft"] == 2.54


def test_slopes_are_in_smallest_numbers() -> None:
    """A slope triangle has whole legs without a common factor, and the length when it is short."""
    truss = drawn_trusses.k_truss()[0]
    bars = {bar.name: bar for bar in matrix.bars_of(truss)}
    assert slope(bars["M1-U2"].dx, bars["M1-U2"].dy) == ("4", "3", "5")
    assert slope(bars["L0-M0"].dx, bars["L0-M0"].dy) == ("2", "3", "√13")


def test_rectangles_touch_as_they_should() -> None:
    """Separating axes: a bar beside a turned label, and one through it."""
    label = box_of(Label((0.0, 0.0), "120.0 T", 7.5, angle=45.0))
    assert touch(label, line_box((-5.0, -5.0), (5.0, 5.0), 0.3))
    assert not touch(label, line_box((-5.0, -2.0), (3.0, 6.0), 0.3))
    assert touch(label, label)


def test_overlaps_finds_an_overlap() -> None:
    """The judge of the other tests is itself seen failing."""
    pair = (Label((10.0, 10.0), "420", 8.0), Label((11.0, 10.5), "120", 8.0))
    assert overlaps(Figure(20.0, 20.0, pair, "", "")) == (pair,)
