"""The sheet of an influence line: its derivation, its ordinates, a train on it, and that every fault shows."""

from __future__ import annotations

import dataclasses
import inspect
import json
import re
from decimal import Decimal
from pathlib import Path

import nbformat
import pytest
from load_cases import BRACED, FOOTWAY
from nbclient import NotebookClient

import trusscalc
from trusscalc import recheck, stiffness
from trusscalc.chains import Chain
from trusscalc.display import save
from trusscalc.envelopes import envelope
from trusscalc.errors import InputError, UndecidedError
from trusscalc.exact import ZERO
from trusscalc.exacttext import number
from trusscalc.files import reads
from trusscalc.governing import governing_checks
from trusscalc.influence import InfluenceLine, influence_line, influence_lines
from trusscalc.influencechecks import shown_check, target_value, train_checks
from trusscalc.loads import LoadCase
from trusscalc.membercheck import check_members, check_reactions, check_steps
from trusscalc.render.text import WIDTH, blocks_text, text, width
from trusscalc.sheet.blocks import Block, Derivation, Heading, Lines, Paragraph, Run, Sheet, Table
from trusscalc.sheet.compose import compose
from trusscalc.sheet.digest import record_of
from trusscalc.sheet.envelopesheet import compose_envelope
from trusscalc.sheet.influencesheet import OTHERS, compose_influence
from trusscalc.standing import KINDS as KINDS_OF_LOAD
from trusscalc.standing import standing_loads, train_of
from trusscalc.trains import Train
from trusscalc.travel import TravelError, extremes

KINDS = (".html", ".ipynb")


def line_of(target: str = "U1-L2", along: str = "deck", *, file: str = FOOTWAY, prefer: str = "") -> InfluenceLine:
    """Return a line of a file's text."""
    stated = reads(file)
    return influence_line(stated.truss, target, stated.chain(along), prefer=prefer)  # type: ignore[arg-type]


def sheet_of(
    target: str = "U1-L2", along: str = "deck", train: str = "", *, file: str = FOOTWAY, drawings: bool = False
) -> Sheet:
    """Return the sheet of a line of a file's text."""
    stated = reads(file)
    trains = stated.train(train) if train else ()
    line = line_of(target, along, file=file)
    return compose_influence(line, trains, train=train, truss_text=file, drawings=drawings)


@pytest.fixture(scope="module")
def diagonal() -> Sheet:
    """Return the sheet of a diagonal with a train on it."""
    return sheet_of(train="sweeper")


def headings(sheet: Sheet) -> list[str]:
    """Return the headings of the second level."""
    return [block.text for block in sheet.blocks if isinstance(block, Heading) and block.level == 2]


def part(sheet: Sheet, heading: str) -> list[Block]:
    """Return the blocks below a heading of the second level."""
    blocks = list(sheet.blocks)
    start = next(n for n, b in enumerate(blocks) if isinstance(b, Heading) and b.text.startswith(heading))
    end = next((n for n, b in enumerate(blocks) if n > start and isinstance(b, Heading) and b.level <= 2), len(blocks))
    return blocks[start + 1 : end]


def column(table: Table, head: str) -> list[str]:
    """Return what stands in a column."""
    place = [each.head for each in table.columns].index(head)
    return ["" if row[place] is None else str(getattr(row[place], "text", row[place])) for row in table.rows]


def strong(sheet: Sheet) -> list[str]:
    """Return what the conclusion opens with, set bold."""
    first = next(block for block in sheet.summary if isinstance(block, Paragraph))
    return [piece.text for piece in first.content if isinstance(piece, Run) and piece.style == "strong"]


# --- what it says -----------------------------------------------------------------------------------------


def test_parts_in_their_order(diagonal: Sheet) -> None:
    """From the conclusion to the revisions."""
    assert headings(diagonal) == [
        "Scope",
        "Basis",
        "Input",
        "Derivation of the largest ordinate",
        OTHERS,
        "sweeper on the line",
        "Hand check with the train placed: largest tension",
        "Hand check with the train placed: largest compression",
        "Cross-check",
        "Cautions",
        "Revisions",
    ]
    assert "sweeper on the line" not in headings(sheet_of())


def test_values_worked_out_by_hand(diagonal: Sheet) -> None:
    """The shear of the second panel of a simple beam, times sqrt(2) (statics; common practice, no source).

    Unit load at L1, L2, L3: shear -1/4, 1/2, 1/4. Areas 16*0.5/2 = 4 and 8*0.25/2 = 1 with the zero 8 m from L0. The
    train: 100*0.5 + 50*0.375 + 5*4 = 88.75 and -(100*0.25 + 50*0.125 + 5*1) = -36.25.
    """
    (table,) = [block for block in diagonal.summary if isinstance(block, Table)]
    exact = [
        number(re.sub(r"√2", "*sqrt(2)", e).replace("−", "-").replace("-*", "-").lstrip("*"))
        for e in column(table, "ordinate, exact")
    ]
    assert exact == [number(f"({value})*sqrt(2)") for value in ("0", "-1/4", "1/2", "1/4", "0")]
    assert column(table, "decimal") == ["0.000000", "-0.353553", "0.707107", "0.353553", "0.000000"]
    assert set(column(table, "verdict")) == {"agrees"}
    assert (
        "Positive area 4√2 ≈ 5.657 m, negative area −√2 ≈ −1.414 m; zero points: 0, 8 and 24 m from L0."
        in table.caption
    )
    told = " ".join(text(diagonal).split())
    assert "Largest tension: 125.511 kN, sweeper, travelling from L0 to L4, leading axle 15 m from L0." in told
    assert "Largest compression: −51.265 kN, sweeper, travelling from L4 to L0, leading axle 3 m from L0." in told
    assert "the ordinary hand check gives both values again, exactly" in told
    assert not strong(diagonal)
    assert float(number("88.75*sqrt(2)")) == pytest.approx(125.5114, abs=1e-4)


def test_the_same_equations_for_every_position(diagonal: Sheet) -> None:
    """Row by row what a check with the unit load there gives, for every force on the way."""
    line = line_of()
    (table,) = [block for block in part(diagonal, OTHERS) if isinstance(block, Table)]
    names = [each.head.replace(",", ".").replace("–", "-") for each in table.columns[1:]]
    assert names == list(line.found[0])
    assert column(table, "unit load at") == list(line.chain.joints)
    for place, joint in enumerate(line.chain.joints):
        check = check_members(line.truss, LoadCase("", {joint: (0, -1)}), ["U1-L2"])
        for name in names:
            judged = check.members.get(name) or check.reactions[name]
            assert line.found[place][name] == judged.exact


def test_the_shown_derivation_is_that_of_its_joint(diagonal: Sheet) -> None:
    """All reactions and the ordinate, each beside a stiffness value, numbered on into the hand checks."""
    steps = [block for block in diagonal.blocks if isinstance(block, Derivation)]
    assert [step.heading.number for step in steps] == [str(n) for n in range(1, len(steps) + 1)]
    check = shown_check(line_of())
    assert check.agreed
    assert check.members["U1-L2"].exact == number("sqrt(2)/2")
    assert {link.name for link in check.truss.links} <= {name for step in check.steps for name in step.results}


@pytest.mark.parametrize(("target", "largest"), [("L0.y", "1"), ("V(L1-L2)", "1/2"), ("L1-L2", "3/4")])
def test_reactions_and_shears_have_sheets_too(target: str, largest: str) -> None:
    """With the train derived again by the reactions alone."""
    sheet = sheet_of(target, train="sweeper")
    assert sheet.origin.agreed
    stated = dict(sheet.origin.stated)
    assert max(number(value) for joint, value in stated.items() if "," not in joint) == number(largest)
    line = line_of(target)
    trains = reads(FOOTWAY).train("sweeper")
    for check in train_checks(line, trains, extremes(line, trains)):
        assert check.value == check.extreme.value
        assert target_value(line, check.check) == check.value
    if target.startswith("V"):
        lines = [block for block in part(sheet, "Derivation of the largest") if isinstance(block, Lines)]
        assert "V_L1–L2 = R_L0,y" in blocks_text(lines)


def test_nothing_adverse_is_said() -> None:
    """A chord under a simple beam is never pressed: value 0, and no hand check of that sense."""
    sheet = sheet_of("L1-L2", train="sweeper")
    assert "With sweeper in the other sense no position is adverse, value 0." in " ".join(text(sheet).split())
    assert len([each for each in headings(sheet) if each.startswith("Hand check")]) == 1
    assert dict(sheet.origin.stated)["train, least"] == "0"


def test_a_published_train_is_told_with_its_mark() -> None:
    """By its published name, without being in the file."""
    sheet = sheet_of(train="LM71")
    told = " ".join(text(sheet).split())
    assert "EN 1991-2" in told
    assert "memory" in told or "read" in told
    assert sheet.origin.train == "LM71"


def test_the_train_adds_up_on_paper(diagonal: Sheet) -> None:
    """Ordinates times loads are the sum, and the joint loads its whole weight."""
    blocks = part(diagonal, "sweeper on the line")
    found = [block for block in blocks if isinstance(block, Table) and block.columns[-1].head == "adds, kN"]
    assert len(found) == 2
    for table in found:
        adds = [Decimal(each) for each in column(table, "adds, kN")]
        assert abs(sum(adds[:-1]) - adds[-1]) <= Decimal("0.00003")
    (shares,) = [
        b for b in part(diagonal, "Hand check with the train placed: largest tension") if isinstance(b, Table)
    ][:1]
    *joints, total = (Decimal(each.replace("−", "-")) for each in column(shares, "together, kN"))
    assert abs(sum(joints) - total) < Decimal("0.002")
    assert total == -(50 + 100 + 5 * 16)


@pytest.mark.parametrize("target", ["U1-L2", "V(L1-L2)"])
def test_lines_fit_in_a_hundred_columns(target: str) -> None:
    """Nothing is cut."""
    assert max(map(width, text(sheet_of(target, train="sweeper")).splitlines())) <= WIDTH


# --- what has to be told first ----------------------------------------------------------------------------


def test_a_spoilt_stiffness_route_opens_the_conclusion(monkeypatch: pytest.MonkeyPatch) -> None:
    """One wrong sign in the runs of the hand checks, and in those of the line."""
    right, every = stiffness.member_forces, stiffness.solve_all

    def wrong(truss: trusscalc.Truss, case: LoadCase) -> dict[str, float]:
        forces = right(truss, case)
        return forces | {"U1-L2": -forces["U1-L2"]}

    monkeypatch.setattr(stiffness, "member_forces", wrong)
    told = strong(sheet_of(train="sweeper"))
    assert "The derivation with the unit load at L2 does not agree with the other route." in told
    assert "The two routes do not agree on the largest tension." in told

    def spoilt(*given: object) -> object:
        runs = every(*given)  # type: ignore[arg-type]
        return tuple(dataclasses.replace(run, forces={**run.forces, "U1-L2": 7.0}) for run in runs)

    monkeypatch.setattr(stiffness, "solve_all", spoilt)
    sheet = sheet_of()
    assert strong(sheet)[0] == "Not agreed: the ordinates at L0, L1, L2, L3 and L4."
    (table,) = [block for block in sheet.summary if isinstance(block, Table)]
    assert table.strong_rows == (0, 1, 2, 3, 4)
    assert not sheet.origin.agreed


def test_a_forged_extreme_is_told() -> None:
    """The hand check gives another value than the line is said to give: placing the loads proves it."""
    line = line_of()
    trains = reads(FOOTWAY).train("sweeper")
    largest, least = extremes(line, trains)
    forged = dataclasses.replace(largest, value=largest.value + 1)
    with pytest.raises(trusscalc.TrusscalcError, match="do not give the force"):
        compose_influence(line, trains, (forged, least), train="sweeper", truss_text=FOOTWAY)


def test_what_statics_does_not_decide_has_no_sheet() -> None:
    """The reason comes with the error."""
    with pytest.raises(UndecidedError, match="redundancy"):
        line_of("A-C", "D,C", file=BRACED)


def test_what_cannot_be_asked_for() -> None:
    """A line without derivation, another truss, another train, several trains without a name, places."""
    line = line_of()
    stated = reads(FOOTWAY)
    (quick,) = influence_lines(stated.truss, ["U1-L2"], stated.chain("deck"))
    with pytest.raises(InputError, match="without its derivation"):
        compose_influence(quick)
    with pytest.raises(InputError, match="another truss"):
        compose_influence(line, truss_text=FOOTWAY.replace("U2 = [12, 6]", "U2 = [12, 7]"))
    with pytest.raises(InputError, match="other trains"):
        compose_influence(line, [Train("sweeper", (1,))], truss_text=FOOTWAY)
    with pytest.raises(InputError, match="say by `train`"):
        compose_influence(line, stated.train("HL-93 metric"))
    with pytest.raises(InputError, match="decimal places"):
        compose_influence(line, places=13)


# --- filed ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("suffix", KINDS)
@pytest.mark.parametrize(
    ("target", "along", "train"),
    [("U1-L2", "deck", "sweeper"), ("V(L1-L2)", "L0,L1,L2,L3,L4", "LM71"), ("L4.y", "deck", "")],
)
def test_an_unaltered_sheet_is_derived_again(target: str, along: str, train: str, suffix: str, tmp_path: Path) -> None:
    """With drawings, from page and notebook."""
    path = save(sheet_of(target, along, train, drawings=True), tmp_path / f"sheet{suffix}")
    report = recheck.recheck(path)
    assert report.matches, "\n".join(report.lines())
    assert report.compared["figures"]


def test_leaning_and_a_chain_without_a_name_are_derived_again(tmp_path: Path) -> None:
    """What was asked of the line is recorded; a chain of one's own is written into the file."""
    truss = reads(FOOTWAY).truss
    own = Chain("footpath", ("L4", "L3", "L2", "L1", "L0"))
    line = influence_line(truss, "U1-L2", own, prefer="joints")
    train = Train("cart", (3, 4), (2,), share="0.5", omit=True)
    sheet = line.sheet(trains=[train], drawings=False)
    assert sheet.origin.along == "footpath"
    for suffix in KINDS:
        assert recheck.recheck(save(sheet, tmp_path / f"sheet{suffix}")).matches


@pytest.mark.parametrize("suffix", KINDS)
def test_an_altered_ordinate_is_found(suffix: str, tmp_path: Path) -> None:
    """One digit."""
    path = save(sheet_of(train="sweeper"), tmp_path / f"sheet{suffix}")
    written = path.read_text(encoding="utf-8")
    path.write_text(written.replace("0.353553", "0.353653", 1), encoding="utf-8")
    assert not recheck.recheck(path).matches


@pytest.mark.parametrize(
    ("key", "value"), [("task", []), ("task", "guess"), ("along", 3), ("train", None), ("prefer", "x")]
)
def test_a_record_that_was_never_written_is_no_surprise(key: str, value: object, tmp_path: Path) -> None:
    """Whatever stands in it: a difference, never a traceback."""
    path = save(sheet_of(), tmp_path / "sheet.ipynb")
    book = json.loads(path.read_text(encoding="utf-8"))
    book["metadata"]["trusscalc"][key] = value
    path.write_text(json.dumps(book), encoding="utf-8")
    report = recheck.recheck(path)
    assert not report.matches
    assert "is not what this version writes there" in str(report.differences[0])


@pytest.mark.parametrize("kind", ["influence", "envelope"])
def test_a_notebook_that_was_run_again_passes(kind: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Its cells derive everything again and give the outputs that are stored."""
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path))
    if kind == "influence":
        sheet = sheet_of(train="sweeper")
    else:
        found = envelope(reads(FOOTWAY), ["U1-L2"])
        sheet = compose_envelope(found, governing_checks(found), truss_text=FOOTWAY, drawings=False, places=4)
    path = save(sheet, tmp_path / "sheet.ipynb")
    book = nbformat.read(path, as_version=4)
    for cell in book.cells:
        if cell.cell_type == "code":
            cell.outputs = []
    NotebookClient(book, timeout=120, kernel_name="python3", resources={"metadata": {"path": str(tmp_path)}}).execute()
    nbformat.write(book, path)
    report = recheck.recheck(path)
    assert report.matches, "\n".join(report.lines())
    assert "the two routes agree" in json.dumps(book)


def test_no_way_of_composing_is_forgotten() -> None:
    """Whatever these sheets can be asked for is recorded on them, or they could not be derived again."""
    record = record_of(sheet_of(train="sweeper"))
    asked = set(inspect.signature(compose_influence).parameters) - {"line", "trains", "extremes", "truss_text"}
    asked |= set(inspect.signature(influence_line).parameters) - {"truss", "chain"} | {"along"}
    assert asked <= set(record)
    found = envelope(reads(FOOTWAY), ["U1-L2"])
    record = record_of(compose_envelope(found, governing_checks(found), drawings=False))
    asked = set(inspect.signature(compose_envelope).parameters) - {"found", "checks", "truss_text"}
    asked |= set(inspect.signature(envelope).parameters) - {"stated", "progress"}
    assert asked <= set(record)


def test_sheets_of_checks_are_recorded_as_before() -> None:
    """No new key, and fields of later sheets do not count in the digest of older ones."""
    stated = reads(BRACED)
    sheet = compose(check_members(stated.truss, stated.case("lamp"), ["B-E"]), drawings=False)
    assert list(record_of(sheet)) == [
        *("format", "program", "case", "members", "cuts", "prefer", "places", "drawings", "detail", "graphics"),
        *("project", "names", "input", "content"),
    ]
    as_before = dataclasses.replace(sheet, origin=dataclasses.replace(sheet.origin, task="check", target="", along=""))
    assert record_of(as_before)["content"] == record_of(sheet)["content"]
    other = dataclasses.replace(sheet, origin=dataclasses.replace(sheet.origin, task="envelope"))
    assert record_of(other)["content"] != record_of(sheet)["content"]


# --- checks behind it -------------------------------------------------------------------------------------


def test_reactions_alone_can_be_checked() -> None:
    """No member asked for: the same reactions as beside a member."""
    stated = reads(FOOTWAY)
    alone = check_reactions(stated.truss, stated.case("dead"))
    beside = check_members(stated.truss, stated.case("dead"), ["U1-U2"])
    assert alone.agreed
    assert not alone.members
    assert {n: r.exact for n, r in alone.reactions.items()} == {n: r.exact for n, r in beside.reactions.items()}
    with pytest.raises(InputError, match="no such joint"):
        check_reactions(stated.truss, LoadCase("x", {"L9": (0, -1)}))


def test_written_steps_are_judged_like_any_other() -> None:
    """A step with a doubled result differs."""
    stated = reads(FOOTWAY)
    check = check_members(stated.truss, stated.case("dead"), ["U1-U2"])
    again = check_steps(stated.truss, stated.case("dead"), check.steps, ["U1-U2"])
    assert again.members == check.members
    last = check.steps[-1]
    doubled = dataclasses.replace(last, results={name: force + force for name, force in last.results.items()})
    spoilt = check_steps(stated.truss, stated.case("dead"), (*check.steps[:-1], doubled), ["U1-U2"])
    assert spoilt.members["U1-U2"].verdict == "differs"
    assert not spoilt.agreed


def test_conveniences() -> None:
    """A line makes its sheet itself, and is drawn with its ordinates in a notebook."""
    line = line_of()
    assert isinstance(line.sheet(drawings=False), Sheet)
    shown = line._repr_mimebundle_()
    assert "ordinate, exact" in shown["text/plain"]
    assert shown["text/markdown"].count("<img ") == 1
    assert line.at(8) == ZERO


# --- a train laid open ------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["LM71", "Cooper E80", "HL-93 metric", "HS20-44"])
@pytest.mark.parametrize("target", ["U1-L2", "U1-U2", "L0.y"])
def test_published_trains_add_up_load_by_load(name: str, target: str) -> None:
    """Axles, lane, load that follows and load beside, each by its name; effects and shares are the whole."""
    line = line_of(target)
    trains = reads(FOOTWAY).train(name)
    for extreme in extremes(line, trains):
        train = train_of(extreme, trains)
        assert train is not None
        loads = standing_loads(line, extreme, train)
        assert sum((load.effect for load in loads), ZERO) == extreme.value
        uniform = {load.what for load in loads if not load.is_axle}
        kinds = {"lane": train.lane, "follow": train.follow, "beside": train.beside}
        assert uniform <= {KINDS_OF_LOAD[kind] for kind, stated in kinds.items() if stated}


def test_two_uniform_loads_of_one_size_have_no_name_of_their_own() -> None:
    """They could be either."""
    line = line_of("U1-U2")
    train = Train("both", (10, 10), (3,), lane=4, follow=(2, 4))
    _, least = extremes(line, [train])
    assert {load.what for load in standing_loads(line, least, train) if not load.is_axle} == {"uniform load"}


def test_loads_that_do_not_add_up_are_refused() -> None:
    """A forged value."""
    line = line_of()
    trains = reads(FOOTWAY).train("sweeper")
    largest, _ = extremes(line, trains)
    with pytest.raises(TravelError):
        standing_loads(line, dataclasses.replace(largest, value=largest.value + 1), trains[0])
