"""The promises of the command line: exit codes, the JSON to the letter, one message per fault, never a traceback."""

from __future__ import annotations

import json
import os
import re
import subprocess
import sys
from pathlib import Path
from typing import Any

import pikepdf
import pytest
import replay
import trade_trusses as trade
from stated_truss import Stated

from trusscalc import stiffness
from trusscalc.__main__ import main

FILE = """\
format = 1
title = "Wharf crane"
[units]
length = "m"
force = "kN"
[joints]
A = [0, 0]
B = [4, 0]
C = [2, "2*sqrt(3)"]
[members]
rafters = ["A-C", "C-B"]
tie = ["A-B"]
[supports]
A = "pin"
B = "roller"
[symbols]
P = 12
[cases.snow]
C = [0, "-P"]
[cases.wind]
C = [3, 0]
[combinations.both]
snow = "1.2"
wind = "0.5"
"""


class Ran:
    """What one run of the command left behind."""

    def __init__(self, code: int, out: str, err: str) -> None:
        self.code, self.out, self.err = code, out, err

    @property
    def data(self) -> dict[str, Any]:
        """The JSON printed."""
        return json.loads(self.out)

    @property
    def messages(self) -> list[str]:
        """The lines on stderr."""
        return self.err.splitlines()


@pytest.fixture
def run(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> Any:
    """Return a function that runs ``check`` on a file's text in this process."""

    def runs(text: str | bytes | Stated, *options: str, case: str = "snow", members: str = "all") -> Ran:
        path = tmp_path / "truss.toml"
        content = text.file() if isinstance(text, Stated) else text
        path.write_bytes(content if isinstance(content, bytes) else content.encode())
        code = main(["check", str(path), "--case", case, "--members", members, *(options or ("--json",))])
        out, err = capsys.readouterr()
        assert "Traceback" not in err
        assert code in (0, 1, 2)
        assert (code == 2) == (out == "")
        return Ran(code, out, err)

    return runs


def refused(ran: Ran, *needed: str) -> None:
    """Assert exit 2, nothing printed, and every needed word told on stderr."""
    assert ran.code == 2
    assert ran.out == ""
    assert ran.err.startswith("trusscalc: ")
    for word in needed:
        assert word in ran.err


# --- what is printed --------------------------------------------------------------------------------------


def test_json_has_the_promised_keys_and_types(run: Any) -> None:
    """Format 1, key by key."""
    data = run(FILE, members="C-A").data
    assert list(data) == ["format", "title", "case", "statics", "reactions", "members", "steps", "agreed"]
    assert (data["format"], data["title"], data["case"]) == (1, "Wharf crane", "snow")
    assert data["statics"] == {
        "joints": 3,
        "members": 3,
        "reactions": 3,
        "rank": 6,
        "stable": True,
        "determinate": True,
    }
    assert list(data["reactions"]) == ["A.x", "A.y", "B.y"]
    for item in data["reactions"].values():
        assert isinstance(item["exact"], str)
        assert type(item["decimal"]) is float
        assert type(item["stiffness"]) is float
    assert list(data["members"]) == ["A-C"]
    member = data["members"]["A-C"]
    assert {"exact", "exactness", "decimal", "sense", "stiffness", "verdict", "steps"} <= set(member)
    assert (member["exactness"], member["sense"], member["verdict"]) == ("exact", "C", "agrees")
    assert type(member["decimal"]) is float
    assert type(member["stiffness"]) is float
    assert all(type(number) is int for number in member["steps"])
    assert data["agreed"] is True
    for number, step in enumerate(data["steps"], 1):
        assert {"number", "kind", "kept", "cut", "equations", "solves", "uses", "text"} <= set(step)
        assert step["number"] == number
        assert all(name in step["text"] for name in step["solves"])
        assert step["kind"] in {"joint", "section", "whole"}
        for equation in step["equations"]:
            place = "centre" if equation["sum"] == "moment" else "direction"
            assert set(equation) == {"sum", place}
            assert len(equation[place]) == 2
            assert all(isinstance(number, str) for number in equation[place])
        for key in ("kept", "cut", "solves", "uses"):
            assert all(isinstance(name, str) for name in step[key])


def test_values_at_their_symbols(run: Any) -> None:
    """``exact`` holds the symbol; decimal, stiffness and sense are at its value under [symbols]."""
    item = run(FILE, members="A-C").data["members"]["A-C"]
    assert item["exact"].count("P") == 1
    assert replay.close(replay.value(item["exact"], {"P": "12"}), replay.value("-4*sqrt(3)"), 1)
    assert abs(item["decimal"] + 6.928203230275509) < 1e-15


def test_a_pair_carries_its_cuts_in_its_equations(run: Any) -> None:
    """Kind ``pair`` has no kept and no cut of its own."""
    data = run(trade.k_truss(8), case="load", members="M2-U3").data
    (pair,) = [step for step in data["steps"] if step["kind"] == "pair"]
    assert not {"kept", "cut"} & set(pair)
    assert all({"sum", "kept", "cut"} <= set(equation) for equation in pair["equations"])
    assert len(pair["equations"]) == len(pair["solves"]) == 2
    assert pair["equations"][0] == {
        "sum": "force",
        "direction": ["1", "0"],
        "kept": ["M2"],
        "cut": pair["equations"][0]["cut"],
    }


def test_reactions_have_the_promised_names(run: Any) -> None:
    """Pin x and y, plain roller y, inclined roller r, several links r1, r2, ..."""
    stated = Stated(
        {"A": ("0", "0"), "B": ("6", "0"), "C": ("3", "4"), "D": ("9", "4")},
        ("A-B", "A-C", "B-C", "B-D", "C-D"),
        {"A": [{"reaction": ("1", "0")}, {"reaction": ("1", "1")}], "D": {"reaction": ("2", "-5")}},
        {"C": ("1", "-10")},
    )
    data = run(stated, case="load").data
    assert list(data["reactions"]) == ["A.r1", "A.r2", "D.r"]
    assert replay.faults(stated, data, stated.members) == []


def test_spelling_of_the_file_and_any_order_of_the_request(run: Any) -> None:
    """Keys as the file has them; either order; duplicates once; blanks after commas."""
    data = run(FILE, members=" B-C, A-C ,C-A,C-B,").data
    assert list(data["members"]) == ["C-B", "A-C"]


def test_members_of_the_whole_truss(run: Any) -> None:
    """``--members all``, in the file's order."""
    assert list(run(FILE).data["members"]) == ["A-C", "C-B", "A-B"]


def test_a_combination_is_a_case(run: Any) -> None:
    """``--case`` takes a combination, added up exactly."""
    item = run(FILE, case="both", members="A-B").data["members"]["A-B"]
    assert replay.close(replay.value(item["exact"], {"P": "12"}), replay.value("72/10/sqrt(3)+3/4"), 1)


def test_the_summary_for_a_terminal(run: Any) -> None:
    """Without ``--json``: every member and reaction with its verdict, the conclusion, and the cautions."""
    lines = run(FILE, "--case", "wind").out.splitlines()
    told = {line.split()[0]: line for line in lines[1:7]}
    assert set(told) == {"A-C", "C-B", "A-B", "A.x", "A.y", "B.y"}
    assert all(line.endswith("agrees") for line in told.values())
    assert "C" in told["C-B"].split()
    assert "-3.000" in told["C-B"]
    assert lines[7] == "3 of 3 members checked: all agree"
    assert "ideal truss" in lines[8]
    assert "licensed engineer" in lines[9]


# --- exit codes -------------------------------------------------------------------------------------------

SQUARE = {"A": ("0", "0"), "B": ("4", "0"), "C": ("4", "3"), "D": ("0", "3")}
SIDES = ("A-B", "B-C", "C-D", "D-A")
X_PANEL = Stated(SQUARE, (*SIDES, "A-C", "B-D"), {"A": "pin", "B": "roller"}, {"C": ("10", "0")})


def test_agreed_is_zero_and_undecided_is_one(run: Any) -> None:
    """A member that statics does not decide: nulls, a reason, and exit 1."""
    assert run(FILE).code == 0
    ran = run(X_PANEL, case="load", members="A-C")
    item = ran.data["members"]["A-C"]
    assert ran.code == 1
    assert (item["exact"], item["decimal"], item["sense"], item["verdict"]) == (None, None, None, "undecided")
    assert item["reason"]
    assert ran.data["statics"]["determinate"] is False
    assert ran.data["agreed"] is False
    assert ran.err == ""
    text = run(X_PANEL, "--case", "load", members="A-C").out
    assert "1 of 6 members checked: not all agree" in text
    assert item["reason"] in text


def test_disagreement_is_one_and_told(run: Any, monkeypatch: pytest.MonkeyPatch) -> None:
    """A spoilt value of the numeric route turns verdict and exit code, in JSON and in the summary."""
    right = stiffness.member_forces
    monkeypatch.setattr(stiffness, "member_forces", lambda *given: {**right(*given), "A-B": -right(*given)["A-B"]})
    ran = run(FILE)
    assert ran.code == 1
    assert [name for name, item in ran.data["members"].items() if item["verdict"] == "differs"] == ["A-B"]
    assert ran.data["agreed"] is False
    ran = run(FILE, "--members", "all")
    assert ran.code == 1
    assert "not all agree" in ran.out


def test_a_warning_is_told_with_exit_zero(run: Any) -> None:
    """A member running through a joint: worth a look, no reason to stop."""
    stated = Stated(
        {"A": ("0", "0"), "B": ("8", "0"), "M": ("4", "0"), "C": ("4", "3")},
        ("A-B", "A-C", "B-C", "M-C", "A-M"),
        {"A": "pin", "B": "roller"},
        {"M": ("0", "-5")},
    )
    ran = run(stated, case="load")
    assert ran.code == 0
    (message,) = ran.messages
    assert message.startswith("trusscalc: warning: member A-B runs through joint M without ending there")


UNSTABLE = {
    "a panel without diagonal": (Stated(SQUARE, SIDES, {"A": "pin", "B": "pin"}, {}), ["C", "D"]),
    "three vertical rollers": (
        Stated(SQUARE, (*SIDES, "A-C"), {"A": "roller", "B": "roller", "C": "roller"}, {}),
        ["whole truss"],
    ),
    "reactions through one point": (
        Stated(
            SQUARE,
            (*SIDES, "A-C"),
            {name: {"reaction": pair} for name, pair in (("A", ("4", "3")), ("B", ("-4", "3")), ("D", ("4", "-3")))},
            {},
        ),
        ["whole truss"],
    ),
    "a loose part": (
        Stated(
            {**SQUARE, "E": ("9", "0"), "F": ("9", "3")},
            (*SIDES, "A-C", "B-D", "E-F", "B-E"),
            {"A": "pin", "B": "roller"},
            {},
        ),
        ["E", "F"],
    ),
    "right count, held twice and once too little": (
        Stated(
            {**SQUARE, "E": ("8", "0"), "F": ("8", "3")},
            (*SIDES, "A-C", "B-D", "B-E", "E-F", "C-F"),
            {"A": "pin", "B": "roller"},
            {},
        ),
        ["E", "F"],
    ),
    "three hinges in a line": (
        Stated({"A": ("0", "0"), "B": ("4", "0"), "C": ("2", "0")}, ("A-C", "C-B"), {"A": "pin", "B": "pin"}, {}),
        ["C"],
    ),
}


@pytest.mark.parametrize("why", UNSTABLE)
def test_an_unstable_truss_is_refused_naming_the_joints(run: Any, why: str) -> None:
    """Exit 2, whatever the count says, and the joints that move; those that stand firm are not named."""
    stated, moving = UNSTABLE[why]
    ran = run(stated.under({"A": ("1", "1")}), case="load")
    refused(ran, "unstable", *moving)
    if moving != ["whole truss"]:
        (told,) = re.findall(r"joints that can move: ([^.]*)\.", ran.err)
        assert sorted(told.split(", ")) == sorted(moving)


# --- bad requests and bad files ---------------------------------------------------------------------------


def test_requests_that_cannot_be_met(run: Any) -> None:
    """Unknown case, unknown member with a suggestion, nothing asked for."""
    refused(run(FILE, case="dead"), "no case or combination 'dead'", "snow", "wind", "both")
    refused(run(FILE, case="snwo"), "did you mean snow?")
    refused(run(FILE, case=""), "no case")
    refused(run(FILE, members="A-D"), "no member 'A-D'", "did you mean")
    refused(run(FILE, members="A-C,B-X,Q-Q"), "B-X")
    refused(run(FILE, members="A-A"), "A-A")
    for nothing in ("", " ", ",", " , "):
        refused(run(FILE, members=nothing), "no member was asked for")
    refused(run(FILE, members="A-C\nB-C"), "no member")
    refused(run(FILE.replace("[combinations.both]", "[combinations.snow]")), "snow", "also the name of a case")
    pair = FILE.replace('snow = "1.2"', 'snow = ["1.25", "0.90"]')
    refused(run(pair, case="both"), "'both': 'snow' has the pair of factors 1.25 or 0.9", "ask for the envelope")


def test_missing_arguments(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """From Python ``main`` returns the code, also for arguments that cannot be understood."""
    path = tmp_path / "truss.toml"
    path.write_text(FILE)
    for argv in (
        [],
        ["check"],
        ["check", str(path)],
        ["check", str(path), "--case", "snow"],
        ["check", str(path), "--members", "all"],
        ["weigh", str(path)],
        ["check", str(path), "--case", "snow", "--members", "all", "--colour"],
    ):
        assert main(argv) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert "usage: " in err
    assert main(["--help"]) == 0
    assert "check" in capsys.readouterr().out


def test_several_faults_are_told_together(run: Any) -> None:
    """One message per line, each naming file, key and what to do."""
    faulty = (
        FILE.replace('"C-B"', '"C-D"')
        .replace('tie = ["A-B"]', 'tie = ["A-B", "B-A"]')
        .replace('B = "roller"', 'B = "rolling"\nE = "pin"')
        .replace('C = [0, "-P"]', 'C = [0, "-Q"]\nF = [1, 2]')
        .replace('length = "m"', 'length = "yd"\nforces = "N"')
    )
    ran = run(faulty)
    refused(ran, "no joint 'D'", "stated twice", "'rolling'", "E", "Q", "F", "'yd'", "forces", "did you mean force?")
    assert len(ran.messages) >= 8
    assert all(line.startswith("trusscalc: ") and "truss.toml: " in line for line in ran.messages)


def test_files_that_are_none(capsys: pytest.CaptureFixture[str], tmp_path: Path, run: Any) -> None:
    """Missing, a folder, empty, binary, wrong encodings, no TOML."""
    for path in (tmp_path / "absent.toml", tmp_path, tmp_path / "absent" / "deep.toml", Path("\0"), Path()):
        assert main(["check", str(path), "--case", "snow", "--members", "all"]) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert err.startswith("trusscalc: ")
        assert "Traceback" not in err
    refused(run(""), "format")
    refused(run(bytes(range(256)) * 20))
    refused(run(FILE.encode("utf-16")))
    refused(run(FILE.replace("Wharf", "Überhang").encode("latin-1")), "UTF-8")
    refused(run("\x00" * 50))
    refused(run("joints = [[[[" * 3000))
    refused(run("[joints]\nA = [0, 0\n"), "TOML")
    refused(run(json.dumps({"format": 1})))
    assert run(FILE.encode("utf-8-sig")).code == 0
    assert run(FILE.replace("\n", "\r\n")).code == 0


HOSTILE = (
    "__import__('os').system('touch {mark}')",
    "9**9**9",
    "9^9^9^9",
    "1e999999999",
    "1e-999999999",
    "sqrt(-1)",
    "1/0",
    "P.__class__",
    "(lambda: 1)()",
    "nan",
    "inf",
    "sin(P)",
    "sqrt(" * 200 + "2" + ")" * 200,
    "+".join(f"sqrt({n})" for n in (2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31)) + "+__builtins__",
    "1" * 5000,
    "<script>alert(1)</script>",
    "$(touch {mark})",
    "1;2",
    "1 2",
    "",
    " ",
    "\u0661\u0662x",
    "0x10",
    "1_0_",
    "pi",
)
PLACES = {
    "coordinate": ('C = [2, "2*sqrt(3)"]', "C = [2, {0}]"),
    "reaction": ('B = "roller"', "B = {{ reaction = [0, {0}] }}"),
    "symbol": ("P = 12", "P = {0}"),
    "load": ('C = [0, "-P"]', "C = [0, {0}]"),
    "factor": ('snow = "1.2"', "snow = {0}"),
}


@pytest.mark.parametrize("place", PLACES)
def test_hostile_text_where_a_number_may_stand(run: Any, tmp_path: Path, place: str) -> None:
    """Refused in words wherever it stands; nothing is evaluated, nothing takes long."""
    before, after = PLACES[place]
    mark = tmp_path / "mark"
    for hostile in HOSTILE:
        text = json.dumps(hostile.replace("{mark}", str(mark)))
        ran = run(FILE.replace(before, after.format(text)), case="both")
        refused(ran, "truss.toml")
        assert not mark.exists()
    for bare in ("nan", "inf", "-inf", "true", "1e999999999", "[1]", "1979-05-27", "{ a = 1 }", "9" * 5000):
        refused(run(FILE.replace(before, after.format(bare)), case="both"))


def test_hostile_names(run: Any) -> None:
    """Names that would do harm elsewhere are names here, or are refused; messages stay on their line."""
    for name in ("<script>alert(1)</script>", "$x^2$", "a|b", "#top", "'; drop", 'a"b', "*bold*", "Ünï", "点", "a\\b"):
        text = FILE.replace("\nA =", f"\n{json.dumps(name, ensure_ascii=False)} =")
        text = text.replace('"A-', json.dumps(name, ensure_ascii=False)[:-1] + "-")
        ran = run(text, members="all")
        assert (ran.code, ran.err) == (0, ""), name
        assert f"{name}-C" in ran.data["members"]
    for name in ("a\nb", "a-b", "a,b", "a.b", "\u202eb", " a", "", "n" * 41, "a\x1b[2J"):
        ran = run(FILE.replace("\nA =", f"\n{json.dumps(name)} ="))
        refused(ran)
        assert "\x1b" not in ran.err
        assert all(line.startswith("trusscalc: ") for line in ran.messages)


def test_an_impossible_load_or_case_table(run: Any) -> None:
    """Wrong shapes in every table."""
    for wrong in ("C = 3", 'C = "x"', "C = [1]", "C = [1, 2, 3]", "C = {x = 1}", "C = [[1], 2]"):
        refused(run(FILE.replace('C = [0, "-P"]', wrong)), "cases.snow")
    for wrong in ("joints = 3", "members = [1]", 'supports = "pin"', "cases = 1", "units = []"):
        table = wrong.split(" ", 1)[0]
        text = re.sub(rf"\[{table}[^\]]*\]\n(?:[^\[\n]+.*\n)*", "", FILE)
        refused(run(f"{wrong}\n{text}"), table)


# --- the process ------------------------------------------------------------------------------------------


def process(arguments: list[str], **environment: str) -> subprocess.CompletedProcess[bytes]:
    """Run the command line in a process of its own."""
    env = {**os.environ, **environment}
    return subprocess.run([sys.executable, "-m", "trusscalc", *arguments], capture_output=True, check=False, env=env)


def test_the_same_bytes_under_every_hash_seed(tmp_path: Path) -> None:
    """Nothing printed depends on the order of sets."""
    path = tmp_path / "truss.toml"
    path.write_text(trade.baltimore().file())
    arguments = ["check", str(path), "--case", "load", "--members", "all", "--json"]
    first, second = (process(arguments, PYTHONHASHSEED=seed) for seed in ("1", "4711"))
    assert first.returncode == second.returncode == 0
    assert first.stdout == second.stdout
    assert first.stderr == b""


def test_exit_codes_of_the_process(tmp_path: Path) -> None:
    """``python -m trusscalc`` ends with the code of ``main``, and says so on stderr only."""
    path = tmp_path / "truss.toml"
    path.write_text(X_PANEL.file())
    ran = process(["check", str(path), "--case", "load", "--members", "A-C", "--json"])
    assert (ran.returncode, ran.stderr) == (1, b"")
    ran = process(["check", str(path), "--case", "load", "--members", "A-Q"])
    assert (ran.returncode, ran.stdout) == (2, b"")
    assert b"no member 'A-Q'" in ran.stderr


def test_a_terminal_that_lacks_characters(tmp_path: Path) -> None:
    """A title and names outside the terminal's encoding are escaped; JSON stays JSON."""
    path = tmp_path / "truss.toml"
    text = FILE.replace("Wharf crane", "Überführung").replace("\nA =", '\n"Ä" =').replace('"A-', '"Ä-')
    path.write_text(text, "utf-8")
    arguments = ["check", str(path), "--case", "wind", "--members", "all"]
    ran = process([*arguments, "--json"], PYTHONIOENCODING="ascii")
    assert ran.returncode == 0
    assert json.loads(ran.stdout)["title"] == "Überführung"
    ran = process(arguments, PYTHONIOENCODING="ascii")
    assert ran.returncode == 0
    assert rb"\xc4-C " in ran.stdout


# --- sheets -----------------------------------------------------------------------------------------------


@pytest.fixture
def sheet(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> Any:
    """Return a function that runs ``sheet`` on a file's text in this process."""

    def runs(text: str, out: str, *options: str, case: str = "snow", members: str = "all") -> Ran:
        path = tmp_path / "truss.toml"
        path.write_text(text, "utf-8")
        code = main(["sheet", str(path), "--case", case, "--members", members, "--out", str(tmp_path / out), *options])
        out, err = capsys.readouterr()
        assert "Traceback" not in err
        return Ran(code, out, err)

    return runs


@pytest.mark.parametrize("suffix", [".txt", ".ipynb", ".html"])
def test_a_sheet_is_written(sheet: Any, tmp_path: Path, suffix: str) -> None:
    """Exit 0, the file is there, nothing else is, and it names every member with its value."""
    ran = sheet(FILE, f"sheet{suffix}")
    assert (ran.code, ran.err) == (0, "")
    assert {path.name for path in tmp_path.iterdir()} == {"truss.toml", f"sheet{suffix}"}
    text = (tmp_path / f"sheet{suffix}").read_text("utf-8")
    assert "Wharf crane" in text
    assert "6.928" in text
    if suffix == ".ipynb":
        assert json.loads(text)["nbformat"] == 4


def test_a_pdf_on_either_paper(sheet: Any, tmp_path: Path) -> None:
    """The media box is that of the paper asked for, in points."""
    boxes = []
    for paper in ("A4", "US Letter"):
        assert sheet(FILE, "sheet.pdf", "--paper", paper, members="A-B").code in (0, 1)
        with pikepdf.open(tmp_path / "sheet.pdf") as filed:
            boxes.append([round(float(side)) for side in filed.pages[0].mediabox[2:]])
    assert boxes == [[595, 842], [612, 792]]


def test_the_same_sheet_again_is_the_same_bytes(tmp_path: Path) -> None:
    """In two processes with different hash seeds, over the older file."""
    path = tmp_path / "truss.toml"
    path.write_text(trade.k_truss(8).file())
    found = []
    for seed in ("1", "4711"):
        out = tmp_path / "sheet.ipynb"
        arguments = ["sheet", str(path), "--case", "load", "--members", "M2-U3,L2-L3", "--out", str(out)]
        ran = process(arguments, PYTHONHASHSEED=seed)
        assert (ran.returncode, ran.stderr) == (0, b"")
        found.append(out.read_bytes())
    assert found[0] == found[1]


def test_a_sheet_that_does_not_agree_is_written_and_says_so(sheet: Any, tmp_path: Path) -> None:
    """Exit 1: the engineer gets the paper, with the verdict at its top."""
    ran = sheet(X_PANEL.file(), "sheet.txt", case="load", members="A-C")
    assert ran.code == 1
    text = (tmp_path / "sheet.txt").read_text("utf-8")
    assert "undecided" in text
    assert "not all agree" in ran.out


REFUSED_SHEETS: dict[str, tuple[str, dict[str, str], str]] = {
    "unknown member": (FILE, {"members": "A-Q"}, "no member 'A-Q'"),
    "unknown case": (FILE, {"case": "hail"}, "no case"),
    "faulty file": (FILE.replace("[joints]", "[joint]"), {}, "joint"),
    "unstable": (UNSTABLE["a panel without diagonal"][0].file(), {"case": "load"}, "unstable"),
}


@pytest.mark.parametrize("why", REFUSED_SHEETS)
@pytest.mark.parametrize("suffix", [".txt", ".ipynb"])
def test_an_older_sheet_stays_untouched_on_error(sheet: Any, tmp_path: Path, why: str, suffix: str) -> None:
    """Exit 2, nothing written, not even beside it."""
    text, options, told = REFUSED_SHEETS[why]
    older = tmp_path / f"sheet{suffix}"
    older.write_text("filed in spring")
    refused(sheet(text, older.name, **options), told)
    assert older.read_text() == "filed in spring"
    assert {path.name for path in tmp_path.iterdir()} == {"truss.toml", older.name}


def test_an_older_sheet_survives_a_failure_while_writing(
    sheet: Any, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A disk that is full half way: the older sheet is still whole."""
    older = tmp_path / "sheet.txt"
    older.write_text("filed in spring")

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", full)
    monkeypatch.setattr(Path, "replace", full)
    refused(sheet(FILE, "sheet.txt"), "No space left")
    assert older.read_text() == "filed in spring"
    assert {path.name for path in tmp_path.iterdir()} == {"truss.toml", "sheet.txt"}


def test_suffixes_that_no_sheet_has(sheet: Any, tmp_path: Path) -> None:
    """Told before any work is done, with what it can be; in any case of letters."""
    for name in ("sheet", "sheet.docx", "sheet.toml", ".txt", "sheet.txt.", "folder/sheet.doc"):
        refused(sheet(FILE, name), "sheet", ".ipynb", ".txt")
        assert {path.name for path in tmp_path.iterdir()} <= {"truss.toml"}
    assert sheet(FILE, "SHEET.TXT").code == 0


def test_places_that_cannot_be_written_to(sheet: Any, tmp_path: Path) -> None:
    """A folder that is not there, or a folder of that name."""
    refused(sheet(FILE, "absent/sheet.txt"), "absent")
    (tmp_path / "folder.txt").mkdir()
    refused(sheet(FILE, "folder.txt"), "folder.txt")
    assert list((tmp_path / "folder.txt").iterdir()) == []
