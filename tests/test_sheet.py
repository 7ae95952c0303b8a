"""The sheet as a document: what it says, in which order, and that every written line holds."""

from __future__ import annotations

import dataclasses
import hashlib
import re
from collections.abc import Iterator
from decimal import Decimal
from pathlib import Path
from typing import Any

import pytest
import sheet_cases

from trusscalc import stiffness
from trusscalc.errors import InputError
from trusscalc.exact import Exact, rational
from trusscalc.exacttext import to_text
from trusscalc.files import writes
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.render.text import text
from trusscalc.sheet import hence
from trusscalc.sheet.blocks import (
    Block,
    Decimals,
    Derivation,
    Formula,
    Heading,
    Name,
    Paragraph,
    Product,
    Run,
    Sheet,
    Table,
    Value,
)
from trusscalc.sheet.compose import compose
from trusscalc.sheet.derivation import writer_of
from trusscalc.sheet.equations import plus
from trusscalc.sheet.marks import Figure
from trusscalc.sheet.values import bound, difference, float_text, pencil_sum, printed, scientific
from trusscalc.sheet.words import part
from trusscalc.statics.cuts import structure_of
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

GOLDEN = Path(__file__).parent / "golden"


def dump(item: Any) -> str:  # noqa: C901, PLR0911 - one line for each type
    """Return a piece of the document model on one line: its type and what it holds, mathematics in short."""
    match item:
        case Exact():
            return to_text(item)
        case Figure():
            return f"Figure({item.alt!r})"
        case Value(value, role):
            return f"{to_text(value)}:{role}"
        case Decimals(text):
            return f"~{text}"
        case Name(base, subscript, sought):
            return f"{base}[{subscript}]{'!' * sought}"
        case Product(negative, factors):
            return ("-" if negative else "+") + " * ".join(map(dump, factors))
        case Formula(left, right, approximately):
            return f"{' '.join(map(dump, left))} {'~' if approximately else '='} {' '.join(map(dump, right))}"
        case Run(text, style):
            return repr(text) + ("" if style == "plain" else f":{style}")
        case tuple():
            return f"({', '.join(map(dump, item))})"
    if dataclasses.is_dataclass(item):
        held = [(field.name, getattr(item, field.name)) for field in dataclasses.fields(item)]
        told = [f"{name}={dump(value)}" for name, value in held if value not in ("", (), None, False, 0)]
        return f"{type(item).__name__}({', '.join(told)})"
    return repr(item)


def pieces(block: Block) -> list[Any]:
    """Return what a step is made of, in order; any other block as it is."""
    if not isinstance(block, Derivation):
        return [block]
    check = block.check.lines if block.check else ()
    return [block.heading, block.reason, *block.lines.lines, *block.tables, block.result, *check, *block.notes]


def model_text(sheet: Sheet) -> str:
    """Return the document model as text: a line for each block, each table row and each line of a step."""
    lines = []
    for block in sheet.blocks:
        for piece in pieces(block):
            if isinstance(piece, Table):
                lines += [dump(dataclasses.replace(piece, rows=())), *(f"    {dump(row)}" for row in piece.rows)]
            else:
                lines.append(dump(piece))
    return "\n".join(lines) + "\n"


def conclusion(sheet: Sheet) -> Paragraph:
    """Return the conclusion, which must stand before the summary table."""
    kinds = [block for block in sheet.blocks if isinstance(block, Table | Derivation) or _is_conclusion(block)]
    assert _is_conclusion(kinds[0])
    assert isinstance(kinds[0], Paragraph)
    return kinds[0]


def _is_conclusion(block: Block) -> bool:
    return isinstance(block, Paragraph) and block.role == "conclusion"


def words(paragraph: Paragraph) -> str:
    """Return a paragraph's running text."""
    return "".join(piece.text for piece in paragraph.content if isinstance(piece, Run))


@pytest.fixture(scope="module", params=sorted(sheet_cases.ALL))
def named(request: pytest.FixtureRequest) -> tuple[str, MemberCheck]:
    """Every shared case with its name."""
    return request.param, sheet_cases.ALL[request.param]()


def test_golden_model() -> None:
    """The document model of one small check, read once by eye: a wrong equation shows as a changed line."""
    sheet = compose(sheet_cases.warren(), sheet_cases.PROJECT, drawings=False)
    path = GOLDEN / "warren_model.txt"
    assert model_text(sheet) == path.read_text(encoding="utf-8")


def test_a_check_without_own_checks_makes_no_sheet() -> None:
    """The sheet shows a check beside every step, so it refuses a result made without them."""
    check = sheet_cases.warren()
    bare = check_members(check.truss, check.case, list(check.members), own_checks=False)
    with pytest.raises(InputError, match="own_checks=True"):
        compose(bare)


def test_parts_stand_in_their_order() -> None:
    """Conclusion first, then what it rests on."""
    sheet = compose(sheet_cases.warren(), sheet_cases.PROJECT, drawings=False)
    heads = [block.text for block in sheet.blocks if isinstance(block, Heading)]
    assert heads == [
        "Independent check of truss member forces",
        *("Scope", "Basis", "Input", "Loads", "Reactions"),
        *("Derivation of the reactions", "Derivation of the members"),
        *("Cross-check", "Cautions", "Revisions"),
    ]


# --- every written line, recalculated from the text alone -------------------------------------------------

LINE = re.compile(r"^ {4}(?P<line>\S.*)$")
FORCE = re.compile(r"(?<![\w.])(?:N|R|P|ΣP|M)_(?:\([^)]*\)|[^\s·=≈()]+)")


def number_of(expression: str, symbols: dict[str, float]) -> float:
    """Return the value of a written expression: digits, roots, dots, brackets and the symbols given."""
    code = expression.replace("−", "-").replace("·", "*")
    for name, value in symbols.items():
        code = re.sub(rf"(?<![^\W\d]){name}(?!\w)", f"({value!r})", code)
    code = re.sub(r"√(\d+)", r"((\1)**0.5)", code)
    code = re.sub(r"√\(", "root(", code)
    code = re.sub(r"(?<=[\d)])\s*(?=\()", "*", code)
    assert re.fullmatch(r"[\d.e+\-*/() root]*", code), code
    return float(eval(code, {"__builtins__": {}, "root": lambda x: x**0.5}))  # noqa: S307 - our own text, characters checked


def blocks_of_lines(written: str) -> Iterator[list[tuple[str, str]]]:
    """Yield for each step of a text sheet its (label, line) pairs, hanging lines joined."""
    for step in re.split(r"\n(?=\d+  \S.*\n-{100}\n)", written)[1:]:
        pairs: list[tuple[str, str]] = []
        label = ""
        for line in step.split("\nCross-check\n")[0].splitlines():
            if re.match(r"^ {8}\S", line) and pairs:
                pairs[-1] = (pairs[-1][0], f"{pairs[-1][1]} {line.strip()}")
            elif found := LINE.match(line):
                pairs.append((label, found["line"]))
                label = ""
            elif line.endswith(":"):
                label = line[:-1]
        yield pairs


def test_every_written_line_holds_for_a_reader_with_the_text_alone(named: tuple[str, MemberCheck]) -> None:
    """Each with-values line sums to zero with the forces of this step, and each check line is zero."""
    name, check = named
    if name == "hostile":
        pytest.skip("its names hold signs; the lines are the same code")
    letters = {letter: _found(check, bar) for step in check.steps for bar, letter in step.carries.items()}
    values = {symbol: float(value) for symbol, value in (*check.case.symbols, *letters.items())}
    size = check.largest_force
    found = {bar: float(check.case.value(force)) for step in check.steps for bar, force in step.results.items()}
    partial = [(bar, force) for step in check.steps for bar, force in step.partial.items()]
    found |= {bar: float(force.substitute(letters)) for bar, force in partial}
    counted = 0
    for pairs in blocks_of_lines(text(compose(check, drawings=False))):
        for label, line in pairs:
            if not (
                label in ("with values", "hence, collected") or label.startswith(("hence", "and", "Check")) or not label
            ):
                continue
            filled = FORCE.sub(lambda match: f"({_force(match[0], found)!r})", line)
            left, _, right = re.split(r" ([=≈]) ", filled + ("" if re.search("[=≈]", filled) else " = 0"))
            gap = number_of(left, values) - number_of(right, values)
            assert abs(gap) <= 1e-7 * size * 30, (label, line)
            counted += 1
    assert counted >= 2 * len(check.steps)


def _force(symbol: str, found: dict[str, float]) -> float:
    name = symbol.split("_", 1)[1].replace("–", "-").replace(",", ".")
    return found[name]


def _found(check: MemberCheck, bar: str) -> Exact:
    return next(step.results[bar] for step in check.steps if bar in step.results)


def test_a_line_that_does_not_hold_is_never_printed() -> None:
    """A wrong result in a step is caught before anything is written."""
    check = sheet_cases.roof()
    step = check.steps[3]
    (equation,) = step.equations
    wrong = dataclasses.replace(equation.terms[-1], tension=equation.terms[-1].tension + 1)
    broken = dataclasses.replace(step, equations=(dataclasses.replace(equation, terms=(*equation.terms[:-1], wrong)),))
    with pytest.raises(hence.WrittenLineError, match="does not hold"):
        writer_of(check).derivation(broken)


# --- what has to be told first ----------------------------------------------------------------------------


def test_a_disagreement_is_told_first_and_bold(monkeypatch: pytest.MonkeyPatch) -> None:
    """Negative control: a stiffness route that is off by 1 kN in one member turns the sheet."""
    honest = stiffness.member_forces

    def wrong(truss: Truss, case: LoadCase) -> dict[str, float]:
        forces = dict(honest(truss, case))
        forces["D-C"] += 1.0
        return forces

    monkeypatch.setattr(stiffness, "member_forces", wrong)
    sheet = compose(sheet_cases.roof(), drawings=False)
    first = conclusion(sheet).content[0]
    assert first == Run("One of four members differs: D–C by −1.000 kip.", "strong")
    table = next(block for block in sheet.blocks if isinstance(block, Table))
    assert table.strong_rows == (0,)
    assert table.rows[0][-1] == Run("differs")
    assert not sheet.origin.agreed
    step = next(block for block in sheet.blocks if isinstance(block, Derivation) and "D–C" in block.heading.text)
    assert step.result.strong_rows == (0,)


def test_flags_stand_in_the_conclusion() -> None:
    """A pressed rod and a lifted bearing are told, strong, before the agreement."""
    paragraph = conclusion(compose(sheet_cases.roof(), drawings=False))
    strong = [piece.text for piece in paragraph.content if isinstance(piece, Run) and piece.style == "strong"]
    assert strong == [
        "Flag: stated to take tension only, but D–P is in compression.",
        "Flag: stated not to take uplift, but the bearing at B would have to pull down.",
    ]


def test_a_rounded_angle_is_told_at_the_top() -> None:
    """The conclusion opens with it, the table marks its values, the note names them."""
    sheet = compose(sheet_cases.rounded_angle(), drawings=False)
    assert words(conclusion(sheet)).startswith("Flag: angle rounded.")
    written = text(sheet)
    assert "≈ 0.7915903077" in written
    assert "Angle rounded, not exact: A–B, A–C and B–C." in " ".join(written.split())


def test_an_undecided_member_is_told_with_its_reason() -> None:
    """Nothing is printed as a value, the reason stands below the table."""
    sheet = compose(sheet_cases.indeterminate(), drawings=False)
    assert conclusion(sheet).content[0] == Run("One of two members is undecided: A–C.", "strong")
    table = next(block for block in sheet.blocks if isinstance(block, Table))
    assert table.rows[1][3:6] == (None, None, None)
    assert "statically indeterminate" in text(sheet)


def test_scope_names_everything_left_out() -> None:
    """Members checked and not checked together are all members; many are counted first and named further back."""
    check = sheet_cases.k_truss()
    written = " ".join(text(compose(check, drawings=False)).split())
    scope = written[written.index("Checked axial") : written.index("Not covered")]
    if "listed under Cross-check" in scope:
        scope += written[written.index("Members not checked") : written.index("Independence")]
    for member in check.truss.members:
        assert member.name.replace("-", "–") in scope


def test_every_number_of_the_check_is_on_the_sheet(named: tuple[str, MemberCheck]) -> None:
    """Decimals of all members, reactions and steps, in the places asked for."""
    _, check = named
    written = text(compose(check, drawings=False, places=4))
    for item in (*check.members.values(), *check.reactions.values()):
        if item.decimal is not None:
            assert f"{item.decimal:.4f}".replace("-", "−").replace("−0.0000", "0.0000") in written
    for step in check.steps:
        for force in step.results.values():
            assert f"{float(check.case.value(force)):.4f}".replace("-", "−").replace("−0.0000", "0.0000") in written


# --- where it comes from ----------------------------------------------------------------------------------


def test_the_truss_text_is_echoed_and_digested() -> None:
    """A text given is printed as it is; its digest is the file's."""
    check = sheet_cases.roof()
    stated = writes(TrussFile(check.truss, (check.case,), (), dataclasses.replace(sheet_cases.PROJECT, names={})))
    sheet = compose(check, truss_text=stated + "# as issued\n", drawings=False)
    assert sheet.origin.truss_text.endswith("# as issued\n")
    assert dict(sheet.origin.project)["calculation"] == "TLF-C-014"
    assert hashlib.sha256(sheet.origin.truss_text.encode()).hexdigest() in text(sheet)


def test_a_text_of_another_truss_is_refused() -> None:
    """A sheet never shows an input it was not derived from."""
    check = sheet_cases.roof()
    other = sheet_cases.warren()
    with pytest.raises(InputError, match="another truss"):
        compose(check, truss_text=writes(TrussFile(other.truss, (other.case,))))
    changed = LoadCase("wind up", {"D": (0, -5)})
    with pytest.raises(InputError, match="other loads"):
        compose(check, truss_text=writes(TrussFile(check.truss, (changed,))))
    with pytest.raises(InputError, match="decimal places"):
        compose(check, places=40)


# --- values -----------------------------------------------------------------------------------------------


def test_differences_without_noise() -> None:
    """Noise is told as a bound, a real difference with its sign, however small."""
    assert difference(3e-16, 6e-7, 3) == bound(6e-7)
    assert difference(2e-7, 6e-7, 3) == scientific(2e-7, 1)
    assert difference(-1.0, 6e-7, 3).text == "-1.000"  # type: ignore[union-attr]
    assert difference(-0.00002, 6e-7, 3).text == "-0.000020"  # type: ignore[union-attr]
    assert difference(float("nan"), 6e-7, 3).text == "not a number"  # type: ignore[union-attr]


def test_a_float_is_freed_of_noise_before_it_is_rounded() -> None:
    """62.5 with noise rounds as 62.5 does, half to even; minus zero is zero."""
    assert float_text(62.50000000001, 0, 1e-7) == "62"
    assert float_text(-1e-12, 3, 1e-9) == "0.000"
    assert float_text(-504.7771785, 3, 1e-7) == "-504.777"


def test_printed_digits_are_what_a_pencil_adds() -> None:
    """The rest a reader finds is calculated from the digits printed."""
    case = LoadCase("x", {})
    third = printed(Exact(rational(10**30 // 3, 10**30).terms, rounded=True), case)
    assert third.text == "0.3333333333"  # type: ignore[union-attr]
    assert pencil_sum((plus(third), plus(third), plus(third)), case) - 1 == Decimal("-1e-10")


def test_left_and_right_part() -> None:
    """A part is called by where it lies."""
    structure = structure_of(sheet_cases.k_truss().truss, LoadCase("x", {}))
    assert part(structure, ["L0", "L1", "M0"]) == "left part"
    assert part(structure, [f"U{i}" for i in range(1, 6)]) == "upper part"
