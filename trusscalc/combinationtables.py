"""Published combinations over the cases an engineer has: each case assigned to a letter of a standard's table."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Final

from trusscalc.combinationsums import (
    Action,
    LeftOut,
    Part,
    PublishedSum,
    actions_of,
    own_names,
    sums_of_actions,
    sums_of_loads,
)
from trusscalc.errors import InexactNumberError, InputError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.loads import OPTIONAL, Combination, factor_text, twice
from trusscalc.publishedcombinations import MEMORY, TABLES, PublishedTable
from trusscalc.truss import did_you_mean

__all__ = ["TABLES", "PublishedChoice", "PublishedTable", "choice_of", "combinations_of", "stated"]

MOST_CASES: Final = 100
MOST_SUMS: Final = 1_000
"""Of one table; an engineer can use neither more cases nor more combinations."""
WHERE: Final = "[published_combinations]"
_EXAMPLES: Final = {
    "cases": '{ D = "dead", W = ["wind left", "wind right"] }',
    "psi0": '{ snow = "0.5" }',
    "categories": '{ snow = "snow above 1000 m" }',
    "own": '{ gamma_Q = "1.6" }',
}
KEYS: Final = ("table", *_EXAMPLES)

_Stated = Mapping[str, Any]


@dataclass(frozen=True, slots=True, init=False)
class PublishedChoice:
    """A published table, and the cases assigned to its letters.

    Attributes
    ----------
    table : str
        Name of the table, a key of ``TABLES``.
    cases : tuple of (str, tuple of str)
        Letters of the table, and the load cases that stand for each.
    psi0 : tuple of (str, Exact)
        Variable cases and their psi0 as the user states it.
    categories : tuple of (str, str)
        Variable cases and their category in the standard's table of psi0.
    own : tuple of (str, Exact)
        The user's factors in place of the table's: by name (``gamma_Q``), or by row and letter (``3a L``).
    """

    table: str
    cases: tuple[tuple[str, tuple[str, ...]], ...]
    psi0: tuple[tuple[str, Exact], ...]
    categories: tuple[tuple[str, str], ...]
    own: tuple[tuple[str, Exact], ...]

    def __init__(
        self,
        table: str,
        cases: Mapping[str, str | Sequence[str]],
        *,
        psi0: Mapping[str, object] | None = None,
        categories: Mapping[str, str] | None = None,
        own: Mapping[str, object] | None = None,
        where: str = WHERE,
    ) -> None:
        """Choose a table and assign cases to its letters.

        Parameters
        ----------
        table : str
            A key of ``TABLES``.
        cases : mapping of letter to case name, or to a list of them
            The letters of the table; in EN 1990 a case of Q is an action of its own, while of the cases of Q1 (of
            Q2, ...) one acts at a time.
        psi0 : mapping of case name to number
            For variable actions of EN 1990.
        categories : mapping of case name to category
            For variable actions of EN 1990: the standard's psi0 where none is stated, and which cases belong to one
            action.
        own : mapping of parameter to number
            Factors in place of the table's.
        where : str
            What messages start with.

        Raises
        ------
        InputError
            With every fault found in ``problems``.
        """
        published = TABLES.get(table) if isinstance(table, str) else None
        if published is None:
            near = did_you_mean(table, TABLES) if isinstance(table, str) else ""
            message = f"{where} table: {str(table)[:60]!r} is not known{near or '; there are ' + ', '.join(TABLES)}"
            raise InputError(message)
        problems: list[str] = []
        letters = _letters(published, cases, where, problems)
        variable = [case for letter, names in letters.items() for case in names if letter != "G"]
        for key, entries in (("psi0", psi0), ("categories", categories)):
            if entries and not published.categories:
                problems.append(f"{where} {key}: has no place in {published.name}; remove it")
            problems += [
                f"{where} {key} {case}: is no variable case here{did_you_mean(case, variable)}"
                for case in (entries or {})
                if case not in variable and published.categories
            ]
        stated_psi0 = _numbers(psi0 or {}, f"{where} psi0", problems)
        problems += [
            f"{where} psi0 {case}: {factor_text(value)} is more than 1, which no psi0 is"
            for case, value in stated_psi0.items()
            if value > ONE
        ]
        object.__setattr__(self, "table", table)
        object.__setattr__(self, "cases", tuple(letters.items()))
        object.__setattr__(self, "psi0", tuple(stated_psi0.items()))
        object.__setattr__(self, "categories", tuple(_known_categories(published, categories or {}, where, problems)))
        object.__setattr__(self, "own", tuple(_own(published, own or {}, where, problems).items()))
        problems += [] if problems else [f"{where} {fault}" for fault in self._faults_of_sums()]
        if problems:
            raise InputError(problems)

    @property
    def published(self) -> PublishedTable:
        """The table itself, with edition, rows, marks and notes."""
        return TABLES[self.table]

    def faults(self, case_names: Iterable[str], where: str = WHERE) -> list[str]:
        """Return which assigned cases are not there."""
        known = list(case_names)
        missing = [case for _, names in self.cases for case in names if case not in known]
        return [
            f"{where} cases {case!r}: there is no such case{did_you_mean(case, known, told=told)}"
            for told, case in enumerate(missing)
        ]

    def combinations(self, case_names: Iterable[str]) -> tuple[Combination, ...]:
        """Return the combinations over these cases, in the order of the table.

        Parameters
        ----------
        case_names : iterable of str
            The cases there are.

        Raises
        ------
        InputError
            When an assigned case is not among them.
        """
        if faults := self.faults(case_names):
            raise InputError(faults)
        return self.expanded()

    def expanded(self) -> tuple[Combination, ...]:
        """Return the combinations, whatever cases there are."""
        found: dict[frozenset[tuple[str, tuple[Exact, ...]]], Combination] = {}
        for each in self._sums()[0]:
            for chosen in itertools.product(*each.variable):
                parts = [part for alternative in chosen for part in alternative]
                combination = _combination(self.published, each, parts)
                if combination.factors:
                    found.setdefault(frozenset(combination.factors), combination)
        return tuple(found.values())

    def left_out(self) -> tuple[LeftOut, ...]:
        """Return the rows of the table that say nothing more for these cases, each with the reason."""
        return tuple(self._sums()[1])

    def _sums(self) -> tuple[list[PublishedSum], list[LeftOut]]:
        if not self.published.factors:
            return sums_of_loads(self.published, dict(self.cases), dict(self.own))
        return sums_of_actions(self.published, dict(self.cases), self._actions(), self._psi0(), dict(self.own))

    def _actions(self) -> list[Action]:
        return actions_of(self.published, dict(self.cases), dict(self.categories))

    def _psi0(self) -> dict[str, tuple[Exact, str]]:
        """Return psi0 of each case that has one, and where it is from."""
        table = {category.name: category.psi0 for category in self.published.categories}
        found = {
            case: (table[name], f"psi0 of {case} {factor_text(table[name])}, Table A1.1, {name} ({MEMORY})")
            for case, name in self.categories
        }
        stated_ones = {
            case: (value, f"psi0 of {case} {factor_text(value)}, the user's own") for case, value in self.psi0
        }
        return found | stated_ones

    def _faults_of_sums(self) -> list[str]:
        """Return which psi0 are missing, or that there are too many sums to be of use."""
        if self.published.factors:
            actions, known = self._actions(), self._psi0()
            accompany = len(actions) > 1 or any(row.reduces_leading for row in self.published.rows)
            variable = [case for action in actions for alternative in action for case in alternative]
            if accompany and (missing := [case for case in variable if case not in known]):
                names = ", ".join(category.name for category in self.published.categories)
                remedy = f"state it, or under 'categories' one of {names}"
                return [f"psi0 {case}: is needed; {remedy}" for case in missing]
        sums = self._sums()[0]
        count = sum(math.prod(map(len, each.variable)) for each in sums)
        if count > MOST_SUMS:
            return [f"cases: these give {count:,} combinations, and at most {MOST_SUMS:,} are written; assign fewer"]
        acting = (
            part for each in sums for group in ((each.permanent,), *each.variable) for parts in group for part in parts
        )
        return [] if any(any(part.factors) for part in acting) else ["own: leaves no factor other than 0"]


def combinations_of(
    table: str,
    cases: Mapping[str, str | Sequence[str]],
    *,
    psi0: Mapping[str, object] | None = None,
    categories: Mapping[str, str] | None = None,
    own: Mapping[str, object] | None = None,
) -> tuple[Combination, ...]:
    """Return the combinations of a published table over the cases assigned to its letters.

    Parameters and errors are those of ``PublishedChoice``.

    Examples
    --------
    >>> for each in combinations_of("ASCE/SEI 7-22 strength", {"D": "dead", "L": "live", "S": "snow"}):
    ...     print(each.name)
    1a: 1.4 dead
    2a: 1.2 dead + 1.6 live + 0.3 snow
    3a: 1.2 dead + 1.0 snow + 1.0 live
    >>> cases = {"G": ["dead"], "Q": ["snow", "wind"]}
    >>> for each in combinations_of("EN 1990:2002 6.10 set B", cases, psi0={"snow": "0.5", "wind": "0.6"}):
    ...     print(each.name)
    6.10: 1.35/1.0 dead + 1.5 snow + 0.9 wind
    6.10: 1.35/1.0 dead + 1.5 wind + 0.75 snow
    """
    return PublishedChoice(table, cases, psi0=psi0, categories=categories, own=own).expanded()


# --- in a file --------------------------------------------------------------------------------------------


def choice_of(table: Mapping[str, Any], where: str, problems: list[str]) -> PublishedChoice | None:
    """Return the choice that a table of a file states; what is wrong is added to the problems.

    Parameters
    ----------
    table : mapping
        The keys ``table`` and ``cases``, and for some tables ``psi0``, ``categories``, ``own``.
    where : str
        What messages start with, such as ``[published_combinations]``.
    problems : list of str
        Where faults are added; None is returned then.
    """
    faults = [f"{where} {key}: unknown key{did_you_mean(key, KEYS)}" for key in table if key not in KEYS]
    if "table" not in table:
        faults.append(f"{where} table: is missing; name one of {', '.join(TABLES)}")
    faults += [
        f"{where} {key}: a table is needed, such as {key} = {example}"
        for key, example in _EXAMPLES.items()
        if not isinstance(table.get(key, {}), Mapping)
    ]
    choice = None
    if not faults:
        try:
            choice = PublishedChoice(
                table["table"],
                table.get("cases", {}),
                psi0=table.get("psi0"),
                categories=table.get("categories"),
                own=table.get("own"),
                where=where,
            )
        except InputError as fault:
            faults += fault.problems
    problems += faults
    return choice


def stated(choice: PublishedChoice) -> dict[str, Any]:
    """Return the table of a file from which ``choice_of`` reads an equal choice."""
    cases = {letter: names[0] if len(names) == 1 else list(names) for letter, names in choice.cases}
    entries = {"psi0": dict(choice.psi0), "categories": dict(choice.categories), "own": dict(choice.own)}
    return {"table": choice.table, "cases": cases, **{key: value for key, value in entries.items() if value}}


# --- what is wrong ----------------------------------------------------------------------------------------


def _letters(table: PublishedTable, cases: _Stated, where: str, problems: list[str]) -> dict[str, tuple[str, ...]]:
    """Return the letters that have cases, in the table's order."""
    symbols = [letter.symbol for letter in table.letters]
    found: dict[str, tuple[str, ...]] = {}
    for letter, names in cases.items():
        listed = (names,) if isinstance(names, str) else names
        if letter not in symbols:
            near = did_you_mean(letter, symbols) or f"; its letters are {', '.join(symbols)}"
            problems.append(f"{where} cases {letter}: is no letter of {table.name}{near}")
        elif not isinstance(listed, (list, tuple)) or not all(isinstance(name, str) and name for name in listed):
            problems.append(f'{where} cases {letter}: a case is needed, or a list of them such as ["wind left"]')
        elif listed:
            found[letter] = tuple(listed)
    everyone = [case for names in found.values() for case in names]
    problems += [f"{where} cases {case!r}: is assigned twice; a case acts under one letter" for case in twice(everyone)]
    if OPTIONAL in everyone:
        problems.append(f"{where} cases {OPTIONAL!r}: no case of a combination may be called so; rename it")
    if len(everyone) > MOST_CASES:
        problems.append(f"{where} cases: {len(everyone):,} are assigned, and at most {MOST_CASES} can be")
    if not everyone and not problems:
        problems.append(f"{where} cases: none is assigned; write cases = {_EXAMPLES['cases']}")
    return {letter: found[letter] for letter in symbols if letter in found}


def _numbers(entries: _Stated, where: str, problems: list[str]) -> dict[str, Exact]:
    """Return numbers of 0 or more."""
    found = {}
    for name, value in entries.items():
        try:
            found[name] = number(value)
        except InexactNumberError as problem:
            problems.append(f"{where} {name}: {problem}")
            continue
        if found[name] < ZERO:
            problems.append(f"{where} {name}: {factor_text(found[name])} is less than 0; state a factor of 0 or more")
    return found


def _known_categories(
    table: PublishedTable, entries: _Stated, where: str, problems: list[str]
) -> list[tuple[str, str]]:
    names = [category.name for category in table.categories]
    problems += [
        f"{where} categories {case}: {str(name)[:40]!r} is no category{_near(name, names)}"
        for case, name in entries.items()
        if names and name not in names
    ]
    return [(case, name) for case, name in entries.items() if name in names]


def _own(table: PublishedTable, entries: _Stated, where: str, problems: list[str]) -> dict[str, Exact]:
    names = own_names(table)
    problems += [
        f"{where} own {name}: is no factor of {table.name}{_near(name, names)}" for name in entries if name not in names
    ]
    read = _numbers({name: value for name, value in entries.items() if name in names}, f"{where} own", problems)
    if read.get("xi", ZERO) > ONE:
        problems.append(f"{where} own xi: {factor_text(read['xi'])} is more than 1, and xi reduces")
    return read


def _near(name: object, names: Sequence[str]) -> str:
    return (did_you_mean(name, names) if isinstance(name, str) else "") or f"; there are {', '.join(names)}"


# --- as combinations --------------------------------------------------------------------------------------


def _combination(table: PublishedTable, each: PublishedSum, variable: Sequence[Part]) -> Combination:
    """Return a combination with its name and its source; a factor of 0 is told of there, and its case left out."""
    row, everything = each.row, [*each.permanent, *variable]
    parts = [part for part in everything if any(part.factors)]
    written = ""
    for part in parts:
        minus = part.factors[0] < ZERO
        sign = (" - " if minus else " + ") if written else ("-" if minus else "")
        written += f"{sign}{'/'.join(_shown(abs(factor)) for factor in part.factors)} {part.case}"
    remarks = dict.fromkeys(remark for part in everything for remark in part.remarks)
    return Combination(
        f"{row.number}: {written}",
        [(part.case, part.factors) for part in parts],
        optional=[part.case for part in variable if part in parts],
        source="; ".join([f"{table.name}, {row.clause}, {row.number}: {row.expression} ({row.mark})", *remarks]),
    )


def _shown(factor: Exact) -> str:
    text = factor_text(factor)
    return f"{text}.0" if text.isdigit() else text
