"""The load tables of a truss file: read, written back the same, and every fault told with its line."""

from __future__ import annotations

import pytest

from trusscalc.errors import FileFormatError, InputError, UnknownNameError
from trusscalc.exacttext import number
from trusscalc.files import reads, writes
from trusscalc.trussfile import TrussFile

BRIDGE = """format = 1
[units]
length = "m"
force = "kN"
[joints]
L0 = [0, 0]
L1 = [4, 0]
L2 = [8, 0]
U1 = [4, 3]
[members]
deck = ["L0-L1", "L1-L2"]
web = ["L0-U1", "U1-L2", "U1-L1"]
[supports]
L0 = "pin"
L2 = "roller"
[symbols]
g = 2
[cases.dead]
U1 = [0, -1]
"""
LOADS = """
[chains.deck]
joints = ["L0", "L1", "L2"]
[chains."upper way"]
joints = ["L2", "U1", "L0"]
[[panel_loads.dead]]
line = ["2", "5"]
along = "deck"
from = 1
to = "6.5"
[[panel_loads.dead]]
self_weight = "g"
members = ["web", "L0-L1"]
[[panel_loads.dead]]
density = "78.5"
density_unit = "kN/m3"
section = 123
section_unit = "cm2"
[[panel_loads.snow]]
area = "1.2"
width = 5
along = ["L0", "U1"]
beside = { offset = "1.2", spacing = 6 }
[[panel_loads.wind]]
line = 3
along = "upper way"
direction = "normal"
[[panel_loads.pipe]]
point = 12
along = "deck"
at = 3
direction = [1, -1]
[trains.pair]
axles = [6, 24]
spacing = [14]
impact = "0.33"
lane = "0.64"
share = "1.15"
omit = true
follow = { after = 5, per_length = 8 }
beside = { from = "0.8", per_length = 80 }
[trains.varied]
axles = [6, 24, 24]
spacing = [14, [14, 30]]
[trains.design]
published = "LM71"
share = "1/2"
omit = false
[moving.live]
train = "design"
along = "deck"
[moving.pairs]
train = "pair"
along = "upper way"
[combinations.strength]
dead = ["1.25", "0.90"]
live = "1.75"
optional = ["live"]
[published_combinations]
table = "EN 1990:2002 6.10 set B"
cases = { G = "dead", Q = ["snow", "wind"] }
psi0 = { snow = "0.5" }
categories = { wind = "wind" }
own = { gamma_Q = "1.6" }
"""


def faults(text: str) -> list[str]:
    """Return the problems of a text that must be refused."""
    with pytest.raises(FileFormatError) as caught:
        reads(text)
    return list(caught.value.problems)


@pytest.fixture(name="full", scope="module")
def _full() -> TrussFile:
    return reads(BRIDGE + LOADS)


def test_everything_is_written_back_the_same(full: TrussFile) -> None:
    """Chains, trains with all their keys, panel loads of each kind, a published table with the user's own factor."""
    again = reads(writes(full))
    assert again == full
    assert again.acting == full.acting
    assert again.all_combinations == full.all_combinations


def test_panel_loads_are_added_to_their_case(full: TrussFile) -> None:
    """U1 has 1 kN stated, its shares of the weights by hand, and 5 kN of the members at 2 kN/m."""
    by_rule = [{load.joint: load.fy for load in each.loads}.get("U1", number(0)) for each in full.spreads()[:3]]
    assert full.case("dead").value(by_rule[1]) == -number(2) * (5 + 5 + 3) / 2
    assert by_rule[2] == -number("78.5") * number("0.0123") * (5 + 5 + 3) / 2
    dead = {load.joint: load.fy for load in full.case("dead").loads}
    assert dead["U1"] == number(-1) + by_rule[1] + by_rule[2]
    assert [case.name for case in full.acting] == ["dead", "snow", "wind", "pipe"]
    assert full.cases[0].loads[0].fy == -1


def test_trains_by_name_and_published_ones(full: TrussFile) -> None:
    """In the file's units; a published one that the file does not name too."""
    assert [train.axles for train in full.train("pair")] == [(6, 24)]
    assert full.train("design")[0].share == number("1/2")
    assert len(full.train("HL-93 metric")) == 2
    with pytest.raises(UnknownNameError, match="there is no train 'pear'; did you mean pair"):
        full.train("pear")


def test_chains_by_name_and_by_joints(full: TrussFile) -> None:
    """Both prove that they fit."""
    assert full.chain("deck").joints == full.chain("L0,L1,L2").joints
    with pytest.raises(InputError, match="no member joins L0 and L2"):
        full.chain("L0,L2")


@pytest.mark.parametrize(
    ("old", "new", "placed", "told"),
    [
        ('joints = ["L0", "L1", "L2"]', 'joints = ["L0", "L2"]', False, "no member joins L0 and L2"),
        ('joints = ["L0", "L1", "L2"]', 'joints = "L0"', True, "[chains.deck] joints: a list of joint names is needed"),
        ('joints = ["L0", "L1", "L2"]', 'joint = ["L0"]', True, "joint: unknown key; did you mean joints?"),
        ("spacing = [14]", "spacing = [-14]", True, "[trains.pair] spacing: spacing 1 is negative"),
        ("spacing = [14]", "spacing = [14, 3]", True, "[trains.pair]"),
        ('train = "design"', 'train = "desing"', True, "there is no 'desing' under [trains]; did you mean design?"),
        ('train = "design"\n', "", False, "[moving.live] train: a name stated under [trains] is needed"),
        ('along = "upper way"\n[combinations', 'along = "lower way"\n[combinations', True, "did you mean upper way?"),
        ('published = "LM71"', 'published = "LM17"', True, "did you mean LM71?"),
        ('live = "1.75"', 'lvie = "1.75"', True, "there is no such case; did you mean live?"),
        ('line = ["2", "5"]', 'lines = ["2", "5"]', True, "unknown key; did you mean line?"),
        ("at = 3", "at = 30", False, "off the chain"),
        ('members = ["web", "L0-L1"]', 'members = ["webs"]', False, "webs"),
        ("[[panel_loads.pipe]]", "[panel_loads.pipe]", True, "write [[panel_loads.pipe]] with double brackets"),
        ('table = "EN 1990:2002 6.10 set B"', 'table = "EN 1990 6.10"', True, "did you mean EN 1990:2002 6.10"),
        ('Q = ["snow", "wind"]', 'Q = ["snow", "wint"]', False, "wint"),
        (
            "[moving.live]",
            '[moving.dead]\ntrain = "pair"\nalong = "deck"\n[moving.live]',
            False,
            "[moving] dead: is also the name of a load case",
        ),
    ],
)
def test_each_fault_is_told(old: str, new: str, *, placed: bool, told: str) -> None:
    """What, where, what to do, with the line where that is certain."""
    text = BRIDGE + LOADS
    assert old in text
    text = text.replace(old, new, 1)
    problems = faults(text)
    problem = next((each for each in problems if told in each), None)
    assert problem, problems
    if placed:
        line = text[: text.index(new)].count("\n") + 1
        assert problem.startswith(f"line {line}:")


def test_several_faults_at_once() -> None:
    """Over all load tables."""
    text = (BRIDGE + LOADS).replace("spacing = [14]", "spacing = [0]").replace("width = 5", "width = -5")
    problems = faults(text.replace('train = "pair"', 'train = "pear"'))
    assert len([each for each in problems if "pear" in each or "width" in each or "spacing" in each]) == 3


def test_a_file_of_too_many_entries_is_refused() -> None:
    """Before any of them is looked at."""
    many = "".join(f"[trains.t{place}]\naxles = [1]\n" for place in range(201))
    assert any("too many entries under [trains]: 201" in each for each in faults(BRIDGE + many))


def test_a_combination_of_a_standard_is_written_as_the_table(full: TrussFile) -> None:
    """Listed one by one it would lose its source."""
    with pytest.raises(InputError, match="give the table as `published`"):
        writes(TrussFile(full.truss, full.acting, full.all_combinations[1:]))
