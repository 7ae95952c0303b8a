"""The text of a truss file, table by table."""

from __future__ import annotations

import json
import re
from typing import Any, Final

from trusscalc.errors import InputError
from trusscalc.exact import Exact
from trusscalc.exacttext import to_text
from trusscalc.loads import OPTIONAL, Combination
from trusscalc.project import LINES
from trusscalc.truss import Support
from trusscalc.trussfile import TrussFile, trains_of

FORMAT: Final = 1
WIDEST_LINE: Final = 100
BEHAVIOUR: Final = ("tension_only", "no_uplift")
UNGROUPED: Final = "members"
ROUNDED_MARK: Final = " + 0*sin(1)"
ROUNDED_NOTE: Final = (
    f"# a number ending in {ROUNDED_MARK.strip()} holds an angle that was rounded when it was first read\n"
)
_BARE_KEY: Final = re.compile(r"[A-Za-z0-9_-]+")


def text_of_stated(truss_file: TrussFile) -> str:
    """Return the text; members without a group are written as one group, ``members``.

    Raises
    ------
    InputError
        For combinations that come from a published table one by one: the file states the table itself.
    """
    sourced = [each for each in truss_file.combinations if each.source]
    if sourced:
        message = f"combination {sourced[0].name!r} is from {sourced[0].source}: give the table as `published`"
        raise InputError(message)
    text = "\n".join(_section(name, entries) for name, entries in sections(truss_file) if _is_written(name, entries))
    return ROUNDED_NOTE + text if ROUNDED_MARK in text else text


def sections(truss_file: TrussFile) -> list[tuple[str, dict[str, Any]]]:
    """Return the tables to write, each with its head without brackets and its entries."""
    truss, project = truss_file.truss, truss_file.project
    groups: dict[str, Any] = {}
    for member in truss.members:
        groups.setdefault(member.group or UNGROUPED, []).append(member.name)
    return [
        ("", {"format": FORMAT, "title": truss.title}),
        ("units", {"length": truss.length, "force": truss.force}),
        ("joints", {joint.name: [joint.x, joint.y] for joint in truss.joints}),
        ("members", groups),
        ("supports", {support.joint: _stated(support) for support in truss.supports}),
        ("symbols", dict(truss.symbols) | (dict(truss_file.cases[0].symbols) if truss_file.cases else {})),
        *(
            (f"cases.{_key(case.name)}", {load.joint: [load.fx, load.fy] for load in case.loads})
            for case in truss_file.cases
        ),
        *_load_sections(truss_file),
        *((f"combinations.{_key(each.name)}", _factored(each)) for each in truss_file.combinations),
        ("behaviour", {key: list(getattr(truss, key)) for key in BEHAVIOUR}),
        ("project", {key: getattr(project, key) for key in LINES if getattr(project, key)}),
        ("project.names", dict(project.names)),
    ]


def _load_sections(truss_file: TrussFile) -> list[tuple[str, dict[str, Any]]]:
    """Return chains, trains, moving loads, panel loads (which repeat: double brackets) and the published table."""
    if not (truss_file.chains or truss_file.trains or truss_file.panel_loads or truss_file.published):
        return []
    from trusscalc import combinationtables, loadentries, trains  # noqa: PLC0415 - most files have none

    named = {trains_of(train): train.name for train in truss_file.trains}
    found: list[tuple[str, dict[str, Any]]] = [
        *((f"chains.{_key(chain.name)}", {"joints": list(chain.joints)}) for chain in truss_file.chains),
        *((f"[panel_loads.{_key(rule.case)}]", dict(loadentries.stated(rule))) for rule in truss_file.panel_loads),
        *((f"trains.{_key(train.name)}", dict(trains.stated(train))) for train in truss_file.trains),
        *(
            (f"moving.{_key(load.name)}", {"train": named[load.trains], "along": load.along.name})
            for load in truss_file.moving
        ),
    ]
    if truss_file.published:
        found.append(("published_combinations", dict(combinationtables.stated(truss_file.published))))
    return found


def _is_written(name: str, entries: dict[str, Any]) -> bool:
    return name.startswith("cases.") or any(entry != [] for entry in entries.values())


def _factored(combination: Combination) -> dict[str, Any]:
    factors: dict[str, Any] = {case: list(pair) if pair[1:] else pair[0] for case, pair in combination.factors}
    return factors | ({OPTIONAL: list(combination.optional)} if combination.optional else {})


def _stated(support: Support) -> Any:
    if support.kind != "links":
        return support.kind
    links = [{"reaction": [link.dx, link.dy]} for link in support.links]
    return links[0] if support.links[0].name == f"{support.joint}.r" else links


def _section(name: str, entries: dict[str, Any]) -> str:
    lines = [f"[{name}]"] if name else []
    for key, value in entries.items():
        line = f"{_key(key)} = {value_text(value)}"
        if len(line) > WIDEST_LINE and isinstance(value, list):
            line = f"{_key(key)} = [\n{''.join(f'    {value_text(item)},{chr(10)}' for item in value)}]"
        lines.append(line)
    return "\n".join(lines) + "\n"


def _key(name: str) -> str:
    return name if _BARE_KEY.fullmatch(name) else value_text(name)


def value_text(value: Any) -> str:
    """Return a value as TOML text: exact numbers, text, whole numbers, lists and tables."""
    if isinstance(value, Exact):
        text = to_text(value) + (ROUNDED_MARK if value.rounded else "")
        return text if re.fullmatch(r"-?[0-9]{1,15}", text) else f'"{text}"'
    if isinstance(value, list):
        return f"[{', '.join(map(value_text, value))}]"
    if isinstance(value, dict):
        return f"{{ {', '.join(f'{_key(key)} = {value_text(item)}' for key, item in value.items())} }}"
    if isinstance(value, int) and not isinstance(value, bool):
        return str(value)
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
