"""The path of a load: a chain of joints, each joined to the next by a member, such as the deck of a bridge.

A load on a member stands for its shares at the two joints, so everything that travels or spreads along a chain
is measured by the chain's positions: horizontal distances from its first joint.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Final

from trusscalc.errors import InputError
from trusscalc.exact import Exact
from trusscalc.loads import twice
from trusscalc.truss import LONGEST_NAME, Truss, did_you_mean

FEWEST_JOINTS: Final = 2


@dataclass(frozen=True, slots=True)
class Chain:
    """A path for loads; ``chain_of`` proves that it fits a truss.

    Attributes
    ----------
    name : str
        Such as ``deck``; a chain that was only listed is called by its ends, ``L0 to L6``.
    joints : tuple of str
        Its joints in order of travel.
    """

    name: str
    joints: tuple[str, ...]


def chain_of(
    truss: Truss,
    name_or_joints: str | Sequence[str] | Chain,
    chains: Sequence[Chain] = (),
    *,
    may_rise: bool = False,
) -> Chain:
    """Return a chain that is proven to fit the truss.

    Parameters
    ----------
    truss : Truss
        The truss.
    name_or_joints : str, sequence of str, or Chain
        A name among ``chains``, a list such as ``"L0,L1,L2"`` or ``["L0", "L1", "L2"]``, or a chain itself.
    chains : sequence of Chain
        The chains that have names.
    may_rise : bool
        As in ``chain_faults``.

    Raises
    ------
    InputError
        With every fault found in ``problems``.

    Examples
    --------
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> chain_of(truss, "A, C, B")
    Chain(name='A to B', joints=('A', 'C', 'B'))
    """
    chain = _found(name_or_joints, chains)
    problems = chain_faults(truss, chain, may_rise=may_rise)
    if problems:
        raise InputError(problems)
    return chain


def _found(wanted: str | Sequence[str] | Chain, chains: Sequence[Chain]) -> Chain:
    if isinstance(wanted, Chain):
        return wanted
    if isinstance(wanted, str):
        named = {chain.name: chain for chain in chains}
        if wanted.strip() in named:
            return named[wanted.strip()]
        if "," not in wanted:
            near = did_you_mean(wanted, named)
            message = f"there is no chain {wanted[: 2 * LONGEST_NAME]!r}{near}; name one, or list its joints: L0,L1,L2"
            raise InputError(message)
        wanted = [name.strip() for name in wanted.split(",")]
    return Chain(_listed_name(wanted), tuple(wanted))


def _listed_name(joints: Sequence[str]) -> str:
    return f"{str(joints[0])[:LONGEST_NAME]} to {str(joints[-1])[:LONGEST_NAME]}" if joints else ""


def chain_faults(truss: Truss, chain: Chain, *, may_rise: bool = False) -> list[str]:
    """Return what is wrong with a chain, each fault with what, where and what to do; [] when it fits.

    It needs two joints of the truss or more, none of them twice, each joined to the next by a member, and going
    on to the left or going on to the right from joint to joint, at the stated values of any symbols. A chain that
    ``may_rise`` need not go on horizontally: wind on the leg of a tower is measured along its slope.
    """
    where = f"chain {chain.name}" if chain.name == _listed_name(chain.joints) else f"[chains.{chain.name}] joints"
    if any(not isinstance(name, str) for name in chain.joints):
        return [f'{where}: a list of joint names is needed, such as ["L0", "L1", "L2"]']
    if len(chain.joints) < FEWEST_JOINTS:
        return [f"{where}: a chain has two joints or more; list every joint on the way of the load"]
    places = {joint.name: joint.x for joint in truss.at_values().joints}
    problems: list[str] = []
    for name in dict.fromkeys(chain.joints):
        if name not in places:
            near = did_you_mean(name, places, told=len(problems))
            problems.append(f"{where}: there is no joint {name[: 2 * LONGEST_NAME]!r}{near}")
    problems += [f"{where}: {name} stands in it twice; a chain meets a joint once" for name in twice(chain.joints)]
    known = [(a, b) for a, b in pairwise(chain.joints) if a in places and b in places and a != b]
    problems += _gaps(truss, known, where)
    return problems if may_rise else problems + _turns(places, known, where)


def _gaps(truss: Truss, pieces: Collection[tuple[str, str]], where: str) -> list[str]:
    """Return a fault for each two joints without a member between them, with a joint that may have been left out."""
    neighbours: dict[str, set[str]] = {}
    for member in truss.members:
        neighbours.setdefault(member.start, set()).add(member.end)
        neighbours.setdefault(member.end, set()).add(member.start)
    places = {joint.name: joint.x for joint in truss.at_values().joints}
    problems = []
    for a, b in pieces:
        if b in neighbours[a]:
            continue
        low, high = sorted((places[a], places[b]))
        between = [name for name in places if name in neighbours[a] & neighbours[b] and low < places[name] < high]
        left_out = f"; was {' or '.join(between)} left out?" if between else ""
        problems.append(f"{where}: no member joins {a} and {b}; list every joint on the way of the load{left_out}")
    return problems


def _turns(places: Mapping[str, Exact], pieces: Sequence[tuple[str, str]], where: str) -> list[str]:
    """Return a fault for each piece that does not go on in the direction of most."""
    steps = [(places[b] - places[a]).sign() for a, b in pieces]
    onward = 1 if sum(steps) >= 0 else -1
    told = {0: "stand one above the other", -onward: "go back"}
    return [
        f"{where}: {a} and {b} {told[step]}; a chain goes on horizontally in one direction"
        for (a, b), step in zip(pieces, steps, strict=True)
        if step != onward
    ]


def positions(truss: Truss, chain: Chain) -> tuple[Exact, ...]:
    """Return the horizontal distance of each joint of a chain from its first, in the truss's unit of length.

    They increase strictly, to whichever side the chain goes; symbols are taken at their stated values.

    Examples
    --------
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> positions(truss, chain_of(truss, "B,C,A"))
    (Exact('0'), Exact('2'), Exact('4'))
    """
    places = {joint.name: joint.x for joint in truss.at_values().joints}
    first = places[chain.joints[0]]
    return tuple(abs(places[name] - first) for name in chain.joints)
