"""The commands for influence lines and envelopes: promised JSON, exit codes, errors of typing slips, sheets to file."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from load_cases import BRACED, FOOTWAY, ROOF

from trusscalc import stiffness
from trusscalc.__main__ import main
from trusscalc.files import reads
from trusscalc.loads import LoadCase
from trusscalc.truss import Truss

SUFFIXES = (".txt", ".html", ".ipynb", ".pdf")


class Ran:
    """What one run of a command left behind."""

    def __init__(self, code: int, out: str, err: str) -> None:
        self.code, self.out, self.err = code, out, err

    @property
    def data(self) -> dict[str, Any]:
        """The JSON printed."""
        return json.loads(self.out)


@pytest.fixture
def run(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> Any:
    """Return a function that runs a command on a file's text."""

    def runs(command: str, file: str, *options: str) -> Ran:
        path = tmp_path / "truss.toml"
        path.write_text(file, encoding="utf-8")
        code = main([command, str(path), *options])
        out, err = capsys.readouterr()
        assert "Traceback" not in err
        return Ran(code, out, err)

    return runs


def influence(run: Any, file: str = FOOTWAY, member: str = "U1-L2", along: str = "deck", *options: str) -> Ran:
    """Run the command for influence lines."""
    return run("influence", file, "--member", member, "--along", along, *options)  # type: ignore[no-any-return]


def envelope(run: Any, file: str = FOOTWAY, members: str = "U1-U2,L2-U1", *options: str) -> Ran:
    """Run the command for envelopes."""
    return run("envelope", file, "--members", members, *options)  # type: ignore[no-any-return]


# --- the promised JSON ------------------------------------------------------------------------------------


def test_influence_json_key_by_key(run: Any) -> None:
    """Ordinate: force for a unit load downward; position from the chain's first joint; values by hand.

    The shear of the second panel of a simple beam, times sqrt(2) (statics; common practice, no source).
    """
    ran = influence(run, FOOTWAY, "L2-U1", "deck", "--train", "sweeper", "--json")
    assert ran.code == 0
    data = ran.data
    assert data["member"] == "U1-L2"
    assert data["along"] == ["L0", "L1", "L2", "L3", "L4"]
    assert list(data["ordinates"]) == data["along"]
    assert data["ordinates"]["L2"]["exact"] == "sqrt(2)/2"
    assert data["ordinates"]["L2"]["decimal"] == 0.5**0.5
    assert data["ordinates"]["L1"] == {
        "exact": "-sqrt(2)/4",
        "decimal": -(0.125**0.5),
        "stiffness": pytest.approx(-(0.125**0.5)),
    }
    train = data["train"]
    assert train["name"] == "sweeper"
    assert set(train) == {"name", "max", "min"}
    assert train["max"]["exact"] == "355*sqrt(2)/4"
    assert train["max"]["decimal"] == pytest.approx(88.75 * 2**0.5, abs=1e-12)
    assert (train["max"]["lead_axle_at"], train["max"]["direction"]) == (15.0, "forward")
    assert train["min"]["exact"] == "-145*sqrt(2)/4"
    assert (train["min"]["lead_axle_at"], train["min"]["direction"]) == (3.0, "backward")


def test_influence_json_where_nothing_is_adverse(run: Any) -> None:
    """Value 0 and no position; without a train no key for it; a reaction as member."""
    least = influence(run, FOOTWAY, "L1-L2", "deck", "--train", "sweeper", "--json").data["train"]["min"]
    assert (least["exact"], least["decimal"], least["lead_axle_at"]) == ("0", 0.0, None)
    data = influence(run, FOOTWAY, "L0.y", "L0,L1,L2,L3,L4", "--json").data
    assert "train" not in data
    assert data["ordinates"]["L1"]["exact"] == "3/4"


def test_envelope_json_key_by_key(run: Any) -> None:
    """Members as the file spells them, both extremes, what governs, and whether the force reverses."""
    ran = envelope(run, FOOTWAY, "U1-U2,L2-U1", "--json")
    assert ran.code == 0
    members = ran.data["members"]
    assert list(members) == ["U1-U2", "U1-L2"]
    chord = members["U1-U2"]
    assert {"max", "min", "reversal"} <= set(chord)
    assert (chord["min"]["exact"], chord["min"]["decimal"], chord["min"]["combination"]) == (
        "-1833/4",
        -458.25,
        "heavy",
    )
    assert (chord["max"]["exact"], chord["max"]["combination"], chord["reversal"]) == ("-108", "heavy", False)
    assert members["U1-L2"]["reversal"] is True
    assert members["U1-L2"]["min"]["exact"] == "-219*sqrt(2)/8"


def test_undecided_members_are_null_and_exit_1(run: Any) -> None:
    """An indeterminate frame."""
    ran = envelope(run, BRACED, "B-E,A-C", "--json")
    assert ran.code == 1
    assert ran.data["members"]["A-C"]["max"]["exact"] is None
    ran = influence(run, BRACED, "A-C", "D,C", "--json")
    assert ran.code == 1
    assert set(ran.data["ordinates"]["D"].values()) == {None}


def test_a_disagreement_exits_1(run: Any, monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """And the sheet is written all the same, saying so."""
    right = stiffness.member_forces

    def wrong(truss: Truss, case: LoadCase) -> dict[str, float]:
        forces = right(truss, case)
        return forces | {"U1-U2": -forces["U1-U2"]}

    monkeypatch.setattr(stiffness, "member_forces", wrong)
    out = tmp_path / "sheet.txt"
    ran = envelope(run, FOOTWAY, "U1-U2", "--out", str(out))
    assert ran.code == 1
    assert "not all agree" in ran.out
    assert "» Conclusion. The two routes differ under dead: U1–U2." in out.read_text(encoding="utf-8")


# --- typing slips -----------------------------------------------------------------------------------------

SLIPS = [
    ("--member", "U1-L9", "no member 'U1-L9'"),
    ("--member", "L9.y", "no reaction 'L9.y'"),
    ("--member", "V(L0-L2)", "no panel of the chain deck"),
    ("--along", "dekc", "did you mean deck?"),
    ("--along", "L0,L2,L4", "no member joins L0 and L2"),
    ("--along", "L0,L7", "no joint 'L7'"),
    ("--train", "sweper", "did you mean sweeper?"),
]


@pytest.mark.parametrize(("option", "value", "told"), SLIPS)
def test_a_slip_in_an_influence_command(run: Any, tmp_path: Path, option: str, value: str, told: str) -> None:
    """Exit 2, what and where on stderr, and the file of an earlier run untouched."""
    out = tmp_path / "sheet.html"
    out.write_text("an earlier sheet", encoding="utf-8")
    asked = {"--member": "U1-L2", "--along": "deck", "--train": "sweeper", option: value}
    ran = run("influence", FOOTWAY, *(word for pair in asked.items() for word in pair), "--out", str(out))
    assert (ran.code, ran.out) == (2, "")
    assert told in ran.err
    assert out.read_text(encoding="utf-8") == "an earlier sheet"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["sheet.html", "truss.toml"]


@pytest.mark.parametrize(
    ("change", "told"),
    [
        (("spacing = [3]", "spacing = [-3]"), "[trains.sweeper] spacing: spacing 1 is negative"),
        (("live = ", "lvie = "), "[combinations.heavy] lvie: there is no such case; did you mean live?"),
        (('joints = ["L0", "L1",', 'joints = ["L0",'), "no member joins L0 and L2"),
        (('train = "sweeper"', 'train = "sweper"'), "did you mean sweeper?"),
        (('along = "deck"\n[trains', 'along = "dekc"\n[trains'), "did you mean deck?"),
    ],
)
@pytest.mark.parametrize("command", ["influence", "envelope"])
def test_a_slip_in_the_file(run: Any, tmp_path: Path, command: str, change: tuple[str, str], told: str) -> None:
    """The same by either command, and nothing written."""
    assert change[0] in FOOTWAY
    out = tmp_path / "sheet.pdf"
    asked = ("--member", "U1-L2", "--along", "deck") if command == "influence" else ("--members", "U1-L2")
    ran = run(command, FOOTWAY.replace(*change), *asked, "--out", str(out))
    assert (ran.code, ran.out) == (2, "")
    assert told in ran.err
    assert not out.exists()


def test_unknown_members_of_an_envelope_are_told_together(run: Any, tmp_path: Path) -> None:
    """One message for each."""
    ran = envelope(run, FOOTWAY, "U1-U9,L2-L9", "--out", str(tmp_path / "sheet.txt"))
    assert ran.code == 2
    assert "U1-U9" in ran.err
    assert "L2-L9" in ran.err
    assert not (tmp_path / "sheet.txt").exists()


@pytest.mark.parametrize("command", ["influence", "envelope"])
def test_a_suffix_no_sheet_has(run: Any, tmp_path: Path, command: str) -> None:
    """Refused before any work."""
    asked = ("--member", "U1-L2", "--along", "deck") if command == "influence" else ("--members", "U1-L2")
    ran = run(command, FOOTWAY, *asked, "--out", str(tmp_path / "sheet.doc"))
    assert ran.code == 2
    assert ".doc" in ran.err


# --- sheets -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("suffix", SUFFIXES)
def test_sheets_are_written_and_derived_again(run: Any, tmp_path: Path, suffix: str, capsys: Any) -> None:
    """Every format of both; pages and notebooks from themselves, a PDF beside its truss file."""
    line, extremes = tmp_path / f"line{suffix}", tmp_path / f"extremes{suffix}"
    ran = influence(run, FOOTWAY, "U1-L2", "deck", "--train", "sweeper", "--out", str(line))
    assert (ran.code, ran.out) == (0, f"{line}: all agree\n")
    ran = envelope(run, FOOTWAY, "U1-L2", "--out", str(extremes))
    assert (ran.code, ran.out) == (0, f"{extremes}: all agree\n")
    against = ["--against", str(tmp_path / "truss.toml")]
    if suffix in (".html", ".ipynb"):
        assert main(["recheck", str(line)]) == 0
        assert main(["recheck", str(extremes)]) == 0
    elif suffix == ".pdf":
        asked = ["--member", "U1-L2", "--along", "deck", "--train", "sweeper"]
        assert main(["recheck", str(line), *against, *asked]) == 0
        assert main(["recheck", str(extremes), *against, "--members", "U1-L2"]) == 0
        assert main(["recheck", str(extremes), *against, "--members", "U1-U2"]) == 1
        assert main(["recheck", str(extremes), *against]) == 2
    capsys.readouterr()


def test_json_beside_a_sheet(run: Any, tmp_path: Path) -> None:
    """Both are given."""
    out = tmp_path / "sheet.txt"
    assert envelope(run, FOOTWAY, "U1-L2", "--json", "--out", str(out)).data["agreed"] is True
    assert out.exists()


def test_detail_and_paper(run: Any, tmp_path: Path) -> None:
    """A summary derives nothing; letter paper is a wider page."""
    out = tmp_path / "sheet.txt"
    assert envelope(run, FOOTWAY, "U1-L2", "--detail", "summary", "--out", str(out)).code == 0
    assert "none on this sheet" in " ".join(out.read_text(encoding="utf-8").split())
    for paper in ("A4", "US Letter"):
        assert influence(run, BRACED, "B-E", "B,E", "--paper", paper, "--out", str(tmp_path / f"{paper}.pdf")).code == 0
    assert (tmp_path / "A4.pdf").read_bytes() != (tmp_path / "US Letter.pdf").read_bytes()


def test_further_combinations_are_written_into_the_sheets_file(run: Any, tmp_path: Path) -> None:
    """From a table beside the truss file; the sheet carries one file that states both, and is derived from it again."""
    table = tmp_path / "more.csv"
    table.write_text("combination,dead,live\nservice,1,1\n", encoding="utf-8")
    out = tmp_path / "sheet.html"
    assert envelope(run, FOOTWAY, "U1-U2", "--combinations", str(table), "--out", str(out)).code == 0
    assert main(["recheck", str(out)]) == 0
    assert "service" in out.read_text(encoding="utf-8")


def test_a_file_with_a_published_table(run: Any) -> None:
    """Combinations of the standard over the file's cases, in the terminal as in JSON."""
    ran = envelope(run, ROOF, "E-F")
    assert ran.code == 0
    count = len(reads(ROOF).all_combinations)
    assert f"{count} combinations, 1 members: both routes agree on every case" in ran.out
