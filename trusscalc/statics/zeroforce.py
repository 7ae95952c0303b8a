"""Zero-force members, and the inspection rule that shows each at sight.

Two rules of the trade, applied again and again as members found idle are thought away: at an unloaded,
unsupported joint with two members not in line, both are idle; where three meet there and two are in line,
the third is. What neither rule shows but the exact solution does is zero by equilibrium of this load.
"""

from __future__ import annotations

from trusscalc.exact import Exact
from trusscalc.statics.cuts import Structure
from trusscalc.statics.matrix import Bar, Equilibrium

TWO_MEMBERS = "two members not in line meet at {joint} without load or support"
THIRD_MEMBER = "at {joint}, without load or support, the other members are in line"
OTHERS_IN_LINE = "at {joint} all other forces (members, load, reaction) are in line"
BY_EQUILIBRIUM = "by equilibrium under this load"


def zero_force_members(structure: Structure, equilibrium: Equilibrium) -> dict[str, str]:
    """Return the members whose force is exactly zero, each with the reason.

    Parameters
    ----------
    structure : Structure
        Truss and loads.
    equilibrium : Equilibrium
        The exact solution.
    """
    zero = [name for name, bar in structure.bars.items() if not bar.is_link and equilibrium.tensions.get(name) == 0]
    reasons: dict[str, str] = {}
    found = True
    while found:
        found = False
        for joint in structure.joints:
            for name, reason in _by_sight(structure, joint, reasons).items():
                if name in zero and name not in reasons:
                    reasons[name] = reason
                    found = True
    return {name: reasons.get(name, BY_EQUILIBRIUM) for name in zero}


def _by_sight(structure: Structure, joint: str, idle: dict[str, str]) -> dict[str, str]:
    bars = [structure.bars[name] for name in structure.bars_at[joint] if name not in idle]
    members = [bar for bar in bars if not bar.is_link]
    plain = joint not in structure.loads and len(members) == len(bars)
    if plain and (len(bars) == 1 or (len(bars) == 2 and not _in_line(*bars))):  # noqa: PLR2004 - two members
        return {bar.name: TWO_MEMBERS.format(joint=joint) for bar in bars}
    others = [(bar.name, bar.dx, bar.dy) for bar in bars]
    if joint in structure.loads:
        others.append(("", *structure.loads[joint]))
    for member in members:
        rest = [(dx, dy) for name, dx, dy in others if name != member.name]
        if rest and _all_in_line(rest) and not _all_in_line([*rest, (member.dx, member.dy)]):
            return {member.name: (THIRD_MEMBER if plain else OTHERS_IN_LINE).format(joint=joint)}
    return {}


def _all_in_line(directions: list[tuple[Exact, Exact]]) -> bool:
    ux, uy = directions[0]
    return all(ux * dy == uy * dx for dx, dy in directions[1:])


def _in_line(first: Bar, second: Bar) -> bool:
    return first.dx * second.dy == first.dy * second.dx
