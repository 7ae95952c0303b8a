"""Mathematics for the PDF: broken at signs only, the same numbers as in every other output, names as data."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pytest
import sheet_cases

from trusscalc.errors import RenderError
from trusscalc.exacttext import parse
from trusscalc.render.mathtext import Plain
from trusscalc.render.mathtree import Digits, Node, Relation, tree
from trusscalc.render.typstmath import listed, pieces
from trusscalc.sheet import blocks
from trusscalc.sheet.blocks import Bracket, Decimals, Formula, Name, Power, Product, Value
from trusscalc.sheet.compose import compose


def product(*factors: Any, negative: bool = False) -> Product:
    """Return a product."""
    return Product(negative, factors)


def test_a_line_is_broken_before_its_signs_only() -> None:
    """Each term is one piece; the relation sign stays with the right side, a bracket in one piece."""
    formula = Formula(
        (
            product(Decimals("24"), Name("R", "L0"), negative=True),
            product(Bracket((product(Decimals("4")), product(Decimals("8")))), Decimals("120")),
            product(Decimals("6"), Name("N", "U3–U4", sought=True), negative=True),
        ),
        (product(Value(parse("-3600"))), product(Decimals("5"))),
    )
    words = [words for _, _, _, words in pieces(formula)]
    assert words == ["−24 R_L0", "+ (4 + 8) · 120", "− 6 N_U3–U4", "= −3600", "+ 5"]


def test_signs_stand_where_they_belong() -> None:
    """A first minus close to its term, a later one with room, none lost after a relation sign."""
    line = Formula((product(Decimals("2"), negative=True),), (product(Decimals("3"), negative=True),))
    assert [[lead, sign] for lead, sign, *_ in pieces(line)] == [["", "−"], ["=", "−"]]
    assert [lead for lead, *_ in pieces(Power("", -7, below=True))] == ["<"]
    rounded = Formula((), (product(Decimals("0.79")),), approximately=True)
    assert pieces(rounded) == [["≈", "", ["digits", "0.79"], "≈ 0.79"]]


def test_every_kind_of_node() -> None:
    """Fraction, root, nested root, power, letter, word, symbols in sums."""
    assert listed(tree(Value(parse("5*sqrt(3)/2")))) == [
        "over",
        ["row", [[False, ["digits", "5"]], [False, ["root", ["digits", "3"]]]]],
        ["digits", "2"],
    ]
    assert listed(tree(Value(parse("sqrt(2+sqrt(2))")))) == [
        "root",
        ["sum", [["+", ["digits", "2"]], ["+", ["root", ["digits", "2"]]]]],
    ]
    assert listed(tree(Value(parse("P", symbols=["P"])))) == ["letter", "P"]
    assert listed(tree(Value(parse("Pq", symbols=["Pq"])))) == ["word", "Pq"]
    assert listed(tree(Power("6.0", -7))) == [
        "row",
        [[False, ["digits", "6.0"]], [True, ["raised", ["digits", "10"], "−7"]]],
    ]
    assert listed(tree(Name("ΣP", "x", sought=True))) == ["force", "Σ", "P", "x", True]


def test_names_are_data() -> None:
    """What would be markup is carried as it is."""
    ((_, _, node, words),) = pieces(Name("N", '#panic("x")–$1$'))
    assert node == ["force", "", "N", '#panic("x")–$1$', False]
    assert '#panic("x")–$1$' in words


def test_unknown_mathematics_is_refused() -> None:
    """A relation inside a term, or a node of a later version."""
    with pytest.raises(RenderError, match="Relation is mathematics this version cannot set"):
        listed(Relation(None, "=", Digits("1")))


def mathematics(sheet: blocks.Sheet) -> Iterator[Any]:
    """Return all written lines of a sheet."""
    for block in sheet.blocks:
        if isinstance(block, blocks.Derivation):
            for lines in (block.lines, block.check):
                yield from (line.formula for line in lines.lines) if lines else ()


@pytest.mark.parametrize("name", sorted(sheet_cases.ALL))
def test_pieces_say_what_the_line_says(name: str) -> None:
    """The words of the pieces, joined, are the line as plain text."""
    plain = Plain()
    for formula in mathematics(compose(sheet_cases.ALL[name](), drawings=False)):
        joined = " ".join(words for _, _, _, words in pieces(formula))
        assert joined == plain.write(formula)


def test_digits_are_those_of_the_tree() -> None:
    """No number is lost or made between tree and list."""

    def numbers(node: Any) -> list[str]:
        if isinstance(node, list):
            if node[:1] == ["digits"]:
                return [node[1]]
            return [number for inner in node for number in numbers(inner)]
        return []

    def of_tree(node: Node | Any) -> list[str]:
        if isinstance(node, Digits):
            return [node.text]
        if isinstance(node, tuple):
            return [number for inner in node for number in of_tree(inner)]
        slots = getattr(node, "__slots__", ())
        return [number for slot in slots for number in of_tree(getattr(node, slot))]

    for formula in mathematics(compose(sheet_cases.arch(), drawings=False)):
        assert [n for piece in pieces(formula) for n in numbers(piece[2])] == of_tree(tree(formula))
