"""Blunders with a number in them that only the printed values can tell: a ratio, a place, a direction, a stiffness.

Each is fitted by least squares, the differences counted in roundings (Gauss-Newton with numerical slopes).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import Final

import numpy as np

from trusscalc.alterations import Compared, displaced, neighbours, plain, turned_to
from trusscalc.altered import Alteration, directions
from trusscalc.screening import Flags, Floats, Screen, best_ratio, forces_of, ratio_range

ROUNDS: Final = 12
"""Steps of a fit; four or five are usual."""
ANGLES: Final = 12
"""Directions of a roller tried as starts."""
MOST_JOINTS: Final = 8
"""Joints tried at other places: those that explain most of what is not in equilibrium."""
FLATTEST: Final = 1e-3
"""Lines crossing at a smaller slope do not tell where."""

Forward = Callable[[Floats], Floats]
"""From parameters (parameters,) to member forces (members,)."""


def of_ratio(look: Screen, forces: Floats, ratios: Sequence[tuple[float, str]]) -> list[Alteration]:
    """Return what a common ratio of all values would be: the sign, a known ratio, or the one that fits best."""
    found: list[Alteration] = []
    if not (np.abs(look.values[look.given]) > look.rounding[look.given]).any():
        return found
    for tolerance, strain in ((look.sharp, 0), (look.rounding, 2)):
        least, most = ratio_range(look, forces, tolerance)
        if least <= -1.0 <= most:
            found.append(_times(-1.0, "the signs of all values reversed", strain))
        known = [(ratio, words) for ratio, words in ratios if least <= ratio <= most or least <= -ratio <= most]
        found += [_scaled(ratio if least > 0 else -ratio, words, strain + 1) for ratio, words in known]
        if found:
            return found
    ratio = best_ratio(look, forces)
    if abs(ratio) > NO_RATIO and abs(ratio - 1) > NO_RATIO:
        found.append(_scaled(ratio, "no ratio of units or load factors that is known here", 6, fitted=1))
    return found


NO_RATIO: Final = 1e-9


def _scaled(ratio: float, words: str, strain: int, *, fitted: int = 0) -> Alteration:
    told = f"all values multiplied by {plain(ratio)} ({words})"
    return _times(ratio, told, strain + (ratio < 0), fitted=fitted)


def _times(ratio: float, words: str, strain: int, *, fitted: int = 0) -> Alteration:
    sign = ratio == -1.0
    return Alteration(
        explanation="sign" if sign else "scale",
        where=() if sign else (f"{ratio:.6g}",),
        words=words,
        factor=ratio,
        strain=strain,
        fitted=fitted,
    )


# --- loads ------------------------------------------------------------------------------------------------


def of_load_sizes(look: Screen, what: Compared) -> Iterator[Alteration]:
    """Yield a case with another factor, and members with more or less weight than stated."""
    for part in what.parts if len(what.parts) > 1 else ():
        loads = np.zeros_like(look.loads)
        for joint, (fx, fy) in part.loads.items():
            loads[2 * look.index[joint] : 2 * look.index[joint] + 2] += fx, fy
        size = _size(look, loads)
        words = f"{part.words} with its loads times {plain(1 + size)}"
        yield _of_size(look, "wrong-combination", part.where, words, loads=size * loads, strain=5)
    weight = look.flexibility.own_weight()
    size = _size(look, weight)
    words = f"{plain(abs(size))} {what.truss.force}/{what.truss.length} of every member"
    kind, told = ("case-doubled", "weighing more") if size > 0 else ("case-missing", "weighing less")
    yield _of_size(
        look, kind, ("self-weight",), f"{words} {told} than the stated loads say", loads=size * weight, strain=6
    )


def _size(look: Screen, loads: Floats) -> float:
    """Return how many times some loads fit the differences best when added."""
    given = look.given
    effect = ((look.flexibility.forces @ loads) / look.sharp)[given]
    off = ((look.values - look.forces) / look.sharp)[given]
    square = float(effect @ effect)
    return float(effect @ off) / square if square else 0.0


def _of_size(
    look: Screen, explanation: str, where: tuple[str, ...], words: str, *, loads: Floats, strain: int
) -> Alteration:
    pairs: list[tuple[float, float]] = [(x, y) for x, y in loads.reshape(-1, 2).tolist()]
    listed = tuple((joint, *pairs[place]) for joint, place in look.index.items() if any(pairs[place]))
    return Alteration(explanation=explanation, where=where, words=words, loads=listed, strain=strain, fitted=1)


# --- supports ---------------------------------------------------------------------------------------------


def of_directions(look: Screen, what: Compared) -> Iterator[Alteration]:
    """Yield each roller turned to the direction that fits best."""
    for support in what.truss.supports:
        links = directions(support)
        if len(links) != 1:
            continue
        joint = support.joint

        def turned(angle: float, joint: str = joint) -> Alteration:
            link = (float(np.cos(angle)), float(np.sin(angle)))
            return turned_to(joint, link, strain=6, fitted=1)

        def forward(angle: Floats, turned: Callable[[float], Alteration] = turned) -> Floats:
            return forces_of(look, [turned(float(angle[0]))])[:, 0]

        starts = [np.array([np.pi * part / ANGLES]) for part in range(ANGLES)]
        best = nearest(look, forward, starts)
        yield turned(float(fitted(look, forward, best, 1e-5, 0.3)[0]))


# --- places -----------------------------------------------------------------------------------------------


def of_free_places(look: Screen, what: Compared, slipped: Sequence[Alteration]) -> Iterator[Alteration]:
    """Yield joints at the places that fit best, each from the nearest of its slips and from where lines cross.

    Parameters
    ----------
    slipped : sequence of Alteration
        Slips of joints that come nearest, as starts.
    """
    near = neighbours(what.truss)
    size = float(np.ptp(look.flexibility.places, axis=0).max())
    starts: dict[str, list[Floats]] = {}
    for one in slipped:
        joint, x, y = one.places[0]
        starts.setdefault(joint, []).append(np.array((x, y)) - look.origin)
    for joint in suspects(look, near)[:MOST_JOINTS]:
        starts.setdefault(joint, []).append(_where_lines_cross(look, joint))
    for joint, listed in starts.items():
        place = look.index[joint]

        def forward(spot: Floats, place: int = place) -> Floats:
            return look.flexibility.elsewhere(place, spot[None], look.loads)[:, 0]

        ends = [fitted(look, forward, start, 1e-6 * size, size) for start in listed]
        best = nearest(look, forward, ends)
        x, y = (best + look.origin).tolist()
        words = f"joint {joint} at ({plain(x)}, {plain(y)}), found by fitting, no plain slip of its coordinates"
        yield displaced(joint, (x, y), words, strain=8, fitted=2)


def unbalanced(look: Screen, values: Floats) -> Floats:
    """Return what keeps each joint from equilibrium under the stated loads (joints, 2); nan where values are missing.

    What a support can take is not counted.
    """
    off = look.flexibility.implied(values) - look.loads.reshape(-1, 2)
    return np.asarray(np.einsum("jxy,jy->jx", look.flexibility.free_parts(), off), dtype=np.float64)


def out_of_balance(look: Screen, values: Floats) -> Flags:
    """Return which joints the values do not balance, roundings aside (joints,)."""
    off = np.abs(unbalanced(look, values)).max(axis=1)
    with np.errstate(invalid="ignore"):
        return np.asarray(off > _joint_tolerance(look), dtype=np.bool_)


def implied_otherwise(look: Screen) -> list[tuple[str, float, float]]:
    """Return the joints out of balance with what the printed values say they carry besides the stated load."""
    off, names = unbalanced(look, look.values).tolist(), list(look.index)
    wrong = np.flatnonzero(out_of_balance(look, look.values)).tolist()
    return [(names[place], off[place][0], off[place][1]) for place in wrong]


def _joint_tolerance(look: Screen) -> Floats:
    """Return the sum of the roundings of each joint's members (joints,)."""
    tolerance = np.zeros(len(look.index))
    for ends in (look.flexibility.start, look.flexibility.end):
        np.add.at(tolerance, ends, look.rounding)
    return tolerance


def unbalanced_joints(look: Screen, moved: Sequence[Alteration]) -> list[int]:
    """Return how many joints the printed values leave out of balance with one joint at another place, for each."""
    model, values = look.flexibility, look.values
    free, tolerance = model.free_parts(), _joint_tolerance(look)
    off = model.implied(values) - look.loads.reshape(-1, 2)
    found = []
    for one in moved:
        joint, x, y = one.places[0]
        place = look.index[joint]
        mine = np.flatnonzero((model.start == place) | (model.end == place))
        others = np.where(model.start[mine] == place, model.end[mine], model.start[mine])
        old = model.places[others] - model.places[place]
        new = model.places[others] - ((x, y) - look.origin)
        with np.errstate(invalid="ignore", divide="ignore"):
            turned = new / np.hypot(new[:, 0], new[:, 1])[:, None] - old / np.hypot(old[:, 0], old[:, 1])[:, None]
            there = off.copy()
            there[others] += values[mine, None] * turned
            there[place] -= values[mine] @ turned
            left = np.abs(np.einsum("jxy,jy->jx", free, there)).max(axis=1)
            found.append(int((left > tolerance).sum()))
    return found


def suspects(look: Screen, near: dict[str, list[str]]) -> list[str]:
    """Return the joints by how few joints out of balance are not next to them."""
    names = list(look.index)
    wrong = {names[place] for place in np.flatnonzero(out_of_balance(look, look.values)).tolist()}
    left = {joint: len(wrong - {joint, *near[joint]}) for joint in names}
    covered = {joint: len(wrong & {joint, *near[joint]}) for joint in names}
    return sorted(names, key=lambda joint: (left[joint], -covered[joint]))


def _where_lines_cross(look: Screen, joint: str) -> Floats:
    """Return where the joint must be for its neighbours to balance: on lines through them, by least squares."""
    model, place = look.flexibility, look.index[joint]
    matrix, side = np.zeros((2, 2)), np.zeros(2)
    for member in np.flatnonzero((model.start == place) | (model.end == place)).tolist():
        other = int(model.end[member] if model.start[member] == place else model.start[member])
        rest = np.where(np.arange(len(look.values)) == member, 0.0, look.values)
        pull = -unbalanced(look, rest)[other]
        size = float(np.hypot(*pull))
        if np.isfinite(size) and size > look.rounding[member] and other not in model.held:
            square = np.array((-pull[1], pull[0])) / size
            matrix += size * np.outer(square, square)
            side += size * square * (square @ model.places[other])
    sizes = np.linalg.eigvalsh(matrix)
    if sizes[0] <= FLATTEST * sizes[1]:
        return np.array(model.places[place])
    return np.asarray(np.linalg.solve(matrix, side), dtype=np.float64)


# --- least squares ----------------------------------------------------------------------------------------


def fitted(look: Screen, forward: Forward, start: Floats, step: float, reach: float) -> Floats:
    """Return the parameters that leave the least squares of differences counted in roundings.

    Slopes are taken over ``step``; no parameter goes further than ``reach`` at once.
    """
    at, off = start, _off(look, forward(start))
    for _ in range(ROUNDS):
        slopes = np.stack([(_off(look, forward(at + step * way)) - off) / step for way in np.eye(len(at))], axis=1)
        if not np.isfinite(slopes).all() or not np.isfinite(off).all():
            break
        move = -np.linalg.lstsq(slopes, off)[0]
        move *= min(1.0, reach / max(float(np.abs(move).max()), step))
        for share in (1.0, 0.3, 0.1, 0.01):
            tried = _off(look, forward(at + share * move))
            if np.isfinite(tried).all() and tried @ tried < off @ off:
                at, off = at + share * move, tried
                break
        else:
            break
        if np.abs(move).max() < step / 10:
            break
    return at


def _off(look: Screen, forces: Floats) -> Floats:
    return np.asarray(((forces - look.values) / look.sharp)[look.given], dtype=np.float64)


def nearest(look: Screen, forward: Forward, parameters: Sequence[Floats]) -> Floats:
    """Return the parameters that leave the least squares of differences."""

    def apart(at: Floats) -> float:
        off = _off(look, forward(at))
        return float(off @ off) if np.isfinite(off).all() else np.inf

    return min(parameters, key=apart)
