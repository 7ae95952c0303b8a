"""The title block: what a filed calculation says about itself. All of it is optional, none of it is computed with."""

from __future__ import annotations

import datetime as dt
import unicodedata
from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from types import MappingProxyType
from typing import Final

from trusscalc.errors import InputError
from trusscalc.truss import did_you_mean

LONGEST_LINE: Final = 200
CHOICES: Final[dict[str, tuple[str, ...]]] = {
    "basis": ("service", "factored"),
    "self_weight": ("included", "not included"),
}
OVERRIDES: Final = frozenset("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069")
"""Characters that make a line read in another order than it is written."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Project:
    """The title block of a calculation.

    Attributes
    ----------
    project, location, contract, structure, calculation, revision : str
        What is calculated and under which numbers.
    date : str
        As written; a TOML date or a ``datetime.date`` becomes ISO text.
    prepared, checked, approved : str
        Persons.
    basis : str
        ``"service"``, ``"factored"`` or ``""`` (not stated).
    self_weight : str
        ``"included"``, ``"not included"`` or ``""`` (not stated).
    names : mapping of str to str
        Our joint or member name to its name on the drawings or in the other model.

    Raises
    ------
    InputError
        With every fault found in ``problems``.

    Examples
    --------
    >>> Project(project="Tannery Lane footbridge", basis="factored").basis
    'factored'
    """

    project: str = ""
    location: str = ""
    contract: str = ""
    structure: str = ""
    calculation: str = ""
    revision: str = ""
    date: str = ""
    prepared: str = ""
    checked: str = ""
    approved: str = ""
    basis: str = ""
    self_weight: str = ""
    names: Mapping[str, str] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if isinstance(self.date, dt.date):
            object.__setattr__(self, "date", self.date.isoformat())
        problems = [
            f"[project] {key}: {fault}" for key in LINES if (fault := _line_fault(key, getattr(self, key))) is not None
        ]
        if isinstance(self.names, Mapping):
            object.__setattr__(self, "names", MappingProxyType(dict(self.names)))
            problems += [
                f"[project.names] {name}: {fault}"
                for name, other in self.names.items()
                if (fault := line_fault(other)) is not None
            ]
        else:
            problems.append('[project] names: a table is needed, such as [project.names] with U1 = "N12"')
        if problems:
            raise InputError(problems)


LINES: Final = tuple(entry.name for entry in fields(Project) if entry.name != "names")
"""The fields of one line of text each, in the order of the title block."""


def _line_fault(key: str, value: object) -> str | None:
    fault = line_fault(value)
    if fault is None and value and key in CHOICES and value not in CHOICES[key]:
        allowed = " or ".join(f'"{choice}"' for choice in CHOICES[key])
        return f"{str(value)[:40]!r} is not a choice; write {allowed}{did_you_mean(str(value), CHOICES[key])}"
    return fault


def line_fault(value: object) -> str | None:
    """Return what is wrong with a value as one line of text, or None."""
    if not isinstance(value, str):
        shown = str(value) if isinstance(value, (int, float)) else "..."
        return f'text is needed, in quotes, such as "{shown[:20]}"'
    if len(value) > LONGEST_LINE:
        return f"longer than {LONGEST_LINE} characters; shorten it"
    for character in value:
        if unicodedata.category(character) in ("Cc", "Cs", "Cn", "Co", "Zl", "Zp") or character in OVERRIDES:
            return f"the character U+{ord(character):04X} does not belong in a line of text; remove it"
    return None


def title_fault(name: str) -> str | None:
    """Return what is wrong with the name of a case or a combination, or None."""
    return line_fault(name) if name.strip() else "a name is needed"
