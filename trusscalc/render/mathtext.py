r"""Mathematics written out: one tree for every formula, one emitter for each output language.

``tree`` turns the document model's mathematics into a tree that already holds every decision of layout
(fractions, roots, brackets, raised dots, signs). A language is a class with one method for each kind of
node, so that no two outputs can differ in what they say: LaTeX for notebooks, plain text for files.
"""

from __future__ import annotations

import unicodedata
from abc import ABC, abstractmethod
from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Final

from sympy.polys.fields import FracElement

from trusscalc.errors import RenderError
from trusscalc.exact import Exact
from trusscalc.exacttext import ordered_terms
from trusscalc.sheet.blocks import Bracket, Decimals, Formula, Name, Power, Product, Value

MOST_PLACES: Final = 3
"""A fraction that ends within so many decimal places may be written as a decimal."""

Mathematics = Formula | Value | Decimals | Name | Power

# --- the tree ---------------------------------------------------------------------------------------------


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


def tree(item: Mathematics) -> Node:
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
            return Relation(_sum(left), "≈" if approximately else "=", _sum(right))
        case Value():
            return _number(item)
        case Decimals(text):
            return _signed(text)
        case Name(base, subscript, sought):
            return Force(base, subscript, sought)
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
    if len(terms) == 1 and not terms[0][0]:
        return terms[0][1]
    return Sum(tuple(terms)) if terms else ZERO


def _product(product: Product) -> Node:
    nodes: list[Node] = []
    dots: list[bool] = []
    previous_is_number = False
    for factor in product.factors:
        is_number = isinstance(factor, (Value, Decimals))
        match factor:
            case Bracket(terms):
                node: Node = Brackets(_sum(terms))
            case _:
                node = tree(factor)
        if isinstance(node, Sum) and len(product.factors) > 1:
            node = Brackets(node)
        dots.append(bool(nodes) and (is_number or isinstance(factor, Bracket)) and previous_is_number)
        nodes.append(node)
        previous_is_number = is_number or isinstance(factor, Bracket)
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
    return Sum(tuple(terms))


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
    if scaled.denominator != 1:
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


# --- languages --------------------------------------------------------------------------------------------


class Language(ABC):
    """An output language: how each kind of node is written."""

    def write(self, item: Mathematics | Node) -> str:
        """Return a piece of mathematics, or a node of its tree, in this language."""
        match item:
            case Formula() | Value() | Decimals() | Name() | Power():
                return self.write(tree(item))
            case Digits(text):
                return self.digits(text)
            case Letter(text):
                return self.letter(text)
            case Force(base, subscript, sought):
                return self.force(base, subscript, sought=sought)
            case Root(inside):
                return self.root(inside)
            case Over(top, below):
                return self.over(top, below)
            case Raised(base, exponent):
                return self.raised(self.write(base), exponent)
            case Row(factors, dots):
                return self.row(factors, dots)
            case Sum(terms):
                return "".join(
                    self.sign(negative, first=place == 0) + self.write(node)
                    for place, (negative, node) in enumerate(terms)
                )
            case Brackets(inside):
                return self.brackets(self.write(inside))
            case Relation(left, sign, right):
                return self.relation(left, sign, right)
        message = f"{type(item).__name__} is no mathematics this version can write"
        raise RenderError(message)

    @abstractmethod
    def digits(self, text: str) -> str:
        """Return a number without sign."""

    @abstractmethod
    def letter(self, text: str) -> str:
        """Return a symbol."""

    @abstractmethod
    def force(self, base: str, subscript: str, *, sought: bool) -> str:
        """Return a force with its subscript."""

    @abstractmethod
    def root(self, inside: Node) -> str:
        """Return a square root."""

    @abstractmethod
    def over(self, top: Node, below: Node) -> str:
        """Return a fraction."""

    @abstractmethod
    def raised(self, base: str, exponent: int) -> str:
        """Return a power."""

    @abstractmethod
    def row(self, factors: tuple[Node, ...], dots: tuple[bool, ...]) -> str:
        """Return factors side by side."""

    @abstractmethod
    def sign(self, negative: bool, *, first: bool) -> str:
        """Return the sign before a term of a sum."""

    @abstractmethod
    def brackets(self, inside: str) -> str:
        """Return something in round brackets."""

    @abstractmethod
    def relation(self, left: Node | None, sign: str, right: Node) -> str:
        """Return two sides and the sign between them."""


class Plain(Language):
    """Text a typewriter could set, with true minus signs and root signs.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> Plain().write(Value(parse("-20*sqrt(5)/3 + 1/2"))), Plain().write(Name("N", "U3–U4"))
    ('1/2 − 20√5/3', 'N_U3–U4')
    """

    def digits(self, text: str) -> str:
        """Return the digits."""
        return text

    def letter(self, text: str) -> str:
        """Return the symbol."""
        return text

    def force(self, base: str, subscript: str, *, sought: bool) -> str:
        """Return ``N_U3–U4``, the subscript in brackets when it is not plain."""
        del sought
        plain = all(unicodedata.category(c)[0] in "LMN" or c in "–,'’′" for c in subscript)
        bracketed = plain or (subscript.startswith("(") and subscript.endswith(")"))
        return f"{base}_{subscript}" if bracketed else f"{base}_({subscript})"

    def root(self, inside: Node) -> str:
        """Return ``√5``, ``√(2 + √2)``."""
        text = self.write(inside)
        return f"√{text}" if isinstance(inside, Digits) else f"√({text})"

    def over(self, top: Node, below: Node) -> str:
        """Return ``5√3/2``, sums in brackets."""
        first, second = self.write(top), self.write(below)
        if isinstance(top, (Sum, Over)):
            first = f"({first})"
        if not isinstance(below, (Digits, Letter)) and not (isinstance(below, Root) and isinstance(below.inside, Digits)):
            second = f"({second})"
        return f"{first}/{second}"

    def raised(self, base: str, exponent: int) -> str:
        """Return ``10^−7``."""
        return f"{base}^{str(exponent).replace('-', '−')}"

    def row(self, factors: tuple[Node, ...], dots: tuple[bool, ...]) -> str:
        """Return factors; a fraction before a name in brackets."""
        text = ""
        for place, (node, dot) in enumerate(zip(factors, dots, strict=True)):
            written = self.write(node)
            if isinstance(node, Over) and place + 1 < len(factors):
                written = f"({written})"
            tight = isinstance(node, Root) or (place and isinstance(factors[place - 1], (Brackets, Letter)))
            joint = " · " if dot else ("" if tight or isinstance(node, (Letter, Raised)) else " ")
            text += (joint if text else "") + written
        return text

    def sign(self, negative: bool, *, first: bool) -> str:
        """Return ``−`` or `` + ``."""
        if first:
            return "−" if negative else ""
        return " − " if negative else " + "

    def brackets(self, inside: str) -> str:
        """Return ``(...)``."""
        return f"({inside})"

    def relation(self, left: Node | None, sign: str, right: Node) -> str:
        """Return ``left = right``."""
        return f"{sign} {self.write(right)}" if left is None else f"{self.write(left)} {sign} {self.write(right)}"


class Latex(Language):
    r"""LaTeX for what notebooks typeset; macros known to MathJax and KaTeX alike.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> Latex().write(Value(parse("-20*sqrt(5)/3")))
    '-\\frac{20\\sqrt{5}}{3}'
    """

    ACCENT: Final = "#257a9a"
    """The sought force's ink: petrol, light enough to be read on a dark screen (4.9 on white, 3.9 on black)."""

    def digits(self, text: str) -> str:
        """Return the digits."""
        return text

    def letter(self, text: str) -> str:
        """Return the symbol; of more than one letter, upright."""
        return text if len(text) == 1 and text.isascii() else upright(text)

    def force(self, base: str, subscript: str, *, sought: bool) -> str:
        """Return the force, the sought one in the accent's ink."""
        symbol = rf"\Sigma {base[1:]}" if base.startswith("Σ") else base
        text = f"{symbol}_{{{upright(subscript)}}}"
        return rf"\textcolor{{{self.ACCENT}}}{{{text}}}" if sought else text

    def root(self, inside: Node) -> str:
        """Return a root."""
        return rf"\sqrt{{{self.write(inside)}}}"

    def over(self, top: Node, below: Node) -> str:
        """Return a built-up fraction."""
        return rf"\frac{{{self.write(top)}}}{{{self.write(below)}}}"

    def raised(self, base: str, exponent: int) -> str:
        """Return a power."""
        return f"{base}^{{{exponent}}}"

    def row(self, factors: tuple[Node, ...], dots: tuple[bool, ...]) -> str:
        """Return factors, a thin space before a name."""
        text = ""
        for node, dot in zip(factors, dots, strict=True):
            joint = r" \cdot " if dot else (r"\," if isinstance(node, (Force, Letter)) else "")
            text += (joint if text else "") + self.write(node)
        return text

    def sign(self, negative: bool, *, first: bool) -> str:
        """Return the sign."""
        if first:
            return "-" if negative else ""
        return " - " if negative else " + "

    def brackets(self, inside: str) -> str:
        """Return brackets that grow."""
        return rf"\left({inside}\right)"

    def relation(self, left: Node | None, sign: str, right: Node) -> str:
        """Return both sides; a side that starts with a sign keeps it close."""
        macro = {"=": "=", "≈": r"\approx", "<": r"\lt"}[sign]
        return f"{'' if left is None else self.write(left) + ' '}{macro} {self.write(right)}"


ESCAPED: Final = {"_": r"\_", "#": r"\#", "%": r"\%", "&": r"\&"}
"""Characters with a macro of their own in the mathematics of MathJax and KaTeX alike."""


def upright(text: str) -> str:
    r"""Return a name for the mathematics of a notebook's Markdown, whatever characters it holds.

    Letters, digits, blanks and primes go into ``\text``; four signs have macros; any other character is told
    by its number, because ``$``, a backslash, a bar or an angle bracket would end the formula, the table row
    or the text.

    Examples
    --------
    >>> upright("L0–U1"), upright("a_b"), upright("x|y")
    ('\\text{L0–U1}', '\\text{a}\\_\\text{b}', '\\text{x(U+7C)y}')
    """
    pieces: list[str] = []
    run = ""
    for character in text:
        if character in ESCAPED:
            pieces += [rf"\text{{{run}}}"] * bool(run) + [ESCAPED[character]]
            run = ""
        elif character in " –,'’′().*+" or unicodedata.category(character)[0] in "LMN":
            run += character
        else:
            run += f"(U+{ord(character):02X})"
    return "".join(pieces + [rf"\text{{{run}}}"] * bool(run))
