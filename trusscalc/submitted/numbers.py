"""Numbers as other people's tables print them: signs, grouped digits, decimal commas, powers of ten, T and C.

What a number looks like may depend on the whole table: ``1,234`` is 1234 or 1.234. So every number is first taken
apart, the table's decimal sign is found from the numbers that leave no choice, and only then are values made. A value
keeps half a unit of its last printed digit, which is all that is known about its rounding.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from decimal import Context, Decimal
from fractions import Fraction
from functools import lru_cache
from typing import Final, Literal

from trusscalc.units import FORCES, LENGTHS

DecimalSign = Literal[".", ","]
Letter = Literal["T", "C", ""]

LONGEST_TEXT: Final = 120
WIDE: Final = Context(prec=2000)
MOST_DIGITS: Final = 60
LARGEST_POWER_OF_TEN: Final = 60
GROUP: Final = 3
"""Digits in a group of thousands."""

TYPOGRAPHY: Final = str.maketrans(
    {
        **dict.fromkeys("\u2212\u2010\u2011\u2012\u2013\u2014\u2015\ufe63\uff0d", "-"),
        **dict.fromkeys("\u00a0\u2007\u2008\u2009\u200a\u202f\t", " "),
        **dict.fromkeys("\u2018\u2019\u2032\u02bc\u00b4", "'"),
        **dict.fromkeys("\u200b\u200c\u200d\u2060\ufeff\u00ad"),
    }
)
"""Dashes, blanks and apostrophes as typists and spreadsheets set them; what has no width is dropped."""

SENSES: Final[dict[str, Letter]] = {
    **dict.fromkeys(("t", "tension", "tensile", "tens"), "T"),
    **dict.fromkeys(("c", "compression", "compressive", "comp"), "C"),
}

FORCE_UNITS: Final[dict[str, tuple[str, Fraction]]] = {
    **{name: (name, Fraction(1)) for name in FORCES},
    **{name: ("lbf", Fraction(1)) for name in ("lb", "lbs", "pound", "pounds")},
    **{name: ("kip", Fraction(1)) for name in ("kips", "k")},
    **{name: ("kN", Fraction(1)) for name in ("KN", "kn", "Kn")},
    "n": ("N", Fraction(1)),
    "t": ("tf", Fraction(1)),
    "kgf": ("tf", Fraction(1, 1000)),
    "daN": ("N", Fraction(10)),
}
"""Spelling to a unit of ours and a factor."""

LENGTH_UNITS: Final[dict[str, tuple[str, Fraction]]] = {
    **{name: (name, Fraction(1)) for name in LENGTHS},
    **{name: ("in", Fraction(1)) for name in ("inch", "inches", '"')},
    **{name: ("ft", Fraction(1)) for name in ("foot", "feet", "'")},
}

_WORD: Final = r"(?:\([A-Za-z]+\.?\)|\[[A-Za-z]+\.?\]|[A-Za-z]+\.?)"
_NUMBER: Final = re.compile(
    rf"(?P<before>{_WORD})? ?(?P<open>\()? ?(?P<sign>[-+])? ?"
    r"(?P<digits>[0-9]+(?:[ '.,][0-9]+)*[.,]?|[.,][0-9]+)(?:[eEdD](?P<power>[-+]?[0-9]{1,4}))? ?"
    rf"(?P<close>\))?(?P<after>(?: ?{_WORD}){{0,2}})"
)


@dataclass(frozen=True, slots=True)
class Printed:
    """A number taken apart: its digits are not yet a value.

    Attributes
    ----------
    digits : str
        With separators, without sign.
    power : int
        Of ten.
    negative : bool
        A minus sign, or the parentheses of an account.
    letter : str
        ``T``, ``C`` or '' beside it.
    unit : str
        Beside it, as spelled; ''.
    in_parentheses : bool
        Whether parentheses stand for the minus sign.
    """

    digits: str
    power: int = 0
    negative: bool = False
    letter: Letter = ""
    unit: str = ""
    in_parentheses: bool = False

    @property
    def text(self) -> str:
        """The number as it stands in the table, with its letter and its unit."""
        power = f"e{self.power:+d}" if self.power else ""
        number = f"({self.digits}{power})" if self.in_parentheses else f"{'-' * self.negative}{self.digits}{power}"
        return " ".join(part for part in (number, self.letter, self.unit) if part)


@dataclass(frozen=True, slots=True)
class Amount:
    """A printed number's value, and half a unit of its last digit."""

    value: Fraction
    half: Fraction

    @property
    def text(self) -> str:
        """The number with the digits it has, or as a fraction."""
        places = 0
        while places < LONGEST_TEXT and self.half * 2 * 10**places < 1:
            places += 1
        scaled = self.value * 10**places
        if not self.half or scaled.denominator != 1:
            return str(self.value)
        return f"{Decimal(scaled.numerator).scaleb(-places, WIDE):f}"


def taken_apart(text: str) -> Printed | str:
    """Return a printed number taken apart, or what is wrong with it.

    Examples
    --------
    >>> taken_apart("1\u202f482,5 (C)")
    Printed(digits='1 482,5', power=0, negative=False, letter='C', unit='', in_parentheses=False)
    >>> taken_apart("n/a")
    'is no number'
    """
    found = _NUMBER.fullmatch(text.translate(TYPOGRAPHY).strip()) if len(text) <= LONGEST_TEXT else None
    if not found:
        return "is no number"
    enclosed = bool(found["open"] and found["close"])
    words = re.findall(r"[A-Za-z]+", f"{found['before'] or ''} {found['after']}")
    if bool(found["open"]) != bool(found["close"]) or (enclosed and found["sign"]):
        return "has parentheses that do not fit"
    letters = [word for word in words if word.lower() in SENSES]
    units = [word for word in words if word.lower() not in SENSES]
    if len(letters) > 1 or len(units) > 1 or (units and units[0] not in FORCE_UNITS):
        return "is no number"
    if len(found["digits"]) > MOST_DIGITS or abs(int(found["power"] or 0)) > LARGEST_POWER_OF_TEN:
        return f"has more than {MOST_DIGITS} digits or a power of ten beyond {LARGEST_POWER_OF_TEN}"
    letter: Letter = SENSES[letters[0].lower()] if letters else ""
    unit = units[0] if units else ""
    # beside a letter parentheses are only parentheses
    negative = found["sign"] == "-" or (enclosed and not letter)
    return Printed(found["digits"], int(found["power"] or 0), negative, letter, unit, enclosed and not letter)


def sense_of(text: str) -> Letter | None:
    """Return the letter that a cell of a column of senses states, '' for none (zero force), None if not understood."""
    word = text.translate(TYPOGRAPHY).strip(" ().[]").lower()
    if word in ("", "-", "0", "zero", "none"):
        return ""
    return SENSES.get(word)


# --- the decimal sign -------------------------------------------------------------------------------------


def proven_sign(printed: Printed) -> DecimalSign | Literal["", "?.", "?,"]:
    """Return the decimal sign that a number proves, '' for none, or which sign could be either.

    Examples
    --------
    >>> [proven_sign(Printed(digits)) for digits in ("482", "1.234,5", "12,5", "1,234", "1,234,567", "0,125")]
    ['', ',', ',', '?,', '.', ',']
    """
    digits = printed.digits
    points, commas = digits.count("."), digits.count(",")
    if points and commas:
        return "." if digits.rfind(".") > digits.rfind(",") else ","
    if not points and not commas:
        return ""
    sign: DecimalSign = "." if points else ","
    other: DecimalSign = "," if points else "."
    if points + commas > 1:
        return other
    whole, _, rest = digits.partition(sign)
    open_to_both = len(rest) == GROUP and 1 <= len(whole) <= GROUP and whole.isdigit() and whole[0] != "0"
    if open_to_both and not printed.power:
        return "?." if sign == "." else "?,"
    return sign


def decimal_sign(numbers: Iterable[tuple[str, Printed]]) -> tuple[DecimalSign, str, str]:
    """Return the decimal sign of a table, a remark, and what is wrong ('' each when there is nothing to say).

    Parameters
    ----------
    numbers : iterable of (str, Printed)
        Where each number stands, and the number.
    """
    first: dict[str, tuple[str, str]] = {}
    for where, printed in numbers:
        first.setdefault(proven_sign(printed), (where, printed.digits))
    proven: list[DecimalSign] = [sign for sign in (".", ",") if sign in first]
    if len(proven) > 1:
        places = " and ".join(f"{first[sign][1]!r} in {first[sign][0]}" for sign in proven)
        return ".", "", f"{places} use different decimal signs; write all numbers alike"
    if proven:
        return proven[0], "", ""
    if "?," in first:
        where, digits = first["?,"]
        told = f"{where}: {digits!r} may be {digits.replace(',', '.')} or {digits.replace(',', '')}"
        return ".", "", f"{told}, and no other number tells; state the decimal sign (decimal)"
    if "?." in first:
        where, digits = first["?."]
        return ".", f"no number tells whether a point groups thousands ({digits} in {where}): read as decimal point", ""
    return ".", "", ""


# --- values -----------------------------------------------------------------------------------------------


def amount(printed: Printed, sign: DecimalSign) -> Amount | str:
    """Return the value of a number under a decimal sign, without regard to its letter, or what is wrong with it.

    Examples
    --------
    >>> amount(Printed("4.82", power=2), ".")
    Amount(value=Fraction(482, 1), half=Fraction(1, 2))
    >>> amount(Printed("12.34"), ",")
    "groups its digits with '.', but not in threes"
    """
    whole, _, rest = printed.digits.partition(sign)
    if not rest.isdigit() and rest:
        return f"has more after its decimal sign {sign!r} than digits"
    groupers = set(whole) - set("0123456789")
    if len(groupers) > 1:
        return "groups its digits with different signs"
    if groupers:
        (grouper,) = groupers
        first, *others = whole.split(grouper)
        if not 1 <= len(first) <= GROUP or any(len(group) != GROUP for group in others):
            return f"groups its digits with {grouper!r}, but not in threes"
        whole = whole.replace(grouper, "")
    power = printed.power - len(rest)
    digits = -int(whole + rest) if printed.negative else int(whole + rest)
    value = Fraction(digits * 10**power) if power >= 0 else Fraction(digits, 10**-power)
    return Amount(value, _half(power))


@lru_cache
def _half(power: int) -> Fraction:
    return Fraction(10) ** power / 2
