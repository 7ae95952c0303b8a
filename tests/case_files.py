"""The published cases in ``tests/cases``: one JSON file each, read into records.

Influence lines are in ``tests/cases/influence``: ``printed`` and ``expected`` are then ordinates, for a unit load at
the joints of ``chain``, and ``printed_lines`` the straight lines between them, as the source has them.

A file holds the truss in the spelling of the truss file, ``printed`` values as their source prints them (only
the sense is turned into a sign, tension positive), ``expected`` values in exact text, and where all this comes
from. An expected value with a decimal point is no surd: its true value to 40 digits. ``erratum`` lists what the
source prints wrongly, ``last_digit`` the printed values that are off by one in their last digit, with the reason,
``quantities`` what is printed but is a multiple of a member force.
"""

from __future__ import annotations

import json
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from trusscalc.exact import Exact
from trusscalc.exacttext import parse
from trusscalc.loads import LoadCase
from trusscalc.truss import Truss

FOLDER = Path(__file__).parent / "cases"


@dataclass(frozen=True)
class PublishedCase:
    """A truss with printed forces; ``data`` is its file, read."""

    id: str
    data: dict[str, Any]

    def with_data(self, **changes: Any) -> PublishedCase:
        """Return the case with some of its data replaced, for negative controls."""
        return replace(self, data={**self.data, **changes})

    @property
    def route(self) -> str:
        """What the hand route is to do: ``all`` or ``unstable``."""
        return self.data["route"]

    @property
    def truss(self) -> Truss:
        """The truss."""
        data = self.data
        return Truss(data["joints"], data["members"], data["supports"], title=data["title"], **data["units"])

    @property
    def loads(self) -> LoadCase:
        """The loads, with the values of their symbols."""
        return LoadCase("published", self.data["loads"], symbols=self.data.get("symbols", {}))

    @property
    def expected(self) -> dict[str, Exact]:
        """The force of every member and every reaction."""
        symbols = self.data.get("symbols", {})
        return {name: parse(text, symbols) for name, text in self.data["expected"].items()}

    def is_surd(self, name: str) -> bool:
        """Return whether the expected value is given exactly and not to 40 digits."""
        return "." not in self.data["expected"][name]

    def member_of(self, name: str) -> tuple[str, Exact]:
        """Return the member or reaction a printed name stands for, and what its force is multiplied by."""
        quantity = self.data.get("quantities", {}).get(name, {"member": name, "times": "1"})
        return quantity["member"], parse(quantity["times"])


def _read(path: Path) -> PublishedCase:
    data = json.loads(path.read_text(encoding="utf-8"))
    return PublishedCase(data["id"], data)


@dataclass(frozen=True)
class PublishedLine:
    """A truss with printed influence ordinates; ``data`` is its file, read."""

    id: str
    data: dict[str, Any]

    @property
    def truss(self) -> Truss:
        """The truss."""
        return PublishedCase(self.id, self.data).truss

    @property
    def expected(self) -> dict[str, tuple[Exact, ...]]:
        """The ordinates of every target, along the chain."""
        return {name: tuple(map(parse, texts)) for name, texts in self.data["expected"].items()}

    def target_of(self, name: str) -> tuple[str, Exact]:
        """Return the target a printed name stands for, and what its ordinates are multiplied by."""
        return PublishedCase(self.id, self.data).member_of(name)


CASES = {path.stem: _read(path) for path in sorted(FOLDER.glob("*.json"))}

LINES = {path.stem: PublishedLine(path.stem, _read(path).data) for path in sorted(FOLDER.glob("influence/*.json"))}
