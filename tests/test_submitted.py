"""Submitted tables: what spreadsheets and other software write is read exactly, and what cannot be read is told."""

from __future__ import annotations

import hashlib
import math
from collections.abc import Mapping
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from trusscalc.errors import FileFormatError, InputError
from trusscalc.exact import Exact
from trusscalc.exacttext import parse
from trusscalc.submitted import Submitted, columns_of, read_submitted
from trusscalc.submitted.kept import kept, kept_again
from trusscalc.submitted.numbers import Amount, Printed, amount, decimal_sign, sense_of, taken_apart
from trusscalc.submitted.tables import LARGEST_FILE, MOST_ROWS
from trusscalc.truss import Truss

ROOF = Truss(
    {"L0": (0, 0), "L1": (4, 0), "L2": (8, 0), "U1": (4, 3)},
    ["L0-L1", "L1-L2", "L0-U1", "U1-L2", "L1-U1"],
    {"L0": "pin", "L2": "roller"},
)
"""Two panels, a post; the examples' forces need not be in equilibrium."""


def read(table: object, truss: Truss = ROOF, **options: Any) -> Submitted:
    """Return a table read for the roof."""
    return read_submitted(table, truss, **options)


def forces(table: object, truss: Truss = ROOF, **options: Any) -> dict[str, str]:
    """Return the forces of a table as exact text by member, with the case where there is one."""
    found = read(table, truss, **options)
    return {f"{row.case}:{row.member}" if row.case else row.member: text(row.force) for row in found.rows}


def text(value: Exact) -> str:
    """Return an exact number as text."""
    return str(value.as_fraction())


def faults(table: object, truss: Truss = ROOF, **options: Any) -> tuple[str, ...]:
    """Return the problems that a table is refused with."""
    with pytest.raises(InputError) as caught:
        read_submitted(table, truss, **options)
    return caught.value.problems


PLAIN = {"L0-L1": "8", "L0-U1": "-241/2"}


# --- files as they are saved --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "table",
    [
        "member,force\nL0-L1,8\nL0-U1,-120.5\n",
        "member;force\nL0-L1;8\nL0-U1;-120,5\n",
        "member\tforce\nL0-L1\t8\nL0-U1\t-120,5\n",
        "member\tforce\nL0-L1\t8\nL0-U1\t-120.5",
        "member   force\nL0-L1    8\nL0-U1   -120.5\n",
        "member force\nL0-L1 8\nL0-U1 -120.5\n",
        "  Member    Force\n  L0 - L1   8.\n  L0 - U1   -120.5\n",
        '"member","force"\n"L0-L1","8"\n"L0-U1","-120,5"\n',
        "member,force\r\nL0-L1,8\r\nL0-U1,-120.5\r\n",
        "member,force\rL0-L1,8\rL0-U1,-120.5\r\n",
        "member,force,,\nL0-L1,8,,\nL0-U1,-120.5,,\n,,,\n",
        "\n\nmember,force\n\nL0-L1,8\n ,\nL0-U1,-120.5\n\n",
        "sep=;\nmember;force\nL0-L1;8\nL0-U1;-120,5\n",
        "Mill roof, run 12\nNothing else changed, except the wind\n\nmember,force\nL0-L1,8\nL0-U1,-120.5\n",
        "force of bar by case\nmember;force\nL0-L1;8\nL0-U1;-120,5\n",
        "Forces of every member\nmember;force\nL0-L1;8\nL0-U1;-120,5\n",
        "member,force\n,\nL0-L1,8\nmember,force\nL0-U1,-120.5\n",
        "member,force\n# by hand\nL0-L1,8\nL0-U1,-120.5\nTotal,-112.5\nMax,8\n",
        'member,remark,force\nL0-L1,\'=1+1,8\nL0-U1,"two\nlines, and a comma",-120.5\n',
        "member,force\n,[kN]\nL0-L1,8\nL0-U1,-120.5\n",
        "member,force\n,[kN]\nL0-L1,8\nmember,force\n,[kN]\nL0-U1,-120.5\n",
        "\ufeffmember,\ufeffforce\nL0\u200b-L1,8\nL0-U1,-120.5\n",
    ],
    ids=lambda table: repr(table)[:50],
)
def test_one_table_in_every_shape(table: str) -> None:
    """Delimiters, line ends, titles, blank and trailing cells, repeated heads, comments, totals, a row of units."""
    assert forces(table) == PLAIN


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-32", "cp1252"])
@pytest.mark.parametrize("dash", ["-", "–", "—"])
def test_every_encoding(tmp_path: Path, encoding: str, dash: str) -> None:
    """With and without byte-order mark; the dash between the ends is not ASCII."""
    path = tmp_path / "results.csv"
    path.write_bytes(f"member;force\r\nL0{dash}L1;8\r\nL0{dash}U1;-120,5\r\n".encode(encoding))
    found = read(path)
    assert forces(path) == PLAIN
    assert found.source == "results.csv"
    assert found.digest == hashlib.sha256(path.read_bytes()).hexdigest()
    guessed = [
        note for note in found.notes if "read as" in note and "sign convention" not in note and "unit" not in note
    ]
    expected = encoding in ("utf-16-le", "utf-16-be") or (encoding == "cp1252" and dash != "-")
    assert bool(guessed) == expected, found.notes


def test_utf16_with_a_mark_of_the_other_order(tmp_path: Path) -> None:
    """As some spreadsheets save Unicode text: big end first."""
    path = tmp_path / "results.txt"
    path.write_bytes(b"\xfe\xff" + "member\tforce\nL0-L1\t8\nL0-U1\t-120,5\n".encode("utf-16-be"))
    assert forces(path) == PLAIN


def test_latin1_as_the_last_resort() -> None:
    """A byte that Windows-1252 has no character for."""
    found = read(b"member,force,remark\nL0-L1,8,\x81\xfcber\n")
    assert any("read as Latin-1" in note for note in found.notes)


def test_bytes_and_text_are_read_as_files_are() -> None:
    """The upload of a notebook hands over bytes, or a memory view of them."""
    table = b"member,force\nL0-L1,8\nL0-U1,-120.5\n"
    assert forces(table) == forces(memoryview(table)) == forces(table.decode()) == PLAIN
    assert read(table).digest == hashlib.sha256(table).hexdigest()


def test_the_digest_is_of_the_bytes() -> None:
    """Any change to the file shows."""
    assert read("member,force\nL0-L1,8\n").digest != read("member,force\nL0-L1,8 \n").digest


@pytest.mark.parametrize(
    ("content", "told"),
    [
        (b"PK\x03\x04 a workbook", "is no text; save the table as comma-separated values"),
        (b"member\0force", "is no text"),
        (b"", "no head is recognised.*it is empty"),
        (b"\n\n\n", "it is empty"),
        (b"a,b\n1,2\n", r"no head is recognised: a row with 'member'.*it begins with 'a \| b'"),
        (b"member,force\n", "holds a head but no values"),
        (b'member,force\n"L0-L1,8\nL0-U1,-120.5\n', "row 2: .*quotation mark"),
        (b'member,force\n"L0"-L1,8\n', "row 2: .*quotation mark"),
        (b"member,force\n" + b"x" * 2000 + b",1\n", "row 2: .*a cell of more than"),
        (b"member,force\n" + b"," * 2000 + b"1\n", "row 2: more than"),
        (b"x" * (LARGEST_FILE + 1), "too large"),
        (b"member,force\n" + b"L0-L1,8\n" * (MOST_ROWS + 1), "has more than .* rows"),
    ],
    ids=lambda value: repr(value)[:40],
)
def test_what_is_no_table_is_refused(content: bytes, told: str) -> None:
    """By size, by form, or for want of a head."""
    with pytest.raises(FileFormatError, match=told):
        read(content)


def test_a_file_that_is_not_there(tmp_path: Path) -> None:
    """Named with its path."""
    with pytest.raises(FileFormatError, match=r"no.csv: there is no such file"):
        read(tmp_path / "no.csv")
    with pytest.raises(FileFormatError, match="there is no such file"):
        read(str(tmp_path))


@given(st.binary(max_size=400))
def test_no_bytes_do_more_than_be_refused(content: bytes) -> None:
    """A submitted file is untrusted."""
    try:
        read(content)
    except InputError as refused:
        told = refused.problems
    else:
        told = ()
    assert all(len(problem) < 600 and "\n" not in problem for problem in told)


CELLS = st.text(alphabet="L0123456789UN-–.,;'\"()[] \tTCkeE+#/=\n", max_size=12)


@given(st.lists(st.lists(CELLS, max_size=5), max_size=8), st.sampled_from(",;\t "))
def test_no_cells_do_more_than_be_refused(rows: list[list[str]], delimiter: str) -> None:
    """Below a proper head anything may stand."""
    table = "\n".join(["member,force,case,T/C".replace(",", delimiter), *(delimiter.join(row) for row in rows)])
    try:
        found = read(f"{table}\n")
    except InputError:
        return
    assert all(row.member in {member.name for member in ROOF.members} for row in found.rows)


# --- heads --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "member", ["member", "Member", "BAR", "Element", "Member no.", "Bar name", "rod", "Strut", "Members"]
)
@pytest.mark.parametrize("force", ["force", "Axial", "N", "Axial force", "Normal force", "Member force", "Forces"])
def test_plain_heads_are_recognised(member: str, force: str) -> None:
    """The words of the trade in several spellings."""
    assert forces(f"{member};remark;{force}\nL0-L1;a;8\nL0-U1;b;-120,5\n") == PLAIN


@pytest.mark.parametrize(
    ("start", "end"),
    [("Start", "End"), ("start joint", "end joint"), ("From", "To"), ("Joint 1", "Joint 2"), ("Node i", "Node j")],
)
def test_two_columns_of_ends(start: str, end: str) -> None:
    """In either order of the ends, beside a number that is only theirs."""
    table = f"Member,{start},{end},Force\n1,L0,L1,8\n2,U1,L0,-120.5\n"
    assert forces(table) == PLAIN
    assert [row.theirs for row in read(table).rows] == ["1", "2"]
    assert forces(f"{start},{end},Force\nL0,L1,8\nu1,l0,-120.5\n") == PLAIN


def test_ends_and_a_name_that_contradict_each_other() -> None:
    """One of them is a slip."""
    (told,) = faults("member,start,end,force\nL0-L1,L0,U1,8\n")
    assert "row 2, column 'member': 'L0-L1' is L0-L1, but the joints are those of L0-U1" in told


@pytest.mark.parametrize(
    ("head", "factor"),
    [
        ("Axial [kip]", "4.4482216152605"),
        ("Axial (kip)", "4.4482216152605"),
        ("N, kN", "1"),
        ("N/kN", "1"),
        ("Force in N", "1/1000"),
        ("Force kN", "1"),
        ("N [N]", "1/1000"),
        ("Force [lb]", "0.0044482216152605"),
        ("Force [k]", "4.4482216152605"),
        ("Force [t]", "9.80665"),
        ("Force (kgf)", "0.00980665"),
        ("Force [daN]", "0.01"),
        ("Force [MN]", "1000"),
    ],
)
def test_units_in_the_head_are_converted_exactly(head: str, factor: str) -> None:
    """With the rounding of the digits."""
    (row,) = read(f"member;{head}\nL0-L1;8,0\n").rows
    assert row.force == parse(f"8*({factor})")
    assert row.digits == parse(f"({factor})/20")


def test_the_truss_in_kip() -> None:
    """Theirs in kN, the pound's definition between them (1 kip = 4.4482216152605 kN)."""
    truss = Truss(
        {"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"}, force="kip"
    )
    (row,) = read("member,force [kN]\nA-B,44.482216152605\n", truss).rows
    assert row.force == parse("10")


@pytest.mark.parametrize(
    ("table", "unit", "note"),
    [
        ("member,force\nL0-L1,8\n", "kN", "states no unit of force: read in kN, as the truss"),
        ("All forces are in kip\nmember,force\nL0-L1,8\n", "kip", "row 1 is a title"),
        ("Units: kip, ft\nmember,force\nL0-L1,8\n", "kip", "row 1 is a title"),
        ("member,force\nL0-L1,8 kip\n", "kip", ""),
        ("member,force\n,kip\nL0-L1,8\n", "kip", "row 2 states units and is no row"),
        ("member,force [kip]\nL0-L1,8\n", "kip", ""),
    ],
)
def test_where_the_unit_stands(table: str, unit: str, note: str) -> None:
    """In the head, a row of its own, a title, beside the number, or nowhere."""
    found = read(table)
    assert found.unit == unit
    assert found.rows[0].force == parse("8*4.4482216152605" if unit == "kip" else "8")
    assert any(note in each for each in found.notes)


def test_the_user_s_unit_overrules_and_that_is_noted() -> None:
    """Never silently."""
    found = read("member,force [kN]\nL0-L1,8\n", unit="N")
    assert found.rows[0].force == parse("8/1000")
    assert "row 2 states another unit; read in N as the user states" in found.notes


def test_wrong_units() -> None:
    """Lengths and strange words are no units of force."""
    assert "'mm' is no unit for the force" in faults("member,force [mm]\nL0-L1,8\n")[0]
    assert "'foo' is no unit for the force; known are N, kN" in faults("member,force [foo]\nL0-L1,8\n")[0]
    assert "the number is in kip, the column in kN" in faults("member,force [kN]\nL0-L1,8 kip\n")[0]


def test_columns_named_by_the_user() -> None:
    """As a mapping or as on the command line; by head or by place; the others are still recognised."""
    table = "Stab;Kraft [kip];Fall\nL0-L1;8;a\nL0-U1;-1;a\n"
    expected = {"a:L0-L1": "8896443230521/250000000000", "a:L0-U1": "-8896443230521/2000000000000"}
    assert forces(table, columns={"member": "Stab", "force": "Kraft [kip]", "case": "Fall"}) == expected
    assert forces(table, columns="member=stab, force=Kraft, case=3") == expected
    assert forces("L0-L1,8\nL0-U1,-120.5\n", columns="member=1,force=2") == PLAIN
    two = "member,force start,force end\nL0-L1,8,9\n"
    assert forces(two, columns={"force": "force end"}) == {"L0-L1": "9"}


@pytest.mark.parametrize(
    ("columns", "told"),
    [
        ("member", "columns: 'member' is not role=column"),
        ("bar=Stab", "columns: 'bar' is not what a column can be; known are member"),
        ("member=Stap,force=Kraft", "no head has the columns named (member=Stap, force=Kraft)"),
        ("member=Stab,force=Kraft,case=Fal", "there is no column 'Fal'; did you mean Fall?"),
    ],
)
def test_columns_that_are_not_there(columns: str, told: str) -> None:
    """Named, with the nearest."""
    assert told in faults("Stab;Kraft;Fall\nL0-L1;8;a\n", columns=columns)[0]


def test_columns_of() -> None:
    """Text and mapping give the same."""
    assert columns_of("member=Bar,force=Axial") == columns_of({"member": "Bar", "force": "Axial"})
    assert columns_of(None) == columns_of("") == {}


def test_columns_that_are_not_read_are_noted() -> None:
    """Nothing is skipped silently."""
    found = read("member,area,force,,remark\nL0-L1,0.01,8,,new\n")
    assert "columns not read: 'area', 'remark'" in found.notes
    assert not any("columns not read" in note for note in read("member,case,force,T/C\nL0-L1,a,8,T\n").notes)


def test_two_columns_of_one_kind_are_not_guessed() -> None:
    """The user has to say which."""
    (told,) = faults("member,axial,force\nL0-L1,8,9\n")
    assert "row 1: 'axial' and 'force' may both be the force; name the column (force=...)" in told


# --- cases --------------------------------------------------------------------------------------------------


def test_several_cases() -> None:
    """In a column, or in a column for each."""
    expected = {"dead:L0-L1": "8", "dead:L0-U1": "-10", "live:L0-L1": "3", "live:L0-U1": "-4"}
    tall = "member,load case,force\nL0-L1,dead,8\nL0-U1,dead,-10\nL0-L1,live,3\nL0-U1,live,-4\n"
    wide = "Member,dead [kN],live [kN]\nL0-L1,8,3\nL0-U1,-10,-4\n"
    assert forces(tall) == forces(wide) == expected
    assert read(tall).cases == read(wide).cases == ("dead", "live")
    numbered = "member,1,2\nL0-L1,8,3\n"
    assert read(numbered).cases == ("1", "2")


def test_one_case_of_several() -> None:
    """The others are left out and noted; a table without cases takes the name."""
    tall = "member,case,force\nL0-L1,dead,8\nL0-L1,live,3\n"
    found = read(tall, case="Live")
    assert [(row.case, text(row.force)) for row in found.rows] == [("live", "3")]
    assert "1 values of other cases than 'Live' left out" in found.notes
    assert read("member,force\nL0-L1,8\n", case="dead").cases == ("dead",)
    assert "there is no case 'snow' in the table; there are dead, live" in faults(tall, case="snow")[0]


def test_a_row_without_its_case() -> None:
    """Merged cells of a spreadsheet are not filled down silently."""
    told = faults("member,case,force\nL0-L1,dead,8\nL0-U1,,-10\n")
    assert told == ("the table handed over: row 3, column 'case': the case is missing; state it in every row",)


# --- numbers ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("printed", "value", "half"),
    [
        ("482", "482", "1/2"),
        ("482.", "482", "1/2"),
        ("482.0", "482", "1/20"),
        ("-482.50", "-482.5", "1/200"),
        ("−482.5", "-482.5", "1/20"),
        ("–482.5", "-482.5", "1/20"),
        ("+482.5", "482.5", "1/20"),
        ("- 482.5", "-482.5", "1/20"),
        ("(482.5)", "-482.5", "1/20"),
        (".5", "1/2", "1/20"),
        ("1,234.5", "1234.5", "1/20"),
        ("1,234,567", "1234567", "1/2"),
        ("1.234.567,8", "1234567.8", "1/20"),
        ("1 234,5", "1234.5", "1/20"),
        ("1\u202f234,5", "1234.5", "1/20"),
        ("1\u2009234.5", "1234.5", "1/20"),
        ("1\u00a0234.5", "1234.5", "1/20"),
        ("1'234.5", "1234.5", "1/20"),
        ("1’234.5", "1234.5", "1/20"),
        ("4.82E+02", "482", "1/2"),
        ("4,82e2", "482", "1/2"),
        ("-4.8200D-03", "-0.00482", "5/10^8"),
        ("1E3", "1000", "500"),
        ("1,234E+03", "1234", "1/2"),
        ("0,125", "1/8", "1/2000"),
        ("482.5 kN", "482.5", "1/20"),
        ("482.5kN", "482.5", "1/20"),
        ("-0.0", "0", "1/20"),
    ],
)
def test_printed_numbers(printed: str, value: str, half: str) -> None:
    """Each keeps half a unit of its last printed digit."""
    (row,) = read(f"member;force\nL0-L1;{printed}\n").rows
    assert row.force == parse(value)
    assert row.digits == parse(half)


@pytest.mark.parametrize(
    "printed",
    [
        "n/a",
        "#REF!",
        "--",
        "1.2.3",
        "1,23.4",
        "12,34,567",
        "1e",
        "nan",
        "inf",
        "0x10",
        "1_000",
        "½",
        "٣",
        "(5",
        "5)",
        "(-5)",
        *("5 6", "1'2345", "8 m", "8 kN kN", "T 5 C", "1e99", "1" * 61, "=1+1", "5%"),
    ],
)
def test_what_is_no_number_is_told_with_row_and_column(printed: str) -> None:
    """And what was expected."""
    told = faults(f"member;force\nL0-L1;{printed}\n")
    assert len(told) == 1
    assert "row 2, column 'force': " in told[0]
    assert "a number such as -482.5 is expected" in told[0]


def test_the_decimal_sign_is_the_table_s() -> None:
    """One number that leaves no choice decides for all."""
    assert forces("member;force\nL0-L1;1,234\nL0-U1;0,5\n") == {"L0-L1": "617/500", "L0-U1": "1/2"}
    assert forces("member;force\nL0-L1;1,234\nL0-U1;0.5\n") == {"L0-L1": "1234", "L0-U1": "1/2"}
    assert forces("member;force\nL0-L1;1.234\nL0-U1;0,5\n") == {"L0-L1": "1234", "L0-U1": "1/2"}
    assert forces("member;force\nL0-L1;1,234\nL0-U1;482\n", decimal=",") == {"L0-L1": "617/500", "L0-U1": "482"}


def test_a_decimal_sign_that_nothing_tells() -> None:
    """A comma that may be either is refused; a point is taken as a decimal point, and that is noted."""
    assert "row 2: '1,234' may be 1.234 or 1234, and no other number tells" in faults("member;force\nL0-L1;1,234\n")[0]
    found = read("member;force\nL0-L1;1.234\nL0-U1;482\n")
    assert text(found.rows[0].force) == "617/500"
    assert any("no number tells whether a point groups thousands (1.234 in row 2)" in note for note in found.notes)


def test_two_decimal_signs() -> None:
    """Told with both places."""
    told = faults("member;force\nL0-L1;1.5\nL0-U1;2,5\n")
    assert "'1.5' in row 2 and '2,5' in row 3 use different decimal signs" in told[0]


def test_an_unquoted_decimal_comma_between_commas() -> None:
    """Would shift the cells."""
    told = faults("member,force\nL0-L1,8,5\n")
    assert "row 2: has 3 cells under a head of 2, the surplus '5'; does a comma inside a number part cells?" in told[0]


def test_numbers_in_parentheses_are_noted() -> None:
    """An accountant's minus."""
    assert "row 2: a number in parentheses is read as negative" in read("member,force\nL0-L1,(8)\n").notes


@given(st.integers(0, 10**12), st.integers(0, 6), st.sampled_from([".", ","]), st.booleans())
def test_grouped_digits_come_back(digits: int, places: int, sign: str, negative: bool) -> None:
    """A number written with groups and a decimal sign is read as it was."""
    value = Fraction(digits, 10**places)
    grouper = "." if sign == "," else ","
    whole = f"{digits // 10**places:,}".replace(",", grouper)
    rest = f"{sign}{digits % 10**places:0{places}}" if places else ""
    printed = taken_apart(f"{'-' if negative else ''}{whole}{rest}")
    assert isinstance(printed, Printed)
    assert amount(printed, "," if sign == "," else ".") == Amount(
        -value if negative else value, Fraction(1, 2 * 10**places)
    )


def test_decimal_sign_without_numbers() -> None:
    """Nothing to decide."""
    assert decimal_sign([]) == (".", "", "")


# --- tension and compression --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("table", "convention"),
    [
        ("member,force\nL0-L1,8 T\nL0-U1,120.5 C\n", "letters T and C"),
        ("member,force\nL0-L1,T 8\nL0-U1,(C) 120.5\n", "letters T and C"),
        ("member,force,T/C\nL0-L1,8,T\nL0-U1,120.5,C\n", "letters T and C"),
        ("member,sense,force\nL0-L1,Tension,8\nL0-U1,compression,120.5\n", "letters T and C"),
        ("member,force,T/C\nL0-L1,8,T\nL0-U1,-120.5,C\n", "tension positive"),
        ("member,force,T/C\nL0-L1,-8,T\nL0-U1,120.5,C\n", "compression positive"),
        ("member,force (compression positive)\nL0-L1,-8\nL0-U1,120.5\n", "compression positive"),
        ("member,force (C+)\nL0-L1,-8\nL0-U1,120.5\n", "compression positive"),
        ("Tension is negative\nmember,force\nL0-L1,-8\nL0-U1,120.5\n", "compression positive"),
        ("member,force (+ tension)\nL0-L1,8\nL0-U1,-120.5\n", "tension positive"),
        ("member,force\nL0-L1,8\nL0-U1,-120.5\n", "tension positive"),
    ],
)
def test_signs_and_letters(table: str, convention: str) -> None:
    """Whatever says so, tension is positive in the end, and the notes say why."""
    found = read(table)
    assert {row.member: text(row.force) for row in found.rows} == PLAIN
    assert found.convention == convention
    assert any(word in note for note in found.notes for word in ("tension positive", "compression positive", "letters"))


def test_the_convention_the_user_states() -> None:
    """Even against the table's own words, which are quoted."""
    assert forces("member,force\nL0-L1,-8\n", convention="compression positive") == {"L0-L1": "8"}
    found = read("member,force (tension positive)\nL0-L1,-8\n", convention="compression positive")
    assert "compression positive, as the user states; the table's own words say tension positive" in found.notes
    assert read("member,force\nL0-L1,-8\n", convention="detect").convention == "detect"
    assert "convention: 'compresion' is not known" in faults("member,force\nL0-L1,8\n", convention="compresion")[0]


def test_letters_that_do_not_fit() -> None:
    """Against signs, against each other, against the statement, or missing."""
    told = faults("member,force,T/C\nL0-L1,8,T\nL1-L2,9,T\nL0-U1,-3,T\n")
    assert [problem.split(": ", 1)[1] for problem in told] == [
        "row 4, column 'force': sign and letter T contradict each other, seen with the other rows"
    ]
    assert "says T, but beside the number stands C" in faults("member,force,T/C\nL0-L1,8 C,T\n")[0]
    assert "'X' is neither T nor C" in faults("member,force,T/C\nL0-L1,8,X\n")[0]
    assert "neither a sign nor T or C" in faults("member,force,T/C\nL0-L1,8,T\nL0-U1,3,\n")[0]
    signed = "member,force,T/C\nL0-L1,8,T\nL0-U1,-3,C\n"
    assert (
        "show tension positive, but compression positive is stated"
        in faults(signed, convention="compression positive")[0]
    )


def test_zero_needs_no_letter() -> None:
    """And any will do."""
    assert forces("member,force,T/C\nL0-L1,8,T\nL0-U1,0.0,-\nL1-U1,0,C\n") == {"L0-L1": "8", "L0-U1": "0", "L1-U1": "0"}


def test_senses_of_cells() -> None:
    """Words and letters."""
    assert [sense_of(word) for word in ("T", "(c)", "Comp.", "", "0", "x")] == ["T", "C", "C", "", "", None]


# --- names --------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "name",
    [
        "L0-U1",
        "U1-L0",
        "l0-u1",
        "L0–U1",
        "L0 − U1",
        "L0 - U1",
        "L0 to U1",
        "L0 U1",
        "L0/U1",
        "L0U1",
        "u1l0",
        "L0->U1",
        "L0 TO u1",
    ],
)
def test_spellings_of_a_member(name: str) -> None:
    """Either order of the ends, any dash, capitals or not."""
    assert forces(f"member;force\n{name};8\n") == {"L0-U1": "8"}


def test_capitals_that_matter() -> None:
    """Where two joints differ only in them, only the exact spelling will do."""
    truss = Truss({"A": (0, 0), "B": (4, 0), "a": (2, 1)}, ["A-B", "A-a", "B-a"], {"A": "pin", "B": "roller"})
    assert forces("member,force\nA-a,1\nB-a,2\nA-b,3\nb-a,2\n", truss) == {"A-a": "1", "B-a": "2", "A-B": "3"}
    four = Truss(
        {"A": (0, 0), "B": (4, 0), "a": (2, 1), "b": (2, 2)},
        ["A-B", "A-a", "B-a", "a-b", "B-b"],
        {"A": "pin", "B": "roller"},
    )
    assert forces("member,force\nA-B,1\na-b,2\n", four) == {"A-B": "1", "a-b": "2"}
    assert "there is no member 'A to Ä'" in faults("member,force\nA to Ä,1\n", four)[0]


def test_names_with_primes_and_blanks() -> None:
    """Joint names may hold both."""
    truss = Truss(
        {"L3'": (0, 0), "heel two": (4, 0), "C": (2, 1)},
        ["L3'-heel two", "L3'-C", "heel two-C"],
        {"L3'": "pin", "heel two": "roller"},
    )
    assert forces("member,force\nheel two L3′,1\nC - L3’,2\nheel  two to C,3\n", truss) == {
        "L3'-heel two": "1",
        "L3'-C": "2",
        "heel two-C": "3",
    }


def test_a_number_is_not_run_together_ends() -> None:
    """Member 12 of theirs is not our member 1-2."""
    truss = Truss({"1": (0, 0), "2": (4, 0), "3": (2, 1)}, ["1-2", "1-3", "2-3"], {"1": "pin", "2": "roller"})
    assert "there is no member '12'" in faults("member,force\n12,8\n", truss)[0]
    assert forces("member,force\n1-2,8\n1 3,9\n", truss) == {"1-2": "8", "1-3": "9"}


NAMES = {"L0": "17", "L1": "18", "L2": "19", "U1": "27", "L1-U1": "E9"}


@pytest.mark.parametrize(
    "names",
    [
        NAMES,
        "ours,theirs\n" + "\n".join(f"{ours},{theirs}" for ours, theirs in NAMES.items()),
        "number;joint\n" + "\n".join(f"{theirs};{ours}" for ours, theirs in NAMES.items()),
        "\n".join(f"{theirs}\t{ours}" for ours, theirs in NAMES.items()),
        "\n".join(f"{ours}   {theirs}" for ours, theirs in NAMES.items()),
    ],
    ids=["mapping", "ours first", "theirs first", "no head", "blanks"],
)
def test_name_maps(names: Mapping[str, str] | str) -> None:
    """From the truss file, or a table of two columns in either order."""
    table = "member,force\n17-18,1\n27–19,2\ne9,3\n"
    assert forces(table, names=names) == {"L0-L1": "1", "U1-L2": "2", "L1-U1": "3"}
    assert forces("from,to,force\n17,18,1\n", names=names) == {"L0-L1": "1"}


def test_a_name_map_in_a_file(tmp_path: Path) -> None:
    """Like every other table."""
    path = tmp_path / "names.csv"
    path.write_text("ours,theirs\nL0,17\nL1,18\n", encoding="utf-8")
    assert forces("member,force\n17-18,1\n", names=path) == {"L0-L1": "1"}
    assert forces("member,force\n17-18,1\n", names=str(path)) == {"L0-L1": "1"}


def test_their_numbers_go_before_ours() -> None:
    """Their joint 1 is our joint 2: our own 1 must not be taken for it."""
    truss = Truss({"1": (0, 0), "2": (4, 0), "3": (2, 1)}, ["1-2", "1-3", "2-3"], {"1": "pin", "2": "roller"})
    assert forces("member,force\n1-3,8\n", truss, names={"2": "1", "1": "2"}) == {"2-3": "8"}
    assert "no member '1-3'" in faults("member,force\n1-3,8\n", truss, names={"1": "9"})[0]


@pytest.mark.parametrize(
    ("names", "told"),
    [
        ({"L9": "17"}, "names: 'L9' is no joint or member of the truss; did you mean L"),
        ({"L0": "17", "L1": "17"}, "names: '17' stands for L0 and for L1; keep one"),
        ("ours,theirs\nL0,17\nL9,18\n", "row 3: 'L9' is no joint or member of the truss"),
        ("ours,theirs\nL0,17\nL0,18\n", "row 3: L0 is given two names, '17' and '18'"),
        ("a,b,c\n1,2,3\n", "two columns are needed"),
    ],
)
def test_wrong_name_maps(names: Any, told: str) -> None:
    """All faults at once."""
    assert told in "\n".join(faults("member,force\n17-18,1\n", names=names))


def test_a_name_map_that_the_table_does_not_use() -> None:
    """Names on drawings, but the table has ours: only where nothing of it is theirs, and noted."""
    found = read("member,force\nL0-L1,8\nL0-U1,-120.5\n", names=NAMES)
    assert {row.member: text(row.force) for row in found.rows} == PLAIN
    assert "the table uses our own names: the name map was not needed" in found.notes
    assert "there is no member 'L0-L1'" in faults("member,force\n17-18,8\nL0-L1,3\n", names=NAMES)[0]


def test_unknown_names_are_told_with_the_nearest() -> None:
    """Row, column, name, and what to do."""
    told = faults("member,force\nL0-L9,8\nXYZ,9\n3-Apr,9\n,9\n")
    assert [problem.removeprefix("the table handed over: ") for problem in told] == [
        "row 2, column 'member': there is no member 'L0-L9'; did you mean L0-L1?",
        f"row 3, column 'member': there is no member 'XYZ'; {OTHERWISE}",
        "row 4, column 'member': there is no member '3-Apr'; a spreadsheet may have turned the name into a date",
        "row 5, column 'member': the name of the member is missing",
    ]


OTHERWISE = "give a name map (names), or state the name as another structure's (others)"


def test_members_of_other_structures() -> None:
    """Left out only by name, and noted."""
    found = read("member,force\nL0-L1,8\nbrace 1,3\nBrace 2,4\n", others=["brace 1", "brace 2"])
    assert [row.member for row in found.rows] == ["L0-L1"]
    assert "rows 3, 4 left out: stated to belong to another structure" in found.notes


def test_a_member_that_is_called_total() -> None:
    """Is no row of totals."""
    truss = Truss(
        {"Total": (0, 0), "B": (4, 0), "C": (2, 1)}, ["Total-B", "Total-C", "B-C"], {"Total": "pin", "B": "roller"}
    )
    assert forces("member,force\nTotal-B,8\n", truss) == {"Total-B": "8"}


def test_problems_are_collected_and_capped() -> None:
    """Up to a hundred, then counted."""
    told = faults("member,force\n" + "".join(f"X{i},?\n" for i in range(80)))
    assert len(told) == 101
    assert told[-1].endswith("and 60 more problems")


def test_a_hostile_name_stays_on_its_line() -> None:
    """Control characters are escaped, long names cut."""
    told = faults(f'member,force\n"L0\x1b[31m\nX{"y" * 300}",8\n')
    assert len(told) == 1
    assert "\x1b" not in told[0]
    assert len(told[0]) < 400


# --- rows stated twice --------------------------------------------------------------------------------------


def test_a_row_stated_twice() -> None:
    """Alike is noted, different refused; cases keep rows apart."""
    found = read("member,force\nL0-L1,8\nL1-L0,8.0\n")
    assert len(found.rows) == 1
    assert "row 3 states a value again, the same; taken once" in found.notes
    told = faults("member,force\nL0-L1,8\nL0-U1,3\nL1-L0,-8\n")
    assert [problem.split(": ", 1)[1] for problem in told] == [
        "row 4, column 'force': L0-L1 is stated again, with another value than in row 2; keep one"
    ]
    assert len(read("member,case,force\nL0-L1,a,8\nL0-L1,b,9\n").rows) == 2


# --- reactions and displacements ----------------------------------------------------------------------------


def test_reactions_among_the_members() -> None:
    """Under their names."""
    found = read("member or reaction,force\nL0-L1,8\nL0.x,0\nl0.y,60\nL2.y,60.0\n")
    assert [(r.name, r.joint, r.axis, text(r.force)) for r in found.reactions] == [
        ("L0.x", "L0", "x", "0"),
        ("L0.y", "L0", "y", "60"),
        ("L2.y", "L2", "y", "60"),
    ]
    assert "a reaction has no T or C" in faults("member,force\nL0.y,60 C\n")[0]
    assert "there is no member 'L0.z'" in faults("member,force\nL0.z,60\n")[0]


def test_reactions_and_displacements_below_a_head_of_their_own() -> None:
    """Their units too; empty cells are noted."""
    found = read(
        "member,force [kN]\nL0-L1,8\n\nReactions\njoint,Rx [N],Ry [N]\nL0,0,60000\nL2,,60000\n\nDisplacements\n"
        "Node,ux [mm],uy [mm]\nL1,1.5,-12\nU1,0.5,-11\n"
    )
    assert {r.name: text(r.force) for r in found.reactions} == {"L0.x": "0", "L0.y": "60", "L2.y": "60"}
    assert {(d.joint, d.axis): text(d.amount) for d in found.displacements} == {
        ("L1", "x"): "3/2000",
        ("L1", "y"): "-3/250",
        ("U1", "x"): "1/2000",
        ("U1", "y"): "-11/1000",
    }
    assert found.displacements[0].digits == parse("1/20000")
    assert "row 7 gives no reaction x (empty cell)" in found.notes
    assert "row 4 is a title and no row: 'Reactions'" in found.notes
    assert "there is no joint 'L9'; did you mean L" in faults("joint,Rx\nL9,1\n")[0]


def test_signs_of_reactions_do_not_turn_with_the_convention() -> None:
    """A reaction is a vector."""
    found = read("member,force\nL0-L1,-8\nL0.y,60\n", convention="compression positive")
    assert (text(found.rows[0].force), text(found.reactions[0].force)) == ("8", "60")


# --- tables in memory ---------------------------------------------------------------------------------------


class Frame:
    """A data frame as far as it is needed: columns, rows by to_dict, and an index with names."""

    def __init__(self, columns: dict[str, list[Any]], index: list[str | None] | None = None) -> None:
        self.columns = list(columns)
        self.data = columns
        self.index = type("Index", (), {"names": index or [None]})()

    def to_dict(self, orient: str) -> list[dict[str, Any]]:
        """Return a mapping for each row."""
        assert orient == "records"
        return [dict(zip(self.data, row, strict=True)) for row in zip(*self.data.values(), strict=True)]

    def reset_index(self) -> Frame:
        """Return the frame with its index as columns."""
        return Frame({"member": ["L0-L1", "L0-U1"], **self.data})


class Rows:
    """Another kind of frame: rows as tuples, and a to_dict of another meaning."""

    columns = ("Bar", "N [kN]")

    def rows(self) -> list[tuple[str, float]]:
        """Return the rows."""
        return [("L0-L1", 8.0), ("L0-U1", -120.5)]

    def to_dict(self, *, as_series: bool = True) -> dict[str, Any]:
        """Return columns."""
        return {"as_series": as_series}


@pytest.mark.parametrize(
    "table",
    [
        [{"member": "L0-L1", "force": 8}, {"member": "L0-U1", "force": -120.5}],
        [{"member": "L0-L1", "force": "8"}, {"force": "-120,5", "member": "L0-U1"}],
        {"member": ["L0-L1", "L0-U1"], "force": [8.0, -120.5]},
        {"member": ("L0-L1", "L0-U1"), "force": np.array([8.0, -120.5])},
        {"Bar": ["L0-L1", "L0-U1"], "Axial (N)": np.array([8000.0, -120500.0], dtype=np.float32)},
        {"L0-L1": 8, "L0-U1": -120.5},
        {"L0-L1": "8", "L0-U1": "120.5 C"},
        {"L0-L1": parse("8"), "L0-U1": Fraction(-241, 2)},
        Frame({"member": ["L0-L1", "L0-U1"], "force": [8.0, -120.5]}),
        Frame({"force": [8.0, -120.5]}, index=["member"]),
        Rows(),
        iter([{"start": "L0", "end": "L1", "N": 8}, {"start": "L0", "end": "U1", "N": -120.5}]),
    ],
    ids=lambda table: type(table).__name__,
)
def test_tables_of_every_kind(table: object) -> None:
    """Mappings, sequences of mappings, frames by what they can do."""
    if isinstance(table, dict) and table.get("L0-U1") == "120.5 C":
        table["L0-L1"] = "8 T"
    assert forces(table) == PLAIN


def test_numbers_handed_over_are_rounded_to_the_column_s_finest_decimals() -> None:
    """12.0 beside 3.25 was not rounded to tenths; an exact number was not rounded at all."""
    found = read({"member": ["L0-L1", "L0-U1", "L1-U1"], "force": [12.0, 3.25, 7]})
    assert {text(row.digits) for row in found.rows} == {"1/200"}
    assert {text(row.digits) for row in read({"L0-L1": 12, "L0-U1": 7}).rows} == {"1/2"}
    assert {text(row.digits) for row in read({"L0-L1": parse("sqrt(2)"), "L0-U1": Fraction(1, 3)}).rows} == {"0"}
    assert abs(read({"L0-L1": parse("sqrt(2)")}).rows[0].force - parse("sqrt(2)")) < parse("1/10^24")


def test_numbered_members_of_a_frame() -> None:
    """A column of numbers with a gap turns them into floats."""
    assert forces([{"member": 7.0, "force": 8.0}], names={"L0-L1": "7"}) == {"L0-L1": "8"}


@pytest.mark.parametrize(
    ("table", "told"),
    [
        ([{"member": "L0-L1", "force": math.nan}], "row 1, column 'force': the force is missing"),
        ([{"member": "L0-L1", "force": None}], "row 1, column 'force': the force is missing"),
        ([{"member": "L0-L1", "force": True}], "row 1, column 'force': 'True' is no number"),
        ([{"member": "L0-L1", "force": math.inf}], "'inf' is no number"),
        ([{"member": "L0-L1", "force": 8}, {"member": "L9", "force": 8}], "row 2, column 'member': there is no member"),
        ({"member": ["L0-L1"], "force": [1, 2]}, "columns of different lengths: 1, 2"),
        (42, "is no table"),
        ([1, 2], "is no table"),
        (type("Frame", (), {"columns": ["member", "force"]})(), "has columns, but neither rows nor to_dict"),
        ([], "no head is recognised"),
    ],
    ids=lambda value: value if isinstance(value, str) else type(value).__name__,
)
def test_tables_that_cannot_be_read(table: object, told: str) -> None:
    """Rows are counted from 1."""
    assert told in "\n".join(faults(table))


def test_the_digest_of_a_table_in_memory() -> None:
    """Stable, and of its content."""
    one, two = ({"L0-L1": force} for force in (8, 9))
    assert read(one).digest == read(dict(one)).digest != read(two).digest


# --- kept ---------------------------------------------------------------------------------------------------

KEPT = {
    "plain": ("text", b"member,force\nL0-L1,1.5\n"),
    "spreadsheet": ("text", "Stab;N [kN]\r\nL0–L1;-1.234,50\r\n".encode()),
    "mark": ("base64", b"\xef\xbb\xbfmember,force\nL0-L1,1.5\n"),
    "two bytes": ("base64", "member,force\nL0-L1,1.5\n".encode("utf-16")),
    "another page of signs": ("base64", "Stab;Kraft\nL0–L1;1,5\n".encode("cp1252")),
}


@pytest.mark.parametrize("name", KEPT)
def test_a_kept_file_is_read_the_same_again(name: str) -> None:
    """Byte for byte: digest, rows, notes, and the text as plain text where it is plain."""
    kind, content = KEPT[name]
    options = {"columns": {"member": 1, "force": 2}, "convention": "tension positive", "names": {"U1": "7"}}
    table = read(content, **options)
    written = kept(table.table)
    assert written[0] == kind
    again = read(kept_again(*written, table.source), **table.reading.options)
    assert again == table


@pytest.mark.parametrize(
    "given",
    [
        {"L0-L1": "1.5", "L1-L2": "(2.50)"},
        [{"member": 7.0, "force": -1e-20}, {"member": "L1-L2", "force": 3}],
        {"member": ["L0-L1"], "force": [Fraction(1, 3)]},
    ],
    ids=["texts", "numbers", "a fraction"],
)
def test_a_kept_table_in_memory_is_read_the_same_again(given: object) -> None:
    """Every cell with its digits."""
    table = read(given, names={"L0-L1": "7"})
    kind, content = kept(table.table)
    assert kind == "cells"
    assert read(kept_again(kind, content, table.source), **table.reading.options) == table


@pytest.mark.parametrize(
    ("kind", "content"),
    [
        ("cells", "["),
        ("cells", "7"),
        ("cells", "[7]"),
        ("cells", '[["0", ["member", "force"]]]'),
        ("cells", '[[0, [["1"]]]]'),
        ("cells", '[[0, [["1/0", "1"]]]]'),
        ("cells", f'[[0, [["{"1" * 4000}", "1"]]]]'),
        ("cells", "[" * 100_000),
        ("base64", "!"),
        ("base64", "é"),
        ("pickle", "x"),
    ],
    ids=lambda text: text[:20],
)
def test_what_was_never_kept_is_refused(kind: str, content: str) -> None:
    """A record is untrusted."""
    with pytest.raises(FileFormatError):
        kept_again(kind, content, "a.csv")


def test_numbers_as_they_stand_in_the_table() -> None:
    """Digits, signs, letters and units; of numbers in memory the digits of their column."""
    table = read('member,force [kip]\nL0-L1,"1,234.50 (C)"\nL1-L2,(2.50)\nL0-U1,-1.5e+03\nU1-L2,3.0 kips\n')
    assert [row.printed for row in table.rows] == ["1,234.50 C", "(2.50)", "-1.5e+3", "3.0 kips"]
    table = read({"member": ["L0-L1", "L1-L2", "L0-U1"], "force": [-1.5, 3, Fraction(1, 3)]})
    assert [row.printed for row in table.rows] == ["-1.5", "3.0", "1/3"]


def test_numbers_rounded_to_significant_figures() -> None:
    """Zeros beyond the figures that any number has say nothing: 19420 stands for 19415 to 19425."""
    rows = read("member,force\nL0-L1,19420.0\nL1-L2,-1423.0\nU1-L1,54.87\nL0-U1,3.21\nU1-L2,0\n").rows
    assert [row.digits for row in rows] == [parse(half) for half in ("5", "1/2", "1/200", "1/200", "1/200")]
    submitted = read("member,force\nL0-L1,19420.0\nL1-L2,-1423.0\n")
    assert (
        "no force has more than 4 significant figures: 2 larger numbers count as rounded to as many" in submitted.notes
    )


def test_round_numbers_are_taken_as_printed() -> None:
    """A few zeros are chance, and nobody rounds results to one figure."""
    rows = read("member,force\nL0-L1,300\nL1-L2,-1000\nU1-L1,40\n").rows
    assert [row.digits for row in rows] == [parse("1/2")] * 3
