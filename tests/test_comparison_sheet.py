"""The verification sheet: what it says and in which order, its drawing, its record, and hostile tables."""

from __future__ import annotations

import html as entities
import inspect
import json
import os
import random
import re
import subprocess
import sys
from collections.abc import Callable, Mapping
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import pdf_text
import planted
import pytest
import sheet_cases
from case_files import CASES
from nbclient import NotebookClient
from other_analyses import FAMILIES
from test_html import Reader
from test_notebook import no_drawing, outside_mathematics

import trusscalc
from trusscalc import recheck, stiffness
from trusscalc.blind import frozen, reveal
from trusscalc.compare import compare_submitted
from trusscalc.comparison import Comparison
from trusscalc.display import save
from trusscalc.errors import InputError
from trusscalc.exacttext import parse
from trusscalc.explanations import Explanation
from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members, check_reactions
from trusscalc.project import Project
from trusscalc.render.html import html
from trusscalc.render.notebook import notebook
from trusscalc.render.text import text
from trusscalc.sheet.blocks import Heading, Items, Listing, Paragraph, Picture, Run, Sheet, Table
from trusscalc.sheet.comparisonsheet import compose_comparison
from trusscalc.sheet.digest import record_of
from trusscalc.sheet.impliedfigure import implied_figure
from trusscalc.sheet.lettering import overlaps
from trusscalc.sheet.marks import Arrow, Label, Ring, Stroke
from trusscalc.submitted import read_submitted
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile
from trusscalc.verifying import verification

ROOF = Truss(
    {"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"}, title="Mill roof"
)
SNOW = LoadCase("snow", {"C": (0, -12)})
FILE = TrussFile(ROOF, (SNOW, LoadCase("wind", {"C": (3, 0)})))
GOOD = {"A-B": "8.00", "A-C": "-10.00", "C-B": "-10.00"}


def roof(changes: Mapping[str, str] | None = None, stated: TrussFile = FILE, **options: Any) -> Comparison:
    """Return a table compared with the roof under snow."""
    table = {name: value for name, value in {**GOOD, **(changes or {})}.items() if value}
    return compare_submitted(stated, read_submitted(table, stated.truss), "snow", **options)


def sheet(comparison: Comparison, **options: Any) -> Sheet:
    """Return its sheet without drawings, unless they are wanted."""
    return verification(comparison, **{"drawings": False, **options})


@cache
def bridge(kind: str) -> Comparison:
    """Return the demo bridge with something planted."""
    stated = trusscalc.read(Path(__file__).parents[1] / "workbooks" / "alder-sluice.toml")
    case = stated.case("service")
    loads = [load for load in case.loads if kind != "lost" or load.joint != "L4"]
    forces = stiffness.member_forces(stated.truss, LoadCase("service", loads))
    table = {name: f"{-value if kind == 'sign' else value:.1f}" for name, value in forces.items()}
    if kind == "missing":
        del table["L3-L4"], table["M3-U4"]
    return compare_submitted(stated, read_submitted(table, stated.truss), "service")


def conclusion(made: Sheet) -> str:
    """Return the conclusion, which stands before any table."""
    block = next(block for block in made.blocks if isinstance(block, Table | Paragraph) and _is_conclusion(block))
    first = next(block for block in made.blocks if isinstance(block, Table))
    assert made.blocks.index(block) < made.blocks.index(first)
    assert isinstance(block, Paragraph)
    return "".join(piece.text for piece in block.content if isinstance(piece, Run))


def _is_conclusion(block: Table | Paragraph) -> bool:
    return isinstance(block, Paragraph) and block.role == "conclusion"


def heads(made: Sheet) -> list[str]:
    """Return the headings of its parts."""
    return [block.text for block in made.blocks if isinstance(block, Heading) and block.level == 2]


def part(made: Sheet, head: str) -> list[Any]:
    """Return the blocks of a part."""
    start = next(n for n, b in enumerate(made.blocks) if isinstance(b, Heading) and b.text == head)
    rest = made.blocks[start + 1 :]
    end = next((n for n, b in enumerate(rest) if isinstance(b, Heading) and b.level <= 2), len(rest))
    return list(rest[:end])


def items(made: Sheet, head: str) -> dict[str, str]:
    """Return the statements of a part by what they are about, those without a term added to the one before."""
    found: dict[str, str] = {}
    term = ""
    for block in part(made, head):
        for each, content in block.items if isinstance(block, Items) else ():
            term = each or term
            words = "".join(piece.text for piece in content if isinstance(piece, Run))
            found[term] = f"{found[term]} {words}" if term in found and not each else words
    return found


def table(made: Sheet, head: str) -> Table:
    """Return the first table of a part."""
    return next(block for block in part(made, head) if isinstance(block, Table))


def words_of(found: Table) -> list[list[str]]:
    """Return a table's cells as text."""
    return [["" if cell is None else getattr(cell, "text", str(cell)) for cell in row] for row in found.rows]


# --- what it says -----------------------------------------------------------------------------------------


def test_the_order_of_the_parts() -> None:
    """Verdict, scope, what was compared, tables, joints, diagnosis; then what it rests on, as on every sheet."""
    made = sheet(roof({"A-B": "9.00"}), derive=["A-B"])
    assert heads(made) == [
        *("Scope", "Submitted results", "Members compared", "Joint loads implied", "Diagnosis", "Basis", "Input"),
        *("Loads", "Reactions", "Derivation of the reactions", "Derivation of the members", "Cross-check"),
        *("Cautions", "Revisions"),
    ]
    assert made.title == "Verification of submitted member forces: Mill roof"
    assert "licensed engineer" in text(made).replace("\n", " ")


def test_an_agreeing_table() -> None:
    """Said first and plainly, nothing strong in the table, nothing explained."""
    made = sheet(roof())
    assert conclusion(made).startswith("Agrees: all three members of the submitted table are within the criterion")
    assert table(made, "Members compared").strong_rows == ()
    assert [block for block in part(made, "Diagnosis") if isinstance(block, Table)] == []
    assert "No value asked for differs, so no explanation was looked for." in text(made)
    assert made.origin.agreed


def test_differing_flipped_and_missing_members() -> None:
    """Counts, the largest difference with both values, senses, names; their rows strong."""
    made = sheet(roof({"A-B": "9.00", "A-C": "10.00", "C-B": ""}))
    told = conclusion(made)
    assert told.startswith("Does not agree: two of three members differ; one member is missing from the table.")
    assert "Largest difference: A–C by +20.000 kN (submitted 10.00, ours −10.000)." in told
    assert "Of reversed sense: A–C." in told
    assert "Missing: C–B." in told
    assert table(made, "Members compared").strong_rows == (0, 1, 2)
    assert items(made, "Members compared")["Missing from the table"] == "C–B"
    assert items(made, "Scope")["Not compared"].startswith("one member: C–B; reactions")
    assert not made.origin.agreed


def test_every_number_of_the_comparison_is_on_the_sheet() -> None:
    """Ours exact and rounded, theirs as printed with its row and as read, the difference, the verdict."""
    found = bridge("lost")
    rows = {row[0]: row for row in words_of(table(sheet(found), "Members compared"))}
    read = {row[0]: row for row in words_of(table(sheet(found), "Submitted results"))}
    for name, item in found.members.items():
        cells = rows[name.replace("-", "–")]
        assert cells[2] == f"{item.ours:.3f}"
        assert cells[3] == item.our_sense
        assert cells[4] == f"{float(item.theirs or 0):.1f}"
        assert cells[5] == item.their_sense
        assert cells[8] == item.verdict
        assert item.difference is not None
        if abs(item.difference) > 0.0005:
            assert cells[6] == f"{item.difference:+.3f}".replace("-", "−")
        assert read[name.replace("-", "–")][1:] == [str(item.row), item.printed, cells[4]]


def test_long_tables_lead_with_what_is_furthest_off() -> None:
    """The first sheet holds twelve, all of them flipped ones first, and says where the others stand."""
    made = sheet(bridge("lost"))
    front = next(block for block in made.blocks if isinstance(block, Table))
    assert len(front.rows) == 12
    shown = {row[0] for row in words_of(front)}
    assert {"L4–M4", "L6–M6", "M4–U5", "M4–L5"} <= shown
    assert len(table(made, "Members compared").rows) == 53
    assert "all 53 stand under Members compared" in text(made).replace("\n", " ")
    missing = next(block for block in sheet(bridge("missing")).blocks if isinstance(block, Table))
    assert [row[0] for row in words_of(missing)] == ["L3–L4", "M3–U4"]
    agreeing = sheet(bridge("nothing"))
    assert "nearest to what is allowed" in text(agreeing).replace("\n", " ")


def test_the_misprint_of_a_book_is_named() -> None:
    """The two misprints of its own table, one a flipped sense, are all that differs (source in the case's file)."""
    case = CASES["khoo_t5"]
    given = {n: v for n, v in case.data["printed"].items() if n in case.data["members"]}
    for wrong in case.data["erratum"]:
        size = re.match(r"(-?[\d.]+)(?: ?\(?([TC])\)?)?", wrong["printed"])
        if wrong["name"] in case.data["members"] and size:
            given[wrong["name"]] = f"-{size[1]}" if size[2] == "C" else size[1]
    stated = TrussFile(case.truss, (case.loads,))
    asked = set(given) - set(case.data.get("last_digit", {}))
    found = compare_submitted(
        stated, read_submitted(given, case.truss), case.loads.name, members=asked, relative=0, absolute=0
    )
    made = sheet(found)
    assert len(found.members) == 4
    assert "two of four members differ" in conclusion(made)
    assert "Of reversed sense: c–j." in conclusion(made)
    strong = table(made, "Members compared")
    assert {words_of(strong)[place][0] for place in strong.strong_rows} == {"c–d", "c–j"}


def test_what_was_compared_is_told() -> None:
    """File, digest, case, unit, sign, every note of reading, the criterion with its reason."""
    given = "Bar;N [kip] (compression positive);Lastfall\nA-B;-1,80;LC 7\nB-C;2,25;LC 7\nC-A;2,25;LC 7\n"
    columns = {"case": "Lastfall"}
    table_ = read_submitted(given, ROOF, columns=columns)
    found = compare_submitted(FILE, table_, "snow", relative="0.005")
    made = sheet(found)
    told = items(made, "Submitted results")
    assert told["Digest"] == f"SHA-256 {table_.digest}"
    assert told["Load case there"] == "“LC 7”"
    assert told["Unit and sign"] == "kip; compression positive"
    for note in (*table_.notes, *found.notes):
        assert note[1:] in text(made).replace("\n", " ").replace("                 ", " ") or note[1:] in str(told)
    assert "0.5 % of ours" in told["Criterion"]
    assert "as stated by the user" in told["Criterion"]
    rows = words_of(table(made, "Submitted results"))
    assert rows[1] == ["C–B", "B-C", "3", "2,25", "-10.01"]


def test_what_was_given_and_not_asked_for_and_what_is_by_stiffness() -> None:
    """Named; a difference in an indeterminate part need be no error."""
    made = sheet(roof(members=["A-C"]))
    assert items(made, "Members compared")["Given, not asked for"] == "A–B and C–B"
    check = sheet_cases.indeterminate()
    stated = TrussFile(check.truss, (check.case,))
    forces = stiffness.member_forces(check.truss, check.case)
    found = compare_submitted(stated, read_submitted({n: f"{v:.3f}" for n, v in forces.items()}, check.truss), "w")
    made = sheet(found, derive=["A-C", "B-E"])
    assert "a difference need be no error" in items(made, "Members compared")["By stiffness"]
    assert "A–C" in items(made, "Members compared")["By stiffness"]
    assert "of B–E, by sections and joints" in items(made, "Scope")["Derivations"]
    assert "Not decided by statics, so not derived: A–C" in items(made, "Scope")["Derivations"]


def test_reactions_and_displacements() -> None:
    """A differing reaction turns the verdict; displacements out of proportion are told and do not."""
    rows = "member,force\n" + "".join(f"{name},{value}\n" for name, value in GOOD.items())
    joints = "\njoint,rx,ry,dx,dy\nA,0,6.00,0,0\nB,0,7.00,0.64,0\n"
    found = compare_submitted(FILE, read_submitted(rows + joints, ROOF), "snow")
    made = sheet(found)
    assert "one of four reactions differs" in conclusion(made)
    reactions = table(made, "Reactions compared")
    assert [words_of(reactions)[place][0] for place in reactions.strong_rows] == ["B,y"]
    assert "reaction" in [column.head for column in reactions.columns]
    assert len(table(made, "Displacements compared").rows) == 4
    wild = rows + "\njoint,dx,dy\nA,0,0\nB,0.64,0\nC,5.00,-9.00\n"
    made = sheet(compare_submitted(FILE, read_submitted(wild, ROOF), "snow"))
    assert conclusion(made).startswith("Agrees")
    assert "Displacements out of proportion, on which the verdict does not rest" in conclusion(made)


def test_symbols_stand_at_their_values() -> None:
    """Told under the title; the echo keeps them."""
    check = sheet_cases.warren()
    stated = TrussFile(check.truss, (check.case,))
    forces = stiffness.member_forces(check.truss, check.case)
    table_ = read_submitted({name: f"{value:.3f}" for name, value in forces.items()}, check.truss)
    made = sheet(compare_submitted(stated, table_, "live"))
    assert made.origin.agreed
    assert "Everything is compared at P = 20." in text(made)
    assert "−P" in text(made)


# --- our own disagreement ---------------------------------------------------------------------------------


def test_our_own_routes_come_first(monkeypatch: pytest.MonkeyPatch) -> None:
    """Before anything is said of theirs, and nothing is diagnosed."""
    honest = stiffness.solve_all

    def wrong(*given: Any) -> Any:
        return [replace(each, forces={**each.forces, "A-B": 9.0}) for each in honest(*given)]

    monkeypatch.setattr(stiffness, "solve_all", wrong)
    made = sheet(roof({"A-C": "-11.00"}))
    told = conclusion(made)
    assert told.startswith("Our own two routes do not agree: A–B: ")
    assert "this sheet verifies nothing" in told
    assert told.index("verifies nothing") < told.index("Does not agree")
    assert "Not diagnosed: our own two routes do not agree" in text(made).replace("\n", " ")
    assert "DIFFER: A-B" in items(made, "Cross-check")["Our two routes"]
    assert not sheet(roof()).origin.agreed


def test_a_derivation_that_gives_another_value_is_told() -> None:
    """The derived force is held against the equilibrium of all joints too."""
    found = roof()
    check = check_members(ROOF, SNOW, ["A-B"])
    item = check.members["A-B"]
    wrong = replace(check, members={"A-B": replace(item, exact=parse("9"))})
    made = compose_comparison(found, (), wrong, drawings=False)
    assert conclusion(made).startswith("Our own two routes do not agree: A–B: the derivation gives another value")
    assert not made.origin.agreed
    out = replace(check, residuals={"C": (item.exact, item.exact)})  # type: ignore[dict-item]
    assert "joint C: out of balance" in conclusion(compose_comparison(found, (), out, drawings=False))


# --- joints -----------------------------------------------------------------------------------------------


def test_implied_joint_loads() -> None:
    """Component by component: theirs, ours, difference, what rounding leaves open; those that differ strong."""
    found = bridge("lost")
    made = sheet(found)
    shown = table(made, "Joint loads implied")
    rows = words_of(shown)
    strong = [rows[place][:2] for place in shown.strong_rows]
    assert strong == [["L0, support", "x"], ["", "y"], ["L4", "x"], ["", "y"], ["L10, support", "y"]]
    four = rows[[row[0] for row in rows].index("L4") + 1]
    assert four[3] == "-154.900"
    assert abs(float(four[2])) < 0.2
    assert items(made, "Joint loads implied")["Differ"] == "L0, L4 and L10"
    assert "carry other loads or reactions at L0, L4 and L10" in conclusion(made)


def test_joints_without_all_members() -> None:
    """Named; a table that gives all members of no joint implies nothing."""
    assert items(sheet(bridge("missing")), "Joint loads implied")["Nothing implied"].startswith("L3, L4, M3 and U4")
    made = sheet(roof({"A-B": "", "C-B": ""}))
    assert "nothing is implied" in text(made)


KINDS = ("load-missing", "load-moved", "load-reversed", "support-extra", "support-turned", "joint-displaced", "sign")


@cache
def analysis(kind: str, family: str) -> Comparison:
    """Return results with a blunder, compared."""
    made = planted.plant(random.Random(f"{kind} {family}"), kind, family)
    stated = made.project.file
    return compare_submitted(stated, read_submitted(made.printed, stated.truss), made.project.compared)


@pytest.mark.parametrize("family", sorted(FAMILIES))
@pytest.mark.parametrize("kind", KINDS)
def test_the_drawing(kind: str, family: str) -> None:
    """No label over another, black joints are those that differ, twice each; nothing but black, grey and white."""
    found = analysis(kind, family)
    figure = implied_figure(found)
    assert overlaps(figure) == ()
    assert figure.width <= 170
    off = [load.joint for load in found.implied if load.differs]
    black = [mark for mark in figure.marks if isinstance(mark, Ring) and mark.fill == "black"]
    assert len(black) == 2 * len(off)
    assert {mark.ink for mark in figure.marks} <= {"black", "grey", "white"}
    assert ("Black joints" in figure.caption) == bool(off)
    for joint in off[:12]:
        assert f"{joint} (" in figure.alt


def test_arrows_are_the_loads_of_either_side() -> None:
    """Above all loads, below all but the lost one; values beside them."""
    figure = implied_figure(bridge("lost"))
    title = next(mark for mark in figure.marks if isinstance(mark, Label) and mark.text.startswith("implied"))
    arrows = [mark for mark in figure.marks if isinstance(mark, Arrow)]
    above = [mark for mark in arrows if min(mark.tail[1], mark.tip[1]) > title.place[1]]
    assert len(above) == 20 + 3  # 18 joints with Fy, two with Fx; three reactions
    assert len(arrows) - len(above) == 18 + 3
    assert sum(mark.open_head for mark in above) == 3
    texts = [mark.text for mark in figure.marks if isinstance(mark, Label)]
    assert texts.count("154.9") == 1
    assert texts.count("180") == 2


def test_missing_members_are_dashed_and_differing_ones_heavy() -> None:
    """In the lower drawing alone."""
    dashed = [m for m in implied_figure(bridge("missing")).marks if isinstance(m, Stroke) and m.dash == "dashed"]
    assert len(dashed) == 2
    assert "Dashed: members that the table does not give" in implied_figure(bridge("missing")).caption
    heavy = [m for m in implied_figure(bridge("lost")).marks if isinstance(m, Stroke) and m.width == 0.7]
    assert len(heavy) == len(bridge("lost").differing)
    plain = implied_figure(bridge("nothing"))
    assert not [m for m in plain.marks if isinstance(m, Stroke) and (m.dash == "dashed" or m.width == 0.7)]
    assert "Black joints" not in plain.caption


def test_the_sheet_holds_the_drawing() -> None:
    """On the first sheet, before the scope."""
    made = sheet(roof(), drawings=True)
    place = next(n for n, block in enumerate(made.blocks) if isinstance(block, Picture))
    assert place < next(
        n for n, block in enumerate(made.blocks) if isinstance(block, Heading) and block.text == "Scope"
    )
    assert not any(isinstance(block, Picture) for block in sheet(roof()).blocks)


# --- diagnosis --------------------------------------------------------------------------------------------


def test_ranked_explanations_with_ties_and_what_they_do_not_prove() -> None:
    """Words of the trade for the kinds, members with their dash, true minus signs."""
    made = sheet(bridge("lost"))
    rows = words_of(table(made, "Diagnosis"))
    assert rows[0][:3] == ["(1)", "load missing", "L4"]
    assert rows[0][-1] == "(2)"
    assert rows[0][3] == "every value within its rounding"
    told = items(made, "Diagnosis")
    assert told["(1)"].startswith("Consistent with the load (−21, −154.9) kN on L4 left out")
    assert "the same values come from load on another joint (L4, L0)" in told["(1)"]
    assert "not that this is what was done" in told["Not proven"]
    assert told["(1)"].split(":")[0] in conclusion(made)
    assert "it does not prove what was done" in conclusion(made)


def test_unexplained_is_said_plainly() -> None:
    """In the conclusion and in its part."""
    made = sheet(roof({"A-B": "9.77", "A-C": "-3.10", "C-B": "-17.20"}))
    shown = text(made).replace("\n", " ")
    if words_of(table(made, "Diagnosis"))[0][1] == "unexplained":
        assert "They are unexplained, and have to be settled." in shown
        assert "Unexplained: " in conclusion(made)
    found = compose_comparison(
        roof({"A-B": "9.00"}),
        (Explanation("unexplained", ("A-B",), "none of the blunders tried; all agree but A-B", 0.1, fits=False),),
        check_reactions(ROOF, SNOW),
        drawings=False,
    )
    assert "They are unexplained, and have to be settled." in text(found).replace("\n", " ")
    assert "Unexplained: none of the blunders tried; all agree but A–B." in conclusion(found)


@pytest.mark.parametrize(
    ("one", "reproduces", "told"),
    [
        (Explanation("sign", (), "consistent with x: every value", 1e-5, fits=True), "rounding", "the numbers"),
        (
            Explanation("sign", (), "consistent with x within the tolerance", 1e-4, fits=False),
            "tolerance",
            "the numbers",
        ),
        (
            Explanation("sign", (), "x: would bring it down", 1e-2, fits=False),
            "not every value",
            "most of the differences",
        ),
    ],
    ids=["rounding", "tolerance", "partly"],
)
def test_no_more_is_claimed_than_the_fit_shows(one: Explanation, reproduces: str, told: str) -> None:
    """In the table and in the conclusion."""
    made = compose_comparison(roof({"A-B": "9.00"}), (one,), check_reactions(ROOF, SNOW), drawings=False)
    assert reproduces in words_of(table(made, "Diagnosis"))[0][2]
    assert f"That would explain {told}" in conclusion(made)


def test_two_blunders_at_once_are_both_named() -> None:
    """The second with its place."""
    one = Explanation("sign", (), "both", 0.001, fits=True, second=("load-missing", ("C",)))
    made = compose_comparison(roof({"A-B": "9.00"}), (one,), check_reactions(ROOF, SNOW), drawings=False)
    assert words_of(table(made, "Diagnosis"))[0][1:3] == ["signs reversed and load missing", "C"]


def test_missing_members_alone_are_not_explained() -> None:
    """No value differs."""
    assert "No value that is there differs" in text(sheet(roof({"A-B": ""})))


# --- blind ------------------------------------------------------------------------------------------------


def test_blind_mode_is_said_with_digest_and_order() -> None:
    """And no more than is shown."""
    kept = frozen(FILE, "snow")
    made = sheet(reveal(kept, dict(GOOD)))
    told = items(made, "Submitted results")
    assert told["Digest of ours"] == f"SHA-256 {kept.digest}"
    assert told["Blind"] == "Our values and the criterion were frozen before the submitted table was opened"
    assert "frozen before the submitted table was opened" in conclusion(made)
    later = sheet(reveal(kept, read_submitted(dict(GOOD), ROOF)))
    assert "this record does not show which came first" in items(later, "Submitted results")["Blind"]
    assert "Blind" not in items(sheet(roof()), "Submitted results")


# --- derived again ----------------------------------------------------------------------------------------

SPREADSHEET = "Mühle;;\r\n\r\nStab;Kraft [kN];Fall\r\n1-2;8,00;A\r\n1-3;-10,00;A\r\n3-2;-10,50;A\r\n1-2;9,00;B\r\n"
NUMBERS = {"A": "1", "B": "2", "C": "3"}
COLUMNS = "member=Stab,force=2,case=Fall"


def spreadsheet(encoding: str, **options: Any) -> Comparison:
    """Return the roof beside a table as a spreadsheet saves it."""
    given = read_submitted(SPREADSHEET.encode(encoding), ROOF, names=NUMBERS, columns=COLUMNS, **options)
    return compare_submitted(FILE, given, "snow", theirs="A")


def _ways() -> dict[str, Callable[[], Sheet]]:
    kept = frozen(FILE, "snow", relative="0.002")
    by_hand = frozen(check_members(ROOF, SNOW, ["A-C"]))
    cuts = {"A-C": ROOF.cut(keep=["A"])}
    mine = LoadCase("my own", {"C": (1, -2)})
    risen = {name: value.lstrip("-") if value[0] == "-" else f"-{value}" for name, value in GOOD.items()}
    return {
        "plain": lambda: sheet(roof()),
        "drawn, word by word": lambda: sheet(roof({"A-B": "9.0"}), drawings=True, verbatim=True),
        "derived": lambda: sheet(roof({"A-B": "9.0"}), derive="differing", places=5),
        "own cut": lambda: sheet(roof(), derive=["A-C"], cuts=cuts, prefer="sections"),
        "some members": lambda: sheet(roof(members=["B-A"], relative="1/300", absolute="0")),
        "UTF-8": lambda: sheet(spreadsheet("utf-8"), verbatim=True),
        "byte-order mark": lambda: sheet(spreadsheet("utf-8-sig"), verbatim=True),
        "Windows-1252": lambda: sheet(spreadsheet("cp1252"), verbatim=True),
        "case on reading": lambda: sheet(spreadsheet("utf-8", case="A")),
        "detected": lambda: sheet(compare_submitted(FILE, read_submitted(risen, ROOF, convention="detect"), "snow")),
        "unit and others": lambda: sheet(
            compare_submitted(
                FILE, read_submitted({**GOOD, "S1": "1.00"}, ROOF, unit="kip", others=["S1"], decimal="."), "snow"
            )
        ),
        "blind": lambda: sheet(reveal(kept, SPREADSHEET.encode(), theirs="A", names=NUMBERS, columns=COLUMNS)),
        "blind, written down": lambda: sheet(reveal(kept, dict(GOOD), written_down=kept.digest)),
        "blind, read before": lambda: sheet(reveal(kept, read_submitted(dict(GOOD), ROOF))),
        "blind, by hand": lambda: sheet(reveal(by_hand, dict(GOOD))),
        "loads of one's own": lambda: sheet(compare_submitted(FILE, read_submitted(dict(GOOD), ROOF), mine)),
        "title block": lambda: sheet(roof(), project=Project(project="Mill", revision="C", names={"A": "N1"})),
    }


WAYS = tuple(_ways())


@pytest.mark.parametrize("suffix", [".html", ".ipynb"])
@pytest.mark.parametrize("way", WAYS)
def test_an_unaltered_sheet_passes(way: str, suffix: str, tmp_path: Path) -> None:
    """Whatever was asked for is in its record."""
    report = recheck.recheck(save(_ways()[way](), tmp_path / f"sheet{suffix}"))
    assert report.matches, "\n".join(report.lines())


ALTERED = {
    "a submitted value": ("9.50", "8.50"),
    "a verdict": ("differs", "agrees"),
    "a difference": ("+1.500", "+0.500"),
    "the digest": ("SHA-256 ", "SHA-256 0"),
    "a joint": ("Differ", "Agree"),
    "the conclusion": ("Does not agree", "Does agree"),
    "a criterion": ("0.1 % of ours", "20 % of ours"),
}


@pytest.mark.parametrize("suffix", [".html", ".ipynb"])
@pytest.mark.parametrize("what", ALTERED)
def test_an_altered_sheet_is_found(what: str, suffix: str, tmp_path: Path) -> None:
    """Each by its place, with what was derived."""
    path = save(sheet(roof({"A-B": "9.50"})), tmp_path / f"sheet{suffix}")
    before, after = ALTERED[what]
    shown = path.read_text(encoding="utf-8")
    assert before in shown
    path.write_text(shown.replace(before, after, 1), encoding="utf-8")
    report = recheck.recheck(path)
    assert not report.matches


def in_record(path: Path, change: Callable[[dict[str, Any]], None]) -> recheck.RecheckReport:
    """Return what recheck says after a change of a notebook's record."""
    book = json.loads(path.read_text(encoding="utf-8"))
    change(book["metadata"]["trusscalc"])
    path.write_text(json.dumps(book), encoding="utf-8")
    return recheck.recheck(path)


def test_another_table_in_the_record_gives_other_verdicts(tmp_path: Path) -> None:
    """Who alters the table has to alter everything that follows from it."""

    def change(record: dict[str, Any]) -> None:
        record["submitted"]["cells"] = record["submitted"]["cells"].replace("9.50", "8.00")

    report = in_record(save(sheet(roof({"A-B": "9.50"})), tmp_path / "sheet.ipynb"), change)
    places = {each.where.split(",")[0] for each in report.differences}
    assert {"Members compared", "Diagnosis"} <= places


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("task", "compare"),
        ("case", "rain"),
        ("members", []),
        ("submitted", {"name": "a.csv"}),
        ("submitted", {"name": "a.csv", "text": "x", "cells": "[]"}),
        ("submitted", {"name": "a.csv", "pickle": "x"}),
        ("submitted", {"name": "a.csv", "cells": "["}),
        ("submitted", {"name": "a.csv", "text": 7}),
        ("reading", {}),
        ("reading", {"columns": {}}),
        ("criterion", {"relative": "x", "absolute": "0"}),
        ("criterion", {"relative": "1/1000"}),
        ("blind", "maybe"),
        ("written_down", "yes"),
        ("checked", "A-C"),
        ("derived", ["A-Z"]),
        ("cuts", {"A-C": ["Z"]}),
        ("theirs", 3),
    ],
)
def test_a_record_that_cannot_be_is_a_difference(field: str, value: object, tmp_path: Path) -> None:
    """No crash, one difference: the input."""
    report = in_record(save(sheet(roof()), tmp_path / "sheet.ipynb"), lambda record: record.__setitem__(field, value))
    assert report.differences[0].where == "input"
    assert "nothing" in report.differences[0].derived


def test_no_way_of_reading_comparing_or_composing_is_forgotten() -> None:
    """Whatever can be asked for is recorded, or the sheet could not be derived again."""
    record = record_of(sheet(roof()))
    read = set(inspect.signature(read_submitted).parameters) - {"path_or_table", "truss"}
    assert read == set(record["reading"])
    compared = set(inspect.signature(compare_submitted).parameters) - {"stated", "submitted", "relative", "absolute"}
    assert compared <= set(record)
    blind = set(inspect.signature(reveal).parameters) - {"frozen_values", "submitted", "reading"}
    assert blind <= set(record)
    composed = set(inspect.signature(verification).parameters)
    told = {"derive": "derived", "verbatim": "detail"}
    composed -= {"comparison", "explanations", "truss_text"}
    assert {told.get(name, name) for name in composed} <= set(record)


@pytest.mark.parametrize("way", ["UTF-8", "blind, by hand", "own cut"])
def test_the_notebook_proves_itself(way: str, tmp_path: Path) -> None:
    """Run in a fresh kernel it gives its stored outputs."""
    import nbformat  # noqa: PLC0415

    book = nbformat.reads(notebook(_ways()[way]()), as_version=4)
    stored = [cell.outputs for cell in book.cells if cell.cell_type == "code"]
    NotebookClient(book, timeout=120, resources={"metadata": {"path": str(tmp_path)}}).execute()
    again = [cell.outputs for cell in book.cells if cell.cell_type == "code"]
    assert [[dict(o.get("data", {}), text=o.get("text", "")) for o in outputs] for outputs in again] == [
        [dict(o.get("data", {}), text=o.get("text", "")) for o in outputs] for outputs in stored
    ]


def test_the_same_bytes_in_another_process(tmp_path: Path) -> None:
    """Whatever the seed of hashes."""
    table_ = tmp_path / "results.csv"
    table_.write_text("member,force\nA-B,9.50\nA-C,-10.00\n", encoding="utf-8")
    truss = tmp_path / "roof.toml"
    truss.write_text(trusscalc_text(), encoding="utf-8")
    pages = []
    for seed in ("1", "2"):
        out = tmp_path / f"{seed}.html"
        command = [sys.executable, "-m", "trusscalc", "compare", str(truss), str(table_), "--case", "snow", "--out"]
        subprocess.run([*command, str(out)], env={**os.environ, "PYTHONHASHSEED": seed}, check=False)
        pages.append(out.read_bytes())
    assert pages[0] == pages[1]


def trusscalc_text() -> str:
    """Return the roof as a truss file."""
    from trusscalc.files import writes  # noqa: PLC0415

    return writes(FILE)


# --- refused ----------------------------------------------------------------------------------------------


def test_what_does_not_belong_together_is_refused() -> None:
    """A check of other loads or without own checks, another file's text, places out of range."""
    found = roof()
    with pytest.raises(InputError, match="the check is of other loads"):
        compose_comparison(found, (), check_reactions(ROOF, LoadCase("snow", {"C": (0, -11)})))
    with pytest.raises(InputError, match="own_checks=True"):
        compose_comparison(found, (), check_reactions(ROOF, SNOW, own_checks=False))
    with pytest.raises(InputError, match="states other loads than were compared"):
        sheet(found, truss_text=trusscalc_text().replace("-12", "-13"))
    with pytest.raises(InputError, match="decimal places"):
        sheet(found, places=13)


# --- hostile tables ---------------------------------------------------------------------------------------

EVIL = (
    "<script>alert(1)</script>",
    "$\\alpha$ |x|",
    '#eval("1")',
    "`code` *b* _i_",
    '=HYPERLINK("http://x")',
    "</pre><b>bold</b>",
    "[a](javascript:alert(1))",
    "\\(y\\) ~~z~~",
    "<img src=x onerror=alert(2)>",
    "@cite *#strong[x]* //",
    "right\u202eleft\u200b",
)


@cache
def hostile() -> Sheet:
    """Return the sheet of a table whose every text tries to be markup, compared with a truss that does so as well."""
    check = sheet_cases.hostile()
    forces = stiffness.member_forces(check.truss, check.case)
    names = {member.name: f"{EVIL[n % len(EVIL)]} {n}" for n, member in enumerate(check.truss.members)}
    rows = [
        {"pos": n, "Member": names[name], "Case": EVIL[8], "Force": f"{value + (n == 3):.2f}", EVIL[0]: EVIL[1]}
        for n, (name, value) in enumerate(forces.items())
    ]
    stated = TrussFile(check.truss, (check.case,), (), sheet_cases.HOSTILE_PROJECT)
    found = compare_submitted(stated, read_submitted(rows, check.truss, names=names), check.case.name)
    return verification(found, drawings=False, verbatim=True)


def test_hostile_cells_are_text_in_html() -> None:
    """No element, no attribute, no script; what a browser reads is what was written."""
    page = html(hostile(), draw=no_drawing)
    reader = Reader(page)
    assert not {tag for tag, *_ in reader.elements} & {"b", "i", "img", "script"}
    shown = "".join(reader.text)
    for cell in EVIL[:-1]:
        assert cell in shown, cell
    assert "right\\u{202e}left\\u{200b}" in shown
    body = shown.split("The submitted table, its cells")[0]
    assert "\u202e" not in body


def test_hostile_cells_are_text_in_a_notebook() -> None:
    """Nothing but our own elements in Markdown, dollars in pairs, columns kept; code cells hold literals."""
    book = json.loads(notebook(hostile(), draw=no_drawing))
    for cell in book["cells"]:
        source = "".join(cell["source"])
        if cell["cell_type"] == "code":
            compile(source, "cell", "exec")
            continue
        assert not re.search(r"<(?!/?(?:div|span|strong|em|br|img)\b)[a-zA-Z/!]", source), source
        assert "$" not in outside_mathematics(source)
        assert "\\" not in outside_mathematics(source)
        for rows in re.findall(r"(?m)(?:^\|.*\|$\n?)+", source):
            assert len({len(re.findall(r"(?<!\\)\|", line)) for line in rows.strip().splitlines()}) == 1
    shown = entities.unescape(re.sub(r"<[^>]+>", "", "\n".join("".join(c["source"]) for c in book["cells"])))
    for cell in EVIL[:-1]:
        assert cell in shown, cell


def test_hostile_cells_are_text_in_a_pdf() -> None:
    """Nothing is run or styled; every sign comes out."""
    pytest.importorskip("typst")
    from trusscalc.render.pdf import pdf  # noqa: PLC0415

    everything = "".join(pdf_text.pages_of(pdf(hostile())))
    for cell in EVIL[:-1]:
        assert cell.replace(" ", "") in everything, cell


def test_hostile_cells_are_text_in_plain_text() -> None:
    """Control characters are told by number, lines stay lines."""
    shown = text(hostile()).split("The submitted table, its cells")[0]
    assert "right\\u{202e}left" in shown
    assert all(character.isprintable() or character == "\n" for character in shown)


@pytest.mark.parametrize("suffix", [".html", ".ipynb"])
def test_a_hostile_sheet_is_derived_again(suffix: str, tmp_path: Path) -> None:
    """As any other."""
    report = recheck.recheck(save(hostile(), tmp_path / f"sheet{suffix}"))
    assert report.matches, "\n".join(report.lines())


def test_long_cells_are_cut() -> None:
    """A name of a thousand letters is no way to push the verdict off the page."""
    names = {"A-B": "x" * 900}
    found = compare_submitted(
        FILE, read_submitted([{"member": "x" * 900, "force": "8.0"}], ROOF, names=names), "snow", members=["A-B"]
    )
    rows = words_of(table(sheet(found), "Submitted results"))
    assert rows[0][1] == "x" * 60 + "…"


def test_the_table_word_by_word() -> None:
    """Printed as it was handed in, only when asked for."""
    listed = [block for block in sheet(spreadsheet("utf-8"), verbatim=True).blocks if isinstance(block, Listing)]
    assert listed[1].text == SPREADSHEET
    assert listed[1].caption == "The submitted table, as handed in"
    assert not [block for block in sheet(spreadsheet("utf-8")).blocks if isinstance(block, Listing)]


# --- in a notebook ----------------------------------------------------------------------------------------


def test_a_comparison_shows_itself() -> None:
    """Conclusion, table, joint loads drawn, diagnosis."""
    shown = roof({"A-B": "9.00"})._repr_mimebundle_()
    assert "Does not agree: one of three members differs" in shown["text/markdown"]
    assert "data:image/svg+xml;base64," in shown["text/markdown"]
    assert "Diagnosis" in shown["text/markdown"]
    assert "A–B" in shown["text/plain"]
    assert roof().sheet(drawings=False).summary == verification(roof(), drawings=False).summary


def test_public_names_are_not_modules() -> None:
    """Importing a module of that name would hide the function."""
    folder = Path(trusscalc.__file__).parent
    modules = {path.stem for path in folder.iterdir()}
    functions = [name for name in trusscalc.__all__ if name.islower() and name != "shapes"]
    assert {"compare_submitted", "diagnose", "read_submitted"} <= set(functions)
    assert not modules & set(functions)
