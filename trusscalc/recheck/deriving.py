"""What a filed sheet's record asks for, done again: the same reader, the same derivation, the same sheet."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any, Final

from trusscalc.blind import frozen, reveal
from trusscalc.compare import compare_submitted
from trusscalc.comparison import Comparison
from trusscalc.envelopes import envelope
from trusscalc.errors import FileFormatError
from trusscalc.files import reads
from trusscalc.governing import governing_checks
from trusscalc.influence import influence_line
from trusscalc.membercheck import check_members
from trusscalc.project import Project
from trusscalc.sheet.blocks import Sheet
from trusscalc.sheet.compose import compose
from trusscalc.sheet.digest import FORMAT
from trusscalc.sheet.envelopesheet import compose_envelope
from trusscalc.sheet.influencesheet import compose_influence
from trusscalc.statics.owncuts import own_cut
from trusscalc.submitted import read_submitted
from trusscalc.submitted.kept import KINDS, kept_again
from trusscalc.trussfile import TrussFile
from trusscalc.verifying import verification

COMPARED: Final = ("submitted", "reading", "theirs", "criterion", "blind", "written_down", "checked", "derived")
ASKED: Final = {
    "check": ("case", "members", "cuts", "prefer", "detail", "graphics"),
    "envelope": ("members", "detail"),
    "influence": ("target", "along", "train", "prefer"),
    "comparison": ("case", "members", "cuts", "prefer", "detail", *COMPARED),
}
"""What the record of a sheet says of what was asked for; that of a check does not name its task."""
TABLE: Final = 2
"""Entries of a submitted table: its name, and its content under its kind."""


def derive(record: Mapping[str, Any], truss_text: str) -> Sheet:
    """Return the sheet of a record.

    Parameters
    ----------
    record : mapping
        As ``sheet.digest.record_of`` gives it.
    truss_text : str
        The truss file.

    Raises
    ------
    TrusscalcError
        When the record or the truss file states something that cannot be.
    """
    stated = reads(truss_text)
    if record.get("task") == "envelope":
        return _envelope(record, stated, truss_text)
    if record.get("task") == "influence":
        return _influence(record, stated, truss_text)
    if record.get("task") == "comparison":
        return _comparison(record, stated, truss_text)
    cuts = {member: own_cut(stated.truss, keep=kept) for member, kept in record["cuts"].items()}
    case = stated.case(record["case"])
    check = check_members(stated.truss, case, record["members"], cuts=cuts, prefer=record["prefer"])
    project = Project(**record["project"], names=record["names"])
    return compose(
        check,
        project,
        truss_text=truss_text,
        places=record["places"],
        drawings=record["drawings"],
        detail=record["detail"],
        graphics=record["graphics"],
    )


def _envelope(record: Mapping[str, Any], stated: TrussFile, truss_text: str) -> Sheet:
    found = envelope(stated, record["members"])
    return compose_envelope(
        found,
        governing_checks(found),
        Project(**record["project"], names=record["names"]),
        truss_text=truss_text,
        places=record["places"],
        drawings=record["drawings"],
        detail=record["detail"],
    )


def _influence(record: Mapping[str, Any], stated: TrussFile, truss_text: str) -> Sheet:
    chain = stated.chain(record["along"])
    return compose_influence(
        influence_line(stated.truss, record["target"], chain, prefer=record["prefer"]),
        stated.train(record["train"]) if record["train"] else (),
        None,
        Project(**record["project"], names=record["names"]),
        train=record["train"],
        truss_text=truss_text,
        places=record["places"],
        drawings=record["drawings"],
    )


def _comparison(record: Mapping[str, Any], stated: TrussFile, truss_text: str) -> Sheet:
    return verification(
        _compared(record, stated),
        Project(**record["project"], names=record["names"]),
        derive=record["derived"],
        cuts={member: own_cut(stated.truss, keep=joints) for member, joints in record["cuts"].items()},
        prefer=record["prefer"],
        truss_text=truss_text,
        places=record["places"],
        drawings=record["drawings"],
        verbatim=record["detail"] == "all",
    )


def _compared(record: Mapping[str, Any], stated: TrussFile) -> Comparison:
    """Return the comparison done again, in the order in which it was done."""
    table = record["submitted"]
    (kind,) = table.keys() & set(KINDS)
    source = kept_again(kind, table[kind], table["name"])
    reading, asked = record["reading"], {"members": record["members"], **record["criterion"]}
    if record["blind"] == "no":
        submitted = read_submitted(source, stated.truss, **reading)
        return compare_submitted(stated, submitted, record["case"], theirs=record["theirs"], **asked)
    if record["checked"]:
        ours = frozen(check_members(stated.truss, stated.case(record["case"]), record["checked"]), **asked)
    else:
        ours = frozen(stated, record["case"], **asked)
    noted = ours.digest if record["written_down"] else ""
    if record["blind"] == "in order":
        return reveal(ours, source, theirs=record["theirs"], written_down=noted, **reading)
    submitted = read_submitted(source, stated.truss, **reading)
    return reveal(ours, submitted, theirs=record["theirs"], written_down=noted)


def must_be_known(record: Mapping[str, Any]) -> None:
    """Raise a FileFormatError for a record that holds anything but what ``record_of`` puts there."""
    lines = {name for name in Project.__dataclass_fields__ if name != "names"}
    right: dict[str, Callable[[Any], bool]] = {
        "format": lambda item: type(item) is int and item == FORMAT,
        "task": lambda item: _text(item) and item in ASKED,
        "case": _text,
        "members": lambda items: _texts(items) and bool(items),
        "cuts": lambda items: _entries(items, _texts),
        "target": _text,
        "along": _text,
        "train": _text,
        "submitted": _is_table,
        "reading": _is_reading,
        "theirs": _text,
        "criterion": lambda items: _entries(items, _text) and set(items) == {"relative", "absolute"},
        "blind": lambda item: item in ("no", "in order", "read before"),
        "written_down": lambda item: type(item) is bool,
        "checked": _texts,
        "derived": _texts,
        "prefer": lambda item: item in ("", "sections", "joints"),
        "places": lambda item: type(item) is int,
        "drawings": lambda item: type(item) is bool,
        "detail": lambda item: item in ("members", "all", "summary"),
        "graphics": lambda item: type(item) is bool,
        "project": lambda items: _entries(items, _text) and set(items) <= lines,
        "names": lambda items: _entries(items, _text),
    }
    task = record.get("task", "check")
    needed = {"format", "places", "drawings", "project", "names", *ASKED.get(task if _text(task) else "", ())}
    needed |= {"task"} if "task" in record else set()
    wrong = [name for name in right if name in needed and (name not in record or not right[name](record[name]))]
    if wrong:
        raise FileFormatError([f"record, {name}: is not what this version writes there" for name in wrong])


def _texts(items: Any) -> bool:
    return isinstance(items, list) and all(isinstance(item, str) for item in items)


def _entries(items: Any, fits: Callable[[Any], bool]) -> bool:
    return isinstance(items, dict) and all(map(fits, items.values()))


def _text(item: Any) -> bool:
    return isinstance(item, str)


def _is_table(items: Any) -> bool:
    """Return whether a submitted table has its name, and its content under one kind."""
    return _entries(items, _text) and "name" in items and len(items) == TABLE and not set(KINDS).isdisjoint(items)


def _is_reading(items: Any) -> bool:
    """Return whether a record of reading holds what ``submitted.kept.Reading`` does."""
    plain = ("convention", "unit", "case", "decimal")
    if not isinstance(items, dict) or set(items) != {*plain, "columns", "names", "others"}:
        return False
    named = items["names"] is None or _entries(items["names"], _text)
    return (
        named and _entries(items["columns"], _text) and _texts(items["others"]) and all(_text(items[p]) for p in plain)
    )
