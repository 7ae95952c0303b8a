"""What a train does where it stands, wherever that is: axles, and the uniform loads that go with them, exactly.

``travel`` finds the stands that govern; here any stand is worked out, by the same rules, so that a train can be moved
by hand over an influence line. At a stand that governs both must give the same, which is proven each time.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import accumulate, pairwise

from trusscalc.errors import InputError
from trusscalc.exact import ZERO, Exact
from trusscalc.influence import InfluenceLine
from trusscalc.trains import Train
from trusscalc.travel import Direction, Extreme, Patch, Stand

Stretch = tuple[Exact, Exact]


def standing(
    line: InfluenceLine,
    train: Train,
    lead_axle_at: Exact,
    direction: Direction = "forward",
    spacing: Sequence[Exact] = (),
) -> tuple[Extreme, Extreme]:
    """Return the largest and the least force with a train's leading axle at a position.

    The two differ by what acts on adverse lengths only (lane load, load beside the group) and by axles that a train
    may leave out; a train without such loads has one force for each stand.

    Parameters
    ----------
    line : InfluenceLine
        The influence line.
    train : Train
        The train.
    lead_axle_at : Exact
        Position of the leading axle, along the chain from its first joint; may lie beyond either end.
    direction : str
        ``forward``, from the first joint of the chain to its last, or ``backward``.
    spacing : sequence of Exact, optional
        The spacings taken, within the train's limits; without it the smallest.

    Raises
    ------
    InputError
        For spacings that the train does not have.
    """
    spacing = tuple(spacing) or tuple(low for low, _ in train.spacing)
    _refuse_other_spacing(train, spacing)
    way = -1 if direction == "forward" else 1
    places = [lead_axle_at + way * behind for behind in accumulate(spacing, initial=ZERO)]
    return _effect(line, train, places, direction, spacing, 1), _effect(line, train, places, direction, spacing, -1)


def _refuse_other_spacing(train: Train, spacing: Sequence[Exact]) -> None:
    allowed = len(spacing) == len(train.spacing) and all(
        low <= taken <= high for taken, (low, high) in zip(spacing, train.spacing, strict=True)
    )
    if not allowed:
        message = f"train {train.name!r}: these are not its axle spacings; give one within the limits of each"
        raise InputError(message)


def _effect(  # noqa: PLR0917 - called in one place
    line: InfluenceLine,
    train: Train,
    places: Sequence[Exact],
    direction: Direction,
    spacing: tuple[Exact, ...],
    sense: int,
) -> Extreme:
    """Return the force in one sense, put together from what stands on the chain."""
    end = line.positions[-1]
    axles_at = [place if ZERO <= place <= end else None for place in places]
    if train.omit:
        axles_at = [at if at is not None and line.at(at).sign() * sense > 0 else None for at in axles_at]
    counted = [(load, at) for load, at in zip(train.axles, axles_at, strict=True) if at is not None]
    parts = {"axles": sum((load * line.at(at) for load, at in counted), ZERO) * (1 + train.impact)}
    patches: list[Patch] = []
    for name, amount, stretches in _uniform(train, places, direction, line, sense):
        clipped = [(max(a, ZERO), min(b, end)) for a, b in stretches]
        loaded = [(a, b) for a, b in clipped if a < b]
        patches += [(a, b, train.share * amount) for a, b in loaded]
        parts[name] = parts.get(name, ZERO) + amount * sum((_area(line, a, b) for a, b in loaded), ZERO)
    signed = tuple((name, train.share * value) for name, value in parts.items())
    stand = Stand(train.name, direction, places[0], tuple(axles_at), spacing, at_limit=False)
    patches.sort(key=lambda patch: patch[0])
    total = sum((value for _, value in signed), ZERO)
    return Extreme(total, stand, signed, tuple(patches), train.name, line.ordinates)


def _uniform(
    train: Train, places: Sequence[Exact], direction: Direction, line: InfluenceLine, sense: int
) -> list[tuple[str, Exact, list[Stretch]]]:
    """Return the uniform loads: name, force per length, and the stretches they stand on."""
    end = line.positions[-1]
    forward = direction == "forward"
    found: list[tuple[str, Exact, list[Stretch]]] = []

    def beyond(place: Exact, distance: Exact, *, ahead: bool) -> Stretch:
        onward = forward == ahead
        return (place + distance, end) if onward else (ZERO, place - distance)

    adverse = _adverse(line, sense)
    if train.lane:
        found.append(("lane", train.lane, adverse))
    if train.follow:
        distance, amount = train.follow
        found.append(("follow", amount, [beyond(places[-1], distance, ahead=False)]))
    if train.beside:
        distance, amount = train.beside
        for place, ahead in ((places[0], True), (places[-1], False)):
            low, high = beyond(place, distance, ahead=ahead)
            found.append(("beside", amount, [(max(a, low), min(b, high)) for a, b in adverse]))
    return found


def _adverse(line: InfluenceLine, sense: int) -> list[Stretch]:
    """Return where ordinates have a sense."""
    found: list[Stretch] = []
    for (start, low), (end, high) in pairwise(line.corners):
        if (low + high).sign() * sense > 0:
            found[-1:] = [(found[-1][0], end)] if found and found[-1][1] == start else [*found[-1:], (start, end)]
    return found


def _area(line: InfluenceLine, start: Exact, end: Exact) -> Exact:
    """Return the area of the line between two positions on the chain."""
    inner = [place for place in line.positions if start < place < end]
    total = ZERO
    for a, b in pairwise([start, *inner, end]):
        total = total + (b - a) * (line.at(a) + line.at(b)) / 2
    return total
