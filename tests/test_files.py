"""Truss files: what is read is what is written, and what is wrong is told, all of it, in one line each."""

from __future__ import annotations

import datetime as dt
import os
import re
import stat
import time
import unicodedata
from fractions import Fraction
from pathlib import Path
from typing import Any

import hypothesis
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from trusscalc import files, filewriting, shapes
from trusscalc.errors import FileFormatError, InputError, TrusscalcError, TrusscalcWarning, UnknownNameError
from trusscalc.exact import ONE, rational
from trusscalc.exacttext import parse
from trusscalc.filetext import LARGEST_FILE, MOST_PROBLEMS
from trusscalc.loads import Combination, JointLoad, LoadCase
from trusscalc.project import Project
from trusscalc.roots import sqrt
from trusscalc.truss import Truss, name_fault
from trusscalc.trussfile import TrussFile

FULL = """\
format = 1
title = "Tannery Lane footbridge"
[units]
length = "ft"
force = "kip"
[joints]
L0 = [0, 0]
L1 = [1_0.0e-1, 0]
L2 = ["sqrt(4)", 0.0]
U1 = ["5/4", "5*sqrt(3)/2"]   # the top
[members]
"lower chord" = ["L0-L1",
  "L1-L2"]
webs = ["L0-U1", "U1-L1", "L2-U1"]
[supports]
L0 = "pin"
L1 = { reaction = [2, -5] }
L2 = [{ reaction = [1, 0] }, { reaction = ["sqrt(2)", 1] }]
[symbols]
P = 150
[cases.dead]
L1 = [0, -120]
U1 = [0, "-P"]
[cases."live, east"]
U1 = [1e-6, -2.37]
[cases.none]
[combinations."1.2D+1.6L"]
dead = "1.2"
"live, east" = 1.6
[behaviour]
tension_only = ["U1-L0"]
no_uplift = ["L1"]
[project]
project = "Tannery Lane"
date = 2025-03-04
basis = "factored"
self_weight = "not included"
[project.names]
L0 = "N1"
"U1-L0" = "E7"
"""

TRIANGLE = """\
format = 1
[joints]
A = [0, 0]
B = [4, 0]
C = [2, 3]
[members]
all = ["A-B", "B-C", "C-A"]
[supports]
A = "pin"
B = "roller"
"""


def fails(text: str) -> list[str]:
    """Return the problems of a text that must not be read; each stays on one line."""
    with pytest.raises(FileFormatError) as caught:
        files.reads(text, "bridge.toml")
    problems = list(caught.value.problems)
    assert caught.value.source == "bridge.toml"
    assert str(caught.value).split("\n") == problems
    for problem in problems:
        assert problem.startswith("bridge.toml: ")
        assert problem.isprintable()
        assert len(problem) < 500
    return problems


class TestReading:
    """What a file states."""

    def test_everything(self) -> None:
        """Each entry, exactly."""
        stated = files.reads(FULL)
        truss = stated.truss
        assert (truss.title, truss.length, truss.force) == ("Tannery Lane footbridge", "ft", "kip")
        assert [(j.name, j.x, j.y) for j in truss.joints] == [
            ("L0", rational(0), rational(0)),
            ("L1", ONE, rational(0)),
            ("L2", rational(2), rational(0)),
            ("U1", rational(5, 4), 5 * sqrt(rational(3)) / 2),
        ]
        assert [(m.name, m.group) for m in truss.members][1:3] == [("L1-L2", "lower chord"), ("L0-U1", "webs")]
        assert [link.name for link in truss.links] == ["L0.x", "L0.y", "L1.r", "L2.r1", "L2.r2"]
        assert (truss.tension_only, truss.no_uplift) == (("U1-L0",), ("L1",))
        assert [case.name for case in stated.cases] == ["dead", "live, east", "none"]
        assert stated.cases[0].loads[1] == JointLoad("U1", rational(0), parse("-P", ("P",)))
        assert stated.cases[1].loads == (JointLoad("U1", rational(Fraction(1, 10**6)), rational(-237, 100)),)
        assert stated.cases[2].loads == ()
        assert stated.combinations == (Combination("1.2D+1.6L", {"dead": "6/5", "live, east": "8/5"}),)
        assert stated.project == Project(
            project="Tannery Lane",
            date="2025-03-04",
            basis="factored",
            self_weight="not included",
            names={"L0": "N1", "U1-L0": "E7"},
        )

    def test_only_what_is_needed(self) -> None:
        """Units, cases and the title block have usual values."""
        stated = files.reads(TRIANGLE)
        assert (stated.truss.length, stated.truss.force, stated.truss.title) == ("m", "kN", "")
        assert (stated.cases, stated.combinations, stated.project) == ((), (), Project())
        assert files.reads(TRIANGLE + "[cases]\n[combinations]\n[symbols]\n[behaviour]\n[project]\n") == stated

    def test_cases_and_combinations_by_name(self) -> None:
        """One call for both, and the nearest name for a slip."""
        stated = files.reads(FULL)
        assert stated.case("dead") is stated.cases[0]
        total = stated.case("1.2D+1.6L").as_floats()
        assert total["L1"] == pytest.approx((0, -144))
        assert total["U1"] == pytest.approx((1.6e-6, -180 - 1.6 * 2.37))
        with pytest.raises(UnknownNameError, match="no case or combination 'deda'; did you mean dead"):
            stated.case("deda")
        with pytest.raises(UnknownNameError, match="'xyz'; there are dead, live, east, none, "):
            stated.case("xyz")
        with pytest.raises(UnknownNameError, match="the file states no cases"):
            files.reads(TRIANGLE).case("dead")

    def test_a_byte_order_mark_and_windows_lines(self, tmp_path: Path) -> None:
        """Some editors write them; they change nothing."""
        path = tmp_path / "bridge.toml"
        path.write_bytes(b"\xef\xbb\xbf" + FULL.replace("\n", "\r\n").encode())
        assert files.read(path) == files.read(str(path)) == files.reads("\ufeff" + FULL) == files.reads(FULL)

    def test_a_member_through_a_joint_is_a_warning(self) -> None:
        """Told by Truss, and the file is read all the same."""
        with pytest.warns(TrusscalcWarning, match="member A-B runs through joint D"):
            files.reads(TRIANGLE.replace("C = [2, 3]", "C = [2, 3]\nD = [1, 0]").replace('"C-A"', '"C-A", "C-D"'))

    @pytest.mark.parametrize("written", ["2025-03-04", "'4 March 2025'", "2025-03-04T10:00:00", "2025-03-04T10:00:00Z"])
    def test_dates(self, written: str) -> None:
        """TOML dates become ISO text; text stays."""
        assert files.reads(f"{TRIANGLE}[project]\ndate = {written}\n").project.date[:1] in "24"
        assert Project(date=dt.date(2025, 3, 4)).date == "2025-03-04"  # type: ignore[arg-type]


class TestFaults:
    """One message for each fault, with its place."""

    @pytest.mark.parametrize(
        ("old", "new", "message"),
        [
            ("format = 1\n", "", "format: is missing; write format = 1"),
            ("format = 1", "format = 2", "format: 2 is not known to this version"),
            ("format = 1", "format = true", "format: True is not known"),
            ("format = 1", "format = 1.0", "format: '1.0' is not known"),
            ("format = 1", "format = 1\nformat = 1", r"no valid TOML: .*line 2"),
            ("title =", "titel =", "line 2: titel: unknown key; did you mean title"),
            ('"Tannery Lane footbridge"', "5", 'line 2: title: text is needed, in quotes, such as "5"'),
            ('"Tannery Lane footbridge"', '"""a\nb"""', r"title: the character U\+000A"),
            ('"Tannery Lane footbridge"', '"\u202ex"', r"line 2: title: the character U\+202E"),
            ('length = "ft"', 'lenght = "ft"', r"line 4: \[units\] lenght: unknown key; did you mean length"),
            ('length = "ft"', 'length = "feet"', r"line 4: \[units\] length: unknown unit 'feet'; .* did you mean ft"),
            ('length = "ft"', "length = 3", r"line 4: \[units\] length: text is needed"),
            ('length = "ft"', "length = ['m']", r"line 4: \[units\] length: text is needed"),
            ("[units]\n", "units = 3\n[behaviors]\n", "line 3: units: a table is needed"),
            ("[behaviour]", "[behavior]", r"line 30: behavior: unknown key; did you mean behaviour"),
            ("L0 = [0, 0]", "L0 = [0, 0]\nL0 = [0, 0]", "no valid TOML.*line 8"),
            ("L0 = [0, 0]", "L0 = [0]", r"line 7: \[joints\] L0: two numbers"),
            ("L0 = [0, 0]", "L0 = 0", r"line 7: \[joints\] L0: two numbers"),
            ("L0 = [0, 0]", "L0 = [true, 0]", r"line 7: \[joints\] L0 x: True is not a number"),
            ("L0 = [0, 0]", "L0 = [2025-01-01, 0]", r"line 7: \[joints\] L0 x: .*is not a number"),
            ("L0 = [0, 0]", "L0 = [nan, -inf]", r"line 7: \[joints\] L0 y: '-inf'"),
            ("L0 = [0, 0]", 'L0 = ["2*Q", 0]', r"line 7: \[joints\] L0 x: '2\*Q': 'Q' is not known here"),
            ("L0 = [0, 0]", '"L-0" = [0, 0]', r"line 7: \[joints\] 'L-0': a joint name must not contain '-'"),
            ("U1 = [", "U1.x = [", r"\[joints\] U1: two numbers"),
            ('"L1-L2"]', '"L1-L9"]', r"line 13: \[members\] lower chord 'L1-L9': there is no joint 'L9'; did you mean"),
            ('"L1-L2"]', '"L1-L0"]', r"line 13: \[members\] lower chord 'L1-L0': stated twice"),
            ('"L1-L2"]', "3]", r"line 12: \[members\] lower chord '3': a member is written joint-joint"),
            ("webs = [", "webs = 'L0-L2'\nothers = [", r"line 14: \[members\] webs: a list of members"),
            ('"lower chord"', '"lower\\nchord"', r"\[members\] lower\\u\{000a\}chord: the character U\+000A"),
            ('L0 = "pin"', 'L0 = "pim"', r"line 16: \[supports\] L0: 'pim' is no support"),
            (
                "{ reaction = [2, -5] }",
                "{ raection = [2, -5] }",
                r"line 17: \[supports\] L1 raection: unknown key; did",
            ),
            ("{ reaction = [2, -5] }", "{ reaction = [0, 0] }", r"line 17: \[supports\] L1: .*other than \[0, 0\]"),
            ('L0 = "pin"', 'L0 = "pin"\nL7 = "pin"', r"line 17: \[supports\] L7: there is no such joint; did you mean"),
            ("P = 150", "P = 'x'", r"line 20: \[symbols\] P: 'x'"),
            ("P = 150", "sin = 150", r"line 20: \[symbols\] 'sin': a symbol is a word"),
            ("P = 150", "Q = 150", r"line 23: \[cases.dead\] U1 Fy: '-P': 'P' is not known here"),
            ("L1 = [0, -120]", "L9 = [0, -120]", r"line 22: \[cases.dead\] L9: there is no such joint; did you mean"),
            ("L1 = [0, -120]", "L1 = [0, -120, 0]", r"line 22: \[cases.dead\] L1: two numbers"),
            ("[cases.none]", "[cases]\nnone = 3", r"line 27: \[cases\] none: a table is needed"),
            ("[cases.none]", '[cases.""]', r"\[cases\] : a name is needed"),
            (
                "[cases.none]",
                '[cases."1.2D+1.6L"]',
                r"line 27: \[combinations\] 1.2D\+1.6L: is also the name of a case",
            ),
            (
                'dead = "1.2"',
                'deed = "1.2"',
                r"line 28: \[combinations.1.2D\+1.6L\] deed: there is no such case; did you",
            ),
            ('dead = "1.2"', 'dead = "P"', r"line 28: \[combinations.1.2D\+1.6L\] dead: 'P'"),
            ('dead = "1.2"', 'dead = ["1.2"]', r"line 28: \[combinations.1.2D\+1.6L\] dead: one factor .*or a pair"),
            ('dead = "1.2"', "dead = [1, 2, 3]", r"line 28: \[combinations.1.2D\+1.6L\] dead: one factor .*or a pair"),
            ('dead = "1.2"', 'dead = [1, "x"]', r"line 28: \[combinations.1.2D\+1.6L\] dead: 'x'"),
            ('dead = "1.2"', "optional = 1.2", r"line 28: \[combinations.1.2D\+1.6L\] optional: a list of case names"),
            ('dead = "1.2"', 'optional = "dead"', r"line 28: \[comb.*\] optional: a list of case names is needed"),
            ('dead = "1.2"', "optional = {}", r"line 28: \[combinations.1.2D\+1.6L\] optional: a list of case names"),
            (
                '"live, east" = 1.6',
                'optional = ["deed"]',
                r"line 29: \[combinations.1.2D\+1.6L\] optional 'deed': is not among the factors .*did you mean dead",
            ),
            (
                'dead = "1.2"\n"live, east" = 1.6\n',
                'optional = ["dead"]\n',
                r"line 27: \[combinations\] 1.2D\+1.6L: a table of case = factor",
            ),
            (
                'dead = "1.2"\n"live, east" = 1.6\n',
                "",
                r"line 27: \[combinations\] 1.2D\+1.6L: a table of case = factor",
            ),
            ('["U1-L0"]', '["U1-L9"]', r"line 31: \[behaviour\] tension_only 'U1-L9': there is no such member; did"),
            ('["U1-L0"]', '"U1-L0"', r"line 31: \[behaviour\] tension_only: a list of names"),
            ('["L1"]', "[1]", r"line 32: \[behaviour\] no_uplift: a list of names"),
            ('["L1"]', '["U1"]', r"line 32: \[behaviour\] no_uplift 'U1': no support there"),
            (
                "tension_only =",
                "tension_olny =",
                r"line 31: \[behaviour\] tension_olny: unknown key; did you mean tension",
            ),
            ("project = ", "projekt = ", r"line 34: \[project\] projekt: unknown key; did you mean project"),
            (
                "date = 2025-03-04",
                "date = 2025",
                r'line 35: \[project\] date: text is needed, in quotes, such as "2025"',
            ),
            ("date = 2025-03-04", "date = 10:30:00", r"line 35: \[project\] date: text is needed"),
            (
                '"factored"',
                '"facotred"',
                r"line 36: \[project\] basis: 'facotred' is not a choice.*did you mean factored",
            ),
            ('"Tannery Lane"', f'"{"x" * 201}"', r"line 34: \[project\] project: longer than 200 characters"),
            ('[project.names]\nL0 = "N1"', "names = 3", r"line 38: \[project\] names: a table is needed"),
            ('L0 = "N1"', "L0 = 7", r"line 39: \[project.names\] L0: text is needed"),
            (
                'L0 = "N1"',
                'L9 = "N1"',
                r"line 39: \[project.names\] L9: there is no such joint or member; did you mean",
            ),
        ],
    )
    def test_each_is_named_with_its_line(self, old: str, new: str, message: str) -> None:
        """Key, line where it is certain, what is wrong, what to do."""
        assert old in FULL
        assert any(re.search(message, problem) for problem in fails(FULL.replace(old, new, 1)))

    def test_all_faults_of_a_file_come_together(self) -> None:
        """Every part of the file is looked at, whatever is wrong in the others; in the order of the lines."""
        text = """\
format = 1
colour = "red"
[units]
length = "mile"
[joints]
A = [0, 0]
B = [4, "four"]
C-1 = [2, 3]
[members]
all = ["A-B", "B-Z", "A"]
[supports]
A = "pinn"
Q = "roller"
[symbols]
2P = 3
R = "r"
[cases.dead]
K = [0, -1]
A = [0, "-S"]
[cases.both]
[combinations.both]
daed = 1
dead = "one"
[behaviour]
no_uplift = 4
[project]
basis = "both"
[project.names]
A = 1
"""
        problems = fails(text)
        lines = [int(found[1]) for problem in problems if (found := re.search(r"line (\d+): ", problem))]
        assert lines == sorted(lines)
        assert {2, 4, 7, 8, 10, 12, 13, 15, 16, 18, 19, 21, 22, 23, 25, 27, 29} <= set(lines)
        assert len(set(problems)) == len(problems)

    def test_the_error_is_an_input_error(self) -> None:
        """So one except clause takes both a wrong file and a wrong truss."""
        with pytest.raises(InputError):
            files.reads("")
        assert issubclass(FileFormatError, TrusscalcError)
        assert issubclass(FileFormatError, ValueError)

    def test_no_line_is_named_where_it_is_not_certain(self) -> None:
        """A text over several lines may hold anything that looks like a key."""
        text = TRIANGLE.replace("[joints]", '[project]\nlocation = """\nC = [1]\n"""\n[joints]').replace(
            "[2, 3]", "[2]"
        )
        assert "bridge.toml: [joints] C: two numbers are needed, such as [0, 2.5]" in fails(text)

    def test_lines_count_through_nested_lists(self) -> None:
        """A bracket at the start of a line inside a list is no table."""
        text = (
            TRIANGLE.replace("A = [0, 0]", "A = [\n  0,\n  0\n]")
            .replace('["A-B", ', '[\n"A-B", # [x]\n')
            .replace('A = "pin"', "A = [\n{reaction=[\n1, 0]},\n{reaction = [0, 0]},\n]")
        )
        assert [problem.split(": ")[1] for problem in fails(text)] == ["line 14"]

    def test_many_faults_are_cut_short(self) -> None:
        """The first hundred, and how many more."""
        text = TRIANGLE + "[cases.dead]\n" + "".join(f"X{n} = [0, -1]\n" for n in range(300))
        problems = fails(text)
        assert len(problems) == MOST_PROBLEMS + 1
        assert problems[-1].endswith("and 200 more problems")


NUMBERS = [
    "__import__('os').system('true')",
    "().__class__.__bases__",
    "9**9**9",
    "9^9^9^9",
    "1e999999999",
    "-1e-999999999",
    "inf",
    "nan",
    "P",
    "lambda: 0",
    "exec('1')",
    "sqrt(-1)",
    "1/0",
    "1e400",
    "\x00",
    "\n",
    "\u202e1",
    "$(id)",
    "`id`",
    "{{7*7}}",
    "<script>alert(1)</script>",
    "(" * 500,
    "x" * 100_000,
    "sqrt(2+sqrt(2))+sqrt(3+sqrt(2))+sqrt(5+sqrt(3))+sqrt(7+sqrt(5))",
]
BARE = [
    "1e999999999",
    "-1e-999999999",
    "inf",
    "-nan",
    "9" * 4000,
    "9" * 5000,
    "0x" + "f" * 4000,
    "true",
    "{}",
    "[]",
    "1e400",
]
PLACES = {
    "coordinate": "C = [2, 3]|C = [2, {}]",
    "direction": 'B = "roller"|B = {{ reaction = [1, {}] }}',
    "load": "|[cases.dead]\nC = [0, {}]\n",
    "symbol": "|[symbols]\nQ = {}\n",
    "factor": "|[cases.dead]\n[combinations.x]\ndead = {}\n",
}


class TestHostileFiles:
    """A truss file is untrusted: a clear refusal or an exact truss, never anything else, and never for long."""

    @pytest.mark.parametrize("place", PLACES)
    @pytest.mark.parametrize(
        "value", [*map(filewriting.value_text, NUMBERS), *BARE], ids=lambda value: ascii(value)[:24]
    )
    def test_wherever_a_number_may_stand(self, place: str, value: str) -> None:
        """Programs, monsters and nonsense are refused by name of the place."""
        old, new = PLACES[place].split("|")
        new = new.format(value)
        problems = fails(TRIANGLE.replace(old, new) if old else TRIANGLE + new)
        assert any(
            mark in "".join(problems) for mark in ("[joints] C", "[supports] B", "] C F", "Q:", "x] dead", "digits")
        )

    @pytest.mark.parametrize(
        "name",
        [
            "A<b>",
            "P$1$",
            "#x",
            "O'Hara",
            "Ü2",
            "U′",
            'say "x"',
            "a|b",
            "<script>alert(1)<",
            "\\frac{1}",
            "é2",
            "e\u0301",
            "上弦",
        ],
    )
    def test_unusual_joint_names_are_kept(self, name: str) -> None:
        """They survive the way out and in again."""
        truss = Truss(
            {name: (0, 0), "B": (4, 0), "C": (2, 3)},
            {"all": [f"{name}-B", "B-C", f"C-{name}"]},
            {name: "pin", "B": "roller"},
        )
        stated = TrussFile(truss, (LoadCase(name, {name: (1, 2)}),), (Combination(f"{name}+", {name: 2}),))
        assert files.reads(files.writes(stated)) == stated

    @pytest.mark.parametrize(
        "name", ["A-B", "A,B", "A.B", " A", "A\n", "A\x1b[31m", "A\u202eB", "A\u200b", "", "x" * 41]
    )
    def test_forbidden_joint_names(self, name: str) -> None:
        """Refused, and shown so that they cannot disturb a terminal."""
        problems = fails(TRIANGLE.replace("[members]", f"{filewriting.value_text(name)} = [9, 9]\n[members]"))
        assert any("[joints]" in problem for problem in problems)

    @pytest.mark.parametrize(
        "key", ["cases", "combinations", "symbols", "supports", "project", "joints", "members", "units"]
    )
    @pytest.mark.parametrize("name", ["a\nb", "a\x1b[2J", "\u202ea", "\x7f", "x" * 100_000, "\u2028"], ids=ascii)
    def test_odd_names_stay_on_one_line(self, key: str, name: str) -> None:
        """The message is one line without control characters, whatever the key."""
        text = TRIANGLE.replace(f"[{key}]\n", "") + f"[{key}]\n{filewriting.value_text(name)} = 'x'\n"
        fails(text)

    @pytest.mark.parametrize(
        ("text", "message"),
        [
            ("a = " + "[" * 100_000, "nested too deep"),
            ("a = " + "[" * 300 + "]" * 300, "nested too deep"),
            ("a = " + "{a=" * 300 + "1" + "}" * 300, "nested too deep"),
            ("a.b.c.d.e.f.g.h.i.j = 1", "nested too deep"),
            (".".join("a" * 100_000) + " = 1", "line 1: a key of so many parts"),
            ("\n[" + ".".join(["'a'"] * 1000) + "]", "line 2: a key of so many parts"),
            ("x" * (LARGEST_FILE + 1), "too large: more than 2,000,000 bytes"),
            ("é" * (LARGEST_FILE // 2 + 1), "too large"),
            ("a = '\ud800'", "half a surrogate"),
            ("a = '\\ud800'", "unknown key"),
            ('a = "\\ud800"', "no valid TOML"),
            ("\x00", "no valid TOML"),
            ("a = 1 = 2", "no valid TOML"),
            ("PK\x03\x04", "no valid TOML"),
            ("<?xml version='1.0'?>", "no valid TOML"),
            ("", "format: is missing"),
            ("format = 1", "a truss needs joints"),
            ("a = " + "9" * 5000, "too many digits"),
        ],
        ids=lambda value: ascii(value)[:24],
    )
    def test_texts_that_are_no_truss_file(self, text: str, message: str) -> None:
        """One clear error each."""
        assert message in "\n".join(fails(text))

    @pytest.mark.parametrize(
        "text",
        [
            "[joints]\n" + "".join(f"J{n} = [{n}, 0]\n" for n in range(10_001)),
            "[members]\na = [" + '"A-B",' * 40_001 + "]",
            "[supports]\nA = [" + "{}," * 10_001 + "]",
            "[symbols]\n" + "".join(f"P{n} = 1\n" for n in range(41)),
            "".join(f"[cases.c{n}]\n" for n in range(1001)),
            "".join(f"[combinations.c{n}]\n" for n in range(1001)),
            "[cases.a]\n" + "".join(f"J{n} = 1\n" for n in range(1001)),
        ],
        ids=["joints", "members", "links", "symbols", "cases", "combinations", "loads"],
    )
    def test_too_many_of_anything(self, text: str, monkeypatch: pytest.MonkeyPatch) -> None:
        """Counted before anything is worked out."""
        monkeypatch.setitem(files.MOST, "loads", 1000)
        assert "too many" in "\n".join(fails("format = 1\n" + text))

    def test_nothing_takes_long(self) -> None:
        """A thousand wrong names among a thousand known ones."""
        n = 1000
        text = "format = 1\n[joints]\n" + "".join(f"J{i} = [{i}, {i * i}]\n" for i in range(n))
        text += "[members]\na = [" + ",".join(f'"J{i}-K{i}"' for i in range(n)) + "]\n[cases.d]\n"
        text += "".join(f"K{i} = [0, 1]\n" for i in range(n))
        start = time.process_time()
        fails(text)
        assert time.process_time() - start < 4

    @given(st.text(max_size=60))
    @settings(max_examples=60, deadline=None)
    def test_any_text_at_all(self, text: str) -> None:
        """After a good beginning: read or refused, nothing else."""
        read_or_refused(TRIANGLE + text)

    @given(
        st.dictionaries(
            st.text(max_size=8),
            st.recursive(
                st.none() | st.booleans() | st.integers() | st.floats() | st.text(max_size=8) | st.dates(),
                lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=4), inner, max_size=3),
                max_leaves=5,
            ),
            max_size=4,
        ),
        st.sampled_from(
            ["units", "joints", "members", "supports", "symbols", "cases", "combinations", "behaviour", "project"]
        ),
    )
    @settings(max_examples=80, deadline=None)
    def test_any_data_in_any_table(self, entries: dict[str, Any], table: str) -> None:
        """Whatever TOML can state in a table is read or refused by name."""
        text = TRIANGLE.replace(f"[{table}]\n", f"[old{table}]\n") + f"[{table}]\n"
        text += "".join(
            f"{filewriting.value_text(key)} = {toml(value)}\n" for key, value in entries.items() if value is not None
        )
        read_or_refused(text)


def read_or_refused(text: str) -> None:
    """Take an exact truss or a refusal in printable lines; anything else fails the test."""
    try:
        files.reads(text)
        problems: tuple[str, ...] = ()
    except FileFormatError as fault:
        problems = fault.problems
    assert all(problem.isprintable() for problem in problems)


def toml(value: Any) -> str:
    """Return any value as TOML."""
    if isinstance(value, dict):
        return (
            "{" + ", ".join(f"{filewriting.value_text(k)} = {toml(v)}" for k, v in value.items() if v is not None) + "}"
        )
    if isinstance(value, list):
        return "[" + ", ".join(toml(item) for item in value if item is not None) + "]"
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, dt.date):
        return value.isoformat()
    return filewriting.value_text(value) if isinstance(value, str) else repr(value)


names = st.text(st.characters(exclude_categories=["C"]), min_size=1, max_size=10).filter(
    lambda name: not name_fault(name)
)
lines = st.text(st.characters(exclude_categories=["C", "Zl", "Zp"]), max_size=30)
case_names = lines.filter(str.strip)
numbers = st.one_of(
    st.integers(-(10**9), 10**9),
    st.fractions(max_denominator=10**6),
    st.decimals(min_value=-(10**6), max_value=10**6, places=5),
    st.floats(-1e6, 1e6).filter(lambda x: x == 0 or abs(x) > 1e-50),
    st.builds(lambda a, n: f"{a} + sqrt({n})/3", st.integers(-99, 99), st.integers(1, 99)),
    st.builds(lambda a, n: f"{a}*sqrt(1 + sqrt({n}))", st.integers(1, 9), st.sampled_from([2, 3])),
    st.builds(lambda a: f"2*cos({a}) + 1", st.integers(1, 89)),
)


@st.composite
def truss_files(draw: st.DrawFn) -> TrussFile:
    """Draw a triangle of any names and places, with anything a file may hold."""
    a, b, c = draw(st.lists(names, min_size=3, max_size=3, unique_by=lambda name: unicodedata.normalize("NFC", name)))
    groups = draw(st.sampled_from([{"": 3}, {"all": 3}, {"rafters": 2, "tie beam": 1}, {"#1": 1, "a.b": 1, 'c"': 1}]))
    bars, stated = [f"{a}-{b}", f"{b}-{c}", f"{c}-{a}"], {}
    for group, count in groups.items():
        stated[group], bars = bars[:count], bars[count:]
    direction = (draw(numbers), 1)
    supports = {a: "pin", b: draw(st.sampled_from(["roller", {"reaction": direction}, [{"reaction": direction}]]))}
    try:
        truss = Truss(
            {a: (0, 0), b: (draw(numbers), -1000), c: (draw(numbers), 1000)},
            stated[""] if list(stated) == [""] else stated,
            supports,
            title=draw(lines),
            length=draw(st.sampled_from(["m", "ft"])),
            force=draw(st.sampled_from(["kN", "kip"])),
            tension_only=draw(st.sampled_from([(), (f"{a}-{b}",)])),
            no_uplift=draw(st.sampled_from([(), (a,)])),
        )
    except InputError:
        hypothesis.reject()
    symbols = {"P": draw(st.integers(-9, 9)), "q2": "sqrt(2)"}
    load = st.one_of(numbers, st.sampled_from(["P", "-2*P + q2/3", "P*sqrt(3)/2 - 1"]))
    drawn = draw(st.lists(case_names, max_size=4, unique=True))
    half = len(drawn) // 2
    cases = [LoadCase(name, {c: (draw(load), draw(load))}, symbols=symbols) for name in drawn[half:]]
    factor = st.one_of(numbers, st.tuples(numbers, numbers))
    factors = {case.name: draw(factor) for case in cases if case.name != "optional"}
    optional = [name for name in factors if draw(st.booleans())]
    combinations = [Combination(name, factors, optional=optional) for name in drawn[:half] if factors]
    project = Project(location=draw(lines), basis=draw(st.sampled_from(["", "service"])), names={b: draw(lines)})
    return TrussFile(truss, tuple(cases), tuple(combinations), project)


class TestWriting:
    """What is written reads back the same."""

    @given(truss_files())
    @settings(max_examples=60, deadline=None, suppress_health_check=[hypothesis.HealthCheck.too_slow])
    @pytest.mark.filterwarnings("ignore:member")
    def test_round_trip(self, stated: TrussFile) -> None:
        """Names, groups, numbers and text of any kind; and a second time the same bytes."""
        text = files.writes(stated)
        again = files.reads(text)
        if stated.truss.members[0].group:
            assert again == stated
        assert (again.cases, again.combinations, again.project) == (stated.cases, stated.combinations, stated.project)
        assert [m.name for m in again.truss.members] == [m.name for m in stated.truss.members]
        assert again.truss.joints == stated.truss.joints
        assert [j.x.rounded for j in again.truss.joints] == [j.x.rounded for j in stated.truss.joints]
        assert files.writes(again) == text

    def test_the_full_file(self) -> None:
        """Equal to what was read, and readable."""
        stated = files.reads(FULL)
        text = files.writes(stated)
        assert files.reads(text) == stated
        assert 'U1 = ["5/4", "5*sqrt(3)/2"]' in text
        assert '"lower chord" = ["L0-L1", "L1-L2"]' in text
        assert "L1 = { reaction = [2, -5] }" in text
        assert '[cases."live, east"]' in text

    def test_pairs_and_optional_cases(self) -> None:
        """Read as lists, written as lists; one factor stays one."""
        text = FULL.replace('dead = "1.2"', 'dead = ["1.25", 0.90]').replace(
            '"live, east" = 1.6', '"live, east" = 1.6\noptional = ["live, east"]'
        )
        stated = files.reads(text)
        factors = {"dead": ("5/4", "9/10"), "live, east": "8/5"}
        assert stated.combinations == (Combination("1.2D+1.6L", factors, optional=["live, east"]),)
        again = files.writes(stated)
        assert 'dead = ["5/4", "9/10"]\n"live, east" = "8/5"\noptional = ["live, east"]' in again
        assert files.reads(again) == stated
        with pytest.raises(InputError, match=r"'dead' has the pair of factors 1.25 or 0.9, .*ask for the envelope"):
            stated.case("1.2D+1.6L")

    def test_members_without_a_group(self) -> None:
        """Become one group, and stay in order."""
        truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 3)}, ["A-B", "C-B", "A-C"], {"A": "pin", "B": "roller"})
        assert 'members = ["A-B", "C-B", "A-C"]' in files.writes(TrussFile(truss))

    def test_long_lists_are_broken(self) -> None:
        """No endless lines in a file that people compare."""
        text = files.writes(TrussFile(shapes.pratt(40, 4, "5*sqrt(3)/2")))
        assert max(map(len, text.splitlines())) <= 100
        assert files.reads(text).truss == shapes.pratt(40, 4, "5*sqrt(3)/2")

    def test_a_rounded_angle_stays_marked(self) -> None:
        """Or the sheet would call exact what is not."""
        stated = files.reads(TRIANGLE.replace("[2, 3]", '["4*cos(20)", "4*sin(20)"]'))
        text = files.writes(stated)
        assert text.startswith("# a number ending in")
        assert files.reads(text) == stated
        assert files.reads(text).truss.joint("C").x.rounded
        assert not files.reads(text).truss.joint("B").x.rounded

    def test_what_a_file_cannot_hold_is_not_written(self, tmp_path: Path) -> None:
        """Nor is anything left behind."""
        long = "1.37*tan(3.75)*tan(4.5)"
        truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, long)}, ["A-B", "C-B", "A-C"], {"A": "pin", "B": "roller"})
        with pytest.raises(InputError, match=r"cannot be written to a truss file: .*longer than"):
            files.write(TrussFile(truss), tmp_path / "x.toml")
        assert list(tmp_path.iterdir()) == []

    def test_cases_must_agree(self) -> None:
        """The record itself refuses what no file could state."""
        truss = files.reads(TRIANGLE).truss
        one, two = (LoadCase(name, {"C": ("P", 0)}, symbols={"P": i}) for i, name in enumerate("ab"))
        with pytest.raises(InputError, match=r"\[symbols\] P: has different values"):
            TrussFile(truss, (one, two))
        with pytest.raises(InputError, match=r"\[cases\] a: stated twice"):
            TrussFile(truss, (one, one))
        with pytest.raises(InputError, match=r"\[cases.a\] Z: there is no such joint"):
            TrussFile(truss, (LoadCase("a", {"Z": (1, 0)}),))
        plain = LoadCase("plain", {"C": (1, 0)})
        assert TrussFile(truss, (one, plain)).cases[1].symbols == one.symbols


class TestDisk:
    """Files on disk."""

    def test_there_and_back(self, tmp_path: Path) -> None:
        """Written in one move, beside nothing else."""
        path = tmp_path / "bridge.toml"
        stated = files.reads(FULL)
        files.write(stated, path)
        assert files.read(path) == stated
        assert list(tmp_path.iterdir()) == [path]

    def test_an_existing_file_stays_until_the_new_one_is_complete(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        """A full disk, say, loses nothing."""
        path = tmp_path / "bridge.toml"
        path.write_text("old")
        path.chmod(0o640)

        def full(_: int) -> None:
            raise OSError(28, "No space left on device")

        with monkeypatch.context() as patch:
            patch.setattr(os, "fsync", full)
            with pytest.raises(OSError, match="No space left"):
                files.write(files.reads(FULL), str(path))
        assert path.read_text() == "old"
        assert list(tmp_path.iterdir()) == [path]
        files.write(files.reads(FULL), path)
        assert path.read_text().startswith("format = 1")
        assert stat.S_IMODE(path.stat().st_mode) == 0o640

    def test_what_cannot_be_read(self, tmp_path: Path) -> None:
        """Directories, absent files, pipes, other encodings: one error, with the path."""
        for path, message in (
            (tmp_path, "is not an ordinary file"),
            (tmp_path / "none.toml", "there is no such file"),
            (tmp_path / "no" / "none.toml", "there is no such file"),
            ("a\0b", "cannot be read"),
            ("x" * 5000, "cannot be read"),
            ("", "not an ordinary file"),
        ):
            with pytest.raises(FileFormatError, match=message) as caught:
                files.read(path)
            assert str(caught.value).isprintable()
        os.mkfifo(tmp_path / "pipe")
        with pytest.raises(FileFormatError, match="is not an ordinary file"):
            files.read(tmp_path / "pipe")
        latin = tmp_path / "latin.toml"
        latin.write_bytes(FULL.replace("Tannery", "Tännery").encode("latin-1"))
        with pytest.raises(FileFormatError, match=r"latin.toml: line 2: is not UTF-8 text"):
            files.read(latin)
        latin.write_bytes(FULL.encode("utf-16"))
        with pytest.raises(FileFormatError, match="line 1: is not UTF-8 text"):
            files.read(latin)
        latin.write_bytes(b"#" * (LARGEST_FILE + 10))
        with pytest.raises(FileFormatError, match="too large"):
            files.read(latin)

    def test_the_path_is_in_every_message(self, tmp_path: Path) -> None:
        """So that a batch of files can be mended."""
        path = tmp_path / "bad.toml"
        path.write_text("format = 1\n[joints]\nA = 1\n")
        with pytest.raises(FileFormatError) as caught:
            files.read(path)
        assert all(problem.startswith(f"{path}: ") for problem in caught.value.problems)
