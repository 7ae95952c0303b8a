"""Rows of a submitted table, each value found with its member, reaction or joint; nothing is a number yet.

Every row below a head is read or told: a comment, a row of totals and a row of another structure are noted, anything
else that is not understood is a problem.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass
from typing import Final, Literal

from trusscalc.submitted.blocks import Block, numbered
from trusscalc.submitted.heads import DISPLACEMENTS, REACTIONS, Head, Unit
from trusscalc.submitted.names import NameMatch, text_of
from trusscalc.submitted.numbers import Amount, Letter, Printed, sense_of, taken_apart
from trusscalc.submitted.tables import Cell, Row

Kind = Literal["force", "reaction", "displacement"]

OF_BARS: Final = ("member", "start", "end", "force", "sense", "case")
OF_JOINTS: Final = ("joint", *REACTIONS, *DISPLACEMENTS, "case")
MOST_COLUMNS: Final = 8
TOTALS: Final = re.compile(
    r"(grand )?(totals?|sums?|max(imum)?|min(imum)?|average|mean|extremes?)\b.{0,20}", re.IGNORECASE
)
"""Rows that sum up a column."""


@dataclass(frozen=True, slots=True)
class Raw:
    """A value as printed, and what it is of.

    Attributes
    ----------
    kind : str
        ``force``, ``reaction`` or ``displacement``.
    name : str
        Our member or joint.
    axis : str
        Of a reaction or a displacement; '' for a member.
    case : str
        Their case, ''.
    printed : Printed or Amount
        The number.
    letter : str
        T, C or ''.
    unit : (str, Fraction) or None
        What the head states.
    row : int
        Where it stands.
    title : str
        Its column, for messages.
    theirs : str
        What they call the member or joint.
    """

    kind: Kind
    name: str
    axis: str
    case: str
    printed: Printed | Amount
    letter: Letter
    unit: Unit | None
    row: int
    title: str
    theirs: str

    @property
    def where(self) -> str:
        """Row and column, for messages."""
        return f"row {self.row}, {self.title}"

    @property
    def what(self) -> str:
        """Member, reaction or displacement, for messages."""
        return f"{self.name}.{self.axis}" if self.axis else self.name


class RowReader:
    """Reads blocks one after the other; ``found`` and ``problems`` grow.

    Parameters
    ----------
    names : NameMatch
        How their names are found in the truss.
    others : collection of str
        Names of other structures, lower case.
    """

    def __init__(self, names: NameMatch, others: Collection[str]) -> None:
        self.names = names
        self.others = others
        self.found: list[Raw] = []
        self.problems: list[str] = []
        self._skipped: dict[str, list[int]] = {}
        self._columns: list[str] = []
        self._passed_over: dict[str, str] = {}

    def read(self, blocks: Iterable[Block]) -> None:
        """Read all rows of some blocks."""
        for block in blocks:
            self._read(block)

    def _read(self, block: Block) -> None:
        bars = "member" in block.head.columns or "start" in block.head.columns
        joints = "joint" in block.head.columns
        used = {block.head.columns[role] for role in (OF_BARS if bars else OF_JOINTS) if role in block.head.columns}
        used |= set(block.head.cases)
        self._columns += [text for place, text in enumerate(block.head.texts) if text and place not in used]
        places = [block.head.columns[role] for role in ("member", "joint", "start") if role in block.head.columns]
        for row in block.rows:
            if reason := self._reason_to_skip(row, places):
                self._skipped.setdefault(reason, []).append(row.number)
            elif surplus := [cell for cell in row.cells[block.head.width :] if cell != ""]:
                self._surplus(row, surplus, block.head.width)
            elif bars:
                self._bar(row, block.head)
            elif joints:
                self._joint(row, block.head)

    def notes(self) -> list[str]:
        """Return which rows and cells were passed over, and why."""
        found = [f"{numbered(numbers)} {reason}" for reason, numbers in self._skipped.items()]
        if self._columns:
            shown = ", ".join(repr(text[:40]) for text in self._columns[:MOST_COLUMNS])
            more = f" and {len(self._columns) - MOST_COLUMNS} more" if len(self._columns) > MOST_COLUMNS else ""
            found.append(f"columns not read: {shown}{more}")
        return found

    def _reason_to_skip(self, row: Row, places: Sequence[int]) -> str:
        first = next(cell for cell in row.cells if cell != "")
        if isinstance(first, str) and first[0] in "#/" and first.startswith(("#", "//")):
            return "skipped: a comment"
        for place in places:
            name = text_of(row.cells[place]) if place < len(row.cells) else ""
            if name not in self._passed_over:
                self._passed_over[name] = self._why_passed_over(name)
            if self._passed_over[name]:
                return self._passed_over[name]
        return ""

    def _why_passed_over(self, name: str) -> str:
        if name.casefold() in self.others:
            return "left out: stated to belong to another structure"
        if TOTALS.fullmatch(name) and not self.names.member(name) and not self.names.joint(name):
            return "skipped: sums up others"
        return ""

    def _surplus(self, row: Row, surplus: list[Cell], width: int) -> None:
        told = f"row {row.number}: has {len(row.cells)} cells under a head of {width}, the surplus {surplus[0]!r:.40}"
        self.problems.append(f"{told}; does a comma inside a number part cells? Put such numbers in quotation marks")

    # --- members --------------------------------------------------------------------------------------------

    def _bar(self, row: Row, head: Head) -> None:
        found = self._bar_of(row, head)
        values = self._forces(row, head)
        if found is None:
            return
        kind, name, axis, theirs = found
        for place, case, printed in values:
            letter = self._letter(row, head, printed)
            if letter is None:
                continue
            if letter and kind == "reaction":
                self.problems.append(f"row {row.number}, {head.title(place)}: a reaction has no T or C")
                continue
            unit = head.units.get("force")
            self.found.append(Raw(kind, name, axis, case, printed, letter, unit, row.number, head.title(place), theirs))

    def _bar_of(self, row: Row, head: Head) -> tuple[Kind, str, str, str] | None:
        """Return what a row is of: kind, our name, direction of a reaction, their name."""
        by_ends, theirs, place = None, "", head.columns.get("member", head.columns.get("start", 0))
        if "start" in head.columns and "end" in head.columns:
            start, end = (_at(row, head.columns[role]) for role in ("start", "end"))
            by_ends, theirs = self.names.between(start, end), f"{text_of(start)}-{text_of(end)}"
            if by_ends is None:
                self._unknown("member", theirs if theirs != "-" else "", row, head.title(place))
                return None
        if "member" in head.columns:
            cell = _at(row, head.columns["member"])
            named = self.names.member(cell)
            if by_ends and named and named != by_ends:
                told = f"{text_of(cell)[:40]!r} is {named}, but the joints are those of {by_ends}"
                self.problems.append(f"row {row.number}, {head.title(place)}: {told}")
                return None
            theirs = text_of(cell)
            if by_ends is None and named is None:
                reaction = self.names.reaction(cell)
                if reaction:
                    return "reaction", *reaction, theirs
                self._unknown("member", theirs, row, head.title(place))
                return None
            by_ends = by_ends or named
        return ("force", by_ends, "", theirs) if by_ends else None

    def _forces(self, row: Row, head: Head) -> list[tuple[int, str, Printed | Amount]]:
        """Return place, case and number of every force in a row."""
        if head.cases:
            columns = list(head.cases.items())
        else:
            case = ""
            if "case" in head.columns:
                case = text_of(_at(row, head.columns["case"]))
                if not case:
                    title = head.title(head.columns["case"])
                    self.problems.append(f"row {row.number}, {title}: the case is missing; state it in every row")
            columns = [(head.columns["force"], case)]
        values = []
        for place, case in columns:
            printed = self._number(row, place, head, "the force is missing")
            if printed is not None:
                values.append((place, case, printed))
        return values

    def _letter(self, row: Row, head: Head, printed: Printed | Amount) -> Letter | None:
        """Return T, C or '' of a row; None after telling what is wrong."""
        beside: Letter = printed.letter if isinstance(printed, Printed) else ""
        if "sense" not in head.columns:
            return beside
        cell = _at(row, head.columns["sense"])
        letter = sense_of(text_of(cell))
        where = f"row {row.number}, {head.title(head.columns['sense'])}"
        if letter is None:
            self.problems.append(f"{where}: {text_of(cell)[:40]!r} is neither T nor C")
            return None
        if letter and beside and letter != beside:
            self.problems.append(f"{where}: says {letter}, but beside the number stands {beside}")
            return None
        return letter or beside

    # --- joints ---------------------------------------------------------------------------------------------

    def _joint(self, row: Row, head: Head) -> None:
        cell = _at(row, head.columns["joint"])
        joint = self.names.joint(cell)
        if joint is None:
            self._unknown("joint", text_of(cell), row, head.title(head.columns["joint"]))
            return
        case = text_of(_at(row, head.columns["case"])) if "case" in head.columns else ""
        for role in (*REACTIONS, *DISPLACEMENTS):
            if role not in head.columns:
                continue
            place = head.columns[role]
            if _at(row, place) == "":
                self._skipped.setdefault(f"gives no {role} (empty cell)", []).append(row.number)
                continue
            printed = self._number(row, place, head, "")
            if printed is not None:
                kind: Kind = "reaction" if role in REACTIONS else "displacement"
                axis, unit = role[-1], head.units.get(role)
                self.found.append(
                    Raw(kind, joint, axis, case, printed, "", unit, row.number, head.title(place), text_of(cell))
                )

    # --- cells ----------------------------------------------------------------------------------------------

    def _number(self, row: Row, place: int, head: Head, missing: str) -> Printed | Amount | None:
        cell = _at(row, place)
        if isinstance(cell, Amount):
            return cell
        printed = taken_apart(cell) if cell else missing
        if isinstance(printed, Printed):
            return printed
        told = f"{cell[:40]!r} {printed}" if cell else printed
        self.problems.append(f"row {row.number}, {head.title(place)}: {told}; a number such as -482.5 is expected")
        return None

    def _unknown(self, what: str, name: str, row: Row, title: str) -> None:
        self.problems.append(f"row {row.number}, {title}: {self.names.fault(what, name, len(self.problems))}")


def _at(row: Row, place: int) -> Cell:
    return row.cells[place] if place < len(row.cells) else ""
