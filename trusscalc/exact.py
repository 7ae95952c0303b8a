r"""Exact numbers: rationals, square roots of any depth, and symbols, as values of one field.

A number is a sum of terms ``c * sqrt(n) * r1 * r2 ...``: ``c`` a rational (or a rational function of the
symbols), ``n`` a positive whole number without square factor, ``r`` a nested root such as
``sqrt(5 + sqrt(5))`` from the number's own *tower*. A root is admitted to the tower only when it is
proven not to lie in the field already there, so a number is zero exactly when it has no terms, and ``==``
compares values, never shapes. Any two numbers can be combined: simple roots need no common context, and
towers are merged when they differ.

Why not ``QQ.algebraic_field``: it needs a primitive element, and finding one for three square roots takes
longer than the whole calculation may (measured: 2 roots 10 ms, 3 roots 60 ms, nested 0.1 to 1 s, and
degree 8 elements multiply 20 times slower). Coefficients are sympy's ``QQ`` and ``FracElement``.
"""

from __future__ import annotations

import math
import reprlib
from collections.abc import Mapping
from decimal import Decimal
from fractions import Fraction
from functools import lru_cache
from numbers import Integral
from typing import Any

from sympy.polys.domains import QQ
from sympy.polys.fields import FracElement, FracField

from trusscalc.errors import InexactNumberError
from trusscalc.wholenumbers import a_prime_of

Key = tuple[int, int]
"""A term's root part: radicand without square factor, and a bit mask of the tower's nested roots."""

UNIT_KEY: Key = (1, 0)
MOST_TERMS = 64
MANY_DIGITS = 400
COMPARED_DIGITS = 12


class Exact:
    """An exact number; see the module's head for its form.

    Arithmetic takes Exact, int and Fraction; a float is refused, because it has already been rounded.

    Attributes
    ----------
    terms : dict
        Coefficient by root part; no zero coefficients. Not to be changed.
    tower : tuple of Exact
        The radicands of the nested roots, each using only earlier ones.
    rounded : bool
        True when an angle that is no surd was rounded, once, on the way in.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> parse("sqrt(2)*sqrt(6)") == parse("2*sqrt(3)")
    True
    >>> parse("sqrt(2 + sqrt(3))") == (parse("sqrt(6)") + parse("sqrt(2)")) / 2
    True
    """

    __slots__ = ("rounded", "terms", "tower")

    def __init__(self, terms: dict[Key, Any], tower: tuple[Exact, ...] = (), *, rounded: bool = False) -> None:
        if len(terms) > MOST_TERMS:
            message = f"the number needs more than {MOST_TERMS} independent roots; use fewer different roots"
            raise InexactNumberError(message)
        self.terms = terms
        self.tower = tower
        self.rounded = rounded

    # --- arithmetic ---------------------------------------------------------------------------------------

    def __add__(self, other: object) -> Exact:
        right = _operand(other)
        if right is None:
            return NotImplemented
        if self.tower != right.tower:
            from trusscalc.roots import same_tower  # noqa: PLC0415 - rarely needed, and it lies above

            left, right = same_tower(self, right)
        else:
            left = self
        terms = dict(left.terms)
        for key, coefficient in right.terms.items():
            if key in terms:
                total = _plus(terms[key], coefficient)
                if total:
                    terms[key] = total
                else:
                    del terms[key]
            else:
                terms[key] = coefficient
        return Exact(terms, left.tower, rounded=left.rounded or right.rounded)

    __radd__ = __add__

    def __neg__(self) -> Exact:
        return Exact({key: -c for key, c in self.terms.items()}, self.tower, rounded=self.rounded)

    def __pos__(self) -> Exact:
        return self

    def __sub__(self, other: object) -> Exact:
        right = _operand(other)
        if right is None:
            return NotImplemented
        return self + (-right) if right.terms else Exact(self.terms, self.tower, rounded=self.rounded or right.rounded)

    def __rsub__(self, other: object) -> Exact:
        left = _operand(other)
        return NotImplemented if left is None else left + (-self)

    def __mul__(self, other: object) -> Exact:
        right = _operand(other)
        if right is None:
            return NotImplemented
        left = self
        if left.tower != right.tower:
            from trusscalc.roots import same_tower  # noqa: PLC0415 - rarely needed, and it lies above

            left, right = same_tower(left, right)
        rounded = left.rounded or right.rounded
        if len(left.terms) == 1 and UNIT_KEY in left.terms:
            left, right = right, left
        if len(right.terms) == 1 and UNIT_KEY in right.terms:
            factor = right.terms[UNIT_KEY]
            return Exact({key: _times(c, factor) for key, c in left.terms.items()}, left.tower, rounded=rounded)
        return _product(left, right, rounded)

    __rmul__ = __mul__

    def __truediv__(self, other: object) -> Exact:
        right = _operand(other)
        return NotImplemented if right is None else self * right.inverse()

    def __rtruediv__(self, other: object) -> Exact:
        left = _operand(other)
        return NotImplemented if left is None else left * self.inverse()

    def __pow__(self, exponent: int) -> Exact:
        if exponent < 0:
            return self.inverse() ** (-exponent)
        result = ONE
        for _ in range(exponent):
            result = result * self
        return result

    def inverse(self) -> Exact:
        """Return 1 / self.

        Raises
        ------
        ZeroDivisionError
            For zero.

        Notes
        -----
        One root at a time is removed from the denominator by multiplying with the conjugate in that root.
        """
        if not self.terms:
            message = "division by zero"
            raise ZeroDivisionError(message)
        if len(self.terms) == 1:
            ((n, mask), coefficient) = next(iter(self.terms.items()))
            if not mask:
                return Exact({(n, 0): plain(1 / (coefficient * n))}, self.tower, rounded=self.rounded)
        turned = conjugate(self)
        return turned * (self * turned).inverse()

    # --- comparison ---------------------------------------------------------------------------------------

    def __eq__(self, other: object) -> bool:
        right = _operand(other)
        if right is None:
            return NotImplemented
        if self.tower == right.tower and self.terms == right.terms:
            return True
        if self.symbols or right.symbols:  # one symbol may live in two fields
            return self.symbols == right.symbols and not (self - right).terms
        if self.tower == right.tower:
            return False
        # towers are costly to merge, and numbers that differ mostly differ early
        from trusscalc.decimals import approximate  # noqa: PLC0415 - rarely needed, and it lies above

        near, far = approximate(self, COMPARED_DIGITS), approximate(right, COMPARED_DIGITS)
        apart = near.copy_abs().max(far.copy_abs()).scaleb(2 - COMPARED_DIGITS)
        return (near - far).copy_abs() <= apart and not (self - right).terms

    def __hash__(self) -> int:
        if symbols := self.symbols:
            return hash(symbols)
        # numbers with nested roots may be equal in different towers, so their value is hashed
        if any(mask for _, mask in self.terms):
            from trusscalc.decimals import rounded  # noqa: PLC0415 - rarely needed, and it lies above

            return hash(rounded(self, COMPARED_DIGITS))
        if self.is_rational:
            return hash(self.as_fraction())
        return hash(frozenset(self.terms.items()))

    def __bool__(self) -> bool:
        return bool(self.terms)

    def __lt__(self, other: object) -> bool:
        right = _operand(other)
        return NotImplemented if right is None else (self - right).sign() < 0

    def __le__(self, other: object) -> bool:
        right = _operand(other)
        return NotImplemented if right is None else (self - right).sign() <= 0

    def __gt__(self, other: object) -> bool:
        right = _operand(other)
        return NotImplemented if right is None else (self - right).sign() > 0

    def __ge__(self, other: object) -> bool:
        right = _operand(other)
        return NotImplemented if right is None else (self - right).sign() >= 0

    def sign(self) -> int:
        """Return -1, 0 or 1.

        Raises
        ------
        InexactNumberError
            When the number holds a symbol: its sign depends on the symbol's value.
        """
        if not self.terms:
            return 0
        if len(self.terms) == 1:
            coefficient = next(iter(self.terms.values()))
            if not isinstance(coefficient, FracElement):  # roots are positive
                return 1 if coefficient > 0 else -1
        from trusscalc.decimals import approximate  # noqa: PLC0415 - rarely needed, and it lies above

        return 1 if approximate(self, 12) > 0 else -1

    def __abs__(self) -> Exact:
        return -self if self.sign() < 0 else self

    def reads_negative(self) -> bool:
        """Return whether the number is below zero; with symbols, whether it is written with a minus sign."""
        if not self.symbols:
            return self.sign() < 0
        return all(_leads_with_minus(coefficient) for coefficient in self.terms.values())

    def written_size(self) -> Exact:
        """Return the number without the minus sign it is written with."""
        return -self if self.reads_negative() else self

    # --- questions ----------------------------------------------------------------------------------------

    @property
    def is_rational(self) -> bool:
        """True when the number is a fraction of whole numbers."""
        if not self.terms:
            return True
        return len(self.terms) == 1 and UNIT_KEY in self.terms and not isinstance(self.terms[UNIT_KEY], FracElement)

    @property
    def symbols(self) -> tuple[str, ...]:
        """The symbols in the number, in alphabetical order."""
        found = set()
        for coefficient in self.terms.values():
            if isinstance(coefficient, FracElement):
                for part in (coefficient.numer, coefficient.denom):
                    found |= {str(x) for x, used in zip(part.ring.symbols, _degrees(part), strict=True) if used}
        for radicand in self.tower:
            found |= set(radicand.symbols)
        return tuple(sorted(found))

    def as_fraction(self) -> Fraction:
        """Return the number as a Fraction.

        Raises
        ------
        InexactNumberError
            When it is not rational.
        """
        if not self.terms:
            return Fraction(0)
        if not self.is_rational:
            message = "the number is not rational"
            raise InexactNumberError(message)
        value = self.terms[UNIT_KEY]
        return Fraction(int(value.numerator), int(value.denominator))

    def __float__(self) -> float:
        """Return the nearest float (the way out of the exact route)."""
        if self.is_rational:
            return float(self.as_fraction())
        from trusscalc.decimals import approximate  # noqa: PLC0415 - rarely needed, and it lies above

        return float(approximate(self, 25))

    def __repr__(self) -> str:
        from trusscalc.exacttext import to_text  # noqa: PLC0415 - printing is for people, not for arithmetic

        return f"Exact({to_text(self)!r})"

    def substitute(self, values: Mapping[str, Exact]) -> Exact:
        """Return the number with each symbol replaced by its value; missing ones stay symbols."""
        if not self.symbols:
            return self
        if any(radicand.symbols for radicand in self.tower):
            return self._substitute_under_roots(values)
        total = ZERO
        for key, coefficient in self.terms.items():
            root = Exact({key: QQ(1)}, self.tower, rounded=self.rounded)
            total = total + root * _substituted(coefficient, values)
        return total

    def _substitute_under_roots(self, values: Mapping[str, Exact]) -> Exact:
        from trusscalc.roots import sqrt  # noqa: PLC0415 - rarely needed, and it lies above

        roots = [sqrt(radicand.substitute(values)) for radicand in self.tower]
        total = ZERO
        for (n, mask), coefficient in self.terms.items():
            term = Exact({(n, 0): QQ(1)}, rounded=self.rounded) * _substituted(coefficient, values)
            for index, root in enumerate(roots):
                if mask >> index & 1:
                    term = term * root
            total = total + term
        return total


# --- making numbers ---------------------------------------------------------------------------------------


def rational(numerator: int | Fraction, denominator: int = 1) -> Exact:
    """Return a whole number or a fraction as an exact number."""
    fraction = Fraction(numerator) / denominator
    return Exact({UNIT_KEY: QQ(fraction.numerator, fraction.denominator)} if fraction else {})


ZERO = rational(0)
ONE = rational(1)


@lru_cache(maxsize=64)
def _field_of(names: tuple[str, ...]) -> FracField:
    return FracField(list(names), QQ)


def symbol(name: str) -> Exact:
    """Return a symbol as an exact number."""
    return Exact({UNIT_KEY: _field_of((name,)).gens[0]})


def exact(value: object) -> Exact:
    """Return an int, Fraction, Decimal, float or sympy number as an exact number; text goes to ``exacttext.parse``.

    Parameters
    ----------
    value : int, Fraction, Decimal, float, Exact or sympy number
        A float means its shortest decimal: 2.37 is 237/100.

    Raises
    ------
    InexactNumberError
        For anything else, for infinities and for not-a-number.

    Examples
    --------
    >>> exact(2.37) == rational(237, 100)
    True
    """
    if isinstance(value, Exact):
        return value
    if isinstance(value, bool):
        message = f"{value} is not a number"
        raise InexactNumberError(message)
    if isinstance(value, (int, Fraction)):
        return rational(value)
    if isinstance(value, Integral):  # numpy's, say
        return rational(int(value))
    if isinstance(value, float):
        value = Decimal(repr(float(value)))
    if isinstance(value, Decimal):
        if not value.is_finite():
            message = f"{value} is not a finite number"
            raise InexactNumberError(message)
        if abs(value.adjusted()) > MANY_DIGITS:  # its fraction could fill the memory
            message = f"{str(value)[:40]} is too large or too small a number"
            raise InexactNumberError(message)
        return rational(Fraction(value))
    shown = reprlib.repr(value)
    message = f"{shown} is not a number trusscalc can hold exactly; write it as text, such as '5*sqrt(3)/2'"
    raise InexactNumberError(message)


# --- terms ------------------------------------------------------------------------------------------------


def _operand(value: object) -> Exact | None:
    if isinstance(value, Exact):
        return value
    if isinstance(value, (int, Fraction)) and not isinstance(value, bool):
        return rational(value)
    if isinstance(value, float):
        message = "a float has no place in exact arithmetic; make it exact at input"
        raise InexactNumberError(message)
    return None


def _plus(left: Any, right: Any) -> Any:
    if isinstance(left, FracElement) and isinstance(right, FracElement) and left.field != right.field:
        left, right = _same_field(left, right)
    return plain(left + right)


def _times(left: Any, right: Any) -> Any:
    if isinstance(left, FracElement) and isinstance(right, FracElement) and left.field != right.field:
        left, right = _same_field(left, right)
    return plain(left * right)


def in_one_field(coefficients: Mapping[Any, Any]) -> dict[Any, Any]:
    """Return coefficients with all rational functions of symbols in the field of all the symbols."""
    found = {str(x) for c in coefficients.values() if isinstance(c, FracElement) for x in c.field.symbols}
    if not found:
        return dict(coefficients)
    field = _field_of(tuple(sorted(found)))
    return {key: c.set_field(field) if isinstance(c, FracElement) else c for key, c in coefficients.items()}


def plain(coefficient: Any) -> Any:
    """Return a rational function whose symbols have cancelled as the rational number it is."""
    if isinstance(coefficient, FracElement) and coefficient.numer.is_ground and coefficient.denom.is_ground:
        return QQ.convert(coefficient.numer.LC) / QQ.convert(coefficient.denom.LC)
    return coefficient


def _same_field(left: Any, right: Any) -> tuple[Any, Any]:
    names = {str(x) for x in (*left.field.symbols, *right.field.symbols)}
    field = _field_of(tuple(sorted(names)))
    return left.set_field(field), right.set_field(field)


def _leads_with_minus(coefficient: Any) -> bool:
    leading = coefficient.numer.LC if isinstance(coefficient, FracElement) else coefficient
    return bool(leading < 0)


def _degrees(polynomial: Any) -> tuple[int, ...]:
    degrees: tuple[int, ...] = polynomial.degrees()
    return tuple(max(0, degree) if degree == degree else 0 for degree in degrees)  # noqa: PLR0124 - minus infinity


def _substituted(coefficient: Any, values: Mapping[str, Exact]) -> Exact:
    if not isinstance(coefficient, FracElement):
        return Exact({UNIT_KEY: coefficient})

    def value_of(polynomial: Any) -> Exact:
        names = [str(x) for x in polynomial.ring.symbols]
        total = ZERO
        for powers, factor in polynomial.terms():
            term = Exact({UNIT_KEY: factor})
            for name, power in zip(names, powers, strict=True):
                if power:
                    term = term * (values[name] if name in values else symbol(name)) ** power
            total = total + term
        return total

    return value_of(coefficient.numer) / value_of(coefficient.denom)


def _product(left: Exact, right: Exact, rounded: bool) -> Exact:
    terms: dict[Key, Any] = {}
    later: list[Exact] = []
    for (n1, mask1), c1 in left.terms.items():
        for (n2, mask2), c2 in right.terms.items():
            common = math.gcd(n1, n2)
            coefficient = _times(c1, c2) * common if common > 1 else _times(c1, c2)
            key = (n1 // common * (n2 // common), mask1 ^ mask2)
            if mask1 & mask2:
                piece = Exact({key: coefficient}, left.tower)
                for index, radicand in enumerate(left.tower):
                    if (mask1 & mask2) >> index & 1:
                        piece = piece * Exact(radicand.terms, left.tower)
                later.append(piece)
            elif key in terms:
                terms[key] = _plus(terms[key], coefficient)
            else:
                terms[key] = coefficient
    result = Exact({key: c for key, c in terms.items() if c}, left.tower, rounded=rounded)
    for piece in later:
        result = result + piece
    return result


def conjugate(value: Exact) -> Exact:
    """Return value with the sign of one of its roots changed: the last nested one, else one prime's."""
    masks = 0
    for _, mask in value.terms:
        masks |= mask
    if masks:
        top = 1 << (masks.bit_length() - 1)
        terms = {key: -c if key[1] & top else c for key, c in value.terms.items()}
        return Exact(terms, value.tower, rounded=value.rounded)
    prime = a_prime_of(next(n for n, _ in value.terms if n > 1))
    terms = {key: c if key[0] % prime else -c for key, c in value.terms.items()}
    return Exact(terms, value.tower, rounded=value.rounded)
