"""Blind comparison: our values are frozen, with a digest to write down, before the submitted ones are looked at.

A checker who knows the answer finds it. So ours are derived first and named by a digest of their own text; when the
submitted table is opened afterwards, the comparison holds the digest and says in which order things were done.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import Any, Literal

from trusscalc.compare import confronted, criterion_of
from trusscalc.comparison import ABSOLUTE, RELATIVE, Comparison, Criterion
from trusscalc.errors import InputError
from trusscalc.exacttext import to_text
from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck
from trusscalc.ourforces import OurForces, of_check, our_forces
from trusscalc.submitted import Submitted, read_submitted
from trusscalc.trussfile import TrussFile


@dataclass(frozen=True, slots=True)
class Frozen:
    """Our values as they were before anything submitted was read.

    Attributes
    ----------
    stated : TrussFile
        What is stated.
    ours : OurForces
        All values of the case.
    members : tuple of str
        Those that are compared.
    criterion : Criterion
        What will agree, frozen with them.
    text : str
        The values as a text that can be filed; the digest is made of it.
    """

    stated: TrussFile
    ours: OurForces
    members: tuple[str, ...]
    criterion: Criterion
    text: str

    @property
    def digest(self) -> str:
        """SHA-256 of the text."""
        return hashlib.sha256(self.text.encode()).hexdigest()


def frozen(
    stated: TrussFile | MemberCheck,
    case: str | LoadCase = "",
    members: Iterable[str] | Literal["all"] = "all",
    *,
    relative: object = RELATIVE,
    absolute: object = ABSOLUTE,
) -> Frozen:
    """Return our values of a case, frozen together with the criterion.

    Parameters
    ----------
    stated : TrussFile or MemberCheck
        What is stated, or a check that has been made: then its members are frozen as derived by hand.
    case : str or LoadCase
        The case or combination; of a check its own.
    members : iterable of str, or "all"
        What will be compared.
    relative, absolute : number
        As for ``compare_submitted``.

    Raises
    ------
    InputError
        When no case is named, or a member was not checked.
    """
    if isinstance(stated, MemberCheck):
        ours = of_check(stated)
        stated = TrussFile(stated.truss, (stated.case,))
    elif case:
        (ours,) = our_forces(stated.truss, [stated.case(case) if isinstance(case, str) else case])
    else:
        message = "name the case or combination whose values are to be frozen"
        raise InputError(message)
    names = _names(ours, members)
    criterion = criterion_of(relative, absolute)
    return Frozen(stated, ours, names, criterion, _text(ours, names, criterion))


def reveal(
    frozen_values: Frozen, submitted: object, *, theirs: str = "", written_down: str = "", **reading: Any
) -> Comparison:
    """Return the comparison of frozen values with submitted ones, which says in which order things were done.

    Parameters
    ----------
    frozen_values : Frozen
        Ours.
    submitted : path, table or Submitted
        What was submitted. A path or a table is read here, after ours were frozen; of a table that has been read
        before the comparison says that this order is not shown.
    theirs : str
        What the table calls the case.
    written_down : str
        The digest as it was written down when the values were frozen, by whoever did it.
    **reading
        Options of ``read_submitted``.

    Raises
    ------
    InputError
        When the frozen values do not fit their own text any more, or are not those of the digest written down; and as
        ``read_submitted`` and ``compare_submitted``.
    """
    ours, names, criterion = frozen_values.ours, frozen_values.members, frozen_values.criterion
    if frozen_values.text != _text(ours, names, criterion):
        message = "the frozen values are not those their digest was made of; freeze them again"
        raise InputError(message)
    noted = "".join(written_down.split()).casefold()
    if noted and noted != frozen_values.digest:
        message = (
            f"the digest written down, {noted[:64]!r}, is of other values: ours now have {frozen_values.digest}; was "
            "the truss file, the case, the members or the criterion another one?"
        )
        raise InputError(message)
    read_before = isinstance(submitted, Submitted)
    if isinstance(submitted, Submitted):
        table = submitted
        order = (
            "our values and the criterion were frozen, then compared with a table that had been read before: this "
            "record does not show which came first"
        )
    else:
        table = read_submitted(submitted, ours.truss, **reading)
        order = "our values and the criterion were frozen before the submitted table was opened"
    if noted:
        order += "; their digest had been written down before, and is the same"
    found = confronted(frozen_values.stated, ours, table, theirs=theirs, members=names, criterion=criterion)
    return replace(found, frozen=frozen_values.digest, order=order, read_before=read_before, written_down=bool(noted))


def _names(ours: OurForces, members: Iterable[str] | Literal["all"]) -> tuple[str, ...]:
    there = [member.name for member in ours.truss.members if member.name in ours.decimal]
    if members == "all":
        return tuple(there)
    wanted = [ours.truss.member(name).name for name in ([members] if isinstance(members, str) else members)]
    absent = [name for name in wanted if name not in there]
    if absent:
        raise InputError([f"member {name} was not checked; check it first" for name in absent])
    return tuple(name for name in there if name in wanted)


def _text(ours: OurForces, names: tuple[str, ...], criterion: Criterion) -> str:
    """Return the values as text: exact where statics decides, else nine digits of the stiffness route."""
    shares = f"relative {to_text(criterion.relative)} absolute {to_text(criterion.absolute)}"
    lines = [
        "values frozen before the submitted ones were read, format 1",
        f"structure {json.dumps(ours.truss.title)}",
        f"case {json.dumps(ours.case.name)}",
        f"unit {ours.truss.force}, tension positive",
        f"criterion {shares}",
    ]
    kinds = [("member", name) for name in names]
    kinds += [("reaction", name) for name, bar in ours.bars.items() if bar.is_link]
    for kind, name in kinds:
        value = f"exact {to_text(ours.exact[name])}" if name in ours.exact else "by stiffness"
        digits = 12 if name in ours.exact else 9
        lines.append(f"{kind} {json.dumps(name)} {value} decimal {ours.decimal[name]:.{digits}g}")
    lines += [f"our own routes disagree: {json.dumps(fault)}" for fault in ours.faults]
    return "\n".join(lines) + "\n"
