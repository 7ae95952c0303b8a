"""Envelopes: every choice tried one by one, hand checks of what governs, spoilt routes, and what it costs."""

from __future__ import annotations

import itertools
import random
from fractions import Fraction
from typing import Any

import pytest
import trade_trusses as trade
from random_trusses import random_truss
from replay import forces_of

from trusscalc import stiffness
from trusscalc.chains import Chain
from trusscalc.envelopes import Envelope, MemberEnvelope, envelope, furthest
from trusscalc.errors import InputError, UnknownNameError
from trusscalc.exact import ZERO, Exact, rational
from trusscalc.exacttext import number
from trusscalc.governing import governing_case, governing_checks
from trusscalc.loadreport import envelope_data, envelope_text
from trusscalc.loads import Combination, LoadCase
from trusscalc.membercheck import check_members
from trusscalc.trains import MovingLoad, Train
from trusscalc.truss import Truss
from trusscalc.trussfile import TrussFile

ROOF = Truss({"A": (0, 0), "B": (4, 0), "C": (2, 1)}, ["A-B", "A-C", "B-C"], {"A": "pin", "B": "roller"})
CASES = (LoadCase("dead", {"C": (0, -2)}), LoadCase("snow", {"C": (0, -3)}), LoadCase("wind", {"C": (1, 4)}))


def stated(*combinations: Combination, cases: tuple[LoadCase, ...] = CASES, truss: Truss = ROOF) -> TrussFile:
    """Return a file's content."""
    return TrussFile(truss, cases, combinations)


def of(file: TrussFile, member: str) -> MemberEnvelope:
    """Return one member's envelope."""
    return envelope(file, [member]).members[member]


def cases_of(seed: int, joints: list[str], count: int) -> tuple[LoadCase, ...]:
    """Return cases with loads drawn for every joint."""
    draw = random.Random(seed)
    return tuple(
        LoadCase(f"case {place}", {name: (draw.randint(-9, 9), draw.randint(-9, 9)) for name in joints})
        for place in range(count)
    )


class TestBySuperposition:
    """Sums of factored cases."""

    @pytest.mark.parametrize("seed", range(6))
    def test_every_choice_tried_one_by_one_gives_the_same(self, seed: int) -> None:
        """All factors of all pairs with and without all optional cases, each a solution of its own (statics)."""
        drawn = random_truss(random.Random(seed), 7, "surd" if seed % 2 else "rational")
        cases = cases_of(seed, list(drawn.joints), 3)
        pairs: dict[str, Any] = {"case 0": ("1.25", "0.9"), "case 1": "1.5", "case 2": ("1", "-1")}
        both = Combination("both", pairs, optional=["case 1"])
        member = drawn.members[seed % len(drawn.members)]
        forces = {case.name: check_members(drawn.truss, case, [member]).members[member].exact for case in cases}
        tried = []
        for away, *factors in itertools.product((True, False), *(_pair(value) for value in pairs.values())):
            taken = dict(zip(pairs, factors, strict=True))
            tried.append(sum((number(f) * forces[c] for c, f in taken.items() if not (away and c == "case 1")), ZERO))
        found = of(TrussFile(drawn.truss, cases, (both,)), member)
        assert found.max.value == max(tried)
        assert found.min.value == min(tried)

    def test_the_hand_check_of_what_governs_gives_the_same_value(self) -> None:
        """Every governing state, derived by sections and joints."""
        drawn = trade.parker()
        cases = (LoadCase("dead", drawn.loads), LoadCase("side", {"L2": (3, -70), "U3": (1, -4)}))
        file = TrussFile(drawn.truss, cases, (Combination("1", {"dead": ("1.25", "0.9"), "side": "1.75"}),))
        found = envelope(file, "all")
        checks = governing_checks(found)
        assert all(check.agreed for check in checks)
        told = {(member, sense) for check in checks for member, sense in check.members}
        assert told == {(each.member, sense) for each in found.members.values() for sense in each.senses}

    def test_an_independent_solution_of_a_governing_state(self) -> None:
        """The joint equations once more, with none of the library's arithmetic."""
        drawn = trade.pratt(6)
        file = TrussFile(drawn.truss, (LoadCase("dead", drawn.loads),), (Combination("1.4D", {"dead": "1.4"}),))
        found = envelope(file, "all")
        heavier = {name: (x, f"7/5*({y})") for name, (x, y) in drawn.loads.items()}
        values = forces_of(type(drawn)(drawn.joints, drawn.members, drawn.supports, heavier))
        for name, each in found.members.items():
            assert each.max.value == each.min.value
            assert float(each.max.value) == pytest.approx(float(values[name]), abs=1e-12)


def _pair(value: object) -> tuple[object, ...]:
    return value if isinstance(value, tuple) else (value,)


class TestChoices:
    """What a combination leaves open is chosen against the member."""

    def test_the_adverse_factor_of_a_pair_for_each_sense(self) -> None:
        """Of 1.2 and 0.9."""
        found = of(stated(Combination("uplift", {"dead": ("1.2", "0.9"), "wind": 1})), "A-C")
        assert dict(found.min.factors)["dead"] == rational(Fraction(6, 5))
        assert dict(found.max.factors)["dead"] == rational(Fraction(9, 10))

    def test_an_optional_case_stays_away_where_it_helps(self) -> None:
        """Wind that lifts."""
        found = of(stated(Combination("all", {"dead": 1, "wind": 1}, optional=["wind"])), "A-B")
        assert dict(found.max.factors) == {"dead": 1}
        assert dict(found.min.factors) == {"dead": 1, "wind": 1}

    def test_without_the_word_a_case_that_helps_stays(self) -> None:
        """As written."""
        found = of(stated(Combination("all", {"dead": 1, "wind": 1})), "A-B")
        assert dict(found.max.factors) == {"dead": 1, "wind": 1}

    def test_of_equal_combinations_the_first_stated_governs(self) -> None:
        """So that the answer does not depend on anything else."""
        found = of(stated(Combination("one", {"dead": 2}), Combination("two", {"dead": 2})), "A-B")
        assert found.max.combination == "one"
        assert [each.combination for each in found.runners_up("max")] == ["two"]

    def test_runners_up_are_in_order(self) -> None:
        """The nearest to governing first, in either sense."""
        found = of(stated(*(Combination(str(n), {"dead": n}) for n in (2, 4, 1, 3))), "A-B")
        assert found.max.combination == "4"
        assert [each.combination for each in found.runners_up("max")] == ["3", "2", "1"]
        assert [each.combination for each in found.runners_up("min")] == ["2", "3", "4"]

    def test_reversal_means_both_senses_with_force(self) -> None:
        """Zero is no sense."""
        both = (Combination("down", {"dead": 1}), Combination("up", {"wind": 1}))
        assert of(stated(*both), "A-B").reversal
        assert of(stated(*both), "A-B").senses == ("min", "max")
        assert not of(stated(both[0]), "A-B").reversal
        assert of(stated(both[0]), "A-C").senses == ("min",)

    def test_without_combinations_every_case_alone(self) -> None:
        """Under its own name."""
        found = envelope(stated(), ["A-B"])
        assert [each.name for each in found.combinations] == ["dead", "snow", "wind"]
        assert found.members["A-B"].max.combination == "snow"

    def test_nearly_equal_values_are_told_apart_exactly(self) -> None:
        """Floats would call them equal."""
        near = [number("sqrt(2)"), number("sqrt(2) + 1/10^24"), number("sqrt(2)")]
        assert furthest(near, "max") == 1
        assert furthest(near, "min") == 0

    def test_symbols_stand_at_their_values(self) -> None:
        """An envelope compares, so it needs numbers."""
        case = LoadCase("dead", {"C": (0, "-P")}, symbols={"P": 2})
        assert of(stated(Combination("2D", {"dead": 2}), cases=(case,)), "A-B").max.value == 4


class TestMovingLoad:
    """A case that moves takes part in combinations."""

    @staticmethod
    def file(*extra: Combination) -> TrussFile:
        """Return a deck bridge with a two-axle train, a dead load and a combination of both."""
        drawn = trade.pratt(6)
        deck = Chain("deck", tuple(f"L{place}" for place in range(7)))
        pair = Train("pair", (6, 24), (14,), impact="0.33", lane="0.64")
        combination = Combination("1.25D+1.75L", {"dead": ("1.25", "0.9"), "live": "1.75"})
        moving = MovingLoad("live", (pair,), deck)
        cases = (LoadCase("dead", drawn.loads),)
        return TrussFile(drawn.truss, cases, (combination, *extra), chains=(deck,), trains=(pair,), moving=(moving,))

    def test_hand_checks_with_the_train_where_it_governs(self) -> None:
        """Its axles shared to the panel points, derived like any load case."""
        found = envelope(self.file(), "all")
        checks = governing_checks(found)
        assert found.agreed
        assert all(check.agreed for check in checks)
        assert any(choice.stands for check in checks for choice in [check.choice])

    def test_the_moving_load_stays_away_where_it_helps(self) -> None:
        """What remains are the other loads alone."""
        found = envelope(self.file(), ["U2-U3"]).members["U2-U3"]
        assert found.min.stands
        assert not found.max.stands or found.max.stands[0][2].value == 0
        case = governing_case(self.file(), found.max)
        assert [load.fy for load in case.loads] == [rational(Fraction(9, 10)) * -80] * 5

    def test_a_combination_that_moves_is_no_load_case(self) -> None:
        """It has one for every position."""
        with pytest.raises(InputError, match="holds the moving load 'live': ask for its envelope"):
            self.file().case("1.25D+1.75L")
        with pytest.raises(InputError, match="'live' moves"):
            self.file().case("live")

    def test_a_typing_error_in_a_case_name(self) -> None:
        """The moving loads are among the names."""
        with pytest.raises(InputError, match=r"\[combinations.x\] lvie: there is no such case; did you mean live\?"):
            self.file(Combination("x", {"lvie": 1}))


class TestSpoiltRoutes:
    """Proof that a disagreement shows."""

    def test_a_wrong_stiffness_value_is_told(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """One sign turned, under one case."""
        right = stiffness.member_forces

        def wrong(truss: Truss, case: LoadCase) -> dict[str, float]:
            forces = right(truss, case)
            return forces | ({"A-B": -forces["A-B"]} if case.name == "snow" else {})

        monkeypatch.setattr(stiffness, "member_forces", wrong)
        found = envelope(stated(Combination("all", {"dead": 1, "snow": 1})), "all")
        assert not found.agreed
        assert found.differing == (("snow", "A-B"),)

    def test_a_value_that_is_no_number_is_told(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """It must not pass a comparison."""
        monkeypatch.setattr(stiffness, "member_forces", lambda *_: dict.fromkeys(("A-B", "A-C", "B-C"), float("nan")))
        assert not envelope(stated(), ["A-B"]).agreed

    def test_a_hand_check_that_gives_another_value_is_told(self) -> None:
        """An envelope forged by one unit."""
        found = envelope(stated(Combination("all", {"dead": 1})), ["A-B"])
        member = found.members["A-B"]
        forged = type(member.max)("all", member.max.factors, (), member.max.value + 1)
        spoilt = MemberEnvelope("A-B", forged, forged, (forged,), (forged,))
        checks = governing_checks(_with(found, spoilt))
        assert [check.differing for check in checks] == [("A-B",)]
        assert not checks[0].agreed


def _with(found: Envelope, member: MemberEnvelope) -> Envelope:
    fields = {name: getattr(found, name) for name in Envelope.__dataclass_fields__}
    return Envelope(**fields | {"members": {member.member: member}})


class TestUndecided:
    """Indeterminate trusses: what statics decides is given, the rest is named."""

    TRUSS = Truss(
        {"A": (0, 0), "B": (4, 0), "C": (4, 3), "D": (0, 3), "E": (8, 0)},
        ["A-B", "B-C", "C-D", "D-A", "A-C", "B-D", "B-E", "C-E"],
        {"A": "pin", "B": "roller"},
    )

    def test_members_that_statics_does_not_decide_are_named(self) -> None:
        """With no value, and the reason."""
        cases = (LoadCase("lamp", {"E": (0, -3)}),)
        found = envelope(TrussFile(self.TRUSS, cases), ["B-E", "A-C"])
        assert list(found.members) == ["B-E"]
        assert "statically indeterminate" in found.undecided["A-C"]
        assert not found.agreed
        data = envelope_data(found)["members"]
        assert list(data) == ["B-E", "A-C"]
        assert data["A-C"]["max"] == {"exact": None, "decimal": None, "combination": None}
        assert any(line.startswith("A-C: statics alone") for line in envelope_text(found))


class TestRequests:
    """What is asked for."""

    def test_an_unknown_member(self) -> None:
        """Named, with the nearest."""
        with pytest.raises(UnknownNameError, match="did you mean A-C"):
            envelope(stated(), ["A-CC"])

    def test_no_load_cases(self) -> None:
        """There is nothing to envelop."""
        with pytest.raises(InputError, match="no load cases"):
            envelope(TrussFile(ROOF), ["A-B"])

    def test_progress_is_told_and_may_stop_the_work(self) -> None:
        """Cases first, then members."""
        told: list[tuple[int, int, str]] = []
        envelope(stated(), ["A-B", "A-C"], progress=lambda done, of, what: told.append((done, of, what)))
        assert [done for done, *_ in told] == list(range(5))
        assert {of for _, of, _ in told} == {5}

        def stop(done: int, of: int, what: str) -> None:
            raise KeyboardInterrupt(done, of, what)

        with pytest.raises(KeyboardInterrupt):
            envelope(stated(), ["A-B"], progress=stop)


def test_values_are_exact() -> None:
    """Roots stay roots."""
    found = envelope(stated(Combination("all", {"dead": "1.2", "snow": "1.6"})), ["A-C"])
    value = found.members["A-C"].max.value
    assert isinstance(value, Exact)
    assert value == number("-36/5*sqrt(5)/2")
