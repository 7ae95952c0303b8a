"""Numbers on their way to paper: exact where it can be read, decimals rounded once, differences without noise."""

from __future__ import annotations

import math
from decimal import ROUND_HALF_EVEN, Context, Decimal
from typing import Final, Literal

from trusscalc.decimals import approximate, rounded
from trusscalc.exact import ONE, ZERO, Exact, symbol
from trusscalc.exacttext import to_text
from trusscalc.loads import LoadCase, factor_text
from trusscalc.sheet.blocks import Bracket, Decimals, Formula, Name, Power, Product, Run, Value
from trusscalc.sheet.inscriptions import exact_text

LONGEST_EXACT: Final = 60
"""Characters of exact text beyond which nobody reads it."""
BRIEF_FRACTION: Final = 6
BRIEF_ROOT: Final = 30
"""The same where many loads come together and a decimal of ten digits reads better: of fractions, of roots."""
BRIEF_PLACES: Final = 6
FEW_PLACES: Final = 3
SMALL_DENOMINATOR: Final = 100
"""A short decimal is written as one: of few places, or of more where it is no short fraction."""
DIGITS: Final = 10
"""Significant digits printed instead of such a number."""
PENCIL_DIGITS: Final = 40
WIDE: Final = Context(prec=400, rounding=ROUND_HALF_EVEN)

Number = Value | Decimals | Bracket


def is_readable(value: Exact, *, brief: bool = False) -> bool:
    """Return whether a number is printed exactly: not too long, and no angle rounded to 30 digits in it."""
    text = to_text(value)
    if value.rounded:
        return value.is_rational and len(text) <= DIGITS
    if not brief:
        return len(text) <= LONGEST_EXACT
    if value.is_rational:
        fraction = value.as_fraction()
        places = FEW_PLACES if fraction.denominator < SMALL_DENOMINATOR else BRIEF_PLACES
        return len(text) <= BRIEF_FRACTION or (fraction * 10**places).denominator == 1
    return len(text) <= BRIEF_ROOT


def printed(
    value: Exact, case: LoadCase, role: Literal["amount", "arm", "cosine"] = "amount", *, brief: bool = False
) -> Number:
    """Return a number as it stands in an equation: exact, or with ``DIGITS`` significant digits.

    Parameters
    ----------
    value : Exact
        May hold symbols.
    case : LoadCase
        Gives the symbols' values when a decimal has to be printed.
    role : str
        ``amount``, ``arm`` or ``cosine``, see ``Value``.
    brief : bool
        Whether a decimal takes the place of longer fractions already.
    """
    if is_readable(value, brief=brief):
        return Value(value, role)
    at_values = case.value(value)
    if is_readable(at_values, brief=brief):
        return Value(at_values, role)
    if at_values.symbols:
        return _in_carried_forces(at_values)
    return Decimals(_without_idle_zeros(rounded(at_values, _places(approximate(at_values, DIGITS + 5)))))


def told(value: Exact, case: LoadCase) -> Number | Formula:
    """Return a result's exact value for a table; a number too long to be read is marked as rounded by ``≈``."""
    number = printed(value, case)
    if isinstance(number, Decimals):
        return Formula(
            (), (Product(number.text.startswith("-"), (Decimals(number.text.removeprefix("-")),)),), approximately=True
        )
    return number


def in_a_row(value: Exact) -> Run | Formula | Number:
    """Return a result's exact value for a table of many rows: a short decimal, or a fraction with a solidus."""
    if value.is_rational and (value.as_fraction() * 10**BRIEF_PLACES).denominator == 1:
        return Run(factor_text(value).replace("-", "−"))
    return Run(exact_text(value)) if is_readable(value) else told(value, LoadCase("", {}))


def in_table(value: Exact, case: LoadCase) -> Number:
    """Return a number for a table of loads: a decimal where one of few places is exact, else as in equations."""
    if value.is_rational and (value.as_fraction() * 10**BRIEF_PLACES).denominator == 1:
        return Decimals(factor_text(value))
    return printed(value, case)


def _places(size: Decimal) -> int:
    """Return the decimal places that show ``DIGITS`` significant digits."""
    return max(0, DIGITS - 1 - size.adjusted())


def _without_idle_zeros(number: Decimal) -> str:
    text = _plain(number)
    return text.rstrip("0").rstrip(".") if "." in text else text


def _in_carried_forces(value: Exact) -> Value | Bracket:
    """Return a number that still holds carried forces: rounded constant plus rounded multiples of them."""
    zeros = dict.fromkeys(value.symbols, ZERO)
    constant = value.substitute(zeros)
    parts = [(name, value.substitute({**zeros, name: ONE}) - constant) for name in value.symbols]
    if constant + sum((size * symbol(name) for name, size in parts), start=ZERO) != value:
        return Value(value)  # not linear: printed in full, however long
    case = LoadCase("", {})
    products = [Product(constant.sign() < 0, (printed(abs(constant), case),))] if constant else []
    for name, size in parts:
        products.append(Product(size.sign() < 0, (printed(abs(size), case, "cosine"), Value(symbol(name)))))
    return Bracket(tuple(products))


def decimal_text(value: Exact, places: int) -> str:
    """Return a decimal rounded once from the exact value, half to even, without a minus sign before zero."""
    return _plain(rounded(value, places))


def float_text(value: float, places: int, slack: float) -> str:
    """Return a float of the numeric route as a decimal.

    Parameters
    ----------
    value : float
        What the numeric route gave.
    places : int
        Decimal places.
    slack : float
        How far the float can be off by rounding errors alone; what lies below is noise that differs from
        machine to machine, so it is taken off first (62.5 that came out as 62.50000000001 is no reason to
        round up).
    """
    if not math.isfinite(value):
        return "not a number"
    number = Decimal(value)
    if 0 < slack < math.inf:
        digits = max(places, -math.floor(math.log10(slack)) - 1)
        number = number.quantize(Decimal(1).scaleb(-digits), context=WIDE)
    return _plain(number.quantize(Decimal(1).scaleb(-places), context=WIDE))


def _plain(number: Decimal) -> str:
    return f"{number or abs(number):f}"


def bound(size: float) -> Power:
    """Return ``< 10^n``, the largest power of ten not above a positive size."""
    return Power("", math.floor(math.log10(size)), below=True)


def scientific(size: float | Decimal, digits: int) -> Power:
    """Return a size, whatever its sign, with so many significant digits and its power of ten."""
    mantissa, _, exponent = f"{abs(size):.{digits - 1}e}".partition("e")
    return Power(mantissa, int(exponent))


def difference(value: float, tolerance: float, places: int) -> Power | Decimals:
    """Return a difference of two routes as it is printed.

    Parameters
    ----------
    value : float
        Hand value minus numeric value.
    tolerance : float
        Up to which they agree, in the same unit.
    places : int
        Decimal places of the table.

    Notes
    -----
    Noise of floats is not printed: below the largest power of ten within the tolerance only that is said; up
    to the tolerance one digit; beyond it the signed difference, with as many places as it takes to see it.
    """
    if not math.isfinite(value):
        return Decimals("not a number")
    if 0 < tolerance < math.inf and abs(value) <= tolerance:
        limit = bound(tolerance)
        return limit if abs(value) < 10.0**limit.exponent else scientific(abs(value), 1)
    if value == 0:
        return Decimals("0")
    needed = places if abs(value) >= 10.0**-places else -math.floor(math.log10(abs(value))) + 1
    return Decimals(_plain(Decimal(value).quantize(Decimal(1).scaleb(-needed), context=WIDE)))


def holds_decimals(products: tuple[Product, ...]) -> bool:
    """Return whether a rounded decimal stands in a sum."""
    return any(
        isinstance(factor, Decimals) or (isinstance(factor, Bracket) and holds_decimals(factor.terms))
        for product in products
        for factor in product.factors
    )


def pencil_sum(products: tuple[Product, ...], case: LoadCase) -> Decimal:
    """Return what a reader gets who adds up a written sum with the digits printed (roots to 40 digits).

    Raises
    ------
    InexactNumberError
        When a carried force stands in it.
    """
    total = Decimal(0)
    for product in products:
        amount = _pencil_product(product, case)
        total = WIDE.subtract(total, amount) if product.negative else WIDE.add(total, amount)
    return total.quantize(Decimal(1).scaleb(-PENCIL_DIGITS // 2), context=WIDE)


def multiplied(product: Product, case: LoadCase) -> Decimals | None:
    """Return a product with rounded digits in it as a pencil multiplies it out, None for an exact one."""
    if not holds_decimals((product,)):
        return None
    amount = _pencil_product(product, case)
    amount = -amount if product.negative else amount
    if not amount:
        return Decimals("0")
    return Decimals(_without_idle_zeros(amount.quantize(Decimal(1).scaleb(-_places(amount)), context=WIDE)))


def _pencil_product(product: Product, case: LoadCase) -> Decimal:
    amount = Decimal(1)
    for factor in product.factors:
        amount = WIDE.multiply(amount, _read(factor, case))
    return amount


def _read(factor: Value | Decimals | Name | Bracket, case: LoadCase) -> Decimal:
    match factor:
        case Value(value):
            return approximate(case.value(value), PENCIL_DIGITS)
        case Decimals(text):
            return Decimal(text)
        case Bracket(terms):
            return pencil_sum(terms, case)
        case _:
            message = f"{factor!r} has no value of its own"
            raise TypeError(message)


def formula(left: tuple[Product, ...], right: tuple[Product, ...]) -> Formula:
    """Return a written line, its relation sign chosen by what stands in it."""
    return Formula(left, right, approximately=holds_decimals(left) or holds_decimals(right))
