"""Published trains: data with edition and mark, each in the units it was published in.

The metric figures of a standard are its own and no conversions of its US ones, so a train is never converted into
another "edition": it is taken in the units of one edition and converted exactly into those of the truss.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from types import MappingProxyType
from typing import Any, Final

from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import exact
from trusscalc.trains import LoadModel, Train, converted, train_of
from trusscalc.truss import did_you_mean

DATA: Final = Path(__file__).with_name("data") / "trains.toml"
COOPER_STATED: Final = 80
COOPER_SHIPPED: Final = range(10, 90, 10)
COOPER_LIMITS: Final = (10, 100)
_COOPER: Final = re.compile(r"Cooper E ?([0-9]{1,3}(?:\.[0-9]{1,3})?)")


def published(name: str, force: str, length: str) -> LoadModel:
    """Return a published load model in the units of a truss, converted exactly.

    Parameters
    ----------
    name : str
        A name of ``PUBLISHED``, or ``Cooper E`` with any number from 10 to 100, in proportion.
    force, length : str
        The units wanted.

    Raises
    ------
    UnknownNameError
        When there is none of that name.
    UnitError
        For a unit that is not known.

    Examples
    --------
    >>> published("Cooper E72.5", "kip", "ft").trains[0].axles[1]
    Exact('145/2')
    >>> published("HL-93 metric", "kN", "m").trains[1].axles
    (Exact('110'), Exact('110'))
    """
    found = PUBLISHED.get(name) or _of_cooper(name)
    if found is None:
        near = did_you_mean(name, PUBLISHED) or f"; there are {', '.join(PUBLISHED)}"
        message = f"there is no published train {name[:80]!r}{near}"
        raise UnknownNameError(message, name=name)
    trains = tuple(converted(train, found.force, found.length, force, length) for train in found.trains)
    return replace(found, trains=trains, force=force, length=length)


def _of_cooper(name: str) -> LoadModel | None:
    """Return a Cooper loading of any class in proportion, or None when the name is none."""
    match = _COOPER.fullmatch(name.strip())
    if match is None or not COOPER_LIMITS[0] <= Fraction(match[1]) <= COOPER_LIMITS[1]:
        return None
    return _cooper(f"Cooper E{match[1]}", Fraction(match[1]), PUBLISHED[f"Cooper E{COOPER_STATED}"])


def _cooper(name: str, axle: Fraction, stated: LoadModel) -> LoadModel:
    """Return the Cooper loading whose driving axles weigh so many kips."""
    if axle == COOPER_STATED:
        return stated
    part = exact(axle / COOPER_STATED)
    (train,) = stated.trains
    assert train.follow  # noqa: S101 - the E-series has it
    after, per_length = train.follow
    source = f"{train.source}; E{COOPER_STATED} times {axle}/{COOPER_STATED}"
    scaled = replace(
        train,
        name=name,
        axles=tuple(load * part for load in train.axles),
        follow=(after, per_length * part),
        source=source,
    )
    return replace(stated, name=name, published=name, trains=(scaled,), source=source)


def _read(data: Mapping[str, Any]) -> Mapping[str, LoadModel]:
    """Return the load models of the data file."""
    problems: list[str] = []
    models: dict[str, LoadModel] = {}
    for name, entry in data.items():
        source = f"{entry['source']} ({entry['mark']})"
        trains = [_train(train, f"[{name}.trains]", source, problems) for train in entry["trains"]]
        models[name] = LoadModel(
            name,
            tuple(train for train in trains if train is not None),
            source,
            entry["rule"],
            published=name,
            force=entry["force"],
            length=entry["length"],
        )
    if problems:
        raise InputError(problems)
    stated = models.pop(f"Cooper E{COOPER_STATED}")
    scaled = {f"Cooper E{axle}": _cooper(f"Cooper E{axle}", Fraction(axle), stated) for axle in COOPER_SHIPPED}
    return MappingProxyType(models | scaled)


def _train(entry: Mapping[str, Any], where: str, source: str, problems: list[str]) -> Train | None:
    table = {key: value for key, value in entry.items() if key != "name"}
    train = train_of(entry["name"], table, where, problems)
    return replace(train, source=source) if isinstance(train, Train) else None


PUBLISHED: Final[Mapping[str, LoadModel]] = _read(tomllib.loads(DATA.read_text(encoding="utf-8")))
"""Load models by name, with ``force`` and ``length``: the units of their numbers, those of their edition."""
