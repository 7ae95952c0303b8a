"""A truss with stiff joints: the plane frame on the same axes, by the displacement method, in floats.

Real joints hold the members' ends at their angles, so members bend and their axial forces are a little lower than an
ideal truss's. This model is here to recognise the results of such an analysis, not to design by. Members are
Euler-Bernoulli members with EA = 1 and EI = radius of gyration squared, loaded at the joints alone; the stiffness of
a member is the one every textbook gives (such as W. McGuire, R. H. Gallagher, R. D. Ziemian, Matrix Structural
Analysis, 2nd ed. 2000, section 4.5; from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from trusscalc.flexibility import free_ways
from trusscalc.loads import LoadCase
from trusscalc.truss import FloatTruss, Truss

Floats = NDArray[np.float64]
Whole = NDArray[np.intp]


@dataclass(frozen=True, slots=True)
class Frame:
    """A frame whose members' bending stiffness is still open.

    Attributes
    ----------
    truss : FloatTruss
        Axes and supports; supports hold no rotation.
    loads : (3 joints,) float
        Fx, Fy and no moment, joint by joint.
    lengths : (members,) float
    stretch : (members, 3 joints) float
        Elongation for unit displacements.
    turning : (members, 2, 3 joints) float
        Rotation of each end against the chord of the member.
    ways : (3 joints, ways) float
        Displacements the supports leave, rotations included.
    """

    truss: FloatTruss
    loads: Floats
    lengths: Floats
    stretch: Floats
    turning: Floats
    ways: Floats

    def axial(self, bending: Floats) -> Floats:
        """Return the axial forces (members,), tension positive, for EI (members,) in units of EA times length squared.

        A member with EI = 0 has hinges at both ends. A frame that is a mechanism gives nan.
        """
        matrix = self.stretch.T @ (self.stretch / self.lengths[:, None])
        first, last = self.turning[:, 0], self.turning[:, 1]
        both = first + last
        share = (2 * bending / self.lengths)[:, None]
        matrix += first.T @ (share * first) + last.T @ (share * last) + both.T @ (share * both)
        inner = self.ways.T @ matrix @ self.ways
        loose = np.diagonal(inner) == 0.0  # a joint of hinged ends alone does not turn with anything
        inner[loose, loose] = 1.0
        try:
            moves = self.ways @ np.linalg.solve(inner, self.ways.T @ self.loads)
        except np.linalg.LinAlgError:
            return np.full(len(self.lengths), np.nan)
        return np.asarray(self.stretch @ moves / self.lengths, dtype=np.float64)


def frame(truss: FloatTruss, case: LoadCase) -> Frame:
    """Return the frame on a truss's axes under a load case."""
    index = {name: place for place, name in enumerate(truss.joints)}
    places = np.array(list(truss.joints.values()), dtype=np.float64)
    ends = np.array([(index[first], index[last]) for _, first, last in truss.members], dtype=np.intp)
    vectors = places[ends[:, 1]] - places[ends[:, 0]]
    lengths = np.hypot(vectors[:, 0], vectors[:, 1])
    cosines = vectors / lengths[:, None]
    members, columns = np.arange(len(ends)), 3 * len(index)
    stretch, swing = np.zeros((len(ends), columns)), np.zeros((len(ends), columns))
    for side, sign in ((0, -1.0), (1, 1.0)):
        for axis in (0, 1):
            stretch[members, 3 * ends[:, side] + axis] = sign * cosines[:, axis]
        swing[members, 3 * ends[:, side]] = -sign * cosines[:, 1] / lengths
        swing[members, 3 * ends[:, side] + 1] = sign * cosines[:, 0] / lengths
    turning = np.stack((-swing, -swing), axis=1)
    for side in (0, 1):
        turning[members, side, 3 * ends[:, side] + 2] += 1.0
    loads = np.zeros((len(index), 3))
    for joint, force in case.as_floats().items():
        loads[index[joint], :2] += force
    return Frame(truss, loads.ravel(), lengths, stretch, turning, _ways(truss, index))


def _ways(truss: FloatTruss, index: dict[str, int]) -> Floats:
    held = np.array([index[joint] for _, joint, _, _ in truss.links], dtype=np.intp)
    directions = np.array([(dx, dy) for *_, dx, dy in truss.links], dtype=np.float64).reshape(-1, 2)
    free = free_ways(len(index), held, directions)
    ways = np.zeros((3 * len(index), free.shape[1] + len(index)))
    for axis in (0, 1):
        ways[axis::3, : free.shape[1]] = free[axis::2]
    ways[2::3, free.shape[1] :] = np.eye(len(index))
    return ways


def axial_forces(truss: Truss, case: LoadCase, bending: dict[str, float]) -> dict[str, float]:
    """Return the axial forces of a truss with stiff joints by member name, tension positive.

    Parameters
    ----------
    truss, case
        The truss and its joint loads.
    bending : dict of str to float
        EI of each member in units of EA times length squared: the square of its radius of gyration, which must be
        in the truss's unit of length. Members left out have hinges at both ends.

    Examples
    --------
    >>> roof = Truss({"A": (0, 0), "B": (8, 0), "C": (4, 3)}, ["A-B", "A-C", "C-B"], {"A": "pin", "B": "roller"})
    >>> snow = LoadCase("snow", {"C": (0, -12)})
    >>> {name: round(force, 4) for name, force in axial_forces(roof, snow, {}).items()}
    {'A-B': 8.0, 'A-C': -10.0, 'C-B': -10.0}
    >>> stiff = dict.fromkeys(("A-B", "A-C", "C-B"), 0.3**2)
    >>> {name: round(force, 4) for name, force in axial_forces(roof, snow, stiff).items()}
    {'A-B': 7.3105, 'A-C': -9.4484, 'C-B': -9.4484}
    """
    model = frame(truss.as_floats(), case)
    given = np.array([bending.get(name, 0.0) for name, _, _ in model.truss.members], dtype=np.float64)
    return dict(zip((name for name, _, _ in model.truss.members), model.axial(given).tolist(), strict=True))
