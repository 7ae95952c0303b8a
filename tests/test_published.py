"""Member forces printed in books and handbooks, against every method of this library.

The sources and the printed digits are in ``tests/cases``; the exact values there were found by a separate
program (all joint equations, 90 digits) that shares nothing with this library.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping
from decimal import Decimal
from typing import Any

import pytest
from case_files import CASES, FOLDER, PublishedCase

from trusscalc import stiffness
from trusscalc.decimals import approximate
from trusscalc.errors import UnstableTrussError
from trusscalc.exact import Exact
from trusscalc.exacttext import parse
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.statics import matrix
from trusscalc.truss import Truss
from trusscalc.units import factor

NUMERIC_TOLERANCE = 1e-9
"""Part of the largest force that floats of a well-conditioned truss keep."""
ROUNDED_ANGLE_TOLERANCE = parse("1/10^20")
"""An angle that is no surd is rounded to 30 digits on the way in; 1e-20 leaves room for the arithmetic after it."""

Force = Exact | float


def by_hand(truss: Truss, loads: LoadCase) -> Mapping[str, Force | None]:
    """Return all forces by sections and joints."""
    check = check_members(truss, loads, "all")
    return {name: item.exact for name, item in {**check.members, **check.reactions}.items()}


def by_all_joints(truss: Truss, loads: LoadCase) -> Mapping[str, Force]:
    """Return all forces by the equilibrium of all joints at once."""
    return matrix.solve(truss, loads).forces


def by_stiffness(truss: Truss, loads: LoadCase) -> Mapping[str, Force]:
    """Return all forces by the displacement method."""
    return {**stiffness.member_forces(truss, loads), **stiffness.solve(truss, loads).reactions}


METHODS = {"hand": by_hand, "all joints": by_all_joints, "stiffness": by_stiffness}

STABLE = [case for case in CASES.values() if case.route != "unstable"]
CRITICAL = [case for case in CASES.values() if case.route == "unstable"]
BY_HAND = [case for case in CASES.values() if case.route == "all"]


def case_id(value: object) -> str | None:
    """Return the id under which a failing test names its source."""
    return value.id if isinstance(value, PublishedCase) else None


def every_case_by_every_method() -> list[Any]:
    """Return the table of this module: case by method."""
    return [pytest.param(case, method) for case in STABLE for method in METHODS]


def is_same(force: Force | None, expected: Exact, value: float, tolerance: float, *, surd: bool) -> bool:
    """Return whether a force is the expected one: exactly, or as nearly as its kind of number can be.

    ``value`` is the expected one with symbols at their values, ``tolerance`` holds for floats.
    """
    if isinstance(force, float):
        return abs(force - value) <= tolerance
    if force is None or surd:
        return force == expected
    return abs(force - expected) < ROUNDED_ANGLE_TOLERANCE


def differences(case: PublishedCase, found: Mapping[str, Force | None]) -> list[str]:
    """Return the members and reactions whose force is not the expected one, or that are missing on one side."""
    expected = case.expected
    values = {name: float(case.loads.value(value)) for name, value in expected.items()}
    tolerance = NUMERIC_TOLERANCE * max(abs(value) for value in values.values())
    both = [name for name in expected if name in found]
    wrong = [
        name
        for name in both
        if not is_same(found[name], expected[name], values[name], tolerance, surd=case.is_surd(name))
    ]
    return wrong + sorted(set(expected) ^ set(found))


# --- case by method ---------------------------------------------------------------------------------------


@pytest.mark.parametrize(("case", "method"), every_case_by_every_method(), ids=case_id)
def test_every_force_is_the_expected_one(case: PublishedCase, method: str) -> None:
    """Every member and reaction: exactly where the method is exact, to 1e-9 of the largest where it is not."""
    assert differences(case, METHODS[method](case.truss, case.loads)) == []


@pytest.mark.parametrize("case", BY_HAND, ids=case_id)
def test_the_check_agrees_and_names_the_sense(case: PublishedCase) -> None:
    """The engineer's call: agreed, T or C as expected, decimals of the exact values, all joints in balance."""
    check = check_members(case.truss, case.loads, "all")
    values = {name: case.loads.value(value) for name, value in case.expected.items()}
    assert check.agreed
    assert not check.residuals
    assert {item.verdict for item in everything(check).values()} == {"agrees"}
    assert {name: item.sense for name, item in check.members.items()} == {
        name: "0TC"[values[name].sign()] for name in case.data["members"]
    }
    for name, item in everything(check).items():
        assert item.decimal == pytest.approx(float(values[name]), rel=1e-14, abs=0)
        if not case.is_surd(name):
            assert item.exactness == "angle rounded"
        elif all(map(case.is_surd, values)):
            assert item.exactness == "exact"


def everything(check: MemberCheck) -> Mapping[str, Any]:
    """Return the judged members and reactions."""
    return {**check.members, **check.reactions}


@pytest.mark.parametrize("case", BY_HAND, ids=case_id)
def test_one_member_at_a_time_gives_the_same(case: PublishedCase) -> None:
    """A member asked for alone, as in practice, has the same force as among all."""
    for name in [member for member in case.data["printed"] if member in case.data["members"]][:3]:
        alone = check_members(case.truss, case.loads, [name])
        assert list(alone.members) == [name]
        assert alone.agreed
        if case.is_surd(name):
            assert alone.members[name].exact == case.expected[name]


@pytest.mark.parametrize("case", CRITICAL, ids=case_id)
def test_a_critical_form_is_refused(case: PublishedCase) -> None:
    """The count m + r = 2j is right; the exact rank refuses the truss, and stiffness does not trust itself."""
    truss, loads = case.truss, case.loads
    assert len(truss.members) + len(truss.links) == 2 * len(truss.joints)
    with pytest.raises(UnstableTrussError, match="critical form") as by_rank:
        matrix.solve(truss, loads)
    assert by_rank.value.mechanism
    with pytest.raises(UnstableTrussError, match="critical form"):
        check_members(truss, loads, "all")
    assert stiffness.solve(truss, loads).condition > 1e12


# --- printed values ---------------------------------------------------------------------------------------


def units_off(printed: str, value: Exact) -> Decimal:
    """Return by how many units of its last printed digit a printed value is off."""
    if not re.fullmatch(r"-?\d+(\.\d+)?", printed):  # printed as an exact number
        return Decimal(0) if parse(printed) == value else Decimal("Infinity")
    places = len(printed.partition(".")[2])
    return abs(approximate(value - parse(printed), 20)).scaleb(places)


def printed_values(case: PublishedCase, force: Callable[[str], Exact]) -> dict[str, Decimal]:
    """Return by how much every printed value is off, given the force of a member."""
    off = {}
    for name, printed in case.data["printed"].items():
        member, times = case.member_of(name)
        off[name] = units_off(printed, force(member) * times)
    return off


@pytest.mark.parametrize("case", STABLE, ids=case_id)
def test_rounded_values_are_the_printed_ones(case: PublishedCase) -> None:
    """To every digit printed; a source that cut digits off is off by one, which its file says."""
    values = {name: case.loads.value(force) for name, force in by_all_joints(case.truss, case.loads).items()}
    for name, off in printed_values(case, values.__getitem__).items():
        if name in case.data.get("last_digit", {}):
            assert Decimal("0.5") < off < 1, name
        else:
            assert off <= Decimal("0.5"), name


@pytest.mark.parametrize("case", [case for case in BY_HAND if case.data.get("erratum")], ids=case_id)
def test_an_error_of_the_source_comes_to_light(case: PublishedCase) -> None:
    """Where the source prints a wrong number or sense the check contradicts it, and gives the right one."""
    for erratum in case.data["erratum"]:
        member, times = case.member_of(erratum["name"])
        check = check_members(case.truss, case.loads, [member]).members[member]
        assert check.exact is not None
        value = case.loads.value(check.exact) * times
        number, sense = re.fullmatch(r"(-?[\d.]+)?\s*\(?([TC])?\)?", erratum["printed"]).groups()
        wrong_sense = sense is not None and sense != check.sense
        wrong_number = number is not None and units_off(number, abs(value) if sense else value) > 1
        assert wrong_sense or wrong_number
        assert units_off(erratum["right"], value) <= Decimal("0.5")


# --- negative controls ------------------------------------------------------------------------------------


def flipped(case: PublishedCase, joint: str) -> PublishedCase:
    """Return the case with one joint's load turned round."""
    fx, fy = case.data["loads"][joint]
    return case.with_data(loads={**case.data["loads"], joint: [f"-({fx})", f"-({fy})"]})


def lost(case: PublishedCase, joint: str) -> PublishedCase:
    """Return the case without one joint's load."""
    return case.with_data(loads={name: load for name, load in case.data["loads"].items() if name != joint})


def moved(case: PublishedCase, support: str, to: str) -> PublishedCase:
    """Return the case with a support at another joint."""
    supports = dict(case.data["supports"])
    kind = supports.pop(support)
    return case.with_data(supports={**supports, to: kind})


def in_kips(case: PublishedCase) -> PublishedCase:
    """Return the case with loads of kN read as kips and turned into kN."""
    times = str(factor("kip", "kN"))
    loads = {joint: [f"({part})*({times})" for part in load] for joint, load in case.data["loads"].items()}
    return case.with_data(loads=loads)


def in_feet(case: PublishedCase, joint: str) -> PublishedCase:
    """Return the case with the coordinates of one joint read as feet and turned into metres."""
    times = str(factor("ft", "m"))
    place = [f"({part})*({times})" for part in case.data["joints"][joint]]
    return case.with_data(joints={**case.data["joints"], joint: place})


def placed(case: PublishedCase, joint: str, x: str, y: str) -> PublishedCase:
    """Return the case with one joint somewhere else."""
    return case.with_data(joints={**case.data["joints"], joint: [x, y]})


SPOILT = {
    "load turned round": flipped(CASES["khoo_t4"], "c"),
    "symbolic load turned round": flipped(CASES["holtz_2b"], "b"),
    "load lost": lost(CASES["companion_3_10"], "P1"),
    "smallest load lost": lost(CASES["khoo_t5"], "h"),
    "roller at another joint": moved(CASES["holtz_j1"], "e", "f"),
    "pin at another joint": moved(CASES["companion_3_2"], "A", "E"),
    "roller turned": CASES["holtz_m1"].with_data(supports={"1": "pin", "4": {"reaction": ["-sin(19)", "cos(19)"]}}),
    "kips for kN": in_kips(CASES["beer_johnston_6_1"]),
    "feet for metres at one joint": in_feet(CASES["hibbeler_5_5"], "C"),
    "depth as the book has it": placed(CASES["companion_3_6"], "G", "6", "-2"),
}


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("spoilt", SPOILT.values(), ids=SPOILT)
def test_a_spoilt_input_is_noticed(spoilt: PublishedCase, method: str) -> None:
    """A comparison that cannot fail proves nothing: wrong load, support, unit or place must differ."""
    found = METHODS[method](spoilt.truss, spoilt.loads)
    assert set(differences(spoilt, found)) & set(spoilt.data["members"])


@pytest.mark.parametrize("case", STABLE, ids=case_id)
def test_a_spoilt_expectation_is_noticed(case: PublishedCase) -> None:
    """Each expected value in turn with its sign changed or slightly off, each printed one with its last digit."""
    exact, numeric = by_all_joints(case.truss, case.loads), by_stiffness(case.truss, case.loads)
    largest = max(abs(float(case.loads.value(value))) for value in case.expected.values())
    for name, expected in case.expected.items():
        for wrong in (-expected, expected + expected / 1000, expected + parse("1/10^6")):
            if wrong != expected:
                value = float(case.loads.value(wrong))
                assert not is_same(exact[name], wrong, value, 0, surd=case.is_surd(name))
                assert not is_same(numeric[name], wrong, value, NUMERIC_TOLERANCE * largest, surd=True)
    values = {name: case.loads.value(force) for name, force in exact.items()}
    for name, printed in case.data["printed"].items():
        if re.fullmatch(r"-?\d+(\.\d+)?", printed) and name not in case.data.get("last_digit", {}):
            last = Decimal(1).scaleb(Decimal(printed).as_tuple().exponent)
            for wrong in (Decimal(printed) + last, Decimal(printed) - last):
                spoilt = case.with_data(printed={name: str(wrong)})
                assert printed_values(spoilt, values.__getitem__)[name] > Decimal("0.4"), name


# --- the files --------------------------------------------------------------------------------------------

REQUIRED = {
    *("format", "id", "title", "source", "provenance", "derived_by", "route", "units"),
    *("joints", "members", "supports", "loads", "printed", "expected", "note"),
}
OPTIONAL = {"symbols", "quantities", "erratum", "last_digit"}
SOURCE_REQUIRED = {"author", "title"}
SOURCE_OPTIONAL = {"edition", "page", "example", "repository", "commit", "file"}


def test_every_file_is_a_case_of_its_name_and_in_the_table() -> None:
    """No file lies unused, none is used under another's name."""
    assert {path.stem for path in FOLDER.iterdir() if path.is_file()} == set(CASES)
    assert all(name == case.id for name, case in CASES.items())
    assert {case.id for case in STABLE + CRITICAL} == set(CASES)
    assert {case.route for case in CASES.values()} == {"all", "unstable"}


@pytest.mark.parametrize("case", CASES.values(), ids=case_id)
def test_every_file_says_where_its_values_come_from(case: PublishedCase) -> None:
    """Source and provenance, every member and reaction expected, and nothing unknown."""
    data = case.data
    assert set(data) >= REQUIRED
    assert set(data) <= REQUIRED | OPTIONAL
    assert set(data["source"]) >= SOURCE_REQUIRED
    assert set(data["source"]) <= SOURCE_REQUIRED | SOURCE_OPTIONAL
    assert len(data["source"]) > len(SOURCE_REQUIRED), "an author and a title alone find no page"
    assert all(data["source"].values())
    assert data["provenance"] in ("read in the source", "from memory")
    assert data["derived_by"] == "by hand, see note" or data["derived_by"].startswith("printed: the source; exact: ")
    truss = case.truss
    names = {member.name for member in truss.members} | {link.name for link in truss.links}
    assert set(data["expected"]) == (names if case.route != "unstable" else set())
    known = names | set(data.get("quantities", {}))
    stated = set(data["printed"]) | set(data.get("last_digit", {})) | {e["name"] for e in data.get("erratum", [])}
    assert stated <= known
    assert stated or case.route == "unstable"
    for erratum in data.get("erratum", []):
        assert set(erratum) == {"name", "printed", "right", "why"}
        assert all(erratum.values())
