"""The way out of exact arithmetic: decimals of any length, and the one rounding."""

from __future__ import annotations

import operator
from decimal import MAX_PREC, ROUND_HALF_EVEN, Context, Decimal
from fractions import Fraction
from functools import reduce

from sympy.polys.fields import FracElement

from trusscalc.errors import InexactNumberError
from trusscalc.exact import Exact


def approximate(value: Exact, digits: int) -> Decimal:
    """Return value to at least so many correct significant digits (0 exactly for zero).

    Raises
    ------
    InexactNumberError
        When the number holds a symbol.
    """
    if not value.terms:
        return Decimal(0)
    precision = digits + 10
    while True:
        total, size = _evaluated(value, Context(prec=precision, rounding=ROUND_HALF_EVEN))
        # every operation is off by half a unit in the last place; 3 digits cover some hundred operations
        if total and total.copy_abs() > size.scaleb(digits + 3 - precision):
            return total
        precision *= 2


def _evaluated(value: Exact, context: Context) -> tuple[Decimal, Decimal]:
    """Return the value and the sum of its terms' sizes, which bounds the rounding error."""
    # a radicand may be a small difference, so it is asked for its own correct digits
    masks = reduce(operator.or_, (mask for _, mask in value.terms), 0)
    roots = [
        context.sqrt(approximate(radicand, context.prec)) if masks >> index & 1 else Decimal(0)
        for index, radicand in enumerate(value.tower)
    ]
    total, size = Decimal(0), Decimal(0)
    for (n, mask), coefficient in value.terms.items():
        if isinstance(coefficient, FracElement):
            message = "a number with a symbol in it has no decimal value; give the symbol a value"
            raise InexactNumberError(message)
        term = context.divide(Decimal(int(coefficient.numerator)), Decimal(int(coefficient.denominator)))
        if n > 1:
            term = context.multiply(term, context.sqrt(Decimal(n)))
        for index, root in enumerate(roots):
            if mask >> index & 1:
                term = context.multiply(term, root)
        total = context.add(total, term)
        size = context.add(size, term.copy_abs())
    return total, size


def rounded(value: Exact, places: int) -> Decimal:
    """Return value rounded once, from the exact value, to so many decimal places, half to even.

    Examples
    --------
    >>> from trusscalc.exact import rational
    >>> from trusscalc.roots import sqrt
    >>> rounded(rational(5, 2), 0), rounded(sqrt(rational(2)), 3)
    (Decimal('2'), Decimal('1.414'))
    """
    step = Decimal(1).scaleb(-places)
    if value.is_rational:
        scaled = value.as_fraction() * Fraction(10) ** places
        return Decimal(round(scaled)).scaleb(-places, Context(prec=MAX_PREC))
    digits = 20 + places
    while True:
        near = approximate(value, digits)
        context = Context(prec=digits + abs(near.adjusted()) + 50, rounding=ROUND_HALF_EVEN)
        slack = near.copy_abs().scaleb(-digits, context)
        ends = (context.subtract(near, slack), context.add(near, slack))
        low, high = (end.quantize(step, context=context) for end in ends)
        if low == high:  # a surd is never exactly on a tie, so more digits always decide
            return low or low.copy_abs()  # no minus zero
        digits *= 2
