"""Trusses by their trade names, as texts, for the tests and the benchmarks.

Panel points in bridge style: L lower, U upper, M middle chord, counted from the left end.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from stated_truss import Pair, Stated


def _bridge(
    joints: Mapping[str, Pair], members: Iterable[str], panels: int, *, load: str = "-80", above: bool = False
) -> Stated:
    """Return a simple span with a load at every inner joint of the lower or the upper chord."""
    chord = [f"{'U' if above else 'L'}{i}" for i in range(1, panels)]
    loads = {name: ("0", load) for name in chord if name in joints}
    return Stated(joints, tuple(members), {"L0": "pin", f"L{panels}": "roller"}, loads)


def _through(panels: int, panel: str, heights: Mapping[int, str]) -> tuple[dict[str, Pair], list[str]]:
    """Return the joints and the members common to trusses with inclined end posts, without diagonals."""
    joints = {f"L{i}": (f"{i}*{panel}", "0") for i in range(panels + 1)}
    joints |= {f"U{i}": (f"{i}*{panel}", heights[i]) for i in range(1, panels)}
    members = [f"L{i}-L{i + 1}" for i in range(panels)] + [f"U{i}-U{i + 1}" for i in range(1, panels - 1)]
    members += ["L0-U1", f"U{panels - 1}-L{panels}"]
    return joints, members


def pratt(panels: int, panel: str = "5", height: str = "6", *, above: bool = False) -> Stated:
    """Return a Pratt: posts, and diagonals falling toward midspan."""
    joints, members = _through(panels, panel, dict.fromkeys(range(1, panels), height))
    members += [f"L{i}-U{i}" for i in range(1, panels)]
    members += [f"U{i}-L{i + 1}" if 2 * i < panels else f"L{i}-U{i + 1}" for i in range(1, panels - 1)]
    return _bridge(joints, members, panels, above=above)


def howe(panels: int, panel: str = "5", height: str = "6", *, above: bool = False) -> Stated:
    """Return a Howe: posts, and diagonals rising toward midspan."""
    joints, members = _through(panels, panel, dict.fromkeys(range(1, panels), height))
    members += [f"L{i}-U{i}" for i in range(1, panels)]
    members += [f"L{i}-U{i + 1}" if 2 * i < panels else f"U{i}-L{i + 1}" for i in range(1, panels - 1)]
    return _bridge(joints, members, panels, above=above)


def parker(panels: int = 8, panel: str = "5") -> Stated:
    """Return a Parker: a Pratt with a polygonal upper chord."""
    rises = {1: "5", 2: "7", 3: "8", 4: "17/2"}
    joints, members = _through(panels, panel, {i: rises[min(i, panels - i)] for i in range(1, panels)})
    members += [f"L{i}-U{i}" for i in range(1, panels)]
    members += [f"U{i}-L{i + 1}" if 2 * i < panels else f"L{i}-U{i + 1}" for i in range(1, panels - 1)]
    return _bridge(joints, members, panels)


def warren(panels: int, panel: str = "6", height: str = "5", *, verticals: bool = False) -> Stated:
    """Return a Warren with the upper joints over the lower panels' middles, or with verticals at every joint."""
    if verticals:
        joints, members = _through(panels, panel, dict.fromkeys(range(1, panels), height))
        members += [f"L{i}-U{i}" for i in range(1, panels)]
        members += [f"U{i}-L{i + 1}" if i % 2 else f"L{i}-U{i + 1}" for i in range(1, panels - 1)]
        return _bridge(joints, members, panels)
    joints = {f"L{i}": (f"{i}*{panel}", "0") for i in range(panels + 1)}
    joints |= {f"U{i}": (f"({2 * i + 1})*{panel}/2", height) for i in range(panels)}
    members = [f"L{i}-L{i + 1}" for i in range(panels)] + [f"U{i}-U{i + 1}" for i in range(panels - 1)]
    members += [name for i in range(panels) for name in (f"L{i}-U{i}", f"U{i}-L{i + 1}")]
    return _bridge(joints, members, panels)


def k_truss(panels: int, panel: str = "4", height: str = "6", *, outwards: bool = False, above: bool = False) -> Stated:
    """Return a K truss, the arms of every K reaching from its post toward midspan, or away from it."""
    half = panels // 2
    joints, members = _through(panels, panel, dict.fromkeys(range(1, panels), height))
    first = 2 if outwards else 1
    for i in range(1, panels):
        if i == half and not outwards:
            members.append(f"L{i}-U{i}")
            continue
        if min(i, panels - i) < first:
            members.append(f"L{i}-U{i}")
            continue
        joints[f"M{i}"] = (f"{i}*{panel}", f"{height}/2")
        members += [f"L{i}-M{i}", f"M{i}-U{i}"]
        toward = (1 if i < half else -1) * (-1 if outwards else 1)
        reached = [i + toward] if i != half else [i - 1, i + 1]
        members += [f"M{i}-{chord}{j}" for j in reached for chord in "UL"]
    if outwards:  # both middle panels reach from the middle post: one K too many there
        members = [name for name in members if name not in (f"M{half}-U{half + 1}", f"M{half}-L{half + 1}")]
        members.append(f"L{half}-U{half + 1}")
    return _bridge(joints, members, panels, above=above)


def baltimore(panels: int = 12, panel: str = "4", height: str = "8") -> Stated:
    """Return a Baltimore: a Pratt of double panels, each subdivided by a hanger and a sub-strut (even half count)."""
    half = panels // 2
    joints: dict[str, Pair] = {f"L{i}": (f"{i}*{panel}", "0") for i in range(panels + 1)}
    joints |= {f"U{i}": (f"{i}*{panel}", height) for i in range(2, panels, 2)}
    joints |= {f"M{i}": (f"{i}*{panel}", f"{height}/2") for i in range(1, panels, 2)}
    members = [f"L{i}-L{i + 1}" for i in range(panels)] + [f"U{i}-U{i + 2}" for i in range(2, panels - 2, 2)]
    members += [f"L{i}-U{i}" for i in range(2, panels, 2)] + [f"L{i}-M{i}" for i in range(1, panels, 2)]
    for i in range(1, panels, 2):
        left = i < half
        if i in (1, panels - 1):  # the end posts, their sub-struts down to the post's foot
            inner = 2 if left else panels - 2
            members += [f"L{0 if left else panels}-M{i}", f"M{i}-U{inner}", f"M{i}-L{inner}"]
            continue
        high, low = (i - 1, i + 1) if left else (i + 1, i - 1)
        members += [f"U{high}-M{i}", f"M{i}-L{low}", f"M{i}-L{high}"]
    return _bridge(joints, members, panels)


def fink(*, eight: bool = False) -> Stated:
    """Return a Fink roof: rafters A-C and B-C, struts square to them, ties P-P'; of four or eight panels."""
    # rafter from A (0, 0) to C (12, 9): slope 3 in 4, length 15; square struts stay rational
    panels = 8 if eight else 4
    half = panels // 2
    left: dict[str, Pair] = {"A": ("0", "0")}
    rafter = ["D", "E", "F"] if eight else ["D"]
    for place, name in enumerate(rafter, 1):
        left[name] = (f"12*{place}/{half}", f"9*{place}/{half}")
    middle = rafter[half // 2 - 1]
    left["P"] = ("75/8", "0")  # under the square from the rafter's middle (6, 9/2)
    members = ["P-C", f"{middle}-P"]
    if eight:
        left |= {"g": ("75/16", "0"), "m": ("171/16", "9/2")}  # middles of A-P and P-C
        members = ["A-D", "D-E", "E-F", "F-C", "A-g", "g-P", "P-m", "m-C", "D-g", "E-g", "E-m", "F-m", "E-P"]
    else:
        members += ["A-D", "D-C", "A-P"]
    return _roof(left, members, rafter)


def fan() -> Stated:
    """Return a fan roof: two struts from P to the rafter A-D-E-C."""
    left: dict[str, Pair] = {"A": ("0", "0"), "D": ("4", "3"), "E": ("8", "6"), "P": ("75/8", "0")}
    return _roof(left, ["A-D", "D-E", "E-C", "A-P", "D-P", "E-P", "P-C"], ["D", "E"])


def _roof(left: Mapping[str, Pair], members: list[str], rafter: list[str]) -> Stated:
    """Return the roof of a left half, apex C at (12, 9), its mirror image with primes, and the tie P-P'."""
    joints: dict[str, Pair] = {**left, "C": ("12", "9")}
    image = {name: "B" if name == "A" else "C" if name == "C" else f"{name}'" for name in joints}
    joints |= {image[name]: (f"24-{x}", y) for name, (x, y) in left.items()}
    both = members + ["-".join(image[end] for end in name.split("-")) for name in members] + ["P-P'"]
    loads = dict.fromkeys([*rafter, "C", *(image[name] for name in rafter)], ("0", "-10"))
    return Stated(joints, tuple(both), {"A": "pin", "B": "roller"}, loads)


def scissors() -> Stated:
    """Return a scissors roof: ties A-F and B-E crossing in the joint X, hung from the apex C."""
    joints = {"A": ("0", "0"), "B": ("16", "0"), "C": ("8", "8"), "E": ("4", "4"), "F": ("12", "4"), "X": ("8", "8/3")}
    members = ("A-E", "E-C", "C-F", "F-B", "A-X", "X-F", "B-X", "X-E", "C-X")
    loads = dict.fromkeys("ECF", ("0", "-20"))
    return Stated(joints, members, {"A": "pin", "B": "roller"}, loads)


def cantilever(panels: int = 5) -> Stated:
    """Return a cantilever from a wall with two pins; the free end is at the right."""
    joints = {f"{chord}{i}": (f"{i}*3", y) for i in range(panels + 1) for chord, y in (("L", "0"), ("U", "4"))}
    members = [f"{chord}{i}-{chord}{i + 1}" for i in range(panels) for chord in "LU"]
    members += [f"L{i}-U{i}" for i in range(1, panels + 1)] + [f"U{i}-L{i + 1}" for i in range(panels)]
    loads = {f"L{i}": ("0", "-15") for i in range(1, panels + 1)}
    return Stated(joints, tuple(members), {"L0": "pin", "U0": "pin"}, loads)


def three_hinged_arch(*, tied: bool = False) -> Stated:
    """Return two trussed halves hinged at the crown C, on two pins, or on pin and roller with the tie A-A'."""
    left = {"A": ("0", "0"), "D": ("0", "6"), "F": ("4", "4"), "E": ("4", "8"), "G": ("8", "7"), "H": ("8", "9")}
    members = ["A-D", "A-F", "D-F", "D-E", "F-E", "F-G", "E-G", "E-H", "G-H", "G-C", "H-C"]
    image = {name: "C" if name == "C" else f"{name}'" for name in [*left, "C"]}
    joints: dict[str, Pair] = {**left, "C": ("12", "9")} | {image[n]: (f"24-{x}", y) for n, (x, y) in left.items()}
    both = members + ["-".join(image[end] for end in name.split("-")) for name in members]
    loads = {"D": ("5", "-30"), "E": ("0", "-40"), "H": ("0", "-40"), "H'": ("0", "-10")}
    if tied:
        return Stated(joints, (*both, "A-A'"), {"A": "pin", "A'": "roller"}, loads)
    return Stated(joints, tuple(both), {"A": "pin", "A'": "pin"}, loads)


def hinged_spans() -> Stated:
    """Return a three-span girder with two hinges (panels 3 and 9 lack the lower chord), on four supports."""
    panels = 12
    joints = {f"{chord}{i}": (f"{i}*4", y) for i in range(panels + 1) for chord, y in (("L", "0"), ("U", "5"))}
    members = [f"U{i}-U{i + 1}" for i in range(panels)] + [f"L{i}-U{i}" for i in range(panels + 1)]
    members += [f"L{i}-L{i + 1}" for i in range(panels) if i not in (4, 7)]
    members += [f"U{i}-L{i + 1}" if i in (0, 1, 4, 5, 8, 9) else f"L{i}-U{i + 1}" for i in range(panels)]
    supports = {"L0": "pin", "L3": "roller", "L9": "roller", "L12": "roller"}
    loads = {f"U{i}": ("0", "-25") for i in range(panels + 1)}
    return Stated(joints, tuple(members), supports, loads)


def crossing_diagonals() -> Stated:
    """Return a middle panel without upper chord, both its diagonals crossing without a joint."""
    joints = {
        "L0": ("0", "0"),
        "L1": ("4", "0"),
        "L2": ("9", "0"),
        "L3": ("13", "0"),
        "U1": ("4", "3"),
        "U2": ("9", "4"),
    }
    members = ("L0-L1", "L1-L2", "L2-L3", "L0-U1", "U2-L3", "L1-U1", "L2-U2", "U1-L2", "L1-U2")
    loads = {"L1": ("0", "-30"), "U2": ("10", "-20")}
    return Stated(joints, members, {"L0": "pin", "L3": "roller"}, loads)
