"""Mathematics in every output language: the same tree, nothing lost, names harmless."""

from __future__ import annotations

import re
from random import Random

import pytest

from trusscalc.errors import RenderError
from trusscalc.exacttext import parse
from trusscalc.render.mathtext import Latex, Plain, upright
from trusscalc.sheet.blocks import Bracket, Decimals, Formula, Name, Power, Product, Value

Factor = Value | Decimals | Name | Bracket


def plus(factors: tuple[Factor, ...]) -> Product:
    """Return a product with a plus sign."""
    return Product(negative=False, factors=factors)


def minus(factors: tuple[Factor, ...]) -> Product:
    """Return a product with a minus sign."""
    return Product(negative=True, factors=factors)


# exact text, plain text, LaTeX; typesetting is our own house style, no source
NUMBERS = [
    ("0", "0", "0"),
    ("-600", "−600", "-600"),
    ("5/2", "2.5", "2.5"),
    ("1/3", "1/3", r"\frac{1}{3}"),
    ("-1/8", "−0.125", "-0.125"),
    ("1/16", "1/16", r"\frac{1}{16}"),
    ("-140*sqrt(13)", "−140√13", r"-140\sqrt{13}"),
    ("sqrt(3)/2", "√3/2", r"\frac{\sqrt{3}}{2}"),
    ("1 + sqrt(3)", "1 + √3", r"1 + \sqrt{3}"),
    ("sqrt(2 + sqrt(2))", "√(2 + √2)", r"\sqrt{2 + \sqrt{2}}"),
    ("-3*P/2", "−3P/2", r"-\frac{3\,P}{2}"),
    ("P + 2*Q - 1", "P + 2Q − 1", r"P + 2\,Q - 1"),
    ("-5*P - 6*Q", "−(5P + 6Q)", r"-\left(5\,P + 6\,Q\right)"),
    ("-P - Q - sqrt(2)", "−(P + Q) − √2", r"-\left(P + Q\right) - \sqrt{2}"),
    ("-(P + 25)*sqrt(3)/6", "−(P + 25)√3/6", r"-\frac{\left(P + 25\right)\sqrt{3}}{6}"),
]


@pytest.mark.parametrize(("text", "plain", "latex"), NUMBERS)
def test_exact_numbers(text: str, plain: str, latex: str) -> None:
    """An exact number is written in full in both languages."""
    value = Value(parse(text, ["P", "Q"]))
    assert Plain().write(value) == plain
    assert Latex().write(value) == latex


def test_what_is_written_is_the_number() -> None:
    """Plain text of numbers with roots, nested roots and symbols, read by other rules, has the same value."""
    random = Random(7)
    parts = ["P", "Q", "P*Q", "P^2", "1", "sqrt(2)", "sqrt(3)", "P*sqrt(2)", "Q*sqrt(6)", "sqrt(2 + sqrt(2))"]
    at = {"P": parse("7/3"), "Q": parse("-11/7")}
    for _ in range(100):
        terms = random.sample(parts, random.randint(1, 4))
        factors = [f"({random.randint(-9, 9)}/{random.choice([1, 1, 2, 3, 8, 12])})" for _ in terms]
        text = " + ".join(f"{factor}*{term}" for factor, term in zip(factors, terms, strict=True))
        value = parse(f"({text})/{random.choice(['1', '2', '(P + 1)', 'P', 'sqrt(5)'])}", ["P", "Q"])
        for role in ("amount", "arm", "cosine"):
            written = Plain().write(Value(value, role))
            assert read_plain(written) == pytest.approx(float(value.substitute(at)), rel=1e-12, abs=1e-12), written
            product = Formula((plus((Value(parse("1")),)), minus((Value(parse("5")), Value(value, role)))), ())
            expected = 1 - 5 * float(value.substitute(at))
            assert read_plain(Plain().write(product)) == pytest.approx(expected, rel=1e-12, abs=1e-12), written


def read_plain(written: str) -> float:
    """Return the value of plain text at P = 7/3, Q = -11/7."""
    code = written.replace("−", "-").replace("·", "*").replace("^", "**")
    code = re.sub(r"(?<=[\dPQ)])\s*(?=[PQ√(])", "*", code)
    code = re.sub(r"√(\d+)", r"(\1)**0.5", code)
    code = code.replace("√(", "root(")
    assert re.fullmatch(r"[\d.+\-*/()PQ root]*", code), code
    names = {"__builtins__": {}, "P": 7 / 3, "Q": -11 / 7, "root": lambda x: x**0.5}
    return float(eval(code, names))  # noqa: S307 - our own text, characters checked


@pytest.mark.parametrize(
    ("text", "role", "plain"),
    [
        ("3*sqrt(13)/13", "cosine", "3/√13"),
        ("11*sqrt(2)/4", "arm", "11/(2√2)"),
        ("4/5", "cosine", "4/5"),
        ("13/5", "arm", "2.6"),
    ],
)
def test_cosines_and_arms(text: str, role: str, plain: str) -> None:
    """Cosines and arms have their root below, as on a slope triangle; only cosines stay fractions."""
    assert Plain().write(Value(parse(text), role)) == plain  # type: ignore[arg-type]


def test_a_sum_keeps_its_order_signs_dots_and_brackets() -> None:
    """Terms stand as given; a raised dot stands between numbers only; negative factors are in brackets."""
    force = Name("N", "U3–U4", sought=True)
    line = Formula(
        (
            minus((Value(parse("12")), Value(parse("420")))),
            plus((Bracket((plus((Value(parse("4")),)), plus((Value(parse("8")),)))), Value(parse("120")))),
            plus((Value(parse("3/5"), "cosine"), Value(parse("-250")))),
            minus((Value(parse("6")), force)),
        ),
        (plus((Value(parse("0")),)),),
    )
    assert Plain().write(line) == "−12 · 420 + (4 + 8) · 120 + (3/5) · (−250) − 6 N_U3–U4 = 0"
    assert Latex().write(line) == (
        r"-12 \cdot 420 + \left(4 + 8\right) \cdot 120 + \frac{3}{5} \cdot \left(-250\right) - "
        r"6\,\textcolor{#257a9a}{N_{\text{U3–U4}}} = 0"
    )


def test_roundings_are_marked() -> None:
    """A line with a rounded decimal says that it holds approximately."""
    left = (plus((Decimals("0.25"), Name("N", "a–b"))),)
    line = Formula(left, (minus((Decimals("7.5"),)),), approximately=True)
    assert Plain().write(line) == "0.25 N_a–b ≈ −7.5"
    assert Latex().write(line) == r"0.25\,N_{\text{a–b}} \approx -7.5"


def test_powers_of_ten() -> None:
    """Bounds and sizes are written as powers of ten."""
    assert Plain().write(Power("", -7, below=True)) == "< 10^−7"
    assert Latex().write(Power("6.0", -7)) == r"6.0 \cdot 10^{-7}"


@pytest.mark.parametrize(
    "name", ["A<b>", "P$1$", "x|y", "\\frac{", "a`b`", "{}", "a^b~", "@@0@@", "Ж β′", "a_b", "50%", "#1", "&"]
)
def test_no_name_leaves_its_formula(name: str) -> None:
    """Whatever a name holds, its LaTeX has no dollar, bar, angle bracket or stray backslash, and even braces."""
    written = upright(name)
    assert not set("$|<>`~@^") & set(written)
    assert set(re.findall(r"\\[a-zA-Z]+|\\.", written)) <= {r"\text", r"\_", r"\#", r"\%", r"\&"}
    assert written.count("{") == written.count("}")


def test_something_else_is_refused() -> None:
    """What is no mathematics is an error, never nothing."""
    with pytest.raises(RenderError, match="no mathematics"):
        Plain().write("x")  # type: ignore[arg-type]
    with pytest.raises(RenderError, match="without factors"):
        Plain().write(Formula((plus(()),), ()))
