"""Combinations as published standards print them: data with edition, clause and how well each row is known.

The expressions are typed as printed and read by ``combinationtables``, so that nothing stands here twice. A standard
changes its factors from one edition to the next; what is here is one edition, named on every sheet that uses it.

A trap, met more than once: public pages with ASCE/SEI 7-22 in their title that print the snow factors of the edition
before (0.5S, 1.6S and 0.2S in strength combinations, plain S in those of allowable stress). In 7-22 snow is given at
strength level: 1.0S where it leads, 0.3S where it accompanies, 0.15S with earthquake, and 0.7S in allowable stress. Do
not "correct" these from such a page; ground snow of an older map with the factors of 7-22 is far too little.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Final, Literal

from trusscalc.exact import Exact
from trusscalc.exacttext import parse

READ: Final = "read in a secondary source"
MEMORY: Final = "from memory"


@dataclass(frozen=True, slots=True)
class Letter:
    """A letter of a standard's expressions.

    Attributes
    ----------
    symbol : str
        As printed, such as ``Lr``.
    meaning : str
        What it stands for.
    acts : str
        How several cases of it act: ``permanent`` (always, together), ``together`` (each may stay away) or
        ``in turn`` (one of them or none: a wind blows from one side at a time).
    """

    symbol: str
    meaning: str
    acts: Literal["permanent", "together", "in turn"]


@dataclass(frozen=True, slots=True)
class PublishedRow:
    """One combination as printed.

    Attributes
    ----------
    number : str
        The standard's own number for it.
    expression : str
        As printed.
    clause : str
        Where it stands.
    mark : str
        How it is known: ``read in a secondary source`` or ``from memory``.
    reduces_permanent, reduces_leading : bool
        In a table with factors: whether xi stands with the permanent actions, psi0 with the leading one.
    """

    number: str
    expression: str
    clause: str
    mark: str
    reduces_permanent: bool = False
    reduces_leading: bool = False


@dataclass(frozen=True, slots=True)
class Category:
    """A kind of variable action with the psi0 its standard recommends.

    Attributes
    ----------
    name, meaning : str
        The standard's letter or word for it, and what it covers.
    psi0 : Exact
        Combination value over characteristic value.
    kind : str
        Actions of one kind: ``imposed`` ones are one action together, those of ``snow``, ``wind`` or
        ``temperature`` are tried in turn; '' where each is an action of its own.
    """

    name: str
    meaning: str
    psi0: Exact
    kind: str


@dataclass(frozen=True, slots=True)
class PublishedTable:
    """The combinations of one clause or one pair of expressions.

    Attributes
    ----------
    name : str
        What a truss file calls it.
    edition : str
        Title, edition and limit state.
    mark : str
        How its numbers are known, in a few words; each row has its own.
    letters : tuple of Letter
        What cases can be assigned to.
    rows : tuple of PublishedRow
        In the order printed.
    factors : tuple of (str, Exact)
        Partial factors named in the expressions; empty where the expressions hold numbers.
    categories : tuple of Category
        Kinds of variable actions with their psi0; empty where there is no such thing.
    notes : tuple of str
        What a reader must know: what is not applied, and how cases act.
    """

    name: str
    edition: str
    mark: str
    letters: tuple[Letter, ...]
    rows: tuple[PublishedRow, ...]
    factors: tuple[tuple[str, Exact], ...] = ()
    categories: tuple[Category, ...] = ()
    notes: tuple[str, ...] = ()


# --- ASCE/SEI 7-22 ----------------------------------------------------------------------------------------

_LOADS: Final = (
    Letter("D", "dead load", "permanent"),
    Letter("L", "live load", "together"),
    Letter("Lr", "roof live load", "together"),
    Letter("S", "snow load, at the strength level of this edition", "in turn"),
    Letter("R", "rain load", "in turn"),
    Letter("W", "wind load", "in turn"),
    Letter("W_T", "tornado load", "in turn"),
    Letter("Ev", "vertical seismic load effect, a case acting downward", "in turn"),
    Letter("Eh", "horizontal seismic load effect", "in turn"),
)
_LOADS_NOT_ACTING: Final = "The effects of loads that do not act are tried: every load but D may stay away."
_HOW_CASES_ACT: Final = (
    "Several cases of D act together, and so do those of L and of Lr, each of which may stay away. Of S, R, W, W_T, Ev "
    "and Eh one case acts at a time, so each direction of wind or earthquake needs its case."
)
_SNOW: Final = (
    "Snow is the load of this edition, at strength level. Ground snow of an earlier edition does not belong with these "
    "factors: far too little would be combined."
)
_STRENGTH_EXCEPTIONS: Final = (
    "Exceptions of 2.3.1 that are left to the engineer: L may have 0.5 in 3a and 4a where its unreduced value is at "
    "most 100 psf, garages and public assembly apart; with W_T the companion of 4a may be 0.5(Lr or R); fluids F go "
    "with the factor of D in 1a to 4a; earth pressure H has 1.6 where it adds, 0.9 where it is permanent and resists, "
    "else 0."
)
_ALLOWABLE_STRESS_EXCEPTIONS: Final = (
    "Exceptions of 2.4.1 and 2.4.5, fluids F and earth pressure H are left to the engineer."
)

_STRENGTH: Final = PublishedTable(
    name="ASCE/SEI 7-22 strength",
    edition="ASCE/SEI 7-22, Minimum Design Loads and Associated Criteria for Buildings and Other Structures, 2022: "
    "combinations for strength design, 2.3.1 and 2.3.6",
    mark=f"1a to 5a {READ}; 6 and 7 {MEMORY}",
    letters=_LOADS,
    rows=(
        PublishedRow("1a", "1.4D", "2.3.1", READ),
        PublishedRow("2a", "1.2D + 1.6L + (0.5Lr or 0.3S or 0.5R)", "2.3.1", READ),
        PublishedRow("3a", "1.2D + (1.6Lr or 1.0S or 1.6R) + (L or 0.5W)", "2.3.1", READ),
        PublishedRow("4a", "1.2D + 1.0(W or W_T) + L + (0.5Lr or 0.3S or 0.5R)", "2.3.1", READ),
        PublishedRow("5a", "0.9D + 1.0(W or W_T)", "2.3.1", READ),
        PublishedRow("6", "1.2D + Ev + Eh + L + 0.15S", "2.3.6", MEMORY),
        PublishedRow("7", "0.9D − Ev + Eh", "2.3.6", MEMORY),
    ),
    notes=(_LOADS_NOT_ACTING, _HOW_CASES_ACT, _SNOW, _STRENGTH_EXCEPTIONS),
)

_ALLOWABLE_STRESS: Final = PublishedTable(
    name="ASCE/SEI 7-22 allowable stress",
    edition="ASCE/SEI 7-22, Minimum Design Loads and Associated Criteria for Buildings and Other Structures, 2022: "
    "combinations for allowable stress design, 2.4.1 and 2.4.5",
    mark=f"3a, 4a and 6a {READ}; the others {MEMORY}",
    letters=_LOADS,
    rows=(
        PublishedRow("1a", "D", "2.4.1", MEMORY),
        PublishedRow("2a", "D + L", "2.4.1", MEMORY),
        PublishedRow("3a", "D + (Lr or 0.7S or R)", "2.4.1", READ),
        PublishedRow("4a", "D + 0.75L + 0.75(Lr or 0.7S or R)", "2.4.1", READ),
        PublishedRow("5a", "D + 0.6(W or W_T)", "2.4.1", MEMORY),
        PublishedRow("6a", "D + 0.75L + 0.75(0.6(W or W_T)) + 0.75(Lr or 0.7S or R)", "2.4.1", READ),
        PublishedRow("7a", "0.6D + 0.6(W or W_T)", "2.4.1", MEMORY),
        PublishedRow("8", "D + 0.7Ev + 0.7Eh", "2.4.5", MEMORY),
        PublishedRow("9", "D + 0.525Ev + 0.525Eh + 0.75L + 0.1S", "2.4.5", MEMORY),
        PublishedRow("10", "0.6D − 0.7Ev + 0.7Eh", "2.4.5", MEMORY),
    ),
    notes=(_LOADS_NOT_ACTING, _HOW_CASES_ACT, _SNOW, _ALLOWABLE_STRESS_EXCEPTIONS),
)

# --- EN 1990:2002 -----------------------------------------------------------------------------------------

_ACTIONS: Final = (
    Letter("G", "permanent action", "permanent"),
    Letter("Q", "variable action", "together"),
    *(Letter(f"Q{place}", "variable action of which one case acts at a time", "in turn") for place in range(1, 10)),
)

_SET_B: Final = (
    ("gamma_G_sup", parse("1.35")),
    ("gamma_G_inf", parse("1.00")),
    ("gamma_Q", parse("1.5")),
)
_XI: Final = ("xi", parse("0.85"))

# Table A1.1, from memory. "Steel Buildings in Europe", Multi-storey Part 3, p. 3-5, has 0 for category H in a sentence,
# 0.5 for snow and 0.6 for wind in worked forms.
_CATEGORIES: Final = tuple(
    Category(name, meaning, parse(psi0), kind)
    for name, meaning, psi0, kind in (
        ("A", "domestic, residential areas", "0.7", "imposed"),
        ("B", "office areas", "0.7", "imposed"),
        ("C", "congregation areas", "0.7", "imposed"),
        ("D", "shopping areas", "0.7", "imposed"),
        ("E", "storage areas", "1.0", "imposed"),
        ("F", "traffic areas, vehicles up to 30 kN", "0.7", "imposed"),
        ("G", "traffic areas, vehicles over 30 kN up to 160 kN", "0.7", "imposed"),
        ("H", "roofs", "0", ""),
        ("snow", "snow, sites up to 1000 m", "0.5", "snow"),
        ("snow above 1000 m", "snow, sites above 1000 m", "0.7", "snow"),
        ("snow Nordic", "snow in Finland, Iceland, Norway and Sweden", "0.7", "snow"),
        ("wind", "wind", "0.6", "wind"),
        ("temperature", "temperature, fire apart", "0.6", "temperature"),
    )
)

_RECOMMENDED: Final = (
    "Recommended values for buildings (Annex A1). A National Annex may change gamma, psi and xi: state its values."
)
_FAVOURABLE: Final = f"Variable actions have gamma_Q = 0 where they help ({MEMORY}): each may stay away."
_EACH_ITS_OWN: Final = (
    "Each permanent case takes its adverse factor for itself, also where the standard takes one factor for all of one "
    "source: on the safe side."
)
_HOW_ACTIONS_ACT: Final = (
    "Cases of the imposed categories A to G are one action together. Of several cases of snow, of wind or of "
    "temperature, and of the cases of one of Q1 to Q9, one acts at a time. Any other case of Q is an action of its "
    f"own ({MEMORY}, EN 1991). Any number of variable actions is combined."
)

_EXPRESSION_610: Final = PublishedTable(
    name="EN 1990:2002 6.10 set B",
    edition="EN 1990:2002, Eurocode: Basis of structural design: expression (6.10), factors of set B (STR/GEO), "
    "Table A1.2(B)",
    mark=f"{READ}; psi0 and gamma_Q = 0 {MEMORY}",
    letters=_ACTIONS,
    rows=(PublishedRow("6.10", "Σ γG,j Gk,j + γQ,1 Qk,1 + Σ(i>1) γQ,i ψ0,i Qk,i", "6.4.3.2(3)", READ),),
    factors=_SET_B,
    categories=_CATEGORIES,
    notes=(_RECOMMENDED, _FAVOURABLE, _EACH_ITS_OWN, _HOW_ACTIONS_ACT),
)

_EXPRESSIONS_610AB: Final = PublishedTable(
    name="EN 1990:2002 6.10a/b set B",
    edition="EN 1990:2002, Eurocode: Basis of structural design: the less favourable of expressions (6.10a) and "
    "(6.10b), factors of set B (STR/GEO), Table A1.2(B)",
    mark=f"{READ}; psi0 and gamma_Q = 0 {MEMORY}",
    letters=_ACTIONS,
    rows=(
        PublishedRow(
            "6.10a", "Σ γG,j Gk,j + γQ,1 ψ0,1 Qk,1 + Σ(i>1) γQ,i ψ0,i Qk,i", "6.4.3.2(3)", READ, reduces_leading=True
        ),
        PublishedRow(
            "6.10b", "Σ ξj γG,j Gk,j + γQ,1 Qk,1 + Σ(i>1) γQ,i ψ0,i Qk,i", "6.4.3.2(3)", READ, reduces_permanent=True
        ),
    ),
    factors=(*_SET_B, _XI),
    categories=_CATEGORIES,
    notes=(_RECOMMENDED, _FAVOURABLE, _EACH_ITS_OWN, _HOW_ACTIONS_ACT),
)

TABLES: Final[Mapping[str, PublishedTable]] = MappingProxyType(
    {table.name: table for table in (_STRENGTH, _ALLOWABLE_STRESS, _EXPRESSION_610, _EXPRESSIONS_610AB)}
)
