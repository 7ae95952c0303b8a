"""Loads at joints: a case, and combinations of cases."""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any, Final

from trusscalc.decimals import rounded
from trusscalc.errors import InexactNumberError, InputError, UnknownNameError
from trusscalc.exact import Exact
from trusscalc.exacttext import number, to_text
from trusscalc.truss import Truss, did_you_mean, symbol_values

PLANE: Final = 2
PAIR: Final = 2
MOST_PLACES: Final = 6
"""Of a factor's decimal; a longer one is written as a fraction."""
OPTIONAL: Final = "optional"
"""The key of a combination that lists cases instead of giving a factor; so no case may be called that there."""


@dataclass(frozen=True, slots=True)
class JointLoad:
    """A force (fx, fy) on a joint, in the truss's unit of force, y upwards; may hold symbols."""

    joint: str
    fx: Exact
    fy: Exact


@dataclass(frozen=True, slots=True, init=False)
class LoadCase:
    """A named set of joint loads.

    Attributes
    ----------
    name : str
        What the case is called.
    loads : tuple of JointLoad
        One for each loaded joint, in the order stated; several loads on one joint are added.
    symbols : tuple of (str, Exact)
        Values of the symbols in the loads, for decimals and for the numeric route.
    """

    name: str
    loads: tuple[JointLoad, ...]
    symbols: tuple[tuple[str, Exact], ...]

    def __init__(
        self,
        name: str,
        loads: Mapping[str, Sequence[object]] | Iterable[JointLoad],
        *,
        symbols: Mapping[str, object] | Iterable[tuple[str, Exact]] = (),
    ) -> None:
        """State a load case.

        Parameters
        ----------
        name : str
            What the case is called.
        loads : mapping of joint name to (fx, fy)
            Forces; numbers as in ``Truss``, and text with the symbols given.
        symbols : mapping of name to value
            Symbols that may stand in the loads.

        Raises
        ------
        InputError
            With every fault found in ``problems``.

        Examples
        --------
        >>> snow = LoadCase("snow", {"C": (0, "-P")}, symbols={"P": 12})
        >>> snow.as_floats()
        {'C': (0.0, -12.0)}
        """
        problems: list[str] = []
        values = symbol_values(symbols, problems)
        if isinstance(loads, Mapping):
            read = [_joint_load(name, joint, pair, values, problems) for joint, pair in loads.items()]
        else:
            read = list(loads)
        if problems:
            raise InputError(problems)
        object.__setattr__(self, "name", name)
        object.__setattr__(self, "loads", _one_each(load for load in read if load is not None))
        object.__setattr__(self, "symbols", tuple(values.items()))

    def value(self, amount: Exact) -> Exact:
        """Return an amount with the case's symbols replaced by their values."""
        return amount.substitute(dict(self.symbols))

    def as_floats(self) -> dict[str, tuple[float, float]]:
        """Return the loads as plain floats for the numeric route."""
        return {load.joint: (float(self.value(load.fx)), float(self.value(load.fy))) for load in self.loads}

    def faults(self, truss: Truss) -> list[str]:
        """Return what does not fit the truss: loads on joints that are not there."""
        known = [joint.name for joint in truss.joints]
        places = set(known)
        missing = [load.joint for load in self.loads if load.joint not in places]
        return [
            f"[cases.{self.name}] {joint}: there is no such joint{did_you_mean(joint, known, told=told)}"
            for told, joint in enumerate(missing)
        ]


@dataclass(frozen=True, slots=True, init=False)
class Combination:
    """A named sum of factored cases.

    Attributes
    ----------
    name : str
        Such as ``1.2D+1.6L``.
    factors : tuple of (str, tuple of Exact)
        Case name, and its one factor or the two of a pair, of which each member takes the adverse one.
    optional : tuple of str
        Cases that are tried absent as well, because leaving them out may be adverse.
    source : str
        Edition and clause, with how well they are known; '' for the user's own.
    """

    name: str
    factors: tuple[tuple[str, tuple[Exact, ...]], ...]
    optional: tuple[str, ...]
    source: str

    def __init__(
        self,
        name: str,
        factors: Mapping[str, object] | Iterable[tuple[str, object]],
        *,
        optional: Iterable[str] = (),
        source: str = "",
    ) -> None:
        """State a combination.

        Parameters
        ----------
        name : str
            What it is called.
        factors : mapping of case name to factor, or pairs of them
            Factors; numbers as in ``Truss``, or a list or tuple of two of them for a pair.
        optional : iterable of str
            Cases among the factors that are tried absent as well.
        source : str
            Where a published combination is from.

        Raises
        ------
        InputError
            With every fault found in ``problems``.

        Examples
        --------
        >>> Combination("1.2D+1.6L", {"dead": 1.2, "live": "8/5"}).factors
        (('dead', (Exact('6/5'),)), ('live', (Exact('8/5'),)))
        >>> Combination("uplift", {"dead": ["1.25", "0.90"], "wind": 1.4}).factors[0]
        ('dead', (Exact('5/4'), Exact('9/10')))
        """
        stated = list(factors.items() if isinstance(factors, Mapping) else factors)
        problems: list[str] = []
        read = [(case, _factors(f"[combinations.{name}] {case}", factor, problems)) for case, factor in stated]
        cases = [case for case, _ in stated]
        problems += [f"[combinations.{name}] {case}: stated twice; add its factors up" for case in twice(cases)]
        if OPTIONAL in cases:
            problems.append(f"[combinations.{name}] {OPTIONAL}: lists cases tried absent as well; rename that case")
        absent = _optional_cases(f"[combinations.{name}] {OPTIONAL}", optional, cases, problems)
        if problems:
            raise InputError(problems)
        object.__setattr__(self, "name", name)
        object.__setattr__(self, "factors", tuple(read))
        object.__setattr__(self, "optional", absent)
        object.__setattr__(self, "source", source)


def _factors(where: str, stated: object, problems: list[str]) -> tuple[Exact, ...]:
    """Return the one factor or the two of a pair."""
    one = isinstance(stated, tuple) and len(stated) == 1  # as ``Combination.factors`` has it
    if isinstance(stated, (list, tuple)) and len(stated) != PAIR and not one:
        problems.append(f'{where}: one factor is needed, or a pair such as ["1.25", "0.90"]')
        return ()
    read = []
    for factor in stated if isinstance(stated, (list, tuple)) else (stated,):
        try:
            read.append(number(factor))
        except InexactNumberError as problem:
            problems.append(f"{where}: {problem}")
    return tuple(read)


def _optional_cases(where: str, stated: Any, cases: Sequence[str], problems: list[str]) -> tuple[str, ...]:
    listed = isinstance(stated, Iterable) and not isinstance(stated, (str, Mapping))
    names: list[Any] = list(stated) if listed else [None]
    if not all(isinstance(name, str) for name in names):
        problems.append(f'{where}: a list of case names is needed, such as ["live"]')
        return ()
    problems += [
        f"{where} {name!r}: is not among the factors of this combination{did_you_mean(name, cases)}"
        for name in names
        if name not in cases
    ]
    return tuple(dict.fromkeys(names))


def twice(names: Iterable[str]) -> list[str]:
    """Return the names that stand more than once."""
    return [name for name, times in Counter(names).items() if times > 1]


@lru_cache(maxsize=1000)
def factor_text(factor: Exact) -> str:
    """Return a factor as engineers write it: a decimal where one of few places is exact, else exact text.

    Examples
    --------
    >>> factor_text(number("0.90")), factor_text(number("1/3"))
    ('0.9', '1/3')
    """
    if factor.is_rational:
        for places in range(MOST_PLACES + 1):
            if number(decimal := rounded(factor, places)) == factor:
                return str(decimal)
    return to_text(factor)


def combine(combination: Combination, cases: Collection[LoadCase]) -> LoadCase:
    """Return the combination as one load case, joint by joint, exactly; optional cases as written.

    Raises
    ------
    UnknownNameError
        When the combination names a case that is not there.
    InputError
        When two cases give one symbol different values, or a case has a pair of factors: which of the two is
        adverse is another question for each member.
    """
    by_name = {case.name: case for case in cases}
    totals: list[JointLoad] = []
    symbols: dict[str, Exact] = {}
    for name, factors in combination.factors:
        if name not in by_name:
            message = f"combination {combination.name!r}: there is no case {name!r}{did_you_mean(name, by_name)}"
            raise UnknownNameError(message, name=name)
        if len(factors) > 1:
            raise InputError(_undecided_pair(combination.name, name, factors))
        for symbol, value in by_name[name].symbols:
            if symbols.setdefault(symbol, value) != value:
                message = (
                    f"combination {combination.name!r}: its cases give {symbol!r} different values; use two symbols"
                )
                raise InputError(message)
        totals += [JointLoad(load.joint, factors[0] * load.fx, factors[0] * load.fy) for load in by_name[name].loads]
    return LoadCase(combination.name, totals, symbols=list(symbols.items()))


def _undecided_pair(combination: str, case: str, pair: tuple[Exact, ...]) -> str:
    both = " or ".join(map(factor_text, pair))
    return (
        f"combination {combination!r}: {case!r} has the pair of factors {both}, and which one is adverse differs from "
        "member to member; name the factor in a combination of its own, or ask for the envelope"
    )


def _joint_load(
    case: str, joint: str, pair: object, symbols: Mapping[str, Exact], problems: list[str]
) -> JointLoad | None:
    where = f"[cases.{case}] {joint}"
    if isinstance(pair, str) or not isinstance(pair, Sequence) or len(pair) != PLANE:
        problems.append(f"{where}: two numbers are needed, such as [0, -120]")
        return None
    values = []
    for axis, value in zip("xy", pair, strict=True):
        try:
            amount = number(value, symbols)
            if amount.symbols:
                number(amount.substitute(symbols))  # its decimal has to exist too
            values.append(amount)
        except ZeroDivisionError:
            problems.append(f"{where} F{axis}: division by zero at the values under [symbols]")
        except InexactNumberError as problem:
            problems.append(f"{where} F{axis}: {problem}")
    return JointLoad(joint, values[0], values[1]) if len(values) == PLANE else None


def _one_each(loads: Iterable[JointLoad]) -> tuple[JointLoad, ...]:
    """Return one load for each joint: several on one joint are added."""
    joints: dict[str, JointLoad] = {}
    for load in loads:
        before = joints.get(load.joint)
        joints[load.joint] = JointLoad(load.joint, before.fx + load.fx, before.fy + load.fy) if before else load
    return tuple(joints.values())
