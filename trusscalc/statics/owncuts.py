"""The engineer's own cut: joints to keep, or members to go through, and whether they part the truss."""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable
from dataclasses import dataclass

from trusscalc.convenience import Convenient
from trusscalc.errors import InputError
from trusscalc.loads import LoadCase
from trusscalc.statics.cuts import Structure, cut_of, structure_of
from trusscalc.truss import Truss, unknown_joint


@dataclass(frozen=True, slots=True)
class OwnCut(Convenient):
    """A cut chosen by the engineer.

    Attributes
    ----------
    truss : Truss
        What is cut.
    kept : tuple of str
        The joints of the free body.
    bars : tuple of str
        Every member and link with exactly one end in it.
    """

    truss: Truss
    kept: tuple[str, ...]
    bars: tuple[str, ...]


def own_cut(truss: Truss, *, keep: Iterable[str] = (), through: Iterable[str] = ()) -> OwnCut:
    """Return the cut that keeps given joints, or that goes through given members.

    Parameters
    ----------
    truss : Truss
        What is cut.
    keep : iterable of str
        Joints of the free body. With ``through``: any joint of the side to keep.
    through : iterable of str
        Members cut; they must part the truss in two. Without ``keep`` the side with the leftmost joint is kept.

    Raises
    ------
    InputError
        When neither is given, or the members do not part the truss; names those that still hold it together.
    UnknownNameError
        For a joint or member that is not there.
    """
    structure = structure_of(truss, LoadCase("", {}))
    keep = (keep,) if isinstance(keep, str) else tuple(keep)
    for name in keep:
        if name not in structure.joints:
            raise unknown_joint(name, structure.joints)
    names = tuple(truss.member(name).name for name in ((through,) if isinstance(through, str) else tuple(through)))
    if names:
        keep = _side(structure, frozenset(names), keep)
    if not keep:
        message = "a cut needs joints to keep, keep=[...], or members to go through, through=[...]"
        raise InputError(message)
    cut = cut_of(structure, keep)
    return OwnCut(truss, cut.kept, cut.bars)


def _side(structure: Structure, cut: frozenset[str], keep: tuple[str, ...]) -> tuple[str, ...]:
    """Return the joints on the kept side of the cut members."""
    first = keep[0] if keep else min(structure.joints, key=lambda n: _left_then_low(structure, n))
    side = _reached(structure, {first}, cut)
    apart = [name for name in keep if name not in side]
    holding = [name for name in structure.bars if name in cut and _both_in(structure, name, side)]
    outside = set(structure.joints) - side
    holding += [name for name in structure.bars if name in cut and _both_in(structure, name, outside)]
    if apart:
        message = f"the cut parts {first} from {', '.join(apart)}; keep joints of one side only"
        raise InputError(message)
    if holding and not outside:
        still = _still_holding(structure, cut, holding[0])
        message = (
            f"cutting {', '.join(sorted(cut))} does not part the truss: "
            f"{', '.join(still)} still {'hold' if len(still) > 1 else 'holds'} it together; cut them as well"
        )
        raise InputError(message)
    if holding:
        message = f"{', '.join(holding)}: both ends lie on one side of the cut; leave out of it"
        raise InputError(message)
    return tuple(name for name in structure.joints if name in side)


def _left_then_low(structure: Structure, name: str) -> tuple[float, float]:
    return structure.near(structure.joints[name].x), structure.near(structure.joints[name].y)


def _both_in(structure: Structure, name: str, joints: set[str]) -> bool:
    bar = structure.bars[name]
    return bar.start in joints and bar.end in joints


def _reached(structure: Structure, start: set[str], cut: frozenset[str]) -> set[str]:
    """Return the joints tied to the start by members that are not cut."""
    found, waiting = set(start), list(start)
    while waiting:
        joint = waiting.pop()
        for name in structure.bars_at[joint]:
            bar = structure.bars[name]
            if name in cut or bar.is_link:
                continue
            other = bar.end if bar.start == joint else bar.start
            if other not in found:
                found.add(other)
                waiting.append(other)
    return found


def _still_holding(structure: Structure, cut: frozenset[str], bar: str) -> list[str]:
    """Return the fewest further members that part the ends of a cut one (maximum flow, breadth first)."""
    source, sink = structure.bars[bar].start, structure.bars[bar].end
    flow: dict[str, int] = {}
    while True:
        came: dict[str, tuple[str, str]] = {source: ("", "")}
        waiting = deque([source])
        while waiting and sink not in came:
            joint = waiting.popleft()
            for name in structure.bars_at[joint]:
                member = structure.bars[name]
                other = member.end if member.start == joint else member.start
                way = 1 if member.start == joint else -1
                if name not in cut and not member.is_link and other not in came and flow.get(name, 0) * way < 1:
                    came[other] = (joint, name)
                    waiting.append(other)
        if sink not in came:
            break
        joint = sink
        while joint != source:
            before, name = came[joint]
            flow[name] = flow.get(name, 0) + (1 if structure.bars[name].start == before else -1)
            joint = before
    return [
        name
        for name, member in structure.bars.items()
        if not member.is_link and name not in cut and (member.start in came) != (member.end in came)
    ]
