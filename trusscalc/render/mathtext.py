r"""Mathematics written out: one emitter for each output language, all from the same tree.

A language is a class with one method for each kind of node of ``mathtree``: LaTeX for notebooks, plain text
for files; another language is another class.
"""

from __future__ import annotations

import unicodedata
from abc import ABC, abstractmethod
from typing import Final

from trusscalc.errors import RenderError
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
from trusscalc.sheet.blocks import Bracket, Decimals, Formula, Name, Power, Value


class Language(ABC):
    """An output language: how each kind of node is written."""

    def write(self, item: Mathematics | Node) -> str:  # noqa: C901, PLR0911 - one line for each kind of node
        """Return a piece of mathematics, or a node of its tree, in this language."""
        match item:
            case Formula() | Value() | Decimals() | Name() | Power() | Bracket():
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
        if not isinstance(below, (Digits, Letter)) and not (
            isinstance(below, Root) and isinstance(below.inside, Digits)
        ):
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
