"""Random determinate trusses, from a seed or from hypothesis.

A simple truss grows by joints on two members; a complex move puts a joint into a member and ties it to a third joint
(L. Henneberg, Die graphische Statik der starren Systeme, 1911, from memory). Members may cross. Places are rational,
or with roots, or with sines of angles. What floats cannot judge (nearly critical forms) is drawn again.
"""

from __future__ import annotations

import random
from typing import Any, Literal

import numpy as np
from hypothesis import strategies as st
from replay import Bars
from stated_truss import Pair, Stated

Numbers = Literal["rational", "surd", "angle"]
WORST_CONDITION = 2e3
MOST_DRAWS = 500


def random_truss(
    draw: random.Random, joints: int, numbers: Numbers = "rational", *, complex_share: float = 0.0, base: str = ""
) -> Stated:
    """Return a random truss that statics decides.

    Parameters
    ----------
    draw : random.Random
        Where the chances come from.
    joints : int
        How many, at least 4.
    numbers : str
        Kind of coordinates.
    complex_share : float
        Chance of a complex move for each joint.
    base : str
        ``span`` (pin and roller), ``links`` (three links), ``wall`` (two pins) or ``hinge`` (two parts on two pins);
        '' for any.
    """
    base = base or draw.choice(["span", "span", "links", "wall", "hinge"])
    for _ in range(MOST_DRAWS):
        stated = _drawn(draw, joints, numbers, complex_share, base)
        if condition(stated) < WORST_CONDITION:
            return stated
    message = "no well-conditioned truss was drawn"
    raise AssertionError(message)


def condition(stated: Stated) -> float:
    """Return the condition number of the joint equations with unit directions; inf where they decide nothing."""
    bars = Bars(stated)
    index = {name: place for place, name in enumerate(bars.places)}
    matrix = np.zeros((2 * len(index), len(bars.bars)))
    if matrix.shape[0] != matrix.shape[1]:
        return float("inf")
    for column, (start, end, fx, fy) in enumerate(bars.bars.values()):
        matrix[2 * index[start] : 2 * index[start] + 2, column] += (float(fx), float(fy))
        if end is not None:
            matrix[2 * index[end] : 2 * index[end] + 2, column] -= (float(fx), float(fy))
    return float(np.linalg.cond(matrix))


def _drawn(draw: random.Random, joints: int, numbers: Numbers, complex_share: float, base: str) -> Stated:
    names = [f"N{place}" for place in range(joints)]
    draw.shuffle(names)
    places = {name: _place(draw, numbers) for name in names}
    first, second = names[0], names[1]
    if base == "hinge":
        middle = joints // 2
        members = _grown(draw, names[: middle + 1], complex_share, {frozenset(names[:2])})
        members |= _grown(draw, names[middle:], complex_share, {frozenset(names[middle : middle + 2])})
        supports: dict[str, Any] = {first: "pin", names[-1]: "pin"}
    else:
        start = set() if base == "wall" else {frozenset((first, second))}
        members = _grown(draw, names, complex_share, start)
        supports = _supports(draw, names, base)
    loads = {name: (_size(draw, 90), _size(draw, 90)) for name in names if draw.random() < 0.6}
    listed = ["-".join(draw.sample(sorted(ends), 2)) for ends in sorted(members, key=sorted)]
    draw.shuffle(listed)
    return Stated(places, tuple(listed), supports, loads or {first: ("3", "-7")})


def _grown(
    draw: random.Random, names: list[str], complex_share: float, members: set[frozenset[str]]
) -> set[frozenset[str]]:
    """Return the members after tying every further joint to those before it."""
    members = set(members)
    for place in range(2, len(names)):
        new, before = names[place], names[:place]
        if members and place > 2 and draw.random() < complex_share:
            split = draw.choice(sorted(members, key=sorted))
            ends = sorted(split)
            others = [name for name in before if name not in ends]
            members -= {split}
            members |= {frozenset((new, end)) for end in (*ends, draw.choice(others))}
        else:
            members |= {frozenset((new, end)) for end in draw.sample(before, 2)}
    return members


def _supports(draw: random.Random, names: list[str], base: str) -> dict[str, Any]:
    first, second = names[0], names[1]
    if base == "wall":
        return {first: "pin", second: "pin"}
    if base == "links":
        held = draw.sample(names, 3)
        return {name: {"reaction": _direction(draw)} for name in held}
    if draw.random() < 0.3:
        pin: Any = [{"reaction": _direction(draw)}, {"reaction": _direction(draw)}]
    else:
        pin = "pin"
    return {first: pin, draw.choice(names[1:]): draw.choice(["roller", {"reaction": _direction(draw)}])}


def _direction(draw: random.Random) -> Pair:
    return draw.choice([("1", "0"), ("1", "3"), ("-2", "5"), ("3", "4"), ("1", "1"), ("0", "-1"), ("-7", "2")])


def _size(draw: random.Random, largest: int) -> str:
    return str(draw.randint(-largest, largest))


def _place(draw: random.Random, numbers: Numbers) -> Pair:
    if numbers == "rational":
        return f"{draw.randint(-60, 60)}/{draw.choice([4, 5, 7])}", f"{draw.randint(-60, 60)}/{draw.choice([3, 5])}"
    if numbers == "surd":
        return _size(draw, 12), f"{draw.randint(-9, 9)}*sqrt(3)/2+{draw.randint(-3, 3)}"
    angle = draw.choice([15, 18, 30, 36, 45, 60, 72])
    return f"{draw.randint(1, 12)}*cos({angle})", f"{_size(draw, 12)}*sin({angle})"


@st.composite
def trusses(
    draw: st.DrawFn, numbers: Numbers = "rational", *, most_joints: int = 10, complex_share: float = 0.0, base: str = ""
) -> Stated:
    """Draw a random truss."""
    joints = draw(st.integers(5, most_joints))
    seed = draw(st.integers(0, 2**32 - 1))
    return random_truss(random.Random(seed), joints, numbers, complex_share=complex_share, base=base)
