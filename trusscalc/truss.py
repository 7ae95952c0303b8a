"""What the engineer states: joints, members, supports. A Truss that exists is well formed.

Whether it is stable is a question of statics, not of form, and is asked later. All faults of form are
collected and reported together.
"""

from __future__ import annotations

import difflib
import math
import re
import unicodedata
import warnings
from bisect import bisect_left, bisect_right
from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass
from operator import itemgetter
from typing import Any, Final, NamedTuple

from trusscalc.convenience import Convenient
from trusscalc.errors import InexactNumberError, InputError, TrusscalcWarning, UnknownNameError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.units import FORCES, LENGTHS, unknown_unit

LONGEST_NAME: Final = 40
MOST_COMPARED: Final = 1000
MOST_SUGGESTIONS: Final = 50
"""Looking for the nearest of more names, or more often, takes longer than it helps."""
MEMBER_ENDS: Final = 2
PLANE: Final = 2
RESERVED_SYMBOL: Final = re.compile(r"sqrt|sin|cos|tan|pi|[XYZ]|X[0-9]+")
"""Functions, and the letters of carried forces."""


@dataclass(frozen=True, slots=True)
class Joint:
    """A frictionless hinge at (x, y), in the truss's unit of length, y upwards."""

    name: str
    x: Exact
    y: Exact


@dataclass(frozen=True, slots=True)
class Member:
    """A straight bar between two joints, spelled as its author spelled it."""

    start: str
    end: str
    group: str = ""

    @property
    def name(self) -> str:
        """The member's name, such as ``L0-U1``."""
        return f"{self.start}-{self.end}"


@dataclass(frozen=True, slots=True)
class Link:
    """A support reaction of known direction (dx, dy); the length of the direction has no meaning."""

    name: str
    joint: str
    dx: Exact
    dy: Exact


@dataclass(frozen=True, slots=True)
class Support:
    """A joint's support: ``pin`` (two links), ``roller`` (one vertical link) or ``links`` of any direction."""

    joint: str
    kind: str
    links: tuple[Link, ...]


@dataclass(frozen=True, slots=True)
class FloatTruss:
    """The truss as plain floats, for the numeric route.

    Attributes
    ----------
    joints : dict of str to (float, float)
        Coordinates, from the file's origin or, far away from it, from the first joint.
    members : tuple of (name, start, end)
        The bars.
    links : tuple of (name, joint, dx, dy)
        Reactions with their unit directions.
    """

    joints: dict[str, tuple[float, float]]
    members: tuple[tuple[str, str, str], ...]
    links: tuple[tuple[str, str, float, float], ...]


@dataclass(frozen=True, slots=True, init=False)
class Truss(Convenient):
    """A plane truss.

    Attributes
    ----------
    joints, members, supports : tuple of Joint, Member, Support
        In the order they were stated.
    title : str
        What the structure is called.
    length, force : str
        Units, see ``trusscalc.units``.
    tension_only : tuple of str
        Members whose compression is to be flagged.
    no_uplift : tuple of str
        Support joints whose downward pull is to be flagged.
    symbols : tuple of (str, Exact)
        Symbols in the coordinates, such as a panel a or a height h, and the values they are drawn and
        cross-checked at. They stand for positive numbers.
    """

    joints: tuple[Joint, ...]
    members: tuple[Member, ...]
    supports: tuple[Support, ...]
    title: str
    length: str
    force: str
    tension_only: tuple[str, ...]
    no_uplift: tuple[str, ...]
    symbols: tuple[tuple[str, Exact], ...]

    def __init__(
        self,
        joints: Mapping[str, Sequence[object]],
        members: Mapping[str, Iterable[str]] | Iterable[str],
        supports: Mapping[str, Any],
        *,
        title: str = "",
        length: str = "m",
        force: str = "kN",
        tension_only: Iterable[str] = (),
        no_uplift: Iterable[str] = (),
        symbols: Mapping[str, object] | Iterable[tuple[str, Exact]] = (),
    ) -> None:
        """State a truss.

        Parameters
        ----------
        joints : mapping of name to (x, y)
            Coordinates: int, Fraction, Decimal, exact text such as ``"5*sqrt(3)/2"``, or a float, which
            means its shortest decimal.
        members : iterable of "joint-joint", or mapping of group name to such iterables
            Every bar once; the ends in either order.
        supports : mapping of joint name to support
            ``"pin"``, ``"roller"`` (reaction vertical), ``{"reaction": (x, y)}`` for a roller whose reaction
            acts along (x, y), or a list of such mappings for several links.
        title, length, force, tension_only, no_uplift
            See the class.
        symbols : mapping of name to value
            Symbols that may stand in coordinates, as ``"2*a"``; each with a positive value.

        Raises
        ------
        InputError
            With every fault found in ``problems``.

        Warns
        -----
        TrusscalcWarning
            When a member runs through a joint it does not name.

        Examples
        --------
        >>> roof = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1.5)}, ["A-B", "A-C", "B-C"],
        ...              {"A": "pin", "B": "roller"})
        >>> [link.name for link in roof.links]
        ['A.x', 'A.y', 'B.y']
        """
        problems: list[str] = []
        values = symbol_values(symbols, problems)
        read_joints = _joints(joints, problems, values)
        read_members = _members(members, joints, read_joints, problems)
        read_supports = _supports(supports, joints, problems, values)
        used = _symbols_in(read_joints, read_supports, values, problems)
        for key, unit, known in (("length", length, LENGTHS), ("force", force, FORCES)):
            if unit not in known:
                problems.append(f"[units] {key}: {unknown_unit(unit, known)}")
        tension_only = _names("tension_only", tension_only, problems)
        no_uplift = _names("no_uplift", no_uplift, problems)
        _attachment(read_joints, read_members, problems)
        _behaviour(tension_only, no_uplift, read_members, read_supports, problems)
        run_through = _run_through(read_joints, read_members, problems) if not problems and not used else []
        if problems:
            raise InputError(problems)
        fields = (read_joints, read_members, read_supports, title, length, force, tension_only, no_uplift, used)
        for name, value in zip(Truss.__slots__, fields, strict=True):
            object.__setattr__(self, name, value)
        if used:
            self.at_values()  # must be well formed at the stated values too; warns of members through joints
        for text in run_through:
            warnings.warn(text, TrusscalcWarning, stacklevel=2)

    @property
    def links(self) -> tuple[Link, ...]:
        """All support links, each one unknown reaction."""
        return tuple(link for support in self.supports for link in support.links)

    def joint(self, name: str) -> Joint:
        """Return a joint by name (UnknownNameError if there is none)."""
        for joint in self.joints:
            if joint.name == name:
                return joint
        raise unknown_joint(name, [joint.name for joint in self.joints])

    def member(self, name: str) -> Member:
        """Return a member by name, its ends in either order (UnknownNameError if there is none)."""
        ends = {part.strip() for part in name.split("-")}
        for member in self.members:
            if {member.start, member.end} == ends:
                return member
        near = did_you_mean(name, [spelling for m in self.members for spelling in (m.name, f"{m.end}-{m.start}")])
        message = f"there is no member {name!r}{near}"
        raise UnknownNameError(message, name=name)

    def as_floats(self) -> FloatTruss:
        """Return the truss as plain floats for the numeric route, each rounded once from its exact value."""
        at_values = self.at_values()
        joints = _from_near_origin(at_values.joints)
        links = []
        for link in at_values.links:
            dx, dy = float(link.dx), float(link.dy)
            size = math.hypot(dx, dy)
            links.append((link.name, link.joint, dx / size, dy / size))
        return FloatTruss(joints, tuple((m.name, m.start, m.end) for m in self.members), tuple(links))

    def value(self, amount: Exact) -> Exact:
        """Return an amount with the truss's symbols replaced by their values."""
        return amount.substitute(dict(self.symbols)) if self.symbols else amount

    def at_values(self, values: Mapping[str, Exact] | None = None) -> Truss:
        """Return the truss with its symbols replaced by their values, or by others; without symbols, itself.

        Raises
        ------
        InputError
            When it is not well formed at these values, joints falling together, say.
        """
        if not self.symbols:
            return self
        at = dict(self.symbols) | dict(values or {})
        groups: dict[str, list[str]] = {}
        for member in self.members:
            groups.setdefault(member.group, []).append(member.name)
        supports: dict[str, Any] = {}
        for support in self.supports:
            links = [{"reaction": (link.dx.substitute(at), link.dy.substitute(at))} for link in support.links]
            single = len(links) == 1 and support.links[0].name.endswith(".r")
            supports[support.joint] = support.kind if support.kind != "links" else links[0] if single else links
        try:
            return Truss(
                {joint.name: (joint.x.substitute(at), joint.y.substitute(at)) for joint in self.joints},
                groups,
                supports,
                title=self.title,
                length=self.length,
                force=self.force,
                tension_only=self.tension_only,
                no_uplift=self.no_uplift,
            )
        except InputError as error:
            raise InputError([f"at the values of [symbols]: {problem}" for problem in error.problems]) from None


def symbol_values(symbols: Mapping[str, object] | Iterable[tuple[str, Exact]], problems: list[str]) -> dict[str, Exact]:
    """Return symbols with their values as exact numbers; what is wrong with them is added to problems."""
    values: dict[str, Exact] = {}
    for name, value in symbols.items() if isinstance(symbols, Mapping) else symbols:
        if len(name) > LONGEST_NAME or not name.isidentifier() or RESERVED_SYMBOL.fullmatch(name):
            problems.append(f"[symbols] {name[:40]!r}: a symbol is a word of letters and digits that is not taken")
            continue
        try:
            values[name] = number(value)
        except InexactNumberError as problem:
            problems.append(f"[symbols] {name}: {problem}")
    return values


def _symbols_in(
    joints: tuple[Joint, ...], supports: tuple[Support, ...], values: Mapping[str, Exact], problems: list[str]
) -> tuple[tuple[str, Exact], ...]:
    """Return the symbols that stand in coordinates or directions, with their values, which must be positive."""
    numbers = [part for joint in joints for part in (joint.x, joint.y)]
    numbers += [part for support in supports for link in support.links for part in (link.dx, link.dy)]
    found = {name for part in numbers for name in part.symbols}
    problems += [
        f"[symbols] {name}: stands for a length and must be positive"
        for name in sorted(found)
        if values[name].sign() <= 0
    ]
    return tuple((name, value) for name, value in values.items() if name in found)


def _from_near_origin(joints: tuple[Joint, ...]) -> dict[str, tuple[float, float]]:
    """Return coordinates as floats; for a truss far from the origin (a map grid) counted from its first joint.

    Otherwise the rounding of large coordinates alone would spoil the numeric route's digits.
    """
    places = {joint.name: (float(joint.x), float(joint.y)) for joint in joints}
    first = joints[0]
    x0, y0 = places[first.name]
    extent = max(math.hypot(x - x0, y - y0) for x, y in places.values())
    if math.hypot(x0, y0) <= extent:
        return places
    return {joint.name: (float(joint.x - first.x), float(joint.y - first.y)) for joint in joints}


def did_you_mean(name: str, known: Iterable[str], *, told: int = 0) -> str:
    """Return '; did you mean X?' for the nearest known name, or '' (also after many problems have been told)."""
    known = list(known) if told < MOST_SUGGESTIONS else []
    if len(known) > MOST_COMPARED:
        return ""
    near = difflib.get_close_matches(name[: 2 * LONGEST_NAME], known, n=1, cutoff=0.5)
    return f"; did you mean {near[0]}?" if near else ""


def unknown_joint(name: str, known: Iterable[str]) -> UnknownNameError:
    """Return the error for a joint that is not there."""
    message = f"there is no joint {name!r}{did_you_mean(name, known)}"
    return UnknownNameError(message, name=name)


def name_fault(name: object) -> str:
    """Return what is wrong with a joint name, or ''."""
    if not isinstance(name, str) or not name:
        return "a joint name must be a text of 1 to 40 characters"
    if len(name) > LONGEST_NAME:
        return f"a joint name has at most {LONGEST_NAME} characters"
    if name != name.strip():
        return "a joint name has no blank at its ends"
    for character in name:
        if character in "-,.":
            return f"a joint name must not contain {character!r}; use letters, digits, prime or underscore"
        kind = unicodedata.category(character)
        if kind[0] == "C" or kind in ("Zl", "Zp") or (kind == "Zs" and character != " "):
            return f"a joint name must not contain the character U+{ord(character):04X}"
    return ""


def point(pair: object, where: str, problems: list[str], symbols: Collection[str] = ()) -> tuple[Exact, Exact] | None:
    """Return a pair of exact numbers, or None after adding what is wrong to problems."""
    if isinstance(pair, str) or not isinstance(pair, Sequence) or len(pair) != PLANE:
        problems.append(f"{where}: two numbers are needed, such as [0, 2.5]")
        return None
    values = []
    for axis, value in zip("xy", pair, strict=True):
        try:
            values.append(number(value, symbols))
        except InexactNumberError as problem:
            problems.append(f"{where} {axis}: {problem}")
    return (values[0], values[1]) if len(values) == PLANE else None


def _joints(joints: Mapping[str, Sequence[object]], problems: list[str], symbols: Collection[str]) -> tuple[Joint, ...]:
    if not joints:
        problems.append("[joints]: a truss needs joints")
    found: list[Joint] = []
    places: dict[tuple[Exact, Exact], str] = {}
    spelled: dict[str, str] = {}
    for name, pair in joints.items():
        fault = name_fault(name)
        if fault:
            problems.append(f"[joints] {str(name)[:60]!r}: {fault}")
            continue
        same = spelled.setdefault(unicodedata.normalize("NFC", name), name)
        if same != name:
            problems.append(f"[joints] {name!r}: reads the same as another joint; give it another name")
        place = point(pair, f"[joints] {name}", problems, symbols)
        if place is None:
            continue
        other = places.setdefault(place, name)
        if other != name:
            problems.append(f"[joints] {name}: lies at the same place as {other}; move one or make them one joint")
        found.append(Joint(name, *place))
    return tuple(found)


def _members(
    members: Mapping[str, Iterable[str]] | Iterable[str],
    joints: Mapping[str, Sequence[object]],
    placed: tuple[Joint, ...],
    problems: list[str],
) -> tuple[Member, ...]:
    groups = members if isinstance(members, Mapping) else {"": members}
    places = {joint.name: (joint.x, joint.y) for joint in placed}
    found: list[Member] = []
    seen: dict[frozenset[str], str] = {}
    for group, names in groups.items():
        where = f"[members] {group}" if group else "[members]"
        if isinstance(names, str) or not isinstance(names, Iterable):
            problems.append(f'{where}: a list of members is needed, such as ["L0-L1", "L1-L2"]')
            continue
        for name in names:
            ends = [part.strip() for part in name.split("-")] if isinstance(name, str) else []
            if len(ends) != MEMBER_ENDS or not all(ends):
                problems.append(f"{where} {str(name)[:90]!r}: a member is written joint-joint, such as L0-U1")
                continue
            unknown = [end for end in ends if end not in joints]
            if unknown:
                problems += [
                    f"{where} {name!r}: there is no joint {end!r}{did_you_mean(end, joints, told=len(problems))}"
                    for end in unknown
                ]
                continue
            first, last = ends
            if first == last:
                problems.append(f"{where} {name!r}: both ends are the same joint; a member joins two joints")
                continue
            if frozenset(ends) in seen:
                problems.append(f"{where} {name!r}: stated twice (also as {seen[frozenset(ends)]}); remove one")
                continue
            seen[frozenset(ends)] = name
            if first in places and last in places and places[first] == places[last]:
                problems.append(f"{where} {name!r}: has no length; give its joints different coordinates")
            found.append(Member(first, last, str(group)))
    if not found and not problems:
        problems.append("[members]: a truss needs members")
    return tuple(found)


def _supports(
    supports: Mapping[str, Any],
    joints: Mapping[str, Sequence[object]],
    problems: list[str],
    symbols: Collection[str],
) -> tuple[Support, ...]:
    found = []
    for joint, stated in supports.items():
        if joint not in joints:
            near = did_you_mean(str(joint), joints, told=len(problems))
            problems.append(f"[supports] {str(joint)[:60]}: there is no such joint{near}")
            continue
        support = _support(joint, stated, problems, symbols)
        if support is not None:
            found.append(support)
    if not supports:
        problems.append("[supports]: a truss needs supports, such as a pin and a roller")
    return tuple(found)


def _support(joint: str, stated: Any, problems: list[str], symbols: Collection[str]) -> Support | None:
    where = f"[supports] {joint}"
    if stated == "pin":
        return Support(joint, "pin", (Link(f"{joint}.x", joint, ONE, ZERO), Link(f"{joint}.y", joint, ZERO, ONE)))
    if stated == "roller":
        return Support(joint, "roller", (Link(f"{joint}.y", joint, ZERO, ONE),))
    several = isinstance(stated, Sequence) and not isinstance(stated, str)
    listed = list(stated) if several else [stated]
    links = []
    for place, item in enumerate(listed, 1):
        if isinstance(item, Mapping) and (unknown := [key for key in item if key != "reaction"]):
            near = did_you_mean(str(unknown[0]), ["reaction"])
            problems.append(f"{where} {str(unknown[0])[:60]}: unknown key{near}; write {{ reaction = [x, y] }}")
            continue
        if not isinstance(item, Mapping) or not item:
            text = str(item)[:60]
            problems.append(f'{where}: {text!r} is no support; write "pin", "roller" or {{ reaction = [x, y] }}')
            continue
        direction = point(item["reaction"], f"{where} reaction", problems, symbols)
        if direction is None:
            continue
        if not direction[0] and not direction[1]:
            problems.append(f"{where}: the reaction needs a direction other than [0, 0]")
            continue
        links.append(Link(f"{joint}.r{place}" if several else f"{joint}.r", joint, *direction))
    if several and not listed:
        problems.append(f"{where}: the list of links is empty")
    return Support(joint, "links", tuple(links)) if links else None


def _attachment(joints: tuple[Joint, ...], members: tuple[Member, ...], problems: list[str]) -> None:
    attached = {end for member in members for end in (member.start, member.end)}
    if members:
        loose = [joint.name for joint in joints if joint.name not in attached]
        problems += [f"[joints] {name}: no member ends there; add one or remove the joint" for name in loose]


def _names(key: str, names: Iterable[str], problems: list[str]) -> tuple[str, ...]:
    if isinstance(names, str):
        problems.append(f"[behaviour] {key}: a list of names is needed, not one text")
        return ()
    return tuple(names)


def _behaviour(
    tension_only: tuple[str, ...],
    no_uplift: tuple[str, ...],
    members: tuple[Member, ...],
    supports: tuple[Support, ...],
    problems: list[str],
) -> None:
    ends = {frozenset((member.start, member.end)) for member in members}
    for name in tension_only:
        if not isinstance(name, str) or frozenset(name.split("-")) not in ends:
            near = did_you_mean(str(name), [member.name for member in members], told=len(problems))
            problems.append(f"[behaviour] tension_only {str(name)[:90]!r}: there is no such member{near}")
    held = [support.joint for support in supports]
    for name in no_uplift:
        if name not in held:
            near = did_you_mean(str(name), held, told=len(problems))
            problems.append(f"[behaviour] no_uplift {str(name)[:60]!r}: no support there{near}")


def _run_through(joints: tuple[Joint, ...], members: tuple[Member, ...], problems: list[str]) -> list[str]:
    """Return a warning for every member that runs through a joint it does not name.

    Floats sort out almost all pairs; only near misses are decided exactly.
    """
    places = {joint.name: _Place(float(joint.x), float(joint.y), joint) for joint in joints}
    by_x = sorted(places.values(), key=_x_of)
    by_y = sorted(places.values(), key=_y_of)
    found = []
    try:
        for member in members:
            start, end = places[member.start], places[member.end]
            slack = 1e-9 * (abs(start.x) + abs(start.y) + abs(end.x) + abs(end.y))
            beside = min(_span(by_x, _x_of, start, end, slack), _span(by_y, _y_of, start, end, slack), key=len)
            found += [
                f"member {member.name} runs through joint {place.joint.name} without ending there; "
                f"if they are connected, state two members"
                for place in beside
                if place is not start and place is not end and _lies_between(place, start, end, slack)
            ]
    except InexactNumberError as problem:
        problems.append(f"[joints]: the coordinates cannot be computed with together: {problem}")
    return found


class _Place(NamedTuple):
    x: float
    y: float
    joint: Joint


_x_of, _y_of = itemgetter(0), itemgetter(1)


def _span(
    places: list[_Place], by: Callable[[_Place], float], start: _Place, end: _Place, slack: float
) -> Sequence[_Place]:
    low, high = sorted((by(start), by(end)))
    return places[bisect_left(places, low - slack, key=by) : bisect_right(places, high + slack, key=by)]


def _lies_between(place: _Place, start: _Place, end: _Place, slack: float) -> bool:
    if not min(start.x, end.x) - slack <= place.x <= max(start.x, end.x) + slack:
        return False
    if not min(start.y, end.y) - slack <= place.y <= max(start.y, end.y) + slack:
        return False
    across, along = end.x - start.x, end.y - start.y
    if abs((place.x - start.x) * along - (place.y - start.y) * across) > slack * (abs(across) + abs(along)):
        return False
    a, b, c = start.joint, place.joint, end.joint
    dx, dy = c.x - a.x, c.y - a.y
    part = (b.x - a.x) * dx + (b.y - a.y) * dy
    return (b.x - a.x) * dy == (b.y - a.y) * dx and ZERO < part < dx * dx + dy * dy
