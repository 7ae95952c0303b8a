"""The sheet of an envelope: what it says and in which order, that its tables add up, and that every fault shows."""

from __future__ import annotations

import dataclasses
import os
import re
import subprocess
import sys
from collections.abc import Iterator
from decimal import Decimal
from pathlib import Path

import pytest
from load_cases import BRACED, FOOTWAY, ROOF

import trusscalc
from trusscalc import recheck, stiffness
from trusscalc.display import save
from trusscalc.envelopes import Envelope, envelope
from trusscalc.errors import InputError
from trusscalc.exact import ZERO
from trusscalc.exacttext import number
from trusscalc.files import reads
from trusscalc.governing import GoverningCheck, governing_checks
from trusscalc.loads import LoadCase, combine
from trusscalc.render.text import WIDTH, blocks_text, text, width
from trusscalc.sheet.blocks import (
    Block,
    Decimals,
    Derivation,
    Formula,
    Heading,
    Items,
    Name,
    Paragraph,
    Run,
    Sheet,
    Table,
)
from trusscalc.sheet.digest import record_of
from trusscalc.sheet.envelopesheet import compose_envelope
from trusscalc.sheet.numbering import numbered_through
from trusscalc.sheet.values import pencil_sum
from trusscalc.standing import standing_loads, train_of
from trusscalc.truss import Truss

GOLDEN = Path(__file__).parent / "golden"
KINDS = (".html", ".ipynb")


def found_in(file: str, members: list[str] | str = "all") -> Envelope:
    """Return the envelope of a file's text."""
    return envelope(reads(file), members)  # type: ignore[arg-type]


def sheet_of(file: str, members: list[str] | str = "all", *, drawings: bool = False, detail: str = "members") -> Sheet:
    """Return the sheet of a file's text."""
    found = found_in(file, members)
    checks = governing_checks(found)
    return compose_envelope(found, checks, truss_text=file, drawings=drawings, detail=detail)  # type: ignore[arg-type]


@pytest.fixture(scope="module")
def footway() -> Sheet:
    """Return the sheet of a chord and a diagonal that reverses."""
    return sheet_of(FOOTWAY, ["U1-U2", "U1-L2"])


def headings(sheet: Sheet, level: int = 2) -> list[str]:
    """Return the headings of one level."""
    return [block.text for block in sheet.blocks if isinstance(block, Heading) and block.level == level]


def words(block: Block) -> str:
    """Return a block's running text."""
    return "".join(piece.text for piece in getattr(block, "content", ()) if isinstance(piece, Run))


def conclusion(sheet: Sheet) -> str:
    """Return the conclusion, which stands before the first table."""
    first = next(block for block in sheet.blocks if isinstance(block, Table | Paragraph) and _concludes(block))
    return words(first)


def _concludes(block: Table | Paragraph) -> bool:
    return isinstance(block, Table) or block.role == "conclusion"


def part(sheet: Sheet, heading: str) -> list[Block]:
    """Return the blocks below a heading of the second level."""
    blocks = list(sheet.blocks)
    start = next(n for n, b in enumerate(blocks) if isinstance(b, Heading) and b.text.startswith(heading))
    end = next((n for n, b in enumerate(blocks) if n > start and isinstance(b, Heading) and b.level <= 2), len(blocks))
    return blocks[start + 1 : end]


def tables(blocks: list[Block]) -> Iterator[Table]:
    """Yield the tables among blocks."""
    return (block for block in blocks if isinstance(block, Table))


def cells(table: Table, head: str) -> list[str]:
    """Return what stands in a column."""
    place = [column.head for column in table.columns].index(head)
    return [_text(row[place]) for row in table.rows]


def _text(cell: object) -> str:
    return "" if cell is None else str(getattr(cell, "text", cell))


# --- what it says -----------------------------------------------------------------------------------------


def test_parts_in_their_order(footway: Sheet) -> None:
    """From the conclusion to the revisions."""
    assert headings(footway) == [
        "Scope",
        "Basis",
        "Input",
        "Loads",
        "Combinations",
        "Moving loads",
        "What governs",
        "Superposition",
        "Influence lines",
        "Governing state 1: U1–U2, largest compression",
        "Governing state 2: U1–L2, largest tension",
        "Governing state 3: U1–L2, largest compression",
        "Cross-check",
        "Cautions",
        "Revisions",
    ]
    assert headings(footway, 1) == ["Envelope of truss member forces, independently checked"]


def test_values_worked_out_by_hand(footway: Sheet) -> None:
    """Moments and shears of a simple beam, over depth and slope (statics; common practice, no source).

    U1-U2 is -M(L2)/6. Dead: 90*12 - 60*6 = 720, so -120; the line has its peak -1 at midspan, the heavy axle there and
    the light one 3 m off: 100*1 + 50*0.75 = 137.5, lane 5*12 = 60; heavy: 1.35*120 + 1.5*197.5 = 458.25.
    U1-L2 is the shear of the second panel times sqrt(2). Dead 30; largest 100*0.5 + 50*0.375 + 5*4 = 88.75, heavy
    1.35*30 + 1.5*88.75 = 173.625; least -(100*0.25 + 50*0.125 + 5*1) = -36.25, heavy 0.9*30 - 1.5*36.25 = -27.375.
    """
    found = found_in(FOOTWAY, ["U1-U2", "U1-L2"]).members
    assert found["U1-U2"].min.value == number("-458.25")
    assert found["U1-L2"].max.value == number("173.625*sqrt(2)")
    assert found["U1-L2"].min.value == number("-27.375*sqrt(2)")
    table = next(tables(list(footway.summary)))
    assert cells(table, "decimal") == ["-108.000", "-458.250", "245.543", "-38.714"]
    assert cells(table, "force") == [
        "least compression",
        "largest compression",
        "largest tension",
        "largest compression",
    ]
    assert cells(table, "hand check") == ["superposed", "agrees, state 1", "agrees, state 2", "agrees, state 3"]
    assert cells(table, "reverses") == ["", "", "yes", ""]
    told = conclusion(footway)
    assert "Largest compression: 458.250 kN in U1–U2 under heavy." in told
    assert "The force reverses in U1–L2." in told
    assert told.endswith("No member or bearing is flagged.")


def test_golden_text(footway: Sheet) -> None:
    """One whole sheet, read once by eye."""
    assert text(footway) == (GOLDEN / "envelope.txt").read_text(encoding="utf-8")


@pytest.mark.parametrize("file", [FOOTWAY, ROOF, BRACED])
def test_lines_fit_in_a_hundred_columns(file: str) -> None:
    """Nothing is cut."""
    assert max(map(width, text(sheet_of(file)).splitlines())) <= WIDTH


def test_every_step_has_its_own_number_and_a_section_its_letter(footway: Sheet) -> None:
    """Through all states; and what is pointed at is there."""
    steps = [block for block in footway.blocks if isinstance(block, Derivation)]
    assert [step.heading.number for step in steps] == [str(n) for n in range(1, len(steps) + 1)]
    pointed = {n for step in steps for n in re.findall(r"step (\d+)", words(step.reason))}
    assert pointed <= {step.heading.number for step in steps}
    found = found_in(FOOTWAY)
    lettered: dict[frozenset[str], set[str]] = {}
    for check in numbered_through(each.check for each in governing_checks(found)):
        links = {link.name for link in check.truss.links}
        for step in check.steps:
            if step.letter:
                lettered.setdefault(frozenset(step.equations[-1].cut.bars) - links, set()).add(step.letter)
    assert len(lettered) == 2
    assert all(len(letters) == 1 for letters in lettered.values())
    assert len({letter for letters in lettered.values() for letter in letters}) == len(lettered)


# --- tables that add up -----------------------------------------------------------------------------------


def test_superposition_adds_up_for_a_reader_with_the_paper_alone(footway: Sheet) -> None:
    """Factor times force is the product, and the products are the sum, in the decimals printed and exactly."""
    checked = 0
    for table in tables(part(footway, "Superposition")):
        if table.columns[1].head != "factor":
            continue
        factors = [Decimal(each) for each in cells(table, "factor")[:-1]]
        forces = [Decimal(row[3].text) for row in table.rows[:-1] if isinstance(row[3], Decimals)]
        products = [Decimal(row[5].text) for row in table.rows[:-1] if isinstance(row[5], Decimals)]
        for factor, force, product in zip(factors, forces, products, strict=True):
            assert abs(factor * force - product) <= Decimal("0.0015")
        assert isinstance(table.rows[-1][5], Decimals)
        assert abs(sum(products) - Decimal(table.rows[-1][5].text)) <= Decimal("0.0015")
        exact = [number(_plain(_text(row[4]))) for row in table.rows]
        assert sum(exact[:-1], ZERO) == exact[-1]
        checked += 1
    assert checked == 3


def _plain(written: str) -> str:
    return re.sub(r"√(\d+)", r"*sqrt(\1)", written.replace("−", "-")).removeprefix("*").replace("-*", "-")


def test_a_train_adds_up_from_its_ordinates(footway: Sheet) -> None:
    """Each load as it counts times ordinate or area, exactly in the records and to the digits on paper."""
    found = found_in(FOOTWAY, ["U1-U2", "U1-L2"])
    live = found.moving["live"]
    for name, line in live.lines.items():
        for extreme in live.extremes[name]:
            train = train_of(extreme, found.stated.moving[0].trains)
            assert train is not None
            loads = standing_loads(line, extreme, train)
            assert sum((load.effect for load in loads), ZERO) == extreme.value
            for load in loads:
                size = load.amount * (1 if load.is_axle else load.end - load.start)
                assert sum((share for _, share in load.shares), ZERO) == size
    checked = 0
    for table in tables(part(footway, "Influence lines")):
        if table.columns[-1].head == "adds, kN":
            rows = [[Decimal(_text(row[place])) for place in (-2, -1)] for row in table.rows[:-1]]
            assert abs(sum(adds for _, adds in rows) - Decimal(_text(table.rows[-1][-1]))) <= Decimal("0.00003")
            checked += 1
    assert checked == 3


def test_the_load_inventory_is_reconciled() -> None:
    """Every case ends with what is stated, what comes to the joints, and their difference, zero."""
    sheet = sheet_of(ROOF)
    inventory = part(sheet, "Loads")
    sums = [table for table in tables(inventory) if table.columns[-1].head.startswith("ΣM")]
    assert len(sums) == 4
    for table in sums:
        assert [_text(row[0]) for row in table.rows[-3:]] == [
            "together, as they stand",
            "the joint loads",
            "difference",
        ]
        assert [_text(cell) for cell in table.rows[-1][1:]] == ["0", "0", "0"]
        assert table.rows[-2][1:] == table.rows[-3][1:]
    written = blocks_text(inventory)
    assert "In no combination, and so without effect here: “unused”." in written
    assert "0.8 kN/m² · 5 m = 4 kN/m" in written
    # the slopes are 3 in 4: a wind at right angles presses along (0.6, -0.8)
    assert "(0.6, −0.8)" in written
    assert "P" in written


def test_joint_loads_of_a_state_are_the_sum_of_factored_cases(footway: Sheet) -> None:
    """Joint by joint, and the totals; of the train first load by load, then with its factor."""
    (table,) = [t for t in tables(part(footway, "Governing state 1")) if t.columns[0].head == "joint"]
    heads = [column.head for column in table.columns]
    assert heads == [
        *("joint", "1.35 dead", "live: axle 1", "live: axle 2", "live: lane load"),
        *("1.5 live", "together, kN"),
    ]
    for row in table.rows:
        dead, first, second, lane, live, together = (Decimal(_text(cell).replace("−", "-") or 0) for cell in row[1:])
        assert abs(Decimal("1.5") * (first + second + lane) - live) <= Decimal("0.003")
        assert abs(dead + live - together) <= Decimal("0.0015")


def test_every_line_with_values_holds_to_its_digits(footway: Sheet) -> None:
    """Known terms and the unknown's coefficient times its value come to zero; so do the checks."""
    counted = 0
    for step in (block for block in footway.blocks if isinstance(block, Derivation)):
        for line in step.check.lines if step.check else ():
            if not _names(line.formula) and line.formula.right:
                assert abs(pencil_sum(line.formula.left, LoadCase("", {}))) < Decimal("0.0001")
                counted += 1
    assert counted >= 6


def _names(formula: Formula) -> bool:
    return any(isinstance(factor, Name) for product in formula.left for factor in product.factors)


def test_that_the_others_do_not_govern_is_shown_for_each_member() -> None:
    """Every combination once, the governing one first, in order; a long table goes on in the appendix."""
    sheet = sheet_of(ROOF, ["E-F", "B-F"])
    found = found_in(ROOF, ["E-F", "B-F"])
    count = len(found.combinations)
    assert count > 6
    (short,) = tables(part(sheet, "What governs"))
    (long,) = tables(part(sheet, "All combinations"))
    assert len(short.rows) == 2 * 6
    assert len(long.rows) == 2 * count
    for column, down in ((2, True), (5, False)):
        for member in range(2):
            rows = long.rows[member * count : (member + 1) * count]
            assert len({_text(row[column]) for row in rows}) == count
            values = [float(_text(row[column + 1])) for row in rows]
            assert values == sorted(values, reverse=down)
    assert _text(long.rows[0][1]) == "governs"


# --- where it is from -------------------------------------------------------------------------------------


def test_editions_marks_and_the_users_own_factors_are_told() -> None:
    """The published table with its mark, a factor put in its place, and combinations of the user's own."""
    written = text(sheet_of(ROOF, ["A-B"]))
    flat = " ".join(written.split())
    assert "1a to 5a read in a secondary source; 6 and 7 from memory" in flat
    assert "factor of L 0.7, the user's own" in re.sub(r"\s+", " ", _column_text(sheet_of(ROOF, ["A-B"])))
    assert "3a L 0.7: the user's own, not the published values" in flat
    assert "own: factors are the user's own" in flat
    assert "Rows left out" in written
    train = '[trains.sweeper]\npublished = "HL-93 metric"\nimpact = "0.5"\n'
    published = re.sub(r"\[trains\.sweeper\]\n(?:.+\n)+?(?=\[moving)", train, FOOTWAY)
    flat = " ".join(text(sheet_of(published, ["U1-U2"])).split())
    assert "read in a copy of the metric page" in flat
    assert "impact: the user's, not the published value" in flat
    assert "the user's own" in " ".join(text(sheet_of(FOOTWAY, ["U1-U2"])).split())


def _column_text(sheet: Sheet) -> str:
    (table,) = [t for t in tables(part(sheet, "Combinations")) if t.columns[0].head == "no."]
    return " ".join(cells(table, "source"))


def test_without_combinations_every_case_stands_alone() -> None:
    """And the sheet says so."""
    sheet = sheet_of(BRACED, ["B-E"])
    assert "No combinations are stated" in blocks_text(part(sheet, "Combinations"))


# --- what has to be told first ----------------------------------------------------------------------------


def strong(sheet: Sheet) -> list[str]:
    """Return what the conclusion opens with, set bold."""
    first = next(block for block in sheet.summary if isinstance(block, Paragraph))
    return [piece.text for piece in first.content if isinstance(piece, Run) and piece.style == "strong"]


def test_rods_that_are_pressed_and_bearings_that_lift_are_flagged() -> None:
    """In any state, whichever member is asked for; wind lifts the roof."""
    told = strong(sheet_of(ROOF, ["A-B", "C-D"]))
    assert any(re.match(r"Flag: C–D is stated to take tension only, but comes to −\d", each) for each in told)
    assert any("stated to take tension only and not looked at here: B–F" in each for each in told)
    lifted = [each for each in told if "bearing at" in each]
    found = found_in(ROOF, ["A-B"])
    falling = {joint for joint, bearing in found.bearings.items() if bearing.min.value < ZERO}
    assert falling
    assert {
        joint for joint in ("A", "D") if any(f"bearing at {joint} would have to pull down" in e for e in lifted)
    } == falling


def test_the_reaction_of_a_bearing_is_that_of_a_check() -> None:
    """Largest and least vertical reaction against a hand check of every combination as written."""
    found = found_in(ROOF, ["A-B"])
    stated = found.stated
    for joint, name in (("A", "A.y"), ("D", "D.y")):
        assert found.bearings[joint].max.value == found.reactions[name].max.value
        for each in found.combinations:
            if any(len(pair) > 1 for _, pair in each.factors) or each.optional:
                continue
            check = trusscalc.check_members(stated.truss, combine(each, stated.acting), ["A-B"])
            value = check.case.value(check.reactions[name].exact or ZERO)
            assert found.bearings[joint].min.value <= value <= found.bearings[joint].max.value


def test_an_oblique_bearing_is_judged_by_its_vertical_part() -> None:
    """A roller whose reaction leans: upwards is what counts, whatever its written direction says."""
    leaning = FOOTWAY.replace('L4 = "roller"', "L4 = { reaction = [3, -4] }").replace(
        "[project]", '[behaviour]\nno_uplift = ["L4"]\n[project]'
    )
    found = found_in(leaning, ["U1-U2"])
    assert found.reactions["L4.r"].max.value < ZERO
    assert found.bearings["L4"].min.value == found.reactions["L4.r"].max.value * number("-4/5")
    assert not [each for each in strong(sheet_of(leaning, ["U1-U2"])) if "bearing" in each]


def test_undecided_members_are_told_with_the_reason() -> None:
    """An indeterminate frame, of which statics decides the arm."""
    sheet = sheet_of(BRACED, ["B-E", "A-C"])
    assert strong(sheet) == ["One member is undecided by statics: A–C."]
    assert not sheet.origin.agreed
    assert "shares the redundancy" in text(sheet)
    alone = sheet_of(BRACED, ["A-C"])
    assert "What governs" not in headings(alone)


def test_an_angle_that_was_rounded_is_told() -> None:
    """Twenty degrees have no sine in square roots."""
    steep = BRACED.replace("E = [8, 0]", 'E = ["4 + 5*cos(20)", 0]')
    assert any(each.startswith("Flag: angle rounded.") for each in strong(sheet_of(steep, ["C-E"])))


def test_routes_that_differ_open_the_conclusion(monkeypatch: pytest.MonkeyPatch) -> None:
    """A stiffness route with one wrong sign: named by case, bold in the tables, exit for the origin."""
    right = stiffness.member_forces

    def wrong(truss: Truss, case: LoadCase) -> dict[str, float]:
        forces = right(truss, case)
        return forces | {"U1-U2": -forces["U1-U2"]}

    monkeypatch.setattr(stiffness, "member_forces", wrong)
    sheet = sheet_of(FOOTWAY, ["U1-U2", "U1-L2"])
    told = strong(sheet)
    assert "The two routes differ under dead: U1–U2." in told
    assert any("do not agree on everything in state 1" in each for each in told)
    assert not sheet.origin.agreed
    table = next(tables(list(sheet.summary)))
    assert table.strong_rows == (0, 1)
    assert "DIFFER" in blocks_text(part(sheet, "Cross-check"))
    assert "The two other governing states are derived" in conclusion(sheet)


def test_a_hand_check_that_gives_another_value_is_told() -> None:
    """An envelope forged by one unit: the steps do not give it."""
    found = found_in(FOOTWAY, ["U1-U2"])
    member = found.members["U1-U2"]
    forged = dataclasses.replace(member.min, value=member.min.value + 1)
    spoilt = dataclasses.replace(
        found,
        members={"U1-U2": dataclasses.replace(member, min=forged, least_of=(forged, member.least_of[1]))},
    )
    sheet = compose_envelope(spoilt, governing_checks(spoilt), truss_text=FOOTWAY, drawings=False)
    assert "The hand check of state 1 gives another value than the superposition: U1–U2." in strong(sheet)
    assert "The steps give another value for U1–U2." in text(sheet)
    assert not sheet.origin.agreed


# --- how much of it ---------------------------------------------------------------------------------------


def test_of_many_members_those_that_govern_come_first() -> None:
    """Thirteen members: twelve in the main part, the others in the appendix; nothing is lost."""
    sheet = sheet_of(FOOTWAY)
    assert len(found_in(FOOTWAY).members) == 13
    assert "Further derivations" in headings(sheet)
    main = headings(sheet)[: headings(sheet).index("Further derivations")]
    assert len([each for each in main if each.startswith("Governing state")]) >= 10
    numbers = [int(b.heading.number) for b in sheet.blocks if isinstance(b, Derivation)]
    assert sorted(numbers) == list(range(1, len(numbers) + 1))
    everything = sheet_of(FOOTWAY, detail="all")
    assert "Further derivations" not in headings(everything)
    assert len([b for b in everything.blocks if isinstance(b, Derivation)]) == len(numbers)


def test_a_summary_says_that_it_derives_nothing() -> None:
    """No step, no state to point at."""
    sheet = sheet_of(FOOTWAY, ["U1-U2"], detail="summary")
    assert not [block for block in sheet.blocks if isinstance(block, Derivation)]
    assert "none on this sheet" in " ".join(text(sheet).split())
    assert cells(next(tables(list(sheet.summary))), "hand check") == ["superposed", "agrees"]


def test_what_cannot_be_asked_for() -> None:
    """Another truss, other loads, other combinations, places and details that do not exist."""
    found = found_in(FOOTWAY, ["U1-U2"])
    checks = governing_checks(found)
    for change, what in (
        (("L4 = [24, 0]", "L4 = [25, 0]"), "a truss"),
        (("line = 10", "line = 11"), "loads"),
        (('live = "1.5"', 'live = "1.6"'), "combinations"),
        (("lane = 5", "lane = 6"), "moving loads"),
    ):
        with pytest.raises(InputError, match=f"states other .*{what}"):
            compose_envelope(found, checks, truss_text=FOOTWAY.replace(*change))
    with pytest.raises(InputError, match="decimal places"):
        compose_envelope(found, checks, places=13)
    with pytest.raises(InputError, match="detail"):
        compose_envelope(found, checks, detail="much")  # type: ignore[arg-type]


def test_without_a_text_one_is_written_that_says_the_same() -> None:
    """Trains, chains, panel loads and all."""
    found = found_in(FOOTWAY, ["U1-U2"])
    sheet = compose_envelope(found, governing_checks(found), drawings=False)
    again = reads(sheet.origin.truss_text)
    assert again.moving == found.stated.moving
    assert again.all_combinations == found.stated.all_combinations


# --- filed ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("suffix", KINDS)
@pytest.mark.parametrize(("file", "members"), [(FOOTWAY, ["U1-L2"]), (ROOF, ["A-B", "E-F"]), (BRACED, ["B-E", "A-C"])])
def test_an_unaltered_sheet_is_derived_again(file: str, members: list[str], suffix: str, tmp_path: Path) -> None:
    """With drawings, from page and notebook."""
    path = save(sheet_of(file, members, drawings=True), tmp_path / f"sheet{suffix}")
    report = recheck.recheck(path)
    assert report.matches, "\n".join(report.lines())
    assert report.compared["figures"]


@pytest.mark.parametrize("suffix", KINDS)
@pytest.mark.parametrize(
    ("change", "where"),
    [
        (('live = "1.5"', 'live = "1.4"'), ("row", "code cell")),
        (("−458.250", "−458.150"), ("U1–U2",)),
        (("superposed", "agrees"), ("U1–U2",)),
    ],
)
def test_an_altered_sheet_is_found(
    change: tuple[str, str], where: tuple[str, ...], suffix: str, tmp_path: Path
) -> None:
    """A factor in the file it carries, a value, a verdict."""
    path = save(sheet_of(FOOTWAY, ["U1-U2"]), tmp_path / f"sheet{suffix}")
    written = path.read_text(encoding="utf-8")
    old, new = (part.replace('"', '\\"') if suffix == ".ipynb" else part for part in change)
    assert old in written
    path.write_text(written.replace(old, new, 1), encoding="utf-8")
    report = recheck.recheck(path)
    assert not report.matches
    assert any(name in each.where for each in report.differences for name in where), "\n".join(report.lines())


def test_hostile_names_survive_every_renderer(tmp_path: Path) -> None:
    """Somebody's free text in names of cases, combinations, trains and chains."""
    mad = '"<b>$x$| \\\\alpha"'
    file = FOOTWAY.replace("[combinations.heavy]", f"[combinations.{mad}]").replace(
        "[trains.sweeper]", f"[trains.{mad}]"
    )
    file = file.replace('train = "sweeper"', f"train = {mad}").replace("[chains.deck]", f"[chains.{mad}]")
    file = file.replace('along = "deck"', f"along = {mad}")
    sheet = sheet_of(file, ["U1-L2"])
    for suffix in (*KINDS, ".pdf", ".txt"):
        path = save(sheet, tmp_path / f"sheet{suffix}")
        if suffix in KINDS:
            assert recheck.recheck(path).matches
    page = (tmp_path / "sheet.html").read_text(encoding="utf-8")
    assert "<b>" not in page


def test_two_moving_loads_in_one_combination() -> None:
    """Each where it is adverse; the table of joint loads then has their sums alone."""
    second = '[moving.crowd]\ntrain = "sweeper"\nalong = "deck"\n[combinations.heavy]\ncrowd = "0.5"\n'
    sheet = sheet_of(FOOTWAY.replace("[combinations.heavy]\n", second), ["U1-L2"])
    (table,) = [t for t in tables(part(sheet, "Governing state 1")) if t.columns[0].head == "joint"]
    assert [column.head for column in table.columns] == ["joint", "1.35 dead", "0.5 crowd", "1.5 live", "together, kN"]
    assert sheet.origin.agreed


def test_a_load_that_is_nowhere_adverse_stays_away() -> None:
    """The least force of a lower chord: no position of the train presses it."""
    found = found_in(FOOTWAY, ["L1-L2"])
    assert found.members["L1-L2"].min.value == number("0.9*90")
    assert "no position of its axles adverse" in text(sheet_of(FOOTWAY.replace("line = 10", "line = -10"), ["L1-L2"]))


def test_symbols_of_dimensions_and_loads_are_taken_at_their_values(tmp_path: Path) -> None:
    """Also where panel loads alone hold them; the sheet says so, and is derived again."""
    file = FOOTWAY.replace("[chains.deck]", "[symbols]\na = 6\nq = 10\n[chains.deck]").replace(
        "line = 10", 'line = "q"'
    )
    for place in (24, 18, 12, 6):
        file = re.sub(rf"= \[{place}, ", f'= ["{place // 6}*a", ', file)
    file = re.sub(r", 6\]", ', "a"]', file)
    assert found_in(file, ["U1-U2"]).members["U1-U2"].min.value == number("-458.25")
    sheet = sheet_of(file, ["U1-U2"])
    assert "All values are at a = 6, q = 10." in text(sheet)
    assert "(1)  q kN/m of plan length" in text(sheet)
    assert recheck.recheck(save(sheet, tmp_path / "sheet.html")).matches


def test_the_record_says_what_was_asked_for() -> None:
    """Task and members; that of a check stays without a task."""
    record = record_of(sheet_of(FOOTWAY, ["U1-U2"]))
    assert record["task"] == "envelope"
    assert record["members"] == ["U1-U2"]
    assert "case" not in record


SCRIPT = """
import hashlib, sys
sys.path.insert(0, {folder!r})
from test_envelope_sheet import ROOF, sheet_of
from trusscalc.render.html import html
from trusscalc.render.notebook import notebook
sheet = sheet_of(ROOF, ["A-B"], drawings=True)
print(*(hashlib.sha256(write(sheet).encode()).hexdigest() for write in (html, notebook)))
"""


def test_the_same_bytes_whatever_the_process() -> None:
    """Two processes with other hash seeds."""
    found = set()
    for seed in ("1", "2"):
        environment = {**os.environ, "PYTHONHASHSEED": seed}
        script = SCRIPT.format(folder=str(Path(__file__).parent))
        run = subprocess.run(
            [sys.executable, "-c", script], capture_output=True, text=True, check=True, env=environment
        )
        found.add(run.stdout)
    assert len(found) == 1


def test_conveniences() -> None:
    """An envelope makes its sheet itself, and shows table and diagram in a notebook."""
    found = found_in(FOOTWAY, ["U1-U2"])
    sheet = found.sheet(drawings=False)
    assert isinstance(sheet, Sheet)
    shown = found._repr_mimebundle_()
    assert "largest compression" in shown["text/plain"]
    assert "hand check" not in shown["text/plain"]
    assert shown["text/markdown"].count("<img ") == 2
    checks: tuple[GoverningCheck, ...] = trusscalc.governing_checks(found)
    assert all(check.agreed for check in checks)
    assert isinstance(next(b for b in sheet.blocks if isinstance(b, Items)), Items)
