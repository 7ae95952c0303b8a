"""A truss as an engineer states it: names and number texts, with none of the library's arithmetic.

Tests build trusses in this form, turn, shift, mirror or rename them as text, hand them to the library (records or
truss file) and to the independent solution and replay of ``replay.py``.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field, replace
from typing import Any

from trusscalc.loads import LoadCase
from trusscalc.membercheck import MemberCheck, check_members
from trusscalc.report import check_data
from trusscalc.truss import Truss

Pair = tuple[str, str]


@dataclass(frozen=True)
class Stated:
    """Joints, members, supports and loads as texts; ``symbols`` are the values of symbols in the loads."""

    joints: Mapping[str, Pair]
    members: tuple[str, ...]
    supports: Mapping[str, Any]
    loads: Mapping[str, Pair]
    symbols: Mapping[str, str] = field(default_factory=dict)

    @property
    def truss(self) -> Truss:
        """The library's record of the structure."""
        return Truss(self.joints, self.members, self.supports)

    @property
    def case(self) -> LoadCase:
        """The library's record of the loads."""
        return LoadCase("load", self.loads, symbols=self.symbols)

    def check(self, members: Iterable[str] | str = "all") -> MemberCheck:
        """Return the library's check of some members."""
        return check_members(self.truss, self.case, members)  # type: ignore[arg-type]

    def data(self, members: Iterable[str] | str = "all") -> dict[str, Any]:
        """Return the check in its JSON form, as a reader of the printed text gets it."""
        return json.loads(json.dumps(check_data(self.check(members))))

    def file(self) -> str:
        """Return the text of a truss file."""
        lines = ["format = 1", 'title = "as stated"', "[units]", 'length = "m"', 'force = "kN"', "[joints]"]
        lines += [f"{_text(name)} = {_texts(pair)}" for name, pair in self.joints.items()]
        lines += ["[members]", f"all = {_texts(self.members)}", "[supports]"]
        lines += [f"{_text(name)} = {_support(support)}" for name, support in self.supports.items()]
        if self.symbols:
            lines += ["[symbols]", *(f"{name} = {_text(value)}" for name, value in self.symbols.items())]
        lines += ["[cases.load]", *(f"{_text(name)} = {_texts(pair)}" for name, pair in self.loads.items())]
        return "\n".join(lines) + "\n"

    # --- the same truss, stated differently -----------------------------------------------------------------

    def moved(self, place: Callable[[str, str], Pair], direction: Callable[[str, str], Pair]) -> Stated:
        """Return the truss with every place and every direction (loads, reactions) mapped; pins stay pins."""
        supports: dict[str, Any] = {}
        for joint, support in self.supports.items():
            if support == "roller":
                turned = direction("0", "1")
                supports[joint] = "roller" if turned == ("0", "1") else {"reaction": turned}
            elif support == "pin":
                supports[joint] = "pin"
            elif isinstance(support, list):
                supports[joint] = [{"reaction": direction(*map(str, link["reaction"]))} for link in support]
            else:
                supports[joint] = {"reaction": direction(*map(str, support["reaction"]))}
        return replace(
            self,
            joints={name: place(*pair) for name, pair in self.joints.items()},
            supports=supports,
            loads={name: direction(*pair) for name, pair in self.loads.items()},
        )

    def shifted(self, dx: str, dy: str) -> Stated:
        """Return the truss somewhere else."""
        return self.moved(lambda x, y: (f"{x}+({dx})", f"{y}+({dy})"), lambda x, y: (x, y))

    def scaled(self, factor: str) -> Stated:
        """Return the truss larger or smaller, under the same loads."""
        return self.moved(lambda x, y: (f"({x})*{factor}", f"({y})*{factor}"), lambda x, y: (x, y))

    def mirrored(self) -> Stated:
        """Return the mirror image, left and right exchanged."""

        def turned(x: str, y: str) -> Pair:
            return ("0" if x == "0" else f"-({x})"), y

        return self.moved(turned, turned)

    def turned(self) -> Stated:
        """Return the truss turned by the angle of the 3-4-5 triangle."""

        def turned(x: str, y: str) -> Pair:
            return f"(4*({x})-3*({y}))/5", f"(3*({x})+4*({y}))/5"

        return self.moved(turned, turned)

    def renamed(self, names: Mapping[str, str]) -> Stated:
        """Return the truss with other joint names."""
        return replace(
            self,
            joints={names[name]: pair for name, pair in self.joints.items()},
            members=tuple("-".join(names[end] for end in member.split("-")) for member in self.members),
            supports={names[name]: support for name, support in self.supports.items()},
            loads={names[name]: pair for name, pair in self.loads.items()},
        )

    def reversed_spelling(self) -> Stated:
        """Return the truss with every member's ends in the other order."""
        return replace(self, members=tuple("-".join(reversed(member.split("-"))) for member in self.members))

    def shuffled(self, order: Callable[[list[Any]], None]) -> Stated:
        """Return the truss with joints, members, supports and loads in another order (``random.Random.shuffle``)."""

        def mixed(items: Iterable[Any]) -> list[Any]:
            listed = list(items)
            order(listed)
            return listed

        return replace(
            self,
            joints=dict(mixed(self.joints.items())),
            members=tuple(mixed(self.members)),
            supports=dict(mixed(self.supports.items())),
            loads=dict(mixed(self.loads.items())),
        )

    def under(self, loads: Mapping[str, Pair]) -> Stated:
        """Return the truss under other loads."""
        return replace(self, loads=dict(loads))


def _text(text: str) -> str:
    return json.dumps(text, ensure_ascii=False)


def _texts(texts: Iterable[str]) -> str:
    return "[" + ", ".join(_text(str(text)) for text in texts) + "]"


def _support(support: Any) -> str:
    if isinstance(support, str):
        return _text(support)
    if isinstance(support, list):
        return "[" + ", ".join(_support(link) for link in support) + "]"
    return f"{{ reaction = {_texts(map(str, support['reaction']))} }}"


def same_member(names: Iterable[str]) -> set[frozenset[str]]:
    """Return members or reactions as sets of their ends, so that spelling does not matter."""
    return {frozenset(name.split("-")) for name in names}
