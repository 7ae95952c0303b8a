"""Statics of our own for the tests: the joint equations, and the replay of a derivation from its JSON.

Nothing of the library is used. Numbers are read from their texts into 60 digits; the forces come from Gaussian
elimination of all joint equations; a step is believed only when its own equations, worked out anew from the kept
joints, give the values it claims. A value in a carried unknown is a sum of multiples of the carried forces.
"""

from __future__ import annotations

import ast
import operator
from collections.abc import Callable, Iterable, Mapping
from typing import Any

import mpmath
from stated_truss import Stated

DIGITS = 60
mp = mpmath.mp.clone()
mp.dps = DIGITS
Number = Any
TINY = mp.mpf(10) ** -45
"""Relative size below which a number of 60 digits is zero."""
TINY_WHEN_ROUNDED = mp.mpf(10) ** -31
"""The same where angles are rounded on the way in, to some digits more than 30."""

Sum = dict[str, Number]
"""A value: its number under '', and what multiplies each carried unknown."""

_OPERATIONS: dict[type, Callable[..., Number]] = {
    ast.Add: operator.add,
    ast.Sub: operator.sub,
    ast.Mult: operator.mul,
    ast.Div: operator.truediv,
    ast.Pow: operator.pow,
    ast.USub: operator.neg,
    ast.UAdd: operator.pos,
}
_FUNCTIONS: dict[str, Callable[[Number], Number]] = {
    "sqrt": mp.sqrt,
    "sin": lambda angle: mp.sin(angle * mp.pi / 180),
    "cos": lambda angle: mp.cos(angle * mp.pi / 180),
    "tan": lambda angle: mp.tan(angle * mp.pi / 180),
}


def value(text: object, symbols: Mapping[str, object] | None = None) -> Number:
    """Return a number text (angles in degrees) to 60 digits."""
    symbols = symbols or {}

    def of(node: ast.AST) -> Number:
        match node:
            case ast.Expression(body):
                return of(body)
            case ast.Constant(int() | float()):
                return mp.mpf(ast.unparse(node))
            case ast.BinOp(left, op, right):
                return _OPERATIONS[type(op)](of(left), of(right))
            case ast.UnaryOp(op, operand):
                return _OPERATIONS[type(op)](of(operand))
            case ast.Call(ast.Name(function), [argument]):
                return _FUNCTIONS[function](of(argument))
            case ast.Name(name) if name in symbols:
                return value(symbols[name])
        message = f"no number: {text!r}"
        raise ValueError(message)

    return of(ast.parse(str(text).replace("^", "**"), mode="eval"))


def number_texts_are_plain(text: str) -> bool:
    """Return whether a promised exact text has no decimal point, no exponent and no float in disguise."""
    whole = [node.value for node in ast.walk(ast.parse(text, mode="eval")) if isinstance(node, ast.Constant)]
    return all(type(number) is int for number in whole)


class Bars:
    """Members and support links with their ends and unit directions; the ground is None."""

    def __init__(self, stated: Stated) -> None:
        self.places = {name: (value(x), value(y)) for name, (x, y) in stated.joints.items()}
        zero = mp.mpf(0)
        self.loads = {
            name: (value(x, stated.symbols), value(y, stated.symbols)) for name, (x, y) in stated.loads.items()
        }
        self.bars: dict[str, tuple[str, str | None, Number, Number]] = {}
        for member in stated.members:
            start, end = (part.strip() for part in member.split("-"))
            (ax, ay), (bx, by) = self.places[start], self.places[end]
            length = mp.hypot(bx - ax, by - ay)
            self.bars[member] = (start, end, (bx - ax) / length, (by - ay) / length)
        for joint, support in stated.supports.items():
            if support in ("pin", "roller"):
                if support == "pin":
                    self.bars[f"{joint}.x"] = (joint, None, mp.mpf(1), zero)
                self.bars[f"{joint}.y"] = (joint, None, zero, mp.mpf(1))
                continue
            several = isinstance(support, list)
            for count, link in enumerate(support if several else [support], 1):
                x, y = (value(part) for part in link["reaction"])
                size = mp.hypot(x, y)
                self.bars[f"{joint}.r{count}" if several else f"{joint}.r"] = (joint, None, x / size, y / size)

    def spelled(self, name: str) -> str:
        """Return a member's or reaction's name as stated, from either spelling (KeyError if there is none)."""
        return name if name in self.bars else "-".join(reversed(name.split("-")))

    def boundary(self, kept: set[str]) -> set[str]:
        """Return everything with exactly one end among the kept joints."""
        return {name for name, (start, end, _, _) in self.bars.items() if (start in kept) != (end in kept)}

    def coefficient(self, name: str, kept: set[str], equation: Mapping[str, Any]) -> Number:
        """Return what a unit pull of a cut bar puts into an equation of the kept body."""
        start, end, fx, fy = self.bars[name]
        joint = start
        if start not in kept:
            assert end is not None
            joint, fx, fy = end, -fx, -fy
        return self.effect(joint, fx, fy, equation)

    def effect(self, joint: str, fx: Number, fy: Number, equation: Mapping[str, Any]) -> Number:
        """Return what a force on a joint puts into an equation, moments anticlockwise positive."""
        if equation["sum"] == "moment":
            cx, cy = map(value, equation["centre"])
            x, y = self.places[joint]
            return (x - cx) * fy - (y - cy) * fx
        ux, uy = map(value, equation["direction"])
        return ux * fx + uy * fy


_BARS: dict[int, tuple[Stated, Bars]] = {}


def bars_of(stated: Stated) -> Bars:
    """Return a truss's bars, worked out once."""
    if id(stated) not in _BARS:
        _BARS[id(stated)] = (stated, Bars(stated))
    return _BARS[id(stated)][1]


def forces_of(stated: Stated) -> dict[str, Number]:
    """Return all member forces and reactions from the joint equations, by sparse Gaussian elimination.

    ValueError when they do not decide every force.
    """
    bars = bars_of(stated)
    rows: dict[tuple[str, int], dict[str, Number]] = {(joint, axis): {} for joint in bars.places for axis in (0, 1)}
    for (joint, axis), row in rows.items():
        if joint in bars.loads and bars.loads[joint][axis]:
            row[""] = -bars.loads[joint][axis]
    for name, (start, end, fx, fy) in bars.bars.items():
        for axis, part in ((0, fx), (1, fy)):
            if part:
                rows[start, axis][name] = part
                if end is not None:
                    rows[end, axis][name] = -part
    if len(rows) != len(bars.bars):
        message = "the count of bars and links is not twice that of the joints"
        raise ValueError(message)
    return {
        name: solved.get("", mp.mpf(0)) for name, solved in eliminated(list(rows.values()), list(bars.bars)).items()
    }


def eliminated(rows: list[Sum], unknowns: list[str]) -> dict[str, Sum]:
    """Solve sum of coefficient times unknown = rest of the row, the rest being '' and carried unknowns.

    The rest stands in the row under its own keys, already on the right side. ValueError when undecided.
    """
    rows = [dict(row) for row in rows]
    wanted = set(unknowns)
    scale = max((abs(entry) for row in rows for name, entry in row.items() if name in wanted), default=mp.mpf(1))
    order: list[tuple[str, Sum]] = []
    while len(order) < len(wanted):
        name, pivot = _next_pivot(rows, wanted - {each for each, _ in order})
        if pivot is None or abs(rows[pivot][name]) < TINY * scale:
            message = f"{name} is not decided"
            raise ValueError(message)
        head = rows.pop(pivot)
        factor = head.pop(name)
        head = {key: entry / factor for key, entry in head.items()}
        for row in rows:
            if name in row:
                _add(row, head, -row.pop(name))
                for key in [key for key in head if key in wanted and abs(row[key]) < TINY * TINY * scale]:
                    del row[key]
        order.append((name, head))
    found: dict[str, Sum] = {}
    for name, head in reversed(order):
        found[name] = {key: entry for key, entry in head.items() if key not in wanted}
        for key in wanted & set(head):
            _add(found[name], found[key], -head[key])
    return found


def _next_pivot(rows: list[Sum], waiting: set[str]) -> tuple[str, int | None]:
    """Return the unknown that stands in the fewest rows, which keeps the elimination sparse, and its best row."""
    holders: dict[str, list[int]] = {name: [] for name in sorted(waiting)}
    for place, row in enumerate(rows):
        for name in row:
            if name in holders:
                holders[name].append(place)
    name = min(holders, key=lambda each: len(holders[each]))
    return name, max(holders[name], key=lambda place: abs(rows[place][name]), default=None)


def _add(total: Sum, more: Sum, times: Number) -> None:
    for key, entry in more.items():
        total[key] = total.get(key, mp.mpf(0)) + times * entry


class ReplayError(AssertionError):
    """A derivation that does not stand on its own feet."""


class Replay:
    """A derivation worked out anew from its steps; ReplayError at the first fault.

    ``values`` are the forces found, ``rests_on`` the numbers of all steps each of them needs. What was found in terms
    of carried forces may be worked out again once those are closed.
    """

    def __init__(self, stated: Stated, steps: list[Mapping[str, Any]], tiny: Number = TINY) -> None:
        self.tiny = tiny
        self.bars = bars_of(stated)
        self.values: dict[str, Sum] = {}
        self.rests_on: dict[str, set[int]] = {}
        self.in_carried: set[str] = set()
        numbers = [step["number"] for step in steps]
        _claim(numbers == list(range(1, len(numbers) + 1)), f"steps are numbered {numbers}")
        for step in steps:
            self._step(step)
        left = {name for name, total in self.values.items() if _carried_in(total)}
        _claim(not left, f"left in terms of a carried force: {sorted(left)}")

    @property
    def forces(self) -> dict[str, Number]:
        """The plain numbers found."""
        return {name: total.get("", mp.mpf(0)) for name, total in self.values.items()}

    def _step(self, step: Mapping[str, Any]) -> None:
        where, closes = f"step {step['number']}", step["kind"] == "close"
        solves, uses, solves_in, carries = (
            self._group(step, key) for key in ("solves", "uses", "solves_in", "carries")
        )
        unknowns = solves + solves_in
        for name in carries:
            _claim(name not in self.values, f"{where}: {name} is carried though it is known")
            self.values[name] = {name: mp.mpf(1)}
            self.rests_on[name] = set()
        _claim(
            set(uses) <= set(self.values), f"{where}: uses {sorted(set(uses) - set(self.values))} before it is solved"
        )
        if closes:
            _claim(
                all(_carried_in(self.values.get(name, {})) == {name} for name in unknowns), f"{where}: closes nothing"
            )
        else:
            again = set(unknowns) & set(self.values)
            _claim(again <= self.in_carried, f"{where}: solves what is known")
        _claim(bool(unknowns), f"{where}: solves nothing")
        _claim(len(step["equations"]) == len(unknowns), f"{where}: {len(step['equations'])} equations for {unknowns}")
        rows, live = [], set()
        for equation in step["equations"]:
            row, here = self._equation(step, equation, unknowns)
            live |= here
            rows.append(row)
        named = set(uses) | (set() if closes else set(unknowns))
        _claim(named <= live, f"{where}: {sorted(named - live)} has no coefficient")
        try:
            found = eliminated(rows, unknowns)
        except ValueError as problem:
            message = f"{where}: {problem}"
            raise ReplayError(message) from problem
        needs = {step["number"]}.union(*(self.rests_on[name] for name in uses))
        if closes:
            self._close(found, needs)
        for name, total in found.items():
            _claim(bool(_carried_in(total)) == (name in solves_in), f"{where}: {name} belongs to the other list")
            before = self.values.get(name, total) if not closes else total
            _claim(_is_same(before, total), f"{where}: {name} comes out differently than before")
        self.in_carried |= set(solves_in)
        self.values |= found
        self.rests_on |= {name: set(needs) for name in found}

    def _close(self, found: Mapping[str, Sum], needs: set[int]) -> None:
        """Put the carried forces just found into everything that was left in terms of them."""
        for name, total in self.values.items():
            for carried in _carried_in(total) & set(found):
                _add(total, found[carried], total.pop(carried))
                self.rests_on[name] |= needs

    def _group(self, step: Mapping[str, Any], key: str) -> list[str]:
        names = [self.bars.spelled(name) for name in step.get(key, ())]
        _claim(all(name in self.bars.bars for name in names), f"step {step['number']}: unknown name in {key}")
        _claim(len(set(names)) == len(names), f"step {step['number']}: a name twice in {key}")
        return names

    def _equation(
        self, step: Mapping[str, Any], equation: Mapping[str, Any], unknowns: list[str]
    ) -> tuple[Sum, set[str]]:
        """Return the equation as a row (unknowns left, the rest right) and the bars with a coefficient in it."""
        where, bars = f"step {step['number']}", self.bars
        _claim(("kept" in step) != ("kept" in equation), f"{where}: one cut for the step, or one for each equation")
        _claim("kept" in equation or step["kind"] != "pair", f"{where}: a pair's equations have their own cuts")
        source = step if "kept" in step else equation
        kept, cut = set(source["kept"]), source["cut"]
        _claim(bool(kept) and kept <= set(bars.places), f"{where}: kept {sorted(kept)}")
        kinds = {1: "joint", len(bars.places): "whole"}
        _claim(step["kind"] in (kinds.get(len(kept), "section"), "pair", "close"), f"{where}: is a {step['kind']}")
        boundary = bars.boundary(kept)
        _claim({bars.spelled(name) for name in cut} == boundary, f"{where}: cut is not the boundary of kept")
        _claim(len(set(cut)) == len(cut), f"{where}: a bar is cut twice")
        coefficients = {name: bars.coefficient(name, kept, equation) for name in boundary}
        scale = max(abs(each) for each in coefficients.values())
        live = {name for name, each in coefficients.items() if abs(each) > self.tiny * scale}
        named = {name for key in ("solves", "solves_in", "uses", "carries") for name in self._group(step, key)}
        _claim(live <= named, f"{where}: {sorted(live - named)} has a coefficient but is neither solved nor used")
        row: Sum = {name: mp.mpf(0) for name in unknowns}
        row[""] = mp.mpf(0)
        for joint, (fx, fy) in bars.loads.items():
            if joint in kept:
                row[""] -= bars.effect(joint, fx, fy, equation)
        for name in live:
            if name in unknowns and step["kind"] != "close":
                row[name] += coefficients[name]
            else:  # known, perhaps in terms of carried forces, of which those to be closed stand on the left
                for key, entry in self.values[name].items():
                    times = entry * coefficients[name]
                    row[key] = row.get(key, mp.mpf(0)) + (times if key in unknowns else -times)
        return row, live


def _carried_in(total: Sum) -> set[str]:
    size = max((abs(entry) for entry in total.values()), default=mp.mpf(0))
    return {key for key, entry in total.items() if key and abs(entry) > TINY * size}


def _is_same(first: Sum, second: Sum) -> bool:
    keys = {*first, *second}
    zero = mp.mpf(0)
    return all(close(first.get(key, zero), second.get(key, zero), max(1, abs(first.get(key, zero)))) for key in keys)


def _claim(holds: bool, otherwise: str) -> None:
    if not holds:
        raise ReplayError(otherwise)


def close(found: Number, expected: Number, scale: Number, digits: int = 40) -> bool:
    """Return whether two numbers agree to so many digits of the scale."""
    return bool(abs(found - expected) <= mp.mpf(10) ** -digits * scale)


def faults(stated: Stated, data: Mapping[str, Any], members: Iterable[str]) -> list[str]:
    """Return everything wrong with a check's JSON: values, senses, verdicts, derivation, what rests on what."""
    expected = forces_of(stated)
    bars = bars_of(stated)
    scale = max([abs(force) for force in expected.values()] + [mp.mpf(10) ** -30])
    wrong: list[str] = []
    try:
        both = (*data["members"].values(), *data["reactions"].values())
        rounded = any(item["exactness"] != "exact" for item in both)
        replay = Replay(stated, data["steps"], TINY_WHEN_ROUNDED if rounded else TINY)
    except ReplayError as problem:
        return [str(problem)]
    links = {name for name, (_, end, _, _) in bars.bars.items() if end is None}
    for key, names in (("members", set(members)), ("reactions", links)):
        if set(data[key]) != names:
            wrong.append(f"{key} are {sorted(data[key])}, asked for {sorted(names)}")
        for name, item in data[key].items():
            wrong += [
                f"{name}: {fault}"
                for fault in _value_faults(stated, item, expected[name], replay.forces.get(name), scale)
            ]
            needs = sorted(replay.rests_on.get(name, ()))
            if item["steps"] != needs:
                wrong.append(f"{name}: rests on steps {needs}, not {item['steps']}")
    if data["agreed"] is not True:
        wrong.append("not agreed")
    return wrong


def _value_faults(
    stated: Stated, item: Mapping[str, Any], force: Number, by_steps: Number | None, scale: Number
) -> list[str]:
    """Return what is wrong with one member's or reaction's numbers and words."""
    digits = 40 if item["exactness"] == "exact" else 20
    sense = "0" if close(force, mp.mpf(0), scale) else "T" if force > 0 else "C"
    wrong = {
        f"{item['exact']} is no plain exact text": not stated.symbols and not number_texts_are_plain(item["exact"]),
        f"exact {item['exact']}, expected {mp.nstr(force, 20)}": not close(
            value(item["exact"], stated.symbols), force, scale, digits
        ),
        "found in no step": by_steps is None,
        "its steps give another value": by_steps is not None and not close(by_steps, force, scale, digits),
        f"decimal {item['decimal']!r}": abs(mp.mpf(item["decimal"]) - force)
        > mp.mpf("1e-15") * max(abs(force), TINY * scale),
        f"stiffness {item['stiffness']!r}": abs(mp.mpf(item["stiffness"]) - force) > mp.mpf("1e-7") * scale,
        f"sense {item.get('sense')}, expected {sense}": item.get("sense", sense) != sense,
        f"verdict {item['verdict']}": item["verdict"] != "agrees",
    }
    return [fault for fault, holds in wrong.items() if holds]
