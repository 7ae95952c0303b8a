"""Trusses by their trade names, statically determinate and stable for every argument they take.

Panel points are numbered in bridge style from the left support: L0, L1, ... on the lower chord, U1, U2, ...
on the upper chord, M between them; Ui stands over Li. Lengths are exact: a number, or text such as
``"5*sqrt(3)/2"``. Bridges carry a pin at L0 and a roller at the far end.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from typing import Any, Final

from trusscalc.errors import InexactNumberError, InputError, UnknownNameError
from trusscalc.exact import Exact, rational
from trusscalc.exacttext import number
from trusscalc.loads import LoadCase
from trusscalc.truss import Truss

Point = tuple[Exact, Exact]
Groups = dict[str, list[str]]

MOST_PANELS: Final = 1000
NOTHING: Final = rational(0)


def pratt(panels: int, panel: object, height: object, **stated: str) -> Truss:
    """Return a through Pratt truss: inclined end posts, diagonals falling toward the middle.

    Parameters
    ----------
    panels : int
        At least 3. With an odd number the middle panel has one diagonal, falling to the right.
    panel, height : exact number
        Width of a panel and distance of the chords.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Examples
    --------
    >>> truss = pratt(6, 4, 5)
    >>> [member.name for member in truss.members if member.group == "diagonals"]
    ['U1-L2', 'U2-L3', 'L3-U4', 'L4-U5']
    """
    _panels(panels, 3)
    rise = _length("height", height)
    joints = _chords(panels, _length("panel", panel), lambda _: rise)
    return _bridge(panels, joints, _falling_to_middle(panels), stated)


def howe(panels: int, panel: object, height: object, **stated: str) -> Truss:
    """Return a through Howe truss: inclined end posts, diagonals rising toward the middle.

    Parameters
    ----------
    panels : int
        At least 3. With an odd number the middle panel has one diagonal, rising to the right.
    panel, height : exact number
        Width of a panel and distance of the chords.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Examples
    --------
    >>> truss = howe(6, 4, 5)
    >>> [member.name for member in truss.members if member.group == "diagonals"]
    ['L1-U2', 'L2-U3', 'U3-L4', 'U4-L5']
    """
    _panels(panels, 3)
    rise = _length("height", height)
    joints = _chords(panels, _length("panel", panel), lambda _: rise)
    return _bridge(panels, joints, [_other_way(name) for name in _falling_to_middle(panels)], stated)


def parker(
    panels: int,
    panel: object,
    height: object = None,
    *,
    end_height: object = None,
    heights: Sequence[object] = (),
    **stated: str,
) -> Truss:
    """Return a Parker truss: a Pratt truss whose upper chord is a polygon.

    Parameters
    ----------
    panels : int
        At least 4.
    panel : exact number
        Width of a panel.
    height : exact number
        Height at midspan; the upper joints lie on a parabola.
    end_height : exact number
        Height at U1 and at the last upper joint; without it the parabola starts at the supports.
    heights : sequence of exact numbers
        Instead of the parabola: the height of each upper joint, U1 first.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Examples
    --------
    >>> truss = parker(6, 5, 9)
    >>> [joint.y for joint in truss.joints if joint.name[0] == "U"]
    [Exact('5'), Exact('8'), Exact('9'), Exact('8'), Exact('5')]
    """
    _panels(panels, 4)
    if heights:
        if height is not None or end_height is not None or len(heights) != panels - 1:
            message = f"heights: {panels - 1} heights are needed, one for each upper joint, and no height besides"
            raise InputError(message)
        levels = [_length(f"heights, U{place}", value) for place, value in enumerate(heights, 1)]
    else:
        middle = _length("height", height)
        if end_height is None:
            levels = [middle * rational(4 * i * (panels - i), panels * panels) for i in range(1, panels)]
        else:
            drop = middle - _length("end_height", end_height)
            levels = [middle - drop * rational((2 * i - panels) ** 2, (panels - 2) ** 2) for i in range(1, panels)]
    joints = _chords(panels, _length("panel", panel), lambda i: levels[i - 1])
    return _bridge(panels, joints, _falling_to_middle(panels), stated)


def warren(panels: int, panel: object, height: object, *, verticals: bool = True, **stated: str) -> Truss:
    """Return a through Warren truss.

    Parameters
    ----------
    panels : int
        Panels of the lower chord: an even number of at least 4 with verticals, at least 2 without.
    panel, height : exact number
        Width of a panel and distance of the chords.
    verticals : bool
        True: diagonals over two panels each and a vertical at every panel point. False: diagonals over half
        a panel, the upper joint Ui over the middle between L(i-1) and Li.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Examples
    --------
    >>> truss = warren(5, 4, "2*sqrt(3)", verticals=False)
    >>> truss.joint("U2").x, truss.member("U2-L2").group
    (Exact('6'), 'diagonals')
    """
    width, rise = _length("panel", panel), _length("height", height)
    if verticals:
        _panels(panels, 4, even=True)
        webs = [f"U{i}-L{i + 1}" if i % 2 else f"L{i}-U{i + 1}" for i in range(1, panels - 1)]
        return _bridge(panels, _chords(panels, width, lambda _: rise), webs, stated)
    _panels(panels, 2)
    joints = {f"L{i}": (width * i, NOTHING) for i in range(panels + 1)}
    joints |= {f"U{i}": (width * rational(2 * i - 1, 2), rise) for i in range(1, panels + 1)}
    groups = {
        "lower chord": _along("L", 0, panels),
        "upper chord": _along("U", 1, panels),
        "end posts": ["L0-U1", f"U{panels}-L{panels}"],
        "diagonals": [name for i in range(1, panels) for name in (f"U{i}-L{i}", f"L{i}-U{i + 1}")],
    }
    return _made(joints, groups, {"L0": "pin", f"L{panels}": "roller"}, stated)


def k_truss(panels: int, panel: object, height: object, **stated: str) -> Truss:
    """Return a through K truss: two web members from the middle of each post toward the middle of the span.

    Parameters
    ----------
    panels : int
        At least 4. With an even number the middle post is undivided; with an odd number (at least 5) both
        posts of the middle panel are, and that panel has one diagonal, falling to the right.
    panel, height : exact number
        Width of a panel and distance of the chords.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Examples
    --------
    >>> truss = k_truss(6, 4, 6)
    >>> [member.name for member in truss.members if member.group == "diagonals"][:4]
    ['M1-U2', 'M1-L2', 'M2-U3', 'M2-L3']
    """
    _panels(panels, 4)
    width, rise = _length("panel", panel), _length("height", height)
    joints = _chords(panels, width, lambda _: rise)
    left, right = (panels + 1) // 2 - 1, panels // 2 + 1  # the panel points next to the undivided posts
    if panels % 2:
        left, right = left - 1, right + 1
    divided = [*range(1, left + 1), *range(right, panels)]
    joints |= {f"M{i}": (width * i, rise / 2) for i in divided}
    posts = [name for i in divided for name in (f"U{i}-M{i}", f"M{i}-L{i}")]
    posts += [f"U{i}-L{i}" for i in range(left + 1, right)]
    webs = [name for i in divided for j in [i + 1 if i <= left else i - 1] for name in (f"M{i}-U{j}", f"M{i}-L{j}")]
    if panels % 2:
        webs.append(f"U{left + 1}-L{right - 1}")
    groups = {**_chord_groups(panels), "posts": posts, "diagonals": webs}
    return _made(joints, groups, {"L0": "pin", f"L{panels}": "roller"}, stated)


def baltimore(panels: int, panel: object, height: object, **stated: str) -> Truss:
    """Return a Baltimore truss: a Pratt truss with every panel divided once more from the middle of its diagonal.

    Parameters
    ----------
    panels : int
        Panels of the lower chord, an even number of at least 6; the upper chord has a joint over every second
        panel point. If half of it is odd, the middle diagonal falls to the right.
    panel, height : exact number
        Width of a lower-chord panel and distance of the chords.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Examples
    --------
    >>> truss = baltimore(8, 3, 6)
    >>> [member.name for member in truss.members if member.group == "sub-struts"]
    ['M1-L2', 'M3-L2', 'M5-L6', 'M7-L6']
    """
    _panels(panels, 6, even=True)
    width, rise = _length("panel", panel), _length("height", height)
    joints = {f"L{i}": (width * i, NOTHING) for i in range(panels + 1)}
    joints |= {f"U{i}": (width * i, rise) for i in range(2, panels - 1, 2)}
    joints |= {f"M{i}": (width * i, rise / 2) for i in range(1, panels, 2)}
    mains = [re.sub("[0-9]+", lambda place: str(2 * int(place[0])), name) for name in _falling_to_middle(panels // 2)]
    diagonals, struts = [], ["M1-L2"]
    for name in mains:
        start, end = name.split("-")
        middle = f"M{(int(start[1:]) + int(end[1:])) // 2}"
        diagonals += [f"{start}-{middle}", f"{middle}-{end}"]
        struts.append(f"{middle}-L{start[1:] if start[0] == 'U' else end[1:]}")
    groups = {
        "lower chord": _along("L", 0, panels),
        "upper chord": [f"U{i}-U{i + 2}" for i in range(2, panels - 2, 2)],
        "end posts": ["L0-M1", "M1-U2", f"U{panels - 2}-M{panels - 1}", f"M{panels - 1}-L{panels}"],
        "posts": [f"U{i}-L{i}" for i in range(4, panels - 2, 2)],
        "hangers": [f"U{i}-L{i}" for i in (2, panels - 2)],
        "diagonals": diagonals,
        "sub-struts": [*struts, f"M{panels - 1}-L{panels - 2}"],
        "sub-hangers": [f"M{i}-L{i}" for i in range(1, panels, 2)],
    }
    return _made(joints, groups, {"L0": "pin", f"L{panels}": "roller"}, stated)


def fink(panels: int, span: object, rise: object, **stated: str) -> Truss:
    """Return a Fink roof truss: struts square to the rafters, ties from their feet.

    Parameters
    ----------
    panels : int
        Panels of both rafters together: 4 or 8.
    span, rise : exact number
        Between the heels, and of the ridge over them; the rise is less than half the span.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Notes
    -----
    The heels are L0 and the last L, the rafters U1, U2, ... with the ridge in the middle; M1 and M2 halve the
    ties to the ridge of the eight-panel form.

    Examples
    --------
    >>> truss = fink(4, 12, 3)
    >>> truss.joint("L1").x, [member.name for member in truss.members if member.group == "struts"]
    (Exact('15/4'), ['U1-L1', 'U3-L2'])
    """
    if panels not in (4, 8):
        message = f"panels: {panels!r}; a Fink truss is made with 4 or 8 panels"
        raise InputError(message)
    width, top, foot = _roof(span, rise)
    if panels == 4:  # noqa: PLR2004 - the smaller form
        joints = _rafters(4, width, top) | _line({"L0": 0, "L1": foot, "L2": width - foot, "L3": width})
        groups = {
            "rafters": _along_rafters(4, "L3"),
            "bottom ties": _along("L", 0, 3),
            "struts": ["U1-L1", "U3-L2"],
            "ties": ["L1-U2", "U2-L2"],
        }
        return _made(joints, groups, {"L0": "pin", "L3": "roller"}, stated)
    feet = {"L1": foot / 2, "L2": foot, "L3": width - foot, "L4": width - foot / 2}
    joints = _rafters(8, width, top) | _line({"L0": 0, **feet, "L5": width})
    joints |= {"M1": ((foot + width / 2) / 2, top / 2), "M2": (width - (foot + width / 2) / 2, top / 2)}
    groups = {
        "rafters": _along_rafters(8, "L5"),
        "bottom ties": _along("L", 0, 5),
        "struts": ["U1-L1", "U2-L2", "U3-M1", "U5-M2", "U6-L3", "U7-L4"],
        "ties": ["L2-M1", "M1-U4", "U4-M2", "M2-L3"],
        "sub-ties": ["L1-U2", "U2-M1", "M2-U6", "U6-L4"],
    }
    return _made(joints, groups, {"L0": "pin", "L5": "roller"}, stated)


def fan(span: object, rise: object, **stated: str) -> Truss:
    """Return a fan roof truss: each rafter in three panels, two struts from the foot of each tie.

    Parameters
    ----------
    span, rise : exact number
        Between the heels, and of the ridge over them; the rise is less than half the span.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Examples
    --------
    >>> len(fan(12, 4).members)
    15
    """
    width, top, foot = _roof(span, rise)
    joints = _rafters(6, width, top) | _line({"L0": 0, "L1": foot, "L2": width - foot, "L3": width})
    groups = {
        "rafters": _along_rafters(6, "L3"),
        "bottom ties": _along("L", 0, 3),
        "struts": ["U1-L1", "U2-L1", "U4-L2", "U5-L2"],
        "ties": ["L1-U3", "U3-L2"],
    }
    return _made(joints, groups, {"L0": "pin", "L3": "roller"}, stated)


def scissors(span: object, rise: object, **stated: str) -> Truss:
    """Return a scissors roof truss: ties from each heel to the middle of the other rafter, joined where they cross.

    Parameters
    ----------
    span, rise : exact number
        Between the heels, and of the ridge over them.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Examples
    --------
    >>> scissors(12, 6).joint("M1").y
    Exact('2')
    """
    width, top = _length("span", span), _length("rise", rise)
    joints = _rafters(4, width, top) | _line({"L0": 0, "L1": width})
    joints["M1"] = (width / 2, top / 3)
    groups = {
        "rafters": _along_rafters(4, "L1"),
        "ties": ["L0-M1", "M1-U3", "U1-M1", "M1-L1"],
        "king rod": ["U2-M1"],
    }
    return _made(joints, groups, {"L0": "pin", "L1": "roller"}, stated)


def bracket(panels: int, panel: object, height: object, **stated: str) -> Truss:
    """Return a cantilever bracket on a wall: level upper chord, lower chord rising to the tip.

    Parameters
    ----------
    panels : int
        At least 1.
    panel, height : exact number
        Width of a panel and height at the wall.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Notes
    -----
    L0 at the wall is a pin; U0 above it is held horizontally.

    Examples
    --------
    >>> [link.name for link in bracket(3, 2, 3).links]
    ['L0.x', 'L0.y', 'U0.r']
    """
    _panels(panels, 1)
    width, rise = _length("panel", panel), _length("height", height)
    joints = {f"L{i}": (width * i, rise * rational(i, panels)) for i in range(panels)}
    joints |= {f"U{i}": (width * i, rise) for i in range(panels + 1)}
    groups = {
        "lower chord": [*_along("L", 0, panels - 1), f"L{panels - 1}-U{panels}"],
        "upper chord": _along("U", 0, panels),
        "posts": [f"U{i}-L{i}" for i in range(panels)],
        "diagonals": [f"U{i}-L{i + 1}" for i in range(panels - 1)],
    }
    return _made(joints, groups, {"L0": "pin", "U0": {"reaction": (1, 0)}}, stated)


def three_hinged_arch(panels: int, panel: object, rise: object, height: object, **stated: str) -> Truss:
    """Return a spandrel-braced three-hinged arch: parabolic lower chord, level upper chord, hinge at the crown.

    Parameters
    ----------
    panels : int
        An even number of at least 4.
    panel : exact number
        Width of a panel.
    rise, height : exact number
        Of the crown hinge, and of the upper chord, over the springings; the height is more than the rise.
    **stated : str
        ``title``, ``length`` and ``force`` as in ``Truss``.

    Raises
    ------
    InputError
        For an argument out of range.

    Notes
    -----
    Both springings are pins. The crown hinge is the lower joint in the middle; the upper chord is open there.

    Examples
    --------
    >>> arch = three_hinged_arch(4, 5, 4, 6)
    >>> arch.joint("L1").y, len(arch.members) + len(arch.links) == 2 * len(arch.joints)
    (Exact('3'), True)
    """
    _panels(panels, 4, even=True)
    width, crown, deck = _length("panel", panel), _length("rise", rise), _length("height", height)
    if deck <= crown:
        message = "height: the upper chord lies above the crown hinge, so the height is more than the rise"
        raise InputError(message)
    half = panels // 2
    joints = {f"L{i}": (width * i, crown * rational(4 * i * (panels - i), panels**2)) for i in range(panels + 1)}
    joints |= {f"U{i}": (width * i, deck) for i in range(panels + 1) if i != half}
    groups = {
        "lower chord": _along("L", 0, panels),
        "upper chord": [*_along("U", 0, half - 1), *_along("U", half + 1, panels)],
        "posts": [f"U{i}-L{i}" for i in range(panels + 1) if i != half],
        "diagonals": [f"U{i}-L{i + 1}" if i < half else f"L{i}-U{i + 1}" for i in range(panels)],
    }
    return _made(joints, groups, {"L0": "pin", f"L{panels}": "pin"}, stated)


def panel_loads(
    truss: Truss, chord: str = "L", force: Sequence[object] = (0, -1), *, name: str = "panel loads"
) -> LoadCase:
    """Return a load case with the same force on every joint of a chord that is not a support.

    Parameters
    ----------
    truss : Truss
        Its joints are named by a letter and a number, as in this module.
    chord : str
        The letter, such as ``"L"`` or ``"U"``.
    force : (fx, fy)
        In the truss's unit of force, y upwards.
    name : str
        Name of the case.

    Raises
    ------
    UnknownNameError
        When no joint of that chord can be loaded.

    Examples
    --------
    >>> panel_loads(pratt(4, 5, 6), "L", (0, -100)).as_floats()
    {'L1': (0.0, -100.0), 'L2': (0.0, -100.0), 'L3': (0.0, -100.0)}
    """
    held = {support.joint for support in truss.supports}
    loaded = [
        joint.name
        for joint in truss.joints
        if joint.name not in held and re.fullmatch(re.escape(chord) + "[0-9]+", joint.name)
    ]
    if not loaded:
        letters = sorted({found[1] for joint in truss.joints if (found := re.fullmatch(r"(\D+)[0-9]+", joint.name))})
        message = f"no joint of chord {chord!r} can be loaded; there are {', '.join(letters) or 'no numbered joints'}"
        raise UnknownNameError(message, name=chord)
    return LoadCase(name, dict.fromkeys(loaded, tuple(force)))


# --- parts ------------------------------------------------------------------------------------------------


def _panels(panels: int, least: int, *, even: bool = False) -> None:
    fits = isinstance(panels, int) and not isinstance(panels, bool) and least <= panels <= MOST_PANELS
    if not fits or (even and panels % 2):
        kind = "an even" if even else "a whole"
        message = f"panels: {panels!r}; {kind} number from {least} to {MOST_PANELS} is needed"
        raise InputError(message)


def _length(what: str, value: object) -> Exact:
    try:
        length = number(value)
        fits = length.sign() > 0
    except InexactNumberError as problem:
        message = f"{what}: {problem}"
        raise InputError(message) from None
    if not fits:
        message = f"{what}: {value}; a length above zero is needed"
        raise InputError(message)
    return length


def _chords(panels: int, width: Exact, level: Callable[[int], Exact]) -> dict[str, Point]:
    lower = {f"L{i}": (width * i, NOTHING) for i in range(panels + 1)}
    return lower | {f"U{i}": (width * i, level(i)) for i in range(1, panels)}


def _along(letter: str, first: int, last: int) -> list[str]:
    return [f"{letter}{i}-{letter}{i + 1}" for i in range(first, last)]


def _falling_to_middle(panels: int) -> list[str]:
    return [f"U{i}-L{i + 1}" if i + 1 <= (panels + 1) // 2 else f"L{i}-U{i + 1}" for i in range(1, panels - 1)]


def _other_way(diagonal: str) -> str:
    return diagonal.translate(str.maketrans("UL", "LU"))


def _chord_groups(panels: int) -> Groups:
    return {
        "lower chord": _along("L", 0, panels),
        "upper chord": _along("U", 1, panels - 1),
        "end posts": ["L0-U1", f"U{panels - 1}-L{panels}"],
    }


def _bridge(panels: int, joints: dict[str, Point], webs: list[str], stated: dict[str, str]) -> Truss:
    groups = {
        **_chord_groups(panels),
        "posts": [f"U{i}-L{i}" for i in range(2, panels - 1)],
        "hangers": [f"U{i}-L{i}" for i in (1, panels - 1)],
        "diagonals": webs,
    }
    return _made(joints, groups, {"L0": "pin", f"L{panels}": "roller"}, stated)


def _roof(span: object, rise: object) -> tuple[Exact, Exact, Exact]:
    """Return span, rise, and where the square through the middle of a rafter meets the bottom tie."""
    width, top = _length("span", span), _length("rise", rise)
    foot = (width * width / 4 + top * top) / width
    if foot >= width / 2:
        message = "rise: less than half the span is needed, or the struts would cross"
        raise InputError(message)
    return width, top, foot


def _rafters(panels: int, width: Exact, top: Exact) -> dict[str, Point]:
    half = panels // 2
    return {
        f"U{i}": (width * rational(i, panels), top * rational(half - abs(half - i), half)) for i in range(1, panels)
    }


def _along_rafters(panels: int, far: str) -> list[str]:
    return ["L0-U1", *_along("U", 1, panels - 1), f"U{panels - 1}-{far}"]


def _line(places: dict[str, Exact | int]) -> dict[str, Point]:
    return {name: (number(x), NOTHING) for name, x in places.items()}


def _made(joints: dict[str, Point], groups: Groups, supports: dict[str, object], stated: dict[str, Any]) -> Truss:
    return Truss(joints, {group: names for group, names in groups.items() if names}, supports, **stated)
