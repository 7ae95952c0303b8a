"""Small checks that the tests of sheets and renderers share. Invented trusses; none is a published case."""

from __future__ import annotations

from itertools import pairwise

from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.project import Project
from trusscalc.truss import Truss

PROJECT = Project(
    project="Tannery Lane crossing",
    calculation="TLF-C-014",
    revision="B",
    date="14 March 2026",
    prepared="A. Okafor",
    basis="factored",
    self_weight="included",
    names={"U1": "N12"},
)


def warren() -> MemberCheck:
    """Return a Warren truss of 60 degrees with a symbol in its loads, an oblique load, a flagged rod and a bearing."""
    joints = {f"L{i}": (4 * i, 0) for i in range(4)} | {f"U{i}": (4 * i + 2, "2*sqrt(3)") for i in range(3)}
    members = {
        "lower chord": [f"L{i}-L{i + 1}" for i in range(3)],
        "upper chord": ["U0-U1", "U1-U2"],
        "diagonals": [name for i in range(3) for name in (f"L{i}-U{i}", f"U{i}-L{i + 1}")],
    }
    truss = Truss(
        joints,
        members,
        {"L0": "pin", "L3": "roller"},
        title="Tannery Lane footbridge",
        tension_only=["L0-U0"],
        no_uplift=["L3"],
    )
    case = LoadCase("live", {"L1": (0, "-12.5"), "L2": (5, "-P")}, symbols={"P": 20})
    return check_members(truss, case, ["U0-U1", "U0-L1", "L0-U0"])


def k_truss() -> MemberCheck:
    """Return six panels braced in K, whose webs come in pairs from two bodies."""
    joints = {f"L{i}": (4 * i, 0) for i in range(7)} | {f"U{i}": (4 * i, 6) for i in range(1, 6)}
    joints |= {f"M{i}": (4 * i, 3) for i in (1, 2, 4, 5)} | {"M0": (2, 3), "M6": (22, 3)}
    members = {
        "bottom chord": [f"L{i}-L{i + 1}" for i in range(6)],
        "top chord": [f"U{i}-U{i + 1}" for i in range(1, 5)],
        "posts": [name for i in (1, 2, 4, 5) for name in (f"L{i}-M{i}", f"M{i}-U{i}")] + ["L3-U3"],
        "diagonals": ["M1-U2", "M1-L2", "M2-U3", "M2-L3", "U3-M4", "L3-M4", "U4-M5", "L4-M5"],
        "end posts": ["L0-M0", "M0-U1", "L6-M6", "M6-U5"],
        "sub-struts": ["M0-L1", "M6-L5"],
    }
    truss = Truss(joints, members, {"L0": "pin", "L6": "roller"}, title="Yard gantry")
    case = LoadCase("full", {f"L{i}": (0, -120) for i in range(1, 6)})
    return check_members(truss, case, ["U2-U3", "M1-U2", "M1-L2", "L0-M0", "M0-L1"])


def roof() -> MemberCheck:
    """Return a four-panel roof with ties, in feet and kips, one rod pressed and one bearing lifted."""
    joints = {"A": (0, 0), "B": (12, 0), "C": (6, 3), "D": (3, "1.5"), "E": (9, "1.5"), "P": (4, 0), "Q": (8, 0)}
    members = {
        "rafters": ["A-D", "D-C", "C-E", "E-B"],
        "tie": ["A-P", "P-Q", "Q-B"],
        "struts": ["D-P", "E-Q"],
        "rods": ["P-C", "Q-C"],
    }
    truss = Truss(
        joints,
        members,
        {"A": "pin", "B": "roller"},
        title="Store roof",
        length="ft",
        force="kip",
        tension_only=["P-C", "D-P"],
        no_uplift=["B"],
    )
    case = LoadCase("wind up", {"D": (0, -4), "C": (0, "4.25"), "E": (1, 8)})
    return check_members(truss, case, ["D-C", "P-Q", "P-C", "D-P"])


def arch() -> MemberCheck:
    """Return a three-hinged arch on unlevel supports, one of them two skew links, with oblique loads."""
    joints = {"A": (0, 0), "B": (12, 1), "C": (6, 5), "D": (2, 4), "E": (10, "4.5"), "F": (3, 1), "G": (9, 2)}
    members = ["A-D", "D-C", "A-F", "F-C", "D-F", "B-E", "E-C", "B-G", "G-C", "E-G"]
    supports = {"A": "pin", "B": [{"reaction": [-1, 2]}, {"reaction": [1, 1]}]}
    case = LoadCase("wind", {"D": (3, -4), "E": ("-1.5", -2), "F": (0, -1)})
    return check_members(Truss(joints, members, supports, title="Shed arch"), case, ["D-C", "F-C", "G-C", "E-G"])


def hexagon() -> MemberCheck:
    """Return a complex truss, three bars at every joint: one force has to be carried as X."""
    joints = {"A": (0, 0), "B": (0, 3), "C": (4, 7), "D": (8, 3), "E": (8, 0), "F": (4, 3)}
    members = ["A-B", "B-C", "C-D", "D-E", "C-F", "A-F", "E-F", "A-D", "B-E"]
    truss = Truss(joints, members, {"A": "pin", "E": "roller"}, title="Mast head")
    return check_members(truss, LoadCase("pull", {"C": (5, 0)}), ["A-B", "C-F"])


def rounded_angle() -> MemberCheck:
    """Return a triangle with an angle of 40 degrees, whose sine is no surd."""
    joints = {"A": (0, 0), "B": (4, 0), "C": ("4*cos(40)", "4*sin(40)")}
    truss = Truss(joints, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"}, title="Jib")
    return check_members(truss, LoadCase("lift", {"C": (1, -2)}), "all")


def many_loads() -> MemberCheck:
    """Return twelve panels with eleven unequal loads; on the whole truss they are collected."""
    joints = {f"L{i}": (3 * i, 0) for i in range(13)} | {f"U{i}": (3 * i, 4) for i in range(1, 12)}
    members = [f"L{i}-L{i + 1}" for i in range(12)] + [f"U{i}-U{i + 1}" for i in range(1, 11)]
    members += [f"L{i}-U{i}" for i in range(1, 12)] + ["L0-U1", "U11-L12"]
    members += [f"U{i}-L{i + 1}" for i in range(1, 6)] + [f"U{i}-L{i - 1}" for i in range(7, 12)]
    truss = Truss(joints, members, {"L0": "pin", "L12": "roller"}, title="Pipe bridge")
    return check_members(truss, LoadCase("pipes", {f"L{i}": (0, -10 - i) for i in range(1, 12)}), ["U5-U6"])


def indeterminate() -> MemberCheck:
    """Return two crossing diagonals in a panel; statics decides the reactions and nothing in the panel."""
    joints = {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3), "E": (8, 0)}
    members = ["A-B", "B-C", "C-D", "A-D", "A-C", "B-D", "B-E", "C-E"]
    truss = Truss(joints, members, {"A": "pin", "E": "roller"}, title="Tower panel")
    return check_members(truss, LoadCase("w", {"C": (1, -4)}), ["B-E", "A-C"])


HOSTILE = ("A<b>", "P$1$", "#x", "a_b", "O'Hara", "x|y", "back\\slash", "`t`*b*", "<script>alert(1)</script>")


def hostile() -> MemberCheck:
    """Return a Warren truss whose names, groups and title try to be markup."""
    low, up = HOSTILE[:5], HOSTILE[5:]
    joints = {name: (4 * i, 0) for i, name in enumerate(low)} | {name: (4 * i + 2, 3) for i, name in enumerate(up)}
    members = {
        "lower | chord": [f"{a}-{b}" for a, b in pairwise(low)],
        "upper $chord$": [f"{a}-{b}" for a, b in pairwise(up)],
        "<i>webs</i>": [name for i in range(4) for name in (f"{low[i]}-{up[i]}", f"{up[i]}-{low[i + 1]}")],
    }
    title = "Roof <img src=x onerror=alert(1)> $\\alpha$ | 1"
    truss = Truss(joints, members, {low[0]: "pin", low[4]: "roller"}, title=title)
    case = LoadCase("1. snow $x$ |", {low[1]: (3, -4), low[2]: (0, -5), up[3]: (1, 0)})
    return check_members(truss, case, [f"{up[0]}-{up[1]}", f"{low[1]}-{low[2]}", f"{low[0]}-{up[0]}"])


HOSTILE_PROJECT = Project(
    project="$5 and 6$ <b>x</b> @@0@@ \\(y\\)",
    location="https://example.org/x",
    prepared="| A | B |",
    names={"A<b>": "$N1$|"},
)

ALL = {
    "warren": warren,
    "k_truss": k_truss,
    "roof": roof,
    "arch": arch,
    "hexagon": hexagon,
    "rounded_angle": rounded_angle,
    "many_loads": many_loads,
    "indeterminate": indeterminate,
    "hostile": hostile,
}
