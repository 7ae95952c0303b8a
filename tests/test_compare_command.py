"""The command ``compare``: exit codes, JSON to the letter, every option, nothing written when something is wrong."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path
from typing import Any

import pytest

from trusscalc import recheck, stiffness
from trusscalc.__main__ import main

FILE = """\
format = 1
title = "Wharf crane"
[joints]
A = [0, 0]
B = [8, 0]
C = [4, 3]
[members]
rafters = ["A-C", "C-B"]
tie = ["A-B"]
[supports]
A = "pin"
B = "roller"
[cases.snow]
C = [0, -12]
[cases.wind]
C = [3, 0]
[combinations.both]
snow = "1.2"
wind = "0.5"
"""
PLAIN = "member,force\nA-B,8.0\nA-C,-10.0\nC-B,-10.0\n"
"""Of snow: 12 down at the apex of a 3-4-5 roof."""
LOST = "member,force\nA-B,0\nA-C,0\nC-B,0\n"
RISEN = "member,force\nA-B,-8.0\nA-C,10.0\nC-B,10.0\n"
NUMBERED = FILE + '[project.names]\nA = "1"\nB = "2"\nC = "3"\n'


class Ran:
    """What one run of the command left behind."""

    def __init__(self, code: int, out: str, err: str, folder: Path) -> None:
        self.code, self.out, self.err, self.folder = code, out, err, folder

    @property
    def data(self) -> dict[str, Any]:
        """The JSON printed."""
        return json.loads(self.out)

    @property
    def verdicts(self) -> dict[str, str]:
        """Member to verdict."""
        return {name: item["verdict"] for name, item in self.data["members"].items()}


@pytest.fixture
def run(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> Any:
    """Return a function that runs ``compare`` in this process on a file's and a table's text."""

    def runs(table: str | bytes | None, *options: str, truss: str = FILE, case: str = "snow") -> Ran:
        (tmp_path / "truss.toml").write_text(truss, encoding="utf-8")
        arguments = ["compare", str(tmp_path / "truss.toml")]
        if table is not None:
            path = tmp_path / "results.csv"
            path.write_bytes(table if isinstance(table, bytes) else table.encode())
            arguments.append(str(path))
        before = {path.name for path in tmp_path.iterdir()}
        code = main([*arguments, "--case", case, *options])
        out, err = capsys.readouterr()
        assert "Traceback" not in err
        assert code in (0, 1, 2)
        if code == 2:
            assert out == ""
            assert err
            assert {path.name for path in tmp_path.iterdir()} == before
        return Ran(code, out, err, tmp_path)

    return runs


def refused(ran: Ran, *needed: str) -> None:
    """Assert exit 2, nothing printed, and every needed word told."""
    assert ran.code == 2
    for word in needed:
        assert word in ran.err, ran.err


# --- what is printed --------------------------------------------------------------------------------------


def test_the_promised_json(run: Any) -> None:
    """Key for key; nothing besides where there is nothing besides to say."""
    ran = run(RISEN, "--json")
    assert ran.code == 1
    data = ran.data
    assert list(data) == ["agreed", "members", "implied_loads", "diagnosis"]
    assert data["agreed"] is False
    assert data["members"]["A-B"] == {
        "ours": {"exact": "8", "decimal": 8.0},
        "theirs": -8.0,
        "difference": -16.0,
        "verdict": "differs",
    }
    assert data["implied_loads"] == {"A": [0.0, -6.0], "B": [0.0, -6.0], "C": [0.0, 12.0]}
    first = data["diagnosis"][0]
    assert list(first) == ["explanation", "where", "text", "remainder"]
    assert first["explanation"] == "sign"
    assert first["where"] == []
    assert 0 <= first["remainder"] < 0.001


def test_agreement_is_0_and_diagnoses_nothing(run: Any) -> None:
    """In JSON and in words."""
    ran = run(PLAIN, "--json")
    assert ran.code == 0
    assert ran.data["agreed"] is True
    assert ran.data["diagnosis"] == []
    ran = run(PLAIN)
    assert ran.code == 0
    assert "3 agrees: all agree" in ran.out
    assert "possible" not in ran.out
    assert "licensed engineer" in ran.out
    assert ran.err == ""


def test_what_was_not_asked_for_is_not_diagnosed(run: Any) -> None:
    """The members asked for agree; that is the verdict, and no explanation is due."""
    wrong = PLAIN.replace("A-B,8.0", "A-B,80.0")
    ran = run(wrong, "--members", "A-C,C-B", "--json")
    assert ran.code == 0
    assert ran.data["diagnosis"] == []
    assert run(wrong, "--json").data["diagnosis"] != []


def test_a_missing_member_is_1(run: Any) -> None:
    """Of those that are asked for; without any explanation, because nothing differs."""
    short = PLAIN.replace("C-B,-10.0\n", "")
    ran = run(short, "--json")
    assert ran.code == 1
    assert ran.verdicts == {"A-C": "agrees", "C-B": "missing", "A-B": "agrees"}
    assert ran.data["members"]["C-B"]["theirs"] is None
    assert ran.data["diagnosis"] == []
    assert run(short, "--members", "B-A,A-C").code == 0


def test_a_lost_load_is_found(run: Any) -> None:
    """The best explanation first, in words too, and the joint that carries other loads."""
    ran = run(LOST, "--json")
    assert ran.code == 1
    assert ran.data["diagnosis"][0]["explanation"] in ("load-missing", "case-missing")
    assert "implied_loads" in ran.data
    ran = run(LOST)
    assert "joint C: their forces imply a load of (0.000, 0.000) kN, ours is (0.000, -12.000)" in ran.out
    assert "possible: consistent with" in ran.out


def test_a_combination_is_compared_too(run: Any) -> None:
    """1.2 snow and 0.5 wind: A-C is -12 + 0.9375."""
    table = "member,force\nA-B,10.35\nA-C,-11.06\nC-B,-12.94\n"
    assert run(table, case="both").code == 0


def test_our_own_disagreement_comes_first(run: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """Then nothing is diagnosed: ours cannot be the measure."""
    honest = stiffness.solve_all

    def wrong(*given: Any) -> Any:
        from dataclasses import replace  # noqa: PLC0415

        return [replace(each, forces={**each.forces, "A-B": 9.0}) for each in honest(*given)]

    monkeypatch.setattr(stiffness, "solve_all", wrong)
    ran = run(LOST)
    assert ran.code == 1
    assert ran.out.startswith("our own two routes do not agree: A-B")
    assert "possible" not in ran.out
    ran = run(LOST, "--json")
    assert ran.data["own_routes"]
    assert ran.data["diagnosis"] == []
    assert run(PLAIN).code == 1


# --- bad input --------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("table", "told"),
    [
        ("member,force\nA-B,8.0\nA-C,x\n", ("results.csv", "row 3", "column 'force'", "'x' is no number", "such as")),
        ("member,force\nA-Z,8.0\n", ("row 2", "column 'member'", "there is no member 'A-Z'")),
        ("member,force\nA-B,8.0\nA-B,9.0\n", ("row 3", "stated again", "row 2")),
        ("member,force\nA-B,\n", ("row 2", "the force is missing")),
        ("a,b\n1,2\n", ("no head is recognised",)),
        ("", ("results.csv",)),
        (b"PK\x03\x04rest", ("is no text",)),
    ],
    ids=["number", "member", "twice", "empty cell", "head", "empty", "archive"],
)
def test_a_malformed_table_names_row_and_column(run: Any, table: str | bytes, told: tuple[str, ...]) -> None:
    """Exit 2, what was expected, and nothing written."""
    refused(run(table, "--out", "never.html"), *told)
    assert not Path("never.html").exists()


def test_every_fault_has_a_line_of_its_own(run: Any) -> None:
    """Errors are collected."""
    ran = run("member,force\nA-Z,8.0\nA-C,x\nC-B,y\n")
    assert len(ran.err.splitlines()) == 3
    assert all(line.startswith("trusscalc: ") for line in ran.err.splitlines())


@pytest.mark.parametrize(
    ("options", "told"),
    [
        (("--case", "rain"), "rain"),
        (("--members", "A-Z"), "A-Z"),
        (("--columns", "colour=2"), "what a column can be"),
        (("--columns", "force=Kraft"), "no head has the columns named (force=Kraft)"),
        (("--names", "missing.csv"), "there is no such file"),
        (("--unit", "stone"), "unit: 'stone' is not known"),
        (("--relative", "-0.1"), "a tolerance is not negative"),
        (("--relative", "much"), "much"),
        (("--theirs", "LC9"), "LC9"),
        (("--written-down", "0" * 64), "is of other values"),
        (("--out", "sheet.docx"), "cannot be saved as '.docx'"),
        (("--derive", "A-C"), "name it with --out"),
        (("--verbatim",), "name it with --out"),
    ],
    ids=lambda value: " ".join(value) if isinstance(value, tuple) else "",
)
def test_bad_options(run: Any, options: tuple[str, ...], told: str) -> None:
    """Each says what is wrong."""
    refused(run(PLAIN.replace("force\n", "force,case\n").replace("0\n", "0,LC1\n"), *options), told)


def test_bad_trusses_and_missing_files(run: Any, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A file with a fault, an unstable truss, a table that is not there, no table at all."""
    refused(run(PLAIN, truss=FILE.replace('B = "roller"\n', "")), "C", "B")
    refused(run(PLAIN, truss=FILE.replace("[4, 3]", "[4, 0]")), "unstable", "C")
    refused(run(None), "name the submitted table")
    assert main(["compare", str(tmp_path / "truss.toml"), str(tmp_path / "none.csv"), "--case", "snow"]) == 2
    assert "there is no such file" in capsys.readouterr().err
    assert main(["compare", str(tmp_path / "truss.toml")]) == 2


# --- options of reading -----------------------------------------------------------------------------------


def test_columns_by_head_and_by_place(run: Any) -> None:
    """Heads that are nobody's plain words."""
    table = "Stab;Quer;Kraft\nA-B;1;8,0\nA-C;2;-10,0\nC-B;3;-10,0\n"
    assert run(table, "--columns", "member=Stab,force=Kraft").code == 0
    assert run(table, "--columns", "member=1,force=3").code == 0


def test_names_from_the_file_and_from_a_map(run: Any, tmp_path: Path) -> None:
    """[project.names] is taken by itself, a map goes before it, a mapping of neither is told."""
    table = "member,force\n1-2,8.0\n1-3,-10.0\n3-2,-10.0\n"
    assert run(table, truss=NUMBERED).code == 0
    refused(run(table), "there is no member '1-2'", "give a name map")
    numbers = tmp_path / "map.csv"
    numbers.write_text("our joint;model\nA;1\nB;2\nC;3\n", encoding="utf-8")
    assert run(table, "--names", str(numbers)).code == 0
    numbers.write_text("our joint;model\nA;3\nB;2\nC;1\n", encoding="utf-8")
    assert run(table, "--names", str(numbers), truss=NUMBERED).code == 1


def test_conventions_units_decimals_others(run: Any) -> None:
    """Each option turns a table that differs into one that agrees."""
    assert run(RISEN, "--convention", "compression").code == 0
    ran = run(RISEN, "--convention", "detect")
    assert ran.code == 0
    assert "compression positive; 100% of the force agrees in size" in ran.out
    assert run(RISEN, "--convention", "tension").code == 1
    assert run("member,force\nA-B,8000\nA-C,-10000\nC-B,-10000\n", "--unit", "N").code == 0
    open_ = 'member,force\nA-B,"8,000"\nA-C,"-10,000"\nC-B,"-10,000"\n'
    refused(run(open_), "state the decimal sign")
    assert run(open_, "--decimal", ",").code == 0
    assert run(open_, "--decimal", ".", "--unit", "N").code == 0
    refused(run(PLAIN + "S1,3.0\n"), "'S1'")
    assert run(PLAIN + "S1,3.0\n", "--others", "S1, S2").code == 0


def test_what_they_call_the_case(run: Any) -> None:
    """One of several cases of the table."""
    table = "member,case,force\n" + "".join(f"{row},LC1,{v}\n" for row, v in (("A-B", 8), ("A-C", -10), ("C-B", -10)))
    table += "A-B,LC2,9\nA-C,LC2,9\nC-B,LC2,9\n"
    assert run(table, "--theirs", "LC1").code == 0
    assert run(table, "--theirs", "lc2").code == 1
    refused(run(table), "the table has no case 'snow'", "LC1", "LC2")


@pytest.mark.parametrize(
    ("options", "code"),
    [
        ((), 1),
        (("--relative", "0.05"), 0),
        (("--relative", "5%"), 0),
        (("--relative", "1/20"), 0),
        (("--relative", "0", "--absolute", "0.04"), 0),
        (("--relative", "0", "--absolute", "3.9%"), 1),
    ],
    ids=lambda value: " ".join(value) if isinstance(value, tuple) else "",
)
def test_the_criterion(run: Any, options: tuple[str, ...], code: int) -> None:
    """8.4 beside 8: five per cent of ours, four of the largest force, which is 12 (the load) times 0.04 = 0.48."""
    table = "member,force\nA-B,8.400\nA-C,-10.000\nC-B,-10.000\n"
    ran = run(table, *options)
    assert ran.code == (0 if options[-1:] == ("3.9%",) else code)
    assert ("as stated by the user" in ran.out) == bool(options)


# --- blind ------------------------------------------------------------------------------------------------


def test_frozen_first_and_told_before_the_table_is_opened(run: Any) -> None:
    """The digest stands on stderr even when the table then cannot be read; JSON stays JSON."""
    ran = run(PLAIN, "--blind", "--json")
    assert ran.code == 0
    digest = ran.data["frozen"]["digest"]
    assert "not opened yet" in ran.err
    assert digest in ran.err
    assert ran.data["frozen"]["order"].startswith("our values and the criterion were frozen before")
    broken = run("nonsense", "--blind")
    assert broken.code == 2
    assert digest in broken.err


def test_the_digest_alone_to_be_written_down(run: Any) -> None:
    """Without a table: values as text, their digest, the same as later; and the text itself in a file."""
    ran = run(None, "--blind")
    assert ran.code == 0
    digest = ran.out.rsplit(" ", 1)[1].strip()
    assert 'member "A-C" exact -10 decimal -10' in ran.out
    assert digest in run(PLAIN, "--blind").err
    later = run(PLAIN, "--written-down", digest.upper())
    assert later.code == 0
    assert "had been written down before, and is the same" in later.out
    refused(run(PLAIN, "--written-down", digest, "--relative", "0.2"), "is of other values", digest)
    path = ran.folder / "ours.txt"
    told = run(None, "--blind", "--out", str(path))
    assert digest in told.out
    assert hashlib.sha256(path.read_bytes()).hexdigest() == digest
    assert run(None, "--blind", "--json").data["frozen"]["text"].encode() == path.read_bytes()
    refused(run(None, "--blind", "--out", "ours.html"), "ends in .txt")


# --- the sheet --------------------------------------------------------------------------------------------


@pytest.mark.parametrize("suffix", [".html", ".ipynb", ".txt"])
def test_the_sheet_is_written_and_derived_again(run: Any, suffix: str) -> None:
    """Beside what is printed; it agrees with itself, and the code is the comparison's."""
    path = run(PLAIN).folder / f"sheet{suffix}"
    ran = run(LOST, "--out", str(path), "--derive", "differing", "--verbatim")
    assert ran.code == 1
    assert ran.out.splitlines()[-1] == f"{path}: the verification sheet"
    assert "Does not agree" in path.read_text(encoding="utf-8")
    assert run(PLAIN, "--out", str(path), "--json").data["agreed"] is True
    if suffix != ".txt":
        assert recheck.recheck(path).matches


def test_the_pdf_is_compared_with_the_page_filed_with_it(run: Any, capsys: pytest.CaptureFixture[str]) -> None:
    """Byte for byte; another comparison's page does not fit."""
    pytest.importorskip("typst")
    folder = run(PLAIN).folder
    pdf, page, other = (str(folder / name) for name in ("sheet.pdf", "sheet.html", "other.html"))
    for table, path in ((PLAIN, pdf), (PLAIN, page), (LOST, other)):
        run(table, "--out", path)
    assert main(["recheck", pdf, "--against", page]) == 0
    assert main(["recheck", pdf, "--against", other]) == 1
    capsys.readouterr()
    assert main(["recheck", pdf, "--against", str(folder / "none.html")]) == 2
    assert "no such file" in capsys.readouterr().err


def test_an_existing_sheet_stays_until_the_new_one_is_complete(run: Any) -> None:
    """A table with a fault leaves the old file as it was."""
    path = run(PLAIN).folder / "sheet.html"
    path.write_text("old", encoding="utf-8")
    refused(run("member,force\nA-B,x\n", "--out", str(path)), "row 2")
    assert path.read_text(encoding="utf-8") == "old"


def test_members_derived_on_the_sheet(run: Any) -> None:
    """Those named, or those that differ; a member that is not there is refused."""
    path = run(PLAIN).folder / "sheet.txt"
    wrong = PLAIN.replace("A-B,8.0", "A-B,8.5")
    run(wrong, "--out", str(path), "--derive", "C-A")
    text = path.read_text(encoding="utf-8")
    assert "Derivation of the members" in text
    assert "Derivations   of A–C, by sections and joints" in text
    run(wrong, "--out", str(path), "--derive", "differing")
    assert "Derivations   of A–B, by sections and joints" in path.read_text(encoding="utf-8")
    run(wrong, "--out", str(path))
    assert "Derivation of" not in path.read_text(encoding="utf-8")
    refused(run(PLAIN, "--out", str(path), "--derive", "A-Z"), "A-Z")
