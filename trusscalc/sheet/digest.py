"""What a filed sheet carries so that it can be derived again, and the digest of everything it shows.

The record is the input alone: whoever rechecks a sheet derives the rest. The content digest is one line that a
printed sheet can be compared by: the same input and the same program give the same one.
"""

from __future__ import annotations

import hashlib
import json
from dataclasses import fields, is_dataclass
from typing import Any, Final

from trusscalc.exact import Exact
from trusscalc.exacttext import to_text
from trusscalc.sheet.blocks import Origin, Sheet, SubmittedTable

FORMAT: Final = 1
FINENESS: Final = 2
"""Decimals of a millimetre to which the marks of a drawing count."""


def record_of(sheet: Sheet) -> dict[str, Any]:
    """Return what a sheet was derived from, without the truss file, which stands on the sheet itself.

    ``input`` is the SHA-256 of the truss file, ``content`` that of everything the sheet shows.
    """
    origin = sheet.origin
    return {
        "format": FORMAT,
        "program": origin.program,
        **_asked(origin),
        "places": origin.places,
        "drawings": origin.drawings,
        **({} if origin.task == "influence" else {"detail": origin.detail}),
        **({"graphics": origin.graphics} if origin.task == "check" else {}),
        "project": dict(origin.project),
        "names": dict(origin.names),
        "input": hashlib.sha256(origin.truss_text.encode()).hexdigest(),
        "content": content_digest(sheet),
    }


def _asked(origin: Origin) -> dict[str, Any]:
    """Return what was asked for; a check of members has no task, as in sheets filed before there were others."""
    if origin.task == "envelope":
        return {"task": origin.task, "members": list(origin.members)}
    if origin.task == "influence":
        asked = {"target": origin.target, "along": origin.along, "train": origin.train}
        return {"task": origin.task, **asked, "prefer": origin.prefer}
    if origin.submitted is not None:
        return {"task": origin.task, **_compared(origin, origin.submitted)}
    return {
        "case": origin.case,
        "members": list(origin.members),
        "cuts": {name: list(kept) for name, kept in origin.cuts},
        "prefer": origin.prefer,
    }


def _compared(origin: Origin, table: SubmittedTable) -> dict[str, Any]:
    return {
        "case": origin.case,
        "members": list(origin.members),
        "submitted": {"name": table.name, table.kind: table.content},
        "reading": {
            "columns": dict(table.columns),
            "names": None if table.renamed is None else dict(table.renamed),
            "convention": table.convention,
            "unit": table.unit,
            "case": table.case,
            "decimal": table.decimal,
            "others": list(table.others),
        },
        "theirs": table.theirs,
        "criterion": {"relative": table.relative, "absolute": table.absolute},
        "blind": table.blind,
        "written_down": table.written_down,
        "checked": list(table.frozen_members),
        "derived": list(table.derived),
        "cuts": {name: list(kept) for name, kept in origin.cuts},
        "prefer": origin.prefer,
    }


def content_digest(sheet: Sheet) -> str:
    """Return the SHA-256 of a sheet's content: every word, number, equation, table cell and mark, in order.

    Examples
    --------
    >>> from trusscalc.sheet.blocks import Heading, Origin
    >>> origin = Origin("", "dead", (), 3, (), (), True, "trusscalc 1")
    >>> one, other = (Sheet("t", (Heading(1, text),), (), origin) for text in ("5 kN", "6 kN"))
    >>> len(content_digest(one)), content_digest(one) == content_digest(other)
    (64, False)
    """
    text = json.dumps(_plain(sheet), ensure_ascii=True, separators=(",", ":"))
    return hashlib.sha256(text.encode()).hexdigest()


def _plain(item: Any) -> Any:
    """Return a record as nested lists of text, whole numbers and truth values, each with its kind."""
    if item is None or isinstance(item, (str, bool, int)):
        return item
    if isinstance(item, float):  # noise below what a drawing shows must not count
        return f"{round(item, FINENESS) + 0.0:.{FINENESS}f}"
    if isinstance(item, Exact):
        return to_text(item)
    if isinstance(item, tuple):
        return [_plain(inner) for inner in item]
    if is_dataclass(item):
        held = [(field, getattr(item, field.name)) for field in fields(item)]
        told = [value for field, value in held if not (field.metadata.get("added") and value == field.default)]
        return [type(item).__name__, *map(_plain, told)]
    message = f"a sheet does not hold a {type(item).__name__}"
    raise TypeError(message)
