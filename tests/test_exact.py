"""Exact numbers against mpmath, which shares no code with them, and against what a field must obey."""

from __future__ import annotations

import contextlib
import decimal
import time
from collections.abc import Callable
from decimal import ROUND_HALF_EVEN, Context, Decimal
from fractions import Fraction

import mpmath
import numpy as np
import pytest
import sympy
from hypothesis import assume, given, reject, settings
from hypothesis import strategies as st

from trusscalc import wholenumbers
from trusscalc.decimals import approximate, rounded
from trusscalc.errors import InexactNumberError
from trusscalc.exact import ONE, ZERO, Exact, exact, rational, symbol
from trusscalc.exacttext import LONGEST_TEXT, number, parse, to_text
from trusscalc.roots import sqrt

Pair = tuple[Exact, mpmath.mpf]
"""A number, and the same number worked out by mpmath to 90 digits."""

mpmath.mp.dps = 90


def big(value: Fraction) -> mpmath.mpf:
    """Return a fraction in mpmath's arithmetic."""
    return mpmath.mpf(value.numerator) / value.denominator


def same(value: Exact, expected: mpmath.mpf, digits: int = 60) -> bool:
    """Tell whether a number has the expected value to so many digits."""
    if not value:
        return bool(abs(expected) < mpmath.mpf(10) ** -digits)
    near = mpmath.mpf(str(approximate(value, digits + 2)))
    return bool(abs(near - expected) <= abs(expected) * mpmath.mpf(10) ** -digits)


fractions = st.fractions(min_value=-50, max_value=50, max_denominator=60)
positive = st.fractions(min_value=Fraction(1, 20), max_value=50, max_denominator=20)


@st.composite
def surds(draw: st.DrawFn) -> Pair:
    """Draw a rational part and up to three square roots with rational factors."""
    value, expected = rational(first := draw(fractions)), big(first)
    for _ in range(draw(st.integers(0, 3))):
        factor, n = draw(fractions), draw(st.sampled_from([2, 3, 5, 6, 8, 12, 15, 30, 75, 1009]))
        value, expected = value + factor * sqrt(rational(n)), expected + big(factor) * mpmath.sqrt(n)
    return value, expected


@st.composite
def nested(draw: st.DrawFn) -> Pair:
    """Draw a sum of surds and one or two roots of positive surds."""
    value, expected = draw(surds())
    for _ in range(draw(st.integers(1, 2))):
        a, b = draw(positive), draw(st.fractions(min_value=0, max_value=5, max_denominator=4))
        n, factor = draw(st.sampled_from([2, 3, 5, 6])), draw(fractions)
        value = value + factor * sqrt(a + b * sqrt(rational(n)))
        expected = expected + big(factor) * mpmath.sqrt(big(a) + big(b) * mpmath.sqrt(n))
    return value, expected


class TestField:
    """What every field obeys, on random numbers of it."""

    @given(surds(), surds(), surds())
    @settings(max_examples=40, deadline=None)
    def test_laws_of_surds(self, a: Pair, b: Pair, c: Pair) -> None:
        """Associative, commutative, distributive; exactly, by ==."""
        x, y, z = a[0], b[0], c[0]
        assert (x + y) + z == x + (y + z)
        assert (x * y) * z == x * (y * z)
        assert x * (y + z) == x * y + x * z
        assert x * y == y * x
        assert x - x == ZERO
        assert hash(x * y) == hash(y * x)
        assert hash((x + y) - y) == hash(x)

    @given(nested(), nested())
    @settings(max_examples=30, deadline=None)
    def test_laws_of_nested_roots(self, a: Pair, b: Pair) -> None:
        """The same where towers of roots have to be merged, unless there are too many independent ones."""
        (x, _), (y, _) = a, b
        try:
            total, product = x + y, x * y
        except InexactNumberError:
            assume(False)  # noqa: FBT003 - how hypothesis is told
        assert total - y == x
        assert product == y * x
        assert total * x == x * x + product
        assert hash(total - y) == hash(x)

    @given(st.one_of(surds(), nested()), st.one_of(surds(), nested()))
    @settings(max_examples=50, deadline=None)
    def test_values_are_mpmaths(self, a: Pair, b: Pair) -> None:
        """Sum, product and quotient to 60 digits; == and order as the digits say."""
        (x, p), (y, q) = a, b
        try:
            assert same(x + y, p + q)
            assert same(x * y, p * q)
            if y:
                assert same(x * y.inverse(), p / q, 50)
                assert y * y.inverse() == ONE
        except InexactNumberError:
            assume(False)  # noqa: FBT003 - how hypothesis is told
        equal = abs(p - q) < mpmath.mpf(10) ** -60
        assert (x == y) == equal
        assert (x < y) == (p < q and not equal)
        assert (x - y).sign() == (0 if equal else mpmath.sign(p - q))

    @given(st.one_of(surds(), nested()))
    @settings(max_examples=30, deadline=None)
    def test_root_of_a_square_is_the_number(self, a: Pair) -> None:
        """The denesting search finds the root whenever there is one, or refuses a norm nobody can factor."""
        value = a[0]
        try:
            root = sqrt(value * value)
        except InexactNumberError as refusal:
            assert "prime factor" in str(refusal)  # noqa: PT017 - which numbers are refused is not the point here
            reject()
        assert root == abs(value)

    def test_hidden_dependence_between_nested_roots(self) -> None:
        """A root is taken for new only if it is: known identities, from memory, checked by squaring."""
        assert parse("sqrt(5 + 2*sqrt(6))") == parse("sqrt(2) + sqrt(3)")
        assert parse("sqrt(2 + sqrt(3))*sqrt(2 - sqrt(3))") == 1
        assert parse("sqrt(5 + sqrt(5))*sqrt(5 - sqrt(5))") == parse("2*sqrt(5)")
        assert parse("sqrt(2+sqrt(2)) * sqrt(2-sqrt(2))") == parse("sqrt(2)")
        assert parse("sqrt(2 + sqrt(2 + sqrt(2)))*sqrt(2 - sqrt(2 + sqrt(2)))") == parse("sqrt(2 - sqrt(2))")
        assert parse("sqrt(10 + 2*sqrt(5)) - sqrt(10 - 2*sqrt(5))") == parse("sqrt(20 - 8*sqrt(5))")
        assert parse("sqrt(16 - 2*sqrt(29) + 2*sqrt(55 - 10*sqrt(29)))") == parse(
            "sqrt(22 + 2*sqrt(5)) - sqrt(11 + 2*sqrt(29)) + sqrt(5)",
        )

    @given(st.data())
    @settings(max_examples=40, deadline=None)
    def test_squares_in_a_nested_field_are_recognised(self, data: st.DataObject) -> None:
        """The root of (u + v*r)^2, r nested and u, v of its field, even where surds cancel in the square."""
        n = data.draw(st.sampled_from([2, 3, 5]))
        small = st.fractions(min_value=-4, max_value=4, max_denominator=3)
        u, v = (data.draw(small) + data.draw(small) * sqrt(rational(n)) for _ in "uv")
        value = u + v * sqrt(n + sqrt(rational(n)))
        assert sqrt(value * value) == abs(value)

    def test_zero_has_no_inverse(self) -> None:
        """Not even a zero that took work to find."""
        zero = parse("sqrt(2)*sqrt(6) - 2*sqrt(3)")
        assert not zero
        with pytest.raises(ZeroDivisionError, match="division by zero"):
            zero.inverse()

    @pytest.mark.parametrize(
        "use",
        [lambda x: x + 0.5, lambda x: 0.5 * x, lambda x: x - 1.0, lambda x: x / 2.0, lambda x: x == 1.0],
    )
    def test_floats_are_refused_inside(self, use: Callable[[Exact], object]) -> None:
        """A float has been rounded already; it may only come in by the front door."""
        with pytest.raises(InexactNumberError, match="a float has no place in exact arithmetic"):
            use(ONE)


class TestFrontDoor:
    """What becomes an exact number, and what does not."""

    @pytest.mark.parametrize(
        ("value", "expected"),
        [
            (2.37, Fraction(237, 100)),
            (1e-6, Fraction(1, 10**6)),
            (0.1, Fraction(1, 10)),
            (Decimal("-12.50"), Fraction(-25, 2)),
            (Fraction(2, 3), Fraction(2, 3)),
            (np.float64(2.37), Fraction(237, 100)),
            (np.int64(7), Fraction(7)),
            ("  -1.5e3 ", Fraction(-1500)),
            ("\N{MINUS SIGN}3/4", Fraction(-3, 4)),
            (".5", Fraction(1, 2)),
            ("5.", Fraction(5)),
            ("2^-3", Fraction(1, 8)),
            ("-2^2", Fraction(-4)),
            ("2**3", Fraction(8)),
            ("6/3/2", Fraction(1)),
            ("1 - 2 - 3", Fraction(-4)),
            ("--2", Fraction(2)),
            (sympy.Rational(3, 7), Fraction(3, 7)),
        ],
    )
    def test_rational_input(self, value: object, expected: Fraction) -> None:
        """A float means its shortest decimal; signs and powers as in school."""
        assert number(value).as_fraction() == expected

    def test_sympy_surds_are_read(self) -> None:
        """By their printed form and our own reader."""
        assert number(5 * sympy.sqrt(3) / 2) == parse("5*sqrt(3)/2")

    @pytest.mark.parametrize(
        ("value", "message"),
        [
            (float("nan"), "not a finite number"),
            (float("inf"), "not a finite number"),
            (Decimal("-Infinity"), "not a finite number"),
            (Decimal("1e999999"), "too large"),
            (True, "True is not a number"),
            (None, "None is not a number"),
            (2j, "is not a number"),
            ([1] * 10**6, r"\[1, 1, 1, 1, 1, 1, \.\.\.\] is not a number"),
            (sympy.pi, "pi is not taken"),
            (sympy.sin(20), "radians"),
            (sympy.cbrt(2), "exponent must be a whole number"),
            (10**400, "beyond 1e300"),
            (Fraction(1, 10**400), "below 1e-300"),
        ],
    )
    def test_what_is_no_number(self, value: object, message: str) -> None:
        """With the reason."""
        with pytest.raises(InexactNumberError, match=message):
            number(value)


HOSTILE = [
    "__import__('os')",
    "().__class__",
    "9**9**9",
    "9^9^9^9",
    "1e999999999",
    "1e-999999999",
    "1e" + "9" * 300,
    "inf",
    "nan",
    "1_000",
    "0x10",
    "1;2",
    "{P}",
    "lambda: 1",
    "sqrt",
    "sqrt()",
    "sqrt(",
    "sqrt(2",
    "sqrt(2))",
    "sqrt(-1)",
    "sqrt(0 - sqrt(2))",
    "sqrt 2",
    "2 3",
    "2(3)",
    "1/0",
    "1/(sqrt(2)*sqrt(2) - 2)",
    "0^-1",
    "2^0.5",
    "2^sqrt(4)^99",
    "tan(90)",
    "sin(sqrt(2))",
    "pi",
    "E",
    "I",
    "P",
    "",
    " ",
    "+",
    "()",
    "1,5",
    "٣",
    "²",
    "1\x00",
    "\u202e1",
    "(" * 100,
    "-(" * 30 + "1" + ")" * 30,
    "2^" * 300 + "2",
    "sqrt(" * 25 + "2" + ")" * 25,
    "1" * (LONGEST_TEXT + 1),
    "9" * 401,
    "sqrt(" + "9" * 47 + ")",
    "exp(1)",
    "factorial(99999)",
    "sqrt(2+sqrt(2))+sqrt(3+sqrt(2))+sqrt(5+sqrt(3))+sqrt(7+sqrt(5))+sqrt(11+sqrt(2))",
]


@pytest.mark.parametrize("text", HOSTILE, ids=lambda text: ascii(text)[:30])
def test_hostile_text_is_refused(text: str) -> None:
    """Each with the one error this module raises, in one short line."""
    with pytest.raises(InexactNumberError) as caught:
        parse(text)
    assert len(str(caught.value)) < 300
    assert str(caught.value).isprintable()


@given(st.text(alphabet="0123456789.+-*/^()sqrtincoap e√²٣_P", max_size=40))
@settings(max_examples=150, deadline=None)
def test_any_text_is_a_number_or_an_error(text: str) -> None:
    """And a number reads back from its own text."""
    try:
        value = parse(text)
    except InexactNumberError:
        return
    assert parse(to_text(value)) == value


PRIMES = [2, 3, 5, 7, 11, 13]
SUM = "+".join(f"sqrt({p})" for p in PRIMES)
SLOW = {
    "all roots": "*".join(f"(1+sqrt({p}))" for p in PRIMES),
    "inverse of all roots": "1/(" + "*".join(f"({p}.125+sqrt({p}))" for p in PRIMES) + ")",
    "divisions": "/".join([f"(1.2345+{SUM})"] * 12),
    "powers": "*".join([f"({SUM})^24"] * 15),
    "negative power": f"({SUM})^-24",
    "power tower": "((((2.1+sqrt(2))^24)^24)^24)^24",
    "many digits": "*".join(["(1+sqrt(2)*1e-60)"] * 50),
    "many roots": "+".join(f"sqrt({n})" for n in range(2, 100)),
    "angles": "+".join(f"sin({0.75 * i})" for i in range(1, 60)),
    "angle products": "*".join(f"tan({0.75 * (2 * i + 1)})" for i in range(60)),
    "nested": "sqrt(19+" * 19 + "sqrt(2)" + ")" * 19,
    "nested sums": "+".join(f"sqrt({n}+sqrt({n}))" for n in range(2, 60)),
    "nested in all roots": "sqrt(" + "*".join(f"(1+sqrt({p}))" for p in PRIMES) + ")",
    "big primes": "+".join(f"sqrt({10**15 - n})" for n in range(1, 40)),
    "product of big primes": "1/(1+sqrt(999999999989)*sqrt(999999999961)*sqrt(999999999959)*sqrt(999999999937))",
    "near zero": "1/(665857/470832-sqrt(2))^24",
    "symbols": "(P+Q+R+S+1)^24",
    "symbols below": "+".join(f"1/(P*{i}+Q/{i}+R-S+{i})" for i in range(2, 30)),
    "symbols and roots below": f"1/({SUM}+P*sqrt(17))",
    "symbol products": "*".join(f"(P*{i}+Q/{i}+R-S+{i})" for i in range(2, 40)),
}


@pytest.mark.parametrize("name", SLOW)
def test_no_text_takes_long(name: str) -> None:
    """Short texts that would grow without end are refused before they do."""
    start = time.process_time()
    with contextlib.suppress(InexactNumberError):
        parse(SLOW[name], ("P", "Q", "R", "S"))
    assert time.process_time() - start < 2.5


class TestAngles:
    """Sine, cosine and tangent of degrees against mpmath's, which knows radians only."""

    @pytest.mark.parametrize(
        "degrees", [Fraction(n) for n in range(-3, 366, 3)] + [Fraction(15 * n, 2) for n in range(1, 48, 2)]
    )
    def test_surd_angles(self, degrees: Fraction) -> None:
        """Every multiple of 3 and of 7.5 degrees is exact to 50 digits, and sin^2 + cos^2 is exactly 1."""
        angle = mpmath.radians(big(degrees))
        sine, cosine = parse(f"sin({degrees})"), parse(f"cos({degrees})")
        assert not sine.rounded
        assert same(sine, mpmath.sin(angle), 50)
        assert same(cosine, mpmath.cos(angle), 50)
        assert sine * sine + cosine * cosine == ONE
        if cosine:
            assert same(parse(f"tan({degrees})"), mpmath.tan(angle), 50)

    @pytest.mark.parametrize("degrees", ["20", "1", "-100", "123.456", "359.9", "1/3", "100000", "1e-9", "89.999999"])
    def test_other_angles_are_rounded_and_say_so(self, degrees: str) -> None:
        """To 34 digits, in short fractions with sin^2 + cos^2 exactly 1, and the mark survives arithmetic."""
        sine, cosine = parse(f"sin({degrees})"), parse(f"cos({degrees})")
        angle = mpmath.radians(big(Fraction(degrees)))
        assert sine.rounded
        assert cosine.rounded
        assert same(sine, mpmath.sin(angle), 34)
        assert same(cosine, mpmath.cos(angle), 34)
        assert sine * sine + cosine * cosine == ONE
        if degrees != "1e-9":
            assert cosine.as_fraction().denominator < 10**45
        assert (2 * sine + sqrt(rational(2))).rounded
        assert (ONE / cosine).rounded
        assert sqrt(cosine * cosine).rounded

    @pytest.mark.parametrize("degrees", ["3.75", "11.25", "4.5", "22.5", "7.5"])
    def test_roots_that_cancel_leave_the_tower(self, degrees: str) -> None:
        """The way to an angle passes nested roots that are not in its sine; a length has to find room beside it."""
        rise = parse(f"6*tan({degrees})")
        length = sqrt(25 + rise * rise)
        assert not rise.rounded
        assert len(length.tower) <= 3
        assert same(length, mpmath.sqrt(25 + (6 * mpmath.tan(mpmath.radians(big(Fraction(degrees))))) ** 2), 50)

    def test_a_field_that_grows_too_large_is_not_entered(self) -> None:
        """1.5 degrees could be written with roots, too many to compute in."""
        assert parse("sin(1.5)").rounded

    def test_well_known_values(self) -> None:
        """As in any table of trigonometric functions (from memory)."""
        assert parse("sin(30)") == rational(1, 2)
        assert parse("cos(45)") == parse("sqrt(2)/2")
        assert parse("tan(60)") == parse("sqrt(3)")
        assert parse("tan(15)") == parse("2 - sqrt(3)")
        assert parse("cos(36)") == parse("(1 + sqrt(5))/4")
        assert parse("sin(22.5)") == parse("sqrt(2 - sqrt(2))/2")
        assert parse("sin(390)") == rational(1, 2)


class TestText:
    """Numbers to text and back."""

    @given(st.one_of(surds(), nested()))
    @settings(max_examples=40, deadline=None)
    def test_round_trip(self, a: Pair) -> None:
        """The printed text has no decimal point and is the number."""
        text = to_text(a[0])
        assert "." not in text
        assert parse(text) == a[0]

    @pytest.mark.parametrize(
        ("text", "printed"),
        [
            ("0*sqrt(2)", "0"),
            ("-20*sqrt(5)/2", "-10*sqrt(5)"),
            ("1/2 - sqrt(3)/2", "1/2 - sqrt(3)/2"),
            ("sqrt(2+sqrt(2))*3/4", "3*sqrt(2 + sqrt(2))/4"),
            ("-P", "-P"),
            ("-(P+Q)/2*sqrt(2)", None),
            ("P/Q - 3", None),
            ("-3*P/(2*Q)", None),
            ("(P-Q)/(P+Q)", None),
            ("P*Q/(Q*P)", "1"),
            ("P^2*sqrt(3)/7 + Q*sqrt(2) - 1", None),
        ],
    )
    def test_printed_form(self, text: str, printed: str | None) -> None:
        """As on paper; whatever the form, it reads back."""
        value = parse(text, ("P", "Q"))
        assert printed is None or to_text(value) == printed
        assert parse(to_text(value), ("P", "Q")) == value

    def test_repr_is_for_people(self) -> None:
        """The text, in the class's name."""
        assert repr(parse("sqrt(8)")) == "Exact('2*sqrt(2)')"


class TestRounding:
    """The one rounding rule: half to even, from the exact value."""

    @pytest.mark.parametrize(
        ("text", "places", "expected"),
        [
            ("1/2", 0, "0"),
            ("3/2", 0, "2"),
            ("5/2", 0, "2"),
            ("-5/2", 0, "-2"),
            ("0.125", 2, "0.12"),
            ("0.375", 2, "0.38"),
            ("0.12500000000000000000000000000000000000000000000001", 2, "0.13"),
            ("0.12499999999999999999999999999999999999999999999999", 2, "0.12"),
            ("2/3", 3, "0.667"),
            ("1234.5", -1, "1.23E+3"),
            ("sqrt(2)", 3, "1.414"),
            ("0", 2, "0.00"),
            ("-1/1000", 2, "0.00"),
            ("-sqrt(2)/1000", 2, "0.00"),
            # half a unit and a surd of about 1e-50: only many digits tell
            ("1/2 + (sqrt(2) - 1)^24*(sqrt(3)-sqrt(2))^24*(sqrt(5)-2)^24", 0, "1"),
            ("1/2 - (sqrt(2) - 1)^24*(sqrt(3)-sqrt(2))^24*(sqrt(5)-2)^24", 0, "0"),
        ],
    )
    def test_ties_and_near_ties(self, text: str, places: int, expected: str) -> None:
        """A tie goes to the even digit, anything off it to its own side; there is no minus zero."""
        assert str(rounded(parse(text), places)) == expected

    @given(st.one_of(surds(), nested()), st.integers(0, 30))
    @settings(max_examples=40, deadline=None)
    def test_digits_are_mpmaths(self, a: Pair, places: int) -> None:
        """Off the true value by no more than half a unit of the last place."""
        got = mpmath.mpf(str(rounded(a[0], places)))
        assert abs(got - a[1]) <= mpmath.mpf(10) ** -places / 2 + mpmath.mpf(10) ** -70

    def test_the_thread_s_own_decimal_settings_do_not_matter(self) -> None:
        """Nor does a value with more digits than Python's usual decimal context holds."""
        value = parse("sqrt(2)*1e20")
        digits = mpmath.nstr(mpmath.sqrt(2) * 10**20, 45, strip_zeros=False)
        expected = Decimal(digits).quantize(Decimal("1e-20"), context=Context(60, ROUND_HALF_EVEN))
        assert rounded(value, 20) == expected
        with decimal.localcontext() as context:
            context.prec = 3
            assert rounded(value, 20) == expected

    def test_small_differences_keep_their_digits(self) -> None:
        """Convergents of sqrt(2) (Pell numbers) make differences of any smallness, under a root too."""
        for text in ("665857/470832 - sqrt(2)", "sqrt(665857/470832 - sqrt(2))", "1/sqrt(665857/470832 - sqrt(2))"):
            expected = mpmath.mpf(665857) / 470832 - mpmath.sqrt(2)
            expected = mpmath.sqrt(expected) if text.count("sqrt") > 1 else expected
            expected = 1 / expected if text[0] == "1" else expected
            assert same(parse(text), expected, 50)
        p, q = 1, 1
        for _ in range(40):
            p, q = p + 2 * q, p + q
        difference = rational(Fraction(p, q)) - sqrt(rational(2))
        with mpmath.workdps(200):
            expected = mpmath.mpf(p) / q - mpmath.sqrt(2)
        assert same(difference, expected)
        assert same(sqrt(abs(difference)), mpmath.sqrt(abs(expected)))

    def test_float_is_the_nearest(self) -> None:
        """The way out to the numeric route."""
        assert float(parse("1/3")) == 1 / 3
        assert float(parse("sqrt(2)")) == 2**0.5
        assert float(parse("2.37")) == 2.37


class TestSymbols:
    """Symbols in loads."""

    def test_a_symbol_is_itself_in_any_company(self) -> None:
        """One symbol that has met another one equals itself still, and hashes alike."""
        p, q = symbol("P"), symbol("Q")
        again = (p + q) - q
        assert again == p
        assert hash(again) == hash(p)
        assert again.symbols == ("P",)
        assert p != q
        assert p * q / (p * q) == ONE
        assert (p / p).is_rational

    def test_values_replace_symbols(self) -> None:
        """Exactly, and only those given."""
        value = parse("2*P*sqrt(3) - Q/P", ("P", "Q"))
        assert value.substitute({"P": rational(3), "Q": rational(6)}) == parse("6*sqrt(3) - 2")
        assert value.substitute({"Q": ZERO}) == parse("2*P*sqrt(3)", ("P",))
        assert value.substitute({"P": parse("sqrt(3)"), "Q": ZERO}) == rational(6)

    @pytest.mark.parametrize("use", [lambda p: p.sign(), float, lambda p: approximate(p, 5), lambda p: p < 1])
    def test_a_symbol_has_no_value_of_its_own(self, use: Callable[[Exact], object]) -> None:
        """Sign, decimal and order need one."""
        with pytest.raises(InexactNumberError, match="give the symbol a value"):
            use(symbol("P"))

    def test_root_of_symbols(self) -> None:
        """Symbols are positive: squares of single products come out, sums stay under the root, which squares back."""
        a, h = symbol("a"), symbol("h")
        assert sqrt(a * a) == a
        assert to_text(sqrt(12 * a * a * h)) == "2*a*sqrt(3)*sqrt(h)"
        length = sqrt((a * a + h * h) / 4)
        assert to_text(length) == "sqrt(a^2 + h^2)/2"
        assert length * length == (a * a + h * h) / 4
        assert length.substitute({"a": rational(4), "h": rational(3)}) == rational(5, 2)
        with pytest.raises(InexactNumberError, match="root of a negative"):
            sqrt(-a * a)


def test_hashes_tell_nested_numbers_apart() -> None:
    """Hundreds of joints with nested coordinates must not fall into one slot."""
    numbers = [n + sqrt(2 + sqrt(rational(2))) for n in range(200)]
    assert len({hash(n) for n in numbers}) == 200
    assert exact(numbers[0]) in set(numbers)


def test_large_numbers_in_nested_roots() -> None:
    """Lengths between joints with nested coordinates, whose norms nobody factors, are told apart and cancel."""
    first = sqrt(2 + sqrt(rational(2))) * Fraction(10**12 + 39, 10**9 + 7) + 1
    second = sqrt(2 + sqrt(rational(3)) * 5) * Fraction(10**11 + 3, 10**10 + 19)
    length = sqrt(first * first + 1)
    assert length * length == first * first + 1
    assert (length + second) - second == length
    assert (length + second) * (length - second) == first * first + 1 - second * second


def test_a_root_taken_for_new_is_never_met_again(monkeypatch: pytest.MonkeyPatch) -> None:
    """A number nobody can factor has an unknown part free of squares; a prime that would give it away is refused."""
    monkeypatch.setattr(wholenumbers, "_UNFACTORED", set())
    monkeypatch.setattr(wholenumbers, "_LARGE_PRIMES", set())
    huge = (10**20 + 39) ** 2 * 1000003 * 1000033
    assert wholenumbers.take_for_new(huge)
    assert wholenumbers.without_squares(4 * 1000003, proven=True) == (2, 1000003)
    for _ in range(2):
        with pytest.raises(InexactNumberError, match="1000033 is not supported beside"):
            wholenumbers.without_squares(4 * 1000033, proven=True)
    monkeypatch.setattr(wholenumbers, "_LARGE_PRIMES", {1000003, 1000033})
    assert not wholenumbers.take_for_new(huge)
