"""Mathematics as presentation MathML, from the same tree as every other output.

Written by hand for what browsers set natively (MathML Core). A browser does not break a formula into lines, so a
long one is written in pieces, each beginning with its plus, minus or relation sign, between which the page may.
"""

from __future__ import annotations

import html
from collections.abc import Iterator
from typing import Final

from trusscalc.render.mathtext import Language, Plain
from trusscalc.render.mathtree import (
    Brackets,
    Digits,
    Force,
    Letter,
    Mathematics,
    Node,
    Over,
    Raised,
    Relation,
    Root,
    Sum,
    tree,
)

WIDEST: Final = 28
"""Characters of a formula written in one piece: what fits a telephone held upright."""
TIMES: Final = "<mo>&#8290;</mo>"
"""Multiplication that is heard, not seen."""

_plain = Plain()


class MathML(Language):
    """Presentation MathML without the ``math`` element around it.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> from trusscalc.sheet.blocks import Value
    >>> MathML().write(Value(parse("-2*sqrt(5)/3"))).replace(TIMES, "*")
    '<mo form="prefix">−</mo><mfrac><mrow><mn>2</mn>*<msqrt><mn>5</mn></msqrt></mrow><mn>3</mn></mfrac>'
    """

    def digits(self, text: str) -> str:
        """Return a number without sign."""
        return f"<mn>{_text(text)}</mn>"

    def letter(self, text: str) -> str:
        """Return a symbol: one letter slanted, several upright, as browsers do by themselves."""
        return f"<mi>{_text(text)}</mi>"

    def force(self, base: str, subscript: str, *, sought: bool) -> str:
        """Return a force with its subscript, the sought one in the accent's ink."""
        symbol = self.letter(base)
        if base.startswith("Σ"):
            symbol = f'<mrow><mo lspace="0" rspace="0">Σ</mo>{self.letter(base[1:])}</mrow>'
        mark = ' class="sought"' if sought else ""
        return f"<msub{mark}>{symbol}<mtext>{_text(subscript)}</mtext></msub>"

    def root(self, inside: Node) -> str:
        """Return a square root."""
        return f"<msqrt>{self.write(inside)}</msqrt>"

    def over(self, top: Node, below: Node) -> str:
        """Return a built-up fraction."""
        return f"<mfrac>{self._one(top)}{self._one(below)}</mfrac>"

    def raised(self, base: str, exponent: int) -> str:
        """Return a power."""
        number = f"<mn>{abs(exponent)}</mn>"
        power = f"<mrow>{self.sign(negative=True, first=True)}{number}</mrow>" if exponent < 0 else number
        return f"<msup><mrow>{base}</mrow>{power}</msup>"

    def row(self, factors: tuple[Node, ...], dots: tuple[bool, ...]) -> str:
        """Return factors side by side, a raised dot or nothing visible between them."""
        written = [
            ("<mo>·</mo>" if dot else TIMES if place else "") + self.write(node)
            for place, (node, dot) in enumerate(zip(factors, dots, strict=True))
        ]
        return "".join(written)

    def sign(self, negative: bool, *, first: bool) -> str:
        """Return the sign before a term; which one it is, is said, for a piece may begin with either."""
        if first:
            return '<mo form="prefix">−</mo>' if negative else ""
        return f'<mo form="infix">{"−" if negative else "+"}</mo>'

    def brackets(self, inside: str) -> str:
        """Return brackets that grow with what they hold."""
        return f'<mrow><mo form="prefix">(</mo>{inside}<mo form="postfix">)</mo></mrow>'

    def relation(self, left: Node | None, sign: str, right: Node) -> str:
        """Return both sides and the sign between them."""
        return f"{'' if left is None else self.write(left)}{_relation(sign)}{self.write(right)}"

    def _one(self, node: Node) -> str:
        """Return a node as one element, which a fraction's parts have to be."""
        written = self.write(node)
        return written if _is_one(node) else f"<mrow>{written}</mrow>"


_language = MathML()


def mathml(item: Mathematics) -> str:
    """Return a piece of mathematics for running text or a table, in one piece.

    Raises
    ------
    RenderError
        For anything that is no mathematics.
    """
    return _math(_language.write(item))


def formula(item: Mathematics) -> str:
    """Return a written line: one ``math`` element, or several of them that may stand on several lines.

    Raises
    ------
    RenderError
        For anything that is no mathematics.
    """
    if len(_plain.write(item)) <= WIDEST:
        return mathml(item)
    return " ".join(map(_math, _pieces(tree(item))))


def _pieces(node: Node) -> Iterator[str]:
    """Return a tree's terms, each with the sign before it."""
    if not isinstance(node, Relation):
        yield from _terms(node)
        return
    if node.left is not None:
        yield from _terms(node.left)
    first, *others = _terms(node.right)
    yield _relation(node.sign) + first
    yield from others


def _terms(node: Node) -> Iterator[str]:
    if not isinstance(node, Sum):
        yield _language.write(node)
        return
    for place, (negative, term) in enumerate(node.terms):
        yield _language.sign(negative, first=place == 0) + _language.write(term)


def _math(written: str) -> str:
    return f'<math displaystyle="true">{written}</math>'


def _relation(sign: str) -> str:
    return f'<mo form="infix">{_text(sign)}</mo>'


def _is_one(node: Node) -> bool:
    return isinstance(node, (Digits, Letter, Force, Root, Over, Raised, Brackets))


def _text(text: str) -> str:
    return html.escape(text, quote=False)
