"""Mirrored models: the truss alone, with its loads or its supports, and loads on joints that mirror each other."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping

from trusscalc.alterations import SAME, Compared, added_up, times
from trusscalc.altered import Alteration, Pair, directions


def of_mirrors(what: Compared) -> Iterator[Alteration]:
    """Yield mirrored models: the truss alone, with its loads or its supports, and on joints that mirror each other."""
    places = {joint.name: (float(joint.x), float(joint.y)) for joint in what.truss.joints}
    loads, held = what.case.as_floats(), {support.joint: directions(support) for support in what.truss.supports}
    for axis, way in enumerate(("left to right", "upside down")):
        level = [place[axis] for place in places.values()]
        middle = (min(level) + max(level)) / 2
        image = {joint: _mirrored(place, axis, middle) for joint, place in places.items()}
        listed = tuple((joint, *place) for joint, place in image.items())
        turned_loads = {joint: _mirrored(load, axis, 0.0) for joint, load in loads.items()}
        turned = {joint: tuple(_mirrored(link, axis, 0.0) for link in links) for joint, links in held.items()}
        change = added_up(turned_loads, times(-1, loads))
        yield _mirror(f"the truss mirrored {way} under the same loads", places=listed)
        yield _mirror(f"the truss and its supports mirrored {way} under the same loads", change)
        yield _mirror(f"the truss and its loads mirrored {way}, the directions of the supports not", {}, turned)
        partners = _partners(places, image)
        if partners:
            yield from _onto_partners(loads, held, partners, axis, way)


def _mirror(
    words: str,
    loads: Mapping[str, Pair] | None = None,
    supports: Mapping[str, tuple[Pair, ...]] | None = None,
    places: tuple[tuple[str, float, float], ...] = (),
) -> Alteration:
    return Alteration(
        explanation="mirrored",
        where=(),
        words=words,
        loads=tuple((joint, fx, fy) for joint, (fx, fy) in (loads or {}).items() if fx or fy),
        supports=tuple((supports or {}).items()),
        places=places,
        strain=3,
    )


def _mirrored(place: Pair, axis: int, middle: float) -> Pair:
    x, y = place
    return (2 * middle - x, y) if axis == 0 else (x, 2 * middle - y)


def _partners(places: Mapping[str, Pair], image: Mapping[str, Pair]) -> dict[str, str]:
    """Return the joint that stands where each joint is mirrored to; nothing if one has no partner."""
    size = max(math.dist(one, next(iter(places.values()))) for one in places.values())
    found = {}
    for joint, spot in image.items():
        partner = min(places, key=lambda name: math.dist(places[name], spot))
        if math.dist(places[partner], spot) > SAME * size:
            return {}
        found[joint] = partner
    return found


def _onto_partners(
    loads: Mapping[str, Pair], held: Mapping[str, tuple[Pair, ...]], partners: Mapping[str, str], axis: int, way: str
) -> Iterator[Alteration]:
    """Yield loads and supports put on the joints that mirror theirs."""

    def turned(vector: Pair) -> Pair:
        return _mirrored(vector, axis, 0.0)

    everywhere: dict[str, tuple[Pair, ...]] = dict.fromkeys((*held, *(partners[joint] for joint in held)), ())
    supports = everywhere | {partners[joint]: tuple(map(turned, links)) for joint, links in held.items()}
    away = times(-1, loads)
    mirrored = added_up({partners[joint]: turned(load) for joint, load in loads.items()}, away)
    carried = added_up({partners[joint]: load for joint, load in loads.items()}, away)
    yield _mirror(f"the values of the truss mirrored {way}, each member with its partner's", mirrored, supports)
    yield _mirror(f"the loads mirrored {way}", mirrored)
    yield _mirror(f"the loads put on the joints mirrored {way}", carried)
    yield _mirror(f"the loads put on the joints mirrored {way}, the supports mirrored", carried, supports)
    yield _mirror(f"the supports mirrored {way}", {}, supports)
