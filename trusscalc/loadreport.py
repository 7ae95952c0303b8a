"""Influence lines and envelopes as plain data, in the promised JSON form, and as lines for a terminal."""

from __future__ import annotations

import math
from typing import Any

from trusscalc.decimals import rounded
from trusscalc.envelopes import Choice, Envelope, MemberEnvelope, Sense
from trusscalc.exact import Exact
from trusscalc.exacttext import to_text
from trusscalc.influence import InfluenceLine
from trusscalc.report import CAUTION, aligned, short_exact
from trusscalc.travel import Extreme

LETTERS = {1: "T", -1: "C", 0: "0"}


def influence_data(
    line: InfluenceLine, train: str = "", extremes: tuple[Extreme, Extreme] | None = None
) -> dict[str, Any]:
    """Return an influence line as the dictionary that ``influence --json`` prints.

    Parameters
    ----------
    line : InfluenceLine
        Ordinates: force for a unit load downward.
    train : str
        The train's name.
    extremes : (Extreme, Extreme), optional
        What the train makes of it: largest and least.
    """
    data: dict[str, Any] = {
        "member": line.target,
        "along": list(line.chain.joints),
        "ordinates": {
            joint: {**_amount(ordinate), "stiffness": _finite(numeric)}
            for joint, ordinate, numeric in zip(line.chain.joints, line.ordinates, line.numeric, strict=True)
        },
        "positions": {joint: _amount(place) for joint, place in zip(line.chain.joints, line.positions, strict=True)},
        "areas": {"positive": _amount(line.positive_area), "negative": _amount(line.negative_area)},
        "zeros": [_amount(place) for place in line.zeros],
        "agreed": line.agreed,
    }
    if extremes is not None:
        largest, least = extremes
        data["train"] = {"name": train, "max": _extreme_data(largest), "min": _extreme_data(least)}
    return data


def undecided_influence_data(target: str, joints: tuple[str, ...], reason: str, train: str = "") -> dict[str, Any]:
    """Return the same form for a force that statics does not decide: no values, and why."""
    nothing = {"exact": None, "decimal": None}
    data: dict[str, Any] = {
        "member": target,
        "along": list(joints),
        "ordinates": {joint: dict(nothing) for joint in joints},
        "reason": reason,
        "agreed": False,
    }
    if train:
        nowhere = {**nothing, "lead_axle_at": None, "direction": None}
        data["train"] = {"name": train, "max": dict(nowhere), "min": dict(nowhere)}
    return data


def _amount(value: Exact) -> dict[str, Any]:
    return {"exact": to_text(value), "decimal": float(value)}


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None


def _extreme_data(extreme: Extreme) -> dict[str, Any]:
    stand = extreme.stand
    data: dict[str, Any] = {
        **_amount(extreme.value),
        "lead_axle_at": None if stand is None else float(stand.lead_axle_at),
        "direction": None if stand is None else stand.direction,
        "train": extreme.train,
        "parts": {name: _amount(value) for name, value in extreme.parts},
    }
    if stand is not None:
        data["lead_axle_at_exact"] = to_text(stand.lead_axle_at)
        data["spacing"] = [to_text(each) for each in stand.spacing]
        if stand.at_limit:
            data["at_limit"] = "an axle stands just off the end of the chain"
    return data


def influence_text(
    line: InfluenceLine,
    units: tuple[str, str],
    train: str = "",
    extremes: tuple[Extreme, Extreme] | None = None,
    places: int = 4,
) -> list[str]:
    """Return an influence line as aligned lines for a terminal.

    Parameters
    ----------
    line : InfluenceLine
        What was found.
    units : (str, str)
        Force and length.
    train, extremes
        As in ``influence_data``.
    places : int
        Decimal places; rounded once from the exact value, half to even.
    """
    force, length = units
    rows = [["joint", f"at, {length}", "exact", "decimal", "stiffness"]]
    for joint, place, ordinate, numeric in zip(
        line.chain.joints, line.positions, line.ordinates, line.numeric, strict=True
    ):
        decimals = (str(rounded(place, places)), short_exact(ordinate), str(rounded(ordinate, places)))
        rows.append([joint, *decimals, f"{numeric:.{places}f}"])
    told = "both routes agree" if line.agreed else "THE ROUTES DIFFER"
    lines = [f"influence line of {line.target}: force for a unit load downward on {line.chain.name}; {told}"]
    lines += aligned(rows, right=(1, 2, 3, 4))
    areas = (("positive", line.positive_area), ("negative", line.negative_area))
    lines += [f"{word} area {rounded(area, places)} {length}" for word, area in areas]
    if line.zeros:
        lines.append(f"zero at {', '.join(str(rounded(place, places)) for place in line.zeros)} {length}")
    for word, extreme in zip(("largest", "least"), extremes or (), strict=False):
        lines.append(_extreme_text(f"{train}, {word}", extreme, force, length, places))
    return [*lines, CAUTION]


def _extreme_text(word: str, extreme: Extreme, force: str, length: str, places: int) -> str:
    exact, decimal = short_exact(extreme.value), str(rounded(extreme.value, places))
    value = f"{word}: {exact} = {decimal} {force}" if extreme.value else f"{word}: 0 {force}"
    stand = extreme.stand
    if stand is None:
        return f"{value}; no position of the axles is adverse"
    where = f"leading axle at {rounded(stand.lead_axle_at, places)} {length}, {stand.direction}"
    limit = ", an axle just off the end of the chain" if stand.at_limit else ""
    return f"{value}; {extreme.train}, {where}{limit}"


# --- envelopes --------------------------------------------------------------------------------------------


def envelope_data(found: Envelope) -> dict[str, Any]:
    """Return an envelope as the dictionary that ``envelope --json`` prints."""
    members: dict[str, Any] = {}
    for name in found.asked:
        if name in found.undecided:
            nothing = {"exact": None, "decimal": None, "combination": None}
            members[name] = {"max": nothing, "min": dict(nothing), "reversal": None, "reason": found.undecided[name]}
        else:
            each = found.members[name]
            members[name] = {
                "max": _choice_data(each.max),
                "min": _choice_data(each.min),
                "reversal": each.reversal,
                "governing": each.governing,
            }
    return {"members": members, "agreed": found.agreed, "differing": [list(pair) for pair in found.differing]}


def _choice_data(choice: Choice) -> dict[str, Any]:
    data: dict[str, Any] = {
        **_amount(choice.value),
        "combination": choice.combination,
        "factors": {case: to_text(factor) for case, factor in choice.factors},
    }
    if choice.stands:
        data["trains"] = {
            case: {"factor": to_text(factor), **_extreme_data(extreme)} for case, factor, extreme in choice.stands
        }
    return data


def envelope_text(found: Envelope, places: int = 3) -> list[str]:
    """Return an envelope as aligned lines for a terminal.

    Parameters
    ----------
    found : Envelope
        What was found.
    places : int
        Decimal places; rounded once from the exact value, half to even.
    """
    unit = found.stated.truss.force
    rows = [["member", f"largest, {unit}", "", "under", f"least, {unit}", "", "under", "reversal"]]
    for name in found.asked:
        if name in found.members:
            each = found.members[name]
            cells = [*_state_cells(each, "max", places), *_state_cells(each, "min", places)]
            rows.append([name, *cells, "yes" if each.reversal else ""])
        else:
            rows.append([name, "undecided", "", "", "", "", "", ""])
    lines = aligned(rows, right=(1, 4))
    lines += [f"{name}: {reason}" for name, reason in found.undecided.items()]
    lines += [f"{member} under {case}: THE TWO ROUTES DIFFER" for case, member in found.differing]
    told = "both routes agree on every case" if found.agreed else "not all agree"
    lines.append(f"{len(found.combinations)} combinations, {len(found.members)} members: {told}")
    return [*lines, CAUTION]


def _state_cells(each: MemberEnvelope, sense: Sense, places: int) -> list[str]:
    choice = each.state(sense)
    return [str(rounded(choice.value, places)), LETTERS[choice.value.sign()], choice.combination]
