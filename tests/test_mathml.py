"""Mathematics as MathML: read back by a parser of its own, it says what plain text says."""

from __future__ import annotations

import math
from xml.etree import ElementTree as ET

import pytest
import sheet_cases

from trusscalc.errors import RenderError
from trusscalc.exacttext import parse
from trusscalc.render.mathml import WIDEST, formula, mathml
from trusscalc.render.mathtext import Plain
from trusscalc.sheet.blocks import Bracket, Decimals, Derivation, Formula, Name, Power, Product, Value
from trusscalc.sheet.compose import compose

KNOWN = {"math", "mrow", "mn", "mi", "mo", "mtext", "mfrac", "msqrt", "msub", "msup"}
CHILDREN = {"mfrac": 2, "msub": 2, "msup": 2}


def read(markup: str) -> str:
    """Return MathML as arithmetic in Python, written here without any code of the package."""
    return arithmetic(ET.fromstring(markup))  # noqa: S314 - written by this package


def arithmetic(element: ET.Element) -> str:
    """Return one element as arithmetic."""
    assert element.tag in KNOWN
    if element.tag in CHILDREN:
        assert len(element) == CHILDREN[element.tag], "what a browser would refuse to set"
    parts = [arithmetic(inner) for inner in element]
    if element.tag == "mfrac":
        return f"(({parts[0]})/({parts[1]}))"
    if element.tag == "msqrt":
        return f"sqrt({''.join(parts)})"
    if element.tag == "msup":
        return f"({parts[0]})**({parts[1]})"
    text = element.text or ""
    if element.tag == "mo":
        return {"−": "-", "·": "*", "\N{INVISIBLE TIMES}": "*", "=": "=", "≈": "="}.get(text, text)
    return text + "".join(parts)


@pytest.mark.parametrize(
    "written",
    [
        "0",
        "-600",
        "2.5",
        "1/3",
        "-20*sqrt(5)/3 + 1/2",
        "sqrt(2 + sqrt(2))",
        "3*sqrt(13)/13",
        "7 - sqrt(3)/2 - 5*sqrt(2)",
        "-sqrt(2)*(1 + sqrt(3))/7",
    ],
)
@pytest.mark.parametrize("role", ["amount", "arm", "cosine"])
def test_a_number_read_back_is_the_number(written: str, role: str) -> None:
    """Fractions, roots and signs survive the way through MathML."""
    value = parse(written)
    found = eval(read(mathml(Value(value, role))), {"__builtins__": {}, "sqrt": math.sqrt})  # type: ignore[arg-type]  # noqa: S307
    assert math.isclose(found, float(value), rel_tol=1e-12, abs_tol=1e-12)


def test_symbols_signs_and_powers() -> None:
    """One letter or several, a power of ten, a bound, a sum as a factor."""
    assert read(mathml(Value(parse("3*P/2", {"P"})))) == "((3*P)/(2))"
    assert "<mi>Wind</mi>" in mathml(Value(parse("Wind", {"Wind"})))
    assert read(mathml(Power("6.0", -7))) == "6.0*(10)**(-7)"
    assert read(mathml(Power("", -7, below=True))) == "<(10)**(-7)"
    sums = Bracket((Product(False, (Value(parse("4")),)), Product(True, (Value(parse("8")),))))  # noqa: FBT003
    assert read(mathml(sums)) == "(4-8)"


def test_the_sought_force_is_marked_and_its_name_is_text() -> None:
    """A hostile subscript is letters and nothing else."""
    written = mathml(Name("N", "A<b>–&x", sought=True))
    assert 'class="sought"' in written
    assert "<b>" not in written
    assert read(written) == "NA<b>–&x"
    assert 'class="sought"' not in mathml(Name("R", "L0,y"))


@pytest.mark.parametrize("case", ["k_truss", "arch", "hexagon", "many_loads", "hostile"])
def test_every_equation_of_a_sheet_says_what_the_text_says(case: str) -> None:
    """In one piece or in several: well made, and number for number, sign for sign, the plain line."""
    sheet = compose(sheet_cases.ALL[case](), drawings=False)
    lines = [
        line.formula
        for block in sheet.blocks
        if isinstance(block, Derivation)
        for part in (block.lines, block.check)
        if part
        for line in part.lines
    ]
    assert lines
    for line in lines:
        pieces = formula(line).replace("</math> <math", "</math>\n<math").split("\n")
        assert (len(pieces) > 1) <= (len(Plain().write(line)) > WIDEST)
        assert signs("".join(map(read, pieces))) == signs(plain(line))


def plain(line: Formula) -> str:
    """Return a line's plain text with the signs of arithmetic."""
    return Plain().write(line).replace("−", "-").replace("·", "*").replace("√", "sqrt").replace("≈", "=")


def signs(text: str) -> list[str]:
    """Return the letters, digits and signs of a line without brackets, blanks and products left unwritten."""
    return [letter for letter in text.replace("**", "^") if not letter.isspace() and letter not in "()*_"]


def test_what_is_no_mathematics_is_refused() -> None:
    """Nothing is skipped in silence."""
    with pytest.raises(RenderError, match="str"):
        mathml("5")  # type: ignore[arg-type]


def test_decimals_keep_their_digits() -> None:
    """A rounded decimal is written digit by digit, its minus sign a sign."""
    assert read(mathml(Decimals("-600.000"))) == "-600.000"
