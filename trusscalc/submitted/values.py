"""From printed numbers to forces: the decimal sign, units, and what sign and letter say of tension and compression."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import lru_cache
from typing import Final, Literal

from trusscalc.submitted.blocks import numbered
from trusscalc.submitted.heads import Unit
from trusscalc.submitted.numbers import FORCE_UNITS, Amount, DecimalSign, Letter, Printed, amount, decimal_sign
from trusscalc.submitted.rows import Raw
from trusscalc.truss import Truss
from trusscalc.units import factor

Convention = Literal["tension positive", "compression positive", "detect", "letters T and C"]
"""How the printed sign is meant; ``detect``: to be decided by comparing senses with our own solution."""

ONE: Final = Fraction(1)
FEWEST_FIGURES: Final = 4
"""Significant figures that results are never taken to be rounded below."""
FEWEST_ZEROS: Final = 3
"""Zeros at the ends of numbers that tell such a rounding from chance."""
TENSION: Final = "tension positive"
COMPRESSION: Final = "compression positive"
DETECT: Final = "detect"
LETTERS: Final = "letters T and C"


@dataclass(frozen=True, slots=True)
class Value:
    """A value with half a unit of its last digit, in our units; its sign as printed until ``signed`` has been there."""

    raw: Raw
    value: Fraction
    half: Fraction


# --- digits and units -------------------------------------------------------------------------------------


def values_of(
    raws: Sequence[Raw], truss: Truss, *, decimal: str, unit: Unit | None, titled: Unit | None
) -> tuple[list[Value], str, list[str], list[str]]:
    """Return printed numbers as values in the truss's units, the unit of the forces, notes and problems.

    Parameters
    ----------
    raws : sequence of Raw
        The numbers.
    truss : Truss
        Whose units they are turned into.
    decimal : str
        The decimal sign as stated, ''.
    unit, titled : (str, Fraction) or None
        Their unit of force as the user states it, and as a title line does.
    """
    sign, notes, problems = _sign_of(raws, decimal)
    units: dict[str, None] = {}
    overruled: list[int] = []
    unstated = False
    found: list[Value] = []
    for raw in raws:
        number = raw.printed if isinstance(raw.printed, Amount) else amount(raw.printed, sign)
        if isinstance(number, str):
            digits = raw.printed.digits if isinstance(raw.printed, Printed) else ""
            problems.append(f"{raw.where}: {digits!r} {number}; a number such as -482.5 is expected")
            continue
        if raw.kind == "displacement":
            times = _factor(raw.unit or (truss.length, ONE), truss.length)
        else:
            beside = FORCE_UNITS.get(raw.printed.unit) if isinstance(raw.printed, Printed) else None
            if beside and raw.unit and beside != raw.unit:
                problems.append(f"{raw.where}: the number is in {beside[0]}, the column in {raw.unit[0]}; use one unit")
                continue
            stated = beside or raw.unit
            if unit and stated and stated != unit:
                overruled.append(raw.row)
            unstated |= stated is None
            theirs = unit or stated or titled or (truss.force, ONE)
            units[_unit_text(theirs)] = None
            times = _factor(theirs, truss.force)
        found.append(Value(raw, number.value * times, number.half * times) if times != 1 else _plain(raw, number))
    found, significance = _to_significant_figures(found, raws)
    notes += significance
    if overruled:
        notes.append(f"{numbered(overruled)} states another unit; read in {_unit_text(unit)} as the user states")
    if unstated and not (unit or titled):
        notes.append(f"the table states no unit of force: read in {truss.force}, as the truss")
    return found, ", ".join(units), notes, problems


def _plain(raw: Raw, number: Amount) -> Value:
    return Value(raw, number.value, number.half)


def _to_significant_figures(values: Sequence[Value], raws: Sequence[Raw]) -> tuple[list[Value], list[str]]:
    """Return values with the rounding of numbers that were rounded to significant figures: 19420 of 19424.7.

    Where no number of a kind has more significant figures than so many, and larger ones end in zeros instead, these
    zeros say nothing. Never are fewer than FEWEST_FIGURES assumed: round numbers are often exact. A plain 0 is as fine
    as the finest number.
    """
    if len(values) < len(raws):
        return list(values), []  # something is wrong with a number, which is told instead
    notes = []
    kept = list(values)
    for kind in ("force", "reaction"):
        units = {
            place: abs(int(value.value / (2 * value.half)))
            for place, value in enumerate(values)
            if value.raw.kind == kind and value.half
        }
        figures = max((len(str(size).rstrip("0")) for size in units.values() if size), default=0)
        figures = max(figures, FEWEST_FIGURES)
        surplus = {place: len(str(size)) - figures for place, size in units.items() if len(str(size)) > figures}
        if sum(surplus.values()) >= FEWEST_ZEROS:
            for place, zeros in surplus.items():
                kept[place] = replace(kept[place], half=kept[place].half * 10**zeros)
            told = f"no {kind} has more than {figures} significant figures"
            notes.append(f"{told}: {len(surplus)} larger numbers count as rounded to as many")
        finest = min((values[place].half for place in units), default=Fraction(0))
        for place, size in units.items():
            if not size:
                kept[place] = replace(kept[place], half=finest)
    return kept, notes


@lru_cache
def _factor(unit: Unit, into: str) -> Fraction:
    name, times = unit
    return times * factor(name, into)


def _sign_of(raws: Sequence[Raw], decimal: str) -> tuple[DecimalSign, list[str], list[str]]:
    printed = [(f"row {raw.row}", raw.printed) for raw in raws if isinstance(raw.printed, Printed)]
    account = [raw.row for raw in raws if isinstance(raw.printed, Printed) and raw.printed.in_parentheses]
    notes = [f"{numbered(account)}: a number in parentheses is read as negative"] if account else []
    if decimal:
        return ("," if decimal == "," else "."), notes, []
    sign, note, problem = decimal_sign(printed)
    if note:
        notes.append(note)
    if sign == ",":
        notes.append("numbers have a decimal comma")
    return sign, notes, [problem] if problem else []


def _unit_text(unit: Unit | None) -> str:
    if unit is None:
        return ""
    name, times = unit
    return name if times == 1 else f"{times} {name}"


# --- tension and compression ------------------------------------------------------------------------------


def signed(
    values: Sequence[Value], convention: str, stated: str
) -> tuple[list[Value], Convention, list[str], list[str]]:
    """Return values with member forces tension positive, how the signs were meant, notes and problems.

    Parameters
    ----------
    values : sequence of Value
        Signs as printed.
    convention : str
        What the user states, ''.
    stated : str
        What the table's words state, ''.
    """
    forces = [value for value in values if value.raw.kind == "force"]
    lettered = [value for value in forces if value.raw.letter]
    if lettered and all(value.value >= 0 for value in forces):
        return _by_letters(values, convention)
    means, notes = _meaning(convention, stated)
    if lettered:
        told, contradicting = _letters_meaning(lettered)
        if contradicting:
            problems = [
                f"{value.raw.where}: sign and letter {value.raw.letter} contradict each other, seen with the other rows"
                for value in contradicting
            ]
            return list(values), told, notes, problems
        if convention in (TENSION, COMPRESSION) and convention != told:
            return list(values), told, [], [f"the letters T and C show {told}, but {convention} is stated; keep one"]
        means, notes = told, [f"{told}, as the letters T and C show"]
    if means == COMPRESSION:
        values = [replace(v, value=-v.value) if v.raw.kind == "force" else v for v in values]
    return list(values), means, notes, []


def _meaning(convention: str, stated: str) -> tuple[Convention, list[str]]:
    """Return how signs are meant without letters, and why."""
    if convention in (TENSION, COMPRESSION):
        against = f"; the table's own words say {stated}" if stated and stated != convention else ""
        means: Convention = TENSION if convention == TENSION else COMPRESSION
        return means, [f"{convention}, as the user states{against}"]
    if stated in (TENSION, COMPRESSION):
        return (TENSION if stated == TENSION else COMPRESSION), [f"{stated}, as the table's own words say"]
    if convention == DETECT:
        return DETECT, []
    return TENSION, ["the table states no sign convention: read as tension positive"]


def _by_letters(values: Sequence[Value], convention: str) -> tuple[list[Value], Convention, list[str], list[str]]:
    found, problems = [], []
    for value in values:
        letter: Letter = value.raw.letter
        if value.raw.kind == "force" and not letter and value.value:
            problems.append(f"{value.raw.where}: neither a sign nor T or C tells tension from compression")
        found.append(replace(value, value=-value.value) if letter == "C" else value)
    notes = ["numbers have no signs: tension or compression as the letters T and C say"]
    if convention in (TENSION, COMPRESSION):
        notes.append(f"{convention} was stated and does not matter here")
    return found, LETTERS, notes, problems


def _letters_meaning(lettered: Sequence[Value]) -> tuple[Convention, list[Value]]:
    """Return the convention under which letters and signs fit, and those that do not fit even so."""
    not_tension = [v for v in lettered if v.value and (v.value > 0) != (v.raw.letter == "T")]
    not_compression = [v for v in lettered if v.value and (v.value > 0) == (v.raw.letter == "T")]
    if len(not_tension) <= len(not_compression):
        return TENSION, not_tension
    return COMPRESSION, not_compression


# --- rows stated twice, and cases -------------------------------------------------------------------------


def once_each(values: Sequence[Value]) -> tuple[list[Value], list[str], list[str]]:
    """Return each value once, notes on rows stated twice alike, and problems where the values differ."""
    first: dict[tuple[str, str, str, str], Value] = {}
    again: list[int] = []
    problems = []
    for value in values:
        raw = value.raw
        before = first.setdefault((raw.kind, raw.name, raw.axis, raw.case), value)
        if before is value:
            continue
        if before.value == value.value:
            again.append(raw.row)
        else:
            of_case = f" in case {raw.case[:40]!r}" if raw.case else ""
            told = f"{raw.what}{of_case} is stated again, with another value than in row {before.raw.row}; keep one"
            problems.append(f"{raw.where}: {told}")
    notes = [f"{numbered(again)} states a value again, the same; taken once"] if again else []
    return list(first.values()), notes, problems


def of_case(values: Sequence[Value], case: str) -> tuple[list[Value], list[str], list[str]]:
    """Return the values of one of their cases; of a table without cases all of them, under that name."""
    if not case:
        return list(values), [], []
    if not any(value.raw.case for value in values):
        return [replace(value, raw=replace(value.raw, case=case)) for value in values], [], []
    wanted = case.strip().casefold()
    kept = [value for value in values if value.raw.case.strip().casefold() == wanted]
    if not kept:
        there = ", ".join(list(dict.fromkeys(value.raw.case[:40] for value in values))[:12])
        return [], [], [f"there is no case {case[:40]!r} in the table; there are {there}"]
    left = len(values) - len(kept)
    return kept, [f"{left} values of other cases than {case!r} left out"] if left else [], []
