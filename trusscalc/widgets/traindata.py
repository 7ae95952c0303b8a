"""What the page is told of a train over an influence line: ordinates once, then where the train stands."""

from __future__ import annotations

import math
from itertools import accumulate, pairwise
from typing import Any, Final

from trusscalc.exact import ZERO
from trusscalc.influence import InfluenceLine
from trusscalc.sheet.influencefigure import target_words
from trusscalc.sheet.inscriptions import amount
from trusscalc.widgets.travelling import Travel

Data = dict[str, Any]

STEPS: Final = 200
"""About so many steps of the arrow keys take a train over its chain."""


def line_data(line: InfluenceLine) -> Data:
    """Return an influence line: where its joints are, and the ordinate at each."""
    place = {joint.name: number for number, joint in enumerate(line.truss.joints)}
    pieces = {frozenset(pair) for pair in pairwise(line.chain.joints)}
    return {
        "words": target_words(line),
        "target": line.target,
        "joints": [place[joint] for joint in line.chain.joints],
        "members": [m.name for m in line.truss.members if frozenset((m.start, m.end)) in pieces],
        "positions": [float(position) for position in line.positions],
        "ordinates": [float(ordinate) for ordinate in line.ordinates],
        "texts": [amount(ordinate) if ordinate else "" for ordinate in line.ordinates],
        "letters": ["T", "C"] if line.kind == "member" else ["+", "−"],
    }


def train_data(travel: Travel) -> Data:
    """Return where a train stands: its axles from the leading one, and the uniform loads as they are placed."""
    train, end = travel.train, float(travel.line.positions[-1])
    way = -1 if travel.direction == "forward" else 1
    offsets = [way * float(behind) for behind in accumulate(travel.spacing, initial=ZERO)]
    patches = [(float(a), float(b)) for a, b, _ in travel.shown.patches]
    return {
        "lead": float(travel.lead_axle_at),
        "offsets": offsets,
        "loads": [amount(load * (1 + train.impact) * train.share) for load in train.axles],
        "patches": patches,
        "from": -max(offsets),
        "to": end - min(offsets),
        "step": _handy(end / STEPS),
    }


def _handy(length: float) -> float:
    """Return a length of one digit, 1, 2 or 5, near a given one."""
    power = math.floor(math.log10(length))
    digit = min((1, 2, 5, 10), key=lambda each: abs(each - length / 10.0**power))
    return round(digit * 10.0**power, 12)
