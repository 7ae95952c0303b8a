"""One entry of a truss file's panel loads: read to a rule, and stated again."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Final, TypeVar

from trusscalc.errors import InexactNumberError, InputError
from trusscalc.exact import ONE, Exact
from trusscalc.exacttext import number
from trusscalc.loadrules import Along, Beside, Direction, LineLoad, PointLoad, Rule, SelfWeight, usual_measure
from trusscalc.truss import did_you_mean, point

KEYS_OF_LINE: Final = ("along", "from", "to", "per", "direction", "beside")
KEYS: Final[dict[str, tuple[str, ...]]] = {
    "line": KEYS_OF_LINE,
    "area": ("width", *KEYS_OF_LINE),
    "point": ("along", "at", "per", "direction", "beside"),
    "self_weight": ("members", "beside"),
    "density": ("density_unit", "section", "section_unit", "members", "beside"),
}
"""Which keys go with each kind of load; the kind is named by the key that states its amount."""
NEEDED: Final[dict[str, str]] = {
    "along": 'name a chain, or list its joints as ["L0", "L1"]',
    "width": "write the tributary width that the area load is multiplied by",
    "at": "write where the force stands, counted along the chain",
    "section": "write the area of the members' section",
}
"""Keys without which a load of their kind says nothing, and what to write."""
BESIDE_KEYS: Final = ("offset", "spacing")
PAIR: Final = 2

_Value = TypeVar("_Value")


def rule_of(
    case: str,
    table: Mapping[str, object],
    where: str,
    problems: list[str],
    symbols: Mapping[str, Exact] | None = None,
) -> Rule | None:
    r"""Return the rule that one entry of a truss file states, or None after adding what is wrong to ``problems``.

    Parameters
    ----------
    case : str
        The load case the entry belongs to.
    table : mapping
        The entry, with the keys of KEYS.
    where : str
        Words that every problem starts with, such as ``"[panel_loads.dead]"``.
    problems : list of str
        Gets every fault found.
    symbols : mapping of str to Exact
        The file's symbols and their values; they may stand in amounts of load.

    Examples
    --------
    >>> problems = []
    >>> rule_of("dead", {"line": "2.4", "allong": "deck"}, "[panel_loads.dead]", problems)
    >>> print(*problems, sep="\n")
    [panel_loads.dead] allong: unknown key; did you mean along?
    [panel_loads.dead] along: is missing; name a chain, or list its joints as ["L0", "L1"]
    """
    entry = _Entry(case, table, where, dict(symbols or {}))
    rule = entry.rule(entry.kind())
    problems += entry.problems
    return None if entry.problems else rule


class _Entry:
    """An entry of a file and what is wrong with it."""

    def __init__(self, case: str, table: Mapping[str, object], where: str, symbols: Mapping[str, Exact]) -> None:
        self.case = case
        self.table = table
        self.where = where
        self.symbols = symbols
        self.problems: list[str] = []

    def wrong(self, key: str, text: str) -> None:
        self.problems.append(f"{self.where} {key}: {text}" if key else f"{self.where}: {text}")

    def kind(self) -> str:
        """Return the key that names the kind of load, or ''; all keys are looked through."""
        kinds = [kind for kind in KEYS if kind in self.table]
        known = list(dict.fromkeys([*KEYS, *(key for keys in KEYS.values() for key in keys)]))
        for key in self.table:
            if key not in known:
                self.wrong(str(key)[:60], f"unknown key{did_you_mean(str(key), known)}")
            elif len(kinds) == 1 and key != kinds[0] and key not in KEYS[kinds[0]]:
                self.wrong(key, f"does not go with {kinds[0]}; that takes {', '.join(KEYS[kinds[0]])}")
        if len(kinds) > 1:
            self.wrong("", f"states {' and '.join(kinds)}; make an entry of each")
        elif not kinds:
            self.wrong("", f"states no load; write one of {', '.join(KEYS)}")
        return kinds[0] if len(kinds) == 1 else ""

    def rule(self, kind: str) -> Rule | None:
        """Return the rule of the kind, or None with what is wrong noted; values of any kind are looked through."""
        for key, what in NEEDED.items():
            if kind and key in KEYS[kind] and key not in self.table:
                self.wrong(key, f"is missing; {what}")
        amount = {key: self.of(key, self.amount) for key in ("point", "self_weight", "density", "section", "width")}
        place = {key: self.of(key, self.amount) for key in ("from", "to", "at")}
        line, area = self.of("line", self.intensities), self.of("area", self.intensities)
        along, direction = self.of("along", self.along), self.of("direction", self.direction)
        words = {key: self.of(key, self.text) for key in ("per", "density_unit", "section_unit")}
        members, beside = self.of("members", self.members), self.of("beside", self.beside)
        if self.problems:
            return None
        try:
            if kind in ("self_weight", "density"):
                units = (words["density_unit"] or "", words["section_unit"] or "")
                sizes = (amount["self_weight"], amount["density"], amount["section"])
                return SelfWeight(self.case, *sizes, *units, members or (), beside)
            heading = direction or "down"
            if along and kind == "point" and amount["point"] is not None and place["at"] is not None:
                per = words["per"] or "plan"
                return PointLoad(self.case, along, amount["point"], place["at"], per, heading, beside)
            if along and (pair := line or area):
                ends = (place["from"], place["to"])
                return LineLoad(self.case, along, *pair, amount["width"], *ends, words["per"] or "", heading, beside)
        except InputError as fault:
            told = f"[panel_loads.{self.case}]"  # the record knows no more than its case
            self.problems += [self.where + problem.removeprefix(told) for problem in fault.problems]
        except InexactNumberError as fault:
            self.wrong("", f"its places cannot be compared: {fault}")
        return None

    # --- one value each; what is wrong is noted ---

    def of(self, key: str, read: Callable[[str, object], _Value]) -> _Value | None:
        return read(key, self.table[key]) if key in self.table else None

    def amount(self, key: str, value: object) -> Exact | None:
        try:
            amount = number(value, self.symbols)
            if amount.symbols:
                number(amount.substitute(self.symbols))  # its decimal has to exist too
        except ZeroDivisionError:
            self.wrong(key, "division by zero at the values under [symbols]")
        except InexactNumberError as problem:
            self.wrong(key, str(problem))
        else:
            return amount
        return None

    def intensities(self, key: str, value: object) -> tuple[Exact, Exact] | None:
        values = list(value) if isinstance(value, (list, tuple)) else [value]
        if not 1 <= len(values) <= PAIR:
            self.wrong(key, 'one amount is needed, or two such as ["2", "5"] that it grows between')
            return None
        read = [self.amount(key, each) for each in values]
        return None if read[0] is None or read[-1] is None else (read[0], read[-1])

    def text(self, key: str, value: object) -> str | None:
        if isinstance(value, str) and value:
            return value
        self.wrong(key, "text is needed, in quotes")
        return None

    def names(self, key: str, value: object, what: str) -> tuple[str, ...] | None:
        names = value if isinstance(value, (list, tuple)) else ()
        if names and all(isinstance(name, str) for name in names):
            return tuple(names)
        self.wrong(key, what)
        return None

    def members(self, key: str, value: object) -> tuple[str, ...] | None:
        what = 'a list of groups and members is needed, such as ["lower chord", "U1-U2"]; left out it means all'
        return self.names(key, value, what)

    def along(self, key: str, value: object) -> Along | None:
        if isinstance(value, str) and value:
            return value
        return self.names(key, value, 'the name of a chain is needed, or a list of joints such as ["L0", "L1"]')

    def direction(self, key: str, value: object) -> Direction | None:
        if isinstance(value, str):
            return self.text(key, value)
        return point(value, f"{self.where} {key}", self.problems, self.symbols)

    def beside(self, key: str, value: object) -> Beside | None:
        if not isinstance(value, Mapping):
            self.wrong(key, 'a table is needed, such as { offset = "1.2", spacing = "6" }')
            return None
        for inner in value:
            if inner not in BESIDE_KEYS:
                self.wrong(f"{key} {str(inner)[:60]}", f"unknown key{did_you_mean(str(inner), BESIDE_KEYS)}")
        for inner in BESIDE_KEYS:
            if inner not in value:
                self.wrong(f"{key} {inner}", 'is missing; write { offset = "1.2", spacing = "6" }')
        offset, spacing = (self.amount(f"{key} {inner}", value.get(inner, ONE)) for inner in BESIDE_KEYS)
        return None if offset is None or spacing is None else Beside(offset, spacing)


def stated(rule: Rule) -> dict[str, object]:
    """Return the entry that states a rule: what ``rule_of`` reads back to an equal one, numbers as Exact.

    Examples
    --------
    >>> stated(LineLoad("snow", "deck", number("1.2"), number("1.2"), width=number(5)))
    {'area': Exact('6/5'), 'width': Exact('5'), 'along': 'deck'}
    """
    beside = None if rule.beside is None else {"offset": rule.beside.offset, "spacing": rule.beside.spacing}
    entry: dict[str, object]
    if isinstance(rule, SelfWeight):
        entry = {"self_weight": rule.weight, "density": rule.density, "density_unit": rule.density_unit or None}
        entry |= {"section": rule.section, "section_unit": rule.section_unit or None}
        entry |= {"members": list(rule.members) or None}
    else:
        along = rule.along if isinstance(rule.along, str) else list(rule.along)
        if isinstance(rule, PointLoad):
            entry, usual = {"point": rule.force, "along": along, "at": rule.at}, "plan"
        else:
            amount = rule.start if rule.start == rule.end else [rule.start, rule.end]
            entry = {"line" if rule.width is None else "area": amount, "width": rule.width, "along": along}
            entry |= {"from": rule.begins, "to": rule.ends}
            usual = usual_measure(rule.direction)
        direction = rule.direction if isinstance(rule.direction, str) else list(rule.direction)
        entry |= {
            "per": None if rule.per == usual else rule.per,
            "direction": None if direction == "down" else direction,
        }
    return {key: value for key, value in (entry | {"beside": beside}).items() if value is not None}
