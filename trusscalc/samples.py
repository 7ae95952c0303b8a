"""Trusses with symbols in their dimensions: formulas compared with numbers at several samples, and where they turn.

The statement of stability for all values is algebra: a formula has a denominator, and where the denominator
vanishes the truss is a mechanism. Symbols stand for positive numbers, so a polynomial whose coefficients all
have one sign never vanishes.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from fractions import Fraction

from sympy.polys.fields import FracElement

from trusscalc.exact import Exact, rational
from trusscalc.exacttext import to_text
from trusscalc.loads import JointLoad, LoadCase
from trusscalc.truss import Truss

FACTORS = (Fraction(1), Fraction(7, 5), Fraction(5, 8), Fraction(13, 9))
"""What a symbol's value is multiplied by in the samples; each symbol starts one further on."""


def samples(truss: Truss, case: LoadCase) -> list[dict[str, Exact]]:
    """Return values of all symbols: those stated first, then others near them, each symbol moved differently."""
    stated = dict(truss.symbols) | dict(case.symbols)
    names = [name for name, _ in truss.symbols]
    found = [stated]
    for turn in range(1, len(FACTORS)):
        moved = dict(stated)
        for place, name in enumerate(names):
            moved[name] = stated[name] * rational(FACTORS[(turn + place) % len(FACTORS)])
        found.append(moved)
    return found


def at_sample(truss: Truss, case: LoadCase, values: Mapping[str, Exact]) -> tuple[Truss, LoadCase]:
    """Return truss and case with all symbols at a sample's values."""
    loads = [JointLoad(load.joint, load.fx.substitute(values), load.fy.substitute(values)) for load in case.loads]
    return truss.at_values(values), LoadCase(case.name, loads)


def vanishing(tensions: Iterable[Exact]) -> tuple[str, ...]:
    """Return expressions whose vanishing makes the truss a mechanism: denominators that have no fixed sign."""
    found: dict[str, None] = {}
    for tension in tensions:
        for coefficient in tension.terms.values():
            if not isinstance(coefficient, FracElement):
                continue
            _, factors = coefficient.denom.factor_list()
            for factor, _ in factors:
                if not _one_sign(factor):
                    found[to_text(Exact({(1, 0): coefficient.field(factor)}))] = None
    return tuple(found)


def sign_depends(value: Exact) -> bool:
    """Return whether an expression's sign may depend on its symbols, which stand for positive numbers."""
    if not value.symbols:
        return False
    signs = set()
    for coefficient in value.terms.values():
        if isinstance(coefficient, FracElement):
            signs |= {term > 0 for part in (coefficient.numer * coefficient.denom,) for term in part.coeffs()}
        else:
            signs.add(coefficient > 0)
    return len(signs) > 1


def _one_sign(polynomial: object) -> bool:
    return len({term > 0 for term in polynomial.coeffs()}) == 1  # type: ignore[attr-defined]
