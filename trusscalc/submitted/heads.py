"""The head of a submitted table: which column is what, in which unit, and what it says about signs.

Columns are recognised by the plain words of the trade, or named by the user. A row counts as a head when it has what a
table of member forces, of reactions or of joint displacements needs. What stands above a head is its title.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from functools import lru_cache
from typing import Final, Literal

from trusscalc.submitted.numbers import FORCE_UNITS, LENGTH_UNITS, TYPOGRAPHY, taken_apart
from trusscalc.submitted.tables import MOST_CELLS, Cell, Row

Convention = Literal["tension positive", "compression positive"]
Unit = tuple[str, Fraction]
"""A unit of ours, and how many of it make one of theirs."""

_NUMBER: Final = r"(?: (?:name|no|nr|number|id|label|mark))?"
_POINT: Final = r"(?:joint|node|panel point|point)"
ROLES: Final = {
    role: re.compile(pattern)
    for role, pattern in {
        "member": rf"(?:truss )?(?:member|bar|element|rod|strut)s?(?: or reaction)?{_NUMBER}|reaction",
        "start": rf"(?:start|from|first)(?: (?:{_POINT}|end))?{_NUMBER}|(?:{_POINT}|end) (?:1|a|i|start)",
        "end": rf"(?:end|to|second|far)(?: (?:{_POINT}|end))?{_NUMBER}|(?:{_POINT}|end) (?:2|b|j|end)",
        "force": r"(?:axial |member |bar |normal |internal )*forces?(?: n)?|axial(?: load)?|n",
        "sense": r"t c|tc|t or c|sense|tension(?: or)? compression",
        "case": rf"(?:load )?(?:case|combination)s?(?: or combination)?{_NUMBER}|loadcase|loading",
        "joint": rf"(?:{_POINT}|support)s?{_NUMBER}",
        "reaction x": r"r ?x|x reaction|reaction r?x|horizontal reaction|reaction horizontal",
        "reaction y": r"r ?y|y reaction|reaction r?y|vertical reaction|reaction vertical",
        "displacement x": r"[du] ?x|x (?:displacement|deflection)|(?:displacement|deflection) [du]?x"
        r"|horizontal (?:displacement|deflection)",
        "displacement y": r"[du] ?y|y (?:displacement|deflection)|(?:displacement|deflection) [du]?y"
        r"|vertical (?:displacement|deflection)",
    }.items()
}
"""What a column can be, and the words (lower case, one blank between them) by which it is known."""

REACTIONS: Final = ("reaction x", "reaction y")
DISPLACEMENTS: Final = ("displacement x", "displacement y")
FORCES: Final = ("force", *REACTIONS)

_BRACKETS: Final = re.compile(r"\[([^\[\]]*)\]|\(([^()]*)\)")
_TRAILING_UNIT: Final = re.compile(r"(?:\s*[,/]\s*|\s+in\s+|\s+)(\S+)$")
_SENSE: Final = r"(tension|tensile|compression|compressive)"
_SIGNS: Final = (
    re.compile(rf"\b{_SENSE}\b(?: forces?)?\s*(?:is|are|=|:)?\s*(positive|pos\b|\+|negative|neg\b|-ve)"),
    re.compile(rf"(positive|\+ve|\+|negative|-ve)\s*(?:in|is|for|means|=|:)?\s*\b{_SENSE}\b"),
    re.compile(r"\b([tc]) ?(\+)|(\+) ?([tc])\b"),
)
_TITLE_UNIT: Final = re.compile(
    r"\bforces?\b[^.;]*?\bin\s+([A-Za-z]+)|\bunits?\b\s*(?:of force)?\s*[:=]?\s*([A-Za-z, ]+)", re.IGNORECASE
)


@dataclass(frozen=True, slots=True)
class Head:
    """A recognised head.

    Attributes
    ----------
    row : int
        Where it stands.
    texts : tuple of str
        Its cells.
    columns : dict of str to int
        Place of each role, from 0.
    units : dict of str to (str, Fraction)
        Unit by role, where stated.
    cases : dict of int to str
        For a table with one column of forces for each case: case by place.
    """

    row: int
    texts: tuple[str, ...]
    columns: Mapping[str, int]
    units: Mapping[str, Unit] = field(default_factory=dict)
    cases: Mapping[int, str] = field(default_factory=dict)

    @property
    def width(self) -> int:
        """How many cells a row may have; many where the table has no head."""
        return len(self.texts) or MOST_CELLS

    def title(self, place: int) -> str:
        """Return what to call a column in a message."""
        text = self.texts[place][:40] if place < len(self.texts) else ""
        return f"column {text!r}" if text else f"column {place + 1}"


# --- the words of one head --------------------------------------------------------------------------------


@lru_cache(maxsize=4096)
def parts_of(text: str) -> tuple[str, str, str]:
    """Return the words of a head, its role ('' when they say none), and its unit as spelled ('').

    Examples
    --------
    >>> parts_of("Axial Force [kN]"), parts_of("N/kN"), parts_of("T/C"), parts_of("remarks")
    (('axial force', 'force', 'kN'), ('n', 'force', 'kN'), ('t c', 'sense', ''), ('remarks', '', ''))
    """
    plain, unit = text.translate(TYPOGRAPHY).strip(), ""
    for found in _BRACKETS.finditer(plain):
        inside = (found[1] or found[2] or "").strip()
        if inside in FORCE_UNITS or inside in LENGTH_UNITS:
            unit = inside
    if unit:
        plain = _BRACKETS.sub("", plain)
    elif (last := _TRAILING_UNIT.search(plain)) and (last[1] in FORCE_UNITS or last[1] in LENGTH_UNITS):
        before = plain[: last.start()]
        if _role(_words(before)):
            plain, unit = before, last[1]
    words = _words(_BRACKETS.sub("", plain)) or _words(plain)
    return words, _role(words) or _role(_words(plain)), unit


def _words(text: str) -> str:
    return " ".join(re.findall(r"[a-z]+|[0-9]+", text.casefold()))


def _role(words: str) -> str:
    return next((role for role, pattern in ROLES.items() if pattern.fullmatch(words)), "")


def convention_in(texts: Iterable[str]) -> Convention | Literal[""]:
    """Return the sign convention that words state, '' when they state none or contradict each other.

    Examples
    --------
    >>> convention_in(["Axial force, compression positive"]), convention_in(["N (T+)"]), convention_in(["T/C"])
    ('compression positive', 'tension positive', '')
    """
    found: set[Convention] = set()
    for text in texts:
        plain = text.translate(TYPOGRAPHY).casefold()
        for pattern in _SIGNS:
            for match in pattern.finditer(plain):
                groups = [group for group in match.groups() if group]
                tension = any(group.startswith("t") for group in groups)
                positive = any(group[0] in "+p" for group in groups)
                found.add("tension positive" if tension == positive else "compression positive")
    return found.pop() if len(found) == 1 else ""


def unit_in(texts: Iterable[str]) -> Unit | None:
    """Return the unit of force that title lines state."""
    for text in texts:
        for match in _TITLE_UNIT.finditer(text.translate(TYPOGRAPHY)):
            for word in re.findall(r"[A-Za-z]+", match[1] or match[2] or ""):
                if word in FORCE_UNITS and word not in ("t", "n"):
                    return FORCE_UNITS[word]
    return None


# --- rows that are heads ----------------------------------------------------------------------------------


def looks_like_head(cells: Sequence[Cell]) -> bool:
    """Return whether some cell of a row is the head of a column; cheap, for every row of a table."""
    return any(isinstance(cell, str) and cell[:1].isalpha() and parts_of(cell)[1] for cell in cells)


def head_of(row: Row, named: Mapping[str, str | int]) -> Head | list[str] | None:
    """Return the head that a row is, None when it is none, or what is wrong with it.

    Parameters
    ----------
    row : Row
        The row.
    named : mapping of str to str or int
        Role to the head of its column, or to its place from 1, as the user says.
    """
    if any(_is_number(cell) for cell in row.cells):
        return None
    texts = tuple(str(cell) for cell in row.cells)
    columns = _columns_named(texts, named)
    problems: list[str] = []
    for place, text in enumerate(texts):
        role = parts_of(text)[1] if text else ""
        if not role or role in named or place in columns.values():
            continue
        if role in columns:
            pair = f"{texts[columns[role]][:40]!r} and {text[:40]!r}"
            problems.append(f"row {row.number}: {pair} may both be the {role}; name the column ({role}=...)")
        columns.setdefault(role, place)
    if not suffices(columns):
        return None
    units: dict[str, Unit] = {}
    for role, place in columns.items():
        unit, fault = _unit_of(role, texts[place])
        if fault:
            problems.append(f"row {row.number}, column {texts[place][:40]!r}: {fault}")
        elif unit:
            units[role] = unit
    return problems or Head(row.number, texts, columns, units)


def _unit_of(role: str, text: str) -> tuple[Unit | None, str]:
    """Return the unit that the head of a column states, and what is wrong with it."""
    known = FORCE_UNITS if role in FORCES else LENGTH_UNITS if role in DISPLACEMENTS else {}
    unit = parts_of(text)[2] or _stray_unit(text)
    if not known or not unit:
        return None, ""
    if unit not in known:
        return None, f"{unit[:40]!r} is no unit for the {role}; known are {', '.join(list(known)[:8])}"
    return known[unit], ""


def _stray_unit(text: str) -> str:
    """Return what stands in square brackets and is no unit, '' when there is nothing."""
    found = re.search(r"\[([^\[\]]*)\]", text)
    inside = found[1].strip() if found else ""
    return "" if not inside or inside == "-" or convention_in([inside]) else inside


def has_number(row: Row, head: Head) -> bool:
    """Return whether a row holds a number in a column that is to hold one."""
    places = [head.columns[role] for role in (*FORCES, *DISPLACEMENTS) if role in head.columns] + [*head.cases]
    return any(_is_number(row.cells[place]) for place in places if place < len(row.cells))


def _is_number(cell: Cell) -> bool:
    return not isinstance(cell, str) or (bool(cell) and not isinstance(taken_apart(cell), str))


def _columns_named(texts: Sequence[str], named: Mapping[str, str | int]) -> dict[str, int]:
    """Return the places of the columns that the user names, as far as this row has them."""
    found = {}
    for role, name in named.items():
        if isinstance(name, int):
            if 0 < name <= len(texts):
                found[role] = name - 1
            continue
        for same in (lambda text: text, str.casefold, lambda text: parts_of(text)[0]):
            places = [place for place, text in enumerate(texts) if text and same(text) == same(name)]
            if len(places) == 1:
                found[role] = places[0]
                break
    return found


def suffices(columns: Collection[str]) -> bool:
    """Return whether the columns are what one of the three kinds of table needs."""
    bars = "force" in columns and ("member" in columns or {"start", "end"} <= set(columns))
    joints = "joint" in columns and any(role in columns for role in (*REACTIONS, *DISPLACEMENTS))
    return bars or joints


def head_by_cases(row: Row, following: Row, named: Mapping[str, str | int]) -> Head | None:
    """Return the head of a table with a column of forces for each case: members, then at least two unknown heads.

    Parameters
    ----------
    row, following : Row
        The row, and the next one: only columns that hold numbers there are columns of forces.
    named : mapping
        As for ``head_of``.
    """
    texts = tuple(cell if isinstance(cell, str) else _whole(cell) for cell in row.cells)
    columns = _columns_named(texts, named)
    for place, text in enumerate(texts):
        role = parts_of(text)[1]
        if role in ("member", "start", "end") and place not in columns.values():
            columns.setdefault(role, place)
    if not ("member" in columns or {"start", "end"} <= set(columns)):
        return None
    cases, units = {}, set()
    for place, text in enumerate(texts[: len(following.cells)]):
        if text and place not in columns.values() and not parts_of(text)[1] and _is_number(following.cells[place]):
            unit = parts_of(text)[2]
            units.add(unit)
            cases[place] = _without_unit(text)
    if len(cases) < 2 or len(units) > 1 or len(set(cases.values())) < len(cases):  # noqa: PLR2004 - one is no choice
        return None
    stated = FORCE_UNITS.get(units.pop())
    return Head(row.number, texts, columns, {"force": stated} if stated else {}, cases)


def _without_unit(text: str) -> str:
    def kept(found: re.Match[str]) -> str:
        return "" if (found[1] or found[2] or "").strip() in FORCE_UNITS else found[0]

    return _BRACKETS.sub(kept, text.translate(TYPOGRAPHY)).strip()


def _whole(cell: Cell) -> str:
    if isinstance(cell, str):
        return cell
    return str(cell.value) if cell.value.denominator == 1 else ""


def is_units(cells: Sequence[Cell], head: Head) -> dict[str, Unit] | None:
    """Return units by role when a row holds nothing but units (the second line of a head), else None."""
    if not all(isinstance(cell, str) for cell in cells):
        return None
    words = [str(cell).strip("[]() -") for cell in cells]
    if not any(words) or not all(word in FORCE_UNITS or word in LENGTH_UNITS for word in words if word):
        return None
    found = {}
    for role, place in head.columns.items():
        word = words[place] if place < len(words) else ""
        known = FORCE_UNITS if role in FORCES else LENGTH_UNITS
        if word in known and role in (*FORCES, *DISPLACEMENTS):
            found[role] = known[word]
    for place in head.cases:
        if place < len(words) and words[place] in FORCE_UNITS:
            found["force"] = FORCE_UNITS[words[place]]
    return found
