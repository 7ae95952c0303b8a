"""The blunders a diagnosis tries: every alteration of one truss and its loads that people are known to make.

``strain`` orders them where several fit alike: the plain ones of the trade first. What can be found from the values
themselves (a ratio, a place, a direction) is not enumerated here.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import combinations, product
from typing import Final

from trusscalc.altered import PIN, Alteration, Pair, directions
from trusscalc.loads import Combination, LoadCase, combine
from trusscalc.slips import slips
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

MOST_STATES: Final = 200
"""Other cases and combinations tried; a combination with pairs of factors stands for several."""
MOST_MOVES: Final = 6000
"""Loads are tried on every other joint while that is no more than so many; then on neighbours alone."""
RULES: Final = {"SelfWeight": "self-weight", "LineLoad": "line load", "PointLoad": "point load"}
SAME: Final = 1e-9
"""Share of the truss's size within which two places are one, and sine below which directions are."""


@dataclass(frozen=True, slots=True)
class Part:
    """Some of the loads that act: a case with its factor, or a rule within it.

    Attributes
    ----------
    where : tuple of str
        The case, and the rule where it is one.
    words : str
        Such as "the case dead".
    loads : dict of str to (float, float)
        Forces by joint, factor included.
    """

    where: tuple[str, ...]
    words: str
    loads: Mapping[str, Pair]


@dataclass(frozen=True, slots=True)
class Compared:
    """What was compared: the truss at its values, the loads, the parts they have, and all other load states.

    Attributes
    ----------
    truss : Truss
    case : LoadCase
    parts : tuple of Part
        Cases in the loads; a single case is one part.
    rules : tuple of Part
        Rules in the cases, such as self-weight.
    others : tuple of Part
        The other cases and combinations of the file.
    """

    truss: Truss
    case: LoadCase
    parts: tuple[Part, ...]
    rules: tuple[Part, ...]
    others: tuple[Part, ...]


def compared(stated: TrussFile, case: str | LoadCase) -> Compared:
    """Return what is compared under the name of a case or a combination, or as loads of its own.

    Raises
    ------
    UnknownNameError
        When there is neither of that name.
    """
    loads = stated.case(case) if isinstance(case, str) else case
    by_name = {each.name: each.as_floats() for each in stated.acting}
    combination = next((each for each in stated.all_combinations if each.name == loads.name), None)
    factors = {loads.name: 1.0} if combination is None else {each: float(f[0]) for each, f in combination.factors}
    parts: dict[str, Part] = {}
    if all(part in by_name for part in factors):
        parts = {part: _case(part, times(factor, by_name[part])) for part, factor in factors.items()}
    total: dict[str, Pair] = {}
    for part in parts.values():
        total = added_up(total, part.loads)
    rules = tuple(_rules(stated, factors, parts))
    if not _equal(total, loads.as_floats()):
        parts, rules = {loads.name: _case(loads.name, loads.as_floats())}, ()
    others = tuple(_others(stated, loads.name))
    return Compared(stated.truss.at_values(), loads, tuple(parts.values()), rules, others)


def _case(name: str, loads: Mapping[str, Pair]) -> Part:
    return Part((name,), f"the case {name}", loads)


def _equal(one: Mapping[str, Pair], other: Mapping[str, Pair]) -> bool:
    apart = [abs(part) for pair in added_up(one, times(-1, other)).values() for part in pair]
    return max(apart, default=0.0) <= SAME * max((abs(part) for pair in other.values() for part in pair), default=0.0)


def _rules(stated: TrussFile, factors: Mapping[str, float], parts: Mapping[str, Part]) -> Iterator[Part]:
    """Yield the panel loads that are not all of their case."""
    symbols = {case.name: case.symbols for case in stated.acting}
    for spread in stated.spreads():
        case = spread.rule.case
        if case in parts:
            loads = LoadCase(case, spread.loads, symbols=symbols[case]).as_floats()
            loads = times(factors[case], loads)
            if loads != parts[case].loads:
                kind = RULES[type(spread.rule).__name__]
                yield Part((case, kind), f"the {kind} in the case {case}", loads)


def times(factor: float, loads: Mapping[str, Pair]) -> dict[str, Pair]:
    """Return joint loads multiplied."""
    return {joint: (factor * fx, factor * fy) for joint, (fx, fy) in loads.items()}


def _others(stated: TrussFile, name: str) -> Iterator[Part]:
    """Yield the other cases, and the other combinations with every choice of their factors."""
    left = MOST_STATES
    for case in stated.acting:
        if case.name != name and left:
            left -= 1
            yield _case(case.name, case.as_floats())
    moving = {load.name for load in stated.moving}
    for combination in stated.all_combinations:
        if combination.name == name or moving & {case for case, _ in combination.factors}:
            continue
        for chosen in _choices(combination):
            if left:
                left -= 1
                loads = combine(chosen, stated.acting).as_floats()
                yield Part((combination.name,), f"the combination {chosen.name}", loads)


def _choices(combination: Combination) -> Iterator[Combination]:
    """Yield a combination with one factor for each case, optional cases present and absent."""
    listed = [
        [(case, factor) for factor in factors] + [(case, None)] * (case in combination.optional)
        for case, factors in combination.factors
    ]
    several = any(len(choices) > 1 for choices in listed)
    for choice in product(*listed):
        taken = [(case, factor) for case, factor in choice if factor is not None]
        told = ", ".join(f"{float(factor):g} {case}" for case, factor in taken)
        yield Combination(f"{combination.name} ({told})" if several else combination.name, taken)


# --- loads ------------------------------------------------------------------------------------------------


def of_cases(what: Compared) -> Iterator[Alteration]:
    """Yield cases and rules left out or taken twice, and other load states in place of the one compared."""
    for part in (*what.parts, *what.rules):
        strain = 1 if part in what.parts else 2
        yield _added("case-missing", part.where, f"{part.words} left out", times(-1, part.loads), strain)
        yield _added("case-doubled", part.where, f"{part.words} taken twice", part.loads, strain)
    now = what.case.as_floats()
    for other in what.others:
        change = added_up(other.loads, times(-1, now))
        yield _added("wrong-combination", other.where, f"the results of {other.words}", change, 1)
    present = {part.where for part in what.parts}
    for other in what.others:
        if other.where not in present:
            yield _added("wrong-combination", other.where, f"{other.words} acting as well", other.loads, 4)


def of_loads(what: Compared) -> Iterator[Alteration]:
    """Yield loads of single joints left out, doubled, reversed and moved; those of a single case of several too."""
    near, unit = neighbours(what.truss), what.truss.force
    total = what.case.as_floats()
    sources = [(Part((), "", total), 0)]
    if len(what.parts) > 1:
        sources += [(part, 2) for part in what.parts]
    for part, strain in sources:
        loads = {joint: load for joint, load in part.loads.items() if any(load)}
        everywhere = len(loads) * len(what.truss.joints) <= MOST_MOVES
        for joint, (fx, fy) in loads.items():
            if strain and total.get(joint) == (fx, fy):
                continue  # the whole load of the joint is from this case
            of_case = f" of {part.words}" if strain else ""
            named = f"the load ({plain(fx)}, {plain(fy)}) {unit} on {joint}{of_case}"
            yield _added("load-missing", (joint,), f"{named} left out", {joint: (-fx, -fy)}, 2 + strain)
            yield _added("load-doubled", (joint,), f"{named} taken twice", {joint: (fx, fy)}, 2 + strain)
            yield _added("load-reversed", (joint,), f"{named} reversed", {joint: (-2 * fx, -2 * fy)}, 2 + strain)
            yield from _of_components(joint, (fx, fy), named, 5 + strain)
            for other in [each.name for each in what.truss.joints] if everywhere else near[joint]:
                if other != joint:
                    change = {joint: (-fx, -fy), other: (fx, fy)}
                    far = 0 if other in near[joint] else 3
                    yield _added("load-moved", (joint, other), f"{named} put on {other}", change, 3 + far + strain)


def _of_components(joint: str, load: Pair, named: str, strain: int) -> Iterator[Alteration]:
    fx, fy = load
    if fx and fy:
        for part, axis in (((fx, 0.0), "x"), ((0.0, fy), "y")):
            less, twice = times(-1, {joint: part}), times(-2, {joint: part})
            yield _added("load-missing", (joint,), f"the {axis} part of {named} left out", less, strain)
            yield _added("load-doubled", (joint,), f"the {axis} part of {named} taken twice", {joint: part}, strain)
            yield _added("load-reversed", (joint,), f"the {axis} part of {named} reversed", twice, strain)


def _added(explanation: str, where: tuple[str, ...], words: str, loads: Mapping[str, Pair], strain: int) -> Alteration:
    listed = tuple((joint, fx, fy) for joint, (fx, fy) in loads.items() if fx or fy)
    return Alteration(explanation=explanation, where=where, words=words, loads=listed, strain=strain)


def added_up(one: Mapping[str, Pair], other: Mapping[str, Pair]) -> dict[str, Pair]:
    """Return two sets of joint loads as one."""
    total = dict(one)
    for joint, (fx, fy) in other.items():
        x, y = total.get(joint, (0.0, 0.0))
        total[joint] = (x + fx, y + fy)
    return total


def neighbours(truss: Truss) -> dict[str, list[str]]:
    """Return the joints each joint has a member to."""
    found: dict[str, list[str]] = {joint.name: [] for joint in truss.joints}
    for member in truss.members:
        found[member.start].append(member.end)
        found[member.end].append(member.start)
    return found


# --- supports ---------------------------------------------------------------------------------------------


def of_supports(truss: Truss) -> Iterator[Alteration]:
    """Yield supports exchanged, pins in place of rollers, rollers turned, and joints held that should be free."""
    held = {support.joint: directions(support) for support in truss.supports}
    for one, other in combinations(held, 2):
        if held[one] != held[other]:
            words = f"the supports at {one} and {other} exchanged"
            swapped = ((one, held[other]), (other, held[one]))
            yield Alteration(
                explanation="support-exchanged", where=(one, other), words=words, supports=swapped, strain=2
            )
    for joint, links in held.items():
        if _is_single(links):
            words = f"a pin at {joint} in place of the roller"
            yield Alteration(
                explanation="support-extra", where=(joint,), words=words, supports=((joint, PIN),), strain=2
            )
            for turned in _turned(links[0], joint, truss):
                yield turned_to(joint, turned, strain=3)
    for name in (joint.name for joint in truss.joints if joint.name not in held):
        for link, way in zip(PIN, ("sideways", "up and down"), strict=True):
            words = f"a support at {name} that holds it {way}"
            yield Alteration(
                explanation="support-extra", where=(name,), words=words, supports=((name, (link,)),), strain=6
            )


def turned_to(joint: str, link: Pair, *, strain: int, fitted: int = 0) -> Alteration:
    """Return the roller at a joint with its reaction along another direction."""
    angle = math.degrees(math.atan2(link[1], link[0])) % 180
    words = f"the roller at {joint} turned, its reaction at {plain(angle)} degrees to the x axis"
    return Alteration(
        explanation="support-turned",
        where=(joint,),
        words=words,
        supports=((joint, (link,)),),
        strain=strain,
        fitted=fitted,
    )


def _is_single(links: Sequence[Pair]) -> bool:
    return all(_parallel(links[0], link) for link in links)


def _parallel(one: Pair, other: Pair) -> bool:
    return abs(one[0] * other[1] - one[1] * other[0]) <= SAME * math.hypot(*one) * math.hypot(*other)


def _turned(link: Pair, joint: str, truss: Truss) -> list[Pair]:
    """Return likely wrong directions of a reaction: along the axes, mirrored, square, along and square to members."""
    dx, dy = link
    tried = [(1.0, 0.0), (0.0, 1.0), (-dy, dx), (-dx, dy), (dy, dx)]
    places = {each.name: (float(each.x), float(each.y)) for each in truss.joints}
    for other in neighbours(truss)[joint]:
        x, y = (b - a for a, b in zip(places[joint], places[other], strict=True))
        tried += [(x, y), (-y, x)]
    found: list[Pair] = []
    for turned in tried:
        if not any(_parallel(turned, known) for known in (link, *found)):
            found.append(turned)
    return found


# --- geometry ---------------------------------------------------------------------------------------------


def of_members(listed: Iterable[str]) -> Iterator[Alteration]:
    """Yield each of the listed members left out."""
    for name in listed:
        yield Alteration(
            explanation="member-missing", where=(name,), words=f"the member {name} left out", without=name, strain=2
        )


def of_places(truss: Truss) -> Iterator[Alteration]:
    """Yield joints displaced by one slip of typing in one coordinate, or by both coordinates exchanged."""
    for joint in truss.joints:
        x, y = float(joint.x), float(joint.y)
        spots = [((slipped, y), f"x {plain(slipped)} for {plain(x)}, {words}") for slipped, words in slips(x)]
        spots += [((x, slipped), f"y {plain(slipped)} for {plain(y)}, {words}") for slipped, words in slips(y)]
        if x != y:
            spots.append(((y, x), "x and y exchanged"))
        for spot, words in spots:
            yield displaced(joint.name, spot, f"joint {joint.name} at {words}", strain=4)


def displaced(joint: str, spot: Pair, words: str, *, strain: int, fitted: int = 0) -> Alteration:
    """Return a joint at another place."""
    return Alteration(
        explanation="joint-displaced",
        where=(joint,),
        words=words,
        places=((joint, *spot),),
        strain=strain,
        fitted=fitted,
    )


# --- words ------------------------------------------------------------------------------------------------


def plain(value: float) -> str:
    """Return a number to four significant figures, never with an exponent.

    Examples
    --------
    >>> plain(-12.5), plain(123456.0), plain(1 / 3), plain(0.0)
    ('-12.5', '123456', '0.3333', '0')
    """
    text = f"{value:.{max(0, 3 - math.floor(math.log10(abs(value))))}f}" if value else "0"
    return text.rstrip("0").rstrip(".") if "." in text else text
