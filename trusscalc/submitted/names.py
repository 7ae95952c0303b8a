"""Their names and ours: members and joints of a submitted table found in the truss, whatever the spelling.

Tried in this order, and taken only when it fits one member: the name map the user gives; our own spelling; the ends in
the other order; another dash, "to" or a blank between the ends, or nothing; capitals and small letters. A name of
ours that the map gives to another joint or member is never taken for ours.
"""

from __future__ import annotations

import os
import re
from collections.abc import Callable, Iterable, Iterator, Mapping
from pathlib import Path
from typing import Final

from trusscalc.errors import FileFormatError, InputError
from trusscalc.submitted.numbers import TYPOGRAPHY, Amount
from trusscalc.submitted.tables import DELIMITERS, Cell, opened, split
from trusscalc.truss import LONGEST_NAME, Truss, did_you_mean

Names = Mapping[str, str] | str | os.PathLike[str]

ENDS: Final = 2
LONGEST_MEMBER: Final = 2 * LONGEST_NAME + 10
SEPARATORS: Final = (re.compile(r"\s*-\s*"), re.compile(r"\s+to\s+", re.IGNORECASE), re.compile(r"\s*[/|>:]\s*"))
_BLANKS: Final = re.compile(r"\s+")
_DATE: Final = re.compile(
    r"\d{1,2}-[A-Za-z]{3}(-\d{2,4})?|[A-Za-z]{3}-\d{2}|\d{4}-\d\d-\d\d.*|\d{1,2}[./]\d{1,2}[./]\d{2,4}"
)
OURS: Final = ("ours", "our", "our name", "joint or member", "drawing", "hand check")
THEIRS: Final = ("theirs", "their", "their name", "submitted", "model", "other", "other model", "number")


class NameMatch:
    """Finds the member, joint or reaction of the truss that a text of theirs means.

    Parameters
    ----------
    truss : Truss
        Our truss.
    names : mapping or None
        Our joint or member name to theirs, see ``name_map``.

    Raises
    ------
    InputError
        When the map names what is not in the truss, or one thing twice.
    """

    def __init__(self, truss: Truss, names: Mapping[str, str] | None = None) -> None:
        self._members = {frozenset((m.start, m.end)): m.name for m in truss.members}
        joints = [joint.name for joint in truss.joints]
        given = names or {}
        self._joint_of_theirs: dict[str, str] = {}
        self._member_of_theirs: dict[str, str] = {}
        self._read(given, set(joints))
        renamed = set(self._joint_of_theirs.values())
        self._joints = _Finder([(joint, joint) for joint in joints if joint not in renamed], self._joint_of_theirs)
        spelled = [
            (spelling, name)
            for ends, name in self._members.items()
            if name not in self._member_of_theirs.values() and not ends & renamed
            for spelling in _both_orders(name)
        ]
        self._spelled = _Finder(spelled, self._member_of_theirs)
        self._run_together = _run_together(self._members.values())
        self._links = {link.name: link.joint for link in truss.links}
        self.known = [m.name for m in truss.members]
        self._found: dict[str, str | None] = {}
        self.map_used = False
        """Whether some name has been found by the name map."""

    def _read(self, given: Mapping[str, str], joints: set[str]) -> None:
        by_ends = {frozenset(name.split("-")): name for name in self._members.values()}
        problems: list[str] = []
        for ours, theirs in given.items():
            table = self._joint_of_theirs
            name: str | None = ours
            if ours not in joints:
                table, name = self._member_of_theirs, by_ends.get(frozenset(ours.split("-")))
            if name is None:
                near = did_you_mean(ours, [*joints, *self._members.values()], told=len(problems))
                problems.append(f"names: {ours[:40]!r} is no joint or member of the truss{near}")
            elif table.setdefault(_plain(theirs), name) != name:
                problems.append(f"names: {theirs[:40]!r} stands for {table[_plain(theirs)]} and for {name}; keep one")
        if problems:
            raise InputError(problems)

    @property
    def ours_are_plain(self) -> bool:
        """Whether names of ours in the table can only be ours: the map has found nothing, and they are no numbers."""
        return not self.map_used and not any(name.isdigit() for name in self._joint_of_theirs.values())

    def joint(self, cell: Cell) -> str | None:
        """Return the joint that a cell names, or None."""
        found = self._joints.find(text_of(cell))
        self.map_used |= found in self._joint_of_theirs.values()
        return found

    def member(self, cell: Cell) -> str | None:
        """Return the member that a cell names, or None."""
        text = text_of(cell)
        if text not in self._found:
            self._found[text] = self._look_up(text)
        return self._found[text]

    def between(self, start: Cell, end: Cell) -> str | None:
        """Return the member between two joints of theirs, or None."""
        ends = frozenset((self.joint(start) or "", self.joint(end) or ""))
        return self._members.get(ends)

    def reaction(self, cell: Cell) -> tuple[str, str] | None:
        """Return joint and direction of a reaction written as ``L0.x``, or None."""
        joint, point, direction = text_of(cell).rpartition(".")
        found = self.joint(joint) if point else None
        if found is None:
            return None
        direction = direction.strip().lower()
        return (found, direction) if direction in ("x", "y") or f"{found}.{direction}" in self._links else None

    def _look_up(self, text: str) -> str | None:
        found = self._spelled.find(text)
        if found:
            self.map_used |= found in self._member_of_theirs.values()
            return found
        plain = _plain(text)
        if len(plain) > LONGEST_MEMBER:
            return None
        candidates = {name for start, end in _ends(plain) if (name := self.between(start, end))}
        # 12 is a member's number, not the member 1-2
        if not candidates and not self._joint_of_theirs and not plain.isdigit():
            candidates = self._run_together.get(plain.casefold(), set())
        return candidates.pop() if len(candidates) == 1 else None

    def fault(self, what: str, cell: Cell, told: int) -> str:
        """Return what to say about a member or joint that is not found."""
        text = text_of(cell)
        if not text:
            return f"the name of the {what} is missing"
        known = self.known if what == "member" else list(dict.fromkeys(e for n in self.known for e in n.split("-")))
        if self._joint_of_theirs or self._member_of_theirs:
            known = [*known, *self._member_of_theirs, *self._joint_of_theirs]
        near = did_you_mean(text, known, told=told)
        if not near and _DATE.fullmatch(text):
            near = "; a spreadsheet may have turned the name into a date"
        if not near:
            near = "; give a name map (names), or state the name as another structure's (others)"
        return f"there is no {what} {text[:40]!r}{near}"


class _Finder:
    """Finds a name by its plain spelling, and regardless of capitals where that leaves one."""

    def __init__(self, own: Iterable[tuple[str, str]], theirs: Mapping[str, str]) -> None:
        self._exact: dict[str, set[str]] = {}
        self._folded: dict[str, set[str]] = {}
        for spelling, name in [*own, *theirs.items()]:
            self._exact.setdefault(_plain(spelling), set()).add(name)
            self._folded.setdefault(_plain(spelling).casefold(), set()).add(name)

    def find(self, text: str) -> str | None:
        plain = _plain(text)
        names = self._exact.get(plain) or self._folded.get(plain.casefold(), set())
        return next(iter(names)) if len(names) == 1 else None


def text_of(cell: Cell) -> str:
    """Return a cell as the text of a name: a member number 7 may have been handed over as 7.0."""
    if isinstance(cell, Amount):
        return str(cell.value) if cell.value.denominator == 1 else f"{float(cell.value):g}"
    return cell


def _plain(text: str) -> str:
    return _BLANKS.sub(" ", text.translate(TYPOGRAPHY)).strip().replace("->", "-")


def _both_orders(name: str) -> tuple[str, str]:
    start, _, end = name.partition("-")
    return name, f"{end}-{start}"


def _ends(plain: str) -> Iterator[tuple[str, str]]:
    """Return every way to read a text as two ends; joint names may hold blanks, so each blank is tried."""
    for separator in SEPARATORS:
        parts = separator.split(plain)
        if len(parts) == ENDS:
            yield parts[0], parts[1]
    words = plain.split(" ")
    for place in range(1, len(words)):
        yield " ".join(words[:place]), " ".join(words[place:])


def _run_together(names: Iterable[str]) -> dict[str, set[str]]:
    """Return members by their ends without anything between, as in U2L3."""
    found: dict[str, set[str]] = {}
    for name in names:
        for spelling in _both_orders(name):
            found.setdefault(_plain(spelling.replace("-", "")).casefold(), set()).add(name)
    return found


# --- a map from a file ------------------------------------------------------------------------------------


def name_map(names: Names | None, truss: Truss) -> dict[str, str] | None:
    """Return our joint or member name to theirs, from a mapping as ``[project.names]``, or a table of two columns."""
    if names is None or isinstance(names, Mapping):
        return None if names is None else dict(names)
    return _two_columns(names, truss)


def _two_columns(given: str | os.PathLike[str], truss: Truss) -> dict[str, str]:
    """Return our name to theirs from a table of two columns, in either order."""
    source = opened(given if isinstance(given, str) and "\n" in given else Path(given))
    joints = {joint.name for joint in truss.joints}
    members = {frozenset((m.start, m.end)) for m in truss.members}

    def is_ours(text: str) -> bool:
        return text in joints or frozenset(text.split("-")) in members

    problems: list[str] = []
    for delimiter in DELIMITERS:
        rows = [(row.number, [text_of(cell) for cell in row.cells]) for row in split(source, delimiter)]
        pairs = [(number, cells[0], cells[1]) for number, cells in rows if len(cells) >= ENDS and not any(cells[ENDS:])]
        if not pairs or len(pairs) < len(rows):
            continue
        first, turned = _side(pairs, is_ours)
        if turned is None:
            continue
        found: dict[str, str] = {}
        for number, left, right in pairs[first:]:
            name, theirs = (right, left) if turned else (left, right)
            if not is_ours(name):
                problems.append(f"row {number}: {name[:40]!r} is no joint or member of the truss")
            elif found.setdefault(name, theirs) != theirs:
                problems.append(f"row {number}: {name} is given two names, {found[name]!r} and {theirs!r}; keep one")
        if problems:
            raise FileFormatError(problems, source=source.name)
        return found
    message = "two columns are needed, our joint or member and its name in their table; none of them holds our names"
    raise FileFormatError(message, source=source.name)


def _side(pairs: list[tuple[int, str, str]], is_ours: Callable[[str], bool]) -> tuple[int, bool | None]:
    """Return where names begin and whether ours stand on the right: as the head says, else where our names are."""
    _, left, right = pairs[0]
    for turned, ours, theirs in ((False, left, right), (True, right, left)):
        if ours.casefold() in OURS or theirs.casefold() in THEIRS:
            return 1, turned
    lefts, rights = sum(is_ours(pair[1]) for pair in pairs), sum(is_ours(pair[2]) for pair in pairs)
    if not lefts and not rights:
        return 0, None
    turned = rights > lefts
    return (0 if is_ours(right if turned else left) else 1), turned
