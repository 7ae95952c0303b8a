"""Every fault of a stated truss is found, named and reported with all the others."""

from __future__ import annotations

import math
import time
import warnings
from typing import Any

import pytest

from trusscalc.errors import InputError, TrusscalcWarning, UnknownNameError
from trusscalc.exacttext import parse
from trusscalc.truss import LONGEST_NAME, Link, Truss, name_fault

JOINTS: dict[str, Any] = {"A": (0, 0), "B": (4, 0), "C": (2, "2*sqrt(3)")}
MEMBERS: Any = ["A-B", "B-C", "A-C"]
SUPPORTS: dict[str, Any] = {"A": "pin", "B": "roller"}


def truss(**changed: Any) -> Truss:
    """Return a triangle with something changed."""
    return Truss(**{"joints": JOINTS, "members": MEMBERS, "supports": SUPPORTS, **changed})


def test_what_is_stated_is_kept() -> None:
    """Order, spelling, groups and exact coordinates."""
    roof = truss(members={"rafters": ["C-A", " B - C "], "tie": ("A-B",)}, title="Barn", length="ft", force="kip")
    assert [member.name for member in roof.members] == ["C-A", "B-C", "A-B"]
    assert [member.group for member in roof.members] == ["rafters", "rafters", "tie"]
    assert roof.joint("C").y == parse("2*sqrt(3)")
    assert (roof.title, roof.length, roof.force) == ("Barn", "ft", "kip")
    assert roof == truss(members={"rafters": ["C-A", "B-C"], "tie": ["A-B"]}, title="Barn", length="ft", force="kip")


def test_numbers_of_any_kind() -> None:
    """A float means its shortest decimal."""
    assert truss(joints={**JOINTS, "B": (2.37, "-1e-3")}).joint("B").x == parse("237/100")


def test_supports_become_links() -> None:
    """Named as the sheet names reactions."""
    links = truss(supports={"A": "pin", "B": {"reaction": (2, "-5")}}).links
    assert [link.name for link in links] == ["A.x", "A.y", "B.r"]
    assert (links[2].dx, links[2].dy) == (parse("2"), parse("-5"))
    links = truss(supports={"A": "roller", "C": [{"reaction": [1, 0]}, {"reaction": [1, 1]}]}).links
    assert [(link.name, link.joint) for link in links] == [("A.y", "A"), ("C.r1", "C"), ("C.r2", "C")]


def test_members_are_found_either_way_round() -> None:
    """By either spelling; unknown names get the nearest."""
    assert truss().member("C-B").name == "B-C"
    with pytest.raises(UnknownNameError, match="there is no member 'A-D'; did you mean A-") as caught:
        truss().member("A-D")
    assert caught.value.name == "A-D"
    with pytest.raises(UnknownNameError, match="there is no joint 'D'"):
        truss().joint("D")


@pytest.mark.parametrize(
    ("changed", "message"),
    [
        ({"joints": {}}, "a truss needs joints"),
        ({"joints": {**JOINTS, "D": (4, 0)}}, "D: lies at the same place as B"),
        ({"joints": {**JOINTS, "D": ("sqrt(16)", "sqrt(2)-sqrt(2)")}}, "D: lies at the same place as B"),
        ({"joints": {**JOINTS, "D": (1,)}}, "D: two numbers are needed"),
        ({"joints": {**JOINTS, "D": "12"}}, "D: two numbers are needed"),
        ({"joints": {**JOINTS, "D": 3}}, "D: two numbers are needed"),
        ({"joints": {**JOINTS, "D": (1, 2, 3)}}, "D: two numbers are needed"),
        ({"joints": {**JOINTS, "D": (1, "two")}}, "D y: 'two'"),
        ({"joints": {**JOINTS, "D": (float("inf"), 0)}}, "D x: .*not a finite number"),
        ({"joints": {**JOINTS, "D": (1, 2)}}, "D: no member ends there"),
        ({"joints": {**JOINTS, "\u00c92": (1, 2), "E\u03012": (1, 3)}}, "reads the same as another joint"),
        ({"joints": {**JOINTS, 5: (1, 2)}}, r"\[joints\] '5'"),
        ({"members": []}, "a truss needs members"),
        ({"members": ["A-B", "A-D"]}, "there is no joint 'D'"),
        ({"members": [*MEMBERS, "B-A"]}, r"'B-A': stated twice \(also as A-B\)"),
        ({"members": [*MEMBERS, "A-A"]}, "both ends are the same joint"),
        ({"members": [*MEMBERS, "AB"]}, "a member is written joint-joint"),
        ({"members": [*MEMBERS, "A-B-C"]}, "a member is written joint-joint"),
        ({"members": [*MEMBERS, "A-"]}, "a member is written joint-joint"),
        ({"members": [*MEMBERS, 7]}, "a member is written joint-joint"),
        ({"members": {"chord": "A-B"}}, "chord: a list of members is needed"),
        ({"members": {"chord": 5}}, "chord: a list of members is needed"),
        ({"supports": {}}, "a truss needs supports"),
        ({"supports": {"D": "pin"}}, r"\[supports\] D: there is no such joint"),
        ({"supports": {"A": "pinn"}}, "'pinn' is no support"),
        ({"supports": {"A": None}}, "'None' is no support"),
        ({"supports": {"A": {}}}, "is no support"),
        ({"supports": {"A": {"reactoin": (0, 1)}}}, "A reactoin: unknown key; did you mean reaction"),
        ({"supports": {"A": {"reaction": (0, 1), "k": 3}}}, "A k: unknown key"),
        ({"supports": {"A": {"reaction": (0, "0*sqrt(2)")}}}, r"a direction other than \[0, 0\]"),
        ({"supports": {"A": {"reaction": 5}}}, "A reaction: two numbers are needed"),
        ({"supports": {"A": []}}, "the list of links is empty"),
        ({"supports": {"A": ["pin"]}}, "'pin' is no support"),
        ({"length": "metre"}, r"\[units\] length: unknown unit 'metre'"),
        ({"force": "m"}, r"\[units\] force: unknown unit 'm'"),
        ({"tension_only": ["A-D"]}, "tension_only 'A-D': there is no such member"),
        ({"tension_only": [7]}, "tension_only '7': there is no such member"),
        ({"tension_only": "A-B"}, "tension_only: a list of names is needed"),
        ({"no_uplift": ["C"]}, "no_uplift 'C': no support there"),
        ({"no_uplift": "B"}, "no_uplift: a list of names is needed"),
    ],
)
def test_each_fault_is_named(changed: dict[str, Any], message: str) -> None:
    """What, where, and what to do."""
    with pytest.raises(InputError, match=message):
        truss(**changed)


def test_all_faults_come_together() -> None:
    """One run shows everything there is to mend."""
    with pytest.raises(InputError) as caught:
        Truss(
            {"A": (0, 0), "B": (0, 0), "C-D": (1, 1), "E": (1, "x"), "F": (2, 2)},
            ["A-B", "A-A", "A-Z", "F-A"],
            {"A": "pin", "Q": "roller", "F": "rolller"},
            length="mile",
            tension_only=["A-E"],
        )
    text = "\n".join(caught.value.problems)
    for part in ("same place as A", "'C-D'", "E y", "both ends", "'Z'", "Q: there is no", "'rolller'", "mile", "'A-E'"):
        assert part in text
    assert len(caught.value.problems) >= 9
    assert isinstance(caught.value, ValueError)


@pytest.mark.parametrize(
    "name",
    [
        "A<b>",
        "P$1$",
        "#x",
        "O'Hara",
        "Ü2",
        "上弦1",
        "L 1",
        "a|b",
        'say "x"',
        "<script>",
        "\\frac",
        "x" * 40,
        "e\u0301",
        "U′",
    ],
)
def test_unusual_names_are_names(name: str) -> None:
    """Whatever prints and does not clash with how members and reactions are written."""
    assert name_fault(name) == ""
    named = Truss(
        {name: (0, 0), "B": (1, 0), "C": (0, 1)}, [f"{name}-B", "B-C", f"C-{name}"], {name: "pin", "B": "roller"}
    )
    assert named.member(f"B-{name}").start == name
    assert named.links[0].name == f"{name}.x"


@pytest.mark.parametrize(
    ("name", "message"),
    [
        ("", "1 to 40 characters"),
        (" A", "blank"),
        ("A ", "blank"),
        ("A-B", "'-'"),
        ("A,B", "','"),
        ("A.x", "'.'"),
        ("A\n", r"U\+000A|blank"),
        ("A\tB", r"U\+0009"),
        ("A\x00B", r"U\+0000"),
        ("A\u202eB", r"U\+202E"),
        ("A\u200bB", r"U\+200B"),
        ("A\u00a0B", r"U\+00A0"),
        ("A\u2028B", r"U\+2028"),
        ("A\ud800", r"U\+D800"),
        ("x" * (LONGEST_NAME + 1), str(LONGEST_NAME)),
    ],
)
def test_forbidden_names(name: str, message: str) -> None:
    """With the character, so that it can be found even when it does not show."""
    with pytest.raises(InputError, match=r"\[joints\]") as caught:
        truss(joints={**JOINTS, name: (9, 9)})
    assert caught.match(message)


class TestRunThrough:
    """A member through a joint it does not name is probably a slip, and is said."""

    def test_it_is_told(self) -> None:
        """Exactly decided, also on a slope with surds."""
        joints = {**JOINTS, "D": (1, "sqrt(3)"), "E": (3, 1)}
        with pytest.warns(TrusscalcWarning, match="member A-C runs through joint D"):
            truss(joints=joints, members=[*MEMBERS, "D-E", "E-B"])

    @pytest.mark.parametrize(
        "place", [(1, "sqrt(3) + 1e-15"), ("1e-14 + 1", "sqrt(3)"), (-1, "-sqrt(3)"), (3, "3*sqrt(3)")]
    )
    def test_near_is_not_on(self, place: tuple[object, object]) -> None:
        """Nor is beyond the ends."""
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            truss(joints={**JOINTS, "D": place}, members=[*MEMBERS, "D-B"])

    def test_a_tall_mast_takes_no_long_time(self) -> None:
        """Thousands of joints in two lines, upright: the narrower direction is searched."""
        n = 1500
        joints = {f"{side}{i}": (x, i) for side, x in (("L", 0), ("R", 1)) for i in range(n)}
        members = [f"{side}{i}-{side}{i + 1}" for side in "LR" for i in range(n - 1)] + [f"L{i}-R{i}" for i in range(n)]
        start = time.process_time()
        Truss(joints, members, {"L0": "pin", "R0": "roller"})
        assert time.process_time() - start < 2

    def test_coordinates_that_cannot_meet_are_an_input_error(self) -> None:
        """Four independent nested roots are more than one number may hold."""
        far = "sqrt(2+sqrt(2)) + sqrt(3+sqrt(2)) + sqrt(5+sqrt(3))"
        joints = {"A": (0, 0), "B": (far, far), "C": ("sqrt(7+sqrt(5))", "sqrt(7+sqrt(5))")}
        with pytest.raises(InputError, match="cannot be computed with together"):
            Truss(joints, ["A-B", "B-C"], {"A": "pin", "B": "roller"})


class TestFloats:
    """What the numeric route is handed."""

    def test_coordinates_and_directions(self) -> None:
        """Nearest floats, and unit directions."""
        floats = truss(supports={"A": "pin", "B": {"reaction": (3, -4)}}).as_floats()
        assert floats.joints == {"A": (0.0, 0.0), "B": (4.0, 0.0), "C": (2.0, 2 * math.sqrt(3))}
        assert floats.members == (("A-B", "A", "B"), ("B-C", "B", "C"), ("A-C", "A", "C"))
        assert floats.links[2] == ("B.r", "B", 0.6, -0.8)

    def test_a_direction_of_any_length(self) -> None:
        """Its length has no meaning, so it must not overflow either."""
        floats = truss(supports={"A": "pin", "B": {"reaction": (3e200, 4e200)}}).as_floats()
        assert floats.links[2][2:] == pytest.approx((0.6, 0.8))


def test_records_are_frozen() -> None:
    """A truss that was checked stays as it was."""
    with pytest.raises(AttributeError):
        truss().title = "other"  # type: ignore[misc]
    with pytest.raises(AttributeError):
        Link("A.x", "A", parse("1"), parse("0")).dx = parse("2")  # type: ignore[misc]
