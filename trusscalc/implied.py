"""The joint loads that a set of member forces must have carried, from the equilibrium of each joint alone.

Whatever model gave the forces: at every joint, load and reaction together are minus what the members pull. No stiffness
and no support enters, so it works for indeterminate trusses, and it tells the joint at which a load was lost, doubled,
moved or turned, at which a support is another one, or where the geometry differs.

Printed forces are exact decimals, so the sums are exact; what their rounding leaves open is bounded joint by joint.
"""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from typing import Final

from trusscalc.decimals import approximate
from trusscalc.exact import ZERO, Exact, rational
from trusscalc.roots import sqrt
from trusscalc.truss import Truss

LENGTH_DIGITS: Final = 40
"""A length that is a root of roots is rounded once to so many digits: joint sums would drown in nested roots."""

Pair = tuple[Exact, Exact]


def directions(truss: Truss) -> dict[str, Pair]:
    """Return cosine and sine of every member, from its start to its end, symbols at their values."""
    place = {joint.name: joint for joint in truss.at_values().joints}
    found = {}
    for member in truss.members:
        a, b = place[member.start], place[member.end]
        dx, dy = b.x - a.x, b.y - a.y
        length = sqrt(dx * dx + dy * dy, proven=False)
        if length.tower:
            near = rational(Fraction(approximate(length, LENGTH_DIGITS)))
            length = Exact(near.terms, rounded=True)
        found[member.name] = (dx / length, dy / length)
    return found


def implied_loads(truss: Truss, forces: Mapping[str, Exact]) -> dict[str, Pair]:
    """Return load plus reaction (Fx, Fy) at every joint, as member forces imply them.

    Parameters
    ----------
    truss : Truss
        Joints and members; supports do not matter.
    forces : mapping of member name to Exact
        Tension positive, in the truss's unit of force. A joint that lacks the force of one of its members has
        no sum and is left out.

    Examples
    --------
    >>> roof = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    >>> forces = {"A-B": rational(8), "A-C": rational(-10), "C-B": rational(-10)}
    >>> {joint: (str(float(fx)), str(float(fy))) for joint, (fx, fy) in implied_loads(roof, forces).items()}
    {'A': ('0.0', '6.0'), 'B': ('0.0', '6.0'), 'C': ('0.0', '-12.0')}
    """
    totals = dict.fromkeys(_whole_joints(truss, forces), (ZERO, ZERO))
    along = directions(truss)
    for member in truss.members:
        for joint, away in ((member.start, 1), (member.end, -1)):
            if joint in totals:
                (fx, fy), (cosine, sine) = totals[joint], along[member.name]
                pull = forces[member.name] * away
                totals[joint] = (fx - pull * cosine, fy - pull * sine)
    return totals


def rounding_bounds(truss: Truss, digits: Mapping[str, Exact]) -> dict[str, tuple[float, float]]:
    """Return how far the sums of ``implied_loads`` may be off because forces were printed rounded.

    Parameters
    ----------
    truss : Truss
        Joints and members.
    digits : mapping of member name to Exact
        Half a unit of the last printed digit of each force.
    """
    totals = dict.fromkeys(_whole_joints(truss, digits), (0.0, 0.0))
    along = directions(truss)
    for member in truss.members:
        for joint in (member.start, member.end):
            if joint in totals:
                (x, y), (cosine, sine) = totals[joint], along[member.name]
                half = float(digits[member.name])
                totals[joint] = (x + half * abs(float(cosine)), y + half * abs(float(sine)))
    return totals


def _whole_joints(truss: Truss, known: Mapping[str, object]) -> list[str]:
    """Return the joints all of whose members have a value, in the truss's order."""
    short = {end for member in truss.members if member.name not in known for end in (member.start, member.end)}
    return [joint.name for joint in truss.joints if joint.name not in short]
