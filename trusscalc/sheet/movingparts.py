"""Of an envelope's governing members under a moving load: line, ordinates, and how each extreme comes of them."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial

from trusscalc.envelopes import MemberEnvelope, MovingForces, Sense
from trusscalc.sheet.blocks import Block, Heading, Paragraph, Picture, Run
from trusscalc.sheet.envelopetables import States, extreme_words
from trusscalc.sheet.influencefigure import influence_figure
from trusscalc.sheet.marks import Figure
from trusscalc.sheet.traintables import effect_table, ordinate_table
from trusscalc.sheet.words import bar
from trusscalc.standing import train_of
from trusscalc.travel import Extreme

WIDTH = 140.0
"""Of a line's figure, mm, so that two stand on one sheet."""
TOGETHER = 3
"""Members up to which all tables come first, then all figures."""
WITHOUT_STEPS = (
    "Ordinates from the equilibrium of all joints under a unit load at each in turn, exact, and beside them by the "
    "stiffness route. The steps of a single line are written out on a sheet of its own."
)


def moving_parts(states: States, members: Sequence[str], places: int, *, drawings: bool) -> list[Block]:
    """Return these parts for members whose governing states hold a moving load that acts.

    Parameters
    ----------
    states : States
        The governing states.
    members : sequence of str
        Members told of.
    places : int
        Decimal places.
    drawings : bool
        Whether lines are drawn.
    """
    blocks: list[Block] = []
    pictures: list[Block] = []
    for name in members:
        each = states.found.members[name]
        for moving in states.found.moving.values():
            wanted = [which for which in each.senses if _stand(each, which, moving.name) is not None]
            if wanted:
                tables, figures = _of_member(states, each, moving, wanted, places)
                blocks += tables
                pictures += [Picture((figure(),)) for figure in figures] if drawings else []
                if len(members) > TOGETHER:
                    blocks, pictures = [*blocks, *pictures], []
    return [Paragraph((Run(WITHOUT_STEPS),), "note"), *blocks, *pictures] if blocks else []


def _stand(each: MemberEnvelope, which: Sense, case: str) -> Extreme | None:
    """Return where a moving load stands in a member's extreme, None where it stays away or does nothing."""
    found = next((extreme for name, _, extreme in each.state(which).stands if name == case), None)
    return found if found is not None and found.value else None


def _of_member(
    states: States, each: MemberEnvelope, moving: MovingForces, wanted: Sequence[Sense], places: int
) -> tuple[list[Block], list[Callable[[], Figure]]]:
    """Return the tables of one member, and what draws its line with each train."""
    line = moving.lines[each.member]
    load = next(load for load in states.found.stated.moving if load.name == moving.name)
    blocks: list[Block] = [
        Heading(3, f"{bar(each.member)} under {moving.name}"),
        ordinate_table(line, places),
    ]
    figures: list[Callable[[], Figure]] = []
    for which in wanted:
        extreme = _stand(each, which, moving.name)
        train = train_of(extreme, load.trains) if extreme is not None else None
        if extreme is None or train is None:
            continue
        what = f"{bar(each.member)}, {extreme_words(each, which)}"
        blocks.append(effect_table(line, extreme, train, places, what))
        figures.append(partial(influence_figure, line, extreme, train, width=WIDTH))
    return blocks, figures
