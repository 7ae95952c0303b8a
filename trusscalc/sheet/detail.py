"""How much of a derivation a sheet holds, and which of its steps govern."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

from trusscalc.membercheck import MemberCheck
from trusscalc.sheet.words import found_in
from trusscalc.statics.steps import Step

Detail = Literal["members", "all", "summary"]
DETAILS: Final[tuple[Detail, ...]] = ("members", "all", "summary")
MOST_IN_FULL: Final = 12
"""Members up to which all derivations stand in the main part."""


@dataclass(frozen=True, slots=True)
class Shown:
    """What is derived where.

    Attributes
    ----------
    governing : tuple of str
        Members whose derivations stand in the main part; () where that makes no difference.
    main, further : tuple of int
        Numbers of the steps in the main part and in the appendix.
    """

    governing: tuple[str, ...]
    main: tuple[int, ...]
    further: tuple[int, ...]


def shown(check: MemberCheck, detail: Detail) -> Shown:
    """Return which steps a sheet shows, and where.

    Notes
    -----
    With ``members``, when more than twelve are asked for, the main part holds those that govern: the largest tension
    and compression, what is flagged or does not agree, then the others in the order asked, up to twelve. Steps they
    rest on, and those of the reactions, come with them.
    """
    numbers = tuple(step.number for step in check.steps)
    if detail == "summary":
        return Shown((), (), ())
    if detail == "all" or len(check.members) <= MOST_IN_FULL:
        return Shown((), numbers, ())
    chosen = governing(check)
    main = {number for name in chosen for number in check.members[name].steps}
    main |= {number for item in check.reactions.values() for number in item.steps}
    further = tuple(number for number in numbers if number not in main)
    return Shown(chosen if further else (), tuple(number for number in numbers if number in main), further)


def governing(check: MemberCheck) -> tuple[str, ...]:
    """Return the members that govern, in the order asked."""
    members = check.members
    found = [name for name, item in members.items() if item.verdict != "agrees"]
    pressed = {check.truss.member(name).name for name in check.truss.tension_only}
    found += [name for name, item in members.items() if name in pressed and item.sense == "C"]
    for letter in ("T", "C"):
        own = [name for name, item in members.items() if item.sense == letter]
        if own:
            found.append(max(own, key=lambda name: abs(members[name].decimal or 0.0)))
    chosen = dict.fromkeys(found)
    for name in members:
        if len(chosen) >= MOST_IN_FULL:
            break
        chosen[name] = None
    return tuple(name for name in members if name in chosen)


def bodies_drawn_once(check: MemberCheck) -> dict[int, tuple[int, int]]:
    """Return for steps that find reactions on one free body (with which step it is drawn, as which step draws it).

    It stands with the first of them, drawn as for the first moments taken, for that drawing has dimensions. Only bodies
    that serve several steps are named.
    """
    links = {link.name for link in check.truss.links}
    by_body: dict[tuple[tuple[str, ...], ...], list[Step]] = {}
    for step in check.steps:
        if set(found_in(step)) <= links:
            by_body.setdefault(tuple(dict.fromkeys(e.cut.kept for e in step.equations)), []).append(step)
    drawn: dict[int, tuple[int, int]] = {}
    for alike in by_body.values():
        if len(alike) > 1:
            best = next((s for s in alike if any(e.about.sum == "moment" for e in s.equations)), alike[0])
            drawn |= {step.number: (alike[0].number, best.number) for step in alike}
    return drawn
