"""Trains and influence lines in tables: what a train is, what a line's ordinates are, how a force comes of both."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import Final

from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.influence import InfluenceLine
from trusscalc.loads import JointLoad, LoadCase, factor_text
from trusscalc.sheet.blocks import Block, Column, Decimals, Inline, Items, Paragraph, Run, Table
from trusscalc.sheet.compact import ends_within, without_columns
from trusscalc.sheet.influencefigure import target_words
from trusscalc.sheet.inscriptions import exact_text
from trusscalc.sheet.loadinventory import by_joint
from trusscalc.sheet.values import bound, decimal_text, float_text, in_a_row, is_readable, printed
from trusscalc.sheet.words import counted, listed
from trusscalc.standing import StandingLoad, standing_loads
from trusscalc.trains import LoadModel, MovingLoad, Train
from trusscalc.travel import Extreme
from trusscalc.trussfile import TrussFile, trains_of

MOST_AXLES: Final = 5
"""Axles that have a column of their own in a table of joint loads."""
MORE_PLACES: Final = 3
"""Decimal places of ordinates and areas beyond those of forces, so that products come out right."""
RULES: Final = (
    "Trains travel in both directions. Axles off the chain count nothing; one between joints is shared to them as by a "
    "simple beam. Impact is on the axles alone, the share on everything, lane load on adverse lengths only."
)
NO_CASE: Final = LoadCase("", {})
RAISED: Final = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
BACKTICKS: Final = re.compile("`([^`]*)`")

Row = tuple[Inline | None, ...]


# --- what travels -----------------------------------------------------------------------------------------


def moving_loads(stated: TrussFile, loads: Sequence[MovingLoad]) -> list[Block]:
    """Return the moving loads with their chains and trains, and where each train is from."""
    if not loads:
        return []
    truss = stated.truss
    trains = tuple(dict.fromkeys(train for load in loads for train in load.trains))
    paths = [
        (
            load.name,
            (Run(f"{model_of(stated, load.trains)} on the chain {load.along.name}: {', '.join(load.along.joints)}"),),
        )
        for load in loads
    ]
    return [
        Items((*paths, *rules(stated, trains))),
        train_table(trains, truss.force, truss.length),
        Paragraph((Run(RULES),), "note"),
    ]


def model_of(stated: TrussFile, trains: Sequence[Train]) -> str:
    """Return what a file calls these trains."""
    return next((each.name for each in stated.trains if trains_of(each) == tuple(trains)), trains[0].name)


def train_table(trains: Sequence[Train], force: str, length: str) -> Table:
    """Return what the trains are made of, as stated, in the file's units."""
    columns = (
        Column("train"),
        Column(f"axles, the leading one first, {force}"),
        Column(f"spacing, {length}"),
        Column("impact", "right"),
        Column(f"lane, {force}/{length}", "right"),
        Column("share", "right"),
        Column("axles that help"),
        Column("uniform load"),
    )
    rows = tuple(_of_train(train, force, length) for train in trains)

    def idle(_: int, cells: Sequence[Inline | None]) -> bool:
        return all(cell is None for cell in cells)

    return without_columns(Table(columns, rows), idle)


def _of_train(train: Train, force: str, length: str) -> Row:
    gaps = [low if low == high else (low, high) for low, high in train.spacing]
    spacing = "; ".join(
        f"{factor_text(gap[0])} to {factor_text(gap[1])}" if isinstance(gap, tuple) else factor_text(gap)
        for gap in gaps
    )
    uniform = []
    if train.follow:
        after, size = map(factor_text, train.follow)
        uniform.append(f"{size} {force}/{length} from {after} {length} behind the last axle, without end")
    if train.beside:
        start, size = map(factor_text, train.beside)
        uniform.append(f"{size} {force}/{length} from {start} {length} before and behind the axles, where adverse")
    return (
        Run(train.name),
        Run("; ".join(map(factor_text, train.axles))),
        Run(spacing) if spacing else None,
        printed(train.impact, NO_CASE) if train.impact else None,
        printed(train.lane, NO_CASE) if train.lane else None,
        printed(train.share, NO_CASE),
        Run("left out" if train.omit else "stay"),
        Run("; ".join(uniform)) if uniform else None,
    )


def rules(stated: TrussFile, trains: Sequence[Train]) -> list[tuple[str, tuple[Inline, ...]]]:
    """Return how load models of the file are applied; where trains are from stands under Basis."""
    models = [each for each in stated.trains if isinstance(each, LoadModel) and set(each.trains) & set(trains)]
    return [(each.name, (Run(_quoted(each.rule)),)) for each in models if each.rule]


def _quoted(rule: str) -> str:
    """Return a rule with the names of keys in quotation marks."""
    return BACKTICKS.sub(r"“\1”", rule)


# --- influence lines --------------------------------------------------------------------------------------


def ordinate_table(line: InfluenceLine, places: int) -> Table:
    """Return the ordinates at the joints of the chain, by both routes."""
    largest = max(1.0, *(abs(float(ordinate)) for ordinate in line.ordinates))
    slack = line.tolerance * largest
    rows: list[Row] = []
    for joint, at, ordinate, numeric, reason in zip(
        line.chain.joints, line.positions, line.ordinates, line.numeric, line.reasons, strict=True
    ):
        rows.append(
            (
                Run(joint),
                printed(at, NO_CASE),
                in_a_row(ordinate),
                Decimals(decimal_text(ordinate, places + MORE_PLACES)),
                Decimals(float_text(numeric, places + MORE_PLACES, slack)),
                Run(verdict(reason)),
            )
        )
    columns = (
        Column("joint"),
        Column(f"at, {line.truss.length}", "right"),
        Column("ordinate, exact", "right"),
        Column("decimal", "right"),
        Column("stiffness route", "right"),
        Column("verdict", "right"),
    )
    strong = tuple(place for place, reason in enumerate(line.reasons) if reason)
    return Table(columns, tuple(rows), ordinate_words(line, places), strong)


def ordinate_words(line: InfluenceLine, places: int) -> str:
    """Return what a table of ordinates is of."""
    positive = {"member": "tension", "reaction": "along its written direction", "shear": "upwards left of the section"}
    return (
        f"Influence line of {target_words(line)}: force for a unit load downwards at the joint, positive: "
        f"{positive[line.kind]}; straight between joints. Differences up to "
        f"{bound_words(line.tolerance)} of the largest force agree. {area_words(line, places)}"
    )


def bound_words(tolerance: float) -> str:
    """Return a tolerance in running text: the power of ten not above it."""
    return "10" + str(bound(tolerance).exponent).translate(RAISED)


def verdict(reason: str) -> str:
    """Return the verdict that a reason stands for."""
    return "agrees" if not reason else "undecided" if reason.startswith("the geometry") else "differs"


def area_words(line: InfluenceLine, places: int) -> str:
    """Return areas and zero points of an influence line."""
    length = line.truss.length

    def amount(value: Exact) -> str:
        decimal = decimal_text(value, places).replace("-", "−")
        if ends_within(value, places):
            return f"{factor_text(value).replace('-', '−')} {length}"
        return f"{exact_text(value)} ≈ {decimal} {length}" if is_readable(value) else f"{decimal} {length}"

    zeros = listed(distance(place, places) for place in line.zeros)
    return (
        f"Positive area {amount(line.positive_area)}, negative area {amount(line.negative_area)}; zero points: "
        f"{f'{zeros} {length} from {line.chain.joints[0]}' if zeros else 'none'}."
    )


# --- a train on an influence line -------------------------------------------------------------------------


def effect_table(line: InfluenceLine, extreme: Extreme, train: Train, places: int, what: str = "") -> Table:
    """Return how a train's force comes of the ordinates: axle times ordinate, load per length times area.

    Parameters
    ----------
    line : InfluenceLine
        The line.
    extreme, train : Extreme and Train
        Where the train stands.
    places : int
        Decimal places of the sum; ordinates and areas have three more, products two.
    what : str
        What the force is, for the caption.
    """
    force, length = line.truss.force, line.truss.length
    loads = standing_loads(line, extreme, train)
    rows = [_of_load(load, train, places) for load in loads]
    total = Decimals(decimal_text(extreme.value, places + 2))
    rows.append((Run("sum"), *([None] * (len(rows[0]) - 2 if rows else 6)), total))
    columns = (
        Column("load"),
        Column("as stated", "right"),
        Column("with"),
        Column(f"counts, {force} or {force}/{length}", "right"),
        Column(f"at, or from and to, {length}", "right"),
        Column(f"ordinate, or area in {length}", "right"),
        Column(f"adds, {force}", "right"),
    )
    return Table(columns, tuple(rows), effect_words(line, extreme, train, what), totals=1)


def _of_load(load: StandingLoad, train: Train, places: int) -> Row:
    factors = [ONE + train.impact] if load.is_axle and train.impact else []
    factors += [train.share] if train.share != ONE else []
    with_them = " · ".join(factor_text(factor) for factor in factors)
    where = [distance(end, places) for end in (load.start, load.end)]
    return (
        Run(load.what),
        printed(load.stated, NO_CASE),
        Run(f"· {with_them}") if with_them else None,
        printed(load.amount, NO_CASE),
        Run(where[0] if load.is_axle else f"{where[0]} to {where[1]}"),
        Decimals(decimal_text(load.ordinate, places + MORE_PLACES)),
        Decimals(decimal_text(load.effect, places + 2)),
    )


def distance(value: Exact, places: int = 3) -> str:
    """Return a distance in running text: exact where it is a short decimal."""
    text = factor_text(value)
    return text if value.is_rational and "/" not in text else decimal_text(value, places)


def effect_words(line: InfluenceLine, extreme: Extreme, train: Train, what: str = "") -> str:
    """Return where a train stands, and how its table is read."""
    text = f"{f'{what}: ' if what else ''}{train.name}{stand_words(line, extreme, train)}."
    rounded = (
        "each decimal rounded once from its exact value, so that a sum may differ from its terms in the last digit"
    )
    return f"{text} Products of the columns before; {rounded}."


def stand_words(line: InfluenceLine, extreme: Extreme, train: Train) -> str:
    """Return the direction of travel and the leading axle's place, or that no axle is adverse."""
    joints, stand = line.chain.joints, extreme.stand
    if stand is None:
        return ", no position of its axles adverse"
    start, end = (joints[0], joints[-1]) if stand.direction == "forward" else (joints[-1], joints[0])
    unit = line.truss.length
    text = f", travelling from {start} to {end}, leading axle {distance(stand.lead_axle_at)} {unit} from {joints[0]}"
    if any(low != high for low, high in train.spacing):
        text += f", axles {listed(map(distance, stand.spacing))} {unit} apart"
    text += ", an axle just off an end of the chain" if stand.at_limit else ""
    return text.replace("-", "−")


def share_table(line: InfluenceLine, extreme: Extreme, train: Train, places: int) -> Table:
    """Return which joint takes what of a train where it stands, load by load."""
    columns = share_columns(line, extreme, train)
    every = _joint_loads(standing_loads(line, extreme, train))
    columns = [*(columns if len(columns) > 1 else []), (f"together, {line.truss.force}", every)]
    caption = f"What the joints take of {train.name} where it stands, positive upwards; each load shared to two joints."
    return by_joint(line.truss, columns, "y", NO_CASE, places, caption)


def share_columns(line: InfluenceLine, extreme: Extreme, train: Train) -> list[tuple[str, list[JointLoad]]]:
    """Return the joint loads of a train where it stands: of each axle, or of many together, and of uniform load."""
    loads = standing_loads(line, extreme, train)
    axles = [load for load in loads if load.is_axle]
    uniform = [load for load in loads if not load.is_axle]
    columns: list[tuple[str, list[JointLoad]]] = []
    if len(axles) <= MOST_AXLES:
        columns += [(load.what, _joint_loads([load])) for load in axles]
    elif axles:
        columns.append((counted(len(axles), "axle"), _joint_loads(axles)))
    for what in dict.fromkeys(load.what for load in uniform):
        columns.append((what, _joint_loads([load for load in uniform if load.what == what])))
    return columns


def _joint_loads(loads: Sequence[StandingLoad]) -> list[JointLoad]:
    shares: dict[str, Exact] = {}
    for load in loads:
        for joint, share in load.shares:
            shares[joint] = shares.get(joint, ZERO) + share
    return [JointLoad(joint, ZERO, -share) for joint, share in shares.items()]


__all__ = [
    "RULES",
    "area_words",
    "effect_table",
    "model_of",
    "moving_loads",
    "ordinate_table",
    "rules",
    "share_columns",
    "share_table",
    "stand_words",
    "train_table",
]
