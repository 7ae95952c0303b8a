"""Loads as engineers state them: along a chord, between panel points, and the weight of members.

A rule says what acts and where, and belongs to a load case; ``panelloads`` turns it into forces on joints. Amounts of
load may hold the symbols of the file, places and sizes are numbers.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Final

from trusscalc.errors import InputError
from trusscalc.exact import Exact, rational
from trusscalc.loads import factor_text
from trusscalc.truss import Truss, did_you_mean
from trusscalc.units import FORCES, LENGTHS, unknown_unit

Direction = str | tuple[Exact, Exact]
"""One of DIRECTIONS, or (dx, dy), whose length has no meaning."""
Along = str | tuple[str, ...]
"""A chain's name or its joints in one text, ``"L0,L1,L2"``; or its joints."""

DIRECTIONS: Final = ("down", "up", "left", "right", "normal")
MEASURES: Final = ("plan", "slope")
STANDARD_GRAVITY: Final = Fraction(980665, 100000)
"""Metres per second squared, by definition."""
POUND: Final = Fraction(45359237, 100_000_000)
"""Kilograms, by definition."""

DENSITIES: Final[dict[str, Fraction]] = {
    **{
        f"{force}/{length}3": FORCES[force] / LENGTHS[length] ** 3
        for force, length in (("N", "m"), ("kN", "m"), ("N", "mm"), ("lbf", "ft"), ("lbf", "in"), ("kip", "ft"))
    },
    "kg/m3": STANDARD_GRAVITY,
    "lb/ft3": POUND * STANDARD_GRAVITY / LENGTHS["ft"] ** 3,
}
"""Newtons per cubic metre in one unit of weight per volume; kilograms and pounds weigh under standard gravity."""
SECTIONS: Final[dict[str, Fraction]] = {f"{length}2": metres**2 for length, metres in LENGTHS.items()}
"""Square metres in one unit of the area of a section."""


@dataclass(frozen=True, slots=True)
class Beside:
    """A load beside the truss's plane, between this truss and a parallel one, or outside the two.

    Attributes
    ----------
    offset : Exact
        Distance of the load from this truss towards the other one; negative on the far side of this truss.
    spacing : Exact
        Distance between the two trusses.
    """

    offset: Exact
    spacing: Exact

    @property
    def share(self) -> Exact:
        """The part of the load that this truss carries by the lever rule."""
        return (self.spacing - self.offset) / self.spacing


@dataclass(frozen=True, slots=True)
class LineLoad:
    """A load spread along a chain: per length, or per area times a tributary width.

    Attributes
    ----------
    case : str
        The load case it belongs to.
    along : str or tuple of str
        The chain.
    start, end : Exact
        Intensity where it starts and where it ends, straight between: force per length, or per area when ``width``
        is stated. Positive acts along ``direction``.
    width : Exact or None
        Tributary width of an area load.
    begins, ends : Exact or None
        Where it starts and ends, measured along the chain from its first joint as ``per`` says; None at the
        chain's ends.
    per : str
        ``"plan"``, per horizontal length (snow), or ``"slope"``, per true length (cladding, wind). '' for the usual
        one: slope for a load at right angles to the chain, plan for all others.
    direction : str or (Exact, Exact)
        See DIRECTIONS; ``"normal"`` is at right angles to each piece of the chain, and positive presses on the side
        that lies to the left when going along the chain.
    beside : Beside or None
        Where it stands beside the truss's plane.

    Raises
    ------
    InputError
        With every fault found in ``problems``.
    """

    case: str
    along: Along
    start: Exact
    end: Exact
    width: Exact | None = None
    begins: Exact | None = None
    ends: Exact | None = None
    per: str = ""
    direction: Direction = "down"
    beside: Beside | None = None

    def __post_init__(self) -> None:
        if not self.per:
            object.__setattr__(self, "per", usual_measure(self.direction))
        problems = _placing_faults(self.per, self.direction, self.beside)
        problems += _symbol_faults({"width": self.width, "from": self.begins, "to": self.ends})
        if not problems:
            if self.width is not None and self.width.sign() <= 0:
                problems.append(f"width: must be positive, and is {factor_text(self.width)}")
            problems += _stretch_faults(self.begins, self.ends)
        _refuse(self.case, problems)


@dataclass(frozen=True, slots=True)
class PointLoad:
    """A force on a chain, at a panel point or between two.

    Attributes
    ----------
    case, along, direction, beside
        As in ``LineLoad``.
    force : Exact
        Positive acts along ``direction``.
    at : Exact
        Where it stands, measured along the chain from its first joint as ``per`` says.
    per : str
        ``"plan"`` or ``"slope"``.
    """

    case: str
    along: Along
    force: Exact
    at: Exact
    per: str = "plan"
    direction: Direction = "down"
    beside: Beside | None = None

    def __post_init__(self) -> None:
        problems = _placing_faults(self.per, self.direction, self.beside)
        problems += _symbol_faults({"at": self.at})
        if not problems and self.at.sign() < 0:
            problems.append(_before_start("at", self.at))
        _refuse(self.case, problems)


@dataclass(frozen=True, slots=True)
class SelfWeight:
    """The weight of members, half of it at either end.

    Attributes
    ----------
    case, beside
        As in ``LineLoad``.
    weight : Exact or None
        Force per length of member; None where density and section are stated.
    density, section : Exact or None
        Weight per volume and area of the section.
    density_unit, section_unit : str
        Of DENSITIES and SECTIONS; '' for the truss's own units.
    members : tuple of str
        Groups and members; () for all.
    """

    case: str
    weight: Exact | None = None
    density: Exact | None = None
    section: Exact | None = None
    density_unit: str = ""
    section_unit: str = ""
    members: tuple[str, ...] = ()
    beside: Beside | None = None

    def __post_init__(self) -> None:
        problems = _beside_faults(self.beside) + _symbol_faults({"section": self.section})
        if (self.weight is None) == (self.density is None) or (self.density is None) != (self.section is None):
            problems.append("self-weight: state self_weight alone, or density with section")
        for key, unit, known in (("density", self.density_unit, DENSITIES), ("section", self.section_unit, SECTIONS)):
            if unit and getattr(self, key) is None:
                problems.append(f"{key}_unit: belongs to {key}, which is not stated")
            elif unit and unit not in known:
                problems.append(f"{key}_unit: {unknown_unit(unit, known)}")
        for key, value in (("self_weight", self.weight), ("density", self.density)):
            if value is not None and not value.symbols and value.sign() < 0:
                problems.append(f"{key}: must not be negative, for weight acts down, and is {factor_text(value)}")
        if self.section is not None and not self.section.symbols and self.section.sign() <= 0:
            problems.append(f"section: must be positive, and is {factor_text(self.section)}")
        _refuse(self.case, problems)


Rule = LineLoad | PointLoad | SelfWeight


def usual_measure(direction: Direction) -> str:
    """Return what the length of a line load is where that is not stated."""
    return "slope" if direction == "normal" else "plan"


def weight_per_length(rule: SelfWeight, truss: Truss) -> Exact:
    """Return the weight of the rule's members in the truss's force per length, exactly.

    Examples
    --------
    >>> from trusscalc.exacttext import number
    >>> truss = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
    >>> steel = SelfWeight("dead", density=number("78.5"), section=number(4000), section_unit="mm2")
    >>> weight_per_length(steel, truss)
    Exact('157/500')
    """
    if rule.weight is not None:
        return rule.weight
    if rule.density is None or rule.section is None:
        raise AssertionError  # such a rule cannot exist
    force, length = FORCES[truss.force], LENGTHS[truss.length]
    newtons = DENSITIES[rule.density_unit] if rule.density_unit else force / length**3
    square = SECTIONS[rule.section_unit] if rule.section_unit else length**2
    return rule.density * rule.section * rational(newtons * square * length / force)


# --- faults of form ---------------------------------------------------------------------------------------


def _refuse(case: str, problems: Sequence[str]) -> None:
    if problems:
        raise InputError([f"[panel_loads.{case}] {problem}" for problem in problems])


def _symbol_faults(values: Mapping[str, Exact | None]) -> list[str]:
    return [
        f"{key}: holds the symbol {value.symbols[0]}; symbols stand in amounts of load only, write a number"
        for key, value in values.items()
        if value is not None and value.symbols
    ]


def _placing_faults(per: str, direction: Direction, beside: Beside | None) -> list[str]:
    problems = []
    if per not in MEASURES:
        problems.append(f'per: {str(per)[:40]!r} is no measure; write "plan" or "slope"{did_you_mean(per, MEASURES)}')
    if isinstance(direction, str):
        if direction not in DIRECTIONS:
            words = ", ".join(f'"{word}"' for word in DIRECTIONS)
            near = did_you_mean(direction, DIRECTIONS)
            problems.append(f"direction: {direction[:40]!r} is no direction; write {words} or [dx, dy]{near}")
    else:
        problems += [fault for part in direction for fault in _symbol_faults({"direction": part})][:1]
        if not direction[0] and not direction[1]:
            problems.append("direction: [0, 0] has no direction; write one that has")
    return problems + _beside_faults(beside)


def _beside_faults(beside: Beside | None) -> list[str]:
    if beside is None:
        return []
    problems = _symbol_faults({"beside offset": beside.offset, "beside spacing": beside.spacing})
    if not problems and beside.spacing.sign() <= 0:
        problems.append(
            f"beside spacing: must be positive, and is {factor_text(beside.spacing)}; it is the distance from this "
            "truss to the other one"
        )
    return problems


def _stretch_faults(begins: Exact | None, ends: Exact | None) -> list[str]:
    if begins is not None and begins.sign() < 0:
        return [_before_start("from", begins)]
    if begins is not None and ends is not None and begins >= ends:
        return [f"from: {factor_text(begins)} is not before to = {factor_text(ends)}; state the nearer place as from"]
    if begins is None and ends is not None and ends.sign() <= 0:
        return [_before_start("to", ends)]
    return []


def _before_start(key: str, place: Exact) -> str:
    return f"{key}: {factor_text(place)} is off the chain; places are counted from its first joint, from 0 on"
