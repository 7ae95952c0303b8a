"""Blunders with a number in them that only the printed values can tell: a ratio, a place, a direction, a stiffness.

Each is fitted by least squares, the differences counted in roundings (Gauss-Newton with numerical slopes).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import Final

import numpy as np

from trusscalc.alterations import Compared, displaced, neighbours, plain, turned_to
from trusscalc.altered import Alteration, directions
from trusscalc.frame import Frame, frame
from trusscalc.screening import Flags, Floats, Screen, best_ratio, forces_of, misfits, ratio_range

ROUNDS: Final = 12
"""Steps of a fit; four or five are usual."""
ANGLES: Final = 12
"""Directions of a roller tried as starts."""
MOST_JOINTS: Final = 8
"""Joints tried at other places: those that explain most of what is not in equilibrium."""
FLATTEST: Final = 1e-3
"""Lines crossing at a smaller slope do not tell where."""
SLENDERNESS: Final = (300.0, 150.0, 80.0, 40.0, 20.0, 10.0, 5.0)
"""Mean length of the members over the radius of gyration, as starts of the fit."""
COLLINEAR: Final = 1e-6

Forward = Callable[[Floats], Floats]
"""From parameters (parameters,) to member forces (members,)."""


def of_ratio(look: Screen, forces: Floats, ratios: Sequence[tuple[float, str]]) -> list[Alteration]:
    """Return what a common ratio of all values would be: the sign, a known ratio, or the one that fits best."""
    found = []
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
    if len(what.parts) > 1:
        for part in what.parts:
            loads = np.zeros_like(look.loads)
            for joint, (fx, fy) in part.loads.items():
                loads[2 * look.index[joint] : 2 * look.index[joint] + 2] += fx, fy
            words = f"{part.words} with its loads times {{}}"
            yield from _of_size(look, loads, "wrong-combination", part.where, words, 1.0, 5)
    weight = look.flexibility.own_weight()
    for one in _of_size(look, weight, "case-doubled", ("self-weight",), "members heavier by {} per length", 0.0, 6):
        less = one.loads[0][2] > 0
        kind = "case-missing" if less else "case-doubled"
        yield Alteration(
            explanation=kind,
            where=one.where,
            words=f"{one.words} (the same for every member) than the stated loads",
            loads=one.loads,
            strain=one.strain,
            fitted=1,
        )


def _of_size(
    look: Screen, loads: Floats, explanation: str, where: tuple[str, ...], words: str, base: float, strain: int
) -> Iterator[Alteration]:
    effect = look.flexibility.forces @ loads
    given = look.given
    mine, off = (effect / look.sharp)[given], ((look.values - look.forces) / look.sharp)[given]
    square = float(mine @ mine)
    if square:
        size = float(mine @ off) / square
        listed = tuple(
            (joint, size * float(loads[2 * place]), size * float(loads[2 * place + 1]))
            for joint, place in look.index.items()
            if loads[2 * place : 2 * place + 2].any()
        )
        yield Alteration(
            explanation=explanation,
            where=where,
            words=words.format(plain(base + size)),
            loads=listed,
            strain=strain,
            fitted=1,
        )


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
            return turned_to(joint, link, what.truss, strain=6, fitted=1)

        starts = [turned(np.pi * part / ANGLES) for part in range(ANGLES)]
        apart = misfits(look, forces_of(look, starts), look.sharp)
        if np.isfinite(apart).any():
            best = np.array([np.pi * int(np.argmin(apart)) / ANGLES])
            angle = fitted(look, lambda at, turned=turned: forces_of(look, [turned(float(at[0]))])[:, 0], best, 1e-5, 0.3)
            yield turned(float(angle[0]))


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

        best = min(
            (fitted(look, forward, start, 1e-6 * size, size) for start in listed), key=lambda s: _apart(look, forward(s))
        )
        x, y = (best + look.origin).tolist()
        words = f"joint {joint} at ({plain(x)}, {plain(y)}), found by fitting, no plain slip of its coordinates"
        yield displaced(joint, (x, y), words, strain=8, fitted=2)


def unbalanced(look: Screen, values: Floats) -> Floats:
    """Return what keeps each joint from equilibrium under the stated loads (joints, 2); nan where values are missing.

    What a support can take is not counted.
    """
    off = look.flexibility.implied(values) - look.loads.reshape(-1, 2)
    for link, joint in enumerate(look.flexibility.held.tolist()):
        others = look.flexibility.directions[look.flexibility.held == joint]
        _, sizes, right = np.linalg.svd(others)
        free = right[int((sizes > COLLINEAR).sum()) :]
        off[joint] = free.T @ (free @ off[joint])
        del link
    return off


def out_of_balance(look: Screen, values: Floats) -> Flags:
    """Return which joints the values do not balance, roundings aside (joints,)."""
    tolerance = np.zeros(len(look.index))
    np.add.at(tolerance, look.flexibility.start, look.rounding)
    np.add.at(tolerance, look.flexibility.end, look.rounding)
    off = np.abs(unbalanced(look, values)).max(axis=1)
    with np.errstate(invalid="ignore"):
        return np.asarray(off > tolerance, dtype=np.bool_)


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


# --- stiff joints -----------------------------------------------------------------------------------------


def of_stiff_joints(look: Screen, what: Compared) -> Iterator[Alteration]:
    """Yield stiff joints throughout, and members that run through joints with hinged ones between, as they fit best."""
    model = frame(look.truss, what.case)
    every = np.ones(len(look.members), dtype=np.bool_)
    through = _running_through(look)
    families = [(every, "stiff joints")]
    if through.any() and not through.all():
        families.append((through, "members that run stiff through their joints, the others hinged"))
    for stiff, words in families:
        radius = _radius(look, model, stiff)
        told = f"{words}, of a radius of gyration of {plain(radius)} {what.truss.length} throughout"
        yield Alteration(
            explanation="stiff-joints",
            where=(),
            words=told,
            radius=radius,
            stiff=tuple(name for name, is_stiff in zip(look.members, stiff.tolist(), strict=True) if is_stiff),
            strain=4,
            fitted=1,
        )


def _radius(look: Screen, model: Frame, stiff: Flags) -> float:
    mean = float(model.lengths.mean())

    def forward(logarithm: Floats) -> Floats:
        return model.axial(np.where(stiff, np.exp(2 * logarithm[0]), 0.0))

    starts = [np.array([np.log(mean / ratio)]) for ratio in SLENDERNESS]
    start = min(starts, key=lambda at: _apart(look, forward(at)))
    return float(np.exp(fitted(look, forward, start, 1e-4, 1.0)[0]))


def _running_through(look: Screen) -> Flags:
    """Return which members go on in a straight line at one of their ends."""
    model = look.flexibility
    found = np.zeros(len(look.members), dtype=np.bool_)
    for joint in range(len(model.places)):
        mine = np.flatnonzero((model.start == joint) | (model.end == joint))
        outward = model.cosines[mine] * np.where(model.start[mine] == joint, 1.0, -1.0)[:, None]
        found[mine] |= (outward @ outward.T < -1 + COLLINEAR).any(axis=1)
    return found


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


def _apart(look: Screen, forces: Floats) -> float:
    off = _off(look, forces)
    return float(off @ off) if np.isfinite(off).all() else np.inf
