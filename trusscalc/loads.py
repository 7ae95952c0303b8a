"""Loads at joints: a case, and combinations of cases."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass

from trusscalc.errors import InexactNumberError, InputError, UnknownNameError
from trusscalc.exact import ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.truss import Truss, did_you_mean, symbol_values

PLANE = 2


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
            read = list(_summed(loads))
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
    factors : tuple of (str, Exact)
        Case name and factor.
    """

    name: str
    factors: tuple[tuple[str, Exact], ...]

    def __init__(self, name: str, factors: Mapping[str, object] | Iterable[tuple[str, object]]) -> None:
        """State a combination.

        Parameters
        ----------
        name : str
            What it is called.
        factors : mapping of case name to factor, or pairs of them
            Factors; numbers as in ``Truss``.

        Raises
        ------
        InputError
            With every fault found in ``problems``.

        Examples
        --------
        >>> Combination("1.2D+1.6L", {"dead": 1.2, "live": "8/5"}).factors
        (('dead', Exact('6/5')), ('live', Exact('8/5')))
        """
        problems = []
        read = []
        for case, factor in factors.items() if isinstance(factors, Mapping) else factors:
            try:
                read.append((case, number(factor)))
            except InexactNumberError as problem:
                problems.append(f"[combinations.{name}] {case}: {problem}")
        if problems:
            raise InputError(problems)
        object.__setattr__(self, "name", name)
        object.__setattr__(self, "factors", tuple(read))


def combine(combination: Combination, cases: Collection[LoadCase]) -> LoadCase:
    """Return the combination as one load case, joint by joint, exactly.

    Raises
    ------
    UnknownNameError
        When the combination names a case that is not there.
    InputError
        When two cases give one symbol different values.
    """
    by_name = {case.name: case for case in cases}
    totals: dict[str, tuple[Exact, Exact]] = {}
    symbols: dict[str, Exact] = {}
    for name, factor in combination.factors:
        if name not in by_name:
            message = f"combination {combination.name!r}: there is no case {name!r}{did_you_mean(name, by_name)}"
            raise UnknownNameError(message, name=name)
        for symbol, value in by_name[name].symbols:
            if symbols.setdefault(symbol, value) != value:
                message = (
                    f"combination {combination.name!r}: its cases give {symbol!r} different values; use two symbols"
                )
                raise InputError(message)
        for load in by_name[name].loads:
            fx, fy = totals.get(load.joint, (ZERO, ZERO))
            totals[load.joint] = (fx + factor * load.fx, fy + factor * load.fy)
    loads = [JointLoad(joint, fx, fy) for joint, (fx, fy) in totals.items()]
    return LoadCase(combination.name, loads, symbols=list(symbols.items()))


def _summed(loads: Iterable[JointLoad]) -> list[JointLoad]:
    """Return one load for each joint: several on one joint are added."""
    totals: dict[str, JointLoad] = {}
    for load in loads:
        before = totals.get(load.joint)
        totals[load.joint] = JointLoad(load.joint, before.fx + load.fx, before.fy + load.fy) if before else load
    return list(totals.values())


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
    joints: dict[str, JointLoad] = {}
    for load in loads:
        before = joints.get(load.joint)
        joints[load.joint] = JointLoad(load.joint, before.fx + load.fx, before.fy + load.fy) if before else load
    return tuple(joints.values())
