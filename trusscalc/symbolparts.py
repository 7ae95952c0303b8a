"""Loads with symbols taken apart: one numeric load case for each product of symbols.

Statics is linear in the loads, so a force is the sum of symbol products times the forces under unit values.
Each of those numeric cases can be run through the numeric route, and the formula compared coefficient by
coefficient, which says more than one comparison at one set of values.
"""

from __future__ import annotations

from sympy.polys.fields import FracElement

from trusscalc.errors import InexactNumberError
from trusscalc.exact import ZERO, Exact
from trusscalc.loads import JointLoad, LoadCase

Monomial = tuple[tuple[str, int], ...]
"""A product of symbols, such as (("P", 1),); () is the part without symbols."""


def by_monomial(value: Exact) -> dict[Monomial, Exact]:
    """Return the numeric coefficient of each product of symbols.

    Raises
    ------
    InexactNumberError
        When a symbol stands below a fraction line or under a root.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> by_monomial(parse("3*P - sqrt(2)", {"P"}))[(("P", 1),)]
    Exact('3')
    """
    if any(radicand.symbols for radicand in value.tower):
        message = "a symbol under a root cannot be taken apart"
        raise InexactNumberError(message)
    parts: dict[Monomial, Exact] = {}
    for key, coefficient in value.terms.items():
        if not isinstance(coefficient, FracElement):
            _add(parts, (), Exact({key: coefficient}, value.tower, rounded=value.rounded))
            continue
        if not coefficient.denom.is_ground:
            message = "a symbol below a fraction line cannot be taken apart"
            raise InexactNumberError(message)
        names = [str(x) for x in coefficient.numer.ring.symbols]
        below = coefficient.denom.LC
        for powers, factor in coefficient.numer.terms():
            monomial = tuple((name, power) for name, power in zip(names, powers, strict=True) if power)
            _add(parts, monomial, Exact({key: factor / below}, value.tower, rounded=value.rounded))
    return parts


def _add(parts: dict[Monomial, Exact], monomial: Monomial, value: Exact) -> None:
    parts[monomial] = parts.get(monomial, ZERO) + value


def numeric_parts(case: LoadCase) -> dict[Monomial, LoadCase]:
    """Return one load case without symbols for each product of symbols in the loads.

    Raises
    ------
    InexactNumberError
        When a load is not a polynomial in its symbols.
    """
    loads: dict[Monomial, dict[str, tuple[Exact, Exact]]] = {}
    for load in case.loads:
        for axis, amount in enumerate((load.fx, load.fy)):
            for monomial, part in by_monomial(amount).items():
                pair = loads.setdefault(monomial, {}).get(load.joint, (ZERO, ZERO))
                loads[monomial][load.joint] = (part, pair[1]) if axis == 0 else (pair[0], part)
    return {
        monomial: LoadCase(case.name, [JointLoad(joint, fx, fy) for joint, (fx, fy) in at.items()])
        for monomial, at in loads.items()
    }


def monomial_text(monomial: Monomial) -> str:
    """Return a product of symbols as text: ``P``, ``P*w^2``; ``1`` for the part without symbols."""
    return "*".join(name if power == 1 else f"{name}^{power}" for name, power in monomial) or "1"
