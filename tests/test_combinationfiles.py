"""Combinations of the user's own, from TOML and from tables in text."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from trusscalc import files
from trusscalc.combinationfiles import MOST_COMBINATIONS, read_combinations
from trusscalc.errors import FileFormatError
from trusscalc.filetext import LARGEST_FILE
from trusscalc.loads import Combination

# ASCE/SEI 7-22 2.3.1, 2a, read in a secondary transcription; the pair of AASHTO LRFD Strength I for DC, from memory.
EXPECTED = (
    Combination("1.4D", {"dead": "1.4"}),
    Combination("1.2D + 1.6L, snow", {"dead": "1.2", "live": "1.6", "snow": "0.3"}, optional=["snow"]),
    Combination("uplift", {"dead": ("1.25", "0.90"), "live": ("1", "0.5")}, optional=["live"]),
)
COMMAS = """\
combination,dead,live,snow
1.4D,1.4,,
"1.2D + 1.6L, snow",1.2,1.6,(0.3)
uplift,1.25/0.90,(1/0.5),
"""
SEMICOLONS = """\
Combination;dead;live;snow
1.4D;1,4;;
1.2D + 1.6L, snow;1,2;1.6;(0,3)
uplift; 1,25 / 0,90 ;( 1 / 0,5 );
"""
TOML = """\
[combinations."1.4D"]
dead = 1.4
[combinations."1.2D + 1.6L, snow"]
dead = "1.2"
live = "1.6"
snow = "0.3"
optional = ["snow"]
[combinations.uplift]
dead = ["1.25", "0.90"]
live = [1, 0.5]
optional = ["live"]
"""


def problems_of(path: Path, content: str | bytes) -> list[str]:
    """Return what is told about a file, without its name, which every line must start with."""
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    with pytest.raises(FileFormatError) as caught:
        read_combinations(path)
    assert all(problem.startswith(f"{path}: ") and problem.isprintable() for problem in caught.value.problems)
    return [problem.removeprefix(f"{path}: ") for problem in caught.value.problems]


class TestReading:
    """The same combinations, however they are written."""

    @pytest.mark.parametrize("mark", ["", "\N{ZERO WIDTH NO-BREAK SPACE}"])
    @pytest.mark.parametrize("line_end", ["\n", "\r\n"])
    @pytest.mark.parametrize(
        ("name", "text"),
        [
            ("own.csv", COMMAS),
            ("own.csv", SEMICOLONS),
            ("own.txt", SEMICOLONS.replace(";", "\t")),
            ("own.csv", COMMAS.replace("combination", '"combination"', 1).replace("1.4,,", "1.4,,\n\n,,,")),
            ("own.csv", f"\n  \n{SEMICOLONS}\n;;;\n"),
            ("own.toml", TOML),
            ("OWN.TOML", f"format = 1\n{TOML}"),
        ],
    )
    def test_forms(self, tmp_path: Path, name: str, text: str, line_end: str, mark: str) -> None:
        """Commas, semicolons, tabs; decimal commas where commas do not part; a byte-order mark; any line end."""
        path = tmp_path / name
        path.write_bytes((mark + text).replace("\n", line_end).encode())
        assert read_combinations(path) == EXPECTED
        assert read_combinations(str(path)) == EXPECTED

    def test_as_in_a_truss_file(self, tmp_path: Path) -> None:
        """The tables of a truss file are read by the same words."""
        path = tmp_path / "own.toml"
        path.write_text(TOML)
        joints = '[joints]\nA = [0, 0]\nB = [4, 0]\nC = [2, 3]\n[members]\nall = ["A-B", "B-C", "C-A"]\n'
        cases = "[supports]\nA = 'pin'\nB = 'roller'\n[cases.dead]\n[cases.live]\n[cases.snow]\n"
        stated = files.reads(f"format = 1\n{joints}{cases}{TOML}")
        assert stated.combinations == read_combinations(path) == EXPECTED

    def test_exact_text_is_a_factor_too(self, tmp_path: Path) -> None:
        """But a slash parts a pair."""
        path = tmp_path / "own.csv"
        path.write_text('combination,dead,live\na,0.85*1.35,(1 + 1)*sqrt(2)\nb,(4/3),"(0.85*1.35)"\n')
        assert read_combinations(path) == (
            Combination("a", {"dead": "1.1475", "live": "2*sqrt(2)"}),
            Combination("b", {"dead": ("4", "3"), "live": "1.1475"}, optional=["dead", "live"]),
        )

    @settings(max_examples=60, deadline=None)
    @given(
        st.sampled_from(",;\t"),
        st.lists(
            st.lists(st.decimals(-9, 9, places=3), min_size=1, max_size=2).map(tuple) | st.none(),
            min_size=3,
            max_size=3,
        ).filter(any),
        st.sampled_from(".,"),
    )
    def test_what_is_written_is_what_is_read(
        self, tmp_path_factory: pytest.TempPathFactory, delimiter: str, cells: list[Any], point: str
    ) -> None:
        """Any factors, in every way of writing them."""
        written = ["/".join(f"{factor:f}" for factor in cell) if cell else "" for cell in cells]
        if delimiter != ",":
            written = [cell.replace(".", point) for cell in written]
        path = tmp_path_factory.mktemp("drawn") / "own.csv"
        path.write_text("".join(f"{delimiter.join(row)}\n" for row in (["combination", *"abc"], ["x", *written])))
        factors = {case: cell for case, cell in zip("abc", cells, strict=True) if cell}
        assert read_combinations(path) == (Combination("x", factors),)


class TestFaults:
    """Each with its row and column, and what to do."""

    @pytest.mark.parametrize(
        ("text", "message"),
        [
            ("", "the head has to start with 'combination' and name the cases, parted by commas, semicolons or tabs"),
            ("name,dead\nx,1\n", "the head has to start with 'combination'"),
            ("combination\nx\n", "the head has to start with 'combination'"),
            ("combination dead live\n", "the head has to start with 'combination'"),
            ("combination|dead\n", "the head has to start with 'combination'"),
            ("combination,dead\n", "states no combinations; write one on each row below the head"),
            ("combination,dead,\nx,1,2\n", "row 1, column 3: a name is needed; the head names a case over each column"),
            ("combination,dead,dead\nx,1,2\n", "row 1, column 3: the case 'dead' has a column already; join the two"),
            ("combination,optional\nx,1\n", "row 1, column 2: no case may be called 'optional' here; write (1.6) in"),
            ('combination,"de\x07ad"\nx,1\n', "row 1, column 2: the character U+0007 does not belong"),
            (
                "combination,dead\nx,1,2\n",
                "row 2: has 3 cells, and the head has 2; write every delimiter, and decimals",
            ),
            (
                "combination,dead\nx,1,25\n",
                "row 2: has 3 cells, and the head has 2; write every delimiter, and decimals",
            ),
            ("combination;dead\nx\n", "row 2: has 1 cells, and the head has 2; write every delimiter"),
            ("combination,dead,live\n,1,2\n", "row 2, column 1: a name is needed"),
            ("combination,dead\n\nx,1\nx,2\n", "row 4, column 1: 'x' is already the name of another row; rename one"),
            ("combination,dead\nx,\n", "row 2: 'x' has no factor; write one under a case"),
            ("combination,dead,live\nx,1,1.x\n", "row 2, column 3 (live): '1.x'"),
            ("combination,dead,live\nx,1,one\n", "row 2, column 3 (live): 'one'"),
            ("combination,dead,live\nx,1,(one)\n", "row 2, column 3 (live): 'one'"),
            ("combination,dead\nx,()\n", "row 2, column 2 (dead): "),
            ("combination,dead\nx,1.25/\n", "row 2, column 2 (dead): "),
            (
                "combination,dead\nx,1/2/3\n",
                "row 2, column 2 (dead): '1/2/3': one factor is needed, or the two of a pair",
            ),
            ('combination,dead\nx,"1,25"\n', "row 2, column 2 (dead): '1,25': the character ','"),
            ("combination;dead\nx;1.250,5\n", "row 2, column 2 (dead): '1.250,5': the character ','"),
            ("combination;dead\nx;1,250,5\n", "row 2, column 2 (dead): '1,250,5': the character ','"),
            ("combination,dead\nx,1e999\n", "row 2, column 2 (dead): '1e999'"),
            ('combination,dead\nx,"1\n', "row 2: is no row of cells: unexpected end of data; check its quotes"),
            ('combination,dead\n"x"y,1\n', "row 2: is no row of cells: ',' expected after '\"'; check its quotes"),
            ('combination,dead\n"x\ny",1\n', "row 3, column 1: the character U+000A does not belong"),
            (b"combination,dead\nx\xe4,1\n", "line 2: is not UTF-8 text; save the file as UTF-8"),
            ("combination,dead\nx,1\n".encode("utf-16"), "line 1: is not UTF-8 text; save the file as UTF-8"),
            (f"combination,dead\n{'x' * 201},1\n", "row 2, column 1: longer than 200 characters; shorten it"),
            (f"combination,dead\nx,{'1' * 140_000}\n", "row 2: is no row of cells: field larger than field limit"),
            (f"combination,dead\n{',' * LARGEST_FILE}", f"too large: more than {LARGEST_FILE:,} characters"),
        ],
    )
    def test_each_is_named(self, tmp_path: Path, text: str | bytes, message: str) -> None:
        """In a table in text."""
        problems = problems_of(tmp_path / "own.csv", text)
        assert any(problem.startswith(message) for problem in problems), problems

    @pytest.mark.parametrize(
        ("text", "message"),
        [
            ("", "combinations: none are stated; write [combinations.NAME] with"),
            ("combinations = 3", "line 1: combinations: none are stated"),
            ("[combinations]", "line 1: combinations: none are stated"),
            ("[combination.x]\ndead = 1", "combination: unknown key; only [combinations.NAME] is read here"),
            (f"{TOML}[joints]\n", "line 12: joints: unknown key; only [combinations.NAME] is read here"),
            (f"format = 2\n{TOML}", "line 1: format: is not known to this version, which reads format = 1"),
            (f"format = true\n{TOML}", "line 1: format: is not known to this version"),
            ("[combinations.x]\ndead = 'one'", "line 2: [combinations.x] dead: 'one'"),
            ("[combinations.x]\ndead = [1]", "line 2: [combinations.x] dead: one factor is needed, or a pair"),
            ("[combinations.x]\ndead = 1\noptional = ['dad']", "line 3: [combinations.x] optional 'dad': is not among"),
            ("[combinations]\nx = 3", "line 2: [combinations] x: a table of case = factor is needed"),
            ("[combinations.' ']\ndead = 1", "line 1: [combinations]  : a name is needed"),
            ("[combinations.x", "is no valid TOML: "),
            (b"[combinations.x]\nd\xe4d = 1\n", "line 2: is not UTF-8 text; save the file as UTF-8"),
        ],
    )
    def test_each_is_named_in_toml(self, tmp_path: Path, text: str | bytes, message: str) -> None:
        """With its line, as in a truss file."""
        problems = problems_of(tmp_path / "own.toml", text)
        assert any(problem.startswith(message) for problem in problems), problems

    def test_all_faults_come_together(self, tmp_path: Path) -> None:
        """In the order of the rows; and what is right around them is no fault."""
        text = "combination,dead,live\na,1,2\nb,x,y\nc,1\n,,3\nd,1,2\na,,\n"
        assert [problem.split(": ")[0] for problem in problems_of(tmp_path / "own.csv", text)] == [
            "row 3, column 2 (dead)",
            "row 3, column 3 (live)",
            "row 4",
            "row 5, column 1",
            "row 7",
        ]

    def test_too_many(self, tmp_path: Path) -> None:
        """As many as a truss file may hold, and not one more; of faults no more than can be read."""
        rows = [f"c{n},1\n" for n in range(MOST_COMBINATIONS)]
        path = tmp_path / "own.csv"
        path.write_text("".join(["combination,dead\n", *rows]))
        assert len(read_combinations(path)) == MOST_COMBINATIONS
        assert problems_of(path, "".join(["combination,dead\n", *rows, "one,1\n"])) == [
            "row 1002: at most 1,000 combinations are read"
        ]
        toml = "".join(f"[combinations.c{n}]\ndead = 1\n" for n in range(MOST_COMBINATIONS + 1))
        assert "too many combinations: 1,001, and at most 1,000 are read" in problems_of(tmp_path / "own.toml", toml)
        many = problems_of(path, "".join(["combination,dead\n", *rows]).replace(",1", ",x"))
        assert many[100:] == ["and 900 more problems"]

    def test_no_file(self, tmp_path: Path) -> None:
        """The same words as for a truss file."""
        with pytest.raises(FileFormatError, match=r"none.csv: there is no such file"):
            read_combinations(tmp_path / "none.csv")
        with pytest.raises(FileFormatError, match="is not an ordinary file"):
            read_combinations(tmp_path)
