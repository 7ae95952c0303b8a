"""What stands on each panel and member, which share of it either joint takes, and the sums of the load as it stands.

Shares are the reactions of simple beams, found from the resultant on each panel. The sums are found another way: the
load is integrated over the chain as it lies (Simpson's rule, which is exact here: the integrand is of the second
degree). ``panelloads`` holds the two against each other.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final, NamedTuple

from trusscalc.chains import Chain
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.loadrules import LineLoad, PointLoad, SelfWeight, weight_per_length
from trusscalc.loads import factor_text
from trusscalc.roots import sqrt
from trusscalc.truss import Member, Truss, did_you_mean

Point = tuple[Exact, Exact]
Sums = tuple[Exact, Exact, Exact]
"""ΣFx, ΣFy and ΣM about (0, 0), anticlockwise positive."""

FIXED_DIRECTIONS: Final[dict[str, Point]] = {
    "down": (ZERO, -ONE),
    "up": (ZERO, ONE),
    "left": (-ONE, ZERO),
    "right": (ONE, ZERO),
}
SIMPSON: Final = (1, 4, 1)


@dataclass(frozen=True, slots=True)
class SpreadLine:
    """What stands on one panel, at one joint or on one member, and where it goes.

    Attributes
    ----------
    stands_on : str
        The panel, its joints in the order of the chain; a joint; or a member.
    start, end : Exact
        Where the load on it starts and ends, measured along the chain as the rule's ``per`` says; along a member
        from its first joint. Equal for a force.
    intensities : tuple of Exact
        Force per length at start and end, width and lever-rule share included; () for a force.
    resultant : Exact
        In the truss's unit of force, positive along ``direction``.
    direction : (Exact, Exact)
        Of length 1.
    at : Exact or None
        Where the resultant stands, measured as start and end; None where the load adds up to nothing.
    shares : tuple of (str, Exact)
        The joints and the part of the resultant that each takes.
    reach : (Exact, Exact)
        Where these joints stand, measured as start and end.
    """

    stands_on: str
    start: Exact
    end: Exact
    intensities: tuple[Exact, ...]
    resultant: Exact
    direction: Point
    at: Exact | None
    shares: tuple[tuple[str, Exact], ...]
    reach: tuple[Exact, Exact]


def moved(force: Point, place: Point) -> Sums:
    """Return a force at a place with its moment about (0, 0)."""
    return (*force, place[0] * force[1] - place[1] * force[0])


def total(parts: Iterable[Sums]) -> Sums:
    """Return the sums of several forces."""
    fx, fy, moment = ZERO, ZERO, ZERO
    for part in parts:
        fx, fy, moment = fx + part[0], fy + part[1], moment + part[2]
    return fx, fy, moment


def _length(dx: Exact, dy: Exact) -> Exact:
    return sqrt(dx * dx + dy * dy)


# --- along a chain ----------------------------------------------------------------------------------------


class Path(NamedTuple):
    """A chain with the places of its joints: in the plane, and measured along it from the first."""

    joints: tuple[str, ...]
    points: tuple[Point, ...]
    at: tuple[Exact, ...]

    @property
    def symbols(self) -> set[str]:
        """The symbols in its coordinates; places along it cannot be compared then."""
        return {name for point in self.points for part in point for name in part.symbols}

    def panel(self, place: Exact) -> int:
        """Return the number of the panel that a place is on; at a joint, of the panel that begins there."""
        return min(bisect_right(self.at, place), len(self.at) - 1) - 1

    def point(self, place: Exact, panel: int) -> Point:
        """Return where a place on a panel is in the plane."""
        part = (place - self.at[panel]) / (self.at[panel + 1] - self.at[panel])
        (x, y), (dx, dy) = self.points[panel], self.step(panel)
        return x + part * dx, y + part * dy

    def step(self, panel: int) -> Point:
        """Return how far a panel goes to the right and up."""
        (x, y), (x_end, y_end) = self.points[panel : panel + 2]
        return x_end - x, y_end - y


def path_of(truss: Truss, chain: Chain, per: str) -> Path:
    """Return a chain's path, measured on plan or along its slope; symbols stay symbols."""
    places = {joint.name: (joint.x, joint.y) for joint in truss.joints}
    points = tuple(places[name] for name in chain.joints)
    onward = truss.value(points[-1][0] - points[0][0]).sign()
    at = [ZERO]
    for (x, y), (x_end, y_end) in pairwise(points):
        at.append(at[-1] + (onward * (x_end - x) if per == "plan" else _length(x_end - x, y_end - y)))
    return Path(chain.joints, points, tuple(at))


def place_faults(rule: LineLoad | PointLoad, path: Path) -> list[str]:
    """Return what is wrong with places off the chain, or that a chain with symbols cannot be told to have."""
    places = {"from": rule.begins, "to": rule.ends} if isinstance(rule, LineLoad) else {"at": rule.at}
    told = {key: place for key, place in places.items() if place is not None}
    if told and path.symbols:
        told_keys = " and ".join(told)
        return [f"{told_keys}: the chain's coordinates hold the symbol {min(path.symbols)}; write numbers there"]
    end = path.at[-1]
    measured = "on plan" if rule.per == "plan" else "along its slope"
    problems = [
        f"{key}: {factor_text(place)} is off the chain, which is {factor_text(end)} long {measured}"
        + ("; leave it out for the whole chain" if key == "to" else "")
        for key, place in told.items()
        if place > end or (place == end and key == "from")
    ]
    if isinstance(rule, PointLoad) and rule.direction == "normal" and rule.at in path.at[1:-1]:
        panel = path.panel(rule.at)
        (dx, dy), (dx_on, dy_on) = path.step(panel - 1), path.step(panel)
        if dx * dy_on != dy * dx_on:
            problems.append(
                f"direction: at {path.joints[panel]} the chain bends, and no one direction is at right angles to it; "
                "write [dx, dy]"
            )
    return problems


def _direction(rule: LineLoad | PointLoad, path: Path, panel: int) -> Point:
    """Return the direction, of length 1, in which a positive load acts on a panel."""
    if rule.direction == "normal":  # away from the side that lies to the left
        along, up = path.step(panel)
        dx, dy = up, -along
    elif isinstance(rule.direction, str):
        return FIXED_DIRECTIONS[rule.direction]
    else:
        dx, dy = rule.direction
    length = _length(dx, dy)
    return dx / length, dy / length


class _Stretch(NamedTuple):
    """A load that changes straight from one end to the other."""

    start: Exact
    end: Exact
    at_start: Exact
    at_end: Exact


def of_line(rule: LineLoad, path: Path, carried: Exact) -> tuple[list[SpreadLine], Sums]:
    """Return what stands on each panel of a chain, and the sums of the load as it stands.

    Parameters
    ----------
    rule : LineLoad
        What acts, on places of the path.
    path : Path
        The chain, measured as the rule says.
    carried : Exact
        Part of the load that this truss carries.
    """
    factor = carried if rule.width is None else carried * rule.width
    start = ZERO if rule.begins is None else rule.begins
    end = path.at[-1] if rule.ends is None else rule.ends

    def intensity(place: Exact) -> Exact:
        if rule.start == rule.end:
            return factor * rule.start
        return factor * (rule.start * (end - place) + rule.end * (place - start)) / (end - start)

    lines = []
    for panel, (first, last) in enumerate(pairwise(path.at)):
        low = first if rule.begins is None or rule.begins < first else rule.begins
        high = last if rule.ends is None or rule.ends > last else rule.ends
        if path.symbols or low < high:
            stretch = _Stretch(low, high, intensity(low), intensity(high))
            lines.append(_on_panel(stretch, path, panel, _direction(rule, path, panel)))
    return lines, _integrated(rule, path, (start, end), factor)


def _on_panel(load: _Stretch, path: Path, panel: int, direction: Point) -> SpreadLine:
    """Return the shares of a panel's two joints: the reactions of a simple beam."""
    length = load.end - load.start
    resultant = (load.at_start + load.at_end) / 2 * length
    low, high = path.at[panel : panel + 2]
    # about the start of the load: of its two triangles, one has its centre at a third and one at two thirds
    moment = (load.at_start + 2 * load.at_end) * length * length / 6
    far = (moment + resultant * (load.start - low)) / (high - low)
    first, second = path.joints[panel : panel + 2]
    return SpreadLine(
        stands_on=f"{first}-{second}",
        start=load.start,
        end=load.end,
        intensities=(load.at_start, load.at_end),
        resultant=resultant,
        direction=direction,
        at=_centre(load, resultant, moment),
        shares=((first, resultant - far), (second, far)),
        reach=(low, high),
    )


def _centre(load: _Stretch, resultant: Exact, moment: Exact) -> Exact | None:
    if not resultant:
        return None
    if load.at_start == load.at_end:
        return (load.start + load.end) / 2
    return load.start + moment / resultant


def _integrated(rule: LineLoad, path: Path, ends: tuple[Exact, Exact], factor: Exact) -> Sums:
    """Return the sums of a line load as it stands, without any share."""
    start, end = ends
    growth = (rule.end - rule.start) / (end - start) if rule.end != rule.start else ZERO
    parts = []
    for panel, low, high in _straight_pieces(rule, path, start, end):
        dx, dy = _direction(rule, path, panel)
        for place, weight in zip((low, (low + high) / 2, high), SIMPSON, strict=True):
            amount = factor * (rule.start + growth * (place - start)) * (high - low) * weight / 6
            parts.append(moved((amount * dx, amount * dy), path.point(place, panel)))
    return total(parts)


def _straight_pieces(rule: LineLoad, path: Path, start: Exact, end: Exact) -> Iterator[tuple[int, Exact, Exact]]:
    """Return the panel, start and end of each straight piece of chain under the load."""
    if rule.begins is None and rule.ends is None:
        breaks = list(path.at)
    else:
        breaks = sorted({start, end, *(place for place in path.at if start < place < end)})
    panel = 0 if rule.begins is None else path.panel(start)
    for count, (low, high) in enumerate(pairwise(breaks)):
        yield panel + count, low, high


def of_force(rule: PointLoad, path: Path, carried: Exact) -> tuple[list[SpreadLine], Sums]:
    """Return what a force gives to the joints beside it, and its sums as it stands.

    Parameters
    ----------
    rule, path, carried
        As in ``of_line``.
    """
    amount = carried * rule.force
    panel = path.panel(rule.at)
    direction = _direction(rule, path, panel)
    applied = moved((amount * direction[0], amount * direction[1]), path.point(rule.at, panel))
    if rule.at in path.at:
        joint = path.joints[path.at.index(rule.at)]
        name, shares, reach = joint, ((joint, amount),), (rule.at, rule.at)
        return [SpreadLine(name, rule.at, rule.at, (), amount, direction, rule.at, shares, reach)], applied
    low, high = path.at[panel : panel + 2]
    first, second = path.joints[panel : panel + 2]
    both = ((first, amount * (high - rule.at) / (high - low)), (second, amount * (rule.at - low) / (high - low)))
    name = f"{first}-{second}"
    return [SpreadLine(name, rule.at, rule.at, (), amount, direction, rule.at, both, (low, high))], applied


# --- members ----------------------------------------------------------------------------------------------


def weighed(rule: SelfWeight, truss: Truss, problems: list[str]) -> tuple[Member, ...]:
    """Return the members of a rule; names that are not there, or count a member again, are added to ``problems``."""
    if not rule.members:
        return truss.members
    groups: dict[str, list[Member]] = {}
    by_ends: dict[frozenset[str], Member] = {}
    for member in truss.members:
        if member.group:
            groups.setdefault(member.group, []).append(member)
        by_ends[frozenset((member.start, member.end))] = member
    known = [*groups, *(spelled for m in truss.members for spelled in (m.name, f"{m.end}-{m.start}"))]
    taken: dict[str, str] = {}
    for name in rule.members:
        alone = by_ends.get(frozenset(part.strip() for part in name.split("-")))
        found = groups.get(name, [alone] if alone else [])
        if alone and found != [alone]:
            problems.append(f"members {name!r}: is a group, and a member that is not in it; rename the group")
        if not found:
            near = did_you_mean(name, known, told=len(problems))
            problems.append(f"members {name[:90]!r}: there is no such group or member{near}")
        again = [member for member in found if member.name in taken]
        if again:
            before = taken[again[0].name]
            problems.append(f"members {name!r}: {again[0].name} would count twice, also by {before!r}; remove one")
        taken |= {member.name: name for member in found}
    return tuple(member for member in truss.members if member.name in taken)


def of_weight(
    rule: SelfWeight, truss: Truss, members: Sequence[Member], carried: Exact
) -> tuple[list[SpreadLine], Sums]:
    """Return the weight of each member with its halves, and the sums of the weight as it hangs.

    Parameters
    ----------
    rule : SelfWeight
        What the members weigh.
    truss : Truss
        For coordinates and units.
    members : sequence of Member
        As ``weighed`` gives them.
    carried : Exact
        Part of the weight that this truss carries.
    """
    per_length = carried * weight_per_length(rule, truss)
    places = {joint.name: (joint.x, joint.y) for joint in truss.joints}
    down = FIXED_DIRECTIONS["down"]
    lines, parts = [], []
    for member in members:
        (x, y), (x_end, y_end) = places[member.start], places[member.end]
        length = _length(x_end - x, y_end - y)
        weight = per_length * length
        shares = ((member.start, weight / 2), (member.end, weight / 2))
        both, reach = (per_length, per_length), (ZERO, length)
        lines.append(SpreadLine(member.name, ZERO, length, both, weight, down, length / 2, shares, reach))
        middle = ((x + x_end) / 2, (y + y_end) / 2)
        for place, part in zip(((x, y), middle, (x_end, y_end)), SIMPSON, strict=True):
            parts.append(moved((ZERO, -per_length * length * part / 6), place))
    return lines, total(parts)
