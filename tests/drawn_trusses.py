"""Trusses to be drawn in tests, each with a load case and members to check. Geometry and loads are invented."""

from trusscalc.loads import LoadCase
from trusscalc.truss import Truss

Stated = tuple[Truss, LoadCase, list[str]]


def k_truss(panels: int = 8) -> Stated:
    """Return a footbridge with K bracing, 4 m panels, 6 m deep, 120 kN at each lower panel point."""
    half = panels // 2
    joints: dict[str, tuple[object, object]] = {f"L{i}": (4 * i, 0) for i in range(panels + 1)}
    joints |= {f"U{i}": (4 * i, 6) for i in range(1, panels)}
    joints |= {f"M{i}": (4 * i, 3) for i in range(1, panels) if i != half}
    joints |= {"M0": (2, 3), f"M{panels}": (4 * panels - 2, 3)}
    members = [f"L{i}-L{i + 1}" for i in range(panels)] + [f"U{i}-U{i + 1}" for i in range(1, panels - 1)]
    members += ["L0-M0", "M0-U1", "M0-L1"]
    members += [f"L{panels}-M{panels}", f"M{panels}-U{panels - 1}", f"M{panels}-L{panels - 1}", f"U{half}-L{half}"]
    for i in range(1, panels):
        if i != half:
            members += [f"U{i}-M{i}", f"M{i}-L{i}"]
    for i in range(1, half):
        members += [f"M{i}-U{i + 1}", f"M{i}-L{i + 1}"]
        members += [f"M{panels - i}-U{panels - i - 1}", f"M{panels - i}-L{panels - i - 1}"]
    truss = Truss(joints, members, {"L0": "pin", f"L{panels}": "roller"})
    case = LoadCase("full", {f"L{i}": (0, -120) for i in range(1, panels)})
    return truss, case, ["U3-U4", "L3-L4", "M1-U2", "M1-L2", "L0-M0", "L1-M0"]


def pratt(panels: int = 6) -> Stated:
    """Return a Pratt truss with a level and a downward load on one upper joint."""
    joints: dict[str, tuple[object, object]] = {f"L{i}": (3 * i, 0) for i in range(panels + 1)}
    joints |= {f"U{i}": (3 * i, 4) for i in range(1, panels)}
    members = [f"L{i}-L{i + 1}" for i in range(panels)] + [f"U{i}-U{i + 1}" for i in range(1, panels - 1)]
    members += ["L0-U1", f"L{panels}-U{panels - 1}"] + [f"L{i}-U{i}" for i in range(1, panels)]
    half = panels // 2
    members += [f"U{i}-L{i + 1}" for i in range(1, half)] + [f"U{i}-L{i - 1}" for i in range(half + 1, panels)]
    loads: dict[str, tuple[object, object]] = {f"L{i}": (0, -60) for i in range(1, panels)}
    case = LoadCase("wind", loads | {"U2": ("12.5", -20)})
    truss = Truss(joints, members, {"L0": "pin", f"L{panels}": "roller"})
    return truss, case, [f"U{half - 1}-U{half}", f"U{half - 1}-L{half}", "L1-L2"]


def warren() -> Stated:
    """Return a 60 degree Warren truss with loads in symbols."""
    joints: dict[str, tuple[object, object]] = {f"L{i}": (5 * i, 0) for i in range(5)}
    joints |= {f"U{i}": (f"{5 * i}+5/2", "5*sqrt(3)/2") for i in range(4)}
    members = [name for i in range(4) for name in (f"L{i}-L{i + 1}", f"L{i}-U{i}", f"U{i}-L{i + 1}")]
    members += [f"U{i}-U{i + 1}" for i in range(3)]
    case = LoadCase("live", {"L1": (0, "-P"), "L2": (0, "-2*P"), "U1": ("P/2", 0)}, symbols={"P": 30})
    return Truss(joints, members, {"L0": "pin", "L4": "roller"}), case, ["U1-U2", "U1-L2", "L1-L2"]


def fink() -> Stated:
    """Return a roof truss on a pin and a roller whose reaction leans."""
    joints = {"A": (0, 0), "B": (12, 0), "T": (6, 4), "C": (4, 0), "D": (8, 0), "E": (3, 2), "F": (9, 2)}
    members = ["A-C", "C-D", "D-B", "A-E", "E-T", "T-F", "F-B", "E-C", "C-T", "T-D", "D-F"]
    case = LoadCase("snow", {"E": (2, -10), "T": (0, -10), "F": (0, -10)})
    return Truss(joints, members, {"A": "pin", "B": {"reaction": [-1, 2]}}), case, ["C-D", "E-T", "C-T"]


def arch() -> Stated:
    """Return a three-hinged arch."""
    joints = {"A": (0, 0), "B": (20, 0), "S": (10, 8), "C": (2, 6), "D": (18, 6), "E": (5, 9), "F": (15, 9)}
    joints |= {"G": (6, 5), "H": (14, 5)}
    members = ["A-C", "A-G", "C-G", "C-E", "E-G", "E-S", "G-S", "B-D", "B-H", "D-H", "D-F", "F-H", "F-S", "H-S"]
    case = LoadCase("one side", {"E": (0, -40), "F": (0, -20), "C": (10, 0)})
    return Truss(joints, members, {"A": "pin", "B": "pin"}), case, ["E-S", "G-S", "A-G"]


def cantilever() -> Stated:
    """Return a cantilever on two pins."""
    joints = {"W1": (0, 3), "W0": (0, 0), "A": (4, 3), "B": (4, 0), "C": (8, 3), "D": (8, 0), "E": (12, 3)}
    members = ["W1-A", "W0-A", "W0-B", "A-B", "A-C", "B-C", "B-D", "C-D", "C-E", "D-E"]
    case = LoadCase("snow", {"A": (0, -15), "C": (0, -15), "E": (0, "-7.5")})
    return Truss(joints, members, {"W1": "pin", "W0": "pin"}), case, ["A-C", "B-C", "B-D"]


def crossing() -> Stated:
    """Return a truss with two members that cross without a joint, and a reaction that pulls down."""
    joints = {"A": (0, 0), "B": (6, 0), "C": (0, 4), "D": (6, 4), "E": (12, 0), "F": (12, 4)}
    members = ["A-B", "C-D", "A-D", "B-C", "A-C", "B-E", "D-F", "D-E", "E-F"]
    case = LoadCase("tip", {"F": (0, -10), "E": (0, -20)})
    return Truss(joints, members, {"A": "pin", "B": "roller"}), case, ["D-F", "A-D", "B-E"]


def tower(storeys: int = 6) -> Stated:
    """Return a tower under wind."""
    joints = {f"{side}{i}": (x, 3 * i) for i in range(storeys + 1) for side, x in (("A", 0), ("B", 4))}
    members = []
    for i in range(storeys):
        members += [f"A{i}-A{i + 1}", f"B{i}-B{i + 1}", f"A{i + 1}-B{i + 1}", f"A{i}-B{i + 1}"]
    case = LoadCase("wind", {f"A{i}": (12, 0) for i in range(1, storeys + 1)})
    return Truss(joints, members, {"A0": "pin", "B0": "pin"}), case, ["A2-A3", "A2-B3", "B2-B3"]


def links() -> Stated:
    """Return a truss on two links at one joint and a leaning roller; a load that pulls upwards."""
    joints = {"A": (0, 0), "B": (4, 0), "C": (8, 0), "D": (2, 3), "E": (6, 3)}
    members = ["A-B", "B-C", "A-D", "D-B", "B-E", "E-C", "D-E"]
    supports = {"A": [{"reaction": [1, 1]}, {"reaction": [-1, 1]}], "C": {"reaction": [-1, 2]}}
    return Truss(joints, members, supports), LoadCase("uplift", {"B": (3, -10), "E": (0, 7)}), ["D-E", "A-B"]


def hostile() -> Stated:
    """Return a truss in feet and kips whose joints have names that read as markup."""
    joints = {"$x$": (0, 0), "B<i>": (4, 0), "\\frac": (2, 3), "north end post": (6, 3)}
    members = ["$x$-B<i>", "$x$-\\frac", "B<i>-\\frac", "\\frac-north end post", "B<i>-north end post"]
    truss = Truss(joints, members, {"$x$": "pin", "B<i>": "roller"}, length="ft", force="kip")
    return truss, LoadCase("live", {"north end post": (0, -10), "\\frac": ("1/3", "-2.5")}), ["$x$-\\frac"]


def curved() -> Stated:
    """Return a truss whose upper chord bends, with moment centres off the truss."""
    joints = {"L0": (0, 0), "L1": (4, 0), "L2": (8, 0), "L3": (12, 0), "L4": (16, 0)}
    joints |= {"U1": (4, 3), "U2": (8, 4), "U3": (12, 3)}
    members = ["L0-L1", "L1-L2", "L2-L3", "L3-L4", "L0-U1", "U1-U2", "U2-U3", "U3-L4", "L1-U1", "L2-U2", "L3-U3"]
    members += ["U1-L2", "L2-U3"]
    case = LoadCase("dead", {"L1": (0, -10), "L2": (0, -20), "L3": (0, -10)})
    return Truss(joints, members, {"L0": "pin", "L4": "roller"}), case, ["U1-L2", "U1-U2", "L1-L2"]


ORDINARY = {
    "k": k_truss,
    "pratt": pratt,
    "warren": warren,
    "fink": fink,
    "arch": arch,
    "cantilever": cantilever,
    "crossing": crossing,
    "tower": tower,
    "links": links,
    "hostile": hostile,
    "curved": curved,
}
