"""The tables of a truss file that state loads as engineers have them: chains, trains, panel loads, standards."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from typing import Any, Final

from trusscalc import combinationtables, loadentries, trains
from trusscalc.chains import Chain
from trusscalc.exact import Exact
from trusscalc.loadrules import Rule
from trusscalc.project import line_fault
from trusscalc.publishedtrains import published
from trusscalc.trains import LoadModel, MovingLoad, Train
from trusscalc.truss import did_you_mean
from trusscalc.trussfile import trains_of

MOST: Final = {"chains": 200, "trains": 200, "moving": 200, "panel_loads": 2_000}
MOVING_KEYS: Final = ("train", "along")


def load_tables(
    tables: Mapping[str, dict[str, Any]], symbols: Mapping[str, Exact], units: tuple[str, str], problems: list[str]
) -> dict[str, Any]:
    """Return what the tables state, as the fields of a TrussFile.

    Parameters
    ----------
    tables : mapping of str to dict
        The file's tables by name; those not stated are empty.
    symbols : mapping of str to Exact
        The file's symbols.
    units : (str, str)
        The file's units of force and length, into which published trains are converted.
    problems : list of str
        Faults found are added.
    """
    problems += [
        f"too many entries under [{name}]: {len(tables[name]):,}, and at most {most:,} are read"
        for name, most in MOST.items()
        if len(tables[name]) > most
    ]
    chains = _chains(tables["chains"], problems)
    models = _trains(tables["trains"], units, problems)
    moving = _moving(tables["moving"], tables, (chains, models), problems)
    rules = _rules(tables["panel_loads"], symbols, problems)
    published = None
    if tables["published_combinations"]:
        where = "[published_combinations]"
        published = combinationtables.choice_of(tables["published_combinations"], where, problems)
    return {"chains": chains, "trains": models, "moving": moving, "panel_loads": rules, "published": published}


def _entries(
    tables: Mapping[str, Any], name: str, example: str, problems: list[str]
) -> list[tuple[str, dict[str, Any]]]:
    """Return the named tables under a table; a name must be one line, an entry a table."""
    entries = []
    for key, table in tables.items():
        if fault := line_fault(key) if key.strip() else "a name is needed":
            problems.append(f"[{name}] {key}: {fault}")
        elif not isinstance(table, dict):
            problems.append(f"[{name}] {key}: a table is needed, such as {example}")
        else:
            entries.append((key, table))
    return entries


def _unknown(where: str, table: Mapping[str, Any], known: tuple[str, ...]) -> list[str]:
    return [f"{where} {key}: unknown key{did_you_mean(key, known)}" for key in table if key not in known]


def _chains(tables: Mapping[str, Any], problems: list[str]) -> tuple[Chain, ...]:
    chains = []
    for name, table in _entries(tables, "chains", '[chains.deck] with joints = ["L0", "L1"] below', problems):
        problems += _unknown(f"[chains.{name}]", table, ("joints",))
        joints = table.get("joints")
        if not isinstance(joints, list) or not all(isinstance(joint, str) for joint in joints):
            problems.append(f'[chains.{name}] joints: a list of joint names is needed, such as ["L0", "L1", "L2"]')
        else:
            chains.append(Chain(name, tuple(joints)))
    return tuple(chains)


def _trains(tables: Mapping[str, Any], units: tuple[str, str], problems: list[str]) -> tuple[Train | LoadModel, ...]:
    example = "[trains.pair] with axles = [6, 24] and spacing = [14] below"
    found = []
    for name, table in _entries(tables, "trains", example, problems):
        train = trains.train_of(name, table, f"[trains.{name}]", problems, lambda known: published(known, *units))
        if train is not None:
            found.append(train)
    return tuple(found)


def _moving(
    tables: Mapping[str, Any],
    stated: Mapping[str, Collection[str]],
    read: tuple[Sequence[Chain], Sequence[Train | LoadModel]],
    problems: list[str],
) -> tuple[MovingLoad, ...]:
    """Return the moving loads; a name that is stated, but with a fault of its own, is not told again."""
    chains = {chain.name: chain for chain in read[0]}
    models = {model.name: model for model in read[1]}
    found = []
    for name, table in _entries(tables, "moving", '[moving.live] with train = "pair", along = "deck"', problems):
        where = f"[moving.{name}]"
        problems += _unknown(where, table, MOVING_KEYS)
        for key, kind in (("train", "trains"), ("along", "chains")):
            wanted = table.get(key)
            if not isinstance(wanted, str):
                problems.append(f"{where} {key}: a name stated under [{kind}] is needed, in quotes")
            elif wanted not in stated[kind]:
                near = did_you_mean(wanted, stated[kind])
                problems.append(f"{where} {key}: there is no {wanted[:90]!r} under [{kind}]{near}")
        train, along = models.get(str(table.get("train"))), chains.get(str(table.get("along")))
        if train is not None and along is not None:
            found.append(MovingLoad(name, trains_of(train), along))
    return tuple(found)


def _rules(tables: Mapping[str, Any], symbols: Mapping[str, Exact], problems: list[str]) -> tuple[Rule, ...]:
    rules = []
    for case, entries in tables.items():
        if fault := line_fault(case) if case.strip() else "a name is needed":
            problems.append(f"[panel_loads] {case}: {fault}")
            continue
        if not isinstance(entries, list) or not all(isinstance(entry, dict) for entry in entries):
            problems.append(
                f"[panel_loads] {case}: write [[panel_loads.{case}]] with double brackets above each load, "
                'and below it such as line = "2.4", along = "deck"'
            )
            continue
        for place, entry in enumerate(entries, 1):
            rule = loadentries.rule_of(case, entry, f"[[panel_loads.{case}]] no. {place}", problems, symbols)
            if rule is not None:
                rules.append(rule)
    return tuple(rules)
