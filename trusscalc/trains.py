"""Trains of axles and the uniform loads that go with them: what a moving load is made of.

A train is stated as engineers state it: axle loads and spacings, the leading axle first; a lane load for the adverse
lengths; a uniform load that follows the last axle, or stands before and behind the group. Where it is placed is the
business of ``travel``.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields, replace
from typing import Any, Final

from trusscalc.chains import Chain
from trusscalc.errors import InputError, TrusscalcError
from trusscalc.exact import ONE, ZERO, Exact
from trusscalc.trainvalues import READERS, UNIFORM, Pair, value_faults, values_read
from trusscalc.truss import did_you_mean
from trusscalc.units import factor


@dataclass(frozen=True, slots=True)
class Train:
    """Axles that travel together, and the uniform loads that go with them.

    Numbers are made exact as everywhere: text, whole numbers, shortest decimals.

    Attributes
    ----------
    name : str
        What it is called.
    axles : tuple of Exact
        Axle loads, the leading axle first, in a unit of force; none is negative.
    spacing : tuple of (Exact, Exact)
        From each axle to the next: smallest and largest distance, equal when it is fixed. A single number may be
        given for a fixed one.
    impact : Exact
        Added to the axles, and to nothing else: 0.33 makes them 1.33 times as heavy.
    lane : Exact
        Uniform load, force per length, on adverse lengths only.
    share : Exact
        Part of everything that this truss carries.
    omit : bool
        Whether axles that add nothing or help are left out.
    follow : (Exact, Exact) or None
        Uniform load behind the last axle: distance from it, force per length; unlimited, whether it helps or not.
    beside : (Exact, Exact) or None
        Uniform load before the first and behind the last axle: distance from them, force per length; on adverse
        lengths only.
    source : str
        Edition and clause of a published one, and what of it was read and what is from memory.

    Raises
    ------
    InputError
        With every fault found in ``problems``.

    Examples
    --------
    >>> Train("pair", (6, 24), (14,)).spacing
    ((Exact('14'), Exact('14')),)
    """

    name: str
    axles: tuple[Exact, ...]
    spacing: tuple[Pair, ...] = ()
    impact: Exact = ZERO
    lane: Exact = ZERO
    share: Exact = ONE
    omit: bool = False
    follow: Pair | None = None
    beside: Pair | None = None
    source: str = ""

    def __post_init__(self) -> None:
        where = f"[trains.{self.name}]"
        stated = {key: getattr(self, key) for key in READERS if getattr(self, key) is not None}
        problems: list[str] = []
        values = values_read(stated, where, problems)
        problems += value_faults(values, where)
        if problems:
            raise InputError(problems)
        for key, value in values.items():
            object.__setattr__(self, key, value)


@dataclass(frozen=True, slots=True)
class LoadModel:
    """Trains of which the one with the largest effect governs, with the rule that says so.

    Attributes
    ----------
    name : str
        What it is called.
    trains : tuple of Train
        Such as truck and lane, tandem and lane; no two of one name.
    source : str
        Edition and clause, and what of it was read and what is from memory.
    rule : str
        How it is applied, and what is not in it.
    published : str
        The name under which it is shipped.
    force, length : str
        The units of its numbers.
    own : tuple of (str, Exact or bool)
        What was stated beside the published name, in place of what it has.
    """

    name: str
    trains: tuple[Train, ...]
    source: str = ""
    rule: str = ""
    published: str = ""
    force: str = ""
    length: str = ""
    own: tuple[tuple[str, Exact | bool], ...] = ()


@dataclass(frozen=True, slots=True)
class MovingLoad:
    """A load case that moves: its name, the trains of which the worst governs, and their path."""

    name: str
    trains: tuple[Train, ...]
    along: Chain


def converted(train: Train, force: str, length: str, into_force: str, into_length: str) -> Train:
    """Return the train with its numbers in other units, exactly.

    Parameters
    ----------
    train : Train
        The train.
    force, length : str
        The units of its numbers.
    into_force, into_length : str
        The units wanted.

    Raises
    ------
    UnitError
        For a unit that is not known, or of another kind.

    Examples
    --------
    >>> converted(Train("pair", (6, 24), (14,), lane="0.64"), "kip", "ft", "lbf", "in").lane
    Exact('160/3')
    """
    for force_unit, length_unit in ((force, length), (into_force, into_length)):
        factor(force_unit, "kN")
        factor(length_unit, "m")
    heavier, longer = factor(force, into_force), factor(length, into_length)

    def uniform(pair: Pair | None) -> Pair | None:
        return (pair[0] * longer, pair[1] * heavier / longer) if pair else None

    return replace(
        train,
        axles=tuple(axle * heavier for axle in train.axles),
        spacing=tuple((low * longer, high * longer) for low, high in train.spacing),
        lane=train.lane * heavier / longer,
        follow=uniform(train.follow),
        beside=uniform(train.beside),
    )


def train_faults(train: Train) -> list[str]:
    """Return what is wrong with a train, each fault with what, where and what to do; a Train that exists has none."""
    return value_faults({field.name: getattr(train, field.name) for field in fields(train)}, f"[trains.{train.name}]")


# --- in a truss file --------------------------------------------------------------------------------------

BESIDE_PUBLISHED: Final = ("impact", "share", "omit")


def train_of(
    name: str,
    table: object,
    where: str,
    problems: list[str],
    published: Callable[[str], LoadModel] | None = None,
) -> Train | LoadModel | None:
    r"""Return what ``[trains.NAME]`` of a truss file states, or None when something is wrong with it.

    Parameters
    ----------
    name : str
        The train's name.
    table : mapping
        Its keys and values, numbers as everywhere.
    where : str
        What each problem begins with, ``[trains.NAME]``.
    problems : list of str
        Every fault found is added: what, where, what to do.
    published : callable, optional
        From the name of a shipped load model to the model in the file's units; what ``published = "HL-93"`` needs.

    Examples
    --------
    >>> faults = []
    >>> train_of("pair", {"axles": [6, 24], "spacing": [-14], "shear": 1}, "[trains.pair]", faults)
    >>> print(*faults, sep="\n")
    [trains.pair] shear: unknown key; did you mean share?
    [trains.pair] spacing: spacing 1 is negative; write the distance from axle to axle
    """
    if not isinstance(table, Mapping):
        problems.append(f"{where}: a table is needed, with axles = [6, 24] and spacing = [14] below")
        return None
    if "published" in table:
        return _published(name, table, where, problems, published)
    found = [
        f"{where} {key}: unknown key{did_you_mean(key, [*READERS, 'published'], told=told)}"
        for told, key in enumerate(key for key in table if key not in READERS)
    ]
    if "axles" not in table:
        found.append(f"{where}: axles are missing; list their loads, the leading axle first: axles = [6, 24]")
    elif "spacing" not in table and _is_several(table["axles"]):
        found.append(f"{where}: spacing is missing; list the distances from axle to axle: spacing = [14]")
    values = values_read(table, where, found)
    found += value_faults(values, where)
    problems += found
    return None if found else Train(name, **values)


def _is_several(axles: object) -> bool:
    return isinstance(axles, Sequence) and not isinstance(axles, str) and len(axles) > 1


def _published(
    name: str,
    table: Mapping[str, Any],
    where: str,
    problems: list[str],
    published: Callable[[str], LoadModel] | None,
) -> LoadModel | None:
    found = [
        f"{where} {key}: has no place beside published, which takes {', '.join(BESIDE_PUBLISHED)}"
        for key in table
        if key not in (*BESIDE_PUBLISHED, "published")
    ]
    own = values_read({key: value for key, value in table.items() if key in BESIDE_PUBLISHED}, where, found)
    found += value_faults(own, where)
    model = None
    try:
        if type(table["published"]) is not str:
            found.append(f'{where} published: a name in quotes is needed, such as "HL-93"')
        elif published is None:
            found.append(f"{where} published: published trains are not read here; state axles and spacing")
        else:
            model = published(table["published"])
    except TrusscalcError as problem:
        found.append(f"{where} published: {problem}")
    problems += found
    if found or model is None:
        return None
    return _with_own(replace(model, name=name), own)


def _with_own(model: LoadModel, own: Mapping[str, Any]) -> LoadModel:
    """Return a published model with what the user put in place of its own values, and its source saying so."""
    changed = [
        key for key in ("impact", "omit") if key in own and any(getattr(each, key) != own[key] for each in model.trains)
    ]
    note = f"; {' and '.join(changed)}: the user's, not the published value" if changed else ""
    trains = tuple(replace(train, **own, source=train.source + note) for train in model.trains)
    return replace(model, trains=trains, source=model.source + note, own=tuple(own.items()))


def stated(train: Train | LoadModel) -> dict[str, Any]:
    """Return the entries of ``[trains.NAME]`` that read back to an equal train: Exact, bool, text, lists and dicts.

    Raises
    ------
    InputError
        For a load model that is not a shipped one: a truss file states single trains.

    Examples
    --------
    >>> stated(Train("pair", (6, 24), ((14, 30),), follow=(5, 8)))["spacing"]
    [[Exact('14'), Exact('30')]]
    """
    if isinstance(train, LoadModel):
        if not train.published:
            message = f"the load model {train.name!r} is not a published one; state its trains one by one"
            raise InputError(message)
        return {"published": train.published, **dict(train.own)}
    entries: dict[str, Any] = {
        "axles": list(train.axles),
        "spacing": [low if low == high else [low, high] for low, high in train.spacing],
    }
    entries |= {key: getattr(train, key) for key in ("impact", "lane") if getattr(train, key)}
    if train.share != ONE:
        entries["share"] = train.share
    if train.omit:
        entries["omit"] = True
    for key, parts in UNIFORM.items():
        if pair := getattr(train, key):
            entries[key] = dict(zip(parts, pair, strict=True))
    return entries
