"""Text to exact number and back.

The reader is a small parser over a white list: digits, ``+ - * / ^``, parentheses, ``sqrt()`` and
``sin() cos() tan()`` of an angle in degrees, and the symbols the caller allows. A truss file is untrusted
text, so nothing here ever evaluates it as a program, and length, nesting, exponents and digits are capped.
"""

from __future__ import annotations

import re
from collections.abc import Collection
from fractions import Fraction
from functools import lru_cache
from typing import Any

from sympy.polys.fields import FracElement

from trusscalc.decimals import approximate
from trusscalc.errors import InexactNumberError
from trusscalc.exact import ONE, UNIT_KEY, ZERO, Exact, exact, rational, symbol
from trusscalc.roots import sqrt, trimmed

LONGEST_TEXT = 1000
DEEPEST_NESTING = 20
LARGEST_EXPONENT = 24
LARGEST_POWER_OF_TEN = 60
LARGEST_FLOAT_POWER = 300
MOST_DIGITS = 400
LARGEST_BITS = 20_000
MOST_SYMBOL_TERMS = 16
HIGHEST_DEGREE = 6
MOST_HARD_ROOTS = 6
ANGLE_DIGITS = 30
GUARD_DIGITS = 5
"""Carried besides, so that what cancels with the true angle still cancels to 30 digits after some arithmetic."""
FUNCTIONS = ("sqrt", "sin", "cos", "tan")
EXACT_HALVINGS = {6: 1, 18: 2, 30: 3}
"""How often multiples of so many degrees may be halved before the field of their roots gets slow to compute in."""

_TOKEN = re.compile(
    r"\s*(?:(?P<number>(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)"
    r"|(?P<name>[^\W\d]\w*)|(?P<sign>\*\*|[-+*/^()]))",
)


def parse(text: str, symbols: Collection[str] = ()) -> Exact:
    """Return the exact number that a text states.

    Parameters
    ----------
    text : str
        Such as ``"5*sqrt(3)/2"``, ``"-12.5"``, ``"4*cos(30)"`` (degrees).
    symbols : collection of str
        Names that may stand for unknown loads.

    Raises
    ------
    InexactNumberError
        For anything else; the message quotes the text and says what is allowed.

    Examples
    --------
    >>> parse("0.1 + 0.2") == rational(3, 10)
    True
    >>> parse("sin(30)") == rational(1, 2)
    True
    >>> parse("sin(20)").rounded
    True
    """
    if len(text) > LONGEST_TEXT:
        message = f"the number {_quoted(text)} is longer than {LONGEST_TEXT} characters"
        raise InexactNumberError(message)
    try:
        return _of_a_size(_Reader(text, symbols).whole())
    except InexactNumberError as problem:
        message = f"{_quoted(text)}: {problem}"
        raise InexactNumberError(message) from None
    except ZeroDivisionError:
        message = f"{_quoted(text)}: division by zero"
        raise InexactNumberError(message) from None


def number(value: object, symbols: Collection[str] = ()) -> Exact:
    """Return text, int, Fraction, Decimal, float or a sympy number as an exact number.

    Raises
    ------
    InexactNumberError
        When the value is none of these, not finite, or text that is not understood.
    """
    if isinstance(value, str):
        return parse(value, symbols)
    if type(value).__module__.startswith("sympy."):
        # a sympy number is not a text of the user's: its own printing is read back by our parser
        text = str(value)
        if any(f"{function}(" in text for function in ("sin", "cos", "tan")):
            message = f"{_quoted(text)}: sympy's angles are in radians; write text, such as 'sin(30)' for 30 degrees"
            raise InexactNumberError(message)
        return parse(text, symbols)
    return _of_a_size(exact(value))


def _of_a_size(value: Exact) -> Exact:
    """Refuse what a float cannot hold; a symbol's value is checked when it is given."""
    if value and not value.symbols and abs(approximate(value, 3).adjusted()) > LARGEST_FLOAT_POWER:
        message = f"numbers beyond 1e{LARGEST_FLOAT_POWER} or below 1e-{LARGEST_FLOAT_POWER} are not supported"
        raise InexactNumberError(message)
    return value


def _quoted(text: str) -> str:
    short = text if len(text) <= 60 else text[:57] + "..."  # noqa: PLR2004 - what fits a message
    return repr(short)


class _Reader:
    """A recursive-descent reader of one text."""

    def __init__(self, text: str, symbols: Collection[str]) -> None:
        self.symbols = symbols
        self.tokens: list[tuple[str, str]] = []
        self.place = 0
        self.depth = 0
        self.hard_roots: dict[tuple[str, Exact], Exact] = {}
        text = text.replace("\N{MINUS SIGN}", "-")
        end = 0
        while end < len(text.rstrip()):
            found = _TOKEN.match(text, end)
            if found is None:
                message = f"the character {text[end:].lstrip()[0]!r} has no place in a number"
                raise InexactNumberError(message)
            end = found.end()
            self.tokens.append((str(found.lastgroup), found.group(str(found.lastgroup))))

    def whole(self) -> Exact:
        value = self.sum()
        if self.place < len(self.tokens):
            message = f"{self.tokens[self.place][1]!r} was not expected there; write products with *"
            raise InexactNumberError(message)
        return value

    def next_sign(self, *signs: str) -> str:
        """Return and pass the next token if it is one of the signs, else ''."""
        if self.place < len(self.tokens):
            kind, text = self.tokens[self.place]
            if kind == "sign" and text in signs:
                self.place += 1
                return text
        return ""

    def sum(self) -> Exact:
        value = self.product()
        while sign := self.next_sign("+", "-"):
            term = self.product()
            value = _of_a_length(value + term if sign == "+" else value - term)
        return value

    def product(self) -> Exact:
        value = self.signed()
        while sign := self.next_sign("*", "/"):
            factor = self.signed()
            value = _of_a_length(value * (factor if sign == "*" else _inverse(factor)))
        return value

    def signed(self) -> Exact:
        negative = False
        while sign := self.next_sign("+", "-"):
            negative ^= sign == "-"
        value = self.power()
        return -value if negative else value

    def power(self) -> Exact:
        base = self.atom()
        if not self.next_sign("^", "**"):
            return base
        self.deeper()
        exponent = self.signed()
        self.depth -= 1
        if not exponent.is_rational or exponent.as_fraction().denominator != 1:
            message = "an exponent must be a whole number; write roots with sqrt()"
            raise InexactNumberError(message)
        power = int(exponent.as_fraction())
        if abs(power) > LARGEST_EXPONENT:
            message = f"exponents above {LARGEST_EXPONENT} are not supported"
            raise InexactNumberError(message)
        value = ONE
        for _ in range(abs(power)):
            value = _of_a_length(value * base)
        return value if power >= 0 else _of_a_length(_inverse(value))

    def deeper(self) -> None:
        self.depth += 1
        if self.depth > DEEPEST_NESTING:
            message = f"nested deeper than {DEEPEST_NESTING}"
            raise InexactNumberError(message)

    def atom(self) -> Exact:
        if self.place >= len(self.tokens):
            message = "the number ends too early" if self.tokens else "a number is missing"
            raise InexactNumberError(message)
        kind, text = self.tokens[self.place]
        self.place += 1
        if kind == "number":
            return _decimal(text)
        if kind == "name":
            return self.name(text)
        if text != "(":
            message = f"{text!r} was not expected there"
            raise InexactNumberError(message)
        return self.bracket()

    def bracket(self) -> Exact:
        """Read up to the closing parenthesis."""
        self.deeper()
        value = self.sum()
        self.depth -= 1
        if not self.next_sign(")"):
            message = "a closing parenthesis is missing"
            raise InexactNumberError(message)
        return value

    def name(self, text: str) -> Exact:
        if text in FUNCTIONS:
            if not self.next_sign("("):
                message = f"{text} needs a parenthesis: {text}(...)"
                raise InexactNumberError(message)
            return self.function(text, self.bracket())
        if text in self.symbols:
            return symbol(text)
        if text == "pi":
            message = "pi is not taken; angles are in degrees, such as sin(30)"
        else:
            message = (
                f"{_quoted(text)} is not known here; known are + - * / ^ ( ), sqrt() and sin(), cos(), tan() of degrees"
            )
        raise InexactNumberError(message)

    def function(self, name: str, inside: Exact) -> Exact:
        """Return a root, sine, cosine or tangent; those that need a search for nested roots are counted."""
        if (name, inside) in self.hard_roots:
            return self.hard_roots[name, inside]
        value = sqrt(inside) if name == "sqrt" else _of_angle(name, inside)
        if value.tower or not inside.is_rational:
            self.hard_roots[name, inside] = value
            if len(self.hard_roots) > MOST_HARD_ROOTS:
                message = f"more than {MOST_HARD_ROOTS} different nested roots or such angles; use fewer"
                raise InexactNumberError(message)
        return value


def _decimal(text: str) -> Exact:
    mantissa, _, power = text.lower().partition("e")
    if len(mantissa) > MOST_DIGITS or len(power) > 4 or abs(int(power or 0)) > LARGEST_POWER_OF_TEN:  # noqa: PLR2004
        message = f"numbers of more than {MOST_DIGITS} digits or beyond 1e{LARGEST_POWER_OF_TEN} are not supported"
        raise InexactNumberError(message)
    return rational(Fraction(mantissa.rstrip(".") or "0") * Fraction(10) ** int(power or 0))


def _of_a_length(value: Exact) -> Exact:
    """Refuse a number that has grown beyond what anybody would write, before the next step doubles it."""
    if sum(_bits(c) for c in value.terms.values()) > LARGEST_BITS:
        message = "the number becomes too long when it is worked out"
        raise InexactNumberError(message)
    for coefficient in value.terms.values():
        if isinstance(coefficient, FracElement):
            parts = (coefficient.numer, coefficient.denom)
            count = sum(len(part.terms()) for part in parts)
            degree = max(sum(powers) for part in parts for powers, _ in part.terms())
            if count > MOST_SYMBOL_TERMS or degree > HIGHEST_DEGREE:
                message = "too many different products of symbols; write a simpler load"
                raise InexactNumberError(message)
    return value


def _inverse(value: Exact) -> Exact:
    if len(value.terms) > 1 and value.symbols:
        message = "roots and symbols added together cannot be divided by; write a simpler load"
        raise InexactNumberError(message)
    return value.inverse()


def _bits(coefficient: Any) -> int:
    if isinstance(coefficient, FracElement):
        return sum(_bits(factor) for part in (coefficient.numer, coefficient.denom) for _, factor in part.terms())
    return int(coefficient.numerator).bit_length() + int(coefficient.denominator).bit_length()


# --- angles -----------------------------------------------------------------------------------------------


def _of_angle(function: str, degrees: Exact) -> Exact:
    if not degrees.is_rational:
        message = f"{function} takes a rational number of degrees"
        raise InexactNumberError(message)
    cosine, sine = cosine_and_sine(degrees.as_fraction())
    if function == "tan":
        if not cosine:
            message = "the tangent of a right angle has no value"
            raise InexactNumberError(message)
        return sine / cosine
    return cosine if function == "cos" else sine


@lru_cache(maxsize=1024)
def cosine_and_sine(degrees: Fraction) -> tuple[Exact, Exact]:
    """Return cosine and sine of an angle in degrees.

    Notes
    -----
    Multiples of 6 degrees, halved once, of 18 halved twice and of 30 halved three times, have square roots for
    sine and cosine (they come from the equilateral triangle and the regular pentagon). Any other angle is
    rounded once: the tangent of its half becomes a fraction, right to a few digits more than 30. So cosine and
    sine are rational, right to 30 digits, and their squares still add up to exactly 1.
    """
    degrees = degrees % 360
    found = [
        halvings
        for multiple, most in EXACT_HALVINGS.items()
        for halvings in range(most + 1)
        if degrees * 2**halvings % multiple == 0
    ]
    if not found:
        return _rounded_angle(degrees)
    halvings = min(found)
    return _cosine(degrees, halvings), _cosine((90 - degrees) % 360, halvings)


def _cosine(degrees: Fraction, halvings: int) -> Exact:
    """Return the exact cosine of a multiple of 6 degrees halved so many times, 0 <= degrees < 360."""
    if degrees > 180:  # noqa: PLR2004 - degrees
        degrees = 360 - degrees
    if degrees > 90:  # noqa: PLR2004 - degrees
        return -_cosine(180 - degrees, halvings)
    if degrees % 6:
        return sqrt((1 + _cosine(degrees * 2, halvings)) / 2)
    # 6 = 36 - 30
    steps = int(degrees / 6)
    c36, s36 = _multiple((1 + sqrt(rational(5))) / 4, steps)
    c30, s30 = _multiple(sqrt(rational(3)) / 2, steps)
    return trimmed(c36 * c30 + s36 * s30)


def _multiple(cosine: Exact, steps: int) -> tuple[Exact, Exact]:
    """Return cosine and sine of so many times the angle (below 180 degrees) with this cosine."""
    sine = sqrt(1 - cosine * cosine)
    c, s = ONE, ZERO
    for _ in range(steps):
        c, s = c * cosine - s * sine, s * cosine + c * sine
    return c, s


def _rounded_angle(degrees: Fraction) -> tuple[Exact, Exact]:
    import mpmath  # noqa: PLC0415 - only angles that are no surds need it

    quarter_turns, rest = divmod(degrees + 45, 90)
    with mpmath.workdps(2 * ANGLE_DIGITS):
        angle = (mpmath.mpf(rest.numerator) / rest.denominator - 45) / 2
        text = mpmath.nstr(mpmath.tan(mpmath.radians(angle)), ANGLE_DIGITS + 2 * GUARD_DIGITS)
    half = Fraction(text)
    # the fraction with the smallest denominator: half the digits that a rounded decimal takes, in all that follows
    tangent, largest = Fraction(0), 10 ** (ANGLE_DIGITS // 2)
    while abs(tangent - half) > abs(half) / 10 ** (ANGLE_DIGITS + GUARD_DIGITS):
        tangent = half.limit_denominator(largest)
        largest *= 10
    below = 1 + tangent * tangent
    c, s = (1 - tangent * tangent) / below, 2 * tangent / below
    for _ in range(int(quarter_turns)):
        c, s = -s, c
    cosine, sine = rational(c), rational(s)
    return Exact(cosine.terms, rounded=True), Exact(sine.terms, rounded=True)


# --- back to text -----------------------------------------------------------------------------------------


def to_text(value: Exact) -> str:
    """Return plain infix text that ``parse`` reads back to the same value.

    Examples
    --------
    >>> to_text(parse("-20*sqrt(5)/2")), to_text(parse("sqrt(3)/2 + 1"))
    ('-10*sqrt(5)', '1 + sqrt(3)/2')
    """
    if len(value.terms) == 1 and UNIT_KEY in value.terms and isinstance(value.terms[UNIT_KEY], FracElement):
        coefficient = value.terms[UNIT_KEY]
        if coefficient.denom == 1:  # a sum of its own needs no parentheses round it
            return _polynomial_text(coefficient.numer)
    pieces = [_term_text(key, coefficient, value.tower) for key, coefficient in ordered_terms(value)]
    if not pieces:
        return "0"
    text = pieces[0]
    for piece in pieces[1:]:
        text += f" - {piece[1:]}" if piece.startswith("-") else f" + {piece}"
    return text


def ordered_terms(value: Exact) -> list[tuple[tuple[int, int], Any]]:
    """Return the terms in the order they are printed: rational part first, then by radicand."""
    return sorted(value.terms.items(), key=lambda item: (item[0][1], item[0][0]))


def _term_text(key: tuple[int, int], coefficient: Any, tower: tuple[Exact, ...]) -> str:
    n, mask = key
    roots = [f"sqrt({n})"] if n > 1 else []
    roots += [f"sqrt({to_text(radicand)})" for index, radicand in enumerate(tower) if mask >> index & 1]
    if isinstance(coefficient, FracElement):
        return "*".join([_fraction_text(coefficient), *roots])
    top, below = int(coefficient.numerator), int(coefficient.denominator)
    sign = "-" if top < 0 else ""
    factors = [str(abs(top))] if abs(top) != 1 or not roots else []
    text = sign + "*".join(factors + roots)
    return text if below == 1 else f"{text}/{below}"


def _fraction_text(coefficient: Any) -> str:
    """Return a rational function of symbols; a single term keeps its sign in front."""
    top, below = _polynomial_text(coefficient.numer), _polynomial_text(coefficient.denom)
    if below == "1":
        return top if len(coefficient.numer.terms()) == 1 else f"({top})"
    if len(coefficient.numer.terms()) > 1:
        top = f"({top})"
    simple = len(coefficient.denom.terms()) == 1 and "*" not in below
    return f"{top}/{below if simple else f'({below})'}"


def _polynomial_text(polynomial: Any) -> str:
    names = [str(x) for x in polynomial.ring.symbols]
    text = ""
    for powers, factor in polynomial.terms():
        symbols = [
            name if power == 1 else f"{name}^{power}" for name, power in zip(names, powers, strict=True) if power
        ]
        top, below = int(abs(factor).numerator), int(factor.denominator)
        pieces = ([str(top)] if top != 1 or not symbols else []) + symbols
        piece = "*".join(pieces) + (f"/{below}" if below != 1 else "")
        negative = factor < 0
        text += (" - " if negative else " + ") + piece if text else ("-" if negative else "") + piece
    return text or "0"
