"""Altered models: what another analysis may have been given by mistake, as a truss and a load case of their own.

An alteration is plain data; ``altered`` makes the truss and the loads it describes, ``tabulated`` the table of
results. Both leave their arguments alone. Numbers are floats: an altered model is solved by the numeric route, to be
compared with printed results.
"""

from __future__ import annotations

import warnings
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any, Final

from trusscalc.errors import TrusscalcWarning
from trusscalc.exacttext import number
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.truss import Support, Truss

Pair = tuple[float, float]

PIN: Final = ((1.0, 0.0), (0.0, 1.0))
ROLLER: Final = ((0.0, 1.0),)


@dataclass(frozen=True, slots=True, kw_only=True)
class Alteration:
    """One blunder, as what it changes in the model or in the table of results.

    Attributes
    ----------
    explanation : str
        Its kind, such as ``load-missing``.
    where : tuple of str
        The joints, members, cases or factors concerned.
    words : str
        What is altered, to follow "consistent with".
    loads : tuple of (joint, fx, fy)
        Forces added to the loads of the joints.
    places : tuple of (joint, x, y)
        Joints with other coordinates.
    supports : tuple of (joint, directions)
        Joints supported otherwise: the directions of their links; none for a joint no longer supported.
    without : str
        A member left out.
    bending : tuple of (member, stiffness)
        Members with stiff ends, and their EI in units of EA times length squared; all others have hinges.
    factor : float
        All values of the table are multiplied by it.
    rows : tuple of (member, member)
        The first member's row holds the value of the second.
    strain : int
        How far-fetched it is: orders alterations that fit alike.
    fitted : int
        How many numbers were taken from the values it is to explain.
    """

    explanation: str
    where: tuple[str, ...]
    words: str
    loads: tuple[tuple[str, float, float], ...] = ()
    places: tuple[tuple[str, float, float], ...] = ()
    supports: tuple[tuple[str, tuple[Pair, ...]], ...] = ()
    without: str = ""
    bending: tuple[tuple[str, float], ...] = ()
    factor: float = 1.0
    rows: tuple[tuple[str, str], ...] = ()
    strain: int = 0
    fitted: int = 0

    @property
    def of_loads_alone(self) -> bool:
        """Whether the structure and the table stay as they are."""
        return not (self.places or self.supports or self.without or self.bending or self.of_table)

    @property
    def of_table(self) -> bool:
        """Whether it changes values of the table and not the model."""
        return bool(self.rows) or self.factor != 1.0


def altered(alteration: Alteration, truss: Truss, case: LoadCase) -> tuple[Truss, LoadCase]:
    """Return the truss and the loads another analysis would have had.

    Stiff ends and changes of the table are not in them.

    Raises
    ------
    InputError
        When the altered truss cannot be, joints falling together, say.

    Examples
    --------
    >>> roof = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    >>> snow = LoadCase("snow", {"C": (0, -12)})
    >>> doubled = Alteration(explanation="load-doubled", where=("C",), words="", loads=(("C", 0.0, -12.0),))
    >>> altered(doubled, roof, snow)[1].loads
    (JointLoad(joint='C', fx=Exact('0'), fy=Exact('-24')),)
    """
    truss = truss.at_values()
    return _restated(alteration, truss), _reloaded(alteration, case)


def tabulated(alteration: Alteration, forces: Mapping[str, float]) -> dict[str, float]:
    """Return the table of member forces another analysis would have printed, from what it found."""
    printed = {name: alteration.factor * force for name, force in forces.items()}
    return printed | {name: printed[other] for name, other in alteration.rows}


def in_turn(first: Alteration, second: Alteration) -> Alteration:
    """Return two blunders as one alteration, the second made on what the first left.

    Of the two, at most one leaves out a member and at most one has stiff ends.
    """
    places = {joint: (x, y) for joint, x, y in first.places} | {joint: (x, y) for joint, x, y in second.places}
    return replace(
        first,
        words=f"{first.words}, and {second.words}",
        loads=first.loads + second.loads,
        places=tuple((joint, *place) for joint, place in places.items()),
        supports=tuple((dict(first.supports) | dict(second.supports)).items()),
        without=first.without or second.without,
        bending=first.bending or second.bending,
        factor=first.factor * second.factor,
        rows=first.rows + second.rows,
        strain=first.strain + second.strain,
        fitted=first.fitted + second.fitted,
    )


def directions(support: Support) -> tuple[Pair, ...]:
    """Return the directions of a support's links as floats."""
    return tuple((float(link.dx), float(link.dy)) for link in support.links)


def _reloaded(alteration: Alteration, case: LoadCase) -> LoadCase:
    values = dict(case.symbols)
    loads = [
        JointLoad(load.joint, load.fx.substitute(values), load.fy.substitute(values))
        if values
        else JointLoad(load.joint, load.fx, load.fy)
        for load in case.loads
    ]
    return LoadCase(case.name, loads + [JointLoad(joint, number(fx), number(fy)) for joint, fx, fy in alteration.loads])


def _restated(alteration: Alteration, truss: Truss) -> Truss:
    if not (alteration.places or alteration.supports or alteration.without):
        return truss
    joints: dict[str, tuple[object, object]] = {joint.name: (joint.x, joint.y) for joint in truss.joints}
    joints |= {joint: (x, y) for joint, x, y in alteration.places}
    groups: dict[str, list[str]] = {}
    for member in truss.members:
        if member.name != alteration.without:
            groups.setdefault(member.group, []).append(member.name)
    supports = {support.joint: _as_stated(support) for support in truss.supports}
    for joint, links in alteration.supports:
        supports[joint] = _stated(links)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", TrusscalcWarning)  # a member through a joint is part of the blunder
        return Truss(
            joints,
            groups,
            {joint: support for joint, support in supports.items() if support},
            title=truss.title,
            length=truss.length,
            force=truss.force,
        )


def _as_stated(support: Support) -> Any:
    if support.kind != "links":
        return support.kind
    links = [{"reaction": (link.dx, link.dy)} for link in support.links]
    return links[0] if support.links[0].name.endswith(".r") else links


def _stated(links: tuple[Pair, ...]) -> Any:
    if set(links) == set(PIN):
        return "pin"
    if links == ROLLER:
        return "roller"
    listed = [{"reaction": link} for link in links]
    return listed[0] if len(listed) == 1 else listed
