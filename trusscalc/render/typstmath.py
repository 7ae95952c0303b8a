"""Mathematics for the typesetter of the PDF: the tree of a formula as plain lists, never as markup.

A written line becomes pieces, each of them one term with the sign before it. A piece is not broken; between two
pieces a line may end, so that long lines break before a plus, a minus or the relation sign and nowhere else.
Names stay data all the way to the page: nothing in them can be read as an instruction.
"""

from __future__ import annotations

from typing import Any, Final

from trusscalc.errors import RenderError
from trusscalc.render.mathtext import Plain
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
    Row,
    Sum,
    tree,
)

Piece = list[Any]
"""Sign or relation before the term, the term's own sign after a relation, the term, and the piece in words."""

_plain: Final = Plain()


def pieces(item: Mathematics) -> list[Piece]:
    """Return a piece of mathematics term by term, ready for JSON.

    Parameters
    ----------
    item : Mathematics
        A formula, a number, a name, a power or a sum in brackets.

    Returns
    -------
    list of [lead, sign, node, words]
        ``lead`` stands before the term with a space after it (``''``, ``+``, ``−``, ``=``, ``≈``, ``<``); ``sign``
        is the minus sign that stands close to the term, or ``''``; ``node`` is the term; ``words`` is the piece as
        plain text, for those who cannot see it.

    Raises
    ------
    RenderError
        For mathematics this version does not know.

    Examples
    --------
    >>> from trusscalc.exacttext import parse
    >>> from trusscalc.sheet.blocks import Value
    >>> [[lead, sign, words] for lead, sign, _, words in pieces(Value(parse("-20*sqrt(5)/3 + 1/2")))]
    [['', '', '1/2'], ['−', '', '− 20√5/3']]
    """
    return _pieces(tree(item))


def _pieces(node: Node) -> list[Piece]:
    if not isinstance(node, Relation):
        return _terms(node, "")
    left = [] if node.left is None else _terms(node.left, "")
    return left + _terms(node.right, node.sign)


def _terms(node: Node, lead: str) -> list[Piece]:
    """Return the terms of one side, the first of them after ``lead``."""
    found: list[Piece] = []
    for place, (negative, term) in enumerate(node.terms if isinstance(node, Sum) else ((False, node),)):
        before, sign = ("−" if negative else "+", "") if place else (lead, "−" if negative else "")
        words = f"{before} {sign}{_plain.write(term)}".strip()
        found.append([before, sign, listed(term), words])
    return found


def listed(node: Node) -> list[Any]:  # noqa: PLR0911 - one line for each kind of node
    """Return a node as a list: its kind, then what it holds.

    Raises
    ------
    RenderError
        For a node this version does not know.

    Examples
    --------
    >>> listed(Over(Digits("3"), Root(Digits("13"))))
    ['over', ['digits', '3'], ['root', ['digits', '13']]]
    """
    match node:
        case Digits(text):
            return ["digits", text]
        case Letter(text):
            return ["letter" if len(text) == 1 and text.isascii() else "word", text]
        case Force(base, subscript, sought):
            return ["force", base[:-1], base[-1:], subscript, sought]
        case Root(inside):
            return ["root", listed(inside)]
        case Over(top, below):
            return ["over", listed(top), listed(below)]
        case Raised(base, exponent):
            return ["raised", listed(base), str(exponent).replace("-", "−")]
        case Row(factors, dots):
            return ["row", [[dot, listed(factor)] for factor, dot in zip(factors, dots, strict=True)]]
        case Sum(terms):
            return ["sum", [["−" if negative else "+", listed(term)] for negative, term in terms]]
        case Brackets(inside):
            return ["brackets", listed(inside)]
    message = f"{type(node).__name__} is mathematics this version cannot set"
    raise RenderError(message)


__all__ = ["Piece", "listed", "pieces"]
