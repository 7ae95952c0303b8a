"""A filed notebook against the notebook derived again, cell by cell: sources, stored outputs, what came with them.

Running a notebook again changes counts, times and what it says of its kernel, and nothing that is read: these are
left out. Anything else that is not as derived is a difference, a cell too many among them.
"""

from __future__ import annotations

import html
import json
import re
from collections.abc import Iterator, Sequence
from typing import Any, Final

from trusscalc.recheck.differences import Difference, differing, excerpts

OF_THE_KERNEL: Final = frozenset({"kernelspec", "language_info", "vscode"})
OF_A_RUN: Final = frozenset({"execution", "trusted", "vscode", "ExecuteTime"})
_TAG: Final = re.compile(r"<[^<>]*>")
_HEADING: Final = re.compile(r"^#+\s+(.*)$", re.MULTILINE)
_LABEL: Final = re.compile(r"^\*(.+)\*<br>$")

Data = dict[str, Any]


def notebook_differences(shown: Data, derived: Data, warned: Sequence[str] = ()) -> list[Difference]:
    """Return where a filed notebook is not the derived one.

    Parameters
    ----------
    shown : dict
        The filed notebook's JSON; untrusted.
    derived : dict
        The JSON of the notebook this program writes of the same input.
    warned : sequence of str
        Warnings of this input, which a run may have printed into the notebook.
    """
    found = _metadata(shown, derived)
    one, other = shown.get("cells"), derived["cells"]
    if not isinstance(one, list) or not all(isinstance(cell, dict) for cell in one):
        return [*found, Difference("cells", _short(one), f"{len(other)} cells")]
    names = _names(other)
    for a, b, c, d in differing([_key(cell) for cell in one], [_key(cell) for cell in other]):
        for place in range(max(b - a, d - c)):
            mine = one[a + place] if a + place < b else None
            ours = other[c + place] if c + place < d else None
            name = names[min(c + place, len(names) - 1)]
            if mine is None or ours is None:
                where = (
                    f"a cell is missing: {name}" if mine is None else f"a cell that is not the sheet's, before {name}"
                )
                found.append(Difference(where, *excerpts(_source(mine), _source(ours))))
            else:
                found += _cell(mine, ours, name, warned)
    equal = _equal_pairs(one, other)
    for mine, ours, place in equal:
        found += _rest(mine, ours, names[place], warned)
    return found


def counts(derived: Data) -> dict[str, int]:
    """Return how much of each kind a notebook has."""
    sources = [_source(cell) for cell in derived["cells"]]
    text = "\n".join(sources)
    return {
        "cells": len(sources),
        "steps": sum(source.startswith("<div") for source in sources),
        "equations": sum(line.startswith("$") for line in text.split("\n")),
        "table rows": sum(line.startswith("|") for line in text.split("\n")),
        "figures": text.count("<img "),
    }


def _equal_pairs(one: list[Data], other: list[Data]) -> Iterator[tuple[Data, Data, int]]:
    """Return the cells with equal sources, whose outputs are still to be compared."""
    keys, others = [_key(cell) for cell in one], [_key(cell) for cell in other]
    spans = list(differing(keys, others))
    a = c = 0
    for first, last, start, end in [*spans, (len(keys), len(keys), len(others), len(others))]:
        for place in range(first - a):
            yield one[a + place], other[c + place], c + place
        a, c = last, end
        del start


def _key(cell: Data) -> str:
    return f"{cell.get('cell_type')}\n{_source(cell)}"


def _source(cell: Data | None) -> str:
    return "" if cell is None else _joined(cell.get("source", ""))


def _joined(text: Any) -> str:
    """Return text that notebooks may keep as one piece or line by line."""
    if isinstance(text, list) and all(isinstance(line, str) for line in text):
        return "".join(text)
    return text if isinstance(text, str) else _short(text)


def _short(value: Any) -> str:
    return json.dumps(value, ensure_ascii=False, sort_keys=True)


def _names(cells: list[Data]) -> list[str]:
    """Return what a reader would call each cell: by its own heading, or by the one before."""
    names = []
    heading, code = "title block", 0
    for cell in cells:
        if cell["cell_type"] == "code":
            code += 1
            names.append(f"code cell {code}")
            continue
        found = _HEADING.search(_source(cell))
        if found:
            heading = _words(found[1].split("&emsp;")[0]).replace("\N{EN SPACE}", " ")
            heading = f"step {heading}" if _source(cell).startswith("<div") else heading
        names.append(heading)
    return names


def _words(markdown: str) -> str:
    return html.unescape(_TAG.sub("", markdown)).strip("*| \n")


# --- metadata ---------------------------------------------------------------------------------------------


def _metadata(shown: Data, derived: Data) -> list[Difference]:
    found = []
    outer = {key: value for key, value in shown.items() if key not in {"cells", "metadata", "nbformat_minor"}}
    found += _entries(outer, {"nbformat": derived["nbformat"]}, "notebook")
    mine, ours = shown.get("metadata"), derived["metadata"]
    mine = mine if isinstance(mine, dict) else {}
    record = mine.get("trusscalc")
    found += _entries(record if isinstance(record, dict) else {}, ours["trusscalc"], "record")
    left_out = OF_THE_KERNEL | {"trusscalc"}
    rest = [{key: value for key, value in entries.items() if key not in left_out} for entries in (mine, ours)]
    return found + _entries(rest[0], rest[1], "notebook metadata")


def _entries(mine: Data, ours: Data, name: str) -> list[Difference]:
    found = []
    for key in dict.fromkeys((*ours, *mine)):
        one, other = (_short(entries[key]) if key in entries else "" for entries in (mine, ours))
        if one != other:
            found.append(Difference(f"{name}, {key}", *excerpts(one, other)))
    return found


# --- cells ------------------------------------------------------------------------------------------------


def _cell(mine: Data, ours: Data, name: str, warned: Sequence[str]) -> list[Difference]:
    found = _entries({"cell_type": mine.get("cell_type")}, {"cell_type": ours["cell_type"]}, name)
    return found + _lines(_source(mine), _source(ours), name) + _rest(mine, ours, name, warned)


def _rest(mine: Data, ours: Data, name: str, warned: Sequence[str]) -> list[Difference]:
    """Compare everything but kind and source."""
    left_out = {"cell_type", "source", "id", "execution_count", "metadata", "outputs"}
    rest = [{key: value for key, value in cell.items() if key not in left_out} for cell in (mine, ours)]
    found = _entries(rest[0], rest[1], name)
    metadata = mine.get("metadata")
    metadata = metadata if isinstance(metadata, dict) else {"metadata": metadata}
    found += _entries({key: value for key, value in metadata.items() if key not in OF_A_RUN}, {}, f"{name}, metadata")
    one, other = _outputs(mine, warned), _outputs(ours, ())
    for place in range(max(len(one), len(other))):
        where = f"{name}, output" if len(other) <= 1 else f"{name}, output {place + 1}"
        first, second = (part[place] if place < len(part) else {} for part in (one, other))
        for key in dict.fromkeys((*second, *first)):
            texts = _joined(first.get(key, "")), _joined(second.get(key, ""))
            found += (
                _lines(*texts, f"{where} {key}")
                if key.startswith("text/")
                else _entries({key: texts[0]}, {key: texts[1]}, where)
            )
    return found


def _outputs(cell: Data, warned: Sequence[str]) -> list[dict[str, Any]]:
    """Return a cell's outputs, each as kind, parts by type and what came with it."""
    found: list[dict[str, Any]] = []
    outputs = cell.get("outputs", [])
    for output in outputs if isinstance(outputs, list) else [{"output_type": outputs}]:
        if not isinstance(output, dict):
            found.append({"output": _short(output)})
            continue
        parts = {key: value for key, value in output.items() if key not in {"execution_count", "data", "metadata"}}
        parts |= {"metadata": output["metadata"]} if output.get("metadata") else {}
        data = output.get("data", {})
        parts |= {key: _joined(value) for key, value in data.items()} if isinstance(data, dict) else {"data": data}
        if "text" in parts:
            parts["text"] = _joined(parts["text"])
        if parts.get("name") == "stderr" and _is_warning(parts.get("text", ""), warned):
            continue
        if found and "text" in parts and {**parts, "text": ""} == {**found[-1], "text": ""}:
            found[-1]["text"] += parts["text"]
        else:
            found.append(parts)
    return found


def _is_warning(text: str, warned: Sequence[str]) -> bool:
    """Return whether nothing is printed but the warnings of this input, with the line that caused them."""
    for message in warned:
        text = re.sub(rf"\S+:\d+: TrusscalcWarning: {re.escape(message)}\n(?:  [^\n]*\n)?", "", text)
    return not text.strip()


def _lines(shown: str, derived: str, name: str) -> list[Difference]:
    """Compare line by line; a table's row, an equation and a figure are one line each."""
    one, other = shown.split("\n"), derived.split("\n")
    places = _places(other, name)
    return [
        Difference(places[min(c, len(places) - 1)], *excerpts("\n".join(one[a:b]), "\n".join(other[c:d])))
        for a, b, c, d in differing(one, other)
    ]


def _places(lines: list[str], name: str) -> list[str]:
    places = []
    label, figures = "", 0
    for number, line in enumerate(lines, 1):
        found = _LABEL.match(line)
        label = _words(found[1]) if found else label
        if line.startswith("|"):
            places.append(f"{name}, row {_words(line.split('|')[1])}")
        elif line.startswith("<img"):
            figures += 1
            places.append(f"{name}, figure {figures}")
        elif line.startswith("$"):
            places.append(f"{name}, “{label}”, equation")
        else:
            places.append(f"{name}, line {number}")
    return places
