"""The tree of a formula: every decision of layout, before any output language.

Fractions, roots, brackets, raised dots and signs are decided here, once, so that no two outputs can differ in
what they say.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Final

from sympy.polys.fields import FracElement

from trusscalc.errors import RenderError
from trusscalc.exact import Exact
from trusscalc.exacttext import ordered_terms
from trusscalc.sheet.blocks import Bracket, Decimals, Formula, Name, Power, Product, Value

MOST_PLACES: Final = 6
FEW_PLACES: Final = 3
SMALL_DENOMINATOR: Final = 100
"""A fraction that ends within few decimal places is written as a decimal; within more, if it is no short fraction."""

Mathematics = Formula | Value | Decimals | Name | Power | Bracket


@dataclass(frozen=True, slots=True)
class Digits:
    """A number without sign."""

    text: str


@dataclass(frozen=True, slots=True)
class Letter:
    """A symbol of the engineer's."""

    text: str


@dataclass(frozen=True, slots=True)
class Force:
    """A force in symbols."""

    base: str
    subscript: str
    sought: bool


@dataclass(frozen=True, slots=True)
class Root:
    """A square root."""

    inside: Node


@dataclass(frozen=True, slots=True)
class Over:
    """A built-up fraction."""

    top: Node
    below: Node


@dataclass(frozen=True, slots=True)
class Raised:
    """A power."""

    base: Node
    exponent: int


@dataclass(frozen=True, slots=True)
class Row:
    """Factors side by side; ``dots`` tells before which a raised dot stands."""

    factors: tuple[Node, ...]
    dots: tuple[bool, ...]


@dataclass(frozen=True, slots=True)
class Sum:
    """Signed terms; the first one's plus is not written."""

    terms: tuple[tuple[bool, Node], ...]


@dataclass(frozen=True, slots=True)
class Brackets:
    """Round brackets."""

    inside: Node


@dataclass(frozen=True, slots=True)
class Relation:
    """Left side, sign (``=``, ``≈`` or ``<``), right side; the left side may be missing."""

    left: Node | None
    sign: str
    right: Node


Node = Digits | Letter | Force | Root | Over | Raised | Row | Sum | Brackets | Relation

ZERO: Final = Digits("0")


def tree(item: Mathematics) -> Node:  # noqa: PLR0911 - one line for each kind of mathematics
    """Return the tree of a piece of mathematics.

    Raises
    ------
    RenderError
        For anything that is none.
    """
    match item:
        case Formula(left, right, approximately):
            if not right:
                return _sum(left)
            return Relation(_sum(left) if left else None, "≈" if approximately else "=", _sum(right))
        case Value():
            return _number(item)
        case Decimals(text):
            return _signed(text)
        case Name(base, subscript, sought):
            return Force(base, subscript, sought)
        case Bracket(terms):
            return Brackets(_sum(terms))
        case Power(mantissa, exponent, below):
            power = Raised(Digits("10"), exponent)
            size = Row((Digits(mantissa), power), (False, True)) if mantissa else power
            return Relation(None, "<", size) if below else size
    message = f"{type(item).__name__} is no mathematics this version can write"
    raise RenderError(message)


def _sum(products: tuple[Product, ...]) -> Node:
    terms = []
    for product in products:
        node = _product(product)
        if isinstance(node, Sum) and (product.negative or len(products) > 1):
            node = Brackets(node)
        terms.append((product.negative, node))
    if len(terms) > 1 and not terms[0][0] and isinstance(terms[0][1], Brackets):
        inside = terms[0][1].inside
        if isinstance(inside, Sum) and len(inside.terms) == 1:
            terms[0] = inside.terms[0]  # a minus sign that stands first needs no brackets
    if len(terms) == 1 and not terms[0][0]:
        return terms[0][1]
    return Sum(tuple(terms)) if terms else ZERO


def _product(product: Product) -> Node:
    nodes: list[Node] = []
    dots: list[bool] = []
    previous_is_number = False
    for factor in product.factors:
        is_number = isinstance(factor, (Value, Decimals, Bracket))
        node = tree(factor)
        if isinstance(node, Sum) and len(product.factors) > 1:
            node = Brackets(node)
        dots.append(bool(nodes) and is_number and previous_is_number)
        nodes.append(node)
        previous_is_number = is_number
    if not nodes:
        message = "a product without factors cannot be written"
        raise RenderError(message)
    return nodes[0] if len(nodes) == 1 else Row(tuple(nodes), tuple(dots))


def _signed(text: str) -> Node:
    return Sum(((True, Digits(text[1:])),)) if text.startswith("-") else Digits(text)


def _number(item: Value) -> Node:
    """Return an exact number: terms over one another's denominators, roots, symbols."""
    value = item.value
    if item.role != "cosine" and value.is_rational:
        short = _short_decimal(value.as_fraction())
        if short:
            return _signed(short)
    terms = [_term(key, coefficient, value.tower) for key, coefficient in ordered_terms(value)]
    if item.role != "amount" and len(value.terms) == 1 and not value.symbols:
        terms = [_root_below(value) or terms[0]]
    if not terms:
        return ZERO
    if len(terms) == 1 and not terms[0][0]:
        return terms[0][1]
    # the sign before a sum of symbols holds for all of it
    return Sum(tuple((negative, Brackets(node) if isinstance(node, Sum) else node) for negative, node in terms))


def _root_below(value: Exact) -> tuple[bool, Node] | None:
    """Return 3√13/13 as 3/√13, where the denominator allows it."""
    ((n, mask), coefficient) = next(iter(value.terms.items()))
    top, below = int(coefficient.numerator), int(coefficient.denominator)
    if n == 1 or mask or below % n:
        return None
    factors: list[Node] = [Digits(str(below // n))] if below != n else []
    return top < 0, Over(Digits(str(abs(top))), _beside([*factors, Root(Digits(str(n)))]))


def _short_decimal(value: Fraction) -> str:
    scaled = value * 10**MOST_PLACES
    short = value.denominator < SMALL_DENOMINATOR
    if scaled.denominator != 1 or (short and (value * 10**FEW_PLACES).denominator != 1):
        return ""
    whole, rest = divmod(abs(int(scaled)), 10**MOST_PLACES)
    text = f"{whole}.{rest:0{MOST_PLACES}d}".rstrip("0").rstrip(".")
    return f"-{text}" if value < 0 else text


def _term(key: tuple[int, int], coefficient: Any, tower: tuple[Exact, ...]) -> tuple[bool, Node]:
    """Return one term: whether it is negative, and its size."""
    n, mask = key
    roots: list[Node] = [Root(Digits(str(n)))] if n > 1 else []
    roots += [Root(_number(Value(r, "cosine"))) for index, r in enumerate(tower) if mask >> index & 1]
    if isinstance(coefficient, FracElement):
        return _with_symbols(coefficient, roots)
    top, below = int(coefficient.numerator), int(coefficient.denominator)
    factors: list[Node] = [Digits(str(abs(top)))] if abs(top) != 1 or not roots else []
    over = _beside(factors + roots)
    return top < 0, over if below == 1 else Over(over, Digits(str(below)))


def _with_symbols(coefficient: Any, roots: list[Node]) -> tuple[bool, Node]:
    negative, top = _polynomial(coefficient.numer)
    below_negative, below = _polynomial(coefficient.denom)
    if isinstance(top, Sum) and roots:
        top = Brackets(top)
    if roots:
        top = _beside([*([] if top == Digits("1") else [top]), *roots])
    if below == Digits("1"):
        return negative != below_negative, top
    return negative != below_negative, Over(top, below)


def _polynomial(polynomial: Any) -> tuple[bool, Node]:
    """Return a polynomial in the symbols; one term's sign apart, a denominator below its term."""
    names = [str(x) for x in polynomial.ring.symbols]
    terms = []
    for powers, factor in polynomial.terms():
        letters: list[Node] = [
            Letter(name) if power == 1 else Raised(Letter(name), power)
            for name, power in zip(names, powers, strict=True)
            if power
        ]
        top, below = abs(int(factor.numerator)), int(factor.denominator)
        number: list[Node] = [Digits(str(top))] if top != 1 or not letters else []
        node = _beside(number + letters)
        terms.append((factor < 0, node if below == 1 else Over(node, Digits(str(below)))))
    if not terms:
        return False, ZERO
    if len(terms) == 1:
        return terms[0]
    backwards = all(negative for negative, _ in terms)
    return backwards, Sum(tuple((bool(negative) and not backwards, node) for negative, node in terms))


def _beside(factors: list[Node]) -> Node:
    return factors[0] if len(factors) == 1 else Row(tuple(factors), (False,) * len(factors))
