"""Independent, documented hand checks of truss member forces.

State a truss and its loads, name the members that matter, and get their forces by sections and joints in
exact arithmetic, each beside an independent stiffness value, written out on a sheet to file::

    import trusscalc

    stated = trusscalc.read("bridge.toml")
    check = trusscalc.check_members(stated.truss, stated.case("dead"), ["U2-U3", "M2-L3"])
    check.sheet(stated.project).save("sheet.ipynb")

Names are loaded when first used, so that a command pays only for what it needs.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from trusscalc import shapes
    from trusscalc.compare import compare_submitted
    from trusscalc.diagnosis import diagnose
    from trusscalc.envelopes import envelope
    from trusscalc.errors import TrusscalcError, TrusscalcWarning
    from trusscalc.files import read, reads, write
    from trusscalc.governing import governing_checks
    from trusscalc.influence import influence_line
    from trusscalc.loads import Combination, LoadCase, combine
    from trusscalc.membercheck import MemberCheck, check_members
    from trusscalc.project import Project
    from trusscalc.sheet.blocks import Sheet
    from trusscalc.statics.owncuts import OwnCut
    from trusscalc.submitted import read_submitted
    from trusscalc.truss import Truss
    from trusscalc.trussfile import TrussFile
    from trusscalc.widgets import explore

__version__ = "0.1.0"

_HOME = {
    "Combination": "loads",
    "LoadCase": "loads",
    "MemberCheck": "membercheck",
    "OwnCut": "statics.owncuts",
    "Project": "project",
    "Sheet": "sheet.blocks",
    "Truss": "truss",
    "TrussFile": "trussfile",
    "TrusscalcError": "errors",
    "TrusscalcWarning": "errors",
    "check_members": "membercheck",
    "combine": "loads",
    "compare_submitted": "compare",
    "diagnose": "diagnosis",
    "envelope": "envelopes",
    "governing_checks": "governing",
    "influence_line": "influence",
    "explore": "widgets",
    "read": "files",
    "read_submitted": "submitted",
    "reads": "files",
    "shapes": "",
    "write": "files",
}

__all__ = [
    "Combination",
    "LoadCase",
    "MemberCheck",
    "OwnCut",
    "Project",
    "Sheet",
    "Truss",
    "TrussFile",
    "TrusscalcError",
    "TrusscalcWarning",
    "check_members",
    "combine",
    "compare_submitted",
    "diagnose",
    "envelope",
    "explore",
    "governing_checks",
    "influence_line",
    "read",
    "read_submitted",
    "reads",
    "shapes",
    "write",
]


def __getattr__(name: str) -> Any:
    """Load a public name when it is first used, and hang the conveniences on the records."""
    if name not in _HOME:
        message = f"module 'trusscalc' has no attribute {name!r}"
        raise AttributeError(message)
    import_module("trusscalc.display").attach()
    home = _HOME[name]
    value = getattr(import_module(f"trusscalc.{home}"), name) if home else import_module(f"trusscalc.{name}")
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted([*globals(), *__all__])
