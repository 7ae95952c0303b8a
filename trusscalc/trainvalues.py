"""The numbers of a train: read from what was stated, and what can be wrong with them.

Both for a train made in Python and for one in a truss file, whose every fault is told at once.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any, Final

from trusscalc.errors import InexactNumberError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.exacttext import number
from trusscalc.truss import did_you_mean

MOST_AXLES: Final = 200
MOST_VARIABLE: Final = 6
"""Variable spacings in one train: each doubles the arrangements that have to be compared."""
LARGEST_IMPACT: Final = 5
"""A larger one is a percentage written as a number."""
LIMITS: Final = 2

Pair = tuple[Exact, Exact]


# --- reading values ---------------------------------------------------------------------------------------


def _amount(value: object, where: str, problems: list[str]) -> Exact | None:
    try:
        amount = number(value)
    except InexactNumberError as problem:
        problems.append(f"{where}: {problem}")
        return None
    if amount.symbols:
        problems.append(f"{where}: holds the symbol {amount.symbols[0]}; write a number")
        return None
    return amount


def _list(value: object, where: str, such_as: str, problems: list[str]) -> Sequence[object] | None:
    if isinstance(value, Sequence) and not isinstance(value, str):
        return value
    problems.append(f"{where}: a list is needed, such as {such_as}")
    return None


def _axles(value: object, where: str, problems: list[str]) -> tuple[Exact, ...] | None:
    listed = _list(value, where, "[6, 24]", problems)
    if listed is None or len(listed) > MOST_AXLES:
        return None if listed is None else (ONE,) * len(listed)  # refused for their number, not read one by one
    amounts = [_amount(axle, where, problems) for axle in listed]
    return tuple(amount for amount in amounts if amount is not None) if None not in amounts else None


def _spacing(value: object, where: str, problems: list[str]) -> tuple[Pair, ...] | None:
    listed = _list(value, where, "[14], or [[14, 30]] for a variable one", problems)
    if listed is None or len(listed) >= MOST_AXLES:
        return None if listed is None else ((ONE, ONE),) * len(listed)
    pairs = [
        _pair(gap, where, "a variable spacing is [low, high]", problems)
        if isinstance(gap, Sequence) and not isinstance(gap, str)
        else _twice(_amount(gap, where, problems))
        for gap in listed
    ]
    return tuple(pair for pair in pairs if pair is not None) if None not in pairs else None


def _twice(amount: Exact | None) -> Pair | None:
    return None if amount is None else (amount, amount)


def _pair(value: Sequence[object], where: str, form: str, problems: list[str]) -> Pair | None:
    if len(value) != LIMITS:
        problems.append(f"{where}: {form}, and {len(value)} numbers are stated")
        return None
    first, second = (_amount(part, where, problems) for part in value)
    return None if first is None or second is None else (first, second)


def _uniform(value: object, where: str, problems: list[str]) -> Pair | None:
    """Return distance and intensity, stated as a pair or, in a file, by their names."""
    key = where.rsplit(" ", 1)[-1]
    form = f'{key} = {{ {UNIFORM[key][0]} = "0.8", per_length = 80 }}'
    if isinstance(value, Mapping):
        parts = UNIFORM[key]
        unknown = [name for name in value if name not in parts]
        problems += [f"{where} {name}: unknown key{did_you_mean(name, parts)}" for name in unknown]
        missing = [part for part in parts if part not in value]
        problems += [f"{where}: {part} is missing; write {form}" for part in missing]
        read = [_amount(value[part], f"{where} {part}", problems) for part in parts if part in value]
        amounts = [amount for amount in read if amount is not None]
        return (amounts[0], amounts[1]) if len(amounts) == LIMITS and not unknown else None
    listed = _list(value, where, form, problems)
    return None if listed is None else _pair(listed, where, form, problems)


def _flag(value: object, where: str, problems: list[str]) -> bool | None:
    if isinstance(value, bool):
        return value
    problems.append(f"{where}: true or false is needed, without quotes")
    return None


UNIFORM: Final = {"follow": ("after", "per_length"), "beside": ("from", "per_length")}
READERS: Final[Mapping[str, Callable[[Any, str, list[str]], Any]]] = {
    "axles": _axles,
    "spacing": _spacing,
    "impact": _amount,
    "lane": _amount,
    "share": _amount,
    "omit": _flag,
    "follow": _uniform,
    "beside": _uniform,
}


def values_read(stated: Mapping[str, Any], where: str, problems: list[str]) -> dict[str, Any]:
    """Return those stated values that could be read."""
    values = {key: read(stated[key], f"{where} {key}", problems) for key, read in READERS.items() if key in stated}
    return {key: value for key, value in values.items() if value is not None}


# --- what can be wrong ------------------------------------------------------------------------------------


def value_faults(values: Mapping[str, Any], where: str) -> list[str]:
    """Return what is wrong with those values of a train that could be read."""
    problems: list[str] = []
    if "axles" in values:
        problems += _axle_faults(values["axles"], where)
        if values["axles"] and "spacing" in values:
            problems += _count_faults(len(values["axles"]), len(values["spacing"]), where)
    problems += _spacing_faults(values.get("spacing", ()), where)
    amounts = [(key, values[key]) for key in ("impact", "lane", "share") if key in values]
    for key, parts in UNIFORM.items():
        amounts += [(f"{key} {part}", value) for part, value in zip(parts, values.get(key) or (), strict=False)]
    problems += [f"{where} {key}: must not be negative" for key, value in amounts if value.sign() < 0]
    if values.get("impact", ZERO) > LARGEST_IMPACT:
        problems.append(f'{where} impact: is added to the axles as a factor of them; write 33 percent as "0.33"')
    return problems


def _axle_faults(axles: Sequence[Exact], where: str) -> list[str]:
    if not axles:
        return [f"{where} axles: at least one axle load is needed, the leading axle first, such as [6, 24]"]
    if len(axles) > MOST_AXLES:
        return [f"{where} axles: too many: {len(axles):,}, and at most {MOST_AXLES} are taken"]
    return [
        f"{where} axles: axle {count} is negative; write axle loads without sign, they act downwards"
        for count, axle in enumerate(axles, 1)
        if axle.sign() < 0
    ]


def _count_faults(axles: int, spacings: int, where: str) -> list[str]:
    needed = axles - 1
    if spacings == needed:
        return []
    hint = "; a variable one is a list in the list, such as [[14, 30]]" if spacings > needed else ""
    stated = f"{spacings} {'is' if spacings == 1 else 'are'} stated{hint}"
    return [f"{where} spacing: {_counted(axles, 'axle')} need {_counted(needed, 'spacing')}, and {stated}"]


def _counted(count: int, what: str) -> str:
    return f"{count} {what}" if count == 1 else f"{count} {what}s"


def _spacing_faults(spacing: Sequence[Pair], where: str) -> list[str]:
    problems = []
    for count, (low, high) in enumerate(spacing[:MOST_AXLES], 1):
        if low.sign() <= 0 or high.sign() <= 0:
            told = "negative" if low.sign() < 0 or high.sign() < 0 else "zero"
            problems.append(f"{where} spacing: spacing {count} is {told}; write the distance from axle to axle")
        elif low > high:
            problems.append(f"{where} spacing: spacing {count} has its low limit above its high one; write [low, high]")
    variable = sum(low != high for low, high in spacing[:MOST_AXLES])
    if variable > MOST_VARIABLE:
        problems.append(f"{where} spacing: {variable} are variable, and at most {MOST_VARIABLE} may be; fix the others")
    return problems
